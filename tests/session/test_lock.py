"""The lock beside a file: one holder, told of; left-behind ones taken over, by one only; no link followed."""

import json
import os
import stat
import subprocess
import sys
import threading
from dataclasses import replace

import pytest

from polebook.session import instance, lock
from polebook.session.lock import Lock


@pytest.fixture
def path(tmp_path):
    path = tmp_path / "chain.toml"
    path.write_text("")
    return path


def beside(path):
    return path.parent / f".{path.name}.polebook"


def left_behind(path, **other):
    """A lock whose holder's process has gone, or as `other` says."""
    done = subprocess.Popen([sys.executable, "-c", ""])
    done.wait()
    content = replace(instance.this(), pid=done.pid, start="1").content() | {"flock": True} | other
    beside(path).write_text(json.dumps(content))
    return content


def test_it_says_who_has_it_and_goes_with_its_holder(path):
    first = Lock(str(path))
    assert first.hold() is None and first.ours
    content = json.loads(beside(path).read_text())
    assert (content["pid"], content["host"]) == (os.getpid(), os.uname().nodename)
    assert stat.S_IMODE(beside(path).stat().st_mode) & 0o400
    second = Lock(str(path))
    holder = second.hold()
    assert not second.ours and holder.who.pid == os.getpid()
    since = instance.clock(content["since"])
    assert holder.words() == f"held by pid {os.getpid()} on {os.uname().nodename} since {since}"
    second.release()
    assert beside(path).exists() and first.hold() is None
    first.release()
    assert not beside(path).exists()


def test_it_is_taken_once_its_holder_has_left(path):
    first, second = Lock(str(path)), Lock(str(path))
    first.hold()
    assert second.hold() is not None
    first.release()
    assert second.hold() is None and second.ours


def test_a_link_to_the_file_has_the_same_lock(path):
    (path.parent / "other.toml").symlink_to(path)
    first, second = Lock(str(path)), Lock(str(path.parent / "other.toml"))
    assert first.hold() is None
    assert second.hold() is not None


def test_one_that_was_left_behind_is_taken_over(path):
    left_behind(path)
    ours = Lock(str(path))
    assert ours.hold() is None and ours.ours
    assert json.loads(beside(path).read_text())["pid"] == os.getpid()


@pytest.mark.parametrize("other", [{"boot": "another", "pid": 1}, {"start": "1", "pid": os.getpid()}])
def test_so_is_one_of_before_the_machine_started_and_of_another_process_with_its_number(path, other):
    left_behind(path, **other, flock=False)
    assert Lock(str(path)).hold() is None


def test_where_the_system_s_lock_reached_it_tells_although_the_number_is_in_use_again(path):
    left_behind(path, pid=os.getpid(), start="")
    assert Lock(str(path)).hold() is None
    beside(path).unlink()
    left_behind(path, pid=os.getpid(), start="", flock=False)
    assert Lock(str(path)).hold() is not None


def test_what_the_system_says_counts_more_than_what_stands_in_it(path):
    first = Lock(str(path))
    first.hold()
    left_behind(path)  # in the same file, which its holder has open
    assert Lock(str(path)).hold() is not None
    first.release()


def test_one_that_another_takes_over_meanwhile_is_that_one_s(path, monkeypatch):
    left_behind(path)
    other, ours = Lock(str(path)), Lock(str(path))
    read = lock._read

    def late(handle):
        found = read(handle)
        monkeypatch.setattr(lock, "_read", read)
        beside(path).unlink()
        assert other.hold() is None
        return found

    monkeypatch.setattr(lock, "_read", late)
    assert ours.hold() is not None
    assert other.hold() is None and other.ours and not ours.ours


def test_of_another_host_it_can_not_be_told(path):
    left_behind(path, host="far\x1b[31maway", boot="another")
    holder = Lock(str(path)).hold()
    assert "far\\x1b[31maway" in holder.words()
    assert "if that one has gone, delete .chain.toml.polebook" in holder.words()
    assert beside(path).exists()


def test_of_many_that_take_one_over_one_has_it(path):
    for _ in range(20):
        beside(path).unlink(missing_ok=True)
        left_behind(path)
        locks = [Lock(str(path)) for _ in range(6)]
        ready = threading.Barrier(len(locks))

        def take(one, ready=ready):
            ready.wait()
            one.hold()

        threads = [threading.Thread(target=take, args=(one,)) for one in locks]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        for one in locks:  # whoever was told of one that was just being taken over looks again
            one.hold()
        assert sum(one.ours for one in locks) == 1
        for one in locks:
            one.release()


@pytest.mark.parametrize("text", ["", "{", "[]", '{"pid": "1"}', '{"pid": 0, "since": 1}', "[" * 5000, "\xff" * 9000])
def test_a_lock_that_says_nothing_is_young_or_left_behind(path, text):
    beside(path).write_text(text)
    holder = Lock(str(path)).hold()
    assert holder.who is None and "does not say who holds it" in holder.words()
    os.utime(beside(path), (1e9, 1e9))
    assert Lock(str(path)).hold() is None


def test_a_link_in_its_place_is_not_followed(path, tmp_path):
    theirs = tmp_path / "theirs"
    beside(path).symlink_to(theirs)
    assert "does not say" in Lock(str(path)).hold().words()
    assert not theirs.exists()
    theirs.write_text("")
    os.utime(theirs, (1e9, 1e9))
    assert Lock(str(path)).hold() is not None
    assert theirs.read_text() == ""


def test_neither_is_a_folder_or_a_pipe(path):
    beside(path).mkdir()
    assert Lock(str(path)).hold() is not None
    beside(path).rmdir()
    os.mkfifo(beside(path))
    assert Lock(str(path)).hold() is not None


def test_where_none_can_be_made_there_is_none(path, monkeypatch):
    opened = os.open

    def shut(name, flags, *more, **named):
        if flags & os.O_CREAT:
            raise PermissionError(13, "Permission denied")
        return opened(name, flags, *more, **named)

    monkeypatch.setattr(os, "open", shut)
    ours = Lock(str(path))
    assert ours.hold() is None and not ours.ours
    ours.release()
    monkeypatch.undo()
    assert Lock(str(path.parent / "no" / "chain.toml")).hold() is None
    assert Lock(str(path.parent / ("n" * 250))).hold() is None


def test_one_that_somebody_deletes_is_made_again_and_another_s_is_left(path):
    first, second = Lock(str(path)), Lock(str(path))
    first.hold()
    beside(path).unlink()
    assert first.hold() is None and beside(path).exists()
    beside(path).unlink()
    assert second.hold() is None
    assert first.hold() is not None and not first.ours
    first.release()
    assert beside(path).exists() and second.hold() is None


def test_a_full_disk_leaves_no_lock_without_content(path, monkeypatch):
    def full(handle, data):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(lock.os, "write", full)
    ours = Lock(str(path))
    assert ours.hold() is None and not ours.ours
    assert not beside(path).exists()
