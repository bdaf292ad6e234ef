"""What the columns of a table are, by the words of its header."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from math import pi

from polebook.chain.suggest import listed
from polebook.record.sweeps.gather import COMPLEX, DECIBELS, MAGNITUDE
from polebook.refusal import quoted

FREQUENCY, PHASE, REAL, IMAGINARY = "frequency", "phase", "real part", "imaginary part"
ANGULAR, LEVEL, PLAIN, S_PARAMETER, OTHER = "angular", "level", "plain", "S parameter", "other"
_HZ = {"hz": 1.0, "khz": 1e3, "mhz": 1e6, "ghz": 1e9}
_OF_FREQUENCY = frozenset({"frequency", "freq", "f", "frequencies"})
_BESIDE = frozenset({"in", "stimulus", "sweep", "test", "point"})
_LEVELS = frozenset({"dbm", "dbv", "dbu", "dbc", "dbfs", "dbuv", "dbmv", "dbw"})
_PHASES = frozenset({"phase", "angle", "ang", "arg", "argument"})
_DEGREES = frozenset({"deg", "degs", "degree", "degrees", "°"})
_RADIANS = frozenset({"rad", "rads", "radian", "radians"})
_MAGNITUDES = frozenset({"mag", "magnitude", "abs", "absolute", "modulus", "ratio", "linear", "lin"})
_GAINS = frozenset({"gain", "h", "amplitude", "response", "transfer", "a", "log"})
_VOLTS = frozenset({"v", "mv", "uv", "µv", "w", "mw", "vrms", "vpp"})
_DECIBELS = frozenset({"db", "db20", "dbω", "dbohm", "dbohms"})
_OHMS = frozenset({"ω", "ohm", "ohms"})
_WORD = re.compile(r"[A-Za-zµωΩ\u2126]+[0-9]*|°")
_RATIO = re.compile(r"(?<![a-z])v(?:out|o|2)?\s*/\s*(?:v(?:in|i|s|1)?|a)(?![a-z])|\|[^|]+\|")
_LOGARITHM = re.compile(r"20\s*[*·]?\s*log")
EXAMPLE = 'begin the table with a header such as "Hz, dB, degrees"'


class Unclear(Exception):
    """Why a header does not tell what is measured: what, why, fix."""

    def __init__(self, what: str, why: str, fix: str = EXAMPLE) -> None:
        super().__init__(what)
        self.what, self.why, self.fix = what, why, fix


@dataclass(frozen=True, slots=True)
class Named:
    """What one heading says. kind: FREQUENCY ... OTHER; unit: as it is told, "" where the heading gives none."""

    kind: str
    unit: str = ""
    scale: float = 1.0
    sparameter: bool = False


@dataclass(frozen=True, slots=True)
class Columns:
    """Which columns are read. form as in `gather.Rows`; second is -1 without a phase. notes: what else to tell."""

    count: int
    frequency: int
    first: int
    second: int
    form: str
    scale: float = 1.0
    turn: float = 1.0
    notes: tuple[str, ...] = ()


def plain(count: int) -> Columns:
    """The columns of a table without a header. Raises Unclear where there are too many, or too few."""
    if count not in (2, 3):
        what = "there is one column" if count == 1 else f"there are {count} columns and no header"
        raise Unclear(what, "without a header a table is Hz and dB, or Hz, dB and degrees")
    note = f"no header: the columns are taken as Hz{', dB and degrees' if count == 3 else ' and dB'}"
    return Columns(count, 0, 1, 2 if count == 3 else -1, DECIBELS, notes=(note,))


def named(heading: str) -> Named:
    """What a heading says of its column. Raises Unclear for a unit that could be two."""
    words = _WORD.findall(heading)
    small = {word.lower() for word in words}
    lower = heading.lower()
    spar = {word for word in small if re.fullmatch(r"s[0-9]{2}", word)}
    if spar - {"s21"}:
        return Named(S_PARAMETER)
    units = [word for word in words if word.lower() in _HZ]
    if (units or small & _OF_FREQUENCY) and small <= _OF_FREQUENCY | _BESIDE | _HZ.keys():
        return _frequency(heading, units)
    if small in ({"omega"}, {"ω"}) or {"rad", "s"} <= small:
        return Named(ANGULAR)
    if small & _LEVELS:
        return Named(LEVEL)
    flag = bool(spar)
    if small & _PHASES or small & _DEGREES or small & _RADIANS:
        radians = bool(small & _RADIANS)
        unit = "radians" if radians else "degrees" if small & _DEGREES else ""
        return Named(PHASE, unit, 180.0 / pi if radians else 1.0, flag)
    if small & _DECIBELS or _LOGARITHM.search(lower):
        return Named(DECIBELS, "dB", sparameter=flag)
    if small & {"re", "real"}:
        return Named(REAL, sparameter=flag)
    if small & {"im", "imag", "imaginary"}:
        return Named(IMAGINARY, sparameter=flag)
    if "log" not in small and (small & (_MAGNITUDES | _OHMS) or _RATIO.search(lower)):
        return Named(MAGNITUDE, sparameter=flag)
    if small & _VOLTS:
        return Named(LEVEL)
    return Named(PLAIN if small & _GAINS or flag else OTHER, sparameter=flag)


def _frequency(heading: str, units: list[str]) -> Named:
    if len(units) > 1:
        raise Unclear(f"{quoted(heading)} names two units", "a column has one", "leave one of them out")
    if not units:
        return Named(FREQUENCY)
    if units[0] in ("mHz", "mhz"):
        raise Unclear(f"{quoted(heading)} is not clear", "mHz is the millihertz, MHz the megahertz", "write MHz or Hz")
    scale = _HZ[units[0].lower()]
    return Named(FREQUENCY, {1.0: "Hz", 1e3: "kHz", 1e6: "MHz", 1e9: "GHz"}[scale], scale)


def columns(headings: Sequence[str]) -> Columns:
    """The columns that the headings name. Raises Unclear where they do not say which holds what."""
    found = [named(heading) for heading in headings]
    frequency = _one(headings, found, FREQUENCY)
    if frequency < 0:
        if any(one.kind == ANGULAR for one in found):
            raise Unclear("the table is over angular frequency", "a sweep is over frequency in Hz, kHz, MHz or GHz",
                          "divide by 2π and write Hz")
        raise Unclear("no heading names the frequency", f"the headings are {_listed(headings)}")
    form, first, second = _gain(headings, found)
    phase = -1 if form == COMPLEX else _phase(headings, found)
    used = {frequency, first, second if form == COMPLEX else phase}
    unit = found[frequency].unit
    turn = 1.0 if phase < 0 else found[phase].scale
    told = [f"frequency in {unit or 'Hz'}{'' if unit else ' (the header gives no unit)'}", form]
    if phase >= 0:
        told.append(f"phase in {found[phase].unit or 'degrees (the header gives no unit)'}")
    notes = [f"read as {', '.join(told)}"]
    left = [heading for at, heading in enumerate(headings) if at not in used and heading]
    if left:
        notes.append(f"not used: {_listed(left)}")
    return Columns(len(headings), frequency, first, second if form == COMPLEX else phase, form,
                   found[frequency].scale, turn, tuple(notes))


def _gain(headings: Sequence[str], found: Sequence[Named]) -> tuple[str, int, int]:
    """(form, column, second column of COMPLEX else -1)."""
    usable = [Named(OTHER) if one.sparameter else one for one in found]
    real, imaginary = _one(headings, usable, REAL), _one(headings, usable, IMAGINARY)
    if real >= 0 and imaginary >= 0:
        return COMPLEX, real, imaginary
    for form in (DECIBELS, MAGNITUDE):
        if (at := _one(headings, usable, form)) >= 0:
            return form, at, -1
    if any(one.sparameter for one in found):
        raise Unclear("the table has S21 and no gain", "S21 is no gain without the resistance that it refers to",
                      "save it as Touchstone, .s2p, or write V(load)/EMF in a column dB")
    if real >= 0 or imaginary >= 0:
        raise Unclear("one of real and imaginary part is missing", f"the headings are {_listed(headings)}",
                      "name both: Hz, real, imaginary")
    for at, one in enumerate(found):
        if one.kind == PLAIN:
            raise Unclear(f"{quoted(headings[at])} could be in dB or a ratio", "the heading has no unit",
                          "write dB or V/V behind it, for example gain (dB)")
        if one.kind == LEVEL:
            raise Unclear(f"{quoted(headings[at])} is a level and not a gain",
                          "a gain is output over input, in dB or V/V", "export the gain")
    raise Unclear("no heading names a gain", f"the headings are {_listed(headings)}")


def _phase(headings: Sequence[str], found: Sequence[Named]) -> int:
    """The phase's column, -1 without one. Of several in different units the one in degrees."""
    of_gain = [Named(OTHER) if one.sparameter else one for one in found]
    degrees = [Named(OTHER) if one.unit != "degrees" else one for one in of_gain]
    at = _one(headings, degrees, PHASE)
    return at if at >= 0 else _one(headings, of_gain, PHASE)


def _one(headings: Sequence[str], found: Sequence[Named], kind: str) -> int:
    """The column of that kind, -1 without one. Raises Unclear for two."""
    at = [number for number, one in enumerate(found) if one.kind == kind]
    if len(at) > 1:
        raise Unclear(f"{quoted(headings[at[0]])} and {quoted(headings[at[1]])} are both {kind}",
                      "which of them is meant can't be told", "take one of them out, or rename it")
    return at[0] if at else -1


def _listed(headings: Sequence[str]) -> str:
    return listed([quoted(heading) for heading in headings])
