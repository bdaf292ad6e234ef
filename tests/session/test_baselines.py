"""A post or a revision as the baseline of a session: what moved against it; no rounding of a post is a move."""

from dataclasses import replace
from datetime import date
from functools import cache

import pytest

from polebook.book.compare import BIAS, LINES, NODES, OVERALL, changes
from polebook.record.posted import Post
from polebook.record.posted_figures import figures
from polebook.session import state as sessions
from polebook.session.baselines import got, met
from polebook.session.state import Against, moved, pin, set_against, set_value, stands, unpin
from tests.tui.desk import LISTENER, SIX


@cache
def opened(path):
    return sessions.open_file(str(path))


@cache
def post_of(path):
    ledger = opened(path).ledger
    return Post(date(2026, 11, 3), "as built", ledger.chain.digest, "1", figures(ledger))


def against(session, path):
    known = Against("row", "post 2 of 2026-11-03", "post 2", post_of(path), "3f2a1c9e")
    return set_against(session, known, None)


@pytest.mark.parametrize("path", [LISTENER, SIX], ids=["listener", "six"])
def test_nothing_has_moved_since_a_post_of_the_same_text(path):
    told = moved(against(opened(path), path))
    found = [told.overall(name) for name in OVERALL]
    found += [told.line(line.name, name) for line in opened(path).ledger.lines for name in LINES]
    found += [told.node(line.name, name) for line in opened(path).ledger.lines for name in NODES]
    held = [one for one in found if one is not None]
    assert len(held) > 5 * len(opened(path).ledger.lines)
    assert not any(one.moved for one in held)


def test_what_moved_since_a_post_is_what_moved_since_its_text():
    after = set_value(opened(LISTENER), "Q1.rc", "1k8", 0.0)
    posted, exact = moved(against(after, LISTENER)), changes(opened(LISTENER).ledger, after.ledger)
    for name in ("gain_db", "lower_edge_hz", "upper_edge_hz", "lost_upper_db", "left_upper_db"):
        one, other = posted.overall(name), exact.overall(name)
        assert one.moved and one.way == other.way and one.after == other.after
        assert one.before == pytest.approx(other.before, rel=1e-5, abs=1e-4)
    for name in ("pole_hz", "lost_upper_db", "left_upper_db"):
        assert posted.node("Q1", name).before == pytest.approx(exact.node("Q1", name).before, rel=1e-5, abs=1e-4)
    assert posted.line("Q1", "owns_upper").way == "points"


def test_what_a_post_does_not_hold_has_not_moved_and_is_not_told():
    after = against(set_value(opened(LISTENER), "Q1.rc", "1k8", 0.0), LISTENER)
    told = moved(after)
    assert told.node("Q1", "ohm") is None and told.line("Q1", "input_ohm") is None
    assert all(told.bias("Q1", name) is None for name in BIAS)
    assert told.level("Q1", "clip_v") is None and told.rail("positive") is None
    assert told.line("nobody", "gain_db") is None


def test_targets_of_a_post_in_the_units_of_a_reader():
    assert got(post_of(LISTENER), "gain") == pytest.approx(59.77, abs=0.01)
    assert got(post_of(LISTENER), "nothing") is None
    assert met(post_of(LISTENER), "upper") is False and met(post_of(LISTENER), "lower") is True
    assert met(post_of(LISTENER), "nothing") is None


def test_one_baseline_stands_and_any_other_takes_its_place():
    session = against(pin(opened(LISTENER)), LISTENER)
    assert stands(session) and session.baseline is None
    pinned = pin(session)
    assert pinned.against is None and pinned.baseline is pinned.ledger
    revision = set_against(session, Against("x", "3f2a1c9e", "3f2a1c9e"), opened(SIX).ledger)
    assert moved(revision).before is opened(SIX).ledger
    assert not stands(unpin(revision)) and moved(unpin(revision)) is None
    assert moved(replace(session, ledger=None)) is None
