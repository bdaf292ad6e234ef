"""Sums that hold exactly: lost dB over the nodes, owned shares over the parts, gains over the lines."""

from __future__ import annotations

from math import prod

import pytest

from polebook.book.build import document, ledger
from tests.laws.chains import BY_NAME, WITH_BAND, chain


@pytest.mark.parametrize("name", WITH_BAND)
def test_lost_db_sum_to_the_loss_of_the_chain(name: str) -> None:
    doc = document(ledger(chain(name)))
    for end in ("upper", "lower"):
        lost = [n[f"lost_{end}_db"] for n in doc["nodes"] if n[f"lost_{end}_db"] is not None]
        if doc["account"][end]["edge_hz"] is not None:
            assert sum(lost) == pytest.approx(doc["account"][end]["lost_db"], abs=1e-9)


@pytest.mark.parametrize("name", WITH_BAND)
def test_allotted_db_sum_to_the_budget(name: str) -> None:
    doc = document(ledger(chain(name)))
    for end in ("upper", "lower"):
        allotted = [n[f"allotted_{end}_db"] for n in doc["nodes"] if n[f"allotted_{end}_db"] is not None]
        if doc["account"][end]["edge_hz"] is not None:
            assert sum(allotted) == pytest.approx(3.010299956639812, abs=1e-12)


@pytest.mark.parametrize("name", WITH_BAND)
def test_owned_shares_sum_to_one_over_parts_and_over_lines(name: str) -> None:
    doc = document(ledger(chain(name)))
    for key, edge in (("owns_upper", "upper_edge_hz"), ("owns_lower", "lower_edge_hz")):
        if doc["overall"][edge] is not None:
            assert sum(p[key] for p in doc["parts"] if p[key] is not None) == pytest.approx(1.0, abs=1e-9)
            assert sum(n[key] for n in doc["lines"] if n[key] is not None) == pytest.approx(1.0, abs=1e-9)


@pytest.mark.parametrize("name", BY_NAME)
def test_line_gains_multiply_to_the_gain(name: str) -> None:
    doc = document(ledger(chain(name)))
    assert prod(n["gain"] for n in doc["lines"]) == pytest.approx(doc["overall"]["gain"], rel=1e-12)


@pytest.mark.parametrize("name", WITH_BAND)
def test_the_edge_itself_loses_three_db(name: str) -> None:
    book = ledger(chain(name))
    from polebook.book.account import line_losses

    for edge in (book.lower_hz, book.upper_hz):
        if edge is not None:
            assert sum(line_losses(book.solution, edge)) == pytest.approx(3.010299956639812, abs=1e-9)
