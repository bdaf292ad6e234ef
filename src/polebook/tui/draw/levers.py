"""What moves the chain's figures: parts, card figures, stated currents, ranked by what 1 % of each does to one."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import isfinite
from typing import TYPE_CHECKING

from polebook.book.ledger import Ledger
from polebook.chain.model import Chain
from polebook.chain.tables import SECTIONS
from polebook.devices.registry import FAMILIES
from polebook.param import Param
from polebook.quantity import DIMENSIONS
from polebook.report.figures import UNIT_OF_TYPE
from polebook.stages.ladder import arm_part
from polebook.stages.registry import KINDS
from polebook.tui.draw.scene import Scene

if TYPE_CHECKING:
    from polebook.plan.sweep import Point

NOTHING = 1e-6  # per cent by one per cent: a key whose every leverage is less moves nothing
_LISTS = {"pole": "poles", "lower": "lower_poles"}
_ARMS = {"r": "Ω", "c": "F", "l": "H"}


@dataclass(frozen=True, slots=True)
class Aim:
    """A figure by which the page ranks, and that a sweep follows.

    key     among the leverages, and in the names that `working` takes
    target  key of [target] that it is judged by
    name    the ledger's, of a figure that a sweep has to be asked for; unit  of one that is none of AIMS
    """

    key: str
    word: str
    short: str
    target: str
    today: Callable[[Ledger], float | None]
    swept: Callable[[Point], float | None]
    name: str = ""
    unit: str = ""


AIMS: tuple[Aim, ...] = (
    Aim("gain", "gain", "gain", "gain", lambda of: of.solution.gain, lambda point: point.gain),
    Aim("lower_edge", "lower edge", "lower", "lower", lambda of: of.lower_hz, lambda point: point.lower_hz),
    Aim("upper_edge", "upper edge", "upper", "upper", lambda of: of.upper_hz, lambda point: point.upper_hz),
    Aim("noise", "input noise", "noise", "noise", lambda of: of.noise.density if of.noise else None,
        lambda point: point.noise),
)
"""In the order of the columns. One more is one row more here."""


def _also(key: str, word: str, short: str, target: str, unit: str, today: Callable[[Ledger], float | None]) -> Aim:
    name = f"overall.{key}"
    return Aim(key, word, short, target, today, lambda point: point.figures.get(name), name, unit)


ALSO: tuple[Aim, ...] = (
    _also("rise_time_s", "rise time", "rise", "rise", "s", lambda of: of.pulse.rise_time_s),
    _also("largest_source", "largest source that passes", "passes", "", "",
          lambda of: of.levels.largest_source if of.levels else None),
    _also("full_power_hz", "full-power bandwidth", "full power", "", "Hz",
          lambda of: of.levels.full_power_hz if of.levels else None),
    _also("supply_current_a", "supply current", "supply", "current", "A", lambda of: of.supply_current),
)
"""Figures without a leverage that a sweep can follow besides, one at a time. One more is one row more here."""


def followed(scene: Scene) -> tuple[Aim, ...]:
    """What a sweep follows: AIMS, and in the place of the last that does not rank the further figure, where one is."""
    also = next((one for one in ALSO if one.key == scene.view.lever.also), None)
    if also is None:
        return AIMS
    least = next(one for one in reversed(AIMS) if one is not aim(scene.view.lever.figure))
    return (*(one for one in AIMS if one is not least), also)


def aim(key: str) -> Aim:
    """The figure of that key; the upper edge where there is none of it."""
    return next((one for one in AIMS if one.key == key), AIMS[2])


@dataclass(frozen=True, slots=True)
class Mover:
    """Something that has leverage.

    name     as `working` has it: "Q5.rc", "device.N.beta"
    label    as it is shown: a card's figure is "N beta"
    sheet    the sheet that its key stands on
    key      its key there; of a device's own part "device"
    path     among the chain's numbers; "" for a device's own part
    known    whether `working` can account for its leverage
    moves    key of an AIM -> per cent that 1 % more of it moves the figure by; None without such a figure
    """

    name: str
    label: str
    sheet: str
    key: str
    path: str
    value: float
    unit: str
    role: str
    known: bool
    moves: Mapping[str, float | None]

    def on(self, figure: str) -> float | None:
        """Its leverage on a figure; None for none, or one beyond all bounds."""
        value = self.moves.get(figure)
        return value if value is not None and isfinite(value) else None


def ranked(scene: Scene) -> Sequence[Mover]:
    """Every part, and whatever else moves a figure, the greatest leverage on the chosen figure first."""
    return _ranked(scene.figures, aim(scene.view.lever.figure).key)


@lru_cache(maxsize=2)
def _ranked(of: Ledger, figure: str) -> Sequence[Mover]:
    def size(mover: Mover) -> float:
        found = mover.on(figure)
        return -1.0 if found is None else abs(found)

    return sorted(_movers(of), key=size, reverse=True)


def _movers(of: Ledger) -> Iterator[Mover]:
    lever, circuit = of.leverage, of.solution.circuit
    paths = arm_paths(of.chain)
    listed: set[tuple[str, str]] = set()
    for index, part in enumerate(circuit.layout.parts):
        if part.type == "gain":
            continue
        owner = part.stage, part.name
        listed.add(owner)
        path = paths.get(owner, _path(*owner))
        path = path if path in of.chain.numbers else ""
        yield Mover(".".join(owner), ".".join(owner), part.stage, _key(path) if path else "device", path,
                    circuit.network.values[index], UNIT_OF_TYPE.get(part.type, ""), part.role, True,
                    lever.parts.get(owner, lever.elements[index]))
    from polebook.book.noise_rows import parts as sources  # deferred: the first paint needs none of it

    for row in sources(of):
        owner = row["stage"], row["part"]
        listed.add(owner)
        path = _path(*owner) if _path(*owner) in of.chain.numbers else ""
        if _any(row["leverage"]):
            yield Mover(".".join(owner), ".".join(owner), owner[0], _key(path) if path else "device", path,
                        row["value"], UNIT_OF_TYPE[row["type"]], "", True, row["leverage"])
    for (stage, key), (value, moves) in lever.currents.items():
        yield Mover(f"{stage}.{key}", f"{stage}.{key}", stage, key, f"{stage}.{key}", value, "A", "", True, moves)
    for (stage, key), moves in lever.parts.items():
        path = f"{stage}.{key}"
        if (stage, key) not in listed and path in of.chain.numbers and _any(moves):
            yield Mover(path, path, stage, key, path, of.chain.numbers[path], unit_of(of.chain, path), "", False, moves)
    for (card, key), (value, moves) in lever.cards.items():
        if _any(moves):
            path = f"device.{card}.{key}"
            yield Mover(path, f"{card} {key}", f"device.{card}", key, path, value, unit_of(of.chain, path), "card",
                        True, moves)


def _any(moves: Mapping[str, float | None]) -> bool:
    return any(value is not None and abs(value) > NOTHING for value in moves.values())


def arm_paths(chain: Chain) -> dict[tuple[str, str], str]:
    """(stage, part) -> path of the parts of ladders."""
    return {(stage.name, arm_part(arm, key)[0]): f"{stage.name}.arms.{arm.number}.{key}"
            for stage in chain.stages for arm in stage.arms for key in arm.parts}


def _path(stage: str, name: str) -> str:
    """Where the value of a part would stand; a block's poles are numbered lists."""
    for word, key in _LISTS.items():
        if name.startswith(word) and name[len(word):].isdigit():
            return f"{stage}.{key}.{name[len(word):]}"
    return f"{stage}.{name}"


