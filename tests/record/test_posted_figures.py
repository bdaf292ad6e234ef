"""What a post keeps of a ledger: 6 digits that rounding errors do not move, by names that stages coming do not move."""

import tomllib
from functools import cache
from math import log10, nextafter

import pytest
from hypothesis import given
from hypothesis import strategies as st

from polebook.book.build import document, ledger
from polebook.chain.read import load, parse
from polebook.record.posted_figures import figures, flat, moved, rounded, same
from tests.cli.helpers import CHAINS, LISTENER


@cache
def of(path):
    return ledger(load(str(path)))


@cache
def kept():
    return figures(of(LISTENER))


@cache
def whole():
    return document(of(LISTENER))


def test_the_figures_are_those_of_the_ledger():
    full, overall = whole(), kept()["overall"][""]
    for key in ("gain_db", "lower_edge_hz", "upper_edge_hz"):
        assert overall[key] == pytest.approx(full["overall"][key], rel=5.1e-6)
    assert (overall["state"], overall["gain_unit"]) == ("stable", "V/V")
    for line in full["lines"]:
        assert kept()["lines"][line["name"]]["gain_db"] == pytest.approx(line["gain_db"], abs=5.1e-5)
        assert kept()["lines"][line["name"]]["owns_upper"] == pytest.approx(line["owns_upper"], abs=5.1e-5)
    for end in ("upper", "lower"):
        row, account = kept()["account"][end], full["account"][end]
        assert list(row) == ["edge_hz", "lost_db", "left_db"]
        assert row["lost_db"] == pytest.approx(account["lost_db"], abs=5.1e-5)
        lost = [line[f"lost_{end}_db"] for line in kept()["lines"].values()]
        assert sum(lost) == pytest.approx(account["lost_db"], abs=4e-4)


def test_a_node_stands_with_the_line_whose_output_it_is():
    poles = {node["stage"]: node["pole_hz"] for node in whole()["nodes"] if node["interstage"]}
    assert list(kept()["lines"]) == ["source", "Q1", "Q2", "Q3", "load"]
    for name, row in kept()["lines"].items():
        assert row.get("pole_hz") == (poles[name] and pytest.approx(poles[name], rel=5.1e-6))
    assert "pole_hz" not in kept()["lines"]["load"]  # what does not apply is not there


def test_targets_stand_in_the_units_that_their_keys_name():
    targets = kept()["targets"]
    assert list(targets) == [row["name"] for row in whole()["targets"]]
    assert targets["gain"]["want_db"] == 60.0
    assert targets["upper"] == {"want_hz": 1e6, "got_hz": kept()["overall"][""]["upper_edge_hz"], "met": False}
    assert targets["gain"]["got_db"] == pytest.approx(20 * log10(whole()["targets"][0]["got"]), abs=5.1e-5)


def test_targets_beyond_the_band_have_theirs():
    more = ('noise = "5n"\ncurrent = "20m"\nrise = "1u"\novershoot = "5 %"\npulse = "1u"\nsag = "50 %"\n'
            'swing = "1"')
    text = LISTENER.read_text().replace('peaking = "0.5 dB"', more)
    got = figures(ledger(parse(text, "x")))["targets"]
    keys = {name: [key for key in row if key not in ("met", "why")] for name, row in got.items()}
    assert keys["noise"] == ["want_v_rthz", "got_v_rthz"] and got["noise"]["want_v_rthz"] == 5e-9
    assert keys["current"] == ["want_a", "got_a"]
    assert keys["rise"] == ["want_s", "got_s"]
    assert keys["overshoot"] == ["want_percent", "got_percent"] and got["overshoot"]["want_percent"] == 5.0
    assert keys["sag"] == ["want_percent", "got_percent"] and got["sag"]["want_percent"] == 50.0
    assert keys["swing"] == ["want_v", "got_v"]


def test_a_noise_current_is_told_as_one():
    text = (CHAINS / "photodiode-front.toml").read_text().replace("[target]", '[target]\nnoise = "1p"', 1)
    assert "want_a_rthz" in figures(ledger(parse(text, "x")))["targets"]["noise"]


