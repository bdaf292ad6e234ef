"""Chains for the bias tests: short texts of their parts, read by the program's own reader."""

from __future__ import annotations

from typing import Any

from polebook.chain.model import Chain
from polebook.chain.read import parse

NPN = {"family": "bjt", "polarity": "npn", "beta": 150, "vbe": 0.65}
PNP = {**NPN, "polarity": "pnp", "beta": 80, "vbe": 0.7}
NMOS = {"family": "mosfet", "polarity": "n", "k": 0.02, "vgs_th": 1.8}
JFET = {"family": "jfet", "polarity": "n", "idss": 0.008, "vgs_off": 2.5}
TRIODE = {"family": "triode", "mu": 60, "gm": 0.0016, "gm_ia": 0.0012}
OPAMP = {"family": "opamp", "gbw": 1e7}

MIRROR = {"npn": "pnp", "pnp": "npn", "n": "p", "p": "n"}
RAIL = {"positive": "negative", "negative": "positive", "ground": "ground"}


def _literal(value: object) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return f'"{value}"'
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{k} = {_literal(v)}" for k, v in value.items()) + " }"
    if isinstance(value, list):
        return "[" + ", ".join(_literal(v) for v in value) + "]"
    return repr(value)


def _table(header: str, values: dict[str, object]) -> str:
    return f"{header}\n" + "".join(f"{key} = {_literal(value)}\n" for key, value in values.items())


def text(stages: list[dict[str, object]], cards: dict[str, dict[str, object]], supply: dict[str, object] | None = None,
         source: dict[str, object] | None = None, load: dict[str, object] | None = None) -> str:
    """The text of a chain file; stages are named Q1, Q2, ... where they have no name."""
    parts = ["format = 1\n", _table("[supply]", supply or {"positive": 12})]
    parts.append(_table("[source]", source or {"kind": "voltage", "resistance": 600}))
    for k, stage in enumerate(stages, 1):
        parts.append(_table("[[stage]]", {"name": f"Q{k}", **stage}))
    parts.append(_table("[load]", load or {}))
    parts += [_table(f"[device.{name}]", card) for name, card in cards.items()]
    return "\n".join(parts)


def chain(*args: Any, **kwargs: Any) -> Chain:
    """The chain of `text`."""
    return parse(text(*args, **kwargs), "bias.toml")
