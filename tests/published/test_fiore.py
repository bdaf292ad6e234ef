"""J. M. Fiore, Op Amps and Linear Integrated Circuits: Concepts and Applications, examples 5.7 and 5.8 (pp. 148-149).

The figures were seen in a notebook of a third party that solves the book's examples, not in print.
"""

from __future__ import annotations

import pytest

from polebook.book.build import document, ledger
from polebook.chain.read import load, parse
from tests.published.checks import CHAINS, printed

PATH = CHAINS / "SWING-1.toml"


def full_power_hz(**changed: str) -> float:
    text = PATH.read_text(encoding="utf-8")
    for before, after in changed.values():
        assert before in text
        text = text.replace(before, after)
    return float(document(ledger(parse(text, "fiore.toml")), ("overall",))["overall"]["full_power_hz"])


def test_full_power_bandwidth() -> None:
    """0.5 V/us lets 12 V peak pass up to 6631 Hz."""
    found = document(ledger(load(str(PATH))), ("overall",))["overall"]["full_power_hz"]
    printed(found, 6631.0, 1e-4)


def test_slew_rate_for_a_frequency() -> None:
    """20 kHz at 10 V peak asks for 1.257 V/us: with just that, the full power goes up to 20 kHz."""
    found = full_power_hz(largest=('largest = "12"', 'largest = "10"'), slew=("0.5 V/us", "1.257 V/us"))
    printed(found, 20e3, 5e-4)


def test_the_target_stands_in_for_the_largest_signal() -> None:
    found = full_power_hz(largest=('largest = "12"\n', ""), target=("[load]", '[target]\nswing = "12"\n\n[load]'))
    assert found == pytest.approx(0.5e6 / (2 * 3.141592653589793 * 12.0), rel=1e-8)
