"""Why a text is not the quantity that was asked for: one sentence for the reason, one for the remedy."""

from __future__ import annotations

import re

from polebook.units import DIMENSIONS, PREFIXES, Dimension

_WORDS = {"nan": "not a number", "inf": "infinite", "infinity": "infinite"}
_MEGA = re.compile(r"([+-]?[0-9.]+)\s*(meg|mega|mio)(.*)", re.IGNORECASE)
_COMMA = re.compile(r"[+-]?[0-9]+(?:,[0-9]+)+(.*)")
_HEAD = re.compile(r"([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+))((?:[eE][+-]?[0-9]+)?)\s*(.*)")
_QUOTED = 40  # characters of a bad text that a message repeats


class Refused(ValueError):
    """A text or number that is not the quantity asked for: what is wrong, why, how to mend it."""

    def __init__(self, what: str, why: str, fix: str) -> None:
        self.what, self.why, self.fix = what, why, fix
        super().__init__(f"{what}: {why}; {fix}")


def quoted(raw: object) -> str:
    """`raw` as a message shows it: a text in quotes, the rest as TOML writes it, cut where it is long."""
    if isinstance(raw, bool):
        return "true" if raw else "false"
    if isinstance(raw, list):
        return "a list"
    if isinstance(raw, dict):
        return "a table"
    # decimal digits of a vast whole number take long, and Python refuses thousands of them
    text = f"{raw:#x}" if isinstance(raw, int) and raw.bit_length() > 400 else str(raw)
    if len(text) > _QUOTED:
        text = text[: _QUOTED - 1] + "…"
    return f'"{text}"' if isinstance(raw, str) else text


def refuse_kind(raw: object, dim: Dimension) -> Refused:
    """For a value that is neither a number nor a text."""
    if isinstance(raw, bool):
        why = "true and false are switches; here a number is asked for"
    else:
        why = "here one number is asked for"
    return Refused(f"{quoted(raw)} is not {dim.noun}", why, _write(dim))


def refuse_range(raw: object, dim: Dimension, why: str) -> Refused:
    """For a number that is infinite, not a number, or past what can be held."""
    return Refused(f"{quoted(raw)} is not {dim.noun}", why, _write(dim))


def explain(raw: str, text: str, dim: Dimension) -> Refused:
    """Find out why `text` (`raw` with its symbols made uniform) is not a quantity of `dim`."""
    what = f"{quoted(raw)} is not {dim.noun}"
    why, fix = _explain(text, dim)
    return Refused(what, why, fix or _write(dim))


def _write(dim: Dimension) -> str:
    if dim.name == "factor":
        return f'write a plain number, for example "{dim.example}"'
    return f'write it in {dim.units}, for example "{dim.example}"'


def _explain(text: str, dim: Dimension) -> tuple[str, str]:
    if not text:
        return "the text is empty", f'write a value, for example "{dim.example}", or take the key out'
    word = text.lstrip("+-").lower()
    if word in _WORDS:
        return f"it is {_WORDS[word]}, and every value must be a finite number", ""
    if word in ("r", "ω") or text.lstrip("+-") in PREFIXES or text == "K":
        return "there is no number before the letter", f'put the number in front, for example "1{text.lstrip("+-")}"'
    if match := _COMMA.fullmatch(text):
        return _comma(text, match[1])
    if match := _MEGA.fullmatch(text):
        why = f'"{match[2]}" is not a prefix: M is mega, m is milli'
        return why, f'write M for mega: "{match[1]}M{match[3].strip()}"'
    if "_" in text:
        return "an underscore has no place in a quantity", f'write it without: "{text.replace("_", "")}"'
    match = _HEAD.match(text)
    if not match:
        return "it does not begin with a number", ""
    return _after_number(match[1], match[2], match[3], text, dim)


def _comma(text: str, rest: str) -> tuple[str, str]:
    why = "a comma can be read as a decimal point or as a separator of thousands"
    if text.count(",") == 1:
        return why, f'write a decimal point and no other separator: "{text.replace(",", ".")}"'
    return why, f'leave the separators out: "{text.replace(",", "")}"'


def _after_number(number: str, exponent: str, rest: str, text: str, dim: Dimension) -> tuple[str, str]:
    """The number can be read; what follows it can't."""
    if rest[:1] in (".", ","):
        return "there are two decimal points in it", ""
    if rest[1:2].isdigit() and (found := _coded(number, exponent, rest, dim)):
        return found
    prefix, unit = _split(rest, dim)
    if exponent and prefix:
        return (
            f'"{number}{exponent}" has an exponent already and {prefix} is a prefix: it can be one or the other',
            f'write "{number}{exponent}{unit}" or "{number}{prefix}{unit}"',
        )
    return _unit(number, exponent, prefix, unit, rest, dim)


