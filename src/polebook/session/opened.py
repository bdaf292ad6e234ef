"""The open file as a frozen value: every change makes a new one."""

from __future__ import annotations

import os
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Chain
from polebook.chain.read import known_reading
from polebook.problem import Place, Problem, ProblemsFound
from polebook.session.watch import Look
from polebook.text import files
from polebook.text.edit import Edit, Splice
from polebook.text.files import Identity
from polebook.text.history import History

if TYPE_CHECKING:
    from polebook.session.baselines import Against

_SECTIONS = ("targets", "lines", "sites", "upper_account", "lower_account", "owns_upper", "owns_lower", "cautions",
             "verdict")


class ChangedOnDisk(ProblemsFound):
    """A file that is not on the disk as it was read: to save would lose what another hand wrote."""


@dataclass(frozen=True, slots=True)
class Session:
    """An open chain file.

    read_only  why it can't be saved, "" where it can
    newline    of its first line
    history    `history.text` is the text now, `history.saved` whether the file holds it
    chain      of the text now, None where it has faults
    problems   faults of the text now, or why its chain has no ledger
    ledger     of the chain now, None where it has none
    good       the last ledger that there was: the same as `ledger` where there is one
    baseline   the ledger that figures are told against: pinned, or of a revision
    against    what is told of a baseline from the record; with a post it is all there is. None of a pin
    exists     the file is on the disk
    identity   what tells whether it is still the one that was read
    held       which other polebook has the file, "" for none: while one has, nothing is written
    gone       the file went from the disk, or can't be read any more, since it was read
    """

    path: str
    read_only: str
    newline: str
    history: History
    chain: Chain | None
    problems: tuple[Problem, ...]
    ledger: Ledger | None
    good: Ledger | None
    baseline: Ledger | None
    exists: bool
    identity: Identity | None = None
    held: str = ""
    gone: bool = False
    against: Against | None = None

    @property
    def saved(self) -> bool:
        """Whether the file holds the text as it is."""
        return self.history.saved and not self.gone


def open_file(path: str) -> Session:
    """The session of the file at `path`; of an empty text where there is no such file.

    Raises ProblemsFound for what is no readable UTF-8 file. Faults of its content stand in the session's problems.
    """
    if _missing(path):
        return _fresh(path, _folder_fault(path), "\n", History(""), False, None)
    found = files.read(path)
    reason = "its permissions do not allow it to be written" if found.read_only else _folder_fault(path)
    return _fresh(path, reason, found.newline, History(found.text, found.text), True, found.identity)


def new_session(path: str, text: str) -> Session:
    """A session of a new file, not saved yet, that begins with `text`."""
    return _fresh(path, _folder_fault(path), "\r\n" if "\r\n" in text else "\n", History(text), False, None)


def _missing(path: str) -> bool:
    """Whether there is nothing at `path`, or a link that leads to nothing; what can't be told is left to reading."""
    try:
        os.stat(path)
    except FileNotFoundError:
        return True
    except (OSError, ValueError):  # ValueError: a NUL in the name
        return False
    return False


def _folder_fault(path: str) -> str:
    """Why no file can be put beside the one at `path`; "" where one can."""
    folder = os.path.dirname(os.path.realpath(path)) or "."
    if not os.path.isdir(folder):
        return "its folder does not exist"
    return "" if os.access(folder, os.W_OK | os.X_OK) else "its folder does not allow files to be written"


def _fresh(path: str, reason: str, newline: str, history: History, exists: bool, identity: Identity | None) -> Session:
    return _read(Session(path, reason, newline, history, None, (), None, None, None, exists, identity))


def _read(session: Session) -> Session:
    """The session with chain, problems and ledger of its text."""
    text = session.history.text
    if not text.strip():
        return replace(session, chain=None, problems=(_empty(session.path),), ledger=None)
    reading = known_reading(text, session.path)
    if (chain := reading.chain) is None:
        return replace(session, chain=None, problems=tuple(reading.problems), ledger=None)
    try:
        found = _shown(chain)
    except ProblemsFound as error:
        return replace(session, chain=chain, problems=tuple(error.problems), ledger=None)
    return replace(session, chain=chain, problems=(), ledger=found, good=found)


def _shown(chain: Chain) -> Ledger:
    """The chain's ledger with all that a screen always shows. Raises ProblemsFound where part of it has no figure."""
    found = ledger(chain)
    with within_reach(chain):
        for section in _SECTIONS:
            getattr(found, section)
    return found


