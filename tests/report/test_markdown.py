"""Text of a file in Markdown shows as it stands there, whatever markup it looks like; tables, code, links."""

import random

import pytest
from markdown_it import MarkdownIt

from polebook.problem import printable
from polebook.report.markdown import MARKUP, blocks, code, escaped, fenced, picture, piped
from polebook.report.sections import paragraph
from polebook.report.table import Cell, Column, table

PARSER = MarkdownIt("gfm-like")
PARSER.linkify.set({"fuzzy_link": False})  # a bare "name.com" is no link in GitHub's dialect
HOSTILE = [
    "__a__ _b_ a_b_c *x* **y**", "# heading", "#", "- item", "+ item", "* item", "1. item", "2) item", "> quote",
    "a|b|c", "`code` ``more``", "```", "~~~", "<b>bold</b> &amp; &copy; &#42;", "<!-- hidden -->", "<script>x</script>",
    "https://x.y/z www.x.y a@b.c mailto:a@b.c", "<http://a.b>", "[l](u) ![i](u) [r]: u [^1] [[w]]", "~~s~~", "$x^2$",
    "=====", "---", "***", "___", "    indented", "\ttab", "back\\slash \\* \\", "line\nbreak", "\x1b[31mred",
    "\u202eback",    "{#id} {{x}}", "", "![", "a  ", "Q2.c_comp owns 71 %", "-0.63", "+1 % of it",
]


def shown(markdown):
    """What a renderer shows of a paragraph, and the kinds of tokens beside plain text."""
    kinds, text = [], ""
    for token in PARSER.parse(markdown):
        if token.type == "inline":
            text += "".join(child.content for child in token.children)
            kinds += [child.type for child in token.children if child.type != "text"]
        elif token.type not in ("paragraph_open", "paragraph_close"):
            kinds.append(token.type)
    return text, kinds


@pytest.mark.parametrize("raw", HOSTILE)
def test_text_shows_as_it_stands_in_the_file(raw):
    assert shown(escaped(raw)) == (printable(raw).strip(), [])


def test_random_text_is_never_markup():
    draw = random.Random(1)
    signs = ["_", "*", "`", "|", "<", ">", "&", "#", "-", "+", "1", ".", ")", "[", "]", "(", "!", "~", "\\", " ", "a",
             "b ", "://", "www.", "@", "=", "\t", "$", "^", "{", "µ", "&lt;", "http"]
    for _ in range(400):
        raw = "".join(draw.choice(signs) for _ in range(draw.randint(1, 14)))
        assert shown(escaped(raw)) == (printable(raw).strip(), []), raw


def test_ordinary_text_is_left_alone():
    for plain in ("Q2.c_comp owns 71 %. Its 4.7 pF looks like 167 pF at n1 (K -34.4), on 1.52 kΩ.", "-5.61", "12.0 V"):
        assert escaped(plain) == plain


@pytest.mark.parametrize("raw", HOSTILE)
def test_a_cell_keeps_to_its_column(raw):
    rows = [[raw, "1.00"], [Cell("total", "head"), "2.00"]]
    lines = table([Column("name", right=False), Column("value")], rows, MARKUP)
    tokens = PARSER.parse("\n".join(blocks(lines)))
    cells = [token.children for token in tokens if token.type == "inline"]
    assert [token.type for token in tokens].count("td_open") == 4
    assert "".join(child.content for child in cells[2]) == printable(raw).strip()
    assert "strong_open" in [child.type for child in cells[4]]


def test_empty_columns_are_left_away_and_figures_stand_right():
    lines = piped(["a", "", "b"], [False, False, True], [["x", "", "1"], ["yy", "", "22"]])
    assert lines == ["", "| a   |   b |", "| --- | --: |", "| x   |   1 |", "| yy  |  22 |", ""]


def test_blocks_part_what_would_run_together():
    lines = blocks(["", "| a |", "| --- |", "| 1 |", "", " one", "two", ""])
    assert lines == ["| a |", "| --- |", "| 1 |", "", "one", "", "two"]


@pytest.mark.parametrize("raw", ["plain", "a`b", "``a", "`", "<b> & *x*"])
def test_code_holds_backticks(raw):
    (token,) = [token for token in PARSER.parse(code(raw)) if token.type == "inline"]
    assert [(child.type, child.content) for child in token.children] == [("code_inline", raw)]


def test_no_line_ends_a_block_of_code():
    lines = ["one", "```", "````text", "<b>"]
    (token,) = PARSER.parse("\n".join(fenced(lines)))
    assert (token.type, token.content) == ("fence", "\n".join(lines) + "\n")


def test_a_picture_is_linked_by_its_quoted_name():
    (token,) = [token for token in PARSER.parse(picture("a [b] *c*", "my re(view)-x.svg")) if token.type == "inline"]
    (image,) = token.children
    assert image.type == "image"
    assert image.attrs["src"] == "my%20re%28view%29-x.svg"
    assert image.content.replace("\\", "") == "a [b] *c*"


def test_a_paragraph_is_one_line_without_hard_blanks():
    assert blocks(paragraph(f"{'word ' * 40}4.7\u00a0pF", MARKUP)) == [f"{'word ' * 40}4.7 pF"]
