"""The text of `polebook audit`: one line a target, file by file."""

from __future__ import annotations

from polebook.report.document import Document, Entry, entries, finite
from polebook.report.look import Look
from polebook.report.sections import paragraph, target_row, unparted, unstable
from polebook.report.spread_words import built, listed, percent
from polebook.report.table import Column, table


def audit(file: str, document: Document, look: Look) -> str:
    """The verdicts on one file."""
    document = finite(document)
    targets = entries(document, "targets")
    lines = [look.paint(look.text(file), "head"), *unstable(document, look)]
    if not targets:
        return "\n".join(lines if len(lines) > 1 else [*lines, " no targets are set: nothing to judge"]) + "\n"
    names = ("target", "want", "got", "margin", "", "")
    columns = [Column(name, right=name in ("want", "got", "margin")) for name in names]
    lines += table(columns, [target_row(entry, document["overall"]["gain_unit"]) for entry in targets], look)
    for entry in targets:
        if entry["met"] is False and entry["why"] and not (entry["name"] == "yield" and document.get("spread")):
            lines += paragraph(unparted(f"{entry['name']}: {entry['why']}"), look, hang=3)
    lines += _built(document, look)
    return "\n".join([*lines, _count(targets, look)]) + "\n"


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
