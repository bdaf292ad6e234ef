"""Page 2, the nodes: what drives and loads the selected node, what lands on it, and all time constants ranked."""

from __future__ import annotations

from math import pi

from polebook.book.landed import Landed, landed
from polebook.report import figures as show
from polebook.tui.draw.grid import NOTHING, Cell, Column, Row, grid
from polebook.tui.draw.pen import BLANK, window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span, width

LEAST_RIGHT = 34
LEAST_NAME, MOST_NAME = 14, 18


def ranked(scene: Scene) -> list[tuple[int, float, float]]:
    """(part, time constant in s, its share of the sum that estimates the shown edge), the greatest share first."""
    solution = scene.figures.solution
    role = "high" if scene.view.upper else "low"
    parts = solution.circuit.layout.parts
    taus = {k: tau for k, tau in solution.constants.by_part.items() if tau and parts[k].role == role}
    weights = {k: tau if scene.view.upper else 1.0 / tau for k, tau in taus.items()}
    total = sum(weights.values())
    rows = [(k, taus[k], weight / total if total else 0.0) for k, weight in weights.items()]
    return sorted(rows, key=lambda row: -row[2])


def figures(scene: Scene) -> tuple[str, ...]:
    """The figures of the chosen time constant."""
    rows = ranked(scene)
    if not rows:
        return ()
    part = scene.figures.solution.circuit.layout.parts[rows[min(max(scene.view.row, 0), len(rows) - 1)][0]]
    return (f"{part.stage}.{part.name}.tau_s", f"{part.stage}.{part.name}.owns_{scene.end}")


def page(scene: Scene, room: int, rows: int, focus: str = "") -> list[Line]:
    """At most `rows` lines of at most `room` cells."""
    head = node_lines(scene, room)
    foot = [_estimates(scene, room)]
    if rows < 6:
        return [*head, *foot][:rows]
    spare = rows - len(head) - len(foot)
    need = 1 + max(len(ranked(scene)), len(_landed(scene)))
    between = [BLANK] if spare > need else []
    after = [BLANK] if spare > need + 1 else []
    tables = _tables(scene, room, min(spare - len(between) - len(after), need), focus)
    return [*head, *between, *tables, *after, *foot]


def rows_for_all(scene: Scene) -> int:
    """Lines that the page takes with everything in sight."""
    return 2 + 1 + 1 + max(len(ranked(scene)), len(_landed(scene))) + 1 + 1


def node_lines(scene: Scene, room: int) -> list[Line]:
    """The selected line's node in two lines: its resistance, capacitance, pole and loss; what drives and loads it."""
    pen, name = scene.pen, scene.nodes[scene.at]
    first = scene.nodes.index(name)
    last = len(scene.nodes) - 1 - scene.nodes[::-1].index(name)
    site = scene.sites.get(name)
    behind = scene.names[last + 1] if last + 1 < len(scene.names) else ""
    where = f"from {scene.names[first]}" + (f" to {behind}" if behind else "")
    told: list[Line] = [(Span(f" {name}", "select"), Span(f"  {pen.cut(pen.text(where), 28)}"))]
    if site is not None:
        told += [(Span(f"   {word} ", "dim"), Span(pen.text(show.eng(figure)))) for word, figure in (
            ("R", site.ohm), ("C", site.farad), ("pole", site.pole_hz))]
    lost, allotted = scene.account.lost.get(name), scene.account.allotted.get(name)
    if lost is not None and allotted is not None:
        told.append((Span("   lost ", "dim"), Span(show.decibel(lost), "bad" if lost > allotted else ""),
                     Span(f" of {show.decibel(allotted)} dB", "dim")))
    driver = scene.lines[first]
    words = []
    if driver.output_ohm is not None:
        words.append(f"{driver.name} drives it from {show.eng(driver.output_ohm, 'Ω')}")
    if behind and scene.lines[last + 1].input_ohm is not None:
        words.append(f"{behind} takes it at {show.eng(scene.lines[last + 1].input_ohm, 'Ω')}")
    if driver.loading is not None and behind:
        words.append(f"loading {show.ratio(driver.loading)}")
    return [_joined(told, room), (Span(" " + pen.cut(pen.text(", ".join(words)), room - 2)),)]


def _joined(told: list[Line], room: int) -> Line:
    """The pieces that there is room for, each of them whole."""
    spans: list[Span] = []
    for piece in told:
        if spans and width(tuple(spans)) + width(piece) > room:
            break
        spans += piece
    return tuple(spans)


def _landed(scene: Scene) -> list[Landed]:
    return landed(scene.figures.solution).get(scene.nodes[scene.at], [])


