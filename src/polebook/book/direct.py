"""The d.c. plan beyond the ledger's figures: amplifiers, what each rail feeds, what stated currents would be."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Chain, Stage
from polebook.circuit.bias_rails import Rails
from polebook.circuit.bias_solution import compared
from polebook.stages.registry import KINDS


@dataclass(frozen=True, slots=True)
class Amplifier:
    """An op-amp or block between its rails: iq and what its output gives in A, the span of the rails in V, heat in W.

    output_w is what the output's own current adds to the heat. None where a figure is not known.
    """

    iq: float | None
    span: float
    output: float | None
    output_w: float | None

    @property
    def watts(self) -> float | None:
        return None if self.iq is None or self.output_w is None else self.iq * self.span + self.output_w


def amplifier(chain: Chain, rails: Rails, stage: Stage, vout: float | None) -> Amplifier:
    """An op-amp or block stage at d.c.; what its output gives falls from the rail that it comes from to vout."""
    ends = [chain.get(f"supply.{rail}", 0.0) or 0.0 for rail in ("positive", "negative")]
    iq = chain.get(f"device.{stage.device}.iq" if stage.device else f"{stage.name}.iq")
    output = rails.outputs.get(stage.name)
    falls = None if output is None or vout is None else output * ((ends[0] if output > 0 else ends[1]) - vout)
    return Amplifier(iq, ends[0] - ends[1], output, falls)


def direct(of: Ledger) -> dict[str, Any]:
    """What the pages of the d.c. plan tell beside `bias` and `rails`.

    rails: volts of each; power_w: what they give in all; draws: A out of each rail by what carries it; solved: A by
    stage of a stated current; amplifiers: rows as those of `bias`, of op-amps and blocks
    """
    with within_reach(of.chain):
        circuit = of.solution.circuit
        solved = compared(circuit.plan, of.chain.get, dict(circuit.points))
        return {
            "rails": [{"rail": name, "volts": volts} for name, volts in of.rails.standing.items()],
            "power_w": of.rails.power,
            "draws": [{"rail": draw.rail, "stage": draw.stage, "element": draw.element, "current_a": draw.current}
                      for draw in of.rails.draws],
            "solved": {name: point.solved_current for name, point in solved.items()},
            "amplifiers": [_row(of, stage) for stage in of.chain.stages
                           if not stage.left_out and KINDS[stage.kind].families in ((), ("opamp",))
                           and stage.kind != "ladder"],
        }


def _row(of: Ledger, stage: Stage) -> dict[str, Any]:
    point = of.solution.circuit.points[stage.name]
    found = amplifier(of.chain, of.rails, stage, point.output_v)
    return {"stage": stage.name, "device": stage.device, "current_a": found.iq, "across_v": found.span or None,
            "control_v": point.control_v, "lower_v": None, "output_v": point.output_v, "dissipation_w": found.watts,
            "from": None if found.iq is None else "given"}
