"""How the figures of the step response, of the sag and of the group delay came about."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from math import atan2, exp
from typing import TYPE_CHECKING

from polebook.book.delay import turns
from polebook.book.pulse import Pulse
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.formula import Working
from polebook.quantity import engineering
from polebook.solve.marks import HIGH, LOW

if TYPE_CHECKING:
    from polebook.solve.aberth import Complex

FELT = 1e-12  # of the final value; a mode that has faded below it at the time in question is left out
UPPER, LOWER = "upper network", "lower network"
MATRIX = "Its poles lie too close together to be taken apart without losing digits: the response is computed from " \
         "the matrix exponential of the same network, in an orthonormal form."


def _rise(books: Books, sheet: Sheet) -> Working:
    found = _pulse(books)
    assert found.marks is not None and found.marks.low_s is not None and found.marks.high_s is not None
    notes = []
    ends = []
    for name, level, at in (("t_10", LOW, found.marks.low_s), ("t_90", HIGH, found.marks.high_s)):
        about = f"the first time at which the response has come to {100 * level:.0f} %"
        t = sheet.put(name, at, "s", about, "root of the equation" if at else "there at once, right after the step")
        ends.append(t)
        if at:
            text, note = _response(sheet, found, at, t)
            sheet.check(text, f"{level}", "", f"at {t} the response is at {100 * level:.0f} % of its final value:")
            notes.append(note)
    sheet.result(f"t_r = {ends[1]} - {ends[0]}")
    return sheet.done(FORMULA[sheet.entry.name], _noted(notes))


def _overshoot(books: Books, sheet: Sheet) -> Working:
    found = _pulse(books)
    marks = found.marks
    assert marks is not None and marks.top is not None
    note = ""
    if marks.top_s is None:
        top = sheet.put("top", 1.0, "", "the highest that it comes to: its final value, never passed", UPPER)
    elif not marks.top_s:
        top = sheet.put("top", marks.top, "", "the highest that it comes to, right after the step", UPPER)
    else:
        t = sheet.put("t", marks.top_s, "s", "where it is highest", "greatest value")
        text, note = _response(sheet, found, marks.top_s, t)
        top = sheet.step(f"top = {text}", "", "the highest that it comes to, over its final value:")
    sheet.result(f"overshoot = 100·({top} - 1)")
    return sheet.done(FORMULA[sheet.entry.name], note)


def _settling(books: Books, sheet: Sheet) -> Working:
    found, at = _pulse(books), sheet.entry.value
    level = "0.01" if sheet.entry.key == "settling_1_s" else "0.001"
    if not at:
        return sheet.done(FORMULA[sheet.entry.name], "It never leaves that band: right after the step it is inside.")
    t = sheet.put("t", at, "s", "the last time at which it is so far off", "root of the equation")
    text, note = _response(sheet, found, at, t, constant="")
    sheet.check(f"|{text}|", level, "", f"at {t} it is off its final value by:")
    return sheet.done(FORMULA[sheet.entry.name], note)


def _sag(books: Books, sheet: Sheet) -> Working:
    sag = books.ledger.sag
    assert sag.transient is not None and sag.pulse_s is not None and sag.poles is not None
    t = sheet.file("T", "target.pulse")
    if sag.transient.residues is None:
        y = sheet.put("y", 1.0 - sheet.entry.value / 100.0, "", "what is left of the pulse's height at its end", LOWER)
        note = MATRIX
    else:
        text, faded = _terms(sheet, sag.poles, sag.transient.residues, sag.pulse_s, t, LOWER)
        y = sheet.step(f"y = {text}", "", "what is left of the pulse's height at its end:")
        note = _faded(faded)
    sheet.result(f"sag = 100·(1 - {y})")
    return sheet.done(FORMULA[sheet.entry.name], note)


def _delay(books: Books, sheet: Sheet) -> Working:
    hz = sheet.figure("f", "overall.reference_hz")
    sheet.result(_delay_text(books, sheet, books.value("overall.reference_hz"), hz))
    return sheet.done(FORMULA[sheet.entry.name])


def _delay_text(books: Books, sheet: Sheet, at_hz: float, hz: str) -> str:
    sums: dict[str, float] = {}
    for index, turned in turns(books.net, at_hz).items():
        stage = books.layout.parts[index].stage
        sums[stage] = sums.get(stage, 0.0) + float(turned)
    each = [sheet.put(f"d_{stage}", turn, "rad", f"sum of Im d ln H/d ln X over C, L and tau of {stage}",
                      f"full network, {engineering(at_hz, 'Hz', 4)}") for stage, turn in sums.items()]
    return f"t_g = -({plus(each)})/(2·pi·{hz})"


def _spread(books: Books, sheet: Sheet) -> Working:
    delays = books.ledger.delays
    assert delays is not None
    ends = []
    for name, seconds, hz, about in (("t_most", delays.most_s, delays.most_hz, "greatest"),
                                     ("t_least", delays.least_s, delays.least_hz, "least")):
        ends.append(sheet.put(name, seconds, "s", f"{about} group delay between the edges",
                              f"full network, {engineering(hz, 'Hz', 4)}"))
    sheet.result(f"spread = {ends[0]} - {ends[1]}")
    return sheet.done(FORMULA[sheet.entry.name], "Where the band has no edge at an end, it reaches to d.c. or goes on.")


def _pulse(books: Books) -> Pulse:
    found = books.ledger.pulse
    assert found.transient is not None and found.marks is not None, found.why
    return found


def _response(sheet: Sheet, found: Pulse, at: float, t: str, constant: str = "1") -> tuple[str, str]:
    """(the response at a time as an expression, what to say of it); without its final value where constant is ""."""
    transient = found.transient
    assert transient is not None
    if transient.residues is None:
        y = sheet.put("y", transient.one(at) + (1.0 if constant else 0.0), "",
                      f"the response there{'' if constant else ', less its final value'}", UPPER)
        return y, MATRIX
    text, faded = _terms(sheet, transient.poles, transient.residues, at, t, UPPER)
    return f"{constant} + {text}" if constant else text, _faded(faded)


def _terms(sheet: Sheet, poles: Complex, residues: Complex, at: float, t: str, where: str) -> tuple[str, int]:
    """(sum of the modes as an expression, how many are not felt and left out); a pair is one damped cosine."""
    terms, faded = [], 0
    for number, (pole, residue) in enumerate(zip(poles.tolist(), residues.tolist(), strict=True), 1):
        if pole.imag < 0:
            continue
        pair = pole.imag > 0
        if abs(residue) * exp(pole.real * at) < FELT:
            faded += 1 + pair
            continue
        size = _once(sheet, f"a_{number}", 2 * abs(residue) if pair else residue.real, "",
                         f"{'amplitude' if pair else 'residue'} at pole {number}", where)
        if not pole:
            terms.append(size)
            continue
        rate = _once(sheet, f"p_{number}", pole.real, "rad/s", f"{'real part of ' if pair else ''}pole {number}", where)
        term = f"{size}·exp({rate}·{t})"
        if pair:
            omega = _once(sheet, f"w_{number}", pole.imag, "rad/s", f"imaginary part of pole {number}", where)
            phase = _once(sheet, f"phi_{number}", atan2(residue.imag, residue.real), "rad", "its phase", where)
            term += f"·cos({omega}·{t} + {phase})"
        terms.append(term)
    return plus(terms), faded


def _once(sheet: Sheet, symbol: str, value: float, unit: str, about: str, origin: str) -> str:
    """Enters a number of a mode, which stands in the sum for one time and in that for the next."""
    return symbol if sheet.symbols.get(symbol) == value else sheet.put(symbol, value, unit, about, origin)


def _faded(count: int) -> str:
    if not count:
        return ""
    modes, are = ("modes", "are") if count > 1 else ("mode", "is")
    return f"{count} {modes} that {are} not felt there {are} left out."


def _noted(notes: list[str]) -> str:
    """Notes of two times: one where they say the same, the later one's where modes have faded."""
    kept = [note for note in dict.fromkeys(notes) if note]
    return kept[-1] if kept else ""


WHOLE: Mapping[str, Callable[[Books, Sheet], Working]] = {
    "rise_time_s": _rise, "overshoot_percent": _overshoot, "settling_1_s": _settling, "settling_01_s": _settling,
    "sag_percent": _sag, "group_delay_s": _delay, "group_delay_spread_s": _spread,
}
"""Key of `overall` -> its working."""
