"""Files read and saved."""

from __future__ import annotations

import errno
import os
import resource
import stat
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path

import pytest

from polebook.problem import Problem, ProblemsFound, render
from polebook.text import files

ROOT = hasattr(os, "geteuid") and os.geteuid() == 0


def refused(act: object, *arguments: object) -> Problem:
    assert callable(act)
    with pytest.raises(ProblemsFound) as caught:
        act(*arguments)
    assert len(caught.value.problems) == 1
    return caught.value.problems[0]


def test_a_file_is_read_to_the_byte(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_bytes('title = "Ω"\r\nx = 1'.encode())
    path.chmod(0o640)
    read = files.read(str(path))
    status = path.stat()
    assert (read.path, read.text, read.newline) == (str(path), 'title = "Ω"\r\nx = 1', "\r\n")
    assert read.mode == 0o640 and not read.read_only
    assert read.identity == files.Identity(status.st_dev, status.st_ino, status.st_size, status.st_mtime_ns)
    path.write_bytes(b"")
    assert files.read(path).newline == "\n" and files.read(path).identity != read.identity


def test_what_is_no_readable_file_is_named(tmp_path: Path) -> None:
    missing = refused(files.read, tmp_path / "none.toml")
    assert (missing.what, missing.why) == ("the file can't be read", "there is no such file")
    assert render(missing).startswith(f"{tmp_path / 'none.toml'}: the file can't be read\n    why  there is no such")
    assert refused(files.read, tmp_path).what == "this is a folder"
    (tmp_path / "a").write_text("x")
    assert refused(files.read, tmp_path / "a" / "b").why == "a part of its path is a file, not a folder"
    assert refused(files.read, "a\0b").why == "its name holds a NUL character"
    assert refused(files.read, tmp_path / ("n" * 300)).why == "the name is too long"
    (tmp_path / "loop").symlink_to("loop")
    assert refused(files.read, tmp_path / "loop").why == "its symbolic links lead in a circle"


def test_pipes_and_devices_are_refused_at_once(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe")
    for path in (tmp_path / "pipe", Path("/dev/zero"), Path("/dev/null")):
        assert refused(files.read, path).what == "this is a pipe or a device"
        assert refused(files.save, path, "x").what == "this is a pipe or a device"
    assert stat.S_ISFIFO((tmp_path / "pipe").stat().st_mode)


def test_the_largest_file_is_512_kib(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_bytes(b"#" * 512 * 1024)
    assert len(files.read(path).text) == 512 * 1024
    path.write_bytes(b"#" * (512 * 1024 + 3))
    assert refused(files.read, path).what.startswith("the file has 524291 bytes")


def test_the_place_of_what_is_not_utf8_is_told(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_bytes('a = 1\nb = "Ω'.encode() + b'\xe9"\n')
    with pytest.raises(ProblemsFound) as caught:
        files.read(path)
    problem = caught.value.problems[0]
    assert problem.what == "the file is not UTF-8 text" and "byte 14 of the file, 0xe9" in problem.why
    assert problem.place is not None and (problem.place.line, problem.place.column) == (2, 7)
    assert str(caught.value).split("\n")[2].index("^") == len("  2 | ") + 6
    path.write_bytes("a = 1".encode("utf-16"))
    assert "UTF-16" in refused(files.read, path).why


def test_a_save_replaces_the_whole_file(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_text("old")
    path.chmod(0o604)
    before = path.stat().st_ino
    files.save(path, "new Ω\r\n")
    assert path.read_bytes() == "new Ω\r\n".encode()
    assert stat.S_IMODE(path.stat().st_mode) == 0o604 and path.stat().st_ino != before
    assert [entry.name for entry in tmp_path.iterdir()] == ["a.toml"]


def test_a_text_in_pieces_is_saved_whole_or_not_at_all(tmp_path: Path) -> None:
    path = tmp_path / "a.csv"
    files.save(path, (f"{number}\n" for number in range(3)))
    assert path.read_text() == "0\n1\n2\n"

    def broken() -> Iterator[str]:
        yield "new\n"
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        files.save(path, broken())
    assert path.read_text() == "0\n1\n2\n" and [entry.name for entry in tmp_path.iterdir()] == ["a.csv"]


def test_a_new_file_gets_the_usual_mode(tmp_path: Path) -> None:
    (tmp_path / "usual").write_text("")
    files.save(tmp_path / "a.toml", "x")
    assert (tmp_path / "a.toml").stat().st_mode == (tmp_path / "usual").stat().st_mode


def test_the_target_of_a_link_is_replaced_and_the_link_stays(tmp_path: Path) -> None:
    (tmp_path / "sub").mkdir()
    target = tmp_path / "sub" / "real.toml"
    target.write_text("old")
    (tmp_path / "link.toml").symlink_to("sub/real.toml")
    files.save(tmp_path / "link.toml", "new")
    assert (tmp_path / "link.toml").is_symlink() and target.read_text() == "new"
    assert [entry.name for entry in target.parent.iterdir()] == ["real.toml"]


def test_a_save_that_fails_halfway_loses_nothing(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_text("old")
    soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
    resource.setrlimit(resource.RLIMIT_FSIZE, (1000, hard))
    try:
        problem = refused(files.save, path, "x" * 5000)
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))
    assert problem.what == "the file can't be saved" and "larger than is allowed" in problem.why
    assert path.read_text() == "old" and [entry.name for entry in tmp_path.iterdir()] == ["a.toml"]


@pytest.mark.parametrize(
    ("code", "why"), [("ENOSPC", "the disk is full"), ("EROFS", "it is on a read-only file system")]
)
def test_a_full_or_locked_disk_is_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, code: str, why: str) -> None:
    path = tmp_path / "a.toml"
    path.write_text("old")

    def fail(handle: int) -> None:
        raise OSError(getattr(errno, code), "no")

    monkeypatch.setattr(os, "fsync", fail)
    assert refused(files.save, path, "new").why == why
    assert path.read_text() == "old" and [entry.name for entry in tmp_path.iterdir()] == ["a.toml"]


def test_text_that_utf8_cannot_hold_is_not_saved(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_text("old")
    assert "half of a character pair" in refused(files.save, path, "a\ud800").why
    assert path.read_text() == "old" and [entry.name for entry in tmp_path.iterdir()] == ["a.toml"]


def test_a_missing_folder_is_named(tmp_path: Path) -> None:
    assert refused(files.save, tmp_path / "none" / "a.toml", "x").why == "its folder is not there"


AS_ANOTHER_USER = """
import os, sys
sys.path[:0] = {path!r}
from polebook.problem import ProblemsFound
from polebook.text import files
if {root}:
    os.setgroups([])
    os.setgid(65534)
    os.setuid(65534)
for act in {acts}:
    try:
        print(act())
    except ProblemsFound as error:
        print(error.problems[0].why)
"""


def answers(acts: str) -> list[str]:
    """What `acts` say when they are run by a user without privileges."""
    source = AS_ANOTHER_USER.format(path=sys.path, root=ROOT, acts=acts)
    done = subprocess.run([sys.executable, "-c", source], capture_output=True, text=True, check=True, timeout=60)
    return done.stdout.splitlines()


@pytest.fixture
def folder() -> Iterator[Path]:
    """A folder that every user may enter, as those that pytest makes are not."""
    with tempfile.TemporaryDirectory() as name:
        os.chmod(name, 0o755)
        yield Path(name)


def test_permissions_are_kept_to_and_explained(folder: Path) -> None:
    free, locked = folder / "free", folder / "locked"
    for place in (free, locked):
        place.mkdir()
        for name, mode in (("readable", 0o444), ("secret", 0o000), ("open", 0o666)):
            (place / name).write_text("old")
            (place / name).chmod(mode)
    free.chmod(0o777)
    locked.chmod(0o555)
    denied = "its permissions, or those of its folder, do not allow it"
    acts = [
        f"files.read({str(free / 'secret')!r})",
        f"files.read({str(free / 'readable')!r}).read_only",
        f"files.save({str(free / 'readable')!r}, 'new')",
        f"files.save({str(locked / 'open')!r}, 'new')",
        f"files.save({str(free / 'open')!r}, 'new')",
    ]
    told = answers(f"[{', '.join(f'lambda: {act}' for act in acts)}]")
    locked.chmod(0o755)
    assert told == [denied, "True", denied, denied, "None"]
    assert (free / "open").read_text() == "new" and (locked / "open").read_text() == "old"
    assert stat.S_IMODE((free / "open").stat().st_mode) == 0o666
    assert sorted(os.listdir(free)) == sorted(os.listdir(locked)) == ["open", "readable", "secret"]
