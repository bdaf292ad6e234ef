"""The bias as a function of its values: mirrored, with arrays, and with complex numbers."""

from __future__ import annotations

from dataclasses import fields

import numpy as np
import pytest

from polebook.circuit import bias
from tests.circuit.bias_cases import JFET, MIRROR, NMOS, NPN, PNP, RAIL, TRIODE, chain

CARDS = {"A": NPN, "B": PNP, "J": JFET, "M": NMOS, "V": TRIODE}
SUPPLY = {"positive": 15, "negative": -9}
LADDER = {"name": "L1", "kind": "ladder", "arms": [{"series_r": 1500.0}, {"shunt_r": 47e3}]}

# one chain of every family, partly coupled directly, partly stated
STAGES = [
    {"kind": "common-source", "device": "J", "rg": 1e6, "rs": 470.0, "rd": 2200.0, "stopper": 100.0},
    {"kind": "common-emitter", "device": "A", "re": 1800.0, "re_bypassed": 330.0, "rc": 1000.0, "stopper": 220.0},
    {"kind": "source-follower", "device": "M", "rs": 680.0, "lower_to": "negative"},
    LADDER,
    {"kind": "common-emitter", "device": "B", "couple": 1e-6, "rb1": 10e3, "rb2": 22e3, "re": 1000.0, "rc": 680.0,
     "rf": 1e6, "stopper": 330.0},
    {"kind": "emitter-follower", "device": "A", "re": 2200.0, "lower_to": "negative"},
    {"kind": "cascode", "device": "A", "upper": "J", "couple": 1e-6, "rb1": 47e3, "rb2": 10e3, "re": 820.0,
     "rc": 1500.0, "vce": 2.5},
    {"kind": "common-cathode", "device": "V", "couple": 1e-7, "rg": 1e6, "rk": 1800.0, "ra": 10e3, "ia": 1e-3},
]
NUMBERS = ("current", "across", "control_v", "lower_v", "output_v")


@pytest.fixture(scope="module")
def case():
    made = chain(STAGES, CARDS, supply=SUPPLY)
    return made, bias.plan(made)


def figures(points):
    return {(name, key): getattr(point, key) for name, point in points.items() for key in NUMBERS}


def with_value(made, path, value):
    return lambda key: value if key == path else made.get(key)


PATHS = ["Q1.rs", "Q1.rd", "Q2.re", "Q2.re_bypassed", "Q2.stopper", "Q3.rs", "Q5.rf", "Q5.rb2", "Q5.stopper", "Q6.re",
         "Q7.vce", "Q7.rb1", "Q8.ia", "Q8.ra", "L1.arms.1.series_r", "L1.arms.2.shunt_r",
         "supply.positive", "supply.negative", "device.A.beta", "device.A.vbe", "device.B.beta", "device.J.idss",
         "device.J.vgs_off", "device.M.k", "device.M.vgs_th", "device.V.mu", "device.V.gm", "device.V.gm_ia"]


def test_the_case_is_whole(case):
    made, plan = case
    points = bias.solve(plan, made.get)
    assert all(point.converged is True and point.current > 0 for point in points.values())
    missing = {key for key, value in figures(points).items() if value is None}
    assert missing == set()


@pytest.mark.parametrize("path", PATHS)
def test_complex_step_agrees_with_central_differences(case, path):
    made, plan = case
    value = made.get(path)
    step = 1e-30 * value
    exact = figures(bias.solve(plan, with_value(made, path, complex(value, step))))
    h = 1e-5 * value
    above = figures(bias.solve(plan, with_value(made, path, value + h)))
    below = figures(bias.solve(plan, with_value(made, path, value - h)))
    moved = 0
    for key, figure in exact.items():
        slope = np.imag(figure) / step
        difference = (above[key] - below[key]) / (2 * h)
        size = abs(above[key]) / abs(value)
        assert slope == pytest.approx(difference, rel=1e-7, abs=1e-8 * size), (path, key)
        moved += abs(slope) > 1e-6 * size
    assert moved, path


