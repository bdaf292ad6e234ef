"""Problems as a reader sees them."""

from __future__ import annotations

import unicodedata

from hypothesis import given, settings
from hypothesis import strategies as st

from polebook.problem import Place, Problem, ProblemsFound, printable, render

LINE = 'ce = "100 uV"      # emitter bypass'
WHY = "ce of stage Q2 is a capacitance, so its unit is the farad"


def told(place: Place | None, severity: str = "fault") -> Problem:
    return Problem(place, '"100 uV" is not a capacitance', WHY, 'write it in farads: ce = "100u"', severity)


def marked(source: str, column: int, width: int) -> tuple[str, str]:
    """The characters that stand over the marks, and the excerpt's line."""
    excerpt, marks = render(told(Place("f.toml", 1, column, width)), source).split("\n")[1:3]
    start, end = marks.index("^"), marks.rindex("^") + 1
    return excerpt[start:end], excerpt


def test_a_problem_shows_place_excerpt_why_and_fix() -> None:
    text = "\n" * 13 + LINE + "\nrc = 1\n"
    assert render(told(Place("chains/wire.toml", 14, 6, 8)), text) == (
        'chains/wire.toml:14:6: "100 uV" is not a capacitance\n'
        ' 14 | ce = "100 uV"      # emitter bypass\n'
        "    |      ^^^^^^^^\n"
        "    why  ce of stage Q2 is a capacitance, so its unit is the farad\n"
        '    fix  write it in farads: ce = "100u"'
    )


def test_a_caution_says_that_it_is_one() -> None:
    assert render(told(None, "caution")).startswith('caution: "100 uV" is not')
    assert render(told(Place("f.toml", 0), "caution")).startswith('f.toml: caution: "100 uV"')


def test_without_a_line_or_without_the_text_there_is_no_excerpt() -> None:
    assert len(render(told(Place("f.toml")), LINE).split("\n")) == 3
    assert render(told(Place("f.toml", 4, 2))).startswith("f.toml:4:2: ")
    assert len(render(told(Place("f.toml", 4, 2)), LINE).split("\n")) == 3
    assert render(Problem(None, "what", "", "")) == "what"


def test_a_line_without_a_column_is_shown_without_marks() -> None:
    assert render(told(Place("f.toml", 1)), LINE).split("\n")[:2] == [
        'f.toml:1: "100 uV" is not a capacitance',
        "  1 | " + LINE,
    ]
    assert "^" not in render(told(Place("f.toml", 1)), LINE)


def test_marks_stand_under_the_value_whatever_stands_before_it() -> None:
    assert marked('\tce\t= "1"', 7, 3)[0] == '"1"'
    assert marked('"µΩ" = "1"', 8, 3)[0] == '"1"'
    assert marked('\x1b[2J = "1"', 8, 3)[0] == '"1"'
    excerpt, marks = render(told(Place("f.toml", 1, 7, 3)), '"電圧" = "1"').split("\n")[1:3]
    wide = sum(2 if unicodedata.east_asian_width(char) == "W" else 1 for char in excerpt[: excerpt.rindex('"1"')])
    # the first of the two wide keys' quotes is column 1, so the value is column 8
    assert marks.index("^") == wide - 1


def test_the_end_of_a_line_can_be_marked() -> None:
    excerpt, marks = render(told(Place("f.toml", 1, 5)), "rc =\r\nre = 1").split("\n")[1:3]
    assert (excerpt, marks) == ("  1 | rc =", "    |     ^")


def test_a_value_that_reaches_past_its_line_is_marked_to_its_end() -> None:
    assert marked('a = "abc', 5, 400)[0] == '"abc'


def test_a_long_line_is_cut_around_its_value() -> None:
    source = "x" * 300 + ' "4k7" ' + "y" * 300
    value, excerpt = marked(source, 302, 5)
    assert value == '"4k7"'
    assert len(excerpt) <= 80 and excerpt.startswith("  1 | …x") and excerpt.endswith("y…")
    value, excerpt = marked(source, 3, 500)
    assert len(excerpt) <= 80 and set(value) == {"x"}
    value, excerpt = marked("x" * 500 + ' "4k7"', 502, 5)
    assert value == '"4k7"' and 70 < len(excerpt) <= 80 and not excerpt.endswith("…")


def test_a_hostile_file_cannot_move_the_cursor_or_turn_the_text_round() -> None:
    hostile = 'title = "\x1b]0;owned\x07\x9b2J\u202eevil\u2066\u200b\ud800\x00"'
    shown = render(Problem(Place("a\x1b.toml", 1, 9, 4), hostile, hostile + "\n", hostile), hostile)
    assert "\\x1b]0;owned\\x07\\x9b2J\\u202eevil\\u2066\\u200b\\ud800\\x00" in shown
    assert all(unicodedata.category(char) not in ("Cc", "Cf", "Cs", "Zl", "Zp") for char in shown.replace("\n", ""))
    assert len(shown.split("\n")) == 5


def test_printable_leaves_the_letters_of_every_language_alone() -> None:
    text = "Ω µ – 4k7 電圧 é 😀"
    assert printable(text) == text
    assert printable("a\tb\r\n") == "a\\tb\\r\\n"
    assert printable("\U000e0001") == "\\U000e0001"


@given(st.text(max_size=30), st.integers(0, 4), st.integers(0, 40), st.integers(0, 40))
@settings(max_examples=60, deadline=None, derandomize=True)
def test_any_text_and_place_can_be_rendered(text: str, line: int, column: int, width: int) -> None:
    shown = render(told(Place("f.toml", line, column, width)), text)
    assert printable(shown.replace("\n", "")) == shown.replace("\n", "")
    assert max(len(part) for part in shown.split("\n")[1:-2] or [""]) <= 80


def test_problems_found_carries_all_of_them_and_their_text() -> None:
    error = ProblemsFound(iter([told(Place("f.toml", 1, 6, 8)), Problem(None, "and this", "", "")]), LINE)
    assert [problem.what for problem in error.problems] == ['"100 uV" is not a capacitance', "and this"]
    assert str(error).endswith("\nand this") and "^^^^^^^^" in str(error)
