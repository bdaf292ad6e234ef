"""Chain files for the tests: a small one in pieces, and one that states every key of every kind and card."""

from __future__ import annotations

from collections.abc import Iterable

from polebook.chain import tables
from polebook.devices.registry import FAMILIES
from polebook.param import Param
from polebook.quantity import DIMENSIONS
from polebook.stages.registry import KINDS

HEAD = "format = 1\n"
SOURCE = '[source]\nkind = "voltage"\nresistance = "600"\n'
STAGE = '[[stage]]\nname = "Q1"\nkind = "common-emitter"\ndevice = "D"\nic = "1m"\nrc = "2k2"\n'
CARD = '[device.D]\nfamily = "bjt"\nbeta = 200\n'

BLOCK = '[[stage]]\nname = "B1"\nkind = "block"\n'
LADDER = '[[stage]]\nname = "L1"\nkind = "ladder"\n'
FET = '[device.F]\nfamily = "mosfet"\nk = "2m"\n'
JFET = '[device.J]\nfamily = "jfet"\nidss = "5m"\nvgs_off = "2"\n'
VALVE = '[device.V]\nfamily = "triode"\nmu = 100\ngm = "1.6m"\n'
OPAMP = '[device.A]\nfamily = "opamp"\ngbw = "10M"\n'


def small(head: str = HEAD, source: str = SOURCE, stage: str = STAGE, card: str = CARD, rest: str = "") -> str:
    """A sound file of one stage, with pieces of it exchanged."""
    return head + source + stage + rest + card


def stage(kind: str, keys: str = "", device: str = "", name: str = "S1") -> str:
    """One [[stage]] table."""
    lines = ["[[stage]]", f'name = "{name}"', f'kind = "{kind}"', *([f'device = "{device}"'] if device else []), keys]
    return "\n".join(lines) + "\n"


# keys that exclude others of their table, or that only stand in the place of others
_LEFT_OUT = {
    "stage": {"rg1", "rg2", "nf", "nf_source", "left_out"},
    "mosfet": {"gm_id"},
    "jfet": {"gm_id"},
    "triode": {"rp"},
}
_WORDS = {
    "date": "2026-05-04",
    "flag": "false",
    "keys": '["couple"]',
    "arms": '[{ series_r = "50" }, { shunt_c = "22p" }]',
}


def example(param: Param) -> str:
    """A sound value for a key."""
    if param.dimension == "quantities":
        return f'["{DIMENSIONS[param.of].example}", "1"]'
    if param.choices:
        return f'"{param.choices[0]}"'
    if param.dimension in DIMENSIONS:
        text = DIMENSIONS[param.dimension].example
        return f'"-{text}"' if param.sign == "nonpositive" else f'"{text}"'
    return _WORDS.get(param.dimension, '"some text"')


def _lines(params: Iterable[Param], skip: Iterable[str]) -> list[str]:
    return [f"{param.key} = {example(param)}" for param in params if param.key not in set(skip)]


def _stage(kind: str, family: str, name: str) -> str:
    known = KINDS[kind].keys(family)
    judged = {"name", "kind", "device", "upper", "tolerance", "allot"}
    words = {"inverting"} if kind == "block" else set()
    lines = _lines(known.values(), _LEFT_OUT["stage"] | judged | words)
    lines += ['allot = "0.02 dB"', 'tolerance = { couple = "2 %" }']
    if "upper" in known:
        lines.append(f'upper = "{family}"')
    return stage(kind, "\n".join(lines), family, name)


def everything() -> str:
    """A sound file with every key of every kind and family that can stand together."""
    parts = ["format = 1", 'title = "every key"', 'note = """free\ntext"""']
    for name in ("supply", "source"):
        parts += [f"[{name}]", *_lines(tables.SECTIONS[name], {"allot", "smallest"})]
    parts += ['smallest = "1u"', 'allot = "0.02 dB"']
    for kind in KINDS.values():
        for family in kind.families or ("",):
            parts.append(_stage(kind.name, family, f"{kind.name}-{family or 'own'}"))
    for name in ("load", "target", "preferred", "tolerance"):
        parts += [f"[{name}]", *_lines(tables.SECTIONS[name], {"allot", "noise_from"})]
    parts += ["[[bench]]", *_lines(tables.BENCH, {"at"}), 'at = "block-own"']
    for family, params in FAMILIES.items():
        parts += [f"[device.{family}]", *_lines(params, {*_LEFT_OUT.get(family, set()), "ft", "coss", "ciss"})]
        if family == "bjt":
            parts.append('ft = "300M"')
    return "\n".join(parts) + "\n"
