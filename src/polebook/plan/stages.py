"""How many stages: gain and band of n like ones between a file's source and load, and n for a wanted gain."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from dataclasses import asdict, dataclass, replace
from math import exp, log, log10, pi, sqrt
from typing import Any

from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.book.solution import Solution
from polebook.chain.model import Chain
from polebook.circuit.bias_region import KEPT
from polebook.formula import Formula
from polebook.plan.like_stages import Like, copies, like
from polebook.plan.sweep import UNSOLVED
from polebook.problem import ProblemsFound
from polebook.solve.edges import HALF_POWER
from polebook.solve.fold import fold
from polebook.solve.root import bracketed_root

FORMULAS = (
    Formula("stages.law_upper_hz", "f_1·sqrt(2^(1/n) - 1), f_1 the upper edge of one stage",
            "P. R. Gray, P. J. Hurst, S. H. Lewis and R. G. Meyer, Analysis and Design of Analog Integrated Circuits, "
            "5th ed., eq. 7.128 (n = 2)"),
    Formula("stages.law_lower_hz", "f_1/sqrt(2^(1/n) - 1), f_1 the lower edge of one stage", "as the upper edge"),
    Formula("stages.optimum", "n = 2·ln G stages of gain sqrt e each, for like one-pole stages whose gain times "
                              "bandwidth stands still",
            "T. H. Lee, The Design of CMOS Radio-Frequency Integrated Circuits (recalled, not seen)"),
)
OPTIMUM_GAIN = sqrt(exp(1.0))
MOST, MOST_ALLOWED = 8, 24
_WIDEST = 14  # powers of two that the scaled key may move either way
_PROBE = 0.01  # of ln(key): tells which way the gain goes


@dataclass(frozen=True, slots=True)
class Row:
    """n copies (SI units; None for what there is not).

    wanted      whether the key is scaled for the wanted gain; `value` is then its value
    stage_gain  the n-th root of what the copies make together, V/V
    law_*       what n like stages, each behind a buffer, would have, from the edges of one between source and load
    inner_upper_hz  the same from the pole of one between others like it
    gain_band   |gain| times upper edge
    why         why a figure is missing or not to be trusted
    """

    count: int
    wanted: bool
    value: float | None = None
    gain: float | None = None
    stage_gain: float | None = None
    lower_hz: float | None = None
    upper_hz: float | None = None
    law_lower_hz: float | None = None
    law_upper_hz: float | None = None
    inner_upper_hz: float | None = None
    gain_band: float | None = None
    why: str = ""


@dataclass(frozen=True, slots=True)
class Study:
    """What is asked, and what one copy does.

    want   V/V or V/A, the total gain to be made with every number of stages; None for none
    one    alone between source and load
    inner  (gain, V/V, pole in Hz) between two others: from their input to its own output; None where it has no pole
    """

    of: Like
    most: int
    want: float | None
    one: Row
    inner: tuple[float, float] | None

    @property
    def to_make(self) -> float | None:
        """V/V that the stages must make of `want`: without what the source line takes ahead of one of them."""
        if self.want is None or not self.one.gain or not self.one.stage_gain:
            return None
        return self.want * self.one.stage_gain / abs(self.one.gain)

    @property
    def unit_bands(self) -> tuple[float | None, float | None]:
        """Gain times bandwidth of one stage as the file has it, Hz: alone, and between others like it."""
        alone = self.one.stage_gain * self.one.upper_hz if self.one.stage_gain and self.one.upper_hz else None
        return alone, self.inner[0] * self.inner[1] if self.inner else None


def study(chain: Chain, name: str, most: int = MOST, want: float | None = None, by: str = "") -> Study:
    """Copies 1 to `most` of the stage `name`. Raises ProblemsFound as `like` does."""
    of = like(chain, name, by)
    return Study(of, most, want if of.by else None, _measured(of, 1, 1.0, False), _inner(of))


def shrinkage(count: int) -> float:
    """Edge of `count` like one-pole stages over that of one."""
    return sqrt(2.0 ** (1.0 / count) - 1.0)


def law_band(unit_band: float, gain: float, count: int) -> float:
    """Hz of `count` like one-pole stages that make `gain` together, each of gain times bandwidth `unit_band`."""
    return float(unit_band * gain ** (-1.0 / count) * shrinkage(count))


def law_best(gain: float, most: int) -> int:
    """How many of up to `most` like one-pole stages make `gain` with the greatest bandwidth."""
    return max(range(1, most + 1), key=lambda count: law_band(1.0, gain, count))


def steps(of: Study, stop: Callable[[], bool] = lambda: False) -> Iterator[tuple[int, int, Row]]:
    """(done, total, row): 1 to most copies as they are, then as many scaled for the wanted gain."""
    total = of.most * (1 if of.want is None else 2)
    for at in range(total):
        if stop():
            return
        count = at % of.most + 1
        if at >= of.most:
            row = _for_gain(of, count)
        else:
            row = of.one if count == 1 else _measured(of.of, count, 1.0, False)
            row = _with_law(of, row)
        yield at + 1, total, row


def best(rows: Sequence[Row]) -> Row | None:
    """The row for the wanted gain with the greatest bandwidth whose figures can be trusted."""
    good = [row for row in rows if row.wanted and row.upper_hz is not None and not row.why]
    return max(good, key=lambda row: row.upper_hz or 0.0, default=None)


def document(of: Study, rows: Sequence[Row]) -> dict[str, Any]:
    """The answer as plain data, SI units at full precision."""
    found, make = best(rows), of.to_make
    wanted = None
    if of.want is not None:
        wanted = {
            "gain": of.want, "gain_db": 20 * log10(of.want), "to_make": make,
            "optimum_stages": 2 * log(make) if make and make > 1 else None, "optimum_stage_gain": OPTIMUM_GAIN,
            "best_by_law": law_best(make, MOST_ALLOWED * 2) if make and make > 1 else None,
            "best": found.count if found else None,
            "rows": [_told(row) for row in rows if row.wanted],
        }
    return {
        "template": of.of.name, "kind": of.of.stage.kind, "most": of.most, "notes": list(of.of.notes),
        "gain_unit": "V/V" if of.of.chain.source_kind == "voltage" else "V/A",
        "inner_gain": of.inner[0] if of.inner else None, "inner_pole_hz": of.inner[1] if of.inner else None,
        "by": of.of.by or None, "by_unit": of.of.unit, "by_now": of.of.now, "why_no_gain": of.of.why_not or None,
        "rows": [_told(row) for row in rows if not row.wanted], "wanted": wanted,
    }


def _told(row: Row) -> dict[str, Any]:
    told = asdict(row)
    del told["wanted"]
    return {**told, "gain_db": 20 * log10(abs(row.gain)) if row.gain else None,
            "stage_gain_db": 20 * log10(row.stage_gain) if row.stage_gain else None, "why": row.why or None}


def _measured(of: Like, count: int, factor: float, wanted: bool) -> Row:
    """The ledger's figures of `count` copies."""
    value = of.now * factor if wanted and of.now else None
    chain = copies(of, count, factor)
    try:
        book = ledger(chain)
        with within_reach(chain):
            gain, upper = book.solution.gain, book.upper_hz
            made = abs(gain / book.solution.gains[0] / book.solution.gains[-1])
            return Row(count, wanted, value, gain, made ** (1.0 / count), book.lower_hz, upper,
                       gain_band=None if upper is None else abs(gain) * upper, why=_why(book))
    except ProblemsFound as found:
        return Row(count, wanted, value, why="; ".join(problem.what for problem in found.problems))


