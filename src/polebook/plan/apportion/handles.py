"""The keys that a plan may set, and how far: named by the user or the file, else every part that is soldered in."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from polebook import series
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain, Stage
from polebook.chain.paths import locate
from polebook.chain.said import said
from polebook.chain.stage_lists import PARTS
from polebook.problem import Problem, ProblemsFound
from polebook.quantity import DIMENSIONS
from polebook.stages.base import slot_of
from polebook.stages.registry import KINDS

STILL = 1e-4  # neper by which a part that moves less stays as it is
DECADE, TWO_DECADES = 10.0, 100.0
SORTS: Mapping[str, str] = {"resistance": "resistor", "capacitance": "capacitor", "inductance": "inductor"}
_WIRING = frozenset({"stray"})
_BIAS = frozenset({"bias_top", "bias_bottom", "bias_single"})
_GUARDIANS = frozenset({"stopper", "r_comp", "r_out"})  # keep a stage from oscillating, which a plan can't see whole
_LETTERS = {"r": "resistance", "l": "inductance", "c": "capacitance"}
_NO_PLAN = frozenset({"target", "tolerance", "preferred", "bench"})
_LINEAR = frozenset({"temperature", "decibel", "share"})


@dataclass(frozen=True, slots=True)
class Handle:
    """One key of a plan.

    path       among the chain's numbers, "Q1.rc";  dimension  of quantity.DIMENSIONS
    now        the file's value, signed, not 0
    low, high  bounds of its size
    row        the preferred series, "" where the key is no part
    optional   it may also be 0: the part is not there
    role       end of the band at which it acts: "low", "high"; "" for what counts at midband
    shy        how many times its share a move has to pay, against that of an ordinary part
    """

    path: str
    dimension: str
    now: float
    low: float
    high: float
    row: str
    optional: bool
    role: str
    shy: float

    def up(self, size: float) -> float:
        """The next size that can be bought, or is worth writing, above `size`."""
        return series.up(size, self.row) if self.row else _rounded(size * 1.01)

    def down(self, size: float) -> float:
        return series.down(size, self.row) if self.row else _rounded(size / 1.01)

    def nearest(self, size: float) -> float:
        """The size that can be bought whose ratio to `size` is nearest to one; for what is not bought three digits."""
        return series.nearest(size, self.row) if self.row else _rounded(size)


def _rounded(size: float) -> float:
    return float(f"{size:.2e}")


@dataclass(frozen=True, slots=True)
class Free:
    """What a plan may set.

    origin  who says so: "chosen", "file", "fitted"
    notes   keys that the file calls free and no plan can set, with the reason
    """

    handles: tuple[Handle, ...]
    origin: str
    notes: tuple[str, ...] = ()


def free(chain: Chain, data: Mapping[str, Any], words: Sequence[str]) -> Free:
    """The keys that a plan may set: those of `words`, else those that a `free` of the file lists, else every part.

    words  paths, or the name of a stage for every part fitted in it. Raises ProblemsFound for one that leads to
           nothing that a plan can set, and where the file has nothing of the kind.
    """
    if words:
        paths = [path for word in words for path in _chosen(chain, data, word.strip())]
        return Free(tuple(_handle(chain, data, path) for path in dict.fromkeys(paths)), "chosen")
    marked = [f"{stage.name}.{key}" for stage in chain.stages if not stage.left_out for key in stage.free]
    if marked:
        return _marked(chain, data, list(dict.fromkeys(marked)))
    paths = fitted(chain)
    if not paths:
        raise PathRefused("the chain has no part that is soldered in", "a plan sets resistors, capacitors and coils",
                          "name what may change with --free, for example the gain of a block: --free B1.gain")
    return Free(tuple(_handle(chain, data, path) for path in paths), "fitted")


def _marked(chain: Chain, data: Mapping[str, Any], paths: list[str]) -> Free:
    """Of the keys that the file calls free those that a plan can set. Raises ProblemsFound where there are none."""
    found: list[Handle] = []
    notes: list[str] = []
    refused: list[Problem] = []
    for path in paths:
        try:
            found.append(_handle(chain, data, path))
        except ProblemsFound as error:
            refused += error.problems
            notes += [f"{problem.what}: {problem.why}" for problem in error.problems]
    if not found:
        raise ProblemsFound(refused)
    return Free(tuple(found), "file", tuple(notes))


def fitted(chain: Chain, only: str = "") -> list[str]:
    """Paths of every R, C and L that is soldered in: of all stages and the load's coupling, or of the stage `only`."""
    found = [path for stage in chain.stages if not stage.left_out and only in ("", stage.name)
             for path in _of_stage(chain, stage)]
    return found if only else [*found, *(["load.couple"] if chain.get("load.couple") else [])]


