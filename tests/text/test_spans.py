"""Where things stand in a text."""

from __future__ import annotations

import random
import tomllib
from collections.abc import Iterator
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.problem import Place, render
from polebook.text.data import put, same
from polebook.text.spans import Path, Unscannable, scan
from polebook.text.toml import read
from tests.text.toml_maker import random_text

TEXT = """format = 1
title = "Ω [[stage]] = x"

[supply]
positive = "12"

[[stage]]
name = "Q1"
"quoted key" = 'a # b'
note = \"\"\"
[[stage]]
name = "no"
\"\"\"
tolerance.rc = "1 %"
[stage.sub]
x = 1

[[stage]]  # second
arms = [ { series_r = "50" }, # ] }
         { shunt_c = "22p" } ]
date = 2026-05-04 07:32:00

[ device . "D 1" ]
beta\t=\t200
"""


def everything(data: Any, path: Path = ()) -> Iterator[tuple[Path, Any]]:
    """Every path of parsed TOML and what stands there."""
    items = data.items() if isinstance(data, dict) else enumerate(data) if isinstance(data, list) else ()
    for step, value in items:
        yield (*path, step), value
        yield from everything(value, (*path, step))


def cut(text: str, path: Path, what: str = "value") -> str | None:
    spans = scan(text)
    span = {"value": spans.value, "key": spans.key, "header": spans.header}[what](path)
    return text[span.start : span.end] if span else None


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_values_keys_and_headers_are_found(newline: str) -> None:
    text = TEXT.replace("\n", newline)
    assert cut(text, ("title",)) == '"Ω [[stage]] = x"'
    assert cut(text, ("stage", 0, "quoted key")) == "'a # b'"
    assert cut(text, ("stage", 0, "quoted key"), "key") == '"quoted key"'
    assert cut(text, ("stage", 0, "tolerance", "rc")) == '"1 %"'
    assert cut(text, ("stage", 0, "tolerance", "rc"), "key") == "rc"
    assert cut(text, ("stage", 0, "tolerance"), "key") == "tolerance"
    assert cut(text, ("stage", 0, "sub", "x")) == "1"
    assert cut(text, ("stage", 0, "sub"), "header") == "[stage.sub]"
    assert cut(text, ("stage", 1), "header") == "[[stage]]"
    assert cut(text, ("stage", 1, "arms", 1)) == '{ shunt_c = "22p" }'
    assert cut(text, ("stage", 1, "arms", 1, "shunt_c")) == '"22p"'
    assert cut(text, ("stage", 1, "date")) == "2026-05-04 07:32:00"
    assert cut(text, ("device", "D 1"), "header") == '[ device . "D 1" ]'
    assert cut(text, ("device", "D 1", "beta")) == "200"
    assert cut(text, ("stage", 0, "name")) == '"Q1"'
    assert cut(text, ("stage", 2, "name")) is None and cut(text, ("stage",)) is None
    assert cut(text, ("stage", 0, "note"), "header") is None


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_places_count_lines_and_characters_from_one(newline: str) -> None:
    spans = scan(TEXT.replace("\n", newline))
    assert spans.place(("title",), "f") == Place("f", 2, 9, 17)
    assert spans.place(("title",), "f", key=True) == Place("f", 2, 1, 5)
    assert spans.place(("stage", 0), "f") == Place("f", 7, 1, 9)
    assert spans.place(("stage", 0, "note"), "f") == Place("f", 10, 8, 3)
    assert spans.place(("stage", 1, "arms"), "f") == Place("f", 19, 8, 28)
    assert spans.place(("device", "D 1", "beta"), "f") == Place("f", 24, 8, 3)


def test_what_is_missing_is_placed_at_what_is_around_it() -> None:
    spans = scan(TEXT)
    assert spans.place(("stage", 1, "rc"), "f") == Place("f", 18, 1, 9)
    assert spans.place(("stage", 1, "arms", 0, "shunt_c"), "f") == Place("f", 19, 10, 19)
    assert spans.place(("stage", 0, "tolerance", "re"), "f") == Place("f", 14, 1, 9)
    assert spans.place(("device", "E"), "f") == Place("f", 23, 3, 6)
    assert spans.place(("load", "resistance"), "f") == Place("f")
    assert spans.place((), "f") == Place("f")


def test_an_empty_value_at_the_end_has_a_place() -> None:
    assert scan('a = ""').place(("a",), "f") == Place("f", 1, 5, 2)


@pytest.mark.parametrize("text", ["a", "a = ", "a = [1", "[a", "= 1", "a = {b}", 'a = "x'])
def test_what_is_not_toml_is_not_located(text: str) -> None:
    with pytest.raises(Unscannable):
        scan(text)


@given(st.integers(0, 10**9))
@settings(max_examples=120, deadline=None, derandomize=True)
def test_every_value_of_a_random_text_is_found(seed: int) -> None:
    text = random_text(seed)
    data = tomllib.loads(text)
    spans = scan(text)
    found = dict(everything(data))
    assert set(spans.values) <= set(found) and set(spans.entries) <= set(spans.values)
    for path, value in found.items():
        span = spans.value(path)
        if span is None:  # a table under a header or made by dotted keys, or a list of such tables
            assert isinstance(value, dict | list)
        else:
            assert same(tomllib.loads(f"value = {text[span.start : span.end]}")["value"], value)
        if isinstance(path[-1], str):
            key = spans.key(path)
            assert key is not None
            assert tomllib.loads(f"{text[key.start : key.end]} = 1") == {path[-1]: 1}


@given(st.integers(0, 10**9))
@settings(max_examples=60, deadline=None, derandomize=True)
def test_a_value_replaced_at_its_span_changes_that_value_alone(seed: int) -> None:
    text = random_text(seed)
    spans = scan(text)
    paths = random.Random(seed).sample(sorted(spans.values, key=repr), min(len(spans.values), 5))
    for path in paths:
        span = spans.values[path]
        meant = tomllib.loads(text)
        put(meant, path, "new")
        assert same(tomllib.loads(f'{text[: span.start]}"new"{text[span.end :]}'), meant)


@given(st.integers(0, 10**9))
@settings(max_examples=150, deadline=None, derandomize=True)
def test_a_damaged_text_is_told_of_or_located(seed: int) -> None:
    rng = random.Random(seed)
    damaged = list(random_text(seed % 50))
    for _ in range(rng.randint(1, 4)):
        at = rng.randint(0, len(damaged))
        damaged[at : at + rng.randint(0, 2)] = rng.choice(
            ["", "'", '"', "[", "]", "{", "}", "=", ".", ",", "#", "\n", "\\", "x"]
        )
    text = "".join(damaged)
    data, problems = read(text, "f.toml")
    if data is None:
        place = problems[0].place
        assert place is not None and 0 < place.line <= text.count("\n") + 1
        assert "^" in render(problems[0], text) and problems[0].why and problems[0].fix
    else:
        assert set(scan(text).values) <= {path for path, _ in everything(data)}