def _coded(number: str, exponent: str, rest: str, dim: Dimension) -> tuple[str, str] | None:
    """A letter followed by a digit: the letter code gone wrong."""
    letter = rest[0]
    digits = len(rest[1:]) - len(rest[1:].lstrip("0123456789"))
    behind = rest[1 + digits :]
    if "." in number and letter in "fpnumkKMGTRF":
        good = f'"{number}{letter}"' if letter != "R" else f'"{number}"'
        return f"it has a decimal point, and {letter} stands for one as well", f"write {good}"
    if exponent:
        return f"an exponent and the letter {letter} can't stand together", f'write "{number}{exponent}"'
    if letter in "RF" and letter not in dim.marks:
        noun = "ohms" if letter == "R" else "farads"
        return f"{letter} in the place of the decimal point says {noun}; {dim.noun} is in {dim.units}", ""
    if letter in "fpnumkKMGT" and dim.prefixes and behind:
        code = f"{number}{letter}{rest[1 : 1 + digits]}"
        foreign = [other for other in DIMENSIONS.values() if behind.strip() in other.spellings]
        if foreign:
            return (
                f"{dim.noun} is in {dim.units}, and {behind.strip()} is the unit of {foreign[0].noun}",
                f'write it in {dim.units}: "{code}"',
            )
        good = f"{number}{letter}{rest[1 : 1 + digits]}"
        if behind[0] in "fpnumkKMGTRF" or behind[0].isdigit():
            why = f"{letter} is both the decimal point and the prefix; {behind} has no place behind it"
            return why, f'write "{good}"'
    return None


def _split(rest: str, dim: Dimension) -> tuple[str, str]:
    """Prefix and unit of what follows a number, as far as they can be told apart."""
    if rest in dim.spellings or rest in dim.decibels:
        return "", rest
    for other in DIMENSIONS.values():
        if rest and rest in other.spellings:
            return "", rest
    if rest[:1] in PREFIXES or rest[:1] == "K":
        unit = rest[1:].lstrip()
        if not unit or any(unit in other.spellings for other in DIMENSIONS.values()):
            return rest[0], unit
    return "", rest


def _unit(number: str, exponent: str, prefix: str, unit: str, rest: str, dim: Dimension) -> tuple[str, str]:
    value = f"{number}{exponent}{prefix}"
    foreign = [other for other in DIMENSIONS.values() if unit and unit in other.spellings]
    if dim.name == "thermal" and rest == "K":
        return "K alone could be kelvin or kilo", f'write "{number}{exponent} K/W", or a k for kilo'
    if rest == "R":
        return f"R says ohms, and {dim.noun} is in {dim.units}", ""
    if dim.name == "temperature" and rest in ("K", "°F", "F"):
        return f"temperatures are in degrees Celsius, and {rest} is not", f'write it in °C, for example "{dim.example}"'
    if unit == "dB" and not dim.stays_db and not dim.decibels:
        return f"{dim.noun} is not given in dB", ""
    if prefix and (not unit or unit in dim.spellings):
        return f"{dim.noun} takes no prefix {prefix} here", f'write it out, for example "{dim.example}"'
    if dim.spellings and foreign:
        noun = foreign[0].noun
        fix = f'write it in {dim.units}: "{value}"' if prefix in dim.prefixes and unit != "%" else ""
        return f"{dim.noun} is in {dim.units}, and {unit} is the unit of {noun}", fix
    if foreign:
        return f"{dim.noun} has no unit, and {unit} is the unit of {foreign[0].noun}", f'write "{value}"'
    if right := _other_case(rest, dim):
        return f"{rest} is not a unit: capitals matter", f'write "{number}{exponent} {right}"'
    letters = "".join(dict.fromkeys(dim.prefixes.replace("K", "")))
    known = f"a prefix ({' '.join(letters)}) or the unit {dim.unit}".rstrip() if letters else f"the unit {dim.unit}"
    return f'"{rest}" after the number is not {known.removesuffix(" or the unit")}', ""


def _other_case(rest: str, dim: Dimension) -> str:
    """The unit, with a prefix or not, that `rest` would be but for its capitals; "" for none."""
    for word in (*dim.spellings, *dim.decibels):
        for prefix in ("", *PREFIXES):
            if f"{prefix}{word}".lower() == rest.lower() and (not prefix or rest[0] in PREFIXES):
                return f"{rest[0] if prefix else ''}{word}"
    return ""
