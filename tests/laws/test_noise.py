"""Laws of noise: Nyquist's theorem at any port and frequency, equipartition, noise bandwidths, Friis, shares."""

from __future__ import annotations

from functools import cache
from math import log10, pi, sqrt
from random import Random

import mpmath
import numpy as np
import pytest

from polebook.book.build import document, ledger
from polebook.book.ledger import Ledger
from polebook.chain.read import parse
from tests.helpers import of_whole
from tests.independent.noisy import noisy
from tests.laws.chains import BY_NAME, NO_BAND, chain
from tests.laws.dense import pencil

BOLTZMANN = 1.380649e-23
THERMAL = 4 * BOLTZMANN * 298.15
HEAD = 'format = 1\n[source]\nkind = "voltage"\nresistance = '


def of(text: str) -> Ledger:
    return ledger(parse(text, "chain.toml"))


def ladder(seed: int) -> str:
    """Two ladders of random arms between random resistances; several parts in an arm, every one with its role."""
    rng = Random(seed)

    def between(low: float, high: float) -> float:
        return low * (high / low) ** rng.random()

    def arm() -> str:
        way = rng.choice(("series", "shunt"))
        sizes = {"r": between(1, 1e5), "l": between(1e-8, 1e-2), "c": between(1e-12, 1e-6)}
        letters = rng.sample("rlc", rng.choice((1, 1, 2, 3)))
        if (way, letters) in (("series", ["c"]), ("shunt", ["l"])):
            letters.append("r")
        return "{ " + ", ".join(f"{way}_{letter} = {sizes[letter]:.6g}" for letter in letters) + " }"

    stages = "".join(f'[[stage]]\nname = "L{k}"\nkind = "ladder"\narms = [{", ".join(arm() for _ in range(4))}]\n'
                     for k in (1, 2))
    return f"{HEAD}{between(1, 1e4):.6g}\n{stages}[load]\nresistance = {between(10, 1e5):.6g}\n"


PASSIVE = ["trap-notch", *map(str, range(of_whole(30, 12)))]


@cache
def passive(name: str) -> Ledger:
    return of(ladder(int(name))) if name.isdigit() else ledger(chain(name))


@pytest.mark.parametrize("name", PASSIVE)
def test_nyquist(name):
    """What a passive port puts out is 4kT times the real part of its impedance, whatever is behind it, at any f."""
    one = passive(name)
    found = pencil(one.solution.circuit.network)
    rng = Random(name)
    hz = [10.0 ** rng.uniform(-1, 10) for _ in range(12)]
    density = one.noise.over(hz).output
    celsius = one.chain.get("supply.temperature")
    for f, e in zip(hz, density, strict=True):
        matrix = found.g + 2j * pi * f * found.c
        rows = 1.0 / np.abs(matrix).max(axis=1)
        columns = 1.0 / np.abs(matrix * rows[:, None]).max(axis=0)
        right = np.zeros(len(rows))
        right[found.output] = 1.0
        x = np.linalg.solve(matrix * rows[:, None] * columns, right * rows) * columns
        expected = 4 * BOLTZMANN * (celsius + 273.15) * x[found.output].real
        assert e**2 == pytest.approx(expected, rel=1e-6, abs=1e-9 * 4 * BOLTZMANN * 300 * abs(x[found.output]))


@pytest.mark.parametrize("ohm", ["1", "50", "1M"])
@pytest.mark.parametrize("farad", [1e-12, 3.3e-9])
def test_a_capacitor_has_kt_over_c(ohm, farad):
    one = of(f'{HEAD}"{ohm}"\n[[stage]]\nname = "L"\nkind = "ladder"\narms = [{{ shunt_c = {farad} }}]\n')
    assert one.noise.output_rms == pytest.approx(sqrt(BOLTZMANN * 298.15 / farad), rel=1e-6)
    assert (one.noise.from_hz, one.noise.to_hz) == (0.0, None)


@pytest.mark.parametrize("q", [0.1, 0.7, 3, 100, 3e4])
def test_and_no_coil_ahead_of_it_changes_that(q):
    """1 µH and 1 nF, 31.6 Ω of impedance at resonance: the sharper the peak, the narrower it is."""
    ladder_of = '[[stage]]\nname = "L"\nkind = "ladder"\narms = [{ series_l = 1e-6 }, { shunt_c = 1e-9 }]\n'
    one = of(f"{HEAD}{sqrt(1e3) / q}\n{ladder_of}")
    assert one.noise.output_rms == pytest.approx(sqrt(BOLTZMANN * 298.15 / 1e-9), rel=1e-6)


def test_a_coupling_shares_out_what_two_capacitors_have():
    """10 kΩ, 1 nF in series, 1 MΩ with 100 pF across: of a passive network every capacitor to ground has its kT/C."""
    arms = "[{ series_c = 1e-9 }, { shunt_r = 1e6 }, { shunt_c = 1e-10 }]"
    one = of(f'{HEAD}10e3\n[[stage]]\nname = "L"\nkind = "ladder"\narms = {arms}\n')
    # at infinite frequency the coupling stands in series with the source's resistance, which is then all there is
    assert one.noise.output_rms == pytest.approx(sqrt(BOLTZMANN * 298.15 / 1e-10), rel=1e-6)


