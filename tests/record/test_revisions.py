"""Revisions of a file and its text at one of them, out of a repository of git's; `compare --rev` on the same."""

import json
import os
import shutil
import subprocess
from pathlib import Path

import pytest

from polebook.chain import read
from polebook.cli.main import main
from polebook.problem import ProblemsFound
from polebook.record import git, revisions

pytestmark = pytest.mark.skipif(shutil.which("git") is None, reason="there is no git here")
LISTENER = (Path(__file__).parent.parent.parent / "chains" / "wire-break-listener.toml").read_text(encoding="utf-8")
FIRST, NOW = "first name.toml", "lauscher *[ä].toml"
DAY = "2026-05-04"
COMMITS = (
    ("Less compensation", FIRST, (('"4p7" ', '"1p5" '),)),
    ("A follower between the gain stages", FIRST, (
        ('[[stage]]\nname        = "Q2"', '[[stage]]\nname = "QF"\nkind = "emitter-follower"\ndevice = "VF"\n'
         're = "2k2"\n\n[[stage]]\nname        = "Q2"'),)),
    ("Another name for the file and for stages", NOW, (
        ('name        = "Q3"', 'name        = "Q4"'), ('name        = "Q2"', 'name        = "Q3"'),
        ('name = "QF"', 'name = "Q2"'))),
    ("", NOW, (('kind        = "common-emitter"\ndevice      = "VF"\ncouple      = "4n7"',
                'kind = "cascode"\ndevice = "VF"\nvce = 3\ncouple      = "4n7"'),
               ('positive = "12"', 'positive = "15"'))),
    ("Faster transistors, more gain", NOW, (
        ('ft            = "600M"', 'ft            = "900M"'), ("[device.VF]", "[device.W]"), ('"VF"', '"W"'),
        ('re          = "47"', 're          = "39"'))),
)
TOLD = (
    ["c_comp of Q2: 4p7 to 1p5"],
    ["QF added after Q1: emitter-follower, device VF, re 2k2"],
    ["QF renamed to Q2", "Q2 renamed to Q3", "Q3 renamed to Q4"],
    ["positive of supply: 12 to 15", "Q1: common-emitter becomes cascode", "vce of Q1 put in: 3"],
    ["re of Q3: 47 to 39", "card VF renamed to W", "ft of card W: 600M to 900M"],
)


def call(folder, *words):
    who = {f"GIT_{role}_{what}": "x" for role in ("AUTHOR", "COMMITTER") for what in ("NAME", "EMAIL")}
    plain = {"GIT_CONFIG_GLOBAL": os.devnull, "GIT_CONFIG_NOSYSTEM": "1", "GIT_COMMITTER_DATE": f"{DAY}T12:00:00+02:00"}
    kept = {key: value for key, value in os.environ.items() if not key.startswith("GIT_")}
    return subprocess.run(["git", "-C", str(folder), *words], env={**kept, **who, **plain}, check=True, timeout=60,
                          capture_output=True, text=True).stdout.strip()


@pytest.fixture(scope="module")
def board(tmp_path_factory):
    """A repository with the listener in a folder of its own: as built, and five commits that change it.

    What its configuration has git run leaves a mark, were it ever run.
    """
    top = tmp_path_factory.mktemp("a board")
    folder = top / "ketten ü"
    folder.mkdir()
    call(top, "init", "-q", "-b", "main")
    text = LISTENER
    (folder / FIRST).write_text(text, encoding="utf-8")
    call(top, "add", ".")
    call(top, "commit", "-q", "-m", "As built")
    for subject, name, edits in COMMITS:
        for old, new in edits:
            assert old in text, old
            text = text.replace(old, new)
        if name == NOW and (folder / FIRST).exists():
            call(folder, "mv", FIRST, NOW)
        (folder / name).write_text(text, encoding="utf-8")
        call(top, "commit", "-q", "-a", "--allow-empty-message", "-m", subject)
    mark = top / "run"
    mark.write_text(f'#!/bin/sh\ntouch "{top}/was run"\ncat\n')
    mark.chmod(0o755)
    settings = (("core", "fsmonitor"), ("core", "pager"), ("diff", "external"), ("gpg", "program"),
                ('diff "x"', "textconv"), ('filter "x"', "smudge"), ('filter "x"', "clean"))
    lines = "".join(f'[{table}]\n{key} = "\\"{mark}\\""\n' for table, key in settings)
    with (top / ".git" / "config").open("a", encoding="utf-8") as config:
        config.write(lines + "[log]\nshowSignature = true\ndate = relative\n[color]\nui = always\n")
    (top / ".git" / "info" / "attributes").write_text("* diff=x filter=x\n")
    return folder


