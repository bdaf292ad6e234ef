"""Keys of the history page: a row, the row as the baseline, a look anew, a post; and what was found out taken in."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from os.path import basename
from typing import Any

from polebook.problem import Problem, printable
from polebook.session.state import Against, set_against, unpin
from polebook.tui.control.base import Done, Work, at, done, refuse, say, stepping, still, told
from polebook.tui.control.typing import insert, one_line, typed
from polebook.tui.histories import KEPT, NOW, Answer, Known, Request, Row, Then, chosen, rows, then_of
from polebook.tui.view import Overlay, State


def looked(state: State) -> State:
    """The state as the page is opened, or asked to look again: all of it is to be found out anew."""
    return _with(state, asked=state.view.past.asked + 1)


def again(state: State) -> Done:
    """A look anew at what may have come meanwhile."""
    return say(looked(state), "looking again at posts and revisions")


def count(state: State) -> int:
    """How many rows the page has."""
    return len(rows(state))


def act(state: State) -> Done:
    """The row as the baseline; once more: none."""
    row = chosen(state, rows(state))
    against = state.session.against
    if row.key == NOW:
        return refuse(state, "this is what the others are told against", "choose a post or a revision; p pins today's")
    if against is not None and against.row == row.key:
        return say(replace(state, session=unpin(state.session)), f"{against.name} is the baseline no more")
    if row.post is not None:
        return say(replace(state, session=set_against(state.session, _against(row), None)), _of_post(row))
    then = then_of(state, row)
    if then is None:
        return say(_with(state, take=row.key), f"{row.name} becomes the baseline as soon as it is solved")
    return _revision(state, row, then)


def _of_post(row: Row) -> str:
    holder = _holder(row)
    return f"{row.full} is the baseline" + (f"; {holder} has its curves" if holder else ", in figures, not in curves")


def _holder(row: Row) -> str:
    """The newest revision that has the chain of a post."""
    return next((name for name in row.same if name != NOW and not name.startswith("post ")), "")


def _against(row: Row) -> Against:
    return Against(row.key, row.full, row.name, row.post, _holder(row) if row.post is not None else "")


def _revision(state: State, row: Row, then: Then) -> Done:
    if then.ledger is None:
        return refuse(state, f"{row.name} has no figures", told(then.problem) if then.problem is not None else "")
    session = set_against(state.session, _against(row), then.ledger)
    return say(replace(state, session=session), f"{row.name} of {row.day} is the baseline, on every page")


def _row(state: State, by: int) -> Done:
    """The row before or after."""
    found = rows(state)
    here = found.index(chosen(state, found))
    return done(_with(state, row=found[min(max(here + by, 0), len(found) - 1)].key))


def _end(state: State, to: int) -> Done:
    return done(_with(state, row=rows(state)[to].key))


def _changes(state: State) -> Done:
    """Figures, or the changes by meaning over the whole width."""
    spread = not state.view.past.spread
    return say(_with(state, spread=spread), "what changed, by meaning" if spread else "figures then and now")


def post(state: State) -> Done:
    """The message of a post, open to be written; else what is to be done first."""
    session = state.session
    if session.held or session.read_only:
        return refuse(state, "nothing can be posted here", session.held or session.read_only)
    if state.care.theirs is not None:
        return refuse(state, "the file has changed on the disk", "w asks what is to become of it; then P posts")
    if state.unsaved or not session.exists:
        return refuse(state, "only what is saved can be posted", "w writes the file, then P posts it")
    if session.ledger is None:
        return refuse(state, "there are no figures to post", "! tells what is wrong with the file")
    if state.view.past.post is not None:
        return refuse(state, "a post is being made", "a moment")
    return done(at(state, overlay=Overlay("post", "post, why", text=_last(state.view.past.known)), field=None))


def _last(known: Known | None) -> tuple[str, ...]:
    """What stands beside the field: the message of the post before."""
    about = "Enter posts the figures of the saved file, with its date, in the record beside it."
    if known is None or not known.posts:
        return (about,)
    last = known.posts[0]
    return (about, f"post 1 of {last.date}: {' '.join(last.message.split()) or 'without a message'}")


def typing(state: State, overlay: Overlay, key: str, character: str | None) -> Done:
    """A key while the message is written."""
    if key in ("enter", "tab"):
        request = Request(state.session.history.text, overlay.typed.strip())
        return say(_with(at(state, overlay=None), post=request), "posting")
    found = typed(overlay.typed, overlay.cursor, key, character)
    if found is None:
        return done(state)
    return done(at(state, overlay=replace(overlay, typed=found[0], cursor=found[1])))


def paste(overlay: Overlay, text: str) -> Overlay:
    """The message with pasted text put in."""
    new, cursor = insert(overlay.typed, overlay.cursor, one_line(text))
    return replace(overlay, typed=new, cursor=cursor)


def overlaid(state: State) -> Done:
    """The sweeps of the benches over the response, on and off."""
    chain = state.session.chain
    if chain is None or not any(one.file for one in chain.benches):
        return refuse(state, "no bench of this file has a sweep", 'a table [[bench]] with file = "sweep.csv" has one')
    shown = not state.view.past.overlaid
    where = "" if state.view.page == "response" else " of page 3"
    return say(_with(state, overlaid=shown), f"bench sweeps {'over' if shown else 'off'} the response{where}")


def taken(state: State, found: Answer) -> State:
    """The state with what was found out."""
    past = state.view.past
    if found.posted is not None:
        return _posted(state, found)
    if found.known is not None:
        return _listed(state, found.known)
    if found.benches is not None:
        return _swept(_with(state, benches=found.benches), found)
    if found.then is not None:
        others = tuple(one for one in past.thens if one.blob != found.then.blob)
        return _taken(_with(state, thens=(*others, found.then)[-KEPT:]))
    if past.known is None:
        return state
    return _renamed(_with(state, known=replace(past.known, texts={**past.known.texts, **found.texts})))


def _listed(state: State, known: Known) -> State:
    """The list, with the texts that were read before; a post that was just made is chosen."""
    past = state.view.past
    before = past.known.texts if past.known is not None else {}
    texts = {one.blob: before[one.blob] for one in known.revisions if one.blob in before}
    state = _with(state, known=replace(known, texts=texts))
    if past.take not in (row.key for row in rows(state)):
        state = _with(state, take="")
    if past.told and (made := next((row for row in rows(state) if row.name == "post 1"), None)) is not None:
        state = _with(state, row=made.key, told=False)
    return _renamed(state)


def _renamed(state: State) -> State:
    """The state with its baseline by the name that it has now: posts are counted from the newest."""
    against = state.session.against
    row = next((one for one in rows(state) if against is not None and one.key == against.row), None)
    if row is None or against == _against(row):
        return state
    return replace(state, session=replace(state.session, against=_against(row)))


def _taken(state: State) -> State:
    """The state with the row as the baseline that was waited for."""
    row = next((one for one in rows(state) if one.key == state.view.past.take), None)
    then = then_of(state, row) if row is not None else None
    if row is None or then is None:
        return state
    return _revision(_with(state, take=""), row, then)[0]


def _posted(state: State, found: Answer) -> State:
    state = _with(state, post=None)
    if found.posted is None or isinstance(found.posted, Problem):
        text = told(found.posted) if found.posted is not None else ""
        return say(state, f"not posted: {text}", bad=True)[0]
    new, before, where = found.posted.new, found.posted.before, printable(basename(found.posted.path))
    if new is None:
        return say(state, f"nothing to post: post 1 of {before.date if before else ''} says all of it already; another "
                          "message would make another")[0]
    moved = len(found.posted.moved)
    since = f"; {moved} figure{'s' if moved != 1 else ''} moved since {before.date}" if before is not None else ""
    return say(looked(_with(state, told=True)), f"posted in {where}{since}")[0]


def _swept(state: State, found: Answer) -> State:
    """The state told of the first sweep that is at fault."""
    bad = next((one for one in (found.benches.overlays if found.benches else ()) if one.problems), None)
    return state if bad is None else say(state, f"bench {bad.number}: {told(bad.problems[0])}", bad=True)[0]


def _with(state: State, **changed: Any) -> State:
    return at(state, past=replace(state.view.past, **changed))


OWN: Mapping[str, Work] = {
    "row before": stepping(_row, -1),
    "row after": stepping(_row, 1),
    "first line": stepping(_end, 0),
    "last line": stepping(_end, -1),
    "next curve": still(_changes),
    "curve before": still(_changes),
    "single lines": still(again),
}
"""Action -> what it does on this page."""
