"""The page of the noise on real chains, its CSV, and what an audit does not pay for."""

from __future__ import annotations

import csv
import io
import json
import re
from functools import cache

import pytest

from polebook.book import noise_rows
from polebook.book.build import document, ledger
from polebook.chain.read import load, parse
from polebook.cli.main import main
from polebook.report.look import Look, cells
from polebook.report.pages import page
from polebook.report.pages_csv import page_csv
from tests.cli.helpers import LISTENER, SIX
from tests.independent.noisy import noisy
from tests.laws.chains import BY_NAME
from tests.test_imports import modules_after


@cache
def full(name, text=""):
    of = ledger(parse(text, "c.toml") if text else load(str(BY_NAME[name])))
    return {**document(of), "noise": noise_rows.page(of)}


def shown(doc, **look):
    return page(doc, "noise", Look(**look), "chain.toml")


@pytest.mark.parametrize("encoding", ["utf-8", "ascii", "cp437"])
@pytest.mark.parametrize("name", BY_NAME)
def test_the_page_fits(name, encoding):
    text = shown(full(name, noisy(BY_NAME[name].read_text(encoding="utf-8"))), encoding=encoding)
    text.encode(encoding)
    assert max(map(cells, text.splitlines())) <= 80
    assert "nan" not in text and "None" not in text


def test_the_makers_stand_in_the_order_of_their_shares():
    doc = full("six-stage")
    text = shown(doc)
    rows = re.findall(r"^ ([\w.]+) +(.+?) +(\d[\d.]* [fpnu]V/√Hz) +(\d+\.\d) %", text, re.MULTILINE)
    assert [row[0] for row in rows[:4]] == ["source.resistance", "Q1.rx", "Q1.gm", "Q1.rc"]
    assert rows[2][1] == "collector current"
    shares = [float(row[3]) for row in rows if "." in row[0]]
    assert shares == sorted(shares, reverse=True) and len(shares) == 14
    assert "33 more make 0.1 %: --csv lists them all" in text
    lines = [row for row in rows if "." not in row[0]]
    assert sum(float(row[3]) for row in lines) == pytest.approx(100, abs=0.3)


def test_the_summary_says_who_makes_most_beside_the_source():
    text = shown(full("wire-break-listener"))
    assert "input noise 3.77 nV/√Hz at 90.2 kHz, noise figure 1.61 dB; Q1.ib makes 14 % of\n its power" in text
    assert "2.82 uV rms over all frequencies" in text
    assert "the smallest signal lies" in text


def test_the_density_is_told_decade_by_decade():
    doc = full("photodiode-front")
    rows = doc["noise"]["curve"]
    assert [row["hz"] for row in rows] == [10.0**k for k in range(len(rows))]
    of = ledger(load(str(BY_NAME["photodiode-front"])))
    for row in rows:
        spot = of.noise.spot(row["hz"])
        assert row["input"] == pytest.approx(spot.square**0.5, rel=1e-9)
        assert row["output"] == pytest.approx(spot.square**0.5 * abs(spot.gain), rel=1e-9)
    assert "A/√Hz" in shown(doc)


def test_density_at_frequencies_of_ones_own():
    of = ledger(load(str(SIX)))
    (row,) = noise_rows.density(of, [of.reference_hz])
    assert row["input"] == pytest.approx(of.noise.density, rel=1e-12)
    assert row["most"] == "Q1"
    assert row["share"] == pytest.approx(of.noise.by_line["Q1"], rel=1e-9)


def test_why_there_is_no_noise_is_told():
    text = LISTENER.read_text(encoding="utf-8").replace("[target]", "[target]\nnoise_from = 0")
    text = text.replace('couple      = "100n"\n', "")
    text = text.replace('family        = "bjt"', 'family = "bjt"\nflicker_corner = 9')
    told = shown(full("", text))
    assert "No total: the noise grows without bound towards 0 Hz: state a noise_from" in told
    assert "input noise" in told
    oscillating = shown(full("oscillating"))
    assert "input noise" not in oscillating and "noise at" not in oscillating


def test_the_csv_lists_them_all():
    doc = full("six-stage")
    tables = [list(csv.reader(io.StringIO(part))) for part in page_csv(doc, "noise").split("\n\n")]
    whole, sources, density = tables
    assert float(whole[1][0]) == doc["overall"]["noise_density"]
    assert len(sources) - 1 == sum(part["noise_share"] is not None and part["noise_share"] > 0 for part in doc["parts"])
    assert sum(float(row[2]) for row in sources[1:]) == pytest.approx(1, abs=1e-12)
    assert len(density) - 1 == len(doc["noise"]["curve"])


def test_the_command(capsys):
    assert main(["show", str(SIX), "--page", "noise"]) == 0
    out = capsys.readouterr().out
    assert "noise at 108 kHz" in out and "at the output" in out
    assert main(["show", str(SIX), "--json"]) == 0
    doc = json.loads(capsys.readouterr().out)
    assert "noise" not in doc
    assert doc["overall"]["noise_to_hz"] is None and doc["overall"]["noise_from_hz"] == 0.0


def test_an_audit_without_a_target_for_it_computes_no_noise(tmp_path):
    script = ("import os, sys; sys.stdout = open(os.devnull, 'w')\n"
              "from polebook.cli.main import main; result = main({!r})")
    names, code = modules_after(script.format(["audit", str(SIX)]))
    assert code == 0
    assert not names & {"polebook.book.noise", "polebook.solve.noise", "polebook.circuit.noise"}
    wanted = tmp_path / "wanted.toml"
    wanted.write_text(SIX.read_text(encoding="utf-8").replace("[target]", '[target]\nnoise = "2n"'), encoding="utf-8")
    names, code = modules_after(script.format(["audit", str(wanted)]))
    assert code == 0
    assert "polebook.book.noise" in names
    assert not names & {"scipy", "polebook.book.noise_slopes", "polebook.book.leverage"}
