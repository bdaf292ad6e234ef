"""The spread in the real program: keys while it runs, stopping it, and leaving in the midst of it."""

import signal
import time
from dataclasses import replace
from pathlib import Path

import pytest

from polebook.tui.spreads import Run
from polebook.tui.view import Spread
from tests.terminal.probe import Terminal, app
from tests.tui.desk import SIX, Desk, copied
from tests.tui.spread_told import told


def others(terminal):
    """The processes that the program has begun, those of theirs among them."""
    found, left = [], [terminal.process.pid]
    while left:
        pid = left.pop()
        try:
            children = Path(f"/proc/{pid}/task/{pid}/children").read_text(encoding="ascii").split()
        except OSError:
            continue
        left += children
        found += map(int, children)
    return found


def gone(pids, limit=5.0):
    end = time.perf_counter() + limit
    while any(map(_runs, pids)) and time.perf_counter() < end:
        time.sleep(0.02)
    return not any(map(_runs, pids))


def _runs(pid):
    try:
        return Path(f"/proc/{pid}/stat").read_text(encoding="ascii").rpartition(")")[2].split()[0] != "Z"
    except OSError:
        return False


def busy(terminal, builds="**"):
    """The page with a run in its midst, a minute long."""
    terminal.until("? help")
    terminal.press("tab", "8", *builds, "s", quiet=0.02)
    terminal.until(" of 1,000,000")
    return terminal


def test_what_it_comes_to_is_what_is_drawn_and_the_process_stays_until_the_end(tmp_path):
    path = copied(tmp_path, SIX)
    desk = Desk(path).press("tab", "8", "/")
    run = Run(desk.state.session.ledger.chain, told(desk.text, 1000))
    desk.state = replace(desk.state, view=replace(desk.view, spread=Spread(1000, run=run)))
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press("tab", "8", "/", quiet=0.05)
        assert others(terminal) == []
        terminal.press("enter", quiet=0.0)
        terminal.until("1,000 built chains in")
        kept = others(terminal)
        for key in ("v", "down", "v", "up"):
            terminal.press(key, quiet=0.05)
            desk.press(key)
            terminal.shows(desk.screen())
        terminal.press("s", quiet=0.05)
        terminal.until("1,000 built chains in")
        assert others(terminal) == kept and len(kept) == 1
        terminal.press("q", quiet=0.0)
        assert terminal.ends(5.0) == 0 and gone(kept) and not terminal.left


def test_keys_count_while_it_runs_progress_is_few_bytes_and_esc_ends_it(tmp_path):
    with Terminal(app(copied(tmp_path, SIX))) as terminal:
        busy(terminal)
        for number, name in enumerate(("emitter-follower", "common-emitter", "cascode")):
            assert name not in terminal.screen(), number
            terminal.press("right", quiet=0.0)
            terminal.until(name, 10.0)
        terminal.press("+", quiet=0.0)
        terminal.until("of before the edit", 10.0)
        before, begun = len(terminal.log), time.perf_counter()
        terminal.quiet(10.0, limit=1.0)
        assert len(terminal.log) - before <= 3500 * (2 + (time.perf_counter() - begun) / 0.2)
        at_work = others(terminal)
        assert at_work
        terminal.press("escape", quiet=0.0)
        stopped = terminal.until("spread stopped after", 10.0)
        assert "these stay" in stopped and "stopped at" in stopped and gone(at_work, 10.0)
        assert others(terminal) == []


@pytest.mark.parametrize("ending", ["q", signal.SIGTERM, signal.SIGKILL, "the line drops"])
def test_leaving_in_the_midst_leaves_nothing_behind(tmp_path, ending):
    with Terminal(app(copied(tmp_path, SIX))) as terminal:
        at_work = others(busy(terminal))
        assert at_work
        if ending == "the line drops":
            terminal.hang_up()
            terminal.process.wait(5.0)
        elif isinstance(ending, str):
            terminal.press(ending, quiet=0.0)
            assert terminal.ends(5.0) == 0
        else:
            terminal.signal(ending)
            assert terminal.ends(5.0) == (-ending if ending == signal.SIGKILL else 128 + ending)
        assert gone(at_work)
        assert b"Traceback" not in terminal.log
