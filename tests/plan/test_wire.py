"""What processes of this program say to each other: to the last bit, checked before it is used, and never code."""

import io
import json
import os
import sys
from dataclasses import replace
from math import copysign, inf, nan
from time import monotonic, sleep
from types import MappingProxyType

import numpy as np
import pytest

from polebook.plan import wire
from polebook.plan.passed import passed, taken
from polebook.plan.spread import helper
from polebook.plan.spread.alone import with_numbers
from polebook.plan.spread.helper import Task, answer, answered
from polebook.plan.spread.model import Request
from polebook.plan.spread.run import spread as engine
from polebook.plan.spread.workers import Crew
from polebook.plan.wire import Garbled, Message, many, maybe, number, of_names, plain, several, whole, word
from polebook.problem import ProblemsFound
from polebook.tui import spread_apart
from polebook.tui.news import news
from polebook.tui.spread_passed import told as told_of
from polebook.tui.spread_work import steps
from tests.laws.chains import chain
from tests.plan.spread_chains import LOW_PASS, TWO, parsed, run

BITS = np.array([0.1, -0.0, 0.0, inf, -inf, nan, 5e-324, 1.7976931348623157e308, 1 / 3])


def written(*messages):
    pipe = io.BytesIO()
    for message in messages:
        wire.write(pipe, message)
    return pipe.getvalue()


def framed(head, rest=b""):
    data = head if isinstance(head, bytes) else json.dumps(head).encode()
    return len(data).to_bytes(4, "little") + data + rest


def test_numbers_arrive_to_the_last_bit():
    columns = {"a": BITS, "b": np.arange(-3, 6, dtype=np.int8), "c": np.zeros(0), "d": np.arange(10.0)[::2]}
    body = {"x": BITS[1:].tolist(), "y": [2**64 - 1, -1, True, None, "Ω\ud800\x00"]}
    pipe = io.BytesIO(written(Message("one", body, columns), Message("two")))
    one, two, end = wire.read(pipe), wire.read(pipe), wire.read(pipe)
    assert (one.kind, two, end) == ("one", Message("two"), None)
    assert {name: (column.dtype, column.tobytes()) for name, column in one.columns.items()} == \
        {name: (column.dtype, column.tobytes()) for name, column in columns.items()}
    assert repr(one.body) == repr(body) and copysign(1, one.body["x"][0]) == -1


def test_the_beginning_of_a_message_is_none():
    whole_one = written(Message("one", [1], {"a": BITS}))
    for length in range(len(whole_one)):
        assert wire.read(io.BytesIO(whole_one[:length])) is None


def column(*entry):
    return {"kind": "one", "body": None, "columns": [list(entry)]}


@pytest.mark.parametrize("data", [
    b"\xff\xff\xff\xff", (wire.MOST_HEAD + 1).to_bytes(4, "little") + b"{}", framed(b""), framed(b"\x80\x04N."),
    framed(b"[" * 100_000), framed(b"{\"kind\": " + b"9" * 5000), framed("one"), framed([]), framed({"kind": "one"}),
    framed({"kind": 1, "body": None, "columns": []}), framed({"kind": "one", "body": None, "columns": {}}),
    framed({"kind": "one", "body": None, "columns": [], "more": 1}), framed(column("a", "<f8")),
    framed(column("a", "|O", 1), b"\0" * 8), framed(column("a", ">f8", 1)), framed(column("a", "<U8", 1)),
    framed(column(1, "<f8", 1)), framed(column("a", "<f8", -1)), framed(column("a", "<f8", 1.0)),
    framed(column("a", "<f8", True)), framed(column("a", "<f8", wire.MOST_NUMBERS + 1)),
    framed(column("a", "<f8", 10**30)), framed({"kind": "one", "body": None, "columns": [["a", "<f8", 0]] * 33}),
])
def test_what_is_no_message_is_refused_before_room_is_made_for_it(data):
    class Pipe(io.BytesIO):
        def read(self, size=-1):
            assert 0 <= size <= wire.MOST_HEAD
            return super().read(size)

    with pytest.raises(Garbled):
        wire.read(Pipe(data))


