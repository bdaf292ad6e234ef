"""Clipping, heat and people: what is warned of, and what is not."""

from __future__ import annotations

from typing import Any

import pytest

from polebook.book.ledger import ledger
from polebook.chain.read import parse
from tests.circuit.bias_cases import NPN, text

SOURCE = {"kind": "voltage", "resistance": 600}
STAGE = {"kind": "common-emitter", "device": "A", "couple": 1e-6, "ic": 10e-3, "vce": 6.0, "rb2": 10e3, "rc": 600.0}


def told(stages: list[dict[str, Any]], cards: dict[str, Any], source: dict[str, Any] | None = None,
         supply: dict[str, Any] | None = None, head: str = "") -> list[str]:
    body = text(stages, cards, supply or {"positive": 12}, source or SOURCE, {"resistance": 1e3})
    made = ledger(parse(body.replace("format = 1\n", f"format = 1\n{head}\n", 1), "cautions.toml"))
    return [f"{one.what}: {one.why}; {one.fix}" for one in made.cautions]


def having(cautions: list[str], word: str) -> list[str]:
    return [one for one in cautions if word in one]


def test_a_part_over_sixty_kelvin_is_hot() -> None:
    """60 mW: at 1100 K/W 66 K, at 900 K/W 54 K."""
    hot = having(told([STAGE], {"A": {**NPN, "theta": 1100}}), "hotter")
    assert len(hot) == 1 and "Q1 gets 66 K hotter" in hot[0] and "burn" in hot[0]
    assert not having(told([STAGE], {"A": {**NPN, "theta": 900}}), "hotter")
    assert not having(told([STAGE], {"A": NPN}), "hotter")


def test_the_upper_device_of_a_cascode_too() -> None:
    stage = {**STAGE, "kind": "cascode", "upper": "B", "vce": 1.0, "rc": 100.0}
    hot = having(told([stage], {"A": NPN, "B": {**NPN, "theta": 2000}}), "hotter")
    assert len(hot) == 1 and "the upper device of Q1" in hot[0]


def test_an_op_amp_by_its_supply_and_its_output() -> None:
    """5 mA at 24 V is 120 mW, and 6 mA that fall from 12 V to vout of 6 V are 36 mW more."""
    card = {"family": "opamp", "gbw": 1e7, "iq": 5e-3}
    stage = {"kind": "noninverting", "device": "U", "couple": 1e-6, "r_bias": 1e4, "vout": 6.0}
    both = {"positive": 12, "negative": -12}

    def hot(**ratings: float) -> list[str]:
        return told([stage], {"U": {**card, **ratings}}, supply=both)

    watts = 5e-3 * 24.0 + (12.0 - 6.0) * 6e-3
    assert having(hot(p_max=watts * 0.99), "p_max") and not having(hot(p_max=watts * 1.01), "p_max")
    assert having(hot(v_max=23.0), "v_max") and not having(hot(v_max=24.0), "v_max")
    assert having(hot(i_max=5e-3), "carries") and not having(hot(i_max=7e-3), "carries")
    assert having(hot(theta=61.0 / watts), "hotter") and not having(hot(theta=59.0 / watts), "hotter")


def test_a_signal_that_clips() -> None:
    block = {"kind": "block", "gain": 10.0, "couple": 1e-6, "rin": 1e6, "clip": 1.0}
    clips = having(told([block], {}, {**SOURCE, "largest": 0.2}), "clips")
    assert len(clips) == 1
    assert "it would come to 2.00 V at n1, where Q1 ends at 1.00 V" in clips[0] and "100 mV of source" in clips[0]
    assert not having(told([block], {}, {**SOURCE, "largest": 0.05}), "clips")
    assert not having(told([block], {}), "clips")


def test_what_may_clip_earlier_is_told_only_where_it_is_asked() -> None:
    block = {"kind": "block", "gain": 10.0, "couple": 1e-6, "rin": 1e6}
    assert having(told([block], {}, {**SOURCE, "largest": 0.2}), "how far Q1 can swing")
    assert not having(told([block], {}), "how far Q1 can swing")


@pytest.mark.parametrize("words", ["EEG head stage", "skin electrodes, dry", "for the patient's arm", "Surface EMG"])
def test_people(words: str) -> None:
    found = having(told([STAGE], {"A": NPN}, head=f'title = "{words}"'), "people")
    assert len(found) == 1 and "IEC 60601-1" in found[0] and "licensed practitioner" in found[0]


@pytest.mark.parametrize("words", ["skin effect of a cable", "ECGx decoder", "leaf probe", "the body of a valve"])
def test_no_people(words: str) -> None:
    assert not having(told([STAGE], {"A": NPN}, head=f'note = "{words}"'), "people")
