"""The workings against their golden."""

from tests.working.pages import GOLDEN, pages


def test_the_workings_read_as_their_golden_says():
    assert pages() == GOLDEN.read_text(encoding="utf-8")
