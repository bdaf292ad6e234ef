"""Text of a chain file -> Chain, or every fault of it at once."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import lru_cache
from types import MappingProxyType
from typing import Any

from polebook.chain import allotments, benches, card_checks, cards, digest, rows, sections, stages
from polebook.chain.desk import MOST_FAULTS, Desk, Owner, TextPath, TooMany
from polebook.chain.model import Chain
from polebook.chain.rows import Row
from polebook.chain.suggest import listed
from polebook.chain.tables import FORMAT, SECTIONS, SETTINGS, TABLES, TOP
from polebook.problem import Place, Problem, ProblemsFound
from polebook.refusal import quoted
from polebook.text import files, toml
from polebook.text.spans import Spans, Unscannable, scan

_TOP = Owner((), "", "the file")


@dataclass(frozen=True, slots=True)
class Reading:
    """One reading of a text: the chain where it has no fault, and each fault with the text path it concerns."""

    chain: Chain | None
    faults: tuple[tuple[Problem, TextPath], ...]
    problems: list[Problem]
    data: Mapping[str, Any] | None


def load(path: str) -> Chain:
    """The chain of the file at `path`. Raises ProblemsFound with every fault."""
    return parse(files.read(path).text, path)


def parse(text: str, file: str) -> Chain:
    """The chain of a text; `file` is the name that messages carry. Raises ProblemsFound with every fault."""
    chain, problems = examine(text, file)
    if chain is None:
        raise ProblemsFound(problems, text)
    return chain


def examine(text: str, file: str) -> tuple[Chain | None, list[Problem]]:
    """The chain, or None and every fault in the order of the file."""
    reading = reading_of(text, file)
    return reading.chain, reading.problems


def reading_of(text: str, file: str) -> Reading:
    """Reads `text`, keeping what an edit needs to compare two readings."""
    data, problems = toml.read(text, file)
    if data is None:
        return Reading(None, tuple((problem, ()) for problem in problems), problems, None)
    desk = Desk(text, file, _spans(text))
    try:
        chain = _chain(desk, data)
    except TooMany:
        return Reading(None, tuple(desk.found), [*desk.problems(), _and_more(file)], data)
    if desk.found:
        return Reading(None, tuple(desk.found), desk.problems(), data)
    return Reading(replace(chain, digest=digest.of(chain), text=text), (), [], data)


@lru_cache(maxsize=4)
def known_reading(text: str, file: str) -> Reading:
    """`reading_of`, kept for the texts that were read last: an edit and what follows it read each one once."""
    return reading_of(text, file)


def _and_more(file: str) -> Problem:
    return Problem(
        Place(file),
        f"the file has over {MOST_FAULTS} faults, and the rest is not looked for",
        "it is most likely not a chain file",
        "mend these first, or name another file",
    )


def _spans(text: str) -> Spans:
    try:
        return scan(text)
    except Unscannable:  # valid TOML whose places are not found: faults are told without lines
        return Spans(text)


def _chain(desk: Desk, top: Mapping[str, Any]) -> Chain:
    row = _top(desk, top)
    sections.supply(desk, top)
    kind = sections.source(desk, top)
    seen_cards = cards.read(desk, top["device"]) if "device" in top else {}
    if "stage" not in top:
        stages.no_stage(desk)
    seen = stages.read(desk, top["stage"], seen_cards) if "stage" in top else []
    for name in dict.fromkeys(name for one in seen for name in (one.stage.device, one.stage.upper) if name):
        card_checks.in_use(desk, seen_cards[name].family, seen_cards[name].keys, seen_cards[name].owner)
    sections.load(desk, top)
    target = sections.target(desk, top, kind)
    shape = sections.tolerance(desk, top)
    preferred = sections.preferred(desk, top)
    names = [one.stage.name for one in seen if one.stage.name]
    bench = benches.read(desk, top["bench"], stages.names(top), kind) if "bench" in top else ()
    allotments.check(desk, top, {one.stage.name for one in seen if one.stage.left_out}, names)
    stated = top.get("target")
    return Chain(
        path=desk.file,
        title=row.texts.get("title", ""),
        source_kind=kind,
        stages=tuple(one.stage for one in seen),
        cards=MappingProxyType({name: card.card for name, card in seen_cards.items()}),
        numbers=MappingProxyType(desk.numbers),
        given=frozenset(desk.given),
        places=MappingProxyType(desk.places),
        preferred=MappingProxyType(preferred),
        spread_shape=shape,
        benches=bench,
        note=row.texts.get("note", ""),
        target_note=target.texts.get("note", ""),
        has_targets=isinstance(stated, dict) and not SETTINGS.issuperset(stated),
    )


def _top(desk: Desk, top: Mapping[str, Any]) -> Row:
    """The keys above the first header, and that every table is one that a chain file has."""
    plain = {key: raw for key, raw in top.items() if key not in (*TABLES, "format")}
    known = [*(param.key for param in TOP), *TABLES]

    for key, raw in tuple(plain.items()):
        if isinstance(raw, dict) or (isinstance(raw, list) and raw and isinstance(raw[0], dict)):
            near = desk.near(key, TABLES)
            desk.fault(
                (key,),
                f"unknown table [{key}]",
                f"a chain file has the tables {listed(TABLES)}",
                f"write [{near}], the nearest known table, or take it out" if near else "take it out",
                "key",
            )
            del plain[key]

    def unknown(key: str) -> tuple[str, str]:
        near = desk.near(key, known)
        homes = [f"[{name}]" for name, params in SECTIONS.items() if key in {param.key for param in params}]
        if homes:
            return f"it stands above the first table, and is a key of {listed(homes)}", f"put it below {homes[0]}"
        return (
            "above the first table stand format, title and note",
            f"write {near}, the nearest known name, or take it out" if near else "take it out",
        )

    row = rows.read(desk, plain, _TOP, TOP[1:], unknown)
    raw = top.get("format")
    if "format" not in top:
        desk.fault(
            ("format",),
            "the file does not say its format",
            "every chain file begins with the format that it is written in",
            f"add format = {FORMAT} as the first line",
            "key",
        )
    elif type(raw) is not int or raw != FORMAT:
        why = f"only format {FORMAT} is known" if type(raw) is int else "the format is a plain number without quotes"
        desk.fault(("format",), f"{quoted(raw)} is not a known format", why, f"write format = {FORMAT}")
    return row
