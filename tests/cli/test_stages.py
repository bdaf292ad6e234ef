"""stages: tables and plots, JSON, CSV, what is told, and ctrl-c."""

import csv
import io
import json

import pytest

from polebook.plan import stages as planning
from polebook.report.look import cells
from tests.cli.helpers import CHAINS, LISTENER, PHOTODIODE, SIX, program, telling

told = telling("stages")


def as_json(capsys, *args):
    code, out, err = told(capsys, *args, "--json")
    assert (code, err) == (0, "")
    (one,) = json.loads(out)["files"]
    return one


def test_the_tables_and_the_plots(capsys):
    code, out, err = told(capsys, LISTENER, "--template", "Q1")
    assert (code, err) == (0, "")
    lines = out.splitlines()
    tables = [line.split() for line in lines if line[:4].strip().isdecimal() and "█" not in line and "2·ln" not in line]
    plots = [line for line in lines if "█" in line and line[:4].strip().isdecimal()]
    assert [row[0] for row in tables if row[-1] != "│"] == [*"12345678", *"12345678"]
    assert tables[0] == ["1", "18.94", "20.02", "1.20M", "1.20M", "7.70M", "8.93k", "8.93k", "10.6M"]
    assert tables[15][1:4] == ["118", "7.63", "2.54M"] and "most" in tables[15]
    assert len(plots) == 8 + 7
    assert plots[1].count("│") == 1 and plots[1].index("│") < plots[0].index("│")
    assert "* 1: with any rc it makes at most 21.0 dB" in out
    assert "* 2: each copy is saturated" in out
    assert "2·ln G = 14.1 stages of 4.34 dB" in " ".join(out.split())


@pytest.mark.parametrize("file", sorted(CHAINS.glob("*.toml")), ids=lambda file: file.stem)
def test_it_fits(file, capsys):
    name = {"photodiode-front": "U2", "leaf-probe": "J1", "rain-radar": "B3", "shellac-desk": "V2"}.get(file.stem, "Q2")
    code, out, _ = told(capsys, file, "--template", name, "--most", "4")
    assert code == 0
    assert max(map(cells, out.splitlines())) <= 80


def test_it_fits_an_ascii_terminal():
    done = program("stages", SIX, "--template", "Q5", "--most", "5", PYTHONIOENCODING="ascii")
    assert (done.returncode, done.stderr) == (0, b"")
    text = done.stdout.decode("ascii")
    assert max(map(len, text.splitlines())) <= 80
    assert "###|" in text


def test_what_was_done_to_the_template_is_told(capsys):
    _, out, _ = told(capsys, LISTENER, "--template", "Q3", "--most", "2")
    said = " ".join(out.split())
    assert "Q3 hangs on the stage before it for d.c.; its copies keep the 5.94 mA that it has in the file" in said
    assert "Q3.couple is put in with 22 nF" in said
    assert "no wanted gain is looked at: Q3 is a follower, and followers make no gain" in said


def test_json_has_everything_in_full(capsys):
    one = as_json(capsys, LISTENER, "--template", "Q1", "--gain", "40dB", "--most", "3", "--by", "re")
    assert len(one["digest"]) == 64
    assert (one["template"], one["by"], one["by_now"], one["by_unit"]) == ("Q1", "re", 33.0, "Ω")
    assert [row["count"] for row in one["rows"]] == [row["count"] for row in one["wanted"]["rows"]] == [1, 2, 3]
    assert one["wanted"]["gain"] == pytest.approx(100.0)
    assert one["wanted"]["best_by_law"] in (9, 10)  # 2·ln of what the stages make behind the source
    good = [row for row in one["wanted"]["rows"] if row["gain"] is not None]
    assert all(abs(row["gain"]) == pytest.approx(100.0, rel=1e-9) for row in good)
    assert one["wanted"]["best"] == max(good, key=lambda row: row["upper_hz"])["count"]
    assert one["stopped"] is False


def test_a_current_source_wants_a_gain_in_ohms(capsys):
    one = as_json(capsys, PHOTODIODE, "--template", "U2", "--gain", "2M", "--most", "2")
    assert one["gain_unit"] == "V/A"
    assert one["wanted"]["rows"][1]["gain"] == pytest.approx(2e6)


def test_csv_has_units_and_every_digit(capsys):
    one = as_json(capsys, LISTENER, "--template", "Q1", "--most", "3")
    _, out, _ = told(capsys, LISTENER, "--template", "Q1", "--most", "3", "--csv")
    heading, *rows = csv.reader(io.StringIO(out))
    assert heading[:7] == ["copies", "for the wanted gain", "rc [Ω]", "gain [V/V]", "gain [dB]", "gain a stage [V/V]",
                           "upper edge [Hz]"]  # fmt: skip
    assert [row[1] for row in rows] == ["no"] * 3 + ["yes"] * 3
    assert [float(row[6]) for row in rows[:3]] == [row["upper_hz"] for row in one["rows"]]


def test_without_a_wanted_gain_it_says_how_to_want_one(capsys, tmp_path):
    chain = tmp_path / "chain.toml"
    chain.write_text(LISTENER.read_text(encoding="utf-8").replace('gain    = "60 dB"\n', ""), encoding="utf-8")
    _, out, _ = told(capsys, chain, "--template", "Q1", "--most", "2")
    assert "no gain is wanted; --gain 60dB" in out


@pytest.mark.parametrize(
    ("args", "says"),
    [
        ((), "--template"),
        (("--template", "Q9"), "there is no stage"),
        (("--template", "Q1", "--most", "0"), "1 to 24"),
        (("--template", "Q1", "--most", "25"), "1 to 24"),
        (("--template", "Q1", "--gain", "-3"), "is not above zero"),
        (("--template", "Q1", "--gain", "x dB"), "--gain"),
        (("--template", "Q1", "--by", "beta"), "gives no number"),
        (("--template", "Q3", "--gain", "20dB"), "followers make no gain"),
    ],
)
def test_a_wrong_command_line_says_how_to_mend_it(capsys, args, says):
    code, out, err = told(capsys, LISTENER, *args)
    assert (code, out) == (2, "")
    assert says in err
    assert "    fix  " in err


def test_ctrl_c_shows_what_is_done(capsys, monkeypatch):
    whole = planning.steps

    def broken(of, *more):
        for step in whole(of, *more):
            if step[0] == 4:
                raise KeyboardInterrupt
            yield step

    monkeypatch.setattr(planning, "steps", broken)
    code, out, _ = told(capsys, LISTENER, "--template", "Q1")
    assert code == 130
    assert "stopped after 3 of 16 chains" in out
    assert " 3  78.69" in out
    assert "with every n" not in out
