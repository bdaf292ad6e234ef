"""start, card and parts at the command line."""

import csv
import io
import json
import os
import shutil

import pytest

from polebook.cli.main import main
from polebook.report.look import cells
from tests.cli.helpers import ALL, LISTENER, PHOTODIODE, SIX, program


def told(capsys, *args):
    code = main([str(arg) for arg in args])
    out, err = capsys.readouterr()
    return code, out, err


@pytest.fixture
def chain(tmp_path):
    return shutil.copy(PHOTODIODE, tmp_path / "chain.toml")


def test_start_writes_a_chain_that_shows(capsys, tmp_path):
    new = tmp_path / "new.toml"
    code, out, err = told(capsys, "start", new)
    assert (code, err) == (0, "")
    assert "Q1 common-emitter, Q2 emitter-follower, on 12.0 V: gain" in " ".join(out.split())
    assert new.read_text(encoding="utf-8").startswith("# A chain to begin with")
    code, out, err = told(capsys, "show", new)
    assert (code, err) == (0, "")
    assert told(capsys, "audit", new)[0] == 0


def test_start_never_writes_over_anything(capsys, tmp_path):
    there = tmp_path / "there.toml"
    there.write_text("mine")
    link = tmp_path / "link.toml"
    link.symlink_to(tmp_path / "nowhere.toml")
    for target in (there, link, tmp_path):
        code, out, err = told(capsys, "start", target)
        assert (code, out) == (2, "")
        assert "already" in err
        assert "    fix  " in err
    assert there.read_text() == "mine"
    assert not (tmp_path / "nowhere.toml").exists()


def test_start_takes_kinds_rails_source_and_load(capsys, tmp_path):
    new = tmp_path / "new.toml"
    args = ("--kinds", "common-source:mosfet, cascode,noninverting", "--rail", "24V", "--negative", "-15",
            "--source", "1M", "--load", "47k")
    assert told(capsys, "start", new, *args)[0] == 0
    text = new.read_text(encoding="utf-8")
    for part in ('positive = "24"', 'negative = "-15"', '"1M"', '"47k"', '= "mosfet"', '= "cascode"'):
        assert part in text
    assert told(capsys, "show", new)[0] == 0


def test_start_gives_valves_a_high_rail(capsys, tmp_path):
    _, out, _ = told(capsys, "start", tmp_path / "new.toml", "--kinds", "common-cathode")
    assert "on 250 V" in out


@pytest.mark.parametrize(
    ("args", "says"),
    [
        (("--kinds", "comon-emitter"), "did you mean common-emitter?"),
        (("--kinds", "common-emitter:jfet"), "takes a bjt card"),
        (("--kinds", "ladder:bjt"), "takes no card"),
        (("--kinds", ","), "no stage is asked for"),
        (("--kinds", ",".join(["block"] * 65)), "65 stages"),
        (("--rail", "2"), "3 V to 600 V"),
        (("--rail", "12k"), "3 V to 600 V"),
        (("--rail", "x"), "--rail"),
        (("--negative", "12"), "-12"),
        (("--source", "-1"), "not below zero"),
        (("--source", "0", "--kinds", "transimpedance"), "takes a current"),
        (("--load", "0"), "above zero"),
        (("--load", "10 uF"), "capacitance"),
    ],
)
def test_start_refuses_with_a_remedy_and_writes_nothing(capsys, tmp_path, args, says):
    new = tmp_path / "new.toml"
    code, out, err = told(capsys, "start", new, *args)
    assert (code, out) == (2, "")
    assert says in err
    assert "    fix  " in err
    assert not new.exists()


def test_start_says_where_the_folder_is_missing(capsys, tmp_path):
    code, _, err = told(capsys, "start", tmp_path / "no" / "new.toml")
    assert code == 2
    assert "its folder is not there" in err


def test_card_takes_one_table_over_and_nothing_else(capsys, chain):
    before = chain.read_text(encoding="utf-8")
    code, out, err = told(capsys, "card", chain, "VF", "--from", LISTENER)
    assert (code, err) == (0, "")
    after = chain.read_text(encoding="utf-8")
    assert after.startswith(before)
    assert after[len(before) :].strip().splitlines()[0] == "[device.VF]"
    assert "  + [device.VF]" in out
    assert "  - " not in out
    assert told(capsys, "set", chain, "device.VF.beta", "90")[0] == 0


def test_card_the_same_again_changes_nothing(capsys, chain):
    told(capsys, "card", chain, "VF", "--from", LISTENER)
    os.utime(chain, (1, 1))
    code, out, _ = told(capsys, "card", chain, "VF", "--from", LISTENER)
    assert code == 0
    assert "it has this card already, nothing is changed" in out
    assert chain.stat().st_mtime == 1


def test_card_refuses_another_of_that_name_and_says_what_differs(capsys, chain):
    told(capsys, "card", chain, "VF", "--from", LISTENER)
    told(capsys, "set", chain, "device.VF.beta", "90")
    before = chain.read_bytes()
    code, out, err = told(capsys, "card", chain, "VF", "--from", LISTENER)
    assert (code, out) == (2, "")
    assert "another card VF" in err
    assert "beta is 90 here and 180 there" in err
    assert chain.read_bytes() == before


def test_card_lists_the_near_names(capsys, chain):
    code, _, err = told(capsys, "card", chain, "VG", "--from", LISTENER)
    assert code == 2
    assert "did you mean VF?" in err
    assert told(capsys, "card", chain, "VF", "--from", chain.parent / "none.toml")[0] == 2
    assert "--from" in told(capsys, "card", chain, "VF")[2]


@pytest.mark.parametrize("file", ALL, ids=lambda file: file.stem)
@pytest.mark.parametrize("encoding", ["utf-8", "ascii"])
def test_parts_fit(file, encoding):
    done = program("parts", file, PYTHONIOENCODING=encoding)
    assert (done.returncode, done.stderr) == (0, b"")
    assert max(map(cells, done.stdout.decode(encoding).splitlines())) <= 80


def test_parts_as_text_json_and_csv(capsys):
    _, out, _ = told(capsys, "parts", SIX)
    assert [line.split() for line in out.splitlines() if line.startswith(" 82k ")] == [
        ["82k", "1", "%", "4", "Q3.rb1,", "Q4.rb1,", "Q5.rb2,", "Q6.rb1"[:-1] + "2"]]  # fmt: skip
    assert " 41 parts to fit" in out
    answer = json.loads(told(capsys, "parts", SIX, "--json")[1])
    assert (answer["format"], answer["command"]) == (1, "parts")
    assert len(answer["files"][0]["digest"]) == 64
    assert sum(row["count"] for row in answer["parts"]) == 41
    rows = list(csv.DictReader(io.StringIO(told(capsys, "parts", SIX, "--csv")[1])))
    assert [float(row["value [SI]"]) for row in rows if row["part"] == "82k"] == [82e3]
    assert len(rows) == len(answer["parts"])


def test_many_places_are_wrapped(capsys, tmp_path):
    new = tmp_path / "new.toml"
    told(capsys, "start", new, "--kinds", ",".join(["common-emitter"] * 30))
    _, out, _ = told(capsys, "parts", new)
    assert max(map(cells, out.splitlines())) <= 80
    assert "…" not in out
    assert all(f"Q{number}.rc" in out for number in range(1, 31))


def test_a_value_off_the_series_is_marked(capsys, chain):
    told(capsys, "set", chain, "U1.rf", "217k")
    _, out, _ = told(capsys, "parts", chain)
    assert "217k *" in out
    assert "not of the file's preferred series" in out
