"""A fit from its request: keys, sweep and chain, then least squares in rounds, and what they are worth.

Gain and phase count by what each is off in the end, found in rounds (feasible generalized least squares). Keys that
end at a bound are held there, those that the sweep does not feel where the file has them, and the others are fitted
again.
"""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from polebook.book.ledger import ledger
from polebook.book.reach import within_reach
from polebook.chain.edits import content
from polebook.chain.model import Bench, Chain
from polebook.chain.paths import locate
from polebook.chain.read import known_reading
from polebook.chain.said import raw_text, said
from polebook.chain.suggest import listed
from polebook.circuit.build import circuit
from polebook.plan.proposal import propose
from polebook.plan.spread.alone import with_numbers
from polebook.problem import Place, Problem, ProblemsFound
from polebook.record.bench import Overlay, measured, overlay, there
from polebook.record.compared import off
from polebook.record.fit.judge import neighbours, waves
from polebook.record.fit.keys import LEAST, Key, free, scaled
from polebook.record.fit.model import Model, Watch, felt
from polebook.record.fit.result import Far, Result, Together
from polebook.record.fit.work import Work
from polebook.record.sweeps.sweep import Array, Sweep
from polebook.record.transfer import transfer
from polebook.solve.edges import DECIBEL
from polebook.text.spans import scan

OFFSET = "the offset of the gain"
_SAME = 1e-6  # neper by which a part that is next to nothing may move the response


@dataclass(frozen=True, slots=True)
class Request:
    """bench  its number, None for the only one that has a sweep;  free  paths, () for all strays

    offset  whether the measured gain may be off by as many dB at all frequencies, which the fit then finds
    """

    text: str
    file: str
    bench: int | None = None
    free: tuple[str, ...] = ()
    offset: bool = False


def fit(request: Request, watch: Watch = lambda looks, rms_db: None) -> Result:
    """The fit; raises ProblemsFound where it can't be made, and Called where `watch` does."""
    reading = known_reading(request.text, request.file)
    if reading.chain is None:
        raise ProblemsFound(reading.problems, request.text)
    chain, data = reading.chain, content(reading, request.text)
    bench = chosen(chain, request.bench)
    found = overlay(chain, bench, os.path.dirname(request.file))
    if found.sweep is None:
        raise ProblemsFound(found.problems, found.text)
    keys = free(chain, data, request.free, found.sweep.reference_ohm is not None)
    with within_reach(chain):
        return _fit(request, chain, bench, found, found.sweep, keys, _texts(request.text, data, keys), watch)


def chosen(chain: Chain, number: int | None) -> Bench:
    """The bench of that number, or the only one with a sweep. Raises ProblemsFound."""
    there(chain)
    have = [bench for bench in chain.benches if bench.file]
    if number is None and len(have) == 1:
        return have[0]
    told = f"bench{'es' * (len(have) != 1)} {listed(str(bench.number) for bench in have)}" if have else "no bench"
    if number is None:
        what = "it is not said which sweep to fit to" if have else "no bench has a sweep"
        raise ProblemsFound([Problem(Place(chain.path), what, f"a fit is to the sweep of one bench, and {told} of the "
                                     f"file {'have' if len(have) > 1 else 'has'} one",
                                     f"say which: --bench {have[0].number}" if have else
                                     'give a bench its sweep: file = "sweep.csv"')])
    bench = next((one for one in chain.benches if one.number == number), None)
    if bench is None or not bench.file:
        what = f"there is no bench {number}" if bench is None else f"bench {number} has no sweep"
        place = Place(chain.path) if bench is None else chain.places.get(f"bench.{number}")
        raise ProblemsFound([Problem(place, what, f"{told} of the file {'have' if len(have) > 1 else 'has'} one",
                                     f"name that one: --bench {have[0].number}" if have else
                                     'give it one: file = "sweep.csv"')])
    return bench


def _texts(text: str, data: Mapping[str, Any], keys: tuple[Key, ...]) -> dict[str, str]:
    """What the file has at each key, "" for nothing."""
    spans = scan(text)
    return {key.path: raw_text(data, spans, locate(key.path, data).path) for key in keys}


