"""Touchstone 1.x as its specification (EIA/IBIS Open Forum, revision 1.1, 2002) has it, and half of S21 as the gain."""

import math
import random

import numpy as np
import pytest

from polebook.book.ledger import ledger
from polebook.chain.read import parse as chain_of
from polebook.circuit.build import circuit
from polebook.problem import ProblemsFound
from polebook.record.sweeps import source, touchstone
from polebook.record.transfer import off_db, off_degrees, transfer

HALF = 20 * math.log10(2.0)
NOISE = "! noise\n0.7 2.5 0.5 45 10\n1 2.7 0.5 45 10\n"


def sweep(text):
    return touchstone.parse("a.s2p", source.plain("a.s2p", text.encode()))


SAME = {  # all say 1 MHz: 10 at 90 degrees, 2 MHz: 1 at -45 degrees; between 75 ohms
    "MA": "# MHz S MA R 75\n1 .5 1 10 90 .1 2 .3 3\n2 .5 1 1 -45 .1 2 .3 3\n",
    "DB": "# MHz S DB R 75\n1 -6 1 20 90 -20 2 -9 3\n2 -6 1 0 -45 -20 2 -9 3\n",
    "RI": "# MHz S RI R 75\n1 .5 0 0 10 .1 0 .3 0\n2 .5 0 .7071067811865476 -.7071067811865476 .1 0 .3 0\n",
    "any order, any case": "#  r 75 ma s  mhz \n1 .5 1 10 90 .1 2 .3 3\n2 .5 1 1 -45 .1 2 .3 3\n",
    "Hz": "# Hz S MA R 75\n1e6 .5 1 10 90 .1 2 .3 3\n2.0E+6 .5 1 1 -45 .1 2 .3 3\n",
    "kHz": "# kHz S MA R 75.0\n1000 .5 1 10 90 .1 2 .3 3\n2000 .5 1 1 -45 .1 2 .3 3\n",
    "GHz is the default": "# R 75\n.001 .5 1 10 90 .1 2 .3 3\n.002 .5 1 1 -45 .1 2 .3 3\n",
    "comments": "! a\n\n# MHz S MA R 75 ! b\n! c\n1 .5 1 10 90 .1 2 .3 3 ! d\n\t2 .5 1 1 -45 .1 2 .3 3\n",
    "over several lines": "# MHz S MA R 75\n1 .5 1 10 90\n  .1 2 .3 3\n2\n.5 1\n1 -45\n.1 2 .3 3\n",
    "further option lines": "# MHz S MA R 75\n# GHz Z RI R 50\n1 .5 1 10 90 .1 2 .3 3\n2 .5 1 1 -45 .1 2 .3 3\n",
    "noise data": "# MHz S MA R 75\n1 .5 1 10 90 .1 2 .3 3\n2 .5 1 1 -45 .1 2 .3 3\n" + NOISE,
    "a point at d.c.": "# MHz S MA R 75\n0 .5 1 10 90 .1 2 .3 3\n1 .5 1 10 90 .1 2 .3 3\n2 .5 1 1 -45 .1 2 .3 3\n",
    "CRLF": "# MHz S MA R 75\r\n1 .5 1 10 90 .1 2 .3 3\r\n2 .5 1 1 -45 .1 2 .3 3\r\n",
}


@pytest.mark.parametrize("text", SAME.values(), ids=SAME)
def test_one_two_port_in_many_forms(text):
    found = sweep(text)
    assert found.hz.tolist() == pytest.approx([1e6, 2e6])
    assert found.gain_db.tolist() == pytest.approx([20.0 - HALF, -HALF], abs=1e-9)
    assert found.degrees.tolist() == pytest.approx([90.0, -45.0])
    assert found.reference_ohm == 75.0


def test_what_is_not_stated_is_as_the_specification_has_it():
    assert sweep("#\n1 .5 1 10 90 .1 2 .3 3\n2 .5 1 1 -45 .1 2 .3 3\n").reference_ohm == 50.0


@pytest.mark.parametrize(("text", "told"), [
    (SAME["noise data"], "noise data in lines 5 to 6: not used"),
    (SAME["MA"], "read as MHz, S21 as magnitude and degrees"),
    (SAME["RI"], "read as MHz, S21 as real and imaginary part"),
    (SAME["MA"], "S21 is between 75.0 Ω and 75.0 Ω; V(load)/EMF is half of it, 6.02 dB less"),
])
def test_what_was_made_of_it_is_told(text, told):
    assert told in sweep(text).notes


