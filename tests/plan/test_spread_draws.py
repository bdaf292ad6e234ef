"""What is drawn, and that a draw depends on seed, name and build alone."""

import hashlib
from dataclasses import replace
from math import sqrt

import numpy as np
import pytest
from scipy.special import ndtr, ndtri

from polebook.plan.spread import streams
from polebook.plan.spread.draws import NORMAL, UNIFORM, Draw, _cards, drawn
from polebook.plan.spread.normal import clipped_deviation, quantile
from tests.laws.chains import BY_NAME, chain
from tests.plan.spread_chains import LOW_PASS, TWO, parsed

MASK = 2**64 - 1


def philox(counter, key):
    """Four words of Philox4x64-10, by its publication (J. K. Salmon et al., 2011), in whole numbers of Python."""
    c, (k0, k1) = list(counter), key
    for _ in range(10):
        high0, low0 = divmod(0xD2E7470EE14C6C93 * c[0], 2**64)
        high1, low1 = divmod(0xCA5A826395121157 * c[2], 2**64)
        c = [high1 ^ c[1] ^ k0, low1, high0 ^ c[3] ^ k1, low0]
        k0, k1 = (k0 + 0x9E3779B97F4A7C15) & MASK, (k1 + 0xBB67AE8584CAA73B) & MASK
    return c


def test_the_words_are_philox_keyed_by_seed_and_name():
    """The first line is the generator's published answer to zeros."""
    assert philox([0, 0, 0, 0], (0, 0)) == [
        0x16554D9ECA36314C, 0xDB20FE9D672D0FDC, 0xD7E772CEE186176B, 0x7E68B68AEC7BA23B]
    name = int.from_bytes(hashlib.sha256(b"Q1.rc").digest()[:8], "little")
    for block in (0, 1, 2500):
        words = streams.words(7, "Q1.rc", 4 * block, 4)
        assert words.tolist() == philox([block + 1, 0, 0, 0], (7, name))


@pytest.mark.parametrize("draw", [streams.clipped_normal, streams.uniform])
def test_a_draw_is_the_same_in_any_block(draw):
    whole = draw(5, "Q1.rc", 0, 1000)
    for size in (1, 3, 64, 999):
        assert np.concatenate([draw(5, "Q1.rc", k, min(size, 1000 - k)) for k in range(0, 1000, size)]).tolist() \
            == whole.tolist()
    assert (whole != draw(6, "Q1.rc", 0, 1000)).mean() > 0.99
    assert (whole != draw(5, "Q1.rb", 0, 1000)).mean() > 0.99


def test_streams_of_other_names_and_seeds_are_not_correlated():
    rows = [streams.clipped_normal(seed, name, 0, 20_000) for seed in (1, 2) for name in ("Q1.rc", "Q1.re", "Q2.rc")]
    rows.append(streams.clipped_normal(1, "Q1.rc", 1, 20_000))  # the next build's
    off = np.corrcoef(rows) - np.eye(len(rows))
    assert np.abs(off).max() < 4.5 / sqrt(20_000)


def test_the_quantile_is_that_of_another_hand():
    share = np.concatenate([np.logspace(-12, -0.302, 4000), 1 - np.logspace(-9, -0.302, 4000), [0.5]])
    assert np.abs(quantile(share) - ndtri(share)).max() < 1e-13


def test_a_normal_draw_has_a_third_of_the_tolerance_as_deviation_and_is_clipped():
    u = streams.clipped_normal(1, "x", 0, 400_000)
    assert np.abs(u).max() == 1.0
    assert (np.abs(u) == 1.0).mean() == pytest.approx(2 * ndtr(-3.0), rel=0.1)
    assert abs(u.mean()) < 4 * u.std() / sqrt(u.size)
    assert Draw("x", "", 1.0, ()).deviation == pytest.approx(u.std(), rel=0.005)
    for z in (-2.0, -0.5, 1.0, 2.5):
        assert (u * 3 < z).mean() == pytest.approx(ndtr(z), abs=4 * sqrt(ndtr(z) * ndtr(-z) / u.size))
    z = np.linspace(-8, 8, 200_001)
    density = np.exp(-z * z / 2) / sqrt(2 * np.pi)
    assert clipped_deviation(3.0) == pytest.approx(sqrt(np.trapezoid(density * np.clip(z, -3, 3) ** 2, z)), abs=1e-7)


def test_a_uniform_draw_takes_the_whole_tolerance():
    u = streams.uniform(1, "x", 0, 400_000)
    assert -1 < u.min() < -0.9999
    assert 0.9999 < u.max() < 1
    assert Draw("x", "", 1.0, (), UNIFORM).deviation == pytest.approx(u.std(), rel=0.005)
    assert np.abs(np.histogram(u, 20, (-1, 1))[0] / 20_000 - 1).max() < 0.04


def shares(of):
    return {draw.name: draw.share for draw in of.draws}


