"""The leverage page: what it ranks and in which order, its keys, and that the strip and the sheet follow."""

import math

import pytest

from polebook.report.leverage import ranked as reported
from polebook.report.leverage import signed
from polebook.session import state as sessions
from polebook.tui.control.figures import names_of
from polebook.tui.control.leverage import movers
from polebook.tui.draw.levers import AIMS, unit_of
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.screen import screen
from polebook.tui.view import State, View
from tests.book.verdict_cases import CASES
from tests.golden.screens import opened
from tests.helpers import DEMOS
from tests.tui.desk import SIX, Desk
from tests.tui.test_draw_parts import styled

CHAINS = sorted(path.stem for path in DEMOS.glob("*.toml"))


def at_page(of=SIX, *more):
    return Desk(of).press("tab", "7", *more)


def shown(desk, size=(80, 24)):
    """Names of the rows in sight, from the top."""
    lines = desk.screen(*size).splitlines()
    first = next(at for at, line in enumerate(lines) if "1 % more of" in line)
    names = [mover.label for mover in movers(desk.state)]
    rows = [line[2:].partition("  ")[0].strip() for line in lines[first + 1:first + 11]]
    return [row for row in rows if row in names]


@pytest.mark.parametrize("name", CHAINS)
@pytest.mark.parametrize("figure", [aim.key for aim in AIMS])
def test_the_order_is_that_of_the_printed_page(name, figure):
    from polebook.book.build import document

    session = opened(name)
    state = State(session, View(page="leverage"))
    desk = Desk(DEMOS / f"{name}.toml").press("tab", "7")
    while desk.view.lever.figure != figure:
        desk.press("v")
    found = [mover for mover in movers(desk.state) if mover.known]
    wanted = reported(document(session.ledger, {"parts", "cards"}), figure)
    sizes = [abs(mover.on(figure) or 0.0) for mover in movers(desk.state)]
    assert sizes == sorted(sizes, reverse=True)
    assert {mover.label: mover.on(figure) for mover in found if mover.on(figure) and abs(mover.on(figure)) > 1e-6} == {
        label: value for label, value in wanted if abs(value) > 1e-6 and math.isfinite(value)}
    assert Scene(state).figures is session.ledger


def test_what_each_column_says_is_the_leverage_of_the_ledger():
    desk = at_page()
    of = desk.state.session.ledger.leverage
    row = next(line for line in desk.screen().splitlines() if " Q5.re " in line)
    values = of.parts["Q5", "re"]
    assert row.split()[3:6] == [signed(values[key]) for key in ("gain", "lower_edge", "upper_edge")]
    assert row.split()[1:3] == ["330", "Ω"]


def test_ten_rows_are_in_sight_on_a_small_terminal_and_all_of_them_can_be_reached():
    desk = at_page()
    assert len(shown(desk)) == 10
    count = len(movers(desk.state))
    assert count > 70
    seen = set()
    for _ in range(count + 3):
        name = movers(desk.state)[0].name if not desk.view.lever.row else desk.view.lever.row
        label = next(mover.label for mover in movers(desk.state) if mover.name == name)
        assert label in shown(desk)
        seen.add(name)
        desk.press("down")
    assert seen == {mover.name for mover in movers(desk.state)}
    assert desk.press("down").view.lever.row == movers(desk.state)[-1].name


def test_a_bar_tells_its_sign_by_its_side():
    for plain, mark, fill in ((False, "│", "█"), (True, "|", "#")):
        lines = Desk(SIX, plain=plain).press("tab", "7").screen().splitlines()
        less = next(line for line in lines if " Q5.rc " in line).partition(mark)
        more = next(line for line in lines if " Q5.re " in line).partition(mark)
        assert fill in less[0] and fill not in less[2]
        assert fill in more[2] and fill not in more[0]


def test_the_figure_that_ranks_is_chosen_in_turn_and_keeps_the_row():
    desk = at_page()
    assert shown(desk)[0] == "Q5.rc"
    desk.press("down", "down", "down")
    assert desk.view.lever.row == "Q4.rc"
    seen = [desk.press("v").view.lever.figure for _ in AIMS]
    assert seen == ["noise", "gain", "lower_edge", "upper_edge"]
    assert [desk.press("V").view.lever.figure for _ in AIMS] == ["lower_edge", "gain", "noise", "upper_edge"]
    assert desk.view.lever.row == "Q4.rc"
    assert desk.press(".").view.lever.figure == "noise" and desk.press(",").view.lever.figure == "upper_edge"
    assert desk.press("v").view.message == "ranked by leverage on the input noise"
    assert at_page(SIX, "tab", "v").view.lever.figure == "noise"  # with the sheet focused too


def test_the_other_end_of_the_band():
    desk = at_page(SIX, "b")
    assert (desk.view.lever.figure, desk.view.upper) == ("lower_edge", False)
    assert shown(desk)[0].endswith("couple")
    desk.press("v", "v", "b")
    assert (desk.view.lever.figure, desk.view.upper) == ("upper_edge", True)


def test_line_sheet_and_key_follow_the_row():
    desk = at_page(SIX, "down", "down", "down")
    assert (desk.line, desk.key, desk.view.focus) == ("Q4", "Q4.rc", "page")
    assert [mover.name for mover in movers(desk.state)][2] == "device.P.cob"
    desk.press("up")
    assert (desk.view.sheet, desk.key) == ("device.P", "device.P.cob")
    desk.press("up")
    assert (desk.view.sheet, desk.line, desk.key) == ("", "Q5", "Q5.device")  # cmu has no key of its own
    assert styled(screen(desk.state, 80, 24), "focus") == ["-0.60"]


