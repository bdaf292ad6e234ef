"""The published optimum of a cascade: a gain of the root of e in each of 2·ln G like one-pole stages.

T. H. Lee, The Design of CMOS Radio-Frequency Integrated Circuits, on bandwidth estimation (recalled, not seen).
Made of op-amp stages here: each is one pole whose gain times bandwidth is the amplifier's, and none loads another.
Shrinkage: P. R. Gray, P. J. Hurst, S. H. Lewis, R. G. Meyer, eq. 7.128; T. L. Floyd, example 10.18."""

from __future__ import annotations

from math import log, log10

import pytest

from polebook.chain import read
from polebook.plan import stages
from tests.published.checks import CHAINS, exact, printed

AMPLIFIERS = """format = 1
[source]
kind = "voltage"
resistance = 0
[[stage]]
name = "U"
kind = "noninverting"
device = "A"
r_bias = "10k"
rf = "1k"
rg = "1k"
[load]
resistance = "10k"
[device.A]
family = "opamp"
gbw = "1M"
a0 = 1e12
rout = 0
"""


def wanted(gain, most):
    study = stages.study(read.parse(AMPLIFIERS, "x.toml"), "U", most, gain)
    return study, [row for _, _, row in stages.steps(study) if row.wanted]


def test_gain_a_stage():
    printed(stages.OPTIMUM_GAIN, 1.6487, 1e-4)
    printed(20 * log10(stages.OPTIMUM_GAIN), 4.34, 1e-3)
    exact(stages.OPTIMUM_GAIN, 1.6487212707001282)


@pytest.mark.parametrize(("gain", "count", "most"), [(100.0, 9, 11), (1e4, 18, 19)])
def test_stages_for_a_gain(gain, count, most):
    """OPT-1: 9 stages for 100, 18 for 10^4; the rule gives 9.2 and 18.4."""
    study, rows = wanted(gain, most)
    best = stages.best(rows)
    assert best.count == count == stages.law_best(gain, 24)
    told = stages.document(study, rows)["wanted"]
    exact(told["optimum_stages"], 2 * log(gain), 1e-9)
    assert abs(told["optimum_stages"] - count) < 0.5
    for row in rows:
        exact(row.upper_hz, stages.law_band(1e6, gain, row.count), 1e-6)
    if gain == 100.0:
        exact(best.upper_hz / 1e6, 0.16962304783012255, 1e-6)
        exact(best.stage_gain, 1.6681005372000588, 1e-9)


@pytest.mark.parametrize(("count", "figure", "share"), [(1, 1.0, 1e-6), (2, 0.64, 0.006), (3, 0.51, 0.003),
                                                       (4, 0.435, 0.001), (5, 0.386, 0.002)])
def test_shrinkage(count, figure, share):
    """SHRINK-1, by copies of its one stage."""
    chain = read.load(str(CHAINS / "SHRINK-1-1.toml"))
    rows = [row for _, _, row in stages.steps(stages.study(chain, "A1", 5))]
    printed(rows[count - 1].upper_hz / 1e6, figure, share)
    exact(rows[count - 1].law_upper_hz, rows[count - 1].upper_hz, 1e-9)
    exact(rows[count - 1].law_lower_hz, rows[count - 1].lower_hz, 1e-9)


def test_two_like_stages():
    """SHRINK-2: 500 Hz and 80 kHz become 777 Hz and 51.5 kHz (recalled), 50.7 kHz apart."""
    chain = read.load(str(CHAINS / "SHRINK-2.toml"))
    row = [row for _, _, row in stages.steps(stages.study(chain, "A2", 2))][-1]
    printed(row.lower_hz, 777, 0.001)
    printed(row.upper_hz, 51500, 0.001)
    printed(row.upper_hz - row.lower_hz, 50700, 0.001)
    printed(row.law_upper_hz, 51500, 0.001)
