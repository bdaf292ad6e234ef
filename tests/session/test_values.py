"""Keys typed and stepped: the text that stands in the file afterwards, the label, and what is refused."""

from __future__ import annotations

import tomllib
from typing import Any

import pytest

from polebook.chain.steps import step
from polebook.problem import ProblemsFound
from polebook.session import state
from polebook.session.state import Session
from tests.chain import good
from tests.helpers import DEMOS

TEXT = """format = 1
title = "steps"
[supply]
positive = 12
negative = -12
[source]
kind = "voltage"
resistance = "600"
[preferred]
capacitor = "E6"
[[stage]]
name = "Q1"
kind = "common-emitter"
device = "D"
couple = "1u"
rb1 = "100k"
rb2 = "22k"
rc = "4k7"
re_bypassed = "1k"
ce = 0.0001
stray = 0
l_peak = "1m"
[[stage]]
name = "L1"
kind = "ladder"
arms = [
  { series_r = "50" },  # in
  { shunt_c = "22p", role = "high" },
]
[[stage]]
name = "B1"
kind = "block"
gain = "20 dB"
inverting = true
couple = "1u"
poles = ["20M", 5e6]
[load]
resistance = "10k"
[target]
gain = "60 dB"
upper = "1M"
peaking = "0.5 dB"
yield = "95 %"
[device.D]
family = "bjt"
beta = 200
rx = 30
[device.E]
family = "bjt"
beta = 100
"""


@pytest.fixture
def opened() -> Session:
    session = state.new_session("x.toml", TEXT)
    assert not session.problems
    return session


def value(session: Session, path: str) -> Any:
    rows = {row.path: row for sheet in state.sheets_of(session) for row in state.keys_of(session, sheet)}
    return rows[path].text


def label(session: Session) -> str:
    return session.history.past[-1].edit.label


@pytest.mark.parametrize(
    ("path", "direction", "now", "literal"),
    [
        ("Q1.rc", 1, "5k1", '"5k1"'),
        ("Q1.rc", -1, "4k3", '"4k3"'),
        ("Q1.rc", 10, "47k", '"47k"'),
        ("Q1.rc", -10, "470R", '"470R"'),
        ("Q1.couple", 1, "1u5", '"1u5"'),  # E6
        ("Q1.couple", -1, "680n", '"680n"'),
        ("Q1.couple", -10, "100n", '"100n"'),
        ("Q1.ce", 1, "150u", '"150u"'),
        ("Q1.l_peak", 1, "1.2m", '"1.2m"'),  # the code is for resistors and capacitors
        ("source.resistance", 1, "620R", '"620R"'),
        ("L1.arms.1.series_r", 1, "51R", '"51R"'),
        ("L1.arms.2.shunt_c", 1, "33p", '"33p"'),
        ("L1.arms.1.role", 1, "low", '"low"'),
        ("supply.positive", 1, "12.6", "12.6"),
        ("supply.positive", 10, "120", "120"),
        ("supply.negative", 1, "-12.6", "-12.6"),
        ("supply.temperature", 1, "26.2", "26.2"),
        ("target.upper", 1, "1.05M", '"1.05M"'),
        ("target.upper", -1, "952k", '"952k"'),
        ("target.gain", 1, "60.4 dB", '"60.4 dB"'),
        ("target.gain", 10, "80 dB", '"80 dB"'),
        ("target.peaking", 1, "0.525 dB", '"0.525 dB"'),
        ("target.yield", 1, "99.7 %", '"99.7 %"'),
        ("tolerance.capacitor", 1, "5.25 %", '"5.25 %"'),
        ("device.D.beta", 1, "210", "210"),
        ("device.D.rx", 1, "31R5", '"31R5"'),  # of a card: no resistor that one buys
        ("device.D.polarity", 1, "pnp", '"pnp"'),
        ("device.D.polarity", -1, "pnp", '"pnp"'),
        ("preferred.capacitor", 1, "E12", '"E12"'),
        ("preferred.resistor", 1, "E48", '"E48"'),
        ("Q1.device", 1, "E", '"E"'),
        ("Q1.output_to", 1, "positive", '"positive"'),
        ("Q1.left_out", 1, "true", "true"),
        ("B1.inverting", 1, "false", "false"),
        ("B1.gain", -1, "19.6 dB", '"19.6 dB"'),
        ("B1.poles", 1, "21M, 5.25M", '"21M", "5.25M"'),
        ("source.kind", 1, "current", '"current"'),
    ],
)
def test_a_step_takes_the_next_value(opened: Session, path: str, direction: int, now: str, literal: str) -> None:
    after = state.step(opened, path, direction, 0.0)
    assert value(after, path) == now and literal in after.history.text
    before = value(opened, path)
    assert now in label(after) and path.rpartition(".")[2] in label(after)
    assert not before or before in label(after)
    assert state.undo(after)[0].history.text == TEXT


