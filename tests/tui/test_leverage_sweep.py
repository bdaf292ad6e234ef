"""The sweep of a part: its points, its range, its cursor, the part set from it, and when it no longer holds."""

import math
import random
from dataclasses import replace
from functools import cache

import pytest

from polebook.plan.sweep import Point
from polebook.session import state as sessions
from polebook.tui.control.leverage import movers
from polebook.tui.draw.levers import AIMS
from polebook.tui.draw.screen import screen
from polebook.tui.draw.swept_judged import met
from polebook.tui.sweeps import fresh, snapped
from tests.book.verdict_cases import CASES
from tests.helpers import DEMOS
from tests.tui.desk import LISTENER, SIX, Desk
from tests.tui.drawn import faults
from tests.tui.test_draw_parts import styled
from tests.tui.test_leverage import at_page, desk_of

RC = "Q5.rc"  # the first row of six-stage


@cache
def _finished(of, row):
    return to_row(at_page(of), row).press("enter").work()


def swept(of=SIX, row=RC, *more):
    """A desk at the finished sweep of a row."""
    return _finished(of, row).again().press(*more)


def to_row(desk, row):
    names = [mover.name for mover in movers(desk.state)]
    return desk.press(*["down"] * names.index(row))


def sweep_of(desk):
    return desk.view.lever.sweep


def test_a_decade_either_way_with_todays_value_in_the_middle():
    desk = at_page(SIX, "enter")
    sweep = sweep_of(desk)
    assert (desk.state.job.name, desk.state.job.total, sweep.points) == ("sweep of rc of Q5", 41, ())
    assert sweep.values[20] == 2200.0 and sweep.cursor == 20
    assert (sweep.values[0], sweep.values[-1]) == (pytest.approx(220), pytest.approx(22e3))
    ratios = [b / a for a, b in zip(sweep.values, sweep.values[1:], strict=False)]
    assert max(ratios) == pytest.approx(min(ratios))
    desk.work()
    assert desk.state.job is None and len(sweep_of(desk).points) == 41


@pytest.mark.parametrize(("of", "row"), [(SIX, RC), (LISTENER, "Q1.re"), (SIX, "device.N.cob")])
def test_a_point_is_what_the_file_gives_with_that_value_typed(of, row):
    sweep = sweep_of(swept(of, row))
    for number in (0, 11, 20, 33):
        point = sweep.points[number]
        typed = sessions.set_value(sessions.open_file(str(of)), sweep.path, repr(sweep.values[number]), 0.0).ledger
        assert point.value == sweep.values[number]
        assert (point.gain, point.lower_hz, point.upper_hz) == pytest.approx(
            (typed.solution.gain, typed.lower_hz, typed.upper_hz), rel=1e-9)


def test_the_slope_at_todays_value_is_the_leverage():
    desk = swept(SIX, RC, *"zzzz").work()
    sweep = sweep_of(desk)
    assert sweep.values[-1] / sweep.values[0] < 1.4
    moves = next(mover for mover in movers(desk.state) if mover.name == RC).moves
    before, after = sweep.points[19], sweep.points[21]
    for key, get in (("gain", "gain"), ("lower_edge", "lower_hz"), ("upper_edge", "upper_hz"), ("noise", "noise")):
        slope = math.log(getattr(after, get) / getattr(before, get)) / math.log(after.value / before.value)
        assert slope == pytest.approx(moves[key], abs=2e-3)


def test_esc_stops_it_and_what_was_done_stays():
    desk = at_page(SIX, "enter").work(12)
    assert "12 of 41" in desk.screen() and "Esc stop" in desk.screen()
    desk.press("escape")
    assert desk.state.job is None and len(sweep_of(desk).points) == 12
    assert desk.view.message == "sweep of rc of Q5 stopped after 12 of 41 values: these stay"
    assert "stopped at 12 of 41" in desk.screen() and "not computed" in desk.screen()
    assert "Esc ranking" in desk.screen() and desk.view.lever.open
    desk.press("escape")
    assert not desk.view.lever.open and "1 % more of" in desk.screen()
    desk.press("enter").work()  # it was not whole: again from its beginning
    assert len(sweep_of(desk).points) == 41


