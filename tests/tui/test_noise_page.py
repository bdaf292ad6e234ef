"""Page 5: the density as drawn, the figures, who makes the noise, and the keys that move them."""

import random
import re
from dataclasses import replace
from math import floor, log10, sqrt

import numpy as np
import pytest

from polebook.book.build import document
from polebook.book.ledger import ledger
from polebook.book.response import begin_hz, whole_band
from polebook.chain.read import parse
from polebook.report.noise import ranked as reported
from polebook.session import state as sessions
from polebook.tui.control import pages
from polebook.tui.control.figures import names_of
from polebook.tui.control.noise import path_of
from polebook.tui.draw import noise_curves as curves
from polebook.tui.draw.noise_makers import FIGURES, makers
from polebook.tui.draw.plot import sight
from polebook.tui.draw.screen import screen
from polebook.tui.view import State, View
from tests.book.test_noise import BIPOLAR
from tests.book.verdict_cases import CASES
from tests.golden.screens import opened
from tests.helpers import DEMOS
from tests.independent.noisy import noisy
from tests.terminal.probe import Terminal, app
from tests.tui.desk import LISTENER, SIX, Desk, copied
from tests.tui.drawn import faults, random_plot, random_session, random_size, random_view
from tests.tui.test_draw_parts import styled

NAMES = sorted(path.stem for path in DEMOS.glob("*.toml"))
DIODE = DEMOS / "photodiode-front.toml"


def on_page(of=SIX, *keys, plain=False):
    return Desk(of, plain=plain).press("tab", "5", *keys)


def of_text(text, **view):
    """A desk at a chain of a text."""
    desk = Desk(SIX)
    session = sessions.new_session("chains/some.toml", text)
    desk.state = State(session, replace(View(page="noise", focus="page"), **view))
    return desk


def with_targets(desk, **targets):
    session = desk.state.session
    for name, typed in targets.items():
        session = sessions.set_value(session, f"target.{name}", typed, 0.0)
    desk.state = replace(desk.state, session=session)
    return desk


def ledger_of(desk):
    return desk.state.session.ledger


def cursor_of(desk):
    of = desk.state.session.good
    return sight.cursor(desk.view.noise, whole_band(of), begin_hz(of))


def rows_of(desk):
    """(name, share %, share at the cursor %) of the ranking's rows in sight at 80 by 24, right of the plot."""
    found = []
    for row in desk.screen(80, 24).split("\n"):
        match = re.search(r"^[ ▸] ((?:\w+\.)*\w+) +(\d+\.\d) (?:[-+]\d+\.\d )?[█▏▎▍▌▋▊▉ ]* (\d+\.\d)$", row[41:])
        if match:
            found.append((match[1], float(match[2]), float(match[3])))
    return found


def plot_of(desk, columns=80, lines=24):
    """The rows of the plot and its axis, cut where the plot ends; the column where it begins."""
    found = desk.screen(columns, lines).split("\n")
    top = next(k for k, row in enumerate(found) if row.startswith("─")) + 1
    foot = next(k for k, row in enumerate(found) if row.lstrip().startswith("└"))
    wide = len(re.match(r" *└[─┴▴]+", found[foot])[0])
    return [row[:wide] for row in found[top:foot]], found[foot][:wide], found[foot].index("└") + 1


@pytest.mark.parametrize("name", NAMES)
def test_the_ranking_is_that_of_the_printed_page(name):
    of = ledger(parse(noisy((DEMOS / f"{name}.toml").read_text(encoding="utf-8")), "x.toml"))
    wanted = reported(document(of, {"overall", "parts"}))
    found = [one for one in makers(of, False) if one.share]
    assert [one.share for one in found] == pytest.approx([share for _, share in wanted], rel=1e-12)
    assert {(one.stage, one.part): one.share for one in found} == pytest.approx(
        {(part["stage"], part["part"]): share for part, share in wanted})
    lines = {line["name"]: line["noise_share"] for line in document(of, {"lines"})["lines"]}
    by_line = {one.name: one.share for one in makers(of, True)}
    assert by_line == pytest.approx({name: lines[name] for name in by_line})
    assert sum(by_line.values()) == pytest.approx(1.0) and sorted(by_line) == sorted(
        name for name, share in lines.items() if share is not None)


