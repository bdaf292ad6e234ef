"""Values decades apart: a right figure, or a plain statement that there is none."""

from __future__ import annotations

from math import isclose, pi

import pytest

from polebook.book.build import document, ledger
from polebook.chain.read import parse
from polebook.problem import ProblemsFound
from tests.helpers import row_of

BIPOLAR = """
format = 1
[source]
kind = "voltage"
resistance = 50
[[stage]]
name = "Q1"
kind = "common-emitter"
device = "D"
ic = "1m"
rc = {rc}
re = {re}
{more}
[device.D]
family = "bjt"
gm = 0.04
rpi = 5000
cpi = "10p"
cmu = "1p"
"""


def of(text):
    return ledger(parse(text, "chain.toml"))


@pytest.mark.parametrize("ohm", [1e3, 1e6, 1e8])
def test_an_emitter_resistor_as_long_as_digits_are_left(ohm):
    """gain = -gm·rc/(1 + (gm + 1/rpi)·re), the base driven through 50 Ω beside re·beta."""
    rpi, gm, rc = 5000.0, 0.04, 1e3
    y = 1 / (rpi + 50 + (1 + gm * rpi) * ohm)
    assert isclose(of(BIPOLAR.format(rc=rc, re=ohm, more="")).solution.gain, -gm * rpi * y * rc, rel_tol=1e-7)


def test_an_emitter_on_all_but_nothing_is_refused():
    """What gets through is 1e-13 of gm: double precision would have three digits of it."""
    with pytest.raises(ProblemsFound, match="the midband gain of Q1 cannot be told") as found:
        of(BIPOLAR.format(rc=1000, re=1e12, more=""))
    assert all("prefix" in problem.fix for problem in found.value.problems)


def test_a_coil_ahead_of_next_to_nothing():
    """tau = L/(rc + what the collector sees), here a load of 1 TΩ beside a reverse path that rpi and cmu leave open."""
    text = BIPOLAR.format(rc=1, re=0, more='l_peak = "1u"') + '[load]\nresistance = "1T"\n'
    row = row_of(document(of(text))["parts"], stage="Q1", part="l_peak")
    assert row["tau_s"] == pytest.approx(1e-6 / (1 + 1e12), rel=1e-12)


CUT_OFF = """
format = 1
[supply]
positive = 12
[source]
kind = "voltage"
resistance = 1000
[[stage]]
name = "F"
kind = "source-follower"
device = "D"
couple = "1u"
rg2 = "100k"
rs = 90
[device.D]
family = "mosfet"
k = 0.025
vgs_th = 1
gm = 0.05
channel_slope = 0.07
"""


def test_an_output_resistance_that_a_cut_off_device_does_not_have():
    """The card states gm, so that there is a gain; ro = 1/(channel_slope·id) is infinite, and no figure is."""
    found = document(of(CUT_OFF))
    ro = row_of(found["parts"], stage="F", part="ro")
    assert ro["value"] is None
    gain = found["overall"]["gain"]
    assert gain == pytest.approx(100 / 101 * 4.5 / 5.5, rel=1e-12)
    at_output = (4 * 1.380649e-23 * 298.15) ** 0.5 * (
        (1000 / 1.01) * (4.5 / 5.5) ** 2 + (2 / 3 * 0.05 + 1 / 90) * (90 / 5.5) ** 2) ** 0.5
    assert found["overall"]["noise_density"] == pytest.approx(at_output / gain, rel=1e-6)


FLOOR = """
format = 1
[source]
kind = "voltage"
resistance = 1000
[[stage]]
name = "B"
kind = "block"
gain = 10
rin = "1M"
rout = 1000
poles = ["1M"]
en = "10n"
en_corner = 1
[load]
resistance = 1000
"""


def test_noise_without_a_bound_upward_hides_none_that_has_none_towards_0():
    """Resistors at the output are white for ever, and the flicker noise is little beside their infinite whole."""
    noise = of(FLOOR).noise
    assert noise.totals.band.from_hz == 0.1
    assert noise.totals.band.to_hz == pytest.approx(100 * of(FLOOR).upper_hz)


CROSSED = """
format = 1
[source]
kind = "voltage"
resistance = 1000
[[stage]]
name = "B"
kind = "block"
gain = 10
rin = "1M"
poles = [10, 10]
lower_poles = ["1G", "1G"]
"""


def test_the_seed_where_nothing_comes_near_the_midband_gain():
    """All frequencies are off by as much but for rounding: the lowest of the grid, a decade below the least corner."""
    band = of(CROSSED).solution.band
    assert not band.clean
    taus = of(CROSSED).solution.constants.taus
    least = min(1 / (2 * pi * tau) for tau in taus) / 10
    assert least * (1 - 1e-9) <= band.seed_hz < least * 10 ** (1 / 40)
