"""How the account's figures and the targets' came about."""

from __future__ import annotations

from polebook.book.targets import LESS_IS_BETTER, TOLERANCE_DB
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.levels import swing_target
from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.formula import Working


def account(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `account`."""
    owner, _, key = sheet.entry.name.rpartition(".")
    end = owner.rpartition(".")[2]
    formula = FORMULA[sheet.entry.name]
    if key == "edge_hz":
        target = f"target.{end}"
        stated = target in books.chain.given
        symbol = sheet.file(end, target) if stated else sheet.figure("f", f"overall.{end}_edge_hz")
        sheet.result(f"f_a = {symbol}")
    elif key == "budget_db":
        sheet.result("budget = 10·log10(2)")
    elif key == "left_db":
        budget, lost = sheet.figure("budget", f"{owner}.budget_db"), sheet.figure("lost", f"{owner}.lost_db")
        sheet.result(f"left = {budget} - {lost}")
    else:
        each = [sheet.figure(f"L_{row['name']}", f"{row['name']}.lost_{end}_db") for row in books.document["nodes"]
                if row[f"lost_{end}_db"] is not None]
        sheet.result(f"lost = {plus(each)}")
    return sheet.done(formula)


_GOT = {"lower": "overall.lower_edge_hz", "upper": "overall.upper_edge_hz", "peaking": "overall.peaking_db",
        "noise": "overall.noise_density", "current": "overall.supply_current_a", "rise": "overall.rise_time_s"}

_IN_PERCENT = {"overshoot": "overall.overshoot_percent", "sag": "overall.sag_percent"}


def target(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `targets`."""
    owner, _, key = sheet.entry.name.rpartition(".")
    name = sheet.entry.row["name"]
    if key == "want":
        sheet.result(f"want = {sheet.file(name, owner)}")
        return sheet.done(FORMULA["targets.want"])
    if key == "got":
        return _got(books, sheet, name)
    if key == "met":
        return _met(books, sheet, owner)
    want, got = sheet.figure("want", f"{owner}.want"), sheet.figure("got", f"{owner}.got")
    if name == "gain":
        if "target.gain_tolerance" in books.chain.numbers:
            tolerance = sheet.file("tolerance", "target.gain_tolerance")
        else:
            tolerance = sheet.put("tolerance", TOLERANCE_DB, "dB", "how far the gain may be off",
                                  "target.gain_tolerance", "default")
        sheet.step(f"off = 20·log10({got}/{want})", "dB", "difference:")
        sheet.result(f"margin = ({tolerance} - |off|)/{tolerance}")
    elif name in LESS_IS_BETTER:
        sheet.result(f"margin = ({want} - {got})/{want}")
    else:
        sheet.result(f"margin = ({got} - {want})/{want}")
    return sheet.done(FORMULA["targets.margin"])


def _got(books: Books, sheet: Sheet, name: str) -> Working:
    if name == "gain":
        reference = "target.reference" in books.chain.given and books.value("overall.gain_at_reference") is not None
        gain = sheet.figure("gain", "overall.gain_at_reference" if reference else "overall.gain")
        sheet.result(f"got = |{gain}|")
    elif name == "swing":
        swing_target(books, sheet)
    elif name == "yield":
        share = sheet.put("yield", books.ledger.built.share or 0.0, "", "share of built chains that meet the others",
                          "the spread")
        sheet.result(f"got = {share}")
    elif name in _IN_PERCENT:
        sheet.result(f"got = {sheet.figure(name, _IN_PERCENT[name])}/100")
    else:
        sheet.result(f"got = {sheet.figure(name, _GOT[name])}")
    return sheet.done(FORMULA["targets.got"])


def _met(books: Books, sheet: Sheet, owner: str) -> Working:
    formula = FORMULA["targets.met"]
    if books.value(f"{owner}.got") is None:
        return sheet.done(formula, f"It counts as met: {sheet.entry.row['why']}.")
    sheet.figure("margin", f"{owner}.margin")
    return sheet.done(formula, f"It is {'not ' if sheet.entry.value else ''}below 0.")
