"""The d.c. network as a reader has it before them: a node, the resistors at it, the devices that draw from it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.circuit.bias_compile import Compiled, Solution, level, solution
from polebook.circuit.bias_network import MIDWAY, Device, Paths
from polebook.circuit.bias_solution import Plan

DC = "d.c. solution"


@dataclass(frozen=True, slots=True)
class Found:
    """A device in its group of the d.c. plan: the group's solution, and the device's place in it."""

    solved: Solution
    place: int

    @property
    def device(self) -> Device:
        return self.solved.compiled.group.devices[self.place]


def find(books: Books, stage: str) -> Found | None:
    """The device of a stage in the d.c. plan; None where the stage has none."""
    for compiled in books.solution.circuit.plan.groups:
        for place, device in enumerate(compiled.group.devices):
            if device.name == stage:
                return Found(solution(compiled, books.chain.numbers.get), place)
    return None


def amplifier_input(books: Books, stage: str) -> tuple[Compiled, int] | None:
    """The group and free node at the input of an op-amp or block; None where the input is held."""
    plan: Plan = books.solution.circuit.plan
    node = next(a.input for a in plan.amplifiers if a.name == stage)
    return next(((group, node) for group in plan.groups if node in group.group.nodes), None)


class Wiring:
    """Enters nodes, resistors and currents of one group into a working."""

    def __init__(self, books: Books, sheet: Sheet, solved: Solution) -> None:
        self.books, self.sheet, self.solved = books, sheet, solved
        self.group = solved.compiled.group

    def held(self, node: int) -> str:
        """The name of the level that holds a node, "" where it is free."""
        return self.group.held.get(node, "")

    def volts(self, node: int, symbol: str = "V") -> str:
        """Enters the voltage of a node by the best name that it has."""
        name = self.held(node)
        if name:
            return level_of(self.books, self.sheet, name)
        figure = self.figure_of(node)
        if figure and self.books.value(figure) is not None:
            return self.sheet.figure(f"V_{figure.removeprefix('bias.').removesuffix('_v')}", figure)
        value = self.solved.voltage(node)
        return self.sheet.put(symbol, value if value is not None else 0.0, "V", "voltage of a node of the d.c. network",
                              DC)

    def figure_of(self, node: int) -> str:
        """The bias figure that tells a node's voltage; not that of the working itself."""
        for device in self.group.devices:
            ends = [("output_v", device.output), ("lower_v", device.lower)]
            if not device.stopper:
                ends.append(("control_v", device.control))
            for key, end in ends:
                upper = "_upper" if device.upper and key == "output_v" else ""
                name = f"bias.{device.name}{upper}.{key}"
                own = name == self.sheet.entry.name
                if end == node and not own and self.books.value(name) == self.solved.voltage(node):
                    return name
        return ""

    def ohms(self, paths: Paths) -> str:
        """Enters a resistor: the sum of its values in brackets."""
        symbols = [self.sheet.file(path, path) for path in paths]
        return symbols[0] if len(symbols) == 1 else f"({plus(symbols)})"

    def resistors(self, node: int) -> Iterator[tuple[Paths, int]]:
        """Resistors at a node, each with the node at its other end."""
        for resistor in self.group.grounded:
            if resistor.a == node:
                yield resistor.paths, resistor.b
        for resistor in self.group.branches:
            if node in (resistor.a, resistor.b):
                yield resistor.paths, resistor.b if resistor.a == node else resistor.a

    def drawn(self, node: int, but: tuple[int, str] | None = None) -> Iterator[str]:
        """Signed terms of the currents that devices draw out of a node, one end of one device left away."""
        for place, device in enumerate(self.group.devices):
            for end, at in (("output", device.output), ("lower", device.lower), ("control", device.control)):
                if at != node or (place, end) == but or (end == "output" and device.fed_output):
                    continue
                share = self.share(place, end)
                if share:
                    out = (device.sign > 0) == (end != "lower")
                    yield f" {'+' if out else '-'} {self.current(place)}{share if share != '1' else ''}"

    def share(self, place: int, end: str) -> str:
        """What a terminal carries of the device's current, as a factor; "" for nothing, "1" for all of it."""
        device, law = self.group.devices[place], self.solved.numbers.laws[place]
        if end == "output":
            return f"/(1 + 1/{self.beta(device.upper)})" if law.above else "1"
        if end == "control" and device.family != "bjt":
            return ""
        if not law.share:
            return "" if end == "control" else "1"
        beta = self.beta(device.card)
        return f"/{beta}" if end == "control" else f"·(1 + 1/{beta})"

    def current(self, place: int) -> str:
        """Enters the quiescent current of a device."""
        device = self.group.devices[place]
        return self.sheet.figure(f"I_{device.name}", f"bias.{device.name}.current_a")

    def beta(self, card: str) -> str:
        """Enters the current gain of a card, or makes it of gm and rpi."""
        path = f"device.{card}.beta"
        if path in self.books.chain.numbers:
            return self.sheet.file("beta", path)
        gm, rpi = (self.sheet.file(key, f"device.{card}.{key}") for key in ("gm", "rpi"))
        return f"({gm}·{rpi})"

    def balance(self, node: int) -> bool:
        """Solves the balance of a node for its voltage; False where no resistor is at it."""
        weights, sources = [], []
        for paths, other in self.resistors(node):
            ohm = self.ohms(paths)
            weights.append(f"1/{ohm}")
            if self.held(other) != "ground":
                sources.append(f"{self.volts(other)}/{ohm}")
        if not weights:
            return False
        drawn = "".join(" - " + term[3:] if term.startswith(" +") else " + " + term[3:] for term in self.drawn(node))
        top = f"{plus(sources)}{drawn}" if sources else drawn.removeprefix(" + ") or "0"
        top = f"-{top.removeprefix(' - ')}" if top.startswith(" - ") else top
        self.sheet.result(f"V = ({top})/({plus(weights)})", "currents into the node balance:")
        return True

    def balanced_current(self, place: int, end: str) -> bool:
        """Solves the balance of the node at one end of a device for its current."""
        device = self.group.devices[place]
        node = {"lower": device.lower, "output": device.output, "control": device.control}[end]
        if self.held(node) or (end == "output" and device.fed_output):
            return False
        here, terms = self.volts(node), ""
        for paths, other in self.resistors(node):
            far = "" if self.held(other) == "ground" else self.volts(other)
            terms += f" + ({here} - {far})/{self.ohms(paths)}" if far else f" + {here}/{self.ohms(paths)}"
        terms += "".join(self.drawn(node, (place, end)))
        share = self.share(place, end)
        if not terms or not share:
            return False
        inward = (device.sign > 0) == (end == "lower")  # the device gives what the resistors take
        text = terms.removeprefix(" + ")
        text = f"-{text.removeprefix(' - ')}" if text.startswith(" - ") else text
        inverse = {"1": "", "/": "·", "·": "/"}[share[0]] + share[1:]
        sign = "" if inward else "-"
        self.sheet.result(f"I = {sign}({text}){inverse}", f"by the currents at the {end} terminal:")
        return True


def level_of(books: Books, sheet: Sheet, name: str) -> str:
    """Enters the voltage of a held node."""
    if name == "ground":
        return "0"
    if name == MIDWAY:
        rails = [_rail(sheet, end) for end in ("positive", "negative")]
        return f"({plus(rails)})/2"
    if name in books.chain.numbers:
        return sheet.file(f"V_{name.rpartition('.')[2]}", name)
    return sheet.put("V", level(name, books.chain.numbers.get), "V", name, DC)


def _rail(sheet: Sheet, end: str) -> str:
    return sheet.file(f"V_{end}", f"supply.{end}")
