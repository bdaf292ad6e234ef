"""Options that are quantities, whole numbers or lists of names."""

from __future__ import annotations

from polebook.cli.command import Usage

_MOST = 20  # digits of a whole number


def quantity(command: str, option: str, typed: str, dimension: str) -> float:
    """The value of an option in SI units, above zero. Raises Usage with the reason where it is none."""
    from polebook.quantity import DIMENSIONS, Refused, parse  # deferred: --help needs no reader

    try:
        value = parse(typed, dimension)
    except Refused as refused:
        raise Usage(f"polebook {command}: {option}: {refused.what}", refused.fix, refused.why) from None
    if value <= 0.0:
        noun, example = DIMENSIONS[dimension].noun, DIMENSIONS[dimension].example
        raise Usage(f'polebook {command}: {option}: "{typed}" is not above zero', f"write it like {option} {example}",
                    f"it is to be {noun} above zero")
    return value


def whole(command: str, option: str, typed: str | None, example: str) -> int | None:
    """A whole number as typed, None for none. Raises Usage."""
    if typed is None:
        return None
    typed = typed.strip()
    if not (typed.isdecimal() and typed.isascii() and len(typed) <= _MOST):
        raise Usage(f'polebook {command}: {option}: "{typed}" is no whole number', f"write it like {option} {example}")
    return int(typed)


def names(typed: str) -> tuple[str, ...]:
    """The words between the commas of an option."""
    return tuple(word.strip() for word in typed.split(",") if word.strip())
