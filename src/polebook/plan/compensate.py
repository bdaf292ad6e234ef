"""The capacitor across a stage, and the one from its output to ground, that put an edge or a pole where it is wanted.

Each is solved on the whole chain, everything else being as the file has it; the one across also with a resistor in
series, which sends the zero that it brings away, or to the left onto the second pole.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator
from dataclasses import dataclass
from typing import Literal

from polebook import series
from polebook.book.ledger import Ledger, ledger
from polebook.book.poles import Root
from polebook.book.reach import within_reach
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain, Stage
from polebook.chain.read import parse
from polebook.chain.suggest import listed, nearest
from polebook.plan.compensate_figures import Figures, dominant_hz, figures, upper_poles, upper_zeros
from polebook.plan.compensate_resistor import Bridge, away, left
from polebook.plan.compensate_search import Figure, capacitor, changed, seen_ohm
from polebook.plan.compensate_words import unreached
from polebook.plan.compensate_zero import Brought, brought
from polebook.plan.proposal import Proposal, propose
from polebook.quantity import engineering
from polebook.refusal import quoted
from polebook.stages.registry import KINDS

Name = Literal["across", "away", "left", "ground"]
ACROSS = ("c_comp", "c_bridge", "cf")
RESISTOR, GROUND = "r_comp", "c_load"
ROUNDS = 12  # capacitor and resistor in turn
STILL = 1e-6  # neither moves by more
_SERIES = {"c": "capacitor", "r": "resistor", "l": "inductor"}


@dataclass(frozen=True, slots=True)
class Wanted:
    """What is wanted: the upper edge, or the pole of the upper network that lies nearest to 0, at hz."""

    what: Literal["edge", "pole"]
    hz: float

    @property
    def figure(self) -> Figure:
        return dominant_hz if self.what == "pole" else lambda of: of.upper_hz


@dataclass(frozen=True, slots=True)
class Option:
    """One way to have it.

    values   path -> SI value, solved; empty where there is no such way: `why`
    figures  with those values;  zeros  what the option's capacitor does to the stage's
    ohm, k   what its capacitor sees at midband, and the gain across it; None where it is no bridge
    on       the pole on which a zero was put, and its place among those of the upper network: 2 for the second
    bought   the nearest preferred values, verified as a file
    """

    name: str
    values: dict[str, float]
    figures: Figures | None = None
    zeros: Brought | None = None
    ohm: float | None = None
    k: float | None = None
    on: tuple[Root, int] | None = None
    bought: Proposal | None = None
    bought_figures: Figures | None = None
    why: str = ""


@dataclass(frozen=True, slots=True)
class Task:
    """A chain and what is wanted of one of its stages. beta: of the loop that it stands in.

    across  path of the capacitor across the stage, "" where its kind has none; resistor likewise
    """

    text: str
    file: str
    chain: Chain
    stage: Stage
    wanted: Wanted
    beta: float | None
    across: str
    resistor: str
    today: Ledger

    @property
    def ground(self) -> str:
        return f"{self.stage.name}.{GROUND}"

    @property
    def names(self) -> list[Name]:
        """The ways that are tried."""
        resisted: list[Name] = ["away", "left"] if self.resistor else []
        return ["across", *resisted, "ground"]


def task(text: str, file: str, stage: str, wanted: Wanted, beta: float | None = None) -> Task:
    """Raises ProblemsFound where the file has a fault, or no such stage."""
    chain = parse(text, file)
    of = named_stage(chain, stage)
    keys = keys_of(chain, of)
    across = next((f"{of.name}.{key}" for key in ACROSS if key in keys), "")
    resistor = f"{of.name}.{RESISTOR}" if RESISTOR in keys else ""
    return Task(text, file, chain, of, wanted, beta, across, resistor, ledger(chain))


def named_stage(chain: Chain, name: str) -> Stage:
    """The stage of that name. Raises PathRefused where there is none, or it is left out."""
    names = [stage.name for stage in chain.stages]
    found = next((stage for stage in chain.stages if stage.name == name), None)
    if found is None:
        near = nearest(name, names)
        raise PathRefused(f"there is no stage {quoted(name)}", f"the stages are {listed(names)}",
                          f"did you mean {near}?" if near else "name one of them")
    if found.left_out:
        raise PathRefused(f"{name} is left out", "it stands in the file, and not in the chain",
                          f"take it in: polebook unset FILE {name}.left_out")
    return found


def keys_of(chain: Chain, stage: Stage) -> frozenset[str]:
    """The keys that a stage may have."""
    family = chain.cards[stage.device].family if stage.device else ""
    return frozenset(KINDS[stage.kind].keys(family))


def options(of: Task, stop: Callable[[], bool] = lambda: False, only: Collection[str] = ()) \
        -> Iterator[tuple[int, int, Option]]:
    """(done, total, option) for each way in turn, or for those named in `only`; ends early once `stop` says so."""
    names = [name for name in of.names if not only or name in only]
    plain: Option | None = None
    for at, name in enumerate(names):
        if stop():
            return
        with within_reach(of.chain):
            if name == "ground":
                option = _one(of, name, of.ground)
            else:
                plain = plain or _across(of)
                option = plain if name == "across" else _resisted(of, name, plain)
        yield at + 1, len(names), option


def _across(of: Task) -> Option:
    return _one(of, "across", of.across) if of.across else Option("across", {}, why=_no_across(of.stage))


def _no_across(stage: Stage) -> str:
    article = "an" if stage.kind[0] in "aeiou" else "a"
    return f"{article} {stage.kind} has no capacitor from its output back to its input"


def _one(of: Task, name: Name, path: str) -> Option:
    """The capacitor at `path` alone."""
    found = capacitor(of.chain, path, of.wanted.hz, of.wanted.figure)
    if found.value is None:
        return Option(name, {}, why=unreached(path, found, of.wanted.what, of.wanted.hz))
    return _whole(of, name, {path: found.value})


def _whole(of: Task, name: Name, values: dict[str, float]) -> Option:
    """An option with all that is to be told of it."""
    path = next(iter(values))
    chain = changed(of.chain, values)
    now = ledger(chain)
    without = ledger(changed(of.chain, {path: 0.0}))
    zeros = [upper_zeros(one, of.stage.name) for one in (now, without)]
    proposal = propose(of.text, of.file, {path: preferred(of.chain, path, value) for path, value in values.items()},
                       label(of, name), of.today)
    return Option(
        name, values, figures(now, of.stage.name, of.beta),
        None if zeros[0] is None or zeros[1] is None else brought(zeros[0], zeros[1]), seen_ohm(chain, path),
        _gain_across(now, path), _met(now, of.stage.name) if name == "left" else None,
        proposal, figures(proposal.after, of.stage.name, of.beta))


def _met(now: Ledger, stage: str) -> tuple[Root, int] | None:
    """The pole that lies nearest to a real zero of the stage on the left, and its place."""
    zeros = [z.real for z in upper_zeros(now, stage) or () if not z.imag and z.real < 0.0]
    poles = upper_poles(now)
    if not zeros or not poles:
        return None
    at = min(range(len(poles)), key=lambda k: abs(poles[k].value - max(zeros)))
    return poles[at], at + 1


def _gain_across(of: Ledger, path: str) -> float | None:
    stage, _, key = path.partition(".")
    return next((bridge.k for bridge in of.bridges.get(stage, ()) if bridge.part == key), None)


def preferred(chain: Chain, path: str, value: float) -> float:
    """The nearest value of the file's series for such a part."""
    return series.nearest(value, chain.preferred[_SERIES[path.rpartition(".")[2][0]]])


