"""What the bias says is amiss, and what it says is missing."""

from __future__ import annotations

import pytest

from polebook.circuit import bias
from polebook.circuit.bias import cautions, missing
from tests.circuit.bias_cases import JFET, NMOS, NPN, OPAMP, PNP, TRIODE, chain

DIVIDER = {"kind": "common-emitter", "device": "D", "couple": 1e-6, "rb1": 47e3, "rb2": 10e3, "re": 1100.0,
           "rc": 4700.0}
FEED = {"kind": "common-source", "device": "J", "rg": 1e6, "rs": 470.0, "rd": 2200.0}


def told(*args, **kwargs):
    made = chain(*args, **kwargs)
    plan = bias.plan(made)
    found = cautions(plan, made, bias.solve(plan, made.get))
    assert all(problem.severity == "caution" and problem.why and problem.fix and problem.place for problem in found)
    return [problem.what for problem in found]


def lacks(*args, **kwargs):
    made = chain(*args, **kwargs)
    return missing(bias.plan(made), made)


def only(found, *parts):
    assert len(found) == 1, found
    assert all(part in found[0] for part in parts), found
    return found


def without(stage, *keys):
    return {key: value for key, value in stage.items() if key not in keys}


def test_a_sound_stage_has_no_caution():
    assert told([DIVIDER], {"D": NPN}) == []
    assert told([{**DIVIDER, "ic": 1.27e-3, "vce": 4.6}], {"D": NPN}) == []
    assert told([FEED], {"J": JFET}) == []
    assert lacks([DIVIDER], {"D": NPN}) == {}


def test_stated_current_over_20_percent_off():
    only(told([{**DIVIDER, "ic": 1.6e-3}], {"D": NPN}), "ic of Q1", "1.60 mA", "1.25 mA")
    assert told([{**DIVIDER, "ic": 1.5e-3}], {"D": NPN}) == []


def test_the_caution_stands_at_the_stated_current():
    made = chain([{**DIVIDER, "ic": 1.6e-3}], {"D": NPN})
    plan = bias.plan(made)
    found = cautions(plan, made, bias.solve(plan, made.get))
    assert found[0].place == made.places["Q1.ic"]


def test_one_wrong_current_in_a_row_is_told_once():
    second = {"kind": "emitter-follower", "device": "D", "re": 1000.0, "ic": 5.4e-3}
    first = {**DIVIDER, "ic": 1.27e-3}
    assert told([first, second], {"D": NPN}) == []
    only(told([first, {**second, "ic": 8e-3}], {"D": NPN}), "ic of Q2")


def test_stated_voltage_over_20_percent_off():
    only(told([{**DIVIDER, "vce": 7.0}], {"D": NPN}), "vce of Q1", "7.00 V", "4.73 V")


def test_saturation():
    only(told([{**DIVIDER, "rc": 10e3}], {"D": NPN}), "Q1 is saturated", "vce")
    only(told([{**DIVIDER, "rc": 8200.0}], {"D": {**NPN, "vce_sat": 0.5}}), "Q1 is saturated", "500 mV")
    only(told([{**FEED, "rd": 8200.0}], {"J": JFET}), "Q1 is not pinched off", "vds")
    stage = {"kind": "common-emitter", "device": "P", "couple": 1e-6, "rb1": 10e3, "rb2": 47e3, "re": 1000.0,
             "rc": 10e3}
    only(told([stage], {"P": PNP}), "Q1 is saturated")


def test_cut_off():
    only(told([{**DIVIDER, "rb2": 2200.0}], {"D": NPN}), "Q1 is cut off")
    stage = {"kind": "common-source", "device": "M", "couple": 1e-8, "rg1": 10e6, "rg2": 1e6, "rs": 470.0, "rd": 820.0}
    only(told([stage], {"M": NMOS}), "Q1 is cut off")


def test_forward_gate_and_grid():
    stage = {**without(FEED, "rs"), "rd": 330.0, "id": 10e-3}
    only([what for what in told([stage], {"J": JFET}) if "idss" in what], "Q1 runs above idss", "10.0 mA", "8.00 mA")
    stage = {"kind": "common-cathode", "device": "V", "couple": 1e-7, "rg": 1e6, "rk": 10.0, "ra": 100e3, "ia": 3e-3}
    found = told([stage], {"V": TRIODE}, supply={"positive": 320})
    assert any("positive grid" in what for what in found)


def test_ratings():
    card = {**NPN, "p_max": 5e-3, "v_max": 4.5, "i_max": 1e-3}
    found = told([DIVIDER], {"D": card})
    assert [next(key for key in ("p_max", "v_max", "i_max") if key in what) for what in found] == [
        "p_max", "v_max", "i_max"]
    assert told([DIVIDER], {"D": {**NPN, "p_max": 6e-3, "v_max": 4.8, "i_max": 2e-3}}) == []


