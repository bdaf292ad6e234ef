"""Laws of similarity: scaling every impedance leaves the gain, scaling every C and L scales every frequency."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from polebook.book.build import document, ledger
from polebook.book.time_constants import time_constants
from polebook.circuit.build import circuit, values
from polebook.circuit.views import network
from polebook.solve.fold import fold
from polebook.solve.inverse import inverse
from polebook.solve.onward import onward
from polebook.stages.registry import KINDS
from tests.laws.chains import BY_NAME, WITH_BAND, chain

POWERS = {"R": 1, "L": 1, "C": -1, "gm": -1, "tau": 0, "gain": 0}


@pytest.mark.parametrize("name", BY_NAME)
def test_scaling_all_impedances_leaves_gains_and_time_constants(name: str) -> None:
    net = circuit(chain(name)).network
    scaled = network(net.layout, [v * 7.3 ** POWERS[p.type] for v, p in zip(net.values, net.layout.parts, strict=True)])
    one, two = fold(net, 0.0, "midband"), fold(scaled, 0.0, "midband")
    first = 1.0 if net.layout.emf >= 0 else 7.3  # V/A of a current source scales with the impedances
    assert two.gains[0] == pytest.approx(one.gains[0] * first, rel=1e-9)
    assert two.gains[1:] == pytest.approx(one.gains[1:], rel=1e-9)
    taus, again = (time_constants(mid, inverse(mid), onward(mid.net)) for mid in (one, two))
    assert again.taus == pytest.approx(taus.taus, rel=1e-7)


@pytest.mark.parametrize("name", WITH_BAND)
def test_scaling_all_storages_scales_every_frequency(name: str) -> None:
    from polebook.solve.edges import band, seed
    from polebook.solve.span import span
    from polebook.solve.sweep import sweep

    book = ledger(chain(name))
    net, gains = book.solution.circuit.network, book.solution.gains
    slower = network(net.layout, [v * 3.7 if p.type in ("C", "L", "tau") else v
                                  for v, p in zip(net.values, net.layout.parts, strict=True)])
    taus = [tau * 3.7 for tau in book.solution.constants.taus]
    start, clean = seed(slower, gains, book.solution.band.seed_hz / 3.7, taus)
    again = band(slower, gains, sweep(slower, *span(slower, [abs(t) for t in taus]), gains), start, clean)
    for edge, moved in ((book.lower_hz, again.lower_hz), (book.upper_hz, again.upper_hz)):
        assert (moved is None) == (edge is None)
        if edge is not None:
            assert moved == pytest.approx(edge / 3.7, rel=1e-9)
    assert again.peaking_db == pytest.approx(book.solution.band.peaking_db, abs=1e-7)


def _figures(doc: dict) -> dict:
    """Gains, resistances, poles, shares and losses by name: what a microhm must not move."""
    overall = ("gain", "lower_edge_hz", "upper_edge_hz", "peaking_db", "node_upper_hz", "octc_upper_hz",
               "sctc_lower_hz")
    of_line = ("gain", "open_gain", "input_ohm", "owns_upper", "owns_lower", "k")
    of_node = ("ohm", "farad", "pole_hz", "lost_upper_db", "lost_lower_db")
    of_part = ("tau_s", "owns_upper", "owns_lower")
    found = {(key,): doc["overall"][key] for key in overall}
    for row in doc["lines"]:
        found |= {(row["name"], key): row[key] for key in of_line}
    for row in doc["nodes"]:
        found |= {(row["name"], key): row[key] for key in of_node}
    for row in doc["parts"]:
        found |= {(row["stage"], row["part"], key): row[key] for key in of_part}
    return found


@pytest.mark.parametrize("name", BY_NAME)
def test_a_microhm_stopper_moves_nothing(name: str) -> None:
    """Also before a 1 GΩ gate (jfet-electrometer): shares and dB by under 1e-6, all else by under 1e-6 of itself."""
    original = chain(name)
    before = _figures(document(ledger(original)))
    tried = 0
    for stage in original.stages:
        family = original.cards[stage.device].family if stage.device else ""
        path = f"{stage.name}.stopper"
        if "stopper" not in KINDS[stage.kind].keys(family) or path in original.numbers or stage.left_out:
            continue
        tried += 1
        after = _figures(document(ledger(replace(original, numbers={**original.numbers, path: 1e-6}))))
        for key, value in before.items():
            if value is None:
                assert after[key] is None, key
            else:
                absolute = key[-1].startswith(("owns", "lost", "peaking"))
                assert after[key] == pytest.approx(value, rel=0 if absolute else 1e-6, abs=1e-6 if absolute else 0), key
    if name == "jfet-electrometer":
        assert tried > 0


@pytest.mark.parametrize("name", ["six-stage", "jfet-electrometer", "valves", "direct-coupled", "photodiode-front"])
def test_values_by_complex_step_are_their_derivatives(name: str) -> None:
    """d(element)/d(key) by complex step against central differences, for every number that the file gives."""
    of = circuit(chain(name))
    for path in sorted(of.chain.given & set(of.chain.numbers)):
        x = of.chain.numbers[path]
        if x == 0 or path.startswith(("target.", "tolerance.", "bench.")) or path.endswith(".allot"):
            continue
        stepped = [complex(v).imag / 1e-30 for v in values(of, {path: complex(x, 1e-30)})]
        h = 1e-5 * abs(x)
        above, below = values(of, {path: x + h}), values(of, {path: x - h})
        for exact, a, b in zip(stepped, above, below, strict=True):
            assert exact * x == pytest.approx((a - b) / (2 * h) * x, rel=1e-6, abs=1e-8 * abs(a)), path


@pytest.mark.parametrize("name", ["six-stage", "jfet-electrometer", "valves", "mosfets", "blocks"])
def test_arrays_of_values_are_the_floats_side_by_side(name: str) -> None:
    of = circuit(chain(name))
    numbers = sorted(of.chain.given & set(of.chain.numbers))
    paths = [path for path in numbers if not path.startswith(("target.", "tolerance.", "bench."))]
    factors = np.array([0.97, 1.0, 1.04])
    together = values(of, {p: of.chain.numbers[p] * factors for p in paths})
    for k, factor in enumerate(factors):
        alone = values(of, {p: of.chain.numbers[p] * float(factor) for p in paths})
        for many, one in zip(together, alone, strict=True):
            assert np.broadcast_to(many, (3,))[k] == pytest.approx(one, rel=1e-12)
