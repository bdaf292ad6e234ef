"""The tables that stand once ([supply], [source], [load], [target], [preferred], [tolerance]) and the benches."""

from __future__ import annotations

from dataclasses import replace

from polebook.chain import rows, stage_lists
from polebook.chain.desk import Desk, Owner
from polebook.chain.rows import Row, Table
from polebook.chain.tables import SECTIONS, SOURCE, TARGET
from polebook.devices.num import ICE_K
from polebook.param import Param
from polebook.refusal import quoted

_WORDS = {
    "supply": "the supply",
    "source": "the source",
    "load": "the load",
    "target": "the target",
    "preferred": "[preferred]",
    "tolerance": "[tolerance]",
}


def owner_of(name: str) -> Owner:
    """The owner of a table that stands once."""
    return Owner((name,), name, _WORDS[name])


def section(desk: Desk, top: Table, name: str, params: tuple[Param, ...] | None = None) -> Row:
    """Reads one table, absent or not: its defaults stand in any case."""
    table = rows.as_table(desk, top[name], name) if name in top else {}
    if table is None:
        return Row()
    desk.mark(name, (name,))
    return rows.read(desk, table, owner_of(name), SECTIONS[name] if params is None else params)


def supply(desk: Desk, top: Table) -> None:
    """[supply], and that it is not colder than can be."""
    section(desk, top, "supply")
    celsius = desk.numbers.get("supply.temperature", 25.0)
    if celsius <= -ICE_K:
        desk.fault(
            ("supply", "temperature"),
            f"temperature of the supply is {celsius:g} °C",
            "that is at or below absolute zero, -273.15 °C",
            'write it in degrees Celsius: temperature = "25"',
        )


def source(desk: Desk, top: Table) -> str:
    """[source]; returns its kind, "" where that is not known."""
    if "source" not in top:
        desk.fault(
            ("source",),
            "the chain has no source",
            "the table [source] is required: the gain is counted from it",
            'add [source] with kind = "voltage" and resistance = "600"',
            "key",
        )
        return ""
    table = top["source"] if isinstance(top["source"], dict) else {}
    kind = table.get("kind") if table.get("kind") in ("voltage", "current") else ""
    kind = str(kind)
    section(desk, top, "source", of_source_kind(SOURCE, kind))
    at = ("source",)
    if kind == "voltage" and "resistance" not in table:
        desk.fault(
            (*at, "resistance"),
            "the source has no resistance",
            "a voltage source has one in series; 0 is an ideal source",
            'add resistance = "600", or resistance = 0',
            "table",
        )
    if kind == "current" and "couple" in table:
        desk.fault(
            (*at, "couple"),
            "a current source takes no couple",
            "a capacitor in series with a current changes nothing",
            'take couple out, or write kind = "voltage"',
            "key",
        )
    large, small = desk.numbers.get("source.largest"), desk.numbers.get("source.smallest")
    if large is not None and small is not None and small > large:
        desk.fault(
            (*at, "smallest"),
            "smallest of the source is above largest",
            f"{quoted(table['smallest'])} is more than {quoted(table['largest'])}",
            "exchange the two",
        )
    return kind


def of_source_kind(params: tuple[Param, ...], kind: str) -> tuple[Param, ...]:
    """`params` with the units that follow from what the source is: V or A."""
    if not kind:
        return params
    volts = kind == "voltage"
    units = {
        "amplitude": "voltage" if volts else "current",
        "density": "density_v" if volts else "density_a",
        "gain_source": "ratio" if volts else "gain_source",
    }
    changed = [replace(p, dimension=units.get(p.dimension, p.dimension)) for p in params]
    if volts:
        return tuple(changed)
    # across a current source: 0 would short it
    return tuple(replace(p, sign="positive") if p.key == "resistance" else p for p in changed)


def gain_unit(desk: Desk, table: object, source_kind: str, owner: Owner) -> None:
    """The gain of a chain with a current source is in V/A: V/V, which its dimension would take, is a fault."""
    raw = table.get("gain") if isinstance(table, dict) else None
    if source_kind == "current" and isinstance(raw, str) and raw.rstrip().endswith("V/V"):
        desk.fault(
            (*owner.path, "gain"),
            f"{quoted(raw)} is not a gain in V/A",
            f"gain of {owner.words} is counted from a current source, so its unit is V/A (the ohm) or dB",
            f'write it in V/A: gain = "{raw.strip().removesuffix("V/V").strip()}"',
        )


def load(desk: Desk, top: Table) -> None:
    """[load]."""
    section(desk, top, "load")
    table = top.get("load")
    if isinstance(table, dict) and "allot" in table and "couple" not in table:
        desk.fault(
            ("load", "allot"),
            "the load has allot and no couple",
            "only a coupled load is a node of its own",
            "take allot out, or add couple",
            "key",
        )


def target(desk: Desk, top: Table, source_kind: str) -> Row:
    """[target], in the units of the source's kind."""
    row = section(desk, top, "target", of_source_kind(TARGET, source_kind))
    gain_unit(desk, top.get("target"), source_kind, owner_of("target"))
    low, high = desk.numbers.get("target.noise_from"), desk.numbers.get("target.noise_to")
    if low is not None and high is not None and low >= high:
        desk.fault(
            ("target", "noise_from"),
            "noise_from of the target is not below noise_to",
            "the noise is integrated upward from noise_from to noise_to",
            "exchange the two",
        )
    share = desk.numbers.get("target.yield")
    if share is not None and share > 1:
        desk.fault(
            ("target", "yield"),
            f"yield of the target is {share * 100:g} %",
            "no more than all built chains can meet it",
            'write a share of at most 100 %: yield = "95 %"',
        )
    return row


def tolerance(desk: Desk, top: Table) -> str:
    """[tolerance]; returns the spread's shape."""
    row = section(desk, top, "tolerance")
    table = top.get("tolerance")
    for key, raw in table.items() if isinstance(table, dict) else ():
        share = desk.numbers.get(f"tolerance.{key}")
        if share is not None:
            stage_lists.below_one(desk, raw, share, f"{key} of [tolerance]", ("tolerance", key))
    return row.texts.get("shape", "normal")


def preferred(desk: Desk, top: Table) -> dict[str, str]:
    """[preferred]: part -> series."""
    return section(desk, top, "preferred").texts
