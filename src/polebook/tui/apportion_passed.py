"""What the app and the process that seeks its plans say to each other beside `news`, checked piece by piece."""

from __future__ import annotations

from typing import Any

from polebook.plan.wire import (
    Garbled,
    Message,
    anything,
    by_name,
    flag,
    many,
    maybe,
    number,
    of_names,
    several,
    whole,
    word,
)

STOP = "stop"  # kind of the message that is said in the midst of a run

_ASKED = of_names(text=word, file=word, free=many(word), favour=word, seed=whole)
_FIGURE = of_names(got=maybe(number), margin=maybe(number), met=maybe(flag), why=maybe(word))
_KEY = of_names(path=word, unit=word, now=maybe(number), now_text=maybe(word), value=maybe(number), text=maybe(word),
                moved=flag)
_GIVEN = of_names(target=word, want=number, got=number)
_HELD = of_names(path=word, value=number, bound=word, target=word, leverage=number)
_LEVER = of_names(path=word, target=word, leverage=number)
_TOLD = of_names(
    file=word, free=of_names(**{"from": word, "keys": many(word)}), favour=maybe(word), seed=whole, starts=whole,
    trials=whole, stopped=flag, keys=many(_KEY),
    targets=many(of_names(name=word, want=maybe(number), before=_FIGURE, after=_FIGURE)),
    overall=of_names(before=by_name(anything), after=by_name(anything)), cautions=many(word), mended=many(word),
    met=flag, gives=many(_GIVEN), held=many(_HELD), levers=many(_LEVER), notes=many(word), written=flag)
_PLAN = of_names(told=_TOLD, label=word, splices=many(several(whole, word, word)))
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
    _, label, splices = _PLAN(given)
    return {"told": given["told"], "label": label, "splices": splices}
