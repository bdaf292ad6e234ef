"""What each figure of the document is, in a line, and its unit."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from polebook.book.workings.index import Entry

_TYPES = {"C": "F", "L": "H", "R": "Ω", "gm": "S", "tau": "s", "I": "A", "en": "V/√Hz", "in": "A/√Hz"}
_TARGETS = {"gain": "gain", "lower": "Hz", "upper": "Hz", "peaking": "dB", "noise": "density", "swing": "V",
            "current": "A", "rise": "s"}
_NOISE = {"noise_density": ("V/√Hz", "A/√Hz"), "noise_total_input": ("V", "A"), "noise_total_output": ("V", "V")}
_ENDINGS = {"hz": "Hz", "db": "dB", "ohm": "Ω", "a": "A", "v": "V", "w": "W", "s": "s", "percent": "%"}

ABOUT: Mapping[str, str] = {
    "overall.gain": "midband gain of the chain, signed",
    "overall.gain_db": "size of the midband gain in dB",
    "overall.unstable": "whether a pole of the chain has a positive real part",
    "overall.reference_hz": "frequency at which gain and noise are quoted",
    "overall.gain_at_reference": "size of the response at the reference frequency",
    "overall.lower_edge_hz": "lower edge: the response is 3 dB below midband",
    "overall.upper_edge_hz": "upper edge: the response is 3 dB below midband",
    "overall.peaking_db": "how far the response rises above the midband gain",
    "overall.octc_upper_hz": "estimate of the upper edge by open-circuit time constants",
    "overall.sctc_lower_hz": "estimate of the lower edge by short-circuit time constants",
    "overall.node_upper_hz": "estimate of the upper edge by the poles of the nodes",
    "overall.shrinkage": "upper edge over the lowest node pole",
    "overall.rise_time_s": "10-90 % rise time of the step response",
    "overall.overshoot_percent": "overshoot of the step response, of its final value",
    "overall.settling_1_s": "time that the step response takes to settle to 1 %",
    "overall.settling_01_s": "time that the step response takes to settle to 0.1 %",
    "overall.sag_percent": "sag of a pulse",
    "overall.group_delay_s": "group delay at the reference frequency",
    "overall.group_delay_spread_s": "spread of the group delay between the edges",
    "overall.noise_density": "input-referred noise density at the reference frequency",
    "overall.noise_total_output": "noise at the output, rms",
    "overall.noise_total_input": "noise referred to the input, rms",
    "overall.noise_from_hz": "lower end of the noise band", "overall.noise_to_hz": "upper end of the noise band",
    "overall.noise_figure_db": "noise figure",
    "overall.supply_current_a": "quiescent current of the greater rail",
    "overall.largest_source": "largest source that passes without clipping",
    "overall.dynamic_range_db": "largest source that passes over the input noise",
    "overall.noise_margin_db": "smallest source over the input noise",
    "overall.full_power_hz": "highest frequency at which the full output is reached",
    "lines.gain": "gain of the line into what it drives, midband",
    "lines.gain_db": "size of the line's gain in dB",
    "lines.open_gain": "gain of the line with all that follows taken away",
    "lines.loading": "what is left of the gain when what follows is attached",
    "lines.transfer_ohm": "output voltage over input current, of a stage that holds its input",
    "lines.k": "gain across the line's leading bridge",
    "lines.input_ohm": "input resistance, what follows attached",
    "lines.output_ohm": "output resistance, what precedes attached, what follows taken away",
    "lines.owns_upper": "share of the upper edge that the line's parts own",
    "lines.owns_lower": "share of the lower edge that the line's parts own",
    "lines.noise_share": "share of the output noise power",
    "bridges.value": "value of the bridging part",
    "bridges.k": "gain from the bridge's input side to its output side",
    "bridges.at_input": "what the bridge counts as at its input side",
    "bridges.at_output": "what the bridge counts as at its output side",
    "nodes.ohm": "driving-point resistance of the node, midband",
    "nodes.farad": "capacitance of the node: its time constant over its resistance",
    "nodes.pole_hz": "pole of the node",
    "nodes.lost_upper_db": "lost at the node at the upper edge of the account",
    "nodes.allotted_upper_db": "allotted to the node of what may be lost at the upper edge",
    "nodes.lost_lower_db": "lost at the node at the lower edge of the account",
    "nodes.allotted_lower_db": "allotted to the node of what may be lost at the lower edge",
    "nodes.room": "the node's pole over the pole that it needs",
    "parts.value": "value of the part",
    "parts.tau_s": "time constant",
    "parts.owns_upper": "share of the upper edge that the part owns",
    "parts.owns_lower": "share of the lower edge that the part owns",
    "parts.noise_share": "share of the output noise power",
    "cards.value": "figure of the card",
    "bias.current_a": "quiescent current",
    "bias.across_v": "quiescent voltage across the device",
    "bias.control_v": "d.c. voltage of the control terminal",
    "bias.lower_v": "d.c. voltage of the lower terminal",
    "bias.output_v": "d.c. voltage of the output terminal",
    "bias.dissipation_w": "heat that the device makes",
    "rails.current_a": "quiescent current that the rail gives; negative: that it takes",
    "levels.largest_v": "peak at the node of the largest signal",
    "levels.smallest_v": "peak at the node of the smallest signal of interest",
    "levels.noise_v": "noise at the node, rms",
    "levels.clip_v": "peak at the node at which its stage clips",
    "levels.headroom_db": "clip level over the largest signal",
    "account.edge_hz": "frequency at which the account is drawn up",
    "account.budget_db": "what may be lost there",
    "account.lost_db": "what the chain loses there",
    "account.left_db": "what is left of the budget",
    "targets.want": "what is wanted",
    "targets.got": "what is reached",
    "targets.margin": "margin, negative where the target is missed",
    "targets.met": "whether the target is met",
    "poles.re": "real part of the pole", "zeros.re": "real part of the zero",
    "poles.im": "imaginary part of the pole", "zeros.im": "imaginary part of the zero",
    "poles.hz": "distance of the pole from 0, as a frequency",
    "zeros.hz": "distance of the zero from 0, as a frequency",
    "poles.q": "quality factor of the pole", "zeros.q": "quality factor of the zero",
}
_DEVICE = {
    "gm": "transconductance at the operating point", "rpi": "base-emitter resistance at the operating point",
    "ro": "output resistance at the operating point", "rx": "resistance in series with the control",
    "cpi": "base-emitter capacitance", "cmu": "collector-base capacitance", "ccs": "collector to ground",
    "cgs": "gate-source capacitance", "cgd": "gate-drain capacitance", "cds": "drain-source capacitance",
    "cdb": "drain to ground", "cgk": "grid-cathode capacitance", "cga": "grid-anode capacitance",
    "cak": "anode-cathode capacitance", "gbw": "time constant of the dominant pole",
    "f2": "time constant of the second pole", "rin": "resistance between the inputs",
    "rout": "output resistance, loop open", "cin_diff": "capacitance between the inputs",
    "cin_cm": "capacitance from each input to ground",
    "ib": "base current", "ig": "gate leakage",
    "en": "voltage noise density", "in": "current noise density",
}
_LEVERAGE = {"gain": "the midband gain", "lower_edge": "the lower edge", "upper_edge": "the upper edge",
             "noise": "the input noise"}


def about(section: str, key: str) -> str:
    """What a figure is."""
    if key.startswith("leverage."):
        figure = key.removeprefix("leverage.")
        return f"per cent that {_LEVERAGE.get(figure, figure)} moves for 1 % more"
    return ABOUT.get(f"{section}.{key}", "")


def device_figure(part: str) -> str:
    """What a device's own figure is; a cascode's upper device's has the same name with _upper behind it."""
    upper = part.endswith("_upper")
    told = _DEVICE.get(part.removesuffix("_upper"), "")
    return f"{told}, upper device" if upper and told else told


