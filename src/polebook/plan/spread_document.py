"""What a spread came to as plain data: what `polebook spread --json` gives and its report draws from."""

from __future__ import annotations

from collections.abc import Iterator
from math import log10
from typing import Any

import numpy as np

from polebook.book.targets import TOLERANCE_DB
from polebook.chain.model import Chain
from polebook.plan.spread.corner import Corner
from polebook.plan.spread.draws import Draw
from polebook.plan.spread.figures import Figure
from polebook.plan.spread.judge import judged, met
from polebook.plan.spread.model import Result
from polebook.plan.spread.states import GOOD, KEYS, WORDS
from polebook.plan.spread.statistics import PERCENTILES, Share

AT_A_TIME = 4096  # builds that are held as plain numbers
BINS = 60  # of a histogram
NEAR = 1.0  # a target that lies off by no more than so many widths of the histogram is within it


def document(of: Result, temperature: tuple[float, float] | None) -> dict[str, Any]:
    """Everything below the head of the answer; SI units, dB where a key says so, None where a figure does not apply.

    temperature  as it was asked for, °C

    "builds" is how many were done, "asked" how many there were to be. "yield" has no key without a target that every
    build is judged by. "costs" is None where they were not found: no such target, or called off before.
    """
    request, shares = of.request, of.yields()
    chain = request.chain
    return {
        "builds": of.done, "asked": request.builds, "seed": request.seed, "stopped": not of.complete,
        "temperature": list(temperature) if temperature else None, "shape": chain.spread_shape,
        "gain_unit": "V/V" if chain.source_kind == "voltage" else "V/A",
        "reference_hz": chain.get("target.reference"),
        "figures": {figure.name: _figure(of, figure) for figure in of.figures},
        "yield": {name: share(one) for name, one in shares.shares.items()},
        "targets": _targets(of), "wanted": chain.get("target.yield"), "unjudged": list(shares.unjudged),
        "states": {"good": int((of.state == GOOD).sum()), **of.failures()}, "outside": dict(of.outside),
        "corner": _corners(of),
        "costs": [{"part": cost.draw.name, "yield_gain": cost.yield_gain, "at_none": cost.at_none,
                   "tolerance": cost.draw.share, "sort": cost.draw.sort, "solved": cost.solved, "builds": cost.builds}
                  for cost in of.costs] if of.costs or (of.complete and shares.shares) else None,
        "draws": [_draw(of, draw) for draw in of.draws],
        "cautions": [f"{problem.what}: {problem.why}; {problem.fix}" for problem in of.cautions],
    }


def share(one: Share) -> dict[str, float]:
    """A yield with the ends of its 95 % interval."""
    return {"share": one.share, "low": one.low, "high": one.high}


def rows(of: Result) -> Iterator[list[int | float | str]]:
    """Every build: its number from 1 on, its figures (NaN for none), what became of it in words."""
    for first in range(0, of.done, AT_A_TIME):
        part = slice(first, first + AT_A_TIME)
        states = [WORDS[state] for state in of.state[part].tolist()]
        figures = [of.columns[figure.name][part].tolist() for figure in of.figures]
        for number, *told in zip(range(first + 1, first + 1 + len(states)), *figures, states, strict=True):
            yield [number, *told]


def _figure(of: Result, figure: Figure) -> dict[str, Any]:
    """Statistics of the builds that have the figure, beside the chain's own and what leverage makes of the spread."""
    told = of.statistics(figure.name)
    target, ends = _ends(of, figure)
    unit = "dBΩ" if figure.target == "gain" and of.request.chain.source_kind != "voltage" else figure.unit
    if told is None:
        found: dict[str, Any] = {"builds": 0, "mean": None, "deviation": None,
                                 "percentiles": dict.fromkeys(PERCENTILES), "least": None, "greatest": None}
        chart = None
    else:
        low, high = (told.percentiles[end] for end in (PERCENTILES[0], PERCENTILES[-1]))
        reach = NEAR * (high - low)
        chart = of.histogram(figure.name, BINS, [end for end in ends if low - reach <= end <= high + reach])
        found = {"builds": told.builds, "mean": told.mean, "deviation": told.deviation,
                 "percentiles": dict(told.percentiles), "least": told.least, "greatest": told.greatest}
    bins = None if chart is None else {
        "from": float(chart.edges[0]), "to": float(chart.edges[-1]), "counts": chart.counts.tolist(),
        "below": chart.below, "above": chart.above}
    return {"unit": unit, **found, "nominal": of.nominal[figure.name], "linear_deviation": of.linear.get(figure.name),
            "target": target, "limits": ends, "histogram": bins}


def _ends(of: Result, figure: Figure) -> tuple[str | None, list[float]]:
    """(target that the figure is judged by, where that ends, in the figure's unit); (None, []) where it has none."""
    chain = of.request.chain
    if judged(chain, of.figures).get(figure.target) is not figure:
        return None, []
    want = chain.numbers[f"target.{figure.target}"]
    if figure.target != "gain":
        return figure.target, [want]
    off = chain.get("target.gain_tolerance", TOLERANCE_DB) or TOLERANCE_DB
    return figure.target, [20.0 * log10(want) - off, 20.0 * log10(want) + off]


def _targets(of: Result) -> list[dict[str, Any]]:
    """The targets that every build was judged by: how many builds miss each, and whether the chain itself does."""
    chain, found = of.request.chain, []
    for target, figure in judged(chain, of.figures).items():
        nominal, meeting = of.nominal[figure.name], met(chain, target, of.columns[figure.name], of.state)
        found.append({"name": target, "figure": figure.name, "want": chain.numbers[f"target.{target}"],
                      "missed": int(meeting.size - meeting.sum()),
                      "nominal_met": None if nominal is None else _meets(chain, target, nominal, GOOD)})
    return found


def _meets(chain: Chain, target: str, value: float | None, state: int) -> bool:
    """Whether one chain meets a target."""
    column = np.array([np.nan if value is None else value])
    return bool(met(chain, target, column, np.array([state], dtype=np.int8))[0])


def _corners(of: Result) -> dict[str, dict[str, Any]]:
    found: dict[str, dict[str, Any]] = {}
    for corner in of.corners:
        found.setdefault(corner.figure, {})[corner.side] = _corner(of, corner)
    return found


def _corner(of: Result, corner: Corner) -> dict[str, Any]:
    """met is None without a target for the figure."""
    chain = of.request.chain
    target = next((name for name, figure in judged(chain, of.figures).items() if figure.name == corner.figure), "")
    meets = _meets(chain, target, corner.value, corner.state) if target else None
    return {"value": corner.value, "state": KEYS.get(corner.state, "good"), "linear": corner.linear, "met": meets,
            "beyond": of.beyond(corner), "signs": dict(corner.signs), "turned": list(corner.turned)}


def _draw(of: Result, draw: Draw) -> dict[str, Any]:
    """What is off: its reach (°C of a temperature, else a share), and its share of each figure's variance."""
    return {"part": draw.name, "sort": draw.sort, "tolerance": draw.share, "numbers": list(draw.numbers),
            "variance": {name: shares.get(draw.name) for name, shares in of.shares.items()}}
