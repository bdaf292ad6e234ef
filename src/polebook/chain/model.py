"""A chain as read: structure, and every number of the file by its path, in SI units."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from polebook.problem import Place


@dataclass(frozen=True, slots=True)
class Arm:
    """One arm of a ladder. `parts` are its keys in the file's order (`series_r`, `series_c`, ...)."""

    number: int  # 1, 2, ...
    series: bool  # False: shunt
    parts: tuple[str, ...]
    role: str = ""  # "", "low", "high"

    def role_of(self, part: str) -> str:
        """End of the band at which a part acts: "low", "high", "" for a resistor."""
        if part.endswith("_r"):
            return ""
        return self.role or ("low" if self.series == part.endswith("_c") else "high")


@dataclass(frozen=True, slots=True)
class Stage:
    """One stage: what it is. Its numbers stand in `Chain.numbers` as "NAME.key"."""

    name: str
    kind: str
    device: str = ""  # card of the device (the lower one of a cascode), or of the op-amp
    upper: str = ""  # card of a cascode's upper device
    left_out: bool = False
    output_to: str = ""  # positive, ground, negative
    lower_to: str = ""
    arms: tuple[Arm, ...] = ()
    poles: int = 0  # how many numbers "NAME.poles.1" ... stand
    lower_poles: int = 0
    inverting: bool | None = None  # of a block whose gain is in dB
    free: tuple[str, ...] = ()
    note: str = ""


@dataclass(frozen=True, slots=True)
class Card:
    """A device card. Its numbers stand in `Chain.numbers` as "device.NAME.key"."""

    name: str
    family: str  # bjt, mosfet, jfet, triode, opamp
    polarity: str = ""  # npn, pnp, n, p; "" for valves and op-amps
    note: str = ""


@dataclass(frozen=True, slots=True)
class Bench:
    """What was measured on hardware. Its numbers stand as "bench.1.gain" ..."""

    number: int
    date: str = ""
    unit: str = ""
    at: str = ""
    file: str = ""
    note: str = ""


@dataclass(frozen=True, slots=True)
class Chain:
    """Everything a chain file says.

    numbers  path -> SI value (dB figures of `decibel` dimension stay in dB; gains are V/V), of what the
             file gives and of every default that CHAIN_FORMAT states as a number. A key that is absent
             and has no default is absent here too.
    given    the paths that the file itself states (no defaults)
    places   path -> where its value stands in the file, of words too; also "Q1" (the stage's header), "device.D",
             "bench.1", and "source", "load", "supply", "target", "preferred", "tolerance" (line 0 where absent)
    output   the stage at whose output the chain is looked at, all that follows hanging there; "" for the load. No file
             says so: a bench that was measured there asks for it.
    text     what it was read from; numbers may have been put in the place of the text's since
    """

    path: str
    title: str
    source_kind: str  # "voltage" or "current"
    stages: tuple[Stage, ...]
    cards: Mapping[str, Card]
    numbers: Mapping[str, float]
    given: frozenset[str]
    places: Mapping[str, Place]
    preferred: Mapping[str, str] = field(default_factory=dict)  # resistor -> "E24" ...
    spread_shape: str = "normal"
    benches: tuple[Bench, ...] = ()
    note: str = ""
    target_note: str = ""
    has_targets: bool = False
    digest: str = ""
    output: str = ""
    text: str = field(default="", compare=False, repr=False)

    def get(self, path: str, default: float | None = None) -> float | None:
        """The number at `path`, or `default`."""
        return self.numbers.get(path, default)
