"""What a ledger warns of beside its figures: voltage, heat, no midband, estimates that miss."""

from __future__ import annotations

from polebook.book.build import document, ledger
from polebook.chain.read import parse
from tests.book.verdict_cases import CASES

VALVE = """
format = 1
[supply]
positive = {volts}
[source]
kind = "voltage"
resistance = "10k"
[[stage]]
name = "V1"
kind = "common-cathode"
device = "T"
ia = "1m"
rg = "1M"
rk_bypassed = "1k"
ck = "10u"
ra = "10k"
[device.T]
family = "triode"
mu = 20
gm = "2m"
"""


def cautions(text: str) -> list[str]:
    return [one["text"] for one in document(ledger(parse(text, "x.toml")), ("cautions",))["cautions"]]


def split(positive: float, negative: float) -> str:
    supply = f"[supply]\npositive = {positive}\nnegative = {negative}\n"
    return CASES["no targets, down to d.c."].replace("[supply]\npositive = 5\nnegative = -5\n", supply)


def told(texts: list[str], word: str) -> bool:
    return any(word in text for text in texts)


def test_rails_above_60_v_can_kill_and_lower_ones_are_not_warned_of() -> None:
    for positive, negative, high in ((60, 0, False), (61, 0, True), (0, -61, True), (30, -30, False), (31, -30, True)):
        found = cautions(split(positive, negative))
        assert told(found, "which can kill") is high, (positive, negative)
        assert told(found, "local codes") is high and told(found, "licensed practitioner") is high


def test_valves_burn_and_their_supply_is_warned_of_whatever_is_stated() -> None:
    high, low = cautions(VALVE.format(volts=250)), cautions(VALVE.format(volts=48))
    for found in (high, low):
        assert told(found, "valves (V1) get hot enough to burn")
        assert told(found, "local codes") and told(found, "discharge and measure")
    assert sum("local codes" in text for text in high) == 1
    assert told(low, "above 60 V d.c. as a rule") and not told(low, "which can kill")
    assert not told(cautions(VALVE.format(volts=48).replace('name = "V1"', 'name = "V1"\nleft_out = true')), "valves")


def test_estimates_that_miss_are_told_once_for_both_ends() -> None:
    (found,) = cautions(CASES["peaking over, an emitter capacitor"])
    assert found.startswith("the sum of time constants comes to 0.1 times the exact upper edge and 1.3 times the exact")
    assert cautions(CASES["lower missed, a coupling"]) == []


def test_no_midband_is_warned_of_and_instability_is_told_elsewhere() -> None:
    assert told(cautions(CASES["no clean midband, the corners cross"]), "no clean midband")
    assert cautions(CASES["unstable, an op-amp that drives a capacitance"]) == []
