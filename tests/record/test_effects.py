"""What each change did: made alone, undone alone, its share of the move; and which changes only stand together."""

import math
from pathlib import Path

import pytest

from polebook.book import build
from polebook.record.changes import changes
from polebook.record.compare import compare
from polebook.record.effects import moved, ranked, shared, way
from polebook.record.mixtures import causes
from polebook.record.sides import side

LISTENER = (Path(__file__).parent.parent.parent / "chains" / "wire-break-listener.toml").read_text(encoding="utf-8")
COMP = ('"4p7"', '"1p5"')
GAIN = ('re          = "47"', 're          = "39"')
CARD = ("beta          = 180", "beta          = 90")
CABLE = ('"90p"', '"300p"')
UPPER, LOWER, DECIBELS = "overall.upper_edge_hz", "overall.lower_edge_hz", "overall.gain_db"
_KNOWN = {}


def put(text, *pairs):
    for old, new in pairs:
        assert old in text, old
        text = text.replace(old, new)
    return text


def finished(work):
    while True:
        try:
            next(work)
        except StopIteration as end:
            return end.value


def answer(*edits, before=LISTENER):
    """The comparison of a file with itself after `edits`."""
    if (before, edits) not in _KNOWN:
        old, new = side(before, "a"), side(put(before, *edits), "b")
        ledgers = [build.ledger(one.chain) for one in (old, new)]
        _KNOWN[before, edits] = finished(compare(changes(old, new), *ledgers))
    return _KNOWN[before, edits]


def whole(text):
    return build.document(build.ledger(side(text, "x").chain), ("overall",))["overall"]


def figure(told, name):
    return next(one for one in told["causes"]["figures"] if one["name"] == name)


def test_alone_is_the_file_with_that_edit_and_without_the_file_with_all_others():
    edits = [COMP, GAIN, CABLE]
    told = figure(answer(*edits), UPPER)
    assert told["before"] == whole(LISTENER)["upper_edge_hz"]
    assert told["after"] == pytest.approx(whole(put(LISTENER, *edits))["upper_edge_hz"], rel=1e-12)
    for edit, cause in zip((CABLE, GAIN, COMP), told["causes"], strict=True):  # in the order of the file
        rest = [other for other in edits if other != edit]
        assert cause["alone"] == pytest.approx(whole(put(LISTENER, edit))["upper_edge_hz"], rel=1e-12)
        assert cause["without"] == pytest.approx(whole(put(LISTENER, *rest))["upper_edge_hz"], rel=1e-12)


@pytest.mark.parametrize("name", [UPPER, LOWER, DECIBELS, "overall.group_delay_s", "overall.noise_density"])
def test_two_changes_share_a_move_to_the_last_digit(name):
    told = figure(answer(COMP, GAIN), name)
    shares = [cause["share"] for cause in told["causes"]]
    assert sum(shares) == pytest.approx(1.0, abs=1e-9) and told["rest"] == pytest.approx(0.0, abs=1e-9)


def test_the_step_response_is_shared_where_a_target_asks_for_it():
    names = {one["name"] for one in answer(COMP, GAIN)["causes"]["figures"]}
    assert "overall.rise_time_s" not in names and {UPPER, DECIBELS, "overall.supply_current_a"} <= names
    asked = put(LISTENER, ('peaking = "0.5 dB"', 'rise = "1u"'))
    told = figure(answer(COMP, GAIN, before=asked), "overall.rise_time_s")
    assert sum(cause["share"] for cause in told["causes"]) == pytest.approx(1.0, abs=1e-9)


def test_of_two_changes_the_share_is_the_mean_over_both_orders():
    told = figure(answer(COMP, GAIN), UPPER)
    before, after = math.log(told["before"]), math.log(told["after"])
    gain, comp = told["causes"]
    first, last = math.log(comp["alone"]) - before, after - math.log(gain["alone"])
    assert comp["share"] == pytest.approx((first + last) / 2 / (after - before), rel=1e-9)
    assert comp["without"] == pytest.approx(gain["alone"], rel=1e-12)


def test_what_does_not_add_up_is_told_and_what_the_shares_leave():
    told = figure(answer(COMP, GAIN, CARD, CABLE), UPPER)
    scale = math.log(told["after"] / told["before"])
    alone = sum(math.log(cause["alone"] / told["before"]) for cause in told["causes"])
    assert told["added"] == pytest.approx(alone / scale, rel=1e-9) and abs(1 - told["added"]) > 1e-3
    assert told["rest"] == pytest.approx(1 - sum(cause["share"] for cause in told["causes"]), abs=1e-12)
    assert 0 < abs(told["rest"]) < abs(1 - told["added"])


