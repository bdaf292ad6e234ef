"""How many builds are made at a time, and how many an audit waits for: by what the first ones need."""

from __future__ import annotations

from polebook.chain.read import parse
from polebook.plan import pacing
from polebook.plan.spread.model import Request
from polebook.plan.spread.run import spread
from tests.helpers import DEMOS

SOUNDER = (DEMOS / "frost-line-sounder.toml").read_text(encoding="utf-8")


def test_a_plain_chain_is_built_as_it_was_asked() -> None:
    request = Request(parse(SOUNDER, "chain.toml"), costs=False)
    assert pacing.paced(request) == (request, request.builds)


def test_builds_that_need_a_ledger_each_come_in_small_blocks_that_change_nothing() -> None:
    wild = parse(SOUNDER.replace('re          = "22"', 're          = "454G"'), "chain.toml")
    request = Request(wild, costs=False, figures=("gain_db",))
    paced, builds = pacing.paced(request)
    assert (paced.block, builds) == (pacing.FEW, pacing.FEW)
    few, same = pacing.paced(request, at_once=8)
    assert (few.block, same) == (8, builds)
    small = Request(wild, 12, costs=False, figures=("gain_db",), workers=1)
    whole = [result for *_, result in spread(small)][-1].columns["gain_db"].tolist()
    parts = [result for *_, result in spread(Request(wild, 12, costs=False, figures=("gain_db",), workers=1, block=5))]
    assert len(parts) > 2 and parts[-1].columns["gain_db"].tolist() == whole
