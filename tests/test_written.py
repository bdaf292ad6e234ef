"""What the program writes, starts and opens, watched by Python's own audit hook: commands, and a session of the app."""

import json
import os
import re
import subprocess
import sys
import time
from pathlib import Path

import pytest

from tests.terminal.probe import Terminal, app
from tests.tui.desk import SIX

ROOT = Path(__file__).parent.parent
MARK = "__import__('os').system('touch pwned')"
# told: what is opened to be written, what changes the disk, sockets, programs, and code that is made of what has MARK
# in it, or that a file of ours makes or loads
HOOK = f"""
import json, os, sys
log = os.open(os.environ["WATCHED"], os.O_WRONLY | os.O_APPEND | os.O_CREAT, 0o600)
writing = os.O_WRONLY | os.O_RDWR | os.O_CREAT | os.O_TRUNC | os.O_APPEND
starts = ("os.", "shutil.", "socket.", "subprocess.", "ctypes.", "pickle.", "marshal.", "urllib.", "http.", "ftplib.",
          "smtplib.", "webbrowser.", "sqlite3.", "pty.")
dull = {{"os.listdir", "os.scandir", "os.walk", "os.fwalk", "os.putenv", "os.unsetenv", "os.getxattr", "os.listxattr"}}

def ours():
    try:
        return {os.sep + "polebook" + os.sep!r} in sys._getframe(2).f_code.co_filename
    except ValueError:
        return False

def hook(event, args):
    if event == "open":
        path, mode, flags = args
        if isinstance(path, int) or not isinstance(flags, int) or not flags & writing:
            return
        args = (os.fsdecode(path), flags)
    elif event in ("compile", "exec", "marshal.loads", "pickle.find_class"):
        text = args[0] if isinstance(args[0], (bytes, str)) else b""
        text = text if isinstance(text, bytes) else text.encode("utf-8", "replace")
        if {MARK.encode()!r} not in text and not ours():
            return
        args = (text[:80].decode("latin-1"),)
    elif event == "socket.__new__":
        args = args[1:]
    elif event in dull or not event.startswith(starts):
        return
    os.write(log, (json.dumps([os.getpid(), event, args], default=repr) + "\\n").encode())

sys.addaudithook(hook)
"""
# what numpy does when it is imported, and asyncio to be woken: a pair of its own, bound to nothing
LIBRARIES = [["ctypes.dlopen", [None]], ["socket.__new__", [1, 1, 0]]]
MAKES = os.O_CREAT | os.O_EXCL


class Watched:
    """A folder with a chain file, and what is done on its account."""

    def __init__(self, folder):
        self.folder = Path(os.path.realpath(folder))
        self.path = self.folder / "chain.toml"
        text = SIX.read_text(encoding="utf-8")
        self.path.write_text(re.sub(r'(?m)^(title|note)(\s*=\s*)"[^"\n]+"', rf'\1\2"{MARK}"', text), encoding="utf-8")
        os.chmod(self.path, 0o640)
        (self.folder / "hook").mkdir()
        (self.folder / "hook" / "sitecustomize.py").write_text(HOOK, encoding="utf-8")
        self.env = {"PYTHONPATH": f"{self.folder / 'hook'}{os.pathsep}{ROOT / 'src'}", "PYTHONDONTWRITEBYTECODE": "1",
                    "WATCHED": str(self.folder / "log"), "XDG_STATE_HOME": str(self.folder / "state")}

    def told(self):
        """(event, arguments) by process in the order of their beginnings; names shortened, what is random as *."""
        found = {}
        for line in (self.folder / "log").read_text(encoding="utf-8").splitlines():
            pid, event, args = json.loads(line)
            args = [self._short(arg) for arg in args]
            of_this = found.setdefault(pid, [])
            if [event, args] not in LIBRARIES:
                of_this.append((event, *args))
        return list(found.values())

    def _short(self, arg):
        if not isinstance(arg, str):
            return arg
        arg = arg.replace(f"{self.folder}{os.sep}", "")
        return re.sub(r"[0-9a-f]{64}", "#", re.sub(r"\.[0-9a-f]{12}\.new$", ".*.new", arg))


