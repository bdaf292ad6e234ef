"""Pulse figures of whole chains: closed forms, laws, targets, verdicts, and what is null with which reason."""

from __future__ import annotations

from dataclasses import replace
from math import exp, log, pi, sqrt

import numpy as np
import pytest

from polebook.book.build import document, ledger, roots
from polebook.book.delay import delay
from polebook.book.ledger import Ledger
from polebook.book.pulse import rise_by_edge, rise_by_nodes, rounded, sag
from polebook.book.pulse_rows import overall, page
from polebook.book.working import working
from polebook.chain.read import load, parse
from polebook.solve import transient
from polebook.solve.fold import fold
from tests.bench.ledger import SIX, repeated
from tests.book.verdict_cases import stage, target
from tests.laws.chains import WITH_BAND, chain
from tests.test_imports import modules_after

HEAD = 'format = 1\n[source]\nkind = "voltage"\nresistance = "1k"\n'
LOW_PASS = HEAD + stage("P", "ladder", arms=["{ shunt_c = 1e-9 }"]).replace("'", "")
KEYS = ("rise_time_s", "overshoot_percent", "settling_1_s", "settling_01_s", "sag_percent", "group_delay_s",
        "group_delay_spread_s")


def of(text):
    return ledger(parse(text, "x.toml"))


def arms(*each, head=HEAD, tail=""):
    listed = ", ".join("{ " + one + " }" for one in each)
    return f'{head}[[stage]]\nname = "L"\nkind = "ladder"\narms = [{listed}]\n{tail}'


def why(one, key):
    return working(one, f"overall.{key}").why


def test_one_pole():
    one = of(LOW_PASS)
    tau = 1e-6
    assert one.pulse.rise_time_s == pytest.approx(log(9) * tau, rel=1e-12)
    assert one.pulse.settling_1_s == pytest.approx(log(100) * tau, rel=1e-12)
    assert one.pulse.settling_01_s == pytest.approx(log(1000) * tau, rel=1e-12)
    assert one.pulse.overshoot_percent == one.pulse.undershoot_percent == 0.0
    for estimate in (rise_by_edge(one.upper_hz), rise_by_nodes(one.sites)):
        assert estimate == pytest.approx(one.pulse.rise_time_s, rel=1e-9)
    t, y = one.pulse.curve()
    np.testing.assert_allclose(y, 1 - np.exp(-t / tau), atol=1e-13)
    assert len(t) == 201 and t[0] == 0.0 and one.pulse.settling_01_s < t[-1] < 10 * tau
    # delay tau/(1 + (f/f_c)²): whole at d.c., half at the edge
    edge = 1 / (2 * pi * tau)
    assert one.delay_s == pytest.approx(tau / (1 + (one.reference_hz / edge) ** 2), rel=1e-12)
    assert one.delays.seconds == pytest.approx(tau / 2, rel=1e-9)
    assert one.delays.least_hz == pytest.approx(edge, rel=1e-9)


@pytest.mark.parametrize("pulse", [1e-9, 1e-4, 3e-3, 0.1])
def test_sag_of_a_coupling(pulse):
    """100·(1 - exp(-T/RC)), R from one side to the other."""
    one = of(arms("shunt_r = 9000", head=HEAD + 'couple = "1u"\n', tail=target(pulse=pulse)))
    assert one.sag.percent == pytest.approx(100 * (1 - exp(-pulse / 10e-3)), rel=1e-9 + 1e-12 * 10e-3 / pulse)


def test_sag_of_two_couplings():
    """Two alike, buffered by a milliohm: 1 - (1 - x)·exp(-x); it goes below zero where the pulse is long."""
    stages = "".join(stage(name, "block", gain=2, rin="10k", couple="100n") for name in "AB")
    text = f'format = 1\n[source]\nkind = "voltage"\nresistance = 0\n{stages}'
    for x in (0.1, 1.0, 3.0):
        found = of(text + target(pulse=x * 1e-3)).sag.percent
        assert found == pytest.approx(100 * (1 - (1 - x) * exp(-x)), rel=1e-6)


def test_a_direct_chain_does_not_sag_and_one_without_capacitance_rises_at_once():
    one = of(arms("shunt_r = 500", tail=target(pulse="1m")))
    assert (one.sag.percent, one.pulse.rise_time_s, one.pulse.settling_01_s) == (pytest.approx(0, abs=1e-12), 0.0, 0.0)
    assert one.delay_s == 0.0 and one.delays.seconds == 0.0
    assert page(one)["marks"][0] == {"mark": "start", "time_s": 0.0, "height": 1.0}
    assert one.pulse.curve()[1].tolist() == [1.0] * 201


