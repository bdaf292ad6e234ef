"""Edits of a file: one key set or taken out, and no fault added."""

from __future__ import annotations

import pytest

from polebook.chain import edits
from polebook.chain.read import parse
from polebook.problem import ProblemsFound
from tests.chain import good

TEXT = good.small(
    stage=good.STAGE + 'tolerance = { rc = "1 %" }  # the load resistor\n'
    + good.LADDER + 'arms = [ { series_r = "50" }, { shunt_c = "22p" } ]\n'
    + good.BLOCK + 'gain = 2\npoles = ["1M", "2M"]\n',
    rest='[target]\nupper = "1M"\n[[bench]]\nat = "Q1"\n',
)  # fmt: skip


def after(path, value, text=TEXT):
    edit, left = edits.set_value(text, "x.toml", path, value)
    assert left == []
    return edit.apply(text)


def changed(path, value, text=TEXT):
    """Lines taken out and put in."""
    old, new = text.split("\n"), after(path, value, text).split("\n")
    return [line for line in old if line not in new], [line for line in new if line not in old]


@pytest.mark.parametrize(
    ("path", "value", "old", "new"),
    [
        ("Q1.rc", "4k7", ['rc = "2k2"'], ['rc = "4k7"']),
        ("Q1.rc", "4700", ['rc = "2k2"'], ["rc = 4700"]),
        ("Q1.rc", "4.7 kΩ", ['rc = "2k2"'], ['rc = "4.7 kΩ"']),
        ("Q1.couple", "1u", [], ['couple = "1u"']),
        ("Q1.note", 'say "so"', [], ['note = "say \\"so\\""']),
        ("Q1.left_out", "true", [], ["left_out = true"]),
        ("Q1.lower_to", "negative", [], ['lower_to = "negative"']),
        ("Q1.free", "rc, couple", [], ['free = ["rc", "couple"]']),
        (
            "Q1.tolerance.rc",
            "2 %",
            ['tolerance = { rc = "1 %" }  # the load resistor'],
            ['tolerance = { rc = "2 %" }  # the load resistor'],
        ),
        (
            "L1.arms.2.shunt_c",
            "33p",
            ['arms = [ { series_r = "50" }, { shunt_c = "22p" } ]'],
            ['arms = [ { series_r = "50" }, { shunt_c = "33p" } ]'],
        ),
        ("B1.poles.2", "3M", ['poles = ["1M", "2M"]'], ['poles = ["1M", "3M"]']),
        ("B1.poles", "[3M, 4e6]", ['poles = ["1M", "2M"]'], ['poles = ["3M", 4e6]']),
        ("B1.gain", "-3", ["gain = 2"], ["gain = -3"]),
        ("source.resistance", "50", ['resistance = "600"'], ["resistance = 50"]),
        ("target.upper", "2M", ['upper = "1M"'], ['upper = "2M"']),
        ("target.lower", "20", [], ["lower = 20"]),
        ("supply.positive", "12", [], ["[supply]", "positive = 12"]),
        ("device.D.beta", "150", ["beta = 200"], ["beta = 150"]),
        ("device.D.polarity", "pnp", [], ['polarity = "pnp"']),
        ("bench.1.date", "2026-05-04", [], ["date = 2026-05-04"]),
        ("title", "a title", [], ['title = "a title"']),
        ("format", "1", [], []),
    ],
)
def test_one_key_is_set(path, value, old, new):
    gone, come = changed(path, value)
    assert gone == old
    assert [line for line in come if line] == new


def test_a_value_is_read_back():
    assert parse(after("Q1.rc", "4k7"), "x").numbers["Q1.rc"] == 4700.0
    assert parse(after("L1.tolerance.arms.2.shunt_c", "2 %"), "x").numbers["L1.tolerance.arms.2.shunt_c"] == 0.02


