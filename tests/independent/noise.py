"""Noise once more, from LEDGER's definitions: every source in its place in the nodal equations, drawn for it alone.

Densities in 50-digit arithmetic by the transposed equations; the total over a band in double precision by Simpson's
rule on a fine grid. Nothing of the program is used.
"""

from __future__ import annotations

import tomllib
from collections.abc import Hashable, Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np
from scipy.integrate import simpson

from tests.independent.cards import BOLTZMANN, CHARGE
from tests.independent.kinds import DEVICE_KINDS
from tests.independent.linear import mp, solve
from tests.independent.network import GROUND, Element, System
from tests.independent.quantity import number
from tests.independent.solved import Solved

T0 = mp.mpf(290)
SILENT = {"device": ("rpi", "ro"), "opamp": ("rin", "rout", "unit"), "block": ("rin", "rout", "unit"), "": ()}
Row = Hashable


@dataclass(frozen=True)
class Source:
    """white in V²/Hz or A²/Hz, corner in Hz; `into` is what one volt or ampere of it adds to the equations' rows."""

    owner: tuple[str, str]
    white: Any
    corner: Any
    into: Mapping[Row, Any]


class Noise(Solved):
    """The noise of one chain."""

    def __init__(self, doc: Mapping[str, Any], scaled: Mapping[tuple[int, str], Any] | None = None) -> None:
        super().__init__(doc, scaled)
        celsius = number(doc.get("supply", {}).get("temperature", 25))
        self.thermal = 4 * BOLTZMANN * (mp.mpf(celsius) + mp.mpf("273.15"))
        self.names = [name for name, _ in self.drawing.lines]
        self.split: dict[int, int] = {}  # line of a block with voltage noise -> place of the wire that carries it
        self.parted = list(self.elements)
        for line in range(1, self.last):
            self._part_block(line)
        self.system = System(self.parted)

    def table(self, line: int) -> Mapping[str, Any]:
        return self.doc["stage"][line - 1] if 0 < line < self.last else {}

    def _part_block(self, line: int) -> None:
        """Sets a wire between a block's port and all that hangs on it, for its voltage noise to stand in."""
        stage = self.table(line)
        if stage.get("kind") != "block" or stage.get("left_out") or not {"en", "nf"} & set(stage):
            return
        port = f"{stage['name']}.a" if "couple" in stage else self.nodes[line - 1]
        inside = f"{stage['name']}.inside"

        def moved(node: str) -> str:
            return inside if node == port else node

        for place, e in enumerate(self.parted):
            if e.line == line and e.part != "couple":
                self.parted[place] = replace(e, a=moved(e.a), b=moved(e.b), c=moved(e.c), d=moved(e.d))
        self.split[line] = len(self.parted)
        self.parted.append(Element("L", line, "wire", inside, port, mp.mpf(0)))

    def _family(self, line: int) -> str:
        stage = self.table(line)
        kind = stage.get("kind", "")
        if kind in DEVICE_KINDS:
            return "device"
        return kind if kind in ("block", "") else "" if kind == "ladder" else "opamp"

    @cached_property
    def sources(self) -> list[Source]:
        found = []
        for e in self.parted:
            name = e.part.removesuffix("_upper")
            silent = SILENT[self._family(e.line)]
            if e.kind == "R" and not any(name == word or (word == "unit" and name.startswith(word)) for word in silent):
                found.append(self._between((e.line, e.part), e.a, e.b, self.thermal / e.value))
        for line in range(1, self.last):
            if not self.table(line).get("left_out"):
                found += {"device": self._device, "opamp": self._opamp, "block": self._block}.get(
                    self._family(line), lambda _: [])(line)
        return found

    def _between(self, owner: tuple[int, str], a: str, b: str, white: Any, corner: Any = 0) -> Source:
        into = {node: sign for node, sign in ((a, mp.mpf(1)), (b, mp.mpf(-1))) if node != GROUND}
        return Source((self.names[owner[0]], owner[1]), white, mp.mpf(corner), into)

    def _device(self, line: int) -> list[Source]:
        stage = self.table(line)
        own = self.bias[stage["name"]]
        found = self._transistor(line, self.cards[stage["device"]], own.current, "")
        if stage["kind"] == "cascode":
            upper = self.cards[stage.get("upper", stage["device"])]
            found += self._transistor(line, upper, own.upper.current, "_upper")
        return found

    def _transistor(self, line: int, card: Any, current: Any, after: str) -> list[Source]:
        gm = next((e for e in self.parted if e.line == line and e.part == "gm" + after), None)
        if gm is None:  # cut off: no current, no channel
            return []
        corner = card.get("flicker_corner", 0)
        if card.family == "bjt":
            beta = card.get("beta")
            if beta is None:
                beta = gm.value * next(e.value for e in self.parted if e.line == line and e.part == "rpi" + after)
            current = max(current, mp.mpf(0))  # a device that is cut off makes no shot noise
            return [self._between((line, "gm" + after), gm.a, gm.b, 2 * CHARGE * current),
                    self._between((line, "ib" + after), gm.c, gm.d, 2 * CHARGE * current / beta, corner)]
        if card.family == "triode":
            req = card.get("req_noise", mp.mpf("2.5") / gm.value)
            white = 4 * BOLTZMANN * T0 * req * gm.value**2
        else:
            white = self.thermal * card.get("gamma_noise", mp.mpf(2) / 3) * gm.value
        found = [self._between((line, "gm" + after), gm.a, gm.b, white, corner)]
        if "ig" in card.numbers:
            found.append(self._between((line, "ig" + after), gm.c, gm.d, 2 * CHARGE * card.get("ig")))
        return found

    def _opamp(self, line: int) -> list[Source]:
        card = self.cards[self.table(line)["device"]]
        gain = next(e for e in self.parted if e.line == line and e.part == "a0")
        found = []
        if "en" in card.numbers:
            found.append(Source((self.names[line], "en"), card.get("en") ** 2, mp.mpf(card.get("en_corner", 0)),
                                {gain.b: gain.value}))
        if "in" in card.numbers:
            found += [self._between((line, "in"), node, GROUND, card.get("in") ** 2, card.get("in_corner", 0))
                      for node in (gain.c, gain.d)]
        return found

    def _block(self, line: int) -> list[Source]:
        stage = self.table(line)

        def read(key: str, default: str) -> Any:
            return mp.mpf(number(stage.get(key, default), key))

        found = []
        if line in self.split:
            white = read("en", "0") ** 2
            if "nf" in stage:
                white = 4 * BOLTZMANN * T0 * read("nf_source", "50") * (mp.mpf(10) ** (read("nf", "0") / 10) - 1)
            found.append(Source((stage["name"], "en"), white, read("en_corner", "0"),
                                {("branch", self.split[line]): mp.mpf(1)}))
        if "in" in stage:
            port = f"{stage['name']}.a" if "couple" in stage else self.nodes[line - 1]
            found.append(self._between((line, "in"), port, GROUND, read("in", "0") ** 2, read("in_corner", "0")))
        return found

    # -- density ----------------------------------------------------------------------------------------------------

    def reach(self, f: Any, node: str = "") -> dict[Row, Any]:
        """What one unit in each row of the equations does at a node, the load's by default."""
        transposed: dict[Row, dict[Row, Any]] = {key: {} for key in self.system.unknowns}
        for row, entries in self.system.rows(mp.mpc(0, 2 * mp.pi * f)).items():
            for column, value in entries.items():
                transposed[column][row] = value
        return solve(transposed, [{node or self.load: mp.mpf(1)}])[0]

    def squares(self, f: Any, node: str = "") -> dict[tuple[str, str], Any]:
        """What each owner adds to the density² at a node, V²/Hz."""
        y, out = self.reach(f, node), {}
        for one in self.sources:
            through = sum((value * y[row] for row, value in one.into.items()), mp.mpf(0))
            out[one.owner] = out.get(one.owner, mp.mpf(0)) + abs(through) ** 2 * one.white * (1 + one.corner / f)
        return out

    def input_density(self, f: Any) -> Any:
        return mp.sqrt(sum(self.squares(f).values())) / abs(self.h(f))

    def figure_db(self, f: Any) -> Any:
        """Noise figure; None of an ideal source."""
        ohm = mp.mpf(number(self.doc["source"].get("resistance", 0)))
        if not ohm:
            return None
        squares = self.squares(f)
        own = sum(x for owner, x in squares.items() if owner not in (("source", "resistance"), ("load", "resistance")))
        least = 4 * BOLTZMANN * T0 * (1 / ohm if self.by_current else ohm) * abs(self.h(f)) ** 2
        return 10 * mp.log10(1 + own / least)

    # -- total ------------------------------------------------------------------------------------------------------

    def total(self, low: float, high: float, node: str = "", count: int = 4001) -> float:
        """V rms between two frequencies in Hz."""
        f = np.geomspace(low, high, count)
        G, C, unknowns = self.system.dense()
        place = {key: at for at, key in enumerate(unknowns)}
        A = np.swapaxes(G + 2j * np.pi * f[:, None, None] * C, 1, 2)
        columns = np.abs(A).max(axis=1, keepdims=True)
        A = A / columns
        rows = np.abs(A).max(axis=2, keepdims=True)
        right = np.zeros((len(unknowns), 1), complex)
        right[place[node or self.load], 0] = 1
        y = (np.linalg.solve(A / rows, right / rows) / np.swapaxes(columns, 1, 2))[:, :, 0]
        square = np.zeros(f.shape)
        for one in self.sources:
            through = sum(complex(value) * y[:, place[row]] for row, value in one.into.items())
            square += np.abs(through) ** 2 * float(one.white) * (1 + float(one.corner) / f)
        return float(np.sqrt(simpson(square * f, x=np.log(f))))


def read(path: str | Path) -> Noise:
    """The noise of a chain file."""
    return Noise(tomllib.loads(Path(path).read_text(encoding="utf-8")))
