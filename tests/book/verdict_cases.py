"""Chains whose verdicts are kept as a golden: one for each way in which a chain can be limited.

Each is the pieces of a chain file; the cards that it names are added to it.
"""

from __future__ import annotations

CARDS = {
    "N": 'family = "bjt"\npolarity = "npn"\nbeta = 150\nearly_voltage = 80\nrx = 30\nft = "400M"\nft_ic = "5m"\n'
         'cob = "2p"\ncob_v = 5',
    "J": 'family = "jfet"\npolarity = "n"\nidss = "8m"\nvgs_off = 2\nchannel_slope = 0.01\ncgs = "6p"\ncgd = "2p"',
    "U": 'family = "opamp"\ngbw = "10M"\na0 = "100 dB"\nrin = "1M"\ncin_cm = "3p"\nrout = 50',
    "F": 'family = "opamp"\ngbw = "20M"\na0 = "110 dB"\nrin = "1T"\ncin_diff = "2p"\ncin_cm = "4p"\nrout = 50',
    "T": 'family = "opamp"\ngbw = "100M"\nf2 = "3M"\nrout = 100',
}
RAIL = "[supply]\npositive = 12\n"
BOTH = "[supply]\npositive = 5\nnegative = -5\n"
FROM_50 = '[source]\nkind = "voltage"\nresistance = 50\n'
FROM_600 = '[source]\nkind = "voltage"\nresistance = 600\n'
CABLE = '[source]\nkind = "voltage"\nresistance = 2200\ncapacitance = "330p"\n'
DIODE = '[source]\nkind = "current"\nresistance = "200M"\ncapacitance = "72p"\n'
LOAD = '[load]\ncouple = "10u"\nresistance = "10k"\ncapacitance = "20p"\n'


def stage(name: str, kind: str, **keys: object) -> str:
    """A stage's table; values are written as text but for truth values and lists."""
    rows = [f"{key} = {_literal(value)}" for key, value in keys.items()]
    return "\n".join(["[[stage]]", f'name = "{name}"', f'kind = "{kind}"', *rows, ""])


def _literal(value: object) -> str:
    if isinstance(value, bool):
        return str(value).lower()
    return str(value) if isinstance(value, list) else f'"{value}"'


def target(**keys: object) -> str:
    return "\n".join(["[target]", *(f'{key} = "{value}"' for key, value in keys.items()), ""])


def text(*pieces: str) -> str:
    """The chain file, with every card that its stages name."""
    body = "\n".join(pieces)
    cards = [f"[device.{name}]\n{rows}\n" for name, rows in CARDS.items() if f'device = "{name}"' in body]
    return "\n".join(["format = 1", body, *cards])


def emitter(name: str, **keys: object) -> str:
    """A common-emitter stage of about 2 mA with a bypassed and a plain emitter resistor."""
    fixed = {"device": "N", "couple": "10u", "rb1": "56k", "rb2": "12k", "rc": "2k2", "re": "47", "re_bypassed": "680",
             "ce": "100u"}
    return stage(name, "common-emitter", **{key: value for key, value in {**fixed, **keys}.items() if value})


def follower(name: str, **keys: object) -> str:
    return stage(name, "emitter-follower", device="N", re="1k2", **keys)


def block(name: str, gain: float, pole: str = "", **keys: object) -> str:
    poles = {"poles": [pole]} if pole else {}
    return stage(name, "block", gain=gain, rin="10k", rout="50", **poles, **keys)


def coil(value: str) -> str:
    return f'[[stage]]\nname = "L1"\nkind = "ladder"\narms = [{{ series_l = "{value}" }}]\n'


