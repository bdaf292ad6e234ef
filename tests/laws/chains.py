"""The chains on which the laws are tried: the demo chains, and others with every kind and family."""

from __future__ import annotations

from pathlib import Path

from polebook.chain.model import Chain
from polebook.chain.read import load

ROOT = Path(__file__).resolve().parents[2]
PATHS = sorted([*(ROOT / "chains").glob("*.toml"), *(ROOT / "tests" / "independent" / "chains").glob("*.toml")])
BY_NAME = {path.stem: path for path in PATHS}
NO_BAND = {"oscillating", "narrow-band", "follower-into-trap"}
WITH_BAND = [name for name in BY_NAME if name not in NO_BAND]


def chain(name: str) -> Chain:
    return load(str(BY_NAME[name]))
