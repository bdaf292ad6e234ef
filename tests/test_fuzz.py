"""A sample of the spoilt files; `python -m tests.fuzz_files` runs as many as you like."""

from collections import Counter
from itertools import product

from tests.fuzz_files import commands, findings, spoilt
from tests.fuzz_hostile import FIELDS, SEEDS, cases, characters, marked
from tests.helpers import of_whole

SAMPLE = of_whole(150, 60)


def test_spoilt_files_end_in_a_message_or_a_ledger():
    codes, wrong = Counter(), []
    numbers = list(range(SAMPLE))
    for found in findings(seed=2026, numbers=numbers, workers=2, times=15.0):  # what hangs, not what is slow here
        codes[found.command, found.code] += 1
        if found.wrong:
            wrong.append(f"file {found.number} of seed 2026, {found.command}: {found.wrong}")
    assert wrong == []
    assert codes.total() == sum(len(commands(number)) for number in numbers)
    assert codes["show", 0] > SAMPLE / 20, "too few files were left whole to be worth running"
    assert codes["show", 2] > SAMPLE / 5, "too few files were spoilt"
    assert codes["show", 2] == codes["audit", 2] >= codes["read", 2]


def test_every_hostile_character_is_put_into_every_field():
    hostile = {"\x00", "\x1b", "\x7f", "\x9b", "\u061c", "\u200b", "\u200f", "\u2028", "\u202e", "\u2066", "\u2069"}
    assert hostile <= set(characters())
    assert {(field, char) for field, char, _ in cases()} == set(product(FIELDS, characters()))
    for number in range(0, len(cases()), 89):
        field, char, raw = cases()[number]
        text = marked(number).decode("utf-8")
        assert char in text or (not raw and f"\\U{ord(char[0]):08x}" in text), field
        assert text not in {seed.read_text(encoding="utf-8") for seed in SEEDS}


def test_a_spoilt_file_is_the_same_each_time():
    assert spoilt(1, 7) == spoilt(1, 7)
    assert len({spoilt(1, number) for number in range(50)}) > 45
