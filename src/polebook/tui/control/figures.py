"""The figures and rows that can be focused on the page, as the drawing has them."""

from __future__ import annotations

from polebook.book.reach import within_reach
from polebook.problem import ProblemsFound
from polebook.session.state import keys_of
from polebook.stages.ladder import arm_part
from polebook.tui.draw import nodes
from polebook.tui.draw.pages import drawn
from polebook.tui.draw.scene import Scene
from polebook.tui.view import State


def names_of(state: State) -> tuple[str, ...]:
    """The figures of the focused row by the names that `working` takes; () without a ledger."""
    scene = Scene(state)
    if scene.ledger is None:
        return ()
    try:
        with within_reach(scene.chain):
            return drawn(scene).figures(scene)
    except ProblemsFound:  # figures beyond what can be computed: none can be focused
        return ()


def focused(state: State) -> str:
    """The focused figure; "" for none."""
    found = names_of(state)
    return found[min(max(state.view.figure, 0), len(found) - 1)] if found else ""


def parts_of(state: State) -> tuple[str, ...]:
    """The paths of the parts in the rows of the nodes page, ranked as there; a device's own part has its stage's."""
    scene = Scene(state)
    if scene.ledger is None:
        return ()
    try:
        with within_reach(scene.chain):
            rows = nodes.ranked(scene)
    except ProblemsFound:
        return ()
    parts = scene.figures.solution.circuit.layout.parts
    arms = {(stage.name, arm_part(arm, key)[0]): f"{stage.name}.arms.{arm.number}.{key}"
            for stage in scene.chain.stages for arm in stage.arms for key in arm.parts}
    known = {row.path for name in {parts[row[0]].stage for row in rows} for row in keys_of(state.session, name)}
    return tuple(_path(parts[row[0]].stage, parts[row[0]].name, arms, known) for row in rows)


def _path(stage: str, name: str, arms: dict[tuple[str, str], str], known: set[str]) -> str:
    path = arms.get((stage, name), f"{stage}.{name}")
    return path if path in known else f"{stage}.device"
