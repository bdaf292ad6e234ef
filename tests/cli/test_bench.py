"""bench and fit at the command line."""

import json
import shutil

import pytest

from polebook.cli.main import main
from polebook.report.look import cells
from tests.cli.helpers import CHAINS, LISTENER

SHELLAC = CHAINS / "shellac-desk.toml"


def told(capsys, *args):
    code = main([str(arg) for arg in args])
    out, err = capsys.readouterr()
    return code, out, err


@pytest.fixture
def desk(tmp_path):
    """The demo with a sweep, in a folder of its own."""
    shutil.copytree(CHAINS / "bench", tmp_path / "bench")
    return shutil.copy(SHELLAC, tmp_path / "desk.toml")


def line_of(out, name):
    return next(line.split() for line in out.splitlines() if line.split()[:1] == [name])


def test_the_bench_of_the_demo(capsys):
    code, out, err = told(capsys, "bench", SHELLAC, "--builds", "2000")
    assert (code, err) == (0, "")
    assert "bench 1 (first desk), at the load" in out
    assert line_of(out, "upper")[1:5] == ["131", "kHz", "112", "kHz"]
    assert "not explained" in next(line for line in out.splitlines() if line.startswith(" upper"))
    assert "sweep bench/shellac-desk.csv: 61 points from 5.00 Hz to 500 kHz" in out
    assert "gain off by 0.47 dB rms" in out
    assert "Of 2000 built chains, seed 1" in out
    assert max(map(cells, out.splitlines())) <= 80


def test_the_bench_as_json(capsys):
    code, out, _ = told(capsys, "bench", SHELLAC, "--json", "--builds", "500", "--seed", "3")
    answer = json.loads(out)
    assert (code, answer["format"], answer["command"]) == (0, 1, "bench")
    (one,) = answer["files"]
    assert (len(one["digest"]), one["builds"], one["seed"]) == (64, 500, 3)
    (bench,) = one["benches"]
    assert [row["name"] for row in bench["figures"]] == ["gain", "lower", "upper"]
    assert bench["figures"][2]["explained"] is False
    assert bench["sweep"]["gain"]["largest_hz"] == 500e3


def test_a_sweep_that_can_t_be_read_loses_nothing_else(capsys, desk):
    (desk.parent / "bench" / "shellac-desk.csv").write_text("Hz,dB\n1,2\n2,x\n")
    code, out, err = told(capsys, "bench", desk, "--builds", "300")
    assert code == 2
    assert "explained" in out and "sweep bench/shellac-desk.csv can't be read" in " ".join(out.split())
    assert 'shellac-desk.csv:3:3: "x" is no number' in err and "    fix  " in err


def test_text_of_the_file_is_shown_and_not_obeyed(capsys, desk):
    desk.write_text(desk.read_text().replace('"first desk"', '"\\u001b[2J desk"').replace(
        "bench/shellac-desk.csv", "bench/\\u001b[31m.csv"))
    _, out, err = told(capsys, "bench", desk, "--builds", "100")
    assert "\x1b" not in out + err and "\\x1b[2J desk" in out


@pytest.mark.parametrize(("args", "says"), [
    (("bench", LISTENER), "no [[bench]]"),
    (("bench", SHELLAC, "--builds", "x"), '"x" is no whole number'),
    (("bench", SHELLAC, "--builds", "0"), "0 builds can't be drawn"),
    (("fit", LISTENER), "no [[bench]]"),
    (("fit", SHELLAC, "--bench", "2"), "there is no bench 2"),
    (("fit", SHELLAC, "--bench", "one"), "is no whole number"),
    (("fit", SHELLAC, "--free", "V1.rx"), "rx"),
    (("fit", "no.toml"), "there is no such file"),
])
def test_refusals_have_a_remedy(capsys, args, says):
    code, out, err = told(capsys, *args)
    assert (code, out) == (2, "")
    assert says in err and "    fix  " in err


def test_a_fit_of_the_demo(capsys):
    code, out, err = told(capsys, "fit", SHELLAC)
    assert (code, err) == (0, "")
    assert "2 keys may change: the strays of all stages, for none were chosen" in " ".join(out.split())
    assert line_of(out, "V1.stray")[1:3] == ["6p", "22p1"]  # 22p is what the sweep was made with
    assert line_of(out, "V2.stray")[-4:] == ["not", "told", "from", "0"]
    assert "the file is as it was; --write puts 1 value into it" in out
    assert max(map(cells, out.splitlines())) <= 80


def test_a_fit_is_written(capsys, desk):
    before = desk.read_text(encoding="utf-8")
    code, out, _ = told(capsys, "fit", desk, "--bench", "1", "--free", "V1.stray", "--write")
    assert code == 0 and "1 value written into" in " ".join(out.split())
    changed = [(a, b) for a, b in zip(before.splitlines(), desk.read_text(encoding="utf-8").splitlines(), strict=True)
               if a != b]
    assert changed == [('stray       = "6p"          # the socket', 'stray       = "22p07"          # the socket')]
    code, out, _ = told(capsys, "fit", desk, "--free", "V1.stray")
    assert "nothing is to be put into the file" in out
    code, out, _ = told(capsys, "bench", desk, "--builds", "300")
    assert "gain off by 0.05 dB rms" in out


def test_a_fit_as_json(capsys):
    code, out, _ = told(capsys, "fit", SHELLAC, "--free", "V1.stray,V1.c_load,load.capacitance", "--offset", "--json")
    answer = json.loads(out)
    assert (code, answer["command"]) == (0, "fit")
    (one,) = answer["files"]
    states = {key["path"]: key["state"] for key in one["fitted"]}
    assert states["V1.stray"] == states["V1.c_load"] == "not told apart"
    assert one["together"][0]["keys"] == ["V1.stray", "V1.c_load"]
    assert one["after"]["gain"]["rms"] < one["before"]["gain"]["rms"]
    assert one["written"] is False and one["offset"]["error"] > 0
    assert [target["name"] for target in one["targets"]] == ["gain", "lower", "upper", "peaking"]


def test_what_can_t_be_told_is_told_in_words(capsys):
    _, out, _ = told(capsys, "fit", SHELLAC, "--free", "V1.stray,V1.c_load,source.smallest,device.HALF.gm,V1.ra")
    words = " ".join(out.split())
    assert "V1.stray and V1.c_load can't be told apart by this sweep" in words
    assert "source.smallest is not felt by this sweep" in words
    assert "V1.ra and device.HALF.gm go together (correlation -0.97" in words
    assert line_of(out, "V1.c_load")[1:3] == line_of(out, "source.smallest")[2:4] == ["–", "–"]
    assert line_of(out, "V1.stray")[1] == "6p"
    assert "as written" in out
