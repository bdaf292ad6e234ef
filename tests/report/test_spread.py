"""The report of a spread: charts, percentages that do not round to all or nothing, what there is none of."""

import pytest

from polebook.report.histogram import histogram, place
from polebook.report.look import Look, cells
from polebook.report.spread import spread
from polebook.report.spread_words import part_text, percent

PERCENTILES = ("0.1", "1", "50", "99", "99.9")
PLAIN = Look(encoding="ascii")


def bins(counts, low=0.0, high=10.0, **more):
    return {"from": low, "to": high, "counts": counts, "below": 0, "above": 0, **more}


def figure(unit="dB", value=60.0, **more):
    told = dict.fromkeys(PERCENTILES, value)
    return {"unit": unit, "builds": 100, "mean": value, "deviation": None, "percentiles": told, "least": value,
            "greatest": value, "nominal": value, "linear_deviation": None, "target": None, "limits": [],
            "histogram": None, **more}


def answer(**more):
    figures = {"gain_db": figure(), "upper_edge_hz": figure("Hz", 1e6)}
    return {"files": [{"file": "chain.toml", "digest": "0" * 64}], "builds": 100, "asked": 100, "seed": 7,
            "stopped": False, "temperature": None, "shape": "normal", "gain_unit": "V/V", "figures": figures,
            "yield": {}, "targets": [], "wanted": None, "unjudged": [], "states": {"good": 100}, "outside": {},
            "corner": {}, "costs": None, "draws": [], "cautions": [], **more}


def judged(share, low, high, **more):
    one = {"share": share, "low": low, "high": high}
    target = {"name": "upper", "figure": "upper_edge_hz", "want": 9e5, "missed": round(100 * (1 - share)),
              "nominal_met": True}
    return answer(**{"yield": {"all": one, "upper": one}, "targets": [target], "costs": [], **more})


def test_a_chart_shows_what_is_least_and_marks_a_limit():
    lines = histogram(bins([0, 1, 1000, 500]), [5.0], Look())
    assert lines == ["    █", "    █▄", "   ▁██", "  ──▲─"]
    assert histogram(bins([0, 1, 1000, 500]), [5.0], PLAIN) == ["    #", "    #.", "   .##", "  --^-"]


@pytest.mark.parametrize(("limit", "column"), [(0.0, 0), (2.4, 0), (2.6, 1), (9.9, 3), (10.0, 3), (-0.1, None),
                                               (10.1, None)])
def test_a_limit_stands_in_its_column(limit, column):
    assert place(bins([1, 1, 1, 1]), limit) == column
    (axis,) = histogram(bins([1, 1, 1, 1]), [limit], Look())[-1:]
    assert axis[2:].find("▲") == (-1 if column is None else column)


@pytest.mark.parametrize(("share", "text"), [(0.0, "0.00 %"), (1.0, "100.00 %"), (0.974, "97.40 %"),
                                             (0.99999, "99.999 %"), (1e-6, "0.0001 %"), (0.99996, "99.996 %")])
def test_a_share_looks_like_all_or_nothing_only_when_it_is(share, text):
    assert percent(share) == text


@pytest.mark.parametrize(("name", "text"), [("Q1.rc", "Q1.rc"), ("device.N.beta", "N beta"),
                                            ("device.N.beta@Q1", "N beta at Q1")])
def test_draws_are_named_as_a_reader_knows_them(name, text):
    assert part_text(name) == text


def test_a_chart_that_does_not_reach_a_target_says_on_which_side_it_lies():
    chart = bins([1, 2, 1], 9e5, 1.1e6)
    figures = {"upper_edge_hz": figure("Hz", 1e6, deviation=1e4, histogram=chart, target="upper", limits=[5e5])}
    assert "target at least 500.0 kHz (off left)" in spread(answer(figures=figures), Look())
    figures["upper_edge_hz"]["limits"] = [2e6]
    assert "(off right)" in spread(answer(figures=figures), Look())
    figures["upper_edge_hz"]["limits"] = [1e6]
    assert "(off" not in spread(answer(figures=figures), Look())


def test_a_yield_that_the_interval_holds_is_not_told_apart_from_what_is_wanted():
    assert "too few to tell it from 95.0 %" in spread(judged(0.96, 0.9, 0.99, wanted=0.95), Look())
    assert "too few" not in spread(judged(0.96, 0.955, 0.97, wanted=0.95), Look())
    assert " met\n" in spread(judged(0.96, 0.955, 0.97, wanted=0.95), Look())
    assert " missed\n" in spread(judged(0.94, 0.93, 0.945, wanted=0.95), Look())


def test_where_nothing_costs_yield_it_says_why():
    assert "every build meets its targets" in spread(judged(1.0, 0.96, 1.0), Look())
    shut = judged(0.0, 0.0, 0.04)
    shut["targets"][0]["nominal_met"] = False
    text = spread(shut, Look())
    assert "no single tolerance, halved, would bring yield" in text
    assert "the chain as filed misses upper itself" in text


def test_a_figure_that_no_build_has_is_a_dash():
    none = figure("Hz", None, builds=0, nominal=None)
    text = spread(answer(figures={"upper_edge_hz": none}, states={"good": 0, "unstable": 1}, builds=1), Look())
    assert "–" in text
    assert "1 build unstable" in text
    assert "polebook show tells why" in text


def test_estimates_are_marked_and_long_names_fit():
    long = "a-stage-whose-name-is-as-long-as-names-may-well-be"
    cost = {"part": f"{long}.rb1", "yield_gain": 0.0123, "at_none": 0.02, "tolerance": 0.05, "sort": "resistor",
            "solved": False, "builds": 100}
    corner = {"value": 5e5, "state": "good", "linear": 6e5, "met": False, "beyond": 0, "signs": {f"{long}.rb1": -1},
              "turned": [f"{long}.rb1"]}
    draw = {"part": f"{long}.rb1", "sort": "resistor", "tolerance": 0.05, "numbers": [f"{long}.rb1"],
            "variance": {"upper_edge_hz": 1.0, "gain_db": 1.0}}
    made = judged(0.9, 0.8, 0.95, costs=[cost, {**cost, "solved": True, "yield_gain": 0.01}], draws=[draw],
                  corner={"upper_edge_hz": {"low": corner}})
    for look in (Look(), PLAIN):
        text = spread(made, look)
        assert max(map(cells, text.splitlines())) <= 80
        assert "+1.23 % ~" in text and "+1.00 %    +2.00 % ~" in text
        assert "500.0 kHz *" in text and "stand at their other end" in " ".join(text.split())


def test_what_a_file_says_is_shown_and_not_run():
    evil = "\x1b[2J.toml"
    text = spread(answer(files=[{"file": evil, "digest": ""}], outside={"Q\x1b": 2}, cautions=["\x1b[0m"]), Look())
    assert "\x1b" not in text


def test_a_temperature_stands_in_the_head_and_in_the_command():
    text = " ".join(spread(answer(temperature=[-20.0, 60.5]), Look()).split())
    assert "; -20 to 60.5 °C, evenly" in text
    assert text.endswith("--builds 100 --seed 7 --temperature -20:60.5")
