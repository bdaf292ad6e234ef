"""Device cards to begin with: typical figures of no particular device, to be replaced by those of one's own."""

from __future__ import annotations

from collections.abc import Mapping
from math import sqrt
from types import MappingProxyType

HIGH_V = 40.0  # above such a rail the bipolar card is one for high voltage

_TO_REPLACE = "typical figures, to be replaced by those of your own device"

# key, value as written, comment
_BJT = (
    ("polarity", '"npn"', ""),
    ("beta", "150", ""),
    ("early_voltage", "80", ""),
    ("rx", "50", ""),
    ("ft", '"250M"', ""),
    ("ft_ic", '"5m"', "the current at which ft was measured"),
    ("cob", '"3p"', ""),
    ("cob_v", "5", "the voltage at which cob was measured"),
    ("c_be0", '"4p"', ""),
    ("v_max", "40", "ratings: a stage past one carries a caution"),
    ("i_max", '"100m"', ""),
    ("p_max", '"300m"', ""),
)
_BJT_HIGH = (
    ("polarity", '"npn"', ""),
    ("beta", "150", ""),
    ("early_voltage", "300", ""),
    ("rx", "50", ""),
    ("ft", '"60M"', ""),
    ("ft_ic", '"10m"', "the current at which ft was measured"),
    ("cob", '"4p"', ""),
    ("cob_v", "20", "the voltage at which cob was measured"),
    ("c_be0", '"20p"', ""),
    ("v_max", "300", "ratings: a stage past one carries a caution"),
    ("i_max", '"100m"', ""),
    ("p_max", '"600m"', ""),
)
_JFET = (
    ("polarity", '"n"', ""),
    ("idss", '"4m"', ""),
    ("vgs_off", "1", "given positive"),
    ("channel_slope", "0.01", ""),
    ("ciss", '"5p"', ""),
    ("crss", '"1p5"', ""),
    ("v_max", "35", "ratings: a stage past one carries a caution"),
    ("p_max", '"300m"', ""),
)
_MOSFET = (
    ("polarity", '"n"', ""),
    ("k", '"20m"', "A/V²: Id = k/2·(Vgs - vgs_th)²"),
    ("vgs_th", "1.2", ""),
    ("channel_slope", "0.01", ""),
    ("ciss", '"20p"', ""),
    ("crss", '"3p"', ""),
    ("coss", '"10p"', ""),
    ("v_max", "60", "ratings: a stage past one carries a caution"),
    ("p_max", '"300m"', ""),
)
_TRIODE = (
    ("mu", "50", ""),
    ("gm", '"2.5m"', ""),
    ("gm_ia", '"3m"', "the current at which gm was measured"),
    ("cgk", '"1p6"', ""),
    ("cga", '"1p6"', ""),
    ("cak", '"p5"', ""),
    ("v_max", "300", "ratings: a stage past one carries a caution"),
    ("p_max", '"1.5"', ""),
)
_OPAMP = (
    ("gbw", '"10M"', ""),
    ("a0", '"100 dB"', ""),
    ("rin", '"2M"', ""),
    ("cin_diff", '"2p"', ""),
    ("cin_cm", '"3p"', ""),
    ("rout", "60", ""),
    ("slew", '"8M"', "V/s"),
    ("iq", '"2m"', ""),
)
_CARDS: Mapping[str, tuple[tuple[str, str, str], ...]] = MappingProxyType(
    {"bjt": _BJT, "jfet": _JFET, "mosfet": _MOSFET, "triode": _TRIODE, "opamp": _OPAMP}
)
NAMES: Mapping[str, str] = MappingProxyType(
    {"bjt": "NPN", "jfet": "JFET", "mosfet": "NMOS", "triode": "TRIODE", "opamp": "OPAMP"}
)
"""Family -> the name that its card gets."""
_WHAT = {
    "bjt": "a small npn transistor",
    "jfet": "a small n-channel junction FET",
    "mosfet": "a small n-channel MOSFET",
    "triode": "a small-signal triode",
    "opamp": "a general-purpose operational amplifier",
}

BETA, VBE = 150.0, 0.65  # of the bipolar card, as the stages count on them
JFET_A, JFET_VGS = 1.44e-3, -0.4  # 0.6² of idss, and the gate voltage for it
MOSFET_VGS = 1.2 + sqrt(2 * 1e-3 / 20e-3)  # at 1 mA
MU, PERVEANCE = 50.0, 3e-3 / (1.5 * 3e-3 / 2.5e-3) ** 1.5


def card_block(family: str, name: str, rail: float = 12.0) -> str:
    """The table [device.NAME] of a card of `family` for stages on a rail of `rail` volts. KeyError for no family."""
    high = family == "bjt" and rail > HIGH_V
    what = "a small npn transistor for high voltage" if high else _WHAT[family]
    rows = [("note", f'"{what}: {_TO_REPLACE}"', ""), ("family", f'"{family}"', "")]
    return table(f"[device.{name}]", [*rows, *(_BJT_HIGH if high else _CARDS[family])])


def table(header: str, rows: list[tuple[str, str, str]]) -> str:
    """A header and its keys, the equal signs and the comments each in one column."""
    width = max(len(key) for key, _, _ in rows)
    reach = max((len(value) for key, value, comment in rows if comment), default=0)
    lines = [header]
    for key, value, comment in rows:
        lines.append(f"{key:{width}} = {value:{reach}}  # {comment}" if comment else f"{key:{width}} = {value}")
    return "\n".join(lines) + "\n"
