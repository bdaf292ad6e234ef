"""Whole screens as text, at 80 by 24 and at 140 by 45: what the goldens of `screens/` hold."""

from __future__ import annotations

import re
import time
from collections.abc import Callable, Iterator
from dataclasses import replace
from functools import cache
from pathlib import Path

from polebook.chain.kinds import listings
from polebook.problem import Problem
from polebook.session import state as sessions
from polebook.session.instance import Instance
from polebook.session.lock import Holder
from polebook.session.recovery import Kept
from polebook.session.state import Session
from polebook.session.watch import Look
from polebook.text.files import Identity
from polebook.tui.apportions import Asked
from polebook.tui.control import asked, jobs, press, recovered, watching
from polebook.tui.draw.screen import screen
from polebook.tui.lines import plain_text
from polebook.tui.view import Apportion, Care, Choice, Field, Lever, Overlay, Plot, Spread, State, View
from tests.book.verdict_cases import CASES as CHAINS
from tests.helpers import DEMOS, fresh
from tests.tui.apportion_told import plan_of
from tests.tui.spread_told import run_of

FOLDER = Path(__file__).parent / "screens"
SIZES = ((80, 24), (140, 45))
LISTENER, SIX, DIODE = "wire-break-listener", "six-stage", "photodiode-front"
SOUNDER = "frost-line-sounder"
PROBE = "leaf-probe"


def texts() -> Iterator[tuple[str, str]]:
    """File name -> text of every golden screen."""
    for name, make in CASES.items():
        for columns, rows in sizes(name):
            yield file(name, columns, rows), plain_text(screen(make(), columns, rows))


def sizes(name: str) -> tuple[tuple[int, int], ...]:
    """Columns and rows at which a case is drawn."""
    return (*SIZES, (60, 16), (100, 30), (59, 16)) if name == "ledger" else SIZES


def file(name: str, columns: int, rows: int) -> str:
    return f"{name}.{columns}x{rows}.txt"


def opened(name: str) -> Session:
    """A demo chain, open; by its own name wherever the tests run."""
    return fresh(_read(name))


@cache
def _read(name: str) -> Session:
    return replace(sessions.open_file(str(DEMOS / f"{name}.toml")), path=f"chains/{name}.toml")


def key(session: Session, path: str, **view: object) -> View:
    """A user at the key of that path."""
    sheet, _, word = path.rpartition(".")
    words = [row.key for row in sessions.keys_of(session, sheet)]
    sheets = sessions.sheets_of(session)
    line = sheets.index(sheet) if sheets.index(sheet) <= sheets.index("load") else 1
    return View(line=line, sheet="" if line == sheets.index(sheet) else sheet, key=words.index(word), **view)


def at(name: str, path: str, **view: object) -> State:
    session = opened(name)
    return State(session, key(session, path, **view))


def pinned(name: str, path: str, typed: str, **view: object) -> State:
    """A chain pinned, then changed in one key."""
    session = sessions.set_value(sessions.pin(opened(name)), path, typed, 0.0)
    return State(session, key(session, path, **view))


def field(path: str, typed: str, refusal: str = "") -> State:
    session = opened(LISTENER)
    return State(session, key(session, path, field=Field(path, typed, len(typed), refusal)))


def over(overlay: Overlay, name: str = LISTENER) -> State:
    return at(name, "Q1.rc", overlay=overlay)


def text(words: str, **view: object) -> State:
    return State(sessions.new_session("chains/some.toml", words), View(**view))


def spoilt() -> State:
    """The listener with two faults typed into its text."""
    session = opened(LISTENER)
    wrong = re.sub(r"(?m)^couple( +)= \S+", r'couple\1= "4 kohm"', session.history.text, count=1)
    wrong = wrong.replace("c_comp ", "ccomp ")
    return State(sessions.set_text(session, wrong, 0.0), View(line=2))


def read_only() -> State:
    session = sessions.set_value(opened(LISTENER), "Q1.stray", "3p", 0.0)
    session = replace(session, read_only="its permissions do not allow it to be written")
    return State(session, View(line=1, message="read-only: its permissions do not allow it to be written", bad=True))


@cache
def many() -> State:
    """The listener with forty stages in a row."""
    session = opened(LISTENER)
    for _ in range(37):
        session = sessions.copy_stage(session, "Q1", 0.0)
    return State(replace(session, path="chains/many.toml"), View(line=20))


def plain() -> State:
    return replace(pinned(SIX, "Q5.rc", "3k3"), plain=True)


def left_out() -> State:
    session = sessions.toggle_left_out(opened(SIX), "Q2", 0.0)
    return State(session, key(session, "Q2.left_out"))


