"""The pages of levels and bias: every figure at its place, the diagram true to its scale, the rails told in words."""

from __future__ import annotations

import re
from typing import Any

import pytest

from polebook.report.levels import bias, diagram, levels, rails, summary
from polebook.report.look import Look, cells
from polebook.report.pages import page
from polebook.report.pages_csv import page_csv
from tests.report import sample

LOOK = Look()


def level(node: str, noise: float | None, smallest: float | None, largest: float | None, clip: float | None,
          by: str | None = None, room: float | None = None) -> dict[str, Any]:
    return {"node": node, "noise_v": noise, "smallest_v": smallest, "largest_v": largest, "clip_v": clip,
            "clips_by": by, "headroom_db": room}


ROWS = [
    level("n0", 1e-6, 1e-5, 1e-3, None),
    level("n1", 1e-5, 1e-4, 1e-2, 1.0, "Q1 cut-off", 40.0),
    level("n2", None, 1e-3, 10.0, 1.0, "Q2 saturation", -20.0),
    level("load", None, None, None, None),
]
RAILS = [{"rail": "positive", "current_a": 5e-3}, {"rail": "negative", "current_a": -3e-3},
         {"rail": "ground", "current_a": None}]
DIRECT = {
    "rails": [{"rail": "positive", "volts": 12.0}, {"rail": "negative", "volts": -12.0},
              {"rail": "ground", "volts": 0.0}],
    "draws": [{"rail": "positive", "stage": "Q1", "element": "rc", "current_a": 4e-3},
              {"rail": "positive", "stage": "Q2", "element": "source", "current_a": 1e-3},
              {"rail": "negative", "stage": "U1", "element": "iq", "current_a": -3e-3},
              {"rail": "ground", "stage": "V1", "element": "rk", "current_a": None}],
    "solved": {"Q1": 3.5e-3}, "amplifiers": [],
}


def document(**changed: Any) -> dict[str, Any]:
    return {**sample.document(), "levels": ROWS, "rails": RAILS, "direct": DIRECT, **changed}


def test_the_table_tells_every_figure_and_marks_what_clips() -> None:
    lines = levels(document(), Look(colour=True))
    assert re.search(r"n1 .*100 uV +10\.0 mV +10\.0 uV +1\.00 V +40\.00  Q1 cut-off", lines[3])
    assert "\x1b[31m-20.00\x1b[0m" in lines[4].replace("   ", "")
    assert lines[5].split() == ["load", "–", "–", "–", "–", "–"]


def test_the_diagram_is_true_to_its_scale() -> None:
    """One mark in 20 dB: clip levels of two nodes stand one under the other, at the 0 of the scale."""
    scale, n0, n1, n2, load, *_ = diagram(document(), LOOK)
    zero = scale.index(" 0") + 1
    assert n1.index("|") == n2.index("|") == zero
    assert n1.count("█") == pytest.approx(40 * (len(n1) - 1 - n1.index("·")) / 100.0, abs=4)
    per_db = (zero - scale.index("-60") - 1) / 60.0
    assert n0.index("█") == pytest.approx(zero - 100 * per_db, abs=1.5)
    assert n2.index("█") == pytest.approx(zero - 60 * per_db, abs=1.5)
    assert len(n2) - 1 == pytest.approx(zero + 20 * per_db, abs=1.5)
    assert load.strip() == "load"
    assert all(cells(line) <= 80 for line in (scale, n0, n1, n2))


def test_a_signal_under_the_noise_is_told_apart() -> None:
    lines = diagram(document(levels=[level("n0", 1e-3, 1e-5, 1e-2, 1.0)]), LOOK)
    assert "xxx" in lines[1] and "█" in lines[1] and "x under the noise" in " ".join(" ".join(lines[2:]).split())
    assert "under the noise" not in " ".join(" ".join(diagram(document(), LOOK)).split())


def test_without_any_level_there_is_no_diagram() -> None:
    assert diagram(document(levels=[level("n0", None, None, None, None)]), LOOK) == []
    assert diagram(document(levels=None), LOOK) == []
    assert levels(document(levels=None), LOOK) == []


@pytest.mark.parametrize("encoding", ["ascii", "utf-8"])
@pytest.mark.parametrize("width", [80, 120])
def test_it_fits_whatever_the_levels(encoding: str, width: int) -> None:
    """From femtovolts to kilovolts, on a page of any width; nothing but ASCII where nothing else can be shown."""
    look = Look(encoding=encoding, width=width)
    for top in (1e-9, 1e-3, 1.0, 3e3):
        rows = [level(f"n{k}", top * 1e-6, top * 1e-5, top * 10.0**-k, top, "Q1 cut-off", 20.0 * k) for k in range(5)]
        text = page(document(levels=rows), "levels", look, "chain.toml")
        assert all(cells(line) <= width for line in text.split("\n"))
        assert encoding == "utf-8" or text.isascii()


def test_rails_are_told_in_words_with_what_they_feed() -> None:
    text = "\n".join(rails(document(), LOOK))
    assert re.search(r"positive +12\.0 V +gives +5\.00 mA +60\.0 mW", text)
    assert re.search(r"negative +-12\.0 V +takes +3\.00 mA +36\.0 mW", text)
    assert re.search(r"ground +0 V +not known +–", text)
    assert "positive gives: Q1.rc 4.00 mA, current source at Q2 1.00 mA" in text
    assert "negative takes: U1 itself 3.00 mA" in text
    assert "ground takes: V1.rk not known" in text
    assert rails(document(rails=None), LOOK) == []


def test_a_stated_current_stands_beside_what_its_network_gives() -> None:
    rows = [{"stage": "Q1", "device": "VF", "current_a": 4e-3, "across_v": 5.0, "control_v": 2.0, "lower_v": 1.4,
             "output_v": 6.4, "dissipation_w": 0.02, "from": "given"}]
    text = "\n".join(bias(document(bias=rows), LOOK))
    assert "network" in text and re.search(r"Q1 +VF +4\.00 mA given +3\.50 mA +5\.00 V", text)
    solved = [{**rows[0], "from": "solved"}]
    text = "\n".join(bias(document(bias=solved, direct={**DIRECT, "solved": {}}), LOOK))
    assert "network" not in text and "4.00 mA solved" in text


def test_the_summary_says_what_is_known_and_nothing_else() -> None:
    overall = {**sample.document()["overall"], "clips_first": "Q2", "largest_source": 2e-3, "supply_current_a": 0.01,
               "dynamic_range_db": None, "noise_margin_db": 12.0, "full_power_hz": None}
    assert " ".join(" ".join(summary(document(overall=overall), LOOK)).split()) == (
        "Q2 clips first, at 2.00 mV peak of source; smallest signal over the noise 12.00 dB; supply current 10.0 mA.")
    nothing = dict.fromkeys(("clips_first", "largest_source", "supply_current_a", "dynamic_range_db", "noise_margin_db",
                             "full_power_hz"))
    assert summary(document(overall={**sample.document()["overall"], **nothing}), LOOK) == []


def test_csv_has_every_row_and_what_each_rail_feeds() -> None:
    text = page_csv(document(), "levels")
    assert "node,smallest peak [V],largest peak [V],noise rms [V],clip peak [V],headroom [dB],clips by\n" in text
    assert "n2,0.001,10.0,,1.0,-20.0,Q2 saturation\n" in text
    assert "from rail,stage,through,current [A]\n" in text and "ground,V1,rk,\n" in text
