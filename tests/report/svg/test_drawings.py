"""The drawings: figures stand where their axes say, words are whole and clear of one another, and nothing is markup."""

import os
import re
import subprocess
import sys
from itertools import combinations, pairwise
from math import log10

import numpy as np
import pytest

from polebook.report.svg.drawings import WHAT, drawing, missing
from tests.cli.helpers import LISTENER, environment
from tests.report.svg.drawn import NAMES, SVG, Picture, document, made, picture, text_of

LISTENS, FROST, SIX, DIODE = "wire-break-listener", "frost-line-sounder", "six-stage", "photodiode-front"
DEMOS = (LISTENS, FROST, SIX, DIODE, "shellac-desk")
TITLE = 'title  = "Wire-break listener"'


@pytest.mark.parametrize("what", NAMES)
@pytest.mark.parametrize("name", DEMOS)
def test_words_lie_on_the_sheet_and_not_on_one_another(name, what):
    drawn = picture(name, what)
    for text in drawn.texts:
        assert text.left >= 0 and text.right <= drawn.width, text
        assert text.top >= 0 and text.bottom <= drawn.height, text
    for one, other in combinations(drawn.texts, 2):
        across = min(one.right, other.right) - max(one.left, other.left)
        down = min(one.bottom, other.bottom) - max(one.top, other.top)
        assert across < 2.5 or down < 2.5, (one, other)


@pytest.mark.parametrize("what", NAMES)
def test_a_drawing_tells_what_it_is_without_colour(what):
    drawn = picture(LISTENS, what)
    root = drawn.root
    assert [root.get(key) for key in ("role", "aria-labelledby")] == ["img", "title desc"]
    assert root.get("viewBox") == f"0 0 {root.get('width')} {root.get('height')}"
    assert root.find(f"{SVG}title").text == f"Wire-break listener: {WHAT[what][0]}"
    assert len(root.find(f"{SVG}desc").text) > 40
    colours = set(re.findall(r'"(#[^"]*)"', drawn.source))
    assert colours <= {"#000", "#555", "#bbb", "#ddd", "#fff"}
    assert 'font-family="sans-serif"' in drawn.source
    assert "url(#" not in drawn.source or {"hatch", "dots"} == {one["id"] for one in drawn.of("pattern")}


@pytest.mark.parametrize("what", NAMES)
def test_text_of_the_file_is_no_markup(what):
    title = '</title><script>alert(1)</script><g fill=\\"red\\"> & \\u001b[31m \\u202e ]]> &amp;'
    text = text_of(LISTENS).replace(TITLE, f'title = "{title}"')
    drawn = Picture(drawing(made(text), what))
    plain = '</title><script>alert(1)</script><g fill="red"> & \\x1b[31m \\u202e ]]> &amp;'
    assert drawn.root.find(f"{SVG}title").text == f"{plain}: {WHAT[what][0]}"
    assert not list(drawn.root.iter(f"{SVG}script"))
    heading = drawn.texts[0].words
    assert heading == plain or (heading.endswith("…") and plain.startswith(heading[:-1]))
    tags = {element.tag.removeprefix(SVG) for element in drawn.root.iter()}
    assert tags <= {"svg", "title", "desc", "defs", "pattern", "path", "rect", "g", "line", "circle", "text"}


def test_the_same_file_gives_the_same_bytes_in_another_process():
    script = ("import sys; from polebook.cli.main import main\n"
              f"for what in {NAMES!r}: main(['draw', {str(LISTENER)!r}, '--what', what])")
    done = subprocess.run([sys.executable, "-c", script], env=environment(PYTHONHASHSEED="7", PYTHONIOENCODING="utf-8"),
                          capture_output=True, check=True)
    ours = b"".join(drawing(made(text_of(LISTENS)), what).encode() for what in NAMES)
    assert re.sub(rb"<!-- polebook [^>]*-->\n", b"", done.stdout).replace(os.linesep.encode(), b"\n") == ours


def _tick(drawn, label, top):
    """Where a tick of the frequency axis lies, px."""
    (found,) = [text.x for text in drawn.texts if text.words == label and text.y > top]
    return found


