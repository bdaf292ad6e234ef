"""What a fit is worth: standard errors, and the directions in which the sweep tells nothing.

Near its end a fit is linear in x. With J the slopes of the weighted residuals, s² = Σr²/(n − p) their variance and
J = U·S·Vᵀ, the coordinates have the covariance s²·V·S⁻²·Vᵀ (linear least squares, as in any textbook). Along column i
of V the sweep holds x to s/S_i. Where that is more than half a neper it is taken for not determined: then no key that
goes along it has a value.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import sqrt

import numpy as np

from polebook.record.sweeps.sweep import Array

LIMIT = 0.5  # of x, about a neper: a standard error past it is no figure
PAIRED = 0.95  # correlation from which two keys are told to go together
BESIDE = 0.8  # and from which one that is settled is told to go with one that is not
_LEAST = 1e-14  # of the greatest singular value: less is nothing


@dataclass(frozen=True, slots=True)
class Group:
    """Coordinates that can't be told apart. hold: how many of them would have to be held; beside: of those that are
    settled the ones that they go with."""

    members: tuple[int, ...]
    hold: int
    beside: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Judged:
    """By coordinate of x, those that were free.

    figures      how many residuals there were
    errors       standard errors; of no use where not determined
    determined   whether the sweep settles it;  felt  whether it would, were it free alone
    groups       coordinates that are felt and yet not settled, by what they share
    correlation  (x, x) of those that are determined, NaN elsewhere
    """

    figures: int
    errors: Array
    determined: tuple[bool, ...]
    felt: tuple[bool, ...]
    groups: tuple[Group, ...]
    correlation: Array


def judge(jacobian: Array, residuals: Array) -> Judged:
    """jacobian (n, p) and residuals (n,), weighted alike."""
    n, p = jacobian.shape
    deviation = float(np.sqrt(residuals @ residuals / max(n - p, 1)))
    _, sizes, across = np.linalg.svd(jacobian, full_matrices=False)
    floor = _LEAST * (float(sizes[0]) or 1.0) if sizes.size else 1.0
    reach = deviation / np.maximum(sizes, floor)  # what each direction is held to
    parts = across.T * reach  # (x, directions)
    errors = np.sqrt(np.square(parts).sum(axis=1))
    own = np.sqrt(np.square(jacobian).sum(axis=0))
    felt = tuple(bool(deviation <= LIMIT * one) and one > 0.0 for one in own)
    determined = tuple(bool(error <= LIMIT) for error in errors)
    with np.errstate(all="ignore"):
        correlation = parts @ parts.T / np.outer(errors, errors)
    known = np.outer(determined, determined)
    return Judged(n, errors, determined, felt, tuple(_groups(parts, reach, determined, felt, correlation)),
                  np.where(known, correlation, np.nan))


def _groups(parts: Array, reach: Array, determined: Sequence[bool], felt: Sequence[bool],
            correlation: Array) -> Iterator[Group]:
    """Coordinates that the sweep feels and does not settle, by the directions that they share."""
    found: list[tuple[set[int], int]] = []
    blind = {k for k in range(len(determined)) if felt[k] and not determined[k]}
    for direction in np.nonzero(reach > LIMIT)[0]:
        along = {k for k in blind if abs(parts[k, direction]) > LIMIT / len(determined)}
        if along:
            touching = [group for group in found if group[0] & along]
            found = [group for group in found if not group[0] & along]
            found.append((along.union(*(group[0] for group in touching)), 1 + sum(group[1] for group in touching)))
    found += [({k}, 1) for k in blind.difference(*(members for members, _ in found))]
    for members, count in found:
        beside = tuple(k for k, known in enumerate(determined)
                       if known and max(abs(correlation[k, m]) for m in members) > BESIDE)
        yield Group(tuple(sorted(members)), min(count, len(members) - (not beside)), beside)


def neighbours(residuals: Array) -> float:
    """Correlation of each residual with the next one up in frequency: near 0 for noise, near 1 for a curve.

    About 0 and not about the mean, for a level that is off is no noise either.
    """
    total = float(residuals @ residuals)
    return float(residuals[:-1] @ residuals[1:]) / total if total > 0.0 else 0.0


def waves(correlation: float, count: int) -> bool:
    """Whether what is left is no noise: neighbours are alike by over three standard errors, and by 0.3 at least."""
    return correlation > max(0.3, 3.0 / sqrt(count))


def rounded(value: float, error: float | None) -> float:
    """`value` to the digits that its standard error lets stand: its first one, its first two below 3; at most six."""
    if not value:
        return value
    first = int(f"{abs(value):e}".partition("e")[2])
    if not error:
        return float(f"{value:.5e}")
    lead, _, power = f"{error:e}".partition("e")
    last = int(power) - (float(lead) < 3.0)
    return float(f"{value:.{min(max(first - last, 0), 5)}e}")
