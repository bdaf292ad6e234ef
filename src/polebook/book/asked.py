"""What targets beyond gain and band are judged by: each is computed only where the file has the target."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING

from polebook.chain.suggest import listed

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.circuit.bias_rails import Rails

Answer = tuple[float | None, str]
"""(what was got, why the target can't be judged, "" where it can)."""


@dataclass(frozen=True, slots=True)
class Built:
    """The yield of built chains, which no ledger computes: whoever builds them hands it in.

    share  of the chains that meet the other targets, None where it is not known, and why;  cause  what holds it down
    """

    share: float | None = None
    why: str = "run polebook spread"
    cause: str = ""


def _swing(of: Ledger, want: float) -> Answer:
    """V peak at the load. Where a clip level is not known, what is known can only tell that the target is missed."""
    levels = of.levels
    if levels is None or levels.swing is None:
        return None, "no stage of the chain has a clip level that is known"
    if levels.unknown and levels.swing >= want:
        return levels.swing, f"what {listed(levels.unknown)} can swing is not wholly known"
    return levels.swing, ""


def _noise(of: Ledger, _: float) -> Answer:
    """Input-referred density at the reference frequency, V/√Hz or A/√Hz."""
    noise = of.noise
    density = noise.density if noise else None
    if density is not None:
        return density, ""
    return None, (noise.untold if noise else "") or "the noise is beyond what a number can hold"


def _current(of: Ledger, _: float) -> Answer:
    """A of the greater rail."""
    current, standing = of.supply_current, of.rails.standing
    if current is not None:
        return current, ""
    return None, unknown_draws(of.rails, list(standing)) if standing else "the file has no supply"


def unknown_draws(rails: Rails, names: Sequence[str]) -> str:
    """What is not known of the currents of some rails: "what Q2 draws is not known (iq of U1 is not stated)"."""
    unknown = [draw for name in names for draw in rails.unknown(name)]
    idle = list(dict.fromkeys(draw.stage for draw in unknown if draw.element == "iq"))
    others = list(dict.fromkeys(draw.stage for draw in unknown if draw.element != "iq"))
    told = [f"iq of {listed(idle)} is not stated"] if idle else []
    if others:
        told.append(f"the bias does not tell what {listed(others)} {'draws' if len(others) == 1 else 'draw'}")
    return ", and ".join(told)


def _rise(of: Ledger, _: float) -> Answer:
    """Rise time, s."""
    return _timed(of, of.pulse.rise_time_s)


def _overshoot(of: Ledger, _: float) -> Answer:
    """Share of the final value."""
    return _timed(of, of.pulse.overshoot_percent, 0.01)


def _timed(of: Ledger, figure: float | None, unit: float = 1.0) -> Answer:
    if figure is not None:
        return figure * unit, ""
    return None, of.pulse.why or "the response rings on for too long to be followed"


def _sag(of: Ledger, _: float) -> Answer:
    """Share of the pulse's height."""
    return (None, of.sag.why) if of.sag.percent is None else (of.sag.percent * 0.01, "")


def _yield(of: Ledger, _: float) -> Answer:
    """Share of built chains, as it was handed in."""
    return of.built.share, of.built.why


ASKED: Mapping[str, Callable[[Ledger, float], Answer]] = MappingProxyType({
    "noise": _noise, "swing": _swing, "current": _current, "overshoot": _overshoot, "rise": _rise, "sag": _sag,
    "yield": _yield,
})
"""Target -> its answer."""
