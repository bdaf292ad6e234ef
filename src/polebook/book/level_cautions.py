"""What to warn of where signals clip, parts get hot, or people may be connected."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import TYPE_CHECKING

from polebook.book.cautions import CODES
from polebook.book.direct import amplifier
from polebook.chain.model import Chain, Stage
from polebook.chain.suggest import listed
from polebook.devices import ratings
from polebook.problem import Problem
from polebook.quantity import engineering

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

HOT_K = 60.0  # rise above the air from which a part burns at a touch, in a room of 25 °C at the latest
PEOPLE = re.compile(r"(?<!\w)(electrodes?|patients?|skin(?! (?:effect|depth))|scalps?|e[ckemo]g|heartbeats?|muscles?|"
                    r"wearers?|implants?|catheters?|biopotentials?|medical)(?!\w)", re.IGNORECASE)


def cautions(of: Ledger) -> Iterator[Problem]:
    """Clipping, heat, and equipment that is connected to people."""
    if "source.largest" in of.chain.given and of.levels is not None:
        yield from _clipping(of)
    for stage in of.chain.stages:
        if stage.device and not stage.left_out:
            yield from _hot(of, stage)
    yield from _people(of.chain)


def _caution(chain: Chain, owner: str, what: str, why: str, fix: str) -> Problem:
    return Problem(chain.places.get(owner), what, why, fix, "caution")


def _clipping(of: Ledger) -> Iterator[Problem]:
    """The largest signal against the clip levels; and what is not known of these."""
    levels, unit = of.levels, "V" if of.chain.source_kind == "voltage" else "A"
    if levels is None:
        return
    first, passes, largest = levels.first, levels.largest_source, of.chain.get("source.largest", 0.0) or 0.0
    if first is not None and first.least is not None and passes is not None and passes < largest:
        node = levels.names[first.node]
        there = levels.per_source(first.node) * largest
        yield _caution(
            of.chain, first.stage, f"the largest signal clips {first.stage}",
            f"it would come to {engineering(there, 'V')} at {node}, where {first.stage} ends at "
            f"{engineering(first.least.volts or 0.0, 'V')} ({first.least.by})",
            f"no more than {engineering(passes, unit)} of source passes: take less gain, or a stage that swings wider")
    if levels.unknown:
        yield _caution(
            of.chain, levels.unknown[0], f"how far {listed(levels.unknown)} can swing is not wholly known",
            f"the file states no clip level, no supply or no bias for {'it' if len(levels.unknown) == 1 else 'them'}",
            "give clip of a block, the supply, or what sets the bias; the source that passes may be smaller than told")


def _hot(of: Ledger, stage: Stage) -> Iterator[Problem]:
    """What a device dissipates against its thermal resistance; an op-amp's ratings too."""
    if of.chain.cards[stage.device].family == "opamp":
        yield from _amplifier(of, stage)
        return
    for name, card, what in ((stage.name, stage.device, stage.name),
                             (f"{stage.name}_upper", stage.upper or stage.device, f"the upper device of {stage.name}")):
        point = of.solution.circuit.points.get(name)
        if point is not None and point.current is not None and point.across is not None:
            yield from _rise(of.chain, stage.name, card, what, point.current * point.across)


def _rise(chain: Chain, owner: str, card: str, what: str, watts: float) -> Iterator[Problem]:
    theta = chain.get(f"device.{card}.theta")
    if theta is not None and watts * theta > HOT_K:
        yield _caution(
            chain, owner, f"{what} gets {watts * theta:.0f} K hotter than the air around it",
            f"{engineering(watts, 'W')} on {theta:g} K/W (theta of card {card}): hot enough to burn whoever touches "
            "it, and what stands beside it",
            "cool it or take less from it, and let it cool down before you touch it")


def _amplifier(of: Ledger, stage: Stage) -> Iterator[Problem]:
    chain, card = of.chain, stage.device
    if not any(f"device.{card}.{key}" in chain.numbers for key in ("p_max", "v_max", "i_max", "theta")):
        return
    found = amplifier(chain, of.rails, stage, of.solution.circuit.points[stage.name].output_v)
    told = ratings.past(lambda key: chain.numbers.get(f"device.{card}.{key}"),
                        {"p_max": found.watts, "v_max": found.span,
                         "i_max": None if found.output is None else abs(found.output)})
    for key, sentence in told:
        yield _caution(chain, stage.name, f"{stage.name} {sentence}", ratings.why(key, card),
                       "lower the supply or what its output drives at d.c., or take a device that stands it")
    if found.watts is not None:
        yield from _rise(chain, stage.name, card, stage.name, found.watts)


def _people(chain: Chain) -> Iterator[Problem]:
    """A plain word where the file speaks of what is connected to people; nothing else could tell it."""
    for text in (chain.title, chain.note, chain.target_note, *(stage.note for stage in chain.stages),
                 *(card.note for card in chain.cards.values())):
        found = PEOPLE.search(text)
        if found:
            yield _caution(
                chain, "source", f'the file says "{found[0]}": what is connected to people has rules of its own',
                "insulation and leakage currents (IEC 60601-1) are no figures of this program, and microamperes can "
                "harm", f"connect nobody to what is built from these figures alone; {CODES}")
            return
