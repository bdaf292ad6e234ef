"""Kinds of device stages and their keys by family: CHAIN_FORMAT, "Three-terminal device stages"."""

from __future__ import annotations

INVERTING = ("common-emitter", "common-source", "common-cathode")
FOLLOWERS = ("emitter-follower", "source-follower", "cathode-follower")
COMMON_CONTROL = ("common-base", "common-gate", "common-grid")
DEVICE_KINDS = (*INVERTING, *FOLLOWERS, *COMMON_CONTROL, "cascode")

KEYS = {  # key of each place by family: current, across, output resistor, lower, lower bypassed, its bypass, control
    "bjt": ("ic", "vce", "rc", "re", "re_bypassed", "ce", "cb"),
    "mosfet": ("id", "vds", "rd", "rs", "rs_bypassed", "cs", "cg"),
    "jfet": ("id", "vds", "rd", "rs", "rs_bypassed", "cs", "cg"),
    "triode": ("ia", "vak", "ra", "rk", "rk_bypassed", "ck", "cg"),
}
BIAS_KEYS = ("rb1", "rb2", "rg1", "rg2", "rg")
