"""What lands on a site sums to the site's time constant, part by part."""

import pytest

from polebook.book import build
from polebook.book.landed import landed
from polebook.chain import read
from tests.book.verdict_cases import CASES
from tests.helpers import DEMOS

CHAINS = {path.stem: path.read_text(encoding="utf-8") for path in sorted(DEMOS.glob("*.toml"))} | CASES


@pytest.mark.parametrize("name", CHAINS)
def test_what_lands_on_a_site_sums_to_its_time_constant(name):
    ledger = build.ledger(read.parse(CHAINS[name], "chain.toml"))
    found = landed(ledger.solution)
    assert set(found) <= {site.name for site in ledger.sites}
    for site in ledger.sites:
        each = [one.tau for one in found.get(site.name, [])]
        assert sum(each) == pytest.approx(site.tau, rel=1e-9, abs=1e-30), site.name


def test_a_bridge_lands_with_its_miller_half():
    ledger = build.ledger(read.load(str(DEMOS / "wire-break-listener.toml")))
    parts = ledger.solution.circuit.layout.parts
    (bridge,) = [one for one in ledger.bridges["Q2"] if one.part == "c_comp"]
    (here,) = [one for one in landed(ledger.solution)["n1"] if parts[one.part].name == "c_comp"]
    assert here.k == pytest.approx(bridge.k) and here.farad == pytest.approx(bridge.at_input)
    assert here.farad == pytest.approx(bridge.value * (1 - bridge.k))
