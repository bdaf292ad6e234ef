"""The figures of the step response and of the sag: today's, what was wanted, how far they are off the pinned ones."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from polebook.book.ledger import Ledger
from polebook.book.targets import Target
from polebook.report import figures as show
from polebook.session.baselines import got, posted
from polebook.tui.draw.moved import FAINT
from polebook.tui.draw.scene import Scene

PER_CENT = "%"
LEAST_CHANGE = 0.005  # per cent that two decimals show
WORDS = {True: ("met", "good"), False: ("short", "bad"), None: ("not judged", "warn")}


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure of the page.

    name    as `working` takes it;  unit "s" or "%"
    target  key of [target] that it is judged by, "" for none;  scale: of the target's unit in the figure's
    marks   the marks that it is read at, the most telling first
    """

    name: str
    word: str
    unit: str
    get: Callable[[Ledger], float | None]
    target: str = ""
    scale: float = 1.0
    marks: tuple[str, ...] = ()


STEP: tuple[Figure, ...] = (
    Figure("overall.rise_time_s", "rise", "s", lambda of: of.pulse.rise_time_s, "rise", marks=("90 %", "10 %")),
    Figure("overall.overshoot_percent", "overshoot", PER_CENT, lambda of: of.pulse.overshoot_percent, "overshoot",
           100.0, ("top",)),
    Figure("overall.settling_1_s", "within 1 %", "s", lambda of: of.pulse.settling_1_s, marks=("within 1 %",)),
    Figure("overall.settling_01_s", "within 0.1 %", "s", lambda of: of.pulse.settling_01_s, marks=("within 0.1 %",)),
)
SAG: tuple[Figure, ...] = (
    Figure("overall.sag_percent", "sag", PER_CENT, lambda of: of.sag.percent, "sag", 100.0, ("the pulse's end",)),
)


def why(of: Ledger, upper: bool) -> str:
    """Why there is no curve; "" where there is one."""
    if upper:
        return "" if of.pulse.transient is not None else of.pulse.why
    return "" if of.sag.transient is not None else of.sag.why


def listed(of: Ledger, upper: bool) -> Sequence[Figure]:
    """The figures of the end of the band that is shown; none where it has no curve."""
    if why(of, upper):
        return ()
    return STEP if upper else SAG


def chosen(scene: Scene) -> int:
    """The row that is chosen."""
    return min(max(scene.view.row, 0), max(len(listed(scene.figures, scene.view.upper)) - 1, 0))


def target_of(of: Ledger, figure: Figure) -> Target | None:
    """The target that judges a figure, where the file has it."""
    return next((one for one in of.targets if one.name == figure.target), None)


def text_of(figure: Figure, value: float | None) -> str:
    """A figure with its unit; per cent with two decimals."""
    if figure.unit == PER_CENT:
        return show.NONE if value is None else f"{round(value, 2) + 0.0:.2f} %"
    return show.eng(value, figure.unit)


def wanted(figure: Figure, target: Target) -> str:
    """What was wanted, with its unit."""
    want = figure.scale * target.want
    return f"{want:g} %" if figure.unit == PER_CENT else show.eng(want, figure.unit)


def moved(scene: Scene, figure: Figure) -> str:
    """By how much a figure is off the pinned one; "" where nothing is pinned or nothing would show."""
    base, post = scene.session.baseline, posted(scene.session)
    if post is None and (base is None or base is scene.ledger):
        return ""
    before = got(post, figure.target) if post is not None else figure.get(base) if base is not None else None
    after = figure.get(scene.figures)
    if before is None or after is None:
        return ""
    if figure.unit == PER_CENT:
        return f"{after - before:+.2f}" if abs(after - before) >= LEAST_CHANGE else ""
    same = abs(after - before) < FAINT * max(abs(after), abs(before))
    return "" if same else show.signed(after - before, figure.unit)


def marks(of: Ledger, upper: bool) -> list[tuple[str, float, float]]:
    """(mark, time in s, height) of what the figures are read at, in the order of time; () without a curve."""
    if why(of, upper):
        return []
    if not upper:
        end = of.sag.pulse_s or 0.0
        return [("the pulse's end", end, 1.0 - 0.01 * (of.sag.percent or 0.0))]
    from polebook.book.pulse_rows import marks as rows  # deferred with the step response

    return [(row["mark"], row["time_s"], row["height"]) for row in rows(of) or () if row["mark"] != "start"]
