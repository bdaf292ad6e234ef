"""compensate: the ways side by side, the coil, what is written, and what is told where there is no way."""

import json
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from polebook.plan import compensate as plan
from polebook.report.look import cells
from tests.cli.helpers import LISTENER, PHOTODIODE, ROOT, program, telling

SOUNDER = ROOT / "chains" / "frost-line-sounder.toml"
EDGE = ("Q2", "--edge", "200k")
SMALL = """format = 1
[source]
kind = "voltage"
resistance = "100k"
[[stage]]
name = "M1"
kind = "common-source"
device = "N"
rd = "20k"
c_comp = "4p7"  # never looked at again
c_load = "1p"   # the next board
[device.N]
family = "mosfet"
gm = "2m"
cgs = "p5"
"""


told = telling("compensate")


def as_json(capsys, *args, code=0):
    got, out, err = told(capsys, *args, "--json")
    assert (got, err) == (code, "")
    answer = json.loads(out)
    assert (answer["format"], answer["command"]) == (1, "compensate")
    (one,) = answer["files"]
    return one


@pytest.fixture
def small(tmp_path):
    """One stage, so that a run takes little."""
    (tmp_path / "small.toml").write_text(SMALL, encoding="utf-8")
    return tmp_path / "small.toml"


@pytest.fixture
def chain(tmp_path):
    return Path(shutil.copy(LISTENER, tmp_path / "chain.toml"))


def line(out, start):
    return next(line for line in out.splitlines() if line.strip().startswith(start))


@pytest.fixture(scope="module")
def printed():
    """One run of each kind, as text."""
    runs = {"edge": (LISTENER, *EDGE, "--feedback", "0.01"), "coil": (SOUNDER, "Q1", "--coil")}
    return {name: program("compensate", *args).stdout.decode() for name, args in runs.items()}


def test_the_ways_stand_side_by_side(printed):
    out = printed["edge"]
    assert "Q2, a common-emitter: upper edge wanted at 200 kHz, today 400 kHz" in out
    assert line(out, "c_comp, F").split()[2:] == ["4.70p", "11.0p", "11.0p", "10.3p", "4.70p"]
    assert line(out, "r_comp, Ω").split()[2:] == ["–", "–", "61.2", "5.13k", "–"]
    assert line(out, "c_load, F").split()[-1] == "191p"
    assert line(out, "brings zero").split()[3:] == ["273M", "right", "156M", "right", "254M", "right", "3.05M", "left",
                                                    "none"]
    assert line(out, "upper edge").split()[3:] == ["400k", "200k", "200k", "200k", "200k"]
    assert line(out, "second pole").split()[3:] == ["3.21M", "3.12M", "3.12M", "3.05M", "2.46M"]
    assert line(out, "phase margin").split()[-5:] == ["52", "65", "66", "90", "57"]
    assert max(map(cells, out.splitlines())) <= 80


def test_the_workings_are_told_in_words(printed):
    out = " ".join(printed["edge"].split())
    assert "c_comp 11.0 pF sees 55.9 kΩ at midband (K -34.44): 615 ns" in out
    assert "c_load is 17.3 times c_comp" in out
    assert "a zero in the right half-plane at 156 MHz (without it 975 MHz)" in out
    assert "r_comp 61.2 Ω takes from the sum of 1/z what the capacitor adds (1/gm of the device alone is 13.8 Ω)" in out
    assert "5.13 kΩ puts it onto the second pole, 3.05 MHz (source)" in out
    assert "T = beta·H of the whole chain, beta 0.01, 9.73 (19.77 dB) at midband" in out
    assert "this loop oscillates there, whatever stands here" in out
    assert "c_comp, which the file has, stays where a way does not set it" in out


def test_the_coils_stand_beside_the_published_factors(printed):
    out = printed["coil"]
    assert line(out, "l_peak, H").split()[2:] == ["820n", "–", "744n", "537n", "1.35u"]
    assert line(out, "m = L/(R·τ)").split()[-5:] == ["0.493", "–", "0.447", "0.323", "0.814"]
    assert [text.split()[1:] for text in out.splitlines() if text.strip().startswith("published")] == [
        ["0.415", "0.323", "0.709"], ["1.720", "1.600", "1.850"]]
    assert line(out, "over none").split()[2:] == ["1.678", "1.000", "1.635", "1.456", "1.771"]
    assert "n1 has 69 % of the sum of all nodes' time constants" in out
    assert max(map(cells, out.splitlines())) <= 80


