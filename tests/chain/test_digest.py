"""The digest names what a chain says, not how its file spells it."""

from __future__ import annotations

import hashlib
import json

import pytest

from polebook.chain.digest import canonical
from polebook.chain.read import parse
from tests.chain import good
from tests.chain.good import BLOCK, LADDER, STAGE, small, stage


def digest(text):
    return parse(text, "x").digest


PLAIN = digest(small())


def test_it_is_the_hash_of_canonical_json():
    chain = parse(small(), "x")
    text = canonical(chain)
    assert chain.digest == hashlib.sha256(text.encode()).hexdigest()
    content = json.loads(text)
    assert text == json.dumps(content, sort_keys=True, separators=(",", ":"))
    assert content["numbers"]["Q1.rc"] == 2200.0
    assert content["numbers"]["tolerance.capacitor"] == 0.05
    assert '"Q1.rc":2200.0' in text


@pytest.mark.parametrize(
    "text",
    [
        small().replace("\n", "  # a comment\n"),
        small().replace("\n", "\r\n"),
        small().replace('"2k2"', "2200"),
        small().replace('"2k2"', '"2.2 kΩ"'),
        small().replace('"2k2"', "2.2e3"),
        small(head='format = 1\ntitle = "another"\nnote = "why"\n'),
        small(stage=STAGE + 'note = "why"\n', card=good.CARD + 'note = "why"\n'),
        small(rest='[[bench]]\ngain = "50 dB"\nat = "Q1"\n'),
        small(rest='[target]\nnote = "why"\n'),
        small(
            rest='[supply]\ntemperature = "25 °C"\npositive = "0 V"\nnegative = -0.0\n[tolerance]\nresistor = "1 %"\n'
        ),
        small(rest='[preferred]\nresistor = "E24"\n'),
        small(stage=STAGE + 'output_to = "positive"\nleft_out = false\n'),
        small(card='[device.D]\nbeta = 200\nfamily = "bjt"\npolarity = "npn"\n'),
        small().replace("[[stage]]\n", "[[stage]]\n\n\n"),
    ],
)
def test_spelling_notes_title_and_benches_do_not_change_it(text):
    assert digest(text) == PLAIN


@pytest.mark.parametrize(
    "text",
    [
        small().replace('"2k2"', '"2k20000001"'),
        small(stage=STAGE + 'stray = "1p"\n'),
        small(stage=STAGE + "left_out = true\n"),
        small(stage=STAGE + 'lower_to = "negative"\n'),
        small(stage=STAGE + 'free = ["rc"]\n'),
        small(stage=STAGE.replace('"Q1"', '"Q2"')),
        small(stage=STAGE + STAGE.replace('"Q1"', '"Q2"')),
        small(card=good.CARD + 'polarity = "pnp"\n'),
        small(card=good.CARD + good.FET),
        small(card=good.CARD.replace("D]", "E]"), stage=STAGE.replace('"D"', '"E"')),
        small(rest='[target]\nupper = "1M"\n'),
        small(rest='[tolerance]\nshape = "uniform"\n'),
        small(rest='[preferred]\nresistor = "E96"\n'),
        small(source='[source]\nkind = "current"\nresistance = "600"\n'),
    ],
)
def test_what_is_said_changes_it(text):
    assert digest(text) != PLAIN


def test_the_order_of_stages_changes_it():
    a, b = stage("block", "gain = 2", name="A"), stage("block", "gain = 3", name="B")
    assert digest(small(stage=a + b)) != digest(small(stage=b + a))


def test_a_gain_in_db_is_the_same_gain():
    assert digest(small(stage=BLOCK + "gain = -10\n")) == digest(
        small(stage=BLOCK + 'gain = "20 dB"\ninverting = true\n')
    )


def test_a_role_that_is_the_default_is_no_change_and_another_is():
    plain, same, other = (
        digest(small(stage=LADDER + f'arms = [ {{ shunt_c = "22p", shunt_r = 1{role} }} ]\n'))
        for role in ("", ', role = "high"', ', role = "low"')
    )
    assert plain == same
    assert plain != other
