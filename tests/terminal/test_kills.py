"""kill -9 while the app saves, and with work unsaved: a short sample of `tests.bench.kills`."""

from tests.bench.kills import MOST_S, SAVES, runs, unsaved_runs


def test_a_killed_app_leaves_an_old_or_a_new_text_whole():
    held = runs(3, 7)
    assert sum(held.values()) == 3
    assert set(held) <= set(range(SAVES + 1))


def test_a_killed_app_leaves_its_work_kept_but_for_the_last_moment():
    found = unsaved_runs(2, 11, (1.4, 2.0))
    assert all(kept > 0 for _, _, kept, _ in found)
    assert all(age <= MOST_S for *_, age in found)
