"""Finding the command: help, version, unknown words, files that are named like commands."""

import shutil

import pytest

from polebook import __version__
from polebook.cli.main import COMMANDS, load, main
from tests.cli.helpers import LISTENER


def told(capsys, *args):
    code = main([str(arg) for arg in args])
    out, err = capsys.readouterr()
    return code, out, err


@pytest.mark.parametrize("args", [[], ["--help"], ["-h"], ["help"]])
def test_help_names_every_command(capsys, args):
    code, out, err = told(capsys, *args)
    assert code == 0
    assert err == ""
    for name, about in COMMANDS.items():
        assert f"  {name} " in out
        assert about in out
    assert max(map(len, out.splitlines())) <= 80


@pytest.mark.parametrize("option", ["--version", "-V"])
def test_version(capsys, option):
    assert told(capsys, option) == (0, f"polebook {__version__}\n", "")


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_has_help_of_its_own(capsys, name):
    code, out, err = told(capsys, name, "--help")
    assert code == 0
    assert out.startswith(f"usage: polebook {name}")
    assert load(name).about.split(".")[0] in out
    assert err == ""


@pytest.mark.parametrize(("word", "near"), [("sohw", "show"), ("audti", "audit"), ("kind", "kinds"), ("unst", "unset")])
def test_an_unknown_command_gets_the_nearest_one(capsys, word, near):
    code, out, err = told(capsys, word, "x.toml")
    assert (code, out) == (2, "")
    assert err == f'polebook: "{word}" is neither a command nor a file here\n    fix  did you mean polebook {near}?\n'


def test_an_unknown_word_unlike_any_command(capsys):
    code, _, err = told(capsys, "zzzz")
    assert code == 2
    assert err.endswith("    fix  polebook --help lists the commands\n")


def test_an_option_before_any_command(capsys):
    code, _, err = told(capsys, "--json")
    assert code == 2
    assert 'no option "--json" stands before a command' in err


@pytest.mark.parametrize(
    "args",
    [
        ["show"],
        ["audit"],
        ["set", "x.toml", "Q1.rc"],
        ["unset", "x.toml"],
        ["show", "a", "b"],
        ["show", "x.toml", "--page", "pages"],
        ["show", "x.toml", "--pag", "lines"],
        ["kinds", "a", "b"],
    ],
)
def test_a_command_line_at_fault_exits_2_and_says_where_help_is(capsys, args):
    code, out, err = told(capsys, *args)
    assert (code, out) == (2, "")
    assert err.startswith(f"polebook {args[0]}: ")
    assert f"    fix  polebook {args[0]} --help tells what it takes" in err


def test_a_file_alone_prints_its_ledger(capsys):
    alone = told(capsys, LISTENER)
    assert alone == told(capsys, "show", LISTENER)
    assert alone[0] == 0


def test_a_file_alone_takes_the_options_of_show(capsys):
    assert told(capsys, LISTENER, "--page", "bias") == told(capsys, "show", LISTENER, "--page", "bias")


@pytest.mark.parametrize("name", ["show", "--help", "chain"])
def test_a_file_named_like_a_command_is_reached_by_its_path(capsys, tmp_path, monkeypatch, name):
    monkeypatch.chdir(tmp_path)
    shutil.copy(LISTENER, name)
    code, out, err = told(capsys, f"./{name}")
    assert (code, err) == (0, "")
    assert "Wire-break listener" in out
    assert told(capsys, "--", name)[0] == 0


def test_a_file_that_is_no_command_is_found_by_its_bare_name(capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    shutil.copy(LISTENER, "chain")
    assert told(capsys, "chain")[0] == 0


@pytest.mark.parametrize("name", ["missing.toml", "no/such/chain", "./show"])
def test_what_can_only_be_a_file_is_told_as_a_missing_one(capsys, tmp_path, monkeypatch, name):
    monkeypatch.chdir(tmp_path)
    code, out, err = told(capsys, name)
    assert (code, out) == (2, "")
    assert name in err
    assert "no such file" in err
    assert "    fix  " in err


@pytest.mark.parametrize("name", ["a\0b", "x" * 5000, "a\x1b[31mb"])
def test_words_that_no_file_can_be_named(capsys, name):
    code, out, err = told(capsys, name)
    assert (code, out) == (2, "")
    assert all(char.isprintable() or char == "\n" for char in err)


def test_control_characters_of_the_command_line_are_made_visible(capsys):
    code, _, err = told(capsys, "audit", "\x1b[31m\u202e.toml")
    assert code == 2
    assert "\x1b" not in err
    assert "\u202e" not in err
    assert "\\x1b[31m\\u202e.toml" in err
