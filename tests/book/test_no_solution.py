"""Chains that have no ledger say why, where, and what would mend it."""

from __future__ import annotations

import pytest

from polebook.book.build import ledger
from polebook.chain.read import parse
from polebook.problem import Problem, ProblemsFound


def problem_of(text: str) -> Problem:
    chain = parse(text, "x.toml")
    with pytest.raises(ProblemsFound) as found:
        ledger(chain)
    assert len(found.value.problems) == 1
    return found.value.problems[0]


def test_a_node_that_nothing_holds_is_named() -> None:
    """A current-source load on an infinite ro, into a gate without a resistor."""
    problem = problem_of("""
format = 1
[supply]
positive = 10
[source]
kind = "voltage"
resistance = 50
[[stage]]
name = "M1"
kind = "common-source"
device = "N"
[[stage]]
name = "M2"
kind = "common-source"
device = "N"
rd = "1k"
[device.N]
family = "mosfet"
gm = "1m"
""")
    assert "nothing holds" in problem.what and "M1" in problem.what
    assert "resistor" in problem.fix
    assert problem.place is not None and problem.place.line == 8


def test_a_current_source_into_a_coupled_gate_holds_nothing() -> None:
    problem = problem_of("""
format = 1
[source]
kind = "current"
[[stage]]
name = "M1"
kind = "common-source"
device = "N"
couple = "1n"
rd = "1k"
[device.N]
family = "mosfet"
gm = "1m"
""")
    assert "nothing holds" in problem.what


def test_a_device_without_current_passes_nothing() -> None:
    problem = problem_of("""
format = 1
[supply]
positive = 10
[source]
kind = "voltage"
resistance = 50
[[stage]]
name = "M1"
kind = "common-source"
device = "N"
couple = "1n"
rg1 = "1M"
rg2 = "100k"
rd = "1k"
[device.N]
family = "mosfet"
k = "5m"
vgs_th = 2
""")
    assert "zero" in problem.what and "M1" in problem.what


def test_a_current_that_cannot_be_had_names_what_would_give_it() -> None:
    problem = problem_of("""
format = 1
[supply]
positive = 10
[source]
kind = "voltage"
resistance = 50
[[stage]]
name = "Q1"
kind = "common-emitter"
device = "N"
couple = "1u"
rc = "1k"
[device.N]
family = "bjt"
beta = 100
""")
    assert "gm of stage Q1" in problem.what
    assert "ic" in problem.fix


def test_a_gain_beyond_all_numbers_is_refused() -> None:
    block = 'kind = "block"\ngain = "120 dB"\ninverting = false\n'
    stages = "".join(f'[[stage]]\nname = "B{k}"\n{block}' for k in range(64))
    problem = problem_of(f'format = 1\n[source]\nkind = "voltage"\nresistance = 0\n{stages}')
    assert "beyond" in problem.what