def test_a_coil_and_a_capacitor_ring():
    """R + sL into C: the pair's damping R/2·sqrt(C/L); overshoot exp(-pi·zeta/sqrt(1 - zeta²))."""
    for ohm in (20.0, 60.0, 120.0):
        one = of(arms("series_l = 1e-6", "shunt_c = 1e-10", head=HEAD.replace('"1k"', str(ohm))))
        zeta = ohm / 2 * sqrt(1e-10 / 1e-6)
        wanted = 100 * exp(-pi * zeta / sqrt(1 - zeta * zeta))
        assert one.pulse.overshoot_percent == pytest.approx(wanted, rel=1e-9)
        assert one.pulse.marks.top_s == pytest.approx(pi * 1e-8 / sqrt(1 - zeta * zeta), rel=1e-5)


def test_a_divider_of_capacitors_jumps():
    """R1 ∥ C1 into R2 ∥ C2 from a stiff source: starts at C1/(C1 + C2), settles with (R1 ∥ R2)·(C1 + C2)."""
    pieces = ("series_r = 9000, series_c = 1e-11, role = 'high'", "shunt_r = 1000", "shunt_c = 3e-11")
    one = of(arms(*pieces, head=HEAD.replace('"1k"', "0")))
    assert one.pulse.marks.start == pytest.approx(0.25 / 0.1, rel=1e-9)
    assert one.pulse.overshoot_percent == pytest.approx(150.0, rel=1e-9)
    assert one.pulse.rise_time_s == 0.0
    assert one.pulse.settling_1_s == pytest.approx(900 * 4e-11 * log(150), rel=1e-9)


def test_an_impulse_is_no_step_response():
    """A current into a coil: the voltage of a step begins without bound."""
    head = 'format = 1\n[source]\nkind = "current"\n'
    one = of(arms("shunt_r = 50, shunt_l = 1e-6, role = 'high'", head=head))
    assert one.pulse.rise_time_s is None
    assert "impulse" in why(one, "rise_time_s")
    assert document(one)["overall"]["overshoot_percent"] is None
    assert one.delay_s is not None


def test_a_lossless_ring_has_no_end():
    """A coil from a stiff source into a capacitor, alone and before another pole; a trap that nothing feels."""
    stiff = HEAD.replace('"1k"', "0")
    ring = arms("series_l = 1e-6", "shunt_c = 1e-10", head=stiff)
    for text in (ring, ring + stage("B", "block", gain=2, poles=[3e6])):
        assert why(of(text), "rise_time_s") == "the step response rings on without end"
    unfelt = of(arms("shunt_l = 1e-6, shunt_c = 1e-10, role = 'high'", head=stiff))
    assert unfelt.pulse.rise_time_s == 0.0


def test_a_bridge_capacitance_sends_it_the_wrong_way_first():
    """Common emitter with gm and Cmu alone beside the loads: H ~ (1 - s·Cmu/gm)."""
    card = '[device.N]\nfamily = "bjt"\npolarity = "npn"\ngm = "10m"\nrpi = "10k"\ncpi = 0\ncmu = "20p"\n'
    text = HEAD + stage("Q", "common-emitter", device="N", rc="500") + card
    one = of(text)
    # jump to the feedthrough of Cmu: (rs ∥ rpi, Cmu, rc) with nothing else: -H(inf)/H(0) over the whole gain
    wrong = one.pulse.undershoot_percent
    assert one.solution.gain < 0 and wrong > 1.0
    infinite = 1.0
    for gain in fold(one.solution.circuit.network, 1e20j, "upper").gains:
        infinite *= gain
    assert -wrong / 100 == pytest.approx((infinite / one.solution.gain).real, rel=1e-9)
    assert "wrong way" in " ".join(str(line) for line in _figures(one))


def _figures(one):
    from polebook.report.look import Look
    from polebook.report.pulse import figures

    told = {"reference_hz": one.reference_hz, **overall(one)}
    return figures({"overall": told, "zeros": roots(one.zeros), "pulse": page(one)}, Look())


