"""Which figures of a ledger its verdict leans on: those whose workings a reviewer will ask for."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

_HEADS = {"upper edge": "overall.upper_edge_hz", "lower edge": "overall.lower_edge_hz", "gain": "overall.gain",
          "peaking": "overall.peaking_db", "noise": "overall.noise_density", "rise": "overall.rise_time_s",
          "overshoot": "overall.overshoot_percent", "sag": "overall.sag_percent", "swing": "",
          "supply current": "overall.supply_current_a"}
"""What a sentence of the verdict begins with -> the figure that it is about, "" for one of a node."""
_SHARES = {"overall.upper_edge_hz": "owns_upper", "overall.lower_edge_hz": "owns_lower",
           "overall.noise_density": "noise_share"}
_LEVERS = {"overall.upper_edge_hz": "leverage.upper_edge", "overall.lower_edge_hz": "leverage.lower_edge",
           "overall.noise_density": "leverage.noise", "overall.gain": "leverage.gain"}
"""Figure -> the key of a part that says what the part is to it."""
_WAYS = {"looks like": ("at_input", "k"), "counts as": ("at_output",), "sees": ("tau_s",), "works into": ("tau_s",),
         "stands on": ("tau_s",)}
"""Words of how a part comes to what it owns -> its figures that they give."""
_NODES = {"loses": "lost_upper_db", "clips": "clip_v", "Ω": "ohm"}
_BEGIN = re.compile(rf"(?:^|(?<=[.:] ))({'|'.join(_HEADS)})\b", re.IGNORECASE)
_STEP = re.compile(r"1 % (?:more|less) (?:of )?([\w-]+(?:\.[\w-]*\w)?)")


def leaning(document: Mapping[str, Any]) -> list[str]:
    """Their names, in the order of the verdict; some of them may be null, or no figures at all."""
    told = str(document["verdict"] or "")
    if document["overall"]["unstable"] is not False:
        found = _growing(document)
    elif told.startswith("No clean midband"):
        found = iter(["overall.gain", "overall.sctc_lower_hz", "overall.octc_upper_hz"])
    else:
        found = _of_the_sentences(document, told)
    return list(dict.fromkeys(found)) or ["overall.gain"]


def _growing(document: Mapping[str, Any]) -> Iterator[str]:
    """Of a chain that is not stable: that it is not, and the pole that grows fastest."""
    yield "overall.unstable"
    poles = document["poles"] or []
    if poles:
        at = max(range(len(poles)), key=lambda k: float(poles[k]["re"]))
        yield from (f"poles.{at + 1}.{key}" for key in ("re", "hz"))


def _of_the_sentences(document: Mapping[str, Any], told: str) -> Iterator[str]:
    """Figure by figure that the verdict speaks of: itself, its owners, how it comes to that, what would move it."""
    parts = [f"{row['stage']}.{row['part']}" for row in document["parts"] or []]
    nodes = [row["name"] for row in document["nodes"] or []]
    pieces = _BEGIN.split(told)
    for word, said in zip(pieces[1::2], pieces[2::2], strict=True):
        head = _HEADS[word.lower()]
        owners = _named(said, parts)
        yield from filter(None, [head])
        if head in _SHARES:
            yield from (f"{part}.{_SHARES[head]}" for part in owners)
        for way, keys in _WAYS.items():
            if way in said:
                yield from (f"{part}.{key}" for part in owners[:1] for key in keys)
        yield from (f"{node}.{key}" for node in _named(said, nodes) for way, key in _NODES.items() if way in said)
        if head in _LEVERS:
            yield from (f"{part}.{_LEVERS[head]}" for step in _STEP.findall(said)
                        for part in ([step] if "." in step else owners[:1]))


def _named(told: str, names: Iterable[str]) -> list[str]:
    """Those of the names that a text has, in its order."""
    found = {name: match.start() for name in names
             if (match := re.search(rf"(?<![\w.-]){re.escape(name)}(?![\w-]|\.\w)", told))}
    return sorted(found, key=lambda name: found[name])
