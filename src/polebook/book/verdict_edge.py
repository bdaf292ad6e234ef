"""What limits an edge: the part or the node that owns it, how it comes to that, and the part that would mend it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from polebook.book.verdict_how import how, loop_of
from polebook.book.verdict_lever import lever
from polebook.book.verdict_words import figure, listed, loss, number, per_cent, sentences, stated

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.sites import Site

BESIDE = 0.6  # share of the greatest owner's from which another one is named with it
OVER = 1.2  # share from which a part is told with the one that holds against it
ALONE = 0.45  # share from which one part is to blame, not the sum
NEAR = 2.5  # poles within this many times the lowest one add up
TRUST = 0.2  # share by which the node estimate may miss the exact edge and still tell how it comes about


@dataclass(frozen=True, slots=True)
class Limit:
    """What limits one end of the band, in clauses.

    owns, how  who owns it, and by which way it does
    end        "upper" or "lower"
    owner      the part that owns most of it
    called     its name where what would mend the edge has to name it, else "it"
    beside     the owner's name where other parts are named beside it, else ""
    together   what they do to each other
    few        fewer words for `owns`, "" where there are none
    """

    owns: str
    how: str
    end: str
    owner: int
    called: str = "it"
    beside: str = ""
    together: str = ""
    few: str = ""

    def told(self, short: bool = False) -> str:
        """Owner and, unless `short`, way as sentences, the first without a capital."""
        if short:
            return f"{self.few or self.owns}."
        if self.together:
            return f"{self.owns}; {self.together}."
        its = f"{self.beside}'s" if self.beside else "its"
        return f"{self.owns}. {sentences(f'{its} {self.how}' if self.how else '')}".rstrip()

    def mend(self, of: Ledger) -> str:
        """What would move the edge."""
        return lever(of, self.end, self.owner, self.called)

    def brief(self, short: bool = False) -> str:
        """Owner and, unless `short`, way in one clause."""
        if short:
            return self.few or self.owns
        if self.together:
            return f"{self.owns}; {self.together}"
        return f"{self.owns}, its {self.how}" if self.how and not self.beside else self.owns


def ranked(of: Ledger, end: str) -> list[tuple[int, float]]:
    """(part number, share) of the parts that hold an edge back, the greatest owner first."""
    shares = of.owns_upper if end == "upper" else of.owns_lower
    return sorted(((k, share) for k, share in shares.items() if share > 0), key=lambda pair: -pair[1])


def name_of(of: Ledger, index: int) -> str:
    part = of.solution.circuit.layout.parts[index]
    return f"{part.stage}.{part.name}"


def limit(of: Ledger, end: str) -> Limit | None:
    """What limits the "upper" or "lower" edge; None where the chain has no such edge, or nothing that owns it."""
    owners = ranked(of, end)
    if not owners:
        return None
    first, share = owners[0]
    name, clause = name_of(of, first), how(of, first, end)
    poles = alike(of) if end == "upper" and share < ALONE else []
    if poles:
        return Limit(_adding(of, poles), "", end, first, name, few=f"{number(len(poles))} poles add up")
    node = _node(of, clause) if end == "upper" and share < ALONE else ""
    if node:
        clause = clause.partition(", on ")[0]  # the node's resistance is told
        return Limit(f"{node}; {name} owns the most, {per_cent(share)}", clause, end, first)
    named = [pair for pair in owners if pair[1] >= BESIDE * share][:3]
    called = "it" if clause else name
    if share > OVER:
        return Limit(f"{name} owns {per_cent(share)}{_against(of, end)}", clause, end, first, called, name)
    if len(named) == 1:
        part = "all of it" if round(100 * share) >= 99 else per_cent(share)
        return Limit(f"{name} owns {part}", clause, end, first)
    owns = listed([f"{name_of(of, k)}{' owns' if k == first else ''} {per_cent(s)}" for k, s in named])
    together = _together(of, [k for k, _ in named])
    if together:
        return Limit(owns, "", end, first, name, name, together)
    kinds = {of.solution.circuit.layout.parts[k].type for k, _ in named}
    lead = "corners add up, " if share < ALONE and "L" not in kinds else ""
    few = f"{lead}{name} owns {per_cent(share)}"
    return Limit(f"{lead}{owns}", clause, end, first, called, name, few=few)


def _together(of: Ledger, named: list[int]) -> str:
    """What parts that share an edge do to each other: one op-amp's loop, or a coil and a capacitor of one stage."""
    loops, parts = {loop_of(of, k) for k in named}, [of.solution.circuit.layout.parts[k] for k in named]
    loop = loops.pop()
    if loop and not loops:
        rf = of.chain.get(f"{loop}.rf")
        return f"they make one loop through rf, {stated(rf, 'Ω')}" if rf else "they make one loop"
    if len(parts) == 2 and {part.type for part in parts} == {"C", "L"} and parts[0].stage == parts[1].stage:
        return "they ring together"
    return ""


def _against(of: Ledger, end: str) -> str:
    """The part that holds an edge up most, where another one owns more than all of it."""
    shares = of.owns_upper if end == "upper" else of.owns_lower
    least = min(shares, key=lambda k: shares[k])
    return f"; {name_of(of, least)} holds against it with {per_cent(-shares[least])}" if shares[least] < 0 else ""


def alike(of: Ledger) -> list[Site]:
    """Sites whose poles lie together and shrink the band between them; none where one of them is to blame."""
    sites = sorted((site for site in of.sites if site.pole_hz is not None), key=lambda site: site.pole_hz or 0.0)
    near = [site for site in sites if (site.pole_hz or 0.0) <= NEAR * (sites[0].pole_hz or 0.0)]
    exact, estimate = of.upper_hz, of.node_upper_hz
    if len(near) < 3 or not exact or not estimate or abs(estimate / exact - 1.0) > TRUST:
        return []
    return near


def _adding(of: Ledger, poles: list[Site]) -> str:
    left = per_cent(of.shrinkage or 0.0)
    lowest, highest = (figure(site.pole_hz, "Hz") for site in (poles[0], poles[-1]))
    if lowest == highest:
        return f"{number(len(poles))} poles at {lowest} add up, and leave {left} of it"
    span = f"{lowest} ({poles[0].name}) to {highest} ({poles[-1].name})"
    return f"{number(len(poles))} poles add up, {span}, and leave {left} of the lowest"


def _node(of: Ledger, clause: str) -> str:
    """One node that loses most of what is lost, where no part owns most of it; the clause tells of the node."""
    account = of.upper_account
    known = {name: db for name, db in account.lost.items() if db is not None}
    total = account.total_db
    if not known or not total or total <= 0.0:
        return ""
    name = max(known, key=lambda key: known[key])
    site = next((site for site in of.sites if site.name == name), None)
    here = f" at {name}," in f"{clause}," or f" at {name} (" in clause
    if known[name] < 0.6 * total or site is None or not site.ohm or not site.farad or not site.pole_hz or not here:
        return ""
    load = f"{figure(site.farad, 'F')} on {figure(site.ohm, 'Ω')}"
    if known[name] > total:
        return f"{name} alone loses {loss(known[name])}, with {load}"
    return f"{name} loses {loss(known[name]).removesuffix(' dB')} of the {loss(total)}, with {load}"
