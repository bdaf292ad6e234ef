"""What changed between two files, by meaning; and that all changes together make the later file of the earlier one."""

import math
import tomllib
from pathlib import Path

import pytest
import tomli_w

from polebook.book import build
from polebook.chain.read import parse
from polebook.record.changes import changes
from polebook.record.matched import longest_rising
from polebook.record.mixed import Mixer
from polebook.record.sides import side

CHAINS = Path(__file__).parent.parent.parent / "chains"
LISTENER, DESK, SIX, RADAR = ((CHAINS / f"{name}.toml").read_text(encoding="utf-8") for name in (
    "wire-break-listener", "shellac-desk", "six-stage", "rain-radar"))
FOLLOWER = '[[stage]]\nname = "QF"\nkind = "emitter-follower"\ndevice = "VF"\nre = "2k2"\n\n'
Q2, Q3, LOAD = '[[stage]]\nname        = "Q2"', '[[stage]]\nname        = "Q3"', "[load]"
LADDER = """format = 1
source = { kind = "voltage", resistance = "50" }
load = { resistance = "50" }
[[stage]]
name = "L1"
kind = "ladder"
free = ["arms.1.series_l"]
arms = [ { series_l = "10n" }, { shunt_c = "22p", shunt_r = "1" } ]
tolerance = { "arms.2.shunt_c" = "1 %" }
[[stage]]
name = "B1"
kind = "block"
gain = "20 dB"
inverting = true
poles = ["1M", "2M"]
[[bench]]
date = 2026-05-04
unit = "board 3"
at = "B1"
gain = "20 dB"
"""


def found(before, after):
    return changes(side(before, "a.toml"), side(after, "b.toml"))


def texts(before, after):
    return [change.text for change in found(before, after).listed]


def put(text, *pairs):
    for old, new in pairs:
        assert old in text, old
        text = text.replace(old, new)
    return text


CASES = [
    ([('"4p7"', '"2p2"')], ["c_comp of Q2: 4p7 to 2p2"]),
    ([('c_comp      = "4p7"', "")], ["c_comp of Q2 taken out: was 4p7"]),
    ([('stopper     = "47"', 'stopper     = "47"\nstray = 1e-12')], ["stray of Q3 put in: 1e-12"]),
    ([('positive = "12"', 'positive = "15"')], ["positive of supply: 12 to 15"]),
    ([('positive = "12"', 'positive = "12"\ntemperature = 40')], ["temperature of supply: 25 by default to 40"]),
    ([('resistance  = "600"     # sensor', 'resistance  = "50"     # sensor')], ["resistance of source: 600 to 50"]),
    ([('capacitance = "220p"', "")], ["capacitance of load taken out: was 220p"]),
    ([('upper   = "1M"', 'upper   = "1.2 MHz"\nnoise = "5n"')],
     ["upper of target: 1M to 1.2 MHz", "noise of target put in: 5n"]),
    ([("beta          = 180", "beta          = 200")], ["beta of card VF: 180 to 200"]),
    ([(LOAD, "[preferred]\nresistor = \"E96\"\n[tolerance]\nresistor = \"5 %\"\n[load]")],
     ["resistor of preferred: E24 by default to E96", "resistor of tolerance: 1 % by default to 5 %"]),
    ([('couple      = "3n3"', 'tolerance = { rc = "0.1 %" }\nfree = ["rc"]\ncouple      = "3n3"')],
     ["free of Q2 put in: rc", "tolerance.rc of Q2 put in: 0.1 %"]),
    ([("Sits directly", "It sits directly"), ('"Wire-break listener"', '"Listener"')],
     ["title: Wire-break listener to Listener", "note of Q3 changed"]),
    ([('re          = "47"', 're          = "47"\nleft_out = true')], ["Q2 left out"]),
    ([('name        = "Q3"', 'name        = "Q9"')], ["Q3 renamed to Q9"]),
    ([('name        = "Q3"', 'name        = "Q9"'), ('"1k2"', '"1k5"')], ["Q3 renamed to Q9", "re of Q9: 1k2 to 1k5"]),
    ([("[device.VF]", "[device.W]"), ('"VF"', '"W"')], ["card VF renamed to W"]),
    ([("[device.VF]", "[device.W]"), ('"VF"', '"W"'), ("= 180", "= 90")],
     ["card VF renamed to W", "beta of card W: 180 to 90"]),
    ([(Q2, FOLLOWER + Q2)], ["QF added after Q1: emitter-follower, device VF, re 2k2"]),
    ([("# a metre of screened cable", "# 1 m of cable")], []),
    ([('"2k2"\nre          = "33"', '"2.2 kΩ"\nre          = 33')], []),
]


