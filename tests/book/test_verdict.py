"""Verdicts, one for each way in which a chain can be limited: short, right, and every number one of the ledger."""

from __future__ import annotations

import re
from dataclasses import replace
from functools import cache
from math import log10, pi
from textwrap import wrap
from typing import Any

import numpy as np
import pytest

from polebook.book import verdict_peak
from polebook.book.build import document, ledger
from polebook.book.ledger import Ledger
from polebook.book.verdict import cause, verdict
from polebook.chain.model import Chain
from polebook.chain.read import parse
from polebook.solve.modes import modes
from polebook.solve.poles import poles
from polebook.solve.sweep import relative_at
from polebook.solve.winding import Winding
from tests.book.verdict_cases import CASES, text

PREFIX = {"f": 1e-15, "p": 1e-12, "n": 1e-9, "u": 1e-6, "m": 1e-3, "": 1.0, "k": 1e3, "M": 1e6, "G": 1e9}
NUMBER = re.compile(r"(?<![\w.])(-?\d+(?:\.\d+)?) ?([fpnumkMG]?)(Hz|F|H|Ω|dBΩ|dB|%)(?!\w)|"
                    r"(?:K|gain of) (-?\d+(?:\.\d+)?)")
STEP = re.compile(r"1 % (more|less) (of it|[\w.]+) (lifts|lowers|adds|takes)(?: the edge by)? (\d+\.?\d*) (%|dB)"
                  r"(?:.*? and costs (\d+\.?\d*) % of gain)?")


@cache
def solved(name: str) -> Ledger:
    return ledger(parse(CASES[name], "case.toml"))


def names(*parts: str) -> list[str]:
    return [name for name in CASES if all(part in name for part in parts)]


def owner(of: Ledger, end: str) -> str:
    shares = of.owns_upper if end == "upper" else of.owns_lower
    part = of.solution.circuit.layout.parts[max(shares, key=lambda k: shares[k])]
    return f"{part.stage}.{part.name}"


def test_there_is_a_chain_for_every_situation() -> None:
    assert len(CASES) >= 40
    assert len({verdict(solved(name)) for name in CASES}) > 35


@pytest.mark.parametrize("name", CASES)
def test_a_verdict_takes_three_lines_and_ends_as_a_sentence(name: str) -> None:
    told = verdict(solved(name))
    assert 0 < len(wrap(told, 78)) <= 3
    assert told.endswith(".") and "  " not in told and ".." not in told and "None" not in told


# every number is a figure of the ledger

def pools(of: Ledger) -> dict[str, list[float]]:
    """Figures by unit, and what a sentence may make of them: sizes in dB, shares in per cent, what a part sees."""
    doc: dict[str, Any] = document(of)
    overall, numbers = doc["overall"], of.chain.numbers
    parts, lines, nodes, targets = doc["parts"], doc["lines"], doc["nodes"], doc["targets"]
    hz = [overall[key] for key in overall if key.endswith("_hz")] + [node["pole_hz"] for node in nodes]
    hz += [pole["hz"] for pole in doc["poles"] or []] + [verdict_peak.top_hz(of)]
    in_hz = r"poles\.\d|gbw|f2|target\.(lower|upper|reference)"
    hz += [value for path, value in numbers.items() if re.search(in_hz, path)]
    hz += [target["got"] for target in targets if target["name"] in ("lower", "upper")]
    farad = [p["value"] for p in parts if p["type"] == "C"] + [node["farad"] for node in nodes]
    farad += [half for line in lines for b in line["bridges"] for half in (b["at_input"], b["at_output"])]
    ohm = [p["value"] for p in parts if p["type"] == "R"] + [node["ohm"] for node in nodes]
    ohm += [line[key] for line in lines for key in ("input_ohm", "output_ohm")]
    ohm += [p["tau_s"] / p["value"] for p in parts if p["type"] == "C" and p["tau_s"]]
    ohm += [p["value"] / p["tau_s"] for p in parts if p["type"] == "L" and p["tau_s"]]
    db = [3.0, overall["gain_db"], overall["peaking_db"]]
    db += [numbers.get("target.peaking"), numbers["target.gain_tolerance"]]
    db += [line["gain_db"] for line in lines] + [node["lost_upper_db"] for node in nodes]
    db += [doc["account"]["upper"]["lost_db"]]
    db += [-20 * log10(abs(line["loading"])) for line in lines if line["loading"]]
    for target in (target for target in targets if target["name"] == "gain" and target["got"]):
        want, got = 20 * log10(target["want"]), 20 * log10(target["got"])
        db += [want, got, abs(got - want), overall["gain_db"] - got]
    db += [verdict_peak.rising(of, verdict_peak.top_hz(of))[1]]
    db += [abs(pull) for pull in verdict_peak.pulls(of, verdict_peak.top_hz(of)).values()]
    share = [1.0, 100 * (overall["shrinkage"] or 0.0)]
    share += [100 * target["margin"] for target in targets if target["margin"]]
    share += [100 * p[key] for p in parts for key in ("owns_upper", "owns_lower") if p[key] is not None]
    share += [abs(value) for p in parts for value in p["leverage"].values() if value is not None]
    share += [100 * weight for weight in unstable_weights(of)]
    plain = [b["k"] for line in lines for b in line["bridges"]] + [line["gain"] for line in lines]
    henry = [p["value"] for p in parts if p["type"] == "L"]
    known = {"Hz": hz, "F": farad, "H": henry, "Ω": ohm, "dB": db, "dBΩ": db, "%": share, "": plain}
    return {unit: [value for value in values if value is not None] for unit, values in known.items()}


