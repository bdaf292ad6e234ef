"""The command: text, JSON, the list of names, faults."""

import json
import re

import pytest

from polebook.cli.main import main
from tests.cli.helpers import LISTENER, SIX
from tests.working.chains import every


def told(capsys, *args):
    code = main(["working", *map(str, args)])
    out, err = capsys.readouterr()
    return code, out, err


def test_a_figure_on_one_page(capsys):
    code, out, err = told(capsys, LISTENER, "Q1.gm.value")
    assert (code, err) == (0, "")
    assert "   gm = ic/VT\n" in out
    assert re.search(r"^ ic +1\.90143 mA +quiescent current +bias\.Q1\.current_a$", out, re.MULTILINE)
    assert " source: hybrid-pi model" in out


def test_a_number_of_the_file_names_its_line(capsys):
    _, out, _ = told(capsys, LISTENER, "Q1.rc.value")
    (line,) = re.findall(r"line (\d+): Q1\.rc", out)
    assert LISTENER.read_text().split("\n")[int(line) - 1].startswith('rc          = "2k2"')


def test_json_has_everything_at_full_precision(capsys):
    code, out, err = told(capsys, LISTENER, "overall.upper", "--json")
    assert (code, err) == (0, "")
    answer = json.loads(out)
    assert (answer["format"], answer["command"]) == (1, "working")
    (entry,) = answer["files"]
    assert entry["file"] == str(LISTENER)
    assert len(entry["digest"]) == 64
    one = every("wire-break-listener")["overall.upper_edge_hz"]
    assert entry["working"]["value"] == one.value
    assert [number["value"] for number in entry["working"]["numbers"]] == [number.value for number in one.numbers]
    lost = sum(number["value"] for number in entry["working"]["numbers"])
    assert lost == pytest.approx(3.010299956639812, abs=1e-7)
    assert set(entry["working"]["numbers"][0]) == {"symbol", "value", "unit", "about", "from", "kind"}


def test_without_a_figure_it_lists_them_all(capsys):
    code, out, err = told(capsys, SIX)
    assert (code, err) == (0, "")
    assert max(map(len, out.splitlines())) <= 80
    assert re.search(r"^ Q4\.mid +ohm farad pole_hz", out, re.MULTILINE)
    code, out, _ = told(capsys, SIX, "--json")
    assert json.loads(out)["files"][0]["figures"] == list(every("six-stage"))


@pytest.mark.parametrize("name", ["Q1.gian", "Q1.cmu", "", "nothing", "\x1b[31m.\u202e"])
def test_a_wrong_name_is_a_fault_that_says_what_would_do(capsys, name):
    code, out, err = told(capsys, LISTENER, name)
    assert (code, out) == (2, "")
    assert "    why  " in err and "    fix  " in err
    assert "\x1b" not in err and "\u202e" not in err


def test_a_faulty_file_is_told_first(capsys, tmp_path):
    faulty = tmp_path / "faulty.toml"
    faulty.write_text(LISTENER.read_text().replace('"33"', '"33 F"'))
    code, out, err = told(capsys, faulty, "Q1.gain")
    assert (code, out) == (2, "")
    assert "33 F" in err


def test_control_characters_of_a_file_reach_no_terminal(capsys, tmp_path):
    bad = "\\u001b[31m\\u0007\\u202e"
    file = tmp_path / "bad.toml"
    file.write_text(LISTENER.read_text().replace('"Wire-break listener"', f'"{bad}"'))
    for figure in (["Q1.gm.value"], ["Q1.k", "--json"], []):
        code, out, _ = told(capsys, file, *figure)
        assert code == 0
        assert all(char.isprintable() or char == "\n" for char in out)