def test_an_absent_edge_is_met_with_its_reason():
    text = LISTENER.read_text()
    for line in ('couple      = "4n7"', 'couple      = "3n3"', 'couple      = "100n"', 'ce          = "1u"'):
        assert line in text
        text = text.replace(line, "")
    text = text.replace("rb1         =", "ic = 2e-3\nrb1         =")
    text = text.replace('re          = "1k2"', 're = "1k2"\nic = 4e-3')
    got = figures(ledger(parse(text, "x")))
    assert got["targets"]["lower"] == {"want_hz": 20000.0, "met": True, "why": "the band has no lower edge"}
    assert "lower_edge_hz" not in got["overall"][""]
    assert got["account"]["lower"]["edge_hz"] == 20000.0


@given(st.floats(min_value=1e-15, max_value=1e15), st.sampled_from(("upper_edge_hz", "gain_db", "owns_upper", "k")))
def test_rounding_is_to_6_digits_and_done_once(size, name):
    for value in (size, -size):
        once = rounded(name, value)
        assert rounded(name, once) == once
        assert abs(once - value) <= max(5.0001e-6 * abs(value), 5.0001e-5 if name in ("gain_db", "owns_upper") else 0)
        assert float(f"{once:.5e}") == once


@pytest.mark.parametrize(("name", "value", "is_"), [
    ("gain_db", -1e-9, "0.0"), ("lost_upper_db", 0.00004, "0.0"), ("lost_upper_db", 0.00006, "0.0001"),
    ("owns_lower", -0.00051, "-0.0005"), ("got_percent", 84.430000001, "84.43"), ("pole_hz", 7592754.3, "7592750.0"),
    ("k", 0.98902749, "0.989027"), ("got_v_rthz", 1.2345678e-9, "1.23457e-09"), ("pole_hz", 999999.6, "1000000.0"),
    ("gain_db", 123.456789, "123.457"), ("peaking_db", 0.0, "0.0"),
])
def test_rounding(name, value, is_):
    assert repr(rounded(name, value)) == is_


def test_a_tie_stays_a_tie_whatever_the_last_bit_is():
    for tie in (0.12345, 12.00005, 400000.5, 7.00015):
        name = "lost_upper_db" if tie < 100 else "pole_hz"
        assert rounded(name, nextafter(tie, 0.0)) == rounded(name, nextafter(tie, 1e9)) == rounded(name, tie)


def test_alike_is_within_one_unit_of_the_last_digit():
    assert same("pole_hz", 399946.0, 399947.0) and not same("pole_hz", 399946.0, 399948.0)
    assert same("pole_hz", 999999.0, 1000000.0) and not same("pole_hz", 999989.0, 1000000.0)
    assert same("gain_db", 0.0001, 0.0) and not same("gain_db", 0.0002, 0.0)
    assert same("k", 0.0, 0.0) and not same("k", 0.0, 1e-5)
    assert not same("k", None, 1.0) and not same("met", True, 1.0) and same("met", True, True)
    assert not same("state", "stable", "unstable")


def test_what_moved_is_named_from_before_to_after():
    other = figures(ledger(parse(LISTENER.read_text().replace('"4p7"', '"1p"'), "x")))
    found = {one.name: (one.before, one.after) for one in moved(kept(), other)}
    before, after = dict(flat(kept())), dict(flat(other))
    assert found["lines.Q1.pole_hz"] == (before["lines.Q1.pole_hz"], after["lines.Q1.pole_hz"])
    assert found["account.upper.left_db"][1] > found["account.upper.left_db"][0]
    assert "lines.Q1.gain_db" not in found and "overall.gain_db" not in found
    assert moved(kept(), kept()) == ()


def test_a_stage_put_in_ahead_leaves_the_names_of_the_others():
    text = LISTENER.read_text()
    stage = '[[stage]]\nname = "L1"\nkind = "ladder"\narms = [{ shunt_r = "1M" }]\n\n'
    assert tomllib.loads(stage)
    longer = figures(ledger(parse(text.replace("[[stage]]", stage + "[[stage]]", 1), "x")))
    names = {name for name, _ in flat(longer)}
    assert {name for name, _ in flat(kept())} <= names
    assert longer["lines"]["Q2"]["gain_db"] == kept()["lines"]["Q2"]["gain_db"]
