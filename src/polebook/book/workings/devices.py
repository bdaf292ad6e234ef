"""How the small-signal figures of a device came about: its card at its operating point."""

from __future__ import annotations

from polebook.book.workings.sheet import Books, Sheet
from polebook.devices import bjt, fet, num, opamp, triode
from polebook.formula import Formula, Working

FILE = Formula("parts.value.card", "as the card gives it", "the chain file")


def device_value(books: Books, sheet: Sheet, stage_name: str, part: str) -> Working:
    """The working of a device's figure: the card's own where it stands there, else by its formula."""
    upper = part.endswith("_upper")
    figure = part.removesuffix("_upper")
    stage = next(stage for stage in books.chain.stages if stage.name == stage_name)
    card = books.chain.cards[(stage.upper or stage.device) if upper else stage.device]
    family, path = card.family, f"device.{card.name}.{figure}"
    reader = _Card(books, sheet, card.name, stage_name, "_upper" if upper else "")
    own = path in books.chain.numbers and not (figure == "gm" and reader.measured()) and family != "opamp"
    if own or (family == "opamp" and figure not in ("gbw", "f2")):
        sheet.result(f"{figure} = {sheet.file(figure, path)}")
        return sheet.done(FILE)
    return _MAKERS[family, figure](reader)


class _Card:
    """The numbers of a card, and the operating point that goes with it."""

    def __init__(self, books: Books, sheet: Sheet, card: str, stage: str, after: str) -> None:
        self.books, self.sheet, self.card, self.stage, self.after = books, sheet, card, stage, after
        self.bias = f"bias.{stage}{after}"
        self.family = books.chain.cards[card].family

    def has(self, key: str) -> bool:
        return f"device.{self.card}.{key}" in self.books.chain.numbers

    def measured(self) -> bool:
        """Whether the card's gm holds at a current of its own, so that the operating point's follows from it."""
        return self.has("gm_id" if self.family in ("mosfet", "jfet") else "gm_ia")

    def key(self, key: str, symbol: str = "") -> str:
        return self.sheet.file(symbol or key, f"device.{self.card}.{key}")

    def current(self, symbol: str) -> str:
        return self.sheet.figure(symbol, f"{self.bias}.current_a")

    def done(self, formula: Formula, note: str = "") -> Working:
        """The last step by the formula's own text."""
        self.sheet.result(formula.text)
        return self.sheet.done(formula, note)

    def thermal_voltage(self) -> None:
        self.sheet.put("k_B", num.BOLTZMANN, "J/K", "Boltzmann's constant", "exact (SI 2019)", "constant")
        self.sheet.put("q", num.CHARGE, "C", "elementary charge", "exact (SI 2019)", "constant")
        self.sheet.file("T", "supply.temperature", "temperature of every part")
        self.sheet.step(num.THERMAL_VOLTAGE.text, "V", "thermal voltage:")


def _bjt_gm(card: _Card) -> Working:
    card.current("ic")
    card.thermal_voltage()
    return card.done(bjt.GM)


def _gm(card: _Card) -> str:
    """gm of the same device, as a figure."""
    return card.sheet.figure("gm", f"{card.stage}.gm{card.after}.value")


def _bjt_rpi(card: _Card) -> Working:
    card.key("beta")
    _gm(card)
    return card.done(bjt.RPI)


def _bjt_ib(card: _Card) -> Working:
    card.current("ic")
    if card.has("beta"):
        card.key("beta")
    else:
        rpi = card.sheet.figure("rpi", f"{card.stage}.rpi{card.after}.value")
        card.sheet.step(f"beta = {_gm(card)}·{rpi}", "", "as gm and rpi have it:")
    if card.books.value(f"{card.bias}.current_a") < 0.0:
        card.sheet.result("ib = max(0, ic)/beta", "it is cut off:")
        return card.sheet.done(bjt.IB)
    return card.done(bjt.IB)


def _bjt_ro(card: _Card) -> Working:
    card.key("early_voltage")
    card.current("ic")
    return card.done(bjt.RO)


