"""How the figures of a part came about: its value, its time constant, what it owns of an edge, its Miller halves."""

from __future__ import annotations

from polebook.book.shares import derivatives
from polebook.book.workings.constants import time_constant
from polebook.book.workings.devices import device_value
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.levers import lever
from polebook.book.workings.lines import voltage
from polebook.book.workings.noise import of_noise_figure, part_share
from polebook.book.workings.sheet import Books, Sheet, path_of
from polebook.formula import Working
from polebook.quantity import engineering


def part(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `parts`."""
    key = sheet.entry.key
    if key == "value":
        return _value(books, sheet)
    if key.startswith("leverage."):
        return lever(books, sheet)
    if key == "noise_share":
        return part_share(books, sheet)
    return time_constant(books, sheet) if key == "tau_s" else _owns(books, sheet)


def card(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `cards`."""
    if sheet.entry.key != "value":
        return lever(books, sheet)
    row = sheet.entry.row
    path = f"device.{row['device']}.{row['figure']}"
    sheet.result(f"value = {sheet.file(row['figure'], path)}")
    return sheet.done(FORMULA["parts.value.file"])


def bridge(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of a line's `bridges`."""
    name, _, key = sheet.entry.name.rpartition(".")
    if key == "k":
        return _k(books, sheet, name)
    value = sheet.figure(sheet.entry.row["type"], f"{name}.value", name)
    k = sheet.figure("K", f"{name}.k")
    share = f"(1 - {k})" if key == "at_input" else f"(1 - 1/{k})"
    sheet.result(f"{key} = {value}{'·' if sheet.entry.row['type'] == 'C' else '/'}{share}")
    note = "With K above 0 this half is of no use for an estimate." if key == "at_output" and \
        sheet.entry.row["k"] > 0 else ""
    return sheet.done(FORMULA[f"bridges.{key}"], note)


def _k(books: Books, sheet: Sheet, name: str) -> Working:
    stage, _, part_name = name.partition(".")
    found = next(b for b in books.ledger.bridges[stage] if b.part == part_name)
    into, out = voltage(books, sheet, found.i), voltage(books, sheet, found.j)
    sheet.result(f"K = {out}/{into}")
    return sheet.done(FORMULA["bridges.k"])


def _value(books: Books, sheet: Sheet) -> Working:
    row = sheet.entry.row
    path = path_of(books, row["stage"], row["part"])
    if path in books.chain.numbers:
        symbol = sheet.file(row["part"], path)
        if row["type"] == "tau":
            sheet.result(f"tau = 1/(2·pi·{symbol})")
            return sheet.done(FORMULA["parts.value.pole"])
        sheet.result(f"value = {symbol}")
        if path in books.chain.given:
            return sheet.done(FORMULA["parts.value.file"])
        return sheet.done(FORMULA["parts.value.default"])
    if row["type"] == "en" and f"{row['stage']}.nf" in books.chain.numbers:
        return of_noise_figure(books, sheet)
    return device_value(books, sheet, row["stage"], row["part"])


def _owns(books: Books, sheet: Sheet) -> Working:
    key = sheet.entry.key
    index = books.part_of[sheet.entry.name.removesuffix(f".{key}")]
    edge = "overall.upper_edge_hz" if key == "owns_upper" else "overall.lower_edge_hz"
    hz = books.value(edge)
    slopes = {k: d.real for k, d in derivatives(books.net, hz).by_part.items()}
    where = f"adjoint, {engineering(hz, 'Hz', 4)}"
    own = sheet.put("D_X", slopes[index], "", "d ln|H|/d ln X of the part", where)
    all_parts = sheet.put("D_f", sum(slopes.values()), "", "d ln|H|/d ln f", where)
    sheet.result(f"owns = {own}/{all_parts}")
    return sheet.done(FORMULA[f"parts.{key}"], "D_f is the sum of D_X over all C, L and time constants.")