def unstable_weights(of: Ledger) -> list[float]:
    """Weights of the parts in the fastest growing pole."""
    if not of.unstable:
        return []
    sweep, net = of.solution.sweep, of.solution.circuit.network
    found = poles(net, float(sweep.hz[0]), float(sweep.hz[-1]), of.solution.winding.right)
    at = int(np.argmax(found.roots.real))
    return [float(each[at]) for each in modes(net, found).by_part.values()]


@pytest.mark.parametrize("name", CASES)
def test_every_number_is_a_figure_of_the_ledger(name: str) -> None:
    of = solved(name)
    known = pools(of)
    sentences = [verdict(of), *(cause(of, target) for target in of.targets)]
    for found in NUMBER.finditer(" ".join(sentences)):
        digits, prefix, unit = found[1] or found[4], PREFIX[found[2] or ""], found[3] or ""
        value, last = float(digits) * prefix, prefix * 10.0 ** -len(digits.partition(".")[2])
        assert any(abs(abs(one) - abs(value)) <= 0.501 * max(last, abs(value) * 1e-9 if "." in digits else last)
                   or abs(abs(one) - abs(value)) <= 0.005 * abs(value) for one in known[unit]), found[0]


# every step that it recommends does what it says

def stepped(chain: Chain, path: str, factor: float) -> Ledger:
    return ledger(replace(chain, numbers={**chain.numbers, path: chain.numbers[path] * factor}))


def path_of(of: Ledger, name: str) -> str:
    """Where the file states a part's value."""
    stage, _, part = name.partition(".")
    one = next((s for s in of.chain.stages if s.name == stage), None)
    if part in ("gbw", "f2") and one is not None:
        return f"device.{one.device}.{part}"
    listed = re.fullmatch(r"(pole|lower|arm)(\d+)", part)
    if listed is None:
        return name
    if listed[1] == "arm" and one is not None:
        return f"{stage}.arms.{listed[2]}.{one.arms[int(listed[2]) - 1].parts[0]}"
    return f"{stage}.{'poles' if listed[1] == 'pole' else 'lower_poles'}.{listed[2]}"


STEPPED = [name for name in CASES if STEP.search(verdict(solved(name)))]


@pytest.mark.parametrize("name", STEPPED)
def test_the_step_that_it_names_moves_the_figure_by_what_it_says(name: str) -> None:
    of = solved(name)
    told = verdict(of)
    found = STEP.search(told)
    assert found
    end = "lower" if "lowers" in found[0] else "upper"
    part = owner(of, end) if found[2] == "of it" else found[2]
    assert part in told
    factor = 1.01 if found[1] == "more" else 0.99
    after = stepped(of.chain, path_of(of, part), factor)
    size, tolerance = float(found[4]), 0.02 * float(found[4]) + 0.6 * 10.0 ** -len(found[4].partition(".")[2])
    gained = 100 * (abs(after.solution.gain / of.solution.gain) - 1)
    if found[5] == "dB":
        moved = of.solution.band.peaking_db - after.solution.band.peaking_db
    elif found[3] in ("adds", "takes"):
        moved = gained if found[3] == "adds" else -gained
    else:
        before, now = (of.upper_hz, after.upper_hz) if end == "upper" else (of.lower_hz, after.lower_hz)
        assert before and now
        moved = 100 * (now / before - 1) * (1 if end == "upper" else -1)
    assert moved == pytest.approx(size, abs=tolerance)
    if found[6]:
        assert -gained == pytest.approx(float(found[6]), abs=0.02 * float(found[6]) + 0.006)


def test_most_verdicts_name_a_step() -> None:
    assert len(STEPPED) > 25


# the right one is blamed, by the right mechanism

