"""The chain over frequency against poles and zeros, one dense matrix, and the figures of one frequency."""

from math import inf, log10, pi

import numpy as np
import pytest

from polebook.book.build import at, ledger
from polebook.book.response import (
    delays,
    grid,
    input_impedance,
    output_impedance_of,
    response,
    whole_band,
)
from polebook.chain.read import known_reading as read
from tests.book.verdict_cases import CASES
from tests.laws.chains import BY_NAME, chain
from tests.laws.dense import impedance

HZ = np.geomspace(30.0, 3e8, 41)
SOME = np.geomspace(1e2, 1e7, 6)


def book(name):
    return ledger(chain(name))


@pytest.mark.parametrize("name", BY_NAME)
def test_lines_are_what_one_frequency_gives(name):
    of = book(name)
    found = response(of, HZ)
    for k in (0, 17, 40):
        for row, line in enumerate(at(of, float(HZ[k]))["lines"]):
            assert found.gains_db[row, k] == pytest.approx(line["gain_db"], rel=1e-9, abs=1e-9)
            assert found.losses_db[row, k] == pytest.approx(line["lost_db"], rel=1e-9, abs=1e-8)
            assert (found.phases_deg[row, k] - line["phase_deg"] + 180) % 360 - 180 == pytest.approx(0.0, abs=1e-8)


@pytest.mark.parametrize("name", BY_NAME)
def test_group_delay_is_that_of_the_poles_and_zeros(name):
    """-Re(d ln H/ds) of H = c·prod(s - z)/prod(s - p)."""
    of = book(name)
    if of.poles.roots is None or of.zeros is None:
        pytest.skip("its poles or zeros are not resolved")
    s = 2j * pi * HZ
    terms = np.array([(1.0 / (s - root.value)).real for root in of.poles.roots]
                     + [-(1.0 / (s - root.value)).real for root in of.zeros])
    assert delays(of, HZ).sum(axis=0) == pytest.approx(terms.sum(axis=0), rel=1e-6,
                                                       abs=1e-6 * float(np.abs(terms).sum(axis=0).min()))


@pytest.mark.parametrize("name", ["six-stage", "ladder-arms", "photodiode-front"])
def test_group_delay_of_each_line_is_the_slope_of_its_phase(name):
    of = book(name)
    h = 1e-4
    slope = (response(of, HZ * (1 + h)).phases_deg - response(of, HZ * (1 - h)).phases_deg) / (2 * h * HZ * 360)
    assert delays(of, HZ) == pytest.approx(-slope, rel=1e-4, abs=1e-7 / HZ.max())


@pytest.mark.parametrize("name", BY_NAME)
def test_phase_has_no_jumps_and_is_that_of_the_sign_in_the_band(name):
    """Between points of the refined grid no line turns by half a turn, whatever part of it is asked for."""
    of = book(name)
    hz = grid(of, 10.0, 1e9, 400)
    found = response(of, hz)
    assert np.abs(np.diff(found.phases_deg, axis=1)).max() < 180.0
    part = response(of, hz[100:130])
    assert part.phases_deg == pytest.approx(found.phases_deg[:, 100:130], abs=1e-9)
    if of.judged and of.solution.band.clean:
        middle = response(of, np.array([of.solution.band.seed_hz]))
        assert abs(middle.phase_deg[0] - (0.0 if of.solution.gain > 0 else 180.0)) < 90.0


@pytest.mark.parametrize("name", BY_NAME)
def test_impedances_against_a_dense_matrix_of_the_lines_alone(name):
    """Into n0 of all but the source's line, at the last node of all but the load's; and into and out of every line."""
    of = book(name)
    net, layout = of.solution.circuit.network, of.solution.circuit.layout
    count = len(layout.segments)
    for line in range(count - 1):
        found = output_impedance_of(of, SOME, line)
        for hz, ohms in zip(SOME, found, strict=True):
            if layout.after[line] == layout.emf or layout.driven[layout.after[line]]:
                assert ohms == 0
            elif np.isfinite(ohms):
                assert ohms == pytest.approx(impedance(net, range(line + 1), layout.after[line], float(hz)), rel=1e-6,
                                             abs=1e-12)
    assert np.array_equal(output_impedance_of(of, SOME), output_impedance_of(of, SOME, count - 2), equal_nan=True)
    for line in range(1, count):
        node = layout.after[line - 1]
        if layout.driven[node]:  # the dense matrix has no balance of currents there
            continue
        for hz, ohms in zip(SOME, input_impedance(of, SOME, line), strict=True):
            if np.isfinite(ohms):
                assert ohms == pytest.approx(impedance(net, range(line, count), node, float(hz)), rel=1e-6)


