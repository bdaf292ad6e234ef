"""Clip levels and what follows from them: by hand for each family, and against the whole load line of a stage."""

from __future__ import annotations

import random
from math import log10, pi, sqrt
from typing import Any

import pytest

from polebook.book.build import document, ledger
from polebook.book.ledger import Ledger
from polebook.book.load_line import without_device
from polebook.chain.read import parse
from tests.circuit.bias_cases import NPN, TRIODE, text

SOURCE = {"kind": "voltage", "resistance": 600, "largest": 0.01, "smallest": 1e-5}
JFET = {"family": "jfet", "idss": 10e-3, "vgs_off": 3.0}
OPAMP = {"family": "opamp", "gbw": 1e9, "a0": 1e9, "rout": 0, "iq": 1e-3}


def of(stages: list[dict[str, Any]], cards: dict[str, Any], positive: float = 12.0, negative: float = 0.0,
       load: dict[str, Any] | None = None, source: dict[str, Any] | None = None, target: str = "") -> Ledger:
    body = text(stages, cards, {"positive": positive, "negative": negative}, source or SOURCE,
                {"resistance": 10e3} if load is None else load)
    return ledger(parse(body + target, "levels.toml"))


def par(*ohms: float) -> float:
    return 1.0 / sum(1.0 / ohm for ohm in ohms)


def bounds(made: Ledger, stage: str = "Q1") -> dict[str, float | None]:
    assert made.levels is not None
    clip = next(clip for clip in made.levels.clips if clip.stage == stage)
    return {bound.by: bound.volts for bound in clip.bounds}


def row(made: Ledger, node: str) -> dict[str, Any]:
    return next(row for row in document(made, ("levels",))["levels"] if row["node"] == node)


def test_common_emitter_by_hand() -> None:
    """ic 2 mA stated, vce 5 V stated; rc 3k into 10k: 2.31k of load line."""
    made = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 2e-3, "vce": 5.0, "rb1": 100e3,
                "rc": 3e3, "re_bypassed": 500.0, "ce": 1e-4}], {"A": NPN}, load={"couple": 1e-6, "resistance": 10e3})
    r_ac = par(3e3, 10e3)
    assert bounds(made) == {"saturation": pytest.approx(4.8), "cut-off": pytest.approx(2e-3 * r_ac)}
    found = row(made, "n1")
    assert (found["clip_v"], found["clips_by"]) == (pytest.approx(4.6153846), "Q1 cut-off")
    gain = made.solution.gains[0] * made.solution.gains[1]
    assert found["largest_v"] == pytest.approx(0.01 * abs(gain))
    assert found["headroom_db"] == pytest.approx(20 * log10(4.6153846 / (0.01 * abs(gain))), abs=1e-6)
    assert row(made, "load")["clip_v"] == found["clip_v"]  # the coupling is a short: one node at midband
    assert row(made, "n0")["clip_v"] is None and row(made, "n0")["clips_by"] is None
    whole = document(made, ("overall",))["overall"]
    assert whole["clips_first"] == "Q1"
    assert whole["largest_source"] == pytest.approx(found["clip_v"] / abs(gain))


def test_the_device_is_taken_out_whole() -> None:
    """Neither its ro nor its rpi loads the node; rf does, with what stands at its other end."""
    stage = {"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 2e-3, "rb2": 10e3, "rc": 3e3, "rf": 47e3,
             "c_rf": 1e-6, "stopper": 220.0}
    made = of([stage], {"A": {**NPN, "early_voltage": 50, "rx": 100}})
    seen = without_device(made.solution, 1)
    assert seen.ohm == pytest.approx(par(3e3, 10e3, 47e3 + 220.0 + par(10e3, 600.0)), rel=1e-12)


def test_what_hangs_on_the_device_alone_does_not_stop_the_figure() -> None:
    """Q1's collector has nothing but Q2's emitter: with Q2 out it floats, and Q2's own node does not feel it."""
    made = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 1e-3, "rb2": 10e3},
               {"kind": "common-base", "device": "A", "ic": 1e-3, "rc": 2e3}], {"A": NPN}, load={"resistance": 6e3})
    assert without_device(made.solution, 2).ohm == pytest.approx(1.5e3, rel=1e-12)
    assert bounds(made, "Q2")["cut-off"] == pytest.approx(1.5)


