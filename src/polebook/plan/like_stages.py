"""A chain of n like stages: copies of one stage of a file between the file's source and load, made in memory.

Device stages are coupled by capacitors, so that no copy takes another's bias away: where the stage, or the load behind
it, has no `couple`, it gets one, far below the band. A stage that took its bias from the one before it keeps the
quiescent current that it has in the file.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from math import pi
from types import MappingProxyType

from polebook import series
from polebook.book.ledger import Ledger, ledger
from polebook.book.solution import Solution
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain, Stage
from polebook.chain.suggest import listed, nearest
from polebook.plan.couple_end import ohm_seen
from polebook.quantity import DIMENSIONS, engineering
from polebook.refusal import quoted
from polebook.stages.base import GROUP, slot_key
from polebook.stages.registry import KINDS

FAR = 100.0  # times below the lower edge that a coupling which comes in has its corner
_WITHOUT_LOWER = 1e6  # of the upper edge, where the file's chain has no lower one
_FIRST_FARAD = 1e-6  # until it is known what it sees
_SAME = 0.01  # share by which a copy's current may differ from the file's without a word


@dataclass(frozen=True, slots=True)
class Like:
    """What the copies are made from.

    chain  source, one stage `name`, load
    by     the stage's key that is scaled where a gain is wanted, "" for none; `why_not` then tells why
    notes  sentences on what was done to the stage so that its copies have a bias
    """

    chain: Chain
    name: str
    by: str
    why_not: str
    notes: tuple[str, ...]

    @property
    def stage(self) -> Stage:
        return self.chain.stages[0]

    @property
    def unit(self) -> str:
        """Of the key's value."""
        card = self.chain.cards.get(self.stage.device)
        param = KINDS[self.stage.kind].keys(card.family if card else "").get(self.by)
        return DIMENSIONS[param.dimension].unit if param and param.dimension in DIMENSIONS else ""

    @property
    def now(self) -> float | None:
        """The key's value, SI."""
        return self.chain.get(f"{self.name}.{self.by}") if self.by else None


def like(chain: Chain, name: str, by: str = "") -> Like:
    """The stage `name` of `chain` alone between source and load, ready to be copied.

    by  the key to scale; "": the output resistor of a device, the feedback resistor of an op-amp
    Raises ProblemsFound where there is no such stage or key, or where copies of the kind make no sense.
    """
    stage = _stage(chain, name)
    if stage.kind == "transimpedance":
        raise PathRefused(f"{name} can't be copied in a row",
                          "a transimpedance stage takes a current, and a copy before it gives a voltage",
                          "take another stage as template")
    family = chain.cards[stage.device].family if stage.device else ""
    keys = {path: value for path, value in chain.numbers.items() if _kept(chain, path, name)}
    one = replace(chain, stages=(replace(stage, left_out=False),), numbers=MappingProxyType(keys),
                  given=frozenset(path for path in chain.given if path in keys), benches=())
    notes: list[str] = []
    if family in GROUP:
        of = ledger(chain)
        one = _biased(of, one, stage, family, notes)
        one = _coupled(of, one, name, notes)
        notes += _running(of, one, stage)
    key, why_not = _key(one, stage, family, by)
    return Like(one, name, key, why_not, tuple(notes))


def copies(of: Like, count: int, factor: float = 1.0) -> Chain:
    """`count` copies, the key `of.by` of each times `factor`. Nothing is judged anew."""
    names = [of.name if at == 0 else f"{of.name}_{at + 1}" for at in range(count)]
    prefix = f"{of.name}."
    own = {path.removeprefix(prefix): value for path, value in of.chain.numbers.items() if path.startswith(prefix)}
    given = [path.removeprefix(prefix) for path in of.chain.given if path.startswith(prefix)]
    if of.by:
        own[of.by] *= factor
    numbers = {**of.chain.numbers, **{f"{name}.{key}": value for name in names for key, value in own.items()}}
    return replace(of.chain, stages=tuple(replace(of.stage, name=name) for name in names),
                   numbers=MappingProxyType(numbers),
                   given=of.chain.given | {f"{name}.{key}" for name in names for key in given})


def _stage(chain: Chain, name: str) -> Stage:
    for stage in chain.stages:
        if stage.name == name:
            return stage
    names = [stage.name for stage in chain.stages]
    near = nearest(name, names)
    raise PathRefused(f"there is no stage {quoted(name)}", f"the stages are {listed(names)}",
                      f"did you mean {near}?" if near else "name one of them")