@pytest.mark.parametrize("name", ["six-stage", "photodiode-front", "ladder-arms", "rain-radar"])
def test_everything_scales_with_time(name):
    """All C, L and tau three times as large: all times too, and no height moves."""
    from polebook.circuit.views import network

    one = ledger(chain(name))
    circuit = one.solution.circuit
    values = [value * (3.0 if part.type in ("C", "L", "tau") else 1.0)
              for value, part in zip(circuit.network.values, circuit.layout.parts, strict=True)]
    slow = Ledger(one.chain, replace(circuit, network=network(circuit.layout, values)))
    for key in ("rise_time_s", "settling_1_s", "settling_01_s"):
        assert getattr(slow.pulse, key) == pytest.approx(3 * getattr(one.pulse, key), rel=1e-9)
    assert slow.pulse.overshoot_percent == pytest.approx(one.pulse.overshoot_percent, rel=1e-9, abs=1e-9)
    assert slow.delays.seconds == pytest.approx(3 * one.delays.seconds, rel=1e-9)
    assert sag(slow.solution, 3e-6).percent == pytest.approx(sag(one.solution, 1e-6).percent, rel=1e-9)


@pytest.mark.parametrize("name", WITH_BAND)
def test_residues_sum_to_what_passes_at_once(name):
    """Sum of the residues of H(s)/s with the final value: H at infinite frequency; the sum of y's first terms."""
    pulse = ledger(chain(name)).pulse
    assert pulse.transient.miss < 1e-12
    if pulse.transient.residues is not None:
        assert 1 + pulse.transient.residues.sum().real == pytest.approx(pulse.marks.start, abs=1e-9)
        assert abs(pulse.transient.residues.sum().imag) < 1e-12


@pytest.mark.parametrize("name", ["six-stage", "wire-break-listener", "trap-notch"])
def test_group_delay_is_how_the_phase_falls(name):
    one = ledger(chain(name))
    net = one.solution.circuit.network
    hz = np.geomspace(one.lower_hz / 3, 3 * one.upper_hz, 40)
    step = 1e-5
    ends = []
    for factor in (1 - step, 1 + step):
        gains = fold(net, 2j * pi * hz * factor, "full").gains
        ends.append(sum(np.angle(np.broadcast_to(gain, hz.shape)) for gain in gains))
    turned = np.angle(np.exp(1j * (ends[1] - ends[0])))
    np.testing.assert_allclose(delay(net, hz), -turned / (4 * pi * hz * step), rtol=1e-6)


def test_rise_of_the_listener_by_hand():
    """Two poles matter, 428 kHz and 3.21 MHz, the rest lie beyond 40 MHz: y = 1 - (t1·e^(-t/t1) - t2·e^(-t/t2))/(t1 -
    t2) is at 90 % when its slow term is 10 %, and at 10 % by a few Newton steps from the slow term alone."""
    one = ledger(chain("wire-break-listener"))
    slow, fast = (1 / (2 * pi * hz) for hz in (427.8e3, 3.2075e6))
    late = slow * log(10 * slow / (slow - fast))
    early = slow * log(slow / (slow - fast) / 0.9)
    for _ in range(4):
        y = 1 - (slow * exp(-early / slow) - fast * exp(-early / fast)) / (slow - fast)
        early -= (y - 0.1) / ((exp(-early / slow) - exp(-early / fast)) / (slow - fast))
    assert one.pulse.rise_time_s == pytest.approx(late - early, rel=2e-3)


def test_a_pair_and_a_zero_of_the_sounder_by_hand():
    """Its pair alone, 55.1 ± 53.6j MHz, would overshoot by exp(-pi·55.1/53.6) = 4.0 %; the zero of the peaking coil
    lifts that, by less than half of it."""
    one = ledger(chain("frost-line-sounder"))
    pair = exp(-pi * 55.0847 / 53.622)
    assert pair == pytest.approx(0.0397, abs=1e-4)
    assert pair < one.pulse.overshoot_percent / 100 < 1.5 * pair


def test_many_stages_by_the_matrix(monkeypatch):
    """24 and 60 stages like the demo chain's own: residues would be lost in 1e13 times and in 1e47 times the answer.
    The work grows with the size of the matrix alone, not with how often the response is looked at."""
    looks, state = [], transient._Matrix._state
    monkeypatch.setattr(transient._Matrix, "_state", lambda self, t: looks.append(t.size) or state(self, t))
    for count in (24, 60):
        looks.clear()
        one = ledger(repeated(load(str(SIX)), count))
        assert one.pulse.transient.residues is None and one.pulse.transient.miss < 1e-11
        assert 0.339 < one.pulse.rise_time_s * one.upper_hz < 0.342
        assert one.pulse.overshoot_percent == 0.0
        t = np.array([0.5, 1.0, 2.0, 4.0]) * one.pulse.marks.high_s
        np.testing.assert_allclose(one.pulse.at(t), _talbot(one, t), atol=2e-9)
        assert 0 < sum(looks) < 4000


