"""Chains drawn at random from a seed, as the text of a chain file: two to six stages of many kinds, values log-uniform.

Currents are stated, so that every chain has a bias; nothing sees to it that one is stable or has a band.
"""

from __future__ import annotations

from random import Random

CARDS = """
[device.N]
family = "bjt"
polarity = "npn"
beta = 150
early_voltage = 70
rx = 30
ft = "{ft}M"
ft_ic = "5m"
cob = "{cob}p"
cob_v = 5
c_be0 = "1p"
[device.M]
family = "mosfet"
polarity = "n"
k = "20m"
vgs_th = 1.2
channel_slope = 0.02
ciss = "{ciss}p"
crss = "{crss}p"
coss = "{coss}p"
[device.U]
family = "opamp"
gbw = "{gbw}M"
a0 = "100 dB"
f2 = "{f2}M"
rin = "1M"
cin_diff = "2p"
cin_cm = "3p"
rout = 60
"""


def text(seed: int) -> str:
    """The chain of a seed."""
    rng = Random(seed)

    def between(low: float, high: float) -> str:
        return f"{low * (high / low) ** rng.random():.4g}"

    current = rng.random() < 0.3
    kind, ohm = ("current", between(3e3, 3e4)) if current else ("voltage", between(50, 5e3))
    lines = ["format = 1", "[supply]", "positive = 15", "negative = -15", "[source]", f'kind = "{kind}"',
             f"resistance = {ohm}", f"capacitance = {between(5e-12, 100e-12)}"]
    for number in range(1, rng.randint(2, 6) + 1):
        made = rng.choice((_emitter, _follower, _cascode, _source, _amplifier, _block, _ladder))
        lines += ["[[stage]]", f'name = "S{number}"', *made(between)]
        lines.append(f"couple = {between(1e-8, 1e-6)}" if made is not _ladder else "")
    lines += ["[load]", f"resistance = {between(500, 5e4)}", f"capacitance = {between(10e-12, 300e-12)}",
              f"couple = {between(1e-7, 1e-5)}", "[target]", f"pulse = {between(1e-7, 1e-3)}"]
    crss = between(1, 4)
    figures = {"ft": between(150, 900), "cob": between(1, 5), "crss": crss, "ciss": float(crss) + float(between(5, 30)),
               "coss": float(crss) + float(between(2, 10)), "gbw": between(5, 80), "f2": between(90, 400)}
    return "\n".join(lines) + CARDS.format(**figures)


def _emitter(between) -> list[str]:
    return ['kind = "common-emitter"', 'device = "N"', f"ic = {between(5e-4, 5e-3)}", "vce = 5",
            f"rc = {between(500, 5e3)}", f"re = {between(10, 200)}", f"re_bypassed = {between(300, 2e3)}",
            f"ce = {between(1e-6, 1e-4)}", "rb1 = 47000", "rb2 = 10000", f"stray = {between(1e-12, 1e-11)}"]


def _follower(between) -> list[str]:
    return ['kind = "emitter-follower"', 'device = "N"', f"ic = {between(5e-4, 5e-3)}", "vce = 7",
            f"re = {between(1e3, 5e3)}", "rb1 = 47000", "rb2 = 47000", f"stopper = {between(20, 300)}"]


def _cascode(between) -> list[str]:
    return ['kind = "cascode"', 'device = "N"', f"ic = {between(5e-4, 5e-3)}", "vce = 3", f"rc = {between(500, 5e3)}",
            f"re = {between(10, 200)}", "rb1 = 47000", "rb2 = 10000", f"stray = {between(1e-12, 1e-11)}"]


def _source(between) -> list[str]:
    return ['kind = "common-source"', 'device = "M"', f"id = {between(1e-3, 1e-2)}", "vds = 6",
            f"rd = {between(300, 2e3)}", f"l_peak = {between(1e-8, 3e-6)}", f"rs = {between(10, 100)}", "rg = 1000000"]


def _amplifier(between) -> list[str]:
    return ['kind = "noninverting"', 'device = "U"', "vout = 0", f"rf = {between(1e3, 2e4)}",
            f"rg = {between(500, 5e3)}", f"cf = {between(5e-13, 2e-11)}", "r_bias = 47000",
            f"r_out = {between(20, 200)}"]


def _block(between) -> list[str]:
    pole = between(1e6, 3e7)
    return ['kind = "block"', f"gain = {between(2, 20)}", f"rin = {between(300, 3e4)}",
            f"cin = {between(2e-12, 2e-11)}", f"rout = {between(10, 300)}", f"poles = [{pole}, {pole}]",
            f"lower_poles = [{between(10, 1e3)}]"]


def _ladder(between) -> list[str]:
    return ['kind = "ladder"', f"arms = [{{ series_r = {between(20, 500)} }}, {{ shunt_c = {between(5e-12, 2e-10)} }}, "
            f"{{ series_l = {between(1e-8, 3e-6)} }}, {{ shunt_r = {between(300, 5e3)} }}]"]
