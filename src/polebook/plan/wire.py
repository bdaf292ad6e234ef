"""What two processes of this program say to each other: JSON and columns of numbers, all of it checked and none code.

A message is the length of its head in four bytes, little-endian; the head, JSON in ASCII: {"kind": ..., "body": ...,
"columns": [[name, type, length], ...]}; then the columns' numbers one after the other, little-endian. What is longer
than a message can be, or of another form, is `Garbled` before room is made for it.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, fields, is_dataclass
from typing import IO, TYPE_CHECKING, Any, TypeVar

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

T = TypeVar("T")
MOST_HEAD = 8 << 20  # bytes: a text of 512 KiB, every character spelt out, and as much again
MOST_COLUMNS, MOST_NUMBERS = 32, 1 << 20
_SIZES = {"<f8": 8, "|i1": 1}


class Garbled(Exception):
    """What was read is no message, or not the one that was due; the text says in which way."""


@dataclass(frozen=True, slots=True)
class Message:
    """columns: name -> (n,), float64 or int8, not to be written to."""

    kind: str
    body: Any = None
    columns: Mapping[str, NDArray[np.generic]] = field(default_factory=dict)


def write(target: IO[bytes], message: Message) -> None:
    """Raises OSError where nobody is left to read it."""
    columns = {name: column.astype(column.dtype.newbyteorder("<"), copy=False)
               for name, column in message.columns.items()}
    head = json.dumps({"kind": message.kind, "body": message.body,
                       "columns": [[name, column.dtype.str, column.size] for name, column in columns.items()]})
    target.write(len(head).to_bytes(4, "little") + head.encode("ascii"))
    for column in columns.values():
        target.write(column.tobytes())
    target.flush()


def read(source: IO[bytes]) -> Message | None:
    """The next message; None where there is none to come, or only the beginning of one. Raises Garbled, OSError."""
    start = source.read(4)
    if len(start) < 4:
        return None
    length = int.from_bytes(start, "little")
    if length > MOST_HEAD:
        raise Garbled(f"a head of {length} bytes is announced")
    data = source.read(length)
    if len(data) < length:
        return None
    try:
        head = json.loads(data)
    except (ValueError, RecursionError):
        raise Garbled("a head that is no JSON") from None
    kind, body, columns = of_names(kind=word, body=anything, columns=many(_column))(head)
    if len(columns) > MOST_COLUMNS:
        raise Garbled(f"{len(columns)} columns are announced")
    found: dict[str, NDArray[np.generic]] = {}
    for name, type_, count in columns:
        numbers = source.read(count * _SIZES[type_])
        if len(numbers) < count * _SIZES[type_]:
            return None
        import numpy as np  # deferred: nothing else here needs it, and the app's start is free of it

        found[name] = np.frombuffer(numbers, dtype=type_)
    return Message(kind, body, found)


def _column(given: Any) -> tuple[str, str, int]:
    name, type_, count = several(word, word, whole)(given)
    if type_ not in _SIZES or not 0 <= count <= MOST_NUMBERS:
        raise Garbled(f"a column of {count} numbers {type_[:8]!r} is announced")
    return name, type_, count


def plain(value: Any) -> Any:
    """A value of dataclasses, tuples, mappings, arrays, words and numbers as JSON has it: for `made` and the like."""
    if is_dataclass(value):
        return {one.name: plain(getattr(value, one.name)) for one in fields(value)}
    if isinstance(value, (tuple, list)):
        return [plain(one) for one in value]
    if isinstance(value, Mapping):
        return {name: plain(one) for name, one in value.items()}
    return value.tolist() if hasattr(value, "tolist") else value


def word(given: Any) -> str:
    if type(given) is not str:
        raise _due("a word", given)
    return given


def whole(given: Any) -> int:
    """A whole number of 64 bits."""
    if type(given) is not int or not -2**63 <= given < 2**64:
        raise _due("a whole number", given)
    return given


def number(given: Any) -> float:
    return given if type(given) is float else whole(given)


def flag(given: Any) -> bool:
    if type(given) is not bool:
        raise _due("yes or no", given)
    return given


def maybe(check: Callable[[Any], T]) -> Callable[[Any], T | None]:
    """What `check` takes, or nothing."""
    return lambda given: None if given is None else check(given)


def many(check: Callable[[Any], T]) -> Callable[[Any], tuple[T, ...]]:
    """A list, each of which `check` takes."""
    def checked(given: Any) -> tuple[T, ...]:
        if type(given) is not list:
            raise _due("a list", given)
        return tuple(check(one) for one in given)
    return checked


def several(*checks: Callable[[Any], Any]) -> Callable[[Any], tuple[Any, ...]]:
    """A list of as many, each taken by its own."""
    def checked(given: Any) -> tuple[Any, ...]:
        if type(given) is not list or len(given) != len(checks):
            raise _due(f"a list of {len(checks)}", given)
        return tuple(check(one) for check, one in zip(checks, given, strict=True))
    return checked


def by_name(check: Callable[[Any], T]) -> Callable[[Any], dict[str, T]]:
    """A table, each entry of which `check` takes."""
    def checked(given: Any) -> dict[str, T]:
        if type(given) is not dict:
            raise _due("a table", given)
        return {name: check(one) for name, one in given.items()}
    return checked


def of_names(**checks: Callable[[Any], Any]) -> Callable[[Any], tuple[Any, ...]]:
    """A table of these names and no others; what they stand for, in this order."""
    def checked(given: Any) -> tuple[Any, ...]:
        if type(given) is not dict or given.keys() != checks.keys():
            raise _due(f"a table of {len(checks)}, {next(iter(checks))} first,", given)
        return tuple(check(given[name]) for name, check in checks.items())
    return checked


def made(make: Callable[..., T], **checks: Callable[[Any], Any]) -> Callable[[Any], T]:
    """What `make` makes of a table of these names, its arguments in this order."""
    checked = of_names(**checks)
    return lambda given: make(*checked(given))


def anything(given: Any) -> Any:
    return given


def _due(what: str, given: Any) -> Garbled:
    came = _NAMES.get(type(given), "nothing")
    return Garbled(f"{what} was due, and {'another' if what.startswith(came) else came} came")


_NAMES = {str: "a word", int: "a whole number", float: "a number", bool: "yes or no", list: "a list", dict: "a table"}
