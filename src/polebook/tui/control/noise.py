"""Keys of the noise page: cursor, window, input or output, by part or by line, Enter that goes to a row's key."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace

from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.book.response import begin_hz, whole_band
from polebook.circuit.build import CURRENT_KEYS
from polebook.problem import ProblemsFound
from polebook.session.state import keys_of, sheets_of
from polebook.stages.ladder import arm_part
from polebook.tui.control.base import Done, Work, at, done, refuse, say, stepping, to_path
from polebook.tui.control.plots import window_keys
from polebook.tui.draw.noise_makers import FIGURES, Maker, chosen, listed, why
from polebook.tui.draw.plot import sight
from polebook.tui.draw.plot.sight import Window
from polebook.tui.draw.scene import Scene
from polebook.tui.view import Plot, State

Move = Callable[[Plot, Window, float, int], Plot]
WHAT = ("input", "output")
NO_FIGURES = "there is no noise to look at", "! tells what is wrong with the file"
_UPPER = "_upper"


def _known(state: State) -> tuple[Ledger, Window, str] | None:
    """The ledger that is drawn, the window that it asks for, why there is nothing to show; None without figures."""
    of = state.session.good
    if of is None:
        return None
    try:
        with within_reach(of.chain):
            return of, whole_band(of), why(of)
    except ProblemsFound:  # figures beyond what can be computed
        return None


def rows(state: State) -> int:
    """How many rows the arrows go through: the figures, then who makes noise."""
    known = _known(state)
    return 0 if known is None or known[2] else len(FIGURES) + len(listed(Scene(state)))


def _moved(state: State, move: Move, by: int) -> Done:
    """The plot moved, from where the cursor is seen to be."""
    known = _known(state)
    if known is None:
        return refuse(state, *NO_FIGURES)
    of, whole, reason = known
    if reason:
        return refuse(state, f"no noise is told: {reason}")
    plot = state.view.noise
    return done(at(state, noise=move(plot, whole, sight.cursor(plot, whole, begin_hz(of)), by)))


def _zoomed(state: State, by: int) -> Done:
    before = state.view.noise
    after, outcome = _moved(state, sight.zoomed, by)
    if after.view.message or (after.view.noise.low_hz, after.view.noise.high_hz) != (before.low_hz, before.high_hz):
        return after, outcome
    return say(state, "as near as it goes: half a decade" if by > 0 else "as far as it goes; Esc shows the band again")


def act(state: State) -> Done:
    """To the key of the chosen row."""
    known = _known(state)
    if known is None:
        return refuse(state, *NO_FIGURES)
    of, _, reason = known
    if reason:
        return _to_unknown(state, of, reason)
    scene = Scene(state)
    number = chosen(scene) - len(FIGURES)
    if number < 0:
        return done(to_path(state, FIGURES[number].path))
    return done(to_path(state, path_of(state, listed(scene)[number])))


def _to_unknown(state: State, of: Ledger, reason: str) -> Done:
    """To the current of the first stage whose noise can't be told."""
    untold = of.solution.circuit.layout.recorder.untold if of.noise is not None else []
    stage = next((one for one in of.chain.stages if untold and one.name == untold[0][0]), None)
    if stage is None:
        return refuse(state, f"no noise is told: {reason}")
    family = of.chain.cards[stage.device].family if stage.device in of.chain.cards else ""
    return done(to_path(state, f"{stage.name}.{CURRENT_KEYS.get(family, 'id')}"))


def path_of(state: State, maker: Maker) -> str:
    """The key that sets what makes the noise: a part's own, else the card's of the device; of a line its sheet."""
    if not maker.part or maker.stage not in sheets_of(state.session):
        return maker.stage
    known = {row.path for row in keys_of(state.session, maker.stage)}
    chain = state.session.chain
    arms = {} if chain is None else {arm_part(arm, key)[0]: f"{stage.name}.arms.{arm.number}.{key}"
                                     for stage in chain.stages if stage.name == maker.stage
                                     for arm in stage.arms for key in arm.parts}
    device = "upper" if maker.part.endswith(_UPPER) else "device"
    tried = (arms.get(maker.part, ""), maker.name, f"{maker.stage}.{device}", f"{maker.stage}.device",
             f"{maker.stage}.nf")
    return next((path for path in tried if path in known), maker.stage)


def _shown(state: State, by: int) -> Done:
    """The density at the input or at the output."""
    output = state.view.noise.what != "output"
    told = "density at the output" if output else "density referred to the input: over the gain at its frequency"
    return say(at(state, noise=replace(state.view.noise, what=WHAT[output])), told)


def _by_line(state: State, now: float) -> Done:
    """Ranked by lines or by parts."""
    single = not state.view.noise.single
    row = min(state.view.row, len(FIGURES))
    told = "who makes it, line by line" if single else "who makes it, part by part"
    return say(at(state, noise=replace(state.view.noise, single=single), row=row, figure=0), told)


def _back(state: State, now: float) -> Done:
    """To the window of the figures; from there as anywhere."""
    plot, known = state.view.noise, _known(state)
    if plot.low_hz is None or known is None or state.view.sheet:
        from polebook.tui.control.moving import back  # deferred: it knows the pages, and they know this one

        return back(state)
    of, whole, _ = known
    return done(at(state, noise=sight.automatic(plot, whole, sight.cursor(plot, whole, begin_hz(of)))))


OWN: Mapping[str, Work] = {
    **window_keys(_moved, _zoomed, sight.moved, sight.panned, sight.to_end),
    "next curve": stepping(_shown, 1),
    "curve before": stepping(_shown, -1),
    "single lines": _by_line,
    "back": _back,
}
"""Action -> what it does on this page."""
