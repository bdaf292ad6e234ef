"""Small-signal figures of every family against the formulas of the chain format, evaluated by hand."""

from __future__ import annotations

from math import pi, sqrt

import numpy as np
import pytest

from polebook.devices import bjt, fet, opamp, triode
from polebook.devices.missing import Missing
from polebook.devices.num import floor_at, ratio, step, thermal_voltage

VT = 1.380649e-23 * 298.15 / 1.602176634e-19


def close(value, expected):
    assert value == pytest.approx(expected, rel=1e-13)


def npn(current=1e-3, across=5.0, celsius=25.0, **card):
    return bjt.small_signal(card.get, current, across, 0.65, celsius)


def test_thermal_voltage():
    close(thermal_voltage(25.0), VT)
    assert thermal_voltage(25.0) == pytest.approx(0.025693, abs=1e-6)


def test_bjt_from_its_current():
    at = npn(beta=200, early_voltage=80, rx=40, ccs=1e-12)
    close(at["gm"], 1e-3 / VT)
    close(at["rpi"], 200 * VT / 1e-3)
    close(at["ro"], 80e3)
    assert (at["rx"], at["ccs"]) == (40, 1e-12)
    assert at.keys() == {"gm", "rpi", "ro", "rx", "ccs"}
    close(npn(beta=200, celsius=75.0)["gm"], 1e-3 / VT * 298.15 / 348.15)


def test_bridge_capacitance_follows_the_voltage():
    card = {"beta": 200, "cob": 4e-12, "cob_v": 10}
    close(npn(**card)["cmu"], 4e-12 * ((1 + 10 / 0.75) / (1 + 4.35 / 0.75)) ** 0.33)
    close(npn(**card, built_in=0.6, grading=0.5)["cmu"], 4e-12 * sqrt((1 + 10 / 0.6) / (1 + 4.35 / 0.6)))
    at_zero = 4e-12 * (1 + 10 / 0.75) ** 0.33
    close(npn(across=None, **card)["cmu"], at_zero)
    close(npn(across=0.1, **card)["cmu"], at_zero)
    assert npn(**card, cmu=3e-12)["cmu"] == 3e-12


def test_diffusion_capacitance_from_ft():
    card = {"beta": 200, "ft": 300e6, "ft_ic": 10e-3, "cob": 4e-12, "cob_v": 10, "c_be0": 8e-12}
    tau = 1 / (2 * pi * 300e6) - 12e-12 * VT / 10e-3
    close(npn(**card)["cpi"], 1e-3 / VT * tau + 8e-12)
    with_cmu = 1 / (2 * pi * 300e6) - (8e-12 + 2e-12) * VT / 10e-3
    close(npn(**card, cmu=2e-12)["cpi"], 1e-3 / VT * with_cmu + 8e-12)
    assert npn(**{**card, "ft": 30e9})["cpi"] == 8e-12  # a negative transit time is taken as 0
    assert bjt.transit_time({**card, "ft": 30e9}.get, 25.0) < 0
    assert npn(**card, cpi=20e-12)["cpi"] == 20e-12


def test_ft_is_had_back_at_its_own_current():
    at = npn(current=10e-3, across=10.65, beta=200, ft=300e6, ft_ic=10e-3, cob=4e-12, cob_v=10)
    close(at["gm"] / (2 * pi * (at["cpi"] + at["cmu"])), 300e6)


def test_operating_point_figures_win_and_need_no_current():
    card = {"gm": 0.04, "rpi": 2500, "ro": 1e5, "cpi": 7e-12, "cmu": 1e-12, "beta": 50, "early_voltage": 10}
    at = npn(current=None, across=None, **card)
    assert at == {"gm": 0.04, "rpi": 2500, "ro": 1e5, "cpi": 7e-12, "cmu": 1e-12}
    close(npn(current=None, gm=0.04, beta=100)["rpi"], 2500)


@pytest.mark.parametrize(("family", "card", "wanted"), [
    (npn, {"current": None, "beta": 100, "early_voltage": 50}, {("gm", "current"), ("ro", "current")}),
    (npn, {}, {("rpi", "beta")}),
    (npn, {"beta": 100, "ft": 1e8}, {("cpi", "ft_ic")}),
    (npn, {"beta": 100, "cob": 1e-12}, {("cmu", "cob_v")}),
])
def test_what_is_missing_is_named_with_the_rest_at_hand(family, card, wanted):
    with pytest.raises(Missing) as told:
        family(**card)
    assert {(lack.figure, lack.key) for lack in told.value.lacks} == wanted
    assert all(lack.of_stage == (lack.key == "current") and lack.why for lack in told.value.lacks)
    assert told.value.figures.keys().isdisjoint(figure for figure, _ in wanted)


