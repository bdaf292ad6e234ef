"""A sample of the spoilt files; `python -m tests.fuzz_files` runs as many as you like."""

from collections import Counter

from tests.fuzz_files import ALLOWED, findings, spoilt
from tests.helpers import of_whole

SAMPLE = of_whole(150, 90)


def test_spoilt_files_end_in_a_message_or_a_ledger(monkeypatch):
    monkeypatch.setattr("tests.fuzz_files.LIMIT_S", 30.0)  # what hangs, not what is slow on this machine
    codes, wrong = Counter(), []
    numbers = list(range(SAMPLE))
    for found in findings(seed=2026, numbers=numbers, workers=2):
        codes[found.command, found.code] += 1
        if found.wrong:
            wrong.append(f"file {found.number} of seed 2026, {found.command}: {found.wrong}")
    assert wrong == []
    assert codes.total() == SAMPLE * len(ALLOWED)
    assert codes["show", 0] > SAMPLE / 20, "too few files were left whole to be worth running"
    assert codes["show", 2] > SAMPLE / 5, "too few files were spoilt"
    assert codes["show", 2] == codes["audit", 2]


def test_a_spoilt_file_is_the_same_each_time():
    assert spoilt(1, 7) == spoilt(1, 7)
    assert len({spoilt(1, number) for number in range(50)}) > 45
