"""Chain -> ledger: every section when it is first asked for, and the whole as the document of `--json`."""

from __future__ import annotations

from functools import cached_property
from math import pi
from typing import TYPE_CHECKING

from polebook.book import account as accounts
from polebook.book.account import Account
from polebook.book.asked import ASKED, Built
from polebook.book.cautions import cautions
from polebook.book.lines import Line, lines
from polebook.book.miller import Bridge, bridges
from polebook.book.shares import owned
from polebook.book.sites import Site, equal_stage_pole, interstage_names, node_estimate, sites
from polebook.book.solution import Solution
from polebook.book.targets import Got, Target, targets
from polebook.book.verdict import verdict
from polebook.chain.model import Chain
from polebook.circuit import bias_cautions
from polebook.problem import Problem
from polebook.solve.fold import fold

if TYPE_CHECKING:
    from polebook.book.delay import Spread
    from polebook.book.levels import Levels
    from polebook.book.leverage import Leverage
    from polebook.book.noise import Noise
    from polebook.book.noise_band import Band, Pieces
    from polebook.book.poles import Resolved, Root
    from polebook.book.pulse import Pulse, Sag
    from polebook.circuit.bias_rails import Rails
    from polebook.circuit.build import Circuit


class Ledger:
    """All figures of a chain. A ledger computes what is asked, once.

    built  the yield as it was handed in: many chains tell it, not this one
    """

    def __init__(self, chain: Chain, made: Circuit | None = None) -> None:
        """`made` is the chain's circuit where it is at hand."""
        self.chain = chain
        self.built = Built()
        self.solution = Solution(chain, made)

    def hand(self, built: Built) -> None:
        """Takes the yield in; what was judged without it is judged anew."""
        self.built = built
        for judged in ("targets", "verdict"):
            self.__dict__.pop(judged, None)

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
        if hz is None or not self.judged or not self.solution.told_at(hz):
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
        """What moving a part, a card's figure or a stated current does to gain, edges and noise."""
        from polebook.book.leverage import leverage  # deferred: an audit asks for none of these three, 3 ms sooner

        return leverage(self.solution, self.lower_hz, self.upper_hz, self.noise)

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
    def rails(self) -> Rails:
        """Every current out of the rails."""
        from polebook.circuit.bias_rails import rails  # deferred: an audit without a target for it does not ask

        return rails(self.chain, self.solution.circuit.plan)

    @property
    def supply_current(self) -> float | None:
        """A of the rail that gives or takes most; None without a rail, or where a current is not known."""
        current = self.rails.current(self.rails.greater) if self.rails.greater else None
        return None if current is None else abs(current)

    @cached_property
    def levels(self) -> Levels | None:
        """Signal and clip level from node to node; None where the chain is not stable."""
        from polebook.book.levels import Levels  # deferred with the rails

        return Levels(self.solution) if self.judged else None

    @cached_property
    def noise(self) -> Noise | None:
        """What the chain's sources of noise make of its signal; None where the chain is not stable."""
        from polebook.book.noise import Noise  # deferred with the rails

        return Noise(self.solution, self.reference_hz, self.upper_hz) if self.judged else None

    @property
    def input_noise(self) -> float | None:
        """Noise of the noise band referred to the input, V or A rms."""
        return self.noise.input_rms if self.noise else None

    def noise_at(self, node: str) -> float | None:
        """Noise of the noise band at an interstage node, V rms."""
        return self.noise_at_nodes[node][0] if self.noise else None

    @cached_property
    def noise_at_nodes(self) -> dict[str, tuple[float | None, Pieces, Band]]:
        """Interstage node -> its noise, V rms, what its square is made of, its band; nothing where it is not stable."""
        names = interstage_names(self.solution.circuit.layout)
        if not self.noise:
            return {}
        found = self.noise.at_nodes(list(names))
        return dict(zip(names.values(), zip(found.rms, found.pieces, found.bands, strict=True), strict=True))

    @cached_property
    def pulse(self) -> Pulse:
        """Step response of the upper network, or why there is none."""
        from polebook.book.pulse import pulse  # deferred: an audit without a target for it does not ask

        return pulse(self.solution)

    @cached_property
    def sag(self) -> Sag:
        """Sag of a pulse of the target's length, or why there is none."""
        from polebook.book.pulse import sag  # deferred with the step response

        return sag(self.solution, self.chain.get("target.pulse"))

    @cached_property
    def delay_s(self) -> float | None:
        """Group delay at the reference frequency."""
        from polebook.book.delay import delay_at  # deferred with the step response

        return delay_at(self.solution, self.reference_hz) if self.judged else None

    @cached_property
    def delays(self) -> Spread | None:
        """Greatest and least group delay between the edges; None without a band."""
        from polebook.book.delay import spread  # deferred with the step response

        clean = self.judged and self.solution.band.clean
        return spread(self.solution, self.lower_hz, self.upper_hz) if clean else None

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
            band.peaking_db if band else 0.0, not self.judged, bool(band and band.clean),
            lambda name, want: ASKED[name](self, want)))

    @cached_property
    def verdict(self) -> str:
        """What limits the chain now, and by which mechanism."""
        return verdict(self)

    @cached_property
    def cautions(self) -> list[Problem]:
        from polebook.book import level_cautions  # deferred with the levels

        circuit = self.solution.circuit
        return [*bias_cautions.cautions(circuit.plan, self.chain, dict(circuit.points)),
                *cautions(self.solution, self.judged), *level_cautions.cautions(self)]


def ledger(chain: Chain) -> Ledger:
    """The ledger of a chain. Raises ProblemsFound where it has none (nothing holds a node, a figure is missing)."""
    return Ledger(chain)
