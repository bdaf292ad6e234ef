"""What is imported when: in a clean interpreter, so that nothing that another test imported counts."""

import json
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
SIX = str(ROOT / "chains" / "six-stage.toml")


def modules_after(code):
    """Top-level names in sys.modules after `code`, and what `code` left in `result`."""
    script = f"result = None\n{code}\nimport json, sys\nsys.stderr.write(json.dumps([sorted(sys.modules), result]))"
    words = [sys.executable, "-I", "-c", _with_path(script)]
    done = subprocess.run(words, capture_output=True, text=True, timeout=60, check=True)
    names, result = json.loads(done.stderr)
    return set(names), result


def _with_path(script):
    return f"import sys; sys.path.insert(0, {str(ROOT / 'src')!r})\n{script}"


@pytest.mark.parametrize(
    "code", ["import polebook", "import polebook.cli.main", "import polebook.cli.show, polebook.cli.audit"]
)
def test_the_command_line_starts_light(code):
    names, _ = modules_after(code)
    assert "polebook" in names
    assert not names & {"textual", "rich", "scipy", "numpy", "polebook.chain", "polebook.book"}


def test_a_faulty_file_is_told_without_numpy(tmp_path):
    faulty = tmp_path / "faulty.toml"
    faulty.write_text("format = 2\n")
    names, code = modules_after(
        f"import os, sys; sys.stderr = open(os.devnull, 'w')\n"
        f"from polebook.cli.main import main; result = main(['show', {str(faulty)!r}])\n"
        f"sys.stderr = sys.__stderr__"
    )
    assert code == 2
    assert "numpy" not in names


@pytest.mark.parametrize("command", ["audit", "show"])
def test_a_ledger_needs_numpy_alone(command):
    names, code = modules_after(f"from polebook.cli.main import main; result = main([{command!r}, {SIX!r}])")
    assert code in (0, 1)
    assert "numpy" in names
    assert not names & {"textual", "rich", "scipy"}


def test_a_fit_takes_scipy_once_it_is_made():
    names, _ = modules_after("import polebook.record.fit, polebook.record.compared")
    assert "numpy" in names
    assert not names & {"textual", "rich", "scipy"}


def test_an_audit_needs_no_poles_and_no_leverage():
    names, code = modules_after(f"from polebook.cli.main import main; result = main(['audit', {SIX!r}])")
    assert code == 0 and "polebook.book.ledger" in names
    assert not names & {"polebook.book.leverage", "polebook.book.poles", "polebook.solve.poles", "polebook.solve.modes"}


def test_kinds_needs_no_numbers():
    names, code = modules_after("from polebook.cli.main import main; result = main(['kinds'])")
    assert code == 0
    assert not names & {"numpy", "textual", "rich", "scipy"}


def test_the_public_face():
    names, result = modules_after(
        f"import polebook\nchain = polebook.load({SIX!r})\nbefore = len([n for n in sys.modules if n == 'numpy'])\n"
        "ledger = polebook.ledger(chain)\nresult = [chain.stages[0].name, before, polebook.__version__]"
    )
    assert result[:2] == ["Q1", 0]
    assert result[2].count(".") == 2
    assert "numpy" in names


@pytest.mark.parametrize(
    "args",
    [
        ["parts", SIX],
        ["card", SIX, "N", "--from", SIX],
        ["start", "--help"],
        ["sweep", SIX, "Q1.rcc", "1k:2k"],
        ["start", SIX],
    ],
)
def test_what_computes_no_figure_needs_no_numpy(args):
    names, _ = modules_after(
        f"import os, sys; sys.stderr = open(os.devnull, 'w')\n"
        f"from polebook.cli.main import main; result = main({args!r})\nsys.stderr = sys.__stderr__"
    )
    assert not names & {"numpy", "textual", "rich", "scipy"}
