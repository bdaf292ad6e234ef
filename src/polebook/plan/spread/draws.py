"""What is drawn for a built chain: which numbers of the file are off, by how much at most, and which go together."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType

from polebook.chain.model import Card, Chain, Stage
from polebook.chain.stage_lists import tolerance_keys
from polebook.devices.registry import FAMILIES
from polebook.plan.spread import streams
from polebook.plan.spread.normal import Array, clipped_deviation
from polebook.stages.registry import KINDS
from polebook.stages.stamper import Value

SORTS: Mapping[str, str] = MappingProxyType(
    {"resistance": "resistor", "capacitance": "capacitor", "inductance": "inductor"})
DEVICE_KEYS = frozenset({"k", "idss", "vgs_th", "vgs_off", "gm", "mu", "gbw", "a0", "ft"})
"""Keys of a card that [tolerance] device spreads, beside all its capacitances."""
_ARM_SORTS = {"r": "resistor", "l": "inductor", "c": "capacitor"}
NORMAL, UNIFORM = "normal", "uniform"
DEVIATION: Mapping[str, float] = {NORMAL: clipped_deviation(streams.SIGMAS) / streams.SIGMAS, UNIFORM: 3.0**-0.5}
"""Standard deviation of a draw between -1 and 1, by shape."""
TEMPERATURE = "supply.temperature"


@dataclass(frozen=True, slots=True)
class Draw:
    """One thing that is off in a built chain, by u between -1 and 1.

    name     of its stream: a path of the file; "device.D.beta@Q1" for what the device of Q1 is off beside its card
    sort     resistor, capacitor, inductor, device, beta, matching, supply; "own" for a tolerance that only the stage
             states; "temperature"
    share    u = 1 multiplies every one of `numbers` by 1 + share; of the temperature it adds `share` to `middle`, °C
    numbers  paths of the spread chain
    """

    name: str
    sort: str
    share: float
    numbers: tuple[str, ...]
    shape: str = NORMAL
    middle: float | None = None

    @property
    def deviation(self) -> float:
        """Standard deviation of u."""
        return DEVIATION[self.shape]

    def off(self, seed: int, first: int, count: int) -> Array:
        """u of builds `first` to `first + count`."""
        draw = streams.clipped_normal if self.shape == NORMAL else streams.uniform
        return draw(seed, self.name, first, count)


@dataclass(frozen=True, slots=True)
class Drawn:
    """A chain in which every device has a card of its own where devices of one card differ, and its draws."""

    chain: Chain
    draws: tuple[Draw, ...]

    def values(self, off: Mapping[str, Value]) -> dict[str, Value]:
        """The drawn numbers, by path, where each draw is off by `off`, by name; a draw that is not in it is not off."""
        found: dict[str, Value] = {}
        for draw in self.draws:
            if draw.name in off:
                for path in draw.numbers:
                    before: Value = found.get(path, self.chain.numbers[path])
                    moved: Value = off[draw.name] * draw.share
                    found[path] = (moved + 1.0) * before if draw.middle is None else moved + draw.middle
        return found

    def built(self, seed: int, first: int, count: int) -> dict[str, Array]:
        """The drawn numbers of builds `first` to `first + count`."""
        return self.values({draw.name: draw.off(seed, first, count) for draw in self.draws})

    def tighter(self, name: str, times: float) -> Drawn:
        """The same with one draw's reach multiplied by `times`; its stream stays as it was."""
        return replace(self, draws=tuple(
            replace(draw, share=draw.share * times) if draw.name == name else draw for draw in self.draws))


def drawn(chain: Chain, temperature: tuple[float, float] | None = None) -> Drawn:
    """All draws of a chain, parts in the file's order; `temperature` is the range of the surroundings in °C."""
    shape = chain.spread_shape
    spread = _own_cards(chain) if chain.numbers.get("tolerance.matching") else chain
    draws = [*_parts(chain), *_cards(chain), *_matching(spread)]
    draws += [Draw(path, "supply", chain.numbers["tolerance.supply"], (path,))
              for path in ("supply.positive", "supply.negative") if chain.get(path)]
    found = [replace(draw, shape=shape) for draw in draws if draw.share]
    if temperature is not None and temperature[0] != temperature[1]:
        low, high = temperature
        found.append(Draw(TEMPERATURE, "temperature", 0.5 * (high - low), (TEMPERATURE,), UNIFORM, 0.5 * (low + high)))
    return Drawn(spread, tuple(found))


def _parts(chain: Chain) -> Iterator[Draw]:
    """Every R, C and L of source, stages and load; of a block's data sheet also what its stage gives a tolerance."""
    yield from _end(chain, "source")
    for stage in chain.stages:
        if not stage.left_out:
            yield from _of_stage(chain, stage)
    yield from _end(chain, "load")


