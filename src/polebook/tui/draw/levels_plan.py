"""First bank of the levels page, the d.c. plan: what a meter shows at every terminal, currents, heat, the rails."""

from __future__ import annotations

from collections.abc import Sequence

from polebook.book.asked import unknown_draws
from polebook.report import figures as show
from polebook.stages.base import TERMINALS
from polebook.tui.draw import moved
from polebook.tui.draw.grid import NOTHING, Cell, Column, grid
from polebook.tui.draw.grid import Row as GridRow
from polebook.tui.draw.levels_points import FIGURES, Row, rows
from polebook.tui.draw.levels_told import change_of, flowing, judged, piece, target, told
from polebook.tui.draw.pen import BLANK, window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span

MOST_NAME, MOST_CARD = 14, 8
ROOMY = 72  # cells from which units stand in the heading
RAIL_ROWS, MOST_RAILS, TOLD_ROWS, MOST_TOLD = 2, 3, 2, 4
_UNITS = {"current_a": "A", "dissipation_w": "W"}
_ELEMENTS = {"": "itself", "base": "base", "upper base": "upper base", "source": "current source", "iq": "itself",
             "output": "output", "feedback": "feedback"}
_AMPLIFIERS = {"control": "input", "lower": "", "output": "output"}


def figures(scene: Scene) -> tuple[str, ...]:
    """The figures of the selected stage, then those of the rails and the target for the current."""
    own = [f"bias.{row.name}.{key}" for row in rows(scene.figures) if row.stage == scene.names[scene.at]
           for key in FIGURES if key in row.accounted]
    rails = [f"rail.{name}.current_a" for name in _shown(scene)]
    return (*own, *rails, *(("target.current.got",) if target(scene, "current") is not None else ()))


def rows_for_all(scene: Scene) -> int:
    """Lines that the bank takes with everything in sight."""
    return 1 + max(len(rows(scene.figures)), 1) + 1 + TOLD_ROWS + RAIL_ROWS


def bank(scene: Scene, room: int, most: int, focus: str) -> list[Line]:
    """At most `most` lines of at most `room` cells; the selected stage among them."""
    if most < 5:
        return _table(scene, room, most, focus)
    need = 1 + max(len(rows(scene.figures)), 1)
    rails = _rails(scene, room, min(max(most - need - TOLD_ROWS, RAIL_ROWS), most - 4, MOST_RAILS), focus)
    about = _about(scene, room, max(min(most - len(rails) - need, MOST_TOLD), 1))
    table = _table(scene, room, most - len(about) - len(rails), focus)
    gap = [BLANK] if len(table) + len(about) + len(rails) < most else []
    return [*table, *gap, *about, *rails]


def _table(scene: Scene, room: int, most: int, focus: str) -> list[Line]:
    found = rows(scene.figures)
    if not found:
        return [(Span(" no stage of the chain has a bias", "dim"),)]
    name = scene.names[scene.at]
    at = next((number for number, row in enumerate(found) if row.stage == name), 0)
    size = max(most - 1, 1)
    first = window(len(found), size, at)
    if at + 1 < len(found) and found[at + 1].stage == name and at + 1 >= first + size:
        first += 1  # the other device of a cascode
    seen = found[first:first + size]
    hot = any(row.past or row.apart for row in found)
    body = [GridRow(_cells(scene, row, row.stage == name), "select" if row.stage == name else "") for row in seen]
    return grid(_columns(scene, found, hot, room), body, room, scene.pen, focus)


def _words(scene: Scene, found: Sequence[Row]) -> dict[str, str]:
    """What the terminals are called: by the family where all are of one."""
    groups = {row.group for row in found}
    if len(groups) > 1:
        return {"control": "control", "lower": "lower", "output": "output"}
    group = next(iter(groups))
    return dict(TERMINALS[group]) if group else _AMPLIFIERS