@pytest.mark.parametrize(("stage", "card", "terminal", "keys"), [
    ({**without(DIVIDER, "rb1", "rb2"), "ic": 1e-3}, NPN, "base of Q1", "rb1"),
    ({**without(FEED, "rg"), "couple": 1e-8, "id": 1e-3}, JFET, "gate of Q1", "rg"),
])
def test_no_path_to_a_control_terminal(stage, card, terminal, keys):
    made = chain([stage], {stage["device"]: card})
    plan = bias.plan(made)
    found = cautions(plan, made, bias.solve(plan, made.get))
    only([problem.what for problem in found], "no d.c. path", terminal)
    assert keys in found[0].fix


def test_no_path_to_an_amplifiers_input():
    stage = {"name": "U1", "kind": "noninverting", "device": "U", "couple": 1e-6}
    only(told([stage], {"U": OPAMP}), "no d.c. path to the input of U1")
    assert told([{**stage, "r_bias": 1e5}], {"U": OPAMP}) == []
    assert told([without(stage, "couple")], {"U": OPAMP}) == []


def test_a_bridge_capacitance_without_a_voltage():
    card = {**NPN, "cob": 4e-12, "cob_v": 5}
    only(told([without(DIVIDER, "rc")], {"D": card}), "cmu of Q1 is taken at 0 V")
    assert told([{**without(DIVIDER, "rc"), "vce": 4.0}], {"D": card}) == []
    assert told([without(DIVIDER, "rc")], {"D": {**card, "cmu": 3e-12}}) == []


def test_a_cascode_without_the_lower_devices_voltage():
    stage = {**DIVIDER, "kind": "cascode"}
    only(told([stage], {"D": NPN}), "voltages across both devices of Q1")
    found = told([stage], {"D": {**NPN, "cob": 4e-12, "cob_v": 5}})
    assert ["cmu of Q1" in found[0], "cmu of the upper device of Q1" in found[1], len(found)] == [True, True, 2]
    assert told([{**stage, "vce": 1.5}], {"D": NPN}) == []


def test_the_upper_device_is_looked_at_too():
    only(told([{**DIVIDER, "kind": "cascode", "vce": 4.6}], {"D": NPN}), "the upper device of Q1 is saturated")


def test_what_is_missing_is_named():
    stage = without(DIVIDER, "rb1", "rb2")
    assert lacks([stage], {"D": NPN}) == {"Q1": ("ic", "rb1 and rb2 at its base")}
    only([what for what in told([stage], {"D": NPN}) if "current" in what], "the quiescent current of Q1 can't be had")
    assert lacks([DIVIDER], {"D": {"family": "bjt", "rpi": 1e3, "gm": 0.04}}) == {}
    assert lacks([DIVIDER], {"D": {"family": "bjt", "rpi": 1e3}}) == {"Q1": ("ic", "beta on card D")}
    assert lacks([FEED], {"J": {"family": "jfet", "gm": 4e-3}}) == {"Q1": ("id", "idss and vgs_off on card J")}
    mosfet = {"kind": "common-source", "device": "M", "couple": 1e-8, "rg1": 1e6, "rg2": 1e6, "rs": 470.0, "rd": 820.0}
    assert lacks([mosfet], {"M": {"family": "mosfet", "gm": 4e-3}}) == {"Q1": ("id", "gm_id and vgs_th on card M")}
    assert lacks([mosfet], {"M": {"family": "mosfet", "gm": 4e-3, "gm_id": 1e-3, "vgs_th": 1.0}}) == {}
    valve = {"kind": "common-cathode", "device": "V", "couple": 1e-7, "rg": 1e6, "rk": 1500.0, "ra": 100e3}
    assert lacks([valve], {"V": without(TRIODE, "gm_ia")}) == {"Q1": ("ia", "gm_ia on card V")}
    follower = {"kind": "emitter-follower", "device": "D", "couple": 1e-6, "rb1": 1e5, "rb2": 1e5}
    assert lacks([follower], {"D": NPN}) == {"Q1": ("ic", "re at its emitter")}


def test_a_direct_coupling_that_takes_the_bias_away_is_named():
    second = {"kind": "common-emitter", "device": "D", "re": 1000.0, "rc": 1000.0}
    first = without(DIVIDER, "rb1", "rb2")
    found = lacks([first, second], {"D": NPN})
    assert found.keys() == {"Q1", "Q2"}
    assert any("couple" in way for way in found["Q2"]) and not any("couple" in way for way in found["Q1"])


def test_a_current_source_load_into_a_base_leaves_it_open():
    second = {"kind": "common-emitter", "device": "D", "re": 1000.0, "rc": 1000.0}
    first = without(DIVIDER, "rc")
    assert lacks([first, second], {"D": NPN}).keys() == {"Q2"}
    made = chain([first, {**second, "ic": 2e-3}], {"D": NPN})
    points = bias.solve(bias.plan(made), made.get)
    assert points["Q1"].output_v == points["Q2"].control_v == pytest.approx(2e-3 * 151 / 150 * 1000 + 0.65)
