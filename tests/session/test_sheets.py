"""Sheets: every key of a line or table with what stands for it."""

from __future__ import annotations

import pytest

from polebook.problem import ProblemsFound
from polebook.session import state
from polebook.session.state import KeyRow, Session
from tests.chain import good
from tests.helpers import DEMOS


@pytest.fixture
def opened() -> Session:
    return state.open_file(str(DEMOS / "wire-break-listener.toml"))


def rows(session: Session, sheet: str) -> dict[str, KeyRow]:
    return {row.key: row for row in state.keys_of(session, sheet)}


def test_the_sheets_stand_in_the_order_of_the_signal(opened: Session) -> None:
    assert state.sheets_of(opened) == ["source", "Q1", "Q2", "Q3", "load", "target", "supply", "tolerance", "preferred",
                                       "device.VF", "file"]
    assert "Q1" not in state.sheets_of(state.new_session("x.toml", "format = ["))


def test_a_row_tells_what_the_file_has_and_what_counts_otherwise(opened: Session) -> None:
    q1 = rows(opened, "Q1")
    assert (q1["rc"].text, q1["rc"].path, q1["rc"].unit) == ("2k2", "Q1.rc", "Ω") and "collector" in q1["rc"].about
    assert q1["rf"].text == "" and q1["c_comp"].role == "high" and q1["couple"].role == "low"
    assert q1["name"].required and not q1["rc"].required
    assert q1["device"].choices == ("VF",) and "common-base" in q1["kind"].choices
    assert q1["left_out"].choices == ("true", "false") and q1["output_to"].choices[0] == "positive"
    assert q1["tolerance.rc"].path == "Q1.tolerance.rc" and "tolerance.rf" not in q1 and "tolerance" not in q1
    assert "rd" not in q1 and "gain" not in q1
    assert rows(opened, "tolerance")["resistor"].default == "1 %"
    assert rows(opened, "preferred")["capacitor"].choices[:2] == ("E3", "E6")
    assert rows(opened, "device.VF")["ft"].text == "600M" and "idss" not in rows(opened, "device.VF")
    assert rows(opened, "supply")["positive"].text == "12"
    assert rows(opened, "file")["title"].text == "Wire-break listener"


def test_it_tells_what_the_figures_lean_on(opened: Session) -> None:
    q2 = rows(opened, "Q2")
    assert q2["c_comp"].leans and q2["rc"].leans and q2["rf"].leans is None and q2["note"].leans is None
    assert rows(opened, "device.VF")["beta"].leans and rows(opened, "device.VF")["p_max"].leans is False
    assert rows(opened, "source")["resistance"].leans
    faulty = state.set_text(opened, opened.history.text.replace('"2k2"', '"2k2 V"'), 0.0)
    assert rows(faulty, "Q2")["c_comp"].leans is None and rows(faulty, "Q2")["rc"].text == "2k2 V"


def test_every_row_can_be_typed_again() -> None:
    """Every path of every sheet leads somewhere, and the text that a row shows is taken as it stands."""
    session = state.new_session("x.toml", good.everything())
    for sheet in state.sheets_of(session):
        found = state.keys_of(session, sheet)
        assert found, sheet
        assert len({row.path for row in found}) == len(found)
        for row in found:
            assert state.set_value(session, row.path, row.text, 0.0) is session or not row.text, row.path
            assert row.about and (row.key in row.path)


def test_a_ladder_shows_its_arms_and_one_more() -> None:
    session = state.new_session("x.toml", good.small(stage=good.LADDER + 'arms = [{ series_r = "50" }]\n', card=""))
    keys = [row.key for row in state.keys_of(session, "L1")]
    assert "arms.1.series_c" in keys and "arms.1.shunt_c" not in keys and "arms.2.shunt_c" in keys
    assert "arms.3.shunt_c" not in keys and "arms" not in keys
    assert rows(session, "L1")["arms.1.series_r"].text == "50"


def test_stages_without_a_name_of_their_own_are_reached_by_position() -> None:
    twin = good.STAGE + good.STAGE + good.STAGE.replace('name = "Q1"\n', "")
    session = state.new_session("x.toml", good.small(stage=twin))
    assert state.sheets_of(session)[1:4] == ["#1", "#2", "#3"]
    assert rows(session, "#2")["rc"].path == "#2.rc"
    after = state.set_value(session, "#2.name", "Q2", 0.0)
    assert state.sheets_of(after)[1:4] == ["Q1", "Q2", "#3"]
    named = state.set_value(after, "#3.name", "Q3", 1.0)
    assert not named.problems and named.ledger is not None
    assert state.sheets_of(state.remove_stage(session, "#2", 0.0))[1:3] == ["Q1", "#2"]


def test_a_key_that_no_kind_takes_is_shown_and_can_be_taken_out(opened: Session) -> None:
    text = opened.history.text.replace('re          = "33"', 're = "33"\nwrong = "1k"')
    session = state.new_session("x.toml", text)
    assert rows(session, "Q1")["wrong"].text == "1k"
    assert not state.set_value(session, "Q1.wrong", "", 0.0).problems


def test_there_is_nothing_to_show_of_what_is_not_there(opened: Session) -> None:
    for sheet in ("Q9", "device.X", "", "bench", "device"):
        assert state.keys_of(opened, sheet) == []
    with pytest.raises(ProblemsFound):
        state.set_value(opened, "Q9.rc", "1k", 0.0)
