"""How the figures of levels and rails came about."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from math import inf

from polebook.book.levels import Levels, Slope
from polebook.book.lumped import Lumped
from polebook.book.swing import upper_of
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.nodes import landed
from polebook.book.workings.noise import node_noise
from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.book.workings.swing import clip_level
from polebook.chain.suggest import listed
from polebook.formula import Working
from polebook.quantity import engineering

DC = "d.c. solution"
_ELEMENTS = {"": "into {}", "base": "into the base of {}", "upper base": "into the upper base of {}",
             "source": "by the current source at {}", "iq": "quiescent current of {}",
             "output": "that the output of {} gives", "feedback": "through the feedback of {} to ground"}


def rail(books: Books, sheet: Sheet) -> Working:
    """The working of a rail's current: everything that it gives, what comes back into it with a minus."""
    name = sheet.entry.row["rail"]
    terms = []
    for draw in books.ledger.rails.draws:
        if draw.rail == name and draw.current is not None:
            about = _ELEMENTS.get(draw.element, "through {}." + draw.element).format(draw.stage)
            label = f"I_{draw.stage}{'.' if draw.element else ''}{draw.element}"
            terms.append(sheet.put(label, draw.current, "A", about, DC))
    sheet.result(f"I = {plus(terms)}")
    back = " What flows into it counts as negative: over ground and rails the currents sum to 0."
    return sheet.done(FORMULA["rails.current_a"], f"Out of the rail into the circuit.{back}")


def level(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `levels`."""
    node, _, key = sheet.entry.name.rpartition(".")
    if key == "headroom_db":
        clip, largest = sheet.figure("clip", f"{node}.clip_v"), sheet.figure("largest", f"{node}.largest_v")
        sheet.result(f"headroom = 20·log10({clip}/{largest})")
        return sheet.done(FORMULA["levels.headroom_db"])
    levels = _levels(books)
    number = next(k for k, name in levels.names.items() if name == node)
    if key == "clip_v":
        ends = levels.clip_at[number]
        if ends.node != number:
            ahead = levels.names[ends.node]
            sheet.result(f"clip = {sheet.figure(f'clip_{ahead}', f'{ahead}.clip_v')}")
            return sheet.done(FORMULA["levels.clip_v.shared"])
        return clip_level(books, sheet, ends)
    if key == "noise_v":
        return node_noise(books, sheet)
    end = key.removesuffix("_v")
    gain = per_source(books, sheet, number)
    sheet.result(f"V = {gain}·{sheet.file(end, f'source.{end}')}")
    return sheet.done(FORMULA[f"levels.{key}"])


def per_source(books: Books, sheet: Sheet, node: int, label: str = "") -> str:
    """Enters |V(node)| for 1 V or 1 A of source."""
    label = label or books.node_label(node)
    unit = "" if books.chain.source_kind == "voltage" else "Ω"
    return sheet.put(f"A_{label}", _levels(books).per_source(node), unit, f"|V({label})/V(source)|" if not unit else
                     f"|V({label})/I(source)|", "midband solution")


def _levels(books: Books) -> Levels:
    levels = books.ledger.levels
    if levels is None:
        raise AssertionError("a figure of levels stands, but the chain has none")
    return levels


def _largest_source(books: Books, sheet: Sheet) -> Working:
    levels = _levels(books)
    terms = []
    for clip in levels.clips:
        name = levels.names[clip.node]
        if clip.least is not None and levels.passing(clip) < inf:
            terms.append(f"{sheet.figure(f'clip_{name}', f'{name}.clip_v')}/{per_source(books, sheet, clip.node)}")
    sheet.result(f"largest = min({', '.join(terms)})" if len(terms) > 1 else f"largest = {terms[0]}")
    note = ""
    if levels.unknown:
        note = f"What {listed(levels.unknown)} can swing is not wholly known: it may be less."
    return sheet.done(FORMULA["overall.largest_source"], note)


def _over_noise(books: Books, sheet: Sheet) -> Working:
    if sheet.entry.key == "dynamic_range_db":
        peak = sheet.figure("largest", "overall.largest_source")
    else:
        peak = sheet.file("smallest", "source.smallest")
    noise = sheet.figure("noise", "overall.noise_total_input")
    sheet.result(f"{sheet.entry.key.removesuffix('_db')} = 20·log10({peak}/(sqrt(2)·{noise}))")
    return sheet.done(FORMULA[sheet.entry.name])


def _supply_current(books: Books, sheet: Sheet) -> Working:
    rails = books.ledger.rails
    each = [sheet.figure(f"I_{name}", f"rail.{name}.current_a") for name in rails.standing if name != "ground"]
    sheet.result(f"I = max({', '.join(f'|{symbol}|' for symbol in each)})" if len(each) > 1 else f"I = |{each[0]}|")
    return sheet.done(FORMULA["overall.supply_current_a"])


def _full_power(books: Books, sheet: Sheet) -> Working:
    levels = _levels(books)
    slope, *others = levels.slopes
    if "source.largest" in books.chain.numbers:
        scale = sheet.file("largest", "source.largest")
    else:
        gain = sheet.figure("gain", "overall.gain")
        scale = sheet.step(f"source = {sheet.file('swing', 'target.swing')}/|{gain}|", _unit(books),
                           "peak of the source that makes the target's swing:")
    label = books.node_label(slope.node)
    volts = sheet.step(f"V = {per_source(books, sheet, slope.node)}·{scale}", "V", f"peak at {label}:")
    amplifier = slope.farad is None
    limit = sheet.file("slew", _slew(books, slope)) if amplifier else _charging(books, sheet, levels, slope)
    sheet.result(f"f = {limit}/(2·pi·{volts})")
    rest = "; ".join(f"{other.stage} alone would reach {engineering(other.hz, 'Hz')}" for other in others)
    return sheet.done(FORMULA["overall.full_power_hz"], f"{slope.stage} is the slowest{': ' if rest else ''}{rest}.")


def _unit(books: Books) -> str:
    return "V" if books.chain.source_kind == "voltage" else "A"


def _slew(books: Books, slope: Slope) -> str:
    stage = next(stage for stage in books.chain.stages if stage.name == slope.stage)
    return f"{slope.stage}.slew" if stage.kind == "block" else f"device.{stage.device}.slew"


def _charging(books: Books, sheet: Sheet, levels: Levels, slope: Slope) -> str:
    """I/C of a device: its quiescent current into all the capacitance of its node."""
    stage = next(stage for stage in books.chain.stages if stage.name == slope.stage)
    name = levels.names[slope.node]
    lumped = Lumped(books.solution, books.site_of)
    farads = [landed(books, sheet, half, books.node_label(number)) for number, half in lumped.landings()
              if half is not None and half.of_use and lumped.names[number] == name and lumped.hears(number)]
    farad = sheet.step(f"C = {plus(farads)}", "F", f"capacitance at {name}:")
    ampere = sheet.figure("I", f"bias.{slope.stage}{upper_of(stage)[1]}.current_a")
    return f"{ampere}/{farad}"


def swing_target(books: Books, sheet: Sheet) -> None:
    """What was got of the swing that is wanted: the largest source that passes, at the load."""
    largest, gain = sheet.figure("largest", "overall.largest_source"), sheet.figure("gain", "overall.gain")
    sheet.result(f"got = {largest}·|{gain}|")


WHOLE: Mapping[str, Callable[[Books, Sheet], Working]] = {
    "supply_current_a": _supply_current, "largest_source": _largest_source, "dynamic_range_db": _over_noise,
    "noise_margin_db": _over_noise, "full_power_hz": _full_power,
}
"""Figures of the whole chain that are about levels."""
