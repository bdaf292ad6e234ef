"""Bench sweeps over the response: drawn where they were measured alone, told at the cursor, faults in words."""

from dataclasses import replace

import numpy as np
import pytest

from polebook.tui.draw import benches, response
from polebook.tui.draw.curves import here
from polebook.tui.draw.scene import Scene
from polebook.tui.histories import wish
from tests.tui.desk import LISTENER, Desk
from tests.tui.history_told import Benches, swept, worked

BENCH = '\n[[bench]]\nunit = "board 2"\nfile = "a.csv"\n\n[[bench]]\nfile = "none.csv"\n\n[[bench]]\ngain = "58 dB"\n'
HZ = np.geomspace(30e3, 500e3, 31)


@pytest.fixture(scope="module")
def swept_desk(tmp_path_factory):
    """The listener with a sweep that is 0.5 dB low and 360 degrees off, and one that is not there."""
    folder = tmp_path_factory.mktemp("bench")
    path = folder / "chain.toml"
    path.write_text(LISTENER.read_text(encoding="utf-8") + BENCH, encoding="utf-8")
    desk = Desk(path)
    rows = [here(desk.state.session.ledger, float(hz)) for hz in HZ]
    lines = [f"{one.hz:.6f},{one.gain_db - 0.5:.6f},{one.phase_deg - 357.0:.6f}\n" for one in rows]
    (folder / "a.csv").write_text("".join(["Hz,dB,deg\n", *lines]), encoding="utf-8")
    return worked(desk.press("tab", "3"))


@pytest.fixture
def desk(swept_desk):
    return swept_desk.again()


def readout(desk, columns=80, rows=24):
    return next(line for line in desk.screen(columns, rows).splitlines() if line.lstrip().startswith("m "))


def test_nothing_is_read_before_the_page_is_opened_and_then_once():
    desk = Desk(LISTENER)
    assert wish(desk.state) is None and wish(desk.press("tab", "3").state) is None  # that one has no bench


def test_a_sweep_is_drawn_over_its_band_alone(desk):
    curve = next(one for one in response.chart(Scene(desk.state), 79, 12).curves if one.letter == "m")
    assert curve.x[0] == pytest.approx(30e3) and curve.x[-1] == pytest.approx(500e3) and curve.y.size == HZ.size
    phases = [one for one in response.chart(Scene(desk.state), 79, 12).curves if one.right]
    assert len(phases) == 2
    plan = [here(desk.state.session.ledger, float(hz)).phase_deg for hz in HZ]
    assert phases[0].y == pytest.approx(np.array(plan) + 3.0, abs=0.05)  # by whole turns to where the plan is


def test_planned_and_measured_at_the_cursor_and_none_outside(desk):
    told = readout(desk)
    assert "board 2" in told and "-0.50" in told and "+3.0°" in told
    assert "not measured here, only 30.0 kHz to 500 kHz" in readout(desk.press("home"))


def test_in_plain_ratios_too(desk):
    told = readout(desk.press("g"))
    assert "-0.50 dB" in told and "58" not in told


def test_a_sweep_at_fault_is_told_and_not_fatal(desk):
    assert "bench 2: the file can't be read" in desk.screen()
    assert "none.csv" in desk.view.message or "bench 2" in desk.view.message


def test_a_key_takes_them_away_and_back(desk):
    assert "off the response" in desk.press("B").view.message
    assert not benches.gains(Scene(desk.state)) and "measured" not in desk.screen() and "bench 2" not in \
        "\n".join(desk.press("down").screen().splitlines()[:-2])
    assert benches.gains(Scene(desk.press("B").state))
    assert "no bench of this file has a sweep" in Desk(LISTENER).press("B").view.message


def test_one_measured_at_a_stage_is_held_against_the_gain_up_to_it(desk):
    past = desk.view.past
    at = here(desk.state.session.ledger, 100e3)
    upto = float(at.gains_db[:2].sum())
    made = (swept([5e4, 2e5], [upto + 1.0, upto + 1.0], at="Q1"),
            swept([5e4, 2e5], [50.0, 50.0], number=3, apart="measured between 50 Ω on both sides"))
    past = replace(past, benches=Benches(past.benches.of, made))
    desk.state = replace(desk.state, view=replace(desk.view, past=past))
    told = ["".join(span.text for span in line) for line in benches.pieces(
        Scene(desk.state), at, lambda scene, db, unit: f"{db:.2f}")]
    assert told[0].startswith("m1 ") and "+1.00" in told[0]
    assert "between 50" in told[1] and "planned" not in told[1]  # the plan is of another thing
    assert "m1" in "".join(one.letter for one in benches.gains(Scene(desk.state)))
