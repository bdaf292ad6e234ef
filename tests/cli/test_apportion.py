"""apportion: what it prints, JSON, a file that is only changed where it is told to, and ctrl-c."""

import json
import os
import pty
import re
import signal
import subprocess
import time
from pathlib import Path

import pytest

from polebook.cli import apportion as command
from polebook.cli.main import main
from polebook.plan import apportion as plan
from polebook.report.look import cells
from tests.cli.helpers import CHAINS, LISTENER, SIX, environment, program, telling
from tests.cli.helpers import command as words
from tests.test_imports import modules_after

GREEDY = [('upper   = "1M"', 'upper   = "4M"'), ('gain    = "60 dB"', 'gain    = "70 dB"')]
FEW = "Q1.rc,Q1.re,Q2.re,Q2.c_comp"
FOUND = {}  # request -> its result


told = telling("apportion")


@pytest.fixture
def chain(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)  # the same request in every test: what it comes to is searched once
    copy = Path("chain.toml")
    copy.write_bytes(LISTENER.read_bytes())
    return copy


@pytest.fixture(autouse=True)
def searched_once(monkeypatch):
    search = plan.apportion

    def remembered(request):
        if request not in FOUND:
            FOUND[request] = yield from search(request)
        return FOUND[request]

    monkeypatch.setattr(plan, "apportion", remembered)


@pytest.fixture
def greedy(chain):
    text = chain.read_text(encoding="utf-8")
    for old, new in GREEDY:
        assert old in text
        text = text.replace(old, new)
    chain.write_text(text, encoding="utf-8")
    return chain


def test_the_listeners_misses_become_targets_met_by_one_command(chain, capsys):
    assert main(["audit", str(chain)]) == 1
    assert "1 of 4 missed" in capsys.readouterr().out
    code, out, err = told(capsys, chain, "--write")
    assert (code, err) == (0, "")
    assert " Q2.c_comp    4p7         0  not there" in out
    assert " upper    1.00 MHz   400 kHz  1.20 MHz   20.5 %  met" in out
    assert "all targets are met; 1 value written into" in " ".join(out.split())
    assert main(["audit", str(chain)]) == 0
    assert "all 4 met" in capsys.readouterr().out
    before, after = LISTENER.read_text(encoding="utf-8"), chain.read_text(encoding="utf-8")
    assert len(set(before.splitlines()) ^ set(after.splitlines())) == 2
    code, out, _ = told(capsys, chain, "--write")
    assert code == 0 and "nothing has to change" in out and chain.read_text(encoding="utf-8") == after


def test_without_write_the_file_stays(chain, capsys):
    code, out, _ = told(capsys, chain)
    assert code == 0 and "18 keys may change: every part that is fitted" in out
    assert "17 more stay as the file has them" in out
    assert "--write puts 1 value into it" in out
    assert chain.read_bytes() == LISTENER.read_bytes()


def test_what_can_not_be_met_says_what_gives(greedy, capsys):
    code, out, err = told(capsys, greedy, "--free", FEW)
    assert (code, err) == (1, "")
    text = " ".join(out.split())
    assert "4 keys may change, as chosen" in text
    way = r"This is the nearest plan\. All others could be met, but for rounding, with upper at [0-9.]+ [kM]Hz"
    assert re.search(way, text)
    assert "Not free, and would better upper: 1 % less device.VF.cob (" in text
    assert "1 of 4 targets not met; the file is as it was" in text


def test_a_favoured_figure_is_named_and_other_figures_stand_beside(chain, capsys):
    code, out, _ = told(capsys, chain, "--favour", "upper", "--free", f"{FEW},Q1.couple,Q2.couple")
    assert code == 0
    assert "as chosen; upper is favoured once all targets are met" in " ".join(out.split())
    edge = float(re.search(r"^ upper .* ([0-9.]+) MHz", out, re.MULTILINE)[1])
    assert edge > 1.5
    assert re.search(r"^ noise density +3\.77 nV/√Hz +[0-9.]+ nV/√Hz$", out, re.MULTILINE)


