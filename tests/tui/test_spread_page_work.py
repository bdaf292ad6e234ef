"""The work behind the spread page: told as the engine has it; in a process of its own, begun late, ended at once."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from queue import SimpleQueue

import numpy as np
import pytest

from polebook.plan.spread.model import Request
from polebook.plan.spread.run import spread as engine
from polebook.problem import ProblemsFound
from polebook.session import state as sessions
from polebook.tui import spread_apart
from polebook.tui.spread_apart import end_all, spread
from polebook.tui.spread_work import FINE, OFTEN_S, steps
from polebook.tui.spreads import ALL
from tests.tui.desk import CHAINS, SIX

PROBE = CHAINS / "leaf-probe.toml"
BUILDS = 1000


def chain(of=PROBE):
    return sessions.open_file(str(of)).ledger.chain


@pytest.fixture(autouse=True)
def nobody_is_left():
    end_all()
    yield
    end_all()


def last(work):
    return [told for _, _, told in work if told is not None][-1]


def test_it_is_what_the_engine_comes_to():
    told = last(steps(chain(), BUILDS, 7))
    *_, (_, _, result) = engine(Request(chain(), BUILDS, 7))
    assert told.complete and (told.builds, told.seed, told.done) == (BUILDS, 7, BUILDS)
    assert told.yields == dict(result.yields().shares)
    assert set(told.yields) == {ALL, "gain", "lower", "upper", "peaking"}
    for one in told.figures:
        assert one.nominal == result.nominal[one.name]
        assert one.statistics == result.statistics(one.name)
        column = result.columns[one.name]
        edges = np.linspace(one.heap.low, one.heap.high, FINE + 1)
        assert (one.heap.counts == np.histogram(column, edges)[0]).all()
    assert [row.name for row in told.rows] == [cost.draw.name for cost in result.costs]
    assert [row.half for row in told.rows] == [cost.yield_gain for cost in result.costs]
    ends = {(worst.side, one.name): worst.value for one in told.figures for worst in one.worst}
    assert ends == {(corner.side, corner.figure): corner.value for corner in result.corners}


def test_limits_are_those_of_the_targets():
    limits = {one.name: one.limits for one in last(steps(chain(), 100, 1)).figures}
    assert limits == {"gain_db": (pytest.approx(25.0), pytest.approx(27.0)), "lower_edge_hz": (None, 5.0),
                      "upper_edge_hz": (25e3, None), "peaking_db": (None, 0.5)}
    text = PROBE.read_text(encoding="utf-8").replace("[target]", '[target]\nreference = "1k"')
    at = {one.name: one.limits for one in last(steps(sessions.new_session("x.toml", text).chain, 100, 1)).figures}
    assert at["gain_db"] == () and at["gain_at_reference_db"] == limits["gain_db"]


def test_devices_of_one_card_have_rows_of_their_own_beside_it():
    text = SIX.read_text(encoding="utf-8") + '\n[tolerance]\nmatching = "2 %"\n'
    rows = {row.label: row for row in last(steps(sessions.new_session("x.toml", text).chain, 100, 1)).rows}
    assert (rows["N beta at Q1"].path, rows["N beta at Q1"].sort) == ("device.N.beta", "matching")
    assert (rows["N beta"].reach, rows["N beta at Q1"].reach) == pytest.approx((0.5, 0.02))


def test_news_are_few_however_many_blocks_there_are():
    begun = time.perf_counter()
    found = list(steps(chain(), 800, 1, block=13))
    assert len(found) >= 60
    assert sum(told is not None for _, _, told in found) <= 6 + (time.perf_counter() - begun) / OFTEN_S
    assert [done for done, _, _ in found] == sorted(done for done, _, _ in found)


def test_in_a_process_of_its_own_it_comes_to_the_same_and_is_there_for_the_next():
    assert not spread_apart._living
    work = spread(chain(), BUILDS, 3)
    assert not spread_apart._living  # nothing before the first piece
    found = list(work)
    assert found[-1][0] == found[-1][1] and found[0][:2] == (0, 0)
    here, there = last(steps(chain(), BUILDS, 3)), last(iter(found))
    assert there.yields == here.yields
    assert [one.statistics for one in there.figures] == [one.statistics for one in here.figures]
    assert [(row.name, row.half) for row in there.rows] == [(row.name, row.half) for row in here.rows]
    kept = list(spread_apart._living)
    assert len(kept) == 1 and spread_apart._idle == kept
    assert last(spread(chain(), 200, 1)).builds == 200
    assert list(spread_apart._living) == kept
    end_all()
    assert kept[0]._process.poll() is not None


def test_no_piece_keeps_a_key_waiting(monkeypatch):
    """Waiting for news is a wait of milliseconds, also while the costs are solved, which the engine does in one go."""
    waits = []

    class Noted(SimpleQueue):
        def get(self, block=True, timeout=None):
            waits.append(timeout)
            return super().get(block, timeout)

    monkeypatch.setattr(spread_apart, "SimpleQueue", Noted)
    assert not spread_apart._living
    pieces = list(spread(chain(SIX), 2000, 1))
    assert 0 < len(waits) <= len(pieces) + 1 and set(waits) == {spread_apart.WAIT_S}
    assert spread_apart.WAIT_S < 0.01


@pytest.mark.parametrize("give_up", ["close", "forget"])
def test_given_up_its_process_ends_at_once(give_up):
    work = spread(chain(SIX), 1_000_000, 1)
    while next(work)[0] == 0:
        pass
    (worker,) = spread_apart._living
    begun = time.perf_counter()
    if give_up == "close":
        work.close()
    else:
        del work
    assert worker._process.poll() is not None and time.perf_counter() - begun < 20.0
    assert not spread_apart._living and not spread_apart._idle


def test_a_process_that_goes_is_told_and_another_takes_the_next_run():
    work = spread(chain(SIX), 1_000_000, 1)
    while next(work)[0] == 0:
        pass
    (worker,) = spread_apart._living
    worker._process.kill()
    with pytest.raises(ProblemsFound) as found:
        list(work)
    assert found.value.problems[0].what == "the process that computes it has gone"
    assert last(spread(chain(), 200, 1)).complete


def test_a_chain_without_a_ledger_is_told_and_the_process_stays():
    with pytest.raises(ProblemsFound) as found:
        list(spread(chain(), 0, 1))
    assert found.value.problems[0].what == "0 builds can't be drawn"
    assert len(spread_apart._idle) == 1


def test_a_fault_of_ours_is_not_swallowed():
    with pytest.raises(RuntimeError, match="a whole number was due, and a word came"):
        list(spread(chain(), "100", 1))
    assert not spread_apart._living


def test_without_room_for_a_process_it_is_done_here(monkeypatch):
    def full(*args, **kwargs):
        raise OSError(11, "Resource temporarily unavailable")

    monkeypatch.setattr(subprocess, "Popen", full)
    found = list(spread(chain(), BUILDS, 1))
    assert last(iter(found)).complete and len(found) > 4 and not spread_apart._living


def test_it_ends_with_the_one_who_asked_however_that_ends():
    """Killed in the midst of a run: nothing is left that computes."""
    script = ("import sys, time\nfrom polebook.session import state\nfrom polebook.tui import spread_apart\n"
              "work = spread_apart.spread(state.open_file(sys.argv[1]).ledger.chain, 1_000_000, 1)\n"
              "while next(work)[0] == 0: pass\n"
              "print(next(iter(spread_apart._living))._process.pid, flush=True)\ntime.sleep(60)")
    words = [sys.executable, "-c", script, str(SIX)]
    with subprocess.Popen(words, stdout=subprocess.PIPE, env={**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)},
                          text=True) as asking:
        pid = int(asking.stdout.readline())
        assert alive(pid)
        asking.send_signal(signal.SIGKILL)
    end = time.perf_counter() + 5.0
    while alive(pid) and time.perf_counter() < end:
        time.sleep(0.02)
    assert not alive(pid)


def alive(pid):
    """Whether a process runs; one that has ended and that nobody has asked about does not."""
    try:
        stat = Path(f"/proc/{pid}/stat").read_text(encoding="ascii")
    except OSError:
        return False
    return stat.rpartition(")")[2].split()[0] != "Z"