REFUSED = {  # text -> line, what, why
    "Y": ("# MHz Y MA R 50\n", 1, "Y parameters", "S parameters"),
    "Z": ("! a\n# MHz Z RI R 50\n", 2, "Z parameters", "S parameters"),
    "no option line": ("1 .5 1 10 90 .1 2 .3 3\n", 1, "no option line before the data", "reference resistance"),
    "nothing": ("! a\n", 0, "no option line", "reference resistance"),
    "no data": ("# MHz S MA R 50\n! a\n", 0, "no points", "two or more"),
    "unknown option": ("# MHz S MA R 50 X\n", 1, '"X" is no option', "unit of frequency"),
    "no resistance": ("# MHz S MA R\n", 1, "R has no number", "ohms"),
    "no positive resistance": ("# MHz S MA R -50\n", 1, '"-50" is no reference resistance', "ohms"),
    "version 2": ("[Version] 2.0\n# MHz S MA R 50\n", 1, "version 2", "brackets"),
    "a number missing": ("# R 50\n1 1 1 1 1 1 1 1 1\n2 1 1 1 1 1 1 1\n3 1 1 1 1 1 1 1 1\n", 4,
                         "lines 3 to 4 have 17 numbers", "nine"),
    "a number too many": ("# R 50\n1 1 1 1 1 1 1 1 1 1\n", 2, "the line has 10 numbers", "nine"),
    "the end missing": ("# R 50\n1 1 1 1 1 1 1 1 1\n2 1 1 1\n", 3, "4 numbers, and the file ends", "S21"),
    "a word": ("# R 50\n1 1 1 1 1 1 1 x1 1\n", 2, '"x1" is no number', "!"),
    "decimal comma": ("# R 50\n1 1 1 1,5 1 1 1 1 1\n", 2, '"1,5" is no number', "decimal point"),
    "falling": ("# R 50\n2 1 1 1 1 1 1 1 1\n1 1 1 1 1 1 1 1 1\n", 3, "does not rise", "each once"),
    "twice": ("# R 50\n2 1 1 1 1 1 1 1 1\n2 1 1 1 1 1 1 1 1\n", 3, "does not rise", "each once"),
    "behind the noise": ("# R 50\n1 1 1 1 1 1 1 1 1\n2 1 1 1 1 1 1 1 1\n.7 2.5 .5 45 10\n3 1 1 1 1 1 1 1 1\n", 5,
                         "9 numbers", "noise data"),
    "negative": ("# R 50\n-1 1 1 1 1 1 1 1 1\n", 2, "the frequency is -1", "above zero"),
}


@pytest.mark.parametrize(("text", "line", "what", "why"), REFUSED.values(), ids=REFUSED)
def test_what_is_no_touchstone_1_is_refused_with_line_and_reason(text, line, what, why):
    with pytest.raises(ProblemsFound) as found:
        sweep(text)
    (problem,) = found.value.problems
    assert (problem.place.line, what in problem.what, why in problem.why) == (line, True, True), problem


def test_spoiled_files_are_read_or_refused():
    chance, read = random.Random(3), 0
    for _ in range(300):
        data = bytearray(chance.choice(list(SAME.values())).encode())
        at = chance.randrange(len(data))
        data[at:at + chance.randint(0, 2)] = bytes(chance.choices(b"0123456789. -+eE#!\nSMARzH", k=1))
        try:
            found = sweep(data.decode())
        except ProblemsFound:
            continue
        read += 1
        assert np.isfinite(found.gain_db).all() and (np.diff(found.hz) > 0).all()
    assert 20 < read < 280


PADDED = """
format = 1
[source]
kind = "voltage"
resistance = "50"
[[stage]]
name = "P1"
kind = "ladder"
arms = [{ shunt_r = "96R25" }, { series_r = "71R15" }, { shunt_r = "96R25" }, { shunt_c = "100p" }]
[load]
resistance = "50"
"""


def test_half_of_s21_is_what_the_chain_makes_of_its_emf():
    """A 10 dB attenuator pad (96.25, 71.15, 96.25 ohms in a system of 50) and a shunt capacitor C behind it: by the
    textbook S21 of the pad is 10**(-10/20), and a shunt admittance Y between 50 ohms has S21 = 2/(2 + 50·Y)."""
    hz = np.array([1e5, 1e7, 1e8])
    s21 = 10 ** (-10 / 20) * 2.0 / (2.0 + 50.0 * 2j * np.pi * hz * 100e-12)
    lines = "".join(f"{f:.9g} 0 0 {abs(s):.9g} {math.degrees(np.angle(s)):.9g} 0 0 0 0\n"
                    for f, s in zip(hz, s21, strict=True))
    found = sweep("# Hz S MA R 50\n" + lines)
    chain = chain_of(PADDED, "pad.toml")
    assert ledger(chain).solution.gain == pytest.approx(0.5 * 10 ** (-10 / 20), rel=1e-4)
    planned = transfer(circuit(chain), hz)
    assert np.abs(off_db(found.gain_db, planned)).max() < 1e-3
    assert np.abs(off_degrees(found.degrees, planned)).max() < 1e-2
