"""Limits and syntax faults of a chain file's text."""

from __future__ import annotations

import datetime
import subprocess
import sys
import time

import pytest

from polebook.problem import Problem, render
from polebook.text.toml import LARGEST, read

SYNTAX = [
    # text, line, the characters marked, words of what, of why, of fix
    ("rc = 4k7", 1, "4k7", "4k7 stands without quotes", "stands in quotes", 'write rc = "4k7"'),
    ("rc = 4k7 # it's", 1, "4k7", "4k7 stands without quotes", "stands in quotes", 'write rc = "4k7"'),
    ("kind = block", 1, "block", "block stands without quotes", "a text", 'write kind = "block"'),
    ("rc = .5", 1, ".5", ".5 stands without quotes", "stands in quotes", '".5"'),
    ("rc = 007", 1, "007", "007 stands without quotes", "stands in quotes", '"007"'),
    ("arms = [ { series_r = 50R } ]", 1, "50R", "50R stands without quotes", "stands in quotes", 'write "50R"'),
    ("arms = [\n  { series_r = R50 }\n]", 2, "R50", "R50 stands without quotes", "stands in quotes", 'write "R50"'),
    ("poles = [ 1k, 2k ]", 1, "1k", "1k stands without quotes", "stands in quotes", 'write "1k"'),
    ("rc = 1,5", 1, "1,5", "there is a comma in the number 1,5", "a decimal point", "write rc = 1.5"),
    ("rc = 1,5k", 1, "1,5k", "there is a comma", "a decimal point", 'write rc = "1.5k"'),
    ("rc =", 1, "", 'there is no value after "rc ="', "every key needs a value", "take the line out"),
    ("rc = # 4k7", 1, "#", 'there is no value after "rc ="', "every key needs a value", "take the line out"),
    ("a = 1\nrc =\n", 2, "", 'there is no value after "rc ="', "every key needs a value", "take the line out"),
    ("rc = “4k7”", 1, "“4k7”", "typographic quotes", "straight quotes", 'write rc = "4k7"'),
    ("left_out = True", 1, "True", "True is not a value", "written small", "write left_out = true"),
    ("date = 2026-13-40", 1, "2026-13-40", "2026-13-40 is not a date", "of a day that exists", "2026-05-04"),
    ("date = 2026-02-30", 1, "2026-02-30", "2026-02-30 is not a date", "of a day that exists", "2026-05-04"),
    ('rc "4k7"', 1, 'rc "4k7"', 'no "=" after the key', "a header or key = value", "put # before a comment"),
    ("just a remark", 1, "just a remark", 'no "=" after the key', "a header or key = value", "put # before a comment"),
    ("rc : 4k7", 1, "rc : 4k7", 'no "=" after the key', "not by a colon", "write rc = 4k7"),
    ("re bypassed = 1", 1, "re bypassed", '"re bypassed" is not a key', "one word", "write re_bypassed"),
    ("= 3", 1, "= 3", 'no key before the "="', "key = value", "write the key"),
    ("%rc = 3", 1, "%rc", "no key begins like this", "letters, digits", "write key = value"),
    ('rc = "1" 2', 1, "2", '"2" follows where the line should end', "a line holds one", "a line of its own"),
    ('rc = "a"b"', 1, 'b"', "follows where the line should end", "a line holds one", "a line of its own"),
    ("[target] x", 1, "x", '"x" follows where the line should end', "a line holds one", "a line of its own"),
    ("a = 1 b = 2", 1, None, "1 b = 2 stands without quotes", "stands in quotes", "write a ="),
    ('rc = "4k7', 1, '"4k7', "this text is not closed", 'must end with "', 'close it with "'),
    ('rc = "4k7\nre = "1"', 1, '"4k7', "this text is not closed", "on the line where it begins", 'close it with "'),
    ("rc = '4k7\nre = '1'", 1, "'4k7", "this text is not closed", "on the line where it begins", "close it with '"),
    ('a = 1\nnote = """one\ntwo\n[x]', 2, '"""', "this text is never closed", 'next """', 'write """ where it ends'),
    ("note = '''one\ntwo", 1, "'''", "this text is never closed", "next '''", "write ''' where it ends"),
    (r'note = "\q"', 1, None, "a backslash", "known are", "write the backslash twice"),
    (r'note = "\u12"', 1, None, "the escape names no character", "four hexadecimal", "the character itself"),
    (r'note = "\ud800"', 1, None, "the escape names no character", "four hexadecimal", "the character itself"),
    ('note = "a\x1bb"', 1, "\x1b", "a control character, \\x1b, stands here", "plain text", "take the character out"),
    ("a = 1\rb = 2", 1, "\r", "a carriage return stands alone", "a line ends with", "save the file"),
    ("a = [1, 2", 1, None, "a list is not closed", "commas between", "write it like"),
    ('a = ["1" "2"]', 1, '"2"', "a comma is missing", "commas between", "write it like"),
    ("a = [1,,2]", 1, None, "a value is missing here", "between commas", "write it"),
    ("a = { b = 1, }", 1, None, "an inline table is not closed, or a comma", "none after the last", "write it like"),
    ("a = { b = 1,\nc = 2 }", 1, None, "an inline table is not closed", "it stands on one line", "write it like"),
    ("a = { b = 1, b = 2 }", 1, None, "b is given twice in one inline table", "one value", "take one"),
    ("[target", 1, "[target", "the header is not closed", "it ends in ]", "[target]"),
    ("[[stage]\nx = 1", 1, "[[stage]", "the header is not closed", "it ends in ]]", "[[stage]]"),
    ("a = 1\nb = 2\na = 3", 3, "a", "a is given twice", "line 1 gives it one", "take one of the two lines out"),
    ("[x]\na = 1\n[y]\na = 1\na = 3", 5, "a", "a is given twice", "line 4 gives it one", "take one"),
    ("[load]\n[target]\n[load]", 3, "[load]", "the table load is given twice", "one header", "under one header"),
    ("[stage]\n\n[stage] # Q2", 3, "[stage]", "the table stage is given twice", "one header", "[[stage]]"),
    (
        "[a.b]\nc.d = 1\n[a.b.c]\ne = 1",
        3,
        "[a.b.c]",
        "the table a.b.c is given twice",
        "one header",
        "under one header",
    ),
    ("[a]\nb = 1\n[[a.b]]", 3, "[[a.b]]", "this header names what is there already", "only one", "use another name"),
    ("a = { b = 1 }\n[a]\nc = 1", 2, "[a]", "the table a is given twice", "one header", "under one header"),
    ("a = [{ b = 1 }]\n[[a]]", 2, "[[a]]", "this adds to a table that is complete", "inline", "in one place"),
    ("a = { b = 1 }\na.c = 1", 2, None, "this adds to a table that is complete", "inline", "in one place"),
    ("a = " + "9" * 5000, 1, "9" * 5000, "thousands of digits", "over 17", "an exponent"),
]


