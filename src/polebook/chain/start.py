"""A new chain that computes at once: kinds in signal order -> the text of its file."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from polebook.chain.located import PathRefused
from polebook.chain.start_bias import farad
from polebook.chain.start_cards import NAMES, card_block, table
from polebook.chain.start_stages import FAMILY, LETTER, stage_block
from polebook.chain.suggest import listed, nearest
from polebook.chain.tables import MOST_STAGES
from polebook.quantity import engineering, letter
from polebook.refusal import quoted
from polebook.stages.registry import KINDS

DEFAULT = ("common-emitter", "emitter-follower")
RAIL_V, VALVE_RAIL_V = 12.0, 250.0
LEAST_V, MOST_V = 3.0, 600.0
SOURCE_OHM, DIODE_OHM, LOAD_OHM = 600.0, 10e6, 10e3

__all__ = ["card_block", "default_rail", "new_chain", "stage_block", "wanted"]


@dataclass(frozen=True, slots=True)
class Wanted:
    """A stage that is asked for: `family` is that of its card, "" for a kind without one."""

    kind: str
    family: str


def wanted(words: Sequence[str]) -> list[Wanted]:
    """Kinds as typed, "common-source" or with the family of the device "common-source:mosfet".

    Raises PathRefused with the near names.
    """
    if not words:
        raise PathRefused("no stage is asked for", "a chain has 1 to 64 stages", "name a kind, such as common-emitter")
    if len(words) > MOST_STAGES:
        raise PathRefused(f"{len(words)} stages are asked for", f"a chain has 1 to {MOST_STAGES} of them",
                          "ask for fewer")
    return [_one(word) for word in words]


def _one(word: str) -> Wanted:
    name, _, family = word.strip().partition(":")
    if name not in KINDS:
        near = nearest(name, KINDS)
        raise PathRefused(f"there is no kind of stage {quoted(name)}", f"the kinds are {listed(KINDS)}",
                          f"did you mean {near}?" if near else "polebook kinds tells what each is")
    families = KINDS[name].families
    if family and family not in families:
        takes = f"a {name} stage takes a {listed(families, 'or')} card" if families else f"a {name} takes no card"
        raise PathRefused(f"{quoted(word)} is no stage", takes, f"write {name}")
    return Wanted(name, family or FAMILY[name])


def default_rail(stages: Sequence[Wanted]) -> float:
    """The rail in V where none is named: a valve wants a high one."""
    return VALVE_RAIL_V if any(one.family == "triode" for one in stages) else RAIL_V


def new_chain(kinds: Sequence[str], rail: float | None = None, negative: float = 0.0, source: float | None = None,
              load: float = LOAD_OHM) -> str:
    """The text of a chain file with a stage of each kind, its cards with it.

    rail, negative   V; 3 V and more, and 0 or less
    source           Ω; None: 600 Ω, or a photodiode where a transimpedance stage comes first
    load             Ω

    Raises PathRefused where the kinds, rails or resistances are none that a chain can be made for.
    """
    stages = wanted(kinds)
    rail = default_rail(stages) if rail is None else rail
    _judged(rail, negative, stages[0], source, load)
    families = dict.fromkeys(one.family for one in stages if one.family)
    blocks = [_head(stages, rail), _supply(rail, negative), _source(stages[0], source)]
    before = ""
    for name, one in zip(_names(stages), stages, strict=True):
        blocks.append(stage_block(one.kind, rail, name, NAMES, negative, before, one.family))
        before = one.kind
    blocks += [_load(load), _TARGET, *(card_block(family, NAMES[family], rail) for family in families)]
    return "\n".join(blocks)


def _judged(rail: float, negative: float, first: Wanted, source: float | None, load: float) -> None:
    if not LEAST_V <= rail <= MOST_V:
        raise PathRefused(f"no chain is made for a rail of {engineering(rail, 'V')}",
                          f"stages are biased for {LEAST_V:g} V to {MOST_V:g} V", "name such a rail, for example 12")
    if not -MOST_V <= negative <= 0:
        raise PathRefused(f"a negative rail of {engineering(negative, 'V')} is none",
                          f"it lies between -{MOST_V:g} V and 0, and is written with its sign", "write it like -12")
    if source is not None and (source < 0 or (source == 0 and first.kind == "transimpedance")):
        why = "a transimpedance stage takes a current, and an ideal voltage source gives none that it could turn"
        raise PathRefused(f"a source of {engineering(source, 'Ω')} is none for this chain",
                          why if source == 0 else "a resistance is not below zero", "name one such as 600")
    if load <= 0:
        raise PathRefused(f"a load of {engineering(load, 'Ω')} is none", "a load is above zero", "name one such as 10k")


def _names(stages: Sequence[Wanted]) -> list[str]:
    """Q1, Q2, U1: a letter for the sort of device, counted in signal order."""
    counts: dict[str, int] = {}
    names = []
    for one in stages:
        first = LETTER.get(one.family, "B" if one.kind == "block" else "L")
        counts[first] = counts.get(first, 0) + 1
        names.append(f"{first}{counts[first]}")
    return names


def _head(stages: Sequence[Wanted], rail: float) -> str:
    what = ", ".join(one.kind for one in stages[:4]) + (" ..." if len(stages) > 4 else "")
    return (
        f"# A chain to begin with, biased for {rail:g} V by rules of thumb. The cards at the end carry\n"
        "# typical figures: put in those of your own devices. `polebook kinds` lists every key.\n"
        f'format = 1\ntitle  = "New chain: {what}"\n'
    )


def _supply(rail: float, negative: float) -> str:
    rows = [("positive", f'"{rail:g}"', "")]
    if negative:
        rows.append(("negative", f'"{negative:g}"', ""))
    return table("[supply]", rows)


def _source(first: Wanted, ohms: float | None) -> str:
    if first.kind == "transimpedance":
        return table("[source]", [
            ("kind", '"current"', "a photodiode or the like"),
            ("resistance", f'"{letter(DIODE_OHM if ohms is None else ohms, "resistance")}"', "across it"),
            ("capacitance", '"47p"', "of the diode and its cable"),
        ])
    return table("[source]", [
        ("kind", '"voltage"', ""),
        ("resistance", f'"{letter(SOURCE_OHM if ohms is None else ohms, "resistance")}"', "0 is an ideal source"),
    ])


def _load(ohms: float) -> str:
    return table("[load]", [
        ("couple", farad(ohms), ""),
        ("resistance", f'"{letter(ohms, "resistance")}"', ""),
        ("capacitance", '"100p"', "the cable to it"),
    ])


_TARGET = """# [target]            # what the chain must reach: take the marks out, and set your own
# gain    = "40 dB"
# lower   = "50"
# upper   = "100k"
# peaking = "0.5 dB"
"""
