"""Single stages against closed forms written out by hand."""

from __future__ import annotations

from math import sqrt

import pytest
from scipy.optimize import brentq

from polebook.circuit import bias
from polebook.circuit.bias import Operating
from tests.circuit.bias_cases import JFET, NMOS, NPN, OPAMP, PNP, TRIODE, chain


def solved(*args, name="Q1", **kwargs) -> Operating:
    return all_solved(*args, **kwargs)[name]


def all_solved(*args, **kwargs) -> dict[str, Operating]:
    made = chain(*args, **kwargs)
    return bias.solve(bias.plan(made), made.get)


def close(value, expected):
    assert value == pytest.approx(expected, rel=1e-11)


DIVIDER = {"kind": "common-emitter", "device": "D", "couple": 1e-6, "rb1": 47e3, "rb2": 10e3, "re": 100.0,
           "re_bypassed": 1e3, "ce": 1e-4, "rc": 4700.0}


def test_divider_with_finite_beta():
    at = solved([DIVIDER], {"D": NPN})
    thevenin_v, thevenin_ohm = 12 * 10 / 57, 47e3 * 10e3 / 57e3
    ib = (thevenin_v - 0.65) / (thevenin_ohm + 151 * 1100)
    close(at.current, 150 * ib)
    close(at.lower_v, 151 * ib * 1100)
    close(at.control_v, at.lower_v + 0.65)
    close(at.output_v, 12 - 150 * ib * 4700)
    close(at.across, at.output_v - at.lower_v)
    assert at.origin == "solved" and at.converged is True


def test_the_stopper_carries_the_base_current():
    at = solved([{**DIVIDER, "stopper": 2200.0}], {"D": NPN})
    ib = (12 * 10 / 57 - 0.65) / (47e3 * 10e3 / 57e3 + 2200 + 151 * 1100)
    close(at.current, 150 * ib)
    close(at.control_v, at.lower_v + 0.65)


@pytest.mark.parametrize(("card", "at_75"), [({"vbe": 0.7}, 0.6), ({}, 0.55)])
def test_vbe_falls_by_2_mv_a_kelvin(card, at_75):
    card = {"family": "bjt", "beta": 150, **card}
    at = solved([DIVIDER], {"D": card}, supply={"positive": 12, "temperature": 75})
    close(at.control_v - at.lower_v, at_75)
    close(at.current, 150 * (12 * 10 / 57 - at_75) / (47e3 * 10e3 / 57e3 + 151 * 1100))


def test_collector_feedback():
    stage = {"kind": "common-emitter", "device": "D", "couple": 1e-6, "rc": 3300.0, "rf": 330e3}
    at = solved([stage], {"D": NPN})
    ib = (12 - 0.65) / (330e3 + 151 * 3300)  # (ic + ib)·rc + ib·rf + vbe = 12
    close(at.current, 150 * ib)
    close(at.output_v, 0.65 + ib * 330e3)


def test_collector_feedback_behind_a_stopper():
    stage = {"kind": "common-emitter", "device": "D", "couple": 1e-6, "rc": 3300.0, "rf": 330e3, "rb2": 68e3,
             "stopper": 1000.0}
    at = solved([stage], {"D": NPN})
    # base at 0.65 V; the stopper feeds rb2: i(rf) = ib + 0.65/(1000 + 68e3)
    leak = 0.65 / 69e3
    ib = ((12 - 0.65) - leak * (330e3 + 3300)) / (330e3 + 151 * 3300)
    close(at.current, 150 * ib)
    close(at.control_v, 0.65)


def test_a_capacitor_in_series_with_rf_stops_its_current():
    stage = {**DIVIDER, "rf": 100e3, "c_rf": 1e-6}
    close(solved([stage], {"D": NPN}).current, solved([DIVIDER], {"D": NPN}).current)


def test_self_bias_of_a_jfet():
    stage = {"kind": "common-source", "device": "J", "rg": 1e6, "rs": 330.0, "rs_bypassed": 220.0, "rd": 1500.0}
    at = solved([stage], {"J": JFET}, source={"kind": "current"})
    # id = idss(1 - id·R/vgs_off)^2: the smaller root of the quadratic in id
    a, idss, ohm = 2.5, 0.008, 550.0
    b = 2 * ohm / a + 1 / idss
    close(at.current, (b - sqrt(b * b - 4 * (ohm / a) ** 2)) / (2 * (ohm / a) ** 2))
    close(at.control_v - at.lower_v, -at.current * ohm)
    close(at.output_v, 12 - 1500 * at.current)