def _columns(scene: Scene, found: Sequence[Row], mark: bool, room: int) -> list[Column]:
    words, pinned = _words(scene, found), scene.changes is not None
    current, across, heat = ("current A", "across V", "heat W") if room >= ROOMY and not pinned else (
        "current", "across", "heat")

    def change(drop: int) -> list[Column]:
        return [Column(least=moved.WIDTH, right=False, drop=drop)] if pinned else []

    rated = any(rating.key == "p_max" for row in found for rating in row.ratings)
    network = any(row.network is not None for row in found)
    return [
        Column(least=1, gap=0), Column("stage", 5, right=False, gap=0),
        Column("card", 4, right=False, drop=12),
        Column(current, 6), *change(3),
        Column("", 6, right=False, drop=7),
        *([Column("network", 7)] if network else []),
        Column(across, 6), *change(8),
        Column(words["control"], 6), *change(10),
        *([Column(words["lower"], 6), *change(9)] if words["lower"] else []),
        Column(words["output"], 6), *change(2),
        Column(heat, 6), *change(4),
        *([Column("of max", 5, drop=5), Column("", 3, right=False, most=8, drop=11)] if rated else []),
        *([Column(least=1)] if mark else []),
    ]


def _cells(scene: Scene, row: Row, chosen: bool) -> list[Cell]:
    pen, pinned = scene.pen, scene.changes is not None
    found = rows(scene.figures)
    result = [Cell(pen.sign("▸") if chosen else ""), Cell(pen.cut(pen.text(row.name), MOST_NAME)),
              Cell(pen.cut(pen.text(row.card), MOST_CARD), "dim")]
    styles, apart = _styles(row), "warn" if row.current_apart else ""
    lower = any(one.group for one in found)
    for key in FIGURES:
        if key == "lower_v" and not lower:
            continue
        value, name = row.values[key], f"bias.{row.name}.{key}"
        text = show.eng(value) if value is not None else show.NONE
        result.append(Cell(text, styles.get(key, "") or ("dim" if value is None else ""), figure=name))
        if pinned and scene.changes is not None:
            change = scene.changes.bias(row.name, key) if row.accounted else None
            result.append(Cell(moved.text(change, _UNITS.get(key, "V")), "moved"))
        if key == "current_a":
            result.append(Cell(row.origin, "dim"))
            if any(one.network is not None for one in found):
                result.append(Cell("" if row.network is None else show.eng(row.network), apart))
    if any(rating.key == "p_max" for one in found for rating in one.ratings):
        result += _of_rating(row)
    if any(one.past or one.apart for one in found):
        result.append(Cell("!" if row.past or row.apart else "", "bad" if row.past else "warn"))
    return result


def _styles(row: Row) -> dict[str, str]:
    """Figure -> how it stands out: past a rating, or stated far off what the network gives."""
    past = {rating.key for rating in row.past}
    return {"current_a": "bad" if "i_max" in past and not row.amplifier else "warn" if row.current_apart else "",
            "across_v": "bad" if "v_max" in past else "warn" if row.left_v is not None else "",
            "dissipation_w": "bad" if "p_max" in past else ""}


def _of_rating(row: Row) -> list[Cell]:
    """How much of the power rating is used, and a bar of it."""
    rating = next((one for one in row.ratings if one.key == "p_max"), None)
    if rating is None or rating.used is None:
        return [NOTHING, NOTHING]
    over = rating.used > 1.0
    return [Cell(show.about(rating.used), "bad" if over else ""),
            Cell(bar=min(rating.used, 1.0), style="bad" if over else "bar") if rating.used > 0.005 else NOTHING]


def _about(scene: Scene, room: int, most: int) -> list[Line]:
    """Of the selected line: what is not known and why, what its cards allow, what it draws from the rails."""
    pen, name = scene.pen, scene.names[scene.at]
    own = [row for row in rows(scene.figures) if row.stage == name]
    lines: list[Line] = []
    for row in own:
        if row.why:
            lines += [(Span(f" {text}", "warn"),) for text in pen.wrapped(row.why, room - 2)]
        if row.left_v is not None:
            told = f"{row.name}: {show.eng(row.values['across_v'], 'V')} across it is stated, its rails leave " \
                   f"{show.eng(row.left_v, 'V')}"
            lines.append((Span(f" {pen.cut(pen.text(told), room - 2)}", "warn"),))
    for row in own:
        lines += flowing(_ratings(scene, row), room, 1) if row.ratings or row.rise_k is not None else []
    return [*lines, *_draws(scene, name, room, 2)][:most]


