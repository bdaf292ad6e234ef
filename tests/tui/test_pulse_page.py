"""Page 4: the step response and the sag as drawn, the figures below, and the keys that move them."""

import random
import re
from dataclasses import replace
from math import floor

import numpy as np
import pytest

from polebook.book.pulse import rise_by_edge, rise_by_nodes
from polebook.book.pulse_rows import marks as reported
from polebook.session import state as sessions
from polebook.tui.control import pages
from polebook.tui.control.figures import names_of
from polebook.tui.draw import pulse_curves as curves
from polebook.tui.draw import pulse_sight as sight
from polebook.tui.draw.pulse import reach
from polebook.tui.draw.pulse_figures import listed, marks
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.screen import screen
from polebook.tui.view import State, Times, View
from tests.book.verdict_cases import CASES, stage
from tests.golden.screens import opened
from tests.helpers import DEMOS
from tests.terminal.probe import Terminal, app
from tests.tui.desk import LISTENER, SIX, Desk, copied
from tests.tui.drawn import faults, random_session, random_size, random_times, random_view
from tests.tui.test_draw_parts import styled

SOUNDER = DEMOS / "frost-line-sounder.toml"
LOW_PASS = 'format = 1\n[source]\nkind = "voltage"\nresistance = "1k"\n' + stage(
    "P", "ladder", arms=["{ shunt_c = 1e-9 }"]).replace("'", "")
TAU = 1e-6


def on_page(of=SOUNDER, *keys, plain=False):
    return Desk(of, plain=plain).press("tab", "4", *keys)


def of_text(text, **view):
    """A desk at a chain of a text."""
    desk = Desk(SIX)
    session = sessions.new_session("chains/some.toml", text)
    desk.state = State(session, replace(View(page="pulse", focus="page"), **view))
    return desk


def with_targets(desk, **targets):
    session = desk.state.session
    for name, typed in targets.items():
        session = sessions.set_value(session, f"target.{name}", typed, 0.0)
    desk.state = replace(desk.state, session=session)
    return desk


def plot_rows(desk, columns=80, lines=24):
    """The rows of the plot, above its axis, and the column where it begins."""
    found = desk.screen(columns, lines).split("\n")
    top = next(k for k, row in enumerate(found) if row.startswith("─")) + 1
    foot = next(k for k, row in enumerate(found) if row.lstrip().startswith("└"))
    return found[top:foot], found[foot]


def cells(desk, char, columns=80, lines=24):
    """(row from below, column) of every such sign, beside the axis, in a plot; and how wide and tall it is."""
    rows, foot = plot_rows(desk, columns, lines)
    begin = foot.index("└") + 1
    wide = len(re.split("[│├]", foot)[0].rstrip()) - begin
    found = [(len(rows) - 1 - k, at - begin) for k, row in enumerate(rows) for at, one in enumerate(row[:begin + wide])
             if one == char and at >= begin]
    return found, wide, len(rows)


def ledger_of(desk):
    return desk.state.session.ledger


def cursor_of(desk):
    scene = Scene(desk.state)
    there = reach(scene.figures, scene.view.upper)
    return sight.cursor(scene.view.step if scene.view.upper else scene.view.sag, there)


def test_the_figures_are_those_of_the_ledger_with_their_targets_judged():
    desk = on_page()
    pulse, text = ledger_of(desk).pulse, desk.screen()
    assert f"rise {pulse.rise_time_s * 1e9:.2f} ns for 6.00 ns met" in text
    assert f"overshoot {pulse.overshoot_percent:.2f} % for 10 % met" in text
    assert f"±1 % {pulse.settling_1_s * 1e9:.1f} ns" in text
    assert f"±0.1 % {pulse.settling_01_s * 1e9:.1f} ns" in text
    short = with_targets(on_page(), rise="3n", overshoot="2 %").screen()
    assert "for 3.00 ns short" in short and "for 2 % short" in short


