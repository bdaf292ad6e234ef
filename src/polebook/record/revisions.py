"""The revisions of a chain file that git keeps, and its text at one of them; git is asked, never told to change."""

from __future__ import annotations

import hashlib
import os
import re
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import dataclass

from polebook.chain.read import parse
from polebook.problem import Place, Problem, ProblemsFound
from polebook.record.git import GitSaysNo, ask, refused
from polebook.refusal import quoted
from polebook.text import files
from polebook.text.toml import LARGEST, too_large

_HASH = re.compile(r"[0-9a-f]{40}(?:[0-9a-f]{24})?")
# ":100644 100644 old new M", of a merge that differs from all its parents "::100644 100644 100644 old old new MM"
_RAW = re.compile(rb"\n?(:+)(?:[0-7]+ )+(?:[0-9a-f]+ )*([0-9a-f]+) ([A-Z])[A-Z0-9]*")
_FIELDS = "--format=%H%x00%cI%x00%s"
_PLAIN = ("--no-show-signature", "--no-notes", "--no-decorate", "--no-color", "--no-ext-diff", "--no-textconv", "-z")
_SEARCHED = 50  # revisions that are read to find a digest
SHORT = 8  # digits of a hash that a reader is shown


@dataclass(frozen=True, slots=True)
class Revision:
    """A commit, and the file as it is there.

    date          when it was committed, ISO 8601 with the committer's zone
    subject       first line of the commit's message
    name          the file's path at that time, from the top of the repository
    blob          git's hash of the text
    in_work_tree  whether that text is what stands in the file now
    """

    hash: str
    date: str
    subject: str
    name: str
    blob: str
    in_work_tree: bool

    @property
    def short(self) -> str:
        """The hash as a reader is shown it."""
        return self.hash[:SHORT]

    @property
    def day(self) -> str:
        """YYYY-MM-DD."""
        return self.date[:10]


def revisions(path: str, limit: int = 100) -> tuple[Revision, ...]:
    """The commits up to HEAD that changed the file at `path`, newest first, at most `limit`; through renames of it.

    Where it began as a copy of another file the list ends. Raises ProblemsFound: no git, no repository, a file that
    git does not follow or that was never committed.
    """
    found = _history(path, limit)
    if not found:
        raise _no_revision(path)
    return found


def revision(path: str, asked: str) -> Revision:
    """The file at the commit that `asked` names in git's way (HEAD~3, a branch, a tag, part of a hash), under the name
    that it had then. Raises ProblemsFound."""
    commit = _commit(path, asked)
    with suppress(GitSaysNo):
        name = os.fsdecode(ask(path, "rev-parse", "--show-prefix")).removesuffix("\n") + _base(path)
        return _revision(path, commit, name)
    if not _followed(path):
        raise _no_revision(path)
    history = _history(path, None)
    for name in dict.fromkeys(old.name for old in history):
        with suppress(GitSaysNo):
            return _revision(path, commit, name)
    if not history:
        raise _no_revision(path)
    first = history[-1]
    raise _problem(path, f"the file is not in revision {quoted(asked)}",
                   f"not under any name it has had; it came in with {first.short} of {first.day}",
                   "name a later one; git log --follow FILE lists them")


def text_at(path: str, asked: str | Revision) -> str:
    """The text of the file at `path` in a revision, as git keeps it. Raises ProblemsFound."""
    there = asked if isinstance(asked, Revision) else revision(path, asked)
    shown = place(there)
    try:
        size = int(ask(path, "cat-file", "-s", there.blob))
        if size > LARGEST:
            raise ProblemsFound([too_large(shown, size)])
        return files.decoded(shown, ask(path, "cat-file", "blob", there.blob))
    except GitSaysNo as told:
        raise refused(path, told.words) from None


def before_now(path: str) -> Revision:
    """The newest revision whose text is another than what stands in the file now. Raises ProblemsFound."""
    found = revisions(path)
    for there in found:
        if not there.in_work_tree:
            return there
    raise _problem(path, "there is no other revision of this file",
                   f"git holds it as it stands now, since {found[-1].short} of {found[-1].day}",
                   "change it, or compare with another file: polebook compare A B")


def holding(path: str, digest: str) -> Revision | None:
    """The newest revision in which the file's chain has this digest, among the last ones. Raises ProblemsFound."""
    for there in revisions(path, _SEARCHED):
        with suppress(ProblemsFound):  # a revision that is no chain holds no digest
            if parse(text_at(path, there), place(there)).digest == digest:
                return there
    return None


def place(there: Revision) -> str:
    """The name that messages about a text of `there` carry; git takes it too."""
    return f"{there.short}:{there.name}"


