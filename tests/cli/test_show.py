"""show: pages, one frequency, JSON, faults of a file."""

import math
import re

import pytest

from polebook.report.look import cells
from polebook.report.pages import LEDGER, PAGES
from tests.cli.helpers import ALL, LISTENER, PHOTODIODE, answering, telling

told = telling("show")
as_json = answering("show")


@pytest.mark.parametrize("file", ALL, ids=lambda file: file.stem)
@pytest.mark.parametrize("page", PAGES)
def test_every_page_of_every_demo_chain_fits(capsys, file, page):
    code, out, err = told(capsys, file, *(["--page", page] if page != LEDGER else []), "--at", "100k")
    assert (code, err) == (0, "")
    assert max(map(cells, out.splitlines()[2:])) <= 80
    assert "…" not in out


def test_the_ledger_names_the_part_that_owns_the_missed_edge(capsys):
    _, out, _ = told(capsys, LISTENER)
    verdict = " ".join(out.splitlines()[2:5])
    found = re.search(r"Q2\.c_comp owns (\d+) %\. Its 4\.7 pF looks like +(\d+) pF at n1", verdict)
    assert found
    assert int(found[1]) > 40
    assert int(found[2]) > 100
    assert re.search(r"^ upper .* missed$", out, re.MULTILINE)


def test_json_is_the_document_in_full(capsys):
    document = as_json(capsys, LISTENER)
    assert set(document) == {
        *("format", "tool", "chain", "overall", "lines", "nodes", "parts", "cards", "bias", "rails", "poles", "zeros"),
        *("account", "targets", "levels", "verdict", "cautions"),
    }
    assert [line["name"] for line in document["lines"]] == ["source", "Q1", "Q2", "Q3", "load"]
    assert math.prod(line["gain"] for line in document["lines"]) == pytest.approx(document["overall"]["gain"], rel=1e-9)
    assert len(document["chain"]["digest"]) == 64
    assert document["format"] == 1


@pytest.mark.parametrize("text", ["100k", "1e5", "0.1 MHz", "100000"])
def test_figures_at_one_frequency(capsys, text):
    document = as_json(capsys, LISTENER, "--at", text)
    assert document["at"]["hz"] == 1e5
    rows = document["at"]["lines"]
    assert [row["name"] for row in rows] == ["source", "Q1", "Q2", "Q3", "load"]
    _, out, _ = told(capsys, LISTENER, "--at", text)
    assert " at 100 kHz" in out


def test_what_is_lost_at_one_frequency_is_gain_at_midband_less_gain_there(capsys):
    document = as_json(capsys, PHOTODIODE, "--at", "200k")
    rows = document["at"]["lines"]
    lost = sum(row["lost_db"] for row in rows)
    there = sum(row["gain_db"] for row in rows)
    assert lost == pytest.approx(document["overall"]["gain_db"] - there, abs=1e-9)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("100 V", "not a frequency"),
        ("fast", "fast"),
        ("-5", "-5"),
        ("0", "above 0"),
        ("nan", "nan"),
        ("1e999", "1e999"),
        ("", '""'),
    ],
)
def test_a_frequency_that_is_none(capsys, text, says):
    code, out, err = told(capsys, LISTENER, f"--at={text}")
    assert (code, out) == (2, "")
    assert "--at" in err
    assert says in err
    assert "    fix  " in err


@pytest.mark.parametrize("option", [[], ["--json"], ["--page", "all"], ["--at", "1k"]])
def test_every_fault_of_a_file_is_told_at_once_and_nothing_else(capsys, tmp_path, option):
    faulty, text = tmp_path / "faulty.toml", LISTENER.read_text()
    faulty.write_text(text.replace('"33"', '"33 F"').replace('"47"', '"-47"', 1).replace("stray ", "strai "))
    code, out, err = told(capsys, faulty, *option)
    assert (code, out) == (2, "")
    assert err.count("    fix  ") == 4
    assert "\n4 faults\n" in err
    assert re.findall(r"faulty\.toml:(\d+):\d+: ", err) == sorted(re.findall(r"faulty\.toml:(\d+):\d+: ", err), key=int)
    assert "^^^" in err


def test_a_folder_and_a_pipe_are_no_chain_files(capsys, tmp_path):
    code, _, err = told(capsys, tmp_path)
    assert code == 2
    assert "is a folder" in err
    assert told(capsys, "/dev/zero")[0] == 2


def test_control_characters_of_a_file_reach_no_terminal(capsys, tmp_path):
    bad = "\\u001b[31m\\u0007\\u202e\\u009b"
    file = tmp_path / "bad.toml"
    file.write_text(LISTENER.read_text().replace('"Wire-break listener"', f'"{bad}"'))
    for options in ([], ["--json"], ["--page", "all"]):
        code, out, _ = told(capsys, file, *options)
        assert code == 0
        assert all(char.isprintable() or char == "\n" for char in out)
    file.write_text(LISTENER.read_text().replace('kind        = "emitter-follower"', f'kind = "{bad}"'))
    code, _, err = told(capsys, file)
    assert code == 2
    assert all(char.isprintable() or char == "\n" for char in err)
