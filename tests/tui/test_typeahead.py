"""What a terminal sends, cut into keys."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from polebook.tui.typeahead import ESC, TypeAhead


def cut(*reads):
    """Pieces of several reads, and of the silence after them."""
    ahead = TypeAhead()
    pieces = [piece for read in reads for piece in ahead.feed(read)]
    return pieces + ahead.timeout()


@pytest.mark.parametrize(("reads", "pieces"), [
    (["u"], ["u"]),
    (["\x1b"], [ESC]),
    (["\x1bu"], [ESC, "u"]),
    (["\x1b1"], [ESC, "1"]),
    (["\x1bf"], [ESC, "f"]),
    (["\x1b="], [ESC, "="]),
    (["\x1b+"], [ESC, "+"]),
    (["\x1b\r"], [ESC, "\r"]),
    (["\x1b\x1b"], [ESC, ESC]),
    (["\x1bu\x1b"], [ESC, "u", ESC]),
    (["\x1b["], [ESC, "["]),
    (["\x1bO"], [ESC, "O"]),
    (["\x1bOx"], [ESC, "Ox"]),
    (["\x1b\x1b[A"], [ESC, "\x1b[A"]),
    (["\x1b[A"], ["\x1b[A"]),
    (["\x1bOP"], ["\x1bOP"]),
    (["\x1b[1;5C"], ["\x1b[1;5C"]),
    (["\x1b[117;3u"], ["\x1b[117;3u"]),
    (["\x1b[[A"], ["\x1b[[A"]),
    (["\x1b", "[", "A"], ["\x1b[A"]),
    (["4k", "7\x1b[B+"], ["4k", "7", "\x1b[B", "+"]),
    (["\x1b[?2026;2$y"], ["\x1b[?2026;2$y"]),
    (["\x1b]11;rgb:00/00/00\x07u"], ["u"]),
    (["\x1b]11;rgb:00/", "00/00\x1b", "\\u"], ["u"]),
    (["\x1b]11;rgb:00/"], []),
    (["\x1b]"], [ESC, "]"]),
    (["\x1b]u"], [ESC, "]u"]),
    (["\x1b[M !!u"], ["u"]),
    (["\x1b[M", " !", "\ufffdu"], ["u"]),
    (["\x1b[M\x1b[A"], ["\x1b[M", "\x1b[A"]),
    (["\x1b[M !"], []),
    (["\x1b[<0;10;10Mu"], ["\x1b[<0;10;10M", "u"]),
    (["\x1b[200~4k7\x1bq\x1b[201~u"], ["\x1b[200~4k7\x1bq\x1b[201~", "u"]),
    (["\x1b[200~ab", "cd\x1b[20", "1~"], ["\x1b[200~abcd\x1b[201~"]),
    (["\x1b[200~ab\x03u"], [ESC, "u"]),
])
def test_pieces(reads, pieces):
    assert cut(*reads) == pieces


def test_a_paste_is_waited_for():
    ahead = TypeAhead()
    assert ahead.feed("\x1b[200~4k") == []
    assert ahead.waits
    assert ahead.timeout() == []
    assert ahead.feed("7\x1b[201~") == ["\x1b[200~4k7\x1b[201~"]
    assert not ahead.waits


@given(st.lists(st.sampled_from([*"au4[O\x1b\r\x7f", "\x1b[A", "\x1b[1;5C", "\x1bOP"]), max_size=12), st.data())
def test_nothing_is_lost_however_it_arrives(keys, data):
    text = "".join(keys)
    at = data.draw(st.integers(0, len(text)))
    assert "".join(cut(text)) == text
    assert "".join(cut(text[:at], text[at:])) == text
    assert all(piece == ESC or piece[0] != ESC or len(piece) > 2 for piece in cut(text))
