"""The elements of a chain's network, by node and part number; values are kept apart from them."""

from __future__ import annotations

from dataclasses import dataclass, field

from polebook.stages.stamper import GROUND


@dataclass(frozen=True, slots=True)
class Part:
    """Something with a value and an owner."""

    stage: str
    name: str
    type: str  # R, C, L, gm, tau, gain
    role: str  # "high", "low", "" for what stores nothing
    segment: int
    silent: bool = False  # a resistance that makes no thermal noise

    @property
    def short(self) -> bool:
        """Whether the midband state of a C or L is a short; the others are open there."""
        return (self.type, self.role) in (("C", "low"), ("L", "high"))


@dataclass(frozen=True, slots=True)
class Branch:
    """A two-terminal branch: groups in series, each of parts in parallel.

    series  True: it is carried as an impedance between two nodes of the elimination tree, so that a tiny
            resistor costs no digits; False: it is carried as an admittance.
    bridge  it runs from the input side `i` to the output side `j` of its stage.
    """

    i: int
    j: int
    groups: tuple[tuple[int, ...], ...]
    series: bool
    bridge: bool = False

    @property
    def single(self) -> bool:
        return len(self.groups) == 1 and len(self.groups[0]) == 1


@dataclass(frozen=True, slots=True)
class Transfer:
    """A current part·(V(plus) - V(minus)) from node `output` through the device to node `lower`."""

    part: int
    output: int
    lower: int
    plus: int
    minus: int


@dataclass(frozen=True, slots=True)
class Drive:
    """V(node) = gain·(V(plus) - V(minus)) for a driven node; `gain` is a part."""

    node: int
    plus: int
    minus: int
    gain: int


@dataclass(frozen=True, slots=True)
class Storage:
    """A storage on a driven node: (1 + s·tau) where high, (1 + 1/(s·tau)) where low."""

    part: int
    node: int


@dataclass(frozen=True, slots=True)
class NoiseSource:
    """A noise source that is no resistor.

    part    name that it is booked to: a part of its stage ("gm"), or its own ("ib", "ig", "en", "in")
    i, j    nodes of a current; GROUND both for a voltage
    driven  driven node whose control a voltage stands in, GROUND for a current; ahead  see Stamper.noise_voltage
    """

    stage: str
    part: str
    segment: int
    i: int
    j: int
    driven: int = GROUND
    ahead: int = GROUND


@dataclass(slots=True)
class Segment:
    """The source, one stage or the load: its nodes and elements."""

    name: str
    kind: str
    before: int  # interstage node at its input (GROUND for the source)
    after: int = -1  # interstage node at its output
    nodes: list[int] = field(default_factory=list)  # created by this segment
    branches: list[Branch] = field(default_factory=list)
    transfers: list[Transfer] = field(default_factory=list)
    drives: list[Drive] = field(default_factory=list)
    storages: list[Storage] = field(default_factory=list)
