"""The page of the noise: who makes it at the reference frequency, the density over frequency, the total of a band."""

from __future__ import annotations

from math import sqrt

from polebook.report import figures as show
from polebook.report.document import Document, Entry, entries, part_name
from polebook.report.leverage import LEAST as SLIGHT
from polebook.report.leverage import ranked as moved
from polebook.report.leverage import signed
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, table

MOST = 14  # sources that the page shows
LEAST = 0.0005  # share that rounds to something
BAR = 16
DEEP = 6  # lines that the leverage takes
SOURCE = ("source", "resistance")


def unit(document: Document) -> str:
    """Unit of an input-referred density."""
    return "V/√Hz" if document["overall"]["gain_unit"] == "V/V" else "A/√Hz"


def ranked(document: Document) -> list[tuple[Entry, float]]:
    """The parts that make noise with their shares of it, the greatest first."""
    found = [(part, float(part["noise_share"])) for part in entries(document, "parts") if part["noise_share"]]
    return sorted(found, key=lambda one: one[1], reverse=True)


def summary(document: Document, look: Look) -> list[str]:
    """Density, noise figure and who makes most, then the total; nothing where the noise is not known."""
    overall = document["overall"]
    density, reference = overall["noise_density"], show.eng(overall["reference_hz"], "Hz")
    if density is None:
        return []
    told = f"input noise {show.eng(density, unit(document))} at {reference}"
    if overall["noise_figure_db"] is not None:
        told += f", noise figure {show.decibel(overall['noise_figure_db'], 'dB')}"
    makers = ranked(document)
    first = next((one for one in makers if (one[0]["stage"], one[0]["part"]) != SOURCE), None)
    if first:
        told += f"; {part_name(first[0])} makes {show.about(first[1])} of its power"
        own = next((share for part, share in makers if (part["stage"], part["part"]) == SOURCE), 0.0)
        told += f", the source's own resistance {show.about(own)}" if round(100 * own) else ""
    if overall["noise_total_input"] is not None:
        volts = show.eng(overall["noise_total_input"], unit(document)[0])
        told += f"; {volts} rms {_band(overall)}"
    return paragraph(unparted(f"{told}."), look)


def _band(overall: Entry) -> str:
    low, high = overall["noise_from_hz"], overall["noise_to_hz"]
    if high is None:
        return "over all frequencies" if not low else f"from {show.eng(low, 'Hz')} upward"
    return f"up to {show.eng(high, 'Hz')}" if not low else f"from {show.eng(low, 'Hz')} to {show.eng(high, 'Hz')}"


def totals(document: Document, look: Look) -> list[str]:
    """Density, figure, totals and the smallest signal's margin; why there are none."""
    overall, why = document["overall"], (document.get("noise") or {}).get("why", "")
    lines = summary(document, look)
    if overall["noise_total_output"] is not None:
        text = f"at the output {show.eng(overall['noise_total_output'], 'V')} rms over the same band"
        margin = overall["noise_margin_db"]
        if margin is not None:
            way = "above" if margin >= 0 else "below"
            text += f"; the smallest signal lies {show.decibel(abs(margin), 'dB')} {way} the noise"
        lines += paragraph(unparted(f"{text}."), look)
    if why:
        lines += paragraph(f"{'No total' if lines else 'No noise is told'}: {why}.", look, "warn")
    return lines


def sources(document: Document, look: Look) -> list[str]:
    """Every source that matters, the greatest first: what it is, what it adds at the input, its share of the power."""
    overall, makers = document["overall"], ranked(document)
    density = overall["noise_density"]
    if density is None or not makers:
        return []
    what = (document.get("noise") or {}).get("what", {})
    rows: list[list[Cell | str]] = []
    shown = [one for one in makers if one[1] >= LEAST][:MOST]
    for part, share in shown:
        name = part_name(part)
        said = what.get(name) or (show.eng(part["value"], "Ω") if part["type"] == "R" else "")
        rows.append([name, said, show.eng(density * sqrt(share), unit(document)), show.share(share),
                     look.bar(share, BAR)])
    names = (f"noise at {show.eng(overall['reference_hz'], 'Hz')}", "of", "at the input", "share of\nthe power", "")
    lines = table([Column(name, right=at in (2, 3)) for at, name in enumerate(names)], rows, look)
    rest = makers[len(shown):]
    if rest:
        left = sum(share for _, share in rest)
        verb = "makes" if len(rest) == 1 else "make"
        more = "less than 0.1 %" if left < LEAST else show.share(left)
        lines += paragraph(f"{len(rest)} more {verb} {more}: --csv lists them all", look)
    return lines


def by_line(document: Document, look: Look) -> list[str]:
    """What each line makes of it."""
    density = document["overall"]["noise_density"]
    listed = [line for line in entries(document, "lines") if line["noise_share"] is not None]
    if density is None or not listed:
        return []
    rows: list[list[Cell | str]] = [
        [line["name"], line["kind"], show.eng(density * sqrt(line["noise_share"]), unit(document)),
         show.share(line["noise_share"]), _bar(line["noise_share"], look)] for line in listed]
    names = ("lines", "kind", "at the input", "share of\nthe power", "")
    return table([Column(name, right=at in (2, 3)) for at, name in enumerate(names)], rows, look)


def _bar(share: float, look: Look) -> str:
    """A bar of a share; none of one that rounds to nothing."""
    return look.bar(share, BAR) if share >= LEAST else ""


def curve(document: Document, look: Look) -> list[str]:
    """The density over frequency, decade by decade, with the line that makes most of it."""
    rows: list[list[Cell | str]] = [
        [show.eng(row["hz"], "Hz"), show.eng(row["input"], unit(document)), show.eng(row["output"], "V/√Hz"),
         f"{row['most']} {show.about(row['share'])}" if row["most"] else ""]
        for row in (document.get("noise") or {}).get("curve", ())]
    names = ("density", "at the input", "at the output", "most of it")
    return table([Column(name, right=at != 3) for at, name in enumerate(names)], rows, look) if rows else []


def levers(document: Document, look: Look) -> list[str]:
    """What moves the input noise most, three to a line, and the first of all in words."""
    found = [one for one in moved(document, "noise") if abs(one[1]) >= SLIGHT][:3 * DEEP]
    if not found:
        return []
    deep = -(-len(found) // 3)
    wide = -(-len(found) // deep)
    cells = [(name, signed(value)) for name, value in found] + [("", "")] * (wide * deep - len(found))
    rows = [[text for column in range(wide) for text in cells[column * deep + at]] for at in range(deep)]
    titles = ("input noise", *["%", ""] * wide)[:2 * wide]
    columns = [Column(title, right=bool(at % 2)) for at, title in enumerate(titles)]
    what = f"+1 % of {found[0][0]} moves the input noise by {signed(found[0][1])} %"
    return [*table(columns, rows, look), *paragraph(what, look)]
