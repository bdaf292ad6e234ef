"""The work behind the apportion page: plain values, as the engine has them; in a process of its own, stopped, ended."""

import json
from threading import Event

import pytest

from polebook.plan.apportion import Request, apportion, finished
from polebook.plan.wire import Garbled, Message
from polebook.problem import ProblemsFound
from polebook.tui import apportion_apart, spread_apart
from polebook.tui.apportion_apart import sought
from polebook.tui.apportion_passed import asked as asked_of
from polebook.tui.apportion_passed import piece as taken
from polebook.tui.apportion_work import question, run_of, steps
from polebook.tui.apportions import Asked
from tests.tui.apportion_told import here
from tests.tui.desk import LISTENER, SIX

TEXT, LONG = (path.read_text(encoding="utf-8") for path in (LISTENER, SIX))
LEAST = Asked(("Q2.rc", "Q2.c_comp"), "", 1)


@pytest.fixture(autouse=True)
def nobody_is_left():
    spread_apart.end_all()
    yield
    spread_apart.end_all()


def last(work):
    return [piece for _, _, piece in work if piece is not None][-1]


def test_it_is_what_the_engine_comes_to_in_plain_values():
    found = list(steps(question(LEAST, TEXT, "a/chain.toml")))
    assert json.loads(json.dumps(found)) == [list(step) for step in found]
    run = run_of(last(found), LEAST, TEXT)
    result = finished(apportion(Request(TEXT, "a/chain.toml", LEAST.free)))
    assert run.edit == result.proposal.edit and run.after == result.proposal.edit.apply(TEXT)
    assert dict(run.told) == {"file": "chain.toml", **result.document(), "written": False}
    first = found[0][2]["reached"]
    assert [name for name, _, _ in first] == ["gain", "lower", "upper", "peaking"] and first[2][2] is False


def test_nothing_else_is_taken_for_a_piece_of_a_plan_or_for_what_is_asked():
    found = [piece for _, _, piece in steps(question(LEAST, TEXT, "x.toml")) if piece is not None]
    plan = json.loads(json.dumps(found[-1]))
    assert taken(plan)["told"] == found[-1]["told"] and "reached" in taken(json.loads(json.dumps(found[0])))
    told = plan["told"]
    for wrong in ({**plan, "label": 1}, {**plan, "more": 0}, {**plan, "splices": [[1, 2, "x"]]}, {"else": 1}, [], None,
                  {**plan, "told": {**told, "keys": [{}]}}, {**plan, "told": {**told, "met": 1}},
                  {**plan, "told": {"keys": told["keys"]}}, {"reached": [["gain", "1", True]]}):
        with pytest.raises(Garbled):
            taken(wrong)
    what = question(LEAST, TEXT, "x.toml")
    for wrong in ({**what, "seed": "1"}, {**what, "free": "Q2.rc"}, {**what, "more": 0}, [what]):
        with pytest.raises(Garbled):
            asked_of(Message("run", wrong))


def test_what_is_asked_at_fault_is_told(monkeypatch):
    here(monkeypatch)
    for asked, what in ((Asked(("Q7.rc",), "", 1), "Q7"), (Asked((), "colour", 1), "colour is no figure")):
        with pytest.raises(ProblemsFound, match=what):
            list(sought(asked, TEXT, "x.toml", Event()))


def test_in_a_process_of_its_own_it_comes_to_the_same_is_stopped_and_is_there_for_the_next():
    work = sought(LEAST, TEXT, "x.toml", Event())
    assert not spread_apart._living  # nothing before the first piece
    there, here_ = (run_of(last(one), LEAST, TEXT) for one in (work, steps(question(LEAST, TEXT, "x.toml"))))
    assert (there.edit, there.told) == (here_.edit, here_.told)
    (worker,) = spread_apart._living
    assert apportion_apart._idle == [worker]
    halt, told = Event(), []
    for _, _, piece in sought(Asked((), "rise", 1), LONG, "x.toml", halt):
        told += [piece] if piece is not None else []
        if told:
            halt.set()
    assert told[-1]["told"]["stopped"] and len(told) >= 2
    assert apportion_apart._idle == [worker] and list(spread_apart._living) == [worker]
    with pytest.raises(ProblemsFound, match="Q7"):
        list(sought(Asked(("Q7.rc",), "", 1), TEXT, "x.toml", Event()))
    assert apportion_apart._idle == [worker]
    late = Event()
    late.set()  # it is told to stop when all may be done already: the next question is answered all the same
    assert "told" in last(sought(LEAST, TEXT, "x.toml", late))
    assert last(sought(LEAST, TEXT, "x.toml", Event()))["told"]["met"]
    work = sought(Asked((), "rise", 1), LONG, "x.toml", Event())
    while next(work)[0] == 0:
        pass
    work.close()
    assert worker._process.poll() is not None and not spread_apart._living


def test_without_room_for_a_process_it_is_done_here(monkeypatch):
    def full(*args):
        raise OSError(11, "Resource temporarily unavailable")

    monkeypatch.setattr(apportion_apart, "Apart", full)
    assert last(sought(LEAST, TEXT, "x.toml", Event()))["told"]["keys"]
    halt = Event()
    halt.set()
    assert last(sought(Asked((), "upper", 1), TEXT, "x.toml", halt))["told"]["stopped"]