@pytest.mark.parametrize("path", ["Q1.rc", "Q1.couple", "target.upper", "device.D.beta", "target.gain", "B1.poles"])
@pytest.mark.parametrize("far", [1, 10])
def test_a_step_up_and_one_down_lead_back(opened: Session, path: str, far: int) -> None:
    there = state.step(opened, path, far, 0.0)
    back = state.step(there, path, -far, 5.0)
    was, now = value(opened, path), value(back, path)
    assert now in (was, was.replace("5e6", "5M")), "the same value, its text perhaps in the code"


def test_decades_stay_exact(opened: Session) -> None:
    session = state.set_value(opened, "Q1.couple", "4n7", 0.0)
    seen = []
    for _ in range(6):
        session = state.step(session, "Q1.couple", 10, 1.0)
        seen.append(value(session, "Q1.couple"))
    assert seen == ["47n", "470n", "4u7", "47u", "470u", "4m7"]


def test_a_run_of_steps_is_one_step_of_undo(opened: Session) -> None:
    session = opened
    for number, direction in enumerate((1, 1, 1, 10)):
        session = state.step(session, "Q1.rc", direction, 100 + 0.9 * number)
    assert [step.edit.label for step in session.history.past] == ["rc of Q1: 4k7 to 62k"]
    other = state.step(session, "Q1.rb1", 1, 103.0)
    later = state.step(other, "Q1.rb1", 1, 105.0)
    labels = [one.edit.label for one in later.history.past[1:]]
    assert labels == ["rb1 of Q1: 100k to 110k", "rb1 of Q1: 110k to 120k"]
    assert state.undo(session)[0].history.text == TEXT
    assert not state.step(state.step(opened, "Q1.rc", 1, 0.0), "Q1.rc", -1, 0.5).history.past


def test_a_step_of_the_kind_takes_one_that_takes_the_card(opened: Session) -> None:
    after = state.step(opened, "Q1.kind", 1, 0.0)
    assert value(after, "Q1.kind") == "emitter-follower" and "rc" in label(after)
    assert value(state.step(opened, "L1.kind", 1, 0.0), "L1.kind") == "block"


@pytest.mark.parametrize(
    ("path", "what"),
    [
        ("Q1.rf", "absent"),
        ("Q1.stray", "zero"),
        ("Q1.note", "no number"),
        ("title", "no number"),
        ("Q1.free", "no number"),
        ("B1.lower_poles", "absent"),
        ("Q1.xyz", "no key"),
        ("Q9.rc", "Q9"),
        ("supply", "table"),
    ],
)
def test_what_has_no_next_value_says_why(opened: Session, path: str, what: str) -> None:
    with pytest.raises(ProblemsFound) as refused:
        state.step(opened, path, 1, 0.0)
    problem = refused.value.problems[0]
    assert what in f"{problem.what} {problem.why}" and problem.fix


