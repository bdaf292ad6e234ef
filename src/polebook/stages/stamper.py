"""What a topology may say about its circuit. The circuit package implements it; stages never import that."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Protocol

from polebook.devices.spectrum import Noise, Spectrum

# A float, a complex number or an array of them: the stamps never look inside.
Value = Any
Figures = Mapping[str, Value | None]  # a device's small-signal figures; absent or None: not there
Labelled = Sequence[tuple[str, str, Value | None]]  # (part, type, value); type R, C-low, C-high, L-low, L-high

GROUND = -1


class ArmLike(Protocol):
    """One arm of a ladder, as the chain holds it."""

    @property
    def number(self) -> int: ...
    @property
    def series(self) -> bool: ...
    @property
    def parts(self) -> tuple[str, ...]: ...
    @property
    def role(self) -> str: ...


@dataclass(frozen=True, slots=True)
class Given:
    """What a stage is stamped from.

    number   key of the stage -> SI value, None where absent ("arms.1.series_r", "poles.1" for lists)
    figures  small-signal figures of its card at its operating point; `upper` those of a cascode's upper device
    noise    its device's noise sources; `upper_noise` those of a cascode's upper device
    """

    family: str
    number: Callable[[str], Value | None]
    figures: Figures
    upper: Figures
    arms: Sequence[ArmLike] = ()
    poles: int = 0
    lower_poles: int = 0
    noise: Noise = field(default_factory=dict)
    upper_noise: Noise = field(default_factory=dict)


class Stamper(Protocol):
    """Collects the elements of one stage, its source or its load.

    A value of None or 0 means that the part is not there: a resistor in series is then a wire, anything
    across two nodes is left away. `site` names where a node's capacitance is booked: "in" and "out" are
    the interstage nodes before and after the stage, "" is none, any other word an inner site of the stage.
    """

    def stands(self, value: Value | None) -> bool:
        """Whether a part of this value is there at all."""

    def node(self, label: str, site: str) -> int:
        """A new node of this stage."""

    def driven(self, label: str, site: str) -> int:
        """A node that an ideal amplifier drives: no current balance is written for it."""

    def series(self, label: str, node: int, site: str, parts: Labelled) -> int:
        """Parts in parallel, in series with `node`; none of them a "C-high".

        Returns the node behind them, `node` itself where none is there.
        """

    def resistor(self, part: str, i: int, j: int, value: Value | None, bridge: bool = False,
                 silent: bool = False) -> None:
        """A resistor across two nodes; a bridge runs from the input side i to the output side j.

        A silent one is only a figure of a device or data sheet: no thermal noise comes from it.
        """

    def capacitor(self, part: str, i: int, j: int, value: Value | None, bridge: bool = False) -> None:
        """A high-role capacitor across two nodes."""

    def link(self, i: int, j: int, parts: Labelled, bridge: bool = False) -> None:
        """Parts in series, across two nodes."""

    def transconductance(self, part: str, output: int, lower: int, plus: int, minus: int, value: Value | None) -> None:
        """A current value·(V(plus) - V(minus)) that flows from node `output` through the device to node `lower`."""

    def amplifier(self, node: int, plus: int, minus: int, gain: Value) -> None:
        """The equation of a driven node: V(node) = gain·(V(plus) - V(minus)), before its storages."""

    def lag(self, part: str, node: int, tau: Value) -> None:
        """Turns a driven node's V into (1 + s·tau)·V: one real upper pole."""

    def washout(self, part: str, node: int, tau: Value) -> None:
        """Turns a driven node's V into (1 + 1/(s·tau))·V: one high-pass corner."""

    def noise_current(self, part: str, i: int, j: int, spectrum: Spectrum | None) -> None:
        """A noise current between two nodes, booked to `part`; None where it is there but cannot be told."""

    def noise_voltage(self, part: str, node: int, ahead: int, spectrum: Spectrum | None) -> None:
        """A noise voltage in the control of a driven node, booked to `part`.

        Where `ahead` is not ground, it stands in series with all else too that the stage has hung across that node
        and another one: it lies ahead of a whole input, not only of what senses it.
        """
