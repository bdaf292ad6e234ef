"""How the figures of noise came about: who makes how much, the sum of all, the integral over the band."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from math import floor, inf, log10, sqrt
from types import MappingProxyType

from polebook.book.noise import Noise
from polebook.book.noise_band import Band, Pieces
from polebook.book.noise_rows import plain
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet, plus
from polebook.chain.model import Stage
from polebook.devices import bjt, fet, num, opamp, triode
from polebook.devices.spectrum import T0_K
from polebook.formula import Formula, Working
from polebook.quantity import engineering
from polebook.stages.block import EN_OF_NF

THERMAL = Formula("noise.R", "S = 4·k_B·T_K/R", "H. Nyquist, Thermal agitation of electric charge in conductors, "
                  "Physical Review 32, 1928 (from memory)")


INTEGRAL = "integral of the density"


def _noise(books: Books) -> Noise:
    noise = books.ledger.noise
    if noise is None or noise.at_reference is None:
        raise LookupError("a noise figure without noise")  # a null has its reason elsewhere
    return noise


def _unit(books: Books) -> str:
    return "V/√Hz" if books.chain.source_kind == "voltage" else "A/√Hz"


def _where(noise: Noise) -> str:
    return f"adjoint, {engineering(noise.reference_hz or 0.0, 'Hz', 4)}"


def _density(books: Books, sheet: Sheet) -> Working:
    """What each line adds, as densities at the input."""
    noise = _noise(books)
    e = noise.density or 0.0
    terms = [f"{sheet.put(f'e_{name}', e * sqrt(share), _unit(books), f'of {name} at the input', _where(noise))}^2"
             for name, share in noise.by_line.items() if share]
    sheet.result(f"e = sqrt({plus(terms)})", "what the lines add there:")
    return sheet.done(FORMULA["overall.noise_density"], "Shares say how much of its square each part makes.")


def _output(books: Books, sheet: Sheet) -> Working:
    """The integral by stretches of about a decade."""
    _stretches(sheet, _noise(books).totals.pieces[0])
    return sheet.done(FORMULA["overall.noise_total_output"], _limits(_noise(books).totals.band))


def node_noise(books: Books, sheet: Sheet) -> Working:
    """The working of the noise at a node of `levels`."""
    _, pieces, band = books.ledger.noise_at_nodes[sheet.entry.row["node"]]
    _stretches(sheet, pieces)
    return sheet.done(FORMULA["levels.noise_v"], _limits(band))


def _stretches(sheet: Sheet, pieces: Pieces) -> None:
    """Enters an integral by stretches of about a decade, and its root."""
    stretches: dict[int, list[tuple[float, float, float]]] = {}
    for piece in pieces:
        stretches.setdefault(floor(0.5 * (log10(piece[0]) + log10(piece[1]))), []).append(piece)
    total = sum(square for *_, square in pieces)
    terms: list[str] = []
    rest = 0.0
    for found in stretches.values():
        square = sum(one for *_, one in found)
        if square < 1e-6 * total:
            rest += square
            continue
        ends = [engineering(hz, "Hz", 3) for hz in (found[0][0], found[-1][1])]
        terms.append(sheet.put(f"E_{len(terms) + 1}", sqrt(square), "V", f"from {ends[0]} to {ends[1]}, rms", INTEGRAL))
    if rest > 0.0:
        terms.append(sheet.put("E_rest", sqrt(rest), "V", "further out, rms", INTEGRAL))
    sheet.result(f"E = sqrt({plus([f'{term}^2' for term in terms])})")


def _limits(band: Band) -> str:
    end = f"to {engineering(band.to_hz, 'Hz', 4)}" if band.to_hz < inf else "upward without end"
    return f"The band goes from {engineering(band.from_hz, 'Hz', 4)} {end}."


def _input(books: Books, sheet: Sheet) -> Working:
    output, gain = sheet.figure("E", "overall.noise_total_output"), sheet.figure("gain", "overall.gain")
    sheet.result(f"E_in = {output}/|{gain}|")
    return sheet.done(FORMULA["overall.noise_total_input"])


def _from(books: Books, sheet: Sheet) -> Working:
    formula = FORMULA["overall.noise_from_hz"]
    if "target.noise_from" in books.chain.given:
        sheet.result(f"f_1 = {sheet.file('noise_from', 'target.noise_from')}")
        return sheet.done(formula)
    sheet.result("f_1 = 0" if not sheet.entry.value else "f_1 = 0.1")
    return sheet.done(formula, "The noise has a bound towards 0 Hz." if not sheet.entry.value else
                      "Towards 0 Hz the noise would grow without bound.")


def _to(books: Books, sheet: Sheet) -> Working:
    formula = FORMULA["overall.noise_to_hz"]
    if "target.noise_to" in books.chain.given:
        sheet.result(f"f_2 = {sheet.file('noise_to', 'target.noise_to')}")
        return sheet.done(formula)
    sheet.result(f"f_2 = 100·{sheet.figure('f_H', 'overall.upper_edge_hz')}")
    return sheet.done(formula, "Upward the noise would grow without bound.")


def _figure(books: Books, sheet: Sheet) -> Working:
    formula = FORMULA["overall.noise_figure_db"]
    e = sheet.figure("e", "overall.noise_density")
    others = [f" - {sheet.figure(f'a_{end}', name)}" for end in ("source", "load")
              if books.value(name := f"{end}.resistance.noise_share") is not None]
    own = sheet.step(f"w = {e}^2·(1{''.join(others)})", f"{_unit(books)[0]}²/Hz", "what stages add, at the input:")
    constants(sheet)
    ohm = sheet.file("R_s", "source.resistance", "resistance of the source")
    times = f"·{ohm}" if books.chain.source_kind == "voltage" else f"/{ohm}"
    sheet.result(f"F = 10·log10(1 + {own}/(4·k_B·T_0{times}))")
    return sheet.done(formula)


WHOLE: Mapping[str, Callable[[Books, Sheet], Working]] = MappingProxyType({
    "noise_density": _density, "noise_total_output": _output, "noise_total_input": _input, "noise_from_hz": _from,
    "noise_to_hz": _to, "noise_figure_db": _figure,
})
"""Key of `overall` -> what writes its working."""


def constants(sheet: Sheet) -> None:
    """Boltzmann's constant, and the temperature at which noise figures are told."""
    sheet.put("k_B", num.BOLTZMANN, "J/K", "Boltzmann's constant", "exact (SI 2019)", "constant")
    sheet.put("T_0", T0_K, "K", "where noise figures and noise resistances are told", "standard", "constant")


