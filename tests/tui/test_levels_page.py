"""Page 6: the d.c. plan and the level diagram, every figure that can be focused, and the keys of the page."""

import re
from dataclasses import replace
from math import log10

import pytest

from polebook.book.build import document
from polebook.book.working import working
from polebook.report import figures as show
from polebook.session import state as sessions
from polebook.tui.control.figures import focused, names_of
from polebook.tui.draw.screen import screen
from polebook.tui.lines import plain_text
from polebook.tui.view import State, View
from tests.book.verdict_cases import CASES
from tests.golden.screens import opened
from tests.helpers import DEMOS
from tests.tui.desk import CHAINS, LISTENER, SIX, Desk
from tests.tui.drawn import faults

NAMES = sorted(path.stem for path in DEMOS.glob("*.toml"))
ODD = """
format = 1
[supply]
positive = "24"
[source]
kind = "voltage"
resistance = "600"
largest = "10m"
[[stage]]
name = "Q1"
kind = "common-emitter"
device = "N"
couple = "1u"
rb1 = "100k"
rb2 = "22k"
rc = "2k2"
re = "470"
ic = "3m"
[[stage]]
name = "M1"
kind = "common-source"
device = "M"
couple = "1u"
rg = "1M"
rd = "1k"
[[stage]]
name = "U1"
kind = "noninverting"
device = "U"
couple = "1u"
r_bias = "100k"
rf = "10k"
rg = "1k"
[load]
resistance = "600"
[target]
swing = "2"
current = "5m"
[device.N]
family = "bjt"
polarity = "npn"
beta = 100
ft = "100M"
ft_ic = "1m"
cob = "3p"
cob_v = 5
p_max = "10m"
theta = 5000
[device.M]
family = "mosfet"
polarity = "n"
gm = "5m"
cgs = "10p"
cgd = "1p"
ro = "20k"
[device.U]
family = "opamp"
gbw = "10M"
slew = "5M"
"""
"""A stated current beside another that its network gives, a card past its rating, a bias that nothing settles."""


def on(session, **view):
    return State(session, replace(View(page="levels", focus="page"), **view))


def shown(state, columns=80, rows=24):
    return plain_text(screen(state, columns, rows))


def page_of(text):
    """The rows between the strip and the sheet."""
    lines = text.split("\n")
    first = next(k for k, line in enumerate(lines) if line.startswith(("─", "--")))
    last = next(k for k, line in enumerate(lines) if k > first and line.startswith(("─", "--")))
    return lines[first + 1:last]


def row_of(text, name):
    return next(line for line in page_of(text) if line[1:].split(" ")[0] == name)


def odd(**view):
    return on(sessions.new_session("odd.toml", ODD), **view)


@pytest.mark.parametrize("bank", ["plan", "levels"])
@pytest.mark.parametrize("name", NAMES)
def test_every_figure_that_can_be_focused_is_in_sight(name, bank):
    session = opened(name)
    for line in range(len(sessions.sheets_of(session))):
        for number, figure in enumerate(names_of(on(session, bank=bank, line=line))):
            for size in ((80, 24), (140, 45))[:1 + (line == 1)]:
                state = on(session, bank=bank, line=line, figure=number)
                lit = [span for row in screen(state, *size) for span in row if span.style == "focus"]
                assert len(lit) == 1 and lit[0].text.strip(), (line, figure, size)


@pytest.mark.parametrize("bank", ["plan", "levels"])
@pytest.mark.parametrize("name", ["six-stage", "photodiode-front", "shellac-desk"])
def test_every_figure_that_can_be_focused_has_a_working(name, bank):
    session = opened(name)
    lines = range(len(sessions.sheets_of(session)))
    for figure in {one for line in lines for one in names_of(on(session, bank=bank, line=line))}:
        assert working(session.ledger, figure).document()["figure"] == figure


def test_the_plan_tells_what_a_meter_shows_at_every_terminal():
    session = opened("six-stage")
    text, bias = shown(on(session)), document(session.ledger)["bias"]
    assert "base emitter collector" in text
    assert len(bias) == 7, "the cascode has two devices"
    for row in bias:
        found = row_of(text, row["stage"])
        wanted = [show.eng(row["current_a"]), "solved", *(show.eng(row[key]) for key in (
            "across_v", "control_v", "lower_v", "output_v", "dissipation_w"))]
        used = round(100 * row["dissipation_w"] / session.ledger.chain.get(f"device.{row['device']}.p_max"))
        assert found.split()[1:9] == [*wanted, f"{used}"], found
    volts, amperes = 15.0, document(session.ledger)["rails"][0]["current_a"]
    assert f"positive 15.0 V gives {show.eng(amperes, 'A')}" in text
    assert f"power {show.eng(volts * amperes, 'W')}" in text


