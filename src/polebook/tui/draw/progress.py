"""How far work in the background is, as a piece of a line."""

from __future__ import annotations

from polebook.tui.draw.pen import Pen
from polebook.tui.lines import Line, Span
from polebook.tui.view import Job

BAR = 12  # cells


def progress(pen: Pen, job: Job) -> Line:
    """Pieces done, of how many, and a bar; nothing yet before the first."""
    if job.total < 1:
        return (Span("begun", "dim"),)
    bar = pen.look.bar(job.done / job.total, BAR)
    return (Span(f"{job.done} of {job.total} "), Span(bar, "bar"), Span(pen.text("·") * (BAR - len(bar)), "dim"))
