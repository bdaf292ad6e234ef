"""Every formula of the ledger by the figure that it makes, gathered from the files that compute them."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from polebook.book import (
    account,
    band,
    delay,
    levels,
    leverage,
    lines,
    miller,
    noise,
    poles,
    pulse,
    shares,
    sites,
    swing,
    targets,
    time_constants,
)
from polebook.formula import Formula

_MODULES = (account, band, delay, levels, leverage, lines, miller, noise, poles, pulse, shares, sites, swing, targets,
            time_constants)

_FILE = (
    Formula("parts.value.file", "as the file gives it", "the chain file"),
    Formula("parts.value.default", "the default, as the file does not say", "the format of chain files"),
    Formula("parts.value.pole", "time constant of the corner that the file gives", "definition"),
)

FORMULA: Mapping[str, Formula] = MappingProxyType(
    {formula.figure: formula for table in (*(module.FORMULAS for module in _MODULES), _FILE) for formula in table})
