"""Two standards: IEC 60063 (preferred values, E series) and IEC 60062:2016 with amendment 1:2019 (letter code)."""

from __future__ import annotations

import pytest

from polebook.quantity import letter, parse
from polebook.series import members
from tests.independent.quantity import number

E6 = (10, 15, 22, 33, 47, 68)
E12 = (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82)
E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)
E96 = (
    100, 102, 105, 107, 110, 113, 115, 118, 121, 124, 127, 130, 133, 137, 140, 143, 147, 150, 154, 158, 162, 165, 169,
    174, 178, 182, 187, 191, 196, 200, 205, 210, 215, 221, 226, 232, 237, 243, 249, 255, 261, 267, 274, 280, 287, 294,
    301, 309, 316, 324, 332, 340, 348, 357, 365, 374, 383, 392, 402, 412, 422, 432, 442, 453, 464, 475, 487, 499, 511,
    523, 536, 549, 562, 576, 590, 604, 619, 634, 649, 665, 681, 698, 715, 732, 750, 768, 787, 806, 825, 845, 866, 887,
    909, 931, 953, 976,
)  # fmt: skip

RESISTORS = {
    "R10": 0.1, "R47": 0.47, "4R7": 4.7, "470R": 470.0, "1K0": 1000.0, "4K7": 4700.0, "47K": 47e3, "47K3": 47.3e3,
    "470K": 470e3, "2M2": 2.2e6, "4M7": 4.7e6,
}  # fmt: skip
CAPACITORS = {"10p": 10e-12, "4n7": 4.7e-9, "1u0": 1e-6, "p33": 0.33e-12}  # p33 recalled from memory


@pytest.mark.parametrize(("name", "row"), [("E6", E6), ("E12", E12), ("E24", E24), ("E96", E96)])
def test_preferred_values(name, row):
    """IEC 60063, tables of the standard."""
    assert tuple(members(name)) == row


@pytest.mark.parametrize("code", RESISTORS)
def test_resistor_codes(code):
    """IEC 60062."""
    assert parse(code, "resistance") == RESISTORS[code]
    assert number(code) == pytest.approx(RESISTORS[code], rel=1e-15)
    assert parse(letter(RESISTORS[code], "resistance"), "resistance") == RESISTORS[code]


@pytest.mark.parametrize("code", CAPACITORS)
def test_capacitor_codes(code):
    """IEC 60062."""
    assert parse(code, "capacitance") == pytest.approx(CAPACITORS[code], rel=1e-15)
    assert number(code) == pytest.approx(CAPACITORS[code], rel=1e-15)
    assert parse(letter(CAPACITORS[code], "capacitance"), "capacitance") == CAPACITORS[code]
