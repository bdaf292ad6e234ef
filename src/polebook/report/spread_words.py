"""Words and figures that the report of a spread and the audit share."""

from __future__ import annotations

from collections.abc import Sequence

from polebook.report import figures as show

MOST_PLACES = 6


def built(count: int) -> str:
    return f"{count} built chain{'s' * (count != 1)}"


def count_of(count: int, noun: str) -> str:
    return f"{count} {noun}{'s' * (count != 1)}"


def called(name: str) -> str:
    """A figure's key in words, less its unit: "lower edge"."""
    return name.rpartition("_")[0].replace("_", " ")


def figure_text(value: float | None, unit: str) -> str:
    return show.bare(value, unit, 4)


def percent(value: float, least: int = 2) -> str:
    """A share with as many decimals as keep it from looking like all or nothing when it is neither."""
    return f"{100.0 * value:.{places(value, least)}f} %"


def places(value: float, least: int = 2) -> int:
    """Decimals of a share in per cent."""
    if value in (0.0, 1.0):
        return least
    enough = (count for count in range(least, MOST_PLACES) if 0.0 < float(f"{100.0 * value:.{count}f}") < 100.0)
    return next(enough, MOST_PLACES)


def part_text(name: str) -> str:
    """A draw's name as a reader has it: "N beta" of a card, "N beta at Q1" of one device beside its card."""
    if not name.startswith("device."):
        return name
    card, _, figure = name.removeprefix("device.").rpartition(".")
    figure, at, where = figure.partition("@")
    return f"{card} {figure}{f' at {where}' if at else ''}"


def listed(words: Sequence[str]) -> str:
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"
