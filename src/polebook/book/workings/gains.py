"""The gain of the three-terminal stages and of blocks in closed form, where their network has one.

Each is exact for the model that the ledger solves (series resistance at the control, rpi, ro, gm; the load that the
line drives), and stands in the working beside the two voltages of the solution.
"""

from __future__ import annotations

from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.stages.base import slot_key
from polebook.stages.registry import KINDS

TEXTBOOK = "hybrid-pi and its relatives, solved for one stage (P. R. Gray, P. J. Hurst, S. H. Lewis and R. G. Meyer, " \
           "Analysis and Design of Analog Integrated Circuits, 5th ed., Wiley, ch. 3; from memory)"
DIVIDER = "voltage divider"


def closed_form(books: Books, sheet: Sheet, index: int, loaded: bool) -> str:
    """Enters the steps of the closed form of line `index`, with or without what follows.

    Returns where it is published, "" where the line has none.
    """
    segment = books.layout.segments[index]
    if segment.name == "source":
        return DIVIDER if _source(books, sheet, loaded) else ""
    if segment.name == "load" or segment.after == segment.before:
        return ""
    topology = KINDS[segment.kind].topology
    if topology == "block":
        return DIVIDER if _block(books, sheet, index, loaded) else ""
    if topology not in ("inverting", "follower", "common_control"):
        return ""
    return TEXTBOOK if _Device(books, sheet, index, loaded).write(topology) else ""


def _source(books: Books, sheet: Sheet, loaded: bool) -> bool:
    following = f"{books.following(1)}.input_ohm"
    if books.chain.source_kind != "voltage" or not loaded or books.value(following) is None:
        return False
    ohms = "source.resistance.value"
    if ohms not in books.entries:
        return False
    own, behind = sheet.figure("R_source", ohms), sheet.figure("R_in", following)
    sheet.result(f"A = {behind}/({own} + {behind})", "as a divider:")
    return True


def _block(books: Books, sheet: Sheet, index: int, loaded: bool) -> bool:
    name = books.layout.segments[index].name
    if f"{name}.r_bridge.value" in books.entries or f"{name}.rout.value" not in books.entries:
        return False
    gain, into = sheet.file("gain", f"{name}.gain"), f"{name}.gain_into"
    rout = sheet.figure("rout", f"{name}.rout.value")
    if into in books.chain.numbers:
        test = sheet.file("R_into", into)
        sheet.step(f"G = {gain}·(1 + {rout}/{test})", "", "freed of the load it was measured with:")
    else:
        sheet.step(f"G = {gain}", "")
    following = f"{books.following(index + 1)}.input_ohm"
    if loaded and books.value(following) is not None:
        load = sheet.figure("R_L", following)
        sheet.result(f"A = G·{load}/({rout} + {load})", "in closed form:")
    else:
        sheet.result("A = G", "in closed form, nothing behind it:")
    return True


class _Device:
    """The closed form of one three-terminal stage."""

    def __init__(self, books: Books, sheet: Sheet, index: int, loaded: bool) -> None:
        self.books, self.sheet, self.index, self.loaded = books, sheet, index, loaded
        self.name = books.layout.segments[index].name
        stage = next(stage for stage in books.chain.stages if stage.name == self.name)
        self.family = books.chain.cards[stage.device].family
        self.bipolar = self.family == "bjt"

    def write(self, topology: str) -> bool:
        if self._has("rf") or (self.bipolar and not self._has("rpi")) or not self._has("gm"):
            return False
        gm = self._value("gm")
        rpi = self._value("rpi") if self.bipolar else ""
        ro = self._value("ro") if self._has("ro") else ""
        if topology == "follower":
            return self._follower(gm, rpi, ro)
        series = self._series(topology) if self.bipolar else "0"
        if series is None or not self._load(self._slot("r_out"), ""):
            return False
        if topology == "inverting":
            self._inverting(gm, rpi, ro, series)
        else:
            self._common(gm, rpi, ro, series)
        return True

    def _has(self, part: str) -> bool:
        return self.books.value(f"{self.name}.{part}.value") is not None

    def _value(self, part: str) -> str:
        return self.sheet.figure(part, f"{self.name}.{part}.value")

    def _slot(self, slot: str) -> str:
        return slot_key(slot, self.family)

    def _load(self, part: str, ro: str) -> bool:
        """R_L: the stage's own resistor, ro where it lies across the output, and what follows."""
        rates = [f"1/{self._value(part)}"] if part and self._has(part) else []
        rates += [f"1/{ro}"] if ro else []
        following = f"{self.books.following(self.index + 1)}.input_ohm"
        if self.loaded and self.books.value(following) is not None:
            rates.append(f"1/{self.sheet.figure('R_next', following)}")
        if rates:
            self.sheet.step(f"R_L = 1/({plus(rates)})", "Ω", "what the device works into:")
        return bool(rates)

    def _lower(self) -> str:
        """R_E: the lower resistors that carry signal."""
        own, bypassed, across = (self._slot(slot) for slot in ("r_low", "r_low_bypassed", "c_bypass"))
        found = [self._value(own)] if self._has(own) else []
        if self._has(bypassed) and not self._has(across):
            found.append(self._value(bypassed))
        self.sheet.step(f"R_E = {plus(found)}", "Ω", "between the lower terminal and signal ground:")
        return "R_E"

    def _series(self, topology: str) -> str | None:
        """R_S: in series with the control; None where a common-base stage's bias resistors carry signal."""
        found = [self._value(part) for part in ("stopper", "rx") if self._has(part)]
        if topology == "common_control" and not self._has(self._slot("c_control")):
            biased = [self._slot(slot) for slot in ("bias_top", "bias_bottom", "bias_single")]
            rates = [f"1/{self._value(part)}" for part in biased if part and self._has(part)]
            found += [f"1/({plus(rates)})"] if rates else []
        self.sheet.step(f"R_S = {plus(found)}", "Ω", "in series with the control:")
        return "R_S"

    def _inverting(self, gm: str, rpi: str, ro: str, series: str) -> None:
        low = self._lower()
        if not self.bipolar:
            tail = f" + (R_L + {low})/{ro}" if ro else ""
            self.sheet.result(f"A = -{gm}·R_L/(1 + {gm}·{low}{tail})", "in closed form:")
            return
        split = f"({gm}·{rpi}·{ro} - {low})/({ro} + R_L + {low})" if ro else f"{gm}·{rpi}"
        self.sheet.step(f"m = {split}", "", "output current over control current, loaded:")
        self.sheet.result(f"A = -m·R_L/({series} + {rpi} + (1 + m)·{low})", "in closed form:")

    def _follower(self, gm: str, rpi: str, ro: str) -> bool:
        if not self._load(self._slot("r_low"), ro):
            return False
        if self.bipolar:
            series = self._series("follower")
            self.sheet.result(f"A = (1 + {gm}·{rpi})·R_L/({series} + {rpi} + (1 + {gm}·{rpi})·R_L)",
                              "in closed form:")
        else:
            self.sheet.result(f"A = {gm}·R_L/(1 + {gm}·R_L)", "in closed form:")
        return True

    def _common(self, gm: str, rpi: str, ro: str, series: str) -> None:
        through = f"{gm}·{rpi}/({rpi} + {series})" if self.bipolar else gm
        own = f" + 1/{ro}" if ro else ""
        self.sheet.result(f"A = ({through}{own})/(1/R_L{own})", "in closed form:")
