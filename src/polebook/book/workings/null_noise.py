"""Why a figure of noise is null, in plain words."""

from __future__ import annotations

from polebook.book.noise import SILENT
from polebook.book.noise_rows import KEYS
from polebook.book.workings.index import Entry
from polebook.book.workings.sheet import Books

BEYOND = "the noise is beyond what a number can hold"
NO_END = "the band has no upper end: the noise has a bound without one"
WHOLE = frozenset(KEYS)


def whole(books: Books, key: str, unjudged: str) -> str:
    """Of a figure of the chain; `unjudged`: why the chain has no edges, "" where it is stable."""
    noise = books.ledger.noise
    if noise is None:
        return _unstable(unjudged)
    if noise.untold:
        return noise.untold
    if key in ("noise_density", "noise_figure_db"):
        if noise.density is not None:
            return "the source is ideal: it has no resistance to compare with"
        return BEYOND
    if key == "noise_to_hz" and noise.output_rms is not None:
        return NO_END
    return noise.totals.why or BEYOND


def share(books: Books, entry: Entry, unjudged: str) -> str:
    """Of a line's or a part's share."""
    row = entry.row
    if entry.section == "parts":
        if row["type"] in ("C", "L", "tau"):
            return "what stores makes no noise"
        if row["part"] in ("ic", "id", "ia") and row["type"] == "I":
            return f"its noise is told at {row['stage']}.gm and what else the device makes"
        if row["type"] in ("R", "gm") and _silent(books, f"{row['stage']}.{row['part']}"):
            return "it is a figure of a device or a data sheet: no resistor, and so without noise of its own"
    return nothing(books, unjudged)


def nothing(books: Books, unjudged: str) -> str:
    """Why no share and no leverage on the noise is known; "" where they are."""
    noise = books.ledger.noise
    if noise is None:
        return _unstable(unjudged)
    return noise.untold or ("" if noise.shares else SILENT if noise.density is not None else BEYOND)


def _silent(books: Books, name: str) -> bool:
    part = books.layout.parts[books.part_of[name]]
    told = (part.stage, part.name) in {(one.stage, one.part) for one in books.layout.recorder.noises}
    return part.silent or (part.type == "gm" and not told and not books.layout.recorder.untold)


def _unstable(unjudged: str) -> str:
    return unjudged.replace("no edges", "no noise figures").replace("so edges and what", "so noise and what")
