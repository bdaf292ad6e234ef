"""compare: the text of two files, of a post, and what is refused."""

import json
import shutil
from datetime import date

import pytest

from polebook.cli import compare as command
from polebook.cli.main import main
from polebook.record import post as record
from polebook.record.choose import chosen
from polebook.report import compare as report
from polebook.report.look import Look
from tests.cli.helpers import LISTENER

TEXT = LISTENER.read_text(encoding="utf-8")


def told(capsys, *words):
    code = main(["compare", *map(str, words)])
    return code, *capsys.readouterr()


@pytest.fixture
def pair(tmp_path, monkeypatch):
    """Two files in a folder: the listener, and with other values."""
    monkeypatch.chdir(tmp_path)
    shutil.copy(LISTENER, "a.toml")
    return lambda *edits: (tmp_path / "b.toml").write_text(edited(*edits), encoding="utf-8") and ("a.toml", "b.toml")


def edited(*edits):
    text = TEXT
    for old, new in edits:
        assert old in text, old
        text = text.replace(old, new)
    return text


COMP, GAIN, NOTE = ('"4p7"', '"1p5"'), ('re          = "47"', 're          = "39"'), ("Sits directly", "Sits straight")


def test_changes_figures_and_shares_in_one_page(capsys, pair):
    code, out, err = told(capsys, *pair(COMP, GAIN, NOTE, ("# a metre of screened cable", "# cable")))
    assert (code, err) == (0, "")
    assert "  1  re of Q2: 47 to 39\n  2  c_comp of Q2: 4p7 to 1p5\n  -  note of Q3 changed\n" in out
    assert " what is marked - moves no figure; 1 comment differs\n" in out
    lines = out.split("\n")
    upper = next(at for at, line in enumerate(lines) if line.startswith(" upper edge: 400 kHz to "))
    assert lines[upper].split()[-3:] == ["alone", "last", "share"]
    assert lines[upper + 1].startswith("  2  Q2.c_comp ") and lines[upper + 2].startswith("  1  Q2.re ")
    shares = [int(line.split()[-2]) for line in lines[upper + 1: upper + 3]]
    assert sum(shares) == 100 and shares[1] < 0 < shares[0]
    assert max(map(len, lines)) <= 80 and "more stand still" in out
    out = " ".join(told(capsys, *pair(COMP, ('"90p"', '"300p"')))[1].split())
    assert "% of the move, the other" in out and "they do to each other" in out


def test_one_change_needs_no_shares_and_no_change_no_figures(capsys, pair):
    out = told(capsys, *pair(COMP))[1]
    assert "alone" not in out and " upper edge                   400 kHz      749 kHz     +87 %\n" in out
    assert " upper    1.00 MHz   400 kHz   749 kHz  -25.1 %  missed\n" in out
    assert told(capsys, "a.toml", "a.toml")[1].endswith("\n\n no difference\n")
    assert told(capsys, *pair(NOTE))[1].endswith(
        "\n\n  -  note of Q3 changed\n what is marked - moves no figure\n\n no figure moves\n")
    renamed = told(capsys, *pair(('name        = "Q3"', 'name        = "Q9"')))[1]
    assert "Q3 renamed to Q9" in renamed and "clips first" not in renamed
    assert told(capsys, *pair(("\n\n", "\n")))[1].endswith("\n\n they say the same, laid out otherwise\n")
    assert "\n targets " in told(capsys, *pair(('peaking = "0.5 dB"', 'peaking = "1 dB"')))[1]


def test_tolerances_move_no_figure_but_the_yield(capsys, pair):
    files = pair(("[load]", '[tolerance]\nbeta = "10 %"\n[load]'))
    assert "what is marked - moves no figure\n" in told(capsys, *files)[1]
    answer = json.loads(told(capsys, *files, "--json")[1])
    judged = {"want": 0.8, "got": 0.7, "margin": -0.1, "met": False, "why": ""}
    answer["targets"].append({"name": "yield", "before": judged, "after": {**judged, "got": 0.9, "met": True}})
    out = report.compare(answer, Look())
    assert "what is marked - moves no figure, tolerances none but the yield\n" in out
    assert "met, was missed" in out and " yield      80.0 %    70.0 %    90.0 % " in out


def test_json_has_all_at_full_precision(capsys, pair):
    code, out, _ = told(capsys, *pair(COMP, GAIN), "--json")
    answer = json.loads(out)
    assert code == 0 and answer["format"] == 1 and answer["command"] == "compare"
    assert [file["file"] for file in answer["files"]] == ["a.toml", "b.toml"]
    assert all(len(file["digest"]) == 64 and file["revision"] is None for file in answer["files"])
    assert answer["changes"][0] == {"sort": "stage", "path": "Q2.re", "before": "47", "after": "39", "acts": True,
                                    "text": "re of Q2: 47 to 39"}
    assert answer["overall"]["after"]["upper_edge_hz"] > answer["overall"]["before"]["upper_edge_hz"]
    assert answer["causes"]["items"] == [{"changes": [0], "why": None}, {"changes": [1], "why": None}]
    assert answer["stopped"] is False


