"""Bars of levels: what stands where, what lies over what, at any width."""

from __future__ import annotations

import re
from math import log10

import pytest

from polebook.report.level_bar import Scale, marks, scale


def test_a_level_stands_in_the_cell_of_its_decibels() -> None:
    on = Scale(-100, 20, 121)
    bar = on.bar(marks(1e-4 / 2**0.5, 1e-3, 1e-2, 1.0))
    assert bar == "·" * 21 + " " * 19 + "█" * 21 + "─" * 39 + "|"
    assert [on.place(20 * log10(volts)) for volts in (1e-5, 1.0, 10.0)] == [0, 100, 120]


def test_what_lies_under_the_noise_is_told_apart() -> None:
    on = Scale(-100, 20, 121)
    assert on.bar((-60.0, -80.0, -40.0, None)) == "·" * 20 + "x" * 21 + "█" * 20
    assert on.bar((-40.0, -80.0, -60.0, None)) == "·" * 20 + "x" * 21 + "·" * 20, "all of it lies under the noise"


def test_the_clip_level_stands_over_a_signal_that_goes_past_it() -> None:
    on = Scale(-40, 0, 41)
    assert on.bar((None, -20.0, -5.0, -10.0)) == " " * 20 + "█" * 10 + "|" + "█" * 5
    assert on.bar((None, None, -5.0, -10.0)) == " " * 30 + "|" + " " * 4 + "█"


def test_what_is_not_known_is_not_drawn() -> None:
    on = Scale(-40, 0, 41)
    assert on.bar((None, None, None, None)) == ""
    assert on.bar((None, None, None, -10.0)) == " " * 30 + "|"
    assert on.bar((-30.0, None, None, None)) == "·" * 11, "noise alone is a floor"
    assert marks(0.0, None, 0.0, 1.0) == (None, None, None, 0.0), "nothing has no decibels"


def test_the_scale_has_every_level_on_it_and_labels_that_do_not_touch() -> None:
    found = scale([marks(1e-6, None, 1e-3, None), (None, None, None, 31.0)], 40)
    assert found is not None and (found.low, found.high) == (-120, 40)
    assert scale([(None, None, None, None)], 40) is None and scale([(1.0,)], 1) is None
    even = scale([(20.0,)], 40)
    assert even is not None and (even.low, even.high) == (20, 40), "a level on a tick has room above it"


@pytest.mark.parametrize("wide", [2, 3, 7, 24, 40, 90, 200])
def test_labels_stand_within_the_width_apart_from_each_other_and_over_their_places(wide: int) -> None:
    on = Scale(-180, 40, wide)
    text = on.labels()
    assert len(text) <= wide
    found = {int(label[0]): label.start() for label in re.finditer(r"-?\d+", text)}
    assert len(found) == len(text.split()) and len(found) >= (wide >= 7) + (wide >= 40)
    for db, start in found.items():
        assert -180 <= db <= 40 and db % 20 == 0
        assert start == min(on.place(db), wide - len(str(db)))