def _talbot(one, times, points=36):
    """y(t) over the gain from the transfer alone, on A. Talbot's contour as J. A. C. Weideman tuned it (2006, from
    memory): good for poles near the negative real axis."""
    theta = (2 * np.arange(points) + 1) * pi / points - pi
    cot = np.cos(0.6407 * theta) / np.sin(0.6407 * theta)
    z = points * (0.5017 * theta * cot - 0.6122 + 0.2645j * theta)
    dz = points * (0.5017 * (cot - 0.6407 * theta / np.sin(0.6407 * theta) ** 2) + 0.2645j)
    found = []
    for t in times:
        s = z / t
        h = np.ones(points, dtype=complex)
        gains = fold(one.solution.circuit.network, s, "upper").gains
        for gain, reference in zip(gains, one.solution.gains, strict=True):
            h = h * gain / reference
        found.append(float((np.exp(z) * h / s * dz / t).sum().imag / points))
    return found


TARGETS = target(rise="100n", overshoot="20 %", pulse="1m", sag="2 %")
COUPLED = HEAD + 'couple = "1u"\n'
RINGING = arms("series_l = 1e-4", "shunt_c = 1e-10", head=COUPLED, tail="[load]\nresistance = 100000\n")


def test_targets_are_judged():
    one = of(RINGING + TARGETS)
    rows = {row["name"]: row for row in document(one)["targets"]}
    for name, figure in (("overshoot", one.pulse.overshoot_percent / 100), ("rise", one.pulse.rise_time_s),
                         ("sag", one.sag.percent / 100)):
        assert rows[name]["got"] == pytest.approx(figure, rel=1e-12)
        assert rows[name]["margin"] == pytest.approx((rows[name]["want"] - figure) / rows[name]["want"], rel=1e-12)
        assert rows[name]["met"] is (figure <= rows[name]["want"])
    assert {name for name in rows if rows[name]["met"] is False} == {"rise"}


def test_a_sag_without_a_pulse_and_an_unstable_chain_are_not_judged():
    one = of(RINGING + target(sag="5 %"))
    assert [(row["met"], row["why"]) for row in document(one)["targets"]] == [(None, "target.pulse is not set")]
    text = chain("oscillating").path
    with open(text, encoding="utf-8") as file:
        loud = of(file.read() + target(rise="1u"))
    assert [(t.met, t.why) for t in loud.targets] == [(None, "the chain is unstable")]
    told = document(loud)["overall"]
    assert [told[key] for key in KEYS] == [None] * len(KEYS)
    for key in KEYS:
        assert "unstable" in why(loud, key)


def test_verdicts_of_what_the_step_misses():
    over = of(RINGING + target(overshoot="5 %")).verdict
    assert over.startswith("Overshoot 16 % for 5 %:") and "rings with" in over and "takes" in over
    slow = of(LOW_PASS + target(rise="1u")).verdict
    assert slow.startswith("Rise 2.20 us for 1 us: it goes with the upper edge, 159 kHz: P.arm1 owns all of it")
    assert "1 % less of it lifts the edge by 1.0 %" in slow
    loose = of(RINGING + target(pulse="20m", sag="5 %")).verdict
    assert loose.startswith("Sag 18 % for 5 %: source.couple, 1 uF, lets go of it fastest, 100 %, with a time constant "
                            "of 101 ms.")
    assert "1 % more source.couple takes 0.16 % of the height off it." in loose
    met = of(LOW_PASS + target(rise="3u")).verdict
    assert met.startswith("The target is met: rise 2.20 us for 3 us (27 % to spare).")


def test_what_one_per_cent_takes_off_the_sag():
    """20 ms on 101 ms: d sag = -(T/tau)·exp(-T/tau) per cent of tau."""
    x = 20e-3 / 101e-3
    assert 100 * (exp(-x / 1.01) - exp(-x)) == pytest.approx(0.16, abs=0.005)


def test_an_audit_without_such_a_target_computes_none_of_it():
    names, code = modules_after(f"from polebook.cli.main import main; result = main(['audit', {str(SIX)!r}])")
    assert code == 0
    mine = {"polebook.book.pulse", "polebook.book.delay", "polebook.solve.transient", "polebook.solve.poles"}
    assert not names & mine


def test_windows_end_at_round_times():
    assert [rounded(x) for x in (1.0, 1.01e-6, 3.3e-9, 9.9, 2.5e-3)] == pytest.approx([1.0, 1.2e-6, 4e-9, 10.0, 2.5e-3])
