"""Which poles grow, which parts make them, and in which loop."""

from __future__ import annotations

from math import pi
from typing import TYPE_CHECKING

from polebook.book.verdict_edge import BESIDE, name_of
from polebook.book.verdict_how import loop_of
from polebook.book.verdict_peak import cause
from polebook.book.verdict_words import figure, fits, listed, number, per_cent

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger


def unstable(of: Ledger) -> str:
    """The sentences on an unstable chain."""
    solution = of.solution
    right, found = solution.winding.right or 0, solution.poles
    if not found.trusted:
        grow = "one pole grows" if right == 1 else f"{number(right)} poles grow"
        return f"Unstable: {grow}, so the chain oscillates and has no edges."
    at = max(range(found.roots.size), key=lambda k: float(found.roots[k].real))
    root = complex(found.roots[at])
    weights = {k: float(each[at]) for k, each in solution.modes.by_part.items()}
    hz = figure(abs(root) / (2 * pi), "Hz")
    grows = "a pair of poles" if root.imag else "a pole"
    grows += f" at {hz} grows, so the chain {'oscillates' if root.imag else 'latches'}"
    more = "" if right <= (2 if root.imag else 1) else f" ({right} poles grow in all)"
    first = max(weights, key=lambda k: weights[k])
    named = sorted((k for k in weights if weights[k] >= BESIDE * weights[first]), key=lambda k: -weights[k])[:3]
    owns = listed([f"{name_of(of, k)}{' owns' if k == first else ''} {per_cent(weights[k])}" for k in named])
    loops = {loop_of(of, k) for k in named}
    why = f"the loop of {loops.pop()} turns too far" if len(loops) == 1 and loops != {""} else cause(of, weights)
    texts = [f"Unstable: {grows}{count}. {owns}{f': {reason}' if reason else ''}."
             for count, reason in ((more, why), ("", why), ("", ""))]
    return next((text for text in texts if fits(text)), texts[-1])
