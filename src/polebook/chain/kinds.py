"""Every stage kind, card family and table with its keys as plain rows, from the tables that the reader uses."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from polebook.chain.suggest import nearest
from polebook.chain.tables import BENCH, SECTIONS, TOP
from polebook.devices.registry import FAMILIES
from polebook.param import Param
from polebook.quantity import DIMENSIONS
from polebook.stages.base import COMMON, Kind
from polebook.stages.ladder import ARM
from polebook.stages.registry import KINDS

_UNITS = {
    "text": "text",
    "choice": "word",
    "flag": "true/false",
    "keys": "list of keys",
    "arms": "list of arms",
    "table": "table",
    "date": "date",
    "format": "number",
}
_CARDS = {
    "bjt": "card of a bipolar transistor",
    "mosfet": "card of an insulated-gate FET",
    "jfet": "card of a junction FET",
    "triode": "card of a triode valve",
    "opamp": "card of an operational amplifier",
}
_PLAIN = {
    "share": "%",
    "ratio": "V/V, dB",
    "gain_source": "V/V, V/A, dB",
    "amplitude": "V, A",
    "density": "V/√Hz, A/√Hz",
    "factor": "number",
}


@dataclass(frozen=True, slots=True)
class KeyRow:
    """One key for a reader: unit in words, role "low", "high" or "", default as text, what it is for."""

    key: str
    unit: str
    role: str
    default: str
    required: bool
    about: str


@dataclass(frozen=True, slots=True)
class Listing:
    """A kind, family or table: `header` is how its table begins in the file."""

    name: str
    group: str  # "stage", "card" or "table"
    header: str
    about: str
    takes: tuple[str, ...]  # families of card that a kind takes
    rows: tuple[KeyRow, ...]


def row(param: Param) -> KeyRow:
    """A parameter as a row."""
    about = param.about
    if param.choices and not all(choice in about for choice in param.choices):
        about += f": {', '.join(param.choices)}"
    return KeyRow(param.key, unit(param), param.role, param.default, param.required, about)


def unit(param: Param) -> str:
    """The unit of a key in a word or a symbol."""
    if param.dimension == "quantities":
        return f"list of {DIMENSIONS[param.of].unit}"
    if param.dimension in DIMENSIONS:
        return DIMENSIONS[param.dimension].unit or _PLAIN.get(param.dimension, "")
    return _UNITS.get(param.dimension, "")


def common() -> tuple[KeyRow, ...]:
    """The keys that every kind of stage has."""
    return _rows(COMMON)


def listings() -> tuple[Listing, ...]:
    """Every kind of stage, then the arms of a ladder, the cards, and the other tables."""
    kinds = [
        Listing(kind.name, "stage", "[[stage]]", kind.about, kind.families, _rows((*kind.params, *_inside(kind))))
        for kind in KINDS.values()
    ]
    cards = [
        Listing(family, "card", "[device.NAME]", _CARDS[family], (), _rows(params))
        for family, params in FAMILIES.items()
    ]
    tables = [Listing(name, "table", f"[{name}]", "", (), _rows(params)) for name, params in SECTIONS.items()]
    return (
        *kinds,
        Listing("arm", "table", "arms = [ {...}, ... ]", "one arm of a ladder", (), _rows(ARM)),
        *cards,
        Listing("file", "table", "", "above the first table", (), _rows(TOP)),
        *tables,
        Listing("bench", "table", "[[bench]]", "what was measured on hardware", (), _rows(BENCH)),
    )


def _inside(kind: Kind) -> tuple[Param, ...]:
    """Keys that stand inside a list of the kind: those of a ladder's arms."""
    return tuple(replace(param, key=f"arms.N.{param.key}") for param in ARM) if kind.topology == "ladder" else ()


def listing(name: str) -> Listing | None:
    """The listing of that name; None where there is none."""
    return next((one for one in listings() if one.name == name), None)


def nearest_name(name: str) -> str:
    """The listing whose name is nearest to `name`; "" for none."""
    return nearest(name, (one.name for one in listings()))


def _rows(params: Iterable[Param]) -> tuple[KeyRow, ...]:
    return tuple(row(param) for param in params)
