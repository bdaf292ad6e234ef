"""How the figures of a stage's bias came about. What is shown is checked against the figure before it is shown."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import partial

from polebook.book.workings.direct import Found, Wiring, amplifier_input, find, level_of
from polebook.book.workings.laws import control_drop, idss, perveance, strength
from polebook.book.workings.sheet import Books, Sheet
from polebook.circuit.bias_compile import solution
from polebook.devices import bjt, fet, triode
from polebook.formula import Formula, Working

NEAR = 1e-9
FORMULAS = (
    Formula("bias.current_a.given", "as the file states it", "the chain file"),
    Formula("bias.current_a", "the current at which the device's law and the resistors agree", "Kirchhoff's laws"),
    Formula("bias.current_a.upper", "the lower device's current but for the upper base current", "Kirchhoff's laws"),
    Formula("bias.across_v", "|V_output - V_lower|", "definition"),
    Formula("bias.across_v.given", "as the file states it; it wins over the rails", "the chain file"),
    Formula("bias.control_v", "V_lower + the control's voltage by the device's law, else as the network has it",
            "Kirchhoff's laws"),
    Formula("bias.lower_v", "as the resistors at the terminal have it, else V_control - the law's voltage",
            "Kirchhoff's laws"),
    Formula("bias.output_v", "as the resistors at the terminal have it", "Kirchhoff's laws"),
    Formula("bias.dissipation_w", "current·across", "definition"),
)
FORMULA = {formula.figure: formula for formula in FORMULAS}
Way = Callable[[Sheet], bool]


def bias(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of `bias`."""
    owner, _, key = sheet.entry.name.rpartition(".")
    if key == "dissipation_w":
        current, across = sheet.figure("I", f"{owner}.current_a"), sheet.figure("V", f"{owner}.across_v")
        sheet.result(f"P = {current}·{across}")
        return sheet.done(FORMULA["bias.dissipation_w"])
    name = sheet.entry.row["stage"]
    upper = all(stage.name != name for stage in books.chain.stages)
    found = find(books, name.removesuffix("_upper") if upper else name)
    if found is None:
        return _amplifier(books, sheet, name)
    device = _Upper(books, found) if upper else _Device(books, found)
    for formula, way in device.ways(key):
        page = Sheet(books, sheet.entry)
        if way(page) and _holds(page):
            device.also(key, page)
            return page.stated(FORMULA[formula].text, device.source(FORMULA[formula], page))
    return sheet.done(FORMULA[f"bias.{key}"], "It comes out of the whole d.c. network at once.")


def _holds(page: Sheet) -> bool:
    """Whether the last step comes to the figure, the sizes that it is a difference of taken into account."""
    value, wanted = page.steps[-1].value, page.entry.value
    sizes = [abs(number.value) for number in page.numbers if number.unit == page.steps[-1].unit]
    return bool(abs(value - wanted) <= NEAR * max([abs(wanted), *sizes]))


def _amplifier(books: Books, sheet: Sheet, stage: str) -> Working:
    """An op-amp's input and output: held, or drawn to 0 V by what stands at it."""
    key = sheet.entry.key
    formula = FORMULA[f"bias.{key}"]
    plan = books.solution.circuit.plan
    amplifier = next(a for a in plan.amplifiers if a.name == stage)
    name = plan.levels.get(amplifier.output if key == "output_v" else amplifier.input)
    if name:
        sheet.result(f"V = {level_of(books, sheet, name)}", "held there:")
        return sheet.done(formula)
    at = amplifier_input(books, stage)
    if at is not None and Wiring(books, sheet, solution(at[0], books.chain.numbers.get)).balance(at[1]):
        return sheet.done(formula)
    return sheet.done(formula, "It comes out of the whole d.c. network at once.")