def test_a_jfet_known_by_gm_at_a_current_is_the_same_jfet():
    gm_id = 0.003
    gm = 2 * sqrt(0.008 * gm_id) / 2.5
    card = {"family": "jfet", "polarity": "n", "idss": 0.008, "gm": gm, "gm_id": gm_id}
    stage = {"kind": "common-source", "device": "J", "rg": 1e6, "rs": 330.0, "rd": 1500.0}
    close(solved([stage], {"J": card}).current, solved([stage], {"J": JFET}).current)


def test_mosfet_divider():
    stage = {"kind": "common-source", "device": "M", "couple": 1e-8, "rg1": 1.5e6, "rg2": 1e6, "rs": 470.0, "rd": 820.0}
    at = solved([stage], {"M": NMOS})
    current = brentq(lambda i: 12 * 0.4 - i * 470 - 1.8 - sqrt(2 * i / 0.02), 1e-9, 0.1, xtol=1e-18, rtol=1e-14)
    close(at.current, current)
    close(at.control_v, 4.8)


def test_self_bias_of_a_triode():
    stage = {"kind": "common-cathode", "device": "V", "couple": 1e-7, "rg": 1e6, "rk_bypassed": 1500.0, "ck": 1e-5,
             "ra": 100e3}
    at = solved([stage], {"V": TRIODE}, supply={"positive": 250})
    p = 0.0012 / (1.5 * 0.0012 / 0.0016) ** 1.5

    def miss(i):
        vak = 250 - i * (100e3 + 1500)
        return p * max(-i * 1500 + vak / 60, 0) ** 1.5 - i

    close(at.current, brentq(miss, 1e-9, 2.4e-3, xtol=1e-18, rtol=1e-14))
    close(at.across, 250 - at.current * 101500)


def test_cathode_follower():
    stage = {"kind": "cathode-follower", "device": "V", "couple": 1e-7, "rg": 1e6, "rk": 47e3}
    at = solved([stage], {"V": TRIODE}, supply={"positive": 250, "negative": -150})
    assert at.output_v == 250 and at.lower_v == pytest.approx(at.current * 47e3, rel=1e-12)
    p = 0.0012 / (1.5 * 0.0012 / 0.0016) ** 1.5
    close(at.current, p * (0 - at.lower_v + (250 - at.lower_v) / 60) ** 1.5)


def test_common_base_between_two_rails():
    stage = {"kind": "common-base", "device": "D", "couple": 1e-6, "re": 10e3, "rc": 4700.0, "lower_to": "negative"}
    at = solved([stage], {"D": NPN}, supply={"positive": 12, "negative": -12})
    close(at.current, (12 - 0.65) / 10e3 / (1 + 1 / 150))
    assert at.control_v == 0
    close(at.lower_v, -0.65)


def test_common_base_with_a_divider_and_stopper():
    stage = {"kind": "common-base", "device": "D", "couple": 1e-6, "re": 1000.0, "rc": 2200.0, "rb1": 33e3,
             "rb2": 10e3, "cb": 1e-6, "stopper": 100.0}
    ib = (12 * 10 / 43 - 0.65) / (33e3 * 10e3 / 43e3 + 100 + 151 * 1000)
    close(solved([stage], {"D": NPN}).current, 150 * ib)


def test_cascode_carries_one_current():
    stage = {"kind": "cascode", "device": "D", "couple": 1e-6, "rb1": 47e3, "rb2": 10e3, "re": 1100.0, "rc": 2200.0,
             "vce": 3.0}
    points = all_solved([stage], {"D": NPN})
    plain = solved([DIVIDER], {"D": NPN})
    lower, upper = points["Q1"], points["Q1_upper"]
    close(lower.current, plain.current)
    close(upper.current, plain.current * 150 / 151)
    close(upper.lower_v, lower.lower_v + 3.0)
    close(upper.control_v, upper.lower_v + 0.65)
    close(upper.output_v, 12 - 2200 * upper.current)
    close(upper.across, upper.output_v - upper.lower_v)
    assert lower.across == 3.0 and lower.output_v == upper.lower_v


def test_a_cascode_without_vce_has_a_current_but_no_voltages_across():
    stage = {"kind": "cascode", "device": "D", "couple": 1e-6, "rb1": 47e3, "rb2": 10e3, "re": 1100.0, "rc": 2200.0}
    points = all_solved([stage], {"D": NPN})
    assert points["Q1"].across is None and points["Q1_upper"].across is None
    assert points["Q1"].output_v is None and points["Q1"].current is not None


def test_a_stated_current_stands_and_gives_the_voltages():
    at = solved([{**DIVIDER, "ic": 1e-3}], {"D": NPN})
    assert at.current == 1e-3 and at.origin == "given"
    close(at.lower_v, 1e-3 * (151 / 150) * 1100)
    close(at.control_v, at.lower_v + 0.65)
    close(at.output_v, 12 - 4.7)


