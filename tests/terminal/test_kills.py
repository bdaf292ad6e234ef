"""kill -9 while the app saves: a short sample of `tests.bench.kills`."""

from tests.bench.kills import SAVES, runs


def test_a_killed_app_leaves_an_old_or_a_new_text_whole():
    held = runs(5, 7)
    assert sum(held.values()) == 5
    assert set(held) <= set(range(SAVES + 1))
