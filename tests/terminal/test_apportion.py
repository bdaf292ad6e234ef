"""Apportioning in the real program: the listener mended by keys, keys while a plan is sought, stopping, leaving."""

import time

from polebook.session.state import open_file
from tests.terminal.probe import Terminal, app
from tests.terminal.test_spread import gone, others
from tests.tui.apportion_told import here
from tests.tui.desk import LISTENER, SIX, Desk, copied


def test_the_listener_is_mended_by_keys_and_what_is_shown_is_what_is_drawn(tmp_path, monkeypatch):
    here(monkeypatch)
    path = copied(tmp_path)
    desk = Desk(path)
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press("tab", "9", quiet=0.05)
        assert others(terminal) == []
        terminal.shows(desk.press("tab", "9").screen())
        terminal.press("enter", quiet=0.0)
        terminal.until("Enter puts 1 value in as one edit")
        terminal.shows(desk.press("enter").work().screen())
        kept = others(terminal)
        assert len(kept) == 1
        for key in ("down", "space", "v", "V", "space", "up", "enter", "u", "U"):
            terminal.press(key, quiet=0.02)
            terminal.shows(desk.press(key).screen())
        assert path.read_text(encoding="utf-8") == LISTENER.read_text(encoding="utf-8")
        terminal.press("w", quiet=0.0)
        terminal.until("written")
        assert all(target.met for target in open_file(str(path)).ledger.targets)
        assert "c_comp      = \"0\"     # put in when" in path.read_text(encoding="utf-8")
        terminal.press("q", quiet=0.0)
        assert terminal.ends(5.0) == 0 and gone(kept) and not terminal.left


def test_keys_count_while_a_plan_is_sought_and_esc_shows_the_best_so_far(tmp_path):
    with Terminal(app(copied(tmp_path, SIX))) as terminal:
        terminal.until("? help")
        terminal.press("tab", "9", *["v"] * 9, "s", quiet=0.02)
        terminal.until(" trials, ")
        for name in ("emitter-follower", "common-emitter", "cascode"):
            assert name not in terminal.screen()
            terminal.press("right", quiet=0.0)
            terminal.until(name, 2.0)
        before, begun = len(terminal.log), time.perf_counter()
        terminal.quiet(10.0, limit=0.5)
        assert len(terminal.log) - before <= 1500 * (2 + (time.perf_counter() - begun) / 0.2)
        kept = others(terminal)
        terminal.press("escape", quiet=0.0)
        stopped = terminal.until("stopped: ", 10.0)
        assert "the best so far" in stopped and others(terminal) == kept
        terminal.press("s", quiet=0.0)
        terminal.until(" trials, ")
        terminal.press("q", quiet=0.0)
        assert terminal.ends(5.0) == 0 and gone(kept) and b"Traceback" not in terminal.log
