"""Laws of built chains, build by build."""

from __future__ import annotations

from dataclasses import replace
from types import MappingProxyType

import numpy as np
import pytest

from polebook.chain.model import Chain
from polebook.devices.registry import FAMILIES
from polebook.plan.spread.states import GOOD
from polebook.stages.registry import KINDS
from tests.laws.chains import chain
from tests.plan.spread_chains import run

SLOW = {"capacitance": 1, "inductance": 1, "frequency": -1, "time": 1}  # power of the factor by which all slows down
NAMES = ["six-stage", "photodiode-front", "valves", "mosfets", "inverting-opamps", "blocks", "ladder-arms"]


def slower(of: Chain, times: float) -> Chain:
    """The chain with every capacitance, coil and time constant multiplied."""
    numbers = dict(of.numbers)
    for path in of.numbers:
        owner, _, key = path.partition(".")
        if owner in ("source", "load"):
            dimension = "capacitance" if key in ("capacitance", "couple") else ""
        elif owner == "device":
            name, _, key = key.partition(".")
            dimension = next(p.dimension for p in FAMILIES[of.cards[name].family] if p.key == key)
        else:
            dimension = of_stage(of, owner, key)
        if dimension in SLOW:
            numbers[path] *= times ** SLOW[dimension]
    return replace(of, numbers=MappingProxyType(numbers))


def of_stage(of: Chain, owner: str, key: str) -> str:
    stage = next((stage for stage in of.stages if stage.name == owner), None)
    if stage is None or key.startswith("tolerance."):
        return ""
    if key.startswith("arms."):
        return {"r": "", "l": "inductance", "c": "capacitance"}[key[-1]]
    params = KINDS[stage.kind].keys(of.cards[stage.device].family if stage.device else "")
    param = params[key.partition(".")[0]]
    return param.of or param.dimension


@pytest.mark.parametrize("name", NAMES)
def test_where_everything_is_slower_every_build_has_its_edges_lower_by_as_much(name: str) -> None:
    before, after = run(chain(name), 40, seed=6), run(slower(chain(name), 8.0), 40, seed=6)
    assert (before.state == GOOD).sum() > 20
    assert before.state.tolist() == after.state.tolist()
    assert after.columns["gain_db"] == pytest.approx(before.columns["gain_db"], abs=1e-9, nan_ok=True)
    assert after.columns["peaking_db"] == pytest.approx(before.columns["peaking_db"], abs=1e-6, nan_ok=True)
    for edge in ("lower_edge_hz", "upper_edge_hz"):
        assert after.columns[edge] == pytest.approx(before.columns[edge] / 8.0, rel=1e-9, nan_ok=True)
    assert (before.columns["upper_edge_hz"].std() > 0) and not np.isnan(before.columns["upper_edge_hz"]).all()


@pytest.mark.parametrize("name", NAMES)
def test_half_the_tolerances_are_half_the_draws(name: str) -> None:
    """A build stays on its own side: with all tolerances small, half of them moves every figure half as far."""
    of = chain(name)
    tiny = {path: 1e-5 * x for path, x in of.numbers.items() if ".tolerance." in path or path.startswith("tolerance.")}
    half = {path: 0.5 * x for path, x in tiny.items()}
    whole = run(replace(of, numbers=MappingProxyType({**of.numbers, **tiny})), 40, seed=6)
    less = run(replace(of, numbers=MappingProxyType({**of.numbers, **half})), 40, seed=6)
    for figure, value in whole.nominal.items():
        if value is None or figure == "peaking_db":
            continue
        far, near = whole.columns[figure] - value, less.columns[figure] - value
        assert near == pytest.approx(0.5 * far, abs=1e-3 * np.abs(far).max())
