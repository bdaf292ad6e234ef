"""The figures of a ledger that a post keeps: rounded so that rounding errors do not show, named for a reader."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from decimal import ROUND_HALF_EVEN, Decimal
from math import isfinite
from typing import TYPE_CHECKING

from polebook.book import build
from polebook.book.reach import within_reach
from polebook.record.posted import GROUPS, WHOLE, Figures, Moved, Row, Scalar

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.lines import Line
    from polebook.book.sites import Site
    from polebook.book.targets import Target

DIGITS = 6
_EXACT = 13  # digits that rounding errors leave alone: rounded to these first, a tie stays a tie
_DECIMALS = 4  # of what can come out near 0 as a difference, or as a share: below that it would be noise
_TO_DECIMALS = ("_db", "_percent", "owns_upper", "owns_lower")
_UNITS = {"gain": "db", "peaking": "db", "lower": "hz", "upper": "hz", "swing": "v", "current": "a", "rise": "s",
          "overshoot": "percent", "sag": "percent", "yield": "percent"}


def figures(of: Ledger) -> Figures:
    """What a post keeps of a ledger, rounded. A yield is in it where it was handed to the ledger.

    Raises ProblemsFound where the figures are beyond what can be computed.
    """
    with within_reach(of.chain):
        return _figures(of)


def _figures(of: Ledger) -> Figures:
    unit = build.of_the_band(of)["gain_unit"]
    sites = {site.stage: site for site in of.sites if site.interstage}
    owners = build.by_stage(of, of.owns_upper), build.by_stage(of, of.owns_lower)
    accounts = {"upper": of.upper_account, "lower": of.lower_account}
    raw: Mapping[str, Mapping[str, Mapping[str, float | bool | str | None]]] = {
        "overall": {WHOLE: _overall(of)},
        "targets": {one.name: _target(one, unit) for one in of.targets},
        "lines": {line.name: _line(of, line, sites.get(line.name), *owners) for line in of.lines},
        "account": {end: {"edge_hz": one.edge_hz, "lost_db": one.total_db, "left_db": one.left_db}
                    for end, one in accounts.items()},
    }
    return {group: {name: row for name, given in raw[group].items() if (row := _row(given))} for group in GROUPS}


def flat(of: Figures) -> Iterator[tuple[str, Scalar]]:
    """Every figure with its full name: "overall.gain_db", "lines.Q1.pole_hz"."""
    for group, rows in of.items():
        for name, row in rows.items():
            for key, value in row.items():
                yield ".".join(part for part in (group, name, key) if part), value


def moved(before: Figures, after: Figures) -> tuple[Moved, ...]:
    """The figures that differ by more than one unit of the last digit kept, in the order of `after`."""
    old, new = dict(flat(before)), dict(flat(after))
    names = [*new, *(name for name in old if name not in new)]
    return tuple(Moved(name, old.get(name), new.get(name)) for name in names
                 if not same(name, old.get(name), new.get(name)))


def same(name: str, before: Scalar | None, after: Scalar | None) -> bool:
    """Whether two values of one figure are alike as far as a post keeps them."""
    if type(before) is not type(after):
        return False
    if not isinstance(before, float) or not isinstance(after, float):
        return before == after
    return abs(Decimal(repr(before)) - Decimal(repr(after))) <= max(_step(name, before), _step(name, after))


def rounded(name: str, value: float) -> float:
    """`value` to 6 digits; decibels and shares to 4 decimals at most."""
    exact = Decimal(f"{value:.{_EXACT - 1}e}")
    return float(exact.quantize(_step(name, value), rounding=ROUND_HALF_EVEN)) + 0.0  # no negative zero


def _step(name: str, value: float) -> Decimal:
    """One unit of the last digit that is kept."""
    places = Decimal(f"{value:.{DIGITS - 1}e}").adjusted() - DIGITS + 1 if value else -DIGITS
    if name.endswith(_TO_DECIMALS):
        places = max(places, -_DECIMALS)
    return Decimal((0, (1,), places))


def _row(raw: Mapping[str, float | bool | str | None]) -> Row:
    result: dict[str, Scalar] = {}
    for key, value in raw.items():
        if isinstance(value, bool | str):
            result[key] = value
        elif value is not None and isfinite(value):
            result[key] = rounded(key, value)
    return result


def _overall(of: Ledger) -> dict[str, float | str | None]:
    band = build.of_the_band(of)
    return {"state": _state(of), **{key: band[key] for key in (
        "gain_db", "gain_unit", "lower_edge_hz", "upper_edge_hz", "peaking_db")}}


def _state(of: Ledger) -> str:
    """Why there are edges and targets, or none."""
    if of.unstable:
        return "unstable"
    if not of.judged:
        return "stability not told"
    return "stable" if of.solution.band.clean else "no clean midband"


def _target(one: Target, gain_unit: str) -> dict[str, float | bool | str | None]:
    """Wanted and got in the unit that a reader has them in; a reason where there is no figure."""
    unit = _UNITS.get(one.name, "v_rthz" if gain_unit == "V/V" else "a_rthz")
    return {f"want_{unit}": _in(one, one.want), f"got_{unit}": _in(one, one.got), "met": one.met,
            "why": one.why if one.got is None or one.met is None else None}


def _in(one: Target, value: float | None) -> float | None:
    """A target's figure in decibels or per cent where it is one of those."""
    if one.name == "gain":
        return build.decibels(value)
    return None if value is None else 100.0 * value if _UNITS.get(one.name) == "percent" else value


def _line(of: Ledger, line: Line, site: Site | None, upper: Mapping[str, float],
          lower: Mapping[str, float]) -> dict[str, float | None]:
    """A line with the node at its output, which keeps its name when a stage ahead comes or goes; nodes are counted."""
    name = site.name if site else ""
    return {
        "gain_db": build.decibels(line.gain), "k": line.k, "pole_hz": site.pole_hz if site else None,
        "lost_upper_db": of.upper_account.lost.get(name), "allotted_upper_db": of.upper_account.allotted.get(name),
        "owns_upper": None if line.left_out else upper.get(line.name),
        "lost_lower_db": of.lower_account.lost.get(name),
        "owns_lower": None if line.left_out else lower.get(line.name),
    }
