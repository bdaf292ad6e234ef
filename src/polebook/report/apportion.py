"""The text of `polebook apportion`, from its JSON answer."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.report import apportion_words as words
from polebook.report import figures as show
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, Row, table

_MET = {True: Cell("met", "good"), False: Cell("missed", "bad"), None: Cell("not judged", "warn")}
FIGURES = (
    ("gain_db", "gain", "dB", "gain"), ("lower_edge_hz", "lower edge", "Hz", "lower"),
    ("upper_edge_hz", "upper edge", "Hz", "upper"), ("peaking_db", "peaking", "dB", "peaking"),
    ("rise_time_s", "rise time", "s", "rise"), ("overshoot_percent", "overshoot", "%", "overshoot"),
    ("sag_percent", "sag", "%", "sag"), ("group_delay_s", "group delay", "s", ""),
    ("noise_density", "noise density", "noise", "noise"), ("noise_figure_db", "noise figure", "dB", ""),
    ("noise_total_input", "noise at the input", "source", ""), ("supply_current_a", "supply current", "A", "current"),
    ("largest_source", "largest that passes", "source", ""), ("dynamic_range_db", "dynamic range", "dB", ""),
    ("full_power_hz", "full power", "Hz", ""),
)  # (key of overall, words, unit, the target that tells it already)


def apportion_text(answer: Document, look: Look) -> str:
    """A plan, and what has become of the file."""
    one = answer["files"][0]
    lines = [" " + look.paint(look.text(one["file"]), "head"), *plan_lines(one, look)]
    text, style = words.ending(one)
    if lines[-1]:
        lines.append("")
    return "\n".join([*lines, *paragraph(text, look, style)]) + "\n"


def plan_lines(one: Entry, look: Look) -> list[str]:
    """The keys that move, the targets and the other figures, today and as proposed, and what there is to say."""
    lines = [*paragraph(words.head(one), look), ""]
    if rows := list(_keys(one)):
        lines += [*_table("key today proposed +", rows, look), *paragraph(words.still(one), look, "dim"), ""]
    if rows := list(_targets(one)):
        lines += [*_table("targets want today proposed margin +", rows, look), ""]
    if rows := list(_figures(one)):
        lines += [*_table("other_figures today proposed", rows, look), ""]
    for sentence in words.sentences(one):
        lines += paragraph(unparted(sentence), look, hang=3)
    for caution in one["cautions"]:
        lines += paragraph(unparted(f"caution: {caution}"), look, "warn", hang=3)
    for caution in one["mended"]:
        lines += paragraph(unparted(f"mended: {caution}"), look, hang=3)
    return lines


def _table(names: str, rows: list[Row], look: Look) -> list[str]:
    """A table of columns of figures between a first one and one without a name ("+")."""
    titles = [name.replace("_", " ").replace("+", "") for name in names.split()]
    return table([Column(title, right=bool(title) and at > 0) for at, title in enumerate(titles)], rows, look)


def _keys(one: Entry) -> Iterator[Row]:
    for key in one["keys"]:
        if key["moved"]:
            yield [key["path"], key["now_text"] or show.NONE, Cell(key["text"] or show.NONE, "head"), way(key)]


def way(key: Entry) -> str:
    """How far a key moves: in per cent, or as a factor."""
    now, value = key["now"], key["value"]
    if not value:
        return "not there"
    ratio = value / now if now else 0.0
    if 0.5 < ratio < 2.0:
        return f"{100 * (ratio - 1):+.0f} %"
    return f"×{ratio:.2g}" if ratio < 10.0 else f"×{ratio:.0f}"


def _targets(one: Entry) -> Iterator[Row]:
    unit = one["overall"]["after"]["gain_unit"]
    for target in one["targets"]:
        name, after = target["name"], target["after"]
        yield [name, *(show.target(name, value, unit) for value in
                       (target["want"], target["before"]["got"], after["got"])),
               show.share(after["margin"]), _MET[after["met"]]]


def _figures(one: Entry) -> Iterator[Row]:
    for name, unit, before, after in other_figures(one):
        yield [name, show.by_unit(before, unit), show.by_unit(after, unit)]


def other_figures(one: Entry) -> Iterator[tuple[str, str, float | None, float | None]]:
    """(words, unit, today, as proposed) of the whole chain's figures that no target tells, where they show a change."""
    before, after = one["overall"]["before"], one["overall"]["after"]
    unit_in = "V" if after["gain_unit"] == "V/V" else "A"
    units = {"noise": f"{unit_in}/√Hz", "source": unit_in, "%": "share"}
    told = {target["name"] for target in one["targets"]}
    for key, name, unit, target in FIGURES:
        unit = units.get(unit, unit)
        if target not in told:
            old, new = (side[key] / 100 if unit == "share" and side[key] is not None else side[key]
                        for side in (before, after))
            if show.by_unit(old, unit) != show.by_unit(new, unit):
                yield name, unit, old, new
