"""The yield of a proposal: the one that an audit of the changed file tells, and no reason to call a plan met unseen."""

from polebook.chain.read import parse
from polebook.plan.apportion import Request, apportion, finished
from polebook.plan.yielded import answer, built
from tests.cli.helpers import CHAINS

TEXTS = {path.stem: path.read_text(encoding="utf-8") for path in CHAINS.glob("*.toml")}


def planned(text, **more):
    return finished(apportion(Request(text, "x.toml", **more)))


def told(text):
    *_, (_, _, result) = built(parse(text, "x.toml"))
    return answer(result)[0].share


def yields(result):
    return next(one for one in result.proposal.targets if one.name == "yield")


def test_it_is_that_of_an_audit_before_and_after():
    text = TEXTS["leaf-probe"]
    result = planned(text, favour="upper")
    after = result.proposal.edit.apply(text)
    assert after != text
    assert (yields(result).before.got, yields(result).after.got) == (told(text), told(after))
    assert yields(result).after.got > yields(result).before.got and result.proposal.met


def test_where_it_alone_is_missed_the_other_targets_get_more_room():
    text = TEXTS["leaf-probe"].replace('yield   = "80 %"', 'yield   = "99 %"')
    result = planned(text)
    assert yields(result).before.met is False and result.proposal.met
    assert yields(result).after.got == told(result.proposal.edit.apply(text)) >= 0.99
    others = [one for one in result.proposal.targets if one.name in ("gain", "lower")]
    assert all(one.after.margin > one.before.margin for one in others)


def test_one_that_can_not_be_had_is_missed_and_gives_no_other_target_away():
    text = TEXTS["leaf-probe"].replace('gain    = ', 'gain_tolerance = "0.05 dB"\ngain    = ')
    result = planned(text)
    assert {one.name for one in result.proposal.targets if not one.after.met} == {"yield"}
    assert yields(result).after.got < 0.8 and not result.gives and not result.stopped


def test_a_run_that_is_stopped_does_not_judge_it():
    text = TEXTS["leaf-probe"].replace('upper   = "25k"', 'upper   = "60k"')
    result = finished(apportion(Request(text, "x.toml"), lambda: True))
    assert result.stopped and yields(result).after.met is None and not result.proposal.met
