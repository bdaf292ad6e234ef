"""post: what is written and told; audit: what it says of the record, and the exit code with --posted."""

import json
import os
import re
import shutil
import subprocess
import sys
from datetime import date
from pathlib import Path

import pytest

from polebook import __version__
from polebook.cli.main import main
from tests.cli.helpers import CHAINS, LISTENER, PHOTODIODE, ROOT, environment

README = (ROOT / "README.md").read_text(encoding="utf-8")


def told(capsys, *args):
    code = main(list(map(str, args)))
    out, err = capsys.readouterr()
    return code, out, err


def judged(capsys, *args):
    code, out, _ = told(capsys, "audit", *args, "--json")
    return code, json.loads(out)["files"]


@pytest.fixture
def file(tmp_path, monkeypatch):
    """The photodiode, which meets its targets, in a folder of its own; the names of files are those of the folder."""
    monkeypatch.chdir(tmp_path)
    shutil.copy(PHOTODIODE, "front.toml")
    return "front.toml"


def read(name):
    return Path(name).read_text(encoding="utf-8")


def write(name, text):
    Path(name).write_text(text, encoding="utf-8")


def change(capsys, file):
    assert main(["set", file, "U1.rf", "215k"]) == 0
    capsys.readouterr()


def test_the_first_post(capsys, file):
    code, out, err = told(capsys, "post", file, "-m", "as built")
    assert (code, err) == (0, "")
    lines = out.splitlines()
    assert lines[0] == "front.posted.toml"
    assert re.fullmatch(rf" posted {date.today()}, digest [0-9a-f]{{8}}: as built", lines[1])
    assert re.fullmatch(r" +want +posted", lines[2])
    assert lines[3].split() == ["gain", "140.00", "dBΩ", "140.00", "dBΩ", "met"]
    assert [line.split()[0] for line in lines[3:]] == ["gain", "lower", "upper", "peaking"]


def test_the_next_post_tells_what_moved(capsys, file):
    told(capsys, "post", file, "-m", "as built")
    change(capsys, file)
    _, out, _ = told(capsys, "post", file, "-m", "215 kΩ came")
    lines = out.splitlines()[-6:]
    assert lines[0].split() == ["want", "before", "posted"]
    assert lines[1].split() == ["gain", "140.00", "dBΩ", "140.00", "dBΩ", "139.80", "dBΩ", "met"]
    assert re.fullmatch(rf" since the post of {date.today()} \d+ figures moved", lines[5])


def test_nothing_new_is_said_to_be_nothing_new(capsys, file):
    told(capsys, "post", file)
    before = read("front.posted.toml")
    code, out, err = told(capsys, "post", file)
    assert (code, err) == (0, "")
    assert f"nothing new to post: the post of {date.today()} has this digest and these figures" in " ".join(out.split())
    assert read("front.posted.toml") == before
    code, out, _ = told(capsys, "post", file, "-m", "for the review")
    assert code == 0 and "0 figures" not in out and "no figure moved" in out


def test_a_band_without_targets_is_told(capsys, file):
    text = read(file)
    write(file, re.sub(r"\[target\][^\[]*", "", text))
    _, out, _ = told(capsys, "post", file)
    assert [line.split()[:3:2] for line in out.splitlines()[3:]] == [["gain", "dBΩ"], ["lower", "Hz"], ["upper", "kHz"]]


def test_the_posts_are_listed_newest_first(capsys, file):
    code, out, _ = told(capsys, "post", file, "--list")
    assert (code, out) == (0, "front.posted.toml\n nothing is posted yet\n")
    told(capsys, "post", file, "-m", "as built")
    change(capsys, file)
    assert "the file has changed since the newest post" in told(capsys, "post", file, "--list")[1]
    told(capsys, "post", file, "-m", "215 kΩ came \x1b[31m")
    code, out, err = told(capsys, "post", file, "--list")
    assert (code, err) == (0, "")
    lines = out.splitlines()
    assert len(lines) == 4 and max(map(len, lines)) <= 80
    assert lines[1].split() == ["posted", "digest", "gain", "lower", "upper", "met", "message"]
    assert "139.80 dBΩ" in lines[2] and "4/4" in lines[2] and "215 kΩ came" in lines[2] and "as built" in lines[3]
    assert "\x1b" not in out


def test_json(capsys, file):
    told(capsys, "post", file, "-m", "as built")
    change(capsys, file)
    code, out, err = told(capsys, "post", file, "-m", "less", "--json")
    answer = json.loads(out)
    assert (code, err, answer["format"], answer["command"]) == (0, "", 1, "post")
    (entry,) = answer["files"]
    assert (entry["file"], entry["record"], entry["new"]) == (file, "front.posted.toml", True)
    assert entry["post"]["message"] == "less" and entry["before"]["message"] == "as built"
    assert entry["post"]["digest"] == entry["digest"] != entry["before"]["digest"]
    moved = {row["figure"]: (row["before"], row["after"]) for row in entry["moved"]}
    assert moved["overall.gain_db"] == (entry["before"]["figures"]["overall"]["gain_db"],
                                        entry["post"]["figures"]["overall"]["gain_db"])
    (same,) = json.loads(told(capsys, "post", file, "--json")[1])["files"]
    assert (same["new"], same["before"], same["moved"]) == (False, None, []) and same["post"] == entry["post"]
    (listed,) = json.loads(told(capsys, "post", file, "--list", "--json")[1])["files"]
    assert listed["posts"] == [entry["post"], entry["before"]] and listed["digest"] == entry["digest"]