def _tables(scene: Scene, room: int, rows: int, focus: str) -> list[Line]:
    """What lands on the node, beside all time constants of the band's end."""
    lands = _lands(scene, room - LEAST_RIGHT - 2, rows)
    size = max([*map(width, lands), min(room // 2, room - LEAST_RIGHT) - 2])
    taus = constants(scene, room - size - 2, rows, focus)
    count = max(len(lands), len(taus))
    lands += [BLANK] * (count - len(lands))
    taus += [BLANK] * (count - len(taus))
    return [(*scene.pen.fitted(a, size), Span("  "), *b) for a, b in zip(lands, taus, strict=True)]


def _lands(scene: Scene, room: int, rows: int) -> list[Line]:
    found, pen = _landed(scene), scene.pen
    longest = MOST_NAME if room > LEAST_RIGHT else LEAST_NAME
    layout, net = scene.figures.solution.circuit.layout, scene.figures.solution.circuit.network
    whole = sum(one.tau for one in found)
    shown = found if len(found) <= rows - 1 else found[:max(rows - 2, 1)]
    body = []
    for one in shown:
        part = layout.parts[one.part]
        body.append(Row([
            NOTHING, Cell(pen.cut(pen.text(f"{part.stage}.{part.name}"), longest)),
            Cell(show.eng(net.values[one.part])),
            Cell("" if one.k is None else show.ratio(one.k)), Cell("" if one.farad is None else show.eng(one.farad)),
            Cell("" if one.ohm is None else show.eng(one.ohm)), Cell(f"{100 * one.tau / whole:.0f}" if whole else ""),
        ]))
    if len(shown) < len(found):
        rest = found[len(shown):]
        tau = sum(one.tau for one in rest)
        body.append(Row([NOTHING, Cell(f"{len(rest)} more"), *[NOTHING] * 4,
                         Cell(f"{100 * tau / whole:.0f}" if whole else "")], "dim"))
    if not body:
        body = [Row([NOTHING, Cell("no capacitance", "dim"), *[NOTHING] * 5])]
    columns = [Column(least=1, gap=0), Column(f"at {scene.nodes[scene.at]}", 9, right=False, gap=0),
               Column("value", 5, drop=1), Column("K", 5, drop=2), Column("counts", 6), Column("on ohm", 6, drop=4),
               Column("%", 3, drop=3)]
    return grid(columns, body, room, pen)[:rows]


def constants(scene: Scene, room: int, rows: int, focus: str) -> list[Line]:
    """All time constants of the shown end with bars, the chosen one in sight."""
    listed, pen = ranked(scene), scene.pen
    longest = MOST_NAME if room > LEAST_RIGHT else LEAST_NAME
    parts = scene.figures.solution.circuit.layout.parts
    size = max(rows - 1, 1)
    at = min(max(scene.view.row, 0), max(len(listed) - 1, 0))
    first = window(len(listed), size, at)
    most = max((row[2] for row in listed), default=0.0)
    owns = scene.owns_parts
    chosen = scene.view.focus == "page" and scene.view.page == "nodes"
    body = []
    for number, (k, tau, share) in enumerate(listed[first:first + size], start=first):
        name = f"{parts[k].stage}.{parts[k].name}"
        marked = chosen and number == at
        body.append(Row([
            Cell(pen.sign("▸") if marked else ""), Cell(pen.cut(pen.text(name), longest)),
            Cell(show.eng(tau), figure=f"{name}.tau_s"), Cell(show.eng(1.0 / (2 * pi * abs(tau)))),
            NOTHING if share <= 0 or most <= 0 else Cell(bar=share / most, style="bar"),
            Cell(f"{100 * share:.0f}"),
            Cell("" if k not in owns else show.about(owns[k]).removesuffix(" %"), figure=f"{name}.owns_{scene.end}"),
        ], "select" if marked else ""))
    if not body:
        body = [Row([NOTHING, Cell("none", "dim"), *[NOTHING] * 5])]
    columns = [Column(least=1, gap=0), Column("time constants", 14, right=False), Column("s", 5),
               Column("Hz", 5, drop=2), Column("", 3, right=False, most=14), Column("%", 3, drop=3), Column("owns", 4)]
    return grid(columns, body, room, pen, focus)


def _estimates(scene: Scene, room: int) -> Line:
    """The exact edge beside what the estimates make of it: what the approximation costs."""
    of, pen, exact = scene.figures, scene.pen, scene.edge_hz
    constants = of.solution.constants
    by = [("node poles", of.node_upper_hz), ("time constants", constants.upper_hz)] if scene.view.upper else \
        [("time constants", constants.lower_hz)]
    told: list[Line] = [(Span(f" {scene.end} edge ", "dim"), Span(pen.text(show.eng(exact, "Hz")), "head"))]
    for word, estimate in by:
        if estimate is not None:
            off = f" {100 * (estimate / exact - 1):+.0f} %" if exact else ""
            told.append((Span(f"   by {word} ", "dim"), Span(show.eng(estimate)), Span(off, "dim")))
    return _joined(told, room)
