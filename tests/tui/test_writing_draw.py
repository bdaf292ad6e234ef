"""How the text page looks: rows, signs of what is hidden, marks, the cursor; at any width, for any line."""

import random
from dataclasses import replace

import pytest

from polebook.problem import Place, Problem
from polebook.report.look import Look
from polebook.tui.draw.pen import Pen, pen
from polebook.tui.draw.screen import screen
from polebook.tui.draw.writing_text import rows
from polebook.tui.lines import width
from polebook.tui.view import State, View, Writing
from tests.golden.screens import opened
from tests.tui.desk import LISTENER, Desk

LINES = ("", "a", "couple = \"4n7\"", "# " + "word " * 60, "漢字" * 50, "\t" * 40, "\x1b[31m" * 20, "e\u0301" * 90,
         "\u202e" * 9, "x" * 79, "x" * 75, "x" * 74, "x" * 73)


def row_of(line, column, room=80, plain=False):
    """The row of a line whose cursor is at that column: its spans behind the number."""
    text = f"#\n{line}\n#"
    found = rows(pen(plain), text, 2 + column, room, 3, {})
    assert len(found) == 3 and all(width(one) <= room for one in found)
    return found[1][3:]


@pytest.mark.parametrize("line", LINES)
@pytest.mark.parametrize("plain", [False, True], ids=["unicode", "ascii"])
def test_the_cursor_is_in_sight_in_every_column_and_what_is_hidden_has_a_sign(line, plain):
    whole = pen(plain).text(line)
    left, right = pen(plain).sign("‹"), pen(plain).sign("›")
    for column in range(len(line) + 1):
        spans = row_of(line, column, plain=plain)
        cursor = [span.text for span in spans if span.style == "focus"]
        assert cursor == [pen(plain).text(line[column]) if column < len(line) else " "], column
        text = "".join(span.text for span in spans)
        begin = text[0] == left and spans[0].style == "key"
        end = text[-1] == right and spans[-1].style == "key"
        shown = text[begin:len(text) - end]
        assert shown.rstrip() in whole + " "
        assert begin == (not (whole + " ").startswith(shown)) or begin
        assert end or (whole + " ").endswith(shown) or whole.endswith(shown)
        assert begin or whole.startswith(shown.rstrip()) or column >= len(line)


def test_other_lines_are_shown_from_their_beginning():
    text = "#\n" + "word " * 60 + "\nrc = \"" + "9" * 200 + '"\n'
    found = rows(pen(False), text, 0, 80, 4, {})
    assert "".join(span.text for span in found[1]).startswith("   2 word word")
    assert [line[-1].text for line in found[1:3]] == ["›", "›"]
    assert [width(line) for line in found[1:3]] == [80, 80]


def test_headers_comments_faults_and_matches_differ_in_style():
    text = '[a] # b\nk = "#no" # yes\nnote = """\n[no]\n# no\n"""\nl = [\n[ 1 ],\n]\n'
    found = rows(pen(False), text, text.index("k"), 80, 9, {2: [(4, 9, "bad")]}, 1)
    looks = [[(span.text, span.style) for span in line[3:] if span.style] for line in found]
    assert looks[0] == [("[a] ", "head"), ("# b", "dim")]
    assert looks[1] == [("k", "focus"), ('"#no"', "bad"), ("# yes", "dim")]
    assert looks[2:] == [[]] * 7
    assert [line[0].text for line in found] == [" ", "!", *" " * 7]
    wide = rows(pen(False), text, text.index("note"), 80, 9, {}, 4)[2]
    assert [(span.text, span.style) for span in wide[3:5]] == [("n", "focus"), ("ote", "field")]


