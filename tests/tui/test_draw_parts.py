"""What the pieces of the screen promise: marks, focus, what moved, laziness, and nothing of a file that harms."""

from dataclasses import replace
from itertools import pairwise

import pytest

from polebook.session import state as sessions
from polebook.tui.draw.focus import focused
from polebook.tui.draw.ledger import figures
from polebook.tui.draw.pen import pen, window
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.screen import screen
from polebook.tui.draw.strip import strip
from polebook.tui.lines import Line, plain_text, width
from polebook.tui.view import Field, State, View
from tests.golden.screens import LISTENER, SIX, at, many, opened, pinned


def styled(lines: list[Line], style: str) -> list[str]:
    """The texts that are drawn in a style."""
    return [span.text.strip() for line in lines for span in line if span.style == style and span.text.strip()]


@pytest.mark.parametrize(("lost", "mark", "ascii_mark"), [
    (None, "·", "."), (-0.2, "·", "."), (0.0, "·", "."), (0.01, "○", ":"), (0.124, "○", ":"), (0.125, "◔", "+"),
    (0.374, "◔", "+"), (0.375, "◑", "x"), (0.624, "◑", "x"), (0.625, "◕", "X"), (0.999, "◕", "X"), (1.0, "●", "#"),
    (7.0, "●", "#"),
])
def test_a_node_fills_with_what_it_loses_of_what_it_was_allotted(lost, mark, ascii_mark):
    assert (pen(False).fill(lost, 1.0), pen(True).fill(lost, 1.0)) == (mark, ascii_mark)
    assert pen(False).fill(0.001, 0.0) == "●"


@pytest.mark.parametrize("count", [1, 2, 7, 66])
@pytest.mark.parametrize("size", [1, 2, 3, 10, 70])
def test_what_is_chosen_is_in_sight_and_no_row_is_wasted(count, size):
    for chosen in range(count):
        first = window(count, size, chosen)
        assert first <= chosen < first + size and 0 <= first <= max(count - size, 0)


def test_a_window_stands_still_for_some_rows():
    starts = [window(66, 20, chosen) for chosen in range(66)]
    assert sum(a != b for a, b in pairwise(starts)) <= 6


@pytest.mark.parametrize("room", [60, 80, 140])
def test_the_strip_always_shows_the_selected_line(room):
    session = many().session
    for line in range(42):
        scene = Scene(State(session, View(line=line)))
        drawn = strip(scene, room)
        name = {0: "EMF", 41: "load"}.get(line, scene.line)
        assert styled(drawn, "select") == [name]
        assert all(width(row) <= room for row in drawn)


def test_the_focused_figure_stands_out_and_is_one_that_has_a_working():
    for number, shown in enumerate(("30.22", "-32.55", None, None, "0.60")):
        state = at(LISTENER, "Q1.rc", focus="page", figure=number)
        drawn = screen(state, 80, 24)
        assert len(styled(drawn, "focus")) == 1
        assert shown is None or styled(drawn, "focus") == [shown]
        assert figures(Scene(state))[number] == focused(Scene(state))
    assert figures(Scene(at(LISTENER, "Q1.rc"))) == (
        "Q1.gain_db", "Q1.k", "n1.pole_hz", "n1.lost_upper_db", "n1.allotted_upper_db", "Q1.owns_upper")
    assert focused(Scene(at(LISTENER, "Q1.rc"))) == ""


def test_the_cursor_of_a_field_is_where_it_is():
    for cursor, under in ((0, "4"), (1, "u"), (3, "")):
        state = at(LISTENER, "Q2.ce")
        state = replace(state, view=replace(state.view, field=Field("Q2.ce", "4u7", cursor)))
        drawn = screen(state, 80, 24)
        assert [span.text for line in drawn for span in line if span.style == "focus"] == [under or " "]
        typed = [span.text for line in drawn for span in line if span.style in ("field", "focus")]
        assert "".join(typed).strip() == "4u7"


def test_the_selected_line_is_told_by_more_than_its_colour():
    lines = plain_text(screen(at(SIX, "Q5.re"), 80, 24)).split("\n")
    assert [line.split()[1] for line in lines if line.startswith(" ▸ ")] == ["Q5"]


def test_every_figure_that_moved_says_by_how_much():
    session = pinned(SIX, "Q5.rc", "3k3").session
    state = State(session, View(line=5))
    drawn = styled(screen(state, 80, 24), "moved")
    assert "+3.05" in drawn and "-3.4M" in drawn and "-2.34" in drawn
    back = sessions.set_value(session, "Q5.rc", "2k2", 9.0)
    assert styled(screen(State(back, View(line=5)), 80, 24), "moved") == ["pinned"]
    assert "as pinned" in plain_text(screen(State(back, View(line=5)), 80, 24))


def test_a_drawing_asks_for_no_more_than_it_shows():
    ledger = opened(SIX).ledger
    assert ledger is not None and ledger.verdict and ledger.targets and ledger.cautions
    asked = set(vars(ledger))
    session = replace(opened(SIX), ledger=ledger, good=ledger)
    screen(State(session, View(line=3)), 80, 24)
    assert set(vars(ledger)) - asked <= {"lines", "bridges", "held", "sites", "upper_account", "owns_upper"}


def test_nothing_of_a_file_reaches_the_terminal_as_a_command():
    text = opened(LISTENER).history.text.replace('title  = "', 'title  = "\\u001b[31m').replace(
        'note        = "', 'note        = "\\u202e\\u0007 ').replace("[device.VF]", '[device."V\\u001bF"]').replace(
        'device      = "VF"', 'device      = "V\\u001bF"')
    session = sessions.new_session("chains/\x1b]0;x\x07.toml", text)
    for view in (View(line=3, key=2), View(line=1, sheet="device.V\x1bF"), View(message="\x1b[2J", bad=True)):
        for size in ((80, 24), (140, 45)):
            shown = "".join(span.text for line in screen(State(session, view), *size) for span in line)
            assert shown.isprintable() and "\u202e" not in shown


def test_a_verdict_that_is_too_long_ends_with_a_sentence():
    state = at(SIX, "Q5.re")
    lines = plain_text(screen(state, 62, 17)).split("\n")
    first = next(number for number, line in enumerate(lines) if line.startswith(" All "))
    assert lines[first + 1].endswith(".") and lines[first + 2].startswith(" re: ")
