"""Chain -> ledger: every section when it is first asked for, and the whole as the document of `--json`."""

from __future__ import annotations

from functools import cached_property
from math import pi
from typing import TYPE_CHECKING

from polebook.book import account as accounts
from polebook.book.account import Account
from polebook.book.cautions import cautions
from polebook.book.lines import Line, lines
from polebook.book.miller import Bridge, bridges
from polebook.book.shares import owned
from polebook.book.sites import Site, equal_stage_pole, node_estimate, sites
from polebook.book.solution import Solution
from polebook.book.targets import Got, Target, targets
from polebook.book.verdict import verdict
from polebook.chain.model import Chain
from polebook.circuit import bias_cautions
from polebook.problem import Problem
from polebook.solve.fold import fold

if TYPE_CHECKING:
    from polebook.book.leverage import Leverage
    from polebook.book.poles import Resolved, Root


class Ledger:
    """All figures of a chain. A ledger computes what is asked, once."""

    def __init__(self, chain: Chain) -> None:
        self.chain = chain
        self.solution = Solution(chain)

    @property
    def unstable(self) -> bool:
        return bool(self.solution.winding.right)

    @property
    def judged(self) -> bool:
        """False where stability could not be told, or is not given: then edges and what rests on them are null."""
        return self.solution.winding.right == 0

    @property
    def lower_hz(self) -> float | None:
        return self.solution.band.lower_hz if self.judged else None

    @property
    def upper_hz(self) -> float | None:
        return self.solution.band.upper_hz if self.judged else None

    @property
    def reference_hz(self) -> float | None:
        """Where gain and noise are quoted: the target's reference, else the band seed."""
        stated = self.chain.get("target.reference")
        return stated if stated is not None else self.solution.band.seed_hz if self.judged else None

    @cached_property
    def gain_at_reference(self) -> float | None:
        """|H| at the reference frequency, V/V or V/A."""
        hz = self.reference_hz
        if hz is None or not self.judged:
            return None
        size = 1.0
        for gain in fold(self.solution.circuit.network, 2j * pi * hz, "full").gains:
            size *= abs(gain)
        return size

    @cached_property
    def bridges(self) -> dict[str, list[Bridge]]:
        return bridges(self.solution)

    @cached_property
    def held(self) -> set[str]:
        """Stages that hold their input node."""
        return accounts.holding(self.solution, self.bridges)

    @cached_property
    def lines(self) -> list[Line]:
        return lines(self.solution, self.bridges, self.held)

    @cached_property
    def sites(self) -> list[Site]:
        return sites(self.solution)

    @cached_property
    def upper_account(self) -> Account:
        stated = self.chain.get("target.upper")
        edge = (stated if stated is not None else self.upper_hz) if self.judged else None
        return accounts.account(self.solution, self.held, edge, accounts.claims(self.solution))

    @cached_property
    def lower_account(self) -> Account:
        stated = self.chain.get("target.lower")
        edge = (stated if stated is not None else self.lower_hz) if self.judged else None
        return accounts.account(self.solution, self.held, edge, {})

    @cached_property
    def owns_upper(self) -> dict[int, float]:
        """Share of the upper edge by part."""
        return owned(self.solution.circuit.network, self.upper_hz)

    @cached_property
    def owns_lower(self) -> dict[int, float]:
        """Share of the lower edge by part."""
        return owned(self.solution.circuit.network, self.lower_hz)

    @cached_property
    def leverage(self) -> Leverage:
        """What moving a part, a card's figure or a stated current does to gain and edges."""
        from polebook.book.leverage import leverage  # deferred: an audit asks for none of these three, 3 ms sooner

        return leverage(self.solution, self.lower_hz, self.upper_hz)

    @cached_property
    def poles(self) -> Resolved:
        """All finite poles of the full network, or why they are not resolved."""
        from polebook.book.poles import poles  # deferred with leverage

        return poles(self.solution)

    @cached_property
    def zeros(self) -> tuple[Root, ...] | None:
        """All finite zeros, stage by stage."""
        from polebook.book.poles import zeros  # deferred with leverage

        return zeros(self.solution)

    @cached_property
    def node_upper_hz(self) -> float | None:
        return node_estimate([site.pole_hz for site in self.sites if site.pole_hz is not None])

    @cached_property
    def shrinkage(self) -> float | None:
        """Exact upper edge over the lowest site pole."""
        poles = [site.pole_hz for site in self.sites if site.pole_hz is not None]
        return self.upper_hz / min(poles) if self.upper_hz is not None and poles else None

    @cached_property
    def equal_pole_hz(self) -> float | None:
        """Pole that each of as many like stages would need; None without an edge to need it for."""
        count = sum(site.interstage and site.pole_hz is not None for site in self.sites)
        edge = self.upper_account.edge_hz
        return equal_stage_pole(edge, count) if edge is not None and count else None

    @cached_property
    def targets(self) -> list[Target]:
        band = self.solution.band if self.judged else None
        gain = self.gain_at_reference if "target.reference" in self.chain.given else None
        return targets(self.chain, Got(
            self.solution.gain if gain is None else gain, self.lower_hz, self.upper_hz,
            band.peaking_db if band else 0.0, not self.judged, bool(band and band.clean)))

    @cached_property
    def verdict(self) -> str:
        """What limits the chain now, and by which mechanism."""
        return verdict(self)

    @cached_property
    def cautions(self) -> list[Problem]:
        circuit = self.solution.circuit
        return [*bias_cautions.cautions(circuit.plan, self.chain, dict(circuit.points)),
                *cautions(self.solution, self.judged)]


def ledger(chain: Chain) -> Ledger:
    """The ledger of a chain. Raises ProblemsFound where it has none (nothing holds a node, a figure is missing)."""
    return Ledger(chain)