@pytest.fixture
def watched(tmp_path):
    found = Watched(tmp_path)
    yield found
    assert not (found.folder / "pwned").exists() and not Path("pwned").exists()


COMMANDS = {
    ("show", "chain.toml", "--page", "all"): (),
    ("show", "chain.toml", "--json"): (),
    ("audit", "chain.toml"): (),
    ("working", "chain.toml", "n1.pole_hz"): (),
    ("sweep", "chain.toml", "Q1.rc", "1k:10k"): (),
    ("parts", "chain.toml"): (),
    ("kinds",): (),
    ("couple", "chain.toml", "--lower", "100"): (),
    ("stages", "chain.toml", "--template", "Q3"): (),
    ("spread", "chain.toml", "--builds", "200"): (),
    ("spread", "chain.toml", "--builds", "200", "--csv", "builds.csv"): ("builds.csv",),
    ("set", "chain.toml", "Q1.rc", "2k4"): ("chain.toml",),
    ("unset", "chain.toml", "Q1.couple"): ("chain.toml",),
    ("start", "new.toml"): ("new.toml",),
    ("post", "chain.toml", "-m", "why"): ("chain.posted.toml",),
    ("audit", "--posted", "chain.toml"): (),
    ("compare", "chain.toml", "new.toml"): (),
    ("compare", "chain.toml", "--rev", "HEAD"): (),
    ("bench", "benched.toml"): (),
    ("draw", "chain.toml", "--what", "levels", "-o", "levels.svg"): ("levels.svg",),
    ("report", "chain.toml", "-o", "review.md"): (
        "review-response.svg", "review-account.svg", "review-pulse.svg", "review-levels.svg", "review.md"),
    ("set", "nowhere.toml", "Q1.rc", "2k4"): (),
    ("show", "; touch pwned"): (),
}
IN_PLACE = {"new.toml", "chain.posted.toml"}  # made where nothing is yet


GIT = {**os.environ, "GIT_AUTHOR_NAME": "a", "GIT_AUTHOR_EMAIL": "a", "GIT_COMMITTER_NAME": "a",
       "GIT_COMMITTER_EMAIL": "a", "GIT_CONFIG_GLOBAL": os.devnull}


def states(folder):
    """What lies below a folder, and when it was last changed."""
    return {path: path.stat().st_mtime_ns for path in folder.rglob("*")}


def test_a_command_writes_what_it_is_asked_to_and_nothing_else(watched):
    (watched.folder / "benched.toml").write_text(f'{SIX.read_text(encoding="utf-8")}\n[[bench]]\ngain = "40 dB"\n',
                                                 encoding="utf-8")
    for words in (["init", "-q"], ["add", "chain.toml"], ["commit", "-qm", MARK]):
        subprocess.run(["git", *words], cwd=watched.folder, env=GIT, check=True)
    repository = states(watched.folder / ".git")
    run = f"""import sys
from polebook.cli.main import main
for words in {[list(words) for words in COMMANDS]!r}:
    sys.audit("os.begun", words)
    sys.audit("os.ended", main(words))"""
    subprocess.run([sys.executable, "-c", run], cwd=watched.folder, env={**os.environ, **watched.env}, check=True,
                   stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, timeout=60)
    (told,) = watched.told()
    by_command = {}
    for event in told:
        if event[0] == "os.begun":
            at = by_command.setdefault(tuple(event[1]), [])
        else:
            at.append(event)
    assert by_command.keys() == COMMANDS.keys()
    for words, done in by_command.items():
        asked = [event for event in done[:-1] if event[0] == "subprocess.Popen"]
        assert bool(asked) == ("--rev" in words) and all(map(only_asks, asked))
        assert names([event for event in done[:-1] if event not in asked]) == wanted(COMMANDS[words]), words
        assert (done[-1] == ("os.ended", 2)) == (words[1:2] in (("nowhere.toml",), ("; touch pwned",))), words
    made = {name for files in COMMANDS.values() for name in files}
    assert {path.name for path in watched.folder.iterdir()} == made | {"benched.toml", "hook", "log", ".git"}
    assert states(watched.folder / ".git") == repository
    assert watched.path.stat().st_mode & 0o777 == 0o640


