"""The dimensions that quantities have: units, how they may be spelled, and the words for them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

PREFIXES: Mapping[str, int] = MappingProxyType(
    {"f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "k": 3, "M": 6, "G": 9, "T": 12}
)
_SI = "fpnumkKMGT"  # K is taken for k


@dataclass(frozen=True, slots=True)
class Dimension:
    """What a number measures.

    unit       symbol shown, "" for a plain number
    spellings  accepted unit -> power of ten that it stands for ("V/us" -> 6)
    noun       "a capacitance";  unit_name  "farad", in the plural "farads" (`units`)
    example    a value as one would type it
    prefixes   the prefixes taken before the unit or alone
    marks      letters that may stand in the place of the decimal point, as in IEC 60062
    decibels   unit in dB -> nothing to do with the unit itself, but read as 20·log10
    stays_db   a number in dB that is kept in dB
    """

    name: str
    unit: str
    spellings: Mapping[str, int]
    noun: str
    unit_name: str
    units: str
    example: str
    prefixes: str = _SI
    marks: str = _SI
    decibels: tuple[str, ...] = ()
    stays_db: bool = False


def _dimension(
    name: str, unit: str, spellings: str, noun: str, unit_name: str, example: str,
    *, units: str = "", prefixes: str = _SI, marks: str = _SI, decibels: str = "", stays_db: bool = False,
) -> tuple[str, Dimension]:
    table = dict.fromkeys(spellings.split(), 0)
    for word in tuple(table):
        head, slash, tail = word.partition("/")
        if tail == "s" and slash:
            table.update({f"{head}/us": 6, f"{head}/ms": 3, f"{head}/ns": 9})
    if "%" in table:
        table["%"] = -2
    return name, Dimension(
        name, unit, MappingProxyType(table), noun, unit_name, units or unit_name + "s", example,
        prefixes, marks if prefixes else "", tuple(decibels.split()), stays_db,
    )


_OHM = "Ω ohm ohms Ohm Ohms"
_DENSITY_V = "V/√Hz V/rtHz V/√(Hz) V/sqrtHz V/sqrt(Hz) V/Hz^0.5"
_DENSITY_A = _DENSITY_V.replace("V/", "A/")

DIMENSIONS: Mapping[str, Dimension] = MappingProxyType(
    dict(
        (
            _dimension("resistance", "Ω", _OHM, "a resistance", "ohm", "4k7", marks=_SI + "R"),
            _dimension("capacitance", "F", "F", "a capacitance", "farad", "100n", marks=_SI + "F"),
            _dimension("inductance", "H", "H", "an inductance", "henry", "10u", units="henries"),
            _dimension("voltage", "V", "V", "a voltage", "volt", "3m"),
            _dimension("current", "A", "A", "a current", "ampere", "2m"),
            _dimension("frequency", "Hz", "Hz", "a frequency", "hertz", "100k", units="hertz"),
            _dimension("time", "s", "s", "a time", "second", "400n"),
            _dimension("transconductance", "S", "S A/V mho", "a transconductance", "siemens", "5m", units="siemens"),
            _dimension(
                "k_factor", "A/V²", "A/V² A/V^2 A/V2", "a transconductance factor", "A/V²", "2m", units="A/V²"
            ),
            _dimension("per_volt", "1/V", "1/V /V V^-1", "a slope per volt", "1/V", "0.02", units="1/V"),
            _dimension("per_second", "V/s", "V/s", "a slew rate", "volt per second", "10M", units="volts per second"),
            _dimension("density_v", "V/√Hz", _DENSITY_V, "a voltage noise density", "V/√Hz", "5n", units="V/√Hz"),
            _dimension("density_a", "A/√Hz", _DENSITY_A, "a current noise density", "A/√Hz", "2p", units="A/√Hz"),
            _dimension("power", "W", "W", "a power", "watt", "300m"),
            _dimension("temperature", "°C", "°C C", "a temperature", "degree Celsius", "25", prefixes="",
                       units="degrees Celsius"),
            # K alone would be read as kilo where kelvin per watt is meant
            _dimension("thermal", "K/W", "K/W °C/W C/W", "a thermal resistance", "kelvin per watt", "200",
                       prefixes="mk", units="kelvins per watt"),
            _dimension("ratio", "", "V/V", "a ratio", "V/V", "40", units="V/V or dB", decibels="dB"),
            _dimension("factor", "", "", "a plain number", "plain number", "200", units="plain numbers"),
            _dimension("decibel", "dB", "dB", "a figure in dB", "dB", "0.5 dB", units="dB", prefixes="",
                       stays_db=True),
            _dimension("share", "", "%", "a share", "%", "5 %", units="% or as a plain number", prefixes=""),
            _dimension("gain_source", "", "V/V V/A " + _OHM, "a gain", "V/V, V/A or dB", "60 dB",
                       units="V/V, V/A (ohms) or dB", decibels="dB dBΩ dBohm"),
            _dimension("amplitude", "", "V A", "an amplitude", "volt or ampere", "3m", units="volts or amperes"),
            _dimension("density", "", f"{_DENSITY_V} {_DENSITY_A}", "a noise density", "V/√Hz or A/√Hz", "5n",
                       units="V/√Hz or A/√Hz"),
        )
    )
)