def test_a_step_past_what_is_allowed_is_refused(opened: Session) -> None:
    with pytest.raises(ProblemsFound, match="100 %"):
        state.step(state.set_value(opened, "tolerance.beta", "96 %", 0.0), "tolerance.beta", 1, 1.0)
    big = state.set_value(opened, "Q1.rc", "1e299", 0.0)
    with pytest.raises(ProblemsFound, match="stepped"):
        state.step(state.step(big, "Q1.rc", 10, 1.0), "Q1.rc", 1, 2.0)


@pytest.mark.parametrize(
    ("path", "typed", "literal", "told"),
    [
        ("Q1.rc", " 5k1 ", 'rc = "5k1"', "rc of Q1: 4k7 to 5k1"),
        ("Q1.rc", "4.7 kΩ", 'rc = "4.7 kΩ"', "rc of Q1: 4k7 to 4.7 kΩ"),
        ("Q1.rf", "220k", 'rf = "220k"', "rf of Q1: 220k"),
        ("Q1.tolerance.rc", "2 %", 'tolerance = { rc = "2 %" }', "tolerance.rc of Q1: 2 %"),
        ("device.D.beta", "150", "beta = 150", "beta of card D: 200 to 150"),
        ("target.noise", "5n", 'noise = "5n"', "noise of target: 5n"),
        ("title", "new", 'title = "new"', "title: steps to new"),
        ("B1.poles", "20M, 6M", 'poles = ["20M", "6M"]', "poles of B1: 20M, 5e6 to 20M, 6M"),
        ("L1.arms.2.shunt_c", "33p", 'shunt_c = "33p"', "arms.2.shunt_c of L1: 22p to 33p"),
        ("Q1.free", "rc, ce", 'free = ["rc", "ce"]', "free of Q1: rc, ce"),
        ("Q1.name", "in", 'name = "in"', "Q1 renamed in"),
        ("Q1.kind", "cascode", 'kind = "cascode"', "Q1: common-emitter to cascode"),
        ("Q1.note", "short", 'note = "short"', "note of Q1: short"),
        ("Q1.note", "two\nlines", 'note = """\ntwo\nlines\n"""', "note of Q1 set"),
        ("note", "two\nlines", 'note = """\ntwo\nlines\n"""', "note of the file set"),
    ],
)
def test_what_is_typed_stands_in_the_file(opened: Session, path: str, typed: str, literal: str, told: str) -> None:
    after = state.set_value(opened, path, typed, 0.0)
    assert literal in after.history.text and label(after) == told
    assert state.undo(after)[0].history.text == TEXT


def test_the_text_that_stands_already_changes_nothing(opened: Session) -> None:
    for path, typed in (("Q1.rc", "4k7"), ("supply.positive", "12"), ("Q1.rf", ""), ("Q1.name", "Q1"),
                        ("Q1.kind", "common-emitter"), ("B1.poles", "20M, 5e6"), ("B1.inverting", "true")):
        assert state.set_value(opened, path, typed, 0.0) is opened, path


def test_an_empty_text_takes_an_optional_key_out(opened: Session) -> None:
    after = state.set_value(opened, "Q1.l_peak", "", 0.0)
    assert "l_peak" not in after.history.text and label(after) == "l_peak of Q1 taken out: was 1m"
    assert state.set_value(after, "Q1.l_peak", " ", 1.0) is after
    for path in ("Q1.name", "Q1.kind", "source.kind", "format"):
        with pytest.raises(ProblemsFound, match="required"):
            state.set_value(opened, path, "", 0.0)
    with pytest.raises(ProblemsFound):  # required by what else the file says
        state.set_value(opened, "source.resistance", "", 0.0)


