"""Running the command line in this process and as a program of its own."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

from polebook.cli.main import main

ROOT = Path(__file__).parent.parent.parent
CHAINS = ROOT / "chains"
LISTENER = CHAINS / "wire-break-listener.toml"
SIX = CHAINS / "six-stage.toml"
PHOTODIODE = CHAINS / "photodiode-front.toml"
_RECODING = ("NO_COLOR", "TERM", "PYTHONIOENCODING", "PYTHONUTF8")
ALL = (LISTENER, SIX, PHOTODIODE)


def environment(**more):
    """The process's environment without what would colour or recode the output."""
    kept = {key: value for key, value in os.environ.items() if key not in _RECODING}
    return {**kept, "PYTHONPATH": str(ROOT / "src"), **more}


def command(*args):
    """The words that start the program."""
    return [sys.executable, "-m", "polebook", *map(str, args)]


def program(*args, **env):
    """The program run to its end, its output as bytes."""
    return run(command(*args), env=environment(**env))


def run(words, stdout=subprocess.PIPE, env=None):
    """Any program run to its end, its messages as bytes."""
    return subprocess.run(
        words, stdout=stdout, stderr=subprocess.PIPE, env=env or environment(), timeout=60, check=False
    )


def telling(name):
    """A command run in this process: (capsys, its arguments) -> its exit code, output and messages."""
    def told(capsys, *args):
        code = main([name, *map(str, args)])
        out, err = capsys.readouterr()
        return code, out, err
    return told


def answering(name):
    """The same with --json, which ends well and says nothing beside: its answer."""
    def as_json(capsys, *args):
        code, out, err = telling(name)(capsys, *args, "--json")
        assert (code, err) == (0, "")
        return json.loads(out)
    return as_json
