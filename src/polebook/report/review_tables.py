"""What a review tells otherwise than the pages of `polebook show`: its head, short rankings, the parts to fit."""

from __future__ import annotations

from math import sqrt

from polebook.report import figures as show
from polebook.report import leverage, noise, sections
from polebook.report.document import Document, entries, part_name
from polebook.report.look import Look
from polebook.report.markdown import code, escaped
from polebook.report.sections import paragraph
from polebook.report.table import Cell, Column, table

MOST = 10  # rows of a ranking
_LEAST = 0.005  # share of an edge that rounds to a per cent
_PEAKS = 0.005  # dB that show
_LEVERS = (*leverage.FIGURES, ("noise", "input noise"))


def facts(document: Document) -> list[str]:
    """Which file this is a review of, what made it, and what the chain consists of."""
    overall, rails = document["overall"], document["supply"]
    lines = [f"- date: {escaped(document['day'])}"] if document["day"] else []
    lines += [f"- chain file: {code(document['file'])}", f"- digest: {code(document['chain']['digest'])}",
              f"- made by: {escaped(document['tool'])}",
              f"- stages: {', '.join(_stage(stage) for stage in document['stages'])}"]
    volts = [show.eng(rails[key], "V") for key in ("positive", "negative") if key in rails]
    supply = f"{' and '.join(volts) or 'none stated'}, parts at {rails['temperature']:g} °C"
    if overall["supply_current_a"] is not None:
        supply += f", {show.eng(overall['supply_current_a'], 'A')} drawn"
    return [*lines, f"- supply: {escaped(supply)}"]


def _stage(stage: Document) -> str:
    device = f" ({stage['device']})" if stage["device"] else ""
    return escaped(f"{stage['name']} {stage['kind']}{device}{', left out' if stage['left_out'] else ''}")


def notes(document: Document) -> list[list[str]]:
    """What the file says in words: its own note as a quotation, line for line, the others as a list."""
    quoted: list[str] = []
    listed: list[str] = []
    for note in document["notes"]:
        told = [escaped(line) for line in note["text"].splitlines()]
        if note["about"]:
            listed.append(f"- {escaped(note['about'])}: {' '.join(filter(None, told))}")
        else:
            quoted += [f"> {line}".rstrip() for line in told]
    return [quoted, listed]


def cautions(document: Document) -> list[str]:
    """Every caution, with what it is about where it does not say so itself."""
    return [f"- {escaped(text)}" for text in sections.warnings(document)]


def met(document: Document) -> list[str]:
    """How many of the targets are met; what a yield was judged by."""
    targets = entries(document, "targets")
    if not targets:
        return []
    count = sum(target["met"] is True for target in targets)
    told = f"{count} of {len(targets)} targets {'is' if count == 1 else 'are'} met."
    built = document["built"]
    return [told if not built else f"{told} The yield is that of {built['builds']} built chains, seed {built['seed']}."]


def band(document: Document, look: Look) -> list[str]:
    """Gain and band of the chain in a sentence, and how far it peaks."""
    overall = document["overall"]
    if overall["gain_db"] is None:
        return paragraph("Nothing passes at midband.", look)
    size, unit = abs(overall["gain"]), overall["gain_unit"]
    plain = f"{show.ratio(size)} times" if unit == "V/V" else show.eng(size, unit)
    turned = "inverting" if overall["gain"] < 0 else "not inverting"
    told = f"Midband gain {show.gain(size, unit)} ({plain}, {turned})"
    ends = [overall["lower_edge_hz"], overall["upper_edge_hz"]]
    if overall["unstable"] is False and any(edge is not None for edge in ends):
        low, high = (None if edge is None else show.eng(edge, "Hz") for edge in ends)
        told += f"; band from {low or 'd.c.'}{f' to {high}' if high else ' upward, without an upper edge'}"
    if overall["peaking_db"] is not None:
        peaks = overall["peaking_db"] >= _PEAKS
        told += f"; it peaks by {show.decibel(overall['peaking_db'], 'dB')}" if peaks else "; it does not peak"
    return paragraph(f"{told}.", look)


