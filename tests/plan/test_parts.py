"""What is bought: counts, tolerances, what is not fitted."""

from polebook.chain import read
from polebook.plan.parts import parts
from tests.cli.helpers import ALL, LISTENER, PHOTODIODE, ROOT

LISTENER_TEXT = LISTENER.read_text(encoding="utf-8")
HEAD = 'format = 1\n[source]\nkind = "voltage"\nresistance = "600"\n'


def listed(text):
    return parts(read.parse(text, "x.toml"))


def row(found, code, group=None):
    (one,) = [row for row in found["parts"] if row["code"] == code and group in (None, row["group"])]
    return one


def test_alike_parts_stand_together_with_where_they_are_used():
    found = listed(LISTENER_TEXT)
    assert row(found, "2k2") == {
        "group": "resistor", "value": 2200.0, "code": "2k2", "unit": "Ω", "tolerance": 0.01, "count": 2,
        "used": ["Q1.rc", "Q2.rc"], "series": "E24", "preferred": True,
    }  # fmt: skip
    assert row(found, "VF")["used"] == ["Q1", "Q2", "Q3"]
    assert row(found, "100n")["used"] == ["load.couple"]
    assert sum(one["count"] for one in found["parts"]) == 21


def test_a_stages_own_tolerance_sets_a_part_apart():
    text = LISTENER_TEXT.replace("stray       = \"2p\"\n", 'stray = "2p"\ntolerance = { rc = "5 %" }\n', 1)
    rows = [one for one in listed(text)["parts"] if one["code"] == "2k2"]
    assert [(one["tolerance"], one["used"]) for one in rows] == [(0.01, ["Q2.rc"]), (0.05, ["Q1.rc"])]


def test_what_is_not_of_the_series_is_marked():
    text = LISTENER_TEXT.replace('"33" ', '"34" ') + '\n[preferred]\ncapacitor = "E3"\n'
    found = listed(text)
    odd = {one["code"] for one in found["parts"] if one["preferred"] is False}
    assert odd == {"34R", "3n3"}  # 4p7, 4n7, 100n and 1u are of E3


def test_zero_is_no_part_and_neither_is_what_is_left_out():
    text = LISTENER_TEXT.replace('stopper     = "47"', "stopper = 0\nleft_out = true")
    found = listed(text)
    assert all(not used.startswith("Q3") for one in found["parts"] for used in one["used"])
    assert [entry["values"] for entry in found["not_fitted"] if entry["what"] == "left out"] == [["Q3"]]
    zero = listed(LISTENER_TEXT.replace('stopper     = "47"', "stopper = 0"))
    assert all("Q3.stopper" not in one["used"] for one in zero["parts"])


def test_source_load_and_wiring_are_not_fitted():
    found = listed(LISTENER_TEXT)
    told = {entry["what"]: entry["values"] for entry in found["not_fitted"]}
    assert told["source"] == ["resistance 600R", "capacitance 90p"]
    assert told["load"] == ["resistance 600R", "capacitance 220p"]
    assert told["wiring"] == ["Q1.stray 2p", "Q2.stray 2p"]


def test_a_cascode_takes_two_devices_and_a_block_is_bought_whole():
    six = listed((ROOT / "chains" / "six-stage.toml").read_text(encoding="utf-8"))
    assert row(six, "N")["count"] == 6
    text = HEAD + '[[stage]]\nname = "B1"\nkind = "block"\ngain = 10\nrin = "50"\nrout = "50"\ncouple = "1n"\n'
    found = listed(text)
    assert [(one["group"], one["code"]) for one in found["parts"]] == [("capacitor", "1n"), ("block", "B1")]


def test_the_arms_of_a_ladder_are_parts():
    text = HEAD + '[[stage]]\nname = "L1"\nkind = "ladder"\n'
    text += 'arms = [{ series_l = "10u", series_r = "1k" }, { shunt_c = "1n" }]\n'
    found = listed(text)
    assert row(found, "10u")["used"] == ["L1.arms.1.series_l"]
    assert row(found, "10u")["tolerance"] == 0.1
    assert row(found, "1n")["unit"] == "F"


def test_amplifiers_are_counted_by_card():
    found = parts(read.load(str(PHOTODIODE)))
    assert row(found, "VOLT")["count"] == 2
    assert row(found, "FETIN")["unit"] == "opamp"


def test_no_part_of_a_demo_chain_is_forgotten():
    """Every R, C and L of the ledger that is a key of a stage is on the list, but for wiring."""
    from tests.helpers import figures

    for chain in ALL:
        used = {one for row in parts(read.load(str(chain)))["parts"] for one in row["used"]}
        given = read.load(str(chain)).given
        for part in figures(chain)["parts"]:
            name = f"{part['stage']}.{part['part']}"
            if part["type"] in "RCL" and name in given and part["stage"] not in ("source", "load"):
                assert (name in used) != (part["part"] == "stray"), name
