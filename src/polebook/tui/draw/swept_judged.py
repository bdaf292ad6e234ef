"""What the figures of a sweep are held against: today's, and what the targets allow."""

from __future__ import annotations

from collections.abc import Mapping
from math import inf
from typing import TYPE_CHECKING

from polebook.book.targets import LESS_IS_BETTER, TOLERANCE_DB
from polebook.report import figures as show
from polebook.tui.draw.levers import AIMS, ALSO, Aim, followed
from polebook.tui.draw.scene import Scene
from polebook.tui.sweeps import fresh
from polebook.tui.view import Sweep

if TYPE_CHECKING:
    from polebook.plan.sweep import Point

Limits = Mapping[str, tuple[float, float]]
"""Key of an AIM that has a target -> the least and the most that its size may be."""


def today_of(scene: Scene, sweep: Sweep, one: Aim) -> float | None:
    """What a figure's ratios are to: today's, or that of the text that the sweep is of."""
    ledger = scene.session.ledger
    return one.today(ledger) if ledger is not None and fresh(scene.state, sweep) else one.swept(sweep.today)


def value_now(scene: Scene, sweep: Sweep) -> float:
    """Today's value of what is swept."""
    ledger = scene.session.ledger
    return ledger.chain.numbers[sweep.path] if ledger is not None and fresh(scene.state, sweep) else sweep.today.value


def limits_of(scene: Scene) -> Limits:
    """Of the figures that have a target. A gain that is judged elsewhere than at midband has none here."""
    chain, found = scene.chain, dict[str, tuple[float, float]]()
    for one in followed(scene):
        want = chain.get(f"target.{one.target}") if f"target.{one.target}" in chain.given else None
        if want is None or (one.key == "gain" and "target.reference" in chain.given):
            continue
        if one.key == "gain":
            off = 10.0 ** ((chain.get("target.gain_tolerance") or TOLERANCE_DB) / 20.0)
            found[one.key] = want / off, want * off
        else:
            found[one.key] = (0.0, want) if one.target in LESS_IS_BETTER else (want, inf)
    return found


def met(limits: Limits, one: Aim, point: Point) -> bool | None:
    """Whether a figure is as wanted at a point; None where nothing is wanted, or nothing can be judged.

    An edge that a sound band does not have meets its target.
    """
    if one.key not in limits:
        return None
    value = one.swept(point)
    if value is None:
        return None if point.gain is None or point.why or one.key == "noise" or one.name else True
    low, high = limits[one.key]
    return low <= abs(value) <= high


def fine(limits: Limits, point: Point) -> bool:
    """Whether all that has a target is as wanted at a point."""
    return all(met(limits, one, point) for one in (*AIMS, *ALSO) if one.key in limits)


def text_of(scene: Scene, one: Aim, value: float | None) -> str:
    """A figure with its unit: a gain in dB or as a ratio, as the ledger shows it."""
    volts = scene.chain.source_kind == "voltage"
    if one.name:
        return show.eng(value, one.unit or ("V" if volts else "A"))
    if one.key == "noise":
        return show.eng(value, "V/√Hz" if volts else "A/√Hz")
    if one.key != "gain":
        return show.eng(value, "Hz")
    unit = "V/V" if volts else "V/A"
    if scene.view.decibels:
        return show.gain(value, unit)
    return show.ratio(value) if unit == "V/V" else show.eng(value, "Ω")
