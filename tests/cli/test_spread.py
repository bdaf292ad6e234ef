"""spread: what is told of many built chains, as text, JSON and CSV; the same seed again; ctrl-c."""

import csv
import io
import json
import math
import os
import pty
import re
import signal
import subprocess
import time

import numpy as np
import pytest

from polebook.cli.main import main
from polebook.plan.spread import run
from polebook.report.look import cells
from tests.cli.helpers import CHAINS, LISTENER, PHOTODIODE, SIX, answering, environment, program, telling
from tests.cli.helpers import command as words

PROBE = CHAINS / "leaf-probe.toml"
SOUNDER = CHAINS / "frost-line-sounder.toml"
BUILDS = 400
# a diode's amplifier at the edge of oscillation: some builds are over it
EDGE = (
    'format = 1\n[supply]\npositive = 5\nnegative = -5\n[source]\nkind = "current"\ncapacitance = "100p"\n'
    '[[stage]]\nname = "U1"\nkind = "transimpedance"\ndevice = "A"\nrf = "100k"\ncf = "0p38"\n'
    '[load]\nresistance = "10k"\n{target}[device.A]\nfamily = "opamp"\ngbw = "10M"\nf2 = "3M"\n'
)


told = telling("spread")
as_json = answering("spread")


def as_rows(capsys, *args):
    code, out, err = told(capsys, *args, "--csv")
    assert (code, err) == (0, "")
    return list(csv.DictReader(io.StringIO(out)))


@pytest.fixture
def edge(tmp_path):
    file = tmp_path / "edge.toml"
    file.write_text(EDGE.format(target=""))
    return file


def test_json_has_what_the_builds_come_to(capsys):
    """Every figure once more from the builds themselves, which the CSV has."""
    answer = as_json(capsys, PROBE, "--builds", BUILDS, "--seed", 5)
    rows = as_rows(capsys, PROBE, "--builds", BUILDS, "--seed", 5)
    assert (answer["format"], answer["command"], answer["builds"], answer["seed"]) == (1, "spread", BUILDS, 5)
    assert answer["files"][0]["file"] == str(PROBE) and len(answer["files"][0]["digest"]) == 64
    assert [row["build"] for row in rows] == [str(build + 1) for build in range(BUILDS)]
    assert {row["state"] for row in rows} == {"good"}
    heads = {"gain_db": "gain [dB]", "lower_edge_hz": "lower edge [Hz]", "upper_edge_hz": "upper edge [Hz]",
             "peaking_db": "peaking [dB]"}
    columns = {key: np.array([float(row[head]) for row in rows]) for key, head in heads.items()}
    assert set(answer["figures"]) == set(columns)
    for name, column in columns.items():
        figure = answer["figures"][name]
        assert figure["mean"] == pytest.approx(column.mean(), rel=1e-12)
        assert figure["deviation"] == pytest.approx(column.std(ddof=1), rel=1e-9)
        assert list(figure["percentiles"]) == ["0.1", "1", "50", "99", "99.9"]
        for percent, value in figure["percentiles"].items():
            assert value == pytest.approx(np.percentile(column, float(percent)), rel=1e-12)
        chart = figure["histogram"]
        if chart and figure["deviation"]:
            assert sum(chart["counts"]) + chart["below"] + chart["above"] == BUILDS
    met = {"gain": abs(columns["gain_db"] - 26) <= 1, "lower": columns["lower_edge_hz"] <= 5,
           "upper": columns["upper_edge_hz"] >= 25e3, "peaking": columns["peaking_db"] <= 0.5}
    met["all"] = np.logical_and.reduce(list(met.values()))
    assert set(answer["yield"]) == set(met)
    for name, each in met.items():
        share, z2 = each.mean(), 1.959964**2 / BUILDS
        half = 1.959964 * math.sqrt((share * (1 - share) + z2 / 4) / BUILDS) / (1 + z2)
        middle = (share + z2 / 2) / (1 + z2)
        assert answer["yield"][name]["share"] == pytest.approx(share, abs=1e-12)
        assert answer["yield"][name]["low"] == pytest.approx(middle - half, abs=1e-12)
        assert answer["yield"][name]["high"] == pytest.approx(middle + half, abs=1e-12)
    assert 0.5 < answer["yield"]["all"]["share"] < 1.0