@pytest.fixture(autouse=True)
def _own_settings_of_git(monkeypatch):
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", os.devnull)
    monkeypatch.setenv("GIT_CONFIG_NOSYSTEM", "1")


@pytest.fixture
def file(board):
    return str(board / NOW)


def refused(do, *args):
    with pytest.raises(ProblemsFound) as caught:
        do(*args)
    (problem,) = caught.value.problems
    assert problem.place and problem.why and problem.fix
    return problem


def told(capsys, *words):
    code = main(["compare", *map(str, words)])
    return code, *capsys.readouterr()


def test_every_revision_is_listed_newest_first_and_through_the_new_name(file, board):
    found = revisions.revisions(file)
    assert [one.subject for one in found] == [*(subject for subject, _, _ in reversed(COMMITS)), "As built"]
    assert [one.name for one in found] == [f"ketten ü/{name}" for name in (NOW, NOW, NOW, FIRST, FIRST, FIRST)]
    assert [one.in_work_tree for one in found] == [True, False, False, False, False, False]
    assert {one.date for one in found} == {f"{DAY}T12:00:00+02:00"} and found[0].day == DAY
    assert found[0].hash == call(board, "rev-parse", "HEAD") and found[0].hash.startswith(found[0].short)
    assert revisions.revisions(file, 2) == found[:2]


def test_the_text_of_a_revision_is_what_was_committed(file, board):
    found = revisions.revisions(file)
    assert revisions.text_at(file, found[-1]) == revisions.text_at(file, "HEAD~5") == LISTENER
    assert revisions.text_at(file, "HEAD") == (board / NOW).read_text(encoding="utf-8")
    assert {revisions.text_at(file, name) for name in ("main", found[0].short, ":/Faster")} == {
        revisions.text_at(file, "HEAD")}
    digest = read.parse(LISTENER, "x").digest
    assert revisions.holding(file, digest) == found[-1] and revisions.holding(file, "0" * 64) is None
    mark = board.parent / "was run"
    assert not mark.exists()
    call(board, "status")
    assert mark.exists()  # the trap does catch what goes by the repository's own settings
    mark.unlink()


def test_the_newest_other_revision(file, board):
    now = revisions.before_now(file)
    assert now == revisions.revisions(file)[1]
    text = (board / NOW).read_text(encoding="utf-8")
    try:
        (board / NOW).write_bytes(text.replace("\n", "\r\n").encode())  # as git may check it out
        assert revisions.before_now(file) == now
        (board / NOW).write_text(text + "# new\n", encoding="utf-8")
        assert revisions.before_now(file).hash == call(board, "rev-parse", "HEAD")
    finally:
        (board / NOW).write_text(text, encoding="utf-8")


@pytest.mark.parametrize("asked", ["-x", "--output=x", "^HEAD", "HEAD~99", "main..HEAD", "", " ", "HEAD^{tree}", "a\nb",
                                   "a\0b", "@{u}", "HEAD:ketten ü"])
def test_what_names_no_revision_is_refused(file, board, asked):
    problem = refused(revisions.revision, file, asked)
    assert problem.what.endswith(" is not a revision") and asked in problem.what
    assert ("is an option" in problem.why) == asked.startswith("-")
    assert not (board / "x").exists()


def test_a_file_that_was_not_there_is_told_with_its_first_revision(board):
    late = board / "late.toml"
    late.write_text(LISTENER + "# late\n", encoding="utf-8")
    try:
        assert refused(revisions.revisions, str(late)).what == "git does not follow this file"
        assert refused(revisions.text_at, str(late), "HEAD").what == "git does not follow this file"
        call(board, "-c", "filter.x.clean=cat", "add", late.name)
        assert refused(revisions.revisions, str(late)).what == "no revision holds this file yet"
        call(board, "-c", "filter.x.clean=cat", "commit", "-q", "-m", "late")
        first = revisions.revisions(str(late))[-1]
        assert first.subject == "late"
        problem = refused(revisions.text_at, str(late), "HEAD~3")
        assert problem.what == 'the file is not in revision "HEAD~3"' and first.short in problem.why
        assert refused(revisions.before_now, str(late)).what == "there is no other revision of this file"
    finally:
        call(board, "reset", "-q", "HEAD~1")
        late.unlink()


def test_without_git_without_a_repository_without_a_commit(file, tmp_path, monkeypatch):
    alone = tmp_path / "alone.toml"
    alone.write_text(LISTENER, encoding="utf-8")
    monkeypatch.setenv("GIT_CEILING_DIRECTORIES", str(tmp_path.parent))
    assert refused(revisions.revisions, str(alone)).what == "there is no git repository around this file"
    call(tmp_path, "init", "-q")
    assert refused(revisions.revision, str(alone), "HEAD").what == "this repository has no commit yet"
    assert refused(revisions.revisions, str(alone)).what == "git does not follow this file"
    monkeypatch.setenv("PATH", str(tmp_path))
    assert refused(revisions.revisions, file).what == "there is no git program on this machine's PATH"


