"""What the record of a chain is called."""

from __future__ import annotations

import os

ENDING = ".posted.toml"
_CHAIN = ".toml"


def record_of(path: str | os.PathLike[str]) -> str:
    """Path of the record of the chain file at `path`: `a/chain.posted.toml` of `a/chain.toml`."""
    name = os.fspath(path)
    return (name[: -len(_CHAIN)] if name.lower().endswith(_CHAIN) else name) + ENDING


def chain_of(path: str | os.PathLike[str]) -> str | None:
    """Path of the chain file whose record is named like `path`; None where `path` is not named like a record."""
    name = os.fspath(path)
    if not name.lower().endswith(ENDING):
        return None
    stem = name[: -len(ENDING)]
    return stem if os.path.isfile(stem) and not os.path.exists(stem + _CHAIN) else stem + _CHAIN
