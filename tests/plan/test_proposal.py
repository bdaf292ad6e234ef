"""Proposals: what the file then says, in its own way of writing, and figures that are those of the changed file."""

from __future__ import annotations

import pytest

from polebook.book.ledger import ledger
from polebook.chain.read import parse
from polebook.plan.proposal import propose
from polebook.problem import ProblemsFound
from tests.cli.helpers import CHAINS, LISTENER

TEXT = LISTENER.read_text(encoding="utf-8")
RADAR = (CHAINS / "rain-radar.toml").read_text(encoding="utf-8")


def lines(text):
    return [line.rstrip() for line in text.splitlines()]


def test_only_the_named_lines_change_and_comments_stay():
    proposal = propose(TEXT, "w.toml", {"Q1.re": 36.0, "Q2.c_comp": 0.0, "Q1.rc": 2200.0, "Q1.couple": 6.8e-9})
    after = proposal.edit.apply(TEXT)
    changed = [(old, new) for old, new in zip(lines(TEXT), lines(after), strict=True) if old != new]
    assert changed == [
        ('couple      = "4n7"     # the first step against traffic rumble',
         'couple      = "6n8"     # the first step against traffic rumble'),
        ('re          = "33"      # sets the gain', 're          = "36"      # sets the gain'),
        ('c_comp      = "4p7"     # put in when the first board sang on the bench; never looked at again',
         'c_comp      = "0"     # put in when the first board sang on the bench; never looked at again'),
    ]
    assert [(key.path, key.now_text, key.text, key.moved) for key in proposal.keys] == [
        ("Q1.re", "33", "36", True), ("Q2.c_comp", "4p7", "0", True), ("Q1.rc", "2k2", "2k2", False),
        ("Q1.couple", "4n7", "6n8", True)]


def test_the_figures_are_those_of_the_file_as_it_would_be():
    proposal = propose(TEXT, "w.toml", {"Q2.c_comp": None, "Q1.c_peak": "12p"})
    after = ledger(parse(proposal.edit.apply(TEXT), "w.toml"))
    assert "c_comp" not in proposal.edit.apply(TEXT).replace("# c_comp", "")
    assert proposal.after.upper_hz == after.upper_hz
    document = proposal.document()
    assert document["overall"]["before"]["upper_edge_hz"] == pytest.approx(399_946, rel=1e-5)
    assert document["overall"]["after"]["upper_edge_hz"] == after.upper_hz
    upper = next(target for target in document["targets"] if target["name"] == "upper")
    assert (upper["before"]["met"], upper["after"]["met"]) == (False, True)
    assert document["met"] is True and proposal.met
    comp, peak = document["keys"]
    assert (comp["value"], comp["text"], comp["now"]) == (None, None, 4.7e-12)
    assert (peak["now"], peak["now_text"], peak["value"], peak["unit"]) == (None, None, 1.2e-11, "F")


def test_a_value_is_written_as_the_file_writes_the_key():
    keys = propose(RADAR, "r.toml", {"B1.gain": -7.0, "B2.poles.2": 1.2e9, "P1.arms.2.shunt_r": 1500.0}).keys
    assert [key.text for key in keys] == ["16.9 dB", "1.2G", "1k5"]
    assert keys[0].value == pytest.approx(-(10 ** (16.9 / 20)))
    untouched = propose(TEXT.replace('"2k2"', '"2200"', 1), "w.toml", {"Q1.rc": 2200.0})
    assert not untouched.edit and untouched.keys[0].text == "2200"


def test_cautions_that_come_and_go_are_told_and_figures_that_move_are_not():
    proposal = propose(TEXT, "w.toml", {"Q1.rc": 10_000.0})
    assert any("Q1 is saturated" in sentence for sentence in proposal.cautions)
    assert not proposal.mended
    saturated = proposal.edit.apply(TEXT)
    back = propose(saturated, "w.toml", {"Q1.rc": 2200.0})
    assert any("Q1 is saturated" in sentence for sentence in back.mended) and not back.cautions
    still = propose(saturated, "w.toml", {"Q1.rc": 9100.0})  # saturated all the same, by another voltage
    assert not still.cautions and not still.mended


def test_a_required_part_may_go_where_the_chain_is_one_without_it():
    proposal = propose(TEXT, "w.toml", {"Q1.rc": None})  # a current source in its place
    assert proposal.keys[0].value is None and proposal.keys[0].moved


@pytest.mark.parametrize(("values", "what"), [
    ({"Q1.rd": 1e3}, "no key"), ({"Q1.rc": -1e3}, "is negative"), ({"Q1.kind": 1.0}, "no number"),
])
def test_what_can_not_be_is_refused(values, what):
    with pytest.raises(ProblemsFound) as found:
        propose(TEXT, "w.toml", values)
    assert what in found.value.problems[0].what
