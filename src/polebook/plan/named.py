"""Every figure of a ledger's document under the name by which one asks for it: `Q1.input_ohm`, `overall.gain`."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from polebook.chain.suggest import listed, nearest
from polebook.problem import Problem, ProblemsFound
from polebook.refusal import quoted

Row = Mapping[str, Any]
SHARE = "share"  # the unit of a part of one, shown in per cent
_OF_TYPE = {"C": "F", "L": "H", "R": "Ω", "gm": "S", "tau": "s", "I": "A"}
_OF_ENDING = {
    "hz": "Hz", "db": "dB", "ohm": "Ω", "farad": "F", "s": "s", "a": "A", "v": "V", "w": "W", "percent": "%",
    "share": SHARE, "margin": SHARE, "upper": SHARE, "lower": SHARE,
}
_OF_SOURCE = frozenset({"largest_source", "noise_total_input"})
_FEW = 12  # names that a message lists


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure in base SI units, None where it does not apply. `unit` is "" for a plain number, "share" for a share."""

    name: str
    value: float | None
    unit: str


class NoFigure(ProblemsFound):
    """A name that is no figure's, with the near ones."""


def catalog(document: Mapping[str, Any]) -> dict[str, Figure]:
    """Name -> figure, in the order of the document."""
    unit = document["overall"]["gain_unit"]
    return {figure.name: figure for figure in _figures(document, "" if unit == "V/V" else unit)}


def _figures(document: Mapping[str, Any], gain_unit: str) -> Iterator[Figure]:
    volts = "V" if not gain_unit else "A"
    of_key = {"gain": gain_unit, "gain_at_reference": gain_unit, "noise_density": f"{volts}/√Hz",
              "noise_total_output": "V", **dict.fromkeys(_OF_SOURCE, volts)}
    yield from _numbers("overall", document["overall"], of_key)
    for end, side in (document["account"] or {}).items():
        yield from _numbers(f"account.{end}", side)
    for at, line in enumerate(document["lines"]):
        yield from _numbers(line["name"], line, {"gain": gain_unit if at == 0 else ""})
        for bridge in line["bridges"] or ():
            of_part = _OF_TYPE[bridge["type"]]
            part = bridge["part"].rpartition(".")[2]
            yield from _numbers(f"{line['name']}.{part}", bridge,
                                {"value": of_part, "at_input": of_part, "at_output": of_part})
    for node in document["nodes"] or ():
        yield from _numbers(node["name"], node)
    for part in document["parts"] or ():
        yield from _numbers(f"{part['stage']}.{part['part']}", part, {"value": _OF_TYPE.get(part["type"], "")})
    for card in document["cards"] or ():
        yield from _numbers(f"device.{card['device']}.{card['figure']}", card)
    for entry in document["bias"] or ():
        yield from _numbers(entry["stage"], entry)
    for rail in document["rails"] or ():
        yield from _numbers(rail["rail"], rail)
    for level in document["levels"] or ():
        yield from _numbers(level["node"], level)
    for target in document["targets"] or ():
        yield Figure(f"target.{target['name']}.margin", target["margin"], SHARE)


def _numbers(head: str, row: Row, units: Mapping[str, str] | None = None) -> Iterator[Figure]:
    """The numbers of a row; those of a table inside it with both keys."""
    for key, value in row.items():
        if isinstance(value, Mapping):
            yield from _numbers(f"{head}.{key}", value)
        elif value is None or (isinstance(value, int | float) and not isinstance(value, bool)):
            unit = units[key] if units and key in units else _OF_ENDING.get(key.rpartition("_")[2], "")
            yield Figure(f"{head}.{key}", value, unit)


def find(known: Mapping[str, Figure], words: str) -> Figure:
    """The figure that `words` names, or the only one whose name they begin. Raises NoFigure with the near names."""
    asked = words.strip()
    for name in (asked, f"overall.{asked}"):
        if name in known:
            return known[name]
        begun = [one for one in known if asked and one.startswith(name) and "." not in one[len(name):]]
        if len(begun) == 1:
            return known[begun[0]]
        if begun:
            raise _refused(f"{quoted(asked)} is not one figure", f"it begins {len(begun)} of them",
                           f"name one: {_some(begun)}")
    head = asked.rpartition(".")[0]
    beside = [name for name in known if name.rpartition(".")[0] == head] if head else []
    near = nearest(asked, beside or known)
    why = f"{head} has the figures {_some(name.rpartition('.')[2] for name in beside)}" if beside else (
        "a figure is named by its line, node or part and its key, as in the JSON of the ledger")
    example = f"did you mean {near}?" if near else "name one like overall.upper_edge_hz, n1.pole_hz or Q1.input_ohm"
    raise _refused(f"there is no figure {quoted(asked)}", why, example)


def _some(names: Iterable[str]) -> str:
    some = list(names)
    return listed(some) if len(some) <= _FEW else f"{', '.join(some[:_FEW])} and {len(some) - _FEW} more"


def _refused(what: str, why: str, fix: str) -> NoFigure:
    return NoFigure([Problem(None, what, why, fix)])
