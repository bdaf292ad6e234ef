"""Every number that has a working can be followed over a sweep, and comes to itself at today's value."""

from __future__ import annotations

import pytest

from polebook.book.build import document, ledger
from polebook.book.workings.index import entries
from polebook.chain.read import parse
from polebook.plan.named import SECTIONS, named
from polebook.plan.sweep import sweep
from tests.helpers import DEMOS


@pytest.mark.parametrize("name, path", [("six-stage", "Q5.rc"), ("photodiode-front", "U1.rf"),
                                        ("frost-line-sounder", "Q1.rc"), ("shellac-desk", "V1.rk")])
def test_any_figure_can_be_followed(name: str, path: str) -> None:
    chain = parse((DEMOS / f"{name}.toml").read_text(encoding="utf-8"), "x.toml")
    of = ledger(chain)
    known = {one: entry.value for one, entry in entries(document(of, SECTIONS)).items()
             if entry.value is not None and not isinstance(entry.value, bool)}
    for new in ("overall.rise_time_s", "overall.noise_density", "overall.largest_source", "n1.clip_v", "n1.noise_v",
                "rail.positive.current_a"):
        assert new in known
    some = [one for one in known if not one.startswith(("poles.", "zeros."))][::7]
    figures = named(of, [*some[:40], "overall.rise_time_s", "overall.noise_density", "n1.clip_v", "n1.noise_v"])
    (_, _, point), (_, _, other) = sweep(chain, path, [chain.numbers[path], 1.1 * chain.numbers[path]], figures)
    for figure in figures:
        assert point.figures[figure.name] == pytest.approx(known[figure.name], rel=1e-9), figure.name
    assert any(other.figures[figure.name] != point.figures[figure.name] for figure in figures)
