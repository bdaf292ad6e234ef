"""The tables of the ledger: lines, nodes, parts, bias, account, and every line at one frequency."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.report.document import Document, Entry, entries, interstage, part_name
from polebook.report.look import Look
from polebook.report.table import Cell, Column, table

BAR = 10
_MARK = " ◂"


def _columns(*names: str, words: tuple[int, ...] = (0,)) -> list[Column]:
    """Columns of figures, but for the text columns at the places `words`."""
    return [Column(name, right=at not in words) for at, name in enumerate(names)]


def short_lines(document: Document, look: Look) -> list[str]:
    """The default page's lines: gain, K, resistances, the shares owned of both edges."""
    lines = entries(document, "lines")
    most = {end: max((line[f"owns_{end}"] or 0.0 for line in lines), default=0.0) for end in ("upper", "lower")}
    rows: list[list[Cell | str]] = []
    for line in lines:
        rows.append(
            [
                line["name"],
                line["kind"],
                show.decibel(line["gain_db"]),
                show.ratio(line["k"]),
                show.eng(line["input_ohm"]),
                show.eng(line["output_ohm"]),
                *(_owned(line[f"owns_{end}"], most[end]) for end in ("upper", "lower")),
            ]
        )
    overall = document["overall"]
    total = Cell(show.decibel(overall["gain_db"]), "head")
    rows.append([Cell("total", "head"), "", total, "", "", "", _sum(lines, "owns_upper"), _sum(lines, "owns_lower")])
    db = "gain\ndB" if overall["gain_unit"] == "V/V" else "gain\ndB, dBΩ"
    names = ("lines", "kind", db, "K", "input\nΩ", "output\nΩ", "owns of\nupper", "owns of\nlower")
    return table(_columns(*names, words=(0, 1)), rows, look)


def lines(document: Document, look: Look) -> list[str]:
    """Everything a line has but its bridges."""
    rows: list[list[Cell | str]] = [
        [
            line["name"],
            line["kind"],
            show.ratio(line["gain"]),
            show.decibel(line["gain_db"]),
            show.ratio(line["open_gain"]),
            show.ratio(line["loading"]),
            show.ratio(line["k"]),
            show.eng(line["input_ohm"]),
            show.eng(line["output_ohm"]),
        ]
        for line in entries(document, "lines")
    ]
    overall = document["overall"]
    whole = [Cell(show.ratio(overall["gain"]), "head"), Cell(show.decibel(overall["gain_db"]), "head")]
    rows.append([Cell("total", "head"), "", *whole, "", "", "", "", ""])
    gain = "gain" if overall["gain_unit"] == "V/V" else "gain\nfirst Ω"
    names = ("lines", "kind", gain, "gain\ndB", "open\ngain", "loading", "K", "input\nΩ", "output\nΩ")
    shown = table(_columns(*names, words=(0, 1)), rows, look, gap=1)
    held = [line for line in entries(document, "lines") if line["transfer_ohm"] is not None]
    return shown + [
        " " + look.text(f"{line['name']} holds its input node: transfer {show.eng(line['transfer_ohm'], 'Ω')}")
        for line in held
    ]


def nodes(document: Document, look: Look) -> list[str]:
    """Every site with its pole and what is lost at it at both ends of the band."""
    listed = entries(document, "nodes")
    total = sum(max(node["lost_upper_db"] or 0.0, 0.0) for node in listed)
    rows = [_node_row(node, total, look) for node in listed]
    names = ("nodes", "after", "R\nΩ", "C\nF", "pole\nHz", "room", "lost at\nupper dB", "left\ndB", "")
    lower = ("lost at\nlower dB", "left\ndB")
    return table(_columns(*names, *lower, words=(0, 1, 8)), rows, look, gap=1) if rows else []


def _node_row(node: Entry, total: float, look: Look) -> list[Cell | str]:
    lost = node["lost_upper_db"]
    return [
        node["name"],
        node["stage"] or "",
        show.eng(node["ohm"]),
        show.eng(node["farad"]),
        show.eng(node["pole_hz"]),
        show.ratio(node["room"]),
        show.decibel(lost),
        _left(node, "upper"),
        look.bar(lost / total, BAR) if lost is not None and total > 0 else "",
        show.decibel(node["lost_lower_db"]),
        _left(node, "lower"),
    ]


