"""The text of `polebook post`: what was posted, and what moved since the post before."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from polebook.report import figures as show
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph
from polebook.report.table import Cell, Column, table

DIGEST = 8  # characters of a digest that tell it from the others of a record
_UNITS = {"hz": "Hz", "v": "V", "a": "A", "s": "s", "percent": "%", "v_rthz": "V/√Hz", "a_rthz": "A/√Hz"}
_VERDICTS = {True: Cell("met", "good"), False: Cell("missed", "bad"), None: Cell("not judged", "warn")}
_BAND = {"gain": "gain_db", "lower": "lower_edge_hz", "upper": "upper_edge_hz"}


def posted(entry: Document, look: Look) -> str:
    """What `post` did with one file."""
    post, before = entry["post"], entry["before"]
    name = look.text(entry["record"])
    if not entry["new"]:
        text = f"nothing new to post: the post of {post['date']} has this digest and these figures"
        return "\n".join([look.paint(name, "head"), *paragraph(text, look),
                          *paragraph('with a message it is posted again: -m "why"', look)]) + "\n"
    lines = [look.paint(name, "head"), *paragraph(_headline(post), look)]
    rows = [_row(key, post, before) for key in _shown(post)]
    heads = ["", "want", "before" if before else "", "posted", "", ""]
    columns = [Column(head, right=0 < at < 4) for at, head in enumerate(heads)]
    lines += table(columns, rows, look)
    if post["figures"]["overall"]["state"] != "stable":
        lines += paragraph(f"state: {post['figures']['overall']['state']}", look, "bad")
    if before:
        count = len(entry["moved"])
        told = f"{count} figures moved" if count > 1 else "1 figure moved" if count else "no figure moved"
        lines += paragraph(f"since the post of {before['date']} {told}", look)
    return "\n".join(lines) + "\n"


def listed(entry: Document, look: Look) -> str:
    """The posts of a record, newest first, by the numbers that `polebook compare --post` takes."""
    lines = [look.paint(look.text(entry["record"]), "head")]
    if not entry["posts"]:
        return "\n".join([*lines, " nothing is posted yet"]) + "\n"
    rows: list[list[Cell | str]] = []
    for number, post in enumerate(entry["posts"], 1):
        targets = post["figures"].get("targets", {})
        met = sum(one.get("met") is True for one in targets.values())
        band = [_got(name, post["figures"]) for name in _BAND]
        rows.append([str(number), post["date"], post["digest"][:DIGEST], *band,
                     f"{met}/{len(targets)}" if targets else show.NONE, post["message"]])
    columns = [Column(name, right=name not in ("posted", "digest", "message")) for name in (
        "", "posted", "digest", "gain", "lower", "upper", "met", "message")]
    lines += table(columns, rows, look)
    if entry["posts"][0]["digest"] != entry["digest"]:
        lines += paragraph("the file has changed since the newest post", look, "warn")
    return "\n".join(lines) + "\n"


def _headline(post: Entry) -> str:
    said = f": {post['message']}" if post["message"] else ""
    return f"posted {post['date']}, digest {post['digest'][:DIGEST]}{said}"


def _shown(post: Entry) -> Sequence[str]:
    """The targets; of the band what no target is about."""
    targets = post["figures"]["targets"]
    return [*targets, *(name for name in _BAND if name not in targets)]


def _row(name: str, post: Entry, before: Entry | None) -> list[Cell | str]:
    """A target, or a figure of the band: wanted, got at the post before, got now, met or not."""
    old, now = _got(name, before["figures"]) if before else "", _got(name, post["figures"])
    target = post["figures"]["targets"].get(name)
    if target is None:
        return [name, "", old, now, "", ""]
    return [name, _figure(target, "want_", _decibels(name, post["figures"])), old, now,
            _VERDICTS[target.get("met")], str(target.get("why", ""))]


def _got(name: str, figures: Mapping[str, Entry]) -> str:
    """What was got: by the target, or by the band where there was none."""
    target = figures.get("targets", {}).get(name)
    if target is None and name in _BAND:
        return _figure(figures.get("overall", {}), _BAND[name], _decibels(name, figures))
    return _figure(target or {}, "got_", _decibels(name, figures))


def _decibels(name: str, figures: Mapping[str, Entry]) -> str:
    """The unit of a figure in decibels."""
    return "dBΩ" if name == "gain" and figures.get("overall", {}).get("gain_unit") == "V/A" else "dB"


def _figure(row: Entry, key: str, decibels: str) -> str:
    """The first figure of `row` whose key begins so, with the unit that its key ends in."""
    name = next((name for name in row if name.startswith(key)), "")
    unit = next((unit for ending, unit in _UNITS.items() if name.endswith(f"_{ending}")), decibels)
    value = row.get(name)
    if value is None:
        return show.NONE
    return show.share(value / 100.0) if unit == "%" else show.by_unit(value, unit)
