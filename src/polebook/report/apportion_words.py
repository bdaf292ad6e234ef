"""What `polebook apportion` says beside its tables."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.report import figures as show
from polebook.report.document import Entry

_LESS = frozenset({"lower", "noise", "current", "peaking", "overshoot", "rise", "sag"})
_YIELD = "yield"
_FEW, _LEAST = 3, 0.01  # levers told of a target, and the per cent below which one is not


def head(one: Entry) -> str:
    """What was free, who said so, and what was favoured."""
    count = len(one["free"]["keys"])
    may = f"{count} key{'s' * (count != 1)} may change"
    who = {"chosen": ", as chosen", "file": ", as the file says",
           "fitted": ": every part that is fitted, for the file marks none as free"}.get(one["free"]["from"], "")
    favour = f"; {one['favour']} is favoured once all targets are met" if one["favour"] else ""
    return f"{may}{who}{favour}"


def still(one: Entry) -> str:
    """How many of the free keys stay as they are."""
    count = sum(not key["moved"] for key in one["keys"])
    if not count:
        return "no other key was free"
    return f"{count} more {'stays' if count == 1 else 'stay'} as the file has {'it' if count == 1 else 'them'}"


def sentences(one: Entry, spread: str = "polebook spread") -> Iterator[str]:
    """What keeps a plan from its targets, and what it would take; `spread` tells where built chains are made."""
    missed = [target for target in one["targets"] if target["after"]["met"] is False]
    if missed and not one["stopped"]:
        sought = [target for target in missed if target["name"] != _YIELD]
        if sought:
            yield from _taking(one, [target["name"] for target in sought])
        for target in sought:
            yield from _helping(one, target)
        if len(sought) < len(missed):
            yield ("Plans with more room to every other target have not brought the yield up to what is wanted; "
                   f"{spread} says which tolerance costs most of it.")
    for note in one["notes"]:
        yield f"The file calls free what no plan can set: {note}."
    for target in one["targets"]:
        if target["after"]["met"] is None:
            yield f"{target['name']} can't be judged: {target['after']['why']}."


def _taking(one: Entry, missed: list[str]) -> Iterator[str]:
    unit = one["overall"]["after"]["gain_unit"]
    ways = [f"{way['target']} at {show.target(way['target'], way['got'], unit)}" for way in one["gives"]]
    if len(ways) == 1:
        yield f"This is the nearest plan. All others could be met, but for rounding, with {ways[0]}."
    elif ways:
        yield f"This is the nearest plan. All others could be met, but for rounding, with {', or with '.join(ways)}."
    elif len(missed) > 1:
        yield "This is the nearest plan. No single target could give so much that the others were met."
    else:
        yield "This is the nearest plan."


def _helping(one: Entry, target: Entry) -> Iterator[str]:
    """Bounds that hold a missed target, and keys that were not free and would move it."""
    name = target["name"]
    for at in one["held"]:
        if at["target"] == name:
            high = at["bound"] == "upper"
            yield (f"{at['path']} is as {'high' if high else 'low'} as the search goes; 1 % "
                   f"{'more' if high else 'less'} would better {name} by {at['leverage']:.2f} %.")
    better = -1.0 if name in _LESS or (name == "gain" and target["after"]["got"] > target["want"]) else 1.0
    told = [lever for lever in one["levers"] if lever["target"] == name and abs(lever["leverage"]) >= _LEAST][:_FEW]
    if told:
        parts = [f"1 % {'more' if lever['leverage'] * better > 0 else 'less'} {lever['path']} "
                 f"({abs(lever['leverage']):.2f} %)" for lever in told]
        yield f"Not free, and would better {name}: {', '.join(parts)}."


def verdict(one: Entry) -> tuple[str, str]:
    """(whether the targets are met, and that nothing moves where that is so; style)."""
    short = sum(target["after"]["met"] is not True for target in one["targets"])
    told = "all targets are met" if not short else f"{short} of {len(one['targets'])} targets not met"
    if not one["targets"]:
        told = "the file states no targets"
    style = "good" if not short else "bad"
    if one["stopped"] or moved(one):
        return told, style
    same = "nothing better is found" if short or one["favour"] else "nothing has to change"
    return f"{told} as the file is, {same}" if not short else f"{told}: {same}", style


def moved(one: Entry) -> str:
    """How many values move: "3 values"; "" for none."""
    count = sum(key["moved"] for key in one["keys"])
    return f"{count} value{'s' * (count != 1)}" if count else ""


def ending(one: Entry) -> tuple[str, str]:
    """(what has become of the file, style)."""
    told, style = verdict(one)
    if one["stopped"]:
        return f"stopped: the best so far, {told}; the file is as it was", "warn"
    if not (values := moved(one)):
        return told, style
    if one["written"]:
        return f"{told}; {values} written into {one['file']}", style
    return f"{told}; the file is as it was, --write puts {values} into it", style