def fault(text: str) -> Problem:
    data, problems = read(text, "f.toml")
    assert data is None and len(problems) == 1
    assert problems[0].place is not None and problems[0].place.file == "f.toml" and problems[0].severity == "fault"
    return problems[0]


@pytest.mark.parametrize(
    ("text", "line", "mark", "what", "why", "fix"), SYNTAX, ids=[f"{text[:30]!r}" for text, *_ in SYNTAX]
)
@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_a_syntax_fault_names_its_place_its_reason_and_its_remedy(
    text: str, line: int, mark: str | None, what: str, why: str, fix: str, newline: str
) -> None:
    text = text.replace("\n", newline)
    problem = fault(text)
    assert what in problem.what and why in problem.why and fix in problem.fix
    place = problem.place
    assert place is not None and place.line == line
    source = text.split("\n")[line - 1].removesuffix("\r")
    assert 1 <= place.column <= len(source) + 1
    if mark is not None:
        assert source[place.column - 1 : place.column - 1 + place.width] == mark
    assert "(at " not in render(problem, text)


@pytest.mark.parametrize("text", ["", "# only this\n", "a = 1", 'a = """\n[[stage]]\n"""\r\n', "a.b.c.d.e.f.g.h = 1"])
def test_a_text_within_the_limits_is_read(text: str) -> None:
    data, problems = read(text, "f.toml")
    assert data is not None and not problems