def test_nothing_bounds_a_current_source_without_a_load() -> None:
    made = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 1e-3, "vce": 6.0, "rb2": 10e3}],
              {"A": {**NPN, "early_voltage": 80}}, load={})
    assert bounds(made) == {"saturation": pytest.approx(5.8)}


def test_emitter_follower_by_hand() -> None:
    made = of([{"kind": "emitter-follower", "device": "A", "couple": 1e-6, "ic": 3e-3, "rb2": 100e3, "re": 2e3}],
              {"A": NPN}, load={"couple": 1e-6, "resistance": 500.0})
    assert bounds(made)["cut-off"] == pytest.approx(3e-3 * par(2e3, 500.0))
    lower = 3e-3 * (1 + 1 / 150) * 2e3
    assert bounds(made)["saturation"] == pytest.approx(12.0 - lower - 0.2)


def test_field_effect_stage_by_hand() -> None:
    """id 2.5 mA of idss 10 mA at 3 V: gm 3.33 mS, overdrive 1.5 V; vds 6 V, 2.7k into 10k."""
    made = of([{"kind": "common-source", "device": "J", "couple": 1e-7, "id": 2.5e-3, "vds": 6.0, "rg": 1e6,
                "rd": 2.7e3, "rs_bypassed": 600.0, "cs": 1e-4}], {"J": JFET})
    assert bounds(made) == {"ohmic region": pytest.approx(6.0 - 2 * 2.5e-3 / (2 * 10e-3 / 3.0 * 0.5)),
                            "cut-off": pytest.approx(2.5e-3 * par(2.7e3, 10e3))}
    assert bounds(made)["ohmic region"] == pytest.approx(4.5)


def test_valve_by_hand() -> None:
    """mu 60, gm 1.6 mS at 1.2 mA; 1.2 mA through 1.5k below the cathode: the grid stands 1.8 V under it."""
    made = of([{"kind": "common-cathode", "device": "T", "couple": 1e-7, "ia": 1.2e-3, "rg": 1e6, "ra": 47e3,
                "rk_bypassed": 1.5e3, "ck": 1e-4}], {"T": TRIODE}, positive=250.0, load={"resistance": 220e3})
    r_ac, rp = par(47e3, 220e3), 60 / 1.6e-3
    anode = (250.0 / 47e3 - 1.2e-3) / (1 / 47e3 + 1 / 220e3)  # the load is not coupled: it takes its part
    drive = (1.2e-3 / (1.2e-3 / (1.5 * 1.2e-3 / 1.6e-3) ** 1.5)) ** (2 / 3)
    bias = (anode - 1.8) / 60 - drive  # below the cathode, by the law
    found = bounds(made)
    assert found["anode voltage"] == pytest.approx(anode - 1.8, rel=1e-12)
    assert found["cut-off"] == pytest.approx(1.2e-3 * r_ac, rel=1e-12)
    assert found["grid current"] == pytest.approx(bias * 1.6e-3 * par(rp, r_ac), rel=1e-9)


def test_cascode_by_its_upper_device() -> None:
    made = of([{"kind": "cascode", "device": "A", "upper": "B", "couple": 1e-6, "ic": 2e-3, "vce": 2.0, "rb2": 10e3,
                "rc": 1e3, "re_bypassed": 500.0, "ce": 1e-4}], {"A": NPN, "B": {**NPN, "vce_sat": 0.4}}, load={})
    upper = 12.0 - 2e-3 * 150 / 151 * 1e3 - 2e-3 * 151 / 150 * 500.0 - 2.0
    assert bounds(made) == {"saturation": pytest.approx(upper - 0.4), "cut-off": pytest.approx(2e-3 * 150 / 151 * 1e3)}