@pytest.mark.parametrize(("n", "factor"), [(1, 1.5708), (2, 1.2203), (3, 1.1554), (4, 1.1285), (5, 1.1138)])
def test_noise_bandwidth_of_like_poles(n, factor):
    """Over the edge: pi/2 for one pole, and nearer to 1 with every further one."""
    block = f'[[stage]]\nname = "B"\nkind = "block"\ngain = 10\npoles = [{", ".join(["100e3"] * n)}]\n'
    one = of(f"{HEAD}1e3\n{block}")
    band = (one.noise.output_rms / 10) ** 2 / (THERMAL * 1e3)
    assert band / one.upper_hz == pytest.approx(factor, abs=6e-5)
    assert one.upper_hz == pytest.approx(1e5 * sqrt(2 ** (1 / n) - 1), rel=1e-8)


def test_noise_bandwidth_of_a_flat_pair():
    """Two poles of Q = 1/sqrt 2: pi/(2·sqrt 2) = 1.1107 of the edge."""
    arms = '[[stage]]\nname = "L"\nkind = "ladder"\narms = [{ series_l = 1e-6 }, { shunt_c = 1e-9 }]\n'
    one = of(f"{HEAD}{sqrt(2e3)}\n{arms}")
    band = one.noise.output_rms**2 / (THERMAL * sqrt(2e3))
    assert band / one.upper_hz == pytest.approx(pi / (2 * sqrt(2)), rel=1e-7)


def matched(*stages: tuple[float, float]) -> str:
    """Blocks of 50 Ω with (power gain, noise factor) between 50 Ω and 50 Ω."""
    blocks = "".join(f'[[stage]]\nname = "B{k}"\nkind = "block"\ngain = {sqrt(gain)}\ngain_into = 50\nrin = 50\n'
                     f"rout = 50\nnf = {10 * log10(factor)}\npoles = [1e9]\n"
                     for k, (gain, factor) in enumerate(stages))
    return f"{HEAD}50\n{blocks}[load]\nresistance = 50\n[target]\nreference = 1000\n"


@pytest.mark.parametrize("seed", range(6))
def test_friis(seed):
    """F = F1 + (F2 - 1)/G1 + (F3 - 1)/(G1·G2) + ... of matched blocks; the chain's own temperature is no part of it."""
    rng = Random(seed)
    stages = [(10 ** rng.uniform(-0.5, 2), 10 ** rng.uniform(0.01, 1.2)) for _ in range(rng.randint(1, 6))]
    factor, power = 1.0, 1.0
    for gain, own in stages:
        factor += (own - 1) / power
        power *= gain
    warm = f"[supply]\ntemperature = {rng.uniform(-40, 85)}\n"
    one = of(matched(*stages).replace("[load]", f"{warm}[load]"))
    assert one.noise.figure_db == pytest.approx(10 * log10(factor), rel=1e-8)


def test_a_pad_has_the_noise_figure_of_its_loss():
    """A matched attenuator at 290 K: F is its loss, 6 dB and 20 dB."""
    for loss, series, shunt in ((6.0206, 50 / 3, 200 / 3), (20.0, 450 / 11, 1000 / 99)):
        arm = f"{{ series_r = {series} }}"
        arms = f"[{arm}, {{ shunt_r = {shunt} }}, {arm}, {{ shunt_c = 1e-15 }}]"
        one = of(f'{HEAD}50\n[supply]\ntemperature = 16.85\n[[stage]]\nname = "P"\nkind = "ladder"\narms = {arms}\n'
                 "[load]\nresistance = 50\n[target]\nreference = 1000\n")
        assert one.noise.figure_db == pytest.approx(loss, abs=1e-4)


@pytest.mark.parametrize("name", [name for name in BY_NAME if name not in NO_BAND])
def test_shares_sum_to_one(name):
    """Of all parts, and of all lines; each line's is the sum of its parts'."""
    doc = document(of(noisy(BY_NAME[name].read_text(encoding="utf-8"))))
    parts = [part for part in doc["parts"] if part["noise_share"] is not None]
    assert sum(part["noise_share"] for part in parts) == pytest.approx(1, abs=1e-12)
    assert all(part["noise_share"] >= 0 for part in parts)
    assert {part["type"] for part in parts} <= {"R", "gm", "I", "en", "in"}
    for line in doc["lines"]:
        own = sum(part["noise_share"] for part in parts if part["stage"] == line["name"])
        assert (line["noise_share"] or 0.0) == pytest.approx(own, abs=1e-15)