def test_faults_exit_2_and_write_nothing(capsys, file):
    write("bad.toml", "format = 2\n")
    write("other.toml", read(file))
    write("other.posted.toml", "format = 1\n")
    for words, what in ((["bad.toml"], "not a known format"), (["none.toml"], "no such file"),
                        (["other.toml", "-m", "x"], "this is no record of a chain"),
                        (["other.posted.toml"], "this is a record, not a chain"),
                        ([file, "-m"], "expected one argument")):
        code, out, err = told(capsys, "post", *words)
        assert (code, out) == (2, "")
        assert what in err and "fix" in err
    assert sorted(os.listdir()) == ["bad.toml", "front.toml", "other.posted.toml", "other.toml"]
    assert read("other.posted.toml") == "format = 1\n"


def test_an_audit_says_nothing_of_a_record_that_is_not_there_or_holds(capsys, file):
    code, before, _ = told(capsys, "audit", file)
    assert code == 0
    told(capsys, "post", file)
    assert told(capsys, "audit", file) == (0, before, "")


def test_posted_asks_for_a_record_that_holds(capsys, file):
    code, out, err = told(capsys, "audit", "--posted", file)
    assert (code, err) == (1, "")
    assert out.splitlines()[-2:] == [" all 4 met", " nothing is posted: polebook post writes the record"]
    told(capsys, "post", file)
    code, out, _ = told(capsys, "audit", "--posted", file)
    assert (code, out.splitlines()[-1]) == (0, f" posted {date.today()}: the record holds")


def test_a_record_older_than_the_file(capsys, file):
    told(capsys, "post", file)
    change(capsys, file)
    for words, wanted in (([], 0), (["--posted"], 1)):
        code, out, err = told(capsys, "audit", *words, file)
        assert (code, err) == (wanted, "")
        assert f"the record is older than the file: posted {date.today()}," in " ".join(out.split())


def test_a_record_with_other_figures(capsys, file):
    told(capsys, "post", file)
    text = read("front.posted.toml")
    assert "\nupper_edge_hz = 404139\n" in text
    spoilt = text.replace("\nupper_edge_hz = 404139\n", "\nupper_edge_hz = 404000\n")
    spoilt = spoilt.replace(f'"{__version__}"', '"0.0.9"')
    write("front.posted.toml", spoilt)
    for words, wanted in (([], 0), (["--posted"], 1)):
        code, out, _ = told(capsys, "audit", *words, file)
        assert code == wanted
        assert ("by polebook 0.0.9, and by now overall.upper_edge_hz is 404139 and not 404000; polebook post brings it "
                "up to date") in " ".join(out.split())
    told(capsys, "post", file)
    assert told(capsys, "audit", "--posted", file)[0] == 0


def test_a_record_at_fault_is_told_and_counts_with_posted(capsys, file):
    write("front.posted.toml", "format = 1\n")
    for words, wanted in (([], 0), (["--posted"], 2)):
        code, out, err = told(capsys, "audit", *words, file)
        assert code == wanted
        assert "this is no record of a chain" in err
        assert ("the record beside the file can't be used" in out) and " all 4 met" in out
    code, (entry,) = judged(capsys, "--posted", file)
    assert (code, entry["exit"], entry["posted"]["state"]) == (2, 2, "fault")
    assert entry["problems"][0]["what"] == "this is no record of a chain"
    assert [row["met"] for row in entry["targets"]] == [True] * 4


def test_what_json_says_of_a_record(capsys, file):
    code, (entry,) = judged(capsys, file)
    assert (code, entry["posted"]["state"], entry["posted"]["date"]) == (0, "none", None)
    told(capsys, "post", file, "-m", "as built")
    code, (entry,) = judged(capsys, "--posted", file)
    posted = entry["posted"]
    assert (code, posted["state"], posted["record"]) == (0, "current", "front.posted.toml")
    assert (posted["date"], posted["message"]) == (str(date.today()), "as built")
    assert (posted["digest"], posted["version"]) == (entry["digest"], __version__)
    change(capsys, file)
    code, (entry,) = judged(capsys, "--posted", file)
    assert (code, entry["exit"], entry["posted"]["state"]) == (1, 1, "older")
    assert entry["posted"]["digest"] == posted["digest"] != entry["digest"]


def test_a_missed_target_is_missed_with_a_record_too(capsys, tmp_path):
    file = shutil.copy(LISTENER, tmp_path / "chain.toml")
    told(capsys, "post", file)
    code, (entry,) = judged(capsys, "--posted", file)
    assert (code, entry["posted"]["state"]) == (1, "current")