def _commit(path: str, asked: str) -> str:
    """The full hash of the commit that `asked` names."""
    what, fix = f"{quoted(asked)} is not a revision", "write HEAD~3, a branch, a tag, or the beginning of a hash"
    if asked.startswith("-"):
        raise _problem(path, what, "what begins with - is an option, and is not passed on", fix)
    if asked.strip() and asked.isprintable():
        with suppress(GitSaysNo):
            named = _verified(path, asked)
            if _HASH.fullmatch(named):  # ^HEAD names what to leave out, and is none
                return _verified(path, f"{named}^{{commit}}")
    with suppress(GitSaysNo):
        _verified(path, "HEAD")
        raise _problem(path, what, "git knows no commit of that name in this repository", f"{fix}; git log lists them")
    raise _problem(path, "this repository has no commit yet", "revisions are what git has committed",
                   "commit the file first: git commit")


def _verified(path: str, named: str) -> str:
    """The hash of the object that `named` means. GitSaysNo where there is none."""
    return ask(path, "rev-parse", "--verify", "--end-of-options", named).decode("utf-8", "replace").strip()


def _revision(path: str, commit: str, name: str) -> Revision:
    """The file `name` (from the top) at a commit. GitSaysNo where it is not there."""
    blob = _verified(path, f"{commit}:{name}")
    told = ask(path, "log", "-1", *_PLAIN, "--no-patch", _FIELDS, "--end-of-options", commit)
    date, subject = (field.decode("utf-8", "replace") for field in told.split(b"\0")[1:3])
    return Revision(commit, date, subject, name, blob, blob in _own(path, len(blob)))


def _history(path: str, limit: int | None) -> tuple[Revision, ...]:
    count = () if limit is None else (f"--max-count={limit}",)
    try:
        _verified(path, "HEAD")
    except GitSaysNo:  # nothing is committed yet
        return ()
    try:
        # -c: of the merges only those whose text is that of no parent
        told = ask(path, "log", *count, *_PLAIN, "-c", "--follow", "--raw", "--no-abbrev", _FIELDS, "--", _base(path))
    except GitSaysNo as fault:
        raise refused(path, fault.words) from None
    return tuple(_commits(told.split(b"\0"), path))


def _commits(fields: list[bytes], path: str) -> Iterator[Revision]:
    """The commits of `git log --raw -z`: hash, date, subject, the line with the text's hash, one or two names."""
    own: frozenset[str] = frozenset()
    at = 0
    while at < len(fields):
        commit = fields[at].strip().decode("ascii", "replace")
        at += 1
        if not _HASH.fullmatch(commit):
            continue
        date, subject = (field.decode("utf-8", "replace") for field in fields[at : at + 2])
        at += 2
        while at < len(fields) and not fields[at]:
            at += 1
        raw = _RAW.fullmatch(fields[at]) if at < len(fields) else None
        if not raw:
            continue
        colons, blob, status = raw[1], raw[2].decode("ascii"), raw[3]
        at += 2 if colons == b":" and status in b"RC" else 1
        name = os.fsdecode(fields[at])
        at += 1
        if status != b"D":
            own = own or _own(path, len(blob))
            yield Revision(commit, date, subject, name, blob, blob in own)
        if status == b"C":
            return


def _own(path: str, digits: int) -> frozenset[str]:
    """git's hash of what stands in the file now, as it is and with plain line feeds, for git may have put in the rest;
    none for a file that can't be read."""
    try:
        text = files.read(path).text
    except ProblemsFound:
        return frozenset()
    make = hashlib.sha1 if digits == 40 else hashlib.sha256
    return frozenset(make(b"blob %d\0" % len(data) + data).hexdigest()
                     for data in (text.encode(), text.replace("\r\n", "\n").encode()))


def _base(path: str) -> str:
    return os.path.basename(os.path.realpath(path))


def _followed(path: str) -> bool:
    """Whether git follows the file, be it that it was never committed."""
    try:
        return bool(ask(path, "ls-files", "-z", "--", _base(path)))
    except GitSaysNo:
        return False


def _no_revision(path: str) -> ProblemsFound:
    if _followed(path):
        return _problem(path, "no revision holds this file yet", "it is added, and was never committed",
                        "commit it first: git commit")
    return _problem(path, "git does not follow this file", "it was never added to the repository around it",
                    "git add and git commit it, or compare with another file: polebook compare A B")


def _problem(path: str, what: str, why: str, fix: str) -> ProblemsFound:
    return ProblemsFound([Problem(Place(path), what, why, fix)])
