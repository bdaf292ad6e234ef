"""A card taken over: comments kept, at its place, whatever the way it is written."""

import pytest

from polebook.chain import read
from polebook.chain.take import take_card
from polebook.problem import ProblemsFound
from tests.cli.helpers import LISTENER, PHOTODIODE, SIX

MINE = PHOTODIODE.read_text(encoding="utf-8")
CARD = """# bought in spring
# a second line
[device.X]   # ours
family = "bjt"
beta = 99    # measured
note = '''
two [device.Y] lines
# no comment'''
# of the card too

# about another
[device.Z]
family = "bjt"
beta = 1
"""
OTHER = LISTENER.read_text(encoding="utf-8") + "\n" + CARD


def taken(text, name, other, file="mine.toml"):
    edit, left = take_card(text, file, name, other, "other.toml")
    after = edit.apply(text)
    assert edit.inverse().apply(after) == text
    return after, left


def test_the_block_goes_over_with_its_comments():
    after, left = taken(MINE, "X", OTHER)
    assert left == []
    assert after == MINE + "\n" + CARD[: CARD.index("\n# about another")]
    assert read.parse(after, "x").numbers["device.X.beta"] == 99.0


def test_a_card_stands_before_the_benches_and_after_the_other_cards():
    text = MINE + '\n# measured\n[[bench]]\ngain = "60 dB"\n'
    after, _ = taken(text, "VF", OTHER)
    assert after.index("[device.VOLT]") < after.index("[device.VF]") < after.index("# measured\n[[bench]]")


def test_the_line_ends_are_those_of_the_file():
    windows = MINE.replace("\n", "\r\n")
    after, _ = taken(windows, "X", OTHER)
    assert after.count("\r\n") == after.count("\n")
    back, _ = taken(MINE, "X", OTHER.replace("\n", "\r\n"))
    assert "\r" not in back
    assert read.parse(after, "x").cards["X"].note.replace("\r", "") == read.parse(back, "x").cards["X"].note


def test_a_file_without_a_last_line_end():
    after, _ = taken(MINE.rstrip("\n"), "VF", OTHER)
    assert "\n\n[device.VF]\n" in after


@pytest.mark.parametrize(
    "written",
    [
        'device = { X = { family = "bjt", beta = 99 } }\n',
        'device.X.family = "bjt"\ndevice.X.beta = 99\n',
        '[device]\nX = { family = "bjt", beta = 99 }\n',
        '[device."X"]\nfamily = "bjt"\nbeta = 99\n',
        '[device]\n[device.W]\nfamily = "bjt"\n[device.X]\nfamily = "bjt"\nbeta = 99\n',
    ],
)
def test_however_the_card_is_written(written):
    after, left = taken(MINE, "X", written)
    assert left == []
    assert read.parse(after, "x").numbers["device.X.beta"] == 99.0
    assert set(read.parse(after, "x").cards) == {"FETIN", "VOLT", "X"}


def test_a_card_that_a_stage_waits_for_mends_the_file():
    broken = SIX.read_text(encoding="utf-8")
    broken = broken[: broken.index("[device.P]")]
    after, left = taken(broken, "P", SIX.read_text(encoding="utf-8"))
    assert left == []
    assert read.parse(after, "x").digest == read.load(str(SIX)).digest


def test_a_file_without_any_table_after_its_stages():
    text = 'format = 1\n[source]\nkind = "voltage"\nresistance = 0\n[[stage]]\nname = "L"\nkind = "ladder"\n'
    text += "arms = [{ series_r = 1 }]\n"
    after, _ = taken(text, "X", OTHER)
    assert after.startswith(text + "\n# bought in spring")


@pytest.mark.parametrize(
    ("text", "name", "other", "says"),
    [
        (MINE, "Q", OTHER, "has no card"),
        (MINE, "source", OTHER, "has no card"),
        (MINE, "X", "format = 1\n", "it has no cards"),
        (MINE, "BAD", '[device.BAD]\nfamily = "bjt"\nbeta = -3\n', "negative"),
        (MINE, "X", "[device.X\n", "header"),
        ("[source\n", "X", OTHER, "header"),
        (MINE.replace("[device.VOLT]", "[device.X]"), "X", OTHER, "another card X"),
    ],
)
def test_refused_with_the_reason(text, name, other, says):
    with pytest.raises(ProblemsFound) as found:
        take_card(text, "mine.toml", name, other, "other.toml")
    assert says in str(found.value)
