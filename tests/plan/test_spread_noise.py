"""Noise of built chains: every build against the ledger of that build alone, and the spread against leverage."""

from types import MappingProxyType

import numpy as np
import pytest

from polebook.book.ledger import Ledger
from polebook.plan.spread.alone import with_numbers
from polebook.plan.spread.costs import Sample
from polebook.plan.spread.draws import drawn
from polebook.plan.spread.figures import figures
from polebook.plan.spread.judge import judged
from polebook.plan.spread.nominal import nominal
from polebook.plan.spread.states import GOOD
from tests.laws.chains import chain
from tests.plan.spread_chains import LOW_PASS, parsed, run

SEED, BUILDS, RANGE = 5, 50, (-20.0, 60.0)
NAMES = ("leaf-probe", "shellac-desk", "photodiode-front", "six-stage")
NAME = "noise_density"
PLAIN = """format = 1
[source]
kind = "voltage"
resistance = 100
[[stage]]
name = "Q"
kind = "common-emitter"
device = "D"
rc = 1000
couple = 1
{current}
[device.D]
family = "bjt"
gm = "40m"
rpi = "2.5k"
cpi = "20p"
"""


def wanting(of, **numbers):
    """The chain with a target for the noise, its own figure."""
    density = Ledger(of).noise.density
    return with_numbers(of, {"target.noise": density, **numbers})


@pytest.mark.parametrize("reference", [None, 3333.0])
@pytest.mark.parametrize("name", NAMES)
def test_every_build_is_what_the_ledger_says_of_it(name, reference):
    """The reference frequency is the file's, else that of the chain as filed for all builds; temperature drawn too."""
    of = wanting(chain(name))
    of = with_numbers(of, {"target.reference": reference}) if reference else of
    stated = of.get("target.reference")
    result = run(of, BUILDS, seed=SEED, temperature=RANGE)
    split = drawn(of, RANGE)
    hz = Ledger(split.chain).reference_hz if stated is None else stated
    numbers = split.built(SEED, 0, BUILDS)
    target = result.figures[-1]
    assert target.name == NAME
    assert target.unit == ("V/√Hz" if of.source_kind == "voltage" else "A/√Hz")
    met = 0
    for k in range(BUILDS):
        one = {path: float(x[k]) for path, x in numbers.items()}
        alone = Ledger(with_numbers(split.chain, {**one, "target.reference": hz})).noise.density
        assert result.columns[NAME][k] == pytest.approx(alone, rel=1e-9, abs=0.0)
        met += alone <= of.numbers["target.noise"]
    assert result.yields().shares["noise"].share == met / BUILDS
    assert result.yields().unjudged == ()
    assert np.ptp(result.columns[NAME]) > 0.01 * result.nominal[NAME]


@pytest.mark.parametrize("name", NAMES)
def test_small_tolerances_move_it_as_leverage_says(name):
    of = wanting(chain(name))
    tenth = {path: x / 10 for path, x in of.numbers.items() if "tolerance" in path.split(".")}
    result = run(with_numbers(of, tenth), 20_000, seed=SEED, figures=(NAME,), workers=1)
    assert result.statistics(NAME).deviation == pytest.approx(result.linear[NAME], rel=0.03)


def test_temperature_alone_moves_it_as_leverage_says():
    """Resistors by their heat, devices by their bias and shot noise."""
    of = wanting(chain("six-stage"))
    still = {path: 0.0 for path in of.numbers if "tolerance" in path.split(".")}
    result = run(with_numbers(of, still), 4000, seed=SEED, figures=(NAME,), temperature=(22.0, 28.0))
    assert [draw.sort for draw in result.draws] == ["temperature"]
    assert result.statistics(NAME).deviation == pytest.approx(result.linear[NAME], rel=0.03)


def test_blocks_do_not_matter():
    of = wanting(chain("leaf-probe"))
    first, *others = (run(of, 90, seed=SEED, block=block, workers=1).columns[NAME] for block in (4096, 64, 37, 1))
    for other in others:
        assert other == pytest.approx(first, rel=1e-12, abs=0.0)


def test_builds_that_the_ledger_judges_have_it_at_the_same_frequency():
    """A notch in the band: most builds are the ledger's, and each has a band seed of its own."""
    of = wanting(chain("trap-notch"))
    result = run(of, 12, seed=SEED)
    assert result.alone
    split = drawn(of)
    hz = Ledger(split.chain).reference_hz
    numbers = split.built(SEED, 0, 12)
    for k in np.nonzero(result.state == GOOD)[0].tolist():
        one = {path: float(x[k]) for path, x in numbers.items()}
        alone = Ledger(with_numbers(split.chain, {**one, "target.reference": hz})).noise.density
        assert result.columns[NAME][k] == pytest.approx(alone, rel=1e-9, abs=0.0)


def test_a_reference_that_is_held_is_no_target():
    of = wanting(chain("leaf-probe"))
    held = nominal(drawn(of)).drawn.chain
    stated = "target.reference" in of.given
    assert held.numbers["target.reference"] > 0
    assert ("target.reference" in held.given) == stated


def test_it_is_computed_where_it_is_of_use():
    of = chain("six-stage")
    assert NAME not in {one.name for one in figures(of)}
    assert [one.name for one in figures(of, (NAME,))] == [NAME]
    assert NAME in {one.name for one in figures(wanting(of))}
    assert run(of, 20, figures=(NAME,)).columns[NAME].min() > 0.0


@pytest.mark.parametrize(("current", "judging"), [("", {"upper"}), ('ic = "1m"', {"upper", "noise"})])
def test_where_noise_cannot_be_told_no_build_is_judged_by_it(current, judging):
    """A card with plain figures and a current that is not known: no shot noise, so nothing of the noise."""
    of = parsed(PLAIN.format(current=current), target='noise = "5n"\nupper = "1k"')
    assert set(judged(of, figures(of))) == judging
    assert set(run(of, 20).yields().unjudged) == {"upper", "noise"} - judging


def test_its_worst_corner_is_high():
    of = wanting(chain("six-stage"))
    result = run(of, 200, seed=SEED, corners=True)
    (worst,) = [corner for corner in result.corners if corner.figure == NAME]
    assert worst.side == "high"
    assert worst.value > result.columns[NAME].max()


def test_a_steep_line_through_few_builds_warns_of_nothing():
    """Three builds with a figure, hundreds of nepers apart."""
    of = parsed(LOW_PASS, target='upper = "1k"')
    of = with_numbers(of, {"tolerance.resistor": 0.05})
    split = drawn(of)
    known = judged(of, figures(of))
    column = np.full(100, np.nan)
    column[:3] = [1e-100, 1.0, 1e100]
    sample = Sample(of, known, {"upper_edge_hz": column}, np.zeros(100, dtype=np.int8), SEED)
    with np.errstate(over="raise", invalid="raise"):
        assert len(sample.met_with(split.draws[0], MappingProxyType({}), (0.5, 0.0))) == 2
