"""Looks at the file on the disk: what is told of it, and that a half-written text is not believed."""

import os

import pytest

from polebook.session.watch import at_once, look
from polebook.text import files


@pytest.fixture
def path(tmp_path):
    path = tmp_path / "chain.toml"
    path.write_text("one\n")
    return path


def seen(path, then=lambda number: None, known=True):
    """A look by somebody who knows the file as it is now, after `then` has been done to it."""
    before = files.identity(path) if known else None
    then(-1)
    calls = []

    def pause(seconds):
        calls.append(seconds)
        then(len(calls))

    return look(str(path), before, before, pause), calls


def test_nothing_new_is_nothing(path):
    assert seen(path) == (None, [])


def test_a_change_is_read_once_it_has_settled(path):
    texts = {-1: "", 1: "two", 2: "two\nthree\n"}
    found, calls = seen(path, lambda number: path.write_text(texts[number]) if number in texts else None)
    assert found.text == "two\nthree\n" and found.identity == files.identity(path)
    assert len(calls) == 3


def test_one_that_never_settles_is_left_for_the_next_look(path):
    found, calls = seen(path, lambda number: path.write_text("x" * (number + 2)))
    assert found is None and len(calls) == 20


def test_a_file_that_is_away_for_a_moment_is_not_gone(path):
    steps = {-1: path.unlink, 1: lambda: path.write_text("two\n")}
    found, _ = seen(path, lambda number: steps.get(number, lambda: None)())
    assert found.text == "two\n"


def test_a_file_that_has_gone(path):
    found, _ = seen(path, lambda number: path.unlink(missing_ok=True))
    assert (found.identity, found.text, found.problem.what) == (None, None, "the file has gone from the disk")


def test_a_file_that_came(path):
    os.unlink(path)
    found, _ = seen(path, lambda number: path.write_text("new\n") if number == -1 else None)
    assert found.text == "new\n" and found.known is None


@pytest.mark.parametrize(("spoil", "what"), [
    (lambda path: path.write_bytes(b"\xff\xfe"), "the file is not UTF-8 text"),
    (lambda path: path.write_bytes(b"x" * 600_000), "the file has 600000 bytes, and at most 524288 (512 KiB) are read"),
    (lambda path: (path.unlink(), path.mkdir()), "this is a folder"),
    (lambda path: (path.unlink(), os.mkfifo(path)), "this is a pipe or a device"),
])
def test_what_can_not_be_read_is_told(path, spoil, what):
    before = files.identity(path)
    spoil(path)
    found = look(str(path), before, before, lambda seconds: None)
    assert (found.text, found.problem.what) == (None, what)
    assert at_once(str(path), before).problem.what == what


def test_a_folder_that_can_not_be_looked_into_tells_nothing(path, monkeypatch):
    def shut(name, **more):
        raise PermissionError(13, "Permission denied")

    before = files.identity(path)
    monkeypatch.setattr(os, "stat", shut)
    assert look(str(path), before, before) is None
    with pytest.raises(PermissionError):
        at_once(str(path), before)


def test_what_was_seen_is_not_told_again(path):
    before = files.identity(path)
    path.write_text("two\n")
    first = look(str(path), before, before, lambda seconds: None)
    assert look(str(path), before, first.identity, lambda seconds: None) is None
    assert at_once(str(path), first.identity) is None
