"""What moved of the d.c. plan and of the levels, against the documents of both ledgers."""

from __future__ import annotations

import pytest

from polebook.book.build import document, ledger
from polebook.book.compare import BIAS, LEVELS, Change, changes
from polebook.book.direct import direct
from polebook.book.ledger import Ledger
from polebook.chain.read import parse
from tests.helpers import DEMOS

TEXT = (DEMOS / "six-stage.toml").read_text(encoding="utf-8")
OVERALL = ("supply_current_a", "largest_source", "dynamic_range_db", "noise_margin_db", "full_power_hz")


def of(text: str) -> Ledger:
    return ledger(parse(text, "x.toml"))


@pytest.fixture(scope="module")
def before() -> Ledger:
    return of(TEXT)


@pytest.fixture(scope="module")
def after() -> Ledger:
    return of(TEXT.replace('re          = "330"', 're          = "470"').replace('positive = "15"', 'positive = "18"'))


def both(change: Change | None) -> tuple[float | None, float | None]:
    assert change is not None
    return change.before, change.after


def test_the_texts_differ(before: Ledger, after: Ledger) -> None:
    for path in ("supply.positive", "Q5.re"):
        assert before.chain.get(path) != after.chain.get(path)


def test_each_figure_of_the_bias_is_that_of_the_documents(before: Ledger, after: Ledger) -> None:
    moved = changes(before, after)
    for old, new in zip(document(before)["bias"], document(after)["bias"], strict=True):
        for figure in BIAS:
            assert both(moved.bias(new["stage"], figure)) == (old[figure], new[figure])
    assert moved.bias("nobody", "current_a") is None


def test_each_level_is_that_of_the_documents_by_the_line_ahead(before: Ledger, after: Ledger) -> None:
    moved = changes(before, after)
    lines = [line["name"] for line in document(after)["lines"]]
    for name, old, new in zip(lines, document(before)["levels"], document(after)["levels"], strict=True):
        for figure in LEVELS:
            assert both(moved.level(name, figure)) == (old[figure], new[figure]), (name, figure)


def test_figures_of_the_whole_and_of_the_rails(before: Ledger, after: Ledger) -> None:
    moved, old, new = changes(before, after), document(before), document(after)
    for figure in OVERALL:
        assert both(moved.overall(figure)) == (old["overall"][figure], new["overall"][figure])
    assert both(moved.rail("positive")) == (old["rails"][0]["current_a"], new["rails"][0]["current_a"])
    assert moved.rail("negative") is None, "there is none"
    assert both(moved.overall("supply_power_w")) == (direct(before)["power_w"], direct(after)["power_w"])


def test_power_is_that_of_every_rail_and_null_where_a_current_is(before: Ledger) -> None:
    assert before.rails.power == pytest.approx(15.0 * (before.supply_current or 0.0))
    diode = of((DEMOS / "photodiode-front.toml").read_text(encoding="utf-8"))
    assert diode.rails.power == pytest.approx(10.0 * 14e-3)
    text = (DEMOS / "photodiode-front.toml").read_text(encoding="utf-8")
    unknown = of("\n".join(line for line in text.split("\n") if not line.startswith("iq")))
    assert unknown.rails.power is None
    bare = of("\n".join(line for line in text.split("\n") if not line.startswith(("positive", "negative"))))
    assert bare.rails.power is None
