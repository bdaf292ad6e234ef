"""What a plan proposes: keys with today's and proposed text, figures before and after, and the edit that does it."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from math import log10
from typing import Any

from polebook.book import build
from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.book.targets import Target
from polebook.chain.edits import content, judged, written
from polebook.chain.located import Located, PathRefused
from polebook.chain.model import Chain
from polebook.chain.paths import locate
from polebook.chain.read import known_reading
from polebook.chain.said import raw_text, said
from polebook.param import Param
from polebook.problem import Problem, ProblemsFound
from polebook.quantity import DIMENSIONS, Refused, letter, parse
from polebook.text import literal, splice
from polebook.text.data import find
from polebook.text.edit import Edit
from polebook.text.rearrange import batch
from polebook.text.spans import scan

_DIGITS = re.compile(r"[0-9]+(?:\.[0-9]+)?")
ESTIMATES = "the sum of time constants comes to"
_SECTIONS = frozenset({"overall", "targets"})
Wanted = float | str | None
"""A value in SI units, or as one types it; None takes the key out."""


@dataclass(frozen=True, slots=True)
class Key:
    """One key that a plan may set.

    path       "Q1.rc"
    dimension  of quantity.DIMENSIONS;  unit, of the values
    now, value SI, None where the file does not give the key (now), or the plan takes it out (value)
    now_text, text   the same as the file writes them; "" for none
    """

    path: str
    dimension: str
    unit: str
    now: float | None
    now_text: str
    value: float | None
    text: str

    @property
    def moved(self) -> bool:
        return self.value != self.now


@dataclass(frozen=True, slots=True)
class Judged:
    """One target of the file, today and as proposed."""

    name: str
    before: Target
    after: Target


@dataclass(frozen=True, slots=True)
class Proposal:
    """Values for a chain file, verified: both ledgers are those of files as they are read.

    keys      those that the plan was free to set, in its order; see `Key.moved`
    targets   of the file;  met, all of them as proposed
    cautions  sentences that the chain carries as proposed and does not carry today;  mended, the other way round
    edit      makes the proposal of the text that it was made for, comments kept; empty where nothing moves
    """

    keys: tuple[Key, ...]
    targets: tuple[Judged, ...]
    cautions: tuple[str, ...]
    mended: tuple[str, ...]
    edit: Edit
    before: Ledger
    after: Ledger

    @property
    def met(self) -> bool:
        return all(one.after.met for one in self.targets)

    def document(self) -> dict[str, Any]:
        """As plain data: keys, targets, overall figures before and after; base SI units at full precision."""
        before, after = (build.document(of, _SECTIONS) for of in (self.before, self.after))
        return {
            "keys": [{"path": key.path, "unit": key.unit, "now": key.now, "now_text": key.now_text or None,
                      "value": key.value, "text": key.text or None, "moved": key.moved} for key in self.keys],
            "targets": [{"name": old["name"], "want": old["want"], "before": _told(old), "after": _told(new)}
                        for old, new in zip(before["targets"], after["targets"], strict=True)],
            "overall": {"before": before["overall"], "after": after["overall"]},
            "cautions": list(self.cautions),
            "mended": list(self.mended),
            "met": self.met,
        }


def _told(target: Mapping[str, Any]) -> dict[str, Any]:
    return {key: target[key] for key in ("got", "margin", "met", "why")}


def propose(text: str, file: str, values: Mapping[str, Wanted], label: str = "",
            before: Ledger | None = None) -> Proposal:
    """The proposal that gives each path of `values` its value, of the chain file that `text` is.

    A number is written as the file writes the key: in dB or plain digits where it stands so, else with the letter code.
    label   of the edit, as it will stand among the steps of undo
    before  the ledger of `text`, where it is at hand

    Raises ProblemsFound where a path leads to no number, a value is none that the key may have, or the chain has no
    ledger before or after.
    """
    reading = known_reading(text, file)
    if reading.chain is None:
        raise ProblemsFound(reading.problems, text)
    data, spans = content(reading, text), scan(text)
    steps: list[Callable[[str], Edit]] = []
    spelled: list[tuple[str, Param, str]] = []
    for path, wanted in values.items():
        found = locate(path, data)
        here = raw_text(data, spans, found.path)
        typed = spell(wanted, found, here)
        spelled.append((path, _number(found), here))
        if typed != here:
            steps.append(_step(found, typed, isinstance(find(data, found.path), str), file))
    edit = batch(text, steps, label or f"{len(steps)} value{'s' * (len(steps) != 1)} as planned")
    after_text = edit.apply(text)
    if problems := judged(reading, after_text, file):
        raise ProblemsFound(problems, after_text)
    after_chain = known_reading(after_text, file).chain
    assert after_chain is not None
    old = before if before is not None else ledger(reading.chain)
    new = ledger(after_chain)
    after_data, after_spans = content(known_reading(after_text, file), after_text), scan(after_text)
    keys = tuple(_key(path, param, here, raw_text(after_data, after_spans, locate(path, after_data).path),
                      reading.chain, after_chain) for path, param, here in spelled)
    with within_reach(after_chain):
        told, mended = beyond(new.cautions, old.cautions), beyond(old.cautions, new.cautions)
        both = pairs(old, new)
    return Proposal(keys, both, told, mended, edit, old, new)


def pairs(before: Ledger, after: Ledger) -> tuple[Judged, ...]:
    """The targets of a file in its two ledgers."""
    return tuple(Judged(a.name, a, b) for a, b in zip(before.targets, after.targets, strict=True))


def beyond(cautions: Iterable[Problem], others: Iterable[Problem]) -> tuple[str, ...]:
    """The sentences of cautions that are not among others, whatever figures these tell.

    That an estimate of an edge is off is said of the estimate, not of the chain.
    """
    known = {_kind(one) for one in others}
    return tuple(_sentence(one) for one in cautions if _kind(one) not in known and ESTIMATES not in one.what)


def _sentence(problem: Problem) -> str:
    return f"{problem.what}: {problem.why}"


def _kind(problem: Problem) -> str:
    """What a caution is about, whatever its figures are."""
    return re.sub(r"(?<![A-Za-z])-?[0-9.]+ ?[A-Za-zΩ%]*", "#", f"{problem.what} {problem.fix}")


def _number(found: Located) -> Param:
    if found.param is None or found.param.dimension not in DIMENSIONS:
        raise PathRefused(f"{said(found.number)} is no number", "a plan sets numbers", "name one, such as Q1.rc")
    return found.param


def _key(path: str, param: Param, here: str, there: str, before: Chain, after: Chain) -> Key:
    given, stays = path in before.given, path in after.given
    return Key(path, param.dimension, DIMENSIONS[param.dimension].unit, before.numbers[path] if given else None, here,
               after.numbers[path] if stays else None, there)


def spell(wanted: Wanted, found: Located, here: str) -> str:
    """`wanted` as one would type it where `here` stands; "" to take the key out. `here` itself where it says the same.

    A dB form keeps two decimals, a share four digits.
    """
    if wanted is None or isinstance(wanted, str):
        return (wanted or "").strip()
    dimension = _number(found).dimension
    if here and _says(here, dimension, wanted):
        return here
    if here.strip().endswith("dB") and not DIMENSIONS[dimension].stays_db:
        return f"{round(20 * log10(abs(wanted)), 2) + 0.0:g} dB"
    if dimension == "share":
        return f"{wanted * 100:.4g} %"
    if _DIGITS.fullmatch(here.strip()) and 1.0 <= abs(wanted) < 1000.0:
        return repr(wanted).removesuffix(".0")
    return letter(wanted, dimension) + (" dB" if here.strip().endswith("dB") else "")


def _says(here: str, dimension: str, wanted: float) -> bool:
    try:
        return parse(here, dimension) == (abs(wanted) if here.strip().endswith("dB") else wanted)
    except Refused:
        return False


def _step(found: Located, typed: str, quoted: bool, file: str) -> Callable[[str], Edit]:
    if not typed:
        return lambda text: splice.unset(text, found.path, file)
    value = literal.string(typed) if quoted else written(found, typed)
    return lambda text: splice.set_value(text, found.path, value, file)