@pytest.mark.parametrize("args", [(LISTENER, "Q3", "--edge", "200k", "--feedback", "0.01"), (SOUNDER, "Q1", "--coil")])
def test_it_fits_a_terminal_without_utf_8(args):
    done = program("compensate", *args, PYTHONIOENCODING="ascii")
    assert (done.returncode, done.stderr) == (0, b"")
    assert max(map(cells, done.stdout.decode("ascii").splitlines())) <= 80
    assert b"\\u" not in done.stdout and b"\\x" not in done.stdout


def test_json_has_every_way_in_full(capsys, small):
    one = as_json(capsys, small, "M1", "--edge", "20k", "--feedback", "-20 dB")
    assert one["wanted"] == {"figure": "upper_edge_hz", "hz": 20e3}
    assert one["loop"]["beta"] == pytest.approx(0.1) and one["loop"]["gain"] == pytest.approx(4.0)
    assert [option["name"] for option in one["options"]] == ["across", "away", "left", "ground"]
    across, away, left, ground = one["options"]
    for option in (across, away, left):
        assert option["figures"]["upper_edge_hz"] == pytest.approx(20e3, rel=1e-9)
        assert set(option["fit"]["figures"]) == set(option["figures"])
    assert across["tau_s"] == pytest.approx(across["sees_ohm"] * across["solved"]["M1.c_comp"])
    assert across["values"] == {"M1.c_comp": across["solved"]["M1.c_comp"], "M1.c_load": 1e-12}
    assert [key["path"] for key in away["fit"]["keys"]] == ["M1.c_comp", "M1.r_comp"]
    assert left["zero_on"]["re"] == pytest.approx(left["zeros_brought"][0]["re"], rel=1e-5)
    assert ground["why"].startswith("without M1.c_load the upper edge lies at 8.")
    assert (ground["values"], ground["figures"], ground["fit"], one["ratio"]) == ({}, None, None, None)
    assert (one["written"], one["taken"], one["stopped"], one["total"]) == (False, None, False, 4)
    assert one["today"]["values"] == {"M1.c_comp": 4.7e-12, "M1.c_load": 1e-12}
    assert one["today"]["zeros_brought"][0]["re"] == pytest.approx(2e-3 / 4.7e-12)


def test_a_source_of_current_takes_siemens(capsys):
    one = as_json(capsys, PHOTODIODE, "U1", "--edge", "200k", "--feedback", "1uS")
    assert one["loop"]["unit"] == "S" and one["loop"]["gain"] == pytest.approx(10.0, rel=0.01)
    code, out, err = told(capsys, PHOTODIODE, "U1", "--edge", "200k", "--feedback", "-20 dB")
    assert (code, out) == (2, "") and "--feedback" in err


def test_write_puts_one_way_in_and_keeps_the_rest(capsys, small):
    code, out, err = told(capsys, small, "M1", "--edge", "20k", "--take", "away", "--write")
    assert (code, err) == (0, "")
    assert '- c_comp = "4p7"  # never' in out and '+ c_comp = "1p8"  # never' in out and '+ r_comp = "510R"' in out
    assert "away written into" in " ".join(out.split())
    after = SMALL.replace('"4p7"', '"1p8"').replace("the next board\n", 'the next board\nr_comp = "510R"\n')
    assert small.read_text(encoding="utf-8") == after


def test_without_write_the_change_is_only_shown(capsys, chain):
    args = (chain, "Q3", "--edge", "200k", "--take", "ground")
    code, out, _ = told(capsys, *args)
    assert code == 0
    assert "the file is as it was; --write puts ground into it" in " ".join(out.split())
    assert "+ c_load" in out
    assert chain.read_bytes() == LISTENER.read_bytes()
    one = as_json(capsys, *args, "--write")
    assert (one["same"], one["written"]) == (False, True)
    once = chain.read_bytes()
    assert once != LISTENER.read_bytes()
    code, out, _ = told(capsys, *args, "--write")
    assert code == 0 and "the file has these values already" in out
    assert chain.read_bytes() == once