def field_effect(current=2e-3, **card):
    return fet.small_signal(card.get, current)


def test_mosfet():
    close(field_effect(k=0.02)["gm"], sqrt(2 * 0.02 * 2e-3))
    close(field_effect(gm=0.01, gm_id=4e-3)["gm"], 0.01 / sqrt(2))
    assert field_effect(gm=0.01)["gm"] == field_effect(current=None, gm=0.01)["gm"] == 0.01
    at = field_effect(k=0.02, channel_slope=0.02, ciss=50e-12, crss=4e-12, coss=20e-12, cdb=1e-12, rx=5)
    close(at["ro"], 1 / (0.02 * 2e-3))
    close(at["cgs"], 46e-12)
    close(at["cds"], 16e-12)
    assert (at["cgd"], at["cdb"], at["rx"]) == (4e-12, 1e-12, 5)
    at = field_effect(k=0.02, ciss=50e-12, crss=4e-12, cgs=30e-12, cgd=3e-12, ro=1e4, channel_slope=0.1)
    assert (at["cgs"], at["cgd"], at["ro"]) == (30e-12, 3e-12, 1e4)


def test_jfet_by_its_own_formula():
    close(field_effect(idss=8e-3, vgs_off=2.5)["gm"], 2 * 8e-3 / 2.5 * sqrt(2 / 8))
    at_gm_id = 2 * 8e-3 / 2.5 * sqrt(3 / 8)
    card = {"idss": 8e-3, "gm": at_gm_id, "gm_id": 3e-3}
    close(field_effect(**card)["gm"], 2 * 8e-3 / 2.5 * sqrt(2 / 8))
    close(-fet.cut_off(card.get, fet.strength(card.get)), 2.5)
    k = fet.strength({"idss": 8e-3, "vgs_off": 2.5}.get)
    vgs = -2.5 + fet.overdrive(k, 2e-3)
    close(8e-3 * (1 + vgs / 2.5) ** 2, 2e-3)


def test_fet_law_and_its_inverse():
    current, slope = fet.channel(0.02, 0.4)
    close(fet.overdrive(0.02, current), 0.4)
    close(slope, sqrt(2 * 0.02 * current))
    assert fet.channel(0.02, -0.1) == (0.0, 0.0)
    assert fet.overdrive(0.02, -1e-3) == 0.0


@pytest.mark.parametrize(("card", "wanted"), [
    ({"current": None, "k": 0.02}, {("gm", "current")}),
    ({"idss": 8e-3}, {("gm", "vgs_off")}),
    ({"vgs_off": 2.0}, {("gm", "idss")}),
    ({"k": 0.02, "ciss": 1e-12}, {("cgs", "crss")}),
    ({"k": 0.02, "current": None, "gm": 0.01, "channel_slope": 0.1}, {("ro", "current")}),
])
def test_what_a_fet_lacks(card, wanted):
    test_what_is_missing_is_named_with_the_rest_at_hand(field_effect, card, wanted)


def valve(current=1e-3, **card):
    return triode.small_signal(card.get, current)


def test_triode():
    at = valve(mu=60, gm=1.6e-3, gm_ia=1.2e-3, cgk=1e-12, cga=2e-12, cak=3e-12)
    close(at["gm"], 1.6e-3 * (1 / 1.2) ** (1 / 3))
    close(at["ro"], 60 / at["gm"])
    assert (at["cgk"], at["cga"], at["cak"]) == (1e-12, 2e-12, 3e-12)
    close(valve(mu=60, rp=37.5e3, gm_ia=1.2e-3)["gm"], at["gm"])
    assert valve(current=None, mu=60, gm=1.6e-3)["gm"] == 1.6e-3
    close(valve(current=None, gm=1.6e-3, rp=37.5e3)["ro"], 37.5e3)


