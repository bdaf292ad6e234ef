"""How the figures of a line came about: the source, a stage or the load."""

from __future__ import annotations

from polebook.book.miller import leading
from polebook.book.workings.currents import driven_by_source, out_of
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.gains import closed_form
from polebook.book.workings.noise import line_share
from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.formula import Formula, Working
from polebook.solve.transfer import adjoint

MIDBAND = "midband solution"


def line(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `lines`."""
    return _MAKERS[sheet.entry.key](books, sheet, sheet.entry.at)


def voltage(books: Books, sheet: Sheet, node: int) -> str:
    """Enters the midband voltage of a node; returns its symbol."""
    label = books.node_label(node)
    given = "1 V of EMF" if books.chain.source_kind == "voltage" else "1 A"
    return sheet.put(f"V_{label}", books.solution.volts[node], "V", f"V({label}) for {given}", MIDBAND)


def _ends(books: Books, index: int) -> tuple[int, int]:
    segment = books.layout.segments[index]
    return segment.before, segment.after


def _gain(books: Books, sheet: Sheet, index: int) -> Working:
    before, after = _ends(books, index)
    formula = FORMULA["lines.gain"]
    if index and before == after:
        return sheet.done(formula, _one_node(books, index))
    if index == 0:
        known = "E" if books.chain.source_kind == "voltage" else "I"
        unit = "V" if known == "E" else "A"
        base = sheet.put(known, 1.0, unit, f"what the source gives: 1 {unit}", MIDBAND)
        sheet.result(f"A_source = {voltage(books, sheet, after)}/{base}")
    else:
        name = books.layout.segments[index].name
        into, out = voltage(books, sheet, before), voltage(books, sheet, after)
        sheet.result(f"A_{name} = {out}/{into}")
    return sheet.stated(formula.text, _source(formula, closed_form(books, sheet, index, loaded=True)))


def _source(formula: Formula, closed: str) -> str:
    return f"{formula.source}; closed form: {closed}" if closed else formula.source


def _one_node(books: Books, index: int) -> str:
    name, node = books.layout.segments[index].name, books.node_label(books.layout.after[index])
    if name == "load":
        return f"The load is not coupled: it stands at {node} itself, so that its gain is 1."
    what = "is left out" if name in books.left_out else "has arms across the signal alone"
    return f"{name} {what}: its input and output are one node, {node}, so that its gain is 1."


def _gain_db(books: Books, sheet: Sheet, index: int) -> Working:
    gain = sheet.figure("A", f"{sheet.entry.row['name']}.gain")
    sheet.result(f"gain_db = 20·log10(|{gain}|)")
    return sheet.done(FORMULA["lines.gain_db"])


def _open_gain(books: Books, sheet: Sheet, index: int) -> Working:
    """Takes away what follows: the current that it drew is put back at the node, and the voltages rise by it."""
    before, after = _ends(books, index)
    name = books.layout.segments[index].name
    formula = FORMULA["lines.open_gain"]
    if index and before == after:
        return sheet.done(formula, _one_node(books, index))
    if index == 0:
        if books.chain.source_kind == "current":
            sheet.result(f"A_open = {sheet.figure('R_out', 'source.output_ohm')}", "an ampere into its resistance:")
        else:
            sheet.result("A_open = 1", "nothing draws current from the EMF:")
        return sheet.done(formula)
    following = books.value(f"{books.following(index + 1)}.input_ohm") if name != "load" else None
    if following is None or books.layout.driven[after]:
        gain = sheet.figure(f"A_{name}", f"{name}.gain")
        sheet.result(f"A_open = {gain}", "nothing that follows draws current:" if following is None
                     else "an ideal output does not feel what it drives:")
    else:
        _unload(books, sheet, index, before, after)
    return sheet.stated(formula.text, _source(formula, closed_form(books, sheet, index, loaded=False)))


def _unload(books: Books, sheet: Sheet, index: int, before: int, after: int) -> None:
    name = books.layout.segments[index].name
    out = voltage(books, sheet, after)
    own = sheet.figure("R_out", f"{name}.output_ohm", "output resistance, what follows taken away")
    node = sheet.figure("R_n", f"{books.between[after]}.ohm", "resistance of the node, what follows attached")
    sheet.step(f"V_2 = {out}·{own}/{node}", "V", f"voltage of {books.node_label(after)} freed of what follows:")
    into = voltage(books, sheet, before)
    back = float(adjoint(books.solution.midband, before).u[after])
    if back:
        ohm = sheet.figure("R_next", f"{books.following(index + 1)}.input_ohm", "input resistance of what follows")
        z = sheet.put("R_back", back, "Ω", f"V({books.node_label(before)}) for 1 A into "
                      f"{books.node_label(after)}", "midband network")
        sheet.step(f"V_1 = {into} + {z}·V_2/{ohm}", "V", f"and of {books.node_label(before)}, which hears of it:")
    else:
        sheet.step(f"V_1 = {into}", "V", f"and of {books.node_label(before)}, which hears nothing of it:")
    sheet.result("A_open = V_2/V_1")


def _loading(books: Books, sheet: Sheet, index: int) -> Working:
    name = sheet.entry.row["name"]
    sheet.result(f"loading = {sheet.figure('A', f'{name}.gain')}/{sheet.figure('A_open', f'{name}.open_gain')}")
    return sheet.done(FORMULA["lines.loading"])


def _transfer(books: Books, sheet: Sheet, index: int) -> Working:
    name = sheet.entry.row["name"]
    sheet.result(f"R_t = {sheet.figure('A', f'{name}.gain')}·{sheet.figure('R_in', f'{name}.input_ohm')}")
    return sheet.done(FORMULA["lines.transfer_ohm"])


def _k(books: Books, sheet: Sheet, index: int) -> Working:
    line_bridges = books.ledger.lines[index].bridges
    lead = leading(list(line_bridges))
    name = sheet.entry.row["name"]
    part = lead.part if lead else ""
    sheet.result(f"k = {sheet.figure(f'K_{part}', f'{name}.{part}.k')}")
    return sheet.done(FORMULA["lines.k"])


def _input(books: Books, sheet: Sheet, index: int) -> Working:
    """The currents that 1 V at the input node drives into the line and what it stands in front of."""
    segments = books.layout.segments[index:]
    before = segments[0].before
    volts, series = driven_by_source(books, before)
    root = books.root
    stop = next((at for at, one in enumerate(segments) if root[one.after] != root[before]), len(segments) - 1)
    label = books.node_label(before)
    flows = [
        sheet.put(f"I_{flow.element}", flow.amperes, "A", f"into {flow.element} for 1 V at {label}", MIDBAND)
        for flow in out_of(books, before, segments[:stop + 1], volts, series) if flow.amperes
    ]
    sheet.step(f"I_in = {plus(flows)}", "A", f"what flows for 1 V at {label}:")
    sheet.result("R_in = 1/I_in")
    return sheet.done(FORMULA["lines.input_ohm"])


def _output(books: Books, sheet: Sheet, index: int) -> Working:
    segment = books.layout.segments[index]
    formula = FORMULA["lines.output_ohm"]
    node = segment.after
    if books.layout.driven[node]:
        return sheet.done(formula, "An ideal amplifier drives the node: nothing that is drawn from it moves it.")
    own, behind = f"{books.between[node]}.ohm", f"{books.following(index + 1)}.input_ohm"
    following = books.value(behind) if segment.name != "load" else None
    if index == 0 and books.chain.source_kind == "voltage" and "source.resistance.value" not in books.entries:
        return sheet.done(formula, "The source is ideal: it has no resistance.")
    if following is None:
        whole = sheet.figure("R_n", own)
        sheet.result(f"R_out = {whole}", "nothing that follows draws current: it is the resistance of the node,")
        return sheet.done(formula)
    out = sheet.put("R_out", sheet.entry.value, "Ω", "the output resistance", "midband network")
    load = sheet.figure("R_next", behind, "input resistance of what follows")
    whole = sheet.figure("R_n", own)
    sheet.check(f"1/(1/{out} + 1/{load})", whole, "Ω", "with what follows beside it, it makes the node's resistance:")
    return sheet.done(formula)


def _owns(books: Books, sheet: Sheet, index: int) -> Working:
    key, name = sheet.entry.key, sheet.entry.row["name"]
    shares = [
        sheet.figure(f"s_{row['part']}", f"{name}.{row['part']}.{key}")
        for row in books.document["parts"] if row["stage"] == name and row[key] is not None
    ]
    sheet.result(f"owns = {plus(shares)}")
    return sheet.done(FORMULA[f"lines.{key}"], "" if shares else f"{name} has no capacitance, coil or time constant.")


_MAKERS = {
    "gain": _gain, "gain_db": _gain_db, "open_gain": _open_gain, "loading": _loading, "transfer_ohm": _transfer,
    "k": _k, "input_ohm": _input, "output_ohm": _output, "owns_upper": _owns, "owns_lower": _owns,
    "noise_share": line_share,
}
