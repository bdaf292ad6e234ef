"""What differs between two texts, by lines: against the one from the other, and as it is drawn."""

import random

from polebook.tui.control import difference
from polebook.tui.control.difference import ALIKE, GAP, IN, OUT, lines, rows
from polebook.tui.draw.difference import difference as drawn
from polebook.tui.draw.pen import pen
from polebook.tui.lines import width
from polebook.tui.view import Overlay

ONE = "\n".join(f"line {number}" for number in range(1, 31))


def patched(first, found):
    """The second text, from the first and what differs."""
    out = {row.number for row in found if row.mark == OUT}
    new = {row.number: row.text for row in found if row.mark == IN}
    kept = [text for number, text in enumerate(first.split("\n"), 1) if number not in out]
    result = []
    while kept or new:
        result.append(new.pop(len(result) + 1) if len(result) + 1 in new else kept.pop(0))
    return "\n".join(result)


def test_a_change_and_what_is_near_it():
    two = ONE.replace("line 7\n", "").replace("line 20\n", "line 20\nand more\n")
    assert lines(ONE, two) == (
        "   5  line 5", "   6  line 6", "-  7  line 7", "   7  line 8", "   8  line 9", "      … 9 lines alike",
        "  18  line 19", "  19  line 20", "+ 20  and more", "  21  line 21", "  22  line 22")


def test_the_same_text_differs_in_nothing():
    assert rows(ONE, ONE) == [] and lines("", "") == ()


def test_the_second_text_follows_from_the_first():
    rng = random.Random(4)
    for _ in range(300):
        first = "\n".join(rng.choice("abc") for _ in range(rng.randrange(12)))
        second = "\n".join(rng.choice("abc") for _ in range(rng.randrange(12)))
        found = rows(first, second)
        assert patched(first, found) == second
        for row in found:
            assert row.mark not in (IN, ALIKE) or second.split("\n")[row.number - 1] == row.text


def test_gaps_tell_how_much_is_left_out():
    two = ONE.replace("line 2\n", "2\n").replace("line 29\n", "29\n")
    assert [row.number for row in rows(ONE, two) if row.mark == GAP] == [22]


def test_texts_that_have_little_in_common_are_told_one_after_the_other(monkeypatch):
    monkeypatch.setattr(difference, "_ALIGNED", 3)
    assert [row.mark for row in rows("a\nb\nc", "c\nb\na")] == [OUT] * 3 + [IN] * 3


def test_no_more_rows_than_can_be_looked_at():
    told = lines("", "x\n" * 9000)
    assert len(told) == difference.MOST + 1 and told[-1].strip() == "… and 5001 lines more"


def test_line_ends_show_only_where_they_differ():
    crlf = ONE.replace("\n", "\r\n")
    assert not any("\r" in line for line in lines(crlf, crlf.replace("line 7", "7")))
    assert any("\r" in line for line in lines(ONE, crlf))


def test_it_is_drawn_from_the_row_in_sight_within_its_cells():
    text = lines(ONE, ONE.replace("line 3", "three " * 40).replace("line 9", "\x1b[31m漢字"))
    for plain in (False, True):
        for row in (0, 2, len(text), -4):
            for room, rows_ in ((80, 5), (20, 40), (3, 2)):
                found = drawn(pen(plain), Overlay("difference", "", text=text, row=row), room, rows_)
                assert 0 < len(found) <= rows_
                assert all(width(line) <= max(room, 12) for line in found)
                assert all("".join(span.text for span in line).isprintable() for line in found)
    first = drawn(pen(False), Overlay("difference", "", text=text), 60, 4)
    assert [line[0].style for line in first] == ["", "", "bad", "good"]
    assert "".join(span.text for span in first[2]).startswith(" -  3  line 3")
