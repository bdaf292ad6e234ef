"""What a person buys and solders to build a chain: the fitted parts by value, and the devices by card."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from polebook import series
from polebook.chain.model import Chain, Stage
from polebook.chain.stage_lists import PARTS
from polebook.quantity import letter
from polebook.stages.registry import KINDS
from polebook.units import DIMENSIONS

_SORTS: Mapping[str, str] = {"resistance": "resistor", "capacitance": "capacitor", "inductance": "inductor"}
_LETTERS = {"r": "resistance", "l": "inductance", "c": "capacitance"}
_WIRING = frozenset({"stray"})  # is there without being bought
_ORDER = ("resistor", "capacitor", "inductor", "device", "block")


@dataclass(frozen=True, slots=True)
class _Fitted:
    dimension: str
    value: float
    tolerance: float
    where: str


def parts(chain: Chain) -> dict[str, Any]:
    """The fitted parts as the rows of the JSON answer, alike ones together, and what is not fitted with the reason.

    A row: group, value (SI, None for devices), code (as one writes it on a drawing, or the card's name), unit,
    tolerance (a share), count, used (paths), series (the file's preferred one) and preferred (whether it is in it).
    """
    together: dict[tuple[str, float, float], list[str]] = {}
    for one in _fitted(chain):
        together.setdefault((one.dimension, one.value, one.tolerance), []).append(one.where)
    rows = [_row(chain, *key, used) for key, used in together.items()]
    rows.sort(key=lambda row: (_ORDER.index(row["group"]), row["value"], row["tolerance"]))
    return {"parts": [*rows, *_devices(chain), *_blocks(chain)], "not_fitted": list(_not_fitted(chain))}


def _row(chain: Chain, dimension: str, value: float, tolerance: float, used: list[str]) -> dict[str, Any]:
    sort = _SORTS[dimension]
    row = chain.preferred[sort]
    return {
        "group": sort, "value": value, "code": letter(value, dimension), "unit": DIMENSIONS[dimension].unit,
        "tolerance": tolerance, "count": len(used), "used": used, "series": row, "preferred": series.holds(value, row),
    }


def _fitted(chain: Chain) -> Iterator[_Fitted]:
    """Every R, C and L of the stages in signal order, then the load's coupling."""
    for stage in chain.stages:
        if stage.left_out:
            continue
        for key, dimension in _keys(chain, stage):
            yield from _one(chain, stage.name, key, dimension)
    yield from _one(chain, "load", "couple", "capacitance")


def _keys(chain: Chain, stage: Stage) -> Iterator[tuple[str, str]]:
    kind = KINDS[stage.kind]
    family = chain.cards[stage.device].family if stage.device else ""
    for param in kind.keys(family).values():
        # the rest of a block is what its data sheet says: it is bought as a whole
        inside = kind.topology == "block" and param.key not in ("couple", "c_load")
        if param.dimension in PARTS and param.key not in _WIRING and not inside:
            yield param.key, param.dimension
    for arm in stage.arms:
        for part in arm.parts:
            yield f"arms.{arm.number}.{part}", _LETTERS[part[-1]]


def _one(chain: Chain, owner: str, key: str, dimension: str) -> Iterator[_Fitted]:
    value = chain.get(f"{owner}.{key}")
    if value:  # 0: the part is not there
        general = chain.numbers[f"tolerance.{_SORTS[dimension]}"]
        tolerance = chain.get(f"{owner}.tolerance.{key}", general)
        yield _Fitted(dimension, value, general if tolerance is None else tolerance, f"{owner}.{key}")


def _devices(chain: Chain) -> Iterator[dict[str, Any]]:
    """A row a card that is used; a cascode takes two devices."""
    used: dict[str, list[str]] = {}
    for stage in chain.stages:
        for card, where in ((stage.device, stage.name), (stage.upper, f"{stage.name}_upper")):
            if card and not stage.left_out:
                used.setdefault(card, []).append(where)
    for name, places in used.items():
        yield _bought("device", name, chain.cards[name].family, places)


def _blocks(chain: Chain) -> Iterator[dict[str, Any]]:
    for stage in chain.stages:
        if KINDS[stage.kind].topology == "block" and not stage.left_out:
            yield _bought("block", stage.name, "block", [stage.name])


def _bought(group: str, name: str, what: str, used: list[str]) -> dict[str, Any]:
    return {"group": group, "value": None, "code": name, "unit": what, "tolerance": None, "count": len(used),
            "used": used, "series": None, "preferred": None}


def _not_fitted(chain: Chain) -> Iterator[dict[str, Any]]:
    """What the chain has and nobody solders: source and load, wiring, stages left out."""
    def some(owner: str, keys: tuple[tuple[str, str], ...]) -> list[str]:
        values = [(key, dimension, chain.get(f"{owner}.{key}")) for key, dimension in keys]
        return [f"{key} {letter(value, dimension)}" for key, dimension, value in values if value is not None]

    ends = (("resistance", "resistance"), ("capacitance", "capacitance"))
    yield {"what": "source", "values": some("source", (*ends, ("couple", "capacitance"))),
           "why": "is what drives the chain"}
    yield {"what": "load", "values": some("load", ends), "why": "is what the chain drives"}
    strays = [(stage.name, chain.get(f"{stage.name}.stray")) for stage in chain.stages if not stage.left_out]
    told = [f"{name}.stray {letter(value, 'capacitance')}" for name, value in strays if value]
    if told:
        yield {"what": "wiring", "values": told, "why": "comes with the board"}
    left = [stage.name for stage in chain.stages if stage.left_out]
    if left:
        yield {"what": "left out", "values": left, "why": "is kept in the file only"}
