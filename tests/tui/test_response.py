"""Page 3: the plot and the figures at its cursor, and the keys that move them."""

import random
import re
from dataclasses import replace
from math import floor, isclose, log10

import pytest

from polebook.book.build import at, ledger
from polebook.book.response import begin_hz, whole_band
from polebook.session import state as sessions
from polebook.tui.draw import curves
from polebook.tui.draw.response import UNSTABLE
from polebook.tui.draw.screen import screen
from polebook.tui.view import Plot, State, View
from tests.book.verdict_cases import CASES
from tests.golden.screens import opened
from tests.terminal.probe import Terminal, app
from tests.tui.desk import LISTENER, SIX, Desk, copied
from tests.tui.drawn import faults, random_session, random_size, random_view

BRAILLE = {chr(code) for code in range(0x2801, 0x2900)}


def on_page(of=SIX, *keys, plain=False):
    return Desk(of, plain=plain).press("tab", "3", *keys)


def rows(desk, columns=80, lines=24):
    return desk.screen(columns, lines).split("\n")


def plot_rows(desk, columns=80, lines=24):
    """The rows of the plot, from the axis on."""
    found = rows(desk, columns, lines)
    top = next(k for k, row in enumerate(found) if row.startswith("─")) + 1
    foot = next(k for k, row in enumerate(found) if row.lstrip().startswith("└"))
    return found[top:foot]


def foot(desk, columns=80, lines=24):
    found = rows(desk, columns, lines)
    return next(row for row in found if row.lstrip().startswith("└"))


def cursor_of(desk):
    of = desk.state.session.good
    return desk.view.plot.cursor_hz or begin_hz(of)


def test_a_terminal_of_80_by_24_has_eight_rows_of_plot_and_the_figures_below():
    desk = on_page()
    assert len(plot_rows(desk)) == 8
    text = desk.screen()
    assert re.search(r"▴ 100\.0 kHz   gain 75\.\d\d dB   phase 180°   lost 0\.0\d dB   delay \d+ ns\n", text)
    assert re.search(r"\n Q1 33\.\d\d dB \d° lost 0\.\d\d   \w+ ", text)
    assert re.search(r"\n +1k +3k .* 10M Hz\n", text)


def test_the_figures_at_the_cursor_are_those_of_the_command():
    desk = on_page()
    for _ in range(7):
        desk.press(".")
    hz = cursor_of(desk)
    of = desk.state.session.ledger
    lines = at(of, hz)["lines"]
    text = desk.screen(140, 45)
    for line in lines:
        row = next(row for row in text.split("\n") if row[2:].startswith(f"{line['name']} ") and "°" in row[:45])
        shown = row[2:].split()
        assert shown[1] == f"{round(line['gain_db'], 2) + 0.0:.2f}", row
        assert (float(shown[2].removesuffix("°")) - line["phase_deg"] + 180) % 360 - 180 == pytest.approx(0.0, abs=0.51)
        assert float(shown[5]) == pytest.approx(line["lost_db"], abs=0.0051)
    whole = sum(line["gain_db"] for line in lines)
    assert f"gain {whole:.2f} dB" in text


def test_edges_stand_where_the_curve_crosses_3_dB_and_targets_are_limits():
    desk = on_page()
    plot = plot_rows(desk, 80, 40)
    spots = [(k, column) for k, row in enumerate(plot) for column, char in enumerate(row) if char == "●"]
    assert len(spots) == 2 and spots[0][0] == spots[1][0], "both lie at -3 dB"
    of = desk.state.session.ledger
    low, high = whole_band(of)
    begin = foot(desk, 80, 40).index("└") + 1
    size = len(foot(desk, 80, 40)) - begin

    def column(hz):
        return begin + floor(log10(hz / low) / log10(high / low) * (2 * size - 1) + 0.5) // 2

    assert sorted(column for _, column in spots) == pytest.approx([column(of.lower_hz), column(of.upper_hz)], abs=0)
    row, _ = spots[0]
    limits = {k for k, char in enumerate(plot[-2]) if char == "┊"}
    assert limits == {column(of.chain.get(f"target.{end}")) for end in ("lower", "upper")}
    assert "┊" not in "".join(plot[:row]), "above -3 dB nothing is limited"


def test_poles_are_ticked_and_those_of_the_line_stand_out():
    desk = on_page(SIX, "right", "right")
    line = next(line for line in screen(desk.state, 140, 45) if line[0].text.lstrip().startswith("└"))
    own = [span for span in line if span.style == "select" and "×" in span.text]
    of = desk.state.session.ledger
    low, high = whole_band(of)
    stages = {root.stage for root in of.poles.roots if low < root.hz < high}
    assert bool(own) == (desk.line in stages)
    assert any("×" in span.text for span in line)