@pytest.mark.parametrize(("name", "says"), [
    ("unstable, an op-amp that drives", r"U1\.gbw .* U1\.c_load .* U1\.f2 .* the loop of U1 turns too far"),
    ("unstable, a follower behind a long wire", r"Q1 is a follower and turns load\.capacitance .* negative resistance"),
    ("no clean midband, the corners cross", r"No clean midband: .* B1\.lower1 foremost, .* B1\.pole1 foremost"),
    ("gain short, a joint that loads", r"13\.9 dB short: n2 loses 20\.4 dB, 2\.09 kΩ of Q2 into 220 Ω of the load"),
    ("gain short, nothing loads much", r"no node loads what drives it; the stages give too little"),
    ("gain over", r"5\.9 dB over: Q2 gives the most, 29\.3 dB"),
    ("gain short at its reference, by an edge", r"at 2 MHz, .* the upper edge at 995 kHz takes 7\.1 dB of it"),
    ("lower missed, a coupling", r"Q2\.couple owns all of it\. Its 10 nF works into .* of Q1 and .* of Q2"),
    ("lower missed, a bypass", r"Q1\.ce .* sees 17\.3 Ω, not the 680 Ω that it bypasses"),
    ("lower missed, corners add up", r"corners add up, Q1\.ce owns 28 %, Q2\.ce 23 % and Q3\.ce 23 %"),
    ("lower missed, a sensor", r"source\.couple owns all of it\. Its 100 pF sees 1\.00 MΩ"),
    ("lower missed, the coupling to the load", r"load\.couple owns .* works into 600 Ω of the load"),
    ("upper missed, a Miller capacitance f", r"Q2\.c_comp .* Its 4\.7 pF looks like 141 pF at n1 \(K -29\.0\)"),
    ("upper missed, a Miller capacitance of the device", r"Q2\.cmu owns .* looks like .* at n1 .* Q2\.rc"),
    ("upper missed, a collector capacitance", r"Q1\.cmu_upper .* sees 3\.32 kΩ at n1.*1 % less Q1\.rc"),
    ("upper missed, a plain capacitance", r"Q1\.c_load .* 100 pF stands on Q1's 2\.17 kΩ at n1"),
    ("upper missed, the source with its cable", r"source\.capacitance .* stands on the source's 2\.20 kΩ at n0"),
    ("upper missed, the load's cable", r"load\.capacitance .* on 1\.79 kΩ at the load, mostly Q1's 2\.17 kΩ"),
    ("upper missed, an op-amp's gain", r"U1\.gbw .* Its 10 MHz at a gain of 48\.0 leaves a pole at 207 kHz"),
    ("upper missed, a feedback capacitor", r"U1\.cf .* lies across rf, 47 kΩ"),
    ("upper missed, a photodiode's loop", r"U1\.gbw .* source\.capacitance .* they make one loop through rf, 1 MΩ"),
    ("upper missed, a coil in the way", r"L1\.arm1 .* 10 uH lies in series with 100 Ω"),
    ("upper missed, for all its peaking coil", r"Q1\.c_load owns 87 %\. Its 47 pF stands on Q1's 2\.17 kΩ at n1"),
    ("upper missed, many like poles", r"five poles add up, 1\.00 MHz .* 1\.30 MHz .* leave 43 % of the lowest"),
    ("upper missed, one node", r"n1 loses 6\.6 of the 7\.9 dB, with 107 pF on 1\.33 kΩ; Q2\.cmu owns the most"),
    ("upper missed, a capacitance behind a stopper", r"Q1\.cmu .* behind the stopper, 2\.2 kΩ"),
    ("upper missed, two stages alike", r"Q2\.cmu owns 45 % and Q1\.cmu 34 %"),
    ("upper missed, a data sheet's pole", r"B1\.pole1 .* is the data sheet's own pole"),
    ("upper missed, a stage that holds its input", r"Q1\.cmu .* looks like .* at n0 .* 1 % less Q1\.rf"),
    ("upper and gain missed", r"^Upper edge .* Gain missed too\.$"),
    ("peaking over, a coil", r"n1 rises by 5\.8 dB .* Q1\.l_peak \(33 uH\) rings with load\.capacitance"),
    ("peaking over, an op-amp's loop", r"U1's loop rings between U1\.gbw and source\.capacitance .* no cf across rf"),
    ("peaking over, a follower", r"n0 rises .* Q1 is a follower and turns load\.capacitance \(47 pF\)"),
    ("peaking over, an emitter capacitor", r"Q1\.c_peak \(220 pF\) lifts it by bypassing Q1\.re \(220 Ω\)"),
    ("only targets that cannot be judged", r"^Not judged yet: yield\. Upper edge .* Lower edge"),
    ("met, but for one that cannot", r"^The target is met \(yield not judged yet\): upper edge"),
    ("the swing is missed", r"^Swing [0-9.]+ V for 5 V: Q2 clips first, by cut-off, at .* on n2\. More current in Q2"),
    ("the swing has the least to spare", r"^Both targets are met\. Least to spare: swing .* Q2 clips first"),
    ("the supply current is missed", r"^Supply current 4\.04 mA for 3 mA: Q1 takes most of it, 2\.02 mA\. Less"),
    ("the supply current has the least", r"^Both targets are met\. Least to spare: supply current .* \(19 %\)"),
    ("no targets, down to d.c.", r"reaches down to d\.c\. Upper edge .* U1\.gbw"),
    ("no targets, no upper edge", r"has no upper edge\. Lower edge .* B1\.couple"),
    ("no targets, nothing limits", r"Nothing in the file limits its band; the gain is 19\.9 dB"),
    ("met, the upper edge", r"^All three targets are met\. Least to spare: upper edge .* for 800 kHz \(24 %\)"),
    ("met, the lower edge", r"Least to spare: lower edge .* for 50 Hz"),
    ("met, the gain", r"Least to spare: gain 55\.88 dB for 56\.8 dB, ±1 dB.*adds"),
    ("met, peaking", r"Least to spare: peaking 4\.51 dB for 5 dB .* with only 1\.5 pF of cf"),
    ("met, no edge there", r"^The target is met\. The band has no upper edge"),
    ("a stage left out", r"Q3\.c_comp .* Q2 is left out\.$"),
    ("a current source into a held node", r"U1\.cf owns .* lies across rf, 220 kΩ"),
])
def test_what_is_blamed_and_how(name: str, says: str) -> None:
    (case,) = [case for case in CASES if case == name] or [case for case in CASES if case.startswith(name)]
    assert re.search(says, verdict(solved(case))), verdict(solved(case))


