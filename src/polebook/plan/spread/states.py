"""What becomes of a built chain, beside its figures."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

GOOD, UNSTABLE, NO_BAND, UNSOLVED, NO_GAIN, UNTOLD = range(6)

WORDS: Mapping[int, str] = MappingProxyType({
    GOOD: "good", UNSTABLE: "unstable", NO_BAND: "no clean midband", UNSOLVED: "bias not solved",
    NO_GAIN: "nothing passes at midband", UNTOLD: "stability can't be told"})
"""State -> what it is called. Builds of all but GOOD have no edges; NO_BAND has its other figures, the rest none."""
KEYS: Mapping[int, str] = MappingProxyType({
    UNSTABLE: "unstable", NO_BAND: "no_band", UNSOLVED: "unsolved", NO_GAIN: "no_gain", UNTOLD: "untold"})
"""State -> its key in a document."""
