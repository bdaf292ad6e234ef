"""Laws of any sequence of edits on the demo chains and on one with every key."""

from __future__ import annotations

import random

from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.problem import ProblemsFound
from polebook.session import state
from polebook.session.state import Session
from polebook.text.blocks import blocks
from polebook.text.spans import scan
from polebook.text.toml import read
from tests.helpers import DEMOS, of_whole
from tests.session.random_edits import attempt, random_edit

TEXTS = {path.stem: path.read_text(encoding="utf-8") for path in sorted(DEMOS.glob("*.toml"))}
WAYS = (lambda text: text, lambda text: text.replace("\n", "\r\n"), lambda text: text.rstrip("\n"))


def begun(rng: random.Random) -> Session:
    text = rng.choice(WAYS)(TEXTS[rng.choice(sorted(TEXTS))])
    return state.new_session("chain.toml", text)


def stage_blocks(session: Session) -> dict[str, str]:
    """Name -> the stage's lines with its comments, as far as it has one name."""
    text = session.history.text
    data, _ = read(text, "")
    names = [stage.get("name") for stage in (data or {}).get("stage", [])]
    found = [block for block in blocks(scan(text)) if block.path[0] == "stage"]
    return {str(name): text[block.span.start : block.span.end].rstrip() for name, block in
            zip(names, sorted(found, key=lambda block: int(block.path[1])), strict=True)}


@given(st.integers(0, 10**9))
@settings(max_examples=of_whole(12, 6), deadline=None, derandomize=True)
def test_any_edits_are_undone_to_the_byte_and_redone(seed: int) -> None:
    rng = random.Random(seed)
    session, now = begun(rng), 0.0
    first = session.history.text
    feed = "\r\n" if "\r\n" in first else "\n"
    for _ in range(12):
        now += rng.choice((0.3, 5.0))
        session = attempt(session, random_edit(session, rng)[1], now)
        text = session.history.text
        assert read(text, "")[0] is not None, "every text between is TOML"
        assert session.chain is not None, "and of a sound file no edit makes a faulty one"
        assert text.count("\n") == text.count(feed), "line ends are those of the file"
        assert session.ledger is not None or session.problems
        assert all(step.edit.label for step in session.history.past)
    last = session.history.text
    while session.history.past:
        session, label = state.undo(session)
        assert label
    assert session.history.text == first
    while session.history.future:
        session, _ = state.redo(session)
    assert session.history.text == last


@given(st.integers(0, 10**9))
@settings(max_examples=of_whole(12, 6), deadline=None, derandomize=True)
def test_an_edit_of_one_stage_leaves_the_others_as_they_are(seed: int) -> None:
    rng = random.Random(seed)
    session = begun(rng)
    for number in range(8):
        about, made = random_edit(session, rng)
        before = stage_blocks(session)
        session = attempt(session, made, 5.0 * number)
        after = stage_blocks(session)
        label = session.history.past[-1].edit.label if session.history.past else ""
        for name, block in before.items():
            if about and name not in (about, "") and f"{name} gets a couple" not in label:
                assert after[name] == block, f"{label}: {name}"


@given(st.integers(0, 10**9))
@settings(max_examples=6, deadline=None, derandomize=True)
def test_a_new_name_and_the_old_one_again_change_nothing(seed: int) -> None:
    rng = random.Random(seed)
    session = begun(rng)
    assert session.chain is not None
    text = session.history.text
    for stage in session.chain.stages:
        other = state.rename_stage(session, stage.name, f"x{stage.name}", 0.0)
        assert other.history.text != text and other.ledger is not None
        assert state.rename_stage(other, f"x{stage.name}", stage.name, 1.0).history.text == text


@given(st.integers(0, 10**9))
@settings(max_examples=6, deadline=None, derandomize=True)
def test_to_the_source_and_back_to_the_load_changes_nothing(seed: int) -> None:
    rng = random.Random(seed)
    session = begun(rng)
    assert session.chain is not None
    name = rng.choice(session.chain.stages).name
    for way in (1, -1):
        try:
            there = state.move_stage(session, name, way, 0.0)
        except ProblemsFound:
            continue
        back = state.move_stage(there, name, -way, 1.0)
        assert there.history.text != session.history.text and back.history.text == session.history.text