def test_the_figures_are_those_of_the_ledger():
    for of in (SIX, LISTENER, DIODE):
        desk = on_page(of)
        overall = document(ledger_of(desk), {"overall"})["overall"]
        for figure in FIGURES:
            value = figure.get(ledger_of(desk))
            assert value == overall[figure.name.removeprefix("overall.")], figure.name
            row = next(row for row in desk.screen().split("\n") if re.search(rf"[ ▸] {figure.word} +\S", row))
            digits = f"{value:.2f}" if figure.unit == "dB" else f"{value / 1000.0 ** floor(log10(value) / 3):.3g}"
            assert digits in row, (figure.name, row)


def test_shares_at_the_reference_and_at_the_cursor():
    desk = on_page(DIODE, *["down"] * 5, "home")
    of = ledger_of(desk)
    hz = cursor_of(desk)
    assert hz == whole_band(of)[0]
    found = of.noise.over([of.reference_hz, hz])
    each = {}
    for owner, (then, now) in zip(of.noise.sources.owners, found.share.tolist(), strict=True):
        at = ".".join(owner)
        each[at] = tuple(a + b for a, b in zip(each.get(at, (0.0, 0.0)), (then, now), strict=True))
    shown = rows_of(desk)
    assert len(shown) >= 5
    for name, at_reference, at_cursor in shown:
        assert (at_reference, at_cursor) == pytest.approx(tuple(100 * x for x in each[name]), abs=0.051), name
    assert any(abs(a - b) > 0.2 for _, a, b in shown), "the resistors' share is another one there"


def test_the_densities_at_the_cursor_are_those_of_the_engine():
    desk = on_page()
    for _ in range(9):
        desk.press(".")
    found = ledger_of(desk).noise.over([cursor_of(desk)])
    line = next(row for row in desk.screen(140, 45).split("\n") if row.startswith(" ▴"))
    assert f"{float(found.input[0]) * 1e9:.2f} nV/√Hz at the input" in line
    assert f"{float(found.output[0]) * 1e6:.2f} uV/√Hz at the output" in line
    assert f"{float(found.output[0]) * 1e6:.2f} uV/√Hz at the output" in desk.press("v").screen()
    assert "fA/√Hz at the input" in on_page(DIODE).screen(), "a current source has noise in amperes"


def test_the_curve_passes_the_density_at_the_reference():
    for size in ((80, 24), (140, 45)):
        for keys in ((), ("v",)):
            desk = on_page(SIX, *keys)
            of = ledger_of(desk)
            rows, foot, begin = plot_of(desk, *size)
            wide = len(foot) - begin
            (low, high), hz = whole_band(of), of.reference_hz
            column = begin + floor(log10(hz / low) / log10(high / low) * (2 * wide - 1) + 0.5) // 2
            spots = [(k, at) for k, row in enumerate(rows) for at, char in enumerate(row) if char == "●"]
            assert [at for _, at in spots] == [column]
            row = rows[spots[0][0]]
            assert 0x2800 < ord(row[column - 1]) < 0x2900 and 0x2800 < ord(row[column + 1]) < 0x2900


def test_the_density_of_a_resistor_is_nyquist_s():
    text = 'format = 1\n[source]\nkind = "voltage"\nresistance = "1k"\n[[stage]]\nname = "P"\nkind = "ladder"\n' \
           'arms = [{ shunt_c = "1n" }]\n'
    of = of_text(text).state.session.ledger
    found = curves.over(of, 10.0, 1e8, 60)
    np.testing.assert_allclose(found.input, sqrt(4 * 1.380649e-23 * 298.15 * 1e3), rtol=1e-9)
    text = of_text(text).screen()
    assert "4.06 nV/√Hz" in text and re.search(r"source.resistance +100.0 █+ +100.0", text)