def test_the_name_of_a_record_stands_for_its_chain(capsys, file):
    told(capsys, "post", file)
    for words, files in ((["front.posted.toml"], [file]), (["front.posted.toml", file], [file]),
                         ([file, "front.posted.toml"], [file]), ([file, file], [file, file]),
                         (["./front.posted.toml", file], [file])):
        code, entries = judged(capsys, "--posted", *words)
        assert (code, [entry["file"] for entry in entries]) == (0, files)
    os.rename(file, "gone.toml")
    code, out, err = told(capsys, "audit", "--posted", "front.posted.toml")
    assert (code, out) == (2, "") and "front.toml: " in err and "no such file" in err


def test_a_yield_is_posted_as_it_is_audited(capsys, tmp_path):
    file = shutil.copy(CHAINS / "leaf-probe.toml", tmp_path / "probe.toml")
    _, out, _ = told(capsys, "post", file, "--json")
    code, (entry,) = judged(capsys, "--posted", file)
    (row,) = [row for row in entry["targets"] if row["name"] == "yield"]
    assert (code, entry["posted"]["state"]) == (0, "current")
    figures = json.loads(out)["files"][0]["post"]["figures"]
    assert figures["targets"]["yield"]["got_percent"] == round(100 * row["got"], 4)


def test_what_ctrl_c_stops_writes_nothing(capsys, tmp_path, monkeypatch):
    from polebook.plan import yielded

    def stopped(*_):
        yield 1, 10, None
        raise KeyboardInterrupt

    monkeypatch.setattr(yielded, "built", stopped)
    file = shutil.copy(CHAINS / "leaf-probe.toml", tmp_path / "probe.toml")
    assert main(["post", str(file)]) == 130
    assert os.listdir(tmp_path) == ["probe.toml"]


def _git(*words, **more):
    return subprocess.run(["git", *words], capture_output=True, text=True, check=False, **more)


@pytest.fixture
def repository(tmp_path, monkeypatch):
    """A repository with a chain in it, the hook of README pasted in, and `polebook` where a shell finds it."""
    if not shutil.which("git"):
        pytest.skip("no git here")
    tools = tmp_path / "tools"
    tools.mkdir()
    program = tools / "polebook"
    program.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m polebook "$@"\n')
    program.chmod(0o755)
    for name, value in environment(PATH=f"{tools}:{os.environ['PATH']}", HOME=str(tmp_path),
                                   GIT_CONFIG_NOSYSTEM="1").items():
        monkeypatch.setenv(name, value)
    for name in [name for name in os.environ if name.startswith("GIT_") and name != "GIT_CONFIG_NOSYSTEM"]:
        monkeypatch.delenv(name)
    root = tmp_path / "board"
    (root / "chains").mkdir(parents=True)
    monkeypatch.chdir(root)
    assert _git("init", "-q").returncode == 0
    for key, value in (("user.name", "tester"), ("user.email", "tester@localhost"), ("commit.gpgsign", "false")):
        _git("config", key, value)
    (hook, line) = re.findall(r"^```sh\n(.*?)^```$", README, re.DOTALL | re.MULTILINE)
    assert line == "polebook audit --posted chains/*.toml\n"
    place = root / ".git" / "hooks" / "pre-commit"
    place.parent.mkdir(exist_ok=True)
    place.write_text(hook)
    place.chmod(0o755)
    shutil.copy(PHOTODIODE, "chains/front.toml")
    return root


def test_the_hook_of_the_readme_lets_only_what_is_posted_pass(repository, capsys):
    chain = "chains/front.toml"
    _git("add", ".")
    assert told(capsys, "post", chain, "-m", "as built")[0] == 0
    refused = _git("commit", "-q", "-m", "as built")  # the record lies in the folder, and is not part of the commit
    assert refused.returncode != 0 and "nothing is posted" in refused.stdout + refused.stderr
    _git("add", ".")
    passed = _git("commit", "-q", "-m", "as built")
    assert passed.returncode == 0, passed.stderr
    assert _git("ls-files").stdout.split() == ["chains/front.posted.toml", chain]
    change(capsys, chain)
    refused = _git("commit", "-q", "-a", "-m", "215 kΩ came")
    assert refused.returncode != 0 and "the record is older than the file" in refused.stdout + refused.stderr
    assert not [name for name in os.listdir() if name not in (".git", "chains")]


def test_the_excerpt_of_the_diff_is_what_git_shows(tmp_path, capsys, monkeypatch):
    if not shutil.which("git"):
        pytest.skip("no git here")
    monkeypatch.chdir(tmp_path)
    (excerpt,) = re.findall(r"^```diff\n(.*?)^```$", README, re.DOTALL | re.MULTILINE)
    shutil.copy(LISTENER, "chain.toml")
    told(capsys, "post", "chain.toml")
    shutil.copy("chain.posted.toml", "before")
    change_to = ["set", "chain.toml", "Q2.c_comp", "1p"]
    assert main(change_to) == 0
    told(capsys, "post", "chain.toml")
    assert excerpt in _git("diff", "--no-index", "before", "chain.posted.toml").stdout