def test_esc_stops_it_with_the_sheet_focused_too():
    desk = at_page(SIX, "enter").work(3).press("tab", "escape")
    assert desk.state.job is None and desk.view.page == "leverage" and len(sweep_of(desk).points) == 3


def test_a_whole_sweep_that_still_holds_is_opened_again_at_once():
    desk = swept(SIX, RC, ".", ".", "escape")
    before = sweep_of(desk)
    desk.press("enter")
    assert desk.state.job is None and desk.view.lever.open and sweep_of(desk) is before


def test_it_goes_on_whatever_is_in_sight():
    desk = at_page(SIX, "enter").work(5).press("1").work()
    assert desk.view.page == "ledger" and len(sweep_of(desk).points) == 41
    assert "gain" in desk.press("7").screen()


def test_another_takes_its_place():
    desk = at_page(SIX, "enter").work(5).press("down", "down", "down", "enter")
    assert (sweep_of(desk).path, sweep_of(desk).points) == ("Q4.rc", ())
    desk.work()
    assert [point.value for point in sweep_of(desk).points] == list(sweep_of(desk).values)


def test_the_range_is_narrowed_about_the_cursor_widened_and_moved():
    desk = swept(SIX, RC, *[","] * 10)
    at = sweep_of(desk).values[10]
    assert at == pytest.approx(220 * 100**0.25)
    narrow = sweep_of(desk.press("z"))
    assert narrow.values[20] == at and narrow.cursor == 20 and desk.state.job is not None
    assert narrow.values[-1] / narrow.values[0] == pytest.approx(10)
    desk.work()
    assert [point.value for point in sweep_of(desk).points] == list(narrow.values)
    wide = sweep_of(desk.press("Z"))
    assert wide.values[-1] / wide.values[0] == pytest.approx(100) and wide.values[20] == at
    moved = sweep_of(desk.press("]"))
    assert moved.values[0] == pytest.approx(wide.values[10]) and moved.values[moved.cursor] == pytest.approx(at)
    back = sweep_of(desk.press("["))
    assert back.values == pytest.approx(wide.values)
    assert sweep_of(desk.press("tab", "z")).values[-1] == pytest.approx(at * 10**0.5)  # with the sheet focused too


def test_the_range_has_an_end_on_every_side():
    desk = at_page(SIX, "enter")
    for key, told in (("z", "no narrower"), ("Z", "no wider"), ("]", "no further"), ("[", "no further")):
        end = desk.again()
        for _ in range(40):
            end.press(key)
            if end.view.message:
                break
        assert told in end.view.message, key
        assert all(math.isfinite(value) and value > 0 for value in sweep_of(end).values)


def test_the_cursor_goes_from_end_to_end():
    desk = swept()
    assert [sweep_of(desk.press(key)).cursor for key in (".", ".", ",", "home", ",", "end", ".")] == [
        21, 22, 21, 0, 0, 40, 40]
    assert desk.line == "Q5"


def test_the_figures_at_the_cursor_and_what_they_are_off_todays():
    desk = swept(SIX, RC, ".", ".", ".", ".")
    point = sweep_of(desk).points[24]
    gain = 20 * math.log10(abs(point.gain))
    now = desk.state.session.ledger
    line = next(line for line in desk.screen(140, 45).splitlines() if line.startswith(" 3.49 kΩ"))
    by = gain - 20 * math.log10(abs(now.solution.gain))
    assert f"gain {gain:.2f} dB over +{by:.2f}" in line
    assert f"upper {point.upper_hz / 1e6:.2f} MHz short {100 * (point.upper_hz / now.upper_hz - 1):+.0f} %" in line
    assert f"gain {point.gain:.0f} over" in desk.press("g").screen()


def test_enter_sets_the_part_to_a_value_of_its_series_as_one_edit():
    desk = swept(SIX, RC, ".", ".")
    before = desk.text
    assert sweep_of(desk).values[22] == pytest.approx(2769.6, abs=0.1)
    assert "Enter set rc to 2k7" in desk.screen()
    desk.press("enter")
    assert desk.text == before.replace('rc          = "2k2"', 'rc          = "2k7"')
    assert desk.view.message.startswith("rc of Q5: 2k2 to 2k7   gain +1.5")
    assert len(desk.state.session.history.past) == 1
    assert desk.press("enter").view.message == "rc of Q5 is 2k7 already"
    assert len(desk.state.session.history.past) == 1
    assert desk.press("u").text == before