def _fit(request: Request, chain: Chain, bench: Bench, found: Overlay, sweep: Sweep, keys: tuple[Key, ...],
         texts: Mapping[str, str], watch: Watch) -> Result:
    filed = measured(chain, bench, sweep.reference_ohm)
    before = _as_filed(filed, sweep)
    _enough(sweep, len(keys) + request.offset)
    for key in keys:
        _absent(filed, key, sweep)
    model = Model(filed, keys, sweep, request.offset, watch)
    keys = tuple(scaled(key, size) for key, size in zip(keys, felt(model, keys), strict=True))
    work = Work(Model(filed, keys, sweep, request.offset, watch))
    work.run()
    fitted, values = work.fitted(chain, texts)
    gain, phase = work.model.off(work.proposed(values, False))
    alike = neighbours(gain), neighbours(phase) if phase.size else None
    names = [*(key.path for key in keys), OFFSET]
    return Result(
        bench, sweep, found.apart, "chosen" if request.free else "strays", fitted, work.offset(), before,
        _far(sweep, gain, phase), _far(sweep, *work.model.off(work.proposed(values, True))),
        tuple(Together(tuple(names[at] for at in group.members), tuple(names[at] for at in group.beside), group.hold)
              for group in work.together()),
        tuple((names[a], names[b], r) for a, b, r in work.pairs()), alike,
        waves(alike[0], gain.size) or (alike[1] is not None and waves(alike[1], phase.size)),
        work.model.looks, work.converged, propose(request.text, request.file, values, "values as fitted"))


def _as_filed(filed: Chain, sweep: Sweep) -> Far:
    """How far the chain as it is filed is off. Raises ProblemsFound where that is no question."""
    of = ledger(filed)
    if not of.judged:
        raise ProblemsFound([Problem(
            filed.places.get("source"), "the chain as filed is not stable", "a chain that oscillates has no response "
            "that could be compared with a sweep", "mend that first: polebook show tells what is to blame")])
    planned = transfer(of.solution.circuit, sweep.hz)
    if not np.isfinite(planned).all():
        at = float(sweep.hz[~np.isfinite(planned)][0])
        raise ProblemsFound([Problem(
            Place(sweep.path), f"the chain as filed passes nothing at {at:.6g} Hz",
            "the logarithm of its response has no value there", "leave that frequency out of the sweep")])
    gain = sweep.gain_db / DECIBEL - planned.real
    phase = np.zeros(0) if sweep.degrees is None else np.radians(sweep.degrees) - planned.imag
    return _far(sweep, gain, phase)


def _far(sweep: Sweep, gain: Array, phase: Array) -> Far:
    """From neper and radians."""
    turned = (np.degrees(phase) + 180.0) % 360.0 - 180.0
    return Far(off(sweep.hz, gain * DECIBEL), off(sweep.hz, turned) if phase.size else None)


def _enough(sweep: Sweep, unknowns: int) -> None:
    figures = sweep.hz.size * (1 if sweep.degrees is None else 2)
    if figures <= unknowns:
        raise ProblemsFound([Problem(
            Place(sweep.path), f"the sweep has {figures} figures for {unknowns} unknowns",
            "without more figures than unknowns no error can be told",
            "measure at more frequencies, or free fewer keys")])


def _absent(filed: Chain, key: Key, sweep: Sweep) -> None:
    """Raises ProblemsFound where a key that the file does not have stands for something else than 0."""
    if key.now:
        return
    least = with_numbers(filed, {key.path: LEAST * key.start})
    try:
        moves = np.abs(transfer(circuit(least), sweep.hz) - transfer(circuit(filed), sweep.hz)).max()
    except ProblemsFound:
        moves = np.inf
    if not moves < _SAME:
        raise ProblemsFound([Problem(
            filed.places.get(key.path.rpartition(".")[0]), f"{said(key.path)} is absent, and that is not the same as 0",
            "where it is absent its place is taken by what follows from other keys",
            f"give it a value to begin at: polebook set FILE {key.path} VALUE")])
