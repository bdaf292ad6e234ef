"""The program's noise beside the independent one: densities and shares at several frequencies, totals, leverage."""

from __future__ import annotations

import tomllib
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from polebook.book.ledger import Ledger, ledger
from polebook.chain.read import parse
from polebook.problem import ProblemsFound
from tests.helpers import DEMOS
from tests.independent.leverage import moved, path_of
from tests.independent.linear import mp
from tests.independent.noise import Noise
from tests.independent.noisy import noisy
from tests.independent.random_chains import text

HERE = Path(__file__).parent
FILES = {p.stem: p for p in sorted([*DEMOS.glob("*.toml"), *(HERE / "chains").glob("*.toml")])}
SEEDS = (1, 2, 3, 4, 5, 6, 8, 9, 11, 12, 13, 14)
STEP = 1e-6


def told(name: str) -> str:
    return noisy(text(int(name)) if name.isdigit() else FILES[name].read_text(encoding="utf-8"))


@cache
def ours(name: str) -> Ledger:
    return ledger(parse(told(name), f"{name}.toml"))


@cache
def both(name: str) -> tuple[Ledger, Noise]:
    return ours(name), Noise(tomllib.loads(told(name)))


STABLE = [name for name in (*FILES, *map(str, SEEDS)) if ours(name).judged]


def test_there_are_chains_to_compare():
    assert len(STABLE) >= 35
    assert sum(name.isdigit() for name in STABLE) >= 10
    parts = {part for name in STABLE for _, part in both(name)[0].noise.sources.owners}
    assert {"gm", "gm_upper", "ib", "ib_upper", "ig", "en", "in", "rx", "resistance"} <= parts


@pytest.mark.parametrize("name", STABLE)
def test_densities_and_shares(name):
    """At the reference, below the band and above it."""
    of, again = both(name)
    low, high = of.lower_hz or of.reference_hz / 1e3, of.upper_hz or of.reference_hz * 1e3
    frequencies = [of.reference_hz, low / 7, high * 5]
    found = of.noise.over(frequencies)
    for k, f in enumerate(frequencies):
        squares = again.squares(mp.mpf(f))
        total = sum(squares.values())
        assert found.output[k] == pytest.approx(float(mp.sqrt(total)), rel=1e-9)
        assert found.input[k] == pytest.approx(float(mp.sqrt(total) / abs(again.h(mp.mpf(f)))), rel=1e-9)
        sums = dict.fromkeys(squares, 0.0)
        for owner, share in zip(of.noise.sources.owners, found.share[:, k], strict=True):
            sums[owner] += share
        for owner, square in squares.items():
            assert sums[owner] == pytest.approx(float(square / total), rel=1e-7, abs=1e-12), (f, owner)
    assert of.noise.density == pytest.approx(float(again.input_density(mp.mpf(of.reference_hz))), rel=1e-9)
    figure = again.figure_db(mp.mpf(of.reference_hz))
    assert (of.noise.figure_db is None) == (figure is None)
    if figure is not None:
        assert of.noise.figure_db == pytest.approx(float(figure), rel=1e-8, abs=1e-12)


def total(again, band, node=""):
    """Over a band; an open end is followed for six decades past every corner. The grid is made finer for a peak."""
    corners = again.range(again.time_constants())
    low, high = band.from_hz or 10.0 ** (corners[0] - 2), min(band.to_hz, 10.0 ** (corners[1] + 2))
    coarse = again.total(low, high, node, 1001)
    for count in (2001, 8001, 32001):
        fine = again.total(low, high, node, count)
        if abs(fine / coarse - 1.0) < 5e-5:
            return fine
        coarse = fine
    raise AssertionError("no grid was fine enough")


@pytest.mark.parametrize("name", [name for name in STABLE if ours(name).noise.output_rms is not None])
def test_totals(name):
    of, again = both(name)
    assert of.noise.output_rms == pytest.approx(total(again, of.noise.totals.band), rel=1e-4)