def test_a_date_is_read_as_one() -> None:
    assert read("date = 2026-05-04", "f")[0] == {"date": datetime.date(2026, 5, 4)}


def test_the_largest_text_is_half_a_mebibyte_of_bytes() -> None:
    assert read("#" + "x" * (LARGEST - 1), "f")[0] == {}
    problem = fault("#" + "x" * LARGEST)
    assert problem.what == "the file has 524289 bytes, and at most 524288 (512 KiB) are read"
    assert fault("#" + "Ω" * (LARGEST // 2)).what.startswith("the file has 524289 bytes")


@pytest.mark.parametrize(
    "text", ["a.b.c.d.e.f.g.h.i = 1", "[a.'b'. c .\"d\".e.f.g.h.i]", "x = { a.b.c.d.e.f.g.h.i = 1 }"]
)
def test_a_key_has_at_most_eight_parts(text: str) -> None:
    assert fault(text).what == "a key of more than 8 dotted parts"


def test_brackets_nest_at_most_sixteen_deep() -> None:
    assert read("a = " + "[" * 16 + "]" * 16, "f")[0] is not None
    problem = fault("\na = " + "[" * 17 + "]" * 17)
    assert problem.what == "brackets are nested over 16 deep"
    assert problem.place is not None and (problem.place.line, problem.place.column) == (2, 21)
    assert fault("a = " + "{b=" * 17 + "1" + "}" * 17).what == "brackets are nested over 16 deep"


@pytest.mark.parametrize("holder", ['"{}"', "'{}'", '"""\n{}"""', "'''{}'''", '"\\"{}"', '"""""{}"""""', "1 # {}"])
def test_strings_and_comments_do_not_count(holder: str) -> None:
    data, problems = read("a = " + holder.format("[" * 20 + "a.b.c.d.e.f.g.h.i.j"), "f")
    assert data is not None, problems


def test_a_nul_and_a_byte_order_mark_are_named() -> None:
    assert fault("a = 1\n\0").what == "the text holds a NUL character"
    assert fault("\ufeffa = 1").what == "the text begins with a byte-order mark"


HOSTILE = {
    "open text": 'a = """' + '\\"""' * 130000,
    "open line": 'a = "' + '\\"' * 260000,
    "brackets": "[" * 500000,
    "open lists": "a=[" * 170000,
    "quotes": '"' * 500000,
    "apostrophes": "'" * 500000,
    "blanks": "a = 1" + " " * 500000 + "b",
    "words": "a " * 250000 + "= 1",
    "dots": "a ." * 170000,
    "digits": "a = " + "9" * 500000,
    "digit runs": "a = [" + ("9" * 4299 + ",") * 120 + "x]",
    "equals": "a" + "b =" * 170000,
    "tables": "".join(f"[a{number}.b.c.d.e.f.g.h]\n" for number in range(8000)),
    "escapes": 'a = "' + "\\n" * 260000,
}


@pytest.mark.parametrize("name", HOSTILE)
def test_hostile_texts_take_no_time_and_are_not_repeated(name: str) -> None:
    text = HOSTILE[name]
    assert len(text) <= LARGEST
    start = time.process_time()
    data, problems = read(text, "f")
    shown = "".join(render(problem, text) for problem in problems)
    assert time.process_time() - start < 20.0  # what grows with the square of the length takes minutes
    assert (data is None) == bool(problems) and len(shown) < 1000


def test_the_words_for_faults_are_loaded_where_there_is_one() -> None:
    told = "print('polebook.text.syntax' in sys.modules)"
    source = f"from polebook.text.toml import read; read('a = 1', 'f'); {told}; read('a = 4k7', 'f'); {told}"
    done = subprocess.run(
        [sys.executable, "-c", f"import sys; sys.path[:0] = {sys.path!r}; {source}"],
        capture_output=True, text=True, check=True, timeout=60,
    )  # fmt: skip
    assert done.stdout.split() == ["False", "True"]
