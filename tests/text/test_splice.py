"""Values set and keys taken out, everything else left as it stands."""

from __future__ import annotations

import random
import tomllib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.problem import ProblemsFound
from polebook.text import splice
from polebook.text.data import find, put, same
from polebook.text.spans import Path, scan
from tests.text.test_spans import everything
from tests.text.toml_maker import random_text

TEXT = """format = 1
title = "demo"

# the supply
[supply]
positive    = "12"   # volts
negative    = 0

# first
[[stage]]
name = "Q1"
arms = [ { series_r = "50" }, { shunt_c = "22p" } ]
rc   = "4k7" # collector

[[stage]]
name = "Q2"
\ttolerance.rc = "1 %"
# closing of Q2

[stage.extra]

# the card
[device.D]
beta = 200
note = { a = 1, b.c = 2, d = {} }
# end of file"""

SET = [
    # path, literal, lines taken out, lines put in
    (("stage", 0, "rc"), '"5k1"', ['rc   = "4k7" # collector'], ['rc   = "5k1" # collector']),
    (("stage", 0, "name"), '"Q9"', ['name = "Q1"'], ['name = "Q9"']),
    (("stage", 0, "re"), '"47R"', [], ['re   = "47R"']),
    (("stage", 0, "re_bypassed"), '"1k"', [], ['re_bypassed = "1k"']),
    (("supply", "temperature"), "30", [], ["temperature = 30"]),
    (("title",), '"x"', ['title = "demo"'], ['title = "x"']),
    (("note",), '"x"', [], ['note = "x"']),
    (("stage", 1, "extra", "x"), "1", [], ["x = 1"]),
    (("stage", 1, "tolerance", "re"), '"1 %"', [], ['\ttolerance.re = "1 %"']),
    (("stage", 0, "tolerance", "rc"), '"1 %"', [], ['tolerance = { rc = "1 %" }']),
    (("load", "resistance"), "600", [], ["[load]", "resistance = 600", ""]),
    (("source", "kind"), '"voltage"', [], ["[source]", 'kind = "voltage"', ""]),
    (("target", "a b"), "1", [], ["[target]", '"a b" = 1', ""]),
    (("device", "E 2", "beta"), "1", [], ["", '[device."E 2"]', "beta = 1"]),
    (
        ("stage", 0, "arms", 1, "shunt_c"),
        '"33p"',
        ['arms = [ { series_r = "50" }, { shunt_c = "22p" } ]'],
        ['arms = [ { series_r = "50" }, { shunt_c = "33p" } ]'],
    ),
    (
        ("stage", 0, "arms", 0, "series_c"),
        '"1n"',
        ['arms = [ { series_r = "50" }, { shunt_c = "22p" } ]'],
        ['arms = [ { series_r = "50", series_c = "1n" }, { shunt_c = "22p" } ]'],
    ),
    (
        ("device", "D", "note", "d", "e"),
        "3",
        ["note = { a = 1, b.c = 2, d = {} }"],
        ["note = { a = 1, b.c = 2, d = { e = 3 } }"],
    ),
    (
        ("device", "D", "note", "b", "e"),
        "3",
        ["note = { a = 1, b.c = 2, d = {} }"],
        ["note = { a = 1, b.c = 2, b.e = 3, d = {} }"],
    ),
]

UNSET = [
    (("stage", 0, "rc"), ['rc   = "4k7" # collector'], []),
    (("title",), ['title = "demo"'], []),
    (("stage", 1, "tolerance", "rc"), ['\ttolerance.rc = "1 %"'], []),
    (
        ("stage", 0, "arms", 1, "shunt_c"),
        ['arms = [ { series_r = "50" }, { shunt_c = "22p" } ]'],
        ['arms = [ { series_r = "50" }, {} ]'],
    ),
    (
        ("stage", 0, "arms", 0),
        ['arms = [ { series_r = "50" }, { shunt_c = "22p" } ]'],
        ['arms = [ { shunt_c = "22p" } ]'],
    ),
    (
        ("stage", 0, "arms", 1),
        ['arms = [ { series_r = "50" }, { shunt_c = "22p" } ]'],
        ['arms = [ { series_r = "50" } ]'],
    ),
    (("device", "D", "note", "a"), ["note = { a = 1, b.c = 2, d = {} }"], ["note = { b.c = 2, d = {} }"]),
    (("device", "D", "note", "b", "c"), ["note = { a = 1, b.c = 2, d = {} }"], ["note = { a = 1, d = {} }"]),
    (("device", "D", "note", "d"), ["note = { a = 1, b.c = 2, d = {} }"], ["note = { a = 1, b.c = 2 }"]),
    (("device", "D", "note"), ["note = { a = 1, b.c = 2, d = {} }"], []),
]


