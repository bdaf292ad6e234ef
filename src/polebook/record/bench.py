"""The benches of a chain file: which sweep each has, and the chain as it stood on the bench."""

from __future__ import annotations

import os
from dataclasses import dataclass, replace

from polebook.chain.model import Bench, Chain
from polebook.plan.spread.alone import with_numbers
from polebook.problem import Place, Problem, ProblemsFound
from polebook.quantity import engineering
from polebook.record.sweeps import Sweep, load
from polebook.refusal import quoted

_NEAR = 1e-3  # relative: resistances that are this near are the same
_ENDS = ("source", "load")


@dataclass(frozen=True, slots=True, eq=False)
class Overlay:
    """The sweep of a bench.

    label     what the bench is called by: its unit and date, else its number
    at        the stage at whose output it was measured, "" for the load
    sweep     None where it can't be had; `problems` then say why, and `text` is what they point into
    apart     a sentence where it was measured between other resistances than the file's, "" else
    """

    number: int
    label: str
    at: str
    sweep: Sweep | None
    apart: str = ""
    problems: tuple[Problem, ...] = ()
    text: str = ""


def overlays(chain: Chain, folder: str) -> tuple[Overlay, ...]:
    """The sweeps of all benches that name a file, in the file's order. `folder` is that of the chain file.

    Never raises: a sweep that can't be had is told as such.
    """
    return tuple(overlay(chain, bench, folder) for bench in chain.benches if bench.file)


def overlay(chain: Chain, bench: Bench, folder: str) -> Overlay:
    """The sweep of a bench that names a file. Never raises."""
    try:
        sweep = load(_path(chain, bench, folder))
        if sweep.reference_ohm is not None:
            _fits(chain, bench)
    except ProblemsFound as found:
        return Overlay(bench.number, label(bench), bench.at, None, "", found.problems, found.text)
    return Overlay(bench.number, label(bench), bench.at, sweep, apart(chain, sweep))


def there(chain: Chain) -> None:
    """Raises ProblemsFound where the file has no bench."""
    if not chain.benches:
        raise ProblemsFound([Problem(
            Place(chain.path), "the file has no [[bench]]", "nothing in it says what was measured on hardware",
            'add a table [[bench]] with gain, lower, upper as measured, or file = "sweep.csv"')])


def label(bench: Bench) -> str:
    """What a bench is called: "board 3, 2026-05-04"; "bench 1" where it says nothing of the kind."""
    return ", ".join(part for part in (bench.unit, bench.date) if part) or f"bench {bench.number}"


def apart(chain: Chain, sweep: Sweep) -> str:
    """Where S parameters refer to another resistance than the chain's source and load have; "" where all is alike."""
    ohms = sweep.reference_ohm
    if ohms is None:
        return ""
    found = []
    for end in _ENDS:
        own = chain.get(f"{end}.resistance")
        if own is None or abs(own - ohms) > _NEAR * ohms:
            found.append(f"the {end} has no resistance" if own is None else f"the {end} is {engineering(own, 'Ω')}")
    if not found:
        return ""
    return f"measured between {engineering(ohms, 'Ω')} on both sides, and in the file {' and '.join(found)}"


def measured(chain: Chain, bench: Bench, reference_ohm: float | None = None) -> Chain:
    """The chain as a bench measured it: looked at where the bench was, between the resistances of its S parameters."""
    if bench.at:
        chain = replace(chain, output=bench.at)
    if reference_ohm is None:
        return chain
    return with_numbers(chain, {f"{end}.resistance": reference_ohm for end in _ENDS})


def _path(chain: Chain, bench: Bench, folder: str) -> str:
    """Where the bench's file is. Raises ProblemsFound for one that no other machine would find."""
    if os.path.isabs(bench.file) or "\0" in bench.file:
        raise ProblemsFound([Problem(
            chain.places.get(f"bench.{bench.number}.file"), f"{quoted(bench.file)} is no file beside the chain",
            "a sweep lies beside the chain file, so that it is found wherever the two are",
            'name it from there, for example file = "bench/board3.csv"')])
    return os.path.join(folder, bench.file)


def _fits(chain: Chain, bench: Bench) -> None:
    """Raises ProblemsFound where S21 can't be the gain that a bench is for."""
    place = chain.places.get(f"bench.{bench.number}.file")
    if chain.source_kind != "voltage":
        raise ProblemsFound([Problem(
            place, "S21 is no gain of this chain", "its source is a current, and its gain is in V/A",
            "measure the output voltage against the current, and save that as a table: Hz, dB")])
    if bench.at:
        raise ProblemsFound([Problem(
            place, f"S21 is no gain up to the output of {bench.at}",
            "it is measured into its reference resistance, which stands in the load's place",
            "take `at` out, or save a gain that was measured there with a probe as a table: Hz, dB")])