def test_changes_that_undo_each_other_have_moves_and_no_shares():
    told = figure(answer(('re          = "33"', 're          = "39"'), ('re          = "47"', 're          = "39.36"')),
                  DECIBELS)
    alone = [cause["alone"] - told["before"] for cause in told["causes"]]
    assert min(map(abs, alone)) > 0.5 and 0 < abs(told["after"] - told["before"]) < 0.01 * sum(map(abs, alone))
    assert all(cause["share"] is None for cause in told["causes"]) and told["added"] is None


def test_changes_of_which_one_alone_is_no_chain_go_together_and_the_rest_stay_apart():
    ideal = put(LISTENER, ('"600"     # sensor', "0     # sensor"))
    current = put(LISTENER, ('kind        = "voltage"\nresistance  = "600"', 'kind = "current"\nresistance = "1k"'),
                  ('largest     = "2m"', 'largest = "2u"'), ('smallest    = "20u"', 'smallest = "20n"'), COMP)
    one = changes(side(ideal, "a"), side(current, "b"))
    found = finished(causes(one))
    told = {tuple(one.listed[at].path for at in cause.changes): cause for cause in found}
    assert set(told) == {("source.kind", "source.resistance"), ("source.largest", "source.smallest"), ("Q2.c_comp",)}
    assert told["source.kind", "source.resistance"].why == "resistance of the source is zero"
    assert told["source.largest", "source.smallest"].why == "smallest of the source is above largest"
    assert told["Q2.c_comp",].why == "" and all(cause.alone and cause.without for cause in found)


def test_a_stage_for_another_is_one_cause():
    head = 'format = 1\nsource = { kind = "voltage", resistance = 50 }\n[[stage]]\n'
    ladder = 'name = "B"\nkind = "ladder"\narms = [ { series_r = 50 }, { shunt_r = 50 } ]'
    one = changes(side(f'{head}name = "A"\nkind = "block"\ngain = 2', "a"), side(head + ladder, "b"))
    found = finished(causes(one))
    assert [cause.changes for cause in found] == [(0, 1)] and found[0].why == "the chain has no stage"


def test_nothing_is_computed_once_it_is_stopped():
    old, new = side(LISTENER, "a"), side(put(LISTENER, COMP), "b")
    told = finished(compare(changes(old, new), build.ledger(old.chain), build.ledger(new.chain), lambda: True))
    assert told["stopped"] and told["causes"] is None and told["figures"]


def test_figures_come_by_the_size_of_their_move_and_what_came_or_went_comes_first():
    before = {"gain_db": 60.0, "upper_edge_hz": 1e6, "sag_percent": 5.0, "rise_time_s": 1e-6}
    after = {"gain_db": 66.0, "upper_edge_hz": 4e6, "sag_percent": 7.0, "lower_edge_hz": 10.0}
    names = [one.name for one in ranked(before, after)]
    assert names == ["lower_edge_hz", "rise_time_s", "upper_edge_hz", "gain_db", "sag_percent"]
    assert [way(name) for name in ("gain_db", "sag_percent", "rise_time_s")] == ["difference", "points", "ratio"]
    assert moved(5.0, 7.0, "points") == pytest.approx(0.02) and moved(-1.0, 1.0, "ratio") is None
    assert shared(ranked({"x_hz": 1.0}, {"x_hz": 1.0})[0], ()).parts == ()


def test_targets_cautions_and_account():
    told = answer(COMP, ('peaking = "0.5 dB"', 'swing = "1"'))
    rows = {row["name"]: row for row in told["targets"]}
    assert rows["peaking"]["after"] is None and rows["swing"]["before"] is None
    assert rows["upper"]["before"]["got"] < rows["upper"]["after"]["got"]
    assert told["targets"][0]["name"] in ("swing", "peaking")
    names = {one["name"]: one for one in told["figures"]}
    assert names["account.upper.left_db"]["difference"] > 3
    assert names["targets.swing.got"]["before"] is None
    loud = put(LISTENER, ('largest     = "2m"', 'largest     = "20m"'))
    renamed = answer(('name        = "Q3"', 'name        = "Q9"'), before=loud)
    assert renamed["cautions"] == renamed["mended"] == [] and renamed["causes"] is None
    clipping = answer(('largest     = "2m"', 'largest     = "20m"'))
    assert any("clips" in text for text in clipping["cautions"]) and clipping["mended"] == []
