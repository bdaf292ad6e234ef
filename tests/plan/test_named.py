"""Figures by name: numbers with their units, as `polebook working` names them."""

import pytest

from polebook.book import build
from polebook.chain.read import load
from polebook.plan.named import Figure, named, values
from polebook.problem import ProblemsFound
from tests.cli.helpers import ALL, LISTENER, PHOTODIODE
from tests.helpers import pick

BOOK = build.ledger(load(str(LISTENER)))
UNITS = {
    "overall.upper_edge_hz": "Hz", "overall.gain": "", "overall.gain_db": "dB", "Q1.input_ohm": "Ω",
    "n1.pole_hz": "Hz", "n1.farad": "F", "n1.lost_upper_db": "dB", "Q1.cmu.k": "", "Q1.cmu.at_input": "F",
    "Q2.c_comp.owns_upper": "share", "Q2.c_comp.tau_s": "s", "Q2.c_comp.value": "F", "Q1.gm.value": "S",
    "account.upper.lost_db": "dB", "Q1.gain": "", "bias.Q1.current_a": "A", "Q1.rc.leverage.gain": "",
}  # fmt: skip


@pytest.mark.parametrize("name", UNITS)
def test_a_figure_has_its_value_and_unit(name):
    (figure,) = named(BOOK, [name])
    assert (figure.name, figure.unit) == (name, UNITS[name])
    assert figure.section in build.SECTIONS
    if "leverage" not in name and name not in ("Q1.cmu.k", "Q1.cmu.at_input"):
        assert values(BOOK, [figure]) == {name: pick(build.document(BOOK), name)}


def test_gains_of_a_current_source_are_in_ohms():
    of = build.ledger(load(str(PHOTODIODE)))
    assert [figure.unit for figure in named(of, ["overall.gain", "source.gain", "U1.gain", "overall.gain_db"])] == [
        "Ω", "Ω", "", "dBΩ"]  # fmt: skip


def test_a_unique_beginning_will_do_and_a_figure_comes_once():
    found = named(BOOK, ["Q1.input", " Q1.input_ohm ", "overall.upper"])
    assert [figure.name for figure in found] == ["Q1.input_ohm", "overall.upper_edge_hz"]


def test_a_figure_that_is_not_there_is_none():
    assert values(BOOK, [Figure("Q9.gain", "", "lines")]) == {"Q9.gain": None}
    assert values(BOOK, []) == {}


@pytest.mark.parametrize("chain", ALL, ids=lambda path: path.stem)
def test_every_section_that_is_asked_for_gives_its_figures(chain):
    of = build.ledger(load(str(chain)))
    document = build.document(of)
    names = [f"{part['stage']}.{part['part']}.owns_upper" for part in document["parts"]]
    assert list(values(of, named(of, names)).values()) == [part["owns_upper"] for part in document["parts"]]


@pytest.mark.parametrize(
    ("words", "says"),
    [("Q1.owns", "2 figures"), ("Q1.inptu_ohm", "did you mean Q1.input_ohm"), ("overal.gain", "overall.gain"),
     ("", "there is no figure"), ("overall.unstable", "no number")],
)  # fmt: skip
def test_a_wrong_name_lists_the_near_ones(words, says):
    with pytest.raises(ProblemsFound) as found:
        named(BOOK, [words])
    (problem,) = found.value.problems
    assert says in f"{problem.what}; {problem.why}; {problem.fix}"