def changed(before: str, after: str) -> tuple[list[str], list[str]]:
    """The lines between the common start and the common end of two texts."""
    old, new = before.split("\n"), after.split("\n")
    start = 0
    while start < min(len(old), len(new)) and old[start] == new[start]:
        start += 1
    end = 0
    while end < min(len(old), len(new)) - start and old[-1 - end] == new[-1 - end]:
        end += 1
    return old[start : len(old) - end], new[start : len(new) - end]


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
@pytest.mark.parametrize(("path", "value", "out", "into"), SET)
def test_a_value_is_set_where_it_belongs(path: Path, value: str, out: list[str], into: list[str], newline: str) -> None:
    text = TEXT.replace("\n", newline)
    edit = splice.set_value(text, path, value)
    after = edit.apply(text)
    assert find(tomllib.loads(after), path) == tomllib.loads(f"v = {value}")["v"]
    assert changed(TEXT, after.replace(newline, "\n")) == (out, into)
    assert after.count("\n") == after.count(newline), "the line endings are those of the text"
    assert edit.inverse().apply(after) == text and len(edit.splices) == 1 and edit.label.startswith("set ")


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
@pytest.mark.parametrize(("path", "out", "into"), UNSET)
def test_a_key_is_taken_out(path: Path, out: list[str], into: list[str], newline: str) -> None:
    text = TEXT.replace("\n", newline)
    edit = splice.unset(text, path)
    after = edit.apply(text)
    assert changed(TEXT, after.replace(newline, "\n")) == (out, into)
    assert edit.inverse().apply(after) == text and edit.label.startswith("take out ")


def test_tables_stand_in_the_order_of_the_format() -> None:
    text = ""
    for top in ("device", "load", "supply", "tolerance", "source", "target", "preferred"):
        path = (top, "D", "x") if top == "device" else (top, "x")
        text = splice.set_value(text, path, "1").apply(text)
    headers = [line for line in text.split("\n") if line.startswith("[")]
    assert headers == ["[supply]", "[source]", "[load]", "[target]", "[preferred]", "[tolerance]", "[device.D]"]
    assert "\n\n\n" not in text and text.startswith("[") and text.endswith("x = 1\n")


def test_a_new_table_leaves_the_comment_above_the_next_one_to_it() -> None:
    text = "[[stage]]\nx = 1\n# last words\n\n# of the card\n[device.D]\ny = 1\n"
    after = splice.set_value(text, ("load", "x"), "1").apply(text)
    assert after == "[[stage]]\nx = 1\n# last words\n\n[load]\nx = 1\n\n# of the card\n[device.D]\ny = 1\n"
    before = splice.set_value(text, ("supply", "x"), "1").apply(text)
    assert before == "[supply]\nx = 1\n\n" + text


@pytest.mark.parametrize(
    ("text", "path", "after"),
    [
        ("", ("format",), "format = 1\n"),
        ("# only this", ("format",), "# only this\nformat = 1"),
        ("a = 1", ("format",), "a = 1\nformat = 1"),
        ("a = 1\r\nb = 2", ("format",), "a = 1\r\nb = 2\r\nformat = 1"),
        ("[load]", ("load", "x"), "[load]\nx = 1"),
        ("[load]\n", ("format",), "format = 1\n\n[load]\n"),
        ("# about\n\n# load\n[load]\n", ("format",), "# about\n\nformat = 1\n\n# load\n[load]\n"),
        ("a = 1", ("load", "x"), "a = 1\n\n[load]\nx = 1"),
        ("a = 1\n\n\n", ("load", "x"), "a = 1\n\n[load]\nx = 1\n\n\n"),
        ("target = {}\n", ("target", "gain"), "target = { gain = 1 }\n"),
        ("target.gain = 2\n", ("target", "x"), "target.gain = 2\ntarget.x = 1\n"),
        ("[device.D]\n", ("device", "D", "x"), "[device.D]\nx = 1\n"),
        ("[a.b]\nc = 1\n", ("a", "x"), "[a.b]\nc = 1\n\n[a]\nx = 1\n"),
        ('k = """\n[load]\n"""\n[load]\n', ("load", "x"), 'k = """\n[load]\n"""\n[load]\nx = 1\n'),
        ("a=1\n", ("b",), "a=1\nb = 1\n"),
    ],
)
def test_a_key_is_made_in_texts_of_every_shape(text: str, path: Path, after: str) -> None:
    assert splice.set_value(text, path, "1").apply(text) == after


@pytest.mark.parametrize(
    ("text", "path", "after"),
    [
        ("a = 1", ("a",), ""),
        ("a = 1\nb = 2", ("b",), "a = 1"),
        ("a = 1\r\nb = 2", ("b",), "a = 1"),
        ("a = 1\nb = 2\n", ("a",), "b = 2\n"),
        ('a = """\nx\n"""  # gone\nb = 2\n', ("a",), "b = 2\n"),
        ("# stays\na = [\n 1, # x\n 2,\n]\n", ("a", 1), "# stays\na = [\n 1,\n]\n"),
        ("a = [ 1, ]\n", ("a", 0), "a = []\n"),
        ("a = [ 1, 2 ] # c\n", ("a", 0), "a = [ 2 ] # c\n"),
    ],
)
def test_a_line_or_item_is_taken_out_of_texts_of_every_shape(text: str, path: Path, after: str) -> None:
    assert splice.unset(text, path).apply(text) == after


