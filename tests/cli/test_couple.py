"""couple: table, JSON, CSV, and a file that is only changed where it is told to, and only where it must be."""

import csv
import io
import re

import pytest

from polebook.book.ledger import ledger
from polebook.chain import read
from polebook.report.look import cells
from tests.cli.helpers import CHAINS, LISTENER, SIX, answering, program, telling

told = telling("couple")
as_json = answering("couple")


@pytest.fixture
def chain(tmp_path):
    copy = tmp_path / "chain.toml"
    copy.write_bytes(LISTENER.read_bytes())
    return copy


def test_the_table_sets_today_against_what_is_proposed_and_two_rules(capsys):
    code, out, err = told(capsys, LISTENER)
    assert (code, err) == (0, "")
    rows = {line.split()[0]: line.split()[1:] for line in out.splitlines() if re.match(r" (Q|load)\S*\.", line)}
    assert list(rows) == ["Q1.couple", "Q1.ce", "Q2.couple", "Q2.ce", "load.couple"]
    assert rows["Q1.ce"][3:] == ["1u", "273n", "270n", "1u", "470n"]
    (edges,) = [line for line in out.splitlines() if line.startswith(" lower edge, Hz")]
    assert edges.split()[3:] == ["14.1k", "20.0k", "19.9k", "11.1k", "21.1k"]
    assert "lower edge at 20.0 kHz or below: 5 capacitors, E12" in out
    assert " lower    20.0 kHz  14.1 kHz  19.9 kHz  met" in out
    assert " upper    1.00 MHz   400 kHz   417 kHz  missed" in out
    assert out.rstrip().endswith("the file is as it was; --write puts the proposal into it")


@pytest.mark.parametrize("file", sorted(CHAINS.glob("[!sw]*.toml")), ids=lambda file: file.stem)
def test_it_fits(file, capsys):
    code, out, _ = told(capsys, file)
    assert code == 0
    assert max(map(cells, out.splitlines())) <= 80


def test_it_fits_an_ascii_terminal():
    done = program("couple", SIX, PYTHONIOENCODING="ascii")
    assert (done.returncode, done.stderr) == (0, b"")
    assert max(map(len, done.stdout.decode("ascii").splitlines())) <= 80


def test_json_has_everything_in_full(capsys):
    answer = as_json(capsys, LISTENER, "--lower", "10k")
    assert (answer["format"], answer["command"]) == (1, "couple")
    (one,) = answer["files"]
    assert one["file"] == str(LISTENER) and len(one["digest"]) == 64
    assert one["lower_hz"] == 10e3
    assert one["lower_edge_hz"]["value"] <= 10e3
    assert one["total_farad"]["value"] == pytest.approx(sum(part["farad"]["value"] for part in one["parts"]))
    assert one["written"] is False
    assert [key["path"] for key in one["proposal"]["keys"]] == [part["path"] for part in one["parts"]]
    assert one["proposal"]["overall"]["after"]["lower_edge_hz"] == one["lower_edge_hz"]["value"]


def test_csv_has_units_and_every_digit(capsys):
    (one,) = as_json(capsys, LISTENER)["files"]
    _, out, _ = told(capsys, LISTENER, "--csv")
    heading, *rows = csv.reader(io.StringIO(out))
    assert heading == ["part", "sees [Ω]", "owns today [1]", "owns then [1]", "today [F]", "least total [F]",
                       "to fit E12 [F]", "each at f/n [F]", "like corners [F]", "at its bound"]  # fmt: skip
    assert [float(row[5]) for row in rows[:5]] == [part["farad"]["least"] for part in one["parts"]]
    assert rows[5][0] == "total [F]" and float(rows[6][6]) == one["lower_edge_hz"]["value"]


def test_the_file_is_not_touched_unless_it_is_told(chain, capsys):
    assert told(capsys, chain)[0] == 0
    assert chain.read_bytes() == LISTENER.read_bytes()


@pytest.mark.parametrize("ending", ["\n", "\r\n"])
def test_write_changes_the_values_and_no_byte_beside_them(chain, capsys, ending):
    before = LISTENER.read_text(encoding="utf-8").replace("\n", ending)
    chain.write_text(before, encoding="utf-8", newline="")
    answer = as_json(capsys, chain, "--lower", "12k", "--write")
    (one,) = answer["files"]
    assert one["written"] is True
    after = chain.read_bytes().decode("utf-8")
    old, new = before.split(ending), after.split(ending)
    assert len(old) == len(new)
    changed = [(a, b) for a, b in zip(old, new, strict=True) if a != b]
    moved = [key for key in one["proposal"]["keys"] if key["moved"]]
    assert len(changed) == len(moved) == 5
    for (line, written), key in zip(changed, moved, strict=True):
        assert line.replace(f'"{key["now_text"]}"', f'"{key["text"]}"') == written
    assert "# the second step against traffic rumble" in after
    assert ledger(read.load(str(chain))).lower_hz == one["lower_edge_hz"]["value"] <= 12e3


def test_a_second_run_finds_nothing_to_do(chain, capsys):
    assert "5 values written into" in told(capsys, chain, "--write")[1]
    first = chain.read_bytes()
    code, out, _ = told(capsys, chain, "--write")
    assert code == 0
    assert "the file has these values already" in out
    assert chain.read_bytes() == first


def test_only_what_is_named_is_changed(chain, capsys):
    told(capsys, chain, "--free", "Q1.ce, Q2.ce", "--lower", "15k", "--write")
    before, after = read.load(str(LISTENER)).numbers, read.load(str(chain)).numbers
    assert {path for path in before if before[path] != after[path]} == {"Q1.ce", "Q2.ce"}


@pytest.mark.parametrize(
    ("args", "says"),
    [
        (("--lower", "x"), "does not begin with a number"),
        (("--lower", "0"), "is not above zero"),
        (("--lower", "20 V"), "--lower"),
        (("--free", "Q1.rc"), "no low-role capacitor"),
        (("--free", "Q1.cuple"), "did you mean Q1.couple?"),
        (("--lower", "2M"), "lies above the band"),
        (("--lower", "1k", "--free", "Q1.ce"), "free Q2.couple too"),
        (("--json", "--csv"), "not allowed with"),
    ],
)
def test_a_wrong_command_line_says_how_to_mend_it(chain, capsys, args, says):
    code, out, err = told(capsys, chain, *args, "--write")
    assert (code, out) == (2, "")
    assert says in err
    assert "    fix  " in err
    assert chain.read_bytes() == LISTENER.read_bytes()
