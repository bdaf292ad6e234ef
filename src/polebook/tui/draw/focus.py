"""The focused figure of a page, as it is drawn."""

from __future__ import annotations

from polebook.tui.draw.pages import drawn
from polebook.tui.draw.scene import Scene


def focused(scene: Scene) -> str:
    """The name of the focused figure, as `working` takes it; "" while the sheet has the focus."""
    if scene.view.focus != "page" or scene.ledger is None:
        return ""
    names = drawn(scene).figures(scene)
    return names[min(max(scene.view.figure, 0), len(names) - 1)] if names else ""
