"""The text of `polebook audit`: one line a target, file by file."""

from __future__ import annotations

from polebook.report.document import Document, Entry, entries, finite
from polebook.report.look import Look
from polebook.report.sections import paragraph, target_row, unparted, unstable
from polebook.report.spread_words import built, listed, percent
from polebook.report.table import Column, table

_NAMED = 3  # moved figures that are named before the rest is counted


def audit(file: str, document: Document, look: Look, strict: bool = False) -> str:
    """The verdicts on one file; `strict` where its record is judged too, not only told when it does not hold."""
    document = finite(document)
    targets = entries(document, "targets")
    lines = [look.paint(look.text(file), "head"), *unstable(document, look)]
    record = _record(document.get("posted"), look, strict)
    if not targets:
        told = lines if len(lines) > 1 else [*lines, " no targets are set: nothing to judge"]
        return "\n".join([*told, *record]) + "\n"
    names = ("target", "want", "got", "margin", "", "")
    columns = [Column(name, right=name in ("want", "got", "margin")) for name in names]
    lines += table(columns, [target_row(entry, document["overall"]["gain_unit"]) for entry in targets], look)
    for entry in targets:
        if entry["met"] is False and entry["why"] and not (entry["name"] == "yield" and document.get("spread")):
            lines += paragraph(unparted(f"{entry['name']}: {entry['why']}"), look, hang=3)
    lines += _built(document, look)
    return "\n".join([*lines, _count(targets, look), *record]) + "\n"


def _built(document: Document, look: Look) -> list[str]:
    """What the yield was found from: how many builds of which seed, and what each target leaves of them."""
    spread = document.get("spread")
    if not spread:
        return []
    shares = dict(spread["yield"])
    whole = shares.pop("all")
    text = (f"yield: {built(spread['builds'])}, seed {spread['seed']}: {percent(whole['share'])} "
            f"({percent(whole['low'])} to {percent(whole['high'])}); "
            + ", ".join(f"{name} {percent(one['share'])}" for name, one in shares.items()))
    if spread["unjudged"]:
        text += f"; without {listed(spread['unjudged'])}, which builds are not judged by"
    return paragraph(unparted(text), look, hang=3)


def _count(targets: list[Entry], look: Look) -> str:
    short = sum(entry["met"] is not True for entry in targets)
    missed = sum(entry["met"] is False for entry in targets)
    if not short:
        return look.paint(f" all {len(targets)} met" if len(targets) > 1 else " met", "good")
    unjudged = f", {short - missed} not judged" if short > missed else ""
    return look.paint(f" {missed} of {len(targets)} missed{unjudged}", "bad")


def _record(posted: Entry | None, look: Look, strict: bool) -> list[str]:
    """How the record stands to the file; what holds, or is not there, is told only to who asks for it."""
    state = posted["state"] if posted else "none"
    if posted is None or (not strict and state in ("none", "current")):
        return []
    if state == "current":
        return [look.paint(f" posted {posted['date']}: the record holds", "good")]
    if state == "none":
        text = "nothing is posted: polebook post writes the record"
    elif state == "fault":
        text = "the record beside the file can't be used"
    elif state == "older":
        text = (f"the record is older than the file: posted {posted['date']}, and the file has changed since; "
                "polebook post brings it up to date")
    else:
        text = (f"the record does not hold: posted {posted['date']} by polebook {posted['version']}, and by now "
                f"{_moved(posted)}; polebook post brings it up to date")
    return paragraph(unparted(text), look, "bad" if strict else "warn", hang=3)


def _moved(posted: Entry) -> str:
    """Figures that come out otherwise than posted."""
    moved = posted["moved"]
    some = [f"{one['figure']} is {_plain(one['now'])} and not {_plain(one['posted'])}" for one in moved[:_NAMED]]
    rest = len(moved) - len(some)
    return ", ".join(some) + (f", with {rest} more" if rest else "")


def _plain(value: float | str | bool | None) -> str:
    """A figure to the digits that a record keeps."""
    if value is None:
        return "none"
    return f"{value:.6g}" if isinstance(value, float) else str(value)
