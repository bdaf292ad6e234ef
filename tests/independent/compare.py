"""Two ledgers of one chain, figure by figure: how far the program's lies from the independent one."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from tests.helpers import row_of
from tests.independent.modes import Mode

SHARE = 1e-6  # owned shares, as they stand
DECIBEL = 1e-9  # figures in dB, as they stand
RELATIVE = 1e-9  # all others
NO_VOLTAGE = 1e-15  # V, a bias voltage that is nothing but rounding

# how the rows of each list are told apart
KEYS = {"lines": ("name",), "nodes": ("name",), "parts": ("stage", "part"), "bias": ("stage",), "bridges": ("part",)}


@dataclass(frozen=True)
class Difference:
    """One figure in both ledgers. `error` is relative, or as it stands for shares and dB; infinite where only one
    of the two has a value."""

    name: str
    program: Any
    independent: Any
    error: float
    limit: float

    def __str__(self) -> str:
        return f"{self.name}: program {self.program!r}, independent {self.independent!r}, error {self.error:.2g}"


def _limit(key: str) -> float:
    if key.startswith("owns"):
        return SHARE
    return DECIBEL if key.endswith("_db") else RELATIVE


def _error(key: str, program: Any, independent: Any) -> float:
    if isinstance(program, float | int) and isinstance(independent, float | int):
        if isinstance(program, bool) or isinstance(independent, bool):
            return 0.0 if program is independent else float("inf")
        apart = abs(program - independent)
        if key.startswith("owns") or key.endswith("_db"):
            return apart
        if key.endswith("_v") and apart < NO_VOLTAGE:
            return 0.0
        return apart / abs(independent) if independent else apart
    return 0.0 if program == independent else float("inf")


def differences(program: Any, independent: Any, name: str = "", key: str = "") -> Iterator[Difference]:
    """Every figure that the independent ledger has."""
    if isinstance(independent, dict):
        for k, value in independent.items():
            if k in ("type", "role", "kind", "interstage"):
                continue
            there = program.get(k, "missing") if isinstance(program, dict) else "missing"
            yield from differences(there, value, f"{name}.{k}".lstrip("."), k)
    elif isinstance(independent, list):
        for row in independent:
            labels = {k: row[k] for k in KEYS[key]}
            there = row_of(program, **labels) if isinstance(program, list) else None
            yield from differences(there or {}, row, f"{name}.{'.'.join(labels.values())}", "")
    else:
        yield Difference(name, program, independent, _error(key, program, independent), _limit(key))


def root_differences(program: Any, independent: list[Mode], names: list[str], kind: str) -> Iterator[Difference]:
    """Poles or zeros: their number, the distance of every pair, and the stages of those that are one stage's alone.

    kind is "poles" or "zeros"; names are those of the lines. Like ones are compared as a set.
    """
    count = None if program is None else len(program)
    yield Difference(f"number of {kind}", count, len(independent), float(count != len(independent)), 0.0)
    left = list(program or [])
    for mode in independent:
        if not left:
            return
        s = complex(mode.s)
        row = min(left, key=lambda r: (abs(complex(r["re"], r["im"]) - s), r["stage"] != names[mode.owner()]))
        left.remove(row)
        found = complex(row["re"], row["im"])
        error = abs(found - s) / abs(s) if s else abs(found)
        yield Difference(f"{kind} at {abs(s) / 6.283185307179586:.6g} Hz", found, s, error, RELATIVE)
        if mode.clear(1e-4) and not (kind == "poles" and s == 0):
            owner = names[mode.owner()]
            error = float("inf") if row["stage"] != owner else 0.0
            yield Difference(f"stage of {kind} at {abs(s) / 6.283185307179586:.6g} Hz", row["stage"], owner, error, 0.0)


def names_of(ledger: dict[str, Any], key: str) -> set[tuple[str, ...]]:
    """The rows that a list of the ledger has, by what tells them apart."""
    return {tuple(row[k] for k in KEYS[key]) for row in ledger[key]}
