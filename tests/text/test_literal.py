"""Values written as TOML."""

from __future__ import annotations

import tomllib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.text.literal import key, literal, string


@pytest.mark.parametrize("text", ["12", "-12", "0", "0.5", "1e3", "6.02E-23", "+3"])
def test_a_plain_number_stays_bare(text: str) -> None:
    assert literal(text) == text and isinstance(tomllib.loads(f"v = {literal(text)}")["v"], int | float)


@pytest.mark.parametrize(
    "text", ["4k7", ".5", "5.", "007", "1_000", "nan", "inf", "true", "60 dB", "", "0x10", "1e", "١"]
)
def test_anything_else_stands_in_quotes(text: str) -> None:
    assert tomllib.loads(f"v = {literal(text)}")["v"] == text


def test_blanks_around_a_quantity_are_dropped() -> None:
    assert literal(" 4k7 ") == '"4k7"' and literal(" 12\n") == "12"


@given(st.text())
@settings(max_examples=150, deadline=None, derandomize=True)
def test_any_text_is_written_so_that_it_is_read_back(text: str) -> None:
    assert tomllib.loads(f"v = {string(text)}")["v"] == text
    assert string(text).isprintable() or not text.isprintable()
    assert tomllib.loads(f"{key(text)} = 1") == {text: 1}


def test_a_lone_surrogate_is_replaced() -> None:
    assert string("\ud800") == '"\ufffd"'


def test_a_key_is_bare_where_it_can_be() -> None:
    assert key("rc_1-a") == "rc_1-a" and key("a b") == '"a b"' and key("") == '""'
