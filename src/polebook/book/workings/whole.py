"""How the figures of the whole chain came about."""

from __future__ import annotations

from math import exp, log10, tau

import numpy as np

from polebook.book.account import line_losses
from polebook.book.workings import levels, noise, pulse
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet, plus, times
from polebook.formula import Working
from polebook.quantity import engineering
from polebook.solve.edges import OUTWARD, first_seed
from polebook.solve.fold import fold
from polebook.solve.root import bracketed_maximum
from polebook.solve.sweep import relative_at
from polebook.solve.winding import turns_of

BUMP = 0.5  # neper; what lies further below the top of a sweep can't rise to it between two of its points


def whole(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `overall`."""
    return _MAKERS[sheet.entry.key](books, sheet)


def _gain(books: Books, sheet: Sheet) -> Working:
    factors = [sheet.figure(f"A_{line['name']}", f"{line['name']}.gain") for line in books.document["lines"]]
    sheet.result(f"gain = {times(factors)}")
    return sheet.done(FORMULA["overall.gain"])


def _gain_db(books: Books, sheet: Sheet) -> Working:
    gain = sheet.figure("gain", "overall.gain")
    sheet.result(f"gain_db = 20·log10(|{gain}|)")
    return sheet.done(FORMULA["overall.gain_db"])


def _volts(books: Books) -> bool:
    return books.chain.source_kind == "voltage"


def _gain_unit(books: Books) -> str:
    return "" if _volts(books) else "Ω"


def _unstable(books: Books, sheet: Sheet) -> Working:
    solution = books.solution
    n = sheet.put("N", solution.winding.finite or 0, "", "finite poles that are not at 0", "growth of the determinant")
    turned = float(turns_of(solution.sweep).sum())
    angle = sheet.put("turn", turned, "rad", "turn of arg det(G + j·2·pi·f·C) along the sweep",
                      f"full network, {_hz(solution.sweep.hz[0])} to {_hz(solution.sweep.hz[-1])}")
    sheet.step(f"n_R = ({n} - {angle}/(pi/2))/2", "", "poles with a positive real part, to the nearest whole number:")
    return sheet.done(FORMULA["overall.unstable"])


def _hz(value: float) -> str:
    return engineering(float(value), "Hz", 4)


def _edge(books: Books, sheet: Sheet) -> Working:
    value = sheet.entry.value
    losses = line_losses(books.solution, value)
    lost = [
        sheet.put(f"L_{segment.name}", db, "dB", f"lost by {segment.name} there", f"full network, {_hz(value)}")
        for segment, db in zip(books.layout.segments, losses, strict=True)
    ]
    sheet.check(plus(lost), "10·log10(2)", "dB", "at this frequency the lines lose half the power, 3 dB:")
    start = books.solution.band.seed_hz
    return sheet.done(FORMULA[sheet.entry.name], f"The search starts at the band seed, {_hz(start)}.")


def _peaking(books: Books, sheet: Sheet) -> Working:
    hz, loss = _top(books)
    size = sheet.put("h", exp(loss), "", "|H|/|gain| where it is greatest", f"full network, {_hz(hz)}")
    sheet.result(f"peaking_db = max(0, 20·log10({size}))")
    return sheet.done(FORMULA["overall.peaking_db"])


def _top(books: Books) -> tuple[float, float]:
    """(Hz, ln|H|/|gain|) where the response is greatest: every bump of the sweep that may reach the top is climbed."""
    net, gains, sweep = books.net, books.solution.gains, books.solution.sweep
    x, loss = np.log(sweep.hz), sweep.loss

    def at(y: float) -> float:
        return relative_at(net, exp(y), gains)

    top = float(loss.max())
    found = [(float(x[k]), float(loss[k])) for k in (0, int(np.argmax(loss)), -1)]
    found += [(y, at(y)) for y in (float(x[0]) - OUTWARD, float(x[-1]) + OUTWARD)]
    for k in range(1, len(x) - 1):
        if loss[k] > top - BUMP and loss[k - 1] <= loss[k] >= loss[k + 1] and loss[k] > min(loss[k - 1], loss[k + 1]):
            a, b, c = x[k - 1:k + 2].tolist()
            found.append(bracketed_maximum(at, (a, b, c), tuple(loss[k - 1:k + 2].tolist())))
    best = max(found, key=lambda pair: pair[1])
    return exp(best[0]), best[1]


def _reference(books: Books, sheet: Sheet) -> Working:
    if "target.reference" in books.chain.given:
        reference = sheet.file("reference", "target.reference")
        sheet.result(f"f_ref = {reference}")
        return sheet.done(FORMULA["overall.reference_hz"])
    constants = books.solution.constants
    low, high = constants.lower_hz, constants.upper_hz
    start, seed = first_seed(low, high), books.solution.band.seed_hz
    if seed != start:
        rise = exp(relative_at(books.net, start, books.solution.gains))
        sheet.put("h", rise, "", f"|H|/|gain| at {_hz(start)}, where the two estimates would have it",
                  f"full network, {_hz(start)}")
        i = sheet.put("i", round(40 * log10(seed)), "", "which of 40 frequencies a decade has |H| nearest to |gain|",
                      "full network")
        sheet.result(f"f_s = 10^({i}/40)")
        return sheet.done(FORMULA["overall.reference_hz.moved"])
    if low and high:
        sheet.result(f"f_s = sqrt({sheet.figure('f_L', 'overall.sctc_lower_hz')}"
                     f"·{sheet.figure('f_H', 'overall.octc_upper_hz')})")
    elif high:
        sheet.result(f"f_s = {sheet.figure('f_H', 'overall.octc_upper_hz')}/1000")
    elif low:
        sheet.result(f"f_s = 1000·{sheet.figure('f_L', 'overall.sctc_lower_hz')}")
    else:
        sheet.result("f_s = 1000")
    return sheet.done(FORMULA["overall.reference_hz"])


def _at_reference(books: Books, sheet: Sheet) -> Working:
    hz = books.ledger.reference_hz or 0.0
    gains = fold(books.net, 1j * tau * hz, "full").gains
    sizes = [
        sheet.put(f"A_{segment.name}", abs(gain), _gain_unit(books) if index == 0 else "",
                  f"|A| of {segment.name} there", f"full network, {_hz(hz)}")
        for index, (segment, gain) in enumerate(zip(books.layout.segments, gains, strict=True))
    ]
    sheet.result(f"H = {times(sizes)}")
    return sheet.done(FORMULA["overall.gain_at_reference"])


def _constants(books: Books, role: str, sheet: Sheet) -> list[str]:
    """Time constants of one role that stand in a sum."""
    symbols = []
    for row in books.document["parts"]:
        if row["role"] == role and row["tau_s"]:
            name = f"{row['stage']}.{row['part']}"
            symbols.append(sheet.figure(f"tau_{name}", f"{name}.tau_s"))
    return symbols


def _open_circuit(books: Books, sheet: Sheet) -> Working:
    sheet.step(f"b_1 = {plus(_constants(books, 'high', sheet))}", "s", "sum of the open-circuit time constants:")
    sheet.result("f_H = 1/(2·pi·b_1)")
    return sheet.done(FORMULA["overall.octc_upper_hz"])


def _short_circuit(books: Books, sheet: Sheet) -> Working:
    rates = [f"1/{symbol}" for symbol in _constants(books, "low", sheet)]
    sheet.result(f"f_L = ({plus(rates)})/(2·pi)")
    return sheet.done(FORMULA["overall.sctc_lower_hz"])


def _node_estimate(books: Books, sheet: Sheet) -> Working:
    poles = [sheet.figure(f"f_{row['name']}", f"{row['name']}.pole_hz")
             for row in books.document["nodes"] if row["pole_hz"] is not None]
    f = sheet.put("f", sheet.entry.value, "Hz", "the frequency that solves it", "root of the equation")
    sheet.check(times([f"(1 + ({f}/{pole})^2)" for pole in poles]), "2")
    return sheet.done(FORMULA["overall.node_upper_hz"])


def _shrinkage(books: Books, sheet: Sheet) -> Working:
    edge = sheet.figure("f_H", "overall.upper_edge_hz")
    poles = {row["name"]: row["pole_hz"] for row in books.document["nodes"] if row["pole_hz"] is not None}
    lowest = min(poles, key=lambda name: poles[name])
    sheet.result(f"shrinkage = {edge}/{sheet.figure(f'f_{lowest}', f'{lowest}.pole_hz', 'the lowest node pole')}")
    return sheet.done(FORMULA["overall.shrinkage"])


_MAKERS = {
    "gain": _gain, "gain_db": _gain_db, "unstable": _unstable, "reference_hz": _reference,
    "gain_at_reference": _at_reference, "lower_edge_hz": _edge, "upper_edge_hz": _edge, "peaking_db": _peaking,
    "octc_upper_hz": _open_circuit, "sctc_lower_hz": _short_circuit, "node_upper_hz": _node_estimate,
    "shrinkage": _shrinkage, **noise.WHOLE, **levels.WHOLE, **pulse.WHOLE,
}
