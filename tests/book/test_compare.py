"""What moved from one ledger to another: each figure's change in the figure's own way."""

from __future__ import annotations

from math import log10

import pytest

from polebook.book.build import document, ledger
from polebook.book.compare import LINES, NODES, OVERALL, Change, Way, changes
from polebook.book.ledger import Ledger
from polebook.chain.read import parse
from tests.helpers import DEMOS

TEXT = (DEMOS / "wire-break-listener.toml").read_text(encoding="utf-8")


def of(text: str) -> Ledger:
    return ledger(parse(text, "x.toml"))


@pytest.fixture(scope="module")
def before() -> Ledger:
    return of(TEXT)


@pytest.fixture(scope="module")
def after() -> Ledger:
    return of(TEXT.replace('c_comp      = "4p7"', 'c_comp      = "1p"').replace('re          = "33"', 're = "47"'))


def delta(change: Change | None) -> float:
    assert change is not None and change.delta is not None
    return change.delta


def test_a_ledger_has_not_moved_against_itself(before: Ledger) -> None:
    told = list(changes(before, of(TEXT)).all())
    assert len(told) > 60
    for group, name, figure, change in told:
        assert not change.moved, (group, name, figure)
        assert change.delta in (None, 0.0, 1.0)


def test_decibels_are_subtracted_and_edges_divided(before: Ledger, after: Ledger) -> None:
    old, new = document(before), document(after)
    moved = changes(before, after)
    ratio = new["overall"]["gain"] / old["overall"]["gain"]
    assert delta(moved.overall("gain_db")) == pytest.approx(20 * log10(ratio))
    assert delta(moved.overall("upper_edge_hz")) == pytest.approx(
        new["overall"]["upper_edge_hz"] / old["overall"]["upper_edge_hz"])
    assert delta(moved.overall("left_upper_db")) == pytest.approx(
        new["account"]["upper"]["left_db"] - old["account"]["upper"]["left_db"])
    for number, name in enumerate(("source", "Q1", "Q2", "Q3", "load")):
        for figure, scale in (("gain_db", 1.0), ("k", 1.0), ("owns_upper", 100.0), ("owns_lower", 100.0)):
            one, two = old["lines"][number][figure], new["lines"][number][figure]
            change = moved.line(name, figure)
            assert change is not None and (change.before, change.after) == (one, two)
            if one is not None:
                assert delta(change) == pytest.approx((two - one) * scale, abs=1e-12)
    for row_old, row_new in zip(old["nodes"], new["nodes"], strict=True):
        name = row_old["stage"] if row_old["interstage"] else row_old["name"]
        for figure in ("ohm", "farad", "pole_hz"):
            change = moved.node(name, figure)
            assert change is not None and (change.before, change.after) == (row_old[figure], row_new[figure])
            if row_old[figure]:
                assert delta(change) == pytest.approx(row_new[figure] / row_old[figure])
        lost, left = moved.node(name, "lost_upper_db"), moved.node(name, "left_upper_db")
        assert delta(lost) == pytest.approx(row_new["lost_upper_db"] - row_old["lost_upper_db"], abs=1e-12)
        allotted = row_new["allotted_upper_db"] - row_old["allotted_upper_db"]
        assert delta(left) == pytest.approx(allotted - delta(lost), abs=1e-12)


def test_what_moved_is_told_from_what_stayed(before: Ledger, after: Ledger) -> None:
    moved = changes(before, after)
    shown = {(group, name, figure): change.moved for group, name, figure, change in moved.all()}
    assert shown["overall", "", "upper_edge_hz"] and shown["line", "Q1", "gain_db"]
    assert not shown["node", "source", "farad"] or before.sites[0].farad != after.sites[0].farad
    assert shown["line", "Q2", "k"] is (before.lines[2].k != after.lines[2].k)


def test_stages_are_matched_by_name_and_nodes_by_the_line_into_them(before: Ledger) -> None:
    pad = '[[stage]]\nname = "PAD"\nkind = "ladder"\narms = [{ series_r = "100" }]\n\n'
    longer = of(TEXT.replace('[[stage]]\nname        = "Q2"', pad + '[[stage]]\nname        = "Q2"'))
    moved = changes(before, longer)
    assert (moved.added, moved.removed) == (("PAD",), ())
    assert moved.line("PAD", "gain_db") is None and moved.node("PAD", "ohm") is None
    change = moved.node("Q2", "pole_hz")
    node = {site.stage: site for site in longer.sites if site.interstage}["Q2"]
    assert node.name == "n3" and change is not None and change.after == node.pole_hz
    back = changes(longer, before)
    assert (back.added, back.removed) == ((), ("PAD",)) and back.line("PAD", "k") is None


def test_a_left_out_stage_owns_nothing(before: Ledger) -> None:
    out = of(TEXT.replace('name        = "Q3"', 'name = "Q3"\nleft_out = true'))
    share = changes(before, out).line("Q3", "owns_upper")
    assert share is not None and share.before is not None and share.after is None
    assert share.delta is None and share.moved


def test_figures_are_computed_when_they_are_asked_for() -> None:
    old, new = of(TEXT), of(TEXT.replace("2k2", "2k4"))
    moved = changes(old, new)
    assert not {"lines", "sites", "targets", "upper_account"} & vars(new).keys()
    assert delta(moved.overall("gain_db")) != 0
    assert not {"lines", "sites", "upper_account", "owns_upper"} & vars(new).keys()
    assert moved.overall("gain_db") is moved.overall("gain_db")


def test_there_is_no_figure_of_another_name(before: Ledger) -> None:
    moved = changes(before, before)
    for ask in (moved.overall, lambda figure: moved.line("Q1", figure), lambda figure: moved.node("Q1", figure)):
        with pytest.raises(KeyError):
            ask("beauty")
    assert set(OVERALL) and set(LINES) and set(NODES)


@pytest.mark.parametrize(("one", "two", "way", "told", "moves"), [
    (1.0, 2.0, "difference", 1.0, True), (4.0, 2.0, "ratio", 0.5, True), (0.25, 0.5, "points", 25.0, True),
    (0.0, 2.0, "ratio", None, True), (None, 2.0, "difference", None, True), (2.0, None, "ratio", None, True),
    (None, None, "ratio", None, False), (1e-12, 1.1e-12, "ratio", 1.1, True),
    (1e-12, 1.1e-12, "difference", 1e-13, False), (1e6, 1e6 * (1 + 1e-12), "ratio", 1.0, False),
    (float("inf"), 1.0, "ratio", None, True), (float("inf"), float("inf"), "ratio", None, False),
])
def test_a_change_in_each_way(one: float | None, two: float | None, way: Way, told: float | None, moves: bool) -> None:
    change = Change(one, two, way)
    assert change.delta == (told if told is None else pytest.approx(told)) and change.moved is moves
