"""Recovery files: what is kept comes back to the character, whose it is, and what becomes of damaged ones."""

import json
import os
import stat
import subprocess
import sys
from dataclasses import replace

import pytest

from polebook.session import instance, places, recovery
from polebook.session.keeper import NOTHING, Keeper, Work
from tests.helpers import DEMOS

TEXT = "format = 1\n# Ω, \u202e, a lone \udcff, \r\n\ttab and no end of line"


@pytest.fixture
def path(tmp_path, monkeypatch):
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    path = tmp_path / "chain.toml"
    path.write_text("format = 1\n")
    return str(path)


def files_of(tmp_path):
    return sorted((tmp_path / "state" / "polebook").glob("*"))


def kept(path, text, holds=True, **more):
    """A keeper that has kept a text."""
    keeper = Keeper(path, lambda: holds)
    keeper.want(Work(text, "format = 1\n", **more))
    assert keeper.act() == ""
    return keeper


def of_another(path, text, monkeypatch, **who):
    """Work that another process kept."""
    other = replace(instance.this(), **who)
    with monkeypatch.context() as patch:
        patch.setattr(instance, "this", lambda: other)
        return kept(path, text)


@pytest.fixture
def gone():
    done = subprocess.Popen([sys.executable, "-c", ""])
    done.wait()
    return {"pid": done.pid, "start": "1"}


def test_what_was_kept_comes_back_to_the_character(path, tmp_path, monkeypatch, gone):
    keeper = of_another(path, TEXT, monkeypatch, **gone)
    assert os.path.basename(keeper.file) == recovery.digest(os.path.realpath(path)) + ".kept"
    assert stat.S_IMODE(os.stat(keeper.file).st_mode) == 0o600
    (one,), told = recovery.found(path, "format = 1\n")
    assert (one.text, one.base, told) == (TEXT, recovery.digest("format = 1\n"), ())
    assert one.who.pid == gone["pid"]
    assert abs(one.when - os.stat(keeper.file).st_mtime) < 5


def test_a_link_to_the_file_finds_it(path, tmp_path, monkeypatch, gone):
    of_another(path, TEXT, monkeypatch, **gone)
    (tmp_path / "link.toml").symlink_to(path)
    assert len(recovery.found(str(tmp_path / "link.toml"), None)[0]) == 1
    assert recovery.found(str(tmp_path / "else.toml"), None) == ((), ())


def test_it_is_a_chain_file_itself(path, monkeypatch, gone):
    from polebook.session.state import open_file

    text = (DEMOS / "six-stage.toml").read_text(encoding="utf-8")
    session = open_file(of_another(path, text, monkeypatch, **gone).file)
    assert session.ledger is not None and not session.problems


def test_work_of_a_polebook_that_runs_is_its_own(path, monkeypatch):
    kept(path, TEXT)
    assert recovery.found(path, None) == ((), ())
    of_another(path, TEXT, monkeypatch, host="elsewhere")
    assert len(recovery.found(path, None)[0]) == 1


def test_work_that_the_file_has_is_no_work(path, tmp_path, monkeypatch, gone):
    of_another(path, "format = 1\n", monkeypatch, **gone)
    assert recovery.found(path, "format = 1\n") == ((), ())
    assert files_of(tmp_path) == []


def test_only_who_holds_the_lock_has_the_plain_name(path, tmp_path):
    guest = kept(path, "b", holds=False)
    holder = kept(path, "a")
    assert os.path.basename(holder.file) == recovery.digest(os.path.realpath(path)) + ".kept"
    third = kept(path, "c")
    assert len({holder.file, guest.file, third.file}) == 3
    for keeper, text in ((holder, "a"), (guest, "b"), (third, "c")):
        assert recovery.read(keeper.file, os.path.realpath(path)).text == text


def test_the_newest_comes_first(path, monkeypatch, gone):
    for number in range(3):
        with monkeypatch.context() as patch:
            patch.setattr(recovery.time, "time", lambda number=number: 1e9 + number)
            of_another(path, f"text {number}", monkeypatch, **gone)
    assert [one.text for one in recovery.found(path, None)[0]] == ["text 2", "text 1", "text 0"]


def test_nothing_to_keep_takes_the_file_away(path, tmp_path):
    keeper = kept(path, "a")
    keeper.want(NOTHING)
    assert keeper.act() == "" and files_of(tmp_path) == []
    keeper.want(Work("b"))
    assert keeper.act() == "" and len(files_of(tmp_path)) == 1


def test_nothing_is_written_twice(path, monkeypatch):
    keeper = kept(path, "a")
    with monkeypatch.context() as patch:
        patch.setattr(places, "put", lambda *more: pytest.fail("written again"))
        keeper.want(Work("a", "format = 1\n"))
        assert keeper.act() == ""
    os.unlink(keeper.file)
    assert keeper.act() == "" and os.path.exists(keeper.file)


