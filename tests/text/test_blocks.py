"""Blocks: what belongs to a header."""

from __future__ import annotations

from polebook.text.blocks import blocks
from polebook.text.spans import scan

TEXT = """format = 1
# about the file

# about the supply
  # in two lines
[supply]
positive = 12
# just below

# stands alone

[[stage]]
name = "Q1"
[stage.extra] # its own
x = \"\"\"
# no comment
\"\"\"
# about the second
[[stage]]

[load]
# of the load, which is empty

# closing the file
"""


def test_a_block_is_header_keys_subtables_and_the_comment_above() -> None:
    found = [(block.path, TEXT[block.span.start : block.span.end]) for block in blocks(scan(TEXT))]
    assert found == [
        (("supply",), "# about the supply\n  # in two lines\n[supply]\npositive = 12\n# just below\n"),
        (("stage", 0), '[[stage]]\nname = "Q1"\n[stage.extra] # its own\nx = """\n# no comment\n"""\n'),
        (("stage", 1), "# about the second\n[[stage]]\n"),
        (("load",), "[load]\n# of the load, which is empty\n"),
    ]


def test_a_text_without_headers_has_no_blocks() -> None:
    assert blocks(scan("a = 1\n")) == []
