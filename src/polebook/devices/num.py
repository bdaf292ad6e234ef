"""Arithmetic that serves floats, complex numbers (complex step) and arrays alike.

Python numbers take the fast way through `math` and `cmath`; numpy is imported only where an array comes in,
which saves the command line its import. No function here looks at a value beyond the sign of its real part.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable
from typing import Any

from polebook.formula import Formula

Value = Any
"""A float, a complex number, or an array of either."""

Reading = Callable[[str], Value | None]
"""The numbers of a card or a file: key -> value, None where it is absent."""

BOLTZMANN = 1.380649e-23  # J/K, exact (SI 2019)
CHARGE = 1.602176634e-19  # C, exact (SI 2019)
ICE_K = 273.15  # 0 °C
TWO_PI = 2.0 * math.pi
THERMAL_VOLTAGE = Formula("devices.VT", "VT = k_B·(T + 273.15)/q", "definition")


def thermal_voltage(celsius: Value) -> Value:
    """kT/q in volts at a temperature in °C: 25.69 mV at 25 °C."""
    return (celsius + ICE_K) * (BOLTZMANN / CHARGE)


def sqrt(x: Value) -> Value:
    """Square root; the real part of x must not be negative (clip first with `floor_at`)."""
    if isinstance(x, float | int):
        return math.sqrt(x)
    if isinstance(x, complex):
        return cmath.sqrt(x)
    return x**0.5


def power(x: Value, exponent: Value) -> Value:
    """x**exponent; the real part of x must not be negative."""
    return x**exponent


def floor_at(x: Value, least: float) -> Value:
    """x where its real part is above `least`, else `least`: the derivative is 1 or 0."""
    if isinstance(x, float | int):
        return x if x > least else least
    if isinstance(x, complex):
        return x if x.real > least else least
    import numpy as np

    return np.where(x.real > least, x, least)


def step(x: Value) -> Value:
    """1 where the real part of x is above 0, else 0."""
    if isinstance(x, float | int | complex):
        return 1.0 if x.real > 0.0 else 0.0
    return (x.real > 0.0) * 1.0


def ratio(a: Value, b: Value) -> Value:
    """a/b, infinite where b is 0: a resistance that a device cut off does not have."""
    if isinstance(b, float | int | complex):
        return a / b if b != 0.0 else a.real * math.inf
    import numpy as np

    with np.errstate(divide="ignore"):
        return np.divide(a, b)