def _bjt_cmu(card: _Card) -> Working:
    sheet = card.sheet
    for key in ("cob", "cob_v", "built_in", "grading"):
        card.key(key)
    across = f"{card.bias}.across_v"
    note = ""
    if card.books.value(across) is None:
        sheet.put("VCB", 0.0, "V", "collector to base: not known, so taken as 0", "no operating point", "constant")
        note = "Give vce, or what lets it be solved, to have it at the true voltage."
    else:
        sheet.figure("vce", across)
        sheet.file("vbe_25", f"device.{card.card}.vbe")
        sheet.file("T", "supply.temperature", "temperature of every part")
        sheet.step(bjt.VBE.text, "V", "at this temperature:")
        sheet.step(bjt.VCB.text, "V", "collector to base, not below 0:")
    sheet.result(bjt.CMU.text)
    return sheet.done(bjt.CMU, note)


def _bjt_cpi(card: _Card) -> Working:
    sheet = card.sheet
    if not card.has("ft"):
        sheet.result(f"cpi = {card.key('c_be0')}")
        return sheet.done(bjt.CPI_DEPLETION)
    for key in ("ft", "ft_ic", "c_be0"):
        card.key(key)
    junction = "cmu" if card.has("cmu") else "cob"
    if card.has(junction):
        card.key(junction, "cob")
    else:
        sheet.put("cob", 0.0, "F", "not on the card", "taken as 0", "constant")
    card.thermal_voltage()
    sheet.step(bjt.TAU_F.text, "s", "forward transit time:")
    _gm(card)
    return card.done(bjt.CPI)


def _fet_gm(card: _Card) -> Working:
    sheet = card.sheet
    if card.has("k"):
        card.key("k")
    elif card.has("idss") and card.has("vgs_off"):
        card.key("idss")
        card.key("vgs_off")
        card.current("id")
        return card.done(fet.GM_JFET)
    else:
        card.key("gm", "gm_0")
        card.key("gm_id")
        sheet.step(fet.K_MEASURED.text, "A/V²", "from gm as it was measured:")
    card.current("id")
    return card.done(fet.GM)


def _fet_ro(card: _Card) -> Working:
    card.key("channel_slope")
    card.current("id")
    return card.done(fet.RO)


def _fet_cgd(card: _Card) -> Working:
    card.key("crss")
    return card.done(fet.CGD)


def _fet_cgs(card: _Card) -> Working:
    card.key("ciss")
    card.key("crss")
    return card.done(fet.CGS)


def _fet_cds(card: _Card) -> Working:
    card.key("coss")
    card.key("crss")
    return card.done(fet.CDS)


def _triode_gm(card: _Card) -> Working:
    _measured_gm(card)
    if not card.has("gm_ia"):
        return card.done(triode.GM_THERE)
    card.key("gm_ia")
    card.current("ia")
    return card.done(triode.GM)


def _measured_gm(card: _Card) -> None:
    if card.has("gm"):
        card.key("gm", "gm_0")
    else:
        card.key("mu")
        card.key("rp")
        card.sheet.step(triode.GM_MEASURED.text, "S", "as measured:")


def _triode_ro(card: _Card) -> Working:
    if card.has("mu"):
        card.key("mu")
    else:
        card.key("gm", "gm_0")
        card.key("rp")
        card.sheet.step(triode.MU.text, "", "amplification factor:")
    _gm(card)
    return card.done(triode.RO)


def _opamp_gbw(card: _Card) -> Working:
    card.key("a0")
    card.key("gbw")
    return card.done(opamp.GBW)


def _opamp_f2(card: _Card) -> Working:
    card.key("f2")
    return card.done(opamp.F2)


_FET = {"gm": _fet_gm, "ro": _fet_ro, "cgd": _fet_cgd, "cgs": _fet_cgs, "cds": _fet_cds}
_MAKERS = {
    **{("bjt", key): make for key, make in
       {"gm": _bjt_gm, "rpi": _bjt_rpi, "ro": _bjt_ro, "cmu": _bjt_cmu, "cpi": _bjt_cpi, "ib": _bjt_ib}.items()},
    **{(family, key): make for family in ("mosfet", "jfet") for key, make in _FET.items()},
    ("triode", "gm"): _triode_gm, ("triode", "ro"): _triode_ro,
    ("opamp", "gbw"): _opamp_gbw, ("opamp", "f2"): _opamp_f2,
}