def _inner(of: Like) -> tuple[float, float] | None:
    """What the second of three copies does between the others, the lower end of the band left away."""
    try:
        solution = Solution(copies(of, 3))
        with within_reach(of.chain):
            gain, net, hz = abs(solution.gains[2]), solution.circuit.network, solution.sweep.hz
    except ProblemsFound:
        return None

    def spare(x: float) -> float:
        return log(abs(fold(net, 2j * pi * exp(x), "upper").gains[2]) / gain) - HALF_POWER

    x = log(float(hz[0]))
    for to in (log(one) for one in hz[1:].tolist()):
        if spare(to) < 0.0:
            return gain, exp(bracketed_root(spare, x, to, spare(x), spare(to)))
        x = to
    return None


def _why(book: Ledger) -> str:
    """Why edges are missing, and what the copies do that their law does not hold for."""
    points = book.solution.circuit.points
    told = []
    if unsolved := [name for name, point in points.items() if not point.converged]:
        told.append(UNSOLVED.format(", ".join(unsolved)))
    if book.unstable:
        told.append("unstable")
    elif not book.judged:
        told.append("stability can't be told")
    elif not book.solution.band.clean:
        told.append("no clean midband")
    return "; ".join([*told, *_odd(book)])


def _odd(book: Ledger) -> Iterator[str]:
    """Who has left the region of its law; told once where all have."""
    found: dict[str, list[str]] = {}
    names = [stage.name for stage in book.chain.stages]
    whole = re.compile(rf"(?<![\w-])(?:{'|'.join(map(re.escape, names))})(?![\w-])")
    for problem in book.cautions:
        if problem.why == KEPT:
            what = re.split("[:,]", problem.what)[0]
            found.setdefault(whole.sub("each copy", what), []).append(what)
    for alike, each in found.items():
        yield alike if len(each) == len(names) > 1 else "; ".join(each)