def _end(chain: Chain, owner: str) -> Iterator[Draw]:
    for key, sort in (("resistance", "resistor"), ("capacitance", "capacitor"), ("couple", "capacitor")):
        yield from _part(chain, owner, key, sort)


def _of_stage(chain: Chain, stage: Stage) -> Iterator[Draw]:
    family = chain.cards[stage.device].family if stage.device else ""
    kind = KINDS[stage.kind]
    dimensions = {key: param.dimension for key, param in kind.keys(family).items()}
    for key in tolerance_keys(kind, family, stage.arms):
        sort = SORTS.get(dimensions.get(key, ""), "") if key in dimensions else _ARM_SORTS[key[-1]]
        if dimensions.get(key) == "quantities":
            count = stage.poles if key == "poles" else stage.lower_poles
            for k in range(1, count + 1):
                yield from _part(chain, stage.name, f"{key}.{k}", "", f"{stage.name}.tolerance.{key}")
        else:
            yield from _part(chain, stage.name, key, sort)


def _part(chain: Chain, owner: str, key: str, sort: str, stated: str = "") -> Iterator[Draw]:
    """The draw of one number, where it stands; by the tolerance of its own, else by that of its sort."""
    path = f"{owner}.{key}"
    if chain.get(path):  # 0: the part is not there
        own = chain.get(stated or f"{owner}.tolerance.{key}")
        if own is not None:
            yield Draw(path, sort or "own", own, (path,))
        elif sort:
            yield Draw(path, sort, chain.numbers[f"tolerance.{sort}"], (path,))


def devices(chain: Chain) -> Iterator[tuple[str, str]]:
    """(where, card) of every device that is built in; a cascode's upper one as NAME_upper."""
    for stage in chain.stages:
        if stage.device and not stage.left_out:
            yield stage.name, stage.device
            if stage.kind == "cascode":
                yield f"{stage.name}_upper", stage.upper or stage.device


def _spread_keys(chain: Chain, card: Card) -> Iterator[tuple[str, str]]:
    """(key, sort) of a card's figures that are off."""
    for param in FAMILIES[card.family]:
        if chain.get(f"device.{card.name}.{param.key}"):
            if param.key == "beta":
                yield "beta", "beta"
            elif param.key in DEVICE_KEYS or param.dimension == "capacitance":
                yield param.key, "device"


def _cards(chain: Chain) -> Iterator[Draw]:
    """What all devices of a card are off together."""
    used: dict[str, list[str]] = {}
    for where, card in devices(chain):
        used.setdefault(card, []).append(where)
    apart = bool(chain.numbers.get("tolerance.matching"))
    for name, places in used.items():
        cards = [own_card(name, where) for where in places] if apart else [name]
        for key, sort in _spread_keys(chain, chain.cards[name]):
            yield Draw(f"device.{name}.{key}", sort, chain.numbers[f"tolerance.{sort}"],
                       tuple(f"device.{card}.{key}" for card in cards))


def own_card(card: str, where: str) -> str:
    """Name of the card that the device of one place has to itself."""
    return f"{card}@{where}"


def _matching(spread: Chain) -> Iterator[Draw]:
    """What each device is off beside its card, figure by figure; `spread` has a card for each."""
    share = spread.numbers.get("tolerance.matching")
    for where, card in devices(spread) if share else ():
        for key, _ in _spread_keys(spread, spread.cards[card]):
            name = f"device.{card.rpartition('@')[0]}.{key}@{where}"
            yield Draw(name, "matching", share or 0.0, (f"device.{card}.{key}",))


def _own_cards(chain: Chain) -> Chain:
    """The chain with a card for each device, all as their common one is."""
    cards: dict[str, Card] = {}
    numbers, given, stages = dict(chain.numbers), set(chain.given), []
    for where, card in devices(chain):
        own = own_card(card, where)
        cards[own] = replace(chain.cards[card], name=own)
        for path in [path for path in chain.numbers if path.startswith(f"device.{card}.")]:
            copy = f"device.{own}.{path.rpartition('.')[2]}"
            numbers[copy] = chain.numbers[path]
            if path in chain.given:
                given.add(copy)
    for stage in chain.stages:
        own = own_card(stage.device, stage.name)
        upper = own_card(stage.upper or stage.device, f"{stage.name}_upper")
        stages.append(replace(stage, device=own if own in cards else stage.device,
                              upper=upper if upper in cards else stage.upper))
    return replace(chain, stages=tuple(stages), cards={**chain.cards, **cards}, numbers=MappingProxyType(numbers),
                   given=frozenset(given))
