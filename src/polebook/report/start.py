"""What `polebook start` says of the chain that it wrote."""

from __future__ import annotations

from collections.abc import Sequence

from polebook.report import figures as show
from polebook.report.document import Entry, finite
from polebook.report.look import Look
from polebook.report.sections import paragraph


def started(file: str, stages: Sequence[tuple[str, str]], rail: float, overall: Entry, look: Look) -> str:
    """The stages, the rail, what the chain does as it stands, and where to go on."""
    overall = finite(overall)
    listed = ", ".join(f"{name} {kind}" for name, kind in stages)
    gain = show.gain(overall["gain"], overall["gain_unit"])
    lower, upper = (show.eng(overall[f"{end}_edge_hz"], "Hz") for end in ("lower", "upper"))
    does = f"gain {gain}, from {lower} to {upper}"
    if overall["unstable"]:
        does = f"gain {gain}, and unstable as it stands: the ledger says more"
    lines = [
        " " + look.paint(look.text(file), "head"),
        *paragraph(f"{listed}, on {show.eng(rail, 'V')}: {does}", look),
        *paragraph("its cards carry typical figures: replace them by those of your devices", look),
        *paragraph(f"polebook show {file} prints its ledger", look),
    ]
    return "\n".join(lines) + "\n"