def _empty(path: str) -> Problem:
    return Problem(Place(path), "the file is empty", "a chain file says at least its format, a source, a stage",
                   "begin a new chain, or write it as text")


def apply(session: Session, edit: Edit, now: float, run: str = "", label: str = "") -> Session:
    """The session with `edit` done. Edits of the same non-empty `run` that follow within a second are one undo step.

    now is in seconds; label names a step that the edit joins. Raises Misfit where `edit` was made for another text.
    """
    history = session.history.apply(edit, now, run, label)
    return session if history is session.history else _read(replace(session, history=history))


def undo(session: Session) -> tuple[Session, str]:
    """The session before the last step, and that step's label; "" where there is none."""
    if not session.history.past:
        return session, ""
    label = session.history.past[-1].edit.label
    return _read(replace(session, history=session.history.undo())), label


def redo(session: Session) -> tuple[Session, str]:
    """The session with the step that was undone last, and its label; "" where there is none."""
    if not session.history.future:
        return session, ""
    label = session.history.future[-1].edit.label
    return _read(replace(session, history=session.history.redo())), label


def save(session: Session, over: bool = False) -> Session:
    """The session with its text in the file. Raises ProblemsFound where it can't be; the session stays as it is.

    Raises ChangedOnDisk where the file is not as it was read, unless `over` says to save over it.
    """
    if session.held:
        raise ProblemsFound([Problem(
            Place(session.path), "it can't be written here", session.held, "it can be once that one has left",
        )])
    if not over and changed_on_disk(session):
        raise ChangedOnDisk([Problem(
            Place(session.path), "the file has changed on the disk since it was read",
            "saving would lose what was written to it meanwhile", "read it again, or save over it",
        )])
    files.save(session.path, session.history.text)
    return replace(session, history=session.history.marked(session.history.text), read_only="", exists=True,
                   identity=files.identity(session.path), gone=False)


def changed_on_disk(session: Session) -> bool:
    """Whether another hand has changed, made or removed the file since it was read or saved."""
    return files.identity(session.path) != session.identity


def reload(session: Session, now: float) -> Session:
    """The session with the text that is on the disk now, as one edit. Raises ProblemsFound where it can't be read."""
    found = files.read(session.path)
    return reread(session, Look(session.identity, found.identity, found.text), now)


def reread(session: Session, look: Look, now: float) -> Session:
    """The session with the text that was seen on the disk, as one edit."""
    text = session.history.text if look.text is None else look.text
    edit = whole(session.history.text, text, "read again from the disk")
    return replace(agreed(apply(session, edit, now), look), newline=files.newline(text))


def agreed(session: Session, look: Look) -> Session:
    """The session with what was seen on the disk as what its file holds; its own text stays."""
    return replace(session, history=session.history.marked(look.text), exists=look.identity is not None,
                   identity=look.identity, gone=False)


def as_on_disk(session: Session, like: Session) -> Session:
    """The session with what `like`, a session of the same file, knows of the disk."""
    disk = like.history.disk
    history = session.history if session.history.disk == disk else session.history.marked(disk)
    return replace(session, history=history, read_only=like.read_only, exists=like.exists, identity=like.identity,
                   held=like.held, gone=like.gone)


def whole(before: str, after: str, label: str) -> Edit:
    """The edit from one text to another, as one splice of the part that differs."""
    head = _alike(before, after)
    rest = min(len(before), len(after)) - head
    tail = _alike(before[::-1][:rest], after[::-1][:rest])
    return Edit.of([Splice(head, before[head : len(before) - tail], after[head : len(after) - tail])], label)


def _alike(a: str, b: str) -> int:
    """How many characters both begin with."""
    return next((at for at, (x, y) in enumerate(zip(a, b, strict=False)) if x != y), min(len(a), len(b)))


def set_text(session: Session, text: str, now: float) -> Session:
    """The session with `text` as its file's content: what the text page leaves is one edit."""
    return apply(session, whole(session.history.text, text, "text edited"), now)


def pin(session: Session) -> Session:
    """The session with today's figures as the baseline."""
    return replace(session, baseline=session.good, against=None)


def unpin(session: Session) -> Session:
    """The session without a baseline."""
    return replace(session, baseline=None, against=None)