def _left(node: Entry, end: str) -> Cell:
    lost, allotted = node[f"lost_{end}_db"], node[f"allotted_{end}_db"]
    if lost is None or allotted is None:
        return Cell(show.NONE)
    return Cell(show.decibel(allotted - lost), "bad" if lost > allotted else "")


def accounts(document: Document, look: Look) -> list[str]:
    """What every node loses of what it was allotted, at both ends."""
    rows: list[list[Cell | str]] = []
    for node in interstage(document) + [node for node in entries(document, "nodes") if node["name"] == "load"]:
        if any(row[0] == node["name"] for row in rows):
            continue
        row: list[Cell | str] = [node["name"], node["stage"] or ""]
        for end in ("upper", "lower"):
            row += [show.decibel(node[f"lost_{end}_db"]), show.decibel(node[f"allotted_{end}_db"]), _left(node, end)]
        rows.append(row)
    both = document["account"] or {}
    last: list[Cell | str] = [Cell("total", "head"), ""]
    for end in ("upper", "lower"):
        side = both.get(end) or {}
        last += [Cell(show.decibel(side.get(key)), "head") for key in ("lost_db", "budget_db", "left_db")]
    names = ("nodes", "after", "upper dB\nlost", "allotted", "left", "lower dB\nlost", "allotted", "left")
    return table(_columns(*names, words=(0, 1)), [*rows, last], look) if rows else []


def parts(document: Document, look: Look) -> list[str]:
    """Capacitances, inductances and time constants, the greatest owners first; then all else that has a value."""
    listed = entries(document, "parts")
    live = sorted((part for part in listed if part["type"] in ("C", "L", "tau")), key=_weight, reverse=True)
    most = {end: max((part[f"owns_{end}"] or 0.0 for part in live), default=0.0) for end in ("upper", "lower")}
    rows: list[list[Cell | str]] = [
        [
            part_name(part),
            part["role"] or "",
            show.eng(part["value"], show.UNIT_OF_TYPE[part["type"]]),
            show.eng(part["tau_s"], "s"),
            *(_owned(part[f"owns_{end}"], most[end]) for end in ("upper", "lower")),
        ]
        for part in live
    ]
    names = ("parts", "role", "value", "time\nconstant", "owns of\nupper", "owns of\nlower")
    shown = table(_columns(*names, words=(0, 1)), rows, look) if rows else []
    return [*shown, *([""] if rows else []), *_still(listed, look)]


def _still(listed: list[Entry], look: Look) -> list[str]:
    """Resistances, transconductances and currents, three to a line."""
    cells = [
        (part_name(part), show.eng(part["value"], show.UNIT_OF_TYPE[part["type"]]))
        for part in listed
        if part["type"] not in ("C", "L", "tau")
    ]
    if not cells:
        return []
    third = -(-len(cells) // 3)
    cells += [("", "")] * (3 * third - len(cells))
    rows = [[text for column in range(3) for text in cells[column * third + at]] for at in range(third)]
    columns = [Column(title, right=bool(at % 2)) for at, title in enumerate(("parts", "value", "", "", "", ""))]
    return table(columns, rows, look)


def at_frequency(section: Entry, look: Look) -> list[str]:
    """Every line's gain, phase and loss at one frequency."""
    rows: list[list[Cell | str]] = [
        [
            line["name"],
            show.decibel(line["gain_db"]),
            show.decibel(line["phase_deg"]),
            show.decibel(line["lost_db"]),
        ]
        for line in section["lines"]
    ]
    names = (f"at {show.eng(section['hz'], 'Hz')}", "gain\ndB", "phase\n°", "lost\ndB")
    return table(_columns(*names), rows, look)


def _weight(part: Entry) -> float:
    return max(abs(float(part[key] or 0.0)) for key in ("owns_upper", "owns_lower"))


def _owned(value: float | None, most: float) -> Cell:
    """A share, marked where it is the greatest."""
    first = value is not None and value > 0 and value == most
    return Cell(show.share(value) + (_MARK if first else "  "), "head" if first else "")


def _sum(lines: list[Entry], key: str) -> Cell:
    known = [line[key] for line in lines if line[key] is not None]
    return Cell((show.share(sum(known)) if known else show.NONE) + "  ", "head")