def test_the_row_follows_the_line():
    desk = at_page(SIX, "down", "up")
    assert (desk.line, desk.view.lever.row) == ("Q5", "Q5.rc")
    desk.press("left")
    assert (desk.line, desk.view.lever.row) == ("Q4", "Q4.rc")
    desk.press("right", "right")
    assert (desk.line, desk.view.lever.row) == ("Q6", "Q6.cpi")
    desk.press("home")
    assert (desk.line, desk.view.lever.row) == ("source", "source.resistance")
    desk.press("end")
    assert desk.line == "load" and desk.view.lever.row.startswith("load.")


def test_rows_of_the_selected_line_stand_out():
    desk = at_page(SIX, "down", "up")
    marked = " ".join(styled(screen(desk.state, 80, 24)[5:16], "select"))
    assert all(name in marked for name in ("Q5.rc", "Q5.cmu", "Q5.re", "Q5.rb1"))
    assert "Q4.rc" not in marked and "P cob" not in marked


def test_a_row_has_the_working_of_its_leverage():
    desk = at_page(SIX, "down")
    assert names_of(desk.state) == ("Q5.cmu.leverage.upper_edge",)
    assert "per cent that the upper edge moves for 1 % more" in desk.screen()
    desk.press("=")
    assert desk.overlay.title == "working of Q5.cmu.leverage.upper_edge"
    assert "= -0.5998" in " ".join(desk.overlay.text)
    desk.press("escape", "down", "v", "v", "=")
    assert desk.overlay.title == "working of device.P.cob.leverage.gain"


def test_what_is_no_part_of_the_network_is_ranked_and_says_that_it_has_no_working():
    desk = at_page()
    names = [mover.name for mover in movers(desk.state)]
    assert "Q4.vce" in names and "device.N.p_max" not in names and "Q4.device" not in names
    desk.press(*["down"] * names.index("Q4.vce"))
    assert desk.key == "Q4.vce"
    assert "Q4.vce is no part of the network" in desk.press("=").view.message
    assert desk.overlay is None


def test_a_row_keeps_its_part_when_an_edit_ranks_it_elsewhere():
    desk = at_page(SIX, "down", "down", "down", "tab")
    assert desk.key == "Q4.rc"
    before = [mover.name for mover in movers(desk.state)].index("Q4.rc")
    desk.press("/", "/", "tab")
    assert desk.view.lever.row == "Q4.rc"
    assert [mover.name for mover in movers(desk.state)].index("Q4.rc") > before
    assert " ▸ Q4.rc" in "\n" .join(f" {line}" for line in desk.screen().splitlines())
    desk.press("tab", "k", "escape", "x", "tab")  # and is the first again when its stage is gone
    assert names_of(desk.state)[0].startswith(movers(desk.state)[0].name)


def test_a_point_after_another_key_than_the_page_s_digit_is_no_value():
    desk = Desk(SIX, seconds=0.05).press("tab", "7", "enter", ".")
    assert (desk.view.lever.sweep.cursor, desk.view.message) == (21, "")
    assert desk.press("7", ".").view.message == ""
    assert "reads like a value" in desk.press("7", ".", "k").view.message
    assert "reads like a value" not in desk.press("7", "escape", "k").view.message


def test_esc_goes_to_the_ledger():
    assert at_page(SIX, "down", "escape").view.page == "ledger"


def test_keys_that_other_pages_have_say_where():
    desk = at_page()
    assert "3 is its page" in desk.press("s").view.message
    for key in "zZ[]":
        assert "Enter on a row sweeps it" in desk.press(key).view.message


def test_a_text_with_a_fault_is_ranked_as_it_was_and_sweeps_nothing():
    desk = at_page()
    session = sessions.set_text(desk.state.session, desk.text.replace('"2k2"', '"2k2 F"', 1), 0.0)
    desk.state = State(session, desk.view)
    assert shown(desk)[0] == "Q5.rc"
    desk.press("down", "enter")
    assert "no figures to follow" in desk.view.message and desk.state.job is None
    nothing = Desk(SIX)
    nothing.state = State(sessions.new_session("x.toml", "[[stage"), View(page="leverage", focus="page"))
    for key in ("down", "enter", "left", "v", "=", "b", "escape"):
        assert nothing.again().press(key).screen()


def desk_of(case, *names):
    """A desk at a chain of the verdicts."""
    desk = Desk(SIX)
    desk.state = State(sessions.new_session("chains/some.toml", CASES[case]), View(page="leverage", focus="page"))
    return desk.press(*names)


def test_a_chain_without_an_edge_shows_a_dash_and_ranks_by_what_it_has():
    desk = desk_of("upper missed, a coil in the way")
    assert desk.state.session.ledger.lower_hz is None
    row = next(line for line in desk.screen().splitlines() if "L1.arm" in line)
    assert "–" in row
    for case in ("unstable, a follower behind a long wire", "no targets, nothing limits the band"):
        assert "–" in desk_of(case).screen() and desk_of(case, "v", "v", "down", "enter").screen()


def test_units_are_those_of_the_keys():
    chain = opened("six-stage").chain
    assert [unit_of(chain, path) for path in ("device.N.cob", "device.N.beta", "Q4.vce", "source.resistance", "Q1.rc",
                                              "device.N.ft", "load.couple")] == ["F", "", "V", "Ω", "Ω", "Hz", "F"]
    blocks = opened("rain-radar").chain
    arms = [path for path in blocks.numbers if ".arms." in path]
    assert arms and unit_of(blocks, "B1.poles.1") == "Hz"
    assert [unit_of(blocks, path) for path in arms] == [{"r": "Ω", "c": "F", "l": "H"}[path[-1]] for path in arms]
