"""Compensation from print, worked by the command's own solving: the capacitors, resistors and margins of the examples.

The chains of the same names are tested in the files of their books; here the values are not given but looked for.
"""

from __future__ import annotations

from functools import cache
from math import atan, degrees, pi

import pytest

from polebook.plan.compensate import Wanted, options, task
from tests.published.checks import CHAINS, printed

INPUT_STAGE = """[[stage]]
name = "M1"
kind = "common-source"
device = "IN"
rd = "10M" # not stated: out of the way

"""


@cache
def ways(text, stage, what, hz, beta, *only):
    of = task(text, "x.toml", stage, Wanted(what, hz), beta)
    return {option.name: option for _, _, option in options(of, only=only)}


def behind_an_input_stage(name, gm):
    """A chain of this folder, its source of current turned into one of voltage and a transconductance."""
    text = (CHAINS / f"{name}.toml").read_text(encoding="utf-8")
    by_current = 'kind = "current"\nresistance = "10M" # not stated: out of the way'
    assert by_current in text
    text = text.replace(by_current, 'kind = "voltage"\nresistance = 0')
    card = f'\n[device.IN]\nfamily = "mosfet"\ngm = {gm!r}\n'
    return text.replace("[[stage]]\n", INPUT_STAGE + "[[stage]]\n", 1) + card


def test_a_nulling_resistor_of_1_over_gm():
    """P. R. Gray, P. J. Hurst, S. H. Lewis, R. G. Meyer, Analysis and Design of Analog Integrated Circuits, 5th ed.,
    section 9.4.3, example: 3.2 pF bring gm1/C to the second pole, 645 Ω send the zero away. Wanted is the dominant pole
    that this makes, gm1/(2·pi·C) over the gain of 10 000 · 15 500 with the 10 MΩ that the book does not state."""
    text = behind_an_input_stage("COMP-2-0", 1e-3)
    gain = 1e-3 * 10e6 * 1.55e-3 * 10e6
    unity = 49735919.716217294  # gm1/(2·pi·3.2 pF)
    found = ways(text, "M6", "pole", unity / gain, 1.0, "across", "away")
    printed(found["across"].values["M6.c_comp"], 3.2e-12, 0.01)
    printed(found["away"].values["M6.c_comp"], 3.2e-12, 0.01)
    printed(found["away"].values["M6.r_comp"], 645, 0.002)
    printed(found["across"].figures.second.hz, 46479540.61091621, 5e-4)  # gm6·C/(C1·C2 + C·(C1 + C2))
    (zero,) = found["across"].zeros.came
    printed(zero.real, 2 * pi * 77090675.5601368, 1e-3)  # gm6/C, on the right
    assert found["away"].zeros.came == ()
    assert found["away"].figures.loop.margin_deg > found["across"].figures.loop.margin_deg + 25


def test_a_margin_of_75_degrees():
    """A. S. Sedra and K. C. Smith, Microelectronic Circuits, 5th ed., example 9.1, as worked in a public solution
    notebook: second pole 637 MHz, 171 MHz at unity gain for 75°, 0.6 pF, 316 Ω for a zero at infinity. The second pole
    is printed for Gm2 = 3.2 mA/V, as the chain has it, the resistor for 3.162 mA/V, 1.2 % less."""
    gm_1, gm_2 = 0.0006325110689437066, 3.2e-3
    unity = 170581753.89157858
    text = behind_an_input_stage("COMP-3", gm_1)
    found = ways(text, "M6", "pole", unity / (gm_1 * 10e6 * gm_2 * 10e6), 1.0, "away")["away"]
    printed(found.values["M6.c_comp"], 6e-13, 0.03)
    printed(found.values["M6.c_comp"], 5.90089044769421e-13, 1e-3)
    printed(found.values["M6.r_comp"], 316, 0.015)
    printed(found.values["M6.r_comp"], 1 / gm_2, 1e-3)
    printed(found.figures.second.hz, 637e6, 0.002)
    crossing = found.figures.loop.hz  # printed by the asymptote; the second pole's part of the fall is in the exact one
    printed(crossing, 171e6, 0.05)
    margin = 90 - degrees(atan(crossing / found.figures.second.hz))
    assert found.figures.loop.margin_deg == pytest.approx(margin, abs=0.01)
    assert found.figures.loop.margin_deg == pytest.approx(75, abs=1)


@pytest.mark.parametrize(("name", "pole", "farad", "beta"), [("COMP-4", 10, 1.59e-7, 1.0),
                                                            ("COMP-4-half", 20, 7.96e-8, 0.5)])
def test_a_shunt_capacitor_for_a_dominant_pole(name, pole, farad, beta):
    """S. Franco, Design with Operational Amplifiers and Analog Integrated Circuits, 3rd ed., example 8.8, as worked in
    a public solution notebook: 159 nF for 10 Hz, 79.6 nF for 20 Hz where half is fed back; no poles are split."""
    text = (CHAINS / f"{name}.toml").read_text(encoding="utf-8")
    found = ways(text, "A1", "pole", pole, beta, "ground")["ground"]
    printed(found.values["A1.c_load"], farad, 0.002)
    assert found.figures.second.hz == pytest.approx(1e6, rel=1e-9)
    assert found.zeros.came == ()
    crossing = found.figures.loop.hz  # 1 MHz by the asymptotes: 45° less what the pole at 10 MHz takes
    margin = 180 - sum(degrees(atan(crossing / hz)) for hz in (pole, 1e6, 10e6))
    assert found.figures.loop.margin_deg == pytest.approx(margin, rel=1e-9)
    assert 45 < margin < 52
