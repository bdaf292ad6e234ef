"""The d.c. solution of a chain: `plan` once, `solve` for any values, and what is amiss or missing.

The steps stand in files of their own: bias_build (chain to d.c. network), bias_group (equations), bias_rank (what
they settle), bias_order and bias_newton (their solution), bias_solution (operating points).
"""

from __future__ import annotations

from polebook.circuit.bias_cautions import cautions
from polebook.circuit.bias_missing import missing
from polebook.circuit.bias_solution import Operating, Plan, plan, solve

__all__ = ["Operating", "Plan", "cautions", "missing", "plan", "solve"]