def test_every_part_has_the_tolerance_of_its_sort_or_its_own():
    found = shares(drawn(parsed(TWO, tolerance='resistor = "2 %"\ndevice = "15 %"')))
    assert found == {
        "source.resistance": 0.02, "source.couple": 0.05,
        "Q1.couple": 0.05, "Q1.rb1": 0.02, "Q1.rb2": 0.02, "Q1.rc": 0.001, "Q1.re": 0.02,  # stray is 0: not there
        "Q2.couple": 0.05, "Q2.rb1": 0.02, "Q2.rb2": 0.02, "Q2.rc": 0.02, "Q2.re": 0.02,
        "B1.gain": 0.02, "B1.rin": 0.02, "B1.rout": 0.02, "B1.poles.1": 0.08, "B1.poles.2": 0.08,
        "load.resistance": 0.02, "load.capacitance": 0.05,
        "device.N.beta": 0.5, "device.N.ft": 0.15, "device.N.cob": 0.15}


CARDS = {
    "bjt": ("beta ft cob c_be0 ccs cpi cmu gm", "early_voltage rx ft_ic cob_v vbe vce_sat rpi ro"),
    "mosfet": ("k vgs_th gm cgs cgd cds cdb ciss crss coss", "gm_id ro channel_slope rx ig"),
    "jfet": ("idss vgs_off gm cgs cgd", "gm_id ro channel_slope"),
    "triode": ("mu gm cgk cga cak", "rp gm_ia req_noise"),
    "opamp": ("gbw a0 cin_diff cin_cm", "f2 rin rout en slew"),
}


@pytest.mark.parametrize("family", CARDS)
def test_which_figures_of_a_card_are_off(family):
    """k idss vgs_th vgs_off gm mu gbw a0 ft and every capacitance; beta by its own tolerance."""
    off, still = (words.split() for words in CARDS[family])
    of = parsed(TWO)
    numbers = {f"device.N.{key}": 2.0 for key in (*off, *still)}
    kept = {path: x for path, x in of.numbers.items() if not path.startswith("device.N.")}
    card = replace(of.cards["N"], family=family)
    changed = replace(of, cards={**of.cards, "N": card}, numbers={**kept, **numbers})
    found = {draw.name.rpartition(".")[2]: draw.share for draw in _cards(changed)}
    assert found == {key: 0.5 if key == "beta" else 0.2 for key in off}


def test_arms_of_a_ladder_have_theirs():
    of = drawn(parsed(LOW_PASS + 'tolerance = { "arms.2.shunt_c" = "2 %" }\n'))
    assert shares(of) == {"F.arms.1.series_r": 0.01, "F.arms.2.shunt_c": 0.02}
    assert shares(drawn(parsed(LOW_PASS, tolerance="resistor = 0"))) == {"F.arms.2.shunt_c": 0.05}


def test_devices_of_a_card_are_off_together():
    of = drawn(parsed(TWO))
    numbers = of.built(3, 0, 50)
    assert of.chain.cards.keys() == {"N", "SPARE"}
    u = streams.clipped_normal(3, "device.N.beta", 0, 50)
    assert numbers["device.N.beta"].tolist() == (200 * (1 + 0.5 * u)).tolist()


def test_matching_puts_each_device_beside_its_card():
    of = drawn(parsed(TWO, tolerance='matching = "3 %"'))
    numbers = of.built(3, 0, 50)
    common = 200 * (1 + 0.5 * streams.clipped_normal(3, "device.N.beta", 0, 50))
    for where in ("Q1", "Q2", "Q2_upper"):
        own = 1 + 0.03 * streams.clipped_normal(3, f"device.N.beta@{where}", 0, 50)
        assert numbers[f"device.N@{where}.beta"] == pytest.approx(common * own, rel=1e-14)
    assert [stage.device for stage in of.chain.stages] == ["N@Q1", "N@Q2", "SPARE", ""]
    assert of.chain.stages[1].upper == "N@Q2_upper"


def test_rails_and_surroundings_are_off():
    of = drawn(parsed(TWO, tolerance='supply = "4 %"'), (-20.0, 60.0))
    numbers = of.built(3, 0, 5000)
    u = streams.clipped_normal(3, "supply.positive", 0, 5000)
    assert numbers["supply.positive"].tolist() == (12 * (1 + 0.04 * u)).tolist()
    celsius = numbers["supply.temperature"]
    assert -20 < celsius.min() < -19.5
    assert 59.5 < celsius.max() < 60
    assert "supply.negative" not in numbers  # 0 V stays 0 V


def test_the_shape_is_that_of_the_file():
    assert {draw.shape for draw in drawn(parsed(TWO, tolerance='shape = "uniform"')).draws} == {UNIFORM}
    assert {draw.shape for draw in drawn(parsed(TWO)).draws} == {NORMAL}


@pytest.mark.parametrize("name", BY_NAME)
def test_every_draw_is_of_numbers_that_the_chain_has(name):
    of = drawn(chain(name), (0.0, 50.0))
    assert len({draw.name for draw in of.draws}) == len(of.draws) > 2
    assert all(path in of.chain.numbers for draw in of.draws for path in draw.numbers)


def test_an_edit_elsewhere_leaves_the_draws_of_a_part_as_they_were():
    before = drawn(parsed(TWO)).built(9, 100, 40)
    after = drawn(parsed(TWO.replace('re = "220"\n', "").replace('name = "Q2"', 'name = "X2"'))).built(9, 100, 40)
    assert before["Q1.rc"].tolist() == after["Q1.rc"].tolist()
    assert before["device.N.ft"].tolist() == after["device.N.ft"].tolist()
