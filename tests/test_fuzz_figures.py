"""A sample of drawn chains; `python -m tests.fuzz_figures` judges as many as you like."""

from __future__ import annotations

import tomllib

from polebook.book.build import document
from polebook.book.ledger import ledger
from polebook.chain.read import examine, parse
from polebook.stages.registry import KINDS
from tests.fuzz_chains import draw, shape_of
from tests.fuzz_figures import Tally
from tests.fuzz_judge import Judge, Judged, Whole, judge, odd_numbers
from tests.helpers import of_whole

SEED, SAMPLE = 2026, of_whole(44, 24)


def test_drawn_chains_have_right_figures():
    tally, found = Tally(), []
    for number in range(SAMPLE):
        shape = shape_of(number)
        one = judge(draw(SEED, number, shape))
        tally.take(number, shape, one)
        found += [f"chain {number} of seed {SEED} ({shape}): {what}" for what in one.findings]
    assert found == []
    assert sum(count for state, count in tally.chains.items() if state.endswith("judged")) > 0.7 * SAMPLE
    for figure in ("gain", "time constants", "poles", "edges", "owned shares", "noise density", "noise total",
                   "step response", "pulse figures"):
        assert tally.counted[figure] > 0.25 * SAMPLE, figure


def test_every_kind_is_drawn_and_read():
    kinds = set()
    for number in range(60):
        chain, problems = examine(draw(1, number, shape_of(number)), "drawn.toml")
        assert chain is not None and all(p.severity != "fault" for p in problems), number
        kinds |= {stage.kind for stage in chain.stages}
    assert kinds == set(KINDS)


RC = """
format = 1
[source]
kind = "voltage"
resistance = {ohm}
[[stage]]
name = "B"
kind = "block"
gain = 10
rin = "4k"
cin = "1n"
rout = 50
poles = ["1M"]
lower_poles = [100]
[load]
resistance = 1000
"""


def findings(ohm):
    """Of the chain with another source resistance than the independent solver is told."""
    out, text = Judged(), RC.format(ohm=ohm)
    of = ledger(parse(text, "chain.toml"))
    Judge(out, of, document(of), Whole(tomllib.loads(RC.format(ohm=1000)))).all(deep=False)
    return {figure for figure, error in out.errors.items() if error > 1e-6}


def test_a_figure_that_is_off_is_found():
    assert findings(1000) == set()
    assert findings(1000.01) == {"gain"}  # the rest follows from it


def test_what_is_no_number_is_found():
    assert list(odd_numbers({"a": [1.0, float("inf")], "b": {"c": float("nan")}, "d": None})) == [
        "document.a.1 is inf", "document.b.c is nan"]
    assert list(odd_numbers({"verdict": "the edge is nan Hz"})) != []
