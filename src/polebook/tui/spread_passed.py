"""What the app and the process that computes its spreads say to each other beside `news`, checked piece by piece."""

from __future__ import annotations

from typing import Any

import numpy as np

from polebook.chain.model import Chain
from polebook.plan.passed import taken
from polebook.plan.spread.statistics import Share, Statistics
from polebook.plan.wire import Message, by_name, flag, made, many, maybe, number, of_names, several, whole, word
from polebook.tui.news import problem
from polebook.tui.spreads import Figure, Heap, Row, Told, Worst

_ASKED = of_names(chain=taken, builds=whole, seed=whole)


def asked(said: Message) -> tuple[Chain, int, int]:
    """(chain, builds, seed) of a run. Raises Garbled, ProblemsFound."""
    chain, builds, seed = _ASKED(said.body)
    return chain, builds, seed


def _limits(given: Any) -> tuple[float | None, float | None] | tuple[()]:
    if given == []:
        return ()
    least, most = several(maybe(number), maybe(number))(given)
    return least, most


def _counts(given: Any) -> Any:
    return np.array(many(whole)(given), dtype=np.int64)


_SHARE = made(Share, share=number, low=number, high=number)
_STATISTICS = made(Statistics, builds=whole, mean=number, deviation=maybe(number), percentiles=by_name(number),
                   least=number, greatest=number)
_HEAP = made(Heap, low=number, high=number, counts=_counts, below=whole, above=whole)
_WORST = made(Worst, side=word, value=maybe(number), why=word, beyond=whole)
_FIGURE = made(Figure, name=word, target=word, unit=word, nominal=maybe(number), linear=maybe(number),
               statistics=maybe(_STATISTICS), heap=maybe(_HEAP), limits=_limits, worst=many(_WORST))
_ROW = made(Row, name=word, path=word, label=word, sort=word, reach=number, half=maybe(number), none=maybe(number),
            solved=flag, shares=by_name(number), ends=by_name(whole))
told = made(Told, builds=whole, seed=whole, done=whole, figures=many(_FIGURE), rows=many(_ROW), dear=flag,
            yields=by_name(_SHARE), unjudged=many(word), failures=by_name(whole), outside=by_name(whole),
            cautions=many(problem), seconds=number, complete=flag)
