"""Quantities read, refused and written."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.quantity import DIMENSIONS, Refused, engineering, letter, parse

READ = [
    # text, dimension, the float that the decimal number itself is
    ("4k7", "resistance", 4700.0),
    ("4K7", "resistance", 4700.0),
    ("0R47", "resistance", 0.47),
    ("R47", "resistance", 0.47),
    ("47R", "resistance", 47.0),
    ("47 R", "resistance", 47.0),
    ("4R7", "resistance", 4.7),
    ("1M0", "resistance", 1e6),
    ("k47", "resistance", 470.0),
    ("2m2", "resistance", 2.2e-3),
    ("4.7k", "resistance", 4700.0),
    ("4.7 kΩ", "resistance", 4700.0),
    ("4.7 k\u2126", "resistance", 4700.0),
    ("4k7 Ω", "resistance", 4700.0),
    ("4.7 kohm", "resistance", 4700.0),
    ("4.7 k ohm", "resistance", 4700.0),
    ("1e3 ohm", "resistance", 1000.0),
    ("1E3", "resistance", 1000.0),
    ("2n2", "capacitance", 2.2e-9),
    ("2n2F", "capacitance", 2.2e-9),
    ("p33", "capacitance", 3.3e-13),
    ("100p", "capacitance", 1e-10),
    ("100 pF", "capacitance", 1e-10),
    ("10u", "capacitance", 1e-5),
    ("10µ", "capacitance", 1e-5),
    ("10\u03bcF", "capacitance", 1e-5),
    ("1µ5", "capacitance", 1.5e-6),
    ("1F", "capacitance", 1.0),
    ("0F22", "capacitance", 0.22),
    ("4.7f", "capacitance", 4.7e-15),
    ("10 mH", "inductance", 0.01),
    ("1M5", "frequency", 1.5e6),
    ("0.92M", "frequency", 920000.0),
    ("1m", "current", 1e-3),
    ("-12", "voltage", -12.0),
    ("\u221212 V", "voltage", -12.0),
    ("+3.3 mV", "voltage", 3.3e-3),
    (" 12\u00a0V ", "voltage", 12.0),
    (".5", "voltage", 0.5),
    ("5.", "voltage", 5.0),
    ("400 ns", "time", 4e-7),
    ("40 mS", "transconductance", 0.04),
    ("40 mA/V", "transconductance", 0.04),
    ("2 mA/V²", "k_factor", 2e-3),
    ("2 mA/V^2", "k_factor", 2e-3),
    ("0.02 1/V", "per_volt", 0.02),
    ("10 V/us", "per_second", 1e7),
    ("10 V/µs", "per_second", 1e7),
    ("13 MV/s", "per_second", 1.3e7),
    ("5n", "density_v", 5e-9),
    ("5 nV/√Hz", "density_v", 5e-9),
    ("5 nV/rtHz", "density", 5e-9),
    ("2 pA/√Hz", "density_a", 2e-12),
    ("2 pA/sqrt(Hz)", "density", 2e-12),
    ("300 mW", "power", 0.3),
    ("25", "temperature", 25.0),
    ("25 °C", "temperature", 25.0),
    ("-40 C", "temperature", -40.0),
    ("200 K/W", "thermal", 200.0),
    ("0.2 °C/W", "thermal", 0.2),
    ("60 dB", "ratio", 1000.0),
    ("-20dB", "ratio", 0.1),
    ("40 V/V", "ratio", 40.0),
    ("100k", "ratio", 1e5),
    ("200", "factor", 200.0),
    ("0.5 dB", "decibel", 0.5),
    ("0.5", "decibel", 0.5),
    ("5 %", "share", 0.05),
    ("0.1%", "share", 0.001),
    ("1e1 %", "share", 0.1),
    ("0.95", "share", 0.95),
    ("60 dB", "gain_source", 1000.0),
    ("60 dBΩ", "gain_source", 1000.0),
    ("10 kΩ", "gain_source", 1e4),
    ("10 kV/A", "gain_source", 1e4),
    ("40 V/V", "gain_source", 40.0),
    ("3 mV", "amplitude", 3e-3),
    ("3 mA", "amplitude", 3e-3),
    ("0", "capacitance", 0.0),
    ("-0", "capacitance", 0.0),
]


@pytest.mark.parametrize(("text", "dimension", "value"), READ)
def test_a_quantity_is_read_exactly(text: str, dimension: str, value: float) -> None:
    assert parse(text, dimension) == value
    assert math.copysign(1.0, parse(text, dimension)) == math.copysign(1.0, value)


@pytest.mark.parametrize("value", [12, 12.0, -3, 0, 1e-18, 2**70])
def test_a_number_of_the_file_is_taken_as_it_is(value: float) -> None:
    assert parse(value, "voltage") == float(value)


REFUSED = [
    # raw, dimension, words of the reason, words of the remedy
    ("10 nF", "resistance", "a resistance is in ohms, and F is the unit of a capacitance", 'write it in ohms: "10n"'),
    ("100 uV", "capacitance", "V is the unit of a voltage", 'write it in farads: "100u"'),
    ("4k7 Ω", "capacitance", "Ω is the unit of a resistance", 'write it in farads: "4k7"'),
    ("47R", "capacitance", "R says ohms", 'for example "100n"'),
    ("4R7", "inductance", "R in the place of the decimal point says ohms", 'for example "10u"'),
    ("0F22", "resistance", "says farads", "ohms"),
    ("5 %", "resistance", "% is the unit of a share", 'for example "4k7"'),
    ("1,5k", "resistance", "a comma can be read as a decimal point or as a separator", '"1.5k"'),
    ("1,500,000", "resistance", "a comma", 'leave the separators out: "1500000"'),
    ("1meg", "resistance", '"meg" is not a prefix: M is mega, m is milli', 'write M for mega: "1M"'),
    ("1.5 MEG", "frequency", "M is mega, m is milli", '"1.5M"'),
    ("4k7k", "resistance", "k is both the decimal point and the prefix", 'write "4k7"'),
    ("4.7k7", "resistance", "it has a decimal point, and k stands for one as well", 'write "4.7k"'),
    ("1e3k", "resistance", '"1e3" has an exponent already and k is a prefix', 'write "1e3" or "1k"'),
    ("1e3 kHz", "frequency", "it can be one or the other", 'write "1e3Hz" or "1kHz"'),
    ("1e3k3", "resistance", "an exponent and the letter k", 'write "1e3"'),
    ("k", "resistance", "there is no number before the letter", 'for example "1k"'),
    ("R", "resistance", "there is no number before the letter", '"1R"'),
    ("", "resistance", "the text is empty", 'write a value, for example "4k7", or take the key out'),
    ("  ", "capacitance", "the text is empty", "take the key out"),
    ("abc", "resistance", "it does not begin with a number", "write it in ohms"),
    ("1.2.3", "resistance", "there are two decimal points in it", "write it in ohms"),
    ("1_000", "resistance", "an underscore has no place", '"1000"'),
    ("nan", "voltage", "it is not a number", "volts"),
    ("-inf", "voltage", "it is infinite", "volts"),
    ("1e400", "voltage", "past the largest number", "volts"),
    ("1e-400", "voltage", "too near to zero", "volts"),
    ("9" * 65, "voltage", "it has 65 characters", "volts"),
    ("1e" + "9" * 50, "voltage", "past the largest number", "volts"),
    ("20 khz", "frequency", "capitals matter", 'write "20 kHz"'),
    ("60 db", "ratio", "capitals matter", 'write "60 dB"'),
    ("5 bananas", "resistance", '"bananas" after the number is not a prefix (f p n u m k M G T) or the unit Ω', "ohms"),
    ("5k pF", "capacitance", '"k pF" after the number', "farads"),
    ("60 dB", "resistance", "a resistance is not given in dB", "ohms"),
    ("20 dB", "factor", "a plain number is not given in dB", 'for example "200"'),
    ("200 Hz", "factor", "a plain number has no unit, and Hz is the unit of a frequency", 'write "200"'),
    ("1e5 dB", "ratio", "no ratio that can be held is that large", "V/V or dB"),
    ("-1e5 dB", "ratio", "no ratio that can be held is that large or that small", "V/V or dB"),
    ("300 K", "temperature", "temperatures are in degrees Celsius, and K is not", "°C"),
    ("77 °F", "temperature", "temperatures are in degrees Celsius", "°C"),
    ("1k", "temperature", "a temperature takes no prefix k", "25"),
    ("10 K", "thermal", "K alone could be kelvin or kilo", '"10 K/W"'),
    ("5 mdB", "decibel", "takes no prefix m", "dB"),
    ("5n", "share", "a share takes no prefix n", "5 %"),
    ("100 Hz", "share", "Hz is the unit of a frequency", "100"),
    ("٤k٧", "resistance", "it does not begin with a number", "ohms"),
    (True, "resistance", "true and false are switches", "ohms"),
    (float("nan"), "resistance", "it is not a number", "ohms"),
    (float("inf"), "resistance", "it is infinite", "ohms"),
    (10**400, "resistance", "past the largest number", "ohms"),
    ([1], "resistance", "one number is asked for", "ohms"),
    ({}, "resistance", "one number is asked for", "ohms"),
    (None, "resistance", "one number is asked for", "ohms"),
]


@pytest.mark.parametrize(("raw", "dimension", "why", "fix"), REFUSED)
def test_what_is_no_quantity_is_refused_with_reason_and_remedy(raw: object, dimension: str, why: str, fix: str) -> None:
    with pytest.raises(Refused) as caught:
        parse(raw, dimension)
    refused = caught.value
    assert why in refused.why
    assert fix in refused.fix
    assert refused.what.endswith(f" is not {DIMENSIONS[dimension].noun}") and len(refused.what) < 100
    assert isinstance(refused, ValueError)


def test_a_whole_number_of_any_length_is_refused_at_once() -> None:
    with pytest.raises(Refused) as caught:
        parse(16**20000, "resistance")  # hexadecimal in a file: Python writes no decimal digits of it
    assert "past the largest number" in caught.value.why and len(caught.value.what) < 80


def test_what_is_refused_is_quoted_as_it_was_written() -> None:
    for raw, shown in (("10 nµ", '"10 nµ"'), (True, "true"), (False, "false"), ([1], "a list"), (float("nan"), "nan")):
        with pytest.raises(Refused) as caught:
            parse(raw, "resistance")
        assert caught.value.what == f"{shown} is not a resistance"


@pytest.mark.parametrize("name", DIMENSIONS)
def test_every_dimension_reads_its_own_example_and_units(name: str) -> None:
    dim = DIMENSIONS[name]
    assert dim.name == name
    assert parse(dim.example, name) > 0
    for unit, power in dim.spellings.items():
        assert parse(f"3 {unit}", name) == float(f"3e{power}")
        if not unit[0].isdigit():
            assert parse(f"3{unit}", name) == float(f"3e{power}")
    with pytest.raises(Refused) as caught:
        parse("3 lux", name)
    assert caught.value.why and caught.value.fix


@given(st.text(alphabet="0123456789.,eE+-kKMmunpfRFHzΩ %dBV/√_ \t", max_size=8), st.sampled_from(sorted(DIMENSIONS)))
@settings(max_examples=400, deadline=None, derandomize=True)
def test_any_text_is_read_to_a_finite_number_or_refused(text: str, dimension: str) -> None:
    try:
        value = parse(text, dimension)
    except Refused as refused:
        assert refused.what and refused.why and refused.fix
    else:
        assert math.isfinite(value) and any(char.isdigit() for char in text)


@given(st.text(max_size=8), st.sampled_from(sorted(DIMENSIONS)))
@settings(max_examples=100, deadline=None, derandomize=True)
def test_foreign_characters_are_refused_like_the_rest(text: str, dimension: str) -> None:
    try:
        parse(text, dimension)
    except Refused as refused:
        assert refused.why


values = st.floats(min_value=1e-17, max_value=1e17)
rounded = st.builds(lambda digits, power: float(f"{digits}e{power}"), st.integers(1, 9999), st.integers(-18, 14))


@given(st.one_of(values, rounded), st.sampled_from(sorted(DIMENSIONS)), st.booleans())
@settings(max_examples=400, deadline=None, derandomize=True)
def test_what_is_written_is_read_back_exactly(value: float, dimension: str, negative: bool) -> None:
    value = -value if negative else value
    assert parse(letter(value, dimension), dimension) == value


@given(values, st.integers(1, 17))
@settings(max_examples=300, deadline=None, derandomize=True)
def test_the_engineering_format_is_read_back_within_its_digits(value: float, digits: int) -> None:
    back = parse(engineering(value, digits=digits), "ratio")
    assert abs(back - value) <= 0.5000001 * 10.0 ** (math.floor(math.log10(value)) + 1 - digits) + 1e-15 * value
    if digits == 17:
        assert back == value
    assert parse(engineering(value, "V", digits), "voltage") == back


LETTERS = [
    (4700.0, "4k7", "4k7"),
    (0.47, "R47", "470m"),
    (47.0, "47R", "47"),
    (4.7, "4R7", "4.7"),
    (1e6, "1M", "1M"),
    (1.5e6, "1M5", "1M5"),
    (100000.0, "100k", "100k"),
    (0.05, "R05", "50m"),
    (0.0047, "4m7", "4m7"),
    (2.2e-9, "2n2", "2n2"),
    (3.3e-13, "330f", "p33"),
    (1e-10, "100p", "100p"),
    (4712.345, "4.712345k", "4.712345k"),
    (1e-18, "1e-18", "1e-18"),
    (2.5e16, "2.5e16", "2.5e16"),
    (0.0, "0", "0"),
]


@pytest.mark.parametrize(("value", "resistance", "capacitance"), LETTERS)
def test_the_letter_code_is_the_shortest_that_is_exact(value: float, resistance: str, capacitance: str) -> None:
    assert letter(value, "resistance") == resistance
    assert letter(value, "capacitance") == capacitance


def test_other_dimensions_are_written_with_point_and_prefix() -> None:
    assert letter(1.5e6, "frequency") == "1.5M"
    assert letter(-12.0, "voltage") == "-12"
    assert letter(25.0, "temperature") == "25"
    assert letter(25000.0, "temperature") == "25000"
    assert letter(0.05, "share") == "0.05"
    assert letter(1e-9, "share") == "1e-9"


def test_the_engineering_format() -> None:
    assert engineering(274312) == "274k"
    assert engineering(274312, "Hz") == "274 kHz"
    assert engineering(4700) == "4.70k"
    assert engineering(4700, digits=4) == "4.700k"
    assert engineering(999.96) == "1.00k"
    assert engineering(999.4) == "999"
    assert engineering(-4.7e-6, "A") == "-4.70 uA"
    assert engineering(5e-9, "V/√Hz") == "5.00 nV/√Hz"
    assert engineering(0) == "0"
    assert engineering(0, "V") == "0 V"
    assert engineering(None) == engineering(math.nan, "V") == "–"
    assert engineering(-math.inf, "V") == "-inf V"
    assert engineering(1e-18, "F") == "1.00e-18 F"
    assert engineering(2e18) == "2.00e18"
    assert engineering(123456, digits=1) == "100k"
    assert engineering(60.12, "dB") == "60.1 dB"
    assert engineering(0.5, "dB") == "0.500 dB"
    assert engineering(0.05, "%", digits=2) == "0.050 %"
