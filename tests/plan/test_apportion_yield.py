"""The yield of a proposal: the one that an audit of the changed file tells, and no reason to call a plan met unseen."""

import pytest

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


@pytest.mark.parametrize(("want", "met"), [("80 %", True), ("99.9 %", False)])
def test_a_missed_yield_is_missed_and_gives_no_other_target_away(want, met):
    text = TEXTS["leaf-probe"].replace('yield   = "80 %"', f'yield   = "{want}"')
    result = planned(text)
    assert result.proposal.met is met is yields(result).after.met
    assert not result.proposal.edit and not result.gives


def test_a_run_that_is_stopped_does_not_judge_it():
    text = TEXTS["leaf-probe"].replace('upper   = "25k"', 'upper   = "60k"')
    result = finished(apportion(Request(text, "x.toml"), lambda: True))
    assert result.stopped and yields(result).after.met is None and not result.proposal.met