def _kept(chain: Chain, path: str, name: str) -> bool:
    """Whether a number goes with the copies: not those of other stages, allotments and benches."""
    owner, _, key = path.partition(".")
    return owner not in {stage.name for stage in chain.stages if stage.name != name} | {"bench"} and key != "allot"


def _put(chain: Chain, path: str, value: float) -> Chain:
    return replace(chain, numbers=MappingProxyType({**chain.numbers, path: value}), given=chain.given | {path})


def _biased(of: Ledger, one: Chain, stage: Stage, family: str, notes: list[str]) -> Chain:
    """With the current of the file stated, where the stage has it from the one before."""
    point = of.solution.circuit.points.get(stage.name)
    key = slot_key("current", family)
    if point is None or point.current is None or of.chain.get(f"{stage.name}.couple") or one.get(f"{stage.name}.{key}"):
        return one
    amps = float(point.current)
    notes.append(f"{stage.name} hangs on the stage before it for d.c.; its copies keep the "
                 f"{engineering(amps, 'A')} that it has in the file")
    one = _put(one, f"{stage.name}.{key}", amps)
    across = slot_key("across", family)
    if point.across is not None and not one.get(f"{stage.name}.{across}"):
        alone = _put(one, f"{stage.name}.couple", _FIRST_FARAD)
        got = ledger(alone).solution.circuit.points[stage.name].across
        if got is None:
            one = _put(one, f"{stage.name}.{across}", float(point.across))
    return one


def _coupled(of: Ledger, one: Chain, name: str, notes: list[str]) -> Chain:
    """With the couplings that are not there and that keep every bias its own."""
    wanted = [path for path, lacks in ((f"{name}.couple", not one.get(f"{name}.couple")),
                                       ("load.couple", bool(one.get("load.resistance")) and not one.get("load.couple")))
              if lacks]
    if not wanted:
        return one
    edge = of.lower_hz or one.get("target.lower") or (of.upper_hz or _WITHOUT_LOWER) / _WITHOUT_LOWER
    for path in wanted:
        one = _put(one, path, _FIRST_FARAD)
    solution = Solution(copies(Like(one, name, "", "", ()), 2))
    for path in wanted:
        sees = [ohm for of_load, ohm in _couplings(solution) if of_load == (path == "load.couple")]
        farad = series.at_least(FAR / (2 * pi * edge * min(sees)), "E6") if sees else _FIRST_FARAD
        one = _put(one, path, farad)
        notes.append(f"{path} is put in with {engineering(farad, 'F', 2)}, so that each copy has its own bias; its "
                     f"corner is a {FAR:g}th of {engineering(edge, 'Hz')} or less")
    return one


def _couplings(solution: Solution) -> Iterator[tuple[bool, float]]:
    """(whether it is the load's, ohms that it sees) of every coupling but the source's."""
    for index, part in enumerate(solution.circuit.layout.parts):
        if part.name == "couple" and part.segment and (ohm := ohm_seen(solution, index)) is not None:
            yield part.stage == "load", ohm


def _running(of: Ledger, one: Chain, stage: Stage) -> Iterator[str]:
    """Where a copy's current is another than in the file."""
    before, after = (points.get(stage.name) for points in (of.solution.circuit.points,
                                                            Solution(one).circuit.points))
    if before is None or after is None or before.current is None or after.current is None:
        return
    if abs(after.current - before.current) > _SAME * abs(before.current):
        yield (f"a copy runs at {engineering(float(after.current), 'A')}; {stage.name} in the file, with its "
               f"neighbours, at {engineering(float(before.current), 'A')}")


def _key(one: Chain, stage: Stage, family: str, by: str) -> tuple[str, str]:
    """(the key to scale, "") or ("", why there is none). Raises PathRefused where `by` is no number of the stage."""
    if by:
        own = [path.partition(".")[2] for path in one.given if path.startswith(f"{stage.name}.")]
        if by not in own:
            raise PathRefused(f"{stage.name} gives no number {quoted(by)}", f"it gives {listed(sorted(own))}",
                              "name one of them")
        return by, ""
    topology = KINDS[stage.kind].topology
    if family in GROUP and topology != "follower":
        key = slot_key("r_out", family)
        if one.get(f"{stage.name}.{key}"):
            return key, ""
        return "", f"{stage.name} has no {key} to make its gain by"
    if topology in ("noninverting", "inverting_opamp") and one.get(f"{stage.name}.rf"):
        return "rf", ""
    return "", f"no part of {stage.name} makes its gain" if topology != "follower" else \
        f"{stage.name} is a follower, and followers make no gain"
