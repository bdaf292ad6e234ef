"""Blocks copied, moved and removed, keys renamed: what else stands in the file stays where it is."""

from __future__ import annotations

import tomllib
from collections.abc import Callable

import pytest

from polebook.problem import ProblemsFound
from polebook.text.edit import Edit
from polebook.text.rearrange import batch, copy_block, move_block, remove_block, rename, replace_all
from polebook.text.spans import Path
from polebook.text.splice import set_value

TEXT = """# the file
format = 1

# the first stage,
# with a remark over two lines
[[stage]]
name = "Q1"    # its name
tolerance.rc = "1 %"

[[stage]]
name = "Q2"
note = \"\"\"
[[stage]] is only words here
\"\"\"
[stage.tolerance]   # of Q2
rc = "2 %"
# still of Q2

# on its own between two blocks

[[stage]]
name = "Q3"

[load]
resistance = "1k"
"""
WAYS: dict[str, Callable[[str], str]] = {
    "as it is": lambda text: text,
    "no last newline": lambda text: text.rstrip("\n"),
    "carriage returns": lambda text: text.replace("\n", "\r\n"),
    "stages last": lambda text: text[: text.index("[load]")].rstrip("\n"),
}


def names(text: str) -> list[str]:
    return [stage["name"] for stage in tomllib.loads(text)["stage"]]


def done(text: str, edit: Edit) -> str:
    after = edit.apply(text)
    assert edit.inverse().apply(after) == text
    assert after.count("\r\n") in (0, after.count("\n")), "line ends are mixed"
    assert after.endswith("\n") == text.endswith("\n")
    return after


@pytest.fixture(params=WAYS)
def text(request: pytest.FixtureRequest) -> str:
    return WAYS[request.param](TEXT)


def test_a_block_moves_with_its_comments_and_its_tables(text: str) -> None:
    after = done(text, move_block(text, ("stage", 1), 0))
    assert names(after) == ["Q2", "Q1", "Q3"]
    assert tomllib.loads(after)["stage"][0]["tolerance"] == {"rc": "2 %"}
    lines = after.splitlines()
    assert lines.index("# the first stage,") > lines.index("# still of Q2")
    assert lines[lines.index("# with a remark over two lines") + 2].startswith('name = "Q1"')
    assert sorted(lines) == sorted(text.splitlines())
    assert lines.index("# on its own between two blocks") == text.splitlines().index("# on its own between two blocks")


def test_a_block_moves_over_what_stands_between(text: str) -> None:
    after = done(text, move_block(text, ("stage", 1), 2))
    assert names(after) == ["Q1", "Q3", "Q2"]
    assert done(after, move_block(after, ("stage", 1), 2)) == text
    assert done(after, move_block(after, ("stage", 2), 1)) == text


def test_blocks_apart_in_the_file_change_places() -> None:
    text = '[[stage]]\nname = "Q1"\n[load]\nresistance = 1\n[[stage]]\nname = "Q2"\n'
    after = done(text, move_block(text, ("stage", 0), 1))
    assert after == '[[stage]]\nname = "Q2"\n[load]\nresistance = 1\n[[stage]]\nname = "Q1"\n'


def test_a_copy_stands_right_behind(text: str) -> None:
    after = done(text, copy_block(text, ("stage", 1)))
    data = tomllib.loads(after)["stage"]
    assert names(after) == ["Q1", "Q2", "Q2", "Q3"] and data[1] == data[2]
    assert after.count("# still of Q2") == 2
    last = done(text, copy_block(text, ("stage", 2)))
    assert names(last) == ["Q1", "Q2", "Q3", "Q3"]


@pytest.mark.parametrize("number", [0, 1, 2])
def test_a_block_goes_with_its_comments(text: str, number: int) -> None:
    after = done(text, remove_block(text, ("stage", number)))
    assert names(after) == [name for at, name in enumerate(["Q1", "Q2", "Q3"]) if at != number]
    assert ("# still of Q2" in after) == (number != 1)
    assert ("# with a remark over two lines" in after) == (number != 0)
    assert "# on its own between two blocks" in after
    assert "\n\n\n" not in after.replace("\r", "")


def test_a_copy_removed_leaves_the_text_as_it_was(text: str) -> None:
    for number in range(3):
        copied = copy_block(text, ("stage", number)).apply(text)
        assert remove_block(copied, ("stage", number + 1)).apply(copied) == text


def test_the_last_of_a_list_leaves_no_list() -> None:
    text = 'format = 1\n\n[[bench]]\nunit = "a"\n'
    assert done(text, remove_block(text, ("bench", 0))) == "format = 1\n"


def test_a_key_gets_another_name(text: str) -> None:
    after = done(text, rename(text, ("stage", 0, "tolerance", "rc"), "rd"))
    assert after == text.replace('tolerance.rc = "1 %"', 'tolerance.rd = "1 %"')
    inner = done(text, rename(text, ("stage", 1, "tolerance", "rc"), "r d"))
    assert inner == text.replace('rc = "2 %"', '"r d" = "2 %"')


@pytest.mark.parametrize(
    ("work", "what"),
    [
        (lambda: rename(TEXT, ("stage", 0, "name"), "tolerance"), "there is a stage[1].tolerance already"),
        (lambda: rename(TEXT, ("stage", 1, "tolerance"), "t"), "no key with a value"),
        (lambda: copy_block(TEXT, ("load",)), "load stands once"),
        (lambda: copy_block(TEXT, ("stage", 7)), "no header of its own"),
        (lambda: move_block(TEXT, ("stage", 2), 3), "no header of its own"),
        (lambda: remove_block('stage = [{ name = "Q1" }]\n', ("stage", 0)), "no header of its own"),
        (lambda: remove_block("stage = [", ("stage", 0)), ""),
    ],
)
def test_what_is_no_block_or_no_key_is_refused(work: Callable[[], Edit], what: str) -> None:
    with pytest.raises(ProblemsFound) as refused:
        work()
    problem = refused.value.problems[0]
    assert what in problem.what and problem.why and problem.fix


def test_a_table_that_another_needs_is_not_moved_away_from_it() -> None:
    """`[stage.tolerance]` belongs to the last stage before it: to change places would hand it to the other."""
    text = '[[stage]]\nname = "Q1"\n\n[[stage]]\nname = "Q2"\n[load]\nresistance = 1\n[stage.tolerance]\nrc = 0.1\n'
    with pytest.raises(ProblemsFound, match="in place"):
        move_block(text, ("stage", 0), 1)


def test_edits_in_a_row_are_one(text: str) -> None:
    paths: list[Path] = [("stage", 0, "name"), ("stage", 2, "name"), ("load", "resistance")]
    edit = replace_all(text, [(path, f'"new {at}"') for at, path in enumerate(paths)], "three values")
    after = done(text, edit)
    assert edit.label == "three values"
    assert names(after) == ["new 0", "Q2", "new 1"]
    both = batch(text, [lambda now: remove_block(now, ("stage", 0)),
                        lambda now: set_value(now, ("stage", 0, "name"), '"first"')], "both")
    assert names(done(text, both)) == ["first", "Q3"]
