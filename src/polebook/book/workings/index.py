"""Every figure of the document by its name: line, node, part, card, bias, rail, account, target or overall, and key.

    overall.upper_edge_hz   Q1.gain         n1.pole_hz         Q1.mid.pole_hz       account.upper.lost_db
    Q1.cmu.k                Q1.cmu.tau_s    Q1.rc.leverage.gain                     target.upper.margin
    bias.Q1.current_a       bias.Q4_upper.current_a (of a cascode's upper device)   rail.positive.current_a
    device.D.beta.value     poles.1.hz      zeros.2.hz (counted from 1)
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from math import isfinite
from typing import Any

from polebook.chain.suggest import listed
from polebook.problem import Problem, ProblemsFound
from polebook.refusal import quoted

Row = Mapping[str, Any]
WORDS = frozenset({"name", "kind", "stage", "part", "type", "role", "interstage", "device", "figure", "node", "rail",
                   "why", "gain_unit", "bridges", "from", "clips_by", "clips_first"})
"""Keys that say what a row is, and words: no figures."""
_FEW = 12


@dataclass(frozen=True, slots=True)
class Entry:
    """One figure: its section of the document, its row, the row's place in the section, its key and its value."""

    name: str
    section: str
    row: Row
    at: int
    key: str
    value: Any


def entries(document: Mapping[str, Any]) -> dict[str, Entry]:
    """Every figure of the document by name, in its order; null ones too, which those are that are not finite."""
    found: dict[str, Entry] = {}
    for owner, section, row, at in _rows(document):
        for key, value in _figures(row):
            name = f"{owner}.{key}"
            finite = None if isinstance(value, float) and not isfinite(value) else value
            found.setdefault(name, Entry(name, section, row, at, key, finite))
    return found


def _figures(row: Row) -> Iterator[tuple[str, Any]]:
    for key, value in row.items():
        if isinstance(value, Mapping):
            yield from ((f"{key}.{inner}", figure) for inner, figure in value.items())
        elif key not in WORDS:
            yield key, value


def _rows(document: Mapping[str, Any]) -> Iterator[tuple[str, str, Row, int]]:
    """(owner, section, row, place) of every row; parts before the bridges that show the same value."""
    yield "overall", "overall", document["overall"], 0
    lines, nodes, parts = (document[name] or [] for name in ("lines", "nodes", "parts"))
    yield from ((row["name"], "lines", row, at) for at, row in enumerate(lines))
    yield from ((row["name"], "nodes", row, at) for at, row in enumerate(nodes))
    yield from ((f"{row['stage']}.{row['part']}", "parts", row, at) for at, row in enumerate(parts))
    for at, line in enumerate(lines):
        yield from ((f"{line['name']}.{row['part']}", "bridges", row, at) for row in line["bridges"] or [])
    yield from ((f"device.{row['device']}.{row['figure']}", "cards", row, at)
                for at, row in enumerate(document["cards"] or []))
    yield from ((f"bias.{row['stage']}", "bias", row, at) for at, row in enumerate(document["bias"] or []))
    yield from ((f"rail.{row['rail']}", "rails", row, at) for at, row in enumerate(document["rails"] or []))
    for name in ("poles", "zeros"):
        yield from ((f"{name}.{at + 1}", name, row, at) for at, row in enumerate(document[name] or []))
    yield from ((f"account.{end}", "account", row, 0) for end, row in (document["account"] or {}).items())
    yield from ((f"target.{row['name']}", "targets", row, at) for at, row in enumerate(document["targets"] or []))
    yield from ((row["node"], "levels", row, at) for at, row in enumerate(document["levels"] or []))


NULL_SECTIONS = {"poles": "poles", "zeros": "zeros", "device": "cards"}
"""First word of a figure's name -> the section that it is a figure of, where that section may be null."""


def find(known: Mapping[str, Entry], document: Mapping[str, Any], name: str) -> Entry:
    """The figure of that name or unique beginning. Raises ProblemsFound with the near ones where there is none."""
    wanted = name.strip()
    if wanted in known:
        return known[wanted]
    section = NULL_SECTIONS.get(wanted.partition(".")[0], "")
    if section and document[section] is None:
        return Entry(wanted, section, {}, 0, wanted.rpartition(".")[2], None)
    begun = [one for one in known if one.startswith(wanted)] if wanted else []
    if len(begun) == 1:
        return known[begun[0]]
    raise ProblemsFound([_several(wanted, begun) if begun else _unknown(wanted, known)])


def _several(wanted: str, begun: list[str]) -> Problem:
    over = len(begun) - _FEW
    names = f"{', '.join(begun[:_FEW])} and {over} more" if over > 0 else listed(begun)
    return Problem(None, f"{quoted(wanted)} is the beginning of {len(begun)} figures", f"they are {names}",
                   "write as much of the name as only one of them has")


def _unknown(wanted: str, known: Mapping[str, Entry]) -> Problem:
    from difflib import get_close_matches  # deferred: only a wrong name pays for it

    owner = wanted.rpartition(".")[0]
    own = [one for one in known if owner and one.startswith(f"{owner}.") and "." not in one[len(owner) + 1:]]
    if own:
        why = f"the figures of {owner} are {listed(one[len(owner) + 1:] for one in own)}"
    else:
        why = "a figure is named by its line, node, part, bias, account, target or overall, a dot and its key"
    folded = {one.casefold(): one for one in own or known}
    near = [folded[one] for one in get_close_matches(wanted.casefold(), folded, n=3, cutoff=0.6)]
    fix = f"did you mean {listed(near, 'or')}?" if near else "polebook working FILE lists them all"
    return Problem(None, f"there is no figure {quoted(wanted)}", why, fix)
