"""One figure of each of the smaller demo chains by hand, and that all of them reach their targets but the listener."""

from __future__ import annotations

from math import log10, sqrt

import pytest

from tests.helpers import DEMOS, figures, pick

SHORT = {"wire-break-listener": ["upper"]}  # its note says so: the part to blame is the README's example


@pytest.mark.parametrize("path", sorted(DEMOS.glob("*.toml")), ids=lambda path: path.stem)
def test_a_demo_chain_reaches_its_targets(path):
    doc = figures(path)
    assert {target["name"] for target in doc["targets"]} >= {"gain", "lower", "upper", "peaking"}
    judged = [target for target in doc["targets"] if target["name"] != "yield"]  # an audit builds for that one
    assert [target["name"] for target in judged if target["met"] is not True] == SHORT.get(path.stem, [])
    assert doc["chain"]["title"]


def test_a_cascode_gains_what_its_collector_resistor_is_over_its_emitters():
    """α²·(rc beside what follows)/(re + 1/gm), the base current of the upper device lost once more."""
    doc = figures(DEMOS / "frost-line-sounder.toml")
    current, beta, vt = pick(doc, "bias.Q1.current_a"), 100.0, 1.380649e-23 * 298.15 / 1.602176634e-19
    load = 1 / (1 / 560 + 1 / pick(doc, "Q2.input_ohm"))
    alpha = beta / (beta + 1)
    by_hand = alpha * load / (22 / alpha + vt / current)
    assert abs(pick(doc, "Q1.gain")) == pytest.approx(by_hand, rel=0.02)


def test_a_jfet_follower_gains_by_its_square_law():
    """gm·R/(1 + gm·R) with gm = 2·idss/vgs_off·sqrt(id/idss), R the source resistor beside what follows."""
    doc = figures(DEMOS / "leaf-probe.toml")
    current = pick(doc, "bias.J1.current_a")
    assert current == pytest.approx(2.5e-3 * (1 - 4700 * current / 1.4) ** 2, rel=1e-9)
    gm = 2 * 2.5e-3 / 1.4 * sqrt(current / 2.5e-3)
    load = 1 / (1 / 4700 + 1 / pick(doc, "Q1.input_ohm") + 0.008 * current)
    assert pick(doc, "J1.gain") == pytest.approx(gm * load / (1 + gm * load), rel=1e-6)


def test_a_triode_with_an_unbypassed_resistor_gains_by_its_amplification_factor():
    """mu·ra/(ra + rp + (mu + 1)·rk), with rp = mu/gm and gm by the cube root of the current."""
    doc = figures(DEMOS / "shellac-desk.toml")
    gm = 2.7e-3 * (pick(doc, "bias.V1.current_a") / 6e-3) ** (1 / 3)
    assert -pick(doc, "V1.gain") == pytest.approx(33 * 39e3 / (39e3 + 33 / gm + 34 * 150), rel=1e-3)
    texts = " ".join(caution["text"] for caution in doc["cautions"])
    assert "60 V" in texts and "kill" in texts


def test_a_pad_loses_what_its_three_resistors_divide():
    """The first pad into the second amplifier's 47 Ω."""
    doc = figures(DEMOS / "rain-radar.toml")
    leg = 1 / (1 / 150 + 1 / (8.2 + 47))
    by_hand = leg / (8.2 + leg) * 47 / (8.2 + 47)
    assert pick(doc, "P1.gain") == pytest.approx(by_hand, rel=1e-6)
    assert 20 * log10(by_hand) == pytest.approx(-3.0, abs=0.01)
