"""Two ledgers -> what moved from one to the other: the only place where differences of figures are made."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field
from math import isfinite
from typing import TYPE_CHECKING, Literal

from polebook.book import build
from polebook.book.account import Account
from polebook.book.ledger import Ledger
from polebook.book.lines import Line
from polebook.book.reach import within_reach
from polebook.book.sites import Site
from polebook.problem import ProblemsFound

if TYPE_CHECKING:
    from polebook.book.levels import Level
    from polebook.circuit.bias import Operating

Way = Literal["difference", "ratio", "points"]
SAME = 1e-9  # figures whose difference is less of them than this are alike: it is rounding

Number = float | None


@dataclass(frozen=True, slots=True)
class Change:
    """One figure in two ledgers, in its own unit; None where it does not apply.

    way   "difference" (dB, K): after - before; "ratio" (Hz, Ω, F): after/before; "points" (shares): percentage points
    """

    before: Number
    after: Number
    way: Way

    @property
    def delta(self) -> Number:
        """The change in the figure's way; None where either figure does not apply."""
        if self.before is None or self.after is None or not (isfinite(self.before) and isfinite(self.after)):
            return None
        if self.way == "ratio":
            return self.after / self.before if self.before else None
        return (self.after - self.before) * (100.0 if self.way == "points" else 1.0)

    @property
    def moved(self) -> bool:
        """Whether the two differ by more than rounding."""
        if self.before is None or self.after is None:
            return self.before is not self.after
        if not (isfinite(self.before) and isfinite(self.after)):
            return self.before != self.after
        size = max(abs(self.before), abs(self.after), 0.0 if self.way == "ratio" else 1.0)
        return abs(self.after - self.before) > SAME * size


OVERALL: Mapping[str, tuple[Way, Callable[[Ledger], Number]]] = {
    "gain_db": ("difference", lambda of: build.decibels(of.solution.gain)),
    "gain_at_reference_db": ("difference", lambda of: build.decibels(of.gain_at_reference)),
    "lower_edge_hz": ("ratio", lambda of: of.lower_hz),
    "upper_edge_hz": ("ratio", lambda of: of.upper_hz),
    "peaking_db": ("difference", lambda of: of.solution.band.peaking_db if of.judged else None),
    "node_upper_hz": ("ratio", lambda of: of.node_upper_hz),
    "octc_upper_hz": ("ratio", lambda of: of.solution.constants.upper_hz),
    "sctc_lower_hz": ("ratio", lambda of: of.solution.constants.lower_hz),
    "shrinkage": ("difference", lambda of: of.shrinkage),
    "lost_upper_db": ("difference", lambda of: of.upper_account.total_db),
    "left_upper_db": ("difference", lambda of: of.upper_account.left_db),
    "lost_lower_db": ("difference", lambda of: of.lower_account.total_db),
    "left_lower_db": ("difference", lambda of: of.lower_account.left_db),
    "supply_current_a": ("ratio", lambda of: of.supply_current),
    "supply_power_w": ("ratio", lambda of: of.rails.power),
    "largest_source": ("ratio", lambda of: of.levels.largest_source if of.levels else None),
    "swing_v": ("ratio", lambda of: of.levels.swing if of.levels else None),
    "dynamic_range_db": ("difference", lambda of: build.of_levels(of)["dynamic_range_db"]),
    "noise_margin_db": ("difference", lambda of: build.of_levels(of)["noise_margin_db"]),
    "full_power_hz": ("ratio", lambda of: of.levels.full_power_hz if of.levels else None),
}
"""Figures of the whole chain; gain and account in dB."""

LINES: Mapping[str, tuple[Way, Callable[[Ledger, Line], Number]]] = {
    "gain_db": ("difference", lambda of, line: build.decibels(line.gain)),
    "open_gain_db": ("difference", lambda of, line: build.decibels(line.open_gain)),
    "gain": ("difference", lambda of, line: line.gain),
    "k": ("difference", lambda of, line: line.k),
    "loading": ("points", lambda of, line: line.loading),
    "transfer_ohm": ("ratio", lambda of, line: line.transfer_ohm),
    "input_ohm": ("ratio", lambda of, line: line.input_ohm),
    "output_ohm": ("ratio", lambda of, line: line.output_ohm),
    "owns_upper": ("points", lambda of, line: _share(of, of.owns_upper, line)),
    "owns_lower": ("points", lambda of, line: _share(of, of.owns_lower, line)),
}
"""Figures of a line."""

NODES: Mapping[str, tuple[Way, Callable[[Ledger, Site], Number]]] = {
    "ohm": ("ratio", lambda of, site: site.ohm),
    "farad": ("ratio", lambda of, site: site.farad),
    "pole_hz": ("ratio", lambda of, site: site.pole_hz),
    "lost_upper_db": ("difference", lambda of, site: of.upper_account.lost.get(site.name)),
    "allotted_upper_db": ("difference", lambda of, site: of.upper_account.allotted.get(site.name)),
    "left_upper_db": ("difference", lambda of, site: _left(of.upper_account, site)),
    "lost_lower_db": ("difference", lambda of, site: of.lower_account.lost.get(site.name)),
    "allotted_lower_db": ("difference", lambda of, site: of.lower_account.allotted.get(site.name)),
    "left_lower_db": ("difference", lambda of, site: _left(of.lower_account, site)),
}
"""Figures of a node."""

BIAS: Mapping[str, tuple[Way, Callable[[Operating], Number]]] = {
    "current_a": ("ratio", lambda point: point.current),
    "across_v": ("difference", lambda point: point.across),
    "control_v": ("difference", lambda point: point.control_v),
    "lower_v": ("difference", lambda point: point.lower_v),
    "output_v": ("difference", lambda point: point.output_v),
    "dissipation_w": ("ratio", lambda point: None if point.current is None or point.across is None else
                      point.current * point.across),
}
"""Figures of a device at d.c."""

