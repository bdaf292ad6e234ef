"""What README and DEVELOPERS promise: commands that are there, an excerpt that is printed, names that stand."""

import re
import shutil
import subprocess
import sys

import pytest

from polebook.cli.main import COMMANDS, load, main
from tests.cli.helpers import LISTENER, PHOTODIODE, ROOT

README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
# the indented lines: what a reader is told to type, less the explanation beside it
TYPED = [re.split(r" {2,}", line.strip())[0] for line in README.splitlines() if re.match(r" {4}\S", line)]

MEASURED = '\n[[bench]]\ngain = "59 dB"\nfile = "sweep.csv"\n'


def _fenced(language):
    return [text for kind, text in re.findall(r"^```(\w*)\n(.*?)^```$", README, re.DOTALL | re.MULTILINE)
            if kind == language]


def test_the_screen_is_what_the_app_draws():
    (screen,) = _fenced("text")
    assert screen == (ROOT / "tests" / "golden" / "screens" / "ledger.80x24.txt").read_text(encoding="utf-8")


def test_the_python_example_runs():
    (example,) = _fenced("python")
    done = subprocess.run([sys.executable, "-c", example], cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    assert "Q2.c_comp owns 71 %" in done.stdout and "Q1" in done.stdout


def test_the_excerpt_is_what_the_first_command_prints(capsys):
    excerpt, _ = _fenced("")
    assert "bash .ci/polebook show chains/wire-break-listener.toml" in TYPED
    assert main(["show", str(LISTENER)]) == 0
    printed = capsys.readouterr().out
    blocks = excerpt.rstrip().split("\n\n")
    assert len(blocks) == 2
    for block in blocks:
        assert block in printed


def test_the_excerpt_of_the_fit_is_what_it_prints(capsys):
    _, excerpt = _fenced("")
    assert "`polebook fit chains/shellac-desk.toml`" in README
    assert main(["fit", str(ROOT / "chains" / "shellac-desk.toml")]) == 0
    assert excerpt in capsys.readouterr().out


def test_the_excerpt_of_the_spread_is_what_it_prints(capsys):
    (excerpt,) = _fenced("console")
    assert "`polebook spread chains/leaf-probe.toml`" in README
    assert main(["spread", str(ROOT / "chains" / "leaf-probe.toml")]) == 0
    printed = capsys.readouterr().out
    blocks = excerpt.rstrip().split("\n\n")
    assert len(blocks) == 3
    for block in blocks:
        assert block in printed


@pytest.mark.parametrize("line", [line for line in TYPED if line.startswith("polebook ")])
def test_every_command_of_the_readme_runs(line, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "FILE").write_text(LISTENER.read_text(encoding="utf-8") + MEASURED, encoding="utf-8")
    (tmp_path / "sweep.csv").write_text("Hz, dB\n20000, 57.9\n100000, 59.5\n300000, 57.8\n1000000, 51\n2e6, 44\n")
    shutil.copy(PHOTODIODE, tmp_path / "OTHER")
    words = [word.removesuffix("...") for word in line.split()[1:]]
    assert main(words) == (1 if words[0] == "audit" else 0)
    assert capsys.readouterr().err == ""


def test_every_command_is_in_the_readme():
    told = {line.split()[1] for line in TYPED if line.startswith("polebook ")}
    assert told == {*COMMANDS, "FILE"}
    assert all(load(name).about for name in COMMANDS)


def test_the_remedy_that_the_readme_names_is_one(tmp_path):
    assert "`polebook unset chains/wire-break-listener.toml Q2.c_comp`" in README
    copy = str(shutil.copy(LISTENER, tmp_path / "chain.toml"))
    assert main(["audit", copy]) == 1
    assert main(["unset", copy, "Q2.c_comp"]) == 0
    assert main(["audit", copy]) == 0


def test_the_test_command_is_the_one_that_ci_runs():
    assert "bash .ci/test" in TYPED
    assert "bash .ci/test" in (ROOT / ".ci" / "run").read_text(encoding="utf-8")


def test_every_file_that_the_documents_name_is_there():
    named = re.findall(r"`((?:\.ci|src|tests|chains|report|cli|stages|devices|ledger)/[\w./-]*)`", README + DEVELOPERS)
    assert len(named) > 8
    for name in named:
        assert (ROOT / name).exists() or (ROOT / "src" / "polebook" / name).exists(), name


def test_every_package_has_its_line_among_the_layers():
    packages = {path.name for path in (ROOT / "src" / "polebook").iterdir() if (path / "__init__.py").exists()}
    assert {f"{name}/" for name in packages} <= set(DEVELOPERS.split())
