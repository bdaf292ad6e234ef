"""How a leverage came about: what each element does to the figure, times what the value does to each element."""

from __future__ import annotations

from polebook.book.leverage import STEP
from polebook.book.shares import derivatives
from polebook.book.workings.formulas import FORMULA
from polebook.book.workings.sheet import Books, Sheet, path_of, plus
from polebook.circuit.build import values
from polebook.formula import Working
from polebook.quantity import engineering

_EDGES = {"lower_edge": "overall.lower_edge_hz", "upper_edge": "overall.upper_edge_hz"}
_FIGURES = {"gain": "d ln|gain|", "lower_edge": "d ln f_L", "upper_edge": "d ln f_H"}
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
    return _element(books, sheet, books.part_of[".".join(owner)], figure)


def _element(books: Books, sheet: Sheet, index: int, figure: str) -> Working:
    """What one element does that no key of the stage sets."""
    own = sheet.put("G_X", books.ledger.leverage.elements[index]["gain"] or 0.0, "", "d ln|gain|/d ln X, midband",
                    "adjoint, midband")
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


def _through(books: Books, sheet: Sheet, figure: str, path: str) -> Working:
    """Enters every element that the value moves: how much, and what the element does to the figure."""
    numbers, net = books.chain.numbers, books.net
    moved = values(books.solution.circuit, {path: numbers[path] * (1 + 1j * STEP)})
    shares = {index: complex(value).imag / STEP / net.values[index] for index, value in enumerate(moved)
              if complex(value).imag}
    levers = {index: books.ledger.leverage.elements[index][figure] or 0.0 for index in shares}
    most = max((abs(levers[index] * share) for index, share in shares.items()), default=0.0)
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
    sheet.result(f"leverage = {plus(terms)}")
    note = "L is what an element does alone, M how far p moves it." if terms else \
        "Nothing that it moves acts on this figure."
    return sheet.done(FORMULA[f"leverage.{figure}"], note)


def _origin(figure: str) -> str:
    return "adjoint, midband" if figure == "gain" else "adjoint, at the edge"
