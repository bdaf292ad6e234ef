"""Every figure of this ledger has its formula and source beside the code that computes it."""

from __future__ import annotations

from polebook.book.build import document, ledger
from polebook.book.workings.formulas import FORMULA
from polebook.devices import bjt, fet, opamp, triode
from tests.laws.chains import chain

FORMULAS = [*FORMULA.values(), *(formula for module in (bjt, fet, opamp, triode) for formula in module.FORMULAS)]
NAMES = {formula.figure for formula in FORMULAS}
NO_FORMULA = {"gain_unit", "clips_first", "name", "kind", "bridges", "gain_db", "noise_share", "k", "stage",
              "interstage", "owns_upper", "owns_lower"}


def test_every_figure_of_lines_nodes_and_the_whole_has_one() -> None:
    doc = document(ledger(chain("six-stage")))
    wanted = {f"overall.{key}" for key in doc["overall"]}
    wanted |= {f"lines.{key}" for key in doc["lines"][0]} | {f"nodes.{key}" for key in doc["nodes"][0]}
    missing = {name for name in wanted - NAMES if name.split(".")[1] not in NO_FORMULA}
    assert missing - {"nodes.allotted_lower_db"} == set()
    assert {"bridges.k", "bridges.at_input", "bridges.at_output", "parts.tau_s", "parts.owns_upper"} <= NAMES


def test_every_formula_says_what_it_is_and_where_it_stands() -> None:
    for formula in FORMULAS:
        assert formula.text and formula.source, formula.figure
