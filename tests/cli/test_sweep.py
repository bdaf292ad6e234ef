"""sweep: table, CSV, JSON, what is told, and ctrl-c."""

import csv
import io
import os
import pty
import signal
import subprocess
import time

import pytest

from polebook.cli import sweep as command
from polebook.report.look import cells
from tests.cli.helpers import ALL, LISTENER, PHOTODIODE, SIX, answering, environment, program, telling
from tests.cli.helpers import command as words

told = telling("sweep")
as_json = answering("sweep")


def test_the_table_has_a_line_a_point_and_marks_today(capsys):
    code, out, err = told(capsys, LISTENER, "Q1.rc", "1k:10k", "--series", "E12")
    assert (code, err) == (0, "")
    assert "Q1.rc from 1.000 kΩ to 10.00 kΩ: 13 values, E12; now 2.200 kΩ" in " ".join(out.split())
    assert len([line for line in out.splitlines() if line.lstrip()[:1].isdigit()]) == 13
    (now,) = [line for line in out.splitlines() if "◂ now" in line]
    assert now.split()[:4] == ["2.200k", "59.77", "14.1k", "400k"]
    assert "* from 5.600 kΩ to 10.00 kΩ: Q1 is saturated" in out


def test_today_stands_at_its_place_where_no_point_is_it(capsys):
    _, out, _ = told(capsys, LISTENER, "Q1.rc", "1k:4k", "--points", "3")
    values = [line.split()[0] for line in out.splitlines() if line.lstrip()[:1].isdigit()]
    assert values == ["1.000k", "2.000k", "2.200k", "4.000k"]
    _, out, _ = told(capsys, LISTENER, "Q1.rc", "4k:1k", "--points", "3")
    values = [line.split()[0] for line in out.splitlines() if line.lstrip()[:1].isdigit()]
    assert values == ["4.000k", "2.200k", "2.000k", "1.000k"]
    _, out, _ = told(capsys, LISTENER, "Q1.rc", "3k:4k", "--points", "2")
    assert next(line for line in out.splitlines() if line.lstrip()[:1].isdigit()).endswith("◂ now")


def test_many_figures_go_into_tables_that_fit(capsys):
    names = ["n1.pole_hz", "overall.gain_at_reference", "Q1.input_ohm", "Q2.cmu.k", "Q2.couple.owns_lower", "n0.room"]
    asked = [word for name in names for word in ("--figure", name)]
    _, out, _ = told(capsys, LISTENER, "Q2.c_comp", "0:10p", "--points", "3", *asked)
    assert max(map(cells, out.splitlines())) <= 80
    assert out.count("◂ now") == 2
    assert "…" not in out
    for name in names:
        assert name.rpartition(".")[2] in out


@pytest.mark.parametrize("file", ALL, ids=lambda file: file.stem)
def test_it_fits_every_encoding(file):
    for encoding in ("utf-8", "ascii"):
        done = program("sweep", file, "source.capacitance", "0:100p", "--points", "4", PYTHONIOENCODING=encoding)
        assert done.returncode == 0
        assert max(map(cells, done.stdout.decode(encoding).splitlines())) <= 80


def test_json_has_the_points_in_full(capsys):
    answer = as_json(capsys, LISTENER, "Q1.rc", "1k:4k", "--points", "3", "--figure", "n1.pole")
    assert (answer["format"], answer["command"]) == (1, "sweep")
    (file,) = answer["files"]
    assert file["file"] == str(LISTENER)
    assert len(file["digest"]) == 64
    assert [point["value"] for point in answer["points"]] == pytest.approx([1e3, 2e3, 4e3])
    assert set(answer["points"][0]) == {
        "value", "gain", "gain_db", "lower_edge_hz", "upper_edge_hz", "n1.pole_hz", "why"}  # fmt: skip
    assert answer["now"]["value"] == 2200.0
    assert answer["figures"] == [{"name": "n1.pole_hz", "unit": "Hz"}]
    assert answer["stopped"] is False
    assert as_json(capsys, LISTENER, "Q1.c_comp", "1p:4p", "--points", "2")["now"] is None


def test_csv_has_units_and_every_digit(capsys):
    answer = as_json(capsys, LISTENER, "Q1.rc", "1k:4k", "--points", "3", "--figure", "Q2.c_comp.owns_upper")
    _, out, _ = told(capsys, LISTENER, "Q1.rc", "1k:4k", "--points", "3", "--figure", "Q2.c_comp.owns_upper", "--csv")
    heading, *rows = csv.reader(io.StringIO(out))
    assert heading == ["Q1.rc [Ω]", "gain [V/V]", "gain [dB]", "lower edge [Hz]", "upper edge [Hz]",
                       "Q2.c_comp.owns_upper [1]", "now", "why"]  # fmt: skip
    assert [row[6] for row in rows] == ["no", "no", "yes", "no"]
    exact = [float(row[4]) for row in rows if row[6] == "no"]
    assert exact == [point["upper_edge_hz"] for point in answer["points"]]


