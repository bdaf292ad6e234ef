"""Work in the background: its pieces, its end, faults in it, another in its place; and the shell that gives it time."""

import time
from dataclasses import replace

import pytest

from polebook.problem import Problem, ProblemsFound
from polebook.tui.app import PolebookApp
from polebook.tui.control import jobs, opening, press
from polebook.tui.view import Job, Takes
from tests.tui.desk import LISTENER, Desk
from tests.tui.test_app import drawn, painted, settled
from tests.tui.test_app import press as post


class Room:
    """Takes the pieces of its jobs and keeps what it was told."""

    def __init__(self):
        self.pieces, self.ends = [], []
        self.takes = Takes(self._piece, self._ended)

    def _piece(self, state, piece):
        self.pieces.append(piece)
        return replace(state, view=replace(state.view, row=piece or 0))

    def _ended(self, state, whole):
        self.ends.append(whole)
        return state

    def job(self, work, name="count", page="ledger"):
        return Job(name, page, work, self.takes)


def counting(total, seconds=0.0, fault=None):
    for at in range(total):
        if at == fault:
            raise ProblemsFound([Problem(None, "the well is dry", "nobody dug", "dig")])
        if seconds:
            time.sleep(seconds)
        yield at + 1, total, at


@pytest.fixture
def state():
    return opening(str(LISTENER))


def test_one_piece_at_the_least_and_no_more_than_there_is_time_for(state):
    room = Room()
    state = jobs.begin(state, room.job(counting(9)))
    state = jobs.advance(state, lambda: True)
    assert room.pieces == [0] and (state.job.done, state.job.total) == (1, 9)
    left = iter([False, False, True])
    state = jobs.advance(state, lambda: next(left))
    assert room.pieces == [0, 1, 2, 3] and state.view.row == 3 and state.job.done == 4


def test_it_ends_and_tells_that_all_was_done(state):
    room = Room()
    state = jobs.advance(jobs.begin(state, room.job(counting(3))), lambda: False)
    assert state.job is None and room.pieces == [0, 1, 2] and room.ends == [True]
    assert jobs.advance(state, lambda: False) is state


def test_stopped_it_keeps_what_was_done(state):
    room = Room()
    state = jobs.advance(jobs.begin(state, room.job(counting(3))), lambda: True)
    state = jobs.stopped(state)
    assert state.job is None and state.view.row == 0 and room.ends == [False]
    assert jobs.stopped(state) is state and room.ends == [False]


def test_another_takes_its_place(state):
    first, second = Room(), Room()
    state = jobs.advance(jobs.begin(state, first.job(counting(5))), lambda: True)
    state = jobs.advance(jobs.begin(state, second.job(counting(2))), lambda: False)
    assert (first.pieces, first.ends) == ([0], [False])
    assert (second.pieces, second.ends) == ([0, 1], [True])


def test_a_fault_in_the_middle_is_told_and_what_was_before_it_stays(state):
    room = Room()
    state = jobs.advance(jobs.begin(state, room.job(counting(5, fault=2))), lambda: False)
    assert state.job is None and room.pieces == [0, 1] and room.ends == [False]
    assert state.view.message == "count: the well is dry: nobody dug; dig" and state.view.bad


def test_a_fault_of_our_own_is_not_swallowed(state):
    def work():
        yield 1, 2, 0
        raise ArithmeticError("ours")

    with pytest.raises(ArithmeticError):
        jobs.advance(jobs.begin(state, Room().job(work())), lambda: False)


def test_esc_stops_it_on_its_own_page_alone():
    room = Room()
    desk = Desk(LISTENER).press("tab", "2")
    desk.state = jobs.begin(desk.state, room.job(counting(5), page="ledger"))
    assert jobs.watched(desk.state) is None
    desk.press("tab", "escape")
    assert desk.view.page == "ledger" and desk.state.job is not None
    assert jobs.watched(desk.state) is desk.state.job
    desk.press("escape")
    assert desk.state.job is None and room.ends == [False]


def test_keys_go_on_while_it_runs():
    room = Room()
    desk = Desk(LISTENER)
    desk.state = jobs.begin(desk.state, room.job(counting(5)))
    desk.work(2).press("+").work(1).press("u", "3").work()
    assert room.pieces == [0, 1, 2, 3, 4] and room.ends == [True]
    assert desk.view.field.typed == "3"


def started(seconds, total):
    """An app with a job, and its room."""
    room = Room()
    app = PolebookApp(opening(str(LISTENER)))
    app.state = jobs.begin(app.state, room.job(counting(total, seconds)))
    return app, room


async def test_the_shell_works_between_the_keys_and_each_key_counts_while_it_does():
    app, room = started(0.004, 10_000)
    async with app.run_test(size=(80, 24)) as pilot:
        shown = []
        show = app.face.show
        app.face.show = lambda: shown.append(time.monotonic()) or show()
        begun = time.monotonic()
        for number in range(6):
            before = len(room.pieces)
            await post(pilot, "left" if number % 2 else "right")
            assert app.state.view.line == 2 - number % 2
            while len(room.pieces) == before:
                await pilot.pause(0.01)
        assert app.state.job is not None and room.ends == []
        assert 6 <= len(shown) <= 6 + (time.monotonic() - begun) / 0.2 + 2
        app.state = jobs.stopped(app.state)
        done = len(room.pieces)
        await settled(pilot)
        assert room.ends == [False] and len(room.pieces) == done
        await post(pilot, "right")
        assert painted(app) == drawn(app)


async def test_without_keys_progress_is_painted_five_times_a_second_at_the_most():
    app, _ = started(0.005, 80)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        app._take(*press(app.state, "right", None, 0.0))
        await settled(pilot)
        shown = []
        show = app.face.show
        app.face.show = lambda: shown.append(time.monotonic()) or show()
        begun, running = time.monotonic(), app.state.job is not None
        while app.state.job is not None:
            await pilot.pause(0.02)
        await settled(pilot)
        assert running <= len(shown) <= (time.monotonic() - begun) / 0.2 + 2
        assert painted(app) == drawn(app)


@pytest.mark.parametrize("key", ["q", "ctrl+q", "ctrl+c"])
async def test_leaving_while_it_runs_does_not_wait_for_it(key):
    app, room = started(0.005, 10_000)
    async with app.run_test(size=(80, 24)) as pilot:
        await post(pilot, "right", "left")
        await post(pilot, key)
    assert app.return_code == 0
    assert 0 < len(room.pieces) < 2000


async def test_our_own_fault_in_it_ends_the_app_as_one_in_a_key_does():
    app, _ = started(0.0, 0)

    def work():
        yield 1, 2, 0
        raise ArithmeticError("ours")

    app.state = jobs.begin(app.state, Room().job(work()))
    with pytest.raises(ArithmeticError):
        async with app.run_test(size=(80, 24)) as pilot:
            await post(pilot, "right")
            for _ in range(4):
                await settled(pilot)


def test_without_a_piece_yet_the_keys_have_their_turn(state):
    room = Room()
    state = jobs.begin(state, room.job(iter([(1, 3, 0), (1, 3, None), (2, 3, 1)])))
    state = jobs.advance(state, lambda: False)
    assert room.pieces == [0, None] and state.job is not None
    assert jobs.advance(state, lambda: False).job is None
