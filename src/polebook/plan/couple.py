"""Low-role capacitors sized for a wanted lower edge with the least total capacitance, from a series, verified."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import Any

import numpy as np

from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain
from polebook.chain.read import known_reading
from polebook.chain.suggest import listed, nearest
from polebook.plan.couple_end import Array, LowEnd, Mark, ohm_seen
from polebook.plan.couple_least import WIDEST, each_corner, least, like_corners, reachable
from polebook.plan.couple_snap import snapped, upward
from polebook.plan.proposal import Proposal, propose
from polebook.problem import Problem, ProblemsFound
from polebook.quantity import engineering
from polebook.refusal import quoted
from polebook.solve.edges import DECIBEL, HALF_POWER
from polebook.stages.ladder import arm_part

LEAST_RISE_DB = 0.1  # that the response may rise below the middle of its band where the file sets no target
_ROUNDS = 16  # marks that may come to the wanted edge
_NEAR = 1e-6
COLUMNS = ("now", "least", "value", "each", "like")


@dataclass(frozen=True, slots=True)
class Sized:
    """One capacitor.

    ohm      what it sees at midband
    farads   by COLUMNS: today's, of the least total, proposed from the series; of the two rules, upward in the series
    owns_now, owns  its share of the lower edge today and as proposed; None without an edge
    bound    its own corner stands at the wanted edge, above which it may not come
    """

    path: str
    ohm: float
    farads: Mapping[str, float]
    owns_now: float | None
    owns: float | None
    bound: bool


@dataclass(frozen=True, slots=True)
class Coupling:
    """What comes out: by COLUMNS the sums in F and the exact lower edges in Hz (None: the response has none).

    left    low-role capacitors that see nothing or a short, and have no corner to size them by
    low_hz  the edge where each proposed value is as much too small as its tolerance lets it be; tolerance, the widest
    """

    edge_hz: float
    series: str
    sized: tuple[Sized, ...]
    totals: Mapping[str, float]
    edges: Mapping[str, float | None]
    left: tuple[str, ...]
    low_hz: float | None
    tolerance: float
    proposal: Proposal

    def document(self) -> dict[str, Any]:
        return {
            "lower_hz": self.edge_hz,
            "series": self.series,
            "parts": [{"path": one.path, "ohm": one.ohm, "farad": dict(one.farads), "owns_now": one.owns_now,
                       "owns": one.owns, "bound": one.bound} for one in self.sized],
            "total_farad": dict(self.totals),
            "lower_edge_hz": dict(self.edges),
            "left": list(self.left),
            "low_hz": self.low_hz,
            "tolerance": self.tolerance,
            "proposal": self.proposal.document(),
        }


def couple(text: str, file: str, lower_hz: float | None = None, free: Sequence[str] = ()) -> Coupling:
    """Sizes the capacitors named by `free`; none named: those that the file's `free` lists name, else all of low role.

    lower_hz is the wanted edge, else the file's target.

    Raises ProblemsFound where the file has a fault or no ledger, a name is that of no low-role capacitor, or no values
    make the edge.
    """
    chain = known_reading(text, file).chain
    if chain is None:
        raise ProblemsFound(known_reading(text, file).problems, text)
    edge = lower_hz if lower_hz is not None else chain.get("target.lower")
    if edge is None:
        raise PathRefused("no lower edge is wanted", "neither the command nor target.lower of the file says one",
                          "say it, like --lower 20, or set target.lower")
    of = ledger(chain)
    with within_reach(chain):
        found = _candidates(of, chain)
        chosen = _chosen(chain, found, free)
        _judge(of, chain, edge)
        moving = {path: part for path, part in chosen.items() if ohm_seen(of.solution, part) is not None}
        if not moving:
            raise PathRefused(f"{listed(chosen)} has no corner to be sized by" if len(chosen) == 1 else
                              f"{listed(chosen)} have no corners to be sized by",
                              "at midband they see a short, or nothing", "free other capacitors")
        return _coupling(text, file, of, edge, moving, tuple(path for path in chosen if path not in moving))


def _coupling(text: str, file: str, of: Ledger, edge: float, moving: Mapping[str, int],
              left: tuple[str, ...]) -> Coupling:
    chain = of.chain
    low = LowEnd(of.solution, list(moving.values()), edge, 0.0)
    stated = chain.get("target.peaking", 0.0 if "target.peaking" in chain.given else LEAST_RISE_DB) or 0.0
    low.rise = max(stated / DECIBEL, low.highest(low.now), low.highest(low.least * WIDEST))
    marks = [Mark(edge, HALF_POWER)]
    if not reachable(low, marks):
        raise ProblemsFound([_beyond(of, low, list(moving))])
    row = chain.preferred["capacitor"]
    for _ in range(_ROUNDS):
        best = least(low, marks)
        values = None if best is None else snapped(low, best, row, marks)
        if best is None or values is None:
            break
        if worst := low.worst(best) or low.worst(values):
            marks.append(worst)
            continue
        wanted = dict(zip(moving, values.tolist(), strict=True))
        proposal = propose(text, file, wanted, f"capacitors for a lower edge of {engineering(edge, 'Hz')}", of)
        after = proposal.after
        if after.lower_hz is not None and after.lower_hz > edge:
            marks.append(Mark(after.lower_hz * (1 - _NEAR), HALF_POWER))
            continue
        if not after.judged or not after.solution.band.clean:
            break
        sets = {"now": low.now, "least": best, "value": values, "each": upward(each_corner(low), row),
                "like": upward(like_corners(low), row)}
        return _told(of, low, sets, moving, left, proposal, row)
    raise ProblemsFound([Problem(
        None, f"no values for a lower edge of {engineering(edge, 'Hz')} were found",
        "with the edge there the response falls below half power inside the band, or rises at its lower end by more "
        f"than {low.rise * DECIBEL:.2f} dB",
        "want another edge, free other capacitors, or allow more with target.peaking")])


def _told(of: Ledger, low: LowEnd, sets: Mapping[str, Array], moving: Mapping[str, int], left: tuple[str, ...],
          proposal: Proposal, row: str) -> Coupling:
    after = proposal.after
    edges = {"now": of.lower_hz, "value": after.lower_hz,
             **{name: lower_edge(of.chain, moving, sets[name]) for name in ("least", "each", "like")}}
    sized = []
    for at, (path, part) in enumerate(moving.items()):
        farads = {name: float(sets[name][at]) for name in COLUMNS}
        bound = farads["least"] <= float(low.least[at]) * (1 + _NEAR)
        sized.append(Sized(path, float(low.ohms[at]), MappingProxyType(farads), of.owns_lower.get(part),
                           after.owns_lower.get(part), bound))
    totals = {name: float(sets[name].sum()) for name in COLUMNS}
    off = np.array([_tolerance(of.chain, path) for path in moving])
    return Coupling(low.edge_hz, row, tuple(sized), MappingProxyType(totals),
                    MappingProxyType({name: edges[name] for name in COLUMNS}), left,
                    lower_edge(of.chain, moving, sets["value"] * (1.0 - off)), float(off.max()), proposal)


def _tolerance(chain: Chain, path: str) -> float:
    owner, _, key = path.partition(".")
    general = chain.get("tolerance.capacitor", 0.0) or 0.0
    own = chain.get(f"{owner}.tolerance.{key}", general)
    return min(general if own is None else own, 0.99)


def with_farads(chain: Chain, paths: Sequence[str] | Mapping[str, int], farads: Array) -> Chain:
    """The chain with these capacitors in place of its own."""
    numbers = {**chain.numbers, **dict(zip(paths, farads.tolist(), strict=True))}
    return replace(chain, numbers=MappingProxyType(numbers))


def lower_edge(chain: Chain, paths: Sequence[str] | Mapping[str, int], farads: Array) -> float | None:
    """The exact lower edge with these capacitors."""
    return ledger(with_farads(chain, paths, farads)).lower_hz


def _candidates(of: Ledger, chain: Chain) -> dict[str, int]:
    """Path -> part number of every low-role capacitor, in signal order."""
    arms = {(stage.name, arm_part(arm, key)[0]): f"{stage.name}.arms.{arm.number}.{key}"
            for stage in chain.stages for arm in stage.arms for key in arm.parts}
    return {arms.get((part.stage, part.name), f"{part.stage}.{part.name}"): index
            for index, part in enumerate(of.solution.circuit.layout.parts) if (part.type, part.role) == ("C", "low")}


def _chosen(chain: Chain, found: Mapping[str, int], free: Sequence[str]) -> dict[str, int]:
    if not found:
        raise PathRefused("the chain has no coupling and no bypass capacitor", "there is nothing to size",
                          "give a stage its couple, or a bypass")
    for path in free:
        if path not in found:
            near = nearest(path, found)
            raise PathRefused(f"{quoted(path)} is no low-role capacitor of the chain", f"they are {listed(found)}",
                              f"did you mean {near}?" if near else "name some of these, with commas between")
    listed_free = [f"{stage.name}.{key}" for stage in chain.stages for key in stage.free]
    names = free or [path for path in listed_free if path in found] or list(found)
    return {path: index for path, index in found.items() if path in names}


def _judge(of: Ledger, chain: Chain, edge: float) -> None:
    """Raises where there is no band today that the edge could be the lower end of."""
    if not of.judged:
        raise ProblemsFound([Problem(chain.places.get("source"), "the chain has no edges",
                                     "it is unstable, or its stability can't be told", "make it stable first")])
    if not of.solution.band.clean:
        raise ProblemsFound([Problem(chain.places.get("source"), "the chain has no clean midband",
                                     "nowhere is its response within 3 dB of the midband gain, so it has no edges",
                                     "part the two ends of its band first")])
    if of.upper_hz is not None and edge >= of.upper_hz:
        raise PathRefused(f"a lower edge of {engineering(edge, 'Hz')} lies above the band",
                          f"its upper edge is {engineering(of.upper_hz, 'Hz')}", "want one below that")


def _beyond(of: Ledger, low: LowEnd, paths: Sequence[str]) -> Problem:
    """What holds the edge where it is however large the free capacitors are."""
    best = ledger(with_farads(of.chain, paths, low.least * WIDEST))
    wanted = engineering(low.edge_hz, "Hz")
    what = f"no value{'s' * (len(paths) > 1)} of {listed(paths)} can bring the lower edge to {wanted}"
    if best.lower_hz is None:
        return Problem(None, what, "near there the upper end of the band already takes more than 3 dB",
                       "want an edge further below the upper one")
    others = {path: index for path, index in _candidates(of, of.chain).items() if path not in paths}
    names = {index: f"{part.stage}.{part.name}" for index, part in enumerate(of.solution.circuit.layout.parts)}
    names |= {index: path for path, index in others.items()}
    owner = max(best.owns_lower, key=best.owns_lower.__getitem__)
    why = (f"with all of them shorts it lies at {engineering(best.lower_hz, 'Hz')}: {names[owner]} owns "
           f"{100 * best.owns_lower[owner]:.0f} % of it")
    return Problem(None, what, why, f"free {names[owner]} too" if owner in others.values() else
                   f"change {names[owner]}, or want a higher edge")
