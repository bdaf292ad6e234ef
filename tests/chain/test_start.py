"""New chains: every kind alone and in company reads without fault, computes, is stable and sanely biased."""

import random

import pytest

from polebook.book import build
from polebook.chain import read
from polebook.chain.start import DEFAULT, new_chain
from polebook.chain.start_cards import NAMES, card_block
from polebook.chain.start_stages import stage_block
from polebook.devices.registry import FAMILIES
from polebook.stages.registry import KINDS
from tests.helpers import WHOLE, of_whole

EVERY = [f"{name}:{family}" if family else name for name, kind in KINDS.items() for family in kind.families or ("",)]
RAILS = (3, 3.3, 5, 9, 12, 15, 24, 48, 100, 250, 600)
RESISTIVE = {name for name, kind in KINDS.items() if kind.topology in ("inverting", "common_control", "cascode")}


def judged(kinds, rail=None, negative=0.0, source=None, load=10e3):
    """The document of a new chain, once everything that holds for all of them is checked."""
    text = new_chain(kinds, rail, negative, source, load)
    chain = read.parse(text, "new.toml")
    document = build.document(build.ledger(chain), ("overall", "bias", "cautions"))
    overall = document["overall"]
    assert overall["unstable"] is False, (kinds, rail)
    assert overall["gain"]
    by_name = {stage.name: stage for stage in chain.stages}
    for entry in document["bias"]:
        stage = by_name[entry["stage"].removesuffix("_upper")]
        if stage.kind in RESISTIVE or stage.kind in ("emitter-follower", "source-follower"):
            share = entry["across_v"] / chain.numbers["supply.positive"]
            assert 0.15 <= share <= 0.85, (kinds, rail, stage.kind, share)
    told = " ".join(caution["text"] for caution in document["cautions"])
    for word in ("saturated", "cut off", "pinched off", "positive grid", "not solved", "no d.c. path", "idss", "20 %"):
        assert word not in told, (kinds, rail, told)
    return chain, document


@pytest.mark.parametrize("kind", EVERY)
def test_every_kind_alone_on_every_rail(kind):
    """Its least and greatest rail, and of those between another part for each kind."""
    for rail in RAILS if WHOLE else {RAILS[0], RAILS[-1], *RAILS[EVERY.index(kind) % 3::3]}:
        chain, _ = judged([kind], rail)
        assert len(chain.stages) == 1


@pytest.mark.parametrize("seed", range(of_whole(12, 4)))
def test_kinds_in_any_order(seed):
    draw = random.Random(seed)
    for _ in range(10):
        kinds = [draw.choice(EVERY) for _ in range(draw.randint(2, 6))]
        source = draw.choice([None, 50.0, 600.0, 1e6])
        judged(kinds, draw.choice([None, 5.0, 12.0, 24.0, 150.0]), draw.choice([0.0, -12.0]), source,
               draw.choice([10e3, 50.0, 1e6]))


def test_all_kinds_in_one_chain_and_the_most_stages():
    chain, _ = judged(list(KINDS))
    assert [stage.kind for stage in chain.stages] == list(KINDS)
    assert len({stage.name for stage in chain.stages}) == len(KINDS)
    assert len(judged(["emitter-follower"] * 64)[0].stages) == 64


def test_the_default_chain():
    chain, document = judged(DEFAULT)
    assert [stage.name for stage in chain.stages] == ["Q1", "Q2"]
    assert 20 < document["overall"]["gain_db"] < 40
    assert document["overall"]["lower_edge_hz"] < 50
    assert document["overall"]["upper_edge_hz"] > 100e3


def test_only_the_cards_that_are_used_are_there_and_marked():
    chain = read.parse(new_chain(["common-source", "noninverting"]), "x.toml")
    assert set(chain.cards) == {"JFET", "OPAMP"}
    assert all("to be replaced by those of your own device" in card.note for card in chain.cards.values())


def test_a_transimpedance_stage_first_is_driven_by_a_current():
    assert read.parse(new_chain(["transimpedance"]), "x.toml").source_kind == "current"
    assert read.parse(new_chain(["block", "transimpedance"]), "x.toml").source_kind == "voltage"


def test_a_cathode_follower_hangs_on_the_anode_before_it():
    _, document = judged(["common-cathode", "cathode-follower"], 250)
    follower = document["bias"][1]
    assert 0.3 * 250 < follower["across_v"] < 0.7 * 250
    chain, document = judged(["cathode-follower"], 250, -250)
    assert chain.stages[0].lower_to == "negative"


@pytest.mark.parametrize("family", FAMILIES)
def test_a_card_of_every_family_reads_alone(family):
    head = 'format = 1\n[source]\nkind = "voltage"\nresistance = 0\n[[stage]]\nname = "L"\nkind = "ladder"\n'
    text = f'{head}arms = [{{ series_r = "1k" }}]\n\n{card_block(family, "MINE")}'
    assert read.parse(text, "x.toml").cards["MINE"].family == family


def test_a_stage_takes_the_card_it_is_given():
    assert 'device      = "VF"' in stage_block("common-emitter", 12.0, "Q7", {"bjt": "VF"})
    assert NAMES["bjt"] in stage_block("common-emitter", 12.0, "Q7", {})


def test_a_chain_is_the_same_each_time():
    assert new_chain(EVERY[:10]) == new_chain(EVERY[:10])
    assert max(map(len, new_chain(EVERY).splitlines())) <= 120
