"""What flows out of a node of the midband network: the currents that a resistance is made of, element by element."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

from polebook.book.workings.sheet import Books
from polebook.circuit.elements import Branch, Segment
from polebook.circuit.views import impedance
from polebook.solve.transfer import adjoint, branch_currents
from polebook.stages.stamper import GROUND

Volts = Callable[[int, int], float]


@dataclass(frozen=True, slots=True)
class Flow:
    """A current in A that leaves the node through `element`, "Q1.rb1"."""

    element: str
    amperes: float


def branch_name(books: Books, branch: Branch) -> str:
    """A branch by the parts of it that carry current at midband."""
    parts = [books.layout.parts[index] for group in branch.groups for index in group]
    names = [part.name for part in parts if part.type == "R"] or [part.name for part in parts]
    return f"{parts[0].stage}.{'+'.join(names)}"


def out_of(books: Books, node: int, segments: Iterable[Segment], volts: Volts,
           series: Callable[[int, Branch], float] | None = None) -> Iterator[Flow]:
    """Currents out of `node` and all that is one with it, into the elements of `segments`.

    volts   voltage of a node, for the end of its element that lies inside
    series  current from i to j of a series branch by its number, where known without a difference of near voltages
    """
    root = books.root
    inside = {k for k, top in root.items() if top == root[node]}
    number = {id(branch): k for k, branch in enumerate(books.layout.branches)}
    for segment in segments:
        for branch in segment.branches:
            if (branch.i in inside) == (branch.j in inside):
                continue
            z = impedance(books.net, branch, 0.0, "midband")
            if z is None:
                continue
            end = branch.i if branch.i in inside else branch.j
            if branch.series and series:
                current = series(number[id(branch)], branch)
            else:
                current = (volts(branch.i, end) - volts(branch.j, end)) / z
            yield Flow(branch_name(books, branch), current if branch.i in inside else -current)
        for transfer in segment.transfers:
            if (transfer.output in inside) != (transfer.lower in inside):
                end = transfer.output if transfer.output in inside else transfer.lower
                across = volts(transfer.plus, end) - volts(transfer.minus, end)
                current = books.net.values[transfer.part] * across
                yield Flow(books.full_name(books.layout.parts[transfer.part]),
                           current if transfer.output in inside else -current)


def driven_by_source(books: Books, reference: int) -> tuple[Volts, Callable[[int, Branch], float]]:
    """Voltages and branch currents of the midband solution, for 1 V at the node `reference`."""
    folded, v = books.solution.midband, books.solution.volts
    scale = v[reference]
    found = branch_currents(folded, v, adjoint(folded, books.layout.after[-1]))
    parents = {step.step.branch: step.step.parent for taken in folded.taken for step in taken
               if step.step.branch >= 0}

    def volts(node: int, _: int) -> float:
        return 0.0 if node == GROUND else float(v[node] / scale)

    def series(number: int, branch: Branch) -> float:
        current = float(found[number][0] / scale)  # towards the parent
        return current if parents[number] == branch.j else -current

    return volts, series


def for_one_ampere(books: Books) -> Volts:
    """Voltages for 1 A into the node that an element stands at."""
    z = books.solution.inverse.z
    return lambda other, node: 0.0 if other == GROUND else float(z[other, node])