def test_a_value_of_a_card_has_three_digits_and_none_of_a_series():
    desk = swept(SIX, "device.P.beta", ".")
    assert snapped(desk.state, sweep_of(desk)) == "123"
    desk.press("enter")
    assert "beta     = 123" in desk.text
    assert desk.view.message.startswith("beta of card P: 110 to 123")


def test_a_block_s_gain_in_db_stays_in_db_and_its_sign_stays_where_it_is():
    desk = at_page(DEMOS / "rain-radar.toml")
    desk = to_row(desk, "B1.gain").press("enter").work()
    sweep = sweep_of(desk)
    assert all(value < 0 for value in sweep.values) and abs(sweep.values[0]) < abs(sweep.values[-1])
    assert not faults(desk.state, 80, 24, screen(desk.state, 80, 24))
    before = desk.state.session.chain.numbers["B1.gain"]
    desk.press(".", "enter")
    assert desk.state.session.chain.numbers["B1.gain"] == pytest.approx(sweep.values[21], rel=6e-3)
    assert desk.state.session.chain.numbers["B1.gain"] < before < 0


def test_a_device_s_own_part_is_swept_by_the_key_of_its_card():
    desk = to_row(at_page(), "Q5.cmu").press("enter")
    assert sweep_of(desk).path == "device.P.cob"
    assert desk.view.message == "cmu of Q5 is the device's own: swept is cob of card P, which makes it"
    assert "cob of card P, for Q5.cmu" in desk.screen()
    desk = to_row(at_page(), "Q4.cmu_upper").press("enter")
    assert desk.view.message.endswith("cob of card N, which makes it, in Q1 Q2 Q3 Q4 Q6")
    assert sweep_of(to_row(at_page(), "Q5.cpi").press("enter")).path == "device.P.ft"
    assert sweep_of(to_row(at_page(), "Q5.rpi").press("enter")).path == "device.P.beta"
    diode = at_page(DEMOS / "photodiode-front.toml")
    assert sweep_of(to_row(diode, "U1.gbw").press("enter")).path == "device.FETIN.gbw"


def test_what_follows_from_the_bias_alone_says_what_to_sweep():
    desk = to_row(at_page(), "Q5.gm").press("enter")
    assert desk.state.job is None and sweep_of(desk) is None and desk.view.bad
    assert desk.view.message == ("Q5.gm can't be swept: it is the device's own, and follows from its current: "
                                 "Q5.rb2 moves it most: sweep that")


def test_a_pole_of_a_data_sheet_and_a_part_of_a_ladder_have_paths_of_their_own():
    desk = at_page(DEMOS / "rain-radar.toml")
    names = {mover.name: mover.path for mover in movers(desk.state)}
    assert names["B2.pole2"] == "B2.poles.2"
    arm = next(name for name, path in names.items() if ".arms." in path)
    for name in ("B2.pole2", arm):
        one = to_row(desk.again(), name).press("enter").work()
        assert sweep_of(one).path == names[name] and len(sweep_of(one).points) == 41
        one.press(".", "enter")
        assert not one.view.bad, one.view.message
        assert one.state.session.chain.numbers[names[name]] == pytest.approx(sweep_of(one).values[21], rel=0.05)


def test_an_edit_elsewhere_makes_it_one_of_before():
    desk = swept(SIX, RC)
    assert fresh(desk.state, sweep_of(desk))
    assert not styled(screen(desk.state, 80, 24)[5:7], "warn")
    desk.press("tab").go("Q4.rc").press("+", "tab")
    assert not fresh(desk.state, sweep_of(desk))
    assert styled(screen(desk.state, 80, 24)[5:7], "warn") == ["of before the edit"]
    assert "Enter sweep again" in desk.screen()
    old = sweep_of(desk).points[20].gain
    desk.press("enter").work()
    assert fresh(desk.state, sweep_of(desk)) and "of before" not in desk.screen()
    assert abs(sweep_of(desk).points[20].gain) > abs(old) * 1.03
    assert sweep_of(desk).points[20].gain == pytest.approx(desk.state.session.ledger.solution.gain)