def line_share(books: Books, sheet: Sheet, _: int) -> Working:
    """The working of a line's share: the sum of those of its parts."""
    name = sheet.entry.row["name"]
    shares = [sheet.figure(f"a_{row['part']}", f"{name}.{row['part']}.noise_share")
              for row in books.document["parts"] if row["stage"] == name and row["noise_share"] is not None]
    sheet.result(f"share = {plus(shares)}")
    return sheet.done(FORMULA["lines.noise_share"], "" if shares else f"Nothing in {name} makes noise.")


def part_share(books: Books, sheet: Sheet) -> Working:
    """The working of a part's share: its own density, its transfer to the output, and the noise of all there."""
    noise, row = _noise(books), sheet.entry.row
    spot, owner = _noise(books).at_reference, (row["stage"], row["part"])
    formula, own = _strength(books, sheet, row["stage"], row["part"])
    terms = []
    for at, x in zip(noise.sources.owners, spot.transfer.tolist() if spot else (), strict=True):
        if at == owner and spot is not None:
            unit, about = ("", "V at the output for 1 V of it") if row["type"] == "en" else \
                ("Ω", "V at the output for 1 A of it")
            terms.append(f"{sheet.put('h', abs(x * spot.gain), unit, about, _where(noise))}^2")
    gain, e = sheet.figure("H", "overall.gain_at_reference"), sheet.figure("e", "overall.noise_density")
    reach = terms[0] if len(terms) == 1 else f"({plus(terms)})"
    sheet.result(f"share = {own}·{reach}/({gain}·{e})^2")
    return sheet.stated(f"share = S·h^2/(H·e)^2 with {formula.text}", formula.source,
                        "Both inputs have it, apart from one another." if len(terms) > 1 else "")