@pytest.mark.parametrize(("check", "given"), [
    (word, 1), (word, None), (whole, True), (whole, 1.0), (whole, "1"), (whole, 2**64), (number, False), (number, "1"),
    (number, 10**400), (maybe(word), 0), (many(word), {}), (many(word), ["a", 1]), (many(word), "ab"),
    (several(word, word), ["a"]), (several(word), ["a", "b"]), (wire.flag, 1), (wire.by_name(whole), [1]),
    (wire.by_name(whole), {"a": "1"}), (of_names(a=word), {"b": "x"}), (of_names(a=word), {"a": "x", "b": "x"}),
])
def test_another_kind_of_value_than_was_due_is_refused(check, given):
    with pytest.raises(Garbled, match=r"was due, and .* came"):
        check(given)


@pytest.mark.parametrize("numbers", [{}, {"supply.temperature": 45.0}, {"Q1.rc": 0.1 + 0.2, "tolerance.supply": 0.03}])
def test_a_chain_is_passed_as_its_text_and_the_numbers_put_in_its_place(numbers):
    of = with_numbers(parsed(TWO), numbers)
    for one in (of, replace(of, output="Q1")):
        told = json.loads(json.dumps(passed(one)))
        assert told["text"] == TWO and told["numbers"] == numbers
        assert taken(told) == one


def test_a_chain_that_is_not_what_its_text_says_is_not_passed():
    of = parsed(TWO)
    fewer = {path: x for path, x in of.numbers.items() if path != "Q1.rc"}
    for other in (replace(of, text=""), replace(of, text="x = 1"), replace(of, text=LOW_PASS),
                  replace(of, stages=of.stages[:1]), replace(of, spread_shape="uniform"),
                  replace(of, numbers=MappingProxyType(fewer)), replace(of, given=of.given - {"Q1.rc"})):
        assert passed(other) is None
    cut = replace(of, stages=of.stages[:1], numbers=MappingProxyType({**of.numbers}))
    assert run(cut, 60, workers=2, block=20).columns["gain_db"].tolist() == \
        run(cut, 60, workers=1, block=20).columns["gain_db"].tolist()


@pytest.mark.parametrize(("key", "value"), [
    ("digest", "0" * 64), ("numbers", {"Q1.rc": "1k"}), ("given", [1]), ("text", None), ("file", 3), ("more", 1),
])
def test_what_is_no_passed_chain_is_refused(key, value):
    with pytest.raises(Garbled):
        taken({**passed(parsed(TWO)), key: value})
    with pytest.raises(ProblemsFound):
        taken({**passed(parsed(TWO)), "text": "format = 2"})


@pytest.mark.parametrize("wrong", [{"size": 0}, {"size": 2**40}, {"size": 1.0}, {"names": "gain_db"}, {"seed": None},
                                   {"temperature": [1.0]}, {"chain": "x"}, {"more": 0}])
def test_a_setting_is_checked_before_room_is_made_for_its_builds(wrong):
    good = helper.Setting(parsed(TWO), (-20.0, 60.0), (), 3, 64).message()
    assert helper.setting_of(good).size == 64 and helper.setting_of(good).temperature == (-20.0, 60.0)
    with pytest.raises(Garbled):
        helper.setting_of(Message(good.kind, {**good.body, **wrong}))


def test_an_answer_has_the_builds_of_its_task():
    task = Task(1, 30, 4)
    state = np.zeros(4, dtype=np.int8)

    def said(columns, **other):
        return Message("done", {"task": plain(task), "outside": {}, "alone": 0, **other}, columns)

    assert answered(said({"gain_db": np.ones(4), "state": state}))[1].builds == 4
    for columns in ({"gain_db": np.ones(4)}, {"gain_db": np.ones(3), "state": state}, {"state": state[:3]},
                    {"gain_db": state, "state": state}, {"gain_db": np.ones(4), "state": np.ones(4)},
                    {"gain_db": np.ones(4), "state": state + 9}, {}):
        with pytest.raises(Garbled):
            answered(said(columns))
    for other in ({"outside": {"Q1": None}}, {"task": []}, {"alone": 0.0}, {"more": 1},
                  {"task": {**plain(task), "tighter": ["Q1.rc"]}}):
        with pytest.raises(Garbled):
            answered(said({"gain_db": np.ones(4), "state": state}, **other))
    with pytest.raises(Garbled):
        answered(Message("there"))