def test_a_stated_voltage_across_wins_over_the_rails():
    at = solved([{**DIVIDER, "ic": 1e-3, "vce": 5.0}], {"D": NPN})
    assert at.across == 5.0
    close(at.output_v, 12 - 4.7)


def test_stated_currents_of_fet_and_valve_give_the_control_voltage():
    stage = {"kind": "common-source", "device": "J", "rg": 1e6, "rs": 330.0, "rd": 1500.0, "id": 2e-3}
    at = solved([stage], {"J": JFET})
    close(at.control_v - at.lower_v, 2.5 * (sqrt(2 / 8) - 1))
    stage = {"kind": "common-cathode", "device": "V", "couple": 1e-7, "rg": 1e6, "rk": 1500.0, "ra": 100e3, "ia": 1e-3}
    at = solved([stage], {"V": TRIODE}, supply={"positive": 250})
    p = 0.0012 / (1.5 * 0.0012 / 0.0016) ** 1.5
    close(at.control_v - at.lower_v, (1e-3 / p) ** (2 / 3) - (250 - 101.5) / 60)


def test_a_control_voltage_that_the_card_does_not_tell_is_the_dividers():
    stage = {"kind": "common-source", "device": "M", "couple": 1e-8, "rg1": 1.5e6, "rg2": 1e6, "rs": 470.0,
             "rd": 820.0, "id": 2e-3}
    at = solved([stage], {"M": {"family": "mosfet", "polarity": "n", "gm": 0.01}})
    close(at.control_v, 4.8)


def test_a_current_source_load_leaves_the_output_to_the_other_resistors():
    stage = {key: value for key, value in DIVIDER.items() if key != "rc"}
    at = solved([stage], {"D": NPN})
    assert at.output_v is None and at.across is None and at.current is not None
    at = solved([stage], {"D": NPN}, load={"resistance": 1e4})
    assert at.output_v == 0.0
    at = solved([{**stage, "vce": 4.0}], {"D": NPN})
    close(at.output_v, at.lower_v + 4.0)


def test_a_follower_on_a_current_source_follows_its_base():
    stage = {"kind": "emitter-follower", "device": "D", "couple": 1e-6, "rb1": 1e5, "rb2": 1e5, "ic": 5e-3}
    at = solved([stage], {"D": NPN})
    base = 6 - 5e-3 / 150 * 5e4
    close(at.lower_v, base - 0.65)
    close(at.across, 12 - at.lower_v)


def test_the_source_feeds_the_base_directly():
    stage = {"kind": "common-emitter", "device": "D", "re": 1000.0, "rc": 4700.0, "lower_to": "negative"}
    at = solved([stage], {"D": NPN}, supply={"positive": 12, "negative": -5}, source={"kind": "voltage",
                                                                                   "resistance": 10e3})
    ib = (5 - 0.65) / (10e3 + 151 * 1000)
    close(at.current, 150 * ib)
    close(at.control_v, -ib * 10e3)


def test_an_ideal_source_holds_the_base_and_a_coupled_one_does_not():
    stage = {"kind": "common-emitter", "device": "D", "re": 1000.0, "rc": 4700.0, "lower_to": "negative"}
    supply = {"positive": 12, "negative": -5}
    at = solved([stage], {"D": NPN}, supply=supply, source={"kind": "voltage", "resistance": 0})
    close(at.lower_v, -0.65)
    at = solved([stage], {"D": NPN}, supply=supply, source={"kind": "voltage", "resistance": 50, "couple": 1e-6})
    assert at.current is None and at.origin is None


def test_ladders_carry_direct_current_through_resistors_and_coils():
    follower = {"kind": "emitter-follower", "device": "D", "rb1": 47e3, "re": 1000.0}
    ladder = {"name": "L1", "kind": "ladder", "arms": [
        {"series_r": 1000.0, "series_l": 1e-3}, {"series_r": 2200.0}, {"shunt_r": 10e3},
        {"shunt_r": 50.0, "shunt_c": 1e-9}, {"series_r": 470.0, "series_c": 1e-9}]}
    at = solved([ladder, follower], {"D": NPN}, name="Q2")
    # base fed from 0 V by (600 + 2200) || 10k, then 470 ohm; rb1 from 12 V
    behind = 2800 * 10e3 / 12.8e3 + 470
    ib = (12 * behind / (47e3 + behind) - 0.65) / (47e3 * behind / (47e3 + behind) + 151 * 1000)
    close(at.current, 150 * ib)


