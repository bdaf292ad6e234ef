"""What flows out of each rail: the solved d.c. network's currents at every node that something holds.

A node is held by ground, by a rail, or by the output of an op-amp or block. What such an output gives comes out of
the positive rail, what it takes goes into the negative one. The current into an inverting input that stands at 0 V
goes on through the feedback resistor to the output; iq flows from the positive rail to the negative. Where a stage
hangs on a current source, that source hangs on the stage's rail. So all the currents sum to zero (Kirchhoff).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

from polebook.chain.model import Chain, Stage
from polebook.circuit.bias_build import build
from polebook.circuit.bias_compile import Compiled, Solution, compiled, level, solution
from polebook.circuit.bias_group import groups
from polebook.circuit.bias_network import GROUND, NEGATIVE, POSITIVE, Amplifier, Device, Network
from polebook.circuit.bias_solution import Plan
from polebook.stages.ladder import arm_part
from polebook.stages.registry import KINDS

NAMES = {GROUND: "ground", POSITIVE: "positive", NEGATIVE: "negative"}
BALANCED = 1e-9  # share of the currents at a node below which what is left over is rounding


@dataclass(frozen=True, slots=True)
class Draw:
    """A current in A out of a rail, None where it can't be had.

    rail     positive, ground or negative
    stage    stage, source or load that draws it
    element  what carries it: the key of a resistor ("rc", "re+re_bypassed", "arm2"), "" for the device,
             "base", "source" (a current source at it), "upper base", "iq", "output", "feedback"
    """

    rail: str
    stage: str
    element: str
    current: float | None


@dataclass(frozen=True, slots=True)
class Rails:
    """standing: the rails of the chain with their volts, ground last; outputs: A out of each amplifier's output."""

    standing: dict[str, float]
    draws: tuple[Draw, ...]
    outputs: dict[str, float | None]

    def current(self, rail: str) -> float | None:
        """A out of a rail into the circuit, negative where it takes current in; None where one of its draws is."""
        total = 0.0
        for draw in self.draws:
            if draw.rail == rail:
                if draw.current is None:
                    return None
                total += draw.current
        return total

    @property
    def power(self) -> float | None:
        """W that the rails give in all; None without a rail, or where a current is not known."""
        each = [volts * (self.current(name) or 0.0) for name, volts in self.standing.items()]
        known = all(self.current(name) is not None for name, volts in self.standing.items() if volts)
        return sum(each) if each and known else None

    def unknown(self, rail: str) -> list[Draw]:
        """The draws of a rail that can't be had."""
        return [draw for draw in self.draws if draw.rail == rail and draw.current is None]

    @property
    def greater(self) -> str:
        """The rail that gives or takes most, "" without a rail or where a current is not known."""
        found = {name: self.current(name) for name in self.standing if name != "ground"}
        known = {name: abs(amperes) for name, amperes in found.items() if amperes is not None}
        return max(known, key=lambda name: known[name]) if known and len(known) == len(found) else ""


def rails(chain: Chain, plan: Plan) -> Rails:
    """Every current out of the rails of a chain, at the file's own values."""
    count = _Count(chain, plan)
    count.resistors()
    for solved in count.solutions:
        count.devices(solved)
        count.sources(solved)
    stages = {stage.name: stage for stage in chain.stages}
    for amplifier in count.net.amplifiers:
        count.amplifier(stages[amplifier.name], amplifier)
    return count.rails()


@dataclass(frozen=True, slots=True)
class _Flow:
    """A current out of a node, None where it can't be had."""

    stage: str
    element: str
    amperes: float | None


