"""Keys of the pulse page: cursor, window, which end of the band, the figure that is chosen."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace

from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.problem import ProblemsFound
from polebook.tui.control.base import Done, Work, at, done, refuse, say, still, to_path
from polebook.tui.control.plots import window_keys
from polebook.tui.draw import pulse_sight as sight
from polebook.tui.draw.plot.axis import short
from polebook.tui.draw.pulse import place, reach
from polebook.tui.draw.pulse_figures import chosen, listed, marks, why
from polebook.tui.draw.pulse_sight import Reach
from polebook.tui.draw.scene import Scene
from polebook.tui.view import State, Times

Move = Callable[[Times, Reach, int], Times]
NO_FIGURES = "there is no step response to look at", "! tells what is wrong with the file"


def _known(state: State) -> tuple[Ledger, Reach, str] | None:
    """The ledger that is drawn, what there is of its curve, and why there is none; None without figures."""
    of = state.session.good
    if of is None:
        return None
    try:
        with within_reach(of.chain):
            reason = why(of, state.view.upper)
            return of, reach(of, state.view.upper), reason
    except ProblemsFound:  # figures beyond what can be computed
        return None


def rows(state: State) -> int:
    """How many figures the arrows go through."""
    known = _known(state)
    return 0 if known is None else len(listed(known[0], state.view.upper))


def _to(state: State, place: Times) -> State:
    return at(state, step=place) if state.view.upper else at(state, sag=place)


def _moved(state: State, move: Move, by: int) -> Done:
    """The plot moved, from where the cursor is seen to be."""
    known = _known(state)
    if known is None:
        return refuse(state, *NO_FIGURES)
    _, there, reason = known
    if reason:
        return refuse(state, f"there is no curve: {reason}")
    return done(_to(state, move(place(Scene(state)), there, by)))


def _zoomed(state: State, by: int) -> Done:
    before = place(Scene(state))
    after, outcome = _moved(state, sight.zoomed, by)
    now = place(Scene(after))
    if after.view.message or (now.low_s, now.high_s) != (before.low_s, before.high_s):
        return after, outcome
    return say(state, "as near as it goes" if by > 0 else "as far as it goes; Esc shows the whole again")


def act(state: State) -> Done:
    """The cursor to where the chosen figure is read; a second time to the other end of a rise."""
    known = _known(state)
    if known is None:
        return refuse(state, *NO_FIGURES)
    of, there, reason = known
    if reason:
        return _to_length(state, reason)
    figure = listed(of, state.view.upper)[chosen(Scene(state))]
    found = {name: (t, height) for name, t, height in marks(of, state.view.upper)}
    names = [name for name in figure.marks if name in found]
    if not names:
        return say(state, "the response never passes its final value: it has no top" if figure.marks == ("top",) else
                   "the response does not come there in any time that could be looked through")
    now = sight.cursor(place(Scene(state)), there)
    here = next((number for number, name in enumerate(names) if found[name][0] == now), -1)
    name = names[(here + 1) % len(names)]
    t, height = found[name]
    told = f"{name} after {short(t, 's')}" if name != "top" else f"top, {100.0 * height:.2f} %, after {short(t, 's')}"
    return say(_to(state, sight.shown_at(place(Scene(state)), there, t)), f"cursor at {told}")


def _to_length(state: State, reason: str) -> Done:
    """Without a pulse's length: to its key."""
    if state.view.upper or state.session.good is None or state.session.good.chain.get("target.pulse") is not None:
        return refuse(state, f"there is no curve: {reason}")
    return done(to_path(state, "target.pulse"))


def _ends(state: State) -> Done:
    """The other end of the band."""
    upper = not state.view.upper
    told = "step response: the upper network's" if upper else "sag: a pulse through the lower network"
    return say(at(state, upper=upper, row=0, figure=0), told)


def _single(state: State) -> Done:
    return refuse(state, "single lines are curves of the response", "3 is its page")


def _back(state: State) -> Done:
    """To the window of the figures; from there as anywhere."""
    before = place(Scene(state))
    if before.low_s is None or _known(state) is None or state.view.sheet:
        from polebook.tui.control.moving import back  # deferred: it knows the pages, and they know this one

        return back(state)
    return done(_to(state, replace(before, low_s=None, high_s=None)))


OWN: Mapping[str, Work] = {
    **window_keys(_moved, _zoomed, sight.moved, sight.panned, sight.to_end),
    "next curve": still(_ends),
    "curve before": still(_ends),
    "band": still(_ends),
    "single lines": still(_single),
    "back": still(_back),
}
"""Action -> what it does on this page."""
