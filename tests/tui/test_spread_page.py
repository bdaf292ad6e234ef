"""The spread page's keys: a run begun and stopped, what it is of, figures and rows, the next run, the run before."""

from dataclasses import replace

import pytest

from polebook.session import state as sessions
from polebook.tui import spread_apart
from polebook.tui.spreads import ALL, TABLE, fresh, looked_at, rows
from tests.tui.desk import CHAINS, LISTENER, SIX, Desk
from tests.tui.spread_told import told

PROBE = CHAINS / "leaf-probe.toml"


def page(of=PROBE):
    """A desk at the page, nothing run yet."""
    return Desk(of).press("tab", "8")


def ran(desk, builds=2000, seed=1):
    """The desk after a run, computed here."""
    spread = replace(desk.view.spread, builds=builds, seed=seed)
    desk.state = replace(desk.state, view=replace(desk.view, spread=spread))
    desk.press("s")
    desk.state.job.work.close()
    takes, piece = desk.state.job.takes, told(desk.text, builds, seed)
    desk.state = takes.ended(takes.piece(replace(desk.state, job=None), piece), True)
    return desk


def to_table(desk):
    """The desk with all figures side by side."""
    while desk.press("v").view.spread.figure != TABLE:
        pass
    return desk


def head(desk):
    return desk.screen().splitlines()[5:7]


def test_before_the_first_run_it_says_what_it_does_and_which_key_begins():
    shown = page().screen()
    for text in ("Will the built boards hold? 10,000 chains", "Enter begins: about", "resistor 1 %, capacitor 5 %",
                 "beta", "judged: gain, lower, upper, peaking", "Enter run"):
        assert text in shown, text
    assert "no target to judge by" in page_of_text(without_targets()).screen()


def page_of_text(text):
    desk = page()
    desk.state = replace(desk.state, session=sessions.new_session("x.toml", text))
    return desk


def without_targets():
    text = PROBE.read_text(encoding="utf-8")
    begin = text.index("[target]")
    return text[:begin] + text[text.index("[device."):]


@pytest.mark.parametrize("key", ["enter", "s"])
def test_a_key_begins_and_esc_stops_and_no_process_is_there_before_the_first_piece(key):
    before = set(spread_apart._living)
    desk = page().press(key)
    assert (desk.state.job.name, desk.state.job.page) == ("10,000 builds", "spread")
    assert set(spread_apart._living) == before
    assert "begins   Esc stops it" in desk.screen() and "Esc stop" in desk.screen()
    desk.press("escape")
    assert desk.state.job is None and desk.view.page == "spread" and desk.view.message == "spread stopped"
    desk.press("escape")
    assert desk.view.page == "ledger"


def test_a_run_goes_on_while_its_user_is_elsewhere_and_esc_there_does_not_stop_it():
    desk = page().press("s", "1", "+", "escape")
    assert desk.state.job is not None and desk.view.page == "ledger"


def test_it_is_begun_from_the_sheet_too_and_on_other_pages_the_key_stays_what_it_is():
    assert page().press("tab", "s").state.job is not None
    assert Desk(PROBE).press("tab", "s").state.job is None


def test_nothing_is_built_of_a_file_at_fault():
    desk = page_of_text(PROBE.read_text(encoding="utf-8").replace('"4k7"', '"4kk"')).press("s")
    assert desk.state.job is None and desk.view.message.startswith("there is no chain to build")


def test_what_it_came_to_is_told_and_shown():
    desk = ran(page())
    share = desk.view.spread.run.told.yields[ALL]
    assert desk.view.message == f"2,000 built chains in 1.0 s, {round(2000 * share.share):,} of them as wanted"
    assert head(desk)[0] == " 2,000 builds, seed 1"
    assert f"yield {100 * share.share:.1f} % ({100 * share.low:.1f} to {100 * share.high:.1f})" in head(desk)[1]
    assert "80 % wanted: met" in head(desk)[1]