def test_op_amp_by_hand() -> None:
    """±12 V less 2 V, at 3 V: 7 V up, 13 V down; 10 mA into 1k + 9k of feedback, 200 and 600 ohms of load."""
    made = of([{"kind": "noninverting", "device": "U", "r_bias": 47e3, "rf": 9e3, "rg": 1e3, "r_out": 200.0,
                "vout": 3.0}], {"U": {**OPAMP, "headroom": 2.0, "i_max": 10e-3}}, 12.0, -12.0,
              load={"resistance": 600.0})
    seen = par(10e3, 800.0)
    assert bounds(made) == {"positive rail": pytest.approx(7.0 * 0.75), "negative rail": pytest.approx(13.0 * 0.75),
                            "output current": pytest.approx(10e-3 * seen * 0.75, rel=1e-6)}


def test_op_amp_with_a_virtual_ground_gives_its_current_into_rf() -> None:
    made = of([{"kind": "inverting", "device": "U", "rg": 1e3, "rf": 4e3}], {"U": {**OPAMP, "i_max": 5e-3}}, 9.0, -9.0,
              load={"resistance": 1e3})
    assert bounds(made)["output current"] == pytest.approx(5e-3 * par(4e3, 1e3), rel=1e-6)
    assert bounds(made)["positive rail"] == pytest.approx(7.5)  # 1.5 V of headroom by default


def test_a_cut_off_or_saturated_stage_has_no_room() -> None:
    made = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 5e-3, "rb2": 10e3, "rc": 3e3}],
              {"A": NPN})
    found = row(made, "n1")
    assert (found["clip_v"], found["clips_by"], found["headroom_db"]) == (0.0, "Q1 saturation", None)
    assert document(made, ("overall",))["overall"]["largest_source"] == 0.0


def load_line(rc: float, load: float, supply: float, current: float, saturation: float) -> float:
    """The greatest symmetrical swing of a collector: every current from 0 to where the device saturates is tried.

    Its emitter stands still, and the coupling to the load holds the voltage that it has at rest.
    """
    rest = supply - current * rc

    def collector(amperes: float) -> float:
        return (supply / rc + rest / load - amperes) / (1 / rc + 1 / load)

    top = collector(0.0)
    low, high = current, supply / rc + rest / load
    for _ in range(200):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if collector(middle) > saturation else (low, middle)
    return min(top - rest, rest - collector(low))


@pytest.mark.parametrize("seed", range(20))
def test_against_the_whole_load_line(seed: int) -> None:
    draw = random.Random(seed)
    rc, load = 10 ** draw.uniform(2.5, 4), 10 ** draw.uniform(2.5, 4.5)
    current, supply = draw.uniform(0.1, 0.9) * 15.0 / rc, 15.0
    made = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": current, "rb2": 10e3, "rc": rc}],
              {"A": NPN}, positive=supply, load={"couple": 1e-6, "resistance": load})
    assert row(made, "load")["clip_v"] == pytest.approx(load_line(rc, load, supply, current, 0.2), rel=1e-9)


def test_full_power_of_a_device_is_what_its_current_charges() -> None:
    """1 mA into 1 nF of load: 1 V/us; and the Miller halves of what follows count."""
    first = {"kind": "emitter-follower", "device": "A", "couple": 1e-6, "ic": 1e-3, "rb2": 100e3, "re": 4.7e3,
             "c_load": 1e-9}
    made = of([first], {"A": NPN})
    peak = 0.01 * abs(made.solution.gain)
    assert document(made, ("overall",))["overall"]["full_power_hz"] == pytest.approx(1e6 / (2 * pi * peak), rel=1e-9)
    second = {"kind": "common-emitter", "device": "B", "couple": 1e-6, "ic": 1e-3, "rb2": 100e3, "rc": 3e3}
    made = of([first, second], {"A": NPN, "B": {**NPN, "cmu": 3e-12, "cpi": 20e-12}})
    levels = made.levels
    assert levels is not None
    slope = next(slope for slope in levels.slopes if slope.stage == "Q1")
    k = made.solution.gains[2]
    assert slope.farad == pytest.approx(1e-9 + 20e-12 + 3e-12 * (1 - k), rel=1e-9)


