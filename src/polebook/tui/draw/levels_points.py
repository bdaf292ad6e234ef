"""What stands at d.c. at each stage: the rows of the plan, from the ledger, with what the cards allow."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import lru_cache

from polebook.book.direct import amplifier
from polebook.book.ledger import Ledger
from polebook.chain.model import Stage
from polebook.chain.suggest import listed
from polebook.circuit.bias import Operating, missing
from polebook.stages.base import GROUP, TERMINALS, slot_key
from polebook.tui.draw.head import APART, by_network

FIGURES = ("current_a", "across_v", "control_v", "lower_v", "output_v", "dissipation_w")
"""Figures of a row, by the keys of the ledger's `bias`."""
_HELD = ("control_v", "output_v")  # all that the ledger itself has of an op-amp
_RATED = {"p_max": ("dissipation_w", "W"), "v_max": ("across_v", "V"), "i_max": ("current_a", "A")}


@dataclass(frozen=True, slots=True)
class Rating:
    """A rating of a card, and how much of it is used (1.0: all); None where the figure is not known."""

    key: str
    most: float
    unit: str
    used: float | None


@dataclass(frozen=True, slots=True)
class Row:
    """A device, an op-amp or a block at d.c.

    name      the stage's, of a cascode's upper device with "_upper"
    group     bjt, fet, triode, "" for op-amps and blocks
    values    by FIGURES; of an op-amp or block its own supply current, the span of its rails, and the heat between them
    accounted figures that `working` knows
    network   A that the network would give where the current is stated
    rise_k    K over the air, where the card tells its theta
    why       why something of it is not known, "" where all is
    """

    name: str
    stage: str
    card: str
    group: str
    values: Mapping[str, float | None]
    origin: str
    accounted: tuple[str, ...]
    network: float | None = None
    ratings: tuple[Rating, ...] = ()
    rise_k: float | None = None
    why: str = ""
    amplifier: bool = False

    @property
    def current_apart(self) -> bool:
        """Whether the stated current is far off what its network gives."""
        current = self.values["current_a"]
        return bool(self.network is not None and current and abs(self.network / current - 1.0) > APART)

    @property
    def left_v(self) -> float | None:
        """Volts that current, resistors and rails leave across the device, where a stated voltage is far off them."""
        across, high, low = (self.values[key] for key in ("across_v", "output_v", "lower_v"))
        if self.amplifier or not across or high is None or low is None:
            return None
        left = abs(high - low)
        return left if abs(left / across - 1.0) > APART else None

    @property
    def apart(self) -> bool:
        """Whether something stated is far off what the network gives."""
        return self.current_apart or self.left_v is not None

    @property
    def past(self) -> tuple[Rating, ...]:
        """The ratings that it goes past."""
        return tuple(one for one in self.ratings if one.used is not None and one.used > 1.0)


@lru_cache(maxsize=4)
def rows(of: Ledger) -> tuple[Row, ...]:
    """Every stage that has a bias, in signal order; a cascode's upper device behind the lower one."""
    return tuple(row for stage in of.chain.stages if not stage.left_out for row in _of_stage(of, stage))


def _of_stage(of: Ledger, stage: Stage) -> Iterator[Row]:
    family = of.chain.cards[stage.device].family if stage.device else ""
    if family not in GROUP:
        if family == "opamp" or stage.kind == "block":
            yield _amplifier(of, stage)
        return
    points = of.solution.circuit.points
    for name, card in ((stage.name, stage.device), (f"{stage.name}_upper", stage.upper or stage.device)):
        if name in points:
            yield _device(of, stage, name, card, points[name])


def _device(of: Ledger, stage: Stage, name: str, card: str, point: Operating) -> Row:
    current, across = point.current, point.across
    values = dict(zip(FIGURES, (current, across, point.control_v, point.lower_v, point.output_v,
                                None if current is None or across is None else current * across), strict=True))
    family = of.chain.cards[card].family
    why = _unknown(of, stage, family, values) if name == stage.name else ""
    return Row(name, stage.name, card, GROUP[family], values, point.origin or "", FIGURES,
               by_network(of).get(name) if point.origin == "given" else None, _ratings(of, card, values),
               _rise(of, card, values), why)


def _amplifier(of: Ledger, stage: Stage) -> Row:
    point = of.solution.circuit.points[stage.name]
    found = amplifier(of.chain, of.rails, stage, point.output_v)
    values = dict(zip(FIGURES, (found.iq, found.span or None, point.control_v, None, point.output_v, found.watts),
                      strict=True))
    lacking = []
    if found.iq is None:
        lacking.append(f"what {stage.name} itself draws is not known: give iq" +
                       (f" on card {stage.device}" if stage.device else ""))
    if not found.span:
        lacking.append("the file has no supply")
    if point.control_v is None:
        lacking.append(f"no d.c. path leads to the input of {stage.name}")
    rated = {"p_max": found.watts, "v_max": found.span or None,
             "i_max": None if found.output is None else abs(found.output)}
    return Row(stage.name, stage.name, stage.device, "", values, "" if found.iq is None else "given",
               _HELD if stage.device else (), None, _used(of, stage.device, rated) if stage.device else (),
               _rise(of, stage.device, values) if stage.device else None, "; ".join(lacking), True)


def _ratings(of: Ledger, card: str, values: Mapping[str, float | None]) -> tuple[Rating, ...]:
    return _used(of, card, {key: values[figure] for key, (figure, _) in _RATED.items()})


def _used(of: Ledger, card: str, figures: Mapping[str, float | None]) -> tuple[Rating, ...]:
    """The ratings that a card states, beside figures by their keys."""
    found = []
    for key, (_, unit) in _RATED.items():
        most = of.chain.get(f"device.{card}.{key}")
        if most:
            value = figures[key]
            found.append(Rating(key, most, unit, None if value is None else value / most))
    return tuple(found)


def _rise(of: Ledger, card: str, values: Mapping[str, float | None]) -> float | None:
    theta, watts = of.chain.get(f"device.{card}.theta"), values["dissipation_w"]
    return None if theta is None or watts is None else theta * watts


def _unknown(of: Ledger, stage: Stage, family: str, values: Mapping[str, float | None]) -> str:
    """What is not known of a device's bias, and what would settle it."""
    words = TERMINALS[GROUP[family]]
    if values["current_a"] is None:
        ways = missing(of.solution.circuit.plan, of.chain).get(stage.name, ())
        return f"the current of {stage.name} is not known" + (f": give {listed(ways, 'or')}" if ways else "")
    if values["across_v"] is None:
        return f"the voltage across {stage.name} is not known: give {slot_key('across', family)}"
    lacking = [words[key] for key in ("control", "lower", "output") if values[f"{key}_v"] is None]
    return f"where {listed(lacking)} of {stage.name} stand{'s' if len(lacking) == 1 else ''} does not follow from " \
           "resistors and rails" if lacking else ""
