"""Sweeps as tables: every way that instruments and people write them is read right, or refused with line and reason."""

import cmath
import math
import random

import numpy as np
import pytest

from polebook.problem import ProblemsFound
from polebook.record.sweeps import gather, load, source, table

HZ, DB, DEG = (1000.0, 2000.0, 5000.0), (3.0, 2.5, -1.0), (-10.0, -20.0, -45.0)
PHASORS = [cmath.rect(10 ** (a / 20), math.radians(p)) for a, p in zip(DB, DEG, strict=True)]
_SPOILING = b"0123456789.,;\t -+eE#\n\"nHzdB\xc2\xb0\x00"


@pytest.fixture
def sweep(tmp_path):
    """Reads text or bytes as the file of that name."""
    def read(content, name="sweep.csv"):
        path = tmp_path / name
        path.write_bytes(content if isinstance(content, bytes) else content.encode())
        return load(path)
    return read


def rows(hz=HZ, first=DB, second=DEG, between=",", scale=1.0):
    return "".join(between.join(f"{cell:.12g}" for cell in row) + "\n"
                   for row in zip([one / scale for one in hz], first, second, strict=True))


SAME = {  # texts that all say HZ, DB, DEG
    "bare": rows(),
    "header": "Hz, dB, degrees\n" + rows(),
    "header in words": "Frequency (Hz),Gain (dB),Phase (deg)\n" + rows(),
    "blanks": "Hz dB deg\n" + rows(between="  "),
    "tabs": "f/kHz\tdB\t°\n" + rows(between="\t", scale=1e3),
    "MHz": "Freq [MHz];20*log10|H|;arg(H) [deg]\n" + rows(between=";", scale=1e6),
    "GHz": "GHz,dB20(S),phase (degrees)\n" + rows(scale=1e9),
    "khz": "freq_khz,gain_db,phase_deg\n" + rows(scale=1e3),
    "decimal comma": "Hz;dB;Grad (deg)\n" + rows(between=";").replace(".", ","),
    "decimal comma and tabs": rows(between="\t").replace(".", ","),
    "CRLF": ("Hz, dB, degrees\n" + rows()).replace("\n", "\r\n"),
    "CR alone": rows().replace("\n", "\r"),
    "BOM": "\ufeffHz, dB, degrees\n" + rows(),
    "comments": "# board 3\n! lab 2\n\nHz,dB,deg\n% one\n// two\n" + rows().replace("\n", " # seen\n"),
    "comment with semicolon": "; board 3\n" + rows(),
    "header as a comment": "# measured with care\n# Hz, dB, degrees\n#\n" + rows(),
    "unit of a comment": "# f (kHz), dB, phase\n" + rows(scale=1e3),
    "preamble": "Instrument,ABC 3000\nPoints,201\nHz,dB,degrees\n" + rows(),
    "names, then units": "Frequency,Gain,Phase\nkHz,dB,deg\n" + rows(scale=1e3),
    "quotes": '"Frequency (Hz)","Gain, all of it (dB)","Phase (deg)"\n' + rows().replace("1000", '"1000"'),
    "says its separator": "sep=;\nHz;dB;degrees\n" + rows(between=";"),
    "separator at the end": "Hz,dB,degrees,\n" + rows().replace("\n", ",\n"),
    "other columns": "No,Hz,dB,temperature,degrees\n"
                     + "".join(f"{n},{h:g},{a:g},21.5,{p:g}\n" for n, (h, a, p)
                               in enumerate(zip(HZ, DB, DEG, strict=True), 1)),
    "falling": "Hz,dB,degrees\n" + "\n".join(reversed(rows().splitlines())),
    "shuffled": "5000,-1,-45\n1000,3,-10\n2000,2.5,-20\n",
    "magnitude": "Hz,magnitude,degrees\n" + rows(first=[10 ** (one / 20) for one in DB]),
    "V/V": "Hz,Vout/Vin,degrees\n" + rows(first=[10 ** (one / 20) for one in DB]),
    "bars": "Hz,|H|,degrees\n" + rows(first=[10 ** (one / 20) for one in DB]),
    "radians": "Hz,dB,phase (rad)\n" + rows(second=[math.radians(one) for one in DEG]),
    "both phases": "Hz,dB,rad,deg\n" + "".join(f"{h:g},{a:g},9,{p:g}\n" for h, a, p in zip(HZ, DB, DEG, strict=True)),
    "parts": "Hz,Re,Im\n" + rows(first=[one.real for one in PHASORS], second=[one.imag for one in PHASORS]),
    "no value": "Hz,dB,degrees\n1500,nan,1\n1600,,1\n1700,-inf,1\n1800,--,1\n1900,9.91E37,0\n2100,1\n" + rows(),
    "at d.c.": "Hz,dB,degrees\n0,3,0\n" + rows(),
    "twice": rows() + "2000,2.5,-20\n",
    "minus as it is printed": rows().replace("-", "−"),
}


