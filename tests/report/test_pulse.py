"""The page of the step response, drawn from a document made by hand and from a chain on the command line."""

import csv
import io
import re
from math import exp, log

import pytest

from polebook.cli.main import main
from polebook.report.look import Look, cells
from polebook.report.pages import page
from polebook.report.pages_csv import page_csv
from tests.cli.helpers import LISTENER
from tests.helpers import DEMOS
from tests.report.sample import document

TAU = 1e-6
FIGURES = {"rise_time_s": log(9) * TAU, "overshoot_percent": 12.345, "settling_1_s": log(100) * TAU,
           "settling_01_s": log(1000) * TAU, "sag_percent": 4.5678, "group_delay_s": 0.9e-6,
           "group_delay_spread_s": 5e-7}


def made(curve=None, **changes):
    """The sample with a step response of one pole."""
    doc = document()
    doc["overall"].update(FIGURES)
    doc["zeros"] = [{"re": 3e8, "im": 0.0, "hz": 47.7e6, "q": None, "stage": "Q1"},
                    {"re": -1e6, "im": 0.0, "hz": 1.6e5, "q": None, "stage": "Q2"}]
    steps = [5 * TAU * k / 200 for k in range(201)]
    doc["pulse"] = {
        "why": "", "final": -33.1, "by": "residues", "poles": 7, "undershoot_percent": 0.5,
        "marks": [{"mark": "start", "time_s": 0.0, "height": 0.0}, {"mark": "10 %", "time_s": 1.05e-7, "height": 0.1}],
        "curve": [(t, 1 - exp(-t / TAU)) for t in steps] if curve is None else curve,
        "by_edge_s": 2.0e-6, "by_nodes_s": 1.5e-6, "pulse_s": 1e-5, "sag_why": "",
        "nodes": [{"name": "n0", "pole_hz": 3.89e5, "rise_s": 0.9e-6},
                  {"name": "n1", "pole_hz": 2.9e5, "rise_s": 1.2e-6}],
        "delays": {"most_s": 1e-6, "most_hz": 1e3, "least_s": 5e-7, "least_hz": 3e5},
    } | changes
    return doc


def drawn(doc, **look):
    return page(doc, "pulse", Look(**look), "two.toml")


def plot(text):
    """Rows of the plot by their label, the curve's cells alone; unlabelled rows by their place."""
    rows = text.split("value\n", 1)[1].split("\n\n", 1)[0].split("\n")[:-1]
    return [(row[:7].strip(), row[8:]) for row in rows]


@pytest.mark.parametrize("encoding", ["utf-8", "ascii", "cp437"])
def test_the_page_fits(encoding):
    text = drawn(made(), encoding=encoding)
    text.encode(encoding)
    assert max(map(cells, text.splitlines())) <= 80
    assert "None" not in text and "\\" not in text


def test_the_curve_stands_where_it_should():
    rows = plot(drawn(made()))
    assert [label for label, _ in rows if label] == ["100", "50", "0"]
    wide = 71
    for column in range(wide):
        height = 1 - exp(-5 * column / (wide - 1))
        row = rows[10 - round(height / 0.1)][1]
        assert row[column] == "█", column
    # a column has the curve once, or twice where it climbs
    for column in range(wide - 1):
        assert 1 <= sum(row[column:column + 1] == "█" for _, row in rows) <= 3


@pytest.mark.parametrize(("low", "high"), [(-0.3, 1.0), (0.0, 2.5), (-4.0, 7.0), (0.0, 80.0)])
def test_a_curve_beyond_its_final_value_fits(low, high):
    rows = plot(drawn(made([(0.0, 0.0), (1e-6, low), (2e-6, high), (3e-6, 1.0)])))
    assert len(rows) <= 18
    assert "█" in rows[0][1] and any("█" in row for _, row in rows)