def test_the_rise_beside_what_the_edge_and_the_nodes_make_of_it():
    desk = on_page()
    of = ledger_of(desk)
    edge, nodes, rise = rise_by_edge(of.upper_hz), rise_by_nodes(of.sites), of.pulse.rise_time_s
    assert f"0.35/edge {edge * 1e9:.2f} ns {100 * (edge / rise - 1):+.0f} %" in desk.screen()
    assert f"by nodes {nodes * 1e9:.2f} ns {100 * (nodes / rise - 1):+.0f} %" in desk.screen()
    table = desk.screen(140, 45).split("\n")
    for site in of.sites:
        if site.pole_hz:
            alone = 0.349699 / site.pole_hz
            row = next(line for line in table if re.search(rf" {site.name} +[\d.]+[kMG]? +[\d.]+[pnu] ", line))
            assert re.search(rf" {100 * (alone / nodes) ** 2:.0f} ", row), row


def test_the_height_at_the_cursor_is_that_of_the_response():
    desk = on_page()
    for _ in range(5):
        desk.press(".")
    height = ledger_of(desk).pulse.at_one(cursor_of(desk))
    assert f"{100 * height:.2f} % of the final value, 19.74 dB" in desk.screen()
    assert "% of the final value, 9.70" in desk.press("g").screen()
    assert f"▴ {cursor_of(desk) * 1e9:.3f} ns" in desk.screen()


