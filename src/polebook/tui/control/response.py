"""Keys of the response page: cursor, zoom, what is drawn."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from math import log10

from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.book.response import begin_hz, whole_band
from polebook.problem import ProblemsFound
from polebook.tui.control.base import Done, Work, at, done, line, refuse, say, stepping
from polebook.tui.control.plots import window_keys
from polebook.tui.draw.plot import sight
from polebook.tui.draw.plot.sight import Window
from polebook.tui.draw.response import WHAT
from polebook.tui.view import Plot, State

_TOLD = {
    "gain": "gain and phase of the chain",
    "delay": "group delay of the chain",
    "input": "Z in: into n0, the source's impedance away",
    "output": "Z out: at the last node, the load away",
}
_OF_LINE = {
    "gain": "gain and phase of the chain, gain of {}",
    "delay": "group delay of the chain and of {}",
    "input": "Z in of {}: what follows attached, what precedes away",
    "output": "Z out of {}: what precedes attached, what follows away",
}
_SAME = 1e-9  # of a decade: there already
Move = Callable[[Plot, Window, float, int], Plot]


def _known(state: State) -> tuple[Ledger, Window] | None:
    """The ledger that is drawn and the window that its figures ask for; None where there is none."""
    of = state.session.good
    if of is None:
        return None
    try:
        with within_reach(of.chain):
            return of, whole_band(of)
    except ProblemsFound:
        return None


def _nothing(state: State) -> Done:
    return refuse(state, "there is no response to look at", "! tells what is wrong with the file")


def _moved(state: State, move: Move, by: int) -> Done:
    """The plot moved, from where the cursor is seen to be."""
    known = _known(state)
    if known is None:
        return _nothing(state)
    of, whole = known
    plot = state.view.plot
    return done(at(state, plot=move(plot, whole, sight.cursor(plot, whole, begin_hz(of)), by)))


def _zoomed(state: State, by: int) -> Done:
    before = state.view.plot
    after, outcome = _moved(state, sight.zoomed, by)
    if after.view.message or (after.view.plot.low_hz, after.view.plot.high_hz) != (before.low_hz, before.high_hz):
        return after, outcome
    return say(state, "as near as it goes: half a decade" if by > 0 else "as far as it goes; Esc shows the band again")


def _shown(state: State, by: int) -> Done:
    """What is drawn: the next, the one before."""
    plot = state.view.plot
    number = WHAT.index(plot.what) if plot.what in WHAT else 0
    return _told(at(state, plot=replace(plot, what=WHAT[(number + by) % len(WHAT)])))


def _single(state: State, now: float) -> Done:
    """The selected line's own curve, on and off."""
    return _told(at(state, plot=replace(state.view.plot, single=not state.view.plot.single)))


def _told(state: State) -> Done:
    """A word on what is drawn now."""
    plot = state.view.plot
    told = _OF_LINE if plot.single else _TOLD
    return say(state, told.get(plot.what, told["gain"]).format(line(state)))


def act(state: State) -> Done:
    """The cursor to the next corner: an edge or a target's, the lowest again after the highest."""
    known = _known(state)
    if known is None:
        return _nothing(state)
    of, whole = known
    corners = {"lower edge": of.lower_hz, "upper edge": of.upper_hz, "target for the lower edge":
               of.chain.get("target.lower"), "target for the upper edge": of.chain.get("target.upper")}
    found = sorted((hz, name) for name, hz in corners.items() if hz)
    if not found:
        return refuse(state, "there is no corner to go to", "the chain has no edges, and t sets targets")
    plot = state.view.plot
    here = log10(sight.cursor(plot, whole, begin_hz(of)))
    hz, name = next(((hz, name) for hz, name in found if log10(hz) > here + _SAME), found[0])
    return say(at(state, plot=sight.shown_at(plot, whole, hz)), f"cursor at the {name}")


def _back(state: State, now: float) -> Done:
    """To the window of the figures; from there as anywhere."""
    plot = state.view.plot
    known = _known(state)
    if plot.low_hz is None or known is None or state.view.sheet:
        from polebook.tui.control.moving import back  # deferred: it knows the pages, and they know this one

        return back(state)
    of, whole = known
    return done(at(state, plot=sight.automatic(plot, whole, sight.cursor(plot, whole, begin_hz(of)))))


OWN: Mapping[str, Work] = {
    **window_keys(_moved, _zoomed, sight.moved, sight.panned, sight.to_end),
    "next curve": stepping(_shown, 1),
    "curve before": stepping(_shown, -1),
    "single lines": _single,
    "back": _back,
}
"""Action -> what it does on this page."""
