"""Benches: their sweeps, and what was measured against the plan."""

from dataclasses import replace

import numpy as np
import pytest

from polebook.book.ledger import ledger
from polebook.chain.read import parse
from polebook.plan.spread.model import Request
from polebook.plan.spread.run import spread
from polebook.problem import ProblemsFound
from polebook.record import bench as benches
from polebook.record.compared import Compared, compared, document, off
from tests.helpers import DEMOS

LISTENER = (DEMOS / "wire-break-listener.toml").read_text(encoding="utf-8")
PHOTODIODE = (DEMOS / "photodiode-front.toml").read_text(encoding="utf-8")
FLAT = "Hz,dB\n1000,0\n2000,0\n"
S2P = "# kHz S DB R 50\n30 0 0 40 0 0 0 0 0\n60 0 0 40 0 0 0 0 0\n"


def chain(bench, text=LISTENER):
    return parse(f"{text}\n{bench}", "chain.toml")


def last(of, folder=".", **more) -> tuple[Compared, ...]:
    *_, (_, _, found) = compared(of, str(folder), **more)
    return found


def test_overlays_are_the_sweeps_in_their_order(tmp_path):
    (tmp_path / "sub").mkdir()
    (tmp_path / "sub" / "a.csv").write_text(FLAT)
    of = chain('[[bench]]\nunit = "board 3"\ndate = 2026-05-04\nfile = "sub/a.csv"\n[[bench]]\ngain = "58 dB"\n'
               '[[bench]]\nat = "Q1"\nfile = "no.csv"\n')
    first, second = benches.overlays(of, str(tmp_path))
    assert (first.number, first.label, first.at, first.apart) == (1, "board 3, 2026-05-04", "", "")
    assert first.sweep.hz.tolist() == [1000.0, 2000.0]
    assert (second.number, second.label, second.at, second.sweep) == (3, "bench 3", "Q1", None)
    assert "there is no such file" in second.problems[0].why


@pytest.mark.parametrize(("bench", "text", "what"), [
    ('file = "/etc/passwd"', LISTENER, "is no file beside the chain"),
    ('file = "a.s2p"\nat = "Q1"', LISTENER, "S21 is no gain up to the output of Q1"),
    ('file = "a.s2p"', PHOTODIODE, "S21 is no gain of this chain"),
    ('file = "bad.csv"', LISTENER, "no heading names the frequency"),
])
def test_a_sweep_that_is_none_is_told_and_never_raised(tmp_path, bench, text, what):
    (tmp_path / "a.s2p").write_text(S2P)
    (tmp_path / "bad.csv").write_text("a,b\n1,2\n2,3\n")
    (found,) = benches.overlays(chain(f"[[bench]]\n{bench}\n", text), str(tmp_path))
    assert found.sweep is None
    assert what in found.problems[0].what


def test_s_parameters_are_compared_between_their_own_resistance(tmp_path):
    (tmp_path / "a.s2p").write_text(S2P)
    of = chain('[[bench]]\nfile = "a.s2p"\n')
    (found,) = last(of, tmp_path)
    assert found.overlay.apart == ("measured between 50.0 Ω on both sides, and in the file the source is 600 Ω and the "
                                   "load is 600 Ω")
    text = LISTENER.replace('resistance  = "600"     # sensor head', 'resistance  = "50"     # sensor head').replace(
        'resistance  = "600"     # the logger', 'resistance  = "50"     # the logger')
    alike = chain('[[bench]]\nfile = "a.s2p"\n', text)
    (other,) = last(alike, tmp_path)
    assert other.overlay.apart == ""
    assert other.gain == found.gain  # the file's own resistances do not matter
    hz = float(other.gain.greatest_hz)
    size = 20 * np.log10(np.sqrt(_square(ledger(alike), hz)))
    assert other.gain.greatest == pytest.approx(40.0 - 20 * np.log10(2) - size, abs=1e-9)


def _square(of, hz):
    from polebook.solve.fold import fold

    return np.prod([abs(gain) ** 2 for gain in fold(of.solution.circuit.network, 2j * np.pi * hz, "full").gains])


