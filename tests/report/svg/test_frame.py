"""Scales, curves that are cut off at the frame, points that need not be drawn, words that keep clear."""

from itertools import combinations

import pytest

from polebook.report.svg.frame import Frame, Scale, crossing
from polebook.report.svg.labels import Labels
from polebook.report.svg.sheet import Sheet, cut, px, thinned, wide
from tests.report.svg.drawn import Picture


def frame():
    return Frame(Sheet(200, 100), Scale(0, 10, 0, 100), Scale(0, 10, 100, 0))


def test_scales_lie_evenly_or_by_equal_ratios():
    assert Scale(0, 10, 50, 150).at(2.5) == 75
    assert Scale(1, 1e9, 0, 90, True).at(1e3) == pytest.approx(30)
    assert Scale(1, 1e9, 0, 90, True).inside(1e12) == 90


@pytest.mark.parametrize(("value", "held"), [(1.0, True), (1e9, True), (0.16, False), (1.1e9, False), (0.0, False),
                                             (-1.0, False), (None, False)])
def test_a_wide_scale_holds_what_lies_between_its_ends(value, held):
    assert Scale(1, 1e9, 0, 690, True).holds(value) is held


def test_a_curve_is_cut_off_where_it_leaves_the_frame():
    (piece,) = frame().pieces([0, 5, 10], [-10, 10, 10])
    assert piece == [(25, 100), (50, 0), (100, 0)]
    first, second = frame().pieces([0, 4, 8], [5, 25, 5])
    assert first == [(0, 50), (10, 0)]
    assert second == [(70, 0), (80, 50)]


def test_a_curve_that_only_passes_through_is_seen():
    (piece,) = frame().pieces([2, 4], [-10, 20])
    assert piece == [(pytest.approx(20 + 20 / 3), 100), (pytest.approx(20 + 40 / 3), 0)]
    assert list(frame().pieces([2, 4], [11, 12])) == []


def test_a_gap_stays_a_gap():
    pieces = list(frame().pieces([0, 1, 2, 3, 4], [1, 2, None, 3, 4]))
    assert [len(piece) for piece in pieces] == [2, 2]


def test_the_height_of_a_piece():
    assert crossing([(0, 0), (10, 20)], 5) == 10
    assert crossing([(0, 0), (10, 20)], 11) is None


def test_points_on_a_line_are_left_away_and_corners_stay():
    assert thinned([(k, 2 * k) for k in range(50)]) == [(0, 0), (49, 98)]
    assert thinned([(0, 0), (5, 0), (10, 0), (10, 10)]) == [(0, 0), (10, 0), (10, 10)]
    assert thinned([(1, 1)]) == [(1, 1)]
    assert thinned([]) == []
    bow = [(k, (k - 50) ** 2 / 25) for k in range(101)]
    kept = thinned(bow)
    assert 5 < len(kept) < 60
    assert all(abs(crossing(kept, x) - y) < 0.65 for x, y in bow)


@pytest.mark.parametrize(("value", "told"), [(1.0, "1"), (1.04, "1"), (1.06, "1.1"), (-0.01, "0"), (120.0, "120")])
def test_lengths_have_one_decimal(value, told):
    assert px(value) == told


def test_words_are_cut_to_their_room():
    assert cut("short", 100) == "short"
    told = cut("words that are too long for it", 100)
    assert told.endswith("…") and wide(told) <= 100
    assert wide("bold", bold=True) > wide("bold")
    assert wide("漢字") > wide("ab")


def test_labels_keep_clear_of_one_another_and_of_a_curve():
    sheet = Sheet(300, 200)
    labels = Labels(sheet, 0, 0, 300, 200)
    line = [(0, 100), (300, 100)]
    labels.shun(line)
    for at in (80, 140, 200):
        labels.put(f"label at {at}", at, 100)
    texts = Picture(sheet.render("t", "d")).texts
    assert len(texts) == 3
    assert all(text.bottom < 100 or text.top > 100 for text in texts)
    for one, other in combinations(texts, 2):
        assert one.right <= other.left or other.right <= one.left or one.bottom <= other.top or other.bottom <= one.top


def test_fewer_words_where_there_is_no_room_for_all():
    sheet = Sheet(120, 40)
    labels = Labels(sheet, 0, 0, 120, 40)
    labels.shun([(50, 0), (50, 40)])
    labels.put("far too many words", 52, 20, ("e",), fewer="few")
    assert [text.words for text in Picture(sheet.render("t", "d")).texts] == ["few"]
