"""What a fit came to."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from polebook.chain.model import Bench
from polebook.plan.proposal import Proposal
from polebook.quantity import DIMENSIONS
from polebook.record.compared import Off, as_data, told
from polebook.record.sweeps.sweep import Sweep

FITTED, NONE, LEAST, MOST = "fitted", "none", "least", "most"
BLIND, UNFELT = "not told apart", "not felt"


@dataclass(frozen=True, slots=True)
class Fitted:
    """One key.

    state  FITTED; NONE: at its bound 0, the sweep asks for no more; LEAST, MOST: at a bound of the search;
           BLIND: the sweep can't tell it from other keys; UNFELT: the sweep does not feel it
    now, value  SI, None where the file has none, or the fit tells none;  text  what the file has, "" for nothing
    error   standard error of the value, None where it has none;  most  of NONE: two standard errors
    also    the value in another answer that fits as well, farther from the file; None where there is none
    """

    path: str
    dimension: str
    state: str
    now: float | None
    text: str
    value: float | None
    error: float | None = None
    most: float | None = None
    also: float | None = None


@dataclass(frozen=True, slots=True)
class Far:
    """How far the sweep is from the chain: gain in dB, phase in degrees."""

    gain: Off
    phase: Off | None


@dataclass(frozen=True, slots=True)
class Together:
    """Keys that can't be told apart. beside: fitted ones that they go with; hold: how many would have to be held."""

    keys: tuple[str, ...]
    beside: tuple[str, ...]
    hold: int


@dataclass(frozen=True, slots=True, eq=False)
class Result:
    """before   the chain as filed;  after  with every key where it fits best
    written  with the values that are proposed, keys that can't be told apart as the file has them

    origin     who chose the keys: "chosen", "strays"
    offset     (dB, standard error) of the measured gain, where that was free
    together   what the sweep feels and does not settle
    pairs      (key, key, correlation) of fitted keys that go together
    neighbours correlation of neighbouring residuals, of gain and of phase;  waves  whether either is no noise
    """

    bench: Bench
    sweep: Sweep
    apart: str
    origin: str
    keys: tuple[Fitted, ...]
    offset: tuple[float, float | None] | None
    before: Far
    after: Far
    written: Far
    together: tuple[Together, ...]
    pairs: tuple[tuple[str, str, float], ...]
    neighbours: tuple[float, float | None]
    waves: bool
    looks: int
    converged: bool
    proposal: Proposal

    def document(self) -> dict[str, Any]:
        """As plain data."""
        bench, texts = self.bench, {key.path: key for key in self.proposal.keys}
        proposed = self.proposal.document()
        return {
            "bench": bench.number, "unit": bench.unit or None, "date": bench.date or None, "at": bench.at or None,
            "sweep": {"file": bench.file, **told(self.sweep, self.apart)},
            "free": {"from": self.origin, "offset": self.offset is not None},
            "fitted": [{
                "path": key.path, "unit": DIMENSIONS[key.dimension].unit, "state": key.state, "now": key.now,
                "now_text": key.text or None,
                "value": key.value, "text": (texts[key.path].text if key.path in texts else "") or None,
                "error": key.error, "most": key.most, "also": key.also,
            } for key in self.keys],
            "offset": None if self.offset is None else {"db": self.offset[0], "error": self.offset[1]},
            "before": _far(self.before), "after": _far(self.after), "as_written": _far(self.written),
            "together": [{"keys": list(one.keys), "beside": list(one.beside), "hold": one.hold}
                         for one in self.together],
            "pairs": [{"keys": [a, b], "correlation": r} for a, b, r in self.pairs],
            "neighbours": {"gain": self.neighbours[0], "phase": self.neighbours[1], "waves": self.waves},
            "looks": self.looks, "converged": self.converged,
            **{name: proposed[name] for name in ("targets", "overall", "cautions", "mended", "met")},
        }


def _far(far: Far) -> dict[str, Any]:
    return {"gain": as_data(far.gain), "phase": as_data(far.phase)}