def test_arrays_agree_with_floats(case):
    made, plan = case
    rng = np.random.default_rng(7)
    shape = (3, 4)
    spread = {path: made.get(path) * rng.uniform(0.9, 1.1, shape) for path in PATHS[::2]}
    many = bias.solve(plan, lambda key: spread.get(key, made.get(key)))
    for index in np.ndindex(shape):
        one = bias.solve(plan, lambda key, at=index: float(spread[key][at]) if key in spread else made.get(key))
        for name, point in one.items():
            for key in NUMBERS:
                both = np.broadcast_to(getattr(many[name], key), shape)[index]
                assert both == pytest.approx(getattr(point, key), rel=1e-13), (name, key)
            assert np.broadcast_to(many[name].converged, shape)[index] == point.converged


def test_a_cut_off_member_of_an_array_spoils_no_other():
    stage = {"kind": "common-source", "device": "M", "couple": 1e-8, "rg1": 1e6, "rg2": 1e6, "rs": 470.0, "rd": 820.0}
    made = chain([stage], {"M": NMOS})
    plan = bias.plan(made)
    low = np.array([1.0, 1e4, 1e6, 1e5])
    many = bias.solve(plan, with_value(made, "Q1.rg2", low))["Q1"]
    assert many.converged.all()
    assert (many.current[[0, 1, 3]] == 0).all()
    assert many.current[2] == pytest.approx(bias.solve(plan, made.get)["Q1"].current, rel=1e-14)


def mirrored(stage):
    return {key: RAIL[value] if key in ("output_to", "lower_to") else value for key, value in stage.items()}


def test_the_mirror_image_of_a_chain_has_mirrored_voltages():
    stages = [
        {"kind": "common-source", "device": "J", "rg": 1e6, "rs": 470.0, "rd": 2200.0, "output_to": "positive",
         "lower_to": "ground"},
        {"kind": "common-emitter", "device": "A", "re": 1800.0, "rc": 1000.0, "stopper": 220.0, "output_to": "positive",
         "lower_to": "ground"},
        {"kind": "source-follower", "device": "M", "rs": 680.0, "output_to": "positive", "lower_to": "negative"},
        LADDER,
        {"kind": "common-emitter", "device": "B", "re": 5600.0, "rc": 680.0, "output_to": "ground",
         "lower_to": "positive", "rf": 1e5},
        {"kind": "cascode", "device": "A", "upper": "M", "couple": 1e-6, "rb2": 10e3, "re": 4700.0, "rc": 1500.0,
         "vce": 2.5, "output_to": "positive", "lower_to": "negative"},
        {"kind": "common-base", "device": "A", "couple": 1e-6, "re": 8200.0, "rc": 1500.0, "output_to": "positive",
         "lower_to": "negative"},
        {"kind": "emitter-follower", "device": "A", "ic": 2e-3, "output_to": "positive"},
    ]
    cards = {name: card for name, card in CARDS.items() if name != "V"}
    made = chain(stages, cards, supply={"positive": 15, "negative": -9})
    image = chain([mirrored(stage) for stage in stages],
                  {name: {**card, "polarity": MIRROR[card["polarity"]]} for name, card in cards.items()},
                  supply={"positive": 9, "negative": -15})
    here, there = bias.solve(bias.plan(made), made.get), bias.solve(bias.plan(image), image.get)
    assert here.keys() == there.keys() and len(here) == 8
    for name, point in here.items():
        turned = there[name]
        assert turned.current == pytest.approx(point.current, rel=1e-13), name
        assert turned.across == pytest.approx(point.across, rel=1e-12), name
        for key in ("control_v", "lower_v", "output_v"):
            assert getattr(turned, key) == pytest.approx(-getattr(point, key), rel=1e-12), (name, key)


def test_solving_twice_gives_the_same_point(case):
    made, plan = case
    assert bias.solve(plan, made.get) == bias.solve(plan, made.get)
    assert {field.name for field in fields(bias.Operating)} >= set(NUMBERS)


@pytest.mark.parametrize("path", ["Q1.rs", "Q3.rs", "device.M.k", "Q2.re", "Q5.rf", "Q8.ra"])
@pytest.mark.parametrize("factor", [1e-3, 1e3])
def test_values_far_from_the_files_are_solved_too(case, path, factor):
    made, plan = case
    assert all(p.converged is True for p in bias.solve(plan, with_value(made, path, factor * made.get(path))).values())