def test_the_chosen_row_s_own_curve_and_its_sum_of_squares():
    desk = on_page(SIX, *["down"] * 6)
    of = ledger_of(desk)
    low, high = whole_band(of)
    whole = curves.over(of, low, high, 80)
    parts = [curves.own(whole, one.places, False) for one in makers(of, False)]
    np.testing.assert_allclose(np.sqrt(sum(part**2 for part in parts)), whole.input, rtol=1e-9)
    assert names_of(desk.state) == ("Q1.rx.noise_share",)
    assert any("Q1.rx" in row for row in plot_of(desk)[0]), "its name is at the end of its curve"
    assert any("source" in row for row in plot_of(on_page(SIX))[0]), "of a figure it is that of the first"


def test_rows_have_workings_and_enter_goes_to_their_keys():
    desk = on_page(SIX)
    for figure, at in zip(FIGURES, ("target.noise", "source.resistance", "target.noise_to", "target.noise_to",
                                    "source.smallest"), strict=True):
        assert names_of(desk.state) == (figure.name,)
        assert desk.again().press("=").overlay.title == f"working of {figure.name}"
        assert desk.again().press("enter").key == at
        desk.press("down")
    assert desk.again().press("=").overlay.title == "working of source.resistance.noise_share"
    assert desk.again().press("enter").key == "source.resistance"
    assert desk.press("down").again().press("enter").key == "Q1.device", "rx is the card's"
    assert desk.press("down", "down").again().press("enter").key == "Q1.rc"
    assert "focus" in [span.style for line in screen(desk.state, 80, 24) for span in line]
    assert styled(screen(desk.state, 80, 24), "focus") == ["3.6"]


@pytest.mark.parametrize("name", NAMES)
def test_every_row_of_every_chain_leads_somewhere(name):
    session = opened(name)
    state = State(session, View(page="noise", focus="page"))
    known = {row.path for sheet in sessions.sheets_of(session) for row in sessions.keys_of(session, sheet)}
    rows = makers(session.ledger, False)
    assert len(rows) > 5
    for one in rows:
        path = path_of(state, one)
        assert path in known, one.name
        assert path.startswith(f"{one.stage}.")
        assert path == f"{one.stage}.upper" or not one.part.endswith("_upper"), "a cascode's upper device has a card"
        assert path == one.name or path.rpartition(".")[2] in ("device", "upper", "nf") or ".arms." in path, one.name
    for one in makers(session.ledger, True):
        assert path_of(state, one) == one.stage


def test_ranked_line_by_line_and_back():
    desk = on_page(SIX, "s")
    assert "line by line" in desk.view.message
    names = [name for name, _, _ in rows_of(desk)]
    assert names[:3] == ["Q1", "source", "Q2"]
    desk.press(*["down"] * 5)
    assert names_of(desk.state) == ("Q1.noise_share",)
    assert desk.again().press("=").overlay.title == "working of Q1.noise_share"
    assert desk.again().press("enter").line == "Q1"
    desk.press("down", "down", "down", "s")
    assert desk.view.row == len(FIGURES) and names_of(desk.state) == ("source.resistance.noise_share",)


def test_all_rows_can_be_reached():
    desk = on_page(SIX)
    seen = set()
    for _ in range(len(FIGURES) + len(makers(ledger_of(desk), False)) + 3):
        marked = [row for row in desk.screen().split("\n")[5:17] if "▸" in row]
        assert len(marked) == 1, "the chosen row is in sight"
        seen.add(names_of(desk.state)[0])
        desk.press("down")
    assert len(seen) == len(FIGURES) + len(makers(ledger_of(desk), False))


