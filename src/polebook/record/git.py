"""git as a program that is only asked: no shell, no lock, no hook, no pager, no network, nothing of a repository's set
to run, and never longer than it may take."""

from __future__ import annotations

import os
import shutil
import subprocess

from polebook.problem import Place, Problem, ProblemsFound

LONGEST_S = 20.0
# what a user may have set for all calls of git; the rest (GIT_DIR of a hook that runs us, traces, pagers, programs that
# show differences) would send the question elsewhere or change the answer
_KEPT = ("GIT_CONFIG", "GIT_CEILING_DIRECTORIES", "GIT_DISCOVERY_ACROSS_FILESYSTEM", "GIT_EXEC_PATH")
_OURS = {
    "GIT_OPTIONAL_LOCKS": "0",
    "GIT_TERMINAL_PROMPT": "0",
    "GIT_LITERAL_PATHSPECS": "1",  # a file's name may hold * and :
    "GIT_ALLOW_PROTOCOL": "",  # what a partial clone lacks is not fetched behind the user's back
    "LC_ALL": "C",
}
_ALWAYS = ("--no-pager", "-c", "core.fsmonitor=false", "-c", f"core.hooksPath={os.devnull}", "-c",
           "i18n.logOutputEncoding=UTF-8")
_TOLD = 200  # characters of git's own words that a message repeats


class GitSaysNo(Exception):
    """git ended with an error; `words` is the first line that it gives for it."""

    def __init__(self, words: str) -> None:
        self.words = words
        super().__init__(words)


def ask(path: str, *arguments: str) -> bytes:
    """What `git arguments` prints, called in the folder of the file at `path`. GitSaysNo where it fails; ProblemsFound
    where there is no git, no repository around the file, or no answer in time."""
    program = shutil.which("git")
    if program is None:
        raise _problem(path, "there is no git program on this machine's PATH",
                       "the revisions of a file are read by calling git",
                       "install git, or compare with another file: polebook compare A B")
    try:
        done = subprocess.run([program, "-C", folder(path), *_ALWAYS, *arguments], stdin=subprocess.DEVNULL,
                              capture_output=True, timeout=LONGEST_S, env=_environment(), check=False)
    except subprocess.TimeoutExpired:
        raise _problem(path, f"git gave no answer in {LONGEST_S:g} seconds", "it was stopped, and nothing was changed",
                       "try again; a vast history, or a disk on the network, may need a nearer revision") from None
    except (OSError, ValueError) as error:  # ValueError: a NUL in the name
        told = error.strerror if isinstance(error, OSError) else str(error)
        raise _problem(path, "git can't be called", f"{program}: {told}",
                       "mend that, or compare with another file: polebook compare A B") from None
    if done.returncode == 0:
        return done.stdout
    words = done.stderr.decode("utf-8", "replace").strip().split("\n")
    first = next((line for line in words if line.startswith(("fatal:", "error:"))), words[0])
    first = first.removeprefix("fatal: ").removeprefix("error: ")[:_TOLD] or f"it ended with code {done.returncode}"
    if "not a git repository" in first:
        raise _problem(path, "there is no git repository around this file", "revisions are what git has kept of a file",
                       "put the folder under git, or compare with another file: polebook compare A B")
    if "dubious ownership" in first or "work tree" in first:  # whatever is asked, git will say the same
        raise refused(path, first)
    raise GitSaysNo(first)


def refused(path: str, words: str) -> ProblemsFound:
    """The problem for a failure that has no better message: git's own words."""
    return _problem(path, "git can't tell this file's revisions", f"git says: {words}", "mend that, then try again")


def folder(path: str) -> str:
    """Where the file itself stands: of a symbolic link, where it leads, for that is what is read and saved."""
    return os.path.dirname(os.path.realpath(path))


def _environment() -> dict[str, str]:
    kept = {name: value for name, value in os.environ.items()
            if not name.startswith(("GIT_", "LC_", "LANG")) or name.startswith(_KEPT)}
    return {**kept, **_OURS}


def _problem(path: str, what: str, why: str, fix: str) -> ProblemsFound:
    return ProblemsFound([Problem(Place(path), what, why, fix)])