def test_a_git_that_does_not_answer_or_fails_is_given_up(file, tmp_path, monkeypatch):
    fake = tmp_path / "git"
    fake.write_text("#!/bin/sh\nexec sleep 60\n")
    fake.chmod(0o755)
    monkeypatch.setenv("PATH", f"{tmp_path}{os.pathsep}{os.environ['PATH']}")
    monkeypatch.setattr(git, "LONGEST_S", 0.2)
    assert refused(revisions.revisions, file).what == "git gave no answer in 0.2 seconds"
    fake.write_text("#!/bin/sh\necho \"fatal: detected dubious ownership in repository at '/x'\" >&2\nexit 128\n")
    monkeypatch.setattr(git, "LONGEST_S", 10.0)
    assert "git says: detected dubious ownership" in refused(revisions.text_at, file, "HEAD").why


def test_it_is_the_folder_of_the_file_that_counts(file, board, tmp_path, monkeypatch):
    monkeypatch.setenv("GIT_DIR", str(tmp_path))  # as a hook has it
    monkeypatch.setenv("GIT_EXTERNAL_DIFF", str(board.parent / "run"))
    monkeypatch.chdir(board)
    assert len(revisions.revisions(NOW)) == 6
    link = tmp_path / "link.toml"
    link.symlink_to(file)
    assert len(revisions.revisions(str(link))) == 6
    other = tmp_path / "another tree"
    call(board, "-c", "filter.x.smudge=cat", "worktree", "add", "-q", str(other), "HEAD~1")
    try:
        assert [one.in_work_tree for one in revisions.revisions(str(other / "ketten ü" / NOW), 2)] == [True, False]
        assert revisions.text_at(str(other / "ketten ü" / NOW), "main") == revisions.text_at(file, "HEAD")
    finally:
        call(board, "worktree", "remove", "--force", str(other))


@pytest.mark.parametrize("at", range(len(COMMITS)))
def test_compare_names_what_each_commit_did(capsys, file, at):
    back = len(COMMITS) - at
    code, out, _ = told(capsys, file, "--rev", f"HEAD~{back}..HEAD~{back - 1}", "--json")
    answer = json.loads(out)
    assert code == 0 and [change["text"] for change in answer["changes"]] == TOLD[at]
    assert answer["files"][1]["revision"]["subject"] == COMMITS[at][0]
    assert [one["moved"] for one in answer["figures"]].count(True) == 0 or at != 2
    if at == 3:
        shares = {one["name"]: one for one in answer["causes"]["figures"]}
        assert len(answer["causes"]["items"]) == 3
        assert shares["overall.gain_db"]["causes"][0]["share"] > 0.8  # the rail


def test_compare_with_the_file_as_it_is(capsys, file):
    code, out, _ = told(capsys, file, "--rev", "HEAD~5")
    assert code == 0 and ": As built\n" in out.replace("\n         ", " ") and " after   the file as it is\n" in out
    assert f"as ketten ü/{FIRST}" in out.replace("\n         ", " ")
    assert "card VF renamed to W" in out and "Q2 added after Q1" in out and "upper edge" in out
    code, alone, _ = told(capsys, file)
    assert code == 0 and " without a subject\n" in alone and "  1  re of Q3: 47 to 39\n" in alone


@pytest.mark.parametrize("asked", ["-x", "nix", "HEAD~3..", "HEAD~3...HEAD", ""])
def test_compare_with_what_is_no_revision_ends_with_a_message(capsys, file, asked):
    code, out, err = told(capsys, file, "--rev", asked)
    assert (code, out) == (2, "") and "    fix  " in err and "Traceback" not in err


def test_a_revision_at_fault_is_told_with_its_line(capsys, file, board):
    good = (board / NOW).read_text(encoding="utf-8")
    try:
        (board / NOW).write_text(good.replace('"39"', '"39 F"'), encoding="utf-8")
        call(board, "-c", "filter.x.clean=cat", "commit", "-q", "-a", "-m", "half an edit")
        (board / NOW).write_text(good, encoding="utf-8")
        code, out, err = told(capsys, file)
        short = call(board, "rev-parse", "HEAD")[:8]
        assert (code, out) == (2, "") and f"{short}:ketten ü/{NOW}:" in err and '"39 F" is not a resistance' in err
    finally:
        (board / NOW).write_text(good, encoding="utf-8")
        call(board, "reset", "-q", "HEAD~1")
