"""audit: one line a target, and the exit code that a script goes by."""

import json
import re

import pytest

from polebook.cli.main import main
from tests.cli.helpers import LISTENER, PHOTODIODE, SIX, telling

told = telling("audit")


def variant(tmp_path, name, *changes):
    """The listener with pieces of its text replaced, as a file of its own."""
    text = LISTENER.read_text()
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    file = tmp_path / name
    file.write_text(text)
    return file


@pytest.fixture
def met(tmp_path):
    return variant(tmp_path, "met.toml", ('upper   = "1M"', 'upper   = "100k"'))


@pytest.fixture
def aimless(tmp_path):
    return variant(tmp_path, "aimless.toml", (LISTENER.read_text().split("[target]")[1].split("[device")[0], "\n"))


@pytest.fixture
def faulty(tmp_path):
    return variant(tmp_path, "faulty.toml", ('"33"', '"33 F"'))


def test_the_missed_edge_is_named_with_what_was_wanted_and_got(capsys):
    code, out, err = told(capsys, LISTENER)
    assert (code, err) == (1, "")
    lines = out.splitlines()
    assert lines[0] == str(LISTENER)
    assert len(lines) == 2 + 4 + 2 + 1
    verdicts = {line.split()[0]: line for line in lines[2:6]}
    assert list(verdicts) == ["gain", "lower", "upper", "peaking"]
    assert re.fullmatch(r" upper +1\.00 MHz +\d{3} kHz +-\d\d\.\d %  missed", verdicts["upper"])
    for name in ("gain", "lower", "peaking"):
        assert verdicts[name].endswith("  met")
    why = " ".join(" ".join(lines[6:8]).split())
    assert why.startswith("upper: Q2.c_comp owns 71 %, its 4.7 pF looks like 167 pF at n1 (K -34.4), on 1.52 kΩ")
    assert lines[-1] == " 1 of 4 missed"


def test_all_met_exits_0(capsys, met):
    code, out, _ = told(capsys, met)
    assert code == 0
    assert out.splitlines()[-1] == " all 4 met"


def test_a_file_without_targets_exits_0_and_says_so(capsys, aimless):
    code, out, err = told(capsys, aimless)
    assert (code, err) == (0, "")
    assert out.splitlines() == [str(aimless), " no targets are set: nothing to judge"]


def test_a_target_that_is_not_judged_counts_as_missed(capsys, tmp_path):
    file = variant(tmp_path, "unjudged.toml", ('upper   = "1M"', 'upper   = "100k"\nsag = "5 %"'))
    code, out, _ = told(capsys, file)
    assert code == 1
    (line,) = [line for line in out.splitlines() if line.startswith(" sag")]
    assert "not judged" in line
    assert line.split("not judged")[1].strip()
    assert out.splitlines()[-1] == " 0 of 5 missed, 1 not judged"


def test_a_fault_exits_2_and_wins_over_a_missed_target(capsys, met, faulty):
    for files in ([faulty], [met, faulty], [faulty, LISTENER], [LISTENER, faulty, met]):
        code, out, err = told(capsys, *files)
        assert code == 2
        assert "is not a resistance" in err
        assert out.count("MHz") == files.count(LISTENER)


def test_the_worst_verdict_of_several_files_counts(capsys, met, aimless):
    assert told(capsys, met, aimless)[0] == 0
    assert told(capsys, met, LISTENER)[0] == 1
    assert told(capsys, LISTENER, met)[0] == 1


def test_the_same_file_may_be_named_twice(capsys):
    _, out, _ = told(capsys, LISTENER, LISTENER)
    half = len(out) // 2
    assert out[:half] == out[half:]


@pytest.mark.parametrize("file", [SIX, PHOTODIODE])
def test_the_other_demo_chains_reach_their_targets(capsys, file):
    code, out, err = told(capsys, file)
    assert (code, err) == (0, "")
    assert out.splitlines()[-1].endswith("met")


def test_json(capsys, met, faulty, aimless):
    code, out, err = told(capsys, LISTENER, met, faulty, aimless, "--json")
    answer = json.loads(out)
    assert (answer["format"], answer["command"], answer["exit"], code) == (1, "audit", 2, 2)
    missed, good, bad, none = answer["files"]
    assert [entry["exit"] for entry in answer["files"]] == [1, 0, 2, 0]
    assert missed["file"] == str(LISTENER)
    assert [(row["name"], row["met"]) for row in missed["targets"]] == [
        ("gain", True),
        ("lower", True),
        ("upper", False),
        ("peaking", True),
    ]
    upper = missed["targets"][2]
    assert upper["margin"] == pytest.approx((upper["got"] - upper["want"]) / upper["want"], rel=1e-12)
    assert upper["want"] == 1e6
    assert upper["why"].startswith("Q2.c_comp owns 71 %")
    assert len(missed["digest"]) == len(good["digest"]) == 64
    assert bad["digest"] is None
    assert bad["targets"] is None
    (problem,) = bad["problems"]
    assert problem["line"] > 1
    assert "is not a resistance" in problem["what"]
    assert problem["fix"]
    assert none["targets"] == []
    assert "is not a resistance" in err


def test_an_unstable_chain_meets_nothing(capsys, tmp_path):
    """A diode of 10 nF on an amplifier with a second pole and nothing across its feedback resistor."""
    file = tmp_path / "unstable.toml"
    file.write_text(
        'format = 1\n[supply]\npositive = 5\nnegative = -5\n[source]\nkind = "current"\ncapacitance = "10n"\n'
        '[[stage]]\nname = "U1"\nkind = "transimpedance"\ndevice = "A"\nrf = "1M"\n'
        '[target]\ngain = "1M"\n[device.A]\nfamily = "opamp"\ngbw = "10M"\nf2 = "100k"\n'
    )
    code, out, err = told(capsys, file)
    assert (code, err) == (1, "")
    assert "Unstable: a pair of poles at" in out
    assert main(["show", str(file)]) == 0
    shown = capsys.readouterr().out
    assert 0 < shown.index("Unstable: a pair of poles") < shown.index("targets  ")
