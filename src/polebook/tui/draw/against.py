"""Which baseline stands, in words; and what a page that needs more than a post holds says of it."""

from __future__ import annotations

from collections.abc import Mapping

from polebook.session.state import Session
from polebook.tui.draw.scene import Scene
from polebook.tui.view import Page

_NEEDS: Mapping[Page, str] = {"response": "curves", "pulse": "curves", "noise": "curves and shares",
                              "levels": "voltages and levels"}
"""What a page shows of a baseline that no post holds."""


def name(session: Session) -> str:
    """Of the baseline: "pin", "post 2 of 2026-11-03", "3f2a1c9e"."""
    return session.against.name if session.against is not None else "pin"


def short(session: Session) -> str:
    """For a column or a piece: "pinned", "3f2a1c9e"."""
    return session.against.short if session.against is not None else "pinned"


def flag(session: Session) -> str:
    """For the title: "pinned", "against post 2"."""
    return f"against {session.against.short}" if session.against is not None else "pinned"


def lacking(scene: Scene) -> str:
    """Where the baseline is a post and the page in sight needs more: what, and who has it. "" else."""
    against = scene.session.against
    what = _NEEDS.get(scene.view.page, "")
    if against is None or against.post is None or not what:
        return ""
    who = f"{against.holder} of page 0 has them" if against.holder else "no revision known here has its chain"
    return f"{against.short} holds figures, no {what}; {who}"