@pytest.mark.parametrize("name", ["six-stage", "shellac-desk", "rain-radar", "photodiode-front", "mosfets"])
def test_leverage_of_all_impedances_and_of_all_strengths(name):
    """All impedances times x, by elements alone: the density goes with the root of x, a current's against it; that is
    half for the resistors' own noise, and what currents and gm do by themselves is taken off."""
    one = of(noisy(BY_NAME[name].read_text(encoding="utf-8")))
    layout = one.solution.circuit.layout
    power = {"R": 1, "L": 1, "C": -1, "gm": -1, "tau": 0, "gain": 0}
    total = sum(power[layout.parts[k].type] * row["noise"] for k, row in one.leverage.elements.items())
    # sources that are no resistors, not scaled here: their currents would fall by x, their voltages rise by x
    currents = sum(share for share, source in zip(one.leverage.slopes.sources, layout.recorder.noises, strict=True)
                   if source.driven < 0)
    voltages = sum(share for share, source in zip(one.leverage.slopes.sources, layout.recorder.noises, strict=True)
                   if source.driven >= 0)
    resistors = 1.0 - currents - voltages
    by_current = one.chain.source_kind == "current"
    expected = resistors * 0.5 + currents * 1.0 + voltages * 0.0 - by_current * 1.0
    assert total == pytest.approx(expected, abs=1e-8)


# -- totals against an integral of another kind ------------------------------------------------------------------------


def integral(density, low, high, breaks):
    """sqrt of the integral of density(f) over Hz, by 30-digit quadrature in ln f between breaks."""
    with mpmath.workdps(30):
        inner = sorted(mpmath.log(x) for x in breaks if low < x < high)
        points = [mpmath.log(low), *inner, mpmath.log(high)]
        return float(mpmath.sqrt(mpmath.quad(lambda x: density(mpmath.exp(x)) * mpmath.exp(x), points, maxdegree=10)))


def about(hz, width):
    """Points around a peak of some relative width, ever wider apart."""
    return [hz * (1 + sign * width * 2.0**k) for sign in (-1, 1) for k in range(-1, 30) if width * 2.0**k < 0.6] + [hz]


@pytest.mark.parametrize("q", [0.5, 30, 1e3, 1e5])
@pytest.mark.parametrize("band", [(None, None), (0.999, 1.0002), (1.0, 40.0), (1e-6, 1.0), (0.2, 0.9)])
def test_a_peak_and_limits_on_and_beside_it(q, band):
    """Resonance at 5.03 MHz; the limits in parts of it, in the middle of the peak too."""
    ohm, peak = sqrt(1e3) / q, 1 / (2 * pi * sqrt(1e-15))
    low, high = (None if end is None else end * peak for end in band)
    limits = "" if low is None else f"[target]\nnoise_from = {low!r}\nnoise_to = {high!r}\n"
    arms = '[[stage]]\nname = "L"\nkind = "ladder"\narms = [{ series_l = 1e-6 }, { shunt_c = 1e-9 }]\n'
    one = of(f"{HEAD}{ohm!r}\n{arms}{limits}")

    def density(f):
        w = 2 * mpmath.pi * f
        return THERMAL * ohm / ((1 - w * w * mpmath.mpf(1e-6) * mpmath.mpf(1e-9)) ** 2 + (w * ohm * 1e-9) ** 2)

    span = (peak * 1e-9, peak * 1e7) if low is None else (low, high)
    breaks = [*about(peak, 1 / q), *(10.0**k for k in range(-4, 15))]
    assert one.noise.output_rms == pytest.approx(integral(density, *span, breaks), rel=1e-4)


@pytest.mark.parametrize(
    ("corner", "poles", "lower", "band"),
    [
        (1e3, (1e6,), (), (1e-6, 1e9)),
        (1e9, (1e3,), (), (1e-3, 1e7)),
        (1e-3, (1e8,), (1e-4,), (None, None)),
        (1e8, (1e2,), (1e-5, 1e-5), (None, None)),
        (5.0, (1e5, 1e5, 1e5), (4e4,), (None, None)),
        (1e6, (1e12,), (1e-6,), (20.0, 20e3)),
        (300.0, (1e6, 1e11), (), (None, 1e5)),
    ],
)
def test_corners_far_apart(corner, poles, lower, band):
    """Flicker noise ahead of poles and high-pass corners up to eighteen decades from one another."""
    low, high = band
    ends = "".join(f"{key} = {value!r}\n" for key, value in (("noise_from", low), ("noise_to", high)) if value)
    one = of(f"{HEAD}0\n"
             f'[[stage]]\nname = "B"\nkind = "block"\ngain = -3\nen = "10n"\nen_corner = {corner}\n'
             f"poles = {list(poles)}\nlower_poles = {list(lower)}\n[target]\nreference = {sqrt(poles[0])}\n{ends}")

    def density(f):
        total = mpmath.mpf(9e-16) * (1 + corner / f)
        for pole in poles:
            total /= 1 + (f / pole) ** 2
        for pole in lower:
            total /= 1 + (pole / f) ** 2
        return total

    limits = one.noise.totals.band
    span = limits.from_hz or 1e-14, min(limits.to_hz, 1e22)
    assert limits.from_hz == (low or (0.0 if lower else 0.1))
    assert limits.to_hz == (high or np.inf)
    assert one.noise.output_rms == pytest.approx(integral(density, *span, [10.0**k for k in range(-13, 22)]), rel=1e-4)
