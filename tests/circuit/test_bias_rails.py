"""What each rail gives, by hand; and Kirchhoff's current law over ground and rails."""

from __future__ import annotations

import pytest

from polebook.chain.model import Chain
from polebook.circuit import bias
from polebook.circuit.bias_rails import Rails, rails
from tests.circuit.bias_cases import JFET, NPN, OPAMP, PNP, TRIODE, chain

IQ = {**OPAMP, "iq": 2e-3}


def of(*args: object, **kwargs: object) -> Rails:
    made: Chain = chain(*args, **kwargs)
    found = rails(made, bias.plan(made))
    total = sum(found.current(name) or 0.0 for name in found.standing)
    assert abs(total) <= 1e-12 * sum(abs(draw.current or 0.0) for draw in found.draws)
    return found


def test_common_emitter() -> None:
    """rb1 150k, rb2 47k from 12 V into beta 150: the current of rb1, and that of the collector."""
    found = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "rb1": 150e3, "rb2": 47e3, "re": 1e3,
                 "rc": 3.3e3}], {"A": NPN})
    thevenin, behind = 12.0 * 47e3 / 197e3, 150e3 * 47e3 / 197e3
    base = (thevenin - 0.65) / (behind + 151.0 * 1e3)
    top = (12.0 - (thevenin - base * behind)) / 150e3
    assert found.current("positive") == pytest.approx(150.0 * base + top, rel=1e-12)
    assert found.current("ground") == pytest.approx(-(150.0 * base + top), rel=1e-12)
    assert [(draw.rail, draw.stage, draw.element) for draw in found.draws] == [
        ("positive", "Q1", "rb1"), ("positive", "Q1", "rc"), ("ground", "Q1", "rb2"), ("ground", "Q1", "re")]


def test_pnp_between_both_rails() -> None:
    """Its emitter resistor hangs on the positive rail, its collector resistor on the negative."""
    found = of([{"kind": "common-emitter", "device": "P", "couple": 1e-6, "ic": 2e-3, "re": 470.0, "rc": 2.2e3,
                 "rb2": 10e3, "output_to": "negative"}], {"P": PNP}, supply={"positive": 9, "negative": -9})
    assert found.current("positive") == pytest.approx(2e-3 * (1 + 1 / 80), rel=1e-12)
    assert found.current("negative") == pytest.approx(-2e-3, rel=1e-12)
    assert found.current("ground") == pytest.approx(-2e-3 / 80, rel=1e-9)  # the base current, through rb2
    assert found.greater == "positive"


def test_current_sources_hang_on_their_rails() -> None:
    """A collector without a resistor, and an emitter with a stated current and none."""
    found = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 1e-3, "rb1": 100e3, "rb2": 22e3,
                 "re": 1e3},
                {"kind": "emitter-follower", "device": "A", "ic": 3e-3, "couple": 1e-6, "rb2": 100e3,
                 "lower_to": "negative"}], {"A": NPN}, supply={"positive": 12, "negative": -6})
    ways = {(draw.rail, draw.stage, draw.element): draw.current for draw in found.draws}
    assert ways["positive", "Q1", "source"] == pytest.approx(1e-3, rel=1e-12)
    assert ways["positive", "Q2", ""] == pytest.approx(3e-3, rel=1e-12)
    assert ways["negative", "Q2", "source"] == pytest.approx(-3e-3 * (1 + 1 / 150), rel=1e-12)


def test_cascode_feeds_its_upper_base_from_its_output_rail() -> None:
    found = of([{"kind": "cascode", "device": "A", "couple": 1e-6, "ic": 2e-3, "vce": 3.0, "rb1": 100e3, "rb2": 22e3,
                 "re": 470.0, "rc": 1e3}], {"A": NPN})
    ways = {(draw.stage, draw.element): draw.current for draw in found.draws if draw.rail == "positive"}
    assert ways["Q1", "rc"] == pytest.approx(2e-3 * 150 / 151, rel=1e-12)
    assert ways["Q1", "upper base"] == pytest.approx(2e-3 / 151, rel=1e-12)


def test_valve_and_jfet_with_self_bias_draw_what_they_carry() -> None:
    made = chain([{"kind": "common-cathode", "device": "T", "couple": 1e-7, "rg": 1e6, "rk": 1e3, "ra": 47e3},
                  {"kind": "common-source", "device": "J", "couple": 1e-7, "rg": 1e6, "rs": 330.0, "rd": 10e3}],
                 {"T": TRIODE, "J": JFET}, supply={"positive": 200})
    plan = bias.plan(made)
    points, found = bias.solve(plan, made.get), rails(made, plan)
    assert found.current("positive") == pytest.approx(points["Q1"].current + points["Q2"].current, rel=1e-9)


