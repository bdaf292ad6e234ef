"""A few hundred of the keys of `tests.soak`, and that it sees what breaks."""

import random

import pytest

from polebook.tui import app as shell
from polebook.tui.control import press
from tests.soak import CHAINS, Tally, alone, hand, shortest, told

SMALL = next(chain for chain in CHAINS if "wire-break" in chain.name)


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    return tmp_path


def test_random_keys_saves_and_undos_on_a_chain(folder):
    tally = Tally()
    alone(SMALL, hand(random.Random("19"), 300), tally, folder)
    assert tally.keys >= 300 and tally.edits > 3 and tally.saves > 0 and tally.sizes > 0 and tally.screens > 3
    assert len(tally.pages) > 3


def test_a_fault_is_seen_and_the_shortest_tail_is_told(folder, monkeypatch):
    def faulty(state, key, character, now):
        if key == "Z" and state.view.page == "nodes":
            raise RuntimeError("put here by a test")
        return press(state, key, character, now)

    monkeypatch.setattr(shell, "press", faulty)
    log = ["right", "left", "tab", "2", "right", "Z", "rest"]
    with pytest.raises(RuntimeError, match="put here by a test") as found:
        alone(SMALL, lambda app: iter(log), Tally(), folder)
    assert shortest(SMALL, log, told(found.value), folder) == ["tab", "2", "right", "Z", "rest"]