def unit(document: Mapping[str, Any], entry: Entry) -> str:
    """Unit of a figure; "" for a plain number, a share, true and false."""
    section, key, row = entry.section, entry.key, entry.row
    volts = document["overall"]["gain_unit"] == "V/V"
    if section == "targets":
        word = _TARGETS.get(row["name"], "") if key in ("want", "got") else ""
        return {"gain": "" if volts else "Ω", "density": "V/√Hz" if volts else "A/√Hz"}.get(word, word)
    if key in ("gain", "gain_at_reference", "gain_db", "open_gain"):
        ohms = not volts and (section == "overall" or row.get("name") == "source")
        return ("dBΩ" if ohms else "dB") if key == "gain_db" else "Ω" if ohms else ""
    if key in _NOISE:
        return _NOISE[key][not volts]
    if key == "largest_source":
        return "V" if volts else "A"
    if section == "bridges" and key in ("value", "at_input", "at_output"):
        return _TYPES[row["type"]]
    if section == "parts" and key == "value":
        return _TYPES.get(row["type"], "")
    if section == "nodes" and key == "farad":
        return "F"
    if section in ("poles", "zeros"):
        return {"re": "rad/s", "im": "rad/s", "hz": "Hz"}.get(key, "")
    if section == "cards" and key == "value":
        return ""
    return _ENDINGS.get(key.rpartition("_")[2], "") if "_" in key else {"ohm": "Ω"}.get(key, "")
