"""The text of `polebook fit`, from its JSON answer."""

from __future__ import annotations

from collections.abc import Iterator
from math import floor, log10

from polebook.report import figures as show
from polebook.report.bench import name_of, plus, sweep_head
from polebook.report.document import Document, Entry
from polebook.report.fit_words import ending, head, sentences
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, Row, table

_BLIND, _BOUND = Cell("not determined", "warn"), Cell("at its bound", "warn")
_STATES = {"fitted": Cell(""), "none": Cell("not told from 0"), "least": _BOUND, "most": _BOUND,
           "not told apart": _BLIND, "not felt": _BLIND}


def fit_text(answer: Document, look: Look) -> str:
    """Which sweep, the keys with their errors, how far the curve is off before and after, and what there is to say."""
    one = answer["files"][0]
    lines = [" " + look.paint(look.text(one["file"]), "head"), *paragraph(name_of(one), look),
             *paragraph(unparted(sweep_head(one["sweep"])), look)]
    for note in one["sweep"]["notes"]:
        lines += paragraph(unparted(note), look, "dim", hang=3)
    lines += [*paragraph(head(one), look), ""]
    columns = [Column(title, right=0 < at < 5)
               for at, title in enumerate(("key", "today", "fitted", "standard\nerror", "", ""))]
    lines += [*table(columns, list(_keys(one)), look), ""]
    columns = [Column(title, right=at > 0) for at, title in enumerate(
        ("off by", "gain\nrms", "", "most at", *(("phase\nrms", "", "most at") if one["before"]["phase"] else ())))]
    lines += [*table(columns, list(_off(one)), look), ""]
    for sentence, style in sentences(one):
        lines += paragraph(unparted(sentence), look, style, hang=3)
    if lines[-1]:
        lines.append("")
    return "\n".join([*lines, *paragraph(unparted(ending(one)), look)]) + "\n"


def _keys(one: Entry) -> Iterator[Row]:
    for key in one["fitted"]:
        today = key["now_text"] or show.eng(key["now"])
        value = "" if key["value"] is None else key["text"] or ("0" if not key["value"] else show.eng(key["value"]))
        error = show.NONE if key["error"] is None else show.eng(key["error"], key["unit"], 2)
        share = "" if key["error"] is None or not key["value"] else f"{_two(100 * key['error'] / abs(key['value']))} %"
        state = _STATES[key["state"]] if key["also"] is None else Cell(f"or {show.eng(key['also'])}", "warn")
        yield [key["path"], today, Cell(value or show.NONE, "head"), error, share, state]
    if one["offset"] is not None:
        offset = one["offset"]
        known = offset["error"] is not None
        yield ["gain, measured", show.NONE, Cell(f"{offset['db']:+g} dB" if known else show.NONE, "head"),
               f"{_two(offset['error'])} dB" if known else show.NONE, "", _STATES["fitted" if known else "not felt"]]


def _off(one: Entry) -> Iterator[Row]:
    rows = [("as filed", "before"), ("as fitted", "after"), ("as written", "as_written")]
    for name, key in rows if one["together"] else rows[:2]:
        row: list[Cell | str] = [name]
        for what, unit in (("gain", "dB"), ("phase", "°")):
            off = one[key][what]
            if off:
                row += [f"{off['rms']:.3f} {unit}", f"{plus(off['largest'], 3)} {unit}",
                        show.eng(off["largest_hz"], "Hz")]
        yield row


def _two(value: float) -> str:
    """Two digits, without an exponent where they stay short."""
    return f"{value:.{min(max(1 - floor(log10(value)), 0), 6)}f}" if value else "0"