@pytest.mark.parametrize(
    ("path", "value", "what"),
    [
        ("Q1.rc", "10 nF", '"10 nF" is not a resistance'),
        ("Q1.rc", "0", "rc of stage Q1 is zero"),
        ("Q1.rc", "nan", '"nan" is not a resistance'),
        ("Q1.rc", "", '"" is not a resistance'),
        ("Q1.kind", "common-source", "a common-source stage takes no bjt card"),
        ("Q1.name", "L1", 'a second stage is named "L1"'),
        ("Q1.name", "Q2", 'there is no stage "Q1"'),
        ("Q1.device", "E", 'there is no card "E"'),
        ("Q1.ce", "1u", "ce of stage Q1 stands without re_bypassed"),
        ("Q1.left_out", "yes", '"yes" is not true or false'),
        ("Q1.free", "rcc", '"rcc" can\'t be free'),
        ("B1.gain", "20 dB", "gain of stage B1 is in dB and has no sign"),
        ("format", "2", "is not a known format"),
        ("bench.1.date", "today", '"today" is not a date'),
        ("Q1.tolerance.rc", "5", "tolerance of rc of stage Q1 is 500 %"),
    ],
)
def test_a_set_that_adds_a_fault_is_refused_with_the_reason(path, value, what):
    with pytest.raises(ProblemsFound) as caught:
        edits.set_value(TEXT, "x.toml", path, value)
    assert what in " ".join(problem.what for problem in caught.value.problems)
    assert caught.value.text != TEXT


@pytest.mark.parametrize(
    ("path", "what"),
    [("L1.arms", "L1.arms holds several values"), ("Q1.tolerance", "Q1.tolerance holds several values"),
     ("Q1", "Q1 is a table"), ("Q9.rc", "nothing is named")],
)  # fmt: skip
def test_what_is_not_one_value_is_not_set(path, what):
    with pytest.raises(ProblemsFound, match=what):
        edits.set_value(TEXT, "x.toml", path, "1")


def test_a_key_is_taken_out_and_nothing_else_moves():
    edit, left = edits.unset(TEXT, "x.toml", "target.upper")
    assert left == []
    assert edit.apply(TEXT) == TEXT.replace('upper = "1M"\n', "")
    assert edit.inverse().apply(edit.apply(TEXT)) == TEXT
    edit, left = edits.unset(TEXT, "x.toml", "Q1.tolerance.rc")
    assert left == []
    assert "Q1.tolerance.rc" not in parse(edit.apply(TEXT), "x").numbers


@pytest.mark.parametrize(
    ("path", "what"),
    [("Q1.kind", "stage Q1 has no kind"), ("source.resistance", "the source has no resistance"),
     ("device.D.beta", "card D has no beta"), ("format", "does not say its format"),
     ("Q1.couple", "gives no Q1.couple")],
)  # fmt: skip
def test_taking_out_what_is_needed_or_absent_is_refused(path, what):
    with pytest.raises(ProblemsFound, match=what):
        edits.unset(TEXT, "x.toml", path)


FAULTY = TEXT.replace('rc = "2k2"', 'rc = "2 kF"\nrcc = 3').replace('upper = "1M"', "upper = -1")


def test_an_edit_that_leaves_fewer_faults_is_taken_and_lists_the_rest():
    edit, left = edits.set_value(FAULTY, "x.toml", "Q1.rc", "2k2")
    assert 'rc = "2k2"' in edit.apply(FAULTY)
    assert [problem.what for problem in left] == ['unknown key "rcc" in stage Q1', "-1 is negative"]
    edit, left = edits.unset(FAULTY, "x.toml", "Q1.rcc")
    assert "rcc" not in edit.apply(FAULTY)
    assert len(left) == 2


def test_an_edit_of_a_faulty_file_that_touches_no_fault_is_taken():
    edit, left = edits.set_value(FAULTY, "x.toml", "device.D.beta", "100")
    assert "beta = 100" in edit.apply(FAULTY)
    assert len(left) == 3


def test_one_fault_in_the_place_of_another_is_refused():
    with pytest.raises(ProblemsFound) as caught:
        edits.set_value(FAULTY, "x.toml", "target.upper", "-2")
    assert [problem.what for problem in caught.value.problems] == ["-2 is negative"]


def test_a_text_that_is_no_toml_is_not_edited():
    with pytest.raises(ProblemsFound) as caught:
        edits.set_value("format = \n", "x.toml", "Q1.rc", "1")
    assert caught.value.problems[0].place.line == 1


def test_setting_what_stands_there_changes_nothing():
    edit, left = edits.set_value(TEXT, "x.toml", "Q1.rc", "2k2")
    assert not edit
    assert left == []
