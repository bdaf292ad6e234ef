"""What the apportion page shows: keys that may change, what a plan is asked, whether it holds for the text of now."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import TYPE_CHECKING, Any, Literal

from polebook.book.targets import NAMES, Target
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain
from polebook.chain.paths import locate
from polebook.chain.read import known_reading
from polebook.chain.said import raw_text
from polebook.problem import Problem, ProblemsFound
from polebook.session.sheets import content_of
from polebook.session.state import Session, sheets_of
from polebook.text.edit import Edit

if TYPE_CHECKING:  # the engine of plans costs 30 ms at start-up
    from polebook.plan.apportion.handles import Handle
    from polebook.tui.view import Apportion, State

FAVOURS = ("", *(name for name in NAMES if name != "yield"))
"""What may be favoured, nothing first."""

Standing = Literal["none", "fresh", "accepted", "old"]


@dataclass(frozen=True, slots=True)
class Asked:
    """What a run is asked: paths that may change, () for those that the file says; what is favoured; its seed."""

    free: tuple[str, ...]
    favour: str
    seed: int


@dataclass(frozen=True, slots=True, eq=False)
class Run:
    """A plan that was found.

    text   that it is of;  after  the same as the plan would have it;  edit  what leads there
    told   the plan as `report.apportion` takes it
    """

    asked: Asked
    text: str
    after: str
    edit: Edit
    told: Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Reached:
    """A target as the best plan so far has it."""

    name: str
    got: float | None
    met: bool | None


@dataclass(frozen=True, slots=True, eq=False)
class Going:
    """A run at work.

    text     that it is of;  targets  as they stood when it began
    reached  those of the best plan so far, () while it has no figures;  begun  there was something of it
    """

    asked: Asked
    text: str
    targets: tuple[Target, ...]
    reached: tuple[Reached, ...] = ()
    begun: bool = False


@dataclass(frozen=True, slots=True)
class Row:
    """One key of the page.

    text    as the file has it now, "" where it does not
    handle  None where no plan of now can set it
    key     of the shown plan where it moves it, as its answer has it
    """

    path: str
    text: str
    handle: Handle | None = None
    key: Mapping[str, Any] | None = None

    @property
    def owner(self) -> str:
        """The stage, or "load", or whatever else has the key."""
        head, _, rest = self.path.partition(".")
        return f"{head}.{rest.partition('.')[0]}" if head == "device" else head


@dataclass(frozen=True, slots=True)
class Known:
    """What a text has for plans: every key that could change, and the paths that do unless they are chosen otherwise.

    origin  who says so: "file", "fitted"; "" where there is nothing
    """

    handles: Mapping[str, Handle]
    usual: tuple[str, ...]
    origin: str


NOTHING = Known({}, (), "")


def known(state: State) -> Known:
    """That of the text as it is now; nothing while it has faults."""
    return _known(state.session.history.text, state.session.path, state.view.apportion.also)


@lru_cache(maxsize=4)
def _known(text: str, file: str, also: tuple[str, ...]) -> Known:
    from polebook.plan.apportion.handles import fitted, free  # deferred: 30 ms that the first paint does without

    chain = known_reading(text, file).chain
    if chain is None:
        return NOTHING
    data, _ = content_of(text)
    found: dict[str, Handle] = {}
    usual: tuple[str, ...] = ()
    origin = ""
    try:
        by_file = free(chain, data, ())
        usual, origin = tuple(handle.path for handle in by_file.handles), by_file.origin
        found.update((handle.path, handle) for handle in by_file.handles)
    except ProblemsFound:  # nothing is soldered in, or nothing that the file calls free can be set
        pass
    for path in (*fitted(chain), *also):
        if path not in found and (handle := _handle(chain, data, path)) is not None:
            found[path] = handle
    names = [stage.name for stage in chain.stages]
    ranks = {name: number for number, name in enumerate([*names, "load"])}
    order = {path: number for number, path in enumerate([*fitted(chain), *found])}
    paths = sorted(found, key=lambda path: (ranks.get(path.partition(".")[0], len(ranks)), order[path]))
    return Known({path: found[path] for path in paths}, usual, origin)


def _handle(chain: Chain, data: Mapping[str, Any], path: str) -> Handle | None:
    return None if isinstance(found := handle_of(chain, data, path), Problem) else found


def handle_of(chain: Chain, data: Mapping[str, Any], path: str) -> Handle | Problem:
    """What a plan may do with the key at a path, or why it may do nothing."""
    from polebook.plan.apportion.handles import free  # deferred as above

    try:
        return free(chain, data, (path,)).handles[0]
    except ProblemsFound as found:
        return found.problems[0]


def rows(state: State) -> tuple[Row, ...]:
    """Those that the shown plan moves, then all others that may change, in the order of the chain."""
    run, session, can = state.view.apportion.run, state.session, known(state)
    data, spans = content_of(session.history.text)
    moved = {key["path"]: key for key in run.told["keys"] if key["moved"]} if run is not None else {}
    sheets = set(sheets_of(session))
    found = [Row(path, _text(data, spans, path), can.handles.get(path), key=key) for path, key in moved.items()]
    found = [row for row in found if row.owner in sheets]
    return (*found, *(Row(path, _text(data, spans, path), handle) for path, handle in can.handles.items()
                      if path not in moved))


def _text(data: Mapping[str, Any], spans: Any, path: str) -> str:
    try:
        return raw_text(data, spans, locate(path, data).path)
    except PathRefused:
        return ""


def chosen(state: State) -> frozenset[str]:
    """Paths of the keys that may change."""
    here, can = state.view.apportion.chosen, known(state)
    return frozenset(can.usual if here is None else here & can.handles.keys())


def choosing(state: State, paths: frozenset[str]) -> frozenset[str] | None:
    """Those paths as they are kept: None for what the file says anyway, which then follows the file."""
    return None if paths == frozenset(known(state).usual) else paths


def asked(state: State) -> Asked:
    """What the next run is asked."""
    here = state.view.apportion
    free = () if here.chosen is None else tuple(path for path in known(state).handles if path in here.chosen)
    return Asked(free, here.favour, here.seed)


def standing(state: State) -> Standing:
    """What the shown plan is to the text as it is now."""
    run, text = state.view.apportion.run, state.session.history.text
    if run is None:
        return "none"
    return "fresh" if text == run.text else "accepted" if text == run.after else "old"


def holds(state: State) -> bool:
    """Whether what is shown is of the text of now, and what the next run is asked."""
    run = state.view.apportion.run
    return run is not None and standing(state) == "fresh" and run.asked == asked(state)


def at(among: Sequence[Row], here: Apportion, focused: str) -> int:
    """The chosen row: that of the sheet's focused key, else the last one that was chosen, else the first."""
    paths = [row.path for row in among]
    return next((paths.index(path) for path in (focused, here.row) if path in paths), 0)


def followed(here: Apportion, before: Session, after: Session) -> Apportion:
    """The user's choice once an edit has given a stage another name: its keys are those that they were."""
    if (here.chosen is None and not here.also) or before.chain is None or after.chain is None:
        return here
    old, new = ([stage.name for stage in of.chain.stages] for of in (before, after) if of.chain is not None)
    differ = [(one, other) for one, other in zip(old, new, strict=False) if one != other]
    if len(old) != len(new) or len(differ) != 1 or differ[0][0] in new:
        return here

    def named(path: str) -> str:
        head, dot, rest = path.partition(".")
        return f"{differ[0][1]}{dot}{rest}" if head == differ[0][0] else path

    return replace(here, chosen=None if here.chosen is None else frozenset(map(named, here.chosen)),
                   also=tuple(map(named, here.also)), row=named(here.row))
