"""What the pages remember of ledgers that have gone: little, for each ledger holds all of its chain's figures."""

import gc
import weakref

from tests.tui.desk import LISTENER, Desk


def test_few_ledgers_of_earlier_texts_are_held():
    desk = Desk(LISTENER).press("tab", "p")
    seen = weakref.WeakSet()
    for step in range(10):
        desk.press("tab", "+", "tab")
        seen.add(desk.state.session.ledger)
        for page in "345":
            desk.press(page).screen()
        assert len(desk.state.session.history.past) == step + 1
    gc.collect()
    assert 1 <= len(seen) <= 5