def test_cautions_are_told_with_it():
    text = PROBE.read_text(encoding="utf-8").replace('rb1         = "150k"\nrb2         = "27k"', 'ic = "1m"')
    desk = ran(page_of_text(text))
    assert "; the quiescent current of Q1 is stated: it stands in every built chain" in desk.view.message
    assert "1 caution" in head(desk)[0]
    assert "the quiescent current of Q1 is stated" in to_table(desk).screen()


def test_an_edit_makes_it_stale_and_undo_makes_it_good_again():
    desk = ran(page())
    assert fresh(desk.state) and "before the edit" not in desk.screen()
    desk.press("tab").go("Q1.rc").press("+")
    assert not fresh(desk.state)
    assert head(desk)[0] == " 2,000 builds, seed 1   of before the edit; s runs it again"
    assert "● as filed" in desk.screen()
    desk.press("u")
    assert fresh(desk.state) and "before the edit" not in desk.screen()


@pytest.mark.parametrize(("path", "value", "still"), [
    ("Q1.note", "a word", True), ("target.yield", "99 %", True), ("Q1.allot", "0.5 dB", True),
    ("target.upper", "30k", False), ("tolerance.beta", "30 %", False), ("Q1.tolerance.rc", "5 %", False),
    ("tolerance.shape", "uniform", False), ("device.SMALL.beta", "200", False)])
def test_what_a_spread_follows_from(path, value, still):
    desk = ran(page())
    desk.state = replace(desk.state, session=sessions.set_value(desk.state.session, path, value, 0.0))
    assert fresh(desk.state) is still


def test_figures_beyond_a_fault_are_old_ones():
    desk = ran(page())
    desk.state = replace(desk.state, session=sessions.set_text(desk.state.session, "format = 1\n", 0.0))
    assert not fresh(desk.state)
    assert "of before the edit" in desk.screen()


def test_enter_runs_what_is_stale_and_goes_to_the_key_of_the_row_otherwise():
    desk = ran(page()).press("tab").go("Q1.rc").press("+", "tab")
    assert "Enter run again" in desk.screen()
    assert desk.press("enter").state.job is not None
    desk = ran(page())
    assert "Enter to its key" in desk.screen()
    desk.press("enter")
    assert (desk.key, desk.view.focus, desk.state.job) == ("Q1.ce", "sheet", None)
    assert desk.view.message == "ce of Q1; Q1.tolerance.ce says how far it may be off"


def test_rows_are_the_dearest_first_and_bring_their_key_in_sight():
    desk = ran(page())
    found = rows(desk.view.spread)
    gains = [row.half for row in found]
    assert gains == sorted(gains, reverse=True) and gains[0] > 0.05
    desk.press("down")
    assert (desk.key, desk.view.focus) == ("device.SMALL.beta", "page")
    assert desk.view.message.startswith("SMALL beta ±50 %: half of it brings +")
    assert f"{100 * found[1].half:+.1f} % yield, none {100 * found[1].none:+.1f} %" in desk.view.message
    assert desk.press(*["down"] * 99).view.spread.row == found[-1].name
    assert desk.press(*["up"] * 99).view.spread.row == found[0].name


def test_what_costs_nothing_is_ranked_by_its_share_of_the_figure_looked_at():
    desk = ran(page(LISTENER))
    assert all(row.half == 0.0 for row in rows(desk.view.spread))
    for _ in range(3):
        name = looked_at(desk.view.spread).name
        shares = [row.shares[name] for row in rows(desk.view.spread)]
        assert shares == sorted(shares, reverse=True) and shares[0] > 0.3
        desk.press("v")


def test_a_pole_of_a_list_and_a_rail_have_their_key():
    text = SIX.read_text(encoding="utf-8") + '\n[tolerance]\nsupply = "5 %"\n'
    desk = ran(page_of_text(text))
    names = [row.name for row in rows(desk.view.spread)]
    desk.press(*["down"] * names.index("supply.positive"))
    assert desk.key == "supply.positive"
    assert desk.press("enter").view.message == "positive of supply; tolerance.supply says how far it may be off"
    block = ('[[stage]]\nname = "B9"\nkind = "block"\ngain = "1"\npoles = ["3M", "9M"]\n'
             'tolerance = { poles = "10 %" }\n\n')
    desk = ran(page_of_text(SIX.read_text(encoding="utf-8").replace("[load]", block + "[load]")))
    names = [row.name for row in rows(desk.view.spread)]
    desk.press(*["down"] * names.index("B9.poles.2"))
    assert desk.key == "B9.poles"