def test_what_a_line_draws_is_told_rail_by_rail():
    session = opened("six-stage")
    text = " ".join(" ".join(page_of(shown(on(session, line=5)))).split())
    assert "Q5: from positive rb1 143 uA, re+re_bypassed 1.49 mA into ground rb2 157 uA, rc 1.47 mA" in text
    assert "load draws nothing at d.c." in shown(on(session, line=7))
    left_out = sessions.toggle_left_out(session, "Q2", 0.0)
    assert "Q2 is left out" in shown(on(left_out, line=2))


def test_a_stated_current_stands_beside_what_the_network_gives_and_a_rating_is_told_as_past():
    text = shown(odd())
    row = row_of(text, "Q1")
    assert "3.00m given" in row and row.rstrip().endswith("!")
    bias = document(odd().session.ledger)["bias"][0]
    heat, most = bias["dissipation_w"], 10e-3
    assert f"{100 * heat / most:.0f} % !" in row
    assert f"{100 * heat / most:.0f} % of p_max 10.0 mW past it" in text
    assert f"{5000 * heat:.0f} K over the air" in text
    solved = sessions.set_value(odd().session, "Q1.ic", "5.6m", 0.0)
    assert "given    5.61m" in row and not row_of(shown(on(solved)), "M1").rstrip().endswith("!")


def test_a_stated_voltage_far_off_what_the_rails_leave_is_marked():
    session = sessions.set_value(odd().session, "Q1.vce", "8", 0.0)
    text, point = shown(on(session)), session.ledger.solution.circuit.points["Q1"]
    assert f"Q1: 8.00 V across it is stated, its rails leave {show.eng(point.output_v - point.lower_v, 'V')}" in text
    assert row_of(text, "Q1").rstrip().endswith("!") and "8.00" in row_of(text, "Q1")
    assert "its rails leave" not in shown(odd())


def test_a_bias_that_nothing_settles_says_why_and_what_would():
    text = shown(odd(line=2))
    assert re.search(r"▸M1 +– +– +0 +0 +– +–", text)
    assert "the current of M1 is not known: give id or gm_id and vgs_th on card M" in text
    assert "what U1 itself draws is not known: give iq on card U" in shown(odd(line=3), 120, 40)
    assert "iq of U1 is not stated, and the bias does not tell what M1 draws" in text
    assert "current – for 5.00 mA not judged" in text


def test_terminals_have_the_names_that_their_family_has():
    assert "grid cathode  anode" in shown(on(opened("shellac-desk")))
    assert "input output heat" in shown(on(opened("photodiode-front")))
    assert "control  lower output" in shown(odd())


def test_six_stages_stand_whole_on_80_by_24():
    session = opened("six-stage")
    plan, levels = (page_of(shown(on(session, bank=bank))) for bank in ("plan", "levels"))
    assert [line[1:].split(" ")[0] for line in plan[1:8]] == ["Q1", "Q2", "Q3", "Q4", "Q4_upper", "Q5", "Q6"]
    assert [line[1:].split(" ")[0] for line in levels[1:9]] == [*(f"n{k}" for k in range(7)), "load"]
    text = "\n".join(levels)
    for words in ("Q6 clips first, by cut-off", "largest 500 uV too much", "dynamic range", "noise margin",
                  "full power to"):
        assert words in text


def test_the_levels_are_those_of_the_ledger():
    session = opened("wire-break-listener")
    found, overall = document(session.ledger)["levels"], document(session.ledger)["overall"]
    for line, row in enumerate(found):
        text = shown(on(session, bank="levels", line=line))
        told = row_of(text, row["node"])
        for key, form in (("clip_v", show.eng), ("headroom_db", show.decibel)):
            assert form(row[key]) in told.split(), (row["node"], key)
        assert f"noise {show.eng(row['noise_v'], 'V')} rms" in text
        assert f"signal {show.eng(row['smallest_v'], 'V')} to {show.eng(row['largest_v'], 'V')}" in text
    assert f"Q3 clips first, by cut-off, at {show.eng(overall['largest_source'], 'V')} of source" in text
    assert f"dynamic range {overall['dynamic_range_db']:.2f} dB" in text
    assert f"noise margin {overall['noise_margin_db']:.2f} dB" in text
    assert f"full power to {show.eng(overall['full_power_hz'], 'Hz')}" in text
    first = [line for line in page_of(text) if line.rstrip().endswith("◂")]
    assert len(first) == 1 and first[0].startswith(" n3")


