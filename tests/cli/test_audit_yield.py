"""audit with a target for the yield: judged by built chains, the same as `spread` makes."""

import json

import pytest

from tests.cli.helpers import CHAINS, LISTENER, SIX, telling
from tests.cli.test_spread import EDGE, as_json

PROBE = CHAINS / "leaf-probe.toml"


told = telling("audit")


def judged(capsys, *args):
    code, out, err = told(capsys, *args, "--json")
    assert err == ""
    return code, json.loads(out)["files"]


def wanting(tmp_path, share):
    file = tmp_path / "probe.toml"
    file.write_text(PROBE.read_text(encoding="utf-8").replace('"80 %"', f'"{share} %"'), encoding="utf-8")
    return file


def test_it_is_the_yield_that_spread_tells(capsys):
    code, (entry,) = judged(capsys, PROBE)
    assert code == 0
    (row,) = [row for row in entry["targets"] if row["name"] == "yield"]
    answer = as_json(capsys, PROBE)
    assert entry["spread"]["yield"] == answer["yield"]
    assert (entry["spread"]["builds"], entry["spread"]["seed"]) == (answer["builds"], answer["seed"]) == (10000, 1)
    assert row["got"] == answer["yield"]["all"]["share"]
    assert row["margin"] == pytest.approx((row["got"] - 0.8) / 0.8)
    assert row["met"] is True


def test_number_and_seed_stand_in_the_text(capsys):
    code, out, _ = told(capsys, PROBE)
    assert code == 0
    (row,) = [line for line in out.splitlines() if line.startswith(" yield ")]
    assert row.split()[-1] == "met"
    text = " ".join(out.split())
    assert "yield: 10000 built chains, seed 1: 84." in text
    assert "lower 85." in text
    assert out.endswith(" all 5 met\n")


def test_a_yield_that_is_missed_says_by_what(capsys, tmp_path):
    code, out, _ = told(capsys, wanting(tmp_path, 90))
    assert code == 1
    assert out.count("yield:") == 1
    assert out.endswith(" 1 of 5 missed\n")
    code, (entry,) = judged(capsys, wanting(tmp_path, 90))
    (row,) = [row for row in entry["targets"] if row["name"] == "yield"]
    assert (code, row["met"]) == (1, False)
    assert row["why"].endswith("of the built chains meet lower")


def test_targets_that_builds_are_not_judged_by_are_named(capsys):
    code, out, _ = told(capsys, CHAINS / "frost-line-sounder.toml")
    assert code == 0
    assert "without overshoot, rise and sag" in " ".join(out.split())


def test_a_file_without_it_builds_nothing(capsys, monkeypatch):
    from polebook.plan import yielded

    monkeypatch.setattr(yielded, "built", None)
    _, entries = judged(capsys, LISTENER, SIX)
    assert [entry["spread"] for entry in entries] == [None, None]


def test_a_yield_of_nothing_else_is_not_judged(capsys, tmp_path):
    file = tmp_path / "alone.toml"
    file.write_text(EDGE.replace("0p38", "1p").format(target='[target]\nyield = "90 %"\n'))
    code, out, _ = told(capsys, file)
    assert code == 1
    assert "not judged  no target that builds are judged by" in out
    assert judged(capsys, file)[1][0]["spread"] is None


def test_an_unstable_chain_is_not_built(capsys, tmp_path):
    file = tmp_path / "unstable.toml"
    file.write_text(EDGE.replace("0p38", "0p1").format(target='[target]\nupper = "10k"\nyield = "90 %"\n'))
    code, (entry,) = judged(capsys, file)
    assert code == 1
    assert [row["why"] for row in entry["targets"]] == ["the chain is unstable"] * 2
    assert entry["spread"] is None


def test_builds_that_cannot_be_computed_leave_the_other_targets_judged(capsys, monkeypatch):
    from polebook.plan import yielded
    from polebook.problem import Problem, ProblemsFound

    def built(*_):
        raise ProblemsFound([Problem(None, "too far apart", "", "")])

    monkeypatch.setattr(yielded, "built", built)
    code, (entry,) = judged(capsys, PROBE)
    assert (code, entry["exit"], entry["problems"], entry["spread"]) == (1, 1, [], None)
    assert [row["met"] for row in entry["targets"]] == [True] * 4 + [None]
    assert "not judged  its builds can't be computed" in told(capsys, PROBE)[1]
