"""The pages, once for drawing: what each draws, which figures can be focused on it, how many rows it wants."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from polebook.tui.draw import apportion, history, ledger, levels, leverage, nodes, noise, pulse, response, spread
from polebook.tui.draw.scene import Scene
from polebook.tui.keys import Hint
from polebook.tui.lines import Line
from polebook.tui.view import Page


@dataclass(frozen=True, slots=True)
class Drawn:
    """A page.

    page     scene, cells, rows, name of the focused figure -> at most so many lines
    figures  names of the focused row's figures, as `working` takes them; () where a row has none
    want     rows that it would like where screen and sheet share the height
    decent   rows that it has before the verdict is told whole
    wide     rows that it would like beside the sheet, of so many
    sheet    rows that the sheet under it has before the page is decent
    hints    what can be pressed with the page focused, where that is not what `keys` has for it
    """

    page: Callable[[Scene, int, int, str], list[Line]]
    figures: Callable[[Scene], tuple[str, ...]]
    want: Callable[[Scene], int]
    decent: int
    wide: Callable[[Scene, int], int]
    sheet: int = 3
    hints: Callable[[Scene], tuple[Hint, ...]] = lambda scene: ()


def _ledger_rows(scene: Scene) -> int:
    return len(scene.names) + ledger.FRAME_ROWS


PAGES: Mapping[Page, Drawn] = {
    "ledger": Drawn(ledger.page, ledger.figures, _ledger_rows, 8, lambda scene, rows: _ledger_rows(scene)),
    "nodes": Drawn(nodes.page, nodes.figures, lambda scene: 11, 8,
                   lambda scene, rows: min(len(nodes.ranked(scene)) + 7, rows)),
    "response": Drawn(response.page, response.figures, lambda scene: 14, 12, lambda scene, rows: rows, 2),
    "pulse": Drawn(pulse.page, pulse.figures, lambda scene: 14, 12, lambda scene, rows: rows, 2, pulse.hints),
    "noise": Drawn(noise.page, noise.figures, lambda scene: 14, 12, lambda scene, rows: rows, 2, noise.hints),
    "levels": Drawn(levels.page, levels.figures, levels.want, 12,
                    lambda scene, rows: levels.rows_for_all(scene) if rows >= levels.BOTH else levels.want(scene), 2),
    "leverage": Drawn(leverage.page, leverage.figures, lambda scene: 12, 11, lambda scene, rows: rows,
                      hints=leverage.hints),
    "spread": Drawn(spread.page, spread.figures, lambda scene: spread.WANT, 12, lambda scene, rows: rows, 2,
                    spread.hints),
    "apportion": Drawn(apportion.page, lambda scene: (), lambda scene: apportion.WANT, apportion.DECENT,
                       lambda scene, rows: rows, 2, apportion.hints),
    "history": Drawn(history.page, history.figures, history.want, 13, lambda scene, rows: rows, 2, history.hints),
}


def drawn(scene: Scene) -> Drawn:
    """The page in sight."""
    return PAGES[scene.view.page]
