"""Pages of time constants, poles and leverage, drawn from a document made by hand."""

import re

import pytest

from polebook.report.look import Look, cells
from polebook.report.pages import PAGES, page
from polebook.report.times import constants, seen
from tests.report.sample import document

PAIR = [
    {"re": -3e6, "im": -4e6, "hz": 795774.7, "q": 0.8333, "stage": "Q1"},
    {"re": -3e6, "im": 4e6, "hz": 795774.7, "q": 0.8333, "stage": "Q1"},
]


def root(re_, stage="Q1", im=0.0):
    return {"re": re_, "im": im, "hz": abs(complex(re_, im)) / 6.283185307, "q": None, "stage": stage}


def full():
    """The sample with poles, zeros, leverage and cards."""
    doc = document()
    doc["poles"] = [root(0.0, None), root(-277.8, "Q1"), *PAIR, root(-2e9, "Q2")]
    doc["zeros"] = [root(0.0), root(8.3e9)]
    moved = {"Q1.cmu": -0.9, "Q1.rc": -0.812, "Q2.cpi": -0.1, "source.resistance": 0.001, "Q1.gm": -0.0001}
    for part in doc["parts"]:
        name = f"{part['stage']}.{part['part']}"
        part["leverage"]["upper_edge"] = moved.get(name, 0.0)
        part["leverage"]["gain"] = {"Q1.rc": 0.93}.get(name, 0.0)
    doc["cards"] = [{"device": "A", "figure": "beta", "value": 200.0,
                     "leverage": {"gain": 0.05, "lower_edge": None, "upper_edge": 0.33, "noise": None}}]
    return doc


def drawn(name, doc=None, **look):
    return page(doc or full(), name, Look(**look), "two.toml")


def rows(text, begin):
    return [line.split() for line in text.splitlines() if line.startswith(f" {begin}")]


@pytest.mark.parametrize("encoding", ["utf-8", "ascii", "cp437"])
@pytest.mark.parametrize("name", PAGES)
def test_every_page_of_a_full_document_fits(name, encoding):
    text = drawn(name, encoding=encoding)
    text.encode(encoding)
    assert max(map(cells, text.splitlines())) <= 80
    assert "nan" not in text
    assert "None" not in text


def test_time_constants_are_ranked_with_what_they_see():
    text = drawn("times")
    names = [line.split()[0] for line in text.splitlines() if line.startswith(" Q")]
    assert names == ["Q1.cmu", "Q2.cpi", "Q1.couple", "Q2.couple"]
    (cmu,) = rows(text, "Q1.cmu")
    # 5.2e-7 s over 4.7 pF; 1/(2·pi·5.2e-7); 5.2e-7 of 5.21e-7
    assert cmu[:11] == ["Q1.cmu", "4.70", "pF", "111", "kΩ", "520", "ns", "306", "kHz", "99.8", "%"]
    (couple,) = rows(text, "Q1.couple")
    # 1/3.6 ms of 1/3.6 ms + 1/10 ms
    assert couple[:11] == ["Q1.couple", "1.00", "uF", "3.60", "kΩ", "3.60", "ms", "44.2", "Hz", "73.5", "%"]


def test_the_estimates_stand_beside_the_exact_edges():
    text = " ".join(drawn("times").split())
    assert "sum of 2: 521 ns, which puts the upper edge at 268 kHz; exact 274 kHz" in text
    assert "the node poles put it at 301 kHz" in text
    assert "sum of 2 corners, which puts the lower edge at 1.30 kHz; exact 1.23 kHz" in text
    assert "blind" not in text


@pytest.mark.parametrize(("key", "hz"), [("octc_upper_hz", 700e3), ("octc_upper_hz", 100e3), ("node_upper_hz", 400e3)])
def test_an_estimate_that_is_blind_gets_a_word(key, hz):
    doc = full()
    doc["overall"][key] = hz
    text = " ".join(drawn("times", doc).split())
    assert f"is {hz / 274312.0:.2g} times the exact edge" in text
    assert text.count("blind here") == 1


def test_without_an_edge_nothing_is_compared():
    doc = full()
    doc["overall"]["upper_edge_hz"] = None
    doc["overall"]["octc_upper_hz"] = 1e9
    text = " ".join(drawn("times", doc).split())
    assert "there is no exact upper edge" in text
    assert "blind" not in text


def test_an_inductor_sees_value_over_time_constant():
    doc = full()
    coil = {"part": "l_peak", "type": "L", "role": "high", "value": 1e-3, "tau_s": 1e-6}
    doc["parts"].append(doc["parts"][1] | coil)
    (found,) = [part for part, _ in constants(doc, "upper") if part["part"] == "l_peak"]
    assert seen(found) == pytest.approx(1e3)


def test_a_pair_of_poles_stands_once_and_all_are_counted():
    text = drawn("poles")
    lines = text.splitlines()
    (pair,) = [line for line in lines if "±" in line]
    assert pair.split() == ["795.8", "kHz", "0.833", "-3.000M", "±4.000M", "Q1"]
    assert " 5 finite poles" in lines
    assert " 2 finite zeros" in lines
    assert "grows" not in text
    first = next(line for line in lines if line.endswith("–"))
    assert first.split()[:2] == ["0", "Hz"]


def test_a_pole_that_grows_is_marked_and_a_zero_in_the_right_half_plane_is_not():
    doc = full()
    doc["poles"][2:4] = [{**one, "re": 3e6} for one in PAIR]
    assert len(re.findall("grows", drawn("poles", doc))) == 1


@pytest.mark.parametrize(("unstable", "says"), [(False, "is stable"), (True, "is unstable"), (None, "not be told")])
def test_poles_that_are_not_resolved_are_said_so(unstable, says):
    doc = full() | {"poles": None}
    doc["overall"]["unstable"] = unstable
    text = " ".join(drawn("poles", doc).split())
    assert "Poles not resolved" in text
    assert says in text


def test_zeros_that_are_not_resolved_or_none():
    assert "Zeros not resolved" in drawn("poles", full() | {"zeros": None})
    assert "no finite zeros" in drawn("poles", full() | {"zeros": []})


def test_leverage_is_ranked_for_each_figure():
    text = drawn("leverage")
    assert rows(text, "Q1.rc") == [["Q1.rc", "+0.93", "Q1.cmu", "-0.90"]]
    upper = [line.split()[-2:] for line in text.splitlines() if re.search(r"-0\.|\+0\.", line) and "moves" not in line]
    assert upper == [["Q1.cmu", "-0.90"], ["Q1.rc", "-0.81"], ["beta", "+0.33"], ["Q2.cpi", "-0.10"]]
    assert "Q1.gm" not in text
    words = " ".join(text.split())
    assert "+1 % of Q1.cmu moves the upper edge by -0.90 %" in words
    assert "+1 % of Q1.rc moves the gain by +0.93 %" in words
    assert "nothing moves the lower edge, or there is none" in words


def test_a_long_list_says_how_many_are_left_away():
    doc = full()
    part = doc["parts"][2]
    doc["parts"] = [{**part, "part": f"c{at}", "leverage": {**part["leverage"], "upper_edge": 0.5}} for at in range(33)]
    text = drawn("leverage", doc)
    assert "14 more move less: --csv lists them all" in text


def test_no_leverage_is_said():
    assert "No leverage is known" in drawn("leverage", document())