@pytest.mark.parametrize("plain", [False, True])
def test_the_bars_stand_on_one_scale_of_decibels(plain):
    session = opened("wire-break-listener")
    lines = page_of(shown(replace(on(session, bank="levels"), plain=plain), 140, 45))
    head = next(k for k, line in enumerate(lines) if line.startswith(" node after"))
    begin = lines[head].index("dB") + 3
    labels = {int(one[0]): begin + one.start() for one in re.finditer(r"-?\d+", lines[head][begin:])}
    zero, low = labels[0], min(labels)
    per_db = (zero - labels[low]) / -low
    noise, signal, clip = "·█|" if not plain else ".#|"
    for row in document(session.ledger)["levels"]:
        line = next(one for one in lines[head:] if one[1:].startswith(f"{row['node']} "))
        bar = line[begin:lines[head].index("clip V")]
        for value, place in ((2**0.5 * row["noise_v"], bar.rindex(noise)), (row["smallest_v"], bar.index(signal)),
                             (row["largest_v"], bar.rindex(signal)), (row["clip_v"], bar.find(clip))):
            if value and place >= 0 and not (value == row["largest_v"] and row["clip_v"] is not None
                                             and row["headroom_db"] < 3):
                assert begin + place == pytest.approx(zero + 20 * log10(value) * per_db, abs=1.6), (row["node"], value)


def test_what_goes_past_the_clip_level_stands_behind_it_and_in_another_style():
    lines = screen(on(opened("six-stage"), bank="levels"), 80, 24)
    line = next(line for line in lines if any(span.text.startswith(" n6") for span in line))
    text = "".join(span.text for span in line)
    assert "█|█" in text and any(span.style == "bad" and span.text.strip() == "█" for span in line)


def test_wide_terminals_have_both_banks_whatever_b_says():
    session = opened("six-stage")
    for bank in ("plan", "levels"):
        text = shown(on(session, bank=bank), 140, 45)
        assert "emitter collector" in text and "clip V headroom" in text
        assert "Q6 clips first" in text and "power 216 mW" in text
        assert len(re.findall(r"(?m)^[ ▸](?:Q\d|n\d)\S* ", text)) >= 7 + 7


def test_b_goes_from_bank_to_bank_whatever_has_the_focus():
    desk = Desk(SIX).press("tab", "6", ".", ".")
    assert focused(desk.state) == "bias.Q1.control_v" and desk.view.upper
    desk.press("b")
    assert focused(desk.state) == "n1.noise_v" and "headroom" in desk.view.message
    desk.press("tab", "b")
    assert desk.view.bank == "plan" and desk.view.upper and desk.view.focus == "sheet"


@pytest.mark.parametrize("figure, key", [
    ("bias.Q1.current_a", "Q1.re"), ("bias.Q1.output_v", "Q1.rc"), ("bias.Q1.control_v", "Q1.rb1"),
    ("bias.Q1.across_v", "Q1.rc"), ("rail.positive.current_a", "supply.positive"),
    ("n1.clip_v", "Q1.re"), ("n1.largest_v", "source.largest"), ("n1.smallest_v", "source.smallest"),
    ("overall.largest_source", "Q3.re"), ("overall.noise_margin_db", "source.smallest"),
    ("overall.full_power_hz", "Q3.re"),
])
def test_enter_goes_to_the_key_that_sets_the_figure(figure, key):
    desk = Desk(LISTENER).press("tab", "6")
    if not figure.startswith(("bias", "rail")):
        desk.press("b")
    desk.press(*["."] * names_of(desk.state).index(figure), "enter")
    assert desk.key == key and desk.view.focus == "sheet"


