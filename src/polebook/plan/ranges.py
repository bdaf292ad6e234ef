"""What a sweep is of and which values it takes: a path and a range as typed, against a file."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from polebook import series
from polebook.chain import edits, sections, values
from polebook.chain.desk import Desk, Owner
from polebook.chain.model import Chain
from polebook.chain.paths import Located, PathRefused, locate
from polebook.chain.read import parse, reading_of
from polebook.param import Param
from polebook.problem import Problem, ProblemsFound
from polebook.quantity import DIMENSIONS
from polebook.refusal import quoted
from polebook.text.spans import Spans

LINEAR = frozenset({"voltage", "temperature", "decibel", "share"})
MOST_POINTS = 10_000
EXAMPLE = "write it like 1k:10k"


@dataclass(frozen=True, slots=True)
class Swept:
    """What is swept, and the values it takes.

    chain    as the file has it; where the file does not give the key, with the range's second end in its place
    path     among the chain's numbers
    param    the row of its key
    now      the file's value (SI), None where the file has none
    spacing  "geometric", "linear" or the name of a series
    digest   of the file's own chain
    """

    chain: Chain
    path: str
    param: Param
    now: float | None
    values: tuple[float, ...]
    spacing: str
    digest: str


def swept(text: str, file: str, path: str, limits: str, points: int, row: str = "") -> Swept:
    """Reads `path` and `limits` ("1k:10k") for the chain of `text`; `row` names a series to walk, else `points` values.

    Raises ProblemsFound where the file has a fault, the path leads to no number, or an end of the range is no value
    that the key may have.
    """
    reading = reading_of(text, file)
    if reading.chain is None or reading.data is None:
        raise ProblemsFound(reading.problems, text)
    found = locate(path, reading.data)
    param = _of_number(found, reading.chain)
    number = _number(found, reading.chain)
    ends = [(end, _value(end, param, number)) for end in _ends(limits, param, number)]
    first, last = (value for _, value in ends)
    chain = _structure(reading.chain, text, file, path, number, ends)
    if _turned(chain, number):
        first, last = -first, -last
    if row:
        listed = _in_series(first, last, row)
        spacing = row
    else:
        geometric = param.dimension not in LINEAR and first * last > 0
        listed = spread(first, last, points, geometric)
        spacing = "geometric" if geometric else "linear"
    now = reading.chain.numbers.get(number)
    return Swept(chain, number, param, now, listed, spacing, reading.chain.digest)


def spread(first: float, last: float, points: int, geometric: bool) -> tuple[float, ...]:
    """`points` values from `first` to `last`, both exact: of equal ratio (both of one sign) or of equal step."""
    if first == last or points == 1:
        return (first,)
    step: Callable[[float], float]
    if geometric:
        step = lambda share: first * (last / first) ** share  # noqa: E731 - one of two laws
    else:
        step = lambda share: first + (last - first) * share  # noqa: E731
    return (first, *(step(at / (points - 1)) for at in range(1, points - 1)), last)


def _of_number(found: Located, chain: Chain) -> Param:
    """The row of the key, in the units of the chain's source. Raises PathRefused for a key that is no number."""
    param = found.param
    if param is None or param.dimension not in DIMENSIONS:
        what = "several values" if param and param.dimension in ("arms", "table", "quantities") else "no number"
        raise PathRefused(f"{found.number} is {what}", "a sweep moves one number of the chain",
                          "name a number: Q1.rc, B1.poles.1, L1.arms.2.shunt_c, device.D.beta")
    return sections.of_source_kind((param,), chain.source_kind)[0]


def _number(found: Located, chain: Chain) -> str:
    """The path among the chain's numbers: a stage named by its position goes by its name."""
    if found.path[0] == "stage" and isinstance(found.path[1], int):
        return chain.stages[found.path[1]].name + found.number[found.number.index("."):]
    return found.number


def _ends(limits: str, param: Param, number: str) -> tuple[str, str]:
    parts = limits.split(":")
    if len(parts) != 2 or not all(part.strip() for part in parts):
        example = DIMENSIONS[param.dimension].example
        raise PathRefused(f"{quoted(limits)} is not a range", "a range is two values with a colon between",
                          f"{EXAMPLE}, here for {number} with values such as {example}")
    return parts[0].strip(), parts[1].strip()


def _value(raw: str, param: Param, number: str) -> float:
    """One end in SI units. Raises ProblemsFound where it is none that the key may have."""
    desk = Desk("", "", Spans(""))
    value = values.number(desk, raw, param, Owner((), "", number.rpartition(".")[0]), (param.key,))
    if value is None:
        raise ProblemsFound(Problem(None, p.what, p.why, p.fix) for p in desk.problems())
    return value


def _structure(chain: Chain, text: str, file: str, path: str, number: str, ends: list[tuple[str, float]]) -> Chain:
    """The chain that the values are put into, once the reader has judged what only it can judge.

    A key that the file does not give may need another beside it, a zero may cut the chain, a tolerance must stay
    below 100 %. A card may contradict itself on the way, as long as it does not in the file.
    """
    given = number in chain.given
    for raw, value in ends:
        if not given or value == 0.0 or not number.startswith("device."):
            edit, _ = edits.set_value(text, file, path, raw)
            chain = chain if given else parse(edit.apply(text), file)
    return chain


def _turned(chain: Chain, number: str) -> bool:
    """A block's gain in dB carries its sign beside it."""
    name, _, key = number.rpartition(".")
    return key == "gain" and any(stage.name == name and stage.inverting for stage in chain.stages)


def _in_series(first: float, last: float, row: str) -> tuple[float, ...]:
    """The values of a series from `first` to `last`, both ends included."""
    low, high = min(first, last), max(first, last)
    if low <= 0:
        raise PathRefused("a series has no value at or below zero", "its values are those of parts that one can buy",
                          "begin the range above zero, or take --points in place of --series")
    found: list[float] = []
    value = series.at_least(low, row)
    while value <= high and len(found) < MOST_POINTS:
        found.append(value)
        value = series.up(value, row)
    if not found:
        near = f"{series.at_most(low, row):g} and {series.at_least(high, row):g} are the nearest"
        raise PathRefused(f"no value of {row} lies in the range", near, "widen the range, or take a finer series")
    return tuple(found if first <= last else reversed(found))
