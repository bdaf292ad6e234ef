"""A point of a sweep is what the file says with that value in it; what can't be computed is told, never raised."""

import dataclasses
import warnings

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.book import build
from polebook.chain import edits, read
from polebook.plan import sweep as sweeping
from polebook.plan.ranges import swept
from polebook.problem import ProblemsFound
from tests.cli.helpers import ALL, LISTENER, ROOT
from tests.helpers import of_whole

TEXT = LISTENER.read_text(encoding="utf-8")
FILES = (*ALL, *sorted((ROOT / "tests" / "independent" / "chains").glob("*.toml")))
CHAINS = {path.stem: read.load(str(path)) for path in FILES}
DETACHED = """format = 1
[source]
kind = "current"
[[stage]]
name = "J1"
kind = "common-source"
device = "J"
couple = "1u"
rg = "1M"
id = "1m"
rd = "1k"
[device.J]
family = "jfet"
gm = "5m"
"""


def points(text, path, limits, count, names=()):
    of = swept(text, "x.toml", path, limits, count)
    figures = sweeping.resolved(of.chain, of.path, of.values, names)
    return [point for _, _, point in sweeping.sweep(of.chain, of.path, of.values, figures)]


@pytest.mark.parametrize(
    ("path", "limits"),
    [
        ("Q1.rc", "1k:4k7"),
        ("Q2.c_comp", "0:10p"),
        ("Q1.c_peak", "0:22p"),  # not in the file
        ("device.VF.beta", "50:400"),
        ("supply.positive", "9:15"),
        ("supply.temperature", "-20:60"),
        ("Q3.stopper", "0:1k"),
        ("source.resistance", "0:10k"),
        ("load.couple", "1n:1u"),
    ],
)
def test_a_point_is_what_the_file_says_with_its_value(path, limits):
    names = ("Q1.input_ohm", "n1.pole_hz", "overall.octc_upper_hz", "Q2.cmu.k")
    for point in points(TEXT, path, limits, 3, names):
        edit, left = edits.set_value(TEXT, "x.toml", path, repr(point.value))
        assert left == []
        document = build.document(build.ledger(read.parse(edit.apply(TEXT), "x.toml")))
        overall = document["overall"]
        assert [point.gain, point.lower_hz, point.upper_hz] == [
            overall[key] for key in ("gain", "lower_edge_hz", "upper_edge_hz")
        ]
        line = next(line for line in document["lines"] if line["name"] == "Q1")
        node = next(node for node in document["nodes"] if node["name"] == "n1")
        assert point.figures["Q1.input_ohm"] == line["input_ohm"]
        assert point.figures["n1.pole_hz"] == node["pole_hz"]
        assert point.figures["overall.octc_upper_hz"] == overall["octc_upper_hz"]


def test_a_part_that_is_not_there_at_zero_has_no_figures_there():
    first, second = points(TEXT, "Q2.c_comp", "0:4p7", 2, ["Q2.c_comp.owns_upper"])
    assert first.figures == {"Q2.c_comp.owns_upper": None}
    assert second.figures["Q2.c_comp.owns_upper"] == pytest.approx(0.707, abs=0.001)
    assert first.why == second.why == ""


def test_where_nothing_holds_a_node_the_point_says_so():
    point = sweeping.point(read.parse(DETACHED.replace('rd = "1k"\n', ""), "x.toml"), 1.0, [])
    assert (point.gain, point.lower_hz, point.upper_hz) == (None, None, None)
    assert point.why == "nothing holds node out of J1 at midband"


def test_an_unstable_point_has_a_gain_and_no_edges():
    text = (ROOT / "tests/independent/chains/oscillating.toml").read_text(encoding="utf-8")
    of = swept(text, "x.toml", "U1.c_load", "1p:1n", 4)
    found = [point for _, _, point in sweeping.sweep(of.chain, of.path, of.values)]
    assert found[-1].why == "unstable"
    assert found[-1].gain is not None
    assert found[-1].upper_hz is None
    assert found[0].upper_hz is not None


def test_a_device_out_of_its_region_is_told_beside_its_figures():
    found = points(TEXT, "Q1.rc", "1k:10k", 3)
    assert [point.why for point in found] == ["", "", "Q1 is saturated"]
    assert all(point.upper_hz is not None for point in found)


def test_an_unsolved_bias_has_no_figures(monkeypatch):
    """The Newton solution converges on every chain that could be found, so its residual is spoilt here."""
    chain = read.parse(TEXT, "x.toml")
    of = build.ledger(chain)
    points = dict(of.solution.circuit.points)
    points["Q2"] = dataclasses.replace(points["Q2"], converged=False)
    of.solution.circuit = dataclasses.replace(of.solution.circuit, points=points)
    monkeypatch.setattr(sweeping, "ledger", lambda _: of)
    point = sweeping.point(chain, 5.0)
    assert point == sweeping.Point(5.0, why="the bias of Q2 is not solved")


def test_it_stops_when_told_and_counts():
    chain, done = CHAINS["wire-break-listener"], []
    for step in sweeping.sweep(chain, "Q1.rc", [1e3, 2e3, 3e3, 4e3], stop=lambda: len(done) == 2):
        done.append(step[:2])
    assert done == [(1, 4), (2, 4)]


def test_figures_are_found_by_a_unique_beginning_and_once():
    chain = CHAINS["six-stage"]
    found = sweeping.resolved(chain, "Q1.rc", [1e3], ["Q1.input", "Q1.input_ohm", "overall.peak", "overall.peaking_db"])
    assert [(figure.name, figure.unit) for figure in found] == [("Q1.input_ohm", "Ω"), ("overall.peaking_db", "dB")]
    with pytest.raises(ProblemsFound, match="no figure"):
        sweeping.resolved(chain, "Q1.rc", [1e3], ["Q1.nothing"])


def test_figures_are_found_where_only_a_point_has_a_ledger():
    """Nothing sets the current of the file's stage, so that it has no transconductance; the sweep states it."""
    text = DETACHED.replace('kind = "current"', 'kind = "voltage"\nresistance = 50')
    text = text.replace('gm = "5m"', 'idss = "4m"\nvgs_off = 2').replace('id = "1m"\n', "").replace('rg = "1M"\n', "")
    chain = read.parse(text, "x.toml")
    assert "cannot be had" in sweeping.point(chain, 0.0).why
    found = sweeping.resolved(chain, "J1.id", [1e-3], ["J1.output_o"])
    assert [figure.name for figure in found] == ["J1.output_ohm"]
    ((_, _, point),) = sweeping.sweep(chain, "J1.id", [1e-3], found)
    assert point.figures == {"J1.output_ohm": pytest.approx(1e3)}


@settings(max_examples=of_whole(120, 50), deadline=None, derandomize=True)
@given(st.data())
def test_no_value_raises_or_warns(data):
    chain = CHAINS[data.draw(st.sampled_from(sorted(CHAINS)))]
    path = data.draw(st.sampled_from(sorted(chain.numbers)))
    now = chain.numbers[path]
    factor = st.floats(-12, 12) if data.draw(st.booleans()) else st.floats(-1, 1)
    values = [now * 10 ** data.draw(factor), 0.0 if now else 1.0]
    if path == "supply.temperature":
        values = [data.draw(st.floats(-270, 1000))]
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for _, _, point in sweeping.sweep(chain, path, values):
            if point.gain is None:
                assert point.why


