"""Keys of the tables that are neither a stage nor a card."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from polebook.param import Param
from polebook.series import NAMES as SERIES_NAMES

FORMAT = 1
MOST_STAGES = 64
MOST_ARMS = 256  # of one ladder
MOST_POLES = 64  # of one list of a block
BUDGET_DB = 3.010299956639812  # 10·log10(2): what the nodes of a chain may lose together at an edge

SHAPES = ("normal", "uniform")

_NOTE = Param("note", "text", "free text")
_ALLOT = "dB of the upper-edge budget allotted to the node "

TOP = (
    Param("format", "format", "version of the chain format, the number 1", required=True),
    Param("title", "text", "what the chain is"),
    _NOTE,
)

SUPPLY = (
    Param("positive", "voltage", "positive rail", sign="nonnegative", default="0"),
    Param("negative", "voltage", "negative rail, written with its sign (-12)", sign="nonpositive", default="0"),
    Param("temperature", "temperature", "of every part; sets kT/q, vbe and thermal noise", sign="any", default="25"),
)

SOURCE = (
    Param(
        "kind",
        "choice",
        "an EMF behind `resistance`, or a current source with it across",
        required=True,
        choices=("voltage", "current"),
    ),
    Param(
        "resistance",
        "resistance",
        "of the source: required for a voltage (0 = ideal); current: absent = open",
        sign="nonnegative",
    ),
    Param("couple", "capacitance", "in series with the EMF; voltage sources only", role="low"),
    Param("capacitance", "capacitance", "across the source's terminals (cable)", role="high", sign="nonnegative"),
    Param("largest", "amplitude", "peak of the largest signal"),
    Param("smallest", "amplitude", "peak of the smallest signal of interest"),
    Param("allot", "decibel", _ALLOT + "n0", sign="nonnegative"),
)

LOAD = (
    Param("couple", "capacitance", "series capacitor between the last stage and the load", role="low"),
    Param("resistance", "resistance", "of the load (absent = open)"),
    Param("capacitance", "capacitance", "of the load", role="high", sign="nonnegative"),
    Param("allot", "decibel", _ALLOT + "`load`; only with couple", sign="nonnegative"),
)

TARGET = (
    Param("gain", "gain_source", "magnitude of the gain, at `reference` where that is set, else midband"),
    Param("gain_tolerance", "decibel", "how far the gain may be off, either side", default="1 dB"),
    Param("lower", "frequency", "the lower -3 dB edge must lie at or below it"),
    Param("upper", "frequency", "the upper -3 dB edge must lie at or above it"),
    Param("peaking", "decibel", "most that the response may rise above the midband gain"),
    Param("noise", "density", "input-referred noise density at the reference frequency"),
    Param("swing", "voltage", "peak, undistorted, at the load"),
    Param("current", "current", "greater rail's total quiescent current"),
    Param("overshoot", "share", "of the step response"),
    Param("rise", "time", "10-90 % rise time"),
    Param("pulse", "time", "length of the pulse that the sag is judged for"),
    Param("sag", "share", "of a pulse of length `pulse`"),
    Param("reference", "frequency", "where gain and noise are quoted; never moves an edge"),
    Param("noise_from", "frequency", "lower end of the band of the integrated noise", sign="nonnegative"),
    Param("noise_to", "frequency", "upper end of the band of the integrated noise"),
    Param("yield", "share", "share of built chains that must meet all targets"),
    _NOTE,
)
SETTINGS = frozenset({"gain_tolerance", "pulse", "reference", "noise_from", "noise_to", "note"})
"""Keys of [target] that are no target themselves."""

PREFERRED = (
    Param("resistor", "choice", "series that resistors snap to", default="E24", choices=SERIES_NAMES),
    Param("capacitor", "choice", "series that capacitors snap to", default="E12", choices=SERIES_NAMES),
    Param("inductor", "choice", "series that inductors snap to", default="E12", choices=SERIES_NAMES),
)

TOLERANCE = (
    Param("resistor", "share", "of resistors", sign="nonnegative", default="1 %"),
    Param("capacitor", "share", "of capacitors", sign="nonnegative", default="5 %"),
    Param("inductor", "share", "of inductors", sign="nonnegative", default="10 %"),
    Param(
        "device",
        "share",
        "of a card's k, idss, thresholds, gm, mu, gbw, a0, ft and capacitances",
        sign="nonnegative",
        default="20 %",
    ),
    Param("beta", "share", "of a bipolar card's beta", sign="nonnegative", default="50 %"),
    Param(
        "matching", "share", "further spread of each device about its card's draw", sign="nonnegative", default="0 %"
    ),
    Param("supply", "share", "of the rails", sign="nonnegative", default="0 %"),
    Param(
        "shape",
        "choice",
        "of the spread: normal, or uniform over the whole tolerance",
        default="normal",
        choices=SHAPES,
    ),
)

BENCH = (
    Param("date", "date", "when it was measured, a TOML date: 2026-05-04"),
    Param("unit", "text", "which board"),
    Param("at", "text", "stage at whose output it was measured (absent = the load)"),
    Param("gain", "gain_source", "gain measured", sign="nonzero"),
    Param("lower", "frequency", "lower edge measured"),
    Param("upper", "frequency", "upper edge measured"),
    Param("file", "text", "sweep beside the chain file: Hz, dB[, degrees]"),
    _NOTE,
)

SECTIONS: Mapping[str, tuple[Param, ...]] = MappingProxyType(
    {
        "supply": SUPPLY,
        "source": SOURCE,
        "load": LOAD,
        "target": TARGET,
        "preferred": PREFERRED,
        "tolerance": TOLERANCE,
    }
)
"""Tables that stand once: name -> keys."""

TABLES = ("supply", "source", "stage", "load", "target", "preferred", "tolerance", "device", "bench")

RESERVED = frozenset(
    {"source", "load", "overall", "account", "supply", "target", "preferred", "tolerance", "device", "bench"}
)
"""Names that no stage may have, besides n0, n1, ..."""
