"""Which equations of a group to use, and which unknowns they settle: by its structure alone.

Every coefficient is replaced by a random residue modulo a large prime, in which elimination is exact. A row that
adds nothing is left away, an unknown is settled where its unit row follows from the rows taken. What holds for
random numbers holds for all but a vanishing share of values (the rank of a generic matrix; Schwartz 1980, from
memory), and no threshold is needed to tell zero from nearly zero.
"""

from __future__ import annotations

import random
from collections.abc import Sequence
from dataclasses import dataclass

from polebook.circuit.bias_candidates import candidates
from polebook.circuit.bias_group import RHS, Columns, Group, Numbers, Row, assemble
from polebook.circuit.bias_laws import Law

PRIME = 2**61 - 1


class Residue:
    """An integer modulo PRIME; whole numbers of other types are taken as such."""

    __slots__ = ("n",)

    def __init__(self, n: int) -> None:
        self.n = n % PRIME

    def __add__(self, other: Residue | float) -> Residue:
        return Residue(self.n + residue(other))

    __radd__ = __add__

    def __sub__(self, other: Residue | float) -> Residue:
        return Residue(self.n - residue(other))

    def __rsub__(self, other: Residue | float) -> Residue:
        return Residue(residue(other) - self.n)

    def __mul__(self, other: Residue | float) -> Residue:
        return Residue(self.n * residue(other))

    __rmul__ = __mul__

    def __truediv__(self, other: Residue | float) -> Residue:
        return Residue(self.n * pow(residue(other), -1, PRIME))

    def __rtruediv__(self, other: Residue | float) -> Residue:
        return Residue(residue(other) * pow(self.n, -1, PRIME))

    def __neg__(self) -> Residue:
        return Residue(-self.n)


def residue(x: Residue | float) -> int:
    """The integer behind a residue or a whole number."""
    return x.n if isinstance(x, Residue) else int(x)


@dataclass(frozen=True, slots=True)
class Choice:
    """rows are those to use, by their place in `assemble`; pins are columns set to 0 as nothing settles them."""

    rows: tuple[int, ...]
    pins: tuple[int, ...]
    settled: frozenset[int]


@dataclass(slots=True)
class Basis:
    """Rows reduced one by one, each with its leading column, coefficient 1 there."""

    leads: list[tuple[int, dict[int, int]]]

    def rest(self, row: dict[int, int]) -> dict[int, int]:
        """What of a row does not follow from the basis."""
        row = dict(row)
        for lead, basis in self.leads:
            factor = row.pop(lead, 0)
            if factor:
                for column, value in basis.items():
                    row[column] = (row.get(column, 0) - factor * value) % PRIME
        return {column: value for column, value in row.items() if value}

    def take(self, row: dict[int, int]) -> bool:
        """Takes a row in; False where it follows from the basis."""
        rest = self.rest(row)
        if not rest:
            return False
        lead = next(iter(rest))
        scale = pow(rest.pop(lead), -1, PRIME)
        self.leads.append((lead, {column: value * scale % PRIME for column, value in rest.items()}))
        return True


def choose(group: Group, cols: Columns, lawful: Sequence[bool]) -> Choice:
    """The rows of a group that settle as much as can be settled, in the order of their right to be heard.

    Balances and laws come first; what else is stated serves only where these leave a node open.
    """
    rows = _generic(group, cols, lawful)
    basis = Basis([])
    first, later = candidates(group, cols)
    taken = [k for k in (*first, *later) if rows[k] and basis.take(rows[k])]
    settled = frozenset(k for k in range(cols.count) if not basis.rest({k: 1}))
    pins = [k for k in reversed(range(cols.count)) if basis.take({k: 1})]
    drives = {c: u for c, u in zip(cols.current, cols.drive, strict=True) if u >= 0}
    settled |= {c for c, u in drives.items() if u in settled}
    return Choice(tuple(taken), tuple(k for k in pins if k not in drives), settled)


def _generic(group: Group, cols: Columns, lawful: Sequence[bool]) -> list[dict[int, int]]:
    """Every row with random residues, without right-hand side; a device's current as a multiple of its drive."""
    draw = random.Random(0x5EED)

    def any_number() -> Residue:
        return Residue(draw.randrange(1, PRIME))

    laws = [
        Law(any_number() if device.current else None, any_number() if device.family == "bjt" else 0,
            any_number() if known else None, any_number() if device.family == "triode" else 0, None,
            any_number() if device.upper_family == "bjt" else 0)
        for device, known in zip(group.devices, lawful, strict=True)
    ]
    numbers = Numbers(
        [any_number() for _ in group.grounded], [any_number() for _ in group.branches],
        {node: any_number() for node in group.held}, laws,
        [any_number() if device.stopper else None for device in group.devices],
        [any_number() if device.across else None for device in group.devices])
    slopes = {i: (u, any_number()) for i, u in zip(cols.current, cols.drive, strict=True) if u >= 0}
    return [_plain(row, slopes) for row in assemble(group, cols, numbers)]


def _plain(row: Row, slopes: dict[int, tuple[int, Residue]]) -> dict[int, int]:
    result: dict[int, int] = {}
    for column, value in row.items():
        if column in slopes:
            column, slope = slopes[column]
            value = slope * value
        if column != RHS:
            result[column] = (result.get(column, 0) + residue(value)) % PRIME
    return result
