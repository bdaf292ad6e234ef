"""The demo chains against their goldens. `python -m tests.golden` remakes them: read the difference first."""

import pytest

from tests.golden.making import CHAINS, GOLDEN, REVIEW, VERDICTS, review, texts, verdicts


@pytest.mark.parametrize("chain", CHAINS, ids=lambda chain: chain.stem)
def test_a_demo_chain_reads_as_its_goldens_say(chain):
    for name, text in texts(chain).items():
        assert text == (GOLDEN / name).read_text(encoding="utf-8"), name


def test_the_verdicts_read_as_their_golden_says():
    assert verdicts() == (GOLDEN / VERDICTS).read_text(encoding="utf-8")


def test_a_review_reads_as_its_golden_says():
    assert review() == (GOLDEN / REVIEW).read_text(encoding="utf-8")


def test_every_golden_has_its_chain():
    made = {VERDICTS} | {f"{chain.stem}.{kind}.txt" for chain in CHAINS for kind in ("ledger", "all", "figures", "at")}
    assert {path.name for path in GOLDEN.glob("*.txt")} == made
