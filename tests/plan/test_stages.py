"""Copies of a stage: the chain that a file would have, biased each for itself; the laws where they hold; gains met."""

from __future__ import annotations

from math import exp, log, pi, sqrt

import pytest

from polebook.book.ledger import ledger
from polebook.chain import edits, read, stage_edits
from polebook.plan import stages
from polebook.plan.like_stages import copies, like
from polebook.problem import ProblemsFound
from tests.cli.helpers import CHAINS

TEXTS = {path.stem: path.read_text(encoding="utf-8") for path in CHAINS.glob("*.toml")}
LISTENER = TEXTS["wire-break-listener"]
BLOCK = """format = 1
[source]
kind = "voltage"
resistance = 0
[[stage]]
name = "A"
kind = "block"
gain = 3
poles = ["1M"]
lower_poles = [100]
"""
# into like gates, and the last one into a capacitance like that of a gate: gm/C of gain times bandwidth each
GATES = """format = 1
[supply]
positive = 100
[source]
kind = "voltage"
resistance = 0
[[stage]]
name = "J"
kind = "common-source"
device = "D"
couple = "100u"
rg = "1T"
id = "1m"
rd = "2k"
[load]
capacitance = "10p"
[device.D]
family = "jfet"
gm = "5m"
cgs = "10p"
"""


def of(text, name, **more):
    return stages.study(read.parse(text, "x.toml"), name, **more)


def rows_of(study):
    rows = [row for _, _, row in stages.steps(study)]
    return [row for row in rows if not row.wanted], [row for row in rows if row.wanted]


def only(text, name, count, values=()):
    """The file with `count` copies of one stage, made by the edits that the app makes."""
    chain = read.parse(text, "x.toml")
    for stage in chain.stages:
        if stage.name != name:
            text = stage_edits.remove(text, "x.toml", stage.name)[0].apply(text)
    for path, value in values:
        text = edits.set_value(text, "x.toml", path, value)[0].apply(text)
    for _ in range(count - 1):
        text = stage_edits.copy(text, "x.toml", read.parse(text, "x.toml").stages[-1].name)[0].apply(text)
    return ledger(read.parse(text, "x.toml"))


@pytest.mark.parametrize(("name", "stage"), [("wire-break-listener", "Q2"), ("six-stage", "Q5"), ("rain-radar", "B2"),
                                             ("shellac-desk", "V1"), ("photodiode-front", "U2")])
def test_copies_in_memory_are_copies_in_the_file(name, stage):
    plain, _ = rows_of(of(TEXTS[name], stage, most=3))
    for row in plain:
        book = only(TEXTS[name], stage, row.count)
        assert row.gain == pytest.approx(book.solution.gain, rel=1e-9)
        assert row.upper_hz == pytest.approx(book.upper_hz, rel=1e-8)
        assert row.lower_hz == pytest.approx(book.lower_hz, rel=1e-8)


@pytest.mark.parametrize("count", [1, 2, 5, 8])
def test_buffered_one_pole_stages_obey_the_law(count):
    study = of(BLOCK, "A", most=count)
    row = rows_of(study)[0][-1]
    assert row.gain == pytest.approx(3.0**count, rel=1e-5)
    assert row.upper_hz == pytest.approx(1e6 * sqrt(2 ** (1 / count) - 1), rel=1e-6)
    assert row.upper_hz == pytest.approx(row.law_upper_hz, rel=1e-6)
    assert row.upper_hz == pytest.approx(row.inner_upper_hz, rel=1e-6)
    assert row.lower_hz == pytest.approx(row.law_lower_hz, rel=1e-6)
    assert row.stage_gain == pytest.approx(3.0, rel=1e-5)
    assert row.gain_band == pytest.approx(row.gain * row.upper_hz)


def test_gates_in_a_row_obey_the_law_and_the_published_optimum():
    """Resistors into gates: every node is gm/C alone, and rd trades gain for bandwidth."""
    study = of(GATES, "J", most=8, want=20.0)
    plain, wanted = rows_of(study)
    for row in plain:
        assert row.upper_hz == pytest.approx(row.law_upper_hz, rel=1e-4)
    unit = 5e-3 / (2 * pi * 10e-12)
    for row in wanted:
        assert abs(row.gain) == pytest.approx(20.0, rel=1e-9)
        assert row.value == pytest.approx(20.0 ** (1 / row.count) / 5e-3, rel=1e-6)
        assert row.upper_hz == pytest.approx(stages.law_band(unit, 20.0, row.count), rel=1e-4)
    best = stages.best(wanted)
    assert best.count == stages.law_best(20.0, 8) == 6  # 2·ln 20 = 5.99
    assert best.stage_gain == pytest.approx(sqrt(exp(1)), rel=0.001)


@pytest.mark.parametrize(("name", "stage", "by"), [
    ("wire-break-listener", "Q1", ""), ("wire-break-listener", "Q1", "re"), ("shellac-desk", "V1", ""),
    ("photodiode-front", "U3", ""), ("frost-line-sounder", "Q1", ""),
])  # fmt: skip
def test_the_wanted_gain_is_met_by_the_file_with_that_value(name, stage, by):
    chain = read.parse(TEXTS[name], "x.toml")
    study = of(TEXTS[name], stage, most=3, want=chain.numbers["target.gain"], by=by)
    made = [row for row in rows_of(study)[1] if row.upper_hz is not None]
    assert made
    for row in made:
        assert abs(row.gain) == pytest.approx(chain.numbers["target.gain"], rel=1e-9)
        book = only(TEXTS[name], stage, row.count, [(f"{stage}.{study.of.by}", repr(row.value))])
        assert abs(book.solution.gain) == pytest.approx(abs(row.gain), rel=1e-7)
        assert book.upper_hz == pytest.approx(row.upper_hz, rel=1e-7)


