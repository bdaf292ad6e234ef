"""Sweeps measured on a bench over the response: their curves, and what was measured at the cursor beside the plan."""

from __future__ import annotations

from collections.abc import Callable
from math import floor, isfinite, log10
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.response import Array, Response
from polebook.report import figures as show
from polebook.tui.draw.curves import Here
from polebook.tui.draw.pen import Pen
from polebook.tui.draw.plot.chart import Curve
from polebook.tui.draw.scene import Scene
from polebook.tui.histories import overlays
from polebook.tui.lines import Line, Span

if TYPE_CHECKING:
    from polebook.record.bench import Overlay
    from polebook.record.sweeps.sweep import Sweep

TURN = 360.0
_EDGE = 1e-9  # relative, by which a frequency at the end of a sweep still belongs to it


def shown(scene: Scene) -> list[Overlay]:
    """The sweeps that can be drawn."""
    return [one for one in overlays(scene.state) if one.sweep is not None]


def letter(scene: Scene, of: Overlay) -> str:
    """At the end of its curve, and at the cursor: "m", or with the bench's number where there are several."""
    return "m" if len(shown(scene)) == 1 else f"m{of.number}"


def faults(scene: Scene) -> str:
    """The sweeps that can't be drawn, in words; "" where there is none."""
    bad = [one for one in overlays(scene.state) if one.problems]
    return "; ".join(f"bench {one.number}: {one.problems[0].what}" for one in bad)


def gains(scene: Scene) -> list[Curve]:
    """What was measured in dB, joined between the points that there are; nothing outside of them."""
    return [Curve(one.sweep.hz, one.sweep.gain_db, "warn", "broken", "%", letter(scene, one))
            for one in shown(scene) if one.sweep is not None]


def phases(scene: Scene, found: Response) -> list[Curve]:
    """What was measured in degrees, by whole turns to where the plan is."""
    drawn = []
    for one in shown(scene):
        if one.sweep is not None and one.sweep.degrees is not None:
            plan = found.phase_deg if _whole(scene, one) else _upto(scene, one, found.phases_deg)
            plan = np.interp(np.log(one.sweep.hz), np.log(found.hz), np.where(np.isfinite(plan), plan, 0.0))
            drawn.append(Curve(one.sweep.hz, _turned(one.sweep.degrees, plan), "warn", "dotted", "'", right=True))
    return drawn


def pieces(scene: Scene, at: Here, size: Callable[[Scene, float, bool], str]) -> list[Line]:
    """What each bench measured at the cursor, and how far off that is; that it did not where it did not.

    size  a gain in dB as it is shown, with its unit or without
    """
    told: list[Line] = []
    for one in shown(scene):
        sweep = one.sweep
        if sweep is None:
            continue
        head = [Span(f"{letter(scene, one)} ", "warn"), Span(scene.pen.text(f"{one.label}: "), "dim")]
        gain = _at(sweep, sweep.gain_db, at.hz)
        if gain is None:
            told.append((*head, Span(scene.pen.text(f"not measured here, {_band(sweep)}"), "dim")))
            continue
        plan = float(_upto(scene, one, at.gains_db))
        spans = [*head, Span(scene.pen.text(f"{size(scene, gain, True)} measured"))]
        if one.apart:  # then the plan is of another thing
            told.append((*spans, Span(scene.pen.text(f"; {one.apart}"), "warn")))
            continue
        spans.append(Span(scene.pen.text(f", {size(scene, plan, False)} planned"), "dim"))
        if isfinite(plan):
            spans.append(Span(", ", "dim"))
            spans.append(Span(f"{gain - plan:+.2f}{'' if scene.view.decibels else ' dB'}", "moved"))
        if sweep.degrees is not None:
            turned = at.phase_deg if _whole(scene, one) else float(_upto(scene, one, at.phases_deg))
            spans += _angles(scene.pen, sweep, at.hz, turned)
        told.append(tuple(spans))
    return told


def _angles(pen: Pen, sweep: Sweep, hz: float, plan: float) -> list[Span]:
    """The phase measured, and how far off the plan."""
    if sweep.degrees is None or not isfinite(plan):
        return []
    near = _turned(sweep.degrees, np.full(sweep.degrees.shape, plan))
    found = _at(sweep, np.rad2deg(np.unwrap(np.deg2rad(near))), hz)
    if found is None:
        return []
    off = found - plan
    off -= TURN * floor(off / TURN + 0.5)
    return [Span(pen.text(f"; {plan + off:.0f}°").rstrip()), Span(", ", "dim"),
            Span(pen.text(f"{off + 0.0:+.1f}°").rstrip(), "moved")]


def _turned(degrees: Array, plan: Array) -> Array:
    """Degrees by whole turns to within half a turn of the plan."""
    turned: Array = degrees + TURN * np.round((plan - degrees) / TURN)
    return turned


def _upto(scene: Scene, of: Overlay, by_line: Array) -> Array:
    """What lines add up to, (lines,) or (lines, hz), at the point where a bench measured: the load, or a stage."""
    last = scene.names.index(of.at) + 1 if of.at in scene.names else len(scene.names)
    total: Array = by_line[:last].sum(axis=0)
    return total


def _whole(scene: Scene, of: Overlay) -> bool:
    """Whether a bench measured all of the chain."""
    return of.at not in scene.names


def _at(sweep: Sweep, values: Array, hz: float) -> float | None:
    """A value at a frequency, straight between the points about it; None outside of them."""
    if not sweep.hz[0] * (1.0 - _EDGE) <= hz <= sweep.hz[-1] * (1.0 + _EDGE):
        return None
    found = float(np.interp(log10(hz), np.log10(sweep.hz), values))
    return found if isfinite(found) else None


def _band(sweep: Sweep) -> str:
    return f"only {show.eng(float(sweep.hz[0]), 'Hz')} to {show.eng(float(sweep.hz[-1]), 'Hz')}"
