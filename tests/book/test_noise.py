"""Noise of a ledger: what is null and why, limits of the band, targets and what the verdict says of them, devices by
hand."""

from __future__ import annotations

import re
from math import inf, log10, pi, sqrt

import pytest

from polebook.book import verdict_noise
from polebook.book.build import document, ledger
from polebook.book.working import working
from polebook.chain.read import load, parse
from tests.helpers import DEMOS, row_of

BOLTZMANN, CHARGE = 1.380649e-23, 1.602176634e-19
THERMAL = 4 * BOLTZMANN * 298.15
HEAD = 'format = 1\n[source]\nkind = "voltage"\nresistance = '


def of(text):
    return ledger(parse(text, "chain.toml"))


def why(one, name):
    found = working(one, name)
    assert found.value is None
    return found.why


BIPOLAR = HEAD + """100
[[stage]]
name = "Q"
kind = "common-emitter"
device = "D"
{stage}
[target]
reference = 1000
[device.D]
family = "bjt"
gm = "40m"
rpi = "2.5k"
"""


def test_a_card_with_figures_and_no_current_has_no_noise_figures():
    """The signal figures stand; shot noise is not known, and with it nothing of the noise."""
    one = of(BIPOLAR.format(stage="rc = 1000\ncouple = 1"))
    doc = document(one)
    assert doc["overall"]["gain"] is not None
    for key in ("noise_density", "noise_total_output", "noise_total_input", "noise_from_hz", "noise_to_hz",
                "noise_figure_db"):
        assert doc["overall"][key] is None
        assert "the current of Q is not known" in why(one, f"overall.{key}")
    for row in [*doc["lines"], *doc["parts"]]:
        assert row["noise_share"] is None
    assert all(row["leverage"]["noise"] is None for row in [*doc["parts"], *doc["cards"]])
    assert "the current of Q is not known" in why(one, "Q.rc.noise_share")
    assert "the current of Q is not known" in why(one, "Q.rc.leverage.noise")


def test_with_its_current_it_has_them():
    """Collector and base shot noise by hand: rpi = beta/gm makes beta 100."""
    one = of(BIPOLAR.format(stage='rc = 1000\nic = "1m"'))
    doc = document(one)
    assert row_of(doc["parts"], stage="Q", part="ib")["value"] == pytest.approx(1e-5)
    divided = 2500 / 2600
    source = THERMAL * 100
    base = 2 * CHARGE * 1e-5 * 100**2
    collector = 2 * CHARGE * 1e-3 / (0.04 * divided) ** 2
    load = THERMAL / 1000 / (0.04 * divided) ** 2
    total = source + base + collector + load
    assert doc["overall"]["noise_density"] == pytest.approx(sqrt(total), rel=1e-9)
    shares = {row["part"]: row["noise_share"] for row in doc["parts"] if row["noise_share"] is not None}
    assert shares == pytest.approx(
        {"resistance": source / total, "ib": base / total, "gm": collector / total, "rc": load / total}, rel=1e-9)
    assert "without noise of its own" in why(one, "Q.rpi.noise_share")
    assert doc["overall"]["noise_figure_db"] == pytest.approx(
        10 * log10(1 + (base + collector + load) / (4 * BOLTZMANN * 290 * 100)), rel=1e-9)


@pytest.mark.parametrize(
    ("card", "white"),
    [
        ('family = "mosfet"\ngm = "5m"', THERMAL * 2 / 3 * 5e-3),
        ('family = "mosfet"\ngm = "5m"\ngamma_noise = 1.1', THERMAL * 1.1 * 5e-3),
        ('family = "jfet"\ngm = "5m"\nflicker_corner = 3000', THERMAL * 2 / 3 * 5e-3 * 4),
        ('family = "triode"\ngm = "5m"\nmu = 1e6', 4 * BOLTZMANN * 290 * 2.5 * 5e-3),
        ('family = "triode"\ngm = "5m"\nmu = 1e6\nreq_noise = 800\nflicker_corner = 500',
         4 * BOLTZMANN * 290 * 800 * 25e-6 * 1.5),
    ],
)
def test_noise_of_a_channel_by_hand(card, white):
    """At 1 kHz, with nothing else in the way but the source's 50 Ω and the output resistor's 1 kΩ."""
    kind, out = ("common-cathode", "ra") if "triode" in card else ("common-source", "rd")
    one = of(f'{HEAD}50\n[[stage]]\nname = "M"\nkind = "{kind}"\ndevice = "D"\n{out} = "1k"\n'
             f"[target]\nreference = 1000\n[device.D]\n{card}\n")
    expected = THERMAL * 50 + (white + THERMAL / 1000) / 25e-6
    assert one.noise.density == pytest.approx(sqrt(expected), rel=1e-6)