@pytest.mark.parametrize(
    ("path", "typed", "what"),
    [
        ("Q1.rc", "100 uV", '"100 uV" is not a resistance'),
        ("Q1.rc", "4,7k", '"4,7k" is not a resistance'),
        ("Q1.rc", "-1k", "-1k"),
        ("Q1.rc", "0", "zero"),
        ("Q1.device", "F", 'no card "F"'),
        ("Q1.name", "load", '"load"'),
        ("Q1.kind", "common-emiter", '"common-emiter"'),
        ("Q1.free", "rx", '"rx" can\'t be free'),
        ("Q1.tolerance.rc", "120 %", "120 %"),
        ("target.upper", "fast", '"fast"'),
        ("L1.arms", "1k", "several values"),
    ],
)
def test_a_bad_value_is_refused_with_the_reason(opened: Session, path: str, typed: str, what: str) -> None:
    with pytest.raises(ProblemsFound) as refused:
        state.set_value(opened, path, typed, 0.0)
    problem = refused.value.problems[0]
    assert what in problem.what and problem.why and problem.fix


@pytest.mark.parametrize("arms", [
    'arms = [\n  { series_r = "50" },  # in\n  { shunt_c = "22p", role = "high" },\n]',
    'arms = [{ series_r = "50" }, { shunt_c = "22p", role = "high" }]'])
@pytest.mark.parametrize("feed", ["\n", "\r\n"])
def test_arms_come_and_go_with_their_parts(arms: str, feed: str) -> None:
    begin, end = TEXT.index("arms = ["), TEXT.index('[[stage]]\nname = "B1"')
    text = (TEXT[:begin] + arms + "\n" + TEXT[end:]).replace("\n", feed)
    session = state.new_session("x.toml", text)
    assert not session.problems
    more = state.set_value(session, "L1.arms.3.series_l", "10u", 0.0)
    stage = tomllib.loads(more.history.text)["stage"][1]
    assert stage["arms"] == [{"series_r": "50"}, {"shunt_c": "22p", "role": "high"}, {"series_l": "10u"}]
    assert label(more) == "L1: arm 3 added, series_l 10u" and more.ledger is not None
    assert more.history.text.count("\n") == more.history.text.count("\r\n") or feed == "\n"
    less = state.set_value(more, "L1.arms.2.shunt_c", "", 1.0)
    assert tomllib.loads(less.history.text)["stage"][1]["arms"] == [{"series_r": "50"}, {"series_l": "10u"}]
    assert label(less) == "arms.2.shunt_c of L1 taken out: was 22p, its arm with it"
    assert "# in" in less.history.text or "# in" not in arms
    for path, typed in (("L1.arms.9.series_r", "1k"), ("L1.arms.3.series_r", "1 F")):
        with pytest.raises(ProblemsFound):
            state.set_value(session, path, typed, 0.0)
    assert state.set_value(session, "L1.arms.3.series_r", "", 0.0) is session
    only = state.set_value(less, "L1.arms.2.series_l", "", 2.0)
    with pytest.raises(ProblemsFound):  # a ladder without an arm is none
        state.set_value(only, "L1.arms.1.series_r", "", 3.0)


def test_every_sort_of_key_steps_or_says_why() -> None:
    text = good.everything()
    session = state.new_session("x.toml", text)
    rows = {(row.dimension, row.sign, row.choices, bool(row.text)): row
            for sheet in state.sheets_of(session) for row in state.keys_of(session, sheet)}
    stepped = refused = 0
    for row in rows.values():
        try:
            edit = step(text, "x.toml", row.path, 1, row.choices)
        except ProblemsFound as found:
            refused += 1
            assert found.problems[0].fix
            assert not row.text or row.dimension in ("text", "keys", "date", "format", "choice"), row.path
            continue
        stepped += 1
        assert edit and edit.inverse().apply(edit.apply(text)) == text
    assert stepped > 30 > refused


def test_a_step_is_quick_enough_to_be_felt_at_once() -> None:
    """Six stages: a step reads its text once, however many looks it takes (what a screen shows included)."""
    from polebook.chain import read

    session = state.open_file(str(DEMOS / "six-stage.toml"))
    read.known_reading.cache_clear()
    session = state.step(session, "Q1.rc", 1, 0.0)
    before = read.known_reading.cache_info().misses
    for number in range(5):
        session = state.step(session, "Q1.rc", 1, 5.0 * number + 5)
    assert read.known_reading.cache_info().misses - before == 5