def test_the_response_has_its_edges_and_limits_where_they_are():
    drawn, told = picture(LISTENS, "response"), document(LISTENS)
    first, last = _tick(drawn, "10k", 400), _tick(drawn, "1M", 400)

    def x(hz):
        return first + (last - first) * log10(hz / 1e4) / 2

    overall = told["overall"]
    dots = sorted(one["cx"] for one in drawn.of("circle", r="4.5"))
    assert dots == pytest.approx([x(overall["lower_edge_hz"]), x(overall["upper_edge_hz"])], abs=0.15)
    limits = drawn.of("line", **{"stroke-dasharray": "9 3 2 3"})
    assert sorted({one["x1"] for one in limits if one["x1"] == one["x2"]}) == pytest.approx([x(20e3), x(1e6)], abs=0.15)
    (level,) = [one for one in limits if one["y1"] == one["y2"]]
    up = {text.words: text.y for text in drawn.texts if text.words in ("50", "60") and text.right < first}
    db = 60 + 10 * (level["y1"] + 4 - up["60"]) / (up["60"] - up["50"])
    assert db == pytest.approx(told["response"]["corner_db"], abs=0.05)
    assert {text.words for text in drawn.texts} >= {
        "lower edge 14.1 kHz", "upper edge 400 kHz", "wanted: lower edge at most 20 kHz",
        "wanted: upper edge at least 1 MHz", "wanted: 60 dB ±1 dB"}


def test_the_curve_of_the_response_is_the_response():
    drawn, told = picture(LISTENS, "response"), document(LISTENS)
    points = drawn.curve()
    first, last = _tick(drawn, "10k", 400), _tick(drawn, "1M", 400)
    up = {text.words: text.y - 4 for text in drawn.texts if text.words in ("50", "60") and text.right < first}
    decades = np.log10(told["response"]["hz"])
    for x, y in points[1:-1:5]:
        wanted = np.interp(4 + 2 * (x - first) / (last - first), decades, told["response"]["gain_db"])
        assert 60 + 10 * (y - up["60"]) / (up["60"] - up["50"]) == pytest.approx(wanted, abs=0.06)


def test_every_pole_in_sight_has_its_cross_and_every_zero_its_ring():
    drawn, told = picture(LISTENS, "response"), document(LISTENS)
    low, high = told["response"]["from_hz"], told["response"]["to_hz"]
    poles = [root for root in told["poles"] if low <= root["hz"] <= high]
    strokes = [line for line in drawn.lines if abs(line[0] - line[2]) == pytest.approx(8) and
               abs(line[1] - line[3]) == pytest.approx(8)]
    assert len(poles) == 7
    assert len(strokes) == 2 * len(poles)


def test_the_account_is_drawn_to_scale():
    drawn, told = picture(LISTENS, "account"), document(LISTENS)
    dark = [one["width"] for one in drawn.of("rect", fill="#555") if one["height"] == 12]
    shares = sorted((part["owns_upper"] for part in told["parts"] if (part["owns_upper"] or 0) > 0.01), reverse=True)
    assert dark[1] / dark[0] == pytest.approx(shares[1] / shares[0], rel=0.01)
    hatched = max(one["width"] for one in drawn.of("rect", fill="url(#hatch)"))
    light = max(one["width"] for one in drawn.of("rect", fill="#ddd") if one["x"] < drawn.width / 2 and one["y"] < 200)
    node = next(node for node in told["nodes"] if node["name"] == "n1")
    beyond = node["lost_upper_db"] - node["allotted_upper_db"]
    assert hatched / light == pytest.approx(beyond / node["allotted_upper_db"], rel=0.01)
    assert drawn.at("7.17").bold and drawn.at("0.84").bold and not drawn.at("0.59").bold
    assert "upper edge 400 kHz; lost at 1.00 MHz: 8.62 of 3.01 dB" in {text.words for text in drawn.texts}