@pytest.mark.parametrize("size", [(80, 24), (80, 50), (140, 45)])
def test_marks_lie_on_the_curve_where_the_figures_are_read(size):
    desk = on_page()
    found, wide, tall = cells(desk, "●", *size)
    of = ledger_of(desk)
    end = of.pulse.window_s
    wanted = {floor(row["time_s"] / end * (2 * wide - 1) + 0.5) // 2 for row in reported(of) if row["mark"] != "start"}
    assert {column for _, column in found} == wanted
    top = max(row for row, _ in found)
    at = floor(of.pulse.marks.top_s / end * (2 * wide - 1) + 0.5) // 2
    assert at in {column for row, column in found if row == top}, "none is above the top"
    assert tall > top > tall / 2


def test_limits_are_where_the_targets_are():
    desk = on_page(SOUNDER)
    found, wide, _ = cells(desk, "┊", 80, 40)
    of = ledger_of(desk)
    by = of.pulse.marks.low_s + 6e-9
    assert {column for _, column in found} == {floor(by / of.pulse.window_s * (2 * wide - 1) + 0.5) // 2}
    rows, _ = plot_rows(desk, 80, 40)
    assert any(row.startswith(" ≤110┤") for row in rows)
    styles = [span.style for line in screen(desk.state, 80, 40) for span in line if "┊" in span.text]
    assert set(styles) == {"good"}
    styles = [span.style for line in screen(with_targets(on_page(), rise="3n").state, 80, 40) for span in line
              if "┊" in span.text]
    assert set(styles) == {"bad"}


def test_the_window_shows_the_rise_and_its_settling_on_round_values():
    for name in sorted(path.stem for path in DEMOS.glob("*.toml")):
        desk = on_page(DEMOS / f"{name}.toml")
        of = ledger_of(desk)
        rows, foot = plot_rows(desk)
        assert of.pulse.marks.high_s < of.pulse.window_s
        assert any(row.startswith("100 %┤") for row in rows) and any(row.startswith("    0┤") for row in rows)
        assert len(foot) == 79


def test_a_single_pole_is_its_closed_form_and_says_that_it_has_no_top():
    desk = of_text(LOW_PASS)
    t, y = curves.step(ledger_of(desk), 0.0, 5e-6, 100)
    np.testing.assert_allclose(y, 1 - np.exp(-t / TAU), atol=1e-12)
    assert "rise 2.20 us" in desk.screen() and "0.35/edge 2.20 us +0 %" in desk.screen()
    assert "no top" in desk.press("down", "enter").view.message and not desk.view.bad


def test_a_fast_ringing_is_not_sampled_away():
    ringing = 'format = 1\n[source]\nkind = "voltage"\nresistance = "1m"\n' + stage(
        "P", "ladder", arms=["{ series_l = 1e-6 }", "{ shunt_c = 1e-12 }"]).replace("'", "")
    of = of_text(ringing).state.session.ledger
    low, high = 0.0, of.pulse.window_s
    t, y = curves.step(of, low, high, 20)
    assert np.diff(t).max() * np.abs(of.pulse.poles.imag).max() < 0.5
    assert y.max() == pytest.approx(1 + of.pulse.overshoot_percent / 100, abs=2e-3)


def test_figures_are_chosen_have_workings_and_enter_goes_to_their_marks():
    desk = on_page()
    of = ledger_of(desk)
    seen = []
    for wanted, working in (("90 %", "rise_time_s"), ("top", "overshoot_percent"), ("within 1 %", "settling_1_s"),
                            ("within 0.1 %", "settling_01_s")):
        assert names_of(desk.state) == (f"overall.{working}",)
        assert styled(screen(desk.state, 80, 24), "focus") != [], working
        time = next(row["time_s"] for row in reported(of) if row["mark"] == wanted)
        assert cursor_of(desk.press("enter")) == time and f"here: {wanted}" in desk.screen()
        assert desk.press("=").overlay.title == f"working of overall.{working}"
        seen.append(desk.overlay.text)
        desk.press("escape", "down")
    assert len({text[0] for text in seen}) == 4
    assert desk.press("down", "down").view.row == 3
    desk.press("up", "up", "up", "enter", "enter")
    assert cursor_of(desk) == of.pulse.marks.low_s and "cursor at 10 %" in desk.view.message


def test_enter_brings_a_mark_into_sight():
    desk = on_page(SOUNDER, "z", "z", "z", "down", "down", "down", "enter")
    assert desk.view.step.low_s <= ledger_of(desk).pulse.settling_01_s <= desk.view.step.high_s
    assert "here: within 0.1 %" in desk.screen()


def test_keys_of_the_cursor_and_of_the_window():
    desk = on_page()
    start = cursor_of(desk)
    assert cursor_of(desk.press(".", ".")) > start > cursor_of(desk.press(",", ",", ","))
    begun = desk.view.step.cursor_s
    assert float(f"{begun:.3e}") == begun, "round values"
    desk.press("z", "z")
    low, high = desk.view.step.low_s, desk.view.step.high_s
    assert high - low == pytest.approx(ledger_of(desk).pulse.window_s / 4)
    desk.press("]")
    assert desk.view.step.low_s == pytest.approx(low + (high - low) / 4)
    desk.press("[")
    assert desk.view.step.low_s == pytest.approx(low)
    assert desk.press("home").view.step.low_s == 0.0
    assert desk.press("end").view.step.high_s == pytest.approx(ledger_of(desk).pulse.window_s)
    desk.press("escape")
    assert desk.view.step.low_s is None and desk.view.page == "pulse"
    assert desk.press("escape").view.page == "ledger"
    assert "as near as it goes" in on_page(SOUNDER, *"z" * 20).view.message
    assert "as far as it goes" in on_page(SOUNDER, *"Z" * 20).view.message


def test_zooming_in_on_the_tail_shows_it_about_the_final_value():
    desk = on_page(SOUNDER, "down", "down", "enter", *"zzzz")
    rows, _ = plot_rows(desk)
    labels = [float(row[:5].removesuffix(" %")) for row in rows if row[:5].strip() and "≤" not in row[:5]]
    assert min(labels) > 95 and max(labels) < 105 and len(labels) >= 2


def test_the_sag_at_the_lower_end():
    desk = on_page(SOUNDER, "b")
    of = ledger_of(desk)
    assert not desk.view.upper and names_of(desk.state) == ("overall.sag_percent",)
    assert f"sag {of.sag.percent:.2f} % for 2 % met   of a pulse of 200 ns" in desk.screen()
    assert f"{100 - of.sag.percent:.2f} % of its height" in desk.screen(), "the cursor begins at the pulse's end"
    assert "at first it falls by Q1.ce " in desk.screen()
    assert curves.sag_at(of, 2e-7) == pytest.approx(1 - of.sag.percent / 100, rel=1e-12)
    low, high = cells(desk, "┊", 80, 40)[0] or cells(desk, "│", 80, 40)[0], cells(desk, "●", 80, 40)[0]
    assert high[0][1] in {column for _, column in low}, "the mark is at the pulse's end"
    assert desk.press("v").view.upper and not desk.press("v").view.upper
    other = on_page(SOUNDER, "tab", "b")
    assert "sag" in other.view.message, "with the sheet focused too"


def test_the_sagging_pulse_is_the_lower_network_s_closed_form():
    text = 'format = 1\n[source]\nkind = "voltage"\nresistance = "1k"\ncouple = "1u"\n[load]\nresistance = "1k"\n' \
           '[target]\npulse = "1m"\nsag = "10 %"\n' + stage("P", "ladder", arms=["{ shunt_r = 1e6 }"]).replace("'", "")
    of = of_text(text).state.session.ledger
    tau = 1e-6 * (1e3 + 1e6 * 1e3 / (1e6 + 1e3))
    t, y = curves.sag(of, 0.0, 2e-3, 50)
    np.testing.assert_allclose(y, np.exp(-t / tau), rtol=1e-8)
    desk = of_text(text, upper=False)
    assert "for 10 % short" in desk.screen() and "at first it falls by load.couple" not in desk.screen()
    assert "source.couple 100 %" in desk.screen()


def test_without_a_pulse_the_page_says_so_and_enter_goes_to_its_key():
    desk = on_page(SIX, "b")
    assert "No sag: target.pulse is not set" in desk.screen() and "Enter set the pulse" in desk.screen()
    assert names_of(desk.state) == ()
    for key in (".", "z", "]", "home", "end"):
        assert "target.pulse is not set" in desk.again().press(key).view.message
    desk.press("enter")
    assert (desk.view.sheet, desk.key, desk.view.focus) == ("target", "target.pulse", "sheet")
    desk.press("2", "u", "enter", "tab")
    assert "of a pulse of 2.00 us" in desk.screen()


def test_an_unstable_chain_says_why_it_has_no_response():
    desk = of_text(CASES["unstable, an op-amp that drives a capacitance"])
    assert "No step response: the chain is unstable." in desk.screen()
    assert "Enter" not in desk.screen().split("\n")[-2]
    for key in (".", "enter", "z", "="):
        assert desk.again().press(key).view.bad


def test_the_pinned_response_lies_beside_todays():
    desk = on_page(SOUNDER, "p", "tab").go("Q1.rc").press("+", "+", "+", "tab")
    then, now = desk.state.session.baseline.pulse, ledger_of(desk).pulse
    text = desk.screen()
    assert any("b" in row for row in plot_rows(desk, 80, 40)[0])
    t = cursor_of(desk)
    assert f"{100 * now.at_one(t):.2f} % of the final value" in text and f"pinned {100 * then.at_one(t):.2f} %" in text
    assert f"+{(now.rise_time_s - then.rise_time_s) * 1e9:.1f}n" in text
    assert f" {now.overshoot_percent - then.overshoot_percent:+.2f} " in text
    assert "pinned" in on_page(SOUNDER, "p").screen() and "pinned 9" not in on_page(SOUNDER, "p").screen()


def test_stepping_a_value_leaves_the_cursor_and_a_window_where_they_are():
    desk = on_page(SOUNDER, ".", "z", "tab").go("Q1.rc")
    before = desk.view.step
    assert desk.press("+").view.step == before
    assert "rise" in desk.screen()


def test_a_move_of_the_cursor_computes_one_time():
    desk = on_page()
    desk.screen()
    before = curves.step.cache_info().misses, curves.step_at.cache_info().misses
    desk.press(".").screen()
    assert (curves.step.cache_info().misses, curves.step_at.cache_info().misses) == (before[0], before[1] + 1)


def test_a_file_without_figures_refuses_the_keys_with_a_reason():
    desk = of_text("format = 1\n")
    for key in (".", "z", "]", "home", "enter"):
        assert "no step response" in desk.again().press(key).view.message, key
    assert pages.PAGES["pulse"].rows(desk.state) == 0


def test_figures_of_before_a_fault_can_still_be_looked_at():
    desk = on_page(LISTENER)
    desk.state = replace(desk.state, session=sessions.set_text(desk.state.session, "format = 2\n", 0.0))
    before = cursor_of(desk)
    assert cursor_of(desk.press(".")) > before
    assert "figures of before the fault" in desk.screen() and "rise" in desk.screen()


def test_words_of_the_page_in_the_help():
    text = "\n".join(on_page(SOUNDER, "?").overlay.text)
    assert text.index("Words of the pulse page") < text.index("Words of the ledger page")


def test_ascii_alone():
    for keys in ((), ("b",)):
        text = on_page(SOUNDER, *keys, plain=True).screen()
        assert text.isascii() and "*" in text and "#" in text


def test_a_window_of_time_holds_wherever_its_user_is():
    there = sight.Reach(1e-6, 1e-4, 2e-7)
    source = random.Random(3)
    moves = (sight.moved, sight.zoomed, sight.panned, sight.to_end)
    for _ in range(400):
        place = random_times(source)
        for _ in range(12):
            place = source.choice(moves)(place, there, source.choice((-1, 1)))
            low, high = sight.window(place, there)
            assert 0.0 <= low < high <= there.most * (1 + 1e-9)
            assert low <= sight.cursor(place, there) <= high
    narrow = Times()
    for _ in range(40):
        narrow = sight.zoomed(narrow, there, 1)
    low, high = sight.window(narrow, there)
    assert high - low == pytest.approx(sight.LEAST * there.end)
    for _ in range(14):
        narrow = sight.zoomed(narrow, there, -1)
    assert narrow.low_s is None, "the whole is met on the way out"
    assert sight.window(sight.zoomed(narrow, there, -1), there) == (0.0, pytest.approx(2e-6))


@pytest.mark.parametrize("seed", range(4))
def test_any_user_of_any_chain_gets_a_whole_screen(seed):
    rng = random.Random(4000 + seed)
    for number in range(10):
        session = random_session(rng, 100 * seed + number)
        view = replace(random_view(rng, session), page="pulse", step=random_times(rng), sag=random_times(rng))
        state = State(session, view, plain=rng.random() < 0.3)
        columns, lines = random_size(rng)
        wrong = faults(state, columns, lines, screen(state, columns, lines))
        assert not wrong, (seed, number, columns, lines, view, wrong)


@pytest.mark.parametrize("upper", [True, False])
def test_every_size_is_filled_to_the_cell(upper):
    state = State(opened("frost-line-sounder"), View(page="pulse", upper=upper, focus="page"))
    assert listed(state.session.ledger, upper) and marks(state.session.ledger, upper)
    for columns, lines in [(n, 24) for n in range(60, 150, 7)] + [(80, n) for n in range(16, 60, 3)]:
        assert not faults(state, columns, lines, screen(state, columns, lines)), (columns, lines)


def test_a_step_is_within_6_kB_and_a_move_of_the_cursor_within_3(tmp_path):
    """Budgets on the wire at 80x24; they do not depend on the machine. Every repaint leaves the screen as drawn."""
    path = copied(tmp_path, SIX)
    desk = Desk(path)
    keys = ("f", *"Q3.rc", "enter", "tab", "4")
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press(*keys)
        terminal.shows(desk.press(*keys).screen())
        for key, most in (("+", 6000), (".", 3000), ("down", 3000), ("z", 6000), (".", 3000)):
            before = len(terminal.log)
            terminal.press(key)
            terminal.shows(desk.press(key).screen())
            assert 0 < len(terminal.log) - before <= most, key
