"""What a noise source makes: white noise, below its corner more of it."""

from __future__ import annotations

from typing import NamedTuple

from polebook.devices.num import Value
from polebook.formula import Formula

SPECTRUM = Formula("devices.S", "S(f) = white·(1 + corner/f)", "common practice for flicker noise")
T0_K = 290.0  # K, at which noise figures and noise resistances are stated (IEEE standard definition, from memory)


class Spectrum(NamedTuple):
    """white in V²/Hz or A²/Hz, corner in Hz: S(f) = white·(1 + corner/f)."""

    white: Value
    corner: Value = 0.0


Noise = dict[str, Spectrum | None]
"""Sources of a device by name: "gm" of its main current, "ib", "ig", "en", "in". None: it is there, but cannot be told.
"""
