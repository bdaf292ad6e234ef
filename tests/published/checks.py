"""How a printed figure is compared. Each check is made of the program and of the independent solution beside it."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from math import pi
from pathlib import Path
from typing import Any

import pytest

from tests.helpers import figures, pick
from tests.independent.oracle import ledger as independent

CHAINS = Path(__file__).parent / "chains"

Figure = Callable[[str], Any]
_solved = cache(lambda solver, name: solver(CHAINS / f"{name}.toml"))

each_solver = pytest.mark.parametrize(
    "read", [pytest.param(figures, id="program"), pytest.param(independent, id="independent")]
)


def figures_of(read: Callable[[Path], dict[str, Any]], name: str) -> Figure:
    """name of a chain file of this folder -> a function from a figure's name to its value."""
    doc = _solved(read, name)
    return lambda figure: pick(doc, figure)


def printed(value: Any, figure: float, share: float) -> None:
    """`value` agrees with a printed figure within the share that its digits or its method allow."""
    assert value == pytest.approx(figure, rel=share)


def exact(value: Any, figure: float, share: float = 1e-9) -> None:
    """`value` is the exact figure of the stated circuit."""
    assert value == pytest.approx(figure, rel=share)


def _roots(kind: str, read: Callable[[Path], dict[str, Any]], name: str) -> list[complex]:
    rows = _solved(read, name)[kind]
    assert rows is not None, f"{kind} of {name} not resolved"
    return [complex(row["re"], row["im"]) for row in rows]


def poles_of(read: Callable[[Path], dict[str, Any]], name: str) -> list[complex]:
    """Poles of a chain file of this folder, rad/s, by rising size."""
    return _roots("poles", read, name)


def zeros_of(read: Callable[[Path], dict[str, Any]], name: str) -> list[complex]:
    """Zeros, rad/s, by rising size."""
    return _roots("zeros", read, name)


def real_hz(found: list[complex]) -> list[float]:
    """Poles or zeros on the negative real axis as positive corners in Hz, on the positive one as negative ones."""
    assert all(s.imag == 0 for s in found)
    return [-s.real / (2 * pi) for s in found]