def test_write_puts_a_coil_in(capsys, tmp_path):
    chain = Path(shutil.copy(SOUNDER, tmp_path / "chain.toml"))
    one = as_json(capsys, chain, "Q1", "--coil", "--take", "delay", "--write")
    assert one["written"] is True
    (key,) = one["options"][1]["fit"]["keys"]
    assert (key["path"], key["text"]) == ("Q1.l_peak", "560n")
    assert 'l_peak      = "560n"        # a little under half of R²C' in chain.read_text(encoding="utf-8")


def test_an_edge_that_cannot_be_had_is_exit_code_1(capsys, small):
    code, out, err = told(capsys, small, "M1", "--edge", "300M")
    assert (code, err) == (1, "")
    assert "without M1.c_comp the upper edge lies at" in " ".join(out.split())
    assert "below the wanted 300 MHz: a capacitor only lowers it" in " ".join(out.split())
    assert "to fit" not in out
    code, out, err = told(capsys, small, "M1", "--edge", "300M", "--take", "ground", "--write")
    assert (code, out) == (2, "")
    assert 'M1 has no way "ground"' in err and "below the wanted" in err
    assert small.read_text(encoding="utf-8") == SMALL


def test_a_way_that_the_kind_has_not(capsys):
    code, _, err = told(capsys, LISTENER, "Q3", "--edge", "100k", "--take", "left")
    assert code == 2
    assert "the stage's kind has none" in err


@pytest.mark.parametrize(
    ("args", "says"),
    [
        (("Q2",), "one of the arguments --edge --pole --coil is required"),
        (("Q2", "--edge", "10k", "--pole", "1k"), "not allowed with"),
        (("Q2", "--edge", "10 kV"), "--edge"),
        (("Q2", "--pole", "0"), "not above zero"),
        (("Q2", "--edge", "10k", "--feedback", "0"), "not above zero"),
        (("Q2", "--edge", "10k", "--feedback", "x"), "--feedback"),
        (("Q2", "--edge", "10k", "--write"), "which way?"),
        (("Q2", "--edge", "10k", "--take", "flat"), "flat is no capacitor"),
        (("Q2", "--coil", "--take", "ground"), "ground is no coil"),
        (("Q8", "--edge", "10k"), "there is no stage"),
        (("Q3", "--coil"), "takes no l_peak"),
    ],
)
def test_a_wrong_command_line_says_how_to_mend_it(capsys, args, says):
    code, out, err = told(capsys, LISTENER, *args)
    assert (code, out) == (2, "")
    assert says in err
    assert "    fix  " in err


def test_a_faulty_file_is_told_without_numpy(tmp_path):
    faulty = tmp_path / "faulty.toml"
    faulty.write_text("format = 2\n")
    script = ("import os, sys; sys.path.insert(0, sys.argv[2]); sys.stderr = open(os.devnull, 'w')\n"
              "from polebook.cli.main import main\n"
              "code = main(['compensate', sys.argv[1], 'Q1', '--edge', '1k'])\n"
              "sys.exit(code if 'numpy' not in sys.modules else 9)")
    done = subprocess.run([sys.executable, "-I", "-c", script, str(faulty), str(ROOT / "src")], timeout=60, check=False)
    assert done.returncode == 2


def test_ctrl_c_shows_what_is_done(capsys, monkeypatch):
    whole = plan.options

    def broken(of):
        for step in whole(of):
            if step[0] == 2:
                raise KeyboardInterrupt
            yield step

    monkeypatch.setattr(plan, "options", broken)
    code, out, _ = told(capsys, LISTENER, *EDGE)
    assert code == 130
    assert "stopped after 1 of 4 ways" in out
    assert "11.0p" in out


def test_ctrl_c_before_anything_is_done(capsys, monkeypatch):
    def broken(_):
        raise KeyboardInterrupt
        yield

    monkeypatch.setattr(plan, "options", broken)
    code, out, _ = told(capsys, LISTENER, *EDGE)
    assert code == 130
    assert "stopped after 0 of 4 ways" in out
    code, out, err = told(capsys, LISTENER, *EDGE, "--take", "ground", "--write")
    assert code == 2 and "stopped" in err


def test_an_unstable_chain_is_answered(capsys):
    chain = ROOT / "tests" / "independent" / "chains" / "oscillating.toml"
    name = next(line for line in chain.read_text(encoding="utf-8").splitlines() if line.startswith("name"))
    code, out, err = told(capsys, chain, name.split('"')[1], "--edge", "100k", "--feedback", "0.1")
    assert code in (0, 1)
    assert "today it has none" in out
    assert (err, "nan" in out) == ("", False)