def test_v_goes_through_the_figures_and_the_table_of_all():
    desk = ran(page())
    assert looked_at(desk.view.spread).name == "lower_edge_hz"  # the target that most builds miss
    seen = [desk.press(key).view.spread.figure for key in ("v", "v", ".", "v", "V", ",")]
    assert seen == ["upper_edge_hz", TABLE, "gain_db", "lower_edge_hz", "gain_db", TABLE]
    assert {"gain", "lower edge", "upper edge"} <= {line[2:12].strip() for line in desk.screen().splitlines()[8:13]}
    assert desk.press("b").view.spread.figure == "lower_edge_hz" and not desk.view.upper
    assert desk.press("b").view.spread.figure == "upper_edge_hz"


def test_what_is_the_same_in_all_builds_is_not_looked_at():
    names = [one.name for one in ran(page()).view.spread.run.told.figures]
    assert "peaking_db" in names
    assert "peaking" not in "".join(to_table(ran(page())).screen().splitlines()[8:13])
    assert "gain lower upper peaking 100" in ran(page(SIX)).screen()


def test_the_next_run_is_asked_for_by_keys():
    desk = ran(page())
    assert desk.press("*").view.message == "next: 20,000 builds, seed 1; s runs it"
    assert desk.press("]", "]", "[").view.spread.seed == 2
    assert head(desk)[0] == " 2,000 builds, seed 1   next: 20,000 builds, seed 2"
    assert desk.press("[", "[", "[").view.spread.seed == 0
    assert desk.press(*"////").view.spread.builds == 100
    assert desk.view.message == "100 builds are the fewest"
    assert desk.press(*"******").view.spread.builds == 1_000_000
    assert desk.view.message == "1,000,000 builds are the most"
    assert desk.press("s").state.job.name == "1,000,000 builds"
    assert desk.press("z").view.message.startswith("a histogram has no zoom")


def test_with_the_sheet_focused_a_decade_is_one_of_the_value():
    desk = page().press("tab").go("Q1.rc").press("*")
    assert (desk.view.spread.builds, "68k" in desk.screen()) == (10_000, True)


def test_after_an_edit_the_yield_of_before_stands_beside_it_where_the_draws_are_the_same():
    desk = ran(page())
    before = desk.view.spread.run
    desk.press("tab").go("device.QUIET.vgs_off").press("+")
    ran(desk)
    assert desk.view.spread.before is before
    was = f"was {100 * before.told.yields[ALL].share:.1f} %"
    assert was in head(desk)[1]
    assert was not in head(ran(desk, seed=2))[1]
    assert desk.view.spread.before is before  # the text is still another
    assert was in head(ran(desk))[1]


def test_the_same_text_run_again_has_nothing_before_it():
    desk = ran(ran(page()), seed=2)
    assert desk.view.spread.before is None and "was" not in head(desk)[1]


def test_the_estimate_of_the_time_grows_with_the_builds_and_goes_by_the_last_run():
    few, many = (page().press(key).screen() for key in ("/", "*"))
    assert "about 0.6 s" in few and "about 2 s" in many
    from polebook.tui.spreads import seconds

    desk = ran(page())
    assert seconds(desk.state) == pytest.approx(1.0)
    assert seconds(desk.press("*").state) == pytest.approx(10.0)


def test_equals_opens_the_working_of_todays_figure():
    desk = ran(page()).press("=")
    assert desk.overlay.about == "overall.lower_edge_hz"
    assert to_table(ran(page())).press("=").overlay is None


def test_gains_in_ratios():
    desk = ran(page()).press("V")
    assert "┊ 25.00 to 27.00 dB by 98.6 %   × worst 25.37 27.50" in desk.screen()
    shown = desk.press("g").screen()
    assert "● today 21.53   ┊ 17.78 to 22.39 by" in shown and "50 % 21.53" in shown