def _of_stage(chain: Chain, stage: Stage) -> Iterator[str]:
    kind = KINDS[stage.kind]
    for param in kind.keys(chain.cards[stage.device].family if stage.device else "").values():
        inside = kind.topology == "block" and param.key not in ("couple", "c_load")
        path = f"{stage.name}.{param.key}"
        if param.dimension in PARTS and param.key not in _WIRING and not inside and chain.get(path) \
                and path in chain.given:
            yield path
    for arm in stage.arms:
        yield from (path for path in (f"{stage.name}.arms.{arm.number}.{part}" for part in arm.parts)
                    if chain.get(path))


def _chosen(chain: Chain, data: Mapping[str, Any], word: str) -> list[str]:
    stage = next((stage for stage in chain.stages if stage.name == word), None)
    if stage is None:
        return [_number(chain, locate(word, data).path, locate(word, data).number)]
    if stage.left_out:
        raise PathRefused(f"{said(word)} is left out", "its keys do nothing", "put it back in, or name another stage")
    if paths := fitted(chain, word):
        return paths
    raise PathRefused(f"{said(word)} has no part that is fitted", "its data sheet says what it is",
                      f"name a key of it, for example {word}.gain")


def _number(chain: Chain, path: tuple[str | int, ...], number: str) -> str:
    """The path among the chain's numbers: a stage named by its position goes by its name."""
    if path[0] == "stage" and isinstance(path[1], int):
        return chain.stages[path[1]].name + number[number.index("."):]
    return number


def _handle(chain: Chain, data: Mapping[str, Any], path: str) -> Handle:
    param = locate(path, data).param
    dimension = param.dimension if param else ""
    if param is None or dimension not in DIMENSIONS or dimension in _LINEAR or path.partition(".")[0] in _NO_PLAN:
        what = "what is wanted, not what is built" if path.startswith("target.") else \
            "no size that a plan could scale"
        raise PathRefused(f"{said(path)} can't be free", f"it is {what}", "name a value such as Q1.rc")
    now = chain.get(path)
    if not now or path not in chain.given:
        why = "a plan scales what stands, and zero stays zero" if now == 0 else "a plan begins at a value"
        example = DIMENSIONS[dimension].example
        raise PathRefused(f"{said(path)} is {'zero' if now == 0 else 'absent'}", why,
                          f"give it a value to begin at: polebook set FILE {path} {example}")
    sort = SORTS.get(dimension, "")
    slot, key = slot_of(path.rpartition(".")[2]), path.rpartition(".")[2]
    part = bool(sort) and not path.startswith(("device.", "source.", "supply."))
    shy = 4.0 if slot in _GUARDIANS or key in _GUARDIANS or ".arms." in path else \
        2.0 if slot in _BIAS or key == "r_bias" else 1.0
    reach = TWO_DECADES if dimension in ("capacitance", "inductance") else DECADE
    optional = part and param.sign == "nonnegative" and dimension != "resistance" and ".arms." not in path
    size = abs(now)
    return Handle(path, dimension, now, size / reach, size * reach, chain.preferred[sort] if part else "",
                  optional, _role(chain, path, param.role), shy)


def _role(chain: Chain, path: str, role: str) -> str:
    """The end of the band at which a part acts; that of a ladder's arm may be stated."""
    name, _, rest = path.partition(".")
    if not rest.startswith("arms."):
        return role
    _, number, key = rest.split(".")
    stage = next(stage for stage in chain.stages if stage.name == name)
    return next(arm for arm in stage.arms if arm.number == int(number)).role_of(key)
