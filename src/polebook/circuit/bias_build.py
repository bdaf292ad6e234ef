"""Walks a chain and enters what each stage puts into the d.c. network."""

from __future__ import annotations

from dataclasses import replace

from polebook.chain.model import Arm, Chain, Stage
from polebook.circuit.bias_network import GROUND, MIDWAY, POSITIVE, RAILS, Amplifier, Device, Network
from polebook.stages.base import slot_key
from polebook.stages.registry import KINDS


def build(chain: Chain) -> Network:
    """The d.c. network of a chain whose cards and keys have been checked."""
    net = Network(chain)
    node = net.node()
    if chain.source_kind == "voltage":
        if "source.couple" not in chain.numbers and not net.resistor(node, GROUND, "source.resistance"):
            net.hold(node, "ground")
    else:
        net.resistor(node, GROUND, "source.resistance")
    for stage in chain.stages:
        if not stage.left_out:
            node = _stage(net, stage, node)
    if "load.couple" not in chain.numbers:
        net.resistor(node, GROUND, "load.resistance")
    return _settled(net)


def _settled(net: Network) -> Network:
    """Every node by the one name that its wires give it."""
    root = net.root
    net.resistors = [replace(r, a=root(r.a), b=root(r.b)) for r in net.resistors]
    net.devices = [
        replace(d, control=root(d.control), lower=root(d.lower), output=root(d.output)) for d in net.devices
    ]
    net.amplifiers = [Amplifier(a.name, root(a.input), root(a.output), a.needs_path) for a in net.amplifiers]
    return net


def _stage(net: Network, stage: Stage, before: int) -> int:
    """Enters a stage; returns the node at its output."""
    coupled = f"{stage.name}.couple" in net.chain.numbers
    entry = net.node() if coupled else before
    topology = KINDS[stage.kind].topology
    if topology == "ladder":
        for arm in stage.arms:
            entry = _arm(net, f"{stage.name}.arms.{arm.number}.", arm, entry)
        return entry
    if topology in ("noninverting", "inverting_opamp", "transimpedance", "block"):
        return _amplifier(net, stage, topology, entry)
    return _device(net, stage, topology, entry)


def _arm(net: Network, prefix: str, arm: Arm, node: int) -> int:
    """Series arms hold parts in parallel, shunt arms in series: an inductor is a wire, a capacitor is open."""
    if arm.series:
        after = net.node()
        wired = "series_l" in arm.parts
        if wired or ("series_r" in arm.parts and not net.resistor(node, after, prefix + "series_r")):
            net.wire(node, after)
        return after
    if "shunt_c" not in arm.parts and not net.resistor(node, GROUND, prefix + "shunt_r"):
        net.hold(node, "ground")
    return node


def _amplifier(net: Network, stage: Stage, topology: str, entry: int) -> int:
    """Inputs draw through r_bias, rg or rin to 0 V; the output stands at vout, midway between the rails by default."""
    out, name = net.node(), stage.name
    vout = f"{name}.vout"
    net.hold(out, vout if vout in net.chain.numbers else MIDWAY)
    if topology == "noninverting":
        net.resistor(entry, GROUND, f"{name}.r_bias")
    elif topology == "block":
        net.resistor(entry, GROUND, f"{name}.rin")
        net.resistor(entry, out, f"{name}.r_bridge")
    elif topology == "transimpedance" or not net.resistor(entry, GROUND, f"{name}.rg"):
        net.hold(entry, "ground")
    net.amplifiers.append(Amplifier(name, entry, out, topology == "noninverting"))
    return out


def _device(net: Network, stage: Stage, topology: str, entry: int) -> int:
    """A three-terminal stage; straight at its rail where its lower terminal has no resistor."""
    card = net.chain.cards[stage.device]
    sign = -1 if card.polarity in ("pnp", "p") else 1

    def path(slot: str) -> str:
        key = slot_key(slot, card.family)
        return f"{stage.name}.{key}" if key else ""

    def stated(slot: str) -> str:
        return path(slot) if path(slot) in net.chain.numbers else ""

    rail = RAILS[stage.output_to or ("positive" if sign > 0 else "ground")]
    foot = RAILS[stage.lower_to or ("ground" if sign > 0 else "positive")]
    driven_low = topology == "common_control"
    side = net.node() if driven_low else entry
    biased = _bias(net, side, {path(slot) for slot in ("bias_top", "bias_bottom", "bias_single")}, path("bias_top"))
    if driven_low and not biased:
        net.hold(side, "ground")
    lower = entry if driven_low else net.node()
    held = net.resistor(lower, foot, path("r_low"), path("r_low_bypassed"))
    if topology == "follower":
        out, output, fed_output = lower, rail, False
    else:
        out = output = net.node()
        fed_output = not net.resistor(out, rail, path("r_out"))
        lower = lower if held or driven_low else foot
    stopper = path("stopper") if net.stands(path("stopper")) else ""
    device = Device(stage.name, card.name, card.family, sign, side, lower, output, stopper, stated("current"),
                    stated("across"), fed_output, not held and topology in ("follower", "common_control"),
                    output_rail=rail, lower_rail=foot)
    if topology == "inverting" and net.stands(path("rf")) and path("c_rf") not in net.chain.numbers:
        device = replace(device, control=net.behind(side, stopper) if stopper else side, stopper="")
        net.resistor(device.control, out, path("rf"))
    elif topology == "cascode":
        upper = stage.upper or card.name
        device = replace(device, upper=upper, upper_family=net.chain.cards[upper].family)
    net.devices.append(device)
    return out


def _bias(net: Network, node: int, paths: set[str], top: str) -> bool:
    """The bias resistors of a control side; False where there is none."""
    found = [net.resistor(node, POSITIVE if path == top else GROUND, path) for path in sorted(paths) if path]
    return any(found)