def test_json_has_corners_and_costs(capsys):
    answer = as_json(capsys, PROBE, "--builds", BUILDS)
    assert {name: set(sides) for name, sides in answer["corner"].items()} == {
        "gain_db": {"low", "high"}, "lower_edge_hz": {"high"}, "upper_edge_hz": {"low"}}
    for name, sides in answer["corner"].items():
        for side, corner in sides.items():
            ends = answer["figures"][name]["percentiles"]
            assert corner["value"] < ends["0.1"] if side == "low" else corner["value"] > ends["99.9"]
            assert set(corner["signs"]) == {draw["part"] for draw in answer["draws"]}
    costs = answer["costs"]
    assert costs[0]["part"] == "Q1.ce" and costs[0]["solved"] and costs[0]["yield_gain"] > 0.05
    assert costs[0]["tolerance"] == 0.2
    assert [cost["yield_gain"] for cost in costs] == sorted((cost["yield_gain"] for cost in costs), reverse=True)
    for name in ("gain_db", "lower_edge_hz", "upper_edge_hz"):
        assert sum(draw["variance"][name] for draw in answer["draws"]) == pytest.approx(1.0)


def test_the_gain_of_a_dear_part_is_what_the_file_with_half_of_it_has(capsys, tmp_path):
    before = as_json(capsys, PROBE, "--builds", BUILDS)
    file = tmp_path / "half.toml"
    file.write_text(PROBE.read_text(encoding="utf-8").replace('ce = "20 %"', 'ce = "10 %"'), encoding="utf-8")
    after = as_json(capsys, file, "--builds", BUILDS)
    gained = after["yield"]["all"]["share"] - before["yield"]["all"]["share"]
    assert before["costs"][0]["yield_gain"] == pytest.approx(gained, abs=1e-12)


def test_a_seed_gives_its_builds_again_and_another_gives_others(capsys):
    first = as_rows(capsys, SIX, "--builds", 60, "--seed", 9)
    assert as_rows(capsys, SIX, "--builds", 60, "--seed", 9) == first
    assert as_rows(capsys, SIX, "--builds", 20, "--seed", 9) == first[:20]
    other = as_rows(capsys, SIX, "--builds", 60, "--seed", 10)
    assert not {row["gain [dB]"] for row in first} & {row["gain [dB]"] for row in other}


def test_the_text_says_it_all_and_how_to_have_it_again(capsys):
    code, out, err = told(capsys, PROBE, "--builds", BUILDS, "--seed", 3)
    assert (code, err) == (0, "")
    text = " ".join(out.split())
    assert f"{BUILDS} built chains, seed 3: 26 tolerances drawn" in text
    assert text.endswith(f"to the digit again: polebook spread {PROBE} --builds {BUILDS} --seed 3")
    answer = as_json(capsys, PROBE, "--builds", BUILDS, "--seed", 3)
    whole, lower = answer["yield"]["all"], answer["figures"]["lower_edge_hz"]
    (row,) = [line for line in out.splitlines() if line.startswith(" all ")]
    assert row.split() == ["all", "80.0", "%", str(round(BUILDS * (1 - whole["share"]))),
                           f"{100 * whole['share']:.2f}", "%", f"{100 * whole['low']:.2f}", "%",
                           f"{100 * whole['high']:.2f}", "%", "met"]  # fmt: skip
    (row,) = [line for line in out.splitlines() if line.startswith(" lower Hz")]
    assert row.split()[2:4] == ["4.727", f"{lower['mean']:.3f}"]
    assert row.split()[-1] == f"{lower['percentiles']['99.9']:.3f}"
    assert "lower edge greatest" in out and "costs most yield" in out and "▲" in out
    assert next(line for line in out.splitlines() if line.startswith(" Q1.ce")).split()[1] == "capacitor"


@pytest.mark.parametrize("encoding", ["utf-8", "ascii"])
def test_it_fits_every_encoding(encoding):
    done = program("spread", PHOTODIODE, "--builds", 100, PYTHONIOENCODING=encoding)
    assert (done.returncode, done.stderr) == (0, b"")
    assert max(map(cells, done.stdout.decode(encoding).splitlines())) <= 80


def test_targets_that_builds_are_not_judged_by_are_named(capsys):
    answer = as_json(capsys, SOUNDER, "--builds", 50)
    assert answer["unjudged"] == ["overshoot", "rise", "sag"]
    assert "without overshoot, rise and sag, which builds are not judged by" in told(capsys, SOUNDER, "--builds", 50)[1]


