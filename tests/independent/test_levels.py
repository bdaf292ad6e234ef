"""Rails and levels of the program against the independent ones, on all chains and on random ones."""

from __future__ import annotations

import random
import tomllib
from functools import cache
from typing import Any

import pytest

from polebook.book.build import document, ledger
from polebook.chain.read import parse
from tests.circuit.bias_cases import text
from tests.independent.levels import Currents, Levels
from tests.independent.oracle import plain
from tests.laws.chains import BY_NAME, WITH_BAND

RAIL_SHARE = 1e-9  # of the greatest current of a chain
RELATIVE = 1e-9
NO_CURRENT = {"stated-currents"}  # one stage's current can't be had


def _full(raw: str) -> str:
    """The text of a chain with what rails and levels need, where it lacks it."""
    lines, doc = [], tomllib.loads(raw)
    needs = {"[source]": {"largest": "1m", "smallest": "1u"}, "[device.": {"iq": "1m", "slew": "5M", "i_max": "20m"},
             "[[stage]]": {"iq": "2m", "clip": "2", "slew": "30M"}}
    supply = not doc.get("supply")
    kinds = iter([stage["kind"] for stage in doc.get("stage", [])])
    cards = iter([card["family"] for card in doc.get("device", {}).values()])
    tables = iter([doc["source"], *doc.get("stage", []), *doc.get("device", {}).values()])
    for line in raw.split("\n"):
        lines.append(line)
        head = next((head for head in needs if line.startswith(head)), "")
        if not head:
            continue
        kind = next(kinds) if head == "[[stage]]" else next(cards) if head == "[device." else ""
        table = next(tables)
        if head == "[source]" or kind in ("block", "opamp"):
            lines += [f'{key} = "{value}"' for key, value in needs[head].items() if key not in table]
    return "\n".join(lines) + ('\n[supply]\npositive = "12"\nnegative = "-12"\n' if supply else "")


@cache
def both(name: str) -> tuple[dict[str, Any], dict[str, Any]]:
    return solved(_full(BY_NAME[name].read_text(encoding="utf-8")))


def solved(raw: str) -> tuple[dict[str, Any], dict[str, Any]]:
    """(the program's document, the independent figures) of a text."""
    program = document(ledger(parse(raw, "levels.toml")), ("overall", "levels", "rails"))
    doc = tomllib.loads(raw)
    levels = Levels(doc)
    return program, plain({"rails": Currents(doc).rows(), "levels": levels.rows(), "overall": levels.overall()})


def agree(program: dict[str, Any], theirs: dict[str, Any]) -> None:
    assert [row["rail"] for row in program["rails"]] == [row["rail"] for row in theirs["rails"]]
    sizes = [abs(row["current_a"]) for row in theirs["rails"]]
    for row, other in zip(program["rails"], theirs["rails"], strict=True):
        assert abs(row["current_a"] - other["current_a"]) <= RAIL_SHARE * max(sizes), row
    assert abs(sum(row["current_a"] for row in program["rails"])) <= RAIL_SHARE * max(sizes, default=0.0)
    assert [row["node"] for row in program["levels"]] == [row["node"] for row in theirs["levels"]]
    for row, other in zip(program["levels"], theirs["levels"], strict=True):
        for key, value in other.items():
            if key != "node":
                wanted = value if value is None else pytest.approx(value, rel=RELATIVE, abs=1e-9)
                assert row[key] == wanted, (row, key)
    for key, value in theirs["overall"].items():
        wanted = value if value is None or isinstance(value, str) else pytest.approx(value, rel=RELATIVE)
        assert program["overall"][key] == wanted, key


@pytest.mark.parametrize("name", [name for name in WITH_BAND if name not in NO_CURRENT])
def test_every_chain(name: str) -> None:
    agree(*both(name))


def test_no_chain_is_left_without_a_rail_or_a_clip_level() -> None:
    """Else the comparison would be of nothing."""
    found = [both(name)[0] for name in WITH_BAND if name not in NO_CURRENT]
    assert sum(bool(doc["rails"]) for doc in found) == len(found)
    assert sum(doc["overall"]["clips_first"] is not None for doc in found) > 0.8 * len(found)