@pytest.mark.parametrize(("vout", "rail", "other"), [(3.0, "positive", "negative"), (-3.0, "negative", "positive")])
def test_what_an_op_amps_output_gives_comes_out_of_a_rail(vout: float, rail: str, other: str) -> None:
    """3 V over a load of 1k and rf + rg of 10k + 2k: 3 mA and 0.25 mA, beside iq."""
    found = of([{"kind": "noninverting", "device": "U", "couple": 1e-6, "r_bias": 47e3, "rf": 10e3, "rg": 2e3,
                 "vout": vout}], {"U": IQ}, supply={"positive": 12, "negative": -12}, load={"resistance": 1e3})
    assert found.outputs["Q1"] == pytest.approx(vout / 1e3 + vout / 12e3, rel=1e-12)
    assert abs(found.current(rail) or 0.0) == pytest.approx(2e-3 + 3.25e-3, rel=1e-12)
    assert abs(found.current(other) or 0.0) == pytest.approx(2e-3, rel=1e-12)


def test_a_capacitor_in_the_feedback_lets_no_current_through() -> None:
    found = of([{"kind": "noninverting", "device": "U", "couple": 1e-6, "r_bias": 47e3, "rf": 10e3, "rg": 2e3,
                 "c_rg": 1e-6, "vout": 3.0}], {"U": IQ}, supply={"positive": 12})
    assert found.outputs["Q1"] == 0.0


def test_what_enters_an_inverting_input_leaves_by_the_output() -> None:
    """A block at 2 V into rg of 10k: 0.2 mA go on through rf, and the op-amp's output takes them."""
    found = of([{"kind": "block", "gain": 2.0, "iq": 1e-3, "vout": 2.0},
                {"kind": "inverting", "device": "U", "rg": 10e3, "rf": 22e3, "vout": 0.0}],
               {"U": IQ}, supply={"positive": 9, "negative": -9})
    assert found.outputs == {"Q1": pytest.approx(2e-4), "Q2": pytest.approx(-2e-4)}
    assert found.current("positive") == pytest.approx(3e-3 + 2e-4, rel=1e-12)
    assert found.current("negative") == pytest.approx(-3e-3 - 2e-4, rel=1e-12)
    assert found.current("ground") == pytest.approx(0.0, abs=1e-18)


def test_a_transimpedance_input_takes_what_the_stage_before_gives() -> None:
    """A follower at its input: its emitter stands at 0 V, so its resistor to the negative rail has 6 V across it."""
    found = of([{"kind": "block", "gain": 1.0, "iq": 0.0, "vout": 1.5},
                {"kind": "ladder", "arms": [{"series_r": 3e3}]},
                {"kind": "transimpedance", "device": "U", "rf": 10e3}], {"U": IQ},
               supply={"positive": 5, "negative": -5})
    assert found.outputs["Q3"] == pytest.approx(-0.5e-3, rel=1e-12)


def test_resistors_behind_an_amplifier_alone_draw_too() -> None:
    """No device and no input hangs there: 4 V over 100 + 300 ohms and a shunt of 400 ohms between."""
    found = of([{"kind": "block", "gain": 1.0, "iq": 5e-3, "vout": 4.0},
                {"kind": "ladder", "arms": [{"series_r": 100.0}, {"shunt_r": 400.0}, {"series_r": 300.0}]}], {},
               supply={"positive": 8}, load={"resistance": 100.0})
    assert found.outputs["Q1"] == pytest.approx(4.0 / (100.0 + 200.0), rel=1e-12)
    assert found.current("positive") == pytest.approx(5e-3 + 4.0 / 300.0, rel=1e-12)


def test_a_coil_ties_what_follows_to_the_output() -> None:
    found = of([{"kind": "block", "gain": 1.0, "iq": 0.0, "vout": 2.0},
                {"kind": "ladder", "arms": [{"series_l": 1e-6}]}], {}, supply={"positive": 8},
               load={"resistance": 100.0})
    assert found.outputs["Q1"] == pytest.approx(0.02, rel=1e-12)


def test_without_iq_the_rails_are_not_known() -> None:
    made = chain([{"kind": "noninverting", "device": "U", "r_bias": 47e3}], {"U": OPAMP}, supply={"positive": 12})
    found = rails(made, bias.plan(made))
    assert found.current("positive") is None
    assert [draw.element for draw in found.unknown("positive")] == ["iq"]
    assert found.greater == ""


def test_a_stage_without_a_current_leaves_its_rail_unknown() -> None:
    made = chain([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "rc": 1e3}],
                 {"A": {**NPN, "gm": 0.04, "rpi": 4e3}}, supply={"positive": 12, "negative": -5})
    found = rails(made, bias.plan(made))
    assert found.current("positive") is None
    assert found.current("negative") == 0.0


def test_left_out_stages_draw_nothing_and_no_supply_has_no_rails() -> None:
    stage = {"kind": "common-emitter", "device": "A", "couple": 1e-6, "rb1": 150e3, "rb2": 47e3, "re": 1e3, "rc": 3.3e3,
             "left_out": True}
    assert of([stage], {"A": NPN}).current("positive") == 0.0
    made = chain([{"kind": "ladder", "arms": [{"series_r": 50.0}]}], {}, supply={"temperature": 30})
    assert rails(made, bias.plan(made)).standing == {}
