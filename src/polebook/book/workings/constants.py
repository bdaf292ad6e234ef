"""How a time constant came about: the resistance that the part sees at midband, as it is made up."""

from __future__ import annotations

from math import isfinite

from polebook.book.time_constants import seen
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.circuit.elements import Branch
from polebook.circuit.views import admittance
from polebook.formula import Working
from polebook.stages.stamper import GROUND

NETWORK = "midband network"


def time_constant(books: Books, sheet: Sheet) -> Working:
    """The working of `tau_s` of a part."""
    name = sheet.entry.name.removesuffix(".tau_s")
    index = books.part_of[name]
    formula = FORMULA["parts.tau_s"]
    storage = next((s for segment in books.layout.segments for s in segment.storages if s.part == index), None)
    if storage is not None:
        return _storage(books, sheet, name, storage.node, books.layout.parts[index].role == "high")
    coil = books.layout.parts[index].type == "L"
    value = sheet.figure("L" if coil else "C", f"{name}.value", name)
    places = [(number, branch, group) for number, branch in enumerate(books.layout.branches)
              for group in branch.groups if index in group]
    terms = []
    for number, branch, group in places:
        ohm = _resistance(books, sheet, number, branch, group, index)
        if ohm:
            terms.append(f"{value}/{ohm}" if coil else f"{value}·{ohm}")
    note = "The part stands in two places, and has both constants." if len(terms) > 1 else ""
    sheet.result(f"tau = {plus(terms)}")
    return sheet.done(formula, note)


def _storage(books: Books, sheet: Sheet, name: str, node: int, high: bool) -> Working:
    value = sheet.figure("tau_0", f"{name}.value", f"{name} standing alone")
    share = sheet.put("S", float(books.solution.inverse.own(node)), "",
                      "what is left of a change in its own equation, with every loop closed", NETWORK)
    sheet.result(f"tau = {value}·{share}" if high else f"tau = {value}/{share}")
    return sheet.done(FORMULA["parts.tau_s.storage"])


def _resistance(books: Books, sheet: Sheet, number: int, branch: Branch, group: tuple[int, ...], index: int) -> str:
    """Enters the resistance that one part of a branch sees; "" where it sees none."""
    part = books.layout.parts[index]
    if part.name == "couple" and part.segment:
        return _coupled(books, sheet, part.segment)
    ohm = seen(books.net, books.solution.inverse, number, branch, group, index)
    if ohm is None or ohm == 0.0 or not isfinite(ohm):
        return ""
    if branch.single and not branch.series and part.type == "C":
        return _between(books, sheet, branch)
    others = admittance(books.net, tuple(k for k in group if k != index), 0.0, "midband")
    if not others:
        return sheet.put("R", ohm, "Ω", "seen at its terminals: the rest of the loop that it stands in", NETWORK)
    neighbours = [f"1/{_value(books, sheet, k)}" for k in group if k != index and books.layout.parts[k].type == "R"]
    rest = 1.0 / ohm - others
    if abs(rest) > 1e-12 * others:
        neighbours.append(f"1/{sheet.put('R_rest', 1.0 / rest, 'Ω', 'the rest of the loop', NETWORK)}")
    return sheet.step(f"R = 1/({plus(neighbours)})", "Ω", "seen at its terminals, what stands beside it and the rest:")


def _value(books: Books, sheet: Sheet, index: int) -> str:
    name = books.full_name(books.layout.parts[index])
    return sheet.figure(f"R_{name}", f"{name}.value", name)


def _coupled(books: Books, sheet: Sheet, segment: int) -> str:
    ahead, behind = books.preceding(segment), books.layout.segments[segment].name
    out = sheet.figure("R_out", f"{ahead}.output_ohm", f"output resistance of {ahead}, ahead of it")
    into = sheet.figure("R_in", f"{behind}.input_ohm", f"input resistance of {behind}, behind it")
    return sheet.step(f"R = {out} + {into}", "Ω", "seen by the coupling, from one side to the other:")


def _between(books: Books, sheet: Sheet, branch: Branch) -> str:
    """R_ii + R_jj - R_ij - R_ji, each the voltage at one node for 1 A into another."""
    inverse = books.solution.inverse
    ends = [node for node in (branch.i, branch.j) if node != GROUND]
    free = [node for node in ends if not books.layout.driven[node]]
    name = books.node_label(ends[0])
    if len(ends) == 1 and f"{name}.ohm" in books.entries and not books.layout.driven[ends[0]]:
        return sheet.figure("R", f"{name}.ohm", f"resistance of {name}, where it stands")
    terms = []
    for node in free:
        for other in ends:
            value = float(inverse.z[other, node])
            if value:
                a, b = books.node_label(other), books.node_label(node)
                name = f"R_{a}_{b}" if a != b else f"R_{a}"
                symbol = sheet.put(name, value, "Ω", f"V({a}) for 1 A into {b}", NETWORK)
                terms.append(f"{' - ' if a != b else ' + '}{symbol}")
    text = "".join(terms).removeprefix(" + ")
    return sheet.step(f"R = {text.replace(' - ', '-', 1) if text.startswith(' - ') else text}", "Ω",
                      "seen at its two ends:")
