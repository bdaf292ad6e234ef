"""Preferred values."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.series import NAMES, at_least, at_most, down, holds, members, nearest, up

# IEC 60063, from memory
E24 = "10 11 12 13 15 16 18 20 22 24 27 30 33 36 39 43 47 51 56 62 68 75 82 91"
E96 = """100 102 105 107 110 113 115 118 121 124 127 130 133 137 140 143 147 150 154 158 162 165 169 174 178 182 187 191
196 200 205 210 215 221 226 232 237 243 249 255 261 267 274 280 287 294 301 309 316 324 332 340 348 357 365 374 383 392
402 412 422 432 442 453 464 475 487 499 511 523 536 549 562 576 590 604 619 634 649 665 681 698 715 732 750 768 787 806
825 845 866 887 909 931 953 976"""

positive = st.floats(min_value=1e-20, max_value=1e20)
names = st.sampled_from(NAMES)


def listed(text: str) -> tuple[int, ...]:
    return tuple(map(int, text.split()))


def test_the_series_are_those_of_the_standard() -> None:
    assert members("E3") == (10, 22, 47)
    assert members("E6") == (10, 15, 22, 33, 47, 68)
    assert members("E12") == (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82)
    assert members("E24") == listed(E24)
    assert members("E96") == listed(E96)
    assert members("E48") == listed(E96)[::2]
    assert members("E192")[::2] == listed(E96)
    assert len(set(members("E192"))) == 192 and members("E192")[185] == 920


def test_an_unknown_series_is_a_key_error() -> None:
    with pytest.raises(KeyError):
        members("E7")


def test_nearest_goes_by_ratio() -> None:
    # 1.097 is nearer to 1.0 by difference (0.097 against 0.103), to 1.2 by ratio (1.097 against 1.094)
    assert nearest(1.097, "E12") == 1.2
    assert nearest(4800.0, "E24") == 4700.0
    assert nearest(9.6, "E24") == 10.0
    assert nearest(9.5e-12, "E12") == 1e-11


def test_steps_leave_a_value_of_the_series() -> None:
    assert up(4700.0, "E24") == 5100.0 and down(4700.0, "E24") == 4300.0
    assert up(4800.0, "E24") == 5100.0 and down(4800.0, "E24") == 4700.0
    assert up(9100.0, "E24") == 10000.0 and down(10000.0, "E24") == 9100.0
    assert up(8.2e-10, "E12") == 1e-9 and down(1e-9, "E12") == 8.2e-10


@pytest.mark.parametrize("name", NAMES)
def test_every_value_is_the_float_that_its_text_reads_as(name: str) -> None:
    for decade in range(-15, 13):
        for digits in members(name):
            value = float(f"{digits / (10 if digits < 100 else 100)!r}e{decade}")
            assert holds(value, name)
            assert nearest(value, name) == at_most(value, name) == at_least(value, name) == value
            assert up(down(value, name), name) == value


@given(positive, names)
@settings(max_examples=200, deadline=None, derandomize=True)
def test_neighbours_enclose_a_value_and_nothing_lies_between(value: float, name: str) -> None:
    below, above = at_most(value, name), at_least(value, name)
    assert below <= value <= above
    assert (below == above) == holds(value, name)
    if below < above:
        assert up(below, name) == above and down(above, name) == below
    assert down(value, name) < value < up(value, name)
    best = nearest(value, name)
    assert all(abs(math.log(best / value)) <= abs(math.log(other / value)) + 1e-15 for other in (below, above))


@pytest.mark.parametrize("value", [0.0, -1.0, math.nan, math.inf, 1e-310, 1e305])
def test_what_has_no_neighbours_is_a_value_error(value: float) -> None:
    with pytest.raises(ValueError, match=r"neighbours|beyond"):
        nearest(value, "E24")
