"""The figures that a verdict leans on are those that it names."""

from functools import cache

import pytest

from polebook.book.build import document, ledger
from polebook.chain import read
from polebook.record.leaning import leaning
from polebook.record.review import MOST_WORKINGS, workings
from tests.book.verdict_cases import CASES

WANTED = {
    "upper missed, a Miller capacitance fitted":
        ["overall.upper_edge_hz", "Q2.c_comp.owns_upper", "Q2.c_comp.at_input", "Q2.c_comp.k", "n1.ohm",
         "Q2.c_comp.leverage.upper_edge"],
    "upper missed, a Miller capacitance of the device":
        ["overall.upper_edge_hz", "Q2.cmu.owns_upper", "Q2.cmu.at_input", "Q2.cmu.k", "n1.ohm",
         "Q2.rc.leverage.upper_edge"],
    "upper missed, one node that several parts load":
        ["overall.upper_edge_hz", "Q2.cmu.owns_upper", "Q2.cmu.at_input", "Q2.cmu.k", "n1.lost_upper_db", "n1.ohm"],
    "lower missed, corners add up":
        ["overall.lower_edge_hz", "Q1.ce.owns_lower", "Q2.ce.owns_lower", "Q3.ce.owns_lower", "Q1.ce.tau_s",
         "Q1.ce.leverage.lower_edge"],
    "gain over": ["overall.gain", "Q2.rc.leverage.gain"],
    "the swing is missed": ["n2.clip_v", "load.clip_v"],
    "the supply current is missed": ["overall.supply_current_a"],
    "no clean midband, the corners cross": ["overall.gain", "overall.sctc_lower_hz", "overall.octc_upper_hz"],
    "unstable, an op-amp that drives a capacitance": ["overall.unstable", "poles.1.re", "poles.1.hz"],
    "no targets": ["overall.upper_edge_hz", "Q2.cmu.owns_upper", "Q2.cmu.at_input", "Q2.cmu.k", "n1.ohm",
                   "overall.lower_edge_hz", "Q1.ce.owns_lower", "Q2.ce.owns_lower"],
}


@cache
def solved(name):
    return ledger(read.parse(CASES[name], "case.toml"))


@pytest.mark.parametrize("name", WANTED)
def test_what_the_verdict_names_is_worked_out(name):
    of = solved(name)
    assert [one["figure"] for one in workings(of, document(of))] == WANTED[name]


def test_a_verdict_that_names_nothing_leans_on_the_gain():
    told = {"verdict": "", "overall": {"unstable": False}, "poles": [], "parts": [], "nodes": []}
    assert leaning(told) == ["overall.gain"]


def test_names_are_whole_names():
    parts = [{"stage": "Q1", "part": "ce"}, {"stage": "Q1", "part": "c"}, {"stage": "Q11", "part": "ce"}]
    told = {"verdict": "Lower edge 1 Hz for 2 Hz: Q11.ce owns 90 %.", "overall": {"unstable": False}, "poles": [],
            "parts": parts, "nodes": []}
    assert leaning(told) == ["overall.lower_edge_hz", "Q11.ce.owns_lower"]


def test_no_more_than_a_few():
    assert all(len(value) <= MOST_WORKINGS for value in WANTED.values())