@pytest.mark.parametrize("text", SAME.values(), ids=SAME)
def test_one_sweep_in_many_forms(sweep, text):
    found = sweep(text)
    assert found.hz.tolist() == pytest.approx(HZ, rel=1e-12)
    assert found.gain_db.tolist() == pytest.approx(DB, abs=1e-9)
    assert found.degrees.tolist() == pytest.approx(DEG, abs=1e-9)
    assert found.reference_ohm is None


def test_without_a_phase(sweep):
    assert sweep("1000,3\n2000,2\n").degrees is None
    assert sweep("f (Hz);|H|;temperature\n1,5;1,0;20\n2,5;10,0;20\n").gain_db.tolist() == [0.0, 20.0]


def test_ohms_of_a_chain_with_a_current_source(sweep):
    assert sweep("Hz,V/A\n1,1000\n2,100\n").gain_db.tolist() == pytest.approx([60.0, 40.0])
    assert sweep("Hz,dBΩ\n1,60\n2,40\n").gain_db.tolist() == [60.0, 40.0]


@pytest.mark.parametrize(("text", "told"), [
    (SAME["bare"], "no header: the columns are taken as Hz, dB and degrees"),
    (SAME["MHz"], "read as frequency in MHz, dB, phase in degrees"),
    ("freq,dB,phase\n" + rows(), "read as frequency in Hz (the header gives no unit), dB, phase in degrees (the header "
                                 "gives no unit)"),
    (SAME["preamble"], "passed over ahead of the header: lines 1 to 2"),
    (SAME["other columns"], 'not used: "No" and "temperature"'),
    (SAME["no value"], "passed over: lines 2, 3, 4 and 3 more, without a value"),
    (SAME["at d.c."], "passed over: line 2, at 0 Hz"),
    (SAME["twice"], "1 frequency stands there more than once: the mean counts"),
    (SAME["falling"], "sorted by frequency"),
])
def test_what_is_taken_for_granted_or_passed_over_is_told(sweep, text, told):
    assert told in sweep(text).notes


def test_the_mean_of_what_stands_twice_is_of_the_phasors(sweep):
    found = sweep("Hz,dB,deg\n1,0,179\n1,0,-179\n2,1,0\n")
    assert found.hz.tolist() == [1.0, 2.0]
    assert abs(found.degrees[0]) == pytest.approx(180.0)
    assert found.gain_db[0] == pytest.approx(20 * math.log10(math.cos(math.radians(1.0))))
    assert sweep("1,0\n1,2\n2,1\n").gain_db.tolist() == [1.0, 1.0]


REFUSED = {  # text -> line, what, why
    "no unit of the gain": ("Hz,Gain\n" + "1,2\n2,3\n", 1, '"Gain" could be in dB or a ratio', "no unit"),
    "millihertz": ("mHz,dB\n1,2\n2,3\n", 1, '"mHz" is not clear', "MHz the megahertz"),
    "angular": ("omega (rad/s),dB\n1,2\n2,3\n", 1, "angular frequency", "Hz"),
    "level": ("Hz,dBm\n1,2\n2,3\n", 1, "is a level and not a gain", "output over input"),
    "volts": ("Hz,Vout (V)\n1,2\n2,3\n", 1, "is a level and not a gain", "output over input"),
    "S21 of a table": ("Hz,S21 (dB)\n1,2\n2,3\n", 1, "S21 and no gain", "resistance"),
    "two gains": ("Hz,Q1 (dB),Q2 (dB)\n1,2,3\n2,3,4\n", 1, '"Q1 (dB)" and "Q2 (dB)" are both dB', "meant"),
    "two frequencies": ("Hz,kHz,dB\n1,2,3\n2,3,4\n", 1, "are both frequency", "meant"),
    "half of a complex gain": ("Hz,Re\n1,2\n2,3\n", 1, "one of real and imaginary part is missing", "Re"),
    "unknown words": ("Messung,Pegel\n1,2\n2,3\n", 1, "no heading names the frequency", "Messung"),
    "noise density": ("f (Hz),e (dBc/Hz)\n1,2\n2,3\n", 1, "is a level", "output over input"),
    "four columns": ("1,2,3,4\n2,3,4,5\n", 1, "4 columns and no header", "Hz, dB and degrees"),
    "one column": ("1\n2\n", 1, "no line of the file holds a frequency and a gain", "one column"),
    "words": ("once upon a time\n", 1, "no line of the file holds", "first line"),
    "empty": ("", 0, "holds no numbers", "one line for each"),
    "comments alone": ("# a\n# b\n", 0, "holds no numbers", "one line for each"),
    "one point": ("Hz,dB\n1,2\n", 0, "one point", "two or more"),
    "nothing measured": ("Hz,dB\n1,nan\n2,nan\n", 0, "no points", "lines 2 and 3"),
    "negative frequency": ("Hz,dB\n1,2\n-2,3\n", 3, "the frequency is -2", "above zero"),
    "infinite frequency": ("Hz,dB\n1,2\ninf,3\n", 3, "no finite number", "at a frequency"),
    "no frequency": ("Hz,dB\n1,2\n,3\n2,3\n", 3, "no frequency", "at a frequency"),
    "frequency out of the world": ("GHz,dB\n1,2\n1e9,3\n", 3, "1e+18 Hz", "between"),
    "end word": ("Hz,dB\n1,2\n2,3\nEND\n", 4, '"END" is no number', "comment"),
    "value with a unit": ("Hz,dB\n1,2\n2,3dB\n", 3, '"3dB" is no number', "comment"),
    "cells too many": ("Hz,dB\n1,2\n2,3,4\n", 3, "3 cells", "2 columns"),
    "decimal comma between commas": ("Hz,dB\n1,2\n2,5,3,1\n", 3, "4 cells", "semicolons or tabs"),
    "decimal comma between blanks": ("1,5 2,5\n2,5 3,5\n", 1, "a comma could be", "semicolons or tabs"),
    "the same with a header": ("Hz dB\n1,5 2,5\n2,5 3,5\n", 2, "a comma could be", "semicolons or tabs"),
    "comma later": ("Hz dB\n1 2\n2 3,5\n", 3, '"3,5" is no number', "semicolons or tabs"),
    "point and comma": ("Hz;dB\n1,5;2\n2.5;3\n", 3, "decimal points and decimal commas", "thousands"),
    "both in one": ("Hz;dB\n1;2\n1.234,5;3\n", 3, "is no number", "comment"),
    "cell missing between blanks": ("Hz dB deg\n1 2 3\n2 3\n", 3, "2 cells", "3 columns"),
    "negative magnitude": ("Hz,mag\n1,2\n2,-3\n", 3, "the magnitude is -3", "below zero"),
    "no decibels": ("Hz,dB\n1,2\n2,1000\n", 3, "the gain is 1000 dB", "400 dB"),
    "NUL": ("Hz,dB\n1,2\n2,\0\n", 3, "NUL", "plain text"),
    "long line": ("Hz,dB\n1,2\n" + "#" * 2001 + "\n2,3\n", 3, "2001 characters", "at most"),
}


