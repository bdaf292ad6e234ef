"""What the app and the process that seeks its plans say to each other beside `news`, checked piece by piece."""

from __future__ import annotations

from typing import Any

from polebook.plan.wire import Garbled, Message, by_name, flag, many, maybe, number, of_names, several, whole, word

STOP = "stop"  # kind of the message that is said in the midst of a run

_ASKED = of_names(text=word, file=word, free=many(word), favour=word, seed=whole)
_PLAN = of_names(told=by_name(lambda of: of), label=word, splices=many(several(whole, word, word)))
_REACHED = of_names(reached=many(several(word, maybe(number), maybe(flag))))
_PROBLEMS = of_names(problems=many(several(word, word, word)))


def asked(said: Message) -> dict[str, Any]:
    """What a run is asked, as `apportion_work.steps` takes it. Raises Garbled."""
    names = ("text", "file", "free", "favour", "seed")
    return dict(zip(names, _ASKED(said.body), strict=True))


def piece(given: Any) -> dict[str, Any]:
    """A piece of what `apportion_work.steps` comes to. Raises Garbled."""
    if type(given) is not dict:
        raise Garbled("a piece of a plan was due")
    if "reached" in given:
        return {"reached": _REACHED(given)[0]}
    if "problems" in given:
        return {"problems": _PROBLEMS(given)[0]}
    told, label, splices = _PLAN(given)
    return {"told": told, "label": label, "splices": splices}
