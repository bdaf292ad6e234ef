"""The yield, which no ledger computes: not judged until it is handed in, then a target like any other."""

from __future__ import annotations

from polebook.book.asked import Built
from polebook.book.build import document, ledger
from polebook.book.ledger import Ledger
from polebook.book.verdict import cause, verdict
from polebook.book.working import working
from polebook.chain.read import parse
from tests.book.verdict_cases import FROM_600, LOAD, RAIL, TWO, target, text


def chain_with(built: Built | None = None) -> Ledger:
    of = ledger(parse(text(RAIL, FROM_600, TWO, LOAD, target(upper="200k", **{"yield": "99.5 %"})), "case.toml"))
    if built is not None:
        of.built = built
    return of


def test_nobody_built_any() -> None:
    of = chain_with()
    row = of.targets[-1]
    assert (row.name, row.got, row.met, row.why) == ("yield", None, None, "run polebook spread")
    assert "yield not judged yet" in verdict(of)


def test_it_is_judged_by_what_is_handed_in() -> None:
    met, missed = chain_with(Built(0.996, "")).targets[-1], chain_with(Built(0.9948, "")).targets[-1]
    assert (met.got, met.met, met.margin) == (0.996, True, (0.996 - 0.995) / 0.995)
    assert (missed.got, missed.met) == (0.9948, False)


def test_a_yield_that_is_missed_leads_the_verdict() -> None:
    of = chain_with(Built(0.9948, "", "99.6 % of the built chains meet upper"))
    assert verdict(of).startswith("Yield 99.48 % for 99.5 %: 99.6 % of the built chains meet upper.")
    assert cause(of, of.targets[-1]) == "99.6 % of the built chains meet upper"
    assert document(of, ("targets",))["targets"][-1]["why"] == "99.6 % of the built chains meet upper"


def test_its_working_names_the_spread() -> None:
    told = working(chain_with(Built(0.9948, "")), "target.yield.got")
    assert told.value == 0.9948 and [number.origin for number in told.numbers] == ["the spread"]