def test_setting_what_stands_already_changes_nothing() -> None:
    assert not splice.set_value(TEXT, ("stage", 0, "rc"), '"4k7"')


@pytest.mark.parametrize(
    "value", ["[" * 15 + "]" * 15, '"""x\n# y"""', "2026-05-04 07:32:00", "[ 1, # c\n 2 ]", "{ a = 'x' }"]
)
def test_a_value_of_any_kind_can_be_set(value: str) -> None:
    after = splice.set_value(TEXT, ("device", "D", "note", "a"), value).apply(TEXT)
    assert find(tomllib.loads(after), ("device", "D", "note", "a")) == tomllib.loads(f"v = {value}")["v"]


REFUSED = [
    (("stage", 5, "rc"), "1", "there is no stage[6]"),
    (("stage", 0, "arms", 7, "x"), "1", "there is no stage[1].arms[8]"),
    (("stage", 0, "arms", 7), "1", "stage[1].arms[8] has no such item"),
    (("stage",), "1", "stage is a table"),
    (("supply",), "1", "supply is a table"),
    (("stage", "x"), "1", "stage.x can't be edited: the table stage is given twice"),
    (("title", "x"), "1", "title is a value, not a table"),
    (("title",), "4k7", "4k7 is not a TOML value"),
    (("title",), "1 # and more", "1 # and more is more than one value"),
    (("title",), "1\nb = 2", "1\nb = 2 is more than one value"),
    (("title",), "[" * 5000 + "]" * 5000, "is not a TOML value"),
    (("title",), "{ a = 1", "{ a = 1 is not a TOML value"),
    ((), "1", "no key is named"),
]


@pytest.mark.parametrize(("path", "value", "what"), REFUSED)
def test_what_cannot_be_set_is_refused_with_the_reason(path: Path, value: str, what: str) -> None:
    with pytest.raises(splice.EditRefused) as caught:
        splice.set_value(TEXT, path, value, "f.toml")
    problem = caught.value.problems[0]
    assert what in problem.what and problem.why and problem.fix and len(problem.what) < 120


@pytest.mark.parametrize(
    ("path", "what"),
    [
        (("supply",), "supply is a table"),
        (("stage",), "stage is a table"),
        (("stage", 1, "tolerance"), "stage[2].tolerance is a table"),
        (("stage", 0, "rd"), "there is no stage[1].rd"),
        (("stage", 9), "there is no stage[10]"),
        ((), "no key is named"),
    ],
)
def test_what_cannot_be_taken_out_is_refused_with_the_reason(path: Path, what: str) -> None:
    with pytest.raises(splice.EditRefused) as caught:
        splice.unset(TEXT, path, "f.toml")
    assert caught.value.problems[0].what == what


def test_a_text_that_is_not_toml_is_not_edited() -> None:
    for act in (lambda: splice.set_value("a = 4k7", ("a",), "1"), lambda: splice.unset("a = 4k7", ("a",))):
        with pytest.raises(ProblemsFound) as caught:
            act()
        assert caught.value.problems[0].what == "4k7 stands without quotes" and caught.value.text == "a = 4k7"


def test_an_edit_that_would_say_something_else_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    real = scan(TEXT)
    real.values[("stage", 0, "rc")] = real.values[("stage", 0, "name")]
    monkeypatch.setattr(splice, "scan", lambda text: real if text == TEXT else scan(text))
    with pytest.raises(splice.EditRefused, match="can't be edited in place"):
        splice.set_value(TEXT, ("stage", 0, "rc"), '"5k1"')


@given(st.integers(0, 10**9))
@settings(max_examples=100, deadline=None, derandomize=True)
def test_edits_of_random_texts_say_what_is_meant_and_are_undone_exactly(seed: int) -> None:
    text = random_text(seed)
    data = tomllib.loads(text)
    rng = random.Random(seed)
    paths = sorted((path for path, _ in everything(data)), key=repr)
    for path in rng.sample(paths, min(len(paths), 3)):
        value = find(data, path)
        if isinstance(path[-1], int):
            path = (*path, "fresh key") if isinstance(value, dict) else path
        else:
            path = rng.choice([path, (*path[:-1], "fresh")])
        if not isinstance(find(data, path), dict | list) or scan(text).value(path):
            edit = splice.set_value(text, path, '"new"')
            meant = tomllib.loads(text)
            put(meant, path, "new")
            assert same(tomllib.loads(edit.apply(text)), meant)
            assert edit.inverse().apply(edit.apply(text)) == text
        if scan(text).value(path):
            edit = splice.unset(text, path)
            assert edit.inverse().apply(edit.apply(text)) == text
            if isinstance(path[-1], str):
                assert find(tomllib.loads(edit.apply(text)), path) is None