def _ratings(scene: Scene, row: Row) -> list[Line]:
    """The ratings of a row's card with how much of each is used, the worst first; what it warms up by."""
    pen = scene.pen
    pieces: list[Line] = []
    for rating in sorted(row.ratings, key=lambda one: -(one.used or 0.0)):
        used = "" if rating.used is None else f"{show.about(rating.used)} of "
        over = rating.used is not None and rating.used > 1.0
        text = f"{used}{rating.key} {show.eng(rating.most, rating.unit)}"
        pieces.append((Span(pen.text(text), "bad" if over else ""), *((Span(" past it", "bad"),) if over else ())))
    if row.rise_k is not None:
        pieces.append((Span(f"{row.rise_k:.0f} K over the air"),))
    head = Span(f"{pen.cut(pen.text(row.name), MOST_NAME)}: ", "dim")
    return [(head, *pieces[0]), *pieces[1:]] if pieces else []


def _draws(scene: Scene, name: str, room: int, most: int) -> list[Line]:
    """What a line draws from each rail, in one line."""
    pen, rails = scene.pen, scene.figures.rails
    pieces: list[Line] = []
    for rail in rails.standing:
        drawn = [draw for draw in rails.draws if draw.rail == rail and draw.stage == name]
        if not drawn:
            continue
        each = ", ".join(f"{_ELEMENTS.get(draw.element, draw.element)} "
                         f"{'not known' if draw.current is None else show.eng(abs(draw.current), 'A')}"
                         for draw in drawn)
        way = "into" if sum(draw.current or 0.0 for draw in drawn) < 0 else "from"
        lead = f"{pen.cut(pen.text(name), MOST_NAME)}: " if not pieces else ""
        pieces.append((Span(f"{lead}{way} {rail} ", "dim"), Span(pen.text(each))))
    if not pieces:
        stage = next((one for one in scene.chain.stages if one.name == name), None)
        why = "is left out" if stage is not None and stage.left_out else "draws nothing at d.c."
        return [(Span(f" {pen.cut(pen.text(name), MOST_NAME)} {why}", "dim"),)]
    return flowing(pieces, room, most)


def _shown(scene: Scene) -> dict[str, float]:
    """The rails with their volts; ground only where current flows through it."""
    rails = scene.figures.rails
    return {name: volts for name, volts in rails.standing.items() if volts or rails.current(name) != 0.0}


def _rails(scene: Scene, room: int, most: int, focus: str) -> list[Line]:
    """What each rail gives or takes, the power of all, and the target for the current."""
    rails, changes = scene.figures.rails, scene.changes
    if not rails.standing:
        return [(Span(" the file has no supply: rails and their currents are not told", "dim"),)]

    def pieces(with_changes: bool) -> list[Line]:
        pinned = changes if with_changes else None
        found: list[Line] = []
        for name, volts in _shown(scene).items():
            current = rails.current(name)
            does = "not known" if current is None else "gives" if current > 0 else "takes" if current < 0 else "idle"
            word = name if not volts else f"{name} {show.eng(volts, 'V')}"
            text = does if not current else f"{does} {show.eng(abs(current), 'A')}"
            found.append(piece(scene, focus, f"rail.{name}.current_a", word, text,
                               change_of(pinned.rail(name), "A") if pinned and volts else ""))
        found += judged(scene, focus, "current", "current", "")
        if rails.power is not None:
            found.append(piece(scene, "", "", "power", show.eng(rails.power, "W"),
                               change_of(pinned.overall("supply_power_w"), "W") if pinned else ""))
        elif unknown := unknown_draws(rails, list(rails.standing)):
            found.append((Span(scene.pen.cut(scene.pen.text(unknown), room - 2), "warn"),))
        return found

    return told(pieces, room, most)
