"""The history of a text: undone and redone to the character, runs of steps as one."""

from __future__ import annotations

import random

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.text.edit import Edit, Misfit, Splice
from polebook.text.history import History
from tests.text.test_edit import random_base, random_edit


def replacing(text: str, old: str, new: str, label: str = "edit") -> Edit:
    return Edit.of([Splice(text.index(old), old, new)], label)


def stepped(history: History, old: str, new: str, now: float, run: str = "rc", label: str = "") -> History:
    return history.apply(replacing(history.text, old, new, f"{old} to {new}"), now, run, label)


def test_an_edit_is_undone_and_redone() -> None:
    start = History("rc = 1", "rc = 1")
    after = start.apply(replacing(start.text, "1", "2", "rc: 1 to 2"))
    assert after.text == "rc = 2" and not after.saved and start.saved
    back = after.undo()
    assert back.text == "rc = 1" and back.saved and not back.past
    assert back.redo().text == "rc = 2"
    assert back.undo() is back and after.redo() is after


def test_a_new_edit_ends_what_could_be_redone() -> None:
    start = History("a")
    other = start.apply(replacing("a", "a", "b")).undo().apply(replacing("a", "a", "c"))
    assert other.text == "c" and not other.future and other.redo() is other
    assert other.undo().text == "a"


def test_an_edit_that_changes_nothing_leaves_no_step() -> None:
    start = History("a")
    undone = start.apply(replacing("a", "a", "b")).undo()
    assert undone.apply(Edit((), "nothing")) is undone


def test_an_edit_of_another_text_is_refused() -> None:
    with pytest.raises(Misfit):
        History("a").apply(Edit((Splice(0, "b", "c"),)))


def test_a_run_within_a_second_is_one_step() -> None:
    history = History("4k7")
    history = stepped(history, "4k7", "5k1", 10.0)
    history = stepped(history, "5k1", "5k6", 10.9, label="4k7 to 5k6")
    history = stepped(history, "5k6", "6k2", 11.8, label="4k7 to 6k2")  # a second after the last one, not the first
    assert [step.edit.label for step in history.past] == ["4k7 to 6k2"]
    assert history.before_last() == "4k7"
    assert history.undo().text == "4k7" and history.undo().redo().text == "6k2"


@pytest.mark.parametrize(("run", "now"), [("rc", 11.1), ("re", 10.5), ("", 10.5), ("rc", 9.9)])
def test_what_is_later_or_of_another_run_is_a_step_of_its_own(run: str, now: float) -> None:
    history = stepped(stepped(History("1"), "1", "2", 10.0), "2", "3", now, run)
    assert [step.edit.label for step in history.past] == ["1 to 2", "2 to 3"]


def test_steps_that_cancel_each_other_leave_none() -> None:
    history = stepped(stepped(History("1", "1"), "1", "2", 1.0), "2", "1", 1.5)
    assert not history.past and history.saved
    assert stepped(history, "1", "2", 1.7).undo().text == "1"


@pytest.mark.parametrize("between", ["undo and redo", "save", "undo the one after"])
def test_a_run_does_not_reach_over_an_undo_or_a_save(between: str) -> None:
    history = stepped(History("1"), "1", "2", 1.0)
    if between == "undo and redo":
        history = history.undo().redo()
    elif between == "save":
        history = history.marked(history.text)
    else:
        history = stepped(history, "2", "9", 5.0).undo()
    after = stepped(history, "2", "3", 1.2)
    assert len(after.past) == 2 and after.undo().text == "2"


def test_saved_means_that_the_file_holds_this_very_text() -> None:
    history = stepped(History("1", "1"), "1", "2", 0.0)
    assert not history.saved
    kept = history.marked("2")
    assert kept.saved and not kept.undo().saved and kept.undo().redo().saved
    assert not History("").saved


@given(st.integers(0, 10**9))
@settings(max_examples=150, deadline=None, derandomize=True)
def test_any_edits_are_undone_to_the_first_text_and_redone_to_the_last(seed: int) -> None:
    rng = random.Random(seed)
    first = random_base(rng)
    history, now = History(first, first), 0.0
    for _ in range(rng.randint(1, 12)):
        now += rng.choice((0.1, 3.0))
        what = rng.random()
        if what < 0.2:
            history = history.undo()
        elif what < 0.3:
            history = history.redo()
        elif what < 0.4:
            history = history.marked(history.text)
        else:
            history = history.apply(random_edit(history.text, rng), now, rng.choice(("", "a", "b")))
    while history.future:
        history = history.redo()
    last, texts = history.text, [history.text]
    while history.past:
        assert all(step.edit for step in history.past)
        history = history.undo()
        texts.append(history.text)
    assert history.text == first
    for text in texts[-2::-1]:
        history = history.redo()
        assert history.text == text
    assert history.text == last
