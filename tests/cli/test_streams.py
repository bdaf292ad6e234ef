"""What reaches the terminal, the pipe and the disk: colour, encodings, readers that leave, Ctrl-C."""

import fcntl
import io
import os
import pty
import select
import signal
import subprocess
import time

import pytest

from polebook.cli import kinds
from polebook.cli import main as entry
from polebook.cli.out import OutputLost, standard
from tests.cli.helpers import LISTENER, command, environment, program, run

SGR = b"\x1b["


def in_terminal(*args, **env):
    """Exit code and output of the program in a pseudo-terminal."""
    ours, theirs = pty.openpty()
    process = subprocess.Popen(command(*args), stdin=theirs, stdout=theirs, stderr=theirs, env=environment(**env))
    os.close(theirs)
    seen = b""
    until = time.monotonic() + 30
    while time.monotonic() < until:
        if not select.select([ours], [], [], 0.1)[0]:
            continue
        try:
            part = os.read(ours, 65536)
        except OSError:  # Linux reports the closed far side so
            break
        if not part:
            break
        seen += part
    os.close(ours)
    return process.wait(timeout=30), seen


def test_colour_on_a_terminal():
    code, seen = in_terminal("audit", LISTENER, TERM="xterm")
    assert code == 1
    assert SGR + b"31mmissed" in seen


@pytest.mark.parametrize("env", [{"NO_COLOR": "1", "TERM": "xterm"}, {"TERM": "dumb"}])
def test_no_colour_on_a_terminal_that_does_not_want_it(env):
    code, seen = in_terminal("audit", LISTENER, **env)
    assert code == 1
    assert b"missed" in seen
    assert b"\x1b" not in seen


def test_an_empty_no_color_is_none():
    assert SGR in in_terminal("audit", LISTENER, TERM="xterm", NO_COLOR="")[1]


def test_no_colour_in_a_pipe():
    done = program("show", LISTENER, TERM="xterm")
    assert done.returncode == 0
    assert b"\x1b" not in done.stdout


def test_ascii_where_the_encoding_is_ascii():
    done = program("show", LISTENER, "--page", "all", PYTHONIOENCODING="ascii")
    assert (done.returncode, done.stderr) == (0, b"")
    assert done.stdout.isascii()
    assert b"ohm" in done.stdout
    assert b"\\u" not in done.stdout


def test_a_message_in_ascii(tmp_path):
    faulty = tmp_path / "größe.toml"
    faulty.write_text("format = 1\ntitle = 'Ω' # é\nx = 1\n", encoding="utf-8")
    done = program("show", faulty, PYTHONIOENCODING="ascii")
    assert (done.returncode, done.stdout) == (2, b"")
    assert done.stderr.isascii()
    assert b"gr\\xf6\\xdfe.toml" in done.stderr


def test_a_file_name_that_is_no_text(tmp_path):
    name = os.fsencode(tmp_path) + b"/\xff\x1b.toml"
    with open(name, "wb") as file:
        file.write(LISTENER.read_bytes())
    done = run([*map(os.fsencode, command("show")), name])
    assert (done.returncode, done.stderr) == (0, b"")
    assert b"\\udcff\\x1b.toml" in done.stdout
    assert b"\x1b" not in done.stdout


def test_a_reader_that_has_left_is_no_trouble():
    ours, theirs = os.pipe()
    os.close(ours)
    process = run(command("kinds"), stdout=theirs)
    os.close(theirs)
    assert (process.returncode, process.stderr) == (141, b"")


def test_a_full_disk_is_told():
    with open("/dev/full", "wb") as full:
        done = run(command("kinds"), stdout=full)
    assert done.returncode == 2
    assert done.stderr == b"polebook: the output could not be written: No space left on device\n"


def test_a_closed_output_is_no_trouble():
    line = " ".join(command("audit", LISTENER))
    for closed in (">&-", "2>&-", ">&- 2>&-"):
        done = run(["sh", "-c", f"{line} {closed}"])
        assert (done.returncode, done.stderr) == (1, b""), closed


def test_ctrl_c_ends_quietly_with_130():
    ours, theirs = os.pipe()
    fcntl.fcntl(theirs, fcntl.F_SETPIPE_SZ, 4096)  # so that the program waits for its reader
    process = subprocess.Popen(command("kinds"), stdout=theirs, stderr=subprocess.PIPE, env=environment())
    os.close(theirs)
    assert select.select([ours], [], [], 30)[0]
    process.send_signal(signal.SIGINT)
    assert process.wait(timeout=30) == 130
    assert process.stderr.read() == b""
    process.stderr.close()
    os.close(ours)


def test_ctrl_c_in_this_process(monkeypatch, capsys):
    def interrupted(args, out):
        raise KeyboardInterrupt

    monkeypatch.setattr(entry, "load", lambda name: type(kinds.COMMAND)("", lambda parser: None, interrupted))
    assert entry.main(["kinds"]) == 130
    assert capsys.readouterr() == ("", "")


def test_our_own_bugs_are_not_swallowed(monkeypatch):
    def broken(args, out):
        raise ZeroDivisionError

    monkeypatch.setattr(entry, "load", lambda name: type(kinds.COMMAND)("", lambda parser: None, broken))
    with pytest.raises(ZeroDivisionError):
        entry.main(["kinds"])


def test_a_write_that_fails_is_output_lost(monkeypatch):
    class Full(io.StringIO):
        def flush(self):
            raise OSError(28, "No space left on device")

    monkeypatch.setattr("sys.stdout", Full())
    with pytest.raises(OutputLost, match="No space left"):
        standard({}).write("x")