def nodes(document: Document, look: Look) -> list[str]:
    """Every node with its resistance, capacitance, pole, and the room that the pole has."""
    rows: list[list[Cell | str]] = [
        [node["name"], node["stage"] or "", show.eng(node["ohm"], "Ω"), show.eng(node["farad"], "F"),
         show.eng(node["pole_hz"], "Hz"), show.ratio(node["room"])] for node in entries(document, "nodes")]
    names = ("nodes", "after", "resistance", "capacitance", "pole", "room")
    return table([Column(name, right=at > 1) for at, name in enumerate(names)], rows, look) if rows else []


def owners(document: Document, look: Look) -> list[str]:
    """The parts that own most of either edge, and what all others own."""
    def weight(part: Document) -> float:
        return max(abs(float(part[key] or 0.0)) for key in ("owns_upper", "owns_lower"))

    listed = sorted((part for part in entries(document, "parts") if weight(part) >= _LEAST), key=weight, reverse=True)
    rows: list[list[Cell | str]] = [
        [part_name(part), part["role"] or "", show.eng(part["value"], show.UNIT_OF_TYPE[part["type"]]),
         show.eng(part["tau_s"], "s"), show.share(part["owns_upper"]), show.share(part["owns_lower"])]
        for part in listed[:MOST]]
    rest = [part for part in entries(document, "parts") if part not in listed[:MOST]]
    left = [sum(part[key] or 0.0 for part in rest) if document["overall"][edge] is not None else None
            for key, edge in (("owns_upper", "upper_edge_hz"), ("owns_lower", "lower_edge_hz"))]
    rows.append(["all others", "", "", "", *map(show.share, left)])
    names = ("part", "role", "value", "time constant", "owns of upper", "owns of lower")
    return table([Column(name, right=at > 1) for at, name in enumerate(names)], rows, look) if listed else []


def levers(document: Document, look: Look) -> list[str]:
    """What 1 % more of a part, card figure or stated current moves: the first ten of each figure, per cent."""
    ranked = {name: [one for one in leverage.ranked(document, figure) if abs(one[1]) >= leverage.LEAST][:MOST]
              for figure, name in _LEVERS}
    columns = {name: column for name, column in ranked.items() if column}
    rows: list[list[Cell | str]] = []
    for at in range(max(map(len, columns.values()), default=0)):
        row: list[Cell | str] = []
        for column in columns.values():
            row += [column[at][0], leverage.signed(column[at][1])] if at < len(column) else ["", ""]
        rows.append(row)
    heads = [Column(title, right=bool(right)) for name in columns for title, right in ((name, 0), ("%", 1))]
    return table(heads, rows, look) if rows else []


def makers(document: Document, look: Look) -> list[str]:
    """The sources of most of the noise at the reference frequency."""
    density, ranked = document["overall"]["noise_density"], noise.ranked(document)
    if density is None or not ranked:
        return []
    what, unit = document["noise"]["what"], noise.unit(document)
    shown = [one for one in ranked if one[1] >= noise.LEAST][:MOST]
    rows: list[list[Cell | str]] = []
    for part, share in shown:
        name = part_name(part)
        said = what.get(name) or (show.eng(part["value"], "Ω") if part["type"] == "R" else "")
        rows.append([name, said, show.eng(density * sqrt(share), unit), show.share(share)])
    left = 1.0 - sum(share for _, share in shown)
    if len(ranked) > len(shown):
        rows.append([f"{len(ranked) - len(shown)} more", "", show.eng(density * sqrt(max(left, 0.0)), unit),
                     show.share(left)])
    names = ("source of noise", "of", "at the input", "share of the power")
    return table([Column(name, right=at > 1) for at, name in enumerate(names)], rows, look)


def fitted(document: Document, look: Look) -> list[str]:
    """What is bought and soldered."""
    listed = document["parts_list"]["parts"]
    rows: list[list[Cell | str]] = []
    for row in listed:
        unit = f" {row['unit']}" if row["group"] in ("device", "inductor") else ""
        rows.append([row["group"], f"{row['code']}{unit}{' *' if row['preferred'] is False else ''}",
                     "" if row["tolerance"] is None else f"{100 * row['tolerance']:.3g} %", str(row["count"]),
                     ", ".join(row["used"])])
    names = ("part", "value", "tolerance", "count", "used in")
    columns = [Column(name, right=name in ("tolerance", "count")) for name in names]
    odd = any(row["preferred"] is False for row in listed)
    note = paragraph("* not of the file's preferred series", look) if odd else []
    return [*table(columns, rows, look), *note] if rows else []