def test_enter_finds_cards_and_blocks_too():
    desk = Desk(CHAINS / "photodiode-front.toml").press("tab", "6", "b", "right", "right")
    desk.press(*["."] * names_of(desk.state).index("n3.clip_v"), "enter")
    assert desk.key == "supply.positive", "the positive rail bounds it"
    desk = Desk(CHAINS / "photodiode-front.toml").press("tab", "6", "b")
    desk.press(*["."] * names_of(desk.state).index("overall.full_power_hz"), "enter")
    assert re.fullmatch(r"device\.\w+\.slew", desk.key)
    desk = Desk(CHAINS / "rain-radar.toml").press("tab", "6", "b")
    desk.press(*["."] * names_of(desk.state).index("n1.clip_v"), "enter")
    assert desk.key == "B1.clip"


def test_what_moved_against_the_baseline_stands_beside_its_figure():
    desk = Desk(SIX).press("p").go("Q5.re").type("470").press("enter", "tab", "6")
    before, after = (document(one)["bias"][5] for one in (desk.state.session.baseline, desk.state.session.ledger))
    by = after["output_v"] - before["output_v"]
    assert f"{show.eng(after['output_v'])} {show.signed(by, 'V')}" in row_of(desk.screen(), "Q5")
    assert "+" not in row_of(desk.screen(), "Q1").replace("+ ", "")
    text = desk.press("b").screen()
    old, new = (document(one) for one in (desk.state.session.baseline, desk.state.session.ledger))
    room = [one["levels"][6]["headroom_db"] for one in (old, new)]
    assert f"{room[1]:.2f} {room[1] - room[0]:+.2f}" in row_of(text, "n6")
    source = [one["overall"]["largest_source"] for one in (old, new)]
    assert f"at {show.eng(source[1], 'V')} {show.signed(source[1] - source[0], 'V')} of source" in text
    assert all(f" n{k} " in text or f"▸n{k} " in text for k in range(7)), "no node gives way to what moved"


def test_targets_for_swing_and_current_are_judged_here():
    session = sessions.set_value(opened("six-stage"), "target.swing", "2", 0.0)
    session = sessions.set_value(session, "target.current", "20m", 1.0)
    levels, plan = (shown(on(session, bank=bank)) for bank in ("levels", "plan"))
    got = next(target.got for target in session.ledger.targets if target.name == "swing")
    assert f"swing {show.eng(got, 'V')} for 2.00 V short" in levels
    assert "current 14.4 mA for 20.0 mA met" in plan


def test_an_unstable_chain_has_a_plan_and_no_levels():
    session = sessions.new_session("x.toml", CASES["unstable, an op-amp that drives a capacitance"])
    assert "the chain is unstable: it has no levels" in shown(on(session, bank="levels"))
    assert names_of(on(session, bank="levels")) == ()
    assert "stage" in shown(on(session))


def test_many_stages_keep_the_selected_one_in_sight():
    session = opened("wire-break-listener")
    for _ in range(16):
        session = sessions.copy_stage(session, "Q1", 0.0)
    names = sessions.sheets_of(session)
    for line in (1, 9, 16):
        for bank, own in (("plan", names[line]), ("levels", f"n{line}")):
            for size in ((80, 24), (140, 45), (60, 16)):
                assert f"▸{own} " in shown(on(session, bank=bank, line=line), *size)


def test_a_file_without_supply_and_signals_says_so():
    text = (DEMOS / "wire-break-listener.toml").read_text(encoding="utf-8")
    for key in ("largest", "smallest"):
        text = re.sub(rf"(?m)^{key} .*\n", "", text)
    session = sessions.new_session("x.toml", text)
    assert "signal – to –" in shown(on(session, bank="levels"))
    assert "largest" not in "\n".join(page_of(shown(on(session, bank="levels"))))
    block = "format = 1\n[source]\nkind = \"voltage\"\nresistance = 50\n[[stage]]\nname = \"B1\"\n" \
            "kind = \"block\"\ngain = -2\n[load]\nresistance = 50\n"
    bare = sessions.new_session("y.toml", block)
    assert "the file has no supply" in shown(on(bare))
    assert "no clip level is known" in shown(on(bare, bank="levels"))


@pytest.mark.parametrize("bank", ["plan", "levels"])
def test_ascii_alone_at_every_size(bank):
    for session in (opened("six-stage"), odd().session, opened("frost-line-sounder")):
        for columns, rows in ((60, 16), (72, 20), (80, 24), (100, 30), (120, 24), (140, 45), (200, 70)):
            state = replace(on(session, bank=bank, line=1), plain=True)
            lines = screen(state, columns, rows)
            assert not faults(state, columns, rows, lines) and plain_text(lines).isascii()
