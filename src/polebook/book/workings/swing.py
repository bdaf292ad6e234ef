"""How a clip level came about: each bound of a stage's swing with its numbers, and the least of them."""

from __future__ import annotations

from polebook.book.load_line import without_device
from polebook.book.swing import (
    CUT_OFF,
    GRID,
    OHMIC,
    OUTPUT,
    SATURATION,
    Bound,
    Clip,
    across_input,
    drawn,
    output_of,
    upper_of,
)
from polebook.book.workings.currents import branch_name
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.circuit.elements import Branch
from polebook.formula import Working
from polebook.stages.stamper import GROUND


def clip_level(books: Books, sheet: Sheet, clip: Clip) -> Working:
    """The working of the clip level at the node behind a stage."""
    stage = next(stage for stage in books.chain.stages if stage.name == clip.stage)
    if stage.kind == "block":
        sheet.result(f"clip = {sheet.file('clip', f'{stage.name}.clip')}")
        return sheet.done(FORMULA["levels.clip_v.block"])
    card, after = upper_of(stage)
    family = books.chain.cards[card].family
    bounds = _Bounds(books, sheet, clip, card, f"bias.{stage.name}{after}", after)
    terms = [bounds.enter(bound) for bound in clip.bounds if bound.volts is not None]
    sheet.result(f"clip = min({', '.join(terms)})" if len(terms) > 1 else f"clip = {terms[0]}")
    lacking = [bound.by for bound in clip.bounds if bound.volts is None]
    note = f"{clip.stage} clips by: {clip.least.by}." if clip.least else ""
    if lacking:
        note += f" What can't be had is left out ({', '.join(lacking)}): the level may be lower."
    return sheet.done(FORMULA[f"levels.clip_v.{'fet' if family in ('mosfet', 'jfet') else family}"], note)


class _Bounds:
    """Enters the bounds of one stage, each as a step."""

    def __init__(self, books: Books, sheet: Sheet, clip: Clip, card: str, bias: str, after: str) -> None:
        self.books, self.sheet, self.clip, self.card, self.bias, self.after = books, sheet, clip, card, bias, after
        self.of, self.index = books.solution, books.segment_of[clip.stage]
        self.family = books.chain.cards[card].family
        self.carried = ""

    def enter(self, bound: Bound) -> str:
        """Enters a bound; returns its symbol."""
        if self.family == "opamp":
            return self._carried(bound)
        if bound.by == CUT_OFF:
            return self._by_current()
        if bound.by == GRID:
            return self._by_grid()
        return self._by_voltage(bound.by)

    def _by_voltage(self, by: str) -> str:
        sheet = self.sheet
        across = sheet.figure("V_across", f"{self.bias}.across_v")
        if by == SATURATION:
            off = f" - {sheet.file('vce_sat', f'device.{self.card}.vce_sat')}"
        elif by == OHMIC:
            current, gm = self._current(), sheet.figure("gm", f"{self.clip.stage}.gm{self.after}.value")
            off = f" - 2·{current}/{gm}"
        else:
            off = ""
        return sheet.step(f"v_across = max(0, {across}{off})", "V", f"what it can give up of its voltage ({by}):")

    def _current(self) -> str:
        return self.sheet.figure("I", f"{self.bias}.current_a")

    def _by_current(self) -> str:
        sheet = self.sheet
        ohm = self._ohm()
        return sheet.step(f"v_current = max(0, {self._current()}·{ohm})", "V",
                          "what its current makes there until it is cut off:")

    def _ohm(self) -> str:
        """Enters R_ac: what the elements at the node take, the device taken out."""
        sheet, books = self.sheet, self.books
        seen = without_device(self.of, self.index)
        if seen.ohm == 0.0:
            return sheet.put("R_ac", 0.0, "Ω", "seen at the node without the device", "midband network")
        rates = [self._rate(branch, amperes) for branch, amperes in seen.into if amperes]
        following = books.following(self.index + 1)
        if seen.onward:
            ohm = sheet.figure("R_in", f"{following}.input_ohm", "input resistance of what follows")
            rates.append(f"1/{ohm}")
        return sheet.step(f"R_ac = 1/({plus(rates)})", "Ω", "seen at the node, the device taken out:")

    def _rate(self, branch: Branch, amperes: float) -> str:
        """What 1 V at the node drives into a branch: 1/R of a resistor to ground."""
        name = branch_name(self.books, branch)
        if GROUND in (branch.i, branch.j) and f"{name}.value" in self.books.entries:
            return f"1/{self.sheet.figure(f'R_{name}', f'{name}.value')}"
        return self.sheet.put(f"G_{name}", amperes, "S", f"what 1 V at the node drives into {name}, in amperes",
                              "midband network without the device")

    def _by_grid(self) -> str:
        sheet = self.sheet
        control, lower = (sheet.figure(f"V_{key}", f"{self.bias}.{key}_v") for key in ("control", "lower"))
        rise = abs(self.of.volts[self.clip.node] / across_input(self.of, self.index))
        gain = sheet.put("A", rise, "", "|V(output)/V(grid to cathode)|", "midband solution")
        return sheet.step(f"v_grid = max(0, {lower} - {control})·{gain}", "V",
                          "what the output does while the grid goes up to its cathode:")

    def _carried(self, bound: Bound) -> str:
        """A bound at the op-amp's own output, carried to the node."""
        sheet, numbers = self.sheet, self.books.chain.numbers
        o = output_of(self.of, self.index)
        carry = self._carry(o)
        if bound.by == OUTPUT:
            flows = [sheet.put(f"i_{branch_name(self.books, branch) if branch else 'load'}", abs(self._per_volt(o, x)),
                               "S", "current into it for 1 V at the own output, in amperes", "midband solution")
                     for branch, x in drawn(self.of, self.index) if x]
            most = sheet.file("i_max", f"device.{self.card}.i_max")
            return sheet.step(f"v_current = {most}/({plus(flows)}){carry}", "V", "what its greatest current makes:")
        vout, off = sheet.figure("V_out", f"{self.bias}.output_v"), ""
        headroom = f"device.{self.card}.headroom"
        off = sheet.file("headroom", headroom) if headroom in numbers else "1.5"
        end = bound.by.partition(" ")[0]
        rail = sheet.file(f"V_{end}", f"supply.{end}")
        room = f"{rail} - {vout}" if end == "positive" else f"{vout} - {rail}"
        return sheet.step(f"v_{end} = max(0, {room} - {off}){carry}", "V",
                          f"up to the {bound.by}:" if end == "positive" else f"down to the {bound.by}:")

    def _carry(self, o: int) -> str:
        """A factor from the op-amp's own output to the node; "" where they are one."""
        if o == self.clip.node:
            return ""
        if not self.carried:
            ratio = abs(self.of.volts[self.clip.node] / self.of.volts[o])
            self.carried = self.sheet.put("k_o", ratio, "", "V(node)/V(o), o the amplifier's own output",
                                          "midband solution")
        return f"·{self.carried}"

    def _per_volt(self, o: int, amperes: float) -> float:
        return amperes / self.of.volts[o]
