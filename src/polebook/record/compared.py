"""Benches against the plan: planned, measured, difference, and whether the tolerances of the parts explain it.

Explained: of the chains that a spread builds, at least 1 % lie on either side of the measured value. What the
measurement itself may be off is not in it.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from math import log10
from typing import Any

import numpy as np

from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Bench, Chain
from polebook.plan.pacing import paced
from polebook.plan.spread.figures import figures, judging
from polebook.plan.spread.model import BUILDS, SEED, Request, Result
from polebook.plan.spread.run import spread
from polebook.record.bench import Overlay, measured, overlay, there
from polebook.record.sweeps.sweep import Array, Sweep
from polebook.record.transfer import off_db, off_degrees, transfer

WITHIN = (1.0, 99.0)  # percentiles of the built chains between which a measured value is explained
MEASURED = ("gain", "lower", "upper")
_NOUNS = {"gain": "gain", "lower": "lower edge", "upper": "upper edge"}
_OSCILLATES = "the chain as filed is not stable"


@dataclass(frozen=True, slots=True)
class Row:
    """One figure of a bench.

    name        "gain" (dB), "lower", "upper" (Hz)
    difference  measured less planned, in the unit;  relative  of an edge: that over the planned one
    builds      how many built chains have the figure;  percentile  share of them below the measured value, in %
    low, high   the percentiles `WITHIN` of them
    explained   None where that can't be told: `why` says why
    """

    name: str
    unit: str
    measured: float
    planned: float | None
    difference: float | None = None
    relative: float | None = None
    builds: int = 0
    percentile: float | None = None
    low: float | None = None
    high: float | None = None
    explained: bool | None = None
    why: str = ""


@dataclass(frozen=True, slots=True)
class Off:
    """How far a sweep is from the plan, in dB or degrees. mean: of measured less planned; rms: about 0, not the mean.

    greatest  the largest difference, signed, and where it is
    """

    mean: float
    rms: float
    greatest: float
    greatest_hz: float


@dataclass(frozen=True, slots=True, eq=False)
class Compared:
    """A bench against the plan. overlay: of its sweep, None without one; gain, phase: None where they can't be told."""

    bench: Bench
    rows: tuple[Row, ...]
    overlay: Overlay | None = None
    gain: Off | None = None
    phase: Off | None = None
    why: str = ""


def compared(chain: Chain, folder: str, builds: int | None = None, seed: int = SEED,
             stop: Callable[[], bool] = lambda: False) -> Iterator[tuple[int, int, tuple[Compared, ...]]]:
    """(done, total, benches so far), done and total in built chains; `builds` of them for each place of measurement.

    None: as many as a spread makes unasked, fewer where they have to be judged one by one. Raises ProblemsFound where
    the file has no bench or the chain no ledger; a sweep that can't be read is told in its overlay.
    """
    there(chain)
    wanted = {bench.at: bench for bench in chain.benches if _asked(chain, bench)}
    total, done = (BUILDS if builds is None else builds) * len(wanted), 0
    spreads: dict[str, Result] = {}
    with within_reach(chain):
        for at in wanted:
            names = {name for bench in chain.benches if bench.at == at for name in _asked(chain, bench)}
            before = done
            for made, _, result in _spread(measured(chain, wanted[at]), names, builds, seed, stop):
                spreads[at], done = result, before + made
                yield done, total, ()
        yield total, total, tuple(_compared(chain, bench, folder, spreads.get(bench.at)) for bench in chain.benches)


def _asked(chain: Chain, bench: Bench) -> list[str]:
    return [name for name in MEASURED if f"bench.{bench.number}.{name}" in chain.numbers]


def _spread(chain: Chain, names: set[str], builds: int | None, seed: int,
            stop: Callable[[], bool]) -> Iterator[tuple[int, int, Result]]:
    own = judging(figures(chain))
    request, quick = paced(Request(chain, BUILDS if builds is None else builds, seed, corners=False, costs=False,
                                   figures=tuple(own[name].name for name in MEASURED if name in names)), stop)
    yield from spread(request if builds is not None else replace(request, builds=quick), stop)


