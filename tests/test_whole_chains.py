"""Whole chains, figure by figure, against the independent solution of tests/independent and python-control.

The independent ledger is drawn from the file's text and LEDGER's definitions alone, in 50-digit arithmetic.
"""

from __future__ import annotations

import tomllib
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import scipy.linalg

from tests.helpers import DEMOS, WHOLE, figures
from tests.independent.compare import differences, names_of, root_differences
from tests.independent.leverage import Leverage
from tests.independent.oracle import Oracle, plain
from tests.independent.state_space import state_space

HERE = Path(__file__).parent
DEMO_CHAINS = sorted(DEMOS.glob("*.toml"))
CHAINS = DEMO_CHAINS + sorted((HERE / "independent" / "chains").glob("*.toml"))
PUBLISHED_CHAINS = sorted((HERE / "published" / "chains").glob("*.toml"))
# 1 TΩ stands for a current source: with its bypass a zero of nanohertz, 13 decades below the stage's conductances
CURRENT_SOURCES = ("LF-2", "LF-3")
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
    theirs = {key: value for key, value in independent(path)[1].items() if key not in ("poles", "zeros")}
    if path in PUBLISHED_CHAINS:
        del theirs["bias"]  # drawn for signals alone, without supplies
    wrong = [d for d in differences(program(path), theirs) if not d.error <= d.limit]
    assert not wrong, "\n".join(map(str, wrong))


@by_name(CHAINS + PUBLISHED_CHAINS)
@pytest.mark.parametrize("kind", ["poles", "zeros"])
def test_every_pole_and_zero(path, kind):
    oracle = independent(path)[0]
    names = [name for name, _ in oracle.drawing.lines]
    found = root_differences(program(path)[kind], getattr(oracle, kind), names, kind)
    limit = 1e-6 if kind == "zeros" and path.stem in CURRENT_SOURCES else 0.0
    wrong = [d for d in found if not d.error <= max(d.limit, limit)]
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
    import control  # deferred: only what runs here pays its second of imports, not each process that collects

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


@by_name(WITH_A_STATE_SPACE)
def test_poles_beside_python_control(path):
    """As many as the state space has states, and each in its place where double precision can tell: where the condition
    of its eigenvalue leaves eight digits."""
    import control  # deferred as above

    oracle, theirs = independent(path)
    frequencies = a_dozen(theirs)
    rate = 2 * np.pi * np.sqrt(frequencies[0] * frequencies[-1])
    A, *rest = state_space(oracle, rate)
    expected = control.poles(control.ss(A, *rest))
    ours = np.array([complex(row["re"], row["im"]) for row in program(path)["poles"]]) / rate
    assert len(ours) == len(expected)
    values, left, right = scipy.linalg.eig(A, left=True)
    told = 0
    for value, y, x in zip(values, left.T, right.T, strict=True):
        rounding = 1e-15 * np.linalg.norm(A, 2) / abs(np.vdot(y, x))
        if rounding < 1e-8 * abs(value):
            told += 1
            nearest = expected[np.argmin(np.abs(expected - value))]
            assert np.min(np.abs(ours - nearest)) < 1e-6 * abs(nearest)
    assert told >= 1


@by_name(CHAINS)
def test_leverage_beside_files_solved_again(path):
    """A part, current or card figure in fourteen moved by a millionth, bias and all solved again in 50 digits; with
    POLEBOOK_WHOLE=1 one in seven."""
    ours, theirs = program(path), independent(path)[1]["overall"]
    again = Leverage(
        tomllib.loads(path.read_text(encoding="utf-8")),
        {name: theirs[f"{name}_hz"] for name in ("lower_edge", "upper_edge")},
    )
    rows = [(row, (row["stage"], row["part"])) for row in ours["parts"]]
    rows += [(row, ("device", row["device"], row["figure"])) for row in ours["cards"]]
    for row, where in [(row, where) for row, where in rows if row["value"]][len(path.stem) % 7 :: 7 if WHOLE else 14]:
        found = again.of_row(*where) if len(where) == 2 else again.of_key(where)
        for figure, value in found.items():
            if value is None:
                assert row["leverage"][figure] is None, (where, figure)
            else:
                assert row["leverage"][figure] == pytest.approx(value, rel=1e-8, abs=1e-8), (where, figure)