TWO = emitter("Q1", stray="2p") + emitter("Q2", stray="2p")
CASES = {
    # an instability
    "unstable, an op-amp that drives a capacitance": text(
        '[source]\nkind = "voltage"\nresistance = 100\n',
        stage("U1", "noninverting", device="T", r_bias="10k", rf="1k", rg="10k", c_load="1n"),
        '[load]\nresistance = "1k"\n', target(upper="1M")),
    "unstable, a follower behind a long wire": text(
        RAIL, '[source]\nkind = "voltage"\nresistance = 10\n',
        coil("1u"),
        stage("Q1", "emitter-follower", device="N", couple="10u", rb1="47k", rb2="47k", re="2k2"),
        '[load]\ncouple = "10u"\nresistance = "10k"\ncapacitance = "100p"\n', target(gain="0 dB")),
    # no clean midband
    "no clean midband, the corners cross": text(
        FROM_50, block("B1", 10, "20k", lower_poles=["30k"]), block("B2", 4, "900k", couple="4n7"),
        target(gain="30 dB", upper="100k")),
    # the gain
    "gain short, a joint that loads": text(
        RAIL, FROM_600, emitter("Q1"), emitter("Q2", re=""), '[load]\ncouple = "10u"\nresistance = 220\n',
        target(gain="60 dB")),
    "gain short, nothing loads much": text(
        FROM_50, block("B1", 10), block("B2", 10), '[load]\nresistance = "10k"\n', target(gain="50 dB")),
    "gain over": text(RAIL, FROM_600, TWO, LOAD, target(gain="50 dB")),
    "gain short at its reference, by an edge": text(
        RAIL, FROM_600, TWO, LOAD, target(gain="58 dB", gain_tolerance="2 dB", reference="2M")),
    # the lower edge
    "lower missed, a coupling": text(
        RAIL, FROM_600, emitter("Q1"), emitter("Q2", couple="10n"), LOAD, target(lower="1k", upper="300k")),
    "lower missed, a bypass": text(RAIL, FROM_600, emitter("Q1", re="", ce="1u"), LOAD, target(lower="1k")),
    "lower missed, corners add up": text(
        RAIL, FROM_600, emitter("Q1", couple="1u", ce="47u"), emitter("Q2", couple="1u", ce="47u"),
        emitter("Q3", couple="1u", ce="47u"), LOAD, target(lower="60")),
    "lower missed, a sensor that is a capacitance": text(
        RAIL, '[source]\nkind = "voltage"\nresistance = 0\ncouple = "100p"\n',
        stage("J1", "common-source", device="J", rg="1M", rs="220", rs_bypassed="470", cs="100u", rd="1k"), LOAD,
        target(lower="500")),
    "lower missed, the coupling to the load": text(
        RAIL, FROM_50, emitter("Q1"), follower("Q2"), '[load]\ncouple = "1u"\nresistance = 600\n', target(lower="100")),
    "lower missed, a data sheet's corner": text(
        FROM_50, block("B1", 10, lower_poles=["5k"]), target(lower="1k")),
    # the upper edge
    "upper missed, a Miller capacitance fitted": text(
        RAIL, FROM_600, emitter("Q1"), emitter("Q2", c_comp="4p7"), LOAD, target(gain="56 dB", upper="1M")),
    "upper missed, a Miller capacitance of the device": text(
        RAIL, FROM_600, TWO, LOAD, target(gain="56 dB", upper="2M")),
    "upper missed, a collector capacitance at the output": text(
        RAIL, '[source]\nkind = "voltage"\nresistance = 0\n', stage(
            "Q1", "cascode", device="N", couple="10u", rb1="82k", rb2="12k", rc="3k3", re="100", re_bypassed="680",
            ce="100u", vce=3), '[load]\ncouple = "1u"\nresistance = "1M"\n', target(upper="40M")),
    "upper missed, a plain capacitance to ground": text(
        RAIL, FROM_50, emitter("Q1", c_load="100p"), follower("Q2"), LOAD, target(upper="2M")),
    "upper missed, the source with its cable": text(
        RAIL, CABLE, stage("J1", "common-source", device="J", couple="10n", rg="1M", rs="220", rs_bypassed="470",
                           cs="100u", rd="1k"), LOAD, target(upper="500k")),
    "upper missed, the load's cable": text(
        RAIL, FROM_50, emitter("Q1"), '[load]\ncouple = "10u"\nresistance = "10k"\ncapacitance = "470p"\n',
        target(upper="1M")),
    "upper missed, an op-amp's gain-bandwidth": text(
        BOTH, FROM_50, stage("U1", "noninverting", device="U", r_bias="100k", rf="47k", rg="1k"),
        '[load]\nresistance = "10k"\n', target(gain="34 dB", upper="500k")),
    "upper missed, a feedback capacitor": text(
        BOTH, FROM_50, stage("U1", "inverting", device="U", rg="4k7", rf="47k", cf="47p"),
        '[load]\nresistance = "10k"\n', target(upper="200k")),
    "upper missed, a photodiode's loop": text(
        BOTH, DIODE, stage("U1", "transimpedance", device="F", rf="1M"), '[load]\nresistance = "10k"\n',
        target(upper="500k")),
    "upper missed, a coil in the way": text(
        FROM_50, coil("10u"), '[load]\nresistance = 50\n',
        target(upper="5M")),
    "upper missed, for all its peaking coil": text(
        RAIL, FROM_50, emitter("Q1", l_peak="22m", c_load="47p"), follower("Q2"), LOAD, target(upper="2M")),
    "upper missed, many like poles": text(
        FROM_50, *(block(f"B{k}", 3, pole) for k, pole in enumerate(["1M", "1.1M", "1.2M", "1M", "1.3M"], 1)),
        '[load]\nresistance = "1k"\n', target(upper="800k")),
    "upper missed, one node that several parts load": text(
        RAIL, FROM_600, emitter("Q1", c_load="22p"), emitter("Q2", re="22", rc="1k", c_comp="1p"), LOAD,
        target(upper="2M")),
    "upper missed, a capacitance behind a stopper": text(
        RAIL, '[source]\nkind = "voltage"\nresistance = 10\n', emitter("Q1", stopper="2k2", c_comp="1p"), LOAD,
        target(upper="2M")),
    "upper missed, two stages alike": text(
        RAIL, '[source]\nkind = "voltage"\nresistance = "2k2"\n', TWO, LOAD, target(upper="1M")),
    "upper missed, a data sheet's pole": text(
        FROM_50, block("B1", 10, "2M"), block("B2", 10, "20M"), target(upper="5M")),
    "upper missed, a stage that holds its input": text(
        RAIL, CABLE, stage("Q1", "common-emitter", device="N", couple="10u", rf="22k", rb2="12k", rc="1k",
                           re_bypassed="220", ce="100u"), LOAD, target(upper="20M")),
    "upper and gain missed": text(RAIL, FROM_600, TWO, LOAD, target(gain="57 dB", upper="5M")),
    # peaking
    "peaking over, a coil": text(
        RAIL, FROM_50, stage("Q1", "cascode", device="N", couple="10u", rb1="56k", rb2="12k", rc="1k", l_peak="33u",
                             re="47", re_bypassed="680", ce="100u", vce=3),
        '[load]\ncouple = "1u"\nresistance = "100k"\ncapacitance = "20p"\n', target(peaking="0.5 dB", upper="5M")),
    "peaking over, an op-amp's loop": text(
        BOTH, DIODE, stage("U1", "transimpedance", device="F", rf="100k"), '[load]\nresistance = "10k"\n',
        target(peaking="1 dB", upper="100k")),
    "peaking over, a follower with a capacitance": text(
        RAIL, '[source]\nkind = "voltage"\nresistance = "4k7"\n',
        stage("Q1", "emitter-follower", device="N", couple="10u", rb1="100k", rb2="100k", re="2k2"),
        '[load]\ncouple = "10u"\nresistance = "10k"\ncapacitance = "47p"\n', target(peaking="0.2 dB")),
    "peaking over, an emitter capacitor": text(
        RAIL, FROM_50, emitter("Q1", re="220", c_peak="220p"), follower("Q2"), LOAD, target(peaking="0.5 dB")),
    # targets that cannot be judged, and none at all
    "only targets that cannot be judged": text(RAIL, FROM_600, TWO, LOAD, target(**{"yield": "95 %"})),
    "met, but for one that cannot be judged": text(
        RAIL, FROM_600, TWO, LOAD, target(upper="200k", **{"yield": "95 %"})),
    # levels and supply
    "the swing is missed": text(RAIL, FROM_600, TWO, LOAD, target(swing="5")),
    "the swing has the least to spare": text(RAIL, FROM_600, TWO, LOAD, target(swing="3", upper="100k")),
    "the supply current is missed": text(RAIL, FROM_600, TWO, LOAD, target(current="3m")),
    "the supply current has the least to spare": text(RAIL, FROM_600, TWO, LOAD, target(current="5m", upper="200k")),
    "no targets": text(RAIL, FROM_600, TWO, LOAD),
    "no targets, down to d.c.": text(
        BOTH, FROM_50, stage("U1", "noninverting", device="U", rf="9k1", rg="1k"), '[load]\nresistance = "10k"\n'),
    "no targets, no upper edge": text(FROM_50, block("B1", 10, couple="100n"), '[load]\nresistance = "10k"\n'),
    "no targets, nothing limits the band": text(FROM_50, block("B1", 10), '[load]\nresistance = "10k"\n'),
    # everything met
    "met, the upper edge has the least to spare": text(
        RAIL, FROM_600, TWO, LOAD, target(gain="57 dB", gain_tolerance="4 dB", lower="100", upper="800k")),
    "met, the lower edge has the least to spare": text(RAIL, FROM_600, TWO, LOAD, target(lower="50", upper="100k")),
    "met, the gain has the least to spare": text(RAIL, FROM_600, TWO, LOAD, target(gain="56.8 dB", upper="100k")),
    "met, peaking has the least to spare": text(
        BOTH, DIODE, stage("U1", "transimpedance", device="F", rf="100k", cf="1p5"), '[load]\nresistance = "10k"\n',
        target(peaking="5 dB", upper="100k")),
    "met, no edge there": text(FROM_50, block("B1", 10, couple="100n"), '[load]\nresistance = "10k"\n',
                               target(upper="1M")),
    "met, a single stage": text(RAIL, FROM_600, emitter("Q1"), LOAD, target(upper="1M")),
    # others
    "a stage left out": text(
        RAIL, FROM_600, emitter("Q1"), emitter("Q2", left_out=True), emitter("Q3", c_comp="4p7"), LOAD,
        target(upper="1M")),
    "a current source into a held node": text(
        BOTH, DIODE, stage("U1", "transimpedance", device="F", rf="220k", cf="2p2"),
        stage("U2", "noninverting", device="U", couple="100n", r_bias="47k", rf="9k1", rg="1k"),
        '[load]\nresistance = "10k"\n', target(gain="2.2M", upper="500k", lower="100")),
}