def unlucky() -> State:
    """A chain whose text is sound, and whose ledger can't be had."""
    session = opened(LISTENER)
    problem = Problem(None, "nothing holds node in of Q2 at midband", "no conductance leads from it to anywhere",
                      "give it a resistor")
    return State(replace(session, ledger=None, problems=(problem,)), View(line=2))


def written(start: State, *names: str) -> State:
    """The text page after keys, a second between them."""
    state, _ = press(start, "e", "e", 0.0)
    for at, name in enumerate(names, start=1):
        state, _ = press(state, name, name if len(name) == 1 else None, float(2 * at))
    return state


def swept(name: str, path: str, *keys: str) -> State:
    """The finished sweep of a key, and keys pressed on it."""
    state = at(name, path, page="leverage", focus="page", lever=Lever(row=path))
    state = jobs.advance(press(state, "enter", None, 0.0)[0], lambda: False)
    for key in keys:
        state = press(state, key, key, 0.0)[0]
    return state


def aimed(name: str, path: str, targets: dict[str, str], **view: object) -> State:
    """A chain with more targets than its file has."""
    session = opened(name)
    for word, typed in targets.items():
        session = sessions.set_value(session, f"target.{word}", typed, 0.0)
    return State(session, key(session, path, **view))


def built(name: str, *keys: str, **view: object) -> State:
    """The page of a spread of 2000 builds, and keys pressed on it."""
    state = at(name, "Q1.rc", page="spread", focus="page", **view)
    run = run_of(state.session.chain, state.session.history.text)
    state = replace(state, view=replace(state.view, spread=Spread(2000, run=run)))
    for key in keys:
        state = press(state, key, key if len(key) == 1 else None, 0.0)[0]
    return state


def begun(name: str) -> State:
    """A spread that runs, with something of it told, after an edit."""
    state = press(built(name, "+"), "s", "s", 0.0)[0]
    if state.job is None:
        raise LookupError("nothing runs")
    return replace(state, job=replace(state.job, done=1200, total=8000))


def planned(name: str, *keys: str, **view: object) -> State:
    """The page of a plan that was found, and keys pressed on it."""
    state = at(name, "Q2.c_comp" if name == LISTENER else "Q1.rc", page="apportion", focus="page", **view)
    run = plan_of(state.session.history.text, Asked((), "", 1))
    state = replace(state, view=replace(state.view, apportion=Apportion(run=run)))
    for key in keys:
        state = press(state, key, key if len(key) == 1 else None, 0.0)[0]
    return state


def short_of(upper: str, *free: str) -> State:
    """The nearest plan for an upper edge that is out of reach."""
    session = sessions.set_value(opened(LISTENER), "target.upper", upper, 0.0)
    run = plan_of(session.history.text, Asked(free, "", 1))
    return State(session, key(session, free[0], page="apportion", focus="page",
                              apportion=Apportion(frozenset(free), run=run)))


def seeking(name: str) -> State:
    """A plan sought, with something of it told."""
    state = at(name, "Q1.couple", page="apportion", focus="page", apportion=Apportion(favour="upper"))
    state = press(state, "s", "s", 0.0)[0]
    if state.job is None:
        raise LookupError("nothing runs")
    state = replace(state, job=replace(state.job, done=64, total=258))
    return state.job.takes.piece(state, {"reached": [["gain", 974.0, True], ["lower", 15100.0, True],
                                                     ["upper", 953e3, False], ["peaking", 0.0, True]]})


def beside() -> State:
    """The listener, edited, while another hand has put another text in its place."""
    state = pinned(LISTENER, "Q1.rc", "2k4")
    session = state.session
    theirs = session.history.disk.replace('"1M"', '"3M"') if session.history.disk is not None else ""
    return replace(state, care=Care(theirs=Look(session.identity, Identity(0, 0, 0, 0), theirs), asked=True))


def held() -> State:
    """The listener while another polebook has it."""
    since = time.mktime((2026, 5, 4, 12, 1, 0, 0, 0, -1))  # reads the same in every time zone
    who = Instance(4711, "bench-2", since)
    return watching.held(at(LISTENER, "Q1.rc"), Holder("chains/.wire-break-listener.toml.polebook", who), (), 0.0)


def left_behind() -> State:
    """The listener with work of an earlier run that was not written."""
    when = time.mktime((2026, 5, 4, 12, 1, 0, 0, 0, -1))
    kept = Kept("", (0, 0, 0), "", when, "", Instance(4711, "bench-2", when))
    return recovered.ask(recovered.found(at(LISTENER, "Q1.rc"), (kept, kept)))