def test_a_turned_gain_is_told_before_any_figure(capsys, pair):
    block = '[[stage]]\nname = "B1"\nkind = "block"\ngain = -1\n\n[[stage]]\nname        = "Q3"'
    out = told(capsys, *pair(('[[stage]]\nname        = "Q3"', block), (
        'stopper     = "47"', 'stopper     = "47"\ncouple = "1u"\nrb1 = "22k"\nrb2 = "33k"')))[1]
    assert out.index("the sign of the gain is turned over") < out.index("\n figures ")
    assert "B1 added after Q2: block, gain -1" in out


def test_ctrl_c_leaves_the_figures_and_says_so(capsys, pair, monkeypatch):
    files = pair(COMP, GAIN)
    real = command._worked
    calls = []

    def interrupted(work, out):
        calls.append(work)
        if len(calls) == 1:
            next(work)
            raise KeyboardInterrupt
        return real(work, out)

    monkeypatch.setattr(command, "_worked", interrupted)
    code, out, _ = told(capsys, *files)
    assert code == 130 and len(calls) == 2 and " upper edge " in out
    assert "stopped: which change did how much is not told" in out


def test_against_a_post_figures_alone(capsys, pair, tmp_path):
    a, _ = pair()
    record.post(a, TEXT, "as built", date(2026, 5, 4))
    assert "the file says what was posted" in told(capsys, a, "--post")[1]
    (tmp_path / a).write_text(edited(COMP), encoding="utf-8")
    code, out, _ = told(capsys, "--post", a)
    assert code == 0 and " before  posted 2026-05-04, digest " in out and ": as built\n" in out
    assert " upper    1.00 MHz   400 kHz   749 kHz  missed\n" in out
    assert " pole of Q1 " in out and "upper edge owned by Q2" in out and "share" not in out
    assert "a post holds figures alone, not what changed" in out
    answer = json.loads(told(capsys, a, "--post", "2026-05-04", "--json")[1])
    post = answer["files"][0]["post"]
    assert post.pop("version") and post == {"date": "2026-05-04", "message": "as built", "held_by": None}
    assert {one["name"]: one["moved"] for one in answer["figures"]}["overall.upper_edge_hz"] is True


def test_a_post_by_number_date_or_digest(tmp_path):
    file = str(tmp_path / "a.toml")
    for day, edit in ((1, ()), (2, (COMP,)), (2, (GAIN,))):
        record.post(file, edited(*edit), "", date(2026, 5, day))
    posts = record.posts(file)
    assert [chosen(posts, word, file) for word in ("1", "3", "2026-05-02", "2026-05-01", posts[1].digest[:12])] == [
        posts[0], posts[2], posts[0], posts[2], posts[1]]


@pytest.mark.parametrize(("words", "why"), [
    (("a.toml", "--post"), "nothing is posted of this file"),
    (("a.toml", "b.toml", "--rev", "HEAD"), "--rev stands with two files"),
    (("a.toml", "b.toml", "--post", "1"), "--post stands with two files"),
    (("a.toml", "--rev", "HEAD", "--post", "1"), "not allowed with"),
    (("nix.toml", "--rev", "HEAD"), "there is no such file"),
    (("nix.toml", "a.toml"), "there is no such file"),
    ((), "required: A"),
])
def test_what_can_not_be_compared_ends_with_a_message(capsys, pair, words, why):
    pair()
    code, out, err = told(capsys, *words)
    assert (code, out) == (2, "") and why in err and "    fix  " in err


def test_which_post_there_is_none_of(capsys, pair):
    a, _ = pair()
    record.post(a, TEXT, "", date(2026, 5, 4))
    for word in ("2", "0", "2026-05-05", "abc", ""):
        code, _, err = told(capsys, a, "--post", word)
        assert code == 2 and f'there is no post "{word}"' in err and "the only one is of 2026-05-04" in err


def test_gains_of_unlike_sources_are_not_compared(capsys, tmp_path):
    before = tmp_path / "b.toml"
    before.write_text('format = 1\nsource = { kind = "current", resistance = "1k" }\nload = { resistance = "1k", '
                      'capacitance = "1n" }\ntarget = { gain = "500 V/A" }\n[[stage]]\nname = "L1"\nkind = "ladder"\n'
                      'arms = [ { series_r = "1k" } ]\n', encoding="utf-8")
    after = tmp_path / "a.toml"
    after.write_text(before.read_text(encoding="utf-8").replace("current", "voltage").replace("500 V/A", "0.3")
                     .replace('"1n"', '"2n"'), encoding="utf-8")
    out = " ".join(told(capsys, before, after)[1].split())
    assert "gains and input noise are not compared" in out and " gain: " not in out
    assert " gain -10.46 dB 50.46 dBΩ -9.54 dB 8.5 % met, was missed" in out
    names = {one["name"] for one in json.loads(told(capsys, before, after, "--json")[1])["figures"]}
    assert "overall.upper_edge_hz" in names and not names & {"overall.gain_db", "overall.noise_density"}
