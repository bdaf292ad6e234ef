"""`polebook FILE`: the ledger where no terminal is, and what the words on the command line choose."""

import pytest

from polebook.cli import app
from tests.cli.helpers import LISTENER, program


def test_without_a_terminal_a_file_alone_prints_its_ledger():
    alone, shown = program(LISTENER), program("show", LISTENER)
    assert alone.returncode == 0
    assert alone.stdout == shown.stdout
    assert "Wire-break listener" in alone.stdout.decode()


def test_plain_is_ascii_without_a_terminal_too():
    done = program(LISTENER, "--plain", PYTHONIOENCODING="utf-8")
    before = program("--plain", LISTENER, PYTHONIOENCODING="utf-8")
    assert (before.returncode, before.stdout) == (done.returncode, done.stdout)
    assert done.returncode == 0
    assert done.stdout.isascii()


@pytest.mark.parametrize(("words", "asked"), [
    (["a.toml"], True), (["a.toml", "--plain"], True), (["--plain", "a.toml"], True),
    (["a.toml", "--page", "nodes"], False), (["a.toml", "--json"], False), ([], False)])
def test_the_app_is_asked_for_by_a_file_alone(words, asked):
    assert app.asked_for(words) is asked


def test_a_stream_that_is_no_terminal_is_not_usable():
    assert app.usable({"TERM": "xterm"}) is False


def test_a_file_that_can_not_be_read_is_told_as_ever(tmp_path):
    (tmp_path / "bad.toml").write_bytes(b"\xff\xfe\x00")
    done = program(tmp_path / "bad.toml")
    assert done.returncode == 2
    assert b"not UTF-8" in done.stderr
