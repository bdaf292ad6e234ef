"""One value of the file, read as its parameter row asks; what is wrong with it is told to the desk."""

from __future__ import annotations

import re

from polebook.chain.desk import Desk, Owner, TextPath
from polebook.chain.suggest import listed
from polebook.chain.tables import MOST_POLES
from polebook.param import Param
from polebook.quantity import DIMENSIONS, Refused, parse
from polebook.refusal import quoted

_BEFORE_TEXT = re.compile(r'(?<=: )"|(?<=example )"|(?<=^write )"')


def kind_of_value(raw: object) -> str:
    """The type of a TOML value in words."""
    if isinstance(raw, bool):
        return "a switch"
    if isinstance(raw, str):
        return "a text"
    if isinstance(raw, int | float):
        return "a number"
    if isinstance(raw, list):
        return "a list"
    return "a table" if isinstance(raw, dict) else "a date or time"


def number(desk: Desk, raw: object, param: Param, owner: Owner, path: TextPath) -> float | None:
    """The SI value of a quantity; None where it is refused."""
    label = f"{param.key} of {owner.words}"
    try:
        value = parse(raw, param.of or param.dimension)
    except Refused as refused:
        fix = _BEFORE_TEXT.sub(lambda match: f"{_assign(path, param)}{match[0]}", refused.fix, count=1)
        desk.fault(path, refused.what, f"{label}: {refused.why}", fix)
        return None
    return value if _sign_fits(desk, raw, value, param, label, path) else None


def _assign(path: TextPath, param: Param) -> str:
    """`key = ` for a remedy; nothing for an element of a list."""
    return f"{param.key} = " if isinstance(path[-1], str) else ""


def _sign_fits(desk: Desk, raw: object, value: float, param: Param, label: str, path: TextPath) -> bool:
    noun = DIMENSIONS[param.of or param.dimension].noun
    shown = raw if isinstance(raw, str) else quoted(raw)
    if param.sign == "any" or (value > 0 and param.sign != "nonpositive") or (value < 0 and param.sign == "nonzero"):
        return True
    if value == 0 and param.sign in ("nonnegative", "nonpositive"):
        return True
    if param.sign == "nonpositive":
        if value > 0:
            desk.fault(
                path,
                f"{label} is above zero",
                "it is written with its sign, and the negative rail lies below ground",
                f'write it with its sign: {param.key} = "-{str(shown).strip().lstrip("+")}"',
            )
        return value <= 0
    if value == 0:
        fix = "give it a value" if param.required else f"give it a value, or take {param.key} out"
        desk.fault(path, f"{label} is zero", _why_not_zero(param, noun), fix)
    else:
        desk.fault(
            path,
            f"{quoted(raw)} is negative",
            f"{label} is {noun} that can't be below zero",
            f'write it without the sign: {_assign(path, param)}"{str(shown).strip().lstrip("-−")}"',
        )
    return False


def _why_not_zero(param: Param, noun: str) -> str:
    if param.dimension == "capacitance":
        return "a coupling or bypass capacitor of zero cuts its path; where there is none, the key is absent"
    if param.dimension == "resistance":
        return "a resistor to a rail or across a port can't be zero; where there is none, the key is absent"
    return f"here {noun} of zero has no meaning"


def quantities(desk: Desk, raw: object, param: Param, owner: Owner, path: TextPath) -> list[float]:
    """A list of quantities; those refused are told and left out."""
    if not isinstance(raw, list):
        desk.fault(
            path,
            f"{param.key} of {owner.words} is not a list",
            f"{quoted(raw)} is {kind_of_value(raw)}",
            f'write a list in brackets: {param.key} = ["{DIMENSIONS[param.of].example}"]',
        )
        return []
    if len(raw) > MOST_POLES:
        desk.fault(
            (*path, MOST_POLES),
            f"{param.key} of {owner.words} lists {len(raw)} values, and at most {MOST_POLES} are taken",
            "no data sheet states that many",
            "leave out what lies far from the band",
        )
    values = [number(desk, item, param, owner, (*path, at)) for at, item in enumerate(raw[:MOST_POLES])]
    return [value for value in values if value is not None]


def text(desk: Desk, raw: object, param: Param, owner: Owner, path: TextPath) -> str | None:
    """A text; None where the value is none."""
    if isinstance(raw, str):
        return raw
    desk.fault(
        path,
        f"{param.key} of {owner.words} is not a text",
        f"{quoted(raw)} is {kind_of_value(raw)}",
        f'write a text in quotes: {param.key} = "..."',
    )
    return None


def choice(desk: Desk, raw: object, param: Param, owner: Owner, path: TextPath) -> str | None:
    """One of the words of `param.choices`; None where it is none of them."""
    if isinstance(raw, str) and raw in param.choices:
        return raw
    near = desk.near(raw, param.choices) if isinstance(raw, str) else ""
    what = (
        f"{quoted(raw)} is not a {param.key}"
        if isinstance(raw, str)
        else (f"{param.key} of {owner.words} is {kind_of_value(raw)}, not a text")
    )
    fix = f'write {param.key} = "{near or param.choices[0]}"'
    if near:
        fix += f" ({near} is the nearest)"
    words = f"only {param.choices[0]}" if len(param.choices) == 1 else listed(param.choices, "or")
    desk.fault(path, what, f"{param.key} of {owner.words} is {words}", fix)
    return None


def flag(desk: Desk, raw: object, param: Param, owner: Owner, path: TextPath) -> bool | None:
    """true or false; None where the value is neither."""
    if isinstance(raw, bool):
        return raw
    word = str(raw).strip().lower() if isinstance(raw, str) else ""
    fix = (
        f"write it without quotes: {param.key} = {word}"
        if word in ("true", "false")
        else (f"write {param.key} = true or {param.key} = false")
    )
    desk.fault(path, f"{quoted(raw)} is not true or false", f"{param.key} of {owner.words} is a switch", fix)
    return None


def words(desk: Desk, raw: object, param: Param, owner: Owner, path: TextPath) -> list[tuple[int, str]]:
    """A list of texts with their positions; what is no text is told and left out."""
    if not isinstance(raw, list):
        desk.fault(
            path,
            f"{param.key} of {owner.words} is not a list",
            f"{quoted(raw)} is {kind_of_value(raw)}",
            f'write a list of keys in brackets: {param.key} = ["couple"]',
        )
        return []
    for at, item in enumerate(raw):
        if not isinstance(item, str):
            desk.fault(
                (*path, at),
                f"{quoted(item)} is not a key",
                f"{param.key} of {owner.words} lists names of keys",
                'write the name of a key in quotes: "couple"',
            )
    return [(at, item) for at, item in enumerate(raw) if isinstance(item, str)]
