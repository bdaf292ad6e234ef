"""What a range means: its spacing, its ends, and what is refused."""

from itertools import pairwise

import pytest

from polebook import series
from polebook.plan.ranges import spread, swept
from polebook.problem import ProblemsFound
from tests.cli.helpers import LISTENER, ROOT

TEXT = LISTENER.read_text(encoding="utf-8")
BLOCKS = (ROOT / "tests/independent/chains/blocks.toml").read_text(encoding="utf-8")


def of(path, limits, points=5, row="", text=TEXT):
    return swept(text, "x.toml", path, limits, points, row)


def test_equal_ratios_between_exact_ends():
    values = of("Q1.rc", "1k:16k").values
    assert values[0] == 1e3
    assert values[-1] == 16e3
    assert [b / a for a, b in pairwise(values)] == pytest.approx([2.0] * 4)
    assert of("Q1.rc", "16k:1k").values == pytest.approx(values[::-1])


@pytest.mark.parametrize(
    ("path", "limits", "values"),
    [
        ("Q2.c_comp", "0:8p", (0.0, 2e-12, 4e-12, 6e-12, 8e-12)),
        ("supply.positive", "8:16", (8.0, 10.0, 12.0, 14.0, 16.0)),
        ("supply.negative", "-8:-4", (-8.0, -7.0, -6.0, -5.0, -4.0)),
        ("supply.temperature", "-20:60", (-20.0, 0.0, 20.0, 40.0, 60.0)),
        ("tolerance.resistor", "1 %:5 %", (0.01, 0.02, 0.03, 0.04, 0.05)),
        ("target.peaking", "0.5 dB:2.5 dB", (0.5, 1.0, 1.5, 2.0, 2.5)),
    ],
)
def test_equal_steps_where_zero_voltage_temperature_share_or_decibel_is(path, limits, values):
    found = of(path, limits)
    assert found.values == pytest.approx(values)
    assert found.spacing == "linear"


def test_a_series_gives_the_values_that_one_can_buy():
    found = of("Q1.rc", "1k:10k", row="E12")
    assert found.spacing == "E12"
    assert len(found.values) == 13
    assert all(series.holds(value, "E12") for value in found.values)
    assert of("Q1.rc", "10k:1k", row="E12").values == found.values[::-1]


@pytest.mark.parametrize("points", [1, 2, 3, 100])
def test_as_many_points_as_asked(points):
    for geometric in (True, False):
        values = spread(2.0, 5.0, points, geometric)
        assert len(values) == points
        assert values[0] == 2.0
        assert values[-1] in (2.0, 5.0)
    assert spread(3.0, 3.0, points, True) == (3.0,)
    assert spread(-1.0, -100.0, 3, True) == pytest.approx((-1.0, -10.0, -100.0))


def test_what_the_file_gives_now():
    assert of("Q1.rc", "1k:2k").now == 2200.0
    assert of("Q1.c_comp", "1p:2p").now is None
    assert of("supply.temperature", "0:50").now == 25.0
    assert of("#2.c_comp", "1p:2p").path == "Q2.c_comp"
    assert of("Q1.c_comp", "1p:2p").digest == of("Q1.rc", "1k:2k").digest


def test_a_blocks_gain_in_db_keeps_its_sign():
    text = BLOCKS.replace('name = "B1"', 'name = "B1"', 1)
    chain = swept(text, "x.toml", "source.resistance", "1:2", 2).chain
    inverting = [stage.name for stage in chain.stages if stage.inverting]
    assert inverting, "the file has a block with inverting = true"
    found = of(f"{inverting[0]}.gain", "20 dB:40 dB", 3, text=text)
    assert found.values == pytest.approx((-10.0, -10.0 * 10**0.5, -100.0))
    assert found.spacing == "geometric"


@pytest.mark.parametrize(
    ("path", "limits", "row", "says"),
    [
        ("Q1.rc", "10k", "", "is not a range"),
        ("Q1.rc", "1k:2k:3k", "", "is not a range"),
        ("Q1.rc", ":", "", "is not a range"),
        ("Q1.rc", "1k:10n F", "", "not a resistance"),
        ("Q1.rc", "0:10k", "", "rc of Q1 is zero"),
        ("Q1.rc", "-1k:10k", "", "negative"),
        ("Q1.ce", "0:1u", "", "ce of Q1 is zero"),
        ("supply.temperature", "-300:25", "", "-300 °C"),
        ("supply.negative", "-5:5", "", "above zero"),
        ("Q1.tolerance.rc", "1:5", "", "100 %"),
        ("Q1.cf", "1p:2p", "", "no key"),
        ("Q9.rc", "1k:2k", "", "nothing is named"),
        ("Q1.kind", "1:2", "", "no number"),
        ("Q1.tolerance", "1:2", "", "several values"),
        ("Q1.r_comp", "1k:2k", "", "without c_comp"),
        ("Q1.rc", "1.01k:1.05k", "E12", "no value of E12"),
        ("Q2.c_comp", "0:1p", "E12", "at or below zero"),
    ],
)
def test_what_is_refused_says_why(path, limits, row, says):
    with pytest.raises(ProblemsFound) as found:
        of(path, limits, row=row)
    (problem,) = found.value.problems
    assert says in f"{problem.what} {problem.why}"
    assert problem.fix


def test_every_fault_of_the_file_is_told():
    with pytest.raises(ProblemsFound) as found:
        of("Q1.rc", "1k:2k", text=TEXT.replace('"33"', '"33 F"').replace("stray ", "strai "))
    assert len(found.value.problems) == 3