def test_figures_and_what_is_beside_them():
    text = drawn(made())
    for line in ("rise, 10-90 %     2.20 us", "overshoot         12.35 %  above the final value",
                 "undershoot         0.50 %  the wrong way", "settled to 1 %    4.61 us", "settled to 0.1 %  6.91 us",
                 "sag                4.57 %  of a pulse of 10.0 us", "group delay        900 ns  at 50.0 kHz",
                 "its spread         500 ns  from 500 ns at 300 kHz to 1.00 us at 1.00 kHz"):
        assert line in text, line
    assert "A zero in the right half-plane (of Q1 at 47.7 MHz) sends the response" in text
    assert "rise 2.20 us: 0.35 over the upper edge gives 2.00 us (0.91 times); the nodes'" in text
    assert "1.50 us (0.68 times)" in text
    assert "36.0 %" in text and "64.0 %" in text  # (0.9/1.5)² and (1.2/1.5)²
    assert "matrix" not in text
    assert "7 poles lie too close together for residues" in drawn(made(by="matrix"))


def test_an_undershoot_too_small_to_see_is_told_as_such():
    text = drawn(made(undershoot_percent=0.001))
    assert "too far out for an undershoot to show" in " ".join(text.split())


def test_no_step_response_is_told_with_its_reason():
    doc = made(why="the chain is unstable", curve=None, marks=None, by=None, undershoot_percent=None, delays=None,
               pulse_s=None, sag_why="the chain is unstable")
    doc["pulse"]["curve"] = None
    doc["overall"].update(dict.fromkeys(FIGURES))
    text = drawn(doc)
    assert "No step response: the chain is unstable." in text
    assert "overshoot" not in text
    doc["overall"]["group_delay_s"] = 1e-6
    assert re.search(r"sag +–  the chain is unstable", drawn(doc)) and "1.00 us  at 50.0 kHz" in drawn(doc)


def test_csv_has_the_figures_the_marks_and_the_curve():
    tables = [list(csv.reader(io.StringIO(block))) for block in page_csv(made(), "pulse").split("\n\n")]
    assert tables[0][0] == ["rise [s]", "overshoot [%]", "settled to 1 % [s]", "settled to 0.1 % [s]", "sag [%]",
                            "group delay [s]", "its spread [s]"]
    assert [float(x) for x in tables[0][1]] == list(FIGURES.values())
    assert tables[1][0] == ["mark", "time [s]", "of the final value [1]"]
    assert tables[3][0] == ["time [s]", "of the final value [1]", "response [V/V]"]
    assert len(tables[3]) == 202
    t, share, volts = map(float, tables[3][40])
    assert share == 1 - exp(-t / TAU) and volts == share * -33.1


def test_the_ledger_has_a_line_of_it():
    text = page(made(), "ledger", Look(), "two.toml")
    assert " ".join(text.split()).count(
        "step response: rises in 2.20 us, overshoots by 12.35 %, is within 1 % after 4.61 us, sags by 4.57 %; "
        "group delay 900 ns.") == 1
    doc = made()
    doc["overall"].update(dict.fromkeys(FIGURES))
    assert "step response" not in page(doc, "ledger", Look(), "two.toml")


@pytest.mark.parametrize("path", sorted(DEMOS.glob("*.toml")), ids=lambda path: path.stem)
def test_on_the_command_line(path, capsys):
    assert main(["show", str(path), "--page", "pulse"]) == 0
    text = capsys.readouterr().out
    assert "rise, 10-90 %" in text and "█" in text and "root" not in text
    assert max(map(cells, text.splitlines())) <= 80
    assert main(["show", str(path), "--page", "pulse", "--csv"]) == 0
    lines = capsys.readouterr().out.splitlines()
    curve = [line.split(",") for line in lines[lines.index(next(x for x in lines if x.startswith("time [s]"))) + 1:]]
    assert len(curve) == 201
    heights = [float(row[1]) for row in curve]
    assert heights[0] == pytest.approx(0, abs=1e-9) and heights[-1] == pytest.approx(1, abs=0.02)


def test_json_has_the_figures(capsys):
    import json

    assert main(["show", str(LISTENER), "--page", "pulse", "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    assert told["overall"]["rise_time_s"] == pytest.approx(829.853e-9, rel=1e-5)
    assert "pulse" not in told