def test_keys_of_the_cursor_and_of_the_window():
    desk = on_page()
    start = cursor_of(desk)
    desk.press(".", ".")
    assert start < cursor_of(desk)
    desk.press(",", ",", ",")
    assert cursor_of(desk) < start
    desk.press("z", "z")
    assert desk.view.plot.low_hz is not None
    low = desk.view.plot.low_hz
    desk.press("]")
    assert desk.view.plot.low_hz > low
    desk.press("[")
    assert isclose(desk.view.plot.low_hz, low)
    desk.press("home")
    assert isclose(desk.view.plot.low_hz, whole_band(desk.state.session.ledger)[0])
    desk.press("escape")
    assert desk.view.plot.low_hz is None and desk.view.page == "response"
    desk.press("escape")
    assert desk.view.page == "ledger"


def test_zooming_on_is_told_to_be_at_its_end():
    desk = on_page(SIX, *"zzzzzzz")
    assert "as near as it goes" in desk.view.message
    desk = on_page(SIX, *"ZZZZZZZZZZ")
    assert "as far as it goes" in desk.view.message


def test_enter_goes_from_corner_to_corner():
    desk = on_page(SIX, "home")
    of = desk.state.session.ledger
    wanted = sorted([of.lower_hz, of.upper_hz, of.chain.get("target.lower"), of.chain.get("target.upper")])
    for hz in [*wanted, wanted[0]]:
        desk.press("enter")
        assert cursor_of(desk) == hz
    assert "lower edge" in desk.view.message
    desk.press("z", "z", "z", "enter")
    low, high = desk.view.plot.low_hz, desk.view.plot.high_hz
    assert low <= wanted[1] <= high


def test_with_the_sheet_focused_it_is_stepped_and_a_point_begins_a_value():
    desk = on_page(SIX, "tab")
    before = desk.view.plot
    desk.press("+")
    assert desk.text != Desk(SIX).text
    desk.press("z")
    assert desk.view.plot != before, "keys of a plot alone need no focus"
    desk.press(".")
    assert desk.view.field is not None


def test_what_is_shown_goes_round_and_is_told():
    desk = on_page()
    told = []
    for _ in range(4):
        desk.press("v")
        told.append(desk.view.message)
    assert "group delay" in told[0] and told[1].startswith("Z in") and told[2].startswith("Z out") and "gain" in told[3]
    assert desk.view.plot.what == "gain"
    assert desk.press("V").view.plot.what == "output"


def test_impedances_as_the_ledger_and_as_a_resistance_and_a_capacitance():
    desk = on_page(SIX, "v", "v")
    text = desk.screen()
    assert "Z in 44.2 Ω   -2°   as 44.2 Ω ∥" in text
    desk.press("right", "right", "s")
    assert "Z in of Q3" in desk.screen() and "Z in of Q3" in desk.view.message
    desk.press("v")
    assert "Z out of Q3" in desk.screen()
    plain = on_page(SIX, "v", "v", plain=True).screen()
    assert "44.2 ohm || " in plain and plain.isascii()


def test_the_selected_line_has_a_curve_of_its_own_with_its_name_at_its_end():
    desk = on_page(SIX, "s", *["right"] * 4)
    assert any("Q5" in row for row in plot_rows(desk))
    assert "gain of" not in desk.view.message
    assert "gain of Q5" in desk.press("s", "s").view.message
    tall = plot_rows(desk, 140, 45)
    bare = plot_rows(on_page(SIX), 140, 45)
    assert sum(char in BRAILLE for row in tall for char in row[:86]) > sum(
        char in BRAILLE for row in bare for char in row[:86]) + 50, "where there is room the other lines are there too"


def test_the_pinned_curve_lies_beside_todays_and_its_figure_is_told():
    desk = on_page(LISTENER, "p", "tab")
    assert not any("b" in row for row in plot_rows(desk)), "the same curve twice is one"
    desk.go("Q2.rc").press("/", "tab", "3")
    plot = plot_rows(desk)
    assert any("b" in row for row in plot) and any("g" in row for row in plot)
    assert re.search(r"pinned 5[89]\.\d\d ", desk.screen())


def test_stepping_a_value_leaves_the_axes_where_they_are():
    desk = on_page(LISTENER, "tab").go("Q2.rc")
    desk.press("tab", "3")
    before = [row[:6] for row in plot_rows(desk)], rows(desk)[rows(desk).index(foot(desk)) + 1]
    moved = 0
    for _ in range(4):
        desk.press("+")
        after = [row[:6] for row in plot_rows(desk)], rows(desk)[rows(desk).index(foot(desk)) + 1]
        moved += after != before
        before = after
    assert moved <= 1


def test_gains_in_plain_ratios():
    text = on_page(SIX, "g").screen()
    assert re.search(r"gain 58\d\d ", text) and "10k┤" in text
    assert "dB" not in text.split("lost")[0].replace("-3 dB", "")


