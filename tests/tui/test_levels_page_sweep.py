"""A sweep of the leverage page that follows one more figure: of the pulse, of the levels, of the supply."""

import re

import pytest

from polebook.book.build import document
from polebook.plan.sweep import point, with_value
from polebook.report import figures as show
from polebook.session import state as sessions
from polebook.tui.draw.levers import AIMS, ALSO
from tests.tui.desk import CHAINS, SIX, Desk

DIODE = CHAINS / "photodiode-front.toml"


@pytest.fixture(autouse=True)
def few_points(monkeypatch):
    monkeypatch.setattr("polebook.tui.control.swept.POINTS", 5)


def swept(of, path):
    return Desk(of).go(path).press("tab", "7", "enter").work()


def sweep_of(desk):
    return desk.view.lever.sweep


@pytest.mark.parametrize("of, path", [(SIX, "Q5.rc"), (DIODE, "U1.rf")])
def test_s_goes_through_the_further_figures_and_back_to_none(of, path):
    desk = swept(of, path)
    whole = document(desk.state.session.ledger)["overall"]
    for one in ALSO:
        desk.press("s").work()
        assert desk.view.lever.also == one.key and one.word in desk.view.message
        sweep = sweep_of(desk)
        assert len(sweep.points) == len(sweep.values)
        assert [point.figures[one.name] for point in (sweep.today, sweep.points[2])] == pytest.approx(
            [whole[one.key]] * 2, rel=1e-9), one.key
        text = desk.screen()
        unit = one.unit or ("V" if of == SIX else "A")
        assert f"{one.short} {show.eng(whole[one.key], unit)}" in text
        assert all(f" {other.short} " in text for other in AIMS[:3]) and f" {AIMS[3].short} " not in text
    before = sweep_of(desk)
    desk.press("s")
    assert desk.view.lever.also == "" and sweep_of(desk) is before, "what it had is there"
    assert f" {AIMS[3].short} " in desk.screen()


def test_each_point_has_the_figure_of_the_chain_with_that_value():
    desk = swept(SIX, "Q5.rc").press("s").work()
    sweep, chain = sweep_of(desk), desk.state.session.ledger.chain
    for number in (0, 3):
        alone = point(with_value(chain, "Q5.rc", sweep.values[number]), sweep.values[number])
        assert alone.upper_hz == sweep.points[number].upper_hz
        rise = sweep.points[number].figures["overall.rise_time_s"]
        assert rise * alone.upper_hz == pytest.approx(0.345, abs=0.04)


def test_the_figure_that_ranks_keeps_its_place_and_the_cursor_stays():
    desk = swept(SIX, "Q5.rc").press("v", ".", ".").press("s").work()
    assert desk.view.lever.figure == "noise" and sweep_of(desk).cursor == 4
    assert " noise " in desk.screen(140, 45) and " rise " in desk.screen(140, 45)


def test_a_target_judges_it_where_it_has_one():
    session = sessions.set_value(Desk(SIX).state.session, "target.rise", "140n", 0.0)
    desk = Desk(SIX)
    desk.state = desk.state.__class__(session, desk.view)
    desk.go("Q5.rc").press("tab", "7", "enter").work().press("s").work()
    assert "rise 136 ns" in desk.screen() and "rise 136 ns short" not in desk.screen()
    desk.press(".")
    assert re.search(r"rise \d+ ns short", desk.screen())


def test_it_is_followed_in_the_next_sweep_too_and_the_ranking_has_no_such_key():
    desk = swept(SIX, "Q5.rc").press("s").work().press("escape")
    desk.press("s")
    assert "3 is its page" in desk.view.message
    desk.press("down", "enter").work()
    assert all("overall.rise_time_s" in point.figures for point in sweep_of(desk).points)
