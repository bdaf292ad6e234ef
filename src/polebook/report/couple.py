"""The text and the CSV of `polebook couple`, from its JSON answer."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.quantity import letter
from polebook.report import figures as show
from polebook.report.csvout import csv_text, titled
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import GAP, Cell, Column, Row, table

_SETS = (("now", "today"), ("least", "least\ntotal"), ("value", "to fit"), ("each", "each\nat f/n"),
         ("like", "like\ncorners"))
_LONG = 14  # letters of a name beside which columns can stand apart
_MET = {True: Cell("met", "good"), False: Cell("missed", "bad"), None: Cell("not judged", "warn")}


def couple_text(answer: Document, look: Look) -> str:
    """Today's capacitors, the proposed ones and those of two rules; what is to be said of them; the targets."""
    one = answer["files"][0]
    count = len(one["parts"])
    head = f"lower edge at {_hz(one['lower_hz'])} or below: {count} capacitor{'s' * (count != 1)}, {one['series']}"
    lines = [" " + look.paint(look.text(one["file"]), "head"), *paragraph(head, look), "", *_values(one, look), ""]
    for sentence in _sentences(one):
        lines += paragraph(unparted(sentence), look, hang=3)
    if rows := _targets(one):
        names = ("targets", "want", "today", "proposed", "")
        lines += ["", *table([Column(name, right=name not in ("targets", "")) for name in names], rows, look)]
    cautions = one["proposal"]["cautions"]
    lines += [""] if cautions else []
    for caution in cautions:
        lines += paragraph(f"caution: {caution}", look, "warn", hang=3)
    return "\n".join([*lines, "", *_ending(one, look)]) + "\n"


def _values(one: Entry, look: Look) -> list[str]:
    """A line a capacitor, the sums, and the edge that each set makes."""
    sets = (f"{title}\n{one['series']}" if name == "value" else title for name, title in _SETS)
    titles = ["", "sees\nΩ", "owns %\ntoday", "owns %\nthen", *sets]
    rows: list[Row] = []
    for part in one["parts"]:
        values = [part["farad"][name] for name, _ in _SETS]
        texts = [show.eng(value) if name == "least" else letter(value, "capacitance")
                 for (name, _), value in zip(_SETS, values, strict=True)]
        mark = " *" if part["bound"] else ""
        rows.append([part["path"] + mark, show.eng(part["ohm"]), show.bare(part["owns_now"], "share"),
                     show.bare(part["owns"], "share"), *_bold(texts)])
    sums = [show.eng(one["total_farad"][name]) for name, _ in _SETS]
    edges = [show.eng(one["lower_edge_hz"][name]) for name, _ in _SETS]
    rows += [["total, F", "", "", "", *_bold(sums)], ["lower edge, Hz", "", "", "", *_bold(edges)]]
    gap = GAP if max(len(part["path"]) for part in one["parts"]) <= _LONG else 1
    return table([Column(title, right=at > 0) for at, title in enumerate(titles)], rows, look, gap)


def _bold(texts: list[str]) -> list[Cell]:
    return [Cell(text, "head" if name == "value" else "") for (name, _), text in zip(_SETS, texts, strict=True)]


def _sentences(one: Entry) -> Iterator[str]:
    totals, parts = one["total_farad"], one["parts"]
    yield (f"{show.eng(totals['value'], 'F')} in place of {show.eng(totals['now'], 'F')}; without a series "
           f"{show.eng(totals['least'], 'F')} would do. There each owns of the edge what it has of the capacitance"
           f"{', but for those marked' if any(part['bound'] for part in parts) else ''}.")
    if any(part["bound"] for part in parts):
        yield "* its own corner would have to lie above the wanted edge for the total to fall further; it may not."
    for part in parts:
        if part["owns"] is not None and part["owns"] < -0.005:
            yield f"{part['path']} owns less than nothing: a larger one would raise the edge."
    if any(part["path"] == "source.couple" for part in parts):
        yield ("source.couple is among them: where it is a sensor's own capacitance and can't be chosen, name the "
               "others with --free.")
    if one["left"]:
        yield f"not sized, since they see a short or nothing at midband: {', '.join(one['left'])}."
    if one["tolerance"] and one["low_hz"] is not None and one["low_hz"] > one["lower_hz"]:
        wanted = one["lower_hz"]
        yield (f"As drawn. With every one of them too small by its tolerance ({show.share(one['tolerance'])}) the edge "
               f"lies at {_hz(one['low_hz'])}; where that must hold too, want about "
               f"{_hz(wanted * wanted / one['low_hz'])}.")


def _targets(one: Entry) -> list[Row]:
    unit = one["proposal"]["overall"]["after"]["gain_unit"]
    return [[target["name"], *(show.target(target["name"], value, unit) for value in
                               (target["want"], target["before"]["got"], target["after"]["got"])),
             _MET[target["after"]["met"]]] for target in one["proposal"]["targets"]]


def _ending(one: Entry, look: Look) -> list[str]:
    moved = sum(key["moved"] for key in one["proposal"]["keys"])
    if not moved:
        return paragraph("the file has these values already", look)
    if one["written"]:
        return paragraph(f"{moved} value{'s' * (moved != 1)} written into {one['file']}", look, "good")
    return paragraph("the file is as it was; --write puts the proposal into it", look, "dim")


def _hz(value: float | None) -> str:
    return show.eng(value, "Hz").replace(" ", "\u00a0")


def couple_csv(answer: Document) -> str:
    """One row a capacitor, the sums, and the edges."""
    one = answer["files"][0]
    names = {"now": "today", "least": "least total", "value": f"to fit {one['series']}", "each": "each at f/n",
             "like": "like corners"}
    heading = ["part", titled("sees", "Ω"), titled("owns today", "1"), titled("owns then", "1"),
               *(titled(names[name], "F") for name, _ in _SETS), "at its bound"]
    rows = [[part["path"], part["ohm"], part["owns_now"], part["owns"], *(part["farad"][name] for name, _ in _SETS),
             part["bound"]] for part in one["parts"]]
    rows.append(["total [F]", None, None, None, *(one["total_farad"][name] for name, _ in _SETS), None])
    rows.append(["lower edge [Hz]", None, None, None, *(one["lower_edge_hz"][name] for name, _ in _SETS), None])
    return csv_text(heading, rows)
