"""Pages as CSV: every page, units in the heading, full precision, nothing that a spreadsheet would run."""

import csv
import io
import json

import pytest

from polebook.cli.main import main
from polebook.report.csvout import csv_text, titled
from polebook.report.pages import LEDGER, PAGES
from polebook.report.pages_csv import PAGES_CSV, page_csv
from tests.cli.helpers import ALL, LISTENER
from tests.report.sample import document
from tests.report.test_dynamics import full


def tables(text):
    return [list(csv.DictReader(io.StringIO(block))) for block in text.split("\n\n")]


@pytest.mark.parametrize("name", PAGES)
def test_every_page_is_there_and_square(name):
    assert set(PAGES) == set(PAGES_CSV)
    for doc in (document(), full()):
        for block in page_csv(doc, name).split("\n\n"):
            widths = {len(row) for row in csv.reader(io.StringIO(block))}
            assert len(widths) == 1


def test_nothing_is_rounded_and_what_is_not_there_is_empty():
    doc = full()
    doc["nodes"][0]["pole_hz"] = 0.1 + 0.2
    (nodes,) = tables(page_csv(doc, "nodes"))
    assert float(nodes[0]["pole [Hz]"]) == 0.1 + 0.2
    assert nodes[0]["interstage"] == "yes"
    doc["nodes"][1]["pole_hz"] = float("inf")
    (nodes,) = tables(page_csv(doc, "nodes"))
    assert nodes[1]["pole [Hz]"] == ""


def test_times_poles_and_leverage():
    (times,) = tables(page_csv(full(), "times"))
    assert [(row["edge"], row["part"]) for row in times] == [
        ("upper", "Q1.cmu"), ("upper", "Q2.cpi"), ("lower", "Q1.couple"), ("lower", "Q2.couple")]  # fmt: skip
    assert sum(float(row["share of the sum [1]"]) for row in times if row["edge"] == "upper") == pytest.approx(1.0)
    (roots,) = tables(page_csv(full(), "poles"))
    assert [row["what"] for row in roots] == ["pole"] * 5 + ["zero"] * 2
    assert [float(row["im [rad/s]"]) for row in roots[2:4]] == [-4e6, 4e6]
    (leverage,) = tables(page_csv(full(), "leverage"))
    assert float(leverage[-1]["upper edge [% per %]"]) == 0.33
    assert leverage[-1]["of"] == "device.A.beta"


def test_a_page_of_several_tables_sets_them_apart():
    targets, lines, nodes = tables(page_csv(document(), LEDGER))
    assert [row["target"] for row in targets] == ["gain", "upper", "noise"]
    assert [row["line"] for row in lines] == ["source", "Q1", "Q2", "load"]
    assert len(nodes) == 3
    assert page_csv(document(), "poles") == "what,frequency [Hz],Q,re [rad/s],im [rad/s],stage\n"


def test_one_frequency_comes_last():
    doc = document() | {"at": {"hz": 1e5, "lines": [{"name": "Q1", "gain_db": 1.0, "phase_deg": -3.0, "lost_db": 0.5}]}}
    assert page_csv(doc, "nodes").endswith("\n\nline,gain [dB],phase [°],lost [dB]\nQ1,1.0,-3.0,0.5\n")


def test_a_text_is_no_formula_and_no_control_character():
    text = csv_text(["a", titled("b", "V")], [["=1+1", "-x"], ["a,b", 'say "x"'], ["\x1b[31m", "@SUM"]])
    assert list(csv.reader(io.StringIO(text))) == [
        ["a", "b [V]"], ["'=1+1", "'-x"], ["a,b", 'say "x"'], ["\\x1b[31m", "'@SUM"]]  # fmt: skip


@pytest.mark.parametrize("file", ALL, ids=lambda file: file.stem)
def test_show_writes_every_page_as_csv(capsys, file):
    assert main(["show", str(file), "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert main(["show", str(file), "--page", "parts", "--csv"]) == 0
    (parts,) = tables(capsys.readouterr().out)
    assert [float(row["value"]) for row in parts] == [part["value"] for part in document["parts"]]
    for name in PAGES:
        page = [] if name == LEDGER else ["--page", name]
        assert main(["show", str(file), *page, "--csv"]) == 0
        assert capsys.readouterr().out.count("\n") > 2, name


def test_json_and_csv_are_one_or_the_other(capsys):
    assert main(["show", str(LISTENER), "--json", "--csv"]) == 2
    assert "not allowed with" in capsys.readouterr().err