@pytest.mark.parametrize(("edits", "told"), CASES, ids=[str(told)[:40] for _, told in CASES])
def test_one_edit_is_told_as_what_it_means(edits, told):
    assert texts(LISTENER, put(LISTENER, *edits)) == told


def test_back_again_a_stage_is_taken_in_and_one_is_removed():
    out = put(LISTENER, ('re          = "47"', 're          = "47"\nleft_out = true'), (Q2, FOLLOWER + Q2))
    assert texts(out, LISTENER) == ["Q2 taken in", "QF removed, was after Q1: emitter-follower, device VF, re 2k2"]


def test_comments_and_spelling_are_counted_apart():
    one = found(LISTENER, put(LISTENER, ("# a metre of screened cable", "# 1 m"),
                              ('ce          = "1u"\nstray', "ce=1e-6\nstray")))
    assert (one.listed, one.comments, one.spelled, one.laid_out) == ((), 1, 1, True)
    blanks = found(LISTENER, LISTENER.replace("\n\n", "\n"))
    assert (blanks.listed, blanks.comments, blanks.spelled, blanks.laid_out) == ((), 0, 0, True)
    assert not found(LISTENER, LISTENER).laid_out


def test_what_is_stated_and_was_the_default_moves_nothing():
    one = found(LISTENER, put(LISTENER, ("[load]", "[tolerance]\nresistor = \"1 %\"\n[load]"),
                              ('re          = "47"', 're = "47"\noutput_to = "positive"\nleft_out = false')))
    assert (one.listed, one.spelled) == ((), 2)


def moved(order):
    """The listener with its stages in another order, each standing by itself at d.c."""
    text = put(LISTENER, ('stopper     = "47"', 'stopper     = "47"\ncouple = "1u"\nrb1 = "22k"\nrb2 = "33k"'))
    first, *stages = text.split("[[stage]]")
    last, rest = stages[-1].split("[load]")
    tables = dict(zip(("Q1", "Q2", "Q3"), (*stages[:2], last), strict=True))
    return first + "".join(f"[[stage]]{tables[name]}" for name in order) + "[load]" + rest


@pytest.mark.parametrize(("order", "told"), [
    (("Q2", "Q1", "Q3"), "Q2 moved to the front, was after Q1"),
    (("Q3", "Q1", "Q2"), "Q3 moved to the front, was after Q2"),
    (("Q1", "Q3", "Q2"), "Q3 moved after Q1, was after Q2"),
    (("Q2", "Q3", "Q1"), "Q1 moved after Q3, was first"),
])
def test_a_stage_that_changed_places_is_moved_and_no_other_is(order, told):
    assert texts(moved(("Q1", "Q2", "Q3")), moved(order)) == [told]


def test_a_new_stage_alone_goes_by_the_neighbours_that_have_their_places():
    before = moved(("Q1", "Q2", "Q3"))
    one = found(before, put(moved(("Q3", "Q1", "Q2")), ('[[stage]]\nname        = "Q1"', FOLLOWER + '[[stage]]\n'
                                                        'name        = "Q1"')))
    orders = {change.path: [stage["name"] for stage in Mixer(one).content([change])["stage"]] for change in one.acting}
    assert orders == {"Q3": ["Q3", "Q1", "Q2"], "QF": ["QF", "Q1", "Q2", "Q3"]}


def test_stages_numbered_anew_are_renamed_and_not_taken_for_one_another():
    more = put(LISTENER, (Q2, FOLLOWER + Q2))
    anew = put(more, ('name        = "Q3"', 'name = "Q4"'), ('name        = "Q2"', 'name = "Q3"'),
               ('name = "QF"', 'name = "Q2"'))
    assert texts(more, anew) == ["QF renamed to Q2", "Q2 renamed to Q3", "Q3 renamed to Q4"]
    assert texts(LISTENER, anew) == ["Q2 added after Q1: emitter-follower, device VF, re 2k2", "Q2 renamed to Q3",
                                     "Q3 renamed to Q4"]


def test_another_kind_takes_its_keys_along_and_the_rest_is_told_apart():
    cascode = put(LISTENER, ('kind        = "common-emitter"\ndevice      = "VF"\ncouple      = "3n3"',
                             'kind = "cascode"\ndevice = "VF"\nvce = 3\ncouple = "4n7"'), ('c_comp      = "4p7"', ""))
    assert texts(LISTENER, cascode) == ["Q2: common-emitter becomes cascode, c_comp taken out: was 4p7",
                                        "vce of Q2 put in: 3", "couple of Q2: 3n3 to 4n7"]


def test_another_family_is_told_once_and_parts_go_by_its_names():
    valve = '\n[device.T]\nfamily = "triode"\nmu = 20\ngm = "2m"\n'
    triode = put(LISTENER, ('[[stage]]\nname        = "Q3"\nkind        = "emitter-follower"\ndevice      = "VF"',
                            '[[stage]]\nname = "Q3"\nkind = "cathode-follower"\ndevice = "T"'),
                 ('re          = "1k2"', 'rk          = "1k2"')) + valve
    assert texts(LISTENER, triode) == ["Q3: emitter-follower becomes cathode-follower, device: VF to T",
                                       "card T added: triode, mu 20, gm 2m"]