def test_the_temperature_spreads_or_stands(capsys, tmp_path):
    plain = as_json(capsys, LISTENER, "--builds", 100)
    wide = as_json(capsys, LISTENER, "--builds", 100, "--temperature", "-20:60")
    assert wide["temperature"] == [-20.0, 60.0]
    assert [draw["part"] for draw in wide["draws"]][-1] == "supply.temperature"
    assert wide["figures"]["gain_db"]["nominal"] == plain["figures"]["gain_db"]["nominal"]
    assert wide["figures"]["gain_db"]["mean"] != plain["figures"]["gain_db"]["mean"]
    hot = tmp_path / "hot.toml"
    text = LISTENER.read_text(encoding="utf-8").replace("[supply]\n", "[supply]\ntemperature = 60\n")
    hot.write_text(text, encoding="utf-8")
    one = as_json(capsys, LISTENER, "--builds", 100, "--temperature", "60")
    same = as_json(capsys, hot, "--builds", 100)
    assert one["figures"] == same["figures"] != plain["figures"]
    assert "; all at 60 °C" in " ".join(told(capsys, LISTENER, "--builds", 9, "--temperature", "60")[1].split())


def test_builds_that_oscillate_are_counted_and_have_no_figures(capsys, edge):
    answer = as_json(capsys, edge, "--builds", 300)
    bad = answer["states"]["unstable"]
    assert 0 < bad < 300 == bad + answer["states"]["good"]
    assert answer["figures"]["upper_edge_hz"]["builds"] == 300 - bad
    assert (answer["yield"], answer["costs"]) == ({}, None)
    rows = as_rows(capsys, edge, "--builds", 300)
    assert sum(row["state"] == "unstable" for row in rows) == bad
    assert all((row["gain [dBΩ]"] == "") == (row["state"] == "unstable") for row in rows)
    text = " ".join(told(capsys, edge, "--builds", 300)[1].split())
    assert f"{bad} builds unstable" in text
    assert "no target that builds are judged by is set" in text


def test_a_stated_current_is_a_caution(capsys, tmp_path):
    file = tmp_path / "stated.toml"
    file.write_bytes(LISTENER.read_bytes())
    assert main(["set", str(file), "Q1.ic", "1.9m"]) == 0
    capsys.readouterr()
    answer = as_json(capsys, file, "--builds", 20)
    assert any(caution.startswith("the quiescent current of Q1 is stated") for caution in answer["cautions"])
    assert "the quiescent current of Q1 is stated" in " ".join(told(capsys, file, "--builds", 20)[1].split())
    assert as_json(capsys, LISTENER, "--builds", 20)["cautions"] == []


def test_csv_goes_into_a_file_beside_text_or_json(capsys, tmp_path):
    target = tmp_path / "builds.csv"
    code, out, _ = told(capsys, LISTENER, "--builds", 30, "--csv", target)
    assert code == 0
    assert out.endswith(f" {target}: every build as CSV\n") and "to the digit again" in out
    rows = list(csv.DictReader(io.StringIO(target.read_text(encoding="utf-8"))))
    assert rows == as_rows(capsys, LISTENER, "--builds", 30)
    code, out, _ = told(capsys, LISTENER, "--builds", 40, "--json", "--csv", target)  # a table may be made anew
    assert code == 0 and json.loads(out)["builds"] == 40
    assert len(target.read_text(encoding="utf-8").splitlines()) == 41


def test_a_csv_that_cannot_be_written_costs_no_report(capsys, tmp_path):
    code, out, err = told(capsys, LISTENER, "--builds", 30, "--csv", tmp_path / "none" / "builds.csv")
    assert code == 2
    assert "to the digit again" in out
    assert "can't be saved" in err
    assert list(tmp_path.iterdir()) == []


def test_csv_is_never_written_over_a_chain(capsys, tmp_path):
    chain = tmp_path / "chain.csv"
    chain.write_bytes(LISTENER.read_bytes())
    code, out, err = told(capsys, chain, "--csv", chain)
    assert (code, out) == (2, "")
    assert "the chain itself" in err
    assert chain.read_bytes() == LISTENER.read_bytes()