def test_an_unstable_chain_says_what_its_curves_are():
    session = sessions.new_session("chains/some.toml", CASES["unstable, a follower behind a long wire"])
    text = "".join(span.text for line in screen(State(session, View(page="response")), 80, 24) for span in line)
    assert UNSTABLE in text and "gain" in text
    assert ledger(session.chain).unstable


def test_a_file_without_figures_refuses_the_keys_with_a_reason():
    session = sessions.new_session("chains/some.toml", "format = 1\n")
    desk = on_page()
    desk.state = State(session, View(page="response", focus="page"))
    for key in (".", "z", "]", "home", "enter"):
        desk.press(key)
        assert desk.view.bad and "no response" in desk.view.message, key


def test_figures_of_before_a_fault_can_still_be_looked_at():
    desk = on_page(LISTENER)
    desk.state = replace(desk.state, session=sessions.set_text(desk.state.session, "format = 2\n", 0.0))
    assert desk.state.session.ledger is None
    before = cursor_of(desk)
    assert cursor_of(desk.press(".")) > before
    assert "figures of before the fault" in desk.screen() and "gain" in desk.screen()


def test_a_move_of_the_cursor_computes_one_frequency():
    desk = on_page()
    desk.screen()
    before = curves.swept.cache_info().misses, curves.here.cache_info().misses
    desk.press(".").screen()
    assert (curves.swept.cache_info().misses, curves.here.cache_info().misses) == (before[0], before[1] + 1)
    desk.press("v").screen()
    misses = curves.delayed.cache_info().misses
    desk.press(".").screen()
    assert curves.delayed.cache_info().misses == misses


@pytest.mark.parametrize(("columns", "lines"), [(120, 24), (140, 45), (200, 60)])
def test_a_wide_terminal_has_the_response_beside_the_ledger(columns, lines):
    desk = Desk(SIX)
    found = rows(desk, columns, lines)
    wall = found[next(k for k, row in enumerate(found) if row.startswith("─"))].index("┬")
    right = [row[wall + 1:] for row in found]
    assert any("└" in row for row in right) and sum(any(char in BRAILLE for char in row) for row in right) >= 3
    assert any("Hz" in row for row in right[-8:]) and any(row.startswith(" Q1") for row in right)
    desk.press("tab", "3")
    found = [row[wall + 1:] for row in rows(desk, columns, lines)]
    assert not any("└" in row for row in found), "the page is the response already"


def test_the_key_line_tells_what_the_keys_do_where_the_focus_is():
    desk = on_page(SIX)
    assert "Enter next corner" in desk.screen()
    assert "Enter edit" in desk.press("tab").screen()


def test_help_tells_the_words_of_the_page():
    text = "\n".join(on_page(SIX, "?").overlay.text)
    assert "Words of the response page" in text and "own curve" in text
    assert text.index("Words of the response page") < text.index("Words of the ledger page")


def random_plot(rng):
    def hz():
        return rng.choice((None, 10 ** rng.uniform(-9, 14), 1e3, 1e-6, 1e12, 0.0, -5.0))

    return Plot(hz(), hz(), hz(), rng.choice(("gain", "delay", "input", "output", "nothing of the kind")),
                rng.random() < 0.5)


@pytest.mark.parametrize("seed", range(6))
def test_any_user_of_any_chain_gets_a_whole_screen(seed):
    rng = random.Random(1000 + seed)
    for number in range(12):
        session = random_session(rng, 100 * seed + number)
        view = replace(random_view(rng, session), page=rng.choice(("response", "response", "ledger")),
                       plot=random_plot(rng))
        state = State(session, view, plain=rng.random() < 0.3)
        columns, lines = random_size(rng)
        wrong = faults(state, columns, lines, screen(state, columns, lines))
        assert not wrong, (seed, number, columns, lines, view, wrong)


@pytest.mark.parametrize("what", ["gain", "delay", "input", "output"])
def test_every_size_is_filled_to_the_cell(what):
    state = State(opened("photodiode-front"), View(page="response", plot=Plot(what=what, single=True), line=2))
    for columns, lines in [(n, 24) for n in range(60, 150, 7)] + [(80, n) for n in range(16, 60, 3)]:
        assert not faults(state, columns, lines, screen(state, columns, lines)), (columns, lines)


def test_a_step_with_the_plot_is_within_6_kB_and_a_move_of_the_cursor_within_3(tmp_path):
    """Budgets on the wire at 80x24; they do not depend on the machine. Every repaint leaves the screen as drawn."""
    path = copied(tmp_path, SIX)
    desk = Desk(path)
    keys = ("f", *"Q3.rc", "enter", "tab", "3")
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press(*keys)
        terminal.shows(desk.press(*keys).screen())
        for key, most in (("+", 6000), (".", 3000), ("+", 6000), (".", 3000), ("z", 6000), (".", 3000)):
            before = len(terminal.log)
            terminal.press(key)
            terminal.shows(desk.press(key).screen())
            assert 0 < len(terminal.log) - before <= most, key