def test_a_series_capacitor_of_a_ladder_and_a_shunt_coil():
    follower = {"kind": "emitter-follower", "device": "D", "rb1": 47e3, "rb2": 47e3, "re": 1000.0}
    blocked = {"name": "L1", "kind": "ladder", "arms": [{"series_c": 1e-9}]}
    at = solved([blocked, follower], {"D": NPN}, name="Q2")
    close(at.current, 150 * (6 - 0.65) / (23.5e3 + 151e3))
    short = {"name": "L1", "kind": "ladder", "arms": [{"shunt_l": 1e-3}]}
    follower = {**follower, "lower_to": "negative"}
    at = solved([short, follower], {"D": NPN}, name="Q2", supply={"positive": 12, "negative": -12})
    close(at.lower_v, -0.65)


def test_a_stage_left_out_is_a_wire():
    coupled = {**DIVIDER, "couple": 1e-6}
    follower = {"kind": "emitter-follower", "device": "D", "re": 1000.0, "lower_to": "negative"}
    points = all_solved([{**coupled, "left_out": True}, follower], {"D": NPN}, supply={"positive": 12, "negative": -6})
    assert set(points) == {"Q2"}
    close(points["Q2"].current, 150 * (6 - 0.65) / (600 + 151e3))


def test_amplifier_outputs_stand_at_vout():
    amplifier = {"name": "U1", "kind": "noninverting", "device": "U", "r_bias": 1e5, "couple": 1e-6}
    follower = {"kind": "emitter-follower", "device": "D", "re": 1000.0}
    points = all_solved([amplifier, follower], {"U": OPAMP, "D": NPN}, supply={"positive": 12, "negative": -2})
    assert points["U1"].output_v == 5.0 and points["U1"].control_v == 0.0
    close(points["Q2"].lower_v, 4.35)
    points = all_solved([{**amplifier, "vout": 3.0}, follower], {"U": OPAMP, "D": NPN})
    close(points["Q2"].lower_v, 2.35)


def test_amplifier_inputs_draw_through_their_resistors():
    first = DIVIDER
    inverting = {"name": "U1", "kind": "inverting", "device": "U", "rg": 10e3, "rf": 100e3}
    at = solved([first, inverting], {"D": NPN, "U": OPAMP})
    close(at.output_v, (12 / 4700 - at.current) / (1 / 4700 + 1 / 10e3))
    held = {"name": "U1", "kind": "transimpedance", "device": "U", "rf": 100e3}
    assert solved([first, held], {"D": NPN, "U": OPAMP}).output_v == 0.0
    block = {"name": "B1", "kind": "block", "gain": 10, "rin": 50.0, "vout": 1.0, "r_bridge": 1000.0}
    at = solved([first, block], {"D": NPN})
    close(at.output_v, (12 / 4700 + 1 / 1000 - at.current) / (1 / 4700 + 1 / 50 + 1 / 1000))


def test_pnp_figures_are_written_as_for_npn():
    stage = {"kind": "common-emitter", "device": "P", "couple": 1e-6, "rb1": 10e3, "rb2": 47e3, "re": 1000.0,
             "rc": 4700.0}
    at = solved([stage], {"P": PNP})
    ib = (12 - 12 * 47 / 57 - 0.7) / (47e3 * 10e3 / 57e3 + 81 * 1000)
    close(at.current, 80 * ib)
    close(at.lower_v, 12 - 81 * ib * 1000)
    close(at.control_v, at.lower_v - 0.7)
    close(at.across, at.lower_v - at.output_v)


def test_saturation_and_cut_off_keep_the_law():
    at = solved([{**DIVIDER, "rc": 47e3}], {"D": NPN})
    assert at.across < 0 and at.current == pytest.approx(solved([DIVIDER], {"D": NPN}).current)
    stage = {"kind": "common-source", "device": "M", "couple": 1e-8, "rg1": 10e6, "rg2": 1e6, "rs": 470.0, "rd": 820.0}
    at = solved([stage], {"M": NMOS})
    assert at.current == 0 and at.output_v == 12


def test_a_microhm_stopper_beside_gigohm_resistors_moves_nothing():
    stage = {"kind": "common-source", "device": "M", "couple": 1e-8, "rg1": 1.5e9, "rg2": 1e9, "rs": 470.0,
             "rd": 820.0, "rf": 2e9}
    plain, stopped = solved([stage], {"M": NMOS}), solved([{**stage, "stopper": 1e-6}], {"M": NMOS})
    assert stopped.current == pytest.approx(plain.current, rel=1e-13)
    assert stopped.control_v == pytest.approx(plain.control_v, rel=1e-13)
