"""How a leverage came about: what each element does to the figure, times what the value does to each element."""

from __future__ import annotations

from collections.abc import Sequence

from polebook.book.leverage import STEP
from polebook.book.shares import derivatives
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet, path_of, plus
from polebook.circuit.build import values_and_noise
from polebook.devices.spectrum import Spectrum
from polebook.formula import Working
from polebook.quantity import engineering

_EDGES = {"lower_edge": "overall.lower_edge_hz", "upper_edge": "overall.upper_edge_hz"}
_FIGURES = {"gain": "d ln|gain|", "lower_edge": "d ln f_L", "upper_edge": "d ln f_H", "noise": "d ln e"}
NOTHING = 1e-15  # a term below this share of the largest is left out of what is shown


def lever(books: Books, sheet: Sheet) -> Working:
    """The working of a figure of a part's or a card's `leverage`."""
    figure = sheet.entry.key.rpartition(".")[2]
    row, known = sheet.entry.row, books.ledger.leverage
    if sheet.entry.section == "cards":
        return _through(books, sheet, figure, f"device.{row['device']}.{row['figure']}")
    owner = row["stage"], row["part"]
    if owner in known.parts or owner in known.currents:
        return _through(books, sheet, figure, path_of(books, *owner))
    if ".".join(owner) not in books.part_of:
        return _source(sheet, figure, ".".join(owner))
    return _element(books, sheet, books.part_of[".".join(owner)], figure)


def _element(books: Books, sheet: Sheet, index: int, figure: str) -> Working:
    """What one element does that no key of the stage sets."""
    if figure == "noise":
        return _element_on_noise(books, sheet, index)
    own = sheet.put("G_X", books.ledger.leverage.elements[index]["gain"] or 0.0, "", "d ln|gain|/d ln X, midband",
                    "adjoint, midband")
    if figure == "noise":
        return _element_on_noise(books, sheet, index)
    if figure == "gain":
        sheet.result(f"leverage = {own}")
    else:
        hz = books.value(_EDGES[figure])
        each = derivatives(books.net, hz, resistive=True).by_part
        steep = sum(d.real for k, d in each.items() if books.layout.parts[k].type in ("C", "L", "tau"))
        where = f"adjoint, {engineering(hz, 'Hz', 4)}"
        there = sheet.put("D_X", each[index].real if index in each else 0.0, "", "d ln|H|/d ln X", where)
        slope = sheet.put("D_f", steep, "", "d ln|H|/d ln f", where)
        sheet.result(f"leverage = -({there} - {own})/{slope}")
    return sheet.done(FORMULA[f"leverage.{figure}"], "It moves alone here, the bias standing still.")


def _element_on_noise(books: Books, sheet: Sheet, index: int) -> Working:
    """What it does to the noise at the output, less what it does to the signal."""
    slopes, hz = books.ledger.leverage.slopes, books.value("overall.reference_hz")
    where = f"adjoint, {engineering(hz, 'Hz', 4)}"
    noise = sheet.put("N_X", slopes.output[index] if slopes else 0.0, "", "d ln(noise at the output)/d ln X", where)
    signal = sheet.put("D_X", slopes.signal[index] if slopes else 0.0, "", "d ln|H|/d ln X", where)
    sheet.result(f"leverage = {noise} - {signal}")
    return sheet.done(FORMULA["leverage.noise"], "It moves alone here, the bias standing still.")


def _source(sheet: Sheet, figure: str, name: str) -> Working:
    """Of a noise source that the file does not state: it moves nothing but the noise."""
    if figure != "noise":
        sheet.result("leverage = 0")
        return sheet.done(FORMULA[f"leverage.{figure}"], "It moves alone here, and nothing but the noise.")
    share = sheet.figure("share", f"{name}.noise_share")
    if sheet.entry.row["type"] == "I":
        sheet.result(f"leverage = {share}/2", "its noise goes with the root of the current:")
    else:
        sheet.result(f"leverage = {share}")
    return sheet.done(FORMULA["leverage.noise"], "It moves alone here, the bias standing still.")


def _through(books: Books, sheet: Sheet, figure: str, path: str) -> Working:
    """Enters every element that the value moves: how much, and what the element does to the figure."""
    numbers, net = books.chain.numbers, books.net
    moved, spectra = values_and_noise(books.solution.circuit, {path: numbers[path] * (1 + 1j * STEP)})
    shares = {index: complex(value).imag / STEP / net.values[index] for index, value in enumerate(moved)
              if complex(value).imag}
    levers = {index: books.ledger.leverage.elements[index][figure] or 0.0 for index in shares}
    sources = _sources(books, spectra) if figure == "noise" else {}
    most = max([abs(levers[index] * share) for index, share in shares.items()]
               + [abs(lever * share) for lever, share in sources.values()], default=0.0)
    sheet.file("p", path)
    what = _FIGURES[figure]
    terms = []
    for index, share in shares.items():
        if abs(levers[index] * share) <= NOTHING * most or not levers[index]:
            continue
        name = books.full_name(books.layout.parts[index])
        does = sheet.put(f"L_{name}", levers[index], "", f"{what}/d ln {name}", _origin(figure))
        if share == 1.0 and len(shares) == 1:
            terms.append(does)
            continue
        moves = sheet.put(f"M_{name}", share, "", f"d ln {name}/d ln p", "complex step")
        terms.append(f"{does}·{moves}")
    for name, (lever, share) in sources.items():
        if abs(lever * share) > NOTHING * most and lever:
            does = sheet.put(f"L_noise_{name}", lever, "", f"d ln e/d ln of the noise of {name}", _origin(figure))
            moves = sheet.put(f"M_noise_{name}", share, "", f"d ln of the noise of {name}/d ln p", "complex step")
            terms.append(f"{does}·{moves}")
    sheet.result(f"leverage = {plus(terms)}")
    note = "L is what an element does alone, M how far p moves it." if terms else \
        "Nothing that it moves acts on this figure."
    return sheet.done(FORMULA[f"leverage.{figure}"], note)


def _sources(books: Books, spectra: Sequence[Spectrum]) -> dict[str, tuple[float, float]]:
    """Leverage of each noise source that is no resistor on the noise, and how far a complex step moves its density."""
    slopes = books.ledger.leverage.slopes
    found: dict[str, tuple[float, float]] = {}
    for at, lever, one in zip(books.layout.recorder.noises, slopes.sources if slopes else (), spectra, strict=False):
        strength = complex(one.white * (1.0 + one.corner / books.value("overall.reference_hz")))
        if strength.imag and strength.real:
            name = f"{at.stage}.{at.part}"
            before = found.get(name, (0.0, 0.0))[0]
            found[name] = before + lever, 0.5 * strength.imag / STEP / strength.real
    return found


def _origin(figure: str) -> str:
    if figure == "noise":
        return "adjoint, at the reference"
    return "adjoint, midband" if figure == "gain" else "adjoint, at the edge"
