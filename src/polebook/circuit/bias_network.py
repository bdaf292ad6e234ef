"""The d.c. network of a chain: what is left where capacitors are open and inductors are wires. Structure only.

Nodes are numbers; 0, 1, 2 are ground and the two rails. A node may be held at a level: ground, a rail, or the
output of an op-amp or block. Resistors carry the paths of their values, so that the same structure serves any values.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from polebook.chain.model import Chain

GROUND, POSITIVE, NEGATIVE = 0, 1, 2
RAILS = {"ground": GROUND, "positive": POSITIVE, "negative": NEGATIVE}
LEVELS = ("ground", "supply.positive", "supply.negative")
MIDWAY = "midway"

Paths = tuple[str, ...]  # values in series


@dataclass(frozen=True, slots=True)
class Resistor:
    """A resistance between two nodes: the sum of the values at `paths`."""

    a: int
    b: int
    paths: Paths


@dataclass(frozen=True, slots=True)
class Device:
    """A three-terminal device in the d.c. network.

    sign        1 for npn, n-channel and valves, -1 where everything is mirrored
    stopper     path of a resistor in series with the control that has no node behind it, "" for none
    current     path of the stated quiescent current, "" where it is to be solved
    across      path of the stated voltage across the device, "" where there is none
    fed_output  no resistor at the output terminal: a current source carries what the device needs
    fed_lower   no resistor at a lower terminal that is a stage's input or output
    upper       card of a cascode's upper device, "" for none: `output` is then the upper one's
    output_rail, lower_rail  nodes of the rails that its two sides belong to: a current source hangs on one of them
    """

    name: str
    card: str
    family: str
    sign: int
    control: int
    lower: int
    output: int
    stopper: str = ""
    current: str = ""
    across: str = ""
    fed_output: bool = False
    fed_lower: bool = False
    upper: str = ""
    upper_family: str = ""
    output_rail: int = POSITIVE
    lower_rail: int = GROUND


@dataclass(frozen=True, slots=True)
class Amplifier:
    """An op-amp or block stage: its input and output node."""

    name: str
    input: int
    output: int
    needs_path: bool  # its input must have a d.c. path of its own


@dataclass(slots=True)
class Network:
    """What `bias_build.build` fills: nodes tied by wires, levels, resistors, devices."""

    chain: Chain
    parent: list[int] = field(default_factory=lambda: [0, 1, 2])
    levels: dict[int, str] = field(default_factory=lambda: dict(enumerate(LEVELS)))
    resistors: list[Resistor] = field(default_factory=list)
    devices: list[Device] = field(default_factory=list)
    amplifiers: list[Amplifier] = field(default_factory=list)
    tied: dict[int, int] = field(default_factory=dict)  # node -> the held node that a wire ties it to

    def node(self) -> int:
        self.parent.append(len(self.parent))
        return len(self.parent) - 1

    def root(self, node: int) -> int:
        while self.parent[node] != node:
            node = self.parent[node]
        return node

    def level(self, node: int) -> str:
        """The level that holds a node, "" where it is free."""
        return self.levels.get(self.root(node), "")

    def hold(self, node: int, level: str) -> None:
        """Holds a node at a level; one that is held already stays where it is."""
        self.levels.setdefault(self.root(node), level)

    def wire(self, a: int, b: int) -> None:
        """Ties two nodes. Two held ones stay apart, as their levels can't be made one."""
        a, b = self.root(a), self.root(b)
        if self.level(a) and self.level(b):
            return
        if self.level(a):
            self.hold(b, self.level(a))
            self.tied[b] = a
        elif self.level(b):
            self.hold(a, self.level(b))
            self.tied[a] = b
        elif a != b:
            self.parent[b] = a

    def stands(self, path: str) -> bool:
        value = self.chain.numbers.get(path)
        return value is not None and value != 0.0

    def resistor(self, a: int, b: int, *paths: str) -> bool:
        """A resistor of those values that stand, in series, across two nodes; False where none does."""
        standing = tuple(path for path in paths if self.stands(path))
        if standing:
            self.resistors.append(Resistor(a, b, standing))
        return bool(standing)

    def behind(self, node: int, path: str) -> int:
        """The node behind a resistor in series with `node`: the node itself where the resistor is not there."""
        if not self.stands(path):
            return node
        after = self.node()
        self.resistors.append(Resistor(node, after, (path,)))
        return after

    def floating(self) -> tuple[str, ...]:
        """Stages whose control terminal (of an op-amp, its free input) has no d.c. path to anything."""
        reached = {self.root(node) for node in self.levels}
        reached |= {node for device in self.devices for node in (device.output, device.lower)}
        links = [(resistor.a, resistor.b) for resistor in self.resistors]
        grown = True
        while grown:
            found = {node for link in links if not reached.isdisjoint(link) for node in link} - reached
            reached |= found
            grown = bool(found)
        ends = [(device.name, device.control) for device in self.devices]
        ends += [(amplifier.name, amplifier.input) for amplifier in self.amplifiers if amplifier.needs_path]
        return tuple(name for name, node in ends if node not in reached)