def test_a_stage_on_its_neighbour_keeps_its_current_and_gets_couplings():
    study = of(LISTENER, "Q3", most=3)
    chain = copies(study.of, 3)
    today = ledger(read.parse(LISTENER, "x.toml")).solution.circuit.points["Q3"].current
    points = ledger(chain).solution.circuit.points
    assert [points[name].current for name in ("Q3", "Q3_2", "Q3_3")] == pytest.approx([today] * 3)
    assert len(study.of.notes) == 2
    assert "5.94 mA" in study.of.notes[0] and "Q3.couple" in study.of.notes[1]
    edge = ledger(read.parse(LISTENER, "x.toml")).lower_hz
    lone = 1 / (2 * pi * chain.numbers["Q3_2.couple"] * 1e3)
    assert lone < edge  # even on a kilohm alone
    assert "follower" in study.of.why_not


def test_a_load_that_would_take_the_bias_is_coupled():
    text = LISTENER.replace('couple      = "100n"\nresistance  = "600"     # the', 'resistance  = "600" # the')
    one = like(read.parse(text, "x.toml"), "Q1")
    assert [note.split()[0] for note in one.notes if "put in" in note] == ["load.couple"]
    with_load = ledger(copies(one, 2)).solution.circuit.points
    assert with_load["Q1"].current == pytest.approx(with_load["Q1_2"].current, rel=1e-12)


def test_a_pnp_stage_and_a_cascode_are_copied_with_their_bias():
    for name in ("Q4", "Q5"):
        one = like(read.parse(TEXTS["six-stage"], "x.toml"), name)
        today = ledger(read.parse(TEXTS["six-stage"], "x.toml")).solution.circuit.points[name].current
        points = ledger(copies(one, 4)).solution.circuit.points
        assert [points[f"{name}{tail}"].current for tail in ("", "_2", "_3", "_4")] == pytest.approx([today] * 4)
        assert one.notes == ()


def test_what_can_be_trusted_is_told_from_what_cannot():
    _, wanted = rows_of(of(LISTENER, "Q1", most=3, want=1000.0))
    none, saturated, good = wanted
    assert none.upper_hz is None and none.why == "with any rc it makes at most 21.0 dB"
    assert saturated.why == "each copy is saturated" and saturated.upper_hz is not None
    assert good.why == "" and stages.best(wanted) is good


def test_the_greatest_bandwidth_is_that_of_the_real_chain():
    _, wanted = rows_of(of(LISTENER, "Q1", most=6, want=30.0))
    best = stages.best(wanted)
    assert best.upper_hz == max(row.upper_hz for row in wanted if row.upper_hz and not row.why)
    assert best.count > 1


def test_one_between_others_is_measured_without_the_ends():
    """The middle copy's gain and pole do not move with the load, the edge of the whole does."""
    text = LISTENER.replace('resistance  = "600"     # the logger', 'resistance  = "10k" # the logger')
    light = of(text, "Q1", most=1)
    heavy = of(LISTENER, "Q1", most=1)
    assert light.inner == pytest.approx(heavy.inner, rel=0.04)
    assert light.one.stage_gain > 2 * heavy.one.stage_gain


def test_it_stops_when_told():
    study, done = of(LISTENER, "Q1", want=100.0), []
    for step in stages.steps(study, stop=lambda: len(done) == 3):
        done.append(step[:2])
    assert done == [(1, 16), (2, 16), (3, 16)]


def refused(text, *args):
    with pytest.raises(ProblemsFound) as found:
        like(read.parse(text, "x.toml"), *args)
    (problem,) = found.value.problems
    return f"{problem.what}|{problem.why}|{problem.fix}"


def test_what_cannot_be_is_told():
    assert "did you mean Q1?" in refused(LISTENER, "q1")
    assert "takes a current" in refused(TEXTS["photodiode-front"], "U1")
    assert "it gives ce, couple" in refused(LISTENER, "Q1", "beta")
    (still,) = rows_of(of(LISTENER, "Q1", most=1, want=10.0, by="couple"))[1]
    assert still.why == "its gain does not move with couple"
    assert "no part of P1" in like(read.parse(TEXTS["rain-radar"], "x.toml"), "P1").why_not


@pytest.mark.parametrize("name", sorted(TEXTS))
def test_every_stage_of_every_demo_can_be_the_template(name):
    chain = read.parse(TEXTS[name], "x.toml")
    for stage in chain.stages:
        if stage.kind != "transimpedance":
            plain, wanted = rows_of(stages.study(chain, stage.name, most=2, want=chain.numbers["target.gain"]))
            assert all(row.gain is not None for row in plain)
            assert stages.document(stages.study(chain, stage.name, most=1), plain)["template"] == stage.name
            assert all(row.gain is None or abs(log(abs(row.gain) / chain.numbers["target.gain"])) < 1e-8
                       for row in wanted)