def test_a_ladder_part_by_part_or_as_a_whole_and_a_block_with_its_sign():
    assert texts(LADDER, put(LADDER, ('"22p"', '"33p"'))) == ["arms.2.shunt_c of L1: 22p to 33p"]
    assert texts(LADDER, put(LADDER, (', shunt_r = "1"', ""))) == [
        "arms of L1: (series_l 10n), (shunt_c 22p shunt_r 1) become (series_l 10n), (shunt_c 22p)"]
    assert texts(LADDER, put(LADDER, ('gain = "20 dB"\ninverting = true', "gain = -20"))) == [
        "gain of B1: 20 dB inverting to -20"]
    assert texts(LADDER, put(LADDER, ('gain = "20 dB"\ninverting = true', "gain = -10"))) == []
    assert texts(LADDER, put(LADDER, ('"2M"]', '"3M"]'), ("1 %", "2 %"))) == [
        "tolerance.arms.2.shunt_c of L1: 1 % to 2 %", "poles of B1: 1M, 2M to 1M, 3M"]


def test_benches():
    assert texts(LADDER, put(LADDER, ("board 3", "board 4"))) == ["bench 1 changed (board 4, 2026-05-04)"]
    assert texts(LADDER, LADDER + "[[bench]]\nupper = 1e6\n") == ["bench 2 added"]
    assert texts(LADDER, LADDER.partition("[[bench]]")[0]) == ["bench 1 removed (board 3, 2026-05-04)"]
    assert texts(LADDER, put(LADDER, ('"B1"', '"A1"'))) == ["B1 renamed to A1"]


def test_only_what_may_move_a_figure_acts():
    edits = [('peaking = "0.5 dB"', 'peaking = "1 dB"\nreference = "100k"'), ('name        = "Q3"', 'name = "Q9"'),
             ("Sits", "It sits"), ("beta          = 180", "beta = 200"), (LOAD, "[tolerance]\nbeta = \"10 %\"\n[load]")]
    one = found(LISTENER, put(LISTENER, *edits))
    assert [change.path for change in one.acting] == ["device.VF.beta", "target.reference"]
    assert len(one.listed) == 6


@pytest.mark.parametrize("numbers", [(), (0,), (3, 2, 1, 0), (0, 4, 1, 2, 3), (2, 0, 1, 5, 3, 4),
                                     (4, 0, 5, 1, 6, 2, 3)])
def test_the_longest_run_that_rises(numbers):
    kept = [numbers[at] for at in sorted(longest_rising(numbers))]
    subsets = ([number for at, number in enumerate(numbers) if mask >> at & 1] for mask in range(2 ** len(numbers)))
    most = max(len(one) for one in subsets if one == sorted(one))
    assert kept == sorted(kept) and len(kept) == most


def figures(chain):
    whole = build.document(build.ledger(chain), ("overall",))["overall"]
    return [whole[key] for key in ("gain", "lower_edge_hz", "upper_edge_hz", "noise_density", "supply_current_a")]


PAIRS = [(LISTENER, SIX), (SIX, LISTENER), (RADAR, DESK), (LISTENER, put(LISTENER, (Q2, FOLLOWER + Q2), ("1k2", "1k"))),
         (moved(("Q1", "Q2", "Q3")), moved(("Q3", "Q2", "Q1")))]


@pytest.mark.parametrize(("before", "after"), PAIRS, ids=range(len(PAIRS)))
def test_all_changes_make_the_later_file_of_the_earlier_and_none_leaves_it(before, after):
    one = found(before, after)
    for chosen, chain in (((), one.before.chain), (one.acting, one.after.chain)):
        pairs = zip(figures(Mixer(one).chain(chosen)), figures(chain), strict=True)
        assert all(a is b or math.isclose(a, b, rel_tol=1e-9) for a, b in pairs)


def test_a_new_card_comes_with_what_names_it():
    other = put(LISTENER.replace('"VF"', '"W"', 1),
                ("[device.VF]", '[device.W]\nfamily = "bjt"\npolarity = "npn"\nbeta = 90\n\n[device.VF]'))
    one = found(LISTENER, other)
    assert [change.text[:14] for change in one.acting] == ["device of Q1: "]
    mixed = parse(tomli_w.dumps(Mixer(one).content(one.acting)), "x")
    assert mixed.numbers["device.W.beta"] == 90 and mixed.stages[0].device == "W"
    assert tomllib.loads(LISTENER)["stage"][0]["device"] == "VF"
