"""T. H. Lee, The Design of CMOS Radio-Frequency Integrated Circuits, table of shunt peaking (recalled from memory).

The coils are looked for, from the chain without one. Exact values from |Z| of the circuit: m² + 2·m - 1 = 0 for a flat
size, m³ + 3·m - 1 = 0 for a flat delay, m = 1/√2 for the widest band.
"""

from __future__ import annotations

from math import sqrt

import pytest

from polebook.plan.peaking import PUBLISHED, coil_task, coils
from tests.published.checks import CHAINS, exact, printed

CASES = {  # name: printed L/(R²C) and its share, exact one, printed edge over none and its share, exact one
    "delay": (1 / 3.1, 0.01, 0.3221853546260856, 1.6, 0.02, 1.572148048472388),
    "flat": (1 / 2.41, 0.003, sqrt(2) - 1, 1.72, 0.003, 1.7220472229250614),
    "wide": (1 / 1.41, 0.02, 1 / sqrt(2), 1.85, 0.003, 1.8477590650225735),
}


@pytest.fixture(scope="module")
def found():
    text = (CHAINS / "SHUNT-1-no.toml").read_text(encoding="utf-8")
    return {coil.name: coil for _, _, coil in coils(coil_task(text, "SHUNT-1-no.toml", "M1"))}


@pytest.mark.parametrize("case", CASES)
def test_the_coils_of_the_table(found, case):
    m, share, exact_m, factor, factor_share, exact_factor = CASES[case]
    printed(found[case].m, m, share)
    exact(found[case].m, exact_m, 1e-8)
    printed(found[case].factor, factor, factor_share)
    exact(found[case].factor, exact_factor, 1e-9)
    assert PUBLISHED[case] == pytest.approx((m, factor))
