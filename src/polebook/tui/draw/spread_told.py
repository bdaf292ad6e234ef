"""The lines over the histograms: what was built, the yield, one figure in numbers; and all figures as a table."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.tui.draw.grid import Cell, Column, Row, grid
from polebook.tui.draw.pen import Pen
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.spread_chart import NOMINAL, WORST
from polebook.tui.draw.spread_text import deviation, limits, percent, value
from polebook.tui.lines import Line, Span, width
from polebook.tui.spreads import ALL, Figure, Run, Told, compared, figures, fresh, looked_at
from polebook.tui.view import State

BAR = 10
_PERCENTILES = ("0.1", "1", "50", "99", "99.9")


def running(state: State) -> bool:
    return state.job is not None and state.job.page == "spread"


def progress(pen: Pen, state: State) -> Line:
    """How far a run is: a bar over all that it solves, and in words what it is at."""
    job, asked = state.job, state.view.spread.asked
    if job is None:
        return ()
    bar = pen.look.bar(job.done / job.total if job.total else 0.0, BAR)
    at = "begins" if not job.done else f"{job.done:,} of {asked:,}" if job.done < asked else "what the tolerances cost"
    return (Span(bar, "bar"), Span(pen.text("·") * (BAR - len(bar)), "dim"), Span(f" {at}"))


def head(scene: Scene, run: Run, room: int) -> Line:
    """What was built, whether it still holds, what else is to be known of it."""
    of, spread, pen = run.told, scene.view.spread, scene.pen
    told: list[Line] = []
    if running(scene.state):
        told.append((Span(" "), *progress(pen, scene.state)))
    else:
        told.append((Span(f" {of.builds:,} builds", "head"), Span(f", seed {of.seed}", "dim")))
        if of.done < of.builds:
            told.append((Span(f"stopped at {of.done:,}", "warn"),))
    if not fresh(scene.state):
        told.append((Span("of before the edit" + ("" if running(scene.state) else "; s runs it again"), "warn"),))
    if (spread.builds, spread.seed) != (of.builds, of.seed) and not running(scene.state):
        told.append((Span(f"next: {spread.builds:,} builds, seed {spread.seed}", "select"),))
    told += [(Span(pen.text(text), "warn"),) for text in lacking(of)]
    return flowing(told, room)


def lacking(of: Told) -> list[str]:
    """What builds or their judgement lack, each in some words."""
    found = [f"as filed it misses {one.target}" for one in of.figures if misses(one)]
    found += [f"{count:,} {word}" for word, count in of.failures.items()]
    if of.outside:
        stage = max(of.outside, key=lambda name: of.outside[name])
        found.append(f"{stage} leaves its region in {of.outside[stage]:,}")
    if of.cautions:
        found.append(f"{len(of.cautions)} caution{'s' if len(of.cautions) > 1 else ''}")
    if of.unjudged:
        found.append("not judged: " + " ".join(of.unjudged))
    return found


def misses(of: Figure) -> bool:
    """Whether the chain as filed misses the target of a figure."""
    if of.nominal is None or not of.limits:
        return False
    low, high = of.limits
    return (low is not None and of.nominal < low) or (high is not None and of.nominal > high)


def yields(scene: Scene, run: Run, room: int) -> Line:
    """The yield in all, where it may lie, what it was before the edit, what is wanted; then by target."""
    of = run.told
    whole = of.yields.get(ALL)
    if whole is None:
        return (Span(" no yield: ", "dim"),
                Span("no target that a spread judges; t sets gain, lower, upper, peaking, noise"))
    before = compared(scene.view.spread)
    was = before.yields.get(ALL) if before is not None else None
    told: list[Line] = [(Span(" yield "), Span(percent(whole.share), "head"),
                         Span(f" ({percent(whole.low, False)} to {percent(whole.high, False)})", "dim"))]
    if was is not None:
        told.append((Span(f"was {percent(was.share)}", "moved"),))
    wanted = scene.chain.get("target.yield")
    if wanted is not None:
        met = whole.share >= wanted
        told.append((Span(f"{100.0 * wanted:g} % wanted: "), Span("met" if met else "short", "good" if met else "bad")))
    each = sorted(((share.share, name) for name, share in of.yields.items() if name != ALL), key=lambda one: one[0])
    told += [(Span(f"{name} ", "dim"), Span(percent(share, False))) for share, name in each if share < 1.0]
    if names := [name for share, name in each if share == 1.0]:
        told.append((Span(f"{' '.join(names)} ", "dim"), Span("100")))
    return flowing(told, room)


def about(scene: Scene, run: Run, of: Figure, room: int, focus: str) -> list[Line]:
    """One figure in two lines: as filed, mean, target, worst; and its percentiles."""
    pen, found = scene.pen, of.statistics
    word = "today" if fresh(scene.state) else "as filed"
    told: list[Line] = [(Span(f" {of.word}", "select"),),
                        (Span(f"{pen.sign(NOMINAL)} {word} ", "dim"),
                         Span(pen.text(value(scene, of, of.nominal)), "focus" if focus else ""))]
    share = run.told.yields.get(of.target) if of.limits else None
    if of.limits:
        by = (Span(f" by {percent(share.share)}"),) if share else ()
        told.append((Span(f"{pen.sign('┊')} ", "warn"), Span(pen.text(limits(scene, of)), "dim"), *by))
    if of.worst:
        both = len(of.worst) > 1
        ends = " ".join(pen.text(one.why or value(scene, of, one.value, unit=not both)) for one in of.worst)
        told.append((Span(f"{pen.sign(WORST)} worst ", "dim"), Span(ends)))
    if share:
        told.append((Span(f"95 % sure: {percent(share.low, False)} to {percent(share.high, False)}", "dim"),))
    if found is None:
        return [flowing(told, room)]
    more: list[Line] = [(Span(f"{p} % ", "dim"), Span(pen.text(value(scene, of, found.percentiles[p], unit=False))))
                        for p in _PERCENTILES]
    more.append((Span(pen.text(deviation(of, found.deviation, found.mean)), "dim"),))
    return [flowing(told, room), (Span(" "), *flowing(more, room - 1))]


def table(scene: Scene, run: Run, room: int) -> list[Line]:
    """All figures: as filed, mean, deviation, percentiles, worst, target, the share that meets it."""
    pen, chosen = scene.pen, looked_at(scene.view.spread)
    body = []
    for of in figures(run):
        found, share = of.statistics, run.told.yields.get(of.target) if of.limits else None
        if found is None:
            continue
        worst = [value(scene, of, one.value, unit=False) for one in of.worst]
        body.append(Row([
            Cell(of.word), Cell(value(scene, of, of.nominal, unit=False)),
            Cell(value(scene, of, found.mean, unit=False)), Cell(deviation(of, found.deviation, found.mean)),
            *(Cell(value(scene, of, found.percentiles[p], unit=False)) for p in _PERCENTILES),
            Cell(" ".join(worst)), Cell(limits(scene, of)), Cell(percent(share.share) if share else show.NONE),
            Cell(f"{percent(share.low, False)} to {percent(share.high, False)}" if share else "", "dim"),
        ], "select" if of is chosen else ""))
    if not body:
        return []
    columns = [Column("", 10, right=False), Column("today" if fresh(scene.state) else "as filed", 6),
               Column("mean", 6, drop=6), Column("deviation", 8, drop=5),
               *(Column(f"{p} %", 6, drop=0 if p in ("1", "99") else 3 if p == "50" else 4) for p in _PERCENTILES),
               Column("worst", 6, drop=1), Column("target", 8, drop=2, gap=2), Column("met by", 6),
               Column("", 0, drop=7)]
    return [(Span(" "), *line) for line in grid(columns, body, room - 1, pen)]


def notes(scene: Scene, run: Run, room: int) -> list[Line]:
    """What a reader should know: cautions, builds without figures, what leverage alone says."""
    of, pen = run.told, scene.pen
    texts = [f"{problem.what}: {problem.why}" for problem in of.cautions]
    texts += [f"{count:,} of the builds: {word}" for word, count in of.failures.items()]
    if of.outside:
        texts.append("leaves the region of its law: " + ", ".join(f"{stage} in {count:,}" for stage, count
                                                                 in of.outside.items()))
    linear = [f"{one.word} {deviation(one, one.linear, one.nominal)}" for one in figures(run)
              if one.linear is not None and one.nominal is not None]
    if linear:
        texts.append("deviation by leverage alone: " + ", ".join(linear))
    return [(Span(f" {line}", "dim"),) for text in texts for line in pen.wrapped(text, room - 2, "  ")]


def flowing(told: list[Line], room: int, gap: int = 3) -> Line:
    """The pieces that there is room for, the first at the least."""
    spans: list[Span] = []
    for piece in told:
        if spans and width((*spans, *piece)) + gap > room:
            break
        spans += [*([Span(" " * gap)] if spans else []), *piece]
    return tuple(spans)