def test_the_target_is_a_level_and_judged():
    short = with_targets(on_page(), noise="1.2n").screen()
    assert re.search(r"density +1\.38 nV/√Hz +short", short)
    assert "≤1.2n┤" in with_targets(on_page(), noise="1.2n").screen(140, 45)
    met = with_targets(on_page(), noise="1.5n").screen()
    assert re.search(r"density +1\.38 nV/√Hz +met", met)
    assert "≤" not in with_targets(on_page(), noise="1m").screen(), "a limit that is far off is out of sight"
    assert "≤" not in with_targets(on_page(SIX, "v"), noise="1.2n").screen(), "it is one of the input"


def test_the_noise_band_s_ends_are_upright_and_told():
    desk = with_targets(on_page(), noise_from="5k", noise_to="5M")
    assert "total from 5.00 kHz to 5.00 MHz" in desk.screen()
    rows, foot, begin = plot_of(desk)
    low, high = whole_band(ledger_of(desk))
    wide = len(foot) - begin
    wanted = {begin + floor(log10(hz / low) / log10(high / low) * (2 * wide - 1) + 0.5) // 2 for hz in (5e3, 5e6)}
    assert {at for row in rows for at, char in enumerate(row) if char == "┊"} == wanted
    assert "total over all frequencies" in on_page().screen()
    assert "total from 100 mHz upward" in on_page(DIODE).screen()
    margin = FIGURES[-1].get(ledger_of(desk))
    assert f"the smallest signal, 2.00 uV, lies {-margin:.2f} dB below it" in desk.screen(140, 45)


def test_a_total_without_a_bound_says_why():
    desk = with_targets(on_page(DIODE), noise_from="0")
    assert "no total: the noise grows without bound towards 0 Hz: state a noise_from above 0" in " ".join(
        desk.screen().split())
    assert "fA/√Hz" in desk.screen()


def test_the_pinned_density_lies_beside_todays():
    desk = on_page(LISTENER, "p", "tab").go("Q1.re_bypassed").press(*["-"] * 6, "tab")
    then, now = desk.state.session.baseline.noise, ledger_of(desk).noise
    text = desk.screen()
    assert any("b" in row for row in plot_of(desk)[0])
    row = next(row for row in text.split("\n") if "density" in row)
    assert f" {(now.density - then.density) * 1e12:+.0f}"[:4] + "0p" in row, "two digits"
    assert f"{now.figure_db - then.figure_db:+.2f}" in text
    pinned = float(then.over([cursor_of(desk)]).input[0])
    assert f"pinned {pinned * 1e9:.2f} nV/√Hz" in text
    change = 100 * (now.shares["Q1", "ib"] - then.shares["Q1", "ib"])
    assert f"{change:+.1f}" in next(row for row in text.split("\n") if " Q1.ib " in row)
    assert "pinned " not in on_page(LISTENER, "p").screen().partition("\n")[2]


def test_keys_of_the_cursor_and_of_the_window():
    desk = on_page()
    start = cursor_of(desk)
    assert cursor_of(desk.press(".", ".")) > start > cursor_of(desk.press(",", ",", ","))
    desk.press("z", "z")
    low = desk.view.noise.low_hz
    assert desk.press("]").view.noise.low_hz > low
    assert desk.press("[").view.noise.low_hz == pytest.approx(low)
    assert desk.view.plot == View().plot, "the response keeps its own window"
    assert desk.press("home").view.noise.low_hz == pytest.approx(whole_band(ledger_of(desk))[0])
    desk.press("escape")
    assert desk.view.noise.low_hz is None and desk.view.page == "noise"
    assert desk.press("escape").view.page == "ledger"
    assert "as near as it goes" in on_page(SIX, *"z" * 9).view.message
    assert "as far as it goes" in on_page(SIX, *"Z" * 12).view.message


def test_a_move_of_the_cursor_solves_one_frequency():
    desk = on_page()
    desk.screen()
    before = curves.over.cache_info().misses, curves.here.cache_info().misses
    desk.press(".").screen()
    assert (curves.over.cache_info().misses, curves.here.cache_info().misses) == (before[0], before[1] + 1)
    desk.press("down", "down", "s").screen()
    assert curves.over.cache_info().misses == before[0], "a row asks for no other curve"


def test_an_unstable_chain_says_why_it_has_no_noise():
    desk = of_text(CASES["unstable, an op-amp that drives a capacitance"])
    assert "No noise is told: the chain is unstable." in desk.screen()
    for key in (".", "enter", "z", "="):
        assert desk.again().press(key).view.bad
    assert pages.PAGES["noise"].rows(desk.state) == 0


def test_what_cannot_be_told_leads_to_what_has_to_be_stated():
    desk = of_text(BIPOLAR.format(stage="rc = 1000\ncouple = 1"))
    assert ledger_of(desk).solution.gain and "No noise is told: the current of Q is not known" in desk.screen()
    assert "Enter to its stage" in desk.screen()
    assert desk.press("enter").key == "Q.ic" and desk.view.focus == "sheet"


def test_a_chain_without_noise_says_so():
    text = 'format = 1\n[source]\nkind = "voltage"\nresistance = 0\n[[stage]]\nname = "B"\nkind = "block"\n' \
           'gain = 10\nrout = "1k"\ncout = "1n"\n'
    assert "nothing in the chain makes noise" in of_text(text).screen()


def test_a_file_without_figures_refuses_the_keys_with_a_reason():
    desk = of_text("format = 1\n")
    for key in (".", "z", "]", "home", "enter"):
        assert "there is no noise to look at" in desk.again().press(key).view.message, key


def test_figures_of_before_a_fault_can_still_be_looked_at():
    desk = on_page(LISTENER)
    desk.state = replace(desk.state, session=sessions.set_text(desk.state.session, "format = 2\n", 0.0))
    before = cursor_of(desk)
    assert cursor_of(desk.press(".")) > before
    assert "figures of before the fault" in desk.screen() and "density" in desk.screen()
    assert desk.press(*["down"] * 9, "enter").screen()


def test_words_of_the_page_in_the_help():
    text = "\n".join(on_page(SIX, "?").overlay.text)
    assert text.index("Words of the noise page") < text.index("Words of the ledger page")


def test_ascii_alone():
    for keys in ((), ("v", "s")):
        text = on_page(SIX, *keys, plain=True).screen()
        assert text.isascii() and "*" in text and "V/rtHz" in text


@pytest.mark.parametrize("seed", range(4))
def test_any_user_of_any_chain_gets_a_whole_screen(seed):
    rng = random.Random(5000 + seed)
    for number in range(10):
        session = random_session(rng, 100 * seed + number)
        view = replace(random_view(rng, session), page="noise", noise=random_plot(rng))
        state = State(session, view, plain=rng.random() < 0.3)
        columns, lines = random_size(rng)
        wrong = faults(state, columns, lines, screen(state, columns, lines))
        assert not wrong, (seed, number, columns, lines, view, wrong)


@pytest.mark.parametrize("name", ["photodiode-front", "six-stage"])
def test_every_size_is_filled_to_the_cell(name):
    state = State(opened(name), View(page="noise", focus="page", row=9))
    for columns, lines in [(n, 24) for n in range(60, 150, 7)] + [(80, n) for n in range(16, 60, 3)]:
        assert not faults(state, columns, lines, screen(state, columns, lines)), (columns, lines)


def test_a_step_is_within_6_kB_and_a_move_of_the_cursor_within_3(tmp_path):
    """Budgets on the wire at 80x24; they do not depend on the machine. Every repaint leaves the screen as drawn."""
    path = copied(tmp_path, SIX)
    desk = Desk(path)
    keys = ("f", *"Q3.rc", "enter", "tab", "5")
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press(*keys)
        terminal.shows(desk.press(*keys).screen())
        for key, most in (("+", 6000), (".", 3000), ("down", 3000), ("z", 6000), (".", 3000)):
            before = len(terminal.log)
            terminal.press(key)
            terminal.shows(desk.press(key).screen())
            assert 0 < len(terminal.log) - before <= most, key
