"""Figures as text."""

import math

import pytest

from polebook.report import figures


@pytest.mark.parametrize(
    ("value", "shown"),
    [
        (None, "–"),
        (math.nan, "–"),
        (math.inf, "–"),
        (0.0, "0.00"),
        (-0.001, "0.00"),
        (-35.604, "-35.60"),
        (3.0103, "3.01"),
    ],
)
def test_decibels_have_two_decimals_and_no_negative_zero(value, shown):
    assert figures.decibel(value) == shown


@pytest.mark.parametrize(
    ("value", "shown"),
    [
        (None, "–"),
        (0.0, "0.000"),
        (-0.0001, "0.000"),
        (0.98, "0.980"),
        (1.0, "1.000"),
        (9.9996, "10.00"),
        (-35.604, "-35.60"),
        (99.996, "100.0"),
        (999.96, "1000"),
        (1234.4, "1234"),
        (-98765.0, "-98.8k"),
        (1e-12, "0.000"),
    ],
)
def test_ratios_show_three_or_four_digits(value, shown):
    assert figures.ratio(value) == shown


@pytest.mark.parametrize(("value", "shown"), [(None, "–"), (0.419, "41.9 %"), (-0.0001, "0.0 %"), (1.0, "100.0 %")])
def test_shares(value, shown):
    assert figures.share(value) == shown


@pytest.mark.parametrize(
    ("name", "value", "unit", "shown"),
    [
        ("gain", 1000.0, "V/V", "60.00 dB"),
        ("gain", -1000.0, "V/V", "60.00 dB"),
        ("gain", 1e7, "V/A", "140.00 dBΩ"),
        ("gain", 0.0, "V/V", "–"),
        ("gain", None, "V/V", "–"),
        ("upper", 1e6, "V/V", "1.00 MHz"),
        ("lower", 20e3, "V/V", "20.0 kHz"),
        ("peaking", 0.5, "V/V", "0.50 dB"),
        ("noise", 5e-9, "V/V", "5.00 nV/√Hz"),
        ("noise", 1e-12, "V/A", "1.00 pA/√Hz"),
        ("swing", 2.0, "V/V", "2.00 V"),
        ("current", 0.02, "V/V", "20.0 mA"),
        ("overshoot", 0.05, "V/V", "5.0 %"),
        ("rise", 4e-7, "V/V", "400 ns"),
        ("sag", 0.05, "V/V", "5.0 %"),
        ("yield", 0.95, "V/V", "95.0 %"),
    ],
)
def test_targets_carry_their_unit(name, value, unit, shown):
    assert figures.target(name, value, unit) == shown


def test_engineering_figures():
    assert figures.eng(274312.0, "Hz") == "274 kHz"
    assert figures.eng(4700.0) == "4.70k"
    assert figures.eng(None, "Hz") == "–"
    assert figures.eng(math.inf, "Hz") == "–"
