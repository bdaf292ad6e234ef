"""How a pole or a zero came about: the equation that it solves, and how near to it the figure lies."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet
from polebook.formula import Working
from polebook.solve.determinant import determinant
from polebook.solve.fold import fold
from polebook.solve.poles import split

if TYPE_CHECKING:
    from polebook.solve.aberth import Complex

_AT_ZERO = {
    "poles": "It lies at 0, whatever the values: a charge or a current that no resistor lets go of.",
    "zeros": "It lies at 0, whatever the values: d.c. does not pass here.",
}
ASIDE = np.array([1e-5, 1e-6, 1e-7, 1e-8])  # shares of the root at which the equation is looked at, and twice those


def root(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `poles` or `zeros`."""
    owner, _, key = sheet.entry.name.rpartition(".")
    section = sheet.entry.section
    if key in ("re", "im"):
        return _solved(books, sheet, section)
    re, im = sheet.figure("re", f"{owner}.re"), sheet.figure("im", f"{owner}.im")
    if key == "hz":
        sheet.result(f"f = sqrt({re}^2 + {im}^2)/(2·pi)")
    else:
        sheet.result(f"Q = sqrt({re}^2 + {im}^2)/(2·|{re}|)")
    return sheet.done(FORMULA[f"{section}.{key}"])


def _solved(books: Books, sheet: Sheet, section: str) -> Working:
    row = sheet.entry.row
    value = complex(row["re"], row["im"])
    formula = FORMULA[f"{section}.re"]
    if not value:
        return sheet.done(formula, _AT_ZERO[section])
    owner = sheet.entry.name.rpartition(".")[0]
    re, im = sheet.figure("re", f"{owner}.re"), sheet.figure("im", f"{owner}.im")
    found = _pole_misses(books, value) if section == "poles" else _zero_misses(books, value, row["stage"])
    if np.isfinite(min(found)):
        where = "the determinant vanishes" if section == "poles" else f"{row['stage']} passes nothing"
        miss = sheet.put("miss", min(found), "rad/s", f"from here to where {where}", "secant beside it")
        sheet.check(f"{miss}/sqrt({re}^2 + {im}^2)", "0", "", "as a share of its size, it lies off by:")
    return sheet.done(formula, _attributed(books, sheet, section))


def _attributed(books: Books, sheet: Sheet, section: str) -> str:
    roots = books.ledger.poles.roots if section == "poles" else books.ledger.zeros
    found = roots[sheet.entry.at] if roots else None
    if found is None or not found.stage:
        return ""
    if found.weight is None:
        return f"It is {found.stage}'s own: no neighbour moves it."
    return f"{found.stage} makes most of it: {100 * found.weight:.0f} % by what its C and L move it."


def _nearest(value: complex, near: Complex, far: Complex) -> float:
    """Distance from `value` to the root of a function with values `near` and `far` at ASIDE and at twice that: where
    the secant through both meets 0, of all these secants the one that ends nearest."""
    step = value * ASIDE
    miss = np.abs(step - step / (far / near - 1.0))
    return float(np.min(miss, initial=np.inf, where=np.isfinite(miss)))


def _pole_misses(books: Books, value: complex) -> list[float]:
    """Of each block of nodes that stands by itself: how far from `value` its determinant vanishes."""
    parts, result = split(books.net), []
    near, far = value * (1 + ASIDE), value * (1 + 2 * ASIDE)
    with np.errstate(all="ignore"):
        factors = [determinant(fold(books.net, s, "full"), s) for s in (near, far)]
        for block, lacking in enumerate(parts.lacking.tolist()):
            inside = parts.factor == block
            ratio = (factors[1][inside] / factors[0][inside]).prod(axis=0) * (far / near) ** lacking
            result.append(_nearest(value, np.ones_like(ratio), ratio))
    return result


def _zero_misses(books: Books, value: complex, stage: str) -> list[float]:
    near, far = value * (1 + ASIDE), value * (1 + 2 * ASIDE)
    with np.errstate(all="ignore"):
        gains = [fold(books.net, s, "full").gains[books.segment_of[stage]] for s in (near, far)]
        return [_nearest(value, *(np.broadcast_to(gain, ASIDE.shape) for gain in gains))]
