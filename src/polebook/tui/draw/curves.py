"""Curves of a ledger, computed once for a window: moving the cursor computes one frequency."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from polebook.book.ledger import Ledger
from polebook.book.response import (
    Array,
    Complex,
    Response,
    delays,
    grid,
    input_impedance,
    output_impedance_of,
    response,
)

_KEPT = 4  # the ledger of now and the pinned one, and the window before: each holds all of its ledger


@lru_cache(_KEPT)
def swept(of: Ledger, low_hz: float, high_hz: float, count: int, poles: bool = True) -> Response:
    """Gains and phases over a window, at `count` frequencies and where the chain turns; `poles` as for `grid`."""
    return response(of, grid(of, low_hz, high_hz, count, poles))


@lru_cache(_KEPT)
def delayed(of: Ledger, low_hz: float, high_hz: float, count: int) -> tuple[Array, Array]:
    """(hz, group delays by line) over a window."""
    hz = grid(of, low_hz, high_hz, count)
    return hz, delays(of, hz)


@lru_cache(_KEPT)
def impedances(of: Ledger, low_hz: float, high_hz: float, count: int, output: bool, line: int) -> tuple[Array, Complex]:
    """(hz, ohms) into a line or out of it over a window."""
    hz = grid(of, low_hz, high_hz, count)
    return hz, output_impedance_of(of, hz, line) if output else input_impedance(of, hz, line)


@dataclass(frozen=True, slots=True)
class Here:
    """The figures of every line at one frequency, (n,): dB, degrees, dB, seconds. And of the chain."""

    hz: float
    gains_db: Array
    phases_deg: Array
    losses_db: Array
    delays_s: Array
    gain_db: float
    phase_deg: float
    lost_db: float
    delay_s: float


@lru_cache(_KEPT)
def here(of: Ledger, hz: float) -> Here:
    """The figures at a frequency."""
    found, slow = response(of, np.array([hz])), delays(of, np.array([hz]))[:, 0]
    return Here(hz, found.gains_db[:, 0], found.phases_deg[:, 0], found.losses_db[:, 0], slow, float(found.gain_db[0]),
                float(found.phase_deg[0]), float(found.lost_db[0]), float(slow.sum()))


@lru_cache(_KEPT)
def ohms_here(of: Ledger, hz: float, output: bool, line: int) -> complex:
    """Ohms into a line or out of it at a frequency; not a number for none."""
    at = np.array([hz])
    return complex((output_impedance_of(of, at, line) if output else input_impedance(of, at, line))[0])