def test_triode_law_and_its_inverse():
    card = {"mu": 60, "gm": 1.6e-3, "gm_ia": 1.2e-3}
    p = triode.perveance(card.get)
    current, slope = triode.space_charge(p, triode.drive(p, 1.2e-3))
    close(current, 1.2e-3)
    close(slope, 1.6e-3)
    assert triode.space_charge(p, -1.0) == (0.0, 0.0)


@pytest.mark.parametrize(("card", "wanted"), [
    ({"current": None, "mu": 60, "gm": 1e-3, "gm_ia": 1e-3}, {("gm", "current")}),
    ({"gm": 1e-3}, {("ro", "mu")}),
    ({"mu": 60}, {("gm", "gm")}),
])
def test_what_a_triode_lacks(card, wanted):
    test_what_is_missing_is_named_with_the_rest_at_hand(valve, card, wanted)


def test_opamp():
    card = {"gbw": 1e7}
    at = opamp.small_signal(card.get)
    close(at.pop("gbw"), 1e5 / (2 * pi * 1e7))
    assert at == {"a0": 1e5, "rout": 50.0}
    card = {"gbw": 1e7, "a0": 1e6, "f2": 2e7, "rin": 1e6, "cin_diff": 1e-12, "cin_cm": 2e-12, "rout": 0.0}
    at = opamp.small_signal(card.get)
    close(at["gbw"], 1e6 / (2 * pi * 1e7))
    close(at["f2"], 1 / (2 * pi * 2e7))
    assert [at[key] for key in ("a0", "rin", "cin_diff", "cin_cm", "rout")] == [1e6, 1e6, 1e-12, 2e-12, 0.0]
    with pytest.raises(Missing, match="gbw"):
        opamp.small_signal({}.get)


def test_a_device_cut_off_has_infinite_resistances_and_no_exception():
    assert npn(current=0.0, beta=100, early_voltage=50)["rpi"] == float("inf")
    assert field_effect(current=0.0, k=0.02, channel_slope=0.1)["ro"] == float("inf")
    at = field_effect(current=np.array([0.0, 1e-3]), k=0.02, channel_slope=0.1)
    assert at["ro"][0] == np.inf and at["ro"][1] == pytest.approx(1e4)
    assert ratio(1.0, 0j) == float("inf")


CASES = [
    (lambda i, **card: bjt.small_signal(card.get, i, 5.0, 0.65, 25.0),
     {"beta": 200.0, "early_voltage": 80.0, "ft": 300e6, "ft_ic": 10e-3, "cob": 4e-12, "cob_v": 10.0, "c_be0": 8e-12}),
    (lambda i, **card: fet.small_signal(card.get, i), {"k": 0.02, "channel_slope": 0.02, "ciss": 5e-11, "crss": 4e-12}),
    (lambda i, **card: fet.small_signal(card.get, i), {"idss": 0.008, "gm": 4e-3, "gm_id": 3e-3}),
    (lambda i, **card: triode.small_signal(card.get, i), {"mu": 60.0, "rp": 37e3, "gm_ia": 1.2e-3}),
]


@pytest.mark.parametrize(("figures", "card"), CASES)
def test_complex_steps_and_arrays_pass_through_every_figure(figures, card):
    current = 1e-3
    for key in (None, *card):
        base = current if key is None else card[key]

        def at(value, key=key):
            return figures(value, **card) if key is None else figures(current, **{**card, key: value})

        exact = at(complex(base, 1e-30 * base))
        above, below, many = at(base * (1 + 1e-6)), at(base * (1 - 1e-6)), at(np.array([base, 1.5 * base]))
        for name, value in exact.items():
            slope = np.imag(value) / (1e-30 * base)
            difference = (above[name] - below[name]) / (2e-6 * base)
            assert slope == pytest.approx(difference, rel=1e-7, abs=1e-9 * above[name] / base), (key, name)
            close(np.broadcast_to(many[name], 2)[1], at(1.5 * base)[name])


def test_clips_act_on_the_real_part():
    assert floor_at(1 + 1e-30j, 0.0) == 1 + 1e-30j and floor_at(-1 + 1e-30j, 0.0) == 0.0
    assert (floor_at(np.array([1 + 1e-30j, -1 + 1e-30j]), 0.0) == np.array([1 + 1e-30j, 0.0])).all()
    assert (step(np.array([1.0, -1.0])) == np.array([1.0, 0.0])).all() and step(2.0) == 1.0 and step(-1e-9) == 0.0
