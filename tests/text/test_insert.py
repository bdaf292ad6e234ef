"""Whole tables added to a text, and new files."""

import os

import pytest

from polebook.problem import ProblemsFound
from polebook.text import files
from polebook.text.blocks import block_of
from polebook.text.spans import scan
from polebook.text.splice import insert_block
from polebook.text.toml import read

TEXT = """format = 1

# the first
[[stage]]
name = "Q1"

[[stage]]
name = "Q2"
# closing of Q2

[load]
x = 1
"""
BLOCK = '# new\n[[stage]]\nname = "N"\n'


@pytest.mark.parametrize(
    ("at", "names", "before", "after"),
    [
        (0, ["N", "Q1", "Q2"], "format = 1\n\n", "\n# the first"),
        (1, ["Q1", "N", "Q2"], 'name = "Q1"\n\n', '\n[[stage]]\nname = "Q2"'),
        (2, ["Q1", "Q2", "N"], "# closing of Q2\n\n", "\n[load]"),
    ],
)
def test_a_stage_goes_to_its_place(at, names, before, after):
    edit = insert_block(TEXT, ("stage", at), BLOCK)
    text = edit.apply(TEXT)
    assert [stage["name"] for stage in read(text, "")[0]["stage"]] == names
    assert before + BLOCK + after in text
    assert edit.inverse().apply(text) == TEXT


def test_a_first_stage_goes_where_the_format_has_it():
    bare = "[source]\na = 1\n\n[load]\nb = 1\n"
    assert insert_block(bare, ("stage", 0), BLOCK).apply(bare) == f"[source]\na = 1\n\n{BLOCK}\n[load]\nb = 1\n"


@pytest.mark.parametrize(
    ("path", "block", "says"),
    [
        (("stage", 3), BLOCK, "leaves a gap"),
        (("load",), "[load]\ny = 2\n", "already"),
        (("device", "D"), "[device.E]\n", "is not device.D"),
        (("device", "D"), "device = 3\n", "is not device.D"),
        (("device", "D"), "[device.D]\n[source]\n", "can't be edited in place"),
        (("device", "D"), "[device.D\n", "header"),
        ((), BLOCK, "no key is named"),
    ],
)
def test_what_is_no_such_block_is_refused(path, block, says):
    with pytest.raises(ProblemsFound) as found:
        insert_block(TEXT, path, block)
    assert says in str(found.value)


def test_a_block_is_found_inside_another():
    spans = scan("[device]\n# of B\n[device.B]\nx = 1\n# tail\n\n[device.C]\n")
    block = block_of(spans, ("device", "B"))
    assert spans.text[block.span.start : block.span.end] == "# of B\n[device.B]\nx = 1\n# tail\n"
    assert block_of(spans, ("device", "D")) is None


def test_a_new_file_is_made_and_never_written_over(tmp_path):
    path = tmp_path / "new.toml"
    files.create(path, "é\n")
    assert path.read_bytes() == "é\n".encode()
    with pytest.raises(ProblemsFound, match="already"):
        files.create(path, "other")
    assert path.read_bytes() == "é\n".encode()
    assert os.listdir(tmp_path) == ["new.toml"]


@pytest.mark.parametrize(
    ("name", "says"), [("no/new.toml", "folder is not there"), ("a\0b", "NUL"), ("x" * 300, "too long")]
)
def test_what_can_not_be_made(tmp_path, name, says):
    with pytest.raises(ProblemsFound, match=says):
        files.create(f"{tmp_path}/{name}", "x")
    assert os.listdir(tmp_path) == []


def test_half_a_pair_leaves_no_file(tmp_path):
    with pytest.raises(ProblemsFound, match="half of a character pair"):
        files.create(tmp_path / "x.toml", "\ud800")
    assert os.listdir(tmp_path) == []


def test_a_full_disk_leaves_no_file(tmp_path, monkeypatch):
    def full(handle, data):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "write", full)
    with pytest.raises(ProblemsFound, match="disk is full"):
        files.create(tmp_path / "x.toml", "text")
    monkeypatch.undo()
    assert os.listdir(tmp_path) == []
