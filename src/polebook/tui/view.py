"""What the app shows and where its user stands: plain values, changed only by making new ones. No widget holds any."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

from polebook.session.state import Session
from polebook.text.history import History

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.chain.model import Chain
    from polebook.plan.sweep import Point
    from polebook.session.recovery import Kept
    from polebook.session.watch import Look
    from polebook.tui.apportions import Going
    from polebook.tui.apportions import Run as Plan
    from polebook.tui.histories import Benches, Known, Request, Then
    from polebook.tui.spreads import Run

Page = Literal["ledger", "nodes", "response", "pulse", "noise", "levels", "leverage", "spread", "apportion", "history"]


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

    purpose  "help", "working", "cautions", "find", "add", "kind", "card", "sheets", "leave", "new", "changed",
             "recovered", "difference", "post"
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
class Plot:
    """Where the user is on a plot over frequency (Hz). None: as much as the chain asks, the cursor at its reference.

    what    curves that are drawn
    single  the curves of single lines too
    """

    low_hz: float | None = None
    high_hz: float | None = None
    cursor_hz: float | None = None
    what: str = "gain"
    single: bool = False


@dataclass(frozen=True, slots=True)
class Times:
    """Where the user is on a plot over time (s). None: as much as the figures ask for, the cursor near their marks."""

    low_s: float | None = None
    high_s: float | None = None
    cursor_s: float | None = None


@dataclass(frozen=True, slots=True)
class Sweep:
    """One value of the chain over a range, as far as it has been computed.

    row     of the ranking that it is of, "Q5.rc";  path  among the chain's numbers: of a device's own part its card's
    chain   that it was computed with;  today  its figures as they were then
    values  SI units, of one sign, the nearest to 0 first;  points  those that are done
    cursor  number of a value
    """

    row: str
    path: str
    chain: Chain
    today: Point
    values: tuple[float, ...]
    points: tuple[Point, ...] = ()
    cursor: int = 0


@dataclass(frozen=True, slots=True)
class Lever:
    """Where the user is on the leverage page.

    figure  by which it ranks;  row  name of the chosen row, "" for the first
    also    a further figure that a sweep follows, by the key of levers.ALSO; "" for none
    sweep   the last one;  open  the keys are those of its plot
    """

    figure: str = "upper_edge"
    row: str = ""
    sweep: Sweep | None = None
    open: bool = False
    also: str = ""


@dataclass(frozen=True, slots=True)
class Spread:
    """Where the user is on the spread page.

    builds, seed  of the next run;  asked  builds of the one that is at work
    figure  that is looked at, spreads.TABLE for all side by side;  row  name of the chosen one, "" for the first
    run     what is shown;  before  the last one of another text
    """

    builds: int = 10_000
    seed: int = 1
    asked: int = 0
    figure: str = ""
    row: str = ""
    run: Run | None = None
    before: Run | None = None


@dataclass(frozen=True, slots=True)
class Apportion:
    """Where the user is on the apportion page.

    chosen  paths of the keys that may change, None: as the file has it;  also  paths beside those that it offers
    favour  a target's name, "" for none, and seed: of the next run
    row     path of the chosen row, "" for the first
    going   the run at work;  run  the plan that is shown
    """

    chosen: frozenset[str] | None = None
    also: tuple[str, ...] = ()
    favour: str = ""
    seed: int = 1
    row: str = ""
    going: Going | None = None
    run: Plan | None = None


@dataclass(frozen=True, slots=True)
class Past:
    """Where the user is on the history page, and what is known of posts, revisions and bench sweeps.

    asked    how often it was to be looked for anew: 0 while nothing was
    row      key of the chosen row, "" for the first
    take     key of the row that becomes the baseline as soon as its figures are there, "" for none
    post     what is to be posted;  told  the post that it came to is to be chosen once it is listed
    spread   changes by meaning over the whole width, in the place of figures
    known    None while nothing is;  thens  revisions that were solved, the last looked at behind
    benches  the sweeps beside the file;  overlaid  they are drawn over the response
    """

    asked: int = 0
    row: str = ""
    take: str = ""
    post: Request | None = None
    told: bool = False
    spread: bool = False
    known: Known | None = None
    thens: tuple[Then, ...] = ()
    benches: Benches | None = None
    overlaid: bool = True


@dataclass(frozen=True, slots=True)
class Writing:
    """The file as text while it is being edited: its own undo, the cursor in it, and what it comes to.

    after   the session as leaving the page would make it; that of an earlier text while this one is yet to be judged
    begun   the figures that there were when the page was opened
    cursor  character of the text
    column  character of the line that up and down keep to; None: the cursor's own
    run     number of the run of typing, which a move of the cursor ends
    find    text that is looked for, None while nothing is
    """

    history: History
    after: Session
    begun: Ledger | None = None
    cursor: int = 0
    column: int | None = None
    run: int = 0
    find: str | None = None

    @property
    def judged(self) -> bool:
        """Whether `after` is that of the text as it is."""
        return self.after.history.text == self.history.text


@dataclass(frozen=True, slots=True)
class Takes:
    """What becomes of a job's pieces: each put into the state; the end told: True where all were done."""

    piece: Callable[[State, Any], State]
    ended: Callable[[State, bool], State]


@dataclass(frozen=True, slots=True)
class Job:
    """Work in the background, a piece at a time between the keys. It goes on whatever page is in sight.

    name   what it does, for its user: "sweep of Q5.rc"
    page   where it is watched; Esc stops it there
    work   yields (done, total, piece), one piece in some milliseconds; what has faults raises ProblemsFound
    rest   seconds that it waits before it begins
    halt   asks it to come to its end with what there is, None where it is given up as it is;  halting  it was asked
    """

    name: str
    page: Page
    work: Iterator[tuple[int, int, Any]]
    takes: Takes
    done: int = 0
    total: int = 0
    rest: float = 0.0
    halt: Callable[[], None] | None = None
    halting: bool = False


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
    plot: Plot = Plot()
    step: Times = Times()  # on the step response;  sag: on the pulse that sags
    sag: Times = Times()
    noise: Plot = Plot(what="input")  # what: "input" or "output"; single: ranked by lines
    lever: Lever = Lever()
    bank: Literal["plan", "levels"] = "plan"  # of the levels page
    spread: Spread = Spread()
    apportion: Apportion = Apportion()
    past: Past = Past()
    writing: Writing | None = None  # the text page is open


@dataclass(frozen=True, slots=True)
class Care:
    """What is done so that nothing is lost.

    theirs  what another hand has put in the file's place and nobody has decided on yet;  asked  it was offered
    kept    work of earlier runs that was not written, still to be decided on
    taken   such work that is in the session now
    unkept  why unsaved work can't be kept, "" where it can
    keep    leaving keeps what is unsaved for the next opening
    """

    theirs: Look | None = None
    asked: bool = False
    kept: tuple[Kept, ...] = ()
    taken: tuple[Kept, ...] = ()
    unkept: str = ""
    keep: bool = False


@dataclass(frozen=True, slots=True)
class State:
    """Everything that a screen is drawn from."""

    session: Session
    view: View
    plain: bool = False  # ASCII only
    colour: bool = True
    job: Job | None = None
    care: Care = Care()

    @property
    def text(self) -> str:
        """The file's text with what is being written on the text page."""
        return self.session.history.text if self.view.writing is None else self.view.writing.history.text

    @property
    def unsaved(self) -> bool:
        """Whether something stands here that the file does not hold."""
        session = self.session
        if not session.exists and not self.text:
            return False
        return session.gone or self.text != session.history.disk