@pytest.mark.parametrize("name", ["six-stage", "wire-break-listener", "rain-radar", "frost-line-sounder"])
def test_impedances_in_the_middle_of_the_band_are_near_the_ledgers_resistances(name):
    of = book(name)
    at_hz = np.array([of.solution.band.seed_hz])
    assert abs(input_impedance(of, at_hz)[0]) == pytest.approx(of.lines[1].input_ohm, rel=0.05)
    assert abs(output_impedance_of(of, at_hz)[0]) == pytest.approx(of.lines[-2].output_ohm, rel=0.05)


def test_an_output_that_only_a_current_drives_has_no_impedance():
    text = ('format = 1\n[source]\nkind = "voltage"\nresistance = 50\n[load]\nresistance = "1k"\n'
            '[supply]\npositive = 12\n'
            '[[stage]]\nname = "M"\nkind = "common-source"\ndevice = "F"\nid = "1m"\nvds = 5\n'
            '[device.F]\nfamily = "mosfet"\npolarity = "n"\nvgs_th = 2\nk = "4m"\n')
    reading = read(text, "a.toml")
    assert reading.chain is not None, reading.problems
    of = ledger(reading.chain)
    assert of.lines[1].output_ohm is None
    assert not np.isfinite(output_impedance_of(of, SOME)).any()


@pytest.mark.parametrize("name", BY_NAME)
def test_the_whole_band_holds_edges_and_targets_with_room_beside_them(name):
    of = book(name)
    low, high = whole_band(of)
    for end in (low, high):
        assert log10(end) == pytest.approx(round(log10(end)), abs=1e-9)
    corners = [of.lower_hz, of.upper_hz, of.chain.get("target.lower"), of.chain.get("target.upper")]
    for hz in filter(None, corners):
        assert low * 10**0.5 <= hz * (1 + 1e-9) and hz <= high / 10**0.5 * (1 + 1e-9)
    if any(corners):
        assert not min(filter(None, corners)) > 1e4 * low


def test_without_an_edge_what_is_unstable_is_looked_at():
    for name in ("unstable, an op-amp that drives a capacitance", "unstable, a follower behind a long wire"):
        of = ledger(read(CASES[name], "a.toml").chain)
        low, high = whole_band(of)
        assert of.unstable and of.upper_hz is None
        grows = [root.hz for root in of.poles.roots if root.value.real > 0]
        assert any(low <= hz <= high for hz in grows)
        assert np.isfinite(response(of, grid(of, low, high, 60)).gain_db).all()


def test_the_grid_has_the_edges_and_the_peaks():
    of = book("trap-notch")
    low, high = whole_band(of)
    hz = grid(of, low, high, 50)
    assert hz[0] == low and hz[-1] == high and (np.diff(hz) > 0).all()
    assert of.lower_hz in hz and of.upper_hz in hz
    coarse = response(of, np.geomspace(low, high, 50)).gain_db
    assert response(of, hz).gain_db.min() < coarse.min() - 5.0, "the notch lies between two even points"


def test_what_is_beyond_a_double_is_not_a_number_and_never_infinite():
    of = book("six-stage")
    far = np.array([1e-290, 1e-150, 1e-6, 1e12, 1e150, 1e290])
    found = response(of, far)
    for values in (found.gains_db, found.phases_deg, found.losses_db, delays(of, far), input_impedance(of, far),
                   output_impedance_of(of, far)):
        assert not np.isinf(values).any() and not (np.abs(values) == inf).any()
    assert np.isfinite(found.gains_db[:, 2:4]).all()
