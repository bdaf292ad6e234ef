"""Kinds, cards and tables as rows, from the tables that the reader uses."""

from __future__ import annotations

from polebook.chain import kinds
from polebook.chain.suggest import listed, nearest
from polebook.chain.tables import SECTIONS
from polebook.devices.registry import FAMILIES
from polebook.quantity import DIMENSIONS, parse
from polebook.stages.base import COMMON, GROUP, SLOTS, slot_key, slot_of
from polebook.stages.registry import KINDS


def test_every_kind_family_and_table_is_listed_once():
    names = [one.name for one in kinds.listings()]
    assert len(set(names)) == len(names)
    assert set(names) == {*KINDS, *FAMILIES, *SECTIONS, "arm", "bench", "file"}


def test_every_key_has_a_unit_and_a_purpose():
    for one in kinds.listings():
        keys = [row.key for row in one.rows]
        assert len(set(keys)) == len(keys)
        for row in one.rows:
            assert row.unit, (one.name, row.key)
            assert row.about, (one.name, row.key)
            assert row.role in ("", "low", "high")


def test_rows_say_what_the_reader_asks():
    rows = {row.key: row for row in kinds.listing("block").rows}
    assert (rows["gain"].required, rows["gain"].unit) == (True, "V/V, dB")
    assert (rows["rout"].default, rows["rout"].unit) == ("1m", "Ω")
    assert rows["poles"].unit == "list of Hz"
    common = "name kind note left_out couple stray c_load allot free tolerance"
    assert {row.key for row in kinds.common()} == set(common.split())
    assert {row.key: row.role for row in kinds.listing("common-emitter").rows}["ce"] == "low"
    assert "E48" in {row.key: row.about for row in kinds.listing("preferred").rows}["resistor"]
    assert kinds.listing("cascode").takes == ("bjt", "mosfet", "jfet")
    assert kinds.listing("nothing") is None
    assert kinds.nearest_name("comon-base") == "common-base"


def test_every_default_can_be_read():
    tables = [*(kind.params for kind in KINDS.values()), *FAMILIES.values(), *SECTIONS.values(), COMMON]
    defaults = [param for params in tables for param in params if param.default]
    assert len(defaults) > 20
    for param in defaults:
        if param.dimension in DIMENSIONS:
            assert parse(param.default, param.dimension) >= 0.0
        else:
            assert param.default in (param.choices or ("true", "false"))


def test_the_families_name_the_parts_of_the_format():
    assert [slot_key("current", family) for family in GROUP] == ["ic", "id", "id", "ia"]
    assert [slot_key("r_low_bypassed", family) for family in GROUP] == [
        "re_bypassed",
        "rs_bypassed",
        "rs_bypassed",
        "rk_bypassed",
    ]
    assert [slot_key("bias_top", family) for family in GROUP] == ["rb1", "rg1", "rg1", ""]
    assert slot_of("rd") == "r_out"
    assert slot_of("gain") == ""


def test_only_inverting_kinds_take_bridges():
    bridged = {"rf", "c_rf", "c_comp", "r_comp"}
    for kind in KINDS.values():
        own = bridged & {param.key for param in kind.params}
        if kind.topology == "inverting":
            assert own == bridged
        elif kind.topology in ("follower", "common_control", "cascode"):
            assert not own


def test_a_kind_has_each_part_once_under_one_familys_name():
    for kind in KINDS.values():
        for family in kind.families:
            keys = [param.key for param in kind.params_for(family)]
            assert len(set(keys)) == len(keys)
            if family in GROUP:
                foreign = {key for slot in SLOTS for key in SLOTS[slot].names if key} - {
                    slot_key(slot, family) for slot in SLOTS
                }
                assert not foreign & set(keys)


def test_nearest_words():
    assert nearest("couplle", ["couple", "c_load"]) == "couple"
    assert nearest("RC", ["rc", "rd"]) == "rc"
    assert nearest("npn", ["n", "p"]) == "n"
    assert nearest("zzz", ["rc", "rd"]) == ""
    assert nearest("x" * 100_000, ["rc"]) == ""
    assert nearest("rc", []) == ""


def test_listing_words():
    assert listed([]) == ""
    assert listed(["a"]) == "a"
    assert listed(["a", "b", "c"], "or") == "a, b or c"


def test_a_kind_of_several_families_names_the_terminals_of_each():
    about = {row.key: row.about for row in kinds.listing("cascode").rows}
    assert about["stopper"] == "resistor in series with the base or gate"
    assert about["l_peak"].startswith("inductor in series with the collector or drain resistor")
    assert about["re"] == "emitter resistor, not bypassed"
    assert about["rs"] == "source resistor, not bypassed"
    follower = {row.key: row.about for row in kinds.listing("source-follower").rows}
    assert follower["stopper"] == "resistor in series with the gate"