def test_csv_goes_into_a_file_that_is_named_for_it(capsys, tmp_path):
    target = tmp_path / "sweep.csv"
    code, out, _ = told(capsys, LISTENER, "Q1.rc", "1k:4k", "--csv", target)
    assert code == 0
    assert "the same as CSV" in out
    assert target.read_text(encoding="utf-8").startswith("Q1.rc [Ω],gain")
    assert told(capsys, LISTENER, "Q1.rc", "1k:2k", "--csv", target)[0] == 0  # a table may be made anew


def test_csv_is_never_written_over_a_chain(capsys, tmp_path):
    chain = tmp_path / "chain.toml"
    chain.write_bytes(LISTENER.read_bytes())
    code, out, err = told(capsys, chain, "Q1.rc", "1k:4k", "--csv", chain)
    assert (code, out) == (2, "")
    assert "does not end in .csv" in err
    odd = tmp_path / "chain.csv"
    odd.write_bytes(LISTENER.read_bytes())
    code, _, err = told(capsys, odd, "Q1.rc", "1k:4k", "--csv", odd)
    assert code == 2
    assert "the chain itself" in err
    assert odd.read_bytes() == chain.read_bytes() == LISTENER.read_bytes()


def test_a_range_below_zero_is_no_option(capsys):
    answer = as_json(capsys, PHOTODIODE, "supply.negative", "-6:-4", "--points", "3")
    assert [point["value"] for point in answer["points"]] == [-6.0, -5.0, -4.0]


def test_what_moves_nothing_is_said(capsys):
    _, out, _ = told(capsys, LISTENER, "Q1.tolerance.rc", "1%:5%", "--points", "3")
    assert "nothing here moves with Q1.tolerance.rc" in out


@pytest.mark.parametrize(
    ("args", "says"),
    [
        (("Q1.rc", "1k:2k", "--points", "0"), "--points"),
        (("Q1.rc", "1k:2k", "--points", "1e3"), "--points"),
        (("Q1.rc", "1k:2k", "--points", "-3"), "--points"),
        (("Q1.rc", "1k:2k", "--points", "99999"), "10000"),
        (("Q1.rc", "1k:2k", "--points", "5", "--series", "E12"), "not allowed with"),
        (("Q1.rc", "1k:2k", "--series", "E13"), "E13"),
        (("Q1.rc", "1k"), "is not a range"),
        (("Q1.rcc", "1k:2k"), "did you mean rc?"),
        (("Q1.rc", "1k:2k", "--figure", "Q1.inputt_ohm"), "did you mean Q1.input_ohm"),
    ],
)
def test_a_wrong_command_line_says_how_to_mend_it(capsys, args, says):
    code, out, err = told(capsys, LISTENER, *args)
    assert (code, out) == (2, "")
    assert says in err
    assert "    fix  " in err


def test_the_file_is_not_touched(tmp_path, capsys):
    chain = tmp_path / "chain.toml"
    chain.write_bytes(SIX.read_bytes())
    os.utime(chain, (1, 1))
    assert told(capsys, chain, "Q3.re", "100:1k")[0] == 0
    assert chain.stat().st_mtime == 1
    assert chain.read_bytes() == SIX.read_bytes()


def test_ctrl_c_shows_what_is_done(capsys, monkeypatch):
    from polebook.plan import sweep as sweeping

    whole = sweeping.sweep

    def broken(chain, path, values, *more):
        for step in whole(chain, path, values, *more):
            if len(values) > 1 and step[0] == 3:
                raise KeyboardInterrupt
            yield step

    monkeypatch.setattr(sweeping, "sweep", broken)
    code, out, _ = told(capsys, LISTENER, "Q1.rc", "1k:10k", "--points", "9")
    assert code == 130
    assert "stopped after 2 of 9 values" in out
    assert "1.334k" in out


def test_a_real_ctrl_c_on_a_terminal_stops_cleanly():
    master, slave = pty.openpty()
    words_ = words("sweep", SIX, "Q1.rc", "1k:10k", "--points", "10000")
    process = subprocess.Popen(words_, stdout=subprocess.PIPE, stderr=slave, stdin=slave, env=environment(TERM="xterm"))
    os.close(slave)
    seen = b""
    until = time.monotonic() + 30
    while b"of 10000" not in seen and time.monotonic() < until:
        seen += os.read(master, 4096)
    process.send_signal(signal.SIGINT)
    out = process.communicate(timeout=30)[0].decode("utf-8")
    assert process.returncode == 130
    os.close(master)
    assert "of 10000 values" in out
    assert "Traceback" not in out
    assert b"Traceback" not in seen


def test_no_progress_is_written_where_nobody_watches():
    done = program("sweep", SIX, "Q1.rc", "1k:10k", "--points", "200")
    assert done.returncode == 0
    assert done.stderr == b""


def test_the_default_number_of_points(capsys):
    assert len(as_json(capsys, LISTENER, "Q1.rc", "1k:10k")["points"]) == command.POINTS == 25
