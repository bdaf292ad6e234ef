"""The tables of card keys."""

from __future__ import annotations

import pytest

from polebook.devices import opamp
from polebook.devices.ratings import exceeded
from polebook.devices.registry import FAMILIES
from polebook.quantity import DIMENSIONS, parse

WORDS = {"text", "choice"}


@pytest.mark.parametrize("family", FAMILIES)
def test_every_key_stands_once_with_a_known_dimension_and_a_default_that_can_be_read(family):
    rows = FAMILIES[family]
    assert len({row.key for row in rows}) == len(rows)
    for row in rows:
        assert row.about and (row.dimension in WORDS or row.dimension in DIMENSIONS), row
        if row.dimension == "choice":
            assert row.choices and row.default in ("", *row.choices)
        elif row.default:
            assert parse(row.default, row.dimension) >= 0


def test_every_card_may_carry_family_note_and_ratings():
    for rows in FAMILIES.values():
        assert {"family", "note", "p_max", "v_max", "i_max", "theta"} <= {row.key for row in rows}


def test_stated_defaults():
    defaults = {(family, row.key): row.default for family, rows in FAMILIES.items() for row in rows if row.default}
    numbers = {key: parse(value, "factor") for key, value in defaults.items() if key[1] != "polarity"}
    assert numbers == {
        ("bjt", "grading"): 0.33, ("bjt", "built_in"): 0.75, ("bjt", "c_be0"): 0, ("bjt", "vce_sat"): 0.2,
        ("bjt", "vbe"): 0.65,
        ("mosfet", "gamma_noise"): 2 / 3, ("jfet", "gamma_noise"): 2 / 3,
        ("opamp", "a0"): opamp.A0, ("opamp", "rout"): opamp.ROUT_OHM, ("opamp", "headroom"): opamp.HEADROOM_V,
    }


def test_ratings_are_exceeded_only_past_them():
    card = {"p_max": 0.5, "v_max": 30.0, "i_max": 0.1}
    assert exceeded(card.get, 0.05, 10.0) == []
    assert exceeded(card.get, None, None) == []
    told = dict(exceeded(card.get, 0.2, 40.0))
    assert told.keys() == {"p_max", "v_max", "i_max"}
    assert "8.00 W" in told["p_max"] and "500 mW" in told["p_max"]
    assert exceeded({}.get, 1e3, 1e3) == []
