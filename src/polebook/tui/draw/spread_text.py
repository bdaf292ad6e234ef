"""How the spread page writes its figures."""

from __future__ import annotations

from math import isfinite

from polebook.report import figures as show
from polebook.tui.draw.scene import Scene
from polebook.tui.spreads import Figure, Row

_MOST_DECIMALS = 6


def value(scene: Scene, of: Figure, x: float | None, unit: bool = True) -> str:
    """A value of a figure, a gain in dB or as a ratio."""
    if x is None or not isfinite(x):
        return show.NONE
    if of.unit != "dB":
        return show.eng(x, of.unit if unit else "")
    if of.target != "gain":
        return show.decibel(x, "dB" if unit else "")
    volts = scene.chain.source_kind == "voltage"
    if scene.view.decibels:
        return show.decibel(x, ("dB" if volts else "dBΩ") if unit else "")
    ratio = 10.0 ** (min(max(x, -6000.0), 6000.0) / 20.0)
    return show.ratio(ratio) if volts else show.eng(ratio, "Ω" if unit else "")


def deviation(of: Figure, x: float | None, mean: float) -> str:
    """A standard deviation: of a figure in dB in dB, else in per cent of the mean."""
    if x is None:
        return ""
    if of.unit == "dB":
        return f"±{x:.2f} dB" if x >= 0.095 else f"±{x:.3f} dB"
    return f"±{100.0 * x / mean:.2g} %" if mean else f"±{show.eng(x, of.unit)}"


def percent(share: float, unit: bool = True) -> str:
    """A share in per cent: one decimal, more where it would else read like all or none of them."""
    text = f"{100.0 * share:.1f}"
    for decimals in range(2, _MOST_DECIMALS + 1):
        if 0.0 < share < 1.0 and float(text) in (0.0, 100.0):
            text = f"{100.0 * share:.{decimals}f}"
    text = {0.0: "0", 1.0: "100"}.get(share, text)
    return f"{text} %" if unit else text


def more(share: float | None, solved: bool = True) -> str:
    """By how much a yield would go up, in points of a per cent; an estimate says so."""
    if share is None:
        return ""
    text = f"{100.0 * share:+.1f}" if abs(share) >= 5e-4 else "0"
    return text if solved or text == "0" else f"~{text}"


def reach(row: Row, figure: str) -> str:
    """How far a number is off at most; with the sign of the figure's worst case where that is known."""
    sign = {1: "+", -1: "-"}.get(row.ends.get(figure, 0), "±")
    return f"{sign}{row.reach:.3g} °C" if row.sort == "temperature" else f"{sign}{100.0 * row.reach:.3g} %"


def limit(scene: Scene, of: Figure, at: int) -> str:
    """One end of what the target allows, "≥ 2 MHz"; "" where it is open."""
    end = of.limits[at] if of.limits else None
    return "" if end is None else f"{'≤' if at else '≥'} {value(scene, of, end)}"


def limits(scene: Scene, of: Figure) -> str:
    """What the target allows."""
    low, high = limit(scene, of, 0), limit(scene, of, 1)
    if low and high:
        return f"{value(scene, of, of.limits[0], unit=False)} to {value(scene, of, of.limits[1])}" if of.limits else ""
    return low or high