def test_work_that_was_taken_goes_once_it_is_kept_again(path, tmp_path, monkeypatch, gone):
    of_another(path, "old", monkeypatch, **gone)
    of_another(path, "older", monkeypatch, **gone)
    found = recovery.found(path, None)[0]
    keeper = kept(path, "old and more", taken=found)
    assert files_of(tmp_path) == [tmp_path / "state" / "polebook" / os.path.basename(keeper.file)]
    assert os.path.basename(keeper.file).startswith(recovery.digest(os.path.realpath(path)) + ".")


def test_work_that_nobody_has_decided_on_stays(path, tmp_path, monkeypatch, gone):
    of_another(path, "old", monkeypatch, **gone)
    keeper = kept(path, "new")
    keeper.want(NOTHING)
    keeper.act()
    assert [one.text for one in recovery.found(path, None)[0]] == ["old"]


def test_dropping_spares_a_file_that_was_written_again(path, tmp_path, monkeypatch, gone):
    keeper = of_another(path, "old", monkeypatch, **gone)
    (one,), _ = recovery.found(path, None)
    keeper.want(Work("new"))
    keeper.act()
    recovery.drop(one)
    assert len(files_of(tmp_path)) == 1
    (one,), _ = recovery.found(path, None)
    recovery.drop(one)
    assert files_of(tmp_path) == []


def spoilt_head(data, **changed):
    first, head, rest = data.split(b"\n", 2)
    return b"\n".join((first, b"# " + json.dumps(json.loads(head[2:]) | changed).encode(), rest))


@pytest.mark.parametrize("spoil", [
    lambda data: b"",
    lambda data: b"\0" * len(data),
    lambda data: data[:-1],
    lambda data: data + b"x",
    lambda data: data.replace(b"format", b"fromat"),
    lambda data: data.split(b"\n", 1)[1],
    lambda data: b"# a\n# " + b"[" * 50000 + b"\n",
    lambda data: b"# a\n# 7\n",
    lambda data: spoilt_head(data, pid=-3),
    lambda data: spoilt_head(data, when="now"),
    lambda data: spoilt_head(data, when=1e300),
    lambda data: spoilt_head(data, base=None),
    lambda data: spoilt_head(data, path="/etc/passwd"),
    lambda data: data + b"x" * (2**21 + 70000),
])
def test_a_damaged_file_is_told_of_once_and_set_aside(path, tmp_path, monkeypatch, gone, spoil):
    file = of_another(path, TEXT.replace("\udcff", ""), monkeypatch, **gone).file
    with open(file, "rb") as opened:
        data = opened.read()
    with open(file, "wb") as opened:
        opened.write(spoil(data))
    found, (told,) = recovery.found(path, None)
    assert found == () and "is damaged (" in told
    (aside,) = files_of(tmp_path)
    assert aside.suffix == ".damaged" and str(aside) in told
    assert aside.read_bytes() == spoil(data)
    assert recovery.found(path, None) == ((), ())


def test_a_link_in_its_place_is_not_followed(path, tmp_path, monkeypatch, gone):
    file = of_another(path, TEXT, monkeypatch, **gone).file
    os.rename(file, tmp_path / "elsewhere")
    os.symlink(tmp_path / "elsewhere", file)
    assert "a link or no file" in recovery.found(path, None)[1][0]


def test_a_folder_that_is_not_ours_is_neither_read_nor_written(path, tmp_path, monkeypatch, gone):
    of_another(path, TEXT, monkeypatch, **gone)
    uid = os.geteuid()
    monkeypatch.setattr(os, "geteuid", lambda: uid + 1)
    assert recovery.found(path, None) == ((), ())
    keeper = Keeper(path, lambda: True)
    keeper.want(Work("a"))
    assert keeper.act() == "its folder is another user's"


def test_what_can_not_be_kept_is_tried_again(path, tmp_path):
    (tmp_path / "state").write_text("")
    keeper = Keeper(path, lambda: True)
    keeper.want(Work("a"))
    assert keeper.act() == keeper.act() == "a file is in its folder's place"
    (tmp_path / "state").unlink()
    assert keeper.act() == ""
    assert len(files_of(tmp_path)) == 1


def test_what_a_kill_left_half_written_goes_in_time(path, tmp_path, monkeypatch, gone):
    file = of_another(path, TEXT, monkeypatch, **gone).file
    half = tmp_path / "state" / "polebook" / f".{os.path.basename(file)}.abc.new"
    half.write_text("half")
    recovery.found(path, None)
    assert half.exists()
    os.utime(half, (1e9, 1e9))
    recovery.found(path, None)
    assert not half.exists() and os.path.exists(file)


def test_a_long_path_comes_back_too(tmp_path, monkeypatch, gone):
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    path = str(tmp_path / "/".join(["\udcff" * 200] * 15) / "chain.toml")
    of_another(path, "text", monkeypatch, **gone)
    assert [one.text for one in recovery.found(path, None)[0]] == ["text"]