def _with_law(of: Study, row: Row) -> Row:
    one, shrunk = of.one, shrinkage(row.count)
    return replace(row, inner_upper_hz=of.inner[1] * shrunk if of.inner else None,
                   law_upper_hz=None if one.upper_hz is None else one.upper_hz * shrunk,
                   law_lower_hz=None if one.lower_hz is None else one.lower_hz / shrunk)


def _for_gain(of: Study, count: int) -> Row:
    """`count` copies with the key scaled, the same in all, so that the chain has the wanted gain."""
    assert of.want is not None
    make = of.to_make
    alone, inner = (law_band(unit, make, count) if make and unit else None for unit in of.unit_bands)
    found = _factor(of.of, count, of.want)
    if isinstance(found, str):
        return Row(count, True, law_upper_hz=alone, inner_upper_hz=inner, why=found)
    return replace(_measured(of.of, count, found, True), law_upper_hz=alone, inner_upper_hz=inner)


def _factor(of: Like, count: int, want: float) -> float | str:
    """The factor next to 1 that makes the gain, or why there is none."""
    def off(x: float) -> float | None:
        try:
            return log(abs(Solution(copies(of, count, exp(x))).gain) / want)
        except ProblemsFound:
            return None

    here, beside = off(0.0), off(_PROBE)
    if here is None or beside is None:
        return "it has no gain that could be scaled"
    if abs(beside - here) < 1e-9:
        return f"its gain does not move with {of.by}"
    toward = 1.0 if (beside > here) == (here < 0) else -1.0
    reached = [here]
    for direction in (toward, -toward):
        x, y = 0.0, here
        for _ in range(_WIDEST):
            to = x + direction * log(2.0)
            value = off(to)
            if value is None:
                break
            if (value > 0) != (y > 0) or value == 0.0:
                return exp(bracketed_root(lambda one: off(one) or 0.0, x, to, y, value, 1e-12))
            x, y = to, value
            reached.append(value)
    nearest = min(reached, key=abs)
    side = "at most" if nearest < 0 else "at least"
    return f"with any {of.by} it makes {side} {20 * log10(want) + nearest * 20 / log(10):.1f} dB"