def _key(path: str) -> str:
    """A path within its sheet; of a list the whole of it, which is one key."""
    key = path.partition(".")[2]
    head, _, number = key.rpartition(".")
    return head if head in _LISTS.values() and number.isdigit() else key


def unit_of(chain: Chain, path: str) -> str:
    """Unit of a number of the file; "" for a plain one."""
    owner, _, key = path.rpartition(".")
    stem, _, list_of = owner.partition(".")
    if list_of.startswith("arms."):
        return _ARMS.get(key[-1:], "")
    if stem != "device" and list_of in _LISTS.values():
        return "Hz"
    params: Iterable[Param] = ()
    if stem == "device":
        params = FAMILIES[chain.cards[list_of].family] if list_of in chain.cards else ()
    elif owner in SECTIONS:
        params = SECTIONS[owner]
    elif (stage := next((one for one in chain.stages if one.name == owner), None)) is not None:
        params = KINDS[stage.kind].keys(chain.cards[stage.device].family if stage.device else "").values()
    dimension = next((param.dimension for param in params if param.key == key), "")
    return DIMENSIONS[dimension].unit if dimension in DIMENSIONS else ""


def chosen(scene: Scene, movers: Sequence[Mover]) -> int:
    """The row that is chosen: that of the name kept, else the first."""
    name = scene.view.lever.row
    return next((at for at, mover in enumerate(movers) if mover.name == name), 0)