def test_rise_overshoot_and_settling_are_marked_where_they_are_read():
    drawn, told = picture(FROST, "pulse"), document(FROST)
    per_s = (_tick(drawn, "20n", 300) - _tick(drawn, "10n", 300)) / 10e-9
    begin = _tick(drawn, "0", 380)
    marks = {row["mark"]: row for row in told["pulse"]["marks"]}
    rings = sorted(one["cx"] for one in drawn.of("circle", r="3.5"))
    wanted = [begin + per_s * marks[name]["time_s"] for name in ("10 %", "90 %", "top", "within 1 %", "within 0.1 %")]
    assert rings == pytest.approx(wanted, abs=0.3)
    words = {text.words for text in drawn.texts}
    assert {"overshoot 5.47 %", "within 1 % after 13.7 ns", "within 0.1 % after 21.3 ns",
            "rise, 10-90 %: 3.91 ns (wanted: at most 6 ns)", "wanted: overshoot at most 10 %"} <= words
    top = next(one["cy"] for one in drawn.of("circle", r="3.5") if one["cx"] == rings[2])
    up = {text.words: text.y - 4 for text in drawn.texts if text.words in ("100", "80")}
    height = 100 + 20 * (up["100"] - top) / (up["80"] - up["100"])
    assert height == pytest.approx(100 * marks["top"]["height"], abs=0.2)


def test_the_levels_rise_by_decades():
    drawn, told = picture(LISTENS, "levels"), document(LISTENS)
    up = {text.words: text.y - 4 for text in drawn.texts if text.words in ("1m", "1")}
    per_decade = (up["1m"] - up["1"]) / 3
    row = next(row for row in told["levels"] if row["node"] == "n2")
    x = next(text.x for text in drawn.texts if text.words == "n2")
    heights = sorted(one["cy"] for one in drawn.of("circle", r="3") if one["cx"] == x)
    wanted = [up["1"] - per_decade * log10(volts) for volts in
              (row["largest_v"], row["smallest_v"], 2**0.5 * row["noise_v"])]
    assert heights == pytest.approx(wanted, abs=0.2)
    clips = [one["y1"] for one in drawn.of("line", **{"stroke-width": "3"}) if one["x1"] < x < one["x2"]]
    assert clips == pytest.approx([up["1"] - per_decade * log10(row["clip_v"])], abs=0.2)
    places = [text.words for text in sorted(drawn.texts, key=lambda text: text.x) if text.y == drawn.at("n0").y]
    assert places == ["EMF", "n0", "n1", "n2", "n3", "load"]
    assert {"6.12 dB", "34.17 dB", "clip level", "noise floor"} <= {text.words for text in drawn.texts}


def test_a_current_source_has_no_level_in_volts():
    drawn = picture(DIODE, "levels")
    assert "EMF" not in {text.words for text in drawn.texts}
    assert drawn.at("n0").x < drawn.at("n3").x


def test_an_unstable_chain_is_told_in_words():
    from tests.book.verdict_cases import CASES

    told = made(next(text for name, text in CASES.items() if name.startswith("unstable")))
    assert [bool(missing(told, what)) for what in NAMES] == [False, True, True, True]
    for what in NAMES:
        drawn = Picture(drawing(told, what))
        said = " ".join(text.words for text in drawn.texts)
        assert missing(told, what) in said
        assert "unstable" in said or "not stable" in said or "no edges" in said


def test_sweeps_of_the_bench_lie_over_the_response():
    told = {**document(LISTENS), "sweeps": [
        {"name": "board <3>", "hz": [20e3, 50e3, 1e5, 2e5, 1e9], "gain_db": [56.0, 58.0, 58.5, 57.0, 0.0]}]}
    drawn = Picture(drawing(told, "response"))
    assert len(drawn.of("circle", r="2.6")) == 4
    assert "measured: board <3>" in {text.words for text in drawn.texts}


def test_ticks_do_not_crowd():
    for name in DEMOS:
        for what in ("response", "pulse"):
            drawn = picture(name, what)
            bottom = max(text.y for text in drawn.texts if text.words[:1].isdigit() or text.words == "0")
            row = sorted((text for text in drawn.texts if text.y == bottom), key=lambda text: text.x)
            assert 4 <= len(row) <= 16
            assert all(after.left - before.right > 6 for before, after in pairwise(row)), (name, what)
