"""What a sweep of a part is to the text as it is now: whether it still holds, which value its cursor stands for."""

from __future__ import annotations

from dataclasses import replace
from math import log10

from polebook import series
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain
from polebook.chain.paths import locate
from polebook.chain.said import raw_text
from polebook.chain.steps import series_of
from polebook.quantity import DIMENSIONS, letter
from polebook.session.sheets import content_of
from polebook.tui.view import State, Sweep

_SERIES = {"resistance": "resistor", "capacitance": "capacitor", "inductance": "inductor"}


def fresh(state: State, sweep: Sweep) -> bool:
    """Whether a sweep holds for the text as it is now: nothing of the circuit but the value swept is another."""
    chain = state.session.chain
    return chain is not None and state.session.ledger is not None and sweep.path in chain.numbers and (
        chain is sweep.chain or _circuit(chain, sweep.path) == _circuit(sweep.chain, sweep.path))


def _circuit(chain: Chain, path: str) -> tuple[object, ...]:
    """All that the figures follow from, but for the number at `path`."""
    def own(name: str) -> bool:
        return name != path and not name.startswith("target.")

    stages = [replace(stage, note="", free=()) for stage in chain.stages]
    cards = {name: replace(card, note="") for name, card in chain.cards.items()}
    return (chain.source_kind, stages, cards, {name: value for name, value in chain.numbers.items() if own(name)},
            set(filter(own, chain.given)))


def at_cursor(sweep: Sweep) -> float:
    """The value at the cursor."""
    return sweep.values[min(max(sweep.cursor, 0), len(sweep.values) - 1)]


def snapped(state: State, sweep: Sweep) -> str:
    """The value at the cursor as it would be written: a part's is the nearest of its preferred series, others have
    three digits. "" where the file has no such number."""
    data, spans = content_of(state.session.history.text)
    try:
        found = locate(sweep.path, data)
    except PathRefused:
        return ""
    param = found.param
    dimension = param.of or param.dimension if param is not None else ""
    if dimension not in DIMENSIONS:
        return ""
    value = at_cursor(sweep)
    if raw_text(data, spans, found.path).rstrip().endswith("dB"):
        return f"{20 * log10(abs(value)):.2f} dB"
    if dimension in _SERIES and not sweep.path.startswith("device."):
        return letter(series.nearest(value, series_of(data, _SERIES[dimension])), dimension)
    return letter(float(f"{value:.2e}"), dimension)