@pytest.mark.parametrize(("text", "line", "what", "why"), REFUSED.values(), ids=REFUSED)
def test_what_could_be_misread_is_refused_with_line_and_reason(sweep, text, line, what, why):
    with pytest.raises(ProblemsFound) as found:
        sweep(text)
    (problem,) = found.value.problems
    assert (problem.place.line, what in problem.what, why in problem.why) == (line, True, True), problem
    assert problem.fix


@pytest.mark.parametrize(("content", "line", "what"), [
    ("Hz,dB\n1,2\n# 20 °C\n2,3\n".encode("latin-1"), 3, "not UTF-8"),
    ("Hz,dB\n1,2\n".encode("utf-16"), 1, "not UTF-8"),
])
def test_other_encodings_are_refused(sweep, content, line, what):
    with pytest.raises(ProblemsFound, match=what) as found:
        sweep(content)
    assert found.value.problems[0].place.line == line


def test_the_limits_are_told(sweep, tmp_path, monkeypatch):
    monkeypatch.setattr(source, "LARGEST", 100)
    with pytest.raises(ProblemsFound, match="8 MiB"):
        sweep(rows() * 5)
    monkeypatch.undo()
    monkeypatch.setattr(gather, "MOST_POINTS", 20)
    with pytest.raises(ProblemsFound, match="more than 50000 points") as found:
        sweep("".join(f"{n},1\n" for n in range(1, 50)))
    assert found.value.problems[0].place.line == 21


@pytest.mark.parametrize(("name", "what"), [("no.csv", "no such file"), ("folder", "a sweep is asked for"),
                                            ("a.s3p", "3 ports"), ("a.S1P", "1 port"), ("a.ts", "version 2")])
def test_a_file_that_is_none(tmp_path, name, what):
    (tmp_path / "folder").mkdir()
    with pytest.raises(ProblemsFound, match=what):
        load(tmp_path / name)


def test_spoiled_files_are_read_or_refused():
    """Whatever is done to a file: a sweep of finite numbers, or a problem."""
    chance = random.Random(5)
    texts, read = list(SAME.values()), 0
    for _ in range(300):
        data = bytearray(chance.choice(texts).encode())
        for _ in range(chance.randint(1, 2)):
            at = chance.randrange(len(data))
            data[at:at + chance.randint(0, 3)] = bytes(chance.choices(_SPOILING, k=2))
        try:
            found = table.parse("a.csv", source.plain("a.csv", bytes(data)))
        except ProblemsFound:
            continue
        read += 1
        assert np.isfinite(found.gain_db).all() and (np.diff(found.hz) > 0).all() and found.hz[0] > 0
    assert 50 < read < 250
