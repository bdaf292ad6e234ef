"""Workings of noise figures on chains whose cards have every kind of noise; by hand for two of them."""

from functools import cache
from math import log10, sqrt

import pytest

from polebook.book.build import ledger
from polebook.book.working import working, workings
from polebook.chain.read import parse
from polebook.report.look import Look, cells
from polebook.report.working import working as page
from tests.independent.noisy import noisy
from tests.laws.chains import BY_NAME
from tests.working.arithmetic import Rough, read
from tests.working.test_every_figure import NEAR
from tests.working.test_printed import check

NAMES = ("leaf-probe", "photodiode-front", "rain-radar", "shellac-desk", "blocks", "mixed-cascode", "noninverting")
BOLTZMANN, CHARGE = 1.380649e-23, 1.602176634e-19


@cache
def known(name):
    return ledger(parse(noisy(BY_NAME[name].read_text(encoding="utf-8")), f"{name}.toml"))


@cache
def of_noise(name):
    """The workings of all figures of noise."""
    return {one.figure: one for one in workings(known(name))
            if "noise" in one.figure or one.figure.rpartition(".")[0].endswith((".en", ".in", ".ib", ".ig"))}


@pytest.mark.parametrize("name", NAMES)
def test_the_text_of_every_working_comes_to_its_figure(name):
    assert len(of_noise(name)) > 30
    for figure, one in of_noise(name).items():
        if one.value is None:
            assert len(one.why) > 15 and not one.numbers, figure
            continue
        symbols = {number.symbol: Rough(number.value, abs(number.value) * NEAR) for number in one.numbers}
        assert len(symbols) == len(one.numbers), figure
        results = 0
        for step in one.steps:
            found = read(step.text, symbols)
            room = max(found.off, NEAR * abs(found.value))
            assert abs(found.value - step.value) <= room, (figure, step.symbol)
            symbols[step.symbol] = Rough(step.value, room)
            results += step.result
            if step.result:
                assert abs(step.value - one.value) <= max(100 * room, 1e-9 * abs(one.value)), (figure, step.text)
        assert results == 1, figure


@pytest.mark.parametrize("name", NAMES)
def test_what_is_printed_comes_to_what_is_printed(name):
    for one in list(of_noise(name).values())[NAMES.index(name) % 4 :: 4]:
        if one.value is not None:
            text = page(one.document(), "a chain", "chain.toml", Look())
            assert max(map(cells, text.split("\n")[2:])) <= 80, one.figure
            check(one, text)


def test_every_kind_of_source_has_its_own_formula():
    told = {one.formula for name in NAMES for one in of_noise(name).values() if one.figure.endswith(".noise_share")}
    for part in ("4·k_B·T_K/R", "2·q·ic", "2·q·ib·", "2·q·ig", "gamma_noise·gm", "req_noise·gm^2", "en^2·", "in^2·"):
        assert any(part in formula for formula in told), part


def test_the_share_of_a_resistor_by_hand():
    """10 kΩ into a divider with 30 kΩ and an open load: each makes 4kT of its own, by the square of the other."""
    text = """format = 1
[source]
kind = "voltage"
resistance = "10k"
[[stage]]
name = "L"
kind = "ladder"
arms = [{ shunt_r = "30k" }, { shunt_c = "1p" }]
[target]
reference = 1
"""
    of = ledger(parse(text, "c.toml"))
    assert working(of, "source.resistance.noise_share").value == pytest.approx(0.75, rel=1e-9)
    assert working(of, "L.arm1.noise_share").value == pytest.approx(0.25, rel=1e-9)
    density = working(of, "overall.noise_density").value
    assert density == pytest.approx(sqrt(4 * BOLTZMANN * 298.15 * 10e3 / 0.75), rel=1e-9)
    figure = working(of, "overall.noise_figure_db")
    assert figure.value == pytest.approx(10 * log10(1 + 298.15 / 290 / 3), rel=1e-9)
    assert [step.text for step in figure.steps if step.result] == ["10·log10(1 + w/(4·k_B·T_0·R_s))"]


@pytest.mark.parametrize(
    ("name", "figure", "says"),
    [
        ("blocks", "overall.noise_to_hz", "would grow without bound"),
        ("photodiode-front", "overall.noise_from_hz", "would grow without bound"),
        ("rain-radar", "overall.noise_from_hz", "has a bound"),
    ],
)
def test_what_the_limits_say(name, figure, says):
    assert says in of_noise(name)[figure].note
