"""Residues, and the basis by which equations are chosen."""

from __future__ import annotations

from fractions import Fraction

import pytest

from polebook.circuit.bias_rank import PRIME, Basis, Residue, residue


def same(value, fraction):
    return residue(value) * fraction.denominator % PRIME == fraction.numerator % PRIME


@pytest.mark.parametrize(("a", "b"), [(3, 7), (123456789, 987654321), (PRIME - 1, 2)])
def test_residues_follow_the_rules_of_fractions(a, b):
    x, y, fx, fy = Residue(a), Residue(b), Fraction(a), Fraction(b)
    assert same(x / y + 1 / y - y * x, fx / fy + 1 / fy - fy * fx)
    assert same(2 - x, 2 - fx) and same(-x * 3.0, -fx * 3) and same(1 + x - 1, fx)
    assert residue(x - x) == 0


def test_a_row_is_taken_once():
    basis = Basis([])
    assert basis.take({0: 1, 1: 2}) and basis.take({1: 1, 2: 5})
    assert not basis.take({0: 3, 1: 7, 2: 5})  # thrice the first and once the second
    assert basis.rest({0: 1}) and not basis.rest({0: 2, 1: 5, 2: 5})
    assert basis.take({2: 1})
    assert not any(basis.rest({k: 1}) for k in range(3))
