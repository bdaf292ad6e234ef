"""The text and the CSV of `polebook stages`, from its JSON answer."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from math import log10

from polebook.report import figures as show
from polebook.report.csvout import Value, csv_text, titled
from polebook.report.document import Document, Entry
from polebook.report.look import Look, cells
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, Row, table

_LAW = "│"
_BEST = "◂ most"
_DB = {"V/V": "dB", "V/A": "dBΩ"}


def stages_text(answer: Document, look: Look) -> str:
    """The copies as they are, and those that make the wanted gain: a table and a plot each."""
    one = answer["files"][0]
    name, most = one["template"], one["most"]
    lines = [" " + look.paint(look.text(one["file"]), "head"),
             *paragraph(f"1 to {most} copies of {name} ({one['kind']}) between the file's source and load", look)]
    for note in one["notes"]:
        lines += paragraph(note, look, hang=3)
    lines += ["", *_single(one, look), "", *_as_it_is(one, look), "", *_plot(one["rows"], look)]
    wanted = one["wanted"]
    if wanted and wanted["rows"]:
        lines += ["", *_for_gain(one, wanted, look), "", *_plot(wanted["rows"], look), ""]
        for sentence in _sentences(one, wanted):
            lines += paragraph(unparted(sentence), look, hang=3)
    elif wanted is None and one["by"]:
        told = "no gain is wanted; --gain 60dB, say, tells how many stages make it best"
        lines += ["", *paragraph(told, look, "dim")]
    elif wanted is None:
        lines += ["", *paragraph(f"no wanted gain is looked at: {one['why_no_gain']}", look, "dim")]
    if one["stopped"]:
        done = len(one["rows"]) + len(wanted["rows"] if wanted else ())
        lines += paragraph(f"stopped after {done} of {most * (2 if wanted else 1)} chains", look, "warn")
    return "\n".join(lines) + "\n"


def _single(one: Entry, look: Look) -> list[str]:
    """What one copy does, alone and among others: what the law starts from."""
    lines: list[str] = []
    if one["rows"] and (first := one["rows"][0])["stage_gain_db"] is not None:
        gain, edge = show.decibel(first["stage_gain_db"], "dB"), show.eng(first["upper_hz"], "Hz")
        told = f"{one['template']} alone: {gain}, upper edge {edge}, with source and load"
        lines += paragraph(unparted(told), look)
    if one["inner_gain"] is not None:
        pole, gain = one["inner_pole_hz"], one["inner_gain"]
        told = (f"{one['template']} between others like it: {show.decibel(20 * log10(gain), 'dB')}, pole "
                f"{show.eng(pole, 'Hz')}, gain times pole {show.eng(gain * pole, 'Hz')}")
        lines += paragraph(unparted(told), look)
    return lines


def _as_it_is(one: Entry, look: Look) -> list[str]:
    titles = ("n", f"gain\n{_DB[one['gain_unit']]}", "a stage\ndB", "upper\nHz", "by law,\nalone", "by law,\ninner",
              "lower\nHz", "by law,\nalone", "gain ×\nupper", "")
    rows: list[Row] = []
    for row in one["rows"]:
        rows.append([str(row["count"]), show.decibel(row["gain_db"]), show.decibel(row["stage_gain_db"]),
                     Cell(show.eng(row["upper_hz"]), "head"), show.eng(row["law_upper_hz"]),
                     show.eng(row["inner_upper_hz"]), show.eng(row["lower_hz"]), show.eng(row["law_lower_hz"]),
                     show.eng(row["gain_band"]), "*" if row["why"] else ""])
    return [*_tabled(titles, rows, look), *_reasons(one["rows"], look)]


def _for_gain(one: Entry, wanted: Entry, look: Look) -> list[str]:
    by, now = one["by"], one["by_now"]
    told = show.decibel(wanted["gain_db"], _DB[one["gain_unit"]])
    here = show.by_unit(now, one["by_unit"])
    head = unparted(f"{told} with every n: {by} of each copy set for it, {here} in the file")
    titles = ("n", f"{by}\n{one['by_unit']}", "a stage\ndB", "upper\nHz", "by law,\nalone", "by law,\ninner",
              "lower\nHz", "gain ×\nupper", "")
    rows: list[Row] = []
    for row in wanted["rows"]:
        best = row["count"] == wanted["best"]
        rows.append([str(row["count"]), show.eng(row["value"]), show.decibel(row["stage_gain_db"]),
                     Cell(show.eng(row["upper_hz"]), "good" if best else "head"), show.eng(row["law_upper_hz"]),
                     show.eng(row["inner_upper_hz"]), show.eng(row["lower_hz"]), show.eng(row["gain_band"]),
                     Cell(_BEST, "good") if best else "*" if row["why"] else ""])
    return [*paragraph(head, look), *_tabled(titles, rows, look), *_reasons(wanted["rows"], look)]


def _tabled(titles: Sequence[str], rows: Sequence[Row], look: Look) -> list[str]:
    return table([Column(title, right=at < len(titles) - 1) for at, title in enumerate(titles)], rows, look)


def _reasons(rows: Sequence[Entry], look: Look) -> Iterator[str]:
    for row in rows:
        if row["why"]:
            yield from paragraph(f"* {row['count']}: {row['why']}", look, hang=3)


def _plot(rows: Sequence[Entry], look: Look) -> list[str]:
    """A bar a row as long as the upper edge is high, and a mark where the law puts it."""
    known = [row["upper_hz"] for row in rows if row["upper_hz"] is not None]
    if not known:
        return []
    full, mark = max(known), look.text(_LAW) if look.has(_LAW) else "|"
    begin = max(cells(show.eng(hz)) for hz in known)
    room = look.width - begin - 8
    sample = look.bar(1.0, 1)
    title = look.text(f"upper edge against n: {sample} real, {mark} by the law from one alone")
    lines = [" " + look.paint(title, "dim")]
    for row in rows:
        bar = list(look.bar((row["upper_hz"] or 0.0) / full, room).ljust(room))
        law = row["law_upper_hz"]
        if law is not None and law <= full:
            bar[min(int(law / full * room), room - 1)] = mark
        lines.append(f" {row['count']:>2}  {look.text(show.eng(row['upper_hz'])):>{begin}}  {''.join(bar)}".rstrip())
    return lines


def _sentences(one: Entry, wanted: Entry) -> Iterator[str]:
    row = next((row for row in wanted["rows"] if row["count"] == wanted["best"]), None)
    if row is not None:
        last = "; it is the most that was tried, and more may give more (--most)" if row["count"] == one["most"] else ""
        yield (f"The greatest bandwidth: {row['count']} stage{'s' * (row['count'] != 1)}, "
               f"{show.eng(row['upper_hz'], 'Hz')} at {show.decibel(row['stage_gain_db'], 'dB')} a stage, {one['by']} "
               f"{show.by_unit(row['value'], one['by_unit'])}{last}.")
    elif wanted["rows"]:
        yield "With none of these numbers the gain is made by stages whose figures can be trusted."
    if wanted["optimum_stages"] is not None:
        gain = show.decibel(20 * log10(wanted["optimum_stage_gain"]), "dB")
        yield (f"Published, for like one-pole stages whose gain times bandwidth stands still: 2·ln G = "
               f"{wanted['optimum_stages']:.1f} stages of {gain} (the root of e) each; in whole numbers "
               f"{wanted['best_by_law']}.")


def stages_csv(answer: Document) -> str:
    """One row a chain: the copies as they are, then those that make the wanted gain."""
    one = answer["files"][0]
    heading = ["copies", "for the wanted gain", titled(one["by"] or "key", one["by_unit"]),
               titled("gain", one["gain_unit"]), titled("gain", "dB"), titled("gain a stage", "V/V"),
               titled("upper edge", "Hz"), titled("upper by the law, alone", "Hz"),
               titled("upper by the law, inner", "Hz"), titled("lower edge", "Hz"), titled("lower by the law", "Hz"),
               titled("gain times upper", "Hz"), "why"]
    keys = ("value", "gain", "gain_db", "stage_gain", "upper_hz", "law_upper_hz", "inner_upper_hz", "lower_hz",
            "law_lower_hz", "gain_band", "why")
    rows: list[list[Value]] = []
    for made, listed in ((False, one["rows"]), (True, one["wanted"]["rows"] if one["wanted"] else [])):
        rows += [[row["count"], made, *(row[key] for key in keys)] for row in listed]
    return csv_text(heading, rows)
