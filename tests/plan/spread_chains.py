"""Chains for the spread's tests: small texts with tolerances of their own, and spreads run to their end."""

from __future__ import annotations

from polebook.chain.model import Chain
from polebook.chain.read import parse
from polebook.plan.spread.model import Request, Result
from polebook.plan.spread.run import spread

LOW_PASS = """format = 1
[source]
kind = "voltage"
resistance = 0
[[stage]]
name = "F"
kind = "ladder"
arms = [{ series_r = "1k" }, { shunt_c = "1n" }]
"""

RESONANT = """format = 1
[source]
kind = "voltage"
resistance = "50"
[[stage]]
name = "A"
kind = "block"
gain = "10"
rin = "1M"
rout = "100"
poles = ["30M"]
[[stage]]
name = "L"
kind = "ladder"
arms = [ARMS]
[load]
resistance = "10k"
"""

TWO = """format = 1
[supply]
positive = "12"
[source]
kind = "voltage"
resistance = "600"
couple = "1u"
[[stage]]
name = "Q1"
kind = "common-emitter"
device = "N"
couple = "1u"
rb1 = "100k"
rb2 = "18k"
rc = "3k3"
re = "220"
stray = 0
tolerance = { rc = "0.1 %" }
[[stage]]
name = "Q2"
kind = "cascode"
device = "N"
couple = "1u"
ic = "1m"
vce = "3"
rb1 = "100k"
rb2 = "22k"
rc = "2k2"
re = "1k"
[[stage]]
name = "Q3"
kind = "emitter-follower"
device = "SPARE"
ic = "1m"
re = "4k7"
left_out = true
[[stage]]
name = "B1"
kind = "block"
gain = "4"
rin = "10k"
gain_into = "50"
rout = "50"
poles = ["10M", "20M"]
tolerance = { gain = "2 %", poles = "8 %" }
[load]
resistance = "10k"
capacitance = "20p"
[device.N]
family = "bjt"
beta = 200
ft = "300M"
ft_ic = "2m"
cob = "2p"
cob_v = 5
rx = 30
[device.SPARE]
family = "bjt"
beta = 100
"""


def parsed(text: str, **tables: str) -> Chain:
    """A chain of a text with further tables: tolerance="resistor = 0"."""
    return parse(text + "".join(f"[{name}]\n{lines}\n" for name, lines in tables.items()), "x.toml")


def run(chain: Chain, builds: int, **request: object) -> Result:
    """The last result of a spread; without corners and costs unless they are asked for."""
    asked = {"corners": False, "costs": False, **request}
    return [result for _, _, result in spread(Request(chain, builds, **asked))][-1]  # type: ignore[arg-type]