def test_undone_it_holds_again():
    desk = swept(SIX, RC, "tab").go("Q4.rc").press("+")
    assert not fresh(desk.state, sweep_of(desk))
    assert fresh(desk.press("u").state, sweep_of(desk))


def test_an_edit_of_the_part_itself_of_a_note_or_of_a_target_leaves_it_as_good_as_it_was():
    desk = swept(SIX, RC, ".", ".", "enter")
    assert fresh(desk.state, sweep_of(desk))
    assert "today 2.70 kΩ" in desk.screen()
    session = sessions.set_value(desk.state.session, "target.upper", "1M", 0.0)
    session = sessions.set_note(session, "Q4", "another", 0.0)
    assert fresh(replace(desk.state, session=session), sweep_of(desk))
    session = sessions.set_value(session, "supply.positive", "16", 0.0)
    assert not fresh(replace(desk.state, session=session), sweep_of(desk))


def test_a_job_of_an_earlier_text_goes_on_and_is_marked():
    desk = at_page(SIX, "enter").work(10).press("tab").go("Q4.rc").press("+", "tab").work()
    sweep = sweep_of(desk)
    assert len(sweep.points) == 41 and not fresh(desk.state, sweep)
    assert sweep.points[20].gain == pytest.approx(Desk(SIX).state.session.ledger.solution.gain)
    assert "of before the edit" in desk.screen()


def test_a_fault_in_the_text_or_a_stage_that_is_gone_ends_in_words():
    desk = swept(SIX, RC)
    broken = desk.again()
    broken.state = replace(desk.state, session=sessions.set_text(desk.state.session, desk.text + "\n[[stage", 0.0))
    assert "of before the edit" in broken.screen()
    assert "no figures to follow" in broken.press("enter").view.message
    gone = desk.again().press("x")
    assert "of before the edit" in gone.screen()
    assert gone.press("enter").view.message.startswith("the file has no rc of Q5 now")
    assert "1 % more of" in gone.press("escape").screen()
    taken_out = desk.again().press("delete")
    assert "of before the edit" in taken_out.screen()
    assert taken_out.press("enter").view.message.startswith("the file has no rc of Q5 now")


def test_points_without_a_figure_are_a_gap_with_the_reason_at_the_cursor():
    desk = swept(LISTENER, "Q2.couple", "home")
    bare = [number for number, point in enumerate(sweep_of(desk).points) if point.upper_hz is None]
    assert bare and len(bare) < 41
    desk.press(*["."] * bare[0])
    told = desk.screen()
    assert "no clean midband" in told and "upper –" in told
    fine = next(number for number in range(41) if number not in bare)
    desk.press("home", *["."] * fine)
    assert "no clean midband" not in desk.screen()


def test_a_point_without_a_ledger_says_why():
    desk = swept()
    sweep = sweep_of(desk)
    none = replace(sweep.points[20], gain=None, lower_hz=None, upper_hz=None, noise=None,
                   why="the bias of Q5 is not solved")
    sweep = replace(sweep, points=(*sweep.points[:20], none, *sweep.points[21:]))
    desk.state = replace(desk.state, view=replace(desk.view, lever=replace(desk.view.lever, sweep=sweep)))
    assert "2.20 kΩ   no figures: the bias of Q5 is not solved" in desk.screen()


def test_where_all_is_as_wanted_is_marked_and_told():
    desk = swept()
    foot = next(line for line in desk.screen().splitlines() if "└" in line)
    assert "= as wanted" in desk.screen()
    good = [point.value for point in sweep_of(desk).points
            if abs(20 * math.log10(abs(point.gain)) - 75) <= 1.5 and point.upper_hz >= 2e6 and point.lower_hz <= 5e3]
    wide = len(foot.partition("└")[2]) - 1
    assert "=" in foot
    cells = [round(math.log10(value / 220) / 2 * wide) for value in (good[0], good[-1])]
    marked = [at for at, char in enumerate(foot.partition("└")[2]) if char in "=▴"]
    assert abs(marked[0] - cells[0]) <= 1 and abs(marked[-1] - cells[1]) <= 1
    assert "nowhere as wanted" in swept(LISTENER, "Q2.rc").screen()
    assert "wanted" not in desk_of("no targets, down to d.c.", "enter").work().screen()
    assert "= as wanted" in desk_of("met, no edge there", "enter").work().screen()