@dataclass(slots=True)
class _Count:
    """Adds up the currents by the node that they leave."""

    chain: Chain
    plan: Plan
    net: Network = field(init=False)
    solutions: list[Solution] = field(init=False)
    volts: dict[int, float | None] = field(init=False)
    out_of: dict[int, list[_Flow]] = field(init=False)
    outputs: dict[str, float | None] = field(init=False)

    def __post_init__(self) -> None:
        get = self.chain.numbers.get
        self.net = build(self.chain)
        passive = [compiled(group, get) for group in groups(self.net, every=True)[len(self.plan.raw):]]
        self.solutions = [solution(part, get) for part in (*self.plan.groups, *passive)]
        self.volts, self.out_of, self.outputs = {}, {}, {}
        for solved in self.solutions:
            group = solved.compiled.group
            self.volts.update({node: solved.voltage(node) for node in (*group.nodes, *group.held)})

    def volt(self, node: int) -> float | None:
        name = self.net.level(node)
        return level(name, self.chain.numbers.get) if name else self.volts.get(node)

    def book(self, node: int, stage: str, element: str, amperes: float | None) -> None:
        self.out_of.setdefault(node, []).append(_Flow(stage, element, amperes))

    def resistors(self) -> None:
        for resistor in self.net.resistors:
            ends = self.volt(resistor.a), self.volt(resistor.b)
            ohms = sum(self.chain.numbers[path] for path in resistor.paths)
            current = None if ends[0] is None or ends[1] is None else (ends[0] - ends[1]) / ohms
            stage, _, key = resistor.paths[0].partition(".")
            element = "+".join([self._part(stage, key), *(path.partition(".")[2] for path in resistor.paths[1:])])
            self.book(resistor.a, stage, element, current)
            self.book(resistor.b, stage, element, None if current is None else -current)

    def _part(self, stage: str, key: str) -> str:
        """A resistor's name in the ledger: that of its key, but for an arm's."""
        if not key.startswith("arms."):
            return key
        _, number, own = key.split(".")
        arms = next(one.arms for one in self.chain.stages if one.name == stage)
        return arm_part(arms[int(number) - 1], own)[0]

    def devices(self, solved: Solution) -> None:
        """Books what each device of a group takes at its terminals, and its current source at the output side."""
        for k, device in enumerate(solved.compiled.group.devices):
            law, current = solved.numbers.laws[k], _current(solved, k)
            passed = 1.0 / (1.0 + law.above)
            given = None if current is None else device.sign * current
            output = _times(given, passed)
            self.book(device.lower, device.name, "", _times(given, -1.0 - law.share))
            if device.family == "bjt":
                self.book(device.control, device.name, "base", _times(given, law.share))
            if law.above:
                self.book(device.output_rail, device.name, "upper base", _times(given, 1.0 - passed))
            if device.fed_output:
                self.book(device.output_rail, device.name, "source", output)
            else:
                self.book(device.output, device.name, "", output)

    def sources(self, solved: Solution) -> None:
        """Books what a current source gives at a node whose balance says nothing: all that the others leave over."""
        part = solved.compiled
        for node in part.group.nodes:
            flows = self.out_of.get(node, [])
            if part.cols.voltage[node] in part.choice.rows or not flows:
                continue
            known = [flow.amperes for flow in flows if flow.amperes is not None]
            over = sum(known) if len(known) == len(flows) else None
            if over is not None and abs(over) <= BALANCED * sum(map(abs, known)):
                continue
            for device, rail in _hung(part, node):
                self.book(rail, device.name, "source", over)

    def amplifier(self, stage: Stage, amplifier: Amplifier) -> None:
        """Books what an op-amp or block takes from its rails: iq, and what its output gives or takes."""
        numbers, name = self.chain.numbers, stage.name
        topology = KINDS[stage.kind].topology
        given = [flow.amperes for node in self._ends(amplifier.output) for flow in self.out_of.get(node, ())]
        if topology == "noninverting":
            given.append(self._feedback(name, amplifier))
        elif topology != "block":
            given += self._into_input(name, amplifier)
        known = [amperes for amperes in given if amperes is not None]
        output = sum(known) if len(known) == len(given) else None
        iq = numbers.get(f"{name}.iq" if topology == "block" else f"device.{stage.device}.iq")
        self.book(POSITIVE, name, "iq", iq)
        self.book(NEGATIVE, name, "iq", _times(iq, -1.0))
        self.outputs[name] = output
        if output is None:
            self.book(POSITIVE, name, "output", None)
            self.book(NEGATIVE, name, "output", None)
        elif output:
            self.book(POSITIVE if output > 0 else NEGATIVE, name, "output", output)

    def _ends(self, node: int) -> Iterator[int]:
        """A held node, and all that wires tie to it."""
        yield node
        for other, held in self.net.tied.items():
            if held == node:
                yield from self._ends(other)

    def _feedback(self, name: str, amplifier: Amplifier) -> float | None:
        """A through rf and rg of a non-inverting stage, where no capacitor stands in their way."""
        numbers, volts = self.chain.numbers, self.volt(amplifier.output)
        rg = numbers.get(f"{name}.rg")
        if not rg or numbers.get(f"{name}.c_rg"):
            return 0.0
        current = None if volts is None else volts / (rg + (numbers.get(f"{name}.rf") or 0.0))
        self.book(GROUND, name, "feedback", _times(current, -1.0))
        return current

    def _into_input(self, name: str, amplifier: Amplifier) -> Iterator[float | None]:
        """Less what arrives at the inverting input, which the output takes through rf; ground has none of it."""
        at_input = self.net.root(amplifier.input)
        if self.chain.numbers.get(f"{name}.rg"):
            kept = []
            for flow in self.out_of.get(GROUND, ()):
                if (flow.stage, flow.element) == (name, "rg"):
                    yield flow.amperes
                else:
                    kept.append(flow)
            self.out_of[GROUND] = kept
        elif self.net.level(at_input) == "ground":
            for node in self._ends(at_input):
                yield from (flow.amperes for flow in self.out_of.pop(node, ()))

    def rails(self) -> Rails:
        """The currents out of ground and the rails; a rail at 0 V is ground."""
        numbers = self.chain.numbers
        standing = {name: numbers.get(f"supply.{name}") or 0.0 for name in ("positive", "negative")}
        standing = {name: volts for name, volts in standing.items() if volts}
        draws = []
        for node, flows in self.out_of.items():
            held = self.net.level(node)
            if held not in ("ground", "supply.positive", "supply.negative"):
                continue
            name = held.removeprefix("supply.")
            name = name if name in standing else "ground"
            draws += [Draw(name, flow.stage, flow.element, flow.amperes) for flow in flows if flow.amperes != 0.0]
        order = {stage.name: k for k, stage in enumerate(self.chain.stages)}
        draws.sort(key=lambda draw: (draw.rail != "positive", draw.rail != "negative", order.get(draw.stage, -1)))
        return Rails({**standing, "ground": 0.0} if standing else {}, tuple(draws), self.outputs)


def _current(solved: Solution, k: int) -> float | None:
    law = solved.numbers.laws[k]
    return law.current if law.current is not None else solved.unknown(solved.compiled.cols.current[k])


def _times(value: float | None, factor: float) -> float | None:
    return None if value is None else value * factor


def _hung(part: Compiled, node: int) -> Iterator[tuple[Device, int]]:
    """The device whose current source stands at a node, and the rail that it hangs on."""
    for device in part.group.devices:
        if device.fed_lower and device.lower == node:
            yield device, device.lower_rail
            return
    for device in part.group.devices:
        if device.output == node:
            yield device, device.output_rail
            return
