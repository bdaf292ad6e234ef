"""Targets: what was wanted, what was got, and by how much."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import inf, log10

from polebook.chain.model import Chain
from polebook.formula import Formula

FORMULAS = (
    Formula("targets.margin", "(want - got)/want where less is better, (got - want)/want where more is; "
                              "for the gain (tolerance - |difference in dB|)/tolerance", "definition"),
    Formula("targets.want", "as the file states it", "the chain file"),
    Formula("targets.got", "the figure that the target is about", "definition"),
    Formula("targets.met", "met where the margin is not below 0", "definition"),
)
NAMES = ("gain", "lower", "upper", "peaking", "noise", "swing", "current", "overshoot", "rise", "sag", "yield")
LESS_IS_BETTER = frozenset({"lower", "noise", "current", "peaking", "overshoot", "rise", "sag"})
TOLERANCE_DB = 1.0


@dataclass(frozen=True, slots=True)
class Target:
    """want and got in the target's own SI unit; margin below 0 where it is missed; met is None where not judged."""

    name: str
    want: float
    got: float | None
    margin: float | None
    met: bool | None
    why: str


@dataclass(frozen=True, slots=True)
class Got:
    """What the targets of this ledger are judged by. An absent edge of a chain that has a band is no fault of it.

    asked  (target, want) -> (what was got, why it can't be judged, "" where it can), of targets beyond gain and band
    """

    gain: float
    lower_hz: float | None
    upper_hz: float | None
    peaking_db: float
    unstable: bool
    clean: bool
    asked: Callable[[str, float], tuple[float | None, str]]


def targets(chain: Chain, got: Got) -> list[Target]:
    """One for each target key that the file states."""
    stated = [name for name in NAMES if f"target.{name}" in chain.given]
    return [judge(chain, name, chain.numbers[f"target.{name}"], got) for name in stated]


def judge(chain: Chain, name: str, want: float, got: Got) -> Target:
    """One target against what the ledger has."""
    if got.unstable:
        return Target(name, want, None, None, None, "the chain is unstable")
    if name == "gain":
        return _gain(chain, want, got)
    if name == "peaking":
        return _compare(name, want, got.peaking_db)
    if name not in ("lower", "upper"):
        value, why = got.asked(name, want)
        return Target(name, want, value, None, None, why) if why or value is None else _compare(name, want, value)
    if not got.clean:
        return Target(name, want, None, None, None, "the chain has no clean midband, so it has no edges")
    edge = got.lower_hz if name == "lower" else got.upper_hz
    if edge is None:
        return Target(name, want, None, None, True, f"the band has no {name} edge")
    return _compare(name, want, edge)


def _gain(chain: Chain, want: float, got: Got) -> Target:
    tolerance = chain.get("target.gain_tolerance", TOLERANCE_DB) or TOLERANCE_DB
    ratio = abs(got.gain) / want
    if not 0.0 < ratio < inf:
        raise OverflowError("a gain and its target with no number between them")
    off = 20.0 * log10(ratio)
    margin = (tolerance - abs(off)) / tolerance
    return Target("gain", want, abs(got.gain), margin, margin >= 0.0, "")


def _compare(name: str, want: float, got: float) -> Target:
    better = want - got if name in LESS_IS_BETTER else got - want
    return Target(name, want, got, better / want if want else None, better >= 0.0, "")