CARDS = {
    "N": {"family": "bjt", "polarity": "npn", "beta": 180, "ft": "300M", "ft_ic": "5m", "cob": "3p", "cob_v": "5",
          "early_voltage": 90},
    "P": {"family": "bjt", "polarity": "pnp", "beta": 110, "ft": "200M", "ft_ic": "5m", "cob": "4p", "cob_v": "5"},
    "J": {"family": "jfet", "polarity": "n", "idss": "9m", "vgs_off": 2.5, "ciss": "5p", "crss": "1p2"},
    "M": {"family": "mosfet", "polarity": "n", "k": "20m", "vgs_th": 1.5, "cgs": "8p", "cgd": "1p"},
    "T": {"family": "triode", "mu": 60, "gm": "1m6", "gm_ia": "1m2", "cgk": "2p", "cga": "1p5"},
    "U": {"family": "opamp", "gbw": "8M", "iq": "1m7", "slew": "9M", "i_max": "15m"},
}


def random_text(seed: int) -> str:
    """A chain of two to five stages with random kinds and values."""
    draw = random.Random(seed)

    def near(value: float) -> float:
        return float(f"{value * 10 ** draw.uniform(-0.25, 0.25):.3g}")

    def inverting() -> dict[str, object]:
        stage = {"kind": "common-emitter", "device": "N", "couple": 1e-6, "rb1": near(80e3), "rb2": near(15e3),
                 "rc": near(3.3e3), "re": near(150.0), "re_bypassed": near(680.0), "ce": 47e-6, "stopper": near(100.0)}
        return stage | ({"rf": near(220e3), "c_rf": 1e-6} if draw.random() < 0.5 else {})

    makers = [
        inverting,
        lambda: {"kind": "common-emitter", "device": "P", "couple": 1e-6, "rb1": near(15e3), "rb2": near(80e3),
                 "rc": near(3.3e3), "re": near(820.0)},
        lambda: {"kind": "emitter-follower", "device": "N", "re": near(2.2e3), "couple": 1e-6, "rb1": near(68e3),
                 "rb2": near(82e3)},
        lambda: {"kind": "common-source", "device": "J", "couple": 1e-7, "rg": near(1e6), "rs": near(470.0),
                 "rd": near(1.5e3)},
        lambda: {"kind": "common-source", "device": "M", "couple": 1e-7, "rg1": near(680e3), "rg2": near(220e3),
                 "rs": near(390.0), "rd": near(1.2e3)},
        lambda: {"kind": "cascode", "device": "N", "couple": 1e-6, "rb1": near(80e3), "rb2": near(15e3), "vce": 3.0,
                 "rc": near(1.5e3), "re": near(820.0)},
        lambda: {"kind": "common-base", "device": "N", "couple": 1e-5, "re": near(1.2e3), "rc": near(2.2e3),
                 "lower_to": "negative"},
        lambda: {"kind": "common-cathode", "device": "T", "couple": 1e-7, "rg": near(1e6), "rk": near(1.5e3),
                 "ra": near(22e3)},
        lambda: {"kind": "noninverting", "device": "U", "couple": 1e-6, "r_bias": near(47e3), "rf": near(10e3),
                 "rg": near(2.2e3), "r_out": near(47.0), **({"vout": near(2.0)} if draw.random() < 0.5 else {})},
        lambda: {"kind": "inverting", "device": "U", "rg": near(4.7e3), "rf": near(22e3),
                 **({"couple": 1e-6} if draw.random() < 0.5 else {})},
        lambda: {"kind": "block", "gain": -4.0, "rin": near(1e3), "rout": near(75.0), "clip": near(2.0),
                 "iq": near(2e-3), "vout": near(1.5), "slew": near(4e7), "couple": 1e-6},
    ]
    stages = [draw.choice(makers)() for _ in range(draw.randint(2, 5))]
    cards = {name: CARDS[name] for name in {str(stage["device"]) for stage in stages if "device" in stage}}
    source = {"kind": "voltage", "resistance": near(600.0), "capacitance": 1e-11, "largest": near(1e-3),
              "smallest": near(1e-6)}
    return text(stages, cards, {"positive": near(15.0), "negative": -near(12.0)}, source,
                {"resistance": near(2.2e3), "capacitance": 1e-10, **({"couple": 1e-5} if draw.random() < 0.6 else {})})


CUT_OFF = {22}  # a draw in which a follower's base stands below its emitter


@pytest.mark.parametrize("seed", [seed for seed in range(24) if seed not in CUT_OFF])
def test_random_chains(seed: int) -> None:
    program, theirs = solved(random_text(seed))
    assert program["levels"] is not None
    agree(program, theirs)
