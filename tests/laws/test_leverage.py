"""Laws of leverage: similarity of impedances and of frequencies, for the elements alone and for a file's numbers."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from functools import cache

import pytest

from polebook.book.build import document, ledger
from polebook.book.ledger import Ledger
from polebook.book.leverage import Row
from polebook.devices.registry import FAMILIES
from polebook.stages.registry import KINDS
from tests.laws.chains import BY_NAME, WITH_BAND, chain
from tests.laws.test_scaling import POWERS

# what a quantity is multiplied by where all impedances are; every voltage and frequency stays
IMPEDANCE = {"resistance": 1, "inductance": 1, "capacitance": -1, "current": -1, "transconductance": -1, "k_factor": -1}
# and where every frequency falls by as much
SLOWNESS = {"capacitance": 1, "inductance": 1, "frequency": -1}
TYPES = {"R": "resistance", "L": "inductance", "C": "capacitance"}
EDGES = ("lower_edge", "upper_edge")

book = cache(lambda name: ledger(chain(name)))


def total(rows: Iterator[tuple[int, Row]], figure: str) -> float:
    return sum(power * (row[figure] or 0.0) for power, row in rows)


def elements(of: Ledger, powers: Mapping[str, int]) -> Iterator[tuple[int, Row]]:
    for index, row in of.leverage.elements.items():
        yield powers[of.solution.circuit.layout.parts[index].type], row


def numbers(of: Ledger, powers: Mapping[str, int]) -> Iterator[tuple[int, Row]]:
    """Every number of the file, and of defaults those that are elements: powers by dimension."""
    stages = {stage.name: stage for stage in of.chain.stages}
    types = {(p.stage, p.name): TYPES.get(p.type, "") for p in of.solution.circuit.layout.parts}
    for (owner, name), row in of.leverage.parts.items():
        dimension = types.get((owner, name), "")
        if owner in stages and not dimension:  # no part: a voltage, a gain, the load that a gain is measured into
            stage = stages[owner]
            keys = KINDS[stage.kind].keys(of.chain.cards[stage.device].family if stage.device else "")
            dimension = keys[name].dimension if name in keys else ""
        yield powers.get(dimension, 0), row
    for _, row in of.leverage.currents.values():
        yield powers.get("current", 0), row
    for (card, key), (_, row) in of.leverage.cards.items():
        dimensions = {p.key: p.dimension for p in FAMILIES[of.chain.cards[card].family]}
        yield powers.get(dimensions[key], 0), row
    for index, row in of.leverage.elements.items():
        part = of.solution.circuit.layout.parts[index]
        stage = stages.get(part.stage)
        if stage is None or (part.stage, part.name) in of.leverage.parts:
            continue
        if stage.kind == "block" or (stage.device and of.chain.cards[stage.device].family == "opamp"):
            stated = stage.device and f"device.{stage.device}.{part.name}" in of.chain.given
            if part.type == "tau" and stage.kind == "block":
                yield powers.get("time", 0), row
            elif part.name == "rout" and not stated:
                yield powers.get("resistance", 0), row


@pytest.mark.parametrize("name", BY_NAME)
def test_scaling_all_impedances_leaves_gain_and_edges(name: str) -> None:
    """Σ over R and L less Σ over C and gm is 0; of a gain in ohms 1."""
    of = book(name)
    assert total(elements(of, POWERS), "gain") == pytest.approx(float(of.chain.source_kind == "current"), abs=1e-9)
    for edge in EDGES:
        assert total(elements(of, POWERS), edge) == pytest.approx(0, abs=1e-7)


@pytest.mark.parametrize("name", BY_NAME)
def test_scaling_all_impedances_of_a_file_leaves_gain_and_edges(name: str) -> None:
    """The same through every bias: where resistances rise, currents fall, and no voltage moves."""
    of = book(name)
    assert total(numbers(of, IMPEDANCE), "gain") == pytest.approx(float(of.chain.source_kind == "current"), abs=1e-8)
    for edge in EDGES:
        assert total(numbers(of, IMPEDANCE), edge) == pytest.approx(0, abs=1e-6)


@pytest.mark.parametrize("name", WITH_BAND)
def test_storages_together_move_an_edge_as_much_as_themselves(name: str) -> None:
    """Σ over C, L and tau is -1 on either edge, 0 on the gain: part by part, and of the file's capacitances, coils and
    frequencies."""
    of = book(name)
    storing = {kind: int(kind in ("C", "L", "tau")) for kind in POWERS}
    for edge, hz in zip(EDGES, (of.lower_hz, of.upper_hz), strict=True):
        expected = 0.0 if hz is None else -1.0
        assert total(elements(of, storing), edge) == pytest.approx(expected, abs=1e-9)
        assert total(numbers(of, SLOWNESS | {"time": 1}), edge) == pytest.approx(expected, abs=1e-7)
    assert total(elements(of, storing), "gain") == 0
    assert total(numbers(of, SLOWNESS | {"time": 1}), "gain") == pytest.approx(0, abs=1e-9)


@pytest.mark.parametrize("name", WITH_BAND)
def test_what_a_part_owns_is_its_leverage_turned_round(name: str) -> None:
    """Of every C, L and time constant; none of them has any on the gain."""
    doc = document(book(name))
    seen = 0
    for row in doc["parts"]:
        if row["type"] not in ("C", "L", "tau"):
            assert row["owns_upper"] is None and row["owns_lower"] is None
            continue
        assert row["leverage"]["gain"] == 0
        for edge, share in (("upper_edge", "owns_upper"), ("lower_edge", "owns_lower")):
            assert (row[share] is None) == (row["leverage"][edge] is None)
            if row[share] is not None:
                seen += 1
                assert row["leverage"][edge] == pytest.approx(-row[share], abs=1e-9)
    assert seen


@pytest.mark.parametrize("name", BY_NAME)
def test_a_series_resistance_of_a_card_is_that_of_all_its_devices(name: str) -> None:
    """rx bears no current at d.c.: the card's leverage is the sum over the stages that use it, uppers too."""
    doc = document(book(name))
    devices = {stage.name: (stage.device, stage.upper or stage.device) for stage in chain(name).stages}
    for card in doc["cards"]:
        if card["figure"] != "rx":
            continue
        for figure in ("gain", *EDGES):
            own = [row["leverage"][figure] for row in doc["parts"]
                   if (row["part"] == "rx" and devices[row["stage"]][0] == card["device"])
                   or (row["part"] == "rx_upper" and devices[row["stage"]][1] == card["device"])]
            if card["leverage"][figure] is None:
                assert own == [None] * len(own)
            else:
                assert sum(own) == pytest.approx(card["leverage"][figure], abs=1e-9)