@pytest.mark.parametrize(
    ("args", "says"),
    [
        (("--builds", "0"), "1 to 10000000"),
        (("--builds", "10000001"), "1 to 10000000"),
        (("--builds", "1e4"), "--builds"),
        (("--builds", "-3"), "--builds"),
        (("--builds", "²"), "--builds"),
        (("--seed", "x"), "--seed"),
        (("--seed", "18446744073709551616"), "2^64"),
        (("--temperature", "60:20"), "no range of temperatures"),
        (("--temperature", "-300:20"), "absolute zero"),
        (("--temperature", "1:2:3"), "two ends"),
        (("--temperature", "warm:20"), "is not a temperature"),
        (("--temperature", ":20"), "--temperature"),
        (("--json", "--csv"), "both go to the standard output"),
        (("--csv", "builds.txt"), "does not end in .csv"),
    ],
)
def test_a_wrong_command_line_says_how_to_mend_it(capsys, args, says):
    code, out, err = told(capsys, LISTENER, *args)
    assert (code, out) == (2, "")
    assert says in err
    assert "    fix  " in err


def test_a_faulty_file_is_told_as_ever(capsys, tmp_path):
    file = tmp_path / "faulty.toml"
    file.write_text(LISTENER.read_text(encoding="utf-8").replace('"33"', '"33 F"'), encoding="utf-8")
    code, out, err = told(capsys, file)
    assert (code, out) == (2, "")
    assert "is not a resistance" in err


def broken(after):
    """A spread that ctrl-c meets behind its `after`-th step."""
    whole = run.spread

    def spread(request, *more):
        for at, step in enumerate(whole(request, *more)):
            if at == after:
                raise KeyboardInterrupt
            yield step

    return spread


def test_ctrl_c_shows_what_is_done(capsys, monkeypatch, tmp_path):
    whole = as_rows(capsys, LISTENER, "--builds", 9000)
    monkeypatch.setattr(run, "spread", broken(1))
    target = tmp_path / "builds.csv"
    code, out, _ = told(capsys, LISTENER, "--builds", 9000, "--csv", target)
    assert code == 130
    rows = list(csv.DictReader(io.StringIO(target.read_text(encoding="utf-8"))))
    assert 0 < len(rows) < 9000
    assert rows == whole[: len(rows)]
    assert f"stopped after {len(rows)} of 9000 builds" in out
    assert f"--builds {len(rows)} --seed 1" in " ".join(out.split())
    code, out, _ = told(capsys, LISTENER, "--builds", 9000, "--json")
    answer = json.loads(out)
    assert (code, answer["stopped"], answer["builds"], answer["asked"]) == (130, True, len(rows), 9000)
    assert answer["corner"] == {} and answer["costs"] is None


def test_ctrl_c_before_anything_is_done_says_nothing(capsys, monkeypatch):
    monkeypatch.setattr(run, "spread", broken(0))
    assert told(capsys, LISTENER) == (130, "", "")


def test_ctrl_c_once_all_are_built_says_what_is_not_there(capsys, monkeypatch):
    monkeypatch.setattr(run, "spread", broken(2))
    code, out, _ = told(capsys, LISTENER, "--builds", 50)
    assert code == 130
    assert "stopped when all were built, before all else was computed" in out


def test_a_real_ctrl_c_on_a_terminal_stops_cleanly():
    master, slave = pty.openpty()
    process = subprocess.Popen(words("spread", LISTENER, "--builds", 1000000), stdout=subprocess.PIPE, stderr=slave,
                               stdin=slave, env=environment(TERM="xterm"))
    os.close(slave)
    seen = b""
    until = time.monotonic() + 30
    while b"of 1000000 built" not in seen and time.monotonic() < until:
        seen += os.read(master, 4096)
    process.send_signal(signal.SIGINT)
    out = process.communicate(timeout=30)[0].decode("utf-8")
    os.close(master)
    assert process.returncode == 130
    assert "of 1000000 builds" in out and "to the digit again" in out
    assert "Traceback" not in out and b"Traceback" not in seen
    assert re.search(r"\r [█▏▎▍▌▋▊▉·#.]{24} \d+ of 1000000 built", seen.decode("utf-8"))


def test_no_progress_is_written_where_nobody_watches():
    done = program("spread", SIX, "--builds", 6000, "--json")
    assert (done.returncode, done.stderr) == (0, b"")
    assert json.loads(done.stdout)["builds"] == 6000
