"""What changes did to the figures: before, after, and the share that each change has in the move."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import inf, isfinite, log, log10
from typing import Any

from polebook.book.compare import Change as Delta
from polebook.book.compare import Way
from polebook.record.mixtures import Cause, Overall

_WHOLE = "overall."
_QUOTED = "gain_at_reference"
_BY_SOURCE = ("gain_db", f"{_QUOTED}_db", "noise_density", "noise_total_input", "largest_source")
_SHARES = ("_percent", "owns_upper", "owns_lower", "yield.got")
_NEPER_DB = log(10.0) / 20.0
LEAST_WHOLE = 0.01  # of what the changes move one at a time, for a share of the whole to mean anything


Numbers = Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure in two chains. name: as `polebook working` takes it, "overall.upper_edge_hz"; it ends in its unit."""

    name: str
    delta: Delta

    @property
    def size(self) -> float:
        """How much it moved, to rank it among others: nepers, for shares the change of the share; more than any
        number for one that came or went."""
        if not self.delta.moved:
            return 0.0
        move = moved(self.delta.before, self.delta.after, self.delta.way)
        return inf if move is None else abs(move) * (_NEPER_DB if self.delta.way == "difference" else 1.0)


@dataclass(frozen=True, slots=True)
class Part:
    """What one cause has in the move of a figure.

    alone    the figure of the earlier file with this cause alone;  without  of the later file with all but it
    share    of the move of the whole, a share of one: the mean of what it moves first and what it moves last. None
             where it has none, or the whole stands still
    """

    alone: float | None
    without: float | None
    share: float | None


@dataclass(frozen=True, slots=True)
class Shared:
    """The move of a figure, cause by cause.

    added    what the moves of the causes, one at a time, come to when added, as a share of the move of the whole:
             what is missing to 1 they do to each other
    rest     what the shares leave of 1
    """

    figure: Figure
    parts: tuple[Part, ...]
    added: float | None
    rest: float | None


def way(name: str) -> Way:
    """How a figure's change is told, by the unit that its name ends in."""
    return "difference" if name.endswith("_db") else "points" if name.endswith(_SHARES) else "ratio"


def moved(before: float | None, after: float | None, way: Way) -> float | None:
    """The move on a scale on which moves add: dB, the change of a share, nepers. None where there is none."""
    if before is None or after is None or not (isfinite(before) and isfinite(after)):
        return None
    if way != "ratio":
        return (after - before) * (0.01 if way == "points" else 1.0)
    if before == after:
        return 0.0
    return log(after / before) if before * after > 0.0 else None


def ranked(before: Numbers, after: Numbers) -> tuple[Figure, ...]:
    """Every figure that either has, the largest move first."""
    found = [Figure(name, Delta(before.get(name), after.get(name), way(name))) for name in
             dict.fromkeys((*after, *before))]
    return tuple(sorted(found, key=lambda one: one.size, reverse=True))


def comparable(before: Overall, after: Overall) -> tuple[dict[str, float], dict[str, float]]:
    """The figures of both; without those that are in other units where one has a source of voltage, one of current."""
    both = of_overall(before), of_overall(after)
    if before["gain_unit"] != after["gain_unit"]:
        for side in both:
            for key in _BY_SOURCE:
                side.pop(f"{_WHOLE}{key}", None)
    return both


def of_overall(overall: Overall) -> dict[str, float]:
    """The figures of the whole chain that have a size, by their full names; gains in dB."""
    found = {f"{_WHOLE}{key}": float(value) for key, value in overall.items()
             if isinstance(value, int | float) and not isinstance(value, bool) and key != "gain"}
    if gain := found.pop(f"{_WHOLE}{_QUOTED}", None):
        found[f"{_WHOLE}{_QUOTED}_db"] = 20.0 * log10(gain)
    return found


def shared(figure: Figure, causes: Sequence[Cause]) -> Shared:
    """How the move of a figure is shared among its causes."""
    before, after, way = figure.delta.before, figure.delta.after, figure.delta.way
    whole = moved(before, after, way)
    ends = [(_of(cause.alone, figure.name), _of(cause.without, figure.name)) for cause in causes]
    firsts = [moved(before, alone, way) for alone, _ in ends]
    lasts = [moved(without, after, way) for _, without in ends]
    told = sum(abs(move) for move in firsts if move is not None)
    if whole is None or not figure.delta.moved or abs(whole) < LEAST_WHOLE * told:
        return Shared(figure, tuple(Part(*end, None) for end in ends), None, None)
    shares = [None if first is None or last is None else (first + last) / 2.0 / whole
              for first, last in zip(firsts, lasts, strict=True)]
    added = None if None in firsts else sum(move for move in firsts if move is not None) / whole
    rest = None if None in shares else 1.0 - sum(share for share in shares if share is not None)
    return Shared(figure, tuple(Part(*end, share) for end, share in zip(ends, shares, strict=True)), added, rest)


def document(one: Shared) -> Mapping[str, Any]:
    """As plain data."""
    return {"name": one.figure.name, "before": one.figure.delta.before, "after": one.figure.delta.after,
            "causes": [{"alone": part.alone, "without": part.without, "share": part.share} for part in one.parts],
            "added": one.added, "rest": one.rest}


def _of(overall: Overall | None, name: str) -> float | None:
    return None if overall is None else of_overall(overall).get(name)