def test_voltage_noise_of_an_op_amp_meets_all_of_its_input_capacitance():
    """en·(1 + 2·pi·f·rf·C) of a transimpedance stage, C the source's, cin_diff and one cin_cm together."""
    one = of('format = 1\n[source]\nkind = "current"\ncapacitance = "10p"\n[[stage]]\nname = "U"\n'
             'kind = "transimpedance"\ndevice = "A"\nrf = "1M"\n[target]\nreference = 1e5\n[device.A]\n'
             'family = "opamp"\ngbw = "1e14"\na0 = 1e12\nrout = 0\nen = "10n"\ncin_diff = "3p"\ncin_cm = "2p"\n')
    rise = 2 * pi * 1e5 * 1e6 * 15e-12
    square = THERMAL / 1e6 + (1e-8 / 1e6) ** 2 * (1 + rise**2)
    assert one.noise.density == pytest.approx(sqrt(square), rel=1e-5)


@pytest.mark.parametrize(("couple", "cin"), [("", 0.0), ("couple = 1e-9", 0.0), ("couple = 1e-9", 40e-12)])
def test_voltage_noise_of_a_block_lies_ahead_of_its_whole_input(couple, cin):
    """It is divided like the signal: at the input en stands beside the source, whatever rin and cin are."""
    one = of(f'{HEAD}1e3\n[[stage]]\nname = "B"\nkind = "block"\ngain = -7\nrin = 500\ncin = {cin}\nc_bridge = "1p"\n'
             f'rout = 80\nen = "9n"\nin = "6p"\n{couple}\n[load]\nresistance = "1k"\n[target]\nreference = 2e6\n')
    w = 2 * pi * 2e6
    ahead = abs(1e3 + (1 / (1j * w * 1e-9) if couple else 0.0)) ** 2
    load = row_of(document(one)["parts"], stage="load", part="resistance")["noise_share"]
    rest = THERMAL * 1e3 + 81e-18 + 36e-24 * ahead
    assert one.noise.density**2 * (1 - load) == pytest.approx(rest, rel=1e-9)


def test_an_ideal_source_has_no_noise_figure():
    one = of(f'{HEAD}0\n[[stage]]\nname = "B"\nkind = "block"\ngain = 2\nen = "5n"\npoles = ["1M"]\n')
    assert one.noise.density == pytest.approx(5e-9, rel=1e-6)
    assert "ideal" in why(one, "overall.noise_figure_db")


def test_a_chain_without_any_noise():
    one = of(f'{HEAD}0\n[[stage]]\nname = "B"\nkind = "block"\ngain = 2\npoles = ["1M"]\n[target]\nnoise = "5n"\n')
    doc = document(one)
    assert doc["overall"]["noise_density"] == 0.0
    assert doc["overall"]["noise_total_output"] == 0.0
    assert doc["targets"][0]["met"] is True
    assert "nothing in the chain makes noise" in why(one, "B.noise_share")


def test_an_unstable_chain_has_none():
    one = ledger(load(str(DEMOS.parent / "tests" / "independent" / "chains" / "oscillating.toml")))
    doc = document(one)
    assert doc["overall"]["noise_density"] is None and doc["overall"]["noise_total_input"] is None
    assert "unstable" in why(one, "overall.noise_density")
    assert "unstable" in why(one, "source.noise_share")


SOURCE = HEAD + '1000\n[[stage]]\nname = "B"\nkind = "block"\ngain = 3\n{keys}\n[target]\nreference = 1000\n{target}\n'


@pytest.mark.parametrize(
    ("keys", "target", "limits"),
    [
        ("poles = [1e6]", "", (0.0, inf)),
        ("poles = [1e6]\nen = 1e-8\nen_corner = 100", "", (0.1, inf)),
        ("poles = [1e6]\nen = 1e-8\nen_corner = 100\nlower_poles = [10]", "", (0.0, inf)),
        ("poles = [1e6]\nen = 1e-8\nen_corner = 100", "noise_from = 20", (20.0, inf)),
        ("poles = [1e6]", "noise_to = 20e3", (0.0, 20e3)),
        ("poles = [1e6]", "noise_from = 0\nnoise_to = 20e3", (0.0, 20e3)),
        ("poles = [1e6]\nrout = 100", "[load]\nresistance = 50", (0.0, 1e8)),
    ],
)
def test_limits_of_the_band(keys, target, limits):
    """The load's own noise at an output without capacitance has no end: 100 upper edges then."""
    one = of(SOURCE.format(keys=keys, target=target))
    assert (one.noise.totals.band.from_hz, one.noise.totals.band.to_hz) == pytest.approx(limits, rel=1e-6)
    assert one.noise.output_rms > 0.0


