"""Changes made one at a time: the figures of the chains between two files, and which changes only stand together."""

from __future__ import annotations

from collections.abc import Callable, Generator, Mapping
from dataclasses import dataclass
from typing import Any

from polebook.book import build, noise_rows, pulse_rows
from polebook.book.ledger import ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Chain
from polebook.plan.sweep import UNSOLVED
from polebook.problem import ProblemsFound
from polebook.record.changes import Changes
from polebook.record.mixed import Mixer

Overall = Mapping[str, Any]
"""Figures of the whole chain, those of the section "overall" of the document."""
OF_THE_STEP = frozenset({"rise_time_s", "overshoot_percent", "settling_1_s", "settling_01_s", "group_delay_spread_s"})
"""What takes ten times as long as all others together: computed of mixtures where a target asks for one of them."""
_STEP_TARGETS = ("target.rise", "target.overshoot")
Positions = frozenset[int]


@dataclass(frozen=True, slots=True)
class Cause:
    """A change, or several that only stand together.

    changes  their positions among all changes
    alone    figures of the earlier file with these alone made, None where that has none
    without  figures of the later file with these alone not made, None where that has none
    why      why changes go together: what is at fault with one of them alone; "" for a single one
    """

    changes: tuple[int, ...]
    alone: Overall | None
    without: Overall | None
    why: str


class Stopped(Exception):
    """The work was asked to stop."""


class _Mixtures:
    """Figures of mixtures, each computed once."""

    def __init__(self, found: Changes, stop: Callable[[], bool]) -> None:
        self._listed = found.listed
        self.acting: Positions = frozenset(at for at, change in enumerate(found.listed) if change.acts)
        self._mixer = Mixer(found)
        self._step = asks_for_step(found)
        self._known: dict[Positions, tuple[Overall | None, str]] = {}
        self._stop = stop

    def of(self, chosen: Positions) -> tuple[Overall | None, str]:
        """The figures, or None and why there are none."""
        if self._stop():
            raise Stopped
        if chosen not in self._known:
            try:
                self._known[chosen] = _figures(self._mixer.chain(self._listed[at] for at in sorted(chosen)), self._step)
            except ProblemsFound as found:
                self._known[chosen] = None, found.problems[0].what
        return self._known[chosen]

    def stands(self, chosen: Positions) -> bool:
        return self.of(chosen)[0] is not None

    def needed(self, at: int) -> Positions:
        """As few changes with that at `at` among them as stand, none of which can be left out of them.

        The farther ones are tried first. What one needs is let go of only after it, hence the second look.
        """
        kept, before = self.acting, frozenset[int]()
        while kept != before:
            before = kept
            for other in sorted(kept - {at}, key=lambda other: self._near(at, other)):
                if self.stands(kept - {other}):
                    kept -= {other}
        return kept

    def _near(self, at: int, other: int) -> tuple[bool, int]:
        """Sorts what is far from a change ahead of what is near: changes of its own stage come last."""
        one, two = (self._listed[k].path.partition(".")[0] for k in (at, other))
        return one == two, -abs(at - other)


def causes(found: Changes, stop: Callable[[], bool] = lambda: False) -> Generator[tuple[int, int], None,
                                                                                  tuple[Cause, ...]]:
    """The acting changes, each made alone of the earlier file and alone left out of the later one.

    Yields (done, total) meanwhile; raises Stopped once `stop` says so. What has no figures alone is put together with
    as few others as it takes. Changes that share one are told together.
    """
    mixtures = _Mixtures(found, stop)
    total = 2 * len(mixtures.acting)
    groups: dict[Positions, str] = {}
    for done, at in enumerate(sorted(mixtures.acting)):
        one = frozenset({at})
        _, why = mixtures.of(one)
        _join(groups, mixtures.needed(at) if why else one, why)
        yield done + 1, total
    if any(not mixtures.stands(group) for group in groups):  # what two changes need need not stand with what both need
        whys = "; ".join(dict.fromkeys(why for why in groups.values() if why))
        groups = {mixtures.acting: whys}
    result = []
    for at, (group, why) in enumerate(sorted(groups.items(), key=lambda item: min(item[0]))):
        alone, without = mixtures.of(group)[0], mixtures.of(mixtures.acting - group)[0]
        result.append(Cause(tuple(sorted(group)), alone, without, why if len(group) > 1 else ""))
        yield total // 2 + at + 1, total
    return tuple(result)


def _join(groups: dict[Positions, str], new: Positions, why: str) -> None:
    """Puts `new` among the groups, as one with those that it has a change in common with."""
    whys = [why]
    for group in [group for group in groups if group & new]:
        whys.append(groups.pop(group))
        new |= group
    groups[new] = "; ".join(dict.fromkeys(one for one in whys if one))


def asks_for_step(found: Changes) -> bool:
    """Whether one of the files has a target for the step response."""
    return any(target in side.chain.given for target in _STEP_TARGETS for side in (found.before, found.after))


def _figures(chain: Chain, step: bool) -> tuple[Overall | None, str]:
    """The figures of a mixture, or None and why it has none; those of the step response only with `step`."""
    of = ledger(chain)
    unsolved = [name for name, point in of.solution.circuit.points.items() if not point.converged]
    if unsolved:
        return None, UNSOLVED.format(", ".join(unsolved))
    with within_reach(chain):
        told = {**build.of_the_band(of), **noise_rows.overall(of), **build.of_levels(of),
                "sag_percent": of.sag.percent, "group_delay_s": of.delay_s}
        return {**told, **(pulse_rows.overall(of) if step else {})}, ""
