"""How a printed figure is compared. Each check is made of the program and of the independent solution beside it."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
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
