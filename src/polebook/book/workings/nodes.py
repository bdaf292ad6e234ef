"""How the figures of a node came about: its resistance, its capacitances with their Miller halves, its pole, its dB."""

from __future__ import annotations

from polebook.book.account import Account, line_losses
from polebook.book.lumped import Half, Lumped
from polebook.book.workings.currents import for_one_ampere, out_of
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.chain.suggest import listed
from polebook.formula import Working


def node(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `nodes`."""
    key = sheet.entry.key
    if key == "ohm":
        return _ohm(books, sheet)
    if key in ("farad", "pole_hz"):
        return _pole(books, sheet)
    if key == "room":
        return _room(books, sheet)
    return _lost(books, sheet) if key.startswith("lost") else _allotted(books, sheet)


def _node_of(books: Books) -> dict[str, int]:
    """Site -> the node whose resistance stands for it: the interstage one, else its first."""
    result: dict[str, int] = {}
    for number, name in books.site_of.items():
        result.setdefault(name, number)
    return result


def _ohm(books: Books, sheet: Sheet) -> Working:
    name = sheet.entry.name.removesuffix(".ohm")
    formula = FORMULA["nodes.ohm"]
    if sheet.entry.value == 0.0:
        return sheet.done(formula, "Something ideal drives the node: no current moves it.")
    if not sheet.entry.row["interstage"]:
        return _inner_ohm(books, sheet, _node_of(books)[name])
    index = max(at for at, after in enumerate(books.layout.after) if books.between[after] == name)
    rates = []
    ahead = f"{books.preceding(index + 1)}.output_ohm"
    if books.value(ahead) is not None:
        rates.append(f"1/{sheet.figure('R_out', ahead, 'output resistance of what drives the node')}")
    following = books.following(index + 1)
    if following and books.value(f"{following}.input_ohm") is not None:
        rates.append(f"1/{sheet.figure('R_in', f'{following}.input_ohm', 'input resistance of what follows')}")
    sheet.result(f"R = 1/({plus(rates)})")
    return sheet.done(formula)


def _inner_ohm(books: Books, sheet: Sheet, number: int) -> Working:
    flows = [
        sheet.put(f"I_{flow.element}", flow.amperes, "A", f"into {flow.element} for 1 A into the node",
                  "midband network")
        for flow in out_of(books, number, books.layout.segments, for_one_ampere(books)) if flow.amperes
    ]
    sheet.check(plus(flows), "1", "A", "at this voltage for 1 A, the elements at the node take just that:")
    return sheet.done(FORMULA["nodes.ohm"])


def _pole(books: Books, sheet: Sheet) -> Working:
    name = sheet.entry.name.rpartition(".")[0]
    parts_out: list[str] = []
    storage = next((s for segment in books.layout.segments for s in segment.storages
                    if books.site_of.get(s.node) == name and books.layout.parts[s.part].role == "high"), None)
    if storage is not None:
        part = books.layout.parts[storage.part]
        sheet.figure("tau", f"{books.full_name(part)}.tau_s", "time constant of the storage, its loop closed")
    else:
        terms = _terms(books, sheet, name, parts_out)
        sheet.step(f"tau = {plus(terms)}", "s", "time constant of the node:")
    if sheet.entry.key == "farad":
        sheet.result(f"C = tau/{sheet.figure('R', f'{name}.ohm')}")
    else:
        sheet.result("f = 1/(2·pi·tau)")
    unheard = next(site.left_out for site in books.ledger.sites if site.name == name)
    notes = [f"The signal does not reach {listed(unheard)}: left out."] if unheard else []
    if parts_out:
        notes.append(f"The half of {listed(parts_out)} that lands here is negative and of no use: left out.")
    return sheet.done(FORMULA[f"nodes.{sheet.entry.key}"], " ".join(notes))


def _terms(books: Books, sheet: Sheet, name: str, left_out: list[str]) -> list[str]:
    """R·C of every node of a site, each capacitance with its Miller half; parts of no use go to `left_out`."""
    lumped = Lumped(books.solution, books.site_of)
    found_at: dict[int, list[Half]] = {}
    for number, half in lumped.landings():
        if half is None or lumped.names[number] != name or not lumped.hears(number):
            continue
        if half.of_use:
            found_at.setdefault(number, []).append(half)
        else:
            left_out.append(books.full_name(books.layout.parts[half.part]))
    terms = []
    for number, found in found_at.items():
        ohm = _resistance(books, sheet, number)
        label = books.node_label(number)
        farads = [landed(books, sheet, half, label) for half in found]
        terms.append(f"{ohm}·{sheet.step(f'C_{label} = {plus(farads)}', 'F', f'capacitance at {label}:')}")
    return terms


def _resistance(books: Books, sheet: Sheet, number: int) -> str:
    label = books.node_label(number)
    if f"{label}.ohm" in books.entries:
        return sheet.figure(f"R_{label}", f"{label}.ohm", f"resistance of {label}")
    driven = books.layout.driven[number]
    value = 0.0 if driven else float(books.solution.inverse.point(number))
    return sheet.put(f"R_{label}", value, "Ω", f"driving-point resistance of {label}", "midband network")


def landed(books: Books, sheet: Sheet, half: Half, label: str) -> str:
    """How much of a capacitor lands on a node, as a term."""
    name = books.full_name(books.layout.parts[half.part])
    value = sheet.figure(f"C_{name}", f"{name}.value")
    if half.k is None:
        return value
    far = books.node_label(half.other)
    k = sheet.put(f"K_{name}", half.k, "", f"V({far})/V({label})", "midband solution")
    return sheet.step(f"c_{name} = {value}·(1 - {k})", "F")


def _room(books: Books, sheet: Sheet) -> Working:
    name = sheet.entry.name.removesuffix(".room")
    pole = sheet.figure("f", f"{name}.pole_hz")
    edge = sheet.figure("f_a", "account.upper.edge_hz")
    count = sum(row["interstage"] and row["pole_hz"] is not None for row in books.document["nodes"])
    n = sheet.put("n", count, "", "nodes between stages that have a pole", "count")
    sheet.step(f"f_need = {edge}/sqrt(2^(1/{n}) - 1)", "Hz", "pole that as many like stages would need:")
    sheet.result(f"room = {pole}/f_need")
    return sheet.done(FORMULA["nodes.room"])


def _account(books: Books, key: str) -> tuple[str, Account]:
    end = "upper" if "upper" in key else "lower"
    return end, books.ledger.upper_account if end == "upper" else books.ledger.lower_account


def _lost(books: Books, sheet: Sheet) -> Working:
    """The lines whose loss is booked to the node: its own, and those of held nodes ahead of it."""
    name = sheet.entry.name.rpartition(".")[0]
    end, account = _account(books, sheet.entry.key)
    order = list(account.lost)
    first = at = order.index(name)
    while first and account.lost[order[first - 1]] is None:
        first -= 1
    run = set(order[first:at + 1])
    sheet.figure("f_a", f"account.{end}.edge_hz")
    hz = account.edge_hz or 0.0
    losses = line_losses(books.solution, hz)
    there, here = [], []
    for index, segment in enumerate(books.layout.segments):
        node = books.between[segment.after]
        if node not in run or (index and segment.after == segment.before):
            continue
        size = abs(books.solution.gains[index])
        unit = "Ω" if index == 0 and books.chain.source_kind == "current" else ""
        here.append(sheet.put(f"A_{segment.name}", size, unit, f"|A| of {segment.name}", "midband solution"))
        there.append(sheet.put(f"H_{segment.name}", size * 10.0 ** (-losses[index] / 20.0), unit,
                               f"|A(f_a)| of {segment.name}", "full network"))
    if not here:
        return sheet.done(FORMULA[f"nodes.lost_{end}_db"], "No line ends in a node of its own here.")
    quotient = "·".join(f"{b}/{a}" for a, b in zip(here, there, strict=True))
    sheet.result(f"lost_db = -20·log10({quotient})")
    held = order[first:at]
    stands = "is held by the stage behind it" if len(held) == 1 else "are held by the stages behind them"
    note = f"{listed(held)} {stands}: what is lost there is booked here." if held else ""
    return sheet.done(FORMULA[f"nodes.lost_{end}_db"], note)


def _allotted(books: Books, sheet: Sheet) -> Working:
    name = sheet.entry.name.rpartition(".")[0]
    end, account = _account(books, sheet.entry.key)
    claims = {f"{segment.name}.allot": books.between[segment.after] for segment in books.layout.segments
              if f"{segment.name}.allot" in books.chain.numbers and segment.name not in books.left_out}
    claims = claims if end == "upper" else {}
    own = [sheet.file(f"allot_{path}", path) for path, node in claims.items() if node == name]
    if own:
        sheet.result(f"allotted = {plus(own)}")
        return sheet.done(FORMULA[f"nodes.allotted_{end}_db"])
    taken = [sheet.file(f"allot_{path}", path) for path in claims]
    sharing = sum(db is not None and node not in claims.values() for node, db in account.lost.items())
    count = sheet.put("n", sharing, "", "nodes that lose and have no claim of their own", "count")
    budget = sheet.figure("budget", f"account.{end}.budget_db")
    sheet.result(f"allotted = ({budget}{''.join(f' - {claim}' for claim in taken)})/{count}")
    return sheet.done(FORMULA[f"nodes.allotted_{end}_db"])
