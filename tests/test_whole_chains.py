"""Whole chains, figure by figure, against the independent solution of tests/independent and python-control.

The independent ledger is drawn from the file's text and LEDGER's definitions alone, in 50-digit arithmetic.
"""

from __future__ import annotations

import tomllib
from functools import cache
from pathlib import Path
from typing import Any

import control
import numpy as np
import pytest

from tests.helpers import DEMOS, figures
from tests.independent.compare import differences, names_of
from tests.independent.oracle import Oracle, plain
from tests.independent.state_space import state_space

HERE = Path(__file__).parent
DEMO_CHAINS = sorted(DEMOS.glob("*.toml"))
CHAINS = DEMO_CHAINS + sorted((HERE / "independent" / "chains").glob("*.toml"))
PUBLISHED_CHAINS = sorted((HERE / "published" / "chains").glob("*.toml"))
# a capacitance across an ideal output: no state space
WITH_A_STATE_SPACE = [p for p in CHAINS if p.stem not in ("blocks", "noninverting")]


@cache
def independent(path: Path) -> tuple[Oracle, dict[str, Any]]:
    oracle = Oracle(tomllib.loads(path.read_text(encoding="utf-8")))
    return oracle, plain(oracle.document())


program = cache(figures)


def by_name(paths: list[Path]) -> Any:
    return pytest.mark.parametrize("path", [pytest.param(p, id=p.stem) for p in paths])


def test_there_are_chains_to_compare():
    assert len(DEMO_CHAINS) >= 3
    assert len(CHAINS) >= 15


@by_name(CHAINS + PUBLISHED_CHAINS)
def test_every_figure(path):
    theirs = dict(independent(path)[1])
    if path in PUBLISHED_CHAINS:
        del theirs["bias"]  # drawn for signals alone, without supplies
    wrong = [d for d in differences(program(path), theirs) if not d.error <= d.limit]
    assert not wrong, "\n".join(map(str, wrong))


@by_name(CHAINS)
def test_same_lines_nodes_and_reactive_parts(path):
    ours, theirs = program(path), independent(path)[1]
    for key in ("lines", "nodes"):
        assert names_of(ours, key) == names_of(theirs, key)
    reactive = [
        {(r["stage"], r["part"]) for r in d["parts"] if r.get("type") in ("C", "L", "tau")} for d in (ours, theirs)
    ]
    assert reactive[0] == reactive[1]


@by_name(CHAINS)
def test_sums_of_the_account(path):
    ours = program(path)
    for end in ("upper", "lower"):
        account = ours["account"][end]
        lost = [n[f"lost_{end}_db"] for n in ours["nodes"] if n[f"lost_{end}_db"] is not None]
        if account["lost_db"] is not None:
            assert sum(lost) == pytest.approx(account["lost_db"], abs=1e-9)
        owned = [p[f"owns_{end}"] for p in ours["parts"] if p[f"owns_{end}"] is not None]
        if ours["overall"][f"{end}_edge_hz"] is not None:
            assert sum(owned) == pytest.approx(1, abs=1e-6)
    product = np.prod([line["gain"] for line in ours["lines"]])
    assert product == pytest.approx(ours["overall"]["gain"], rel=1e-9)


def a_dozen(ledger: dict[str, Any]) -> np.ndarray:
    """Frequencies (Hz) from a decade below the lower edge, or its estimate, to a decade above the upper one."""
    overall = ledger["overall"]
    lower = overall["lower_edge_hz"] or overall["sctc_lower_hz"] or 1.0
    upper = overall["upper_edge_hz"] or overall["octc_upper_hz"]
    return np.geomspace(lower / 10, upper * 10, 12)


def response(path: Path, frequencies: np.ndarray) -> np.ndarray:
    """H of the program: |H| and phase from the lines' gains and phases at one frequency after another."""
    from polebook.book.build import at, ledger
    from polebook.chain.read import load

    asked = ledger(load(str(path)))
    out = []
    for f in frequencies:
        lines = at(asked, float(f))["lines"]
        level = sum(line["gain_db"] for line in lines)
        out.append(10 ** (level / 20) * np.exp(1j * np.radians(sum(line["phase_deg"] for line in lines))))
    return np.array(out)


@by_name(WITH_A_STATE_SPACE)
def test_response_beside_python_control(path):
    """A dozen frequencies from a decade below the lower edge to a decade above the upper one."""
    oracle, theirs = independent(path)
    frequencies = a_dozen(theirs)
    rate = 2 * np.pi * np.sqrt(frequencies[0] * frequencies[-1])
    system = control.ss(*state_space(oracle, rate))
    expected = control.frequency_response(system, 2 * np.pi * frequencies / rate).frdata[0, 0]
    np.testing.assert_allclose(response(path, frequencies), expected, rtol=1e-6)


@by_name(CHAINS)
def test_response_beside_the_nodal_equations(path):
    """A dozen frequencies again, from the independent nodal equations, much closer."""
    oracle, theirs = independent(path)
    frequencies = a_dozen(theirs)
    expected = [complex(oracle.h(float(f))) for f in frequencies]
    np.testing.assert_allclose(response(path, frequencies), expected, rtol=1e-9)