class _Device:
    """The ways in which each figure of a device may have come about, the first that holds being shown."""

    def __init__(self, books: Books, found: Found) -> None:
        self.books, self.found, self.device = books, found, found.device
        self.law = found.solved.numbers.laws[found.place]
        self.owner, self.card, self.family = f"bias.{self.device.name}", self.device.card, self.device.family
        self.sign = "+" if self.device.sign > 0 else "-"

    def source(self, formula: Formula, page: Sheet) -> str:
        """The formula's source, and that of the device's law where a step uses it."""
        by_law = any(step.symbol in ("vbe", "vgs", "vgk") or step.must == "vbe" for step in page.steps)
        law = {"bjt": bjt.LAW, "triode": triode.LAW, "jfet": fet.LAW_JFET}.get(self.family, fet.LAW_MOSFET)
        return f"{formula.source}; {law.text}: {law.source}" if by_law else formula.source

    def wiring(self, page: Sheet) -> Wiring:
        return Wiring(self.books, page, self.found.solved)

    def volts(self, page: Sheet, key: str) -> str:
        """Enters another voltage of the same device."""
        return page.figure(f"V_{key.removesuffix('_v')}", f"{self.owner}.{key}")

    def ways(self, key: str) -> Iterator[tuple[str, Way]]:
        yield from {"current_a": self._current, "across_v": self._across, "control_v": self._control,
                    "lower_v": self._lower, "output_v": self._output}[key]()

    def _current(self) -> Iterator[tuple[str, Way]]:
        if self.device.current:
            yield "bias.current_a.given", lambda page: _file(page, "I", self.device.current)
            return
        if self.family != "bjt":
            yield "bias.current_a", self._by_law
        for end in ("lower", "output", "control"):
            yield "bias.current_a", partial(self._by_balance, end)

    def _by_balance(self, end: str, page: Sheet) -> bool:
        return self.wiring(page).balanced_current(self.found.place, end)

    def _across(self) -> Iterator[tuple[str, Way]]:
        if self.device.across:
            yield "bias.across_v.given", lambda page: _file(page, "V", self.device.across)
        yield "bias.across_v", self._difference

    def _difference(self, page: Sheet) -> bool:
        high, low = "output_v", "lower_v"
        if self.sign == "-":
            high, low = low, high
        page.result(f"V = {self.volts(page, high)} - {self.volts(page, low)}")
        return True

    def _control(self) -> Iterator[tuple[str, Way]]:
        if self.device.current:
            yield "bias.control_v", lambda page: self._above(page, "lower_v", self.sign)
        yield "bias.control_v", lambda page: self._node(page, self.device.control)
        yield "bias.control_v", self._behind_stopper
        yield "bias.control_v", lambda page: self.wiring(page).balance(self.device.control)
        yield "bias.control_v", lambda page: self._above(page, "lower_v", self.sign)

    def _lower(self) -> Iterator[tuple[str, Way]]:
        yield "bias.lower_v", lambda page: self._node(page, self.device.lower)
        yield "bias.lower_v", lambda page: self.wiring(page).balance(self.device.lower)
        yield "bias.lower_v", lambda page: self._above(page, "control_v", "-" if self.sign == "+" else "+")

    def _output(self) -> Iterator[tuple[str, Way]]:
        if self.device.upper:
            yield "bias.output_v", self._above_lower
            return
        yield "bias.output_v", lambda page: self._node(page, self.device.output)
        yield "bias.output_v", lambda page: self.wiring(page).balance(self.device.output)
        yield "bias.output_v", self._above_lower

    def _above_lower(self, page: Sheet) -> bool:
        across = f"{self.owner}.across_v"
        if self.books.value(across) is None or self.books.value(f"{self.owner}.lower_v") is None:
            return False
        page.result(f"V = {self.volts(page, 'lower_v')} {self.sign} {page.figure('V_across', across)}")
        return True

    def _node(self, page: Sheet, node: int) -> bool:
        """A node that is held, or that another device's figure tells already."""
        wiring = self.wiring(page)
        held = wiring.held(node)
        if held:
            page.result(f"V = {level_of(self.books, page, held)}", "held there:")
            return True
        figure = wiring.figure_of(node)
        if not figure or not self._ahead(figure):
            return False
        page.result(f"V = {wiring.volts(node)}", "the same node:")
        return True

    def _ahead(self, figure: str) -> bool:
        """Whether a figure is of a stage further ahead: so that two that share a node don't point at each other."""
        order = [stage.name for stage in self.books.chain.stages]
        stage = figure.split(".")[1]
        return order.index(stage if stage in order else stage.removesuffix("_upper")) < order.index(self.device.name)

    def _behind_stopper(self, page: Sheet) -> bool:
        if not self.device.stopper or self.family != "bjt" or not self.law.share:
            return False
        wiring = self.wiring(page)
        side, stopper = wiring.volts(self.device.control, "V_side"), page.file("stopper", self.device.stopper)
        current = f"{wiring.current(self.found.place)}{wiring.share(self.found.place, 'control')}"
        page.result(f"V = {side} {'-' if self.sign == '+' else '+'} {stopper}·{current}", "behind the stopper:")
        return True

    def _above(self, page: Sheet, key: str, sign: str) -> bool:
        """One terminal from the other by the voltage that the law asks for."""
        if self.books.value(f"{self.owner}.{key}") is None:
            return False
        drop = self.drop(page)
        if drop:
            page.result(f"V = {self.volts(page, key)} {sign} {drop}")
        return bool(drop)

    def drop(self, page: Sheet) -> str:
        """Enters control to lower voltage by the law at the current; "" where the card doesn't tell it."""
        return control_drop(self.books, page, self.family, self.card, self.owner)

    def _by_law(self, page: Sheet) -> bool:
        """The current by the law of a fet or valve at the voltages that were found."""
        needed = ["control_v", "lower_v", *(["across_v"] if self.family == "triode" else [])]
        if any(self.books.value(f"{self.owner}.{key}") is None for key in needed):
            return False
        first, second = ("control_v", "lower_v") if self.sign == "+" else ("lower_v", "control_v")
        word = "vgk" if self.family == "triode" else "vgs"
        page.step(f"{word} = {self.volts(page, first)} - {self.volts(page, second)}", "V", "from control to lower:")
        if self.family == "triode":
            page.figure("vak", f"{self.owner}.across_v")
            perveance(self.books, page, self.card, self.owner)
            page.result(triode.LAW.text, "by its law:")
        elif self.family == "jfet":
            if not idss(self.books, page, self.card, self.owner):
                return False
            page.result(fet.LAW_JFET.text, "by its law:")
        else:
            strength(self.books, page, self.card, self.owner)
            page.file("vgs_th", f"device.{self.card}.vgs_th")
            page.result(fet.LAW_MOSFET.text, "by its law:")
        return True

    def also(self, key: str, page: Sheet) -> None:
        """A solved current meets the law and the network both: the one that is not shown yet is added as a check."""
        if key != "current_a" or self.device.current:
            return
        if self.family == "bjt":
            if any(self.books.value(f"{self.owner}.{end}") is None for end in ("control_v", "lower_v")):
                return
            first, second = ("control_v", "lower_v") if self.sign == "+" else ("lower_v", "control_v")
            vbe = self.drop(page)
            page.check(f"{self.volts(page, first)} - {self.volts(page, second)}", vbe, "V",
                       "and the base stands above the emitter by what the card says:" if self.sign == "+" else
                       "and the base stands below the emitter by what the card says:")
            return
        for end in ("lower", "output"):
            trial = Sheet(self.books, page.entry)
            if self.wiring(trial).balanced_current(self.found.place, end) and _holds(trial):
                self.wiring(page).balanced_current(self.found.place, end)
                return


