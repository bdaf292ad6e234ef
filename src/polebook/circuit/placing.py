"""Where each value lands in the matrix: entries by segment, with signs."""

from __future__ import annotations

from dataclasses import dataclass, field

from polebook.circuit.elements import Branch, Drive, Storage, Transfer
from polebook.circuit.recorder import Recorder
from polebook.stages.stamper import GROUND

Signed = tuple[tuple[int, float], ...]  # (entry, sign)
Placed = list[tuple[int, Signed]]


@dataclass(slots=True)
class Stamps:
    """Entries are numbered per segment, since a node between two segments has a share of each.

    slot_of     entry -> slot of the matrix
    where       entry -> (row, column)
    ranges      entries of each segment, from and to
    conducting  (part, stamps) of single resistors: they take 1/R
    forward     (part, stamps) of transconductances and gains
    storing     (part, stamps) of single high-role capacitors and time constants: they take s times the value
    washing     (part, stamps) of low-role time constants: they take 1/(s·tau)
    compound    (branch, stamps) of admittance branches of several parts
    unit        entries that are 1
    """

    slot_of: list[int] = field(default_factory=list)
    where: list[tuple[int, int]] = field(default_factory=list)
    ranges: list[tuple[int, int]] = field(default_factory=list)
    conducting: Placed = field(default_factory=list)
    forward: Placed = field(default_factory=list)
    storing: Placed = field(default_factory=list)
    washing: Placed = field(default_factory=list)
    compound: Placed = field(default_factory=list)
    unit: list[int] = field(default_factory=list)


def balance_rows(recorder: Recorder) -> list[int]:
    """Row in which the currents into each node are summed, -1 where nobody asks for them.

    A node's own row; but a driven node's row is an equation of another kind, so an interstage node that is
    driven has its currents summed in a row behind all others: the input resistance of what follows is read there.
    """
    between = {segment.after for segment in recorder.segments}
    count = len(recorder.names)
    return [k if not driven else count + 1 + k if k in between else -1 for k, driven in enumerate(recorder.is_driven)]


def place(recorder: Recorder, slots: dict[tuple[int, int], int]) -> Stamps:
    """Places every element of every segment; `slots` takes the matrix entries as they come up."""
    stamps = Stamps()
    rows = balance_rows(recorder)
    first = 0
    for segment in recorder.segments:
        placer = _Placer(stamps, slots, recorder, rows)
        for number, branch in enumerate(segment.branches):
            if not branch.series:
                placer.branch(first + number, branch)
        for transfer in segment.transfers:
            placer.transfer(transfer)
        for drive in segment.drives:
            placer.drive(drive)
        for storage in segment.storages:
            placer.storage(storage)
        first += len(segment.branches)
        stamps.ranges.append((placer.start, len(stamps.slot_of)))
    return stamps


class _Placer:
    """One segment's entries; ground has none, and the row of a driven node takes no currents."""

    def __init__(self, stamps: Stamps, slots: dict[tuple[int, int], int], recorder: Recorder, rows: list[int]) -> None:
        self.stamps, self.slots, self.recorder, self.rows = stamps, slots, recorder, rows
        self.start = len(stamps.slot_of)
        self._entry: dict[int, int] = {}

    def branch(self, number: int, branch: Branch) -> None:
        i, j = branch.i, branch.j
        signed = self._signed([(i, i, 1.0), (j, j, 1.0), (i, j, -1.0), (j, i, -1.0)])
        if not branch.single:
            self.stamps.compound.append((number, signed))
            return
        index = branch.groups[0][0]
        part = self.recorder.parts[index]
        if part.type == "R":
            self.stamps.conducting.append((index, signed))
        elif part.type == "C" and part.role == "high":
            self.stamps.storing.append((index, signed))
        else:
            self.stamps.compound.append((number, signed))

    def transfer(self, t: Transfer) -> None:
        self.stamps.forward.append((t.part, self._signed([
            (t.output, t.plus, 1.0), (t.output, t.minus, -1.0), (t.lower, t.plus, -1.0), (t.lower, t.minus, 1.0)])))

    def drive(self, d: Drive) -> None:
        self.stamps.unit.append(self._number(d.node, d.node))
        entries = [(self._number(d.node, column), sign) for column, sign in ((d.plus, -1.0), (d.minus, 1.0))
                   if column != GROUND]
        self.stamps.forward.append((d.gain, tuple(entries)))

    def storage(self, storage: Storage) -> None:
        kind = self.stamps.storing if self.recorder.parts[storage.part].role == "high" else self.stamps.washing
        kind.append((storage.part, ((self._number(storage.node, storage.node), 1.0),)))

    def _signed(self, items: list[tuple[int, int, float]]) -> Signed:
        return tuple((self._number(self.rows[i], j), sign) for i, j, sign in items
                     if i != GROUND and j != GROUND and self.rows[i] >= 0)

    def _number(self, i: int, j: int) -> int:
        slot = self.slots.setdefault((i, j), len(self.slots))
        if slot not in self._entry:
            self._entry[slot] = len(self.stamps.slot_of)
            self.stamps.slot_of.append(slot)
            self.stamps.where.append((i, j))
        return self._entry[slot]
