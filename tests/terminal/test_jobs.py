"""A shell with job control and the app as its job: to sleep and back, in the background, ended while it sleeps."""

import os
import shlex
import signal
import time

import pytest

from tests.terminal.probe import BYTES, Terminal, app
from tests.tui.desk import Desk, copied

PROMPT = "ready#"


class Shell:
    """A shell in a terminal, the app as its only job, and the desk that shows what the app must show."""

    def __init__(self, terminal, path):
        self.terminal, self.desk = terminal, Desk(path, seconds=0.01)
        self.line = shlex.join(app(path))
        terminal.until(PROMPT)

    def says(self, line, answer=PROMPT):
        """What the screen has once the shell has answered."""
        self.terminal.write(line.encode() + b"\n")
        return self.terminal.until(answer)

    def opens(self):
        self.says(self.line, "? help")
        return self.shows()

    def shows(self, columns=80, rows=24):
        self.terminal.shows(self.desk.screen(columns, rows))
        return self

    def press(self, *names):
        self.terminal.write("".join(BYTES.get(name, name) for name in names).encode())
        self.desk.press(*names)
        return self.shows()

    def sleeps(self):
        self.terminal.write(b"\x1a")
        self.desk.press("ctrl+z")
        self.terminal.until("Stopped")
        return self

    def leaves(self, *names):
        """Until the shell has the terminal: what is typed before is the app's, and goes with it."""
        self.terminal.write("".join(BYTES.get(name, name) for name in names).encode())
        self.terminal.when(lambda text: text.rstrip().endswith(PROMPT), "the shell")

    def job(self):
        """The app's process."""
        children = f"/proc/{self.terminal.process.pid}/task/{self.terminal.process.pid}/children"
        with open(children, encoding="ascii") as file:
            return int(file.read().split()[-1])


@pytest.fixture
def shell(tmp_path):
    words = ["bash", "--norc", "--noprofile", "-i"]
    with Terminal(words, PS1=PROMPT, HISTFILE="") as terminal:
        yield Shell(terminal, copied(tmp_path))


def test_to_the_shell_and_back_at_another_size(shell):
    """The shell has its terminal as it left it; what it wrote is gone when the app is back, at the size of now."""
    shell.opens().press("right", "+")
    log = shell.terminal.log
    asleep = len(log)
    shell.sleeps()
    assert log[asleep:].index(b"\x1b[<u") < log[asleep:].index(b"\x1b[?1049l") < log[asleep:].index(b"\x1b[?25h")
    assert b"\x1b[?2004l" in log[asleep:]
    assert "polebook" in shell.terminal.screen() and "EMF" not in shell.terminal.screen()
    said = shell.says("stty -a | tr ' ;' '\\n\\n' | grep -x -e '-*icanon' -e '-*echo'; echo o''k", "\nok")
    assert "\nicanon\necho\n" in said
    shell.terminal.resize(100, 30)
    back = len(log)
    shell.says("fg", "? help")
    shell.shows(100, 30)
    assert 1 <= log[back:].count(b"\x1b[28;1H") <= 2  # painted once, for the size and the return twice at most
    shell.terminal.resize(80, 24)
    shell.shows().press("left").press("u")


def test_in_the_background_it_sleeps_on_and_can_be_ended(shell):
    shell.opens().sleeps()
    said = shell.says("bg; sleep 0.4; jobs; echo o''k", "\nok")
    assert said.count("Stopped") >= 2
    assert "EMF" not in said
    said = shell.says("kill %1; sleep 0.6; jobs; echo d''one", "\ndone")
    assert "Exit 143" in said


def test_begun_in_the_background_it_waits_for_the_terminal(shell):
    shell.says(f"{shell.line} & while jobs | grep -q Running; do sleep 0.1; done; jobs; echo o''k", "\nok")
    assert "Stopped" in shell.terminal.screen()
    shell.says("fg", "? help")
    shell.shows().press("right").press("+", "u")
    shell.leaves("q")


def test_stopped_by_another_hand_and_woken(shell):
    """The shell takes the terminal as it is: nothing of the app has ended, and its keys are read once."""
    shell.opens()
    job = shell.job()
    os.kill(job, signal.SIGSTOP)
    shell.terminal.until("Stopped")
    shell.says("stty sane; echo o''k", "ok")
    shell.terminal.forget()
    shell.says("fg", "? help")
    shell.shows().press(*["right"] * 3).press(*"f", *"Q1.rc", "enter").press("3", "k", "9")
    os.kill(job, signal.SIGCONT)  # once more, without having been stopped
    time.sleep(0.1)
    shell.press("enter", "left")
    shell.leaves("q", "down", "enter")
    shell.says("stty -a | tr ' ;' '\\n\\n' | grep -x -e '-*icanon'; echo d''one", "\ndone")
    assert "\nicanon\n" in shell.terminal.screen()
