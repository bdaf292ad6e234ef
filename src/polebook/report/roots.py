"""The page of poles and zeros."""

from __future__ import annotations

from collections.abc import Sequence

from polebook.report import figures as show
from polebook.report.document import Document, Entry, entries
from polebook.report.look import Look
from polebook.report.sections import paragraph
from polebook.report.table import Cell, Column, table

_WINDING = {
    False: "The winding tells that none of them has a positive real part: the chain is stable.",
    True: "The winding tells that some have a positive real part: the chain is unstable.",
    None: "Whether one of them has a positive real part could not be told either.",
}


def poles(document: Document, look: Look) -> list[str]:
    """Every finite pole by rising frequency, a complex pair on one line; or plainly that they are not resolved."""
    if document["poles"] is None:
        text = "Poles not resolved: no list of them agrees with their number, their sum and the winding."
        return [*paragraph(text, look, "warn"), *paragraph(_WINDING[document["overall"]["unstable"]], look)]
    return _listed(entries(document, "poles"), "poles", look)


def zeros(document: Document, look: Look) -> list[str]:
    """Every finite zero of the stages' own transfer."""
    if document["zeros"] is None:
        return paragraph("Zeros not resolved.", look, "warn")
    return _listed(entries(document, "zeros"), "zeros", look)


def pairs(roots: Sequence[Entry]) -> list[tuple[Entry, bool]]:
    """Each root, True for a complex pair, which stands once: by its member of positive imaginary part."""
    left = [root for root in roots if root["im"] < 0]
    found = []
    for root in roots:
        if root["im"] < 0:
            continue
        partner = next((other for other in left if other["re"] == root["re"] and other["im"] == -root["im"]), None)
        if partner is not None:
            left.remove(partner)
        found.append((root, partner is not None))
    alone = [(root, False) for root in left]
    return sorted([*found, *alone], key=lambda one: float(one[0]["hz"]))


def _listed(roots: list[Entry], what: str, look: Look) -> list[str]:
    if not roots:
        return [f" no finite {what}"]
    rows: list[list[Cell | str]] = []
    for root, pair in pairs(roots):
        right = what == "poles" and root["re"] > 0
        imaginary = show.eng(root["im"], "", 4) if root["im"] else ""
        rows.append([
            show.eng(root["hz"], "Hz", 4),
            show.ratio(root["q"]) if root["q"] is not None else "",
            Cell(show.eng(root["re"], "", 4), "bad" if right else ""),
            f"±{imaginary}" if pair else imaginary,
            root["stage"] or show.NONE,
            Cell("grows", "bad") if right else "",
        ])
    names = (what, "Q", "re\nrad/s", "im\nrad/s", "stage", "")
    columns = [Column(name, right=at < 4) for at, name in enumerate(names)]
    count = paragraph(f"{len(roots)} finite {what if len(roots) > 1 else what[:-1]}", look)
    return [*table(columns, rows, look), *count]