def test_figures_against_the_plan():
    of = chain('[[bench]]\ngain = "59 dB"\nlower = "14k"\nupper = "0.5M"\n')
    (found,) = last(of, builds=2000, seed=4)
    gain, lower, upper = found.rows
    plan = ledger(of)
    assert gain.planned == pytest.approx(20 * np.log10(abs(plan.solution.gain)))
    assert gain.difference == pytest.approx(59.0 - gain.planned)
    assert (lower.planned, lower.difference) == (plan.lower_hz, 14e3 - plan.lower_hz)
    assert upper.relative == pytest.approx(0.5e6 / plan.upper_hz - 1)
    *_, (_, _, built) = spread(Request(of, 2000, 4, workers=1, corners=False, costs=False))
    column = built.columns["lower_edge_hz"]
    assert lower.percentile == pytest.approx(100 * (column < 14e3).mean())
    assert (lower.low, lower.high) == tuple(np.percentile(column, [1, 99]))
    assert (gain.explained, lower.explained, upper.explained) == (True, True, False)
    assert upper.percentile == 100.0


def test_the_borders_of_what_is_explained():
    """The value below which 1 % of the builds lie is explained, one that is a little lower is not."""
    (first,) = last(chain('[[bench]]\nupper = "0.4M"\n'), builds=600)
    low, high = first.rows[0].low, first.rows[0].high
    for value, explained in ((low * 1.002, True), (low * 0.99, False), (high * 0.998, True), (high * 1.01, False)):
        (found,) = last(chain(f"[[bench]]\nupper = {value!r}\n"), builds=600)
        assert found.rows[0].explained is explained


def test_at_the_output_of_a_stage():
    of = chain('[[bench]]\nat = "Q1"\ngain = "29 dB"\nupper = "0.46M"\n[[bench]]\nupper = "0.4M"\n')
    first, second = last(of, builds=500)
    assert first.rows[1].planned == ledger(replace(of, output="Q1")).upper_hz
    assert second.rows[0].planned == ledger(of).upper_hz


def test_a_gain_with_a_reference_is_judged_there():
    of = chain('[[bench]]\ngain = "59 dB"\n', LISTENER.replace("[target]", '[target]\nreference = "300k"'))
    (found,) = last(of, builds=300)
    assert found.rows[0].planned == pytest.approx(20 * np.log10(ledger(of).gain_at_reference))


@pytest.mark.parametrize(("text", "bench", "why"), [
    (LISTENER.replace("[target]", "[tolerance]\nresistor = 0\ncapacitor = 0\ndevice = 0\nbeta = 0\n[target]"),
     'upper = "0.4M"', "every tolerance of the chain is 0"),
    (PHOTODIODE, 'at = "U1"\nlower = "1"', "has no lower edge"),
])
def test_what_can_t_be_judged_says_why(text, bench, why):
    (found,) = last(chain(f"[[bench]]\n{bench}\n", text), builds=100)
    assert (found.rows[0].explained, why in found.rows[0].why) == (None, True)


def test_how_far_a_curve_is_off():
    hz = np.array([1.0, 2.0, 3.0, 4.0])
    found = off(hz, np.array([1.0, -3.0, np.nan, 1.0]))
    assert (found.mean, found.rms, found.greatest, found.greatest_hz) == pytest.approx((-1 / 3, np.sqrt(11 / 3), -3, 2))


def test_a_file_without_a_bench():
    with pytest.raises(ProblemsFound, match=r"no \[\[bench\]\]"):
        last(parse(LISTENER, "chain.toml"))


def test_the_document_is_plain(tmp_path):
    (tmp_path / "a.csv").write_text(FLAT)
    of = chain('[[bench]]\ngain = "59 dB"\nfile = "a.csv"\n[[bench]]\nfile = "no.csv"\n[[bench]]\n')
    told = [document(one) for one in last(of, tmp_path, builds=100)]
    assert told[0]["figures"][0]["builds"] == 100
    assert told[0]["sweep"]["points"] == 2 and told[0]["sweep"]["gain"]["rms"] > 0 and told[0]["sweep"]["phase"] is None
    assert told[1]["sweep"]["points"] is None and "no such file" in told[1]["sweep"]["why"]
    assert (told[2]["figures"], told[2]["sweep"]) == ([], None)
