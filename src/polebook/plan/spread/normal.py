"""The normal distribution's quantile, and what clipping does to its deviation."""

from __future__ import annotations

from math import erf, exp, pi, sqrt
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

Array: TypeAlias = "NDArray[np.float64]"

# M. J. Wichura, The percentage points of the normal distribution, algorithm AS 241, Applied Statistics 37, 1988
# (from memory; the tests hold it against another quantile): numerators and denominators, highest power first.
_NEAR = ((2509.0809287301226727, 33430.575583588128105, 67265.770927008700853, 45921.953931549871457,
          13731.693765509461125, 1971.5909503065514427, 133.14166789178437745, 3.387132872796366608),
         (5226.495278852854561, 28729.085735721942674, 39307.89580009271061, 21213.794301586595867,
          5394.1960214247511077, 687.1870074920579083, 42.313330701600911252, 1.0))
_FAR = ((7.7454501427834140764e-4, 0.0227238449892691845833, 0.24178072517745061177, 1.27045825245236838258,
         3.64784832476320460504, 5.7694972214606914055, 4.6303378461565452959, 1.42343711074968357734),
        (1.05075007164441684324e-9, 5.475938084995344946e-4, 0.0151986665636164571966, 0.14810397642748007459,
         0.68976733498510000455, 1.6763848301838038494, 2.05319162663775882187, 1.0))
_SPLIT = 0.425  # share on either side of the middle for which the first quotient holds; the second up to 1 - e^-25


def quantile(share: Array) -> Array:
    """The z below which `share` (0 to 1, neither included) of a normal distribution lies; any shape."""
    off = share - 0.5
    result = off * _quotient(_NEAR, _SPLIT * _SPLIT - off * off)
    far = np.abs(off) > _SPLIT
    if far.any():
        outer = share[far]
        r = np.sqrt(-np.log(np.minimum(outer, 1.0 - outer))) - 1.6
        result[far] = np.copysign(_quotient(_FAR, r), outer - 0.5)
    return result


def _quotient(terms: tuple[tuple[float, ...], tuple[float, ...]], x: Array) -> Array:
    sums = []
    for row in terms:
        total = row[0] * x
        total += row[1]
        for term in row[2:]:
            total *= x
            total += term
        sums.append(total)
    top: Array = sums[0]
    top /= sums[1]
    return top


def clipped_deviation(limit: float) -> float:
    """Standard deviation of a standard normal draw that is set to ±limit where it lies past it."""
    inside = erf(limit / sqrt(2.0))
    density = exp(-0.5 * limit * limit) / sqrt(2.0 * pi)
    return sqrt(inside - 2.0 * limit * density + limit * limit * (1.0 - inside))