LEVELS: Mapping[str, tuple[Way, Callable[[Ledger, Level], Number]]] = {
    "noise_v": ("ratio", lambda of, row: of.noise_at(row.node)),
    "smallest_v": ("ratio", lambda of, row: row.smallest),
    "largest_v": ("ratio", lambda of, row: row.largest),
    "clip_v": ("ratio", lambda of, row: row.clip),
    "headroom_db": ("difference", lambda of, row: row.headroom_db),
}
"""Signals, noise and clip level at a node between the stages."""


def _share(of: Ledger, shares: dict[int, float], line: Line) -> Number:
    return None if line.left_out else build.by_stage(of, shares).get(line.name)


def _left(account: Account, site: Site) -> Number:
    lost, allotted = account.lost.get(site.name), account.allotted.get(site.name)
    return None if lost is None or allotted is None else allotted - lost


@dataclass(frozen=True, slots=True)
class Moves:
    """What moved to the ledger `after` from what stood before; each figure is computed when it is asked for, and kept.

    Lines are matched by name, a node by the line whose output it is, an inner one by its own name ("Q2.1").
    What stood before is for a class of this one to know: `_told`.
    """

    after: Ledger
    _kept: dict[tuple[str, str], Change | None] = field(default_factory=dict, compare=False, repr=False, kw_only=True)

    def overall(self, figure: str) -> Change | None:
        """A figure of OVERALL (KeyError for none of them); None where one of the ledgers can't tell it."""
        way, get = OVERALL[figure]
        return self._change(("", figure), way, get)

    def line(self, name: str, figure: str) -> Change | None:
        """A figure of LINES of the line `name`; None where it does not stand in both ledgers."""
        way, get = LINES[figure]
        return self._change((f"line {name}", figure), way, lambda of: get(of, _lines(of)[name]))

    def node(self, name: str, figure: str) -> Change | None:
        """A figure of NODES of the node at the output of the line `name`, or of the inner one of that name."""
        way, get = NODES[figure]
        return self._change((f"node {name}", figure), way, lambda of: get(of, _nodes(of)[name]))

    def bias(self, name: str, figure: str) -> Change | None:
        """A figure of BIAS of the stage `name`, of a cascode's upper device with "_upper" behind it."""
        way, get = BIAS[figure]
        return self._change((f"bias {name}", figure), way, lambda of: get(of.solution.circuit.points[name]))

    def level(self, name: str, figure: str) -> Change | None:
        """A figure of LEVELS of the node at the output of the line `name`."""
        way, get = LEVELS[figure]
        return self._change((f"level {name}", figure), way, lambda of: get(of, _levels(of)[name]))

    def rail(self, name: str) -> Change | None:
        """The current out of a rail, A."""
        return self._change((f"rail {name}", "current_a"), "ratio", lambda of: of.rails.current(_standing(of, name)))

    def _change(self, key: tuple[str, str], way: Way, get: Callable[[Ledger], Number]) -> Change | None:
        if key not in self._kept:
            self._kept[key] = self._told(key, way, get)
        return self._kept[key]

    def _told(self, key: tuple[str, str], way: Way, get: Callable[[Ledger], Number]) -> Change | None:
        """A figure by its group and name, ("line Q1", "k"); `get` has it of a ledger. None where there are not two."""
        raise NotImplementedError


@dataclass(frozen=True, slots=True)
class Changes(Moves):
    """What moved from one ledger to another.

    added, removed   stages that only the later or only the earlier one has
    """

    before: Ledger
    added: tuple[str, ...]
    removed: tuple[str, ...]

    def all(self) -> Iterator[tuple[str, str, str, Change]]:
        """("overall", "line" or "node"; name; figure; change) of every figure that stands in both ledgers."""
        for figure in OVERALL:
            if change := self.overall(figure):
                yield "overall", "", figure, change
        for group, names, figures, ask in (("line", _lines(self.before), LINES, self.line),
                                           ("node", _nodes(self.before), NODES, self.node)):
            for name in names:
                for figure in figures:
                    if change := ask(name, figure):
                        yield group, name, figure, change

    def _told(self, key: tuple[str, str], way: Way, get: Callable[[Ledger], Number]) -> Change | None:
        try:
            with within_reach(self.before.chain):
                return Change(get(self.before), get(self.after), way)
        except (KeyError, ProblemsFound):  # no such line in one of them; figures beyond what can be computed
            return None


def _lines(of: Ledger) -> dict[str, Line]:
    return {line.name: line for line in of.lines}


def _nodes(of: Ledger) -> dict[str, Site]:
    """By the line whose output it is; where several lines share a node, by the first of them."""
    return {site.stage if site.interstage else site.name: site for site in of.sites}


def _levels(of: Ledger) -> dict[str, Level]:
    """By the first line whose output the node is; none where the chain is not stable."""
    stages = {site.name: site.stage for site in of.sites}
    return {stages[row.node]: row for row in of.levels.rows} if of.levels else {}


def _standing(of: Ledger, rail: str) -> str:
    """The name of a rail that stands. Raises KeyError for one that does not."""
    if rail not in of.rails.standing:
        raise KeyError(rail)
    return rail


def changes(before: Ledger, after: Ledger) -> Changes:
    """What moved from `before` to `after`."""
    old, new = ([stage.name for stage in of.chain.stages] for of in (before, after))
    return Changes(after, before, tuple(name for name in new if name not in old),
                   tuple(name for name in old if name not in new))
