"""Edits as values: applied, undone, joined."""

from __future__ import annotations

import random

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.text.edit import Edit, Misfit, Splice

seeds = st.integers(0, 10**9)


def random_edit(text: str, rng: random.Random) -> Edit:
    splices: list[Splice] = []
    at = 0
    while at <= len(text) and len(splices) < 4:
        start = rng.randint(at, len(text))
        end = rng.randint(start, min(start + 4, len(text)))
        splices.append(Splice(start, text[start:end], "".join(rng.choices("abc", k=rng.randint(0, 3)))))
        at = end + 1
    return Edit.of(splices, "random")


def random_base(rng: random.Random) -> str:
    return "".join(rng.choices("abc\n", k=rng.randint(0, 20)))


def test_an_edit_replaces_what_stands_there() -> None:
    edit = Edit((Splice(0, "a", "xy"), Splice(3, "", "z")), "two")
    assert edit.apply("abcd") == "xybczd"
    assert edit.inverse() == Edit((Splice(0, "xy", "a"), Splice(4, "z", "")), "two")


def test_an_edit_of_another_text_is_refused() -> None:
    with pytest.raises(Misfit):
        Edit((Splice(1, "b", "x"),)).apply("axc")
    with pytest.raises(Misfit):
        Edit((Splice(9, "", "x"),)).apply("abc")
    with pytest.raises(Misfit):
        Edit((Splice(0, "a", "x"),)).then(Edit((Splice(0, "a", "y"),)))


@pytest.mark.parametrize(
    "splices", [(Splice(2, "a", ""), Splice(0, "a", "")), (Splice(0, "ab", ""), Splice(2, "", "x"))]
)
def test_splices_stand_sorted_and_apart(splices: tuple[Splice, ...]) -> None:
    with pytest.raises(ValueError, match="sorted and apart"):
        Edit(splices)
    assert len(Edit.of(splices).splices) == len({splice.start for splice in Edit.of(splices).splices})


def test_what_changes_nothing_is_no_edit() -> None:
    assert not Edit.of([Splice(3, "same", "same")])
    assert Edit.of([Splice(3, "same", "other")])


@given(seeds)
@settings(max_examples=200, deadline=None, derandomize=True)
def test_the_inverse_restores_the_text(seed: int) -> None:
    rng = random.Random(seed)
    text = random_base(rng)
    edit = random_edit(text, rng)
    assert edit.inverse().apply(edit.apply(text)) == text
    assert edit.inverse().inverse() == edit


@given(seeds)
@settings(max_examples=300, deadline=None, derandomize=True)
def test_edits_in_a_row_are_one_edit(seed: int) -> None:
    rng = random.Random(seed)
    text = random_base(rng)
    first = random_edit(text, rng)
    middle = first.apply(text)
    second = random_edit(middle, rng)
    last = second.apply(middle)
    both = first.then(second, "both")
    assert both.apply(text) == last and both.label == "both"
    assert both.inverse().apply(last) == text
    third = random_edit(last, rng)
    assert both.then(third).apply(text) == first.then(second.then(third)).apply(text) == third.apply(last)
    assert first.then(first.inverse()).apply(text) == text
