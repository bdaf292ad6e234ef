"""Which current balances of a group may be written, and in which order equations are heard."""

from __future__ import annotations

from dataclasses import dataclass, replace

from polebook.circuit.bias_group import Columns, Group


@dataclass(frozen=True, slots=True)
class Island:
    """Free nodes that resistors join; anchored where one of them leads to a held node."""

    nodes: tuple[int, ...]
    anchored: bool


def islands(group: Group) -> list[Island]:
    """The islands of a group."""
    of = {node: {node} for node in group.nodes}
    for branch in group.branches:
        if of[branch.a] is not of[branch.b]:
            joined = of[branch.a] | of[branch.b]
            of.update(dict.fromkeys(joined, joined))
    anchors = {resistor.a for resistor in group.grounded}
    found = {id(nodes): nodes for nodes in of.values()}.values()
    return [Island(tuple(n for n in group.nodes if n in nodes), bool(nodes & anchors)) for nodes in found]


def without_idle_sources(group: Group) -> Group:
    """Takes the current-source load from a stage that feeds straight into a lower terminal which has nothing else.

    That is a cascode written as two stages: the upper device carries what the lower one draws.
    """
    devices = list(group.devices)
    for island in islands(group):
        signs = {d.sign for d in devices if d.lower in island.nodes and d.fed_lower and not d.current}
        if not island.anchored and signs:
            devices = [replace(d, fed_output=False) if d.output in island.nodes and d.sign in signs else d
                       for d in devices]
    return replace(group, devices=tuple(devices))


def candidates(group: Group, cols: Columns) -> tuple[list[int], list[int]]:
    """(rows to be taken first, rows for what they leave open), by their place in `assemble`.

    A stated current without a resistor at its lower terminal comes from a current source there: the balance of
    that node says nothing, the device's law does. An island without a resistor to a held node is balanced by
    its devices only where some feed current in and some take it out; else one balance of it is left away. There
    a stated across voltage, and the law of a stated current, say where its nodes stand.
    """
    n, b, d = len(group.nodes), len(group.branches), len(group.devices)
    silent: set[int] = set()
    for island in islands(group):
        sourced = [k.lower for k in group.devices if k.current and k.fed_lower and k.lower in island.nodes]
        silent.update(sourced)
        if not island.anchored and not sourced and not _closed(group, island):
            silent.add(_open_end(group, island))
    balances = [cols.voltage[node] for node in group.nodes if node not in silent]
    laws = [n + b + k for k, device in enumerate(group.devices) if not device.current or device.fed_lower]
    loose = {node for island in islands(group) if not island.anchored for node in island.nodes}
    across = [n + b + d + k for k, device in enumerate(group.devices) if device.output in loose]
    stated = [n + b + k for k, device in enumerate(group.devices) if device.current and device.control in loose]
    return [*balances, *range(n, n + b), *laws], [*across, *(row for row in stated if row not in laws)]


def _closed(group: Group, island: Island) -> bool:
    """Whether devices feed current into the island and others take it out."""
    flows = set()
    for device in group.devices:
        if device.lower in island.nodes:
            flows.add(device.sign)
        if device.output in island.nodes and not device.fed_output:
            flows.add(-device.sign)
        if device.control in island.nodes and device.family == "bjt":
            flows.add(-device.sign)
    return len(flows) == 2


def _open_end(group: Group, island: Island) -> int:
    """The node of an unbalanced island whose balance is left away: where a current source ends, else the first."""
    fed = [device.output for device in group.devices if device.fed_output and device.output in island.nodes]
    return fed[0] if fed else island.nodes[0]