def test_json_has_all_of_it(greedy, capsys):
    code, out, _ = told(capsys, greedy, "--free", FEW, "--json")
    assert code == 1
    answer = json.loads(out)
    assert (answer["format"], answer["command"]) == (1, "apportion")
    (one,) = answer["files"]
    assert set(one) == {"file", "digest", "free", "favour", "seed", "starts", "trials", "stopped", "keys", "targets",
                        "overall", "cautions", "mended", "met", "gives", "held", "levers", "notes", "written"}
    assert one["free"] == {"from": "chosen", "keys": FEW.split(",")}
    assert (one["met"], one["written"], one["stopped"], one["favour"]) == (False, False, False, None)
    assert {key["path"] for key in one["keys"]} == set(FEW.split(","))
    upper = next(target for target in one["targets"] if target["name"] == "upper")
    assert upper["after"]["got"] == one["overall"]["after"]["upper_edge_hz"] > upper["before"]["got"]
    assert [way["target"] for way in one["gives"]] == ["upper"]


@pytest.mark.parametrize("file", sorted(CHAINS.glob("*.toml")), ids=lambda file: file.stem)
def test_it_fits(file, capsys):
    code, out, err = told(capsys, file)
    assert (code, err) == (0, "")
    assert max(map(cells, out.splitlines())) <= 80


def test_it_fits_an_ascii_terminal():
    done = program("apportion", LISTENER, "--free", "Q2", PYTHONIOENCODING="ascii")
    assert (done.returncode, done.stderr) == (0, b"")
    assert max(map(len, done.stdout.decode("ascii").splitlines())) <= 80


@pytest.mark.parametrize(("args", "what"), [
    (["--free", "Q9.rc"], 'nothing is named "Q9"'), (["--favour", "loudness"], "loudness is no figure"),
    (["--seed", "x"], '--seed: "x" is no seed'), (["--free", "target.upper"], "can't be free"),
])
def test_a_command_line_at_fault_is_told(chain, capsys, args, what):
    code, out, err = told(capsys, chain, *args)
    assert (code, out) == (2, "")
    assert what in err and "fix" in err


def test_a_stop_keeps_what_is_found_and_never_writes(greedy, capsys, monkeypatch):
    real = plan.apportion

    def interrupted(request):
        work = real(request)
        for _ in range(120):
            yield next(work)
        raise KeyboardInterrupt

    monkeypatch.setattr(plan, "apportion", interrupted)
    before = greedy.read_bytes()
    code, out, _ = told(capsys, greedy, "--write")
    assert code == 130
    assert "stopped: the best so far" in out and greedy.read_bytes() == before
    code, out, _ = told(capsys, greedy, "--json")
    assert code == 130 and json.loads(out)["files"][0]["stopped"] is True


def test_ctrl_c_on_a_terminal_stops_a_search(tmp_path):
    """A chain that takes long, its progress line, and ctrl-c."""
    text = (CHAINS / "frost-line-sounder.toml").read_text(encoding="utf-8")
    slow = tmp_path / "slow.toml"
    slow.write_text(text.replace('upper   = "60M"', 'upper   = "600M"'), encoding="utf-8")
    leader, follower = pty.openpty()
    process = subprocess.Popen(words("apportion", slow), stdout=subprocess.PIPE, stderr=follower, stdin=follower,
                               env=environment(TERM="xterm"))
    os.close(follower)
    seen = b""
    end = time.monotonic() + 30
    while b"ctrl-c stops" not in seen and time.monotonic() < end:
        seen += os.read(leader, 1000)
    process.send_signal(signal.SIGINT)
    out = process.communicate(timeout=30)[0].decode("utf-8")
    os.close(leader)
    assert process.returncode == 130
    assert b"of at most" in seen and b"missed" in seen and b"Traceback" not in seen
    assert "stopped: the best so far" in out and "Traceback" not in out


def test_help_tells_what_it_does(capsys):
    with pytest.raises(SystemExit):
        command.COMMAND.parser("apportion").parse_args(["--help"])
    text = capsys.readouterr().out
    assert "--favour" in text and max(map(len, text.splitlines())) <= 80
    assert SIX.exists()


def test_nothing_heavy_is_imported_before_it_is_needed(tmp_path):
    faulty = tmp_path / "faulty.toml"
    faulty.write_text("format = 2\n")
    hush = "import os, sys; sys.stderr = open(os.devnull, 'w')\n"
    run = "from polebook.cli.main import main; result = main(['apportion', {!r}])\nsys.stderr = sys.__stderr__"
    names, code = modules_after(hush + run.format(str(faulty)))
    assert code == 2 and "numpy" not in names
    names, code = modules_after(hush + run.format(str(SIX)))  # meets its targets as it is
    assert code == 0 and "numpy" in names and "scipy" not in names
    names, code = modules_after(hush + run.format(str(LISTENER)))
    assert code == 0 and "scipy" in names and "textual" not in names