def test_the_limits_of_the_figure_that_ranks_stand_beside_their_lines():
    desk = swept()
    assert " ≥2M┤" in desk.screen() and "≥73.5" not in desk.screen()
    desk.press("v", "v")
    assert "≥73.5┤" in desk.screen() or "≤76.5┤" in desk.screen()
    assert "≤5k┤" in desk.press("v").screen()


def test_the_noise_is_followed_and_held_against_its_target():
    desk = swept(SIX, "Q1.re", *["."] * 6, "v")
    sweep, now = sweep_of(desk), desk.state.session.ledger
    assert sweep.today.noise == now.noise.density
    assert sweep.points[20].noise == pytest.approx(now.noise.density, rel=1e-12)
    told = next(line for line in desk.screen().splitlines() if "noise 1." in line)
    assert f"noise {sweep.points[26].noise * 1e9:.2f} nV/√Hz" in told
    assert f"{100 * (sweep.points[26].noise / now.noise.density - 1):+.0f} %" in told
    session = sessions.set_value(desk.state.session, "target.noise", "1.3n", 0.0)
    desk.state = replace(desk.state, session=session)
    short = [point.noise > 1.3e-9 for point in sweep.points]
    assert any(short) and not all(short)
    for number in (short.index(True), short.index(False)):
        desk.press("home", *["."] * number)
        assert ("√Hz short" in desk.screen()) == short[number]
    assert "≤1.3n┤" in desk.screen()


def test_a_noise_that_is_not_told_is_not_judged_and_an_edge_that_is_not_there_is_met():
    point = Point(1.0, gain=10.0, lower_hz=None, upper_hz=1e6)
    judged = {one.key: met({one.key: (0.0, 1.0)}, one, point) for one in AIMS}
    assert (judged["noise"], judged["lower_edge"], judged["upper_edge"]) == (None, True, False)


def test_a_source_that_is_no_part_is_swept_by_what_makes_it():
    assert sweep_of(to_row(at_page(SIX, "v"), "Q2.ib").press("enter")).path == "device.N.beta"
    diode = to_row(at_page(DEMOS / "photodiode-front.toml", "v"), "U1.en")
    assert sweep_of(diode.press("enter")).path == "device.FETIN.en"
    radar = to_row(at_page(DEMOS / "rain-radar.toml", "v"), "B1.en").press("enter")
    assert sweep_of(radar).path == "B1.nf" and radar.work().state.session.chain.numbers["B1.nf"] > 0
    assert {point.noise for point in sweep_of(radar).points} != {sweep_of(radar).today.noise}


def test_ranking_and_plot_stand_together_where_there_is_room():
    desk = swept(SIX, RC)
    assert "1 % more of" not in desk.screen()
    wide = desk.screen(140, 45)
    assert "1 % more of" in wide and "Q5.rc  220 Ω to 22.0 kΩ" in wide
    desk.press("down")
    assert not desk.view.lever.open
    assert "1 % more of" in desk.screen() and "220 Ω to" not in desk.screen()
    assert "220 Ω to 22.0 kΩ" in desk.screen(140, 45)


def test_it_can_be_drawn_at_any_size_at_any_moment():
    source = random.Random(5)
    for case in (SIX, LISTENER, *source.sample(sorted(CASES), 6)):
        desk = at_page(case) if not isinstance(case, str) else desk_of(case)
        found = movers(desk.state)
        to_row(desk, source.choice(found).name).press("enter").work(source.choice((0, 1, 3)))
        desk.press(*source.choices([".", ",", "v", "g", "z", "]", "end", "home", "up"], k=6)).work(2)
        for _ in range(4):
            state = replace(desk.state, plain=source.random() < 0.5)
            columns, rows = source.choice(((80, 24), (140, 45), (60, 16), (source.randrange(60, 200), 60), (120, 24)))
            assert not faults(state, columns, rows, screen(state, columns, rows)), (case, columns, rows)
