"""Every key of the app, once: what it is called, what it does, the word on the key line. Bindings, help and README."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from textwrap import wrap
from types import MappingProxyType

PAGES = {"1": "ledger", "2": "nodes", "3": "response", "4": "pulse", "5": "noise", "6": "levels", "7": "leverage",
         "8": "spread", "9": "apportion", "0": "history"}
"""Digit -> page, of the pages that there are."""


@dataclass(frozen=True, slots=True)
class Key:
    """One row of the table.

    names    each key: its character where it prints, else its name ("left", "ctrl+z")
    actions  what each does, a name of `polebook.tui.control`; one for all, or one a key
    shown    the keys as a reader sees them, one text a key
    word     for the key line, one or two words
    does     for help and README
    group    heading in the help
    """

    names: tuple[str, ...]
    actions: tuple[str, ...]
    shown: tuple[str, ...]
    word: str
    does: str
    group: str


MOVING, VALUES, STAGES, FILE, LOOKING = "Moving", "Values", "Stages", "The file", "Looking closer"

KEYS: tuple[Key, ...] = (
    Key(tuple(PAGES), ("page",), ("1", "…", list(PAGES)[-1]), "page", "with the page focused: " + ", ".join(
        f"{digit} {name}" for digit, name in PAGES.items()), MOVING),
    Key(("pageup", "pagedown"), ("page before", "page after"), ("PgUp", "PgDn"), "page", "page before, after", MOVING),
    Key(("left", "right"), ("line before", "line after"), ("←", "→"), "line", "line before, after (source … load)",
        MOVING),
    Key(("home", "end"), ("first line", "last line"), ("Home", "End"), "ends", "to the source, to the load", MOVING),
    Key(("up", "down"), ("row before", "row after"), ("↑", "↓"), "row", "key on the sheet, row on a page", MOVING),
    Key((",", "."), ("figure before", "figure after"), (",", "."), "figure",
        "with the page focused: figure before, after in the row; cursor of a plot", MOVING),
    Key(("z", "Z"), ("zoom in", "zoom out"), ("z", "Z"), "zoom", "zoom a plot in, out", MOVING),
    Key(("[", "]"), ("pan left", "pan right"), ("[", "]"), "pan",
        "pan a plot left, right; spread, apportion: another seed", MOVING),
    Key(("v", "V"), ("next curve", "curve before"), ("v", "V"), "curves",
        "what the page shows: next, before (response: gain, delay, impedances; pulse: step, sag; noise: at the input, "
        "the output; leverage: the figure that ranks; spread: figures; apportion: what is favoured; history: figures, "
        "changes)", MOVING),
    Key(("s",), ("single lines",), ("s",), "single lines",
        "the curve of the selected line, on and off; noise: ranked line by line, part by part; of a sweep: one more "
        "figure; spread, apportion: run it, again; history: look again", MOVING),
    Key(("tab", "shift+tab"), ("focus",), ("Tab",), "sheet, page", "sheet, page; in a field: accept and next key",
        MOVING),
    Key(("escape",), ("back",), ("Esc",), "back", "leave the field, close, back to the ledger", MOVING),
    Key(("f",), ("find",), ("f",), "find", "find a key by part of its name", MOVING),
    Key(("enter",), ("act",), ("Enter",), "edit", "edit the focused value; accept; act on the row", VALUES),
    Key(("+", "-"), ("step up", "step down"), ("+", "-"), "step",
        "next value of the series up, down; other values by 5 %", VALUES),
    Key(("*", "/"), ("decade up", "decade down"), ("*", "/"), "decade",
        "a decade up, down; page focused: spread: builds; apportion: all keys, those of the stage", VALUES),
    Key((" ",), ("choose",), ("Space",), "choose",
        "apportion: the key of the row, or of the sheet, may change; again: it stays", VALUES),
    Key(("delete", "backspace"), ("take out",), ("Del",), "take out",
        "take the key out of the file: its default counts", VALUES),
    Key(("t",), ("sheets",), ("t",), "more sheets",
        "targets, supply, tolerances, series, device cards; a card from another file", VALUES),
    Key(("a",), ("add",), ("a",), "add", "add a stage after this line", STAGES),
    Key(("c",), ("copy",), ("c",), "copy", "copy the stage", STAGES),
    Key(("x",), ("remove",), ("x",), "remove", "remove the stage", STAGES),
    Key(("<", ">"), ("move back", "move on"), ("<", ">"), "move", "move the stage towards source, load", STAGES),
    Key(("r",), ("rename",), ("r",), "rename", "rename the stage; references follow", STAGES),
    Key(("k",), ("kind",), ("k",), "kind", "change the stage's kind, keeping what fits", STAGES),
    Key(("o",), ("leave out",), ("o",), "leave out", "leave it out (kept in the file); again: take it in", STAGES),
    Key(("n",), ("note",), ("n",), "note", "note of the line", STAGES),
    Key(("e",), ("text",), ("e",), "text", "the file as text", FILE),
    Key(("u", "U"), ("undo", "redo"), ("u", "U"), "undo", "undo, redo", FILE),
    Key(("w",), ("write",), ("w",), "write", "write the file", FILE),
    Key(("P",), ("post",), ("P",), "post", "post the saved file: its figures and a message, in its record", FILE),
    Key(("q", "ctrl+q", "ctrl+c"), ("leave",), ("q",), "leave", "leave; asks only where work is unsaved", FILE),
    Key(("ctrl+z",), ("suspend",), ("ctrl+z",), "suspend", "suspend, back to the shell; fg returns", FILE),
    Key(("p",), ("pin",), ("p",), "pin", "pin today's figures as the baseline; again: no baseline", LOOKING),
    Key(("=",), ("working",), ("=",), "working", "working of the focused figure; apportion: the plan in words",
        LOOKING),
    Key(("g",), ("decibels",), ("g",), "V/V, dB", "gains in V/V or dB", LOOKING),
    Key(("b",), ("band",), ("b",), "band", "lower or upper end of the band", LOOKING),
    Key(("B",), ("benches",), ("B",), "bench", "measured sweeps of [[bench]] over the response, on and off", LOOKING),
    Key(("!",), ("cautions",), ("!",), "cautions", "cautions and problems", LOOKING),
    Key(("?",), ("help",), ("?",), "help", "every key, and what the words mean", LOOKING),
    Key(("ctrl+l",), ("repaint",), ("ctrl+l",), "repaint", "paint the screen anew", LOOKING),
)

HELP_CELLS = 74  # of a line of the help
_PLAIN = {"←": "Left", "→": "Right", "↑": "Up", "↓": "Down", "…": "..."}


def _actions() -> dict[str, str]:
    found: dict[str, str] = {}
    for key in KEYS:
        actions = key.actions if len(key.actions) > 1 else key.actions * len(key.names)
        for name, action in zip(key.names, actions, strict=True):
            if name in found:
                raise ValueError(f"{name} is bound twice")
            found[name] = action
    return found


ACTIONS: Mapping[str, str] = MappingProxyType(_actions())
"""Character or name of a key -> what it does."""

_SHIFTED = "alt+shift+"


def presses(key: str, character: str | None) -> tuple[tuple[str, str | None], ...]:
    """What was pressed, as (key, character): Alt and a character is Esc, then that character.

    Most terminals send the same for both, and a user who types ahead means Esc.
    """
    if not key.startswith("alt+"):
        return ((key, character),)
    name = key.removeprefix("alt+")
    if key.startswith(_SHIFTED) and len(name) == len("shift+") + 1:
        name = name[-1].upper()
    if character is None or not character.isprintable():
        character = name if len(name) == 1 else None
    return (("escape", None), (name, character))


def printing(key: str, character: str | None) -> str:
    """The text that a key types; "" for one that types none."""
    return character if character is not None and character.isprintable() and not key.startswith("ctrl+") else ""


def name_of(key: str, character: str | None) -> str:
    """What ACTIONS knows a pressed key by."""
    return printing(key, character) or key


def shown(key: Key, plain: bool = False) -> str:
    """The keys of a row as a reader sees them."""
    return " ".join(words(text, plain) for text in key.shown)


def words(text: str, plain: bool) -> str:
    """`text` with arrows and the like spelt out where only ASCII can be shown."""
    if not plain:
        return text
    for sign, word in _PLAIN.items():
        text = text.replace(sign, word)
    return text


Hint = tuple[str, str]
"""Keys and a word for the key line: ("Enter", "edit")."""

_IN_FIELD: tuple[Hint, ...] = (
    ("Enter", "accept"), ("Tab", "accept, next key"), ("Esc", "leave it as it was"))
_IN_LIST: tuple[Hint, ...] = (("type", "to narrow"), ("↑ ↓", "choose"), ("Enter", "take it"), ("Esc", "close"))
_IN_TEXT: tuple[Hint, ...] = (("↑ ↓ PgUp PgDn", "scroll"), ("Esc", "close"))
_IN_ROWS: tuple[Hint, ...] = (("↑ ↓", "choose"), ("Enter", "go there"), ("Esc", "close"))
_IN_FORM: tuple[Hint, ...] = (("type", "to change"), ("↑ ↓", "row"), ("Enter", "next; on the last: make it"),
                              ("Esc", "back"))
_IN_NEW: tuple[Hint, ...] = (("type", "to narrow"), ("↑ ↓", "choose"), ("Enter", "take it"),
                             ("Esc", "take the last back, leave"))
_IN_NOTE: tuple[Hint, ...] = (("Enter", "accept"), ("ctrl+j", "new line"), ("Esc", "leave it as it was"))
_IN_NAME: tuple[Hint, ...] = (("Enter", "accept"), ("Esc", "leave it as it was"))
_IN_CHANGED: tuple[Hint, ...] = (("↑ ↓", "choose"), ("Enter", "do it"), ("Esc", "decide later"))
_IN_DIFFERENCE: tuple[Hint, ...] = (("↑ ↓ PgUp PgDn", "scroll"), ("Esc", "back to the choice"))
_IN_LEAVE: tuple[Hint, ...] = (("↑ ↓", "choose"), ("Enter", "do it"), ("Esc", "stay"))
_IN_WRITING: tuple[Hint, ...] = (
    ("Esc", "take it in"), ("ctrl+u", "undo"), ("ctrl+y", "redo"), ("Tab", "next value"), ("ctrl+s", "write"),
    ("ctrl+f", "find"), ("ctrl+x", "line out"), ("ctrl+g", "as it was"), ("ctrl+q", "leave"))
_IN_FAULTS: tuple[Hint, ...] = (("ctrl+n", "next fault"), *_IN_WRITING[:3], *_IN_WRITING[4:6], *_IN_WRITING[6:])
_IN_SEARCH: tuple[Hint, ...] = (("type", "to find"), ("Enter", "next"), ("↑", "before"), ("Esc", "stay there"))
_IN_POST: tuple[Hint, ...] = (("Enter", "post it"), ("Esc", "post nothing"))
_OVERLAYS = {"help": _IN_TEXT, "working": _IN_TEXT, "cautions": _IN_ROWS, "leave": _IN_LEAVE, "note": _IN_NOTE,
             "rename": _IN_NAME, "post": _IN_POST, "take": _IN_NAME, "start": _IN_FORM, "new": _IN_NEW,
             "changed": _IN_CHANGED, "recovered": _IN_CHANGED, "difference": _IN_DIFFERENCE}
_DIGITS = f"1 … {list(PAGES)[-1]}"
_SHEET = ("Enter", "+ -", "Tab", "=", "u U", "w", "?")
_ON_PAGE = {
    "ledger": (_DIGITS, "Enter", ", .", "Tab", "=", "?"),
    "nodes": (_DIGITS, "Enter", ", .", "Tab", "=", "?"),
    "response": (", .", "z Z", "Enter", "v V", "s", "[ ]", _DIGITS, "B", "Tab", "?"),
    "pulse": (", .", "z Z", "↑ ↓", "Enter", "b", "=", "[ ]", _DIGITS, "Tab", "?"),
    "levels": (", .", "Enter", "b", "=", _DIGITS, "Tab", "?"),
    "noise": (", .", "↑ ↓", "Enter", "s", "v V", "=", "z Z", "[ ]", _DIGITS, "Tab", "?"),
    "leverage": ("Enter", "v V", "b", "=", _DIGITS, "Tab", "?"),
    "spread": ("Enter", "s", "v V", "* /", "[ ]", _DIGITS, "Tab", "?"),
    "apportion": ("Enter", "Space", "v V", "* /", "s", "[ ]", _DIGITS, "Tab", "?"),
    "history": ("↑ ↓", "Enter", "P", "v V", "s", _DIGITS, "Tab", "?"),
}


def hints(focus: str, overlay: str = "", field: bool = False, page: str = "ledger") -> tuple[Hint, ...]:
    """What can be pressed now, the most useful first; the drawing takes as many as fit.

    focus    "sheet" or "page";  overlay  purpose of what lies over the page, "" for nothing;  field  one is open
    page     the one in sight
    """
    if field:
        return _IN_FIELD
    if overlay:
        return _OVERLAYS.get(overlay, _IN_LIST)
    rows = {" ".join(key.shown): key for key in KEYS}
    best = _SHEET if focus == "sheet" else _ON_PAGE[page]
    here = [focus] if focus == "sheet" else [page, focus]
    return tuple((shown(rows[name]), next((_WORDS[at, name] for at in here if (at, name) in _WORDS), rows[name].word))
                 for name in best)


def writing_hints(faults: bool, finding: bool) -> tuple[Hint, ...]:
    """What can be pressed on the text page, where every character is text."""
    return _IN_SEARCH if finding else _IN_FAULTS if faults else _IN_WRITING


_WORDS = {("sheet", "Tab"): "page", ("page", "Tab"): "sheet", ("page", "Enter"): "to its key",
          ("response", ", ."): "cursor", ("response", "Enter"): "next corner", ("response", "s"): "own curve",
          ("pulse", ", ."): "cursor", ("pulse", "↑ ↓"): "figure", ("pulse", "Enter"): "to its mark",
          ("pulse", "b"): "step, sag",
          ("levels", "b"): "other bank",
          ("noise", ", ."): "cursor", ("noise", "v V"): "in, out", ("noise", "s"): "by line",
          ("leverage", "Enter"): "sweep it", ("leverage", "v V"): "rank by",
          ("spread", "s"): "run again", ("spread", "v V"): "figure",
          ("spread", "* /"): "builds", ("spread", "[ ]"): "seed",
          ("apportion", "s"): "run", ("apportion", "v V"): "favour", ("apportion", "* /"): "all, stage",
          ("apportion", "[ ]"): "seed", ("apportion", "Enter"): "run, accept",
          ("history", "Enter"): "baseline", ("history", "s"): "look again", ("history", "v V"): "changes"}


def table() -> list[str]:
    """The table of keys of the README, as lines of Markdown."""
    def cell(keys: Iterable[str]) -> str:
        return " ".join(one if one == "…" else f"`{one}`" for one in keys)

    return ["| key | does |", "| --- | --- |", *(f"| {cell(key.shown)} | {key.does} |" for key in KEYS)]


def help_lines(plain: bool = False) -> list[str]:
    """The table of keys by group, for the help."""
    room = max(len(shown(key, plain)) for key in KEYS)
    lines: list[str] = []
    for group in dict.fromkeys(key.group for key in KEYS):
        lines += ["", group] if lines else [group]
        for key in KEYS:
            if key.group == group:
                first, *more = wrap(words(key.does, plain), HELP_CELLS - room - 4)
                lines += [f"  {shown(key, plain):{room}}  {first}", *(f"  {'':{room}}  {text}" for text in more)]
    return lines