class _Upper(_Device):
    """A cascode's upper device: it stands on the lower one and carries its current."""

    def __init__(self, books: Books, found: Found) -> None:
        super().__init__(books, found)
        self.owner = f"bias.{self.device.name}_upper"
        self.card, self.family = self.device.upper, self.device.upper_family

    def _current(self) -> Iterator[tuple[str, Way]]:
        yield "bias.current_a.upper", self._passed_on

    def _passed_on(self, page: Sheet) -> bool:
        wiring = self.wiring(page)
        share = wiring.share(self.found.place, "output")
        page.result(f"I = {wiring.current(self.found.place)}{share if share != '1' else ''}")
        return True

    def _across(self) -> Iterator[tuple[str, Way]]:
        yield "bias.across_v", self._difference

    def _control(self) -> Iterator[tuple[str, Way]]:
        yield "bias.control_v", lambda page: self._above(page, "lower_v", self.sign)

    def _lower(self) -> Iterator[tuple[str, Way]]:
        yield "bias.lower_v", self._on_the_lower

    def _on_the_lower(self, page: Sheet) -> bool:
        middle = page.figure("V_middle", f"bias.{self.device.name}.output_v")
        page.result(f"V = {middle}", "it stands on the lower one:")
        return True

    def _output(self) -> Iterator[tuple[str, Way]]:
        yield "bias.output_v", lambda page: self._node(page, self.device.output)
        yield "bias.output_v", lambda page: self.wiring(page).balance(self.device.output)

    def also(self, key: str, page: Sheet) -> None:
        return


def _file(page: Sheet, symbol: str, path: str) -> bool:
    page.result(f"{symbol} = {page.file(path.rpartition('.')[2], path)}")
    return True