def test_dynamic_range_and_noise_margin_are_sines_over_the_input_noise() -> None:
    made = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 2e-3, "vce": 5.0, "rb1": 100e3,
                "rc": 3e3}], {"A": {**NPN, "cmu": 3e-12}})
    whole = document(made, ("overall",))["overall"]
    noise = whole["noise_total_input"]
    assert noise > 0.0
    assert whole["noise_margin_db"] == pytest.approx(20 * log10(1e-5 / (sqrt(2) * noise)), abs=1e-9)
    assert whole["dynamic_range_db"] == pytest.approx(20 * log10(whole["largest_source"] / (sqrt(2) * noise)), abs=1e-9)


def test_the_noise_at_the_load_is_that_of_the_output() -> None:
    made = of([{"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 2e-3, "rb1": 100e3, "rc": 3e3}],
              {"A": {**NPN, "cmu": 3e-12}}, load={"couple": 1e-6, "resistance": 10e3})
    total = document(made, ("overall",))["overall"]["noise_total_output"]
    assert row(made, "load")["noise_v"] == pytest.approx(total, rel=1e-4)
    assert 0.0 < row(made, "n0")["noise_v"] < total


def judged(made: Ledger, name: str) -> Any:
    return next(target for target in made.targets if target.name == name)


BLOCK = {"kind": "block", "gain": 10.0, "couple": 1e-6, "rin": 1e3, "iq": 5e-3, "vout": 0.0}


def test_swing_is_judged_at_the_load() -> None:
    met = judged(of([{**BLOCK, "clip": 2.0}], {}, target='\n[target]\nswing = "1.6"\n'), "swing")
    assert (met.got, met.met, met.margin) == (pytest.approx(2.0), True, pytest.approx(0.25))
    missed = judged(of([{**BLOCK, "clip": 2.0}], {}, target='\n[target]\nswing = "4"\n'), "swing")
    assert (missed.met, missed.margin) == (False, pytest.approx(-0.5))


def test_a_stage_that_may_clip_earlier_leaves_the_swing_unjudged_but_not_unmissed() -> None:
    stages = [{**BLOCK, "clip": 2.0}, BLOCK]
    open_ = judged(of(stages, {}, target='\n[target]\nswing = "0.5"\n'), "swing")
    assert open_.met is None and "Q2" in open_.why
    sure = judged(of(stages, {}, target='\n[target]\nswing = "30"\n'), "swing")
    assert sure.met is False  # 20 V at most, whatever Q2 does


def test_no_clip_level_no_judgement() -> None:
    assert judged(of([BLOCK], {}, target='\n[target]\nswing = "1"\n'), "swing").met is None


def test_supply_current_is_judged_and_told_why_not() -> None:
    met = judged(of([{**BLOCK, "clip": 2.0}], {}, target='\n[target]\ncurrent = "10m"\n'), "current")
    assert (met.got, met.met, met.margin) == (pytest.approx(5e-3), True, pytest.approx(0.5))
    silent = {key: value for key, value in BLOCK.items() if key != "iq"}
    unknown = judged(of([silent], {}, target='\n[target]\ncurrent = "10m"\n'), "current")
    assert unknown.met is None and "iq of Q1" in unknown.why


def test_a_target_beyond_the_band_costs_nothing_where_it_is_not_set() -> None:
    made = of([{**BLOCK, "clip": 2.0}], {}, target='\n[target]\nupper = "1k"\n')
    assert made.targets
    assert "levels" not in vars(made) and "rails" not in vars(made)


def test_an_unstable_chain_has_no_levels() -> None:
    from tests.laws.chains import chain

    made = ledger(chain("oscillating"))
    doc = document(made, ("overall", "levels", "rails"))
    assert doc["levels"] is None
    assert [doc["overall"][key] for key in ("clips_first", "largest_source", "dynamic_range_db", "full_power_hz")] == [
        None] * 4