@pytest.mark.parametrize("name", ["wire-break-listener", "photodiode-front", "2"])
def test_noise_between_the_stages(name):
    """A node that flicker noise reaches without a coupling between is told from 0.1 Hz, the output from 0 Hz."""
    of, again = both(name)
    bands = []
    for at, node in zip(again.drawing.names, again.nodes, strict=True):
        rms, _, band = of.noise_at_nodes[at]
        assert rms == of.noise_at(at)
        if rms is not None:
            bands.append(band)
            assert rms == pytest.approx(total(again, band, node), rel=1e-4), at
    assert len(bands) >= 2
    if name == "wire-break-listener":
        assert of.noise.totals.band.from_hz == 0.0
        assert [band.from_hz for band in bands] == [0.0, 0.1, 0.1, 0.1]


def slope(doc, path, f):
    """d ln(input density)/d ln of a number of the file, everything solved again on either side."""
    low, _, below = moved(doc, path, 1 - STEP)
    high, _, above = moved(doc, path, 1 + STEP)
    a, b = (mp.log(Noise(one).input_density(f)) for one in (low, high))
    return float((b - a) / mp.log(mp.mpf(above) / mp.mpf(below)))


@pytest.mark.parametrize("name", ["leaf-probe", "photodiode-front", "rain-radar", "shellac-desk", "six-stage",
                                  "blocks", "mixed-cascode", "2", "9"])
def test_leverage_beside_files_solved_again(name):
    """Every number of the noise itself, and one other in six, moved by a millionth; in 50 digits."""
    of, again = both(name)
    doc, f = again.doc, mp.mpf(of.reference_hz)
    rows = [((stage, part), row) for (stage, part), row in of.leverage.parts.items()]
    rows = [(path_of(doc, *where), row["noise"]) for where, row in rows if path_of(doc, *where)]
    rows += [(("device", card, key), row["noise"]) for (card, key), (_, row) in of.leverage.cards.items()]
    rows += [(path_of(doc, stage, key), row["noise"]) for (stage, key), (_, row) in of.leverage.currents.items()]
    hissing = {"en", "in", "nf", "en_corner", "in_corner", "flicker_corner", "ig", "req_noise", "gamma_noise"}
    own = [row for row in rows if row[0][-1] in hissing]
    rest = [row for row in rows if row[0][-1] not in hissing and row[1] is not None and abs(row[1]) > 1e-7]
    for path, found in own[:6] + rest[len(name) % 6 :: 6][:6]:
        assert found == pytest.approx(slope(doc, path, f), rel=1e-6, abs=1e-8), path


def test_an_element_alone():
    """A device's own figure moves the network and not the noise of the device; a base resistance its own noise too."""
    of, again = both("wire-break-listener")
    f = mp.mpf(of.reference_hz)
    parts = {(part.stage, part.name): k for k, part in enumerate(of.solution.circuit.layout.parts)}
    for stage, part in (("Q1", "gm"), ("Q1", "rpi"), ("Q2", "cmu"), ("Q1", "rx")):
        key = (again.names.index(stage), part)
        kept = {one.owner: one.white for one in again.sources}
        ends = []
        for sign in (-1, 1):
            one = Noise(again.doc, {key: 1 + sign * mp.mpf(STEP)})
            squares = one.squares(f)
            now = {source.owner: source.white for source in one.sources}
            if part != "rx":  # the strength of no source follows it
                squares = {owner: x * kept[owner] / now[owner] for owner, x in squares.items()}
            ends.append(mp.log(sum(squares.values())) / 2 - mp.log(abs(one.h(f))))
        expected = float((ends[1] - ends[0]) / (2 * mp.mpf(STEP)))
        assert of.leverage.elements[parts[stage, part]]["noise"] == pytest.approx(expected, rel=1e-5, abs=1e-9)


def test_every_random_chain_has_a_ledger():
    for seed in SEEDS:
        try:
            ledger(parse(told(str(seed)), "c.toml"))
        except ProblemsFound as found:
            pytest.fail(f"{seed}: {found.problems[0].what}")
    assert np.isfinite(both("1")[0].noise.density)