def test_a_run_is_told_to_the_last_bit_and_nothing_else_is_taken_for_one():
    last = [step for step in steps(chain("frost-line-sounder"), 300, 5) if step[2] is not None][-1]
    said = wire.read(io.BytesIO(written(Message("step", plain(last)))))
    kind, heard = news(said, told_of)
    assert kind == "step" and repr(plain(heard)) == repr(plain(last))
    assert heard[2].figures[0].heap.counts.dtype == last[2].figures[0].heap.counts.dtype
    assert type(heard[2].rows[0]) is type(last[2].rows[0]) and heard[2].rows[0].shares
    told = said.body[2]
    for spoilt in ({**told, "done": "300"}, {**told, "figures": {}}, {**told, "rows": [1]}, {**told, "more": 0},
                   {**told, "yields": {"all": 0.5}}, [], {**told, "cautions": ["x"]}):
        with pytest.raises(Garbled):
            news(Message("step", [*said.body[:2], spoilt]), told_of)
    for other in (Message("stop"), Message("problems", "x"), Message("fault", 1), Message("step", [1, 2])):
        with pytest.raises(Garbled):
            news(other, told_of)


SAYS = ("import sys, time\n"
        "sys.stdout.buffer.write({data!r}); sys.stdout.flush(); sys.stdin.buffer.read(1); time.sleep(30)")


def spoken(crew, times):
    """Waits until a crew has heard so much."""
    until = monotonic() + 20
    while crew.answers.qsize() < times and monotonic() < until:
        sleep(0.005)


@pytest.mark.parametrize("data", [b"\x80\x05\x95 pickled, or anything else", written(Message("done", {}))])
def test_a_helper_that_answers_nonsense_is_done_without(monkeypatch, data):
    of, there = chain("six-stage"), written(Message("there"))
    monkeypatch.setattr(helper, "PROGRAM", SAYS.format(data=there + data))
    with Crew() as crew:
        crew.grow(1)
        spoken(crew, 2)
        *_, (*_, last) = engine(Request(of, 400, 5, corners=False, costs=False, workers=2, block=20), crew=crew)
        assert crew.helpers == []
    assert last.columns["gain_db"].tobytes() == run(of, 400, seed=5, workers=1, block=20).columns["gain_db"].tobytes()


def test_a_helper_that_answers_with_other_figures_is_done_without(monkeypatch):
    """Its answer is well formed, and of a task that it was given."""
    task = Task(1, 0, 20)
    other = answer(task, helper.Piece(0, {"else": np.ones(20)}, np.zeros(20, dtype=np.int8), {}, 0))
    monkeypatch.setattr(helper, "PROGRAM", SAYS.format(data=written(Message("there"), other)))
    of = chain("six-stage")
    with Crew() as crew:
        crew.grow(1)
        spoken(crew, 2)
        first = next(engine(Request(of, 400, 5, corners=False, costs=False, workers=2, block=20), crew=crew))[2]
        assert crew.helpers == []
    assert first.columns["gain_db"].tobytes() == run(of, 20, seed=5, workers=1).columns["gain_db"].tobytes()


@pytest.mark.parametrize(("data", "why"), [
    (b"\xff\xff\xff\xff", "a head of 4294967295 bytes is announced"),
    (written(Message("step", [1, 2, {"builds": 3}])), "a table of 13, builds first, was due, and another came"),
])
def test_a_page_s_process_that_says_nonsense_is_told_and_another_takes_the_next_run(monkeypatch, data, why):
    monkeypatch.setattr(spread_apart, "PROGRAM", SAYS.format(data=data))
    spread_apart.end_all()
    with pytest.raises(ProblemsFound) as found:
        list(spread_apart.spread(chain("six-stage"), 200, 1))
    (problem,) = found.value.problems
    assert problem.what == "the process that computes it says what is no answer"
    assert why in problem.why and "s begins again" in problem.fix
    assert not spread_apart._living and not spread_apart._idle


def test_a_module_in_the_current_folder_is_not_run(monkeypatch, tmp_path):
    """A folder from a stranger may hold a file that is named like one of Python's own modules."""
    for name in ("queue", "signal", "hashlib", "numpy", "tomllib"):
        (tmp_path / f"{name}.py").write_text("raise SystemExit('run')\n")
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(sys, "path", [os.path.realpath(part) for part in sys.path if part])
    with Crew() as crew:
        crew.grow(1)
        told = crew.answers.get(timeout=20)
        assert told[1] == helper.THERE