def test_no_edge_no_leverage_on_it() -> None:
    for name in BY_NAME:
        doc = document(book(name))
        for row in [*doc["parts"], *doc["cards"]]:
            assert row["leverage"]["gain"] is not None
            for edge in EDGES:
                assert (row["leverage"][edge] is None) == (doc["overall"][f"{edge}_hz"] is None)


def test_a_stated_current_stands_still() -> None:
    """With ic and vce stated a bias resistor acts by its own conductance alone; where ic is solved it sets the gain."""
    of = book("stated-currents")
    layout = of.solution.circuit.layout
    stated = {stage.name for stage in of.chain.stages if {f"{stage.name}.ic", f"{stage.name}.vce"} <= of.chain.given}
    compared = 0
    for (owner, name), row in of.leverage.parts.items():
        for index, part in enumerate(layout.parts):
            if owner in stated and (part.stage, part.name) == (owner, name) and part.type == "R":
                compared += 1
                assert row["gain"] == pytest.approx(of.leverage.elements[index]["gain"], abs=1e-12)
    assert compared >= 4
    solved = book("six-stage")
    row = solved.leverage.parts["Q1", "rb2"]
    (index,) = (k for k, p in enumerate(solved.solution.circuit.layout.parts) if (p.stage, p.name) == ("Q1", "rb2"))
    assert abs(row["gain"] or 0.0) > 0.5 > 1e3 * abs(solved.leverage.elements[index]["gain"] or 0.0)