def label(of: Task, name: str) -> str:
    """Of the edit, as it stands among the steps of undo."""
    what = "upper edge" if of.wanted.what == "edge" else "dominant pole"
    return f"compensate {of.stage.name}, {name}: {what} at {engineering(of.wanted.hz, 'Hz')}"


def _resisted(of: Task, name: Name, plain: Option) -> Option:
    """The capacitor across with a resistor in series: both in turn until neither moves."""
    if not plain.values:
        return Option(name, {}, why=plain.why)
    farad, ohm = plain.values[of.across], 0.0
    for _ in range(ROUNDS):
        bridge = Bridge(of.chain, of.stage.name, of.across, of.resistor, farad)
        new, why = away(bridge) if name == "away" else left(bridge, ohm)
        if new is None:
            return Option(name, {}, why=why)
        moved = abs(new - ohm) > STILL * new
        ohm = new
        found = capacitor(changed(of.chain, {of.resistor: ohm}), of.across, of.wanted.hz, of.wanted.figure, farad)
        if found.value is None:
            return Option(name, {}, why=unreached(of.across, found, of.wanted.what, of.wanted.hz))
        moved = moved or abs(found.value - farad) > STILL * farad
        farad = found.value
        if not moved:
            break
    return _whole(of, name, {of.across: farad, of.resistor: ohm})
