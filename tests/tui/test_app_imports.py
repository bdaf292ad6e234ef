"""Textual is the shell's alone: what decides and what draws runs without it, and commands that print never see it."""

import re

from tests.test_imports import SIX, modules_after
from tests.tui.desk import CHAINS

SOURCES = CHAINS.parent / "src" / "polebook"
SHELL = {"app.py", "styles.py", "terminal.py"}


def test_deciding_and_drawing_need_no_textual():
    names, rows = modules_after(
        f"from polebook.tui.control import opening, press\nfrom polebook.tui.draw.screen import screen\n"
        f"state, _ = press(opening({SIX!r}), 'plus', '+', 0.0)\nresult = len(screen(state, 80, 24))")
    assert rows == 24
    assert not names & {"textual", "rich", "scipy"}


def test_a_file_without_a_terminal_needs_nothing_of_the_app():
    names, code = modules_after(
        f"import io, sys; sys.stdout = io.StringIO(); from polebook.cli.main import main; result = main([{SIX!r}])")
    assert code == 0
    assert not names & {"textual", "rich", "scipy", "asyncio"}


def test_the_shell_is_three_files():
    wants = re.compile(r"^\s*(?:from|import) (?:textual|rich)\b", re.MULTILINE)
    found = {path.relative_to(SOURCES).as_posix() for path in SOURCES.rglob("*.py")
             if wants.search(path.read_text(encoding="utf-8"))}
    assert found == {f"tui/{name}" for name in SHELL}


def test_private_names_of_textual_are_in_one_file():
    private = re.compile(r"from textual\.(?:_|drivers\.)")
    found = {path.name for path in SOURCES.rglob("*.py") if private.search(path.read_text(encoding="utf-8"))}
    assert found == {"terminal.py"}
