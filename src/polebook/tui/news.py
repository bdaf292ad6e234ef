"""What a process that works for a page says: how far it is, what came of it so far, and how it ended."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Literal, TypeAlias

from polebook.plan.wire import Garbled, Message, made, many, maybe, several, whole, word
from polebook.problem import Place, Problem

Step: TypeAlias = tuple[int, int, Any]  # done, total, a piece of what it comes to or None
News: TypeAlias = (tuple[Literal["step"], Step] | tuple[Literal["end"], None] |
                   tuple[Literal["problems"], tuple[Problem, ...]] | tuple[Literal["fault", "gone"], str])

_PLACE = made(Place, file=word, line=whole, column=whole, width=whole)
problem = made(Problem, place=maybe(_PLACE), what=word, why=word, fix=word, severity=word)


def news(said: Message, piece: Callable[[Any], Any]) -> News:
    """A message of such a process; `piece` takes what a step has. Raises Garbled."""
    if said.kind == "step":
        done, total, found = several(whole, whole, maybe(piece))(said.body)
        return "step", (done, total, found)
    if said.kind == "end":
        return "end", None
    if said.kind == "problems":
        return "problems", many(problem)(said.body)
    if said.kind == "fault":
        return "fault", word(said.body)
    raise Garbled("a message of no known kind came")