@pytest.mark.parametrize(
    ("keys", "target", "says"),
    [
        ("poles = [1e6]\nen = 1e-8\nen_corner = 100", "noise_from = 0", "grows without bound towards 0 Hz"),
        ("", "", "no bound upward"),
        ("rout = 100\npoles = [1e3]", "noise_from = 1e6\n[load]\nresistance = 50", "noise_from lies above"),
    ],
)
def test_a_band_that_there_is_not(keys, target, says):
    one = of(SOURCE.format(keys=keys, target=target))
    assert one.noise.density is not None
    for key in ("noise_total_output", "noise_total_input", "noise_from_hz", "noise_to_hz"):
        assert says in why(one, f"overall.{key}")


def test_a_resonance_without_loss():
    """Its noise at the resonance is infinite; beside it there is a density like any other."""
    one = of(f'{HEAD}0\n[[stage]]\nname = "B"\nkind = "block"\ngain = 2\nrout = 0\nen = "5n"\npoles = ["1M"]\n'
             '[[stage]]\nname = "L"\nkind = "ladder"\narms = [{ series_l = "1u" }, { shunt_c = "1n" }]\n'
             "[target]\nreference = 1000\n")
    assert one.noise.density == pytest.approx(5e-9, rel=1e-5)
    assert "resonance without loss" in why(one, "overall.noise_total_output")


LISTENER = (DEMOS / "wire-break-listener.toml").read_text(encoding="utf-8")


@pytest.mark.parametrize(("want", "met"), [("4n", True), ("3n", False)])
def test_a_target_is_judged(want, met):
    one = of(LISTENER.replace("[target]", f'[target]\nnoise = "{want}"'))
    (row,) = [row for row in document(one)["targets"] if row["name"] == "noise"]
    assert row["got"] == one.noise.density
    limit = float(want[0]) * 1e-9
    assert row["margin"] == pytest.approx((limit - row["got"]) / limit)
    assert row["met"] is met
    assert bool(row["why"]) is not met


def test_the_verdict_of_a_chain_that_is_too_noisy():
    text = LISTENER.replace("[target]", '[target]\nnoise = "1n"')
    one = of(text)
    assert one.verdict.startswith("Noise 3.77 nV/√Hz for 1 nV/√Hz: ")
    assert "the base current of Q1 makes 14 % of its power, the source's own resistance 70 %" in one.verdict
    (target,) = [target for target in one.targets if target.name == "noise"]
    told = verdict_noise.mend(one, target)
    assert re.fullmatch(r"most leverage: 1 % (more|less) Q1\.\w+ lowers it by 0\.\d\d %.*", told)
    words = told.split()
    moves = one.leverage.parts["Q1", words[5].partition(".")[2]]["noise"]
    assert abs(moves) == pytest.approx(float(words[9]), abs=5e-3)


def test_a_target_that_cannot_be_judged():
    one = of(BIPOLAR.format(stage="rc = 1000\ncouple = 1").replace("reference", 'noise = "5n"\nreference'))
    (row,) = document(one)["targets"]
    assert (row["met"], row["got"]) == (None, None)
    assert "the current of Q is not known" in row["why"]


def test_margin_of_the_smallest_signal():
    doc = document(of(LISTENER))["overall"]
    assert doc["noise_total_input"] == pytest.approx(doc["noise_total_output"] / abs(doc["gain"]), rel=1e-12)
    expected = 20 * log10(20e-6 / sqrt(2) / doc["noise_total_input"])
    assert doc["noise_margin_db"] == pytest.approx(expected, abs=1e-9)


def test_values_far_apart_give_nulls_and_no_faults():
    """1e60 in one block, four times over: the squares of such gains are beyond all numbers, the figures are not."""
    block = '[[stage]]\nname = "B{}"\nkind = "block"\ngain = 1e60\nrin = "1M"\nrout = "1m"\npoles = ["1M"]\n'
    blocks = "".join(block.format(k) for k in range(4))
    one = of(f'{HEAD}50\n{blocks}[load]\nresistance = "1k"\ncapacitance = "1p"\n')
    doc = document(one)
    assert doc["overall"]["noise_density"] == pytest.approx(sqrt(THERMAL * 50), rel=1e-3)
    assert doc["overall"]["noise_total_input"] == pytest.approx(sqrt(THERMAL * 50 * 0.49 * 1e6), rel=0.1)