def only_asks(started):
    """Whether git is called for a question."""
    program, words = started[1:3]
    return os.path.basename(program) == "git" and "--no-pager" in words and \
        {"rev-parse", "cat-file", "log", "ls-files"} & set(words)


def wanted(files):
    """The names that writing these files touches: a neighbour that is renamed; a new chain is made in its place."""
    return [event for name in files for event in ([("open", name)] if name in IN_PLACE else [
        ("open", f".{name}.*.new"), ("os.rename", f".{name}.*.new", name)])]


def names(events):
    """Without flags and modes; each file that is made is made by nobody else, and through no link."""
    events = [event for event in events if event[:2] != ("open", os.devnull)]
    for event in events:
        if event[0] == "open":
            assert event[2] & MAKES == MAKES and event[2] & (os.O_WRONLY | os.O_RDWR), event
    return [(event[0], *(word for word in event[1:] if isinstance(word, str))) for event in events
            if event[0] != "os.chmod" or not isinstance(event[1], int)]


def test_a_session_writes_its_lock_what_it_keeps_and_the_file(watched):
    before = os.umask(0)  # what is the user's alone is so whatever the shell allows
    try:
        with Terminal(app(watched.path), **watched.env) as terminal:
            terminal.until("? help")
            lock = watched.folder / ".chain.toml.polebook"
            assert lock.exists()
            terminal.press("+")
            folder = watched.folder / "state" / "polebook"
            kept = soon(lambda: list(folder.glob("*.kept")))
            assert [path.stat().st_mode & 0o777 for path in (*kept, folder)] == [0o600, 0o700]
            terminal.press("tab", "8", "/", "/", "s", quiet=0.05)
            terminal.until("built chains in")
            terminal.press("w")
            terminal.until("written")
            terminal.press("q")
            assert terminal.ends() == 0
    finally:
        os.umask(before)
    own, second = watched.told()
    (started,) = [event for event in own if event[0] == "subprocess.Popen"]
    assert started[2] == [sys.executable, "-P", "-c", "from polebook.tui.spread_work import serve; serve()"]
    assert names([event for event in own if event != started]) == [
        ("open", ".chain.toml.polebook"),
        ("os.mkdir", "state"), ("os.mkdir", "state/polebook"),
        ("open", "state/polebook/.#.kept.*.new"),
        ("os.rename", "state/polebook/.#.kept.*.new", "state/polebook/#.kept"),
        ("open", ".chain.toml.*.new"), ("os.rename", ".chain.toml.*.new", "chain.toml"),
        ("os.remove", "state/polebook/#.kept"), ("os.remove", ".chain.toml.polebook"), ("os.kill",)]
    assert second == []
    assert [path.name for path in watched.folder.iterdir() if path.name.startswith(".")] == []
    assert list(folder.iterdir()) == [] and watched.path.stat().st_mode & 0o777 == 0o640


def soon(what, seconds=10.0):
    end = time.monotonic() + seconds
    while not (found := what()) and time.monotonic() < end:
        time.sleep(0.02)
    return found


def test_the_watch_sees_what_it_is_for(watched):
    """The same hook at a program that does what polebook may not."""
    bad = (f"import socket, subprocess, os\nexec({MARK!r})\nsocket.socket(socket.AF_INET).close()\nopen('x', 'w')\n"
           "os.symlink('x', 'y')\nsubprocess.run(['true'])")
    subprocess.run([sys.executable, "-S", "-c", f"import sys; sys.path.insert(0, {str(watched.folder / 'hook')!r})\n"
                    f"import sitecustomize\n{bad.replace('touch pwned', 'true')}"], cwd=watched.folder, check=True,
                   env={**os.environ, **watched.env})
    events = [event[0] for process in watched.told() for event in process]
    assert {"os.system", "socket.__new__", "open", "os.symlink", "subprocess.Popen"} <= set(events)