def test_a_huge_line_and_a_huge_file_are_drawn_at_once():
    """Half a megabyte: no more of a line is looked at than could be shown."""
    looked = []

    class Counting(Pen):
        def text(self, raw):
            looked.append(len(raw))
            return super().text(raw)

    for text in ("y" * 500_000, "\u0301" * 250_000, "# a line\n" * 55_000):
        for at in (0, len(text) // 2, len(text)):
            looked.clear()
            assert len(rows(Counting(False, Look()), text, at, 80, 15, {})) in (1, 15)
            assert 0 < sum(looked) < 2000


@pytest.mark.parametrize("size", [(60, 16), (80, 24), (80, 40), (120, 24), (140, 45), (200, 60)])
def test_the_page_has_the_text_the_figures_and_the_fault(size):
    desk = Desk(LISTENER).go("Q2.rc").press("e")
    shown = desk.screen(*size)
    assert 'rc          = "2k2"' in shown and "lower 14.1 kHz" in " ".join(shown.split())
    assert "Upper edge 400 kHz for 1 MHz" in shown
    assert ("EMF ─" in shown) == (size[1] >= 30)
    shown = desk.press("x").screen(*size)
    assert "1 fault" in shown.splitlines()[0] and "figures of before the fault" in shown and '"x2k2"' in shown
    assert "fix" in shown and "! 41" in shown
    assert ("why" in shown) == (size[1] > 16)


def test_targets_and_cautions_stand_beside_the_text():
    desk = Desk(LISTENER).go("Q2.rc").press("e", "delete").type("3")
    beside = [line.partition("│")[2] for line in desk.screen(140, 45).splitlines()]
    assert [line.split() for line in beside if " for " in line and "dB over:" not in line] == [
        ["gain", "62.81", "dB", "+3.04", "dB", "for", "60.00", "dB", "over"],
        ["lower", "14.4", "kHz", "+270", "Hz", "for", "20.0", "kHz", "met"],
        ["upper", "283", "kHz", "-120", "kHz", "for", "1.00", "MHz", "short"],
        ["peaking", "0.00", "dB", "for", "0.50", "dB", "met"]]
    assert desk.state.view.writing.after.ledger.cautions[0].what in " ".join(" ".join(beside).split())
    beside = [line.partition("│")[2] for line in desk.screen(120, 24).splitlines()]
    assert ["upper", "283", "kHz", "-120", "kHz", "short"] in [line.split() for line in beside]


def test_the_key_under_the_cursor_is_explained_and_its_line_selected():
    desk = Desk(LISTENER).go("Q2.rc").press("e")
    for keys, told, line in (((), "rc: resistor from", "Q2"), (("down",), "re: emitter resistor", "Q2"),
                             (("ctrl+home", "tab"), "format: ", ""), (("ctrl+end", "up"), "p_max: ", "")):
        desk.press(*keys)
        shown = desk.screen(140, 45).splitlines()
        assert shown[-2].startswith(f" {told}"), shown[-2]
        assert line in shown[2]


def test_a_pin_is_beside_it():
    desk = Desk(LISTENER).press("p").go("Q2.rc").press("e", "delete").type("3")
    assert "upper -120 kHz against pin" in desk.screen(100, 24)


def test_faults_without_a_line_and_figures_out_of_reach_are_drawn():
    session = opened("wire-break-listener")
    loose = Problem(None, "nothing holds it", "nothing leads there", "add a resistor")
    placed = Problem(Place("x", 4, 1, 6), "wrong", "because", "mend it")
    for problems in ((loose,), (placed, loose), (replace(placed, place=Place("x", 9999, 3)),)):
        after = replace(session, problems=problems, ledger=None)
        state = State(session, View(writing=Writing(session.history, after, session.good)))
        for size in ((80, 24), (140, 45)):
            text = "\n".join("".join(span.text for span in line) for line in screen(state, *size))
            assert problems[0].what in text and problems[0].fix in text


@pytest.mark.parametrize("seed", range(3))
def test_rows_hold_whatever_the_text_is(seed):
    rng = random.Random(seed)
    for _ in range(60):
        text = "".join(rng.choice('ab #[]"\'\\=\r\n\t漢é\u0301\x00\u202e') for _ in range(rng.randrange(400)))
        room, height = rng.randrange(12, 100), rng.randrange(1, 30)
        marks = {rng.randrange(1, 20): [(rng.randrange(50), rng.randrange(60), "bad")]}
        found = rows(pen(rng.random() < 0.3), text, rng.randrange(len(text) + 1), room, height, marks, rng.randrange(9))
        assert len(found) == min(height, text.count("\n") + 1)
        assert all(width(line) <= room for line in found)
