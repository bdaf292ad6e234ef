"""What the app shows and where its user stands: plain values, changed only by making new ones. No widget holds any."""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass
from typing import Literal

from polebook.session.state import Session

Page = Literal["ledger", "nodes"]


@dataclass(frozen=True, slots=True)
class Field:
    """An open field: the key that it edits, the text typed so far, the cursor in it, and why it was refused."""

    path: str  # as `polebook set` takes it: "Q1.rc", "target.upper", "device.D.beta"
    typed: str
    cursor: int
    refusal: str = ""  # "" while nothing was refused


@dataclass(frozen=True, slots=True)
class Choice:
    """One row of a list to choose from: `value` is handed on, `about` explains it."""

    value: str
    label: str
    about: str = ""


@dataclass(frozen=True, slots=True)
class Overlay:
    """What lies over the page: a list to choose from, or text to read.

    purpose  "help", "working", "cautions", "find", "add", "kind", "card", "sheets", "leave", "new", "changed"
    typed    text that narrows a list (find, cards), or that is being edited (note, rename)
    row      chosen row of a list, or first line shown of a text
    """

    purpose: str
    title: str
    choices: tuple[Choice, ...] = ()
    text: tuple[str, ...] = ()
    typed: str = ""
    cursor: int = 0
    row: int = 0
    refusal: str = ""
    about: str = ""  # the path or stage that it acts on


@dataclass(frozen=True, slots=True)
class View:
    """The user's place.

    line    selected line: 0 the source, then the stages, last the load
    focus   "sheet" or "page": where digits and arrows go
    sheet   "" for the sheet of the selected line, else "target", "supply", "tolerance", "preferred" or "device.NAME"
    key     row of the focused key on the sheet
    figure  focused figure in the page's row, row of the page (nodes page: constants)
    upper   which end of the band the ledger's columns show
    top     first line of the strip and first row of the sheet and the page that are in sight
    digit_at  when a digit last chose a page (s): a letter that follows at once, as in "2u2", is no command
    """

    page: Page = "ledger"
    line: int = 1
    focus: Literal["sheet", "page"] = "sheet"
    sheet: str = ""
    key: int = 0
    figure: int = 0
    row: int = 0
    upper: bool = True
    decibels: bool = True
    field: Field | None = None
    overlay: Overlay | None = None
    message: str = ""
    bad: bool = False  # the message tells of something refused
    top: dict[str, int] = dataclasses.field(default_factory=dict)
    digit_at: float = float("-inf")


@dataclass(frozen=True, slots=True)
class State:
    """Everything that a screen is drawn from."""

    session: Session
    view: View
    plain: bool = False  # ASCII only
    colour: bool = True