@pytest.mark.parametrize("name", [name for name in CASES if name.startswith(("upper missed", "lower missed"))])
def test_the_part_that_is_named_owns_the_edge(name: str) -> None:
    of, end = solved(name), name.split()[0]
    assert f"{owner(of, end)} " in verdict(of)
    assert verdict(of).startswith(f"{end.capitalize()} edge ")


def test_a_stage_that_is_left_out_is_not_blamed() -> None:
    assert "Q2." not in verdict(solved("a stage left out"))


def test_the_worst_of_several_is_told_first() -> None:
    of = solved("upper and gain missed")
    margins = {target.name: target.margin or 0.0 for target in of.targets}
    assert margins["upper"] < margins["gain"] < 0


def test_a_missed_target_has_its_cause_and_a_met_one_has_none() -> None:
    of = solved("upper missed, a Miller capacitance fitted")
    causes = {target.name: cause(of, target) for target in of.targets}
    assert causes["gain"] == ""
    assert causes["upper"] == "Q2.c_comp owns 58 %, its 4.7 pF looks like 141 pF at n1 (K -29.0), on 1.48 kΩ"
    assert {row["name"]: row["why"] for row in document(of)["targets"]} == causes


def test_stability_that_could_not_be_told_is_said_to_be() -> None:
    of = ledger(parse(CASES["no targets"], "case.toml"))
    of.solution.__dict__["winding"] = Winding(None, None)
    assert verdict(of).startswith("Whether the chain is stable could not be told, so no edge is given.")


# the peak

@pytest.mark.parametrize("name", names("peaking"))
def test_the_top_of_the_response_is_where_it_is_said_to_be(name: str) -> None:
    of = solved(name)
    top = verdict_peak.top_hz(of)
    around = [relative_at(of.solution.circuit.network, hz, of.solution.gains) for hz in (0.999 * top, top, 1.001 * top)]
    assert around[1] == max(around)
    assert 20 / np.log(10) * around[1] == pytest.approx(of.solution.band.peaking_db, abs=1e-6)


@pytest.mark.parametrize("name", names("peaking"))
def test_all_pulls_on_a_peak_cancel(name: str) -> None:
    """All C, L and tau scaled alike move the peak along the axis, and leave its height."""
    of = solved(name)
    pulls = verdict_peak.pulls(of, verdict_peak.top_hz(of))
    assert abs(sum(pulls.values())) < 1e-5 * max(map(abs, pulls.values()))


def test_a_bridge_from_an_ideal_source_is_told_at_its_output() -> None:
    """Without resistance ahead of it a Miller capacitance has no half at its input to speak of."""
    of = ledger(parse(text('[source]\nkind = "voltage"\nresistance = 0\n', """
[[stage]]
name = "M1"
kind = "common-source"
device = "M"
rd = "4k7"
c_comp = "10p"
""", '[target]\nupper = "10M"\n', '[device.M]\nfamily = "mosfet"\ngm = "5m"\n'), "case.toml"))
    assert of.upper_hz == pytest.approx(1 / (2 * pi * 4700 * 10e-12), rel=2e-2)
    assert "M1.c_comp owns all of it. Its 10 pF counts as 10.4 pF at n1, on 4.70 kΩ." in verdict(of)