def _strength(books: Books, sheet: Sheet, stage: str, part: str) -> tuple[Formula, str]:
    """Enters the density² of a source at the reference frequency; (its formula, its symbol)."""
    kind, name = books.entries[f"{stage}.{part}.value"].row["type"], plain(part)
    if kind == "R":
        _kelvin(sheet)
        ohm = sheet.figure("R", f"{stage}.{part}.value")
        return THERMAL, sheet.step(f"S = 4·k_B·T_K/{ohm}", "A²/Hz", "thermal noise, as a current across it:")
    found = next(one for one in books.chain.stages if one.name == stage)
    if not found.device:
        return _of_data(books, sheet, f"{stage}.{part}", stage, name)
    card = (found.upper or found.device) if part != name else found.device
    family = books.chain.cards[card].family
    if family == "opamp":
        return _of_data(books, sheet, f"{stage}.{part}", f"device.{card}", name)
    if name == "ib":
        return _flickering(books, sheet, bjt.NOISE_IB, f"2·q·{_charge(sheet, f'{stage}.{part}.value', 'ib')}", card)
    if name == "ig":
        current = _charge(sheet, f"{stage}.{part}.value", "ig")
        return fet.NOISE_IG, sheet.step(f"S = 2·q·{current}", "A²/Hz", "shot noise:")
    if family == "bjt":
        after = "_upper" if part != name else ""
        current = _charge(sheet, f"bias.{stage}{after}.current_a", "ic")
        return bjt.NOISE_IC, sheet.step(f"S = 2·q·{current}", "A²/Hz", "shot noise:")
    return _channel(books, sheet, found, card, part)


def _channel(books: Books, sheet: Sheet, stage: Stage, card: str, part: str) -> tuple[Formula, str]:
    """Noise of a fet's channel, of a valve's anode current."""
    gm, prefix = sheet.figure("gm", f"{stage.name}.{part}.value"), f"device.{card}."
    if books.chain.cards[card].family != "triode":
        _kelvin(sheet)
        if f"{prefix}gamma_noise" in books.chain.numbers:
            gamma = sheet.file("gamma_noise", f"{prefix}gamma_noise")
        else:
            gamma = sheet.put("gamma_noise", fet.GAMMA, "", "channel noise factor", f"{prefix}gamma_noise", "default")
        return _flickering(books, sheet, fet.NOISE_GM, f"4·k_B·T_K·{gamma}·{gm}", card)
    constants(sheet)
    if f"{prefix}req_noise" in books.chain.numbers:
        req = sheet.file("req_noise", f"{prefix}req_noise")
    else:
        req = sheet.step(f"req_noise = 2.5/{gm}", "Ω", "noise resistance ahead of the grid, as the card has none:")
    return _flickering(books, sheet, triode.NOISE_GM, f"4·k_B·T_0·{req}·{gm}^2", card)


def _charge(sheet: Sheet, figure: str, symbol: str) -> str:
    sheet.put("q", num.CHARGE, "C", "elementary charge", "exact (SI 2019)", "constant")
    found = sheet.figure(symbol, figure)
    return found if sheet.symbols[found] >= 0.0 else f"max(0, {found})"


def _kelvin(sheet: Sheet) -> None:
    sheet.put("k_B", num.BOLTZMANN, "J/K", "Boltzmann's constant", "exact (SI 2019)", "constant")
    sheet.file("T", "supply.temperature", "temperature of every part")
    sheet.step("T_K = T + 273.15", "K")


def _flickering(books: Books, sheet: Sheet, formula: Formula, white: str, card: str,
                key: str = "flicker_corner") -> tuple[Formula, str]:
    """A density with what its corner adds at the reference frequency."""
    path = f"device.{card}.{key}"
    if path not in books.chain.numbers:
        return formula, sheet.step(f"S = {white}", "A²/Hz", "white, as no corner is stated:")
    corner, f = sheet.file(key, path), sheet.figure("f", "overall.reference_hz")
    return formula, sheet.step(f"S = {white}·(1 + {corner}/{f})", "A²/Hz", "with what it adds below its corner:")


def _of_data(books: Books, sheet: Sheet, owner: str, place: str, name: str) -> tuple[Formula, str]:
    """Of an op-amp's or a block's data: a density and its corner."""
    formula = opamp.NOISE_EN if name == "en" else opamp.NOISE_IN
    value = sheet.figure(name, f"{owner}.value")
    unit, path = "V²/Hz" if name == "en" else "A²/Hz", f"{place}.{name}_corner"
    if path not in books.chain.numbers:
        return formula, sheet.step(f"S = {value}^2", unit, "white, as no corner is stated:")
    corner, f = sheet.file(f"{name}_corner", path), sheet.figure("f", "overall.reference_hz")
    return formula, sheet.step(f"S = {value}^2·(1 + {corner}/{f})", unit, "with what it adds below its corner:")


def of_noise_figure(books: Books, sheet: Sheet) -> Working:
    """The value of a block's voltage noise that its noise figure stands for."""
    constants(sheet)
    stage = sheet.entry.row["stage"]
    nf, ohm = sheet.file("nf", f"{stage}.nf"), sheet.file("nf_source", f"{stage}.nf_source")
    sheet.result(f"en = sqrt(4·k_B·T_0·{ohm}·(10^({nf}/10) - 1))")
    return sheet.done(EN_OF_NF)
