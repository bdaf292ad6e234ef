"""A comparison as plain data: what changed, what it did to every figure, and which change did how much."""

from __future__ import annotations

import re
from collections.abc import Callable, Generator, Mapping, Sequence
from dataclasses import replace
from typing import Any

from polebook.book import build
from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.plan.proposal import beyond
from polebook.problem import Problem
from polebook.record.changes import Changes
from polebook.record.effects import Figure, comparable, document, ranked, shared
from polebook.record.matched import Matched
from polebook.record.mixtures import OF_THE_STEP, Cause, Stopped, asks_for_step, causes
from polebook.record.posted import WHOLE, Post
from polebook.record.posted_figures import figures, moved

_SECTIONS = frozenset({"overall", "targets", "account"})
_TARGETS_ALONE = frozenset({"swing", "yield"})
_JUDGED = ("want", "got", "margin", "met", "why")


def compare(found: Changes, before: Ledger, after: Ledger,
            stop: Callable[[], bool] = lambda: False) -> Generator[tuple[int, int], None, dict[str, Any]]:
    """Two files with the ledgers of both, yields handed in; yields (done, total) meanwhile.

    Base SI units at full precision. "causes" is None where nothing acts, or once `stop` says so ("stopped" is then
    true). Raises ProblemsFound where one of the two is beyond what can be computed.
    """
    with within_reach(after.chain):
        told = _figures(before, after)
        old, new = _named_as_after(before.cautions, found.matched), after.cautions
        told |= {"cautions": list(beyond(new, old)), "mended": list(beyond(old, new))}
    work, made, stopped = causes(found, stop), None, False
    if found.acting:
        try:
            made = yield from work
        except Stopped:
            stopped = True
    return {
        "changes": [{"sort": one.sort, "path": one.path, "before": one.before or None, "after": one.after or None,
                     "text": one.text, "acts": one.acts} for one in found.listed],
        "comments": found.comments, "spelled": found.spelled, "laid_out": found.laid_out,
        **told,
        "causes": None if made is None else _causes(made, told["overall"], asks_for_step(found)),
        "stopped": stopped,
    }


def compare_post(post: Post, after: Ledger) -> dict[str, Any]:
    """A file against what was posted of it: its figures as a post keeps them, so nothing of the causes."""
    mine = figures(after)
    both = moved(post.figures, mine)
    numbers = [{one.name: value for one in both if isinstance(value := getattr(one, side), float)}
               for side in ("before", "after")]
    words = [{"name": one.name, "before": one.before, "after": one.after} for one in both
             if not isinstance(one.before, float) and not isinstance(one.after, float)]
    return {"gain_unit": mine["overall"][WHOLE]["gain_unit"],
            "figures": [_row(one) for one in ranked(*numbers)], "words": words,
            "targets": {"before": _plain(post.figures["targets"]), "after": _plain(mine["targets"])}}


def _plain(rows: Mapping[str, Mapping[str, object]]) -> dict[str, dict[str, object]]:
    return {name: dict(row) for name, row in rows.items()}


def _figures(before: Ledger, after: Ledger) -> dict[str, Any]:
    old, new = (build.document(of, _SECTIONS) for of in (before, after))
    numbers = [whole | _account(side["account"]) | _got(side["targets"] or ()) for whole, side in
               zip(comparable(old["overall"], new["overall"]), (old, new), strict=True)]
    rows: dict[str, list[Any]] = {entry["name"]: [None, None] for side in (new, old) for entry in side["targets"] or ()}
    for at, side in enumerate((old, new)):
        for entry in side["targets"] or ():
            rows[entry["name"]][at] = {key: entry[key] for key in _JUDGED}
    return {
        "overall": {"before": old["overall"], "after": new["overall"]},
        "figures": [_row(one) for one in ranked(*numbers)],
        "targets": sorted(({"name": name, "before": pair[0], "after": pair[1]} for name, pair in rows.items()),
                          key=_moved_by, reverse=True),
    }


def _moved_by(target: Mapping[str, Any]) -> float:
    """How much a target's figure moved, to rank it among the others."""
    name, got = target["name"], [side["got"] if side else None for side in (target["before"], target["after"])]
    return ranked(*({name: value} if value is not None else {} for value in got))[0].size if any(got) else 0.0


def _named_as_after(cautions: Sequence[Problem], matched: Matched) -> list[Problem]:
    """Cautions of the earlier file with stages and cards called as in the later one."""
    names = {old: new for pairs in (matched.stages, matched.cards) for new, old in pairs.items() if old != new}
    if not names:
        return list(cautions)
    word = re.compile(rf"(?<![\w-])(?:{'|'.join(map(re.escape, names))})(?![\w-])")

    def renamed(text: str) -> str:
        return word.sub(lambda found: names[found[0]], text)

    return [replace(one, what=renamed(one.what), why=renamed(one.why), fix=renamed(one.fix)) for one in cautions]


def _account(account: Mapping[str, Mapping[str, float | None]]) -> dict[str, float]:
    return {f"account.{end}.{key}": value for end, row in account.items() for key, value in row.items()
            if key in ("lost_db", "left_db") and value is not None}


def _got(targets: Sequence[Mapping[str, Any]]) -> dict[str, float]:
    """What targets are judged by that is no figure of the whole chain."""
    return {f"targets.{one['name']}.got": one["got"] for one in targets
            if one["name"] in _TARGETS_ALONE and one["got"] is not None}


def _row(one: Figure) -> dict[str, Any]:
    return {"name": one.name, "before": one.delta.before, "after": one.delta.after, "way": one.delta.way,
            "difference": one.delta.delta, "moved": one.delta.moved}


def _causes(made: tuple[Cause, ...], overall: Mapping[str, Mapping[str, Any]], step: bool) -> dict[str, Any]:
    told = [one for one in ranked(*comparable(overall["before"], overall["after"]))
            if step or one.name.rpartition(".")[2] not in OF_THE_STEP]
    return {"items": [{"changes": list(one.changes), "why": one.why or None} for one in made],
            "figures": [document(shared(one, made)) for one in told]}