def _compared(chain: Chain, bench: Bench, folder: str, built: Result | None) -> Compared:
    """One bench, once its builds are there."""
    names = _asked(chain, bench)
    of = ledger(measured(chain, bench)) if names else None
    rows = tuple(_row(of, name, chain.numbers[f"bench.{bench.number}.{name}"], built) for name in names
                 if of is not None)
    if not bench.file:
        return Compared(bench, rows)
    found = overlay(chain, bench, folder)
    if found.sweep is None:
        return Compared(bench, rows, found)
    of = ledger(measured(chain, bench, found.sweep.reference_ohm))
    if not of.judged:
        return Compared(bench, rows, found, why=_OSCILLATES)
    planned = transfer(of.solution.circuit, found.sweep.hz)
    if not np.isfinite(planned).any():
        return Compared(bench, rows, found, why="the chain as filed passes nothing at these frequencies")
    gain = off(found.sweep.hz, off_db(found.sweep.gain_db, planned))
    degrees = found.sweep.degrees
    return Compared(bench, rows, found, gain,
                    None if degrees is None else off(found.sweep.hz, off_degrees(degrees, planned)))


def off(hz: Array, differences: Array) -> Off:
    """What differences at hz come to; those that are no number are left away."""
    kept = np.isfinite(differences)
    hz, differences = hz[kept], differences[kept]
    at = int(np.argmax(np.abs(differences)))
    return Off(float(differences.mean()), float(np.sqrt(np.square(differences).mean())), float(differences[at]),
               float(hz[at]))


def _row(of: Ledger, name: str, value: float, built: Result | None) -> Row:
    figure = judging(figures(of.chain))[name]
    if not figure.ratio:
        value = 20.0 * log10(abs(value))
    planned = figure.single(of) if of.judged else None
    if planned is None:
        why = _OSCILLATES if not of.judged else f"the chain as filed has no {_NOUNS[name]}"
        return Row(name, figure.unit, value, None, why=why)
    row = Row(name, figure.unit, value, planned, value - planned, value / planned - 1.0 if figure.ratio else None)
    column = np.zeros(0) if built is None else built.columns[figure.name]
    column = column[~np.isnan(column)]
    if built is None or not built.draws:
        return replace(row, why="nothing spreads: every tolerance of the chain is 0")
    if not column.size:
        return replace(row, why=f"no built chain has a {_NOUNS[name]}")
    below, same = np.count_nonzero(column < value), np.count_nonzero(column == value)
    percentile = 100.0 * float(below + 0.5 * same) / column.size
    low, high = np.percentile(column, WITHIN).tolist()
    return replace(row, builds=int(column.size), percentile=percentile, low=low, high=high,
                   explained=WITHIN[0] <= percentile <= WITHIN[1])


def document(one: Compared) -> dict[str, Any]:
    """A bench as plain data."""
    bench = one.bench
    return {
        "bench": bench.number, "unit": bench.unit or None, "date": bench.date or None, "at": bench.at or None,
        "note": bench.note or None,
        "figures": [{"name": row.name, "unit": row.unit, "planned": row.planned, "measured": row.measured,
                     "difference": row.difference, "relative": row.relative, "builds": row.builds,
                     "percentile": row.percentile, "low": row.low, "high": row.high, "explained": row.explained,
                     "why": row.why or None} for row in one.rows],
        "sweep": None if one.overlay is None else _of_sweep(one, one.overlay),
    }


def _of_sweep(one: Compared, found: Overlay) -> dict[str, Any]:
    fault = found.problems[0] if found.problems else None
    return {
        "file": one.bench.file, **told(found.sweep, found.apart),
        "gain": as_data(one.gain), "phase": as_data(one.phase),
        "why": one.why or (f"{fault.what}: {fault.why}" if fault else None),
    }


def told(sweep: Sweep | None, apart: str) -> dict[str, Any]:
    """What a sweep is, as plain data; all null where it could not be read."""
    return {
        "points": None if sweep is None else int(sweep.hz.size),
        "from_hz": None if sweep is None else float(sweep.hz[0]),
        "to_hz": None if sweep is None else float(sweep.hz[-1]),
        "reference_ohm": None if sweep is None else sweep.reference_ohm,
        "notes": [] if sweep is None else [*sweep.notes, *([apart] if apart else [])],
    }


def as_data(of: Off | None) -> dict[str, Any] | None:
    """As plain data."""
    return None if of is None else {"mean": of.mean, "rms": of.rms, "largest": of.greatest,
                                    "largest_hz": of.greatest_hz}