KINDS = tuple(Choice(one.name, one.name, one.about) for one in listings() if one.group == "stage")
FOUND = tuple(Choice(f"{name}.rb{k}", f"{name}.rb{k} = {value}", f"bias resistor {k}")
              for name in ("Q1", "Q2") for k, value in ((1, "56k"), (2, "12k")))
HELP = tuple(line for k in range(1, 12) for line in (
    f"Words of part {k}", "  w          write the file; a symbolic link is followed, and the mode of the file kept as "
    "it was", ""))
REFUSED = ('"4 kohm" is not a capacitance: ce of stage Q2 is a capacitance, so its unit is the farad; write it in '
           'farads: ce = "100u"')
UNSAVED = (Choice("write", "write the file and leave"), Choice("lose", "leave without writing"), Choice("stay", "stay"))
START = (Choice("rail", "12", "positive rail in V"), Choice("source", "600R", "resistance of the source"),
         Choice("make", "", "make the chain"))

CASES: dict[str, Callable[[], State]] = {
    "ledger": lambda: at(LISTENER, "Q1.rc"),
    "ledger-six": lambda: at(SIX, "Q5.re"),
    "ledger-lower": lambda: at(SIX, "Q5.re", upper=False),
    "ledger-ratios": lambda: at(DIODE, "U2.rf", decibels=False, focus="page", figure=1),
    "ledger-pinned": lambda: pinned(SIX, "Q5.rc", "3k3"),
    "ledger-pinned-lower": lambda: pinned(
        LISTENER, "Q2.couple", "6n8", upper=False, message="couple of Q2: 3n3 to 6n8"),
    "ledger-many": many,
    "ledger-left-out": left_out,
    "ledger-plain": plain,
    "nodes": lambda: at(LISTENER, "Q1.rc", page="nodes"),
    "nodes-row": lambda: at(SIX, "Q4.couple", page="nodes", focus="page", row=3),
    "nodes-lower": lambda: at(LISTENER, "Q1.rc", page="nodes", upper=False),
    "nodes-held": lambda: at(DIODE, "source.resistance", page="nodes"),
    "response": lambda: at(LISTENER, "Q2.rc", page="response", focus="page"),
    "response-pinned": lambda: pinned(LISTENER, "Q2.rc", "1k5", page="response"),
    "response-line": lambda: at(SIX, "Q5.rc", page="response", focus="page", plot=Plot(cursor_hz=2e6, single=True)),
    "response-zoomed": lambda: at(SIX, "Q5.rc", page="response", focus="page", decibels=False,
                                  plot=Plot(1e6, 1e7, 2.51e6)),
    "response-delay": lambda: at(SIX, "Q5.rc", page="response", plot=Plot(what="delay")),
    "response-input": lambda: at(DIODE, "U1.rf", page="response", plot=Plot(what="input")),
    "response-plain": lambda: replace(at(SIX, "Q3.rc", page="response", focus="page"), plain=True),
    "response-unstable": lambda: text(CHAINS["unstable, an op-amp that drives a capacitance"], page="response"),
    "levels": lambda: at(SIX, "Q4.rc", page="levels", focus="page", figure=8),
    "levels-signal": lambda: at(LISTENER, "Q3.re", page="levels", focus="page", bank="levels", figure=3),
    "levels-pinned": lambda: pinned(SIX, "Q5.re", "470", page="levels", focus="page", bank="levels"),
    "levels-plain": lambda: replace(at("shellac-desk", "V2.rk", page="levels", bank="levels"), plain=True),
    "pulse": lambda: at(SOUNDER, "Q1.rc", page="pulse", focus="page"),
    "pulse-short": lambda: aimed(SIX, "Q5.rc", {"rise": "100n", "overshoot": "1 %"}, page="pulse"),
    "pulse-pinned": lambda: pinned(SOUNDER, "Q1.rc", "750", page="pulse", focus="page", row=1),
    "pulse-sag": lambda: aimed(SIX, "Q5.rc", {"pulse": "10u", "sag": "5 %"}, page="pulse", focus="page", upper=False),
    "pulse-no-length": lambda: at(LISTENER, "Q1.rc", page="pulse", focus="page", upper=False),
    "pulse-plain": lambda: replace(at(DIODE, "U1.rf", page="pulse", focus="page"), plain=True),
    "noise": lambda: at(SIX, "Q1.rc", page="noise", focus="page", row=6),
    "noise-short": lambda: aimed(SIX, "Q1.rc", {"noise": "1.2n", "noise_from": "5k", "noise_to": "5M"}, page="noise",
                                 focus="page"),
    "noise-lines": lambda: pinned(LISTENER, "Q1.rc", "3k", page="noise", noise=Plot(what="output", single=True)),
    "noise-plain": lambda: replace(at(DIODE, "U1.rf", page="noise", focus="page"), plain=True),
    "leverage": lambda: at(SIX, "Q5.rc", page="leverage", focus="page", lever=Lever(row="Q5.rc")),
    "leverage-lower": lambda: at(LISTENER, "Q2.couple", page="leverage", lever=Lever("lower_edge", "Q2.couple")),
    "leverage-plain": lambda: replace(at(DIODE, "U1.rf", page="leverage", focus="page"), plain=True),
    "sweep": lambda: swept(SIX, "Q5.rc", ".", "."),
    "leverage-noise": lambda: at(SIX, "Q1.re", page="leverage", focus="page", lever=Lever("noise", "Q1.re")),
    "sweep-short": lambda: swept(LISTENER, "Q2.couple", ",", ",", "v"),
    "sweep-plain": lambda: replace(swept(DIODE, "U1.rf"), plain=True),
    "spread-empty": lambda: at(SIX, "Q1.rc", page="spread", focus="page"),
    "spread": lambda: built(PROBE),
    "spread-row": lambda: built(PROBE, "v", "down", "down"),
    "spread-next": lambda: built(PROBE, "*", "]", "V"),
    "spread-begun": lambda: begun(PROBE),
    "spread-table": lambda: built(SIX, "V"),
    "spread-plain": lambda: replace(built(LISTENER), plain=True),
    "apportion-empty": lambda: at(LISTENER, "Q1.couple", page="apportion", focus="page"),
    "apportion-begun": lambda: seeking(LISTENER),
    "apportion": lambda: planned(LISTENER),
    "apportion-accepted": lambda: planned(LISTENER, "enter"),
    "apportion-old": lambda: planned(LISTENER, "down", "+"),
    "apportion-next": lambda: planned(LISTENER, "/", "v"),
    "apportion-short": lambda: short_of("8M", "Q2.rc", "Q2.ce"),
    "apportion-words": lambda: planned(LISTENER, "="),
    "apportion-plain": lambda: replace(planned(LISTENER), plain=True),
    "field": lambda: field("Q2.ce", "4u7"),
    "field-refused": lambda: field("Q2.ce", "4 kohm", REFUSED),
    "sheet-target": lambda: at(LISTENER, "target.upper"),
    "sheet-card": lambda: at(LISTENER, "device.VF.ft"),
    "sheet-load": lambda: at(LISTENER, "load.capacitance"),
    "read-only": read_only,
    "stale": spoilt,
    "no-ledger": unlucky,
    "faults": lambda: text(spoilt().session.history.text, line=2),
    "unstable": lambda: text(CHAINS["unstable, an op-amp that drives a capacitance"]),
    "no-midband": lambda: text(CHAINS["no clean midband, the corners cross"]),
    "no-targets": lambda: text(CHAINS["no targets, nothing limits the band"]),
    "list": lambda: over(Overlay("add", "add a stage after Q1", KINDS, row=4)),
    "find": lambda: over(Overlay("find", "find a key", FOUND, typed="rb", cursor=2, row=1)),
    "help": lambda: over(Overlay("help", "keys and words", text=HELP, row=5)),
    "leave": lambda: over(Overlay("leave", "2 edits not written yet", UNSAVED)),
    "note": lambda: over(Overlay("note", "note of Q1", typed="The first step.\n" + "Against rumble " * 9, cursor=20)),
    "cautions": lambda: over(Overlay("cautions", "2 cautions", (
        Choice("", "the sum of time constants comes to 1.5 times the exact lower edge", "go by the exact figure"),
        Choice("Q1", "no d.c. path to the base of Q1", "line 17: it hangs on capacitors alone; give rb1 and rb2")))),
    "text": lambda: written(at(LISTENER, "Q2.rc"), "down", "end"),
    "text-moved": lambda: written(at(SIX, "Q5.rc"), "delete", "3"),
    "text-faults": lambda: written(at(LISTENER, "Q2.rc"), "x", "down", "home", "delete"),
    "text-never-good": lambda: written(text(spoilt().session.history.text, line=2)),
    "text-find": lambda: written(at(LISTENER, "Q1.rc"), "ctrl+f", *"couple", "enter"),
    "changed": lambda: asked.question(beside()),
    "difference": lambda: asked.both(beside(), Overlay("changed", "")),
    "recovered": left_behind,
    "held": held,
    "new": lambda: text("", overlay=Overlay("start", "new chain: source > common-emitter > load", START, typed="68",
                                            cursor=2, row=1)),
}
