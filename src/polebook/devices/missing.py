"""What a device's figures lack, by name."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from polebook.devices.num import Value


@dataclass(frozen=True, slots=True)
class Lack:
    """A figure that cannot be had, and what it would need.

    figure  gm, rpi, ro, cpi, cmu, cgs, ... or "law" (control voltage against current)
    key     what is missing: "current" for the stage's quiescent current (ic, id, ia), else a key of the card
    why     the formula that asks for it
    """

    figure: str
    key: str
    why: str

    @property
    def of_stage(self) -> bool:
        """True where the stage lacks its current, False where the card lacks a key."""
        return self.key == "current"


class Missing(Exception):
    """Raised by `small_signal` where a figure that the card calls for cannot be had.

    lacks    everything that is missing, not only the first
    figures  what could be had all the same
    """

    def __init__(self, lacks: Iterable[Lack], figures: Mapping[str, Value]) -> None:
        self.lacks = tuple(lacks)
        self.figures = dict(figures)
        super().__init__("; ".join(f"{lack.figure} needs {lack.key}: {lack.why}" for lack in self.lacks))


def settle(figures: dict[str, Value], lacks: list[Lack]) -> dict[str, Value]:
    """The figures, or `Missing` where anything is lacking."""
    if lacks:
        raise Missing(lacks, figures)
    return figures
