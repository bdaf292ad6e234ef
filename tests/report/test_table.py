"""Tables: alignment, fitting, and what a terminal can show."""

import pytest

from polebook.report.look import Look, cells, fit
from polebook.report.table import Cell, Column, table


def test_figures_align_right_and_words_left():
    lines = table([Column("name", right=False), Column("value")], [["a", "1"], ["long", "1000"]], Look())
    assert lines == [" name  value", " a         1", " long   1000"]


def test_two_line_headings_stand_on_their_last_line():
    lines = table([Column("name", right=False), Column("gain\ndB")], [["a", "1.00"]], Look())
    assert lines == ["       gain", " name    dB", " a     1.00"]


def test_a_long_word_is_cut_and_no_figure_is():
    lines = table([Column("name", right=False), Column("value")], [["x" * 200, "123456"]], Look(width=40))
    assert lines[1] == " " + "x" * 30 + "…" + "  123456"
    assert max(map(cells, lines)) == 40


def test_wide_characters_count_double():
    assert cells("線a") == 3
    assert fit("線線線", 5) == "線線…"
    assert cells(fit("線線線", 4)) <= 4
    assert fit("線線線", 6) == "線線線"


def test_control_characters_are_made_visible_before_they_are_measured():
    lines = table([Column("name", right=False), Column("v")], [["a\x1b[31m", "1"], ["b", "2"]], Look())
    assert lines[1] == " a\\x1b[31m  1"
    assert lines[2] == " b          2"


def test_colour_does_not_move_a_column():
    rows = [[Cell("a", "bad"), Cell("1", "good")], ["bb", "22"]]
    plain = table([Column("n", right=False), Column("v")], rows, Look())
    painted = table([Column("n", right=False), Column("v")], rows, Look(colour=True))
    assert painted[1] == " \x1b[31ma\x1b[0m    \x1b[32m1\x1b[0m"
    assert plain[1] == " a    1"


@pytest.mark.parametrize(
    ("encoding", "shown"),
    [
        ("utf-8", "4.7 kΩ – é線"),
        ("ascii", "4.7 kohm - \\xe9\\u7dda"),
        ("latin-1", "4.7 kohm - é\\u7dda"),
    ],
)
def test_a_character_that_the_encoding_lacks_is_replaced(encoding, shown):
    text = Look(encoding=encoding).text("4.7 kΩ – é線")
    assert text == shown
    text.encode(encoding)


def test_a_file_name_that_is_no_text_can_be_shown():
    assert Look().text("a\udcff.toml").encode("utf-8") == b"a\\udcff.toml"


@pytest.mark.parametrize(
    ("share", "unicode", "ascii_"),
    [(0.0, "", ""), (0.5, "█████", "#####"), (0.3125, "███▏", "###"), (2.0, "█" * 10, "#" * 10)],
)
def test_bars(share, unicode, ascii_):
    assert Look().bar(share, 10) == unicode
    assert Look(encoding="ascii").bar(share, 10) == ascii_


def test_a_small_share_still_shows():
    assert Look().bar(0.0001, 10) == "▏"
    assert Look(encoding="ascii").bar(0.01, 10) == "#"
    assert Look().bar(-0.1, 10) == ""
