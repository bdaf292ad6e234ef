"""Names of figures: whole, begun, wrong, and of what this chain does not have."""

import pytest

from polebook.book.build import ledger
from polebook.book.working import names, working
from polebook.chain.read import parse
from polebook.problem import ProblemsFound
from tests.working.chains import every, known

LISTENER = "wire-break-listener"


def problem(name, chain=LISTENER):
    with pytest.raises(ProblemsFound) as found:
        working(known(chain), name)
    (only,) = found.value.problems
    assert only.what and only.why and only.fix
    return only


@pytest.mark.parametrize(
    ("begun", "whole"),
    [
        ("overall.upper", "overall.upper_edge_hz"),
        ("overall.gain", "overall.gain"),
        ("Q1.gm.v", "Q1.gm.value"),
        ("Q1.cmu.k", "Q1.cmu.k"),
        ("Q1.cmu.at_in", "Q1.cmu.at_input"),
        ("bias.Q1.cur", "bias.Q1.current_a"),
        ("Q2.c_comp.owns_u", "Q2.c_comp.owns_upper"),
        ("Q1.rc.leverage.u", "Q1.rc.leverage.upper_edge"),
        ("target.upper.mar", "target.upper.margin"),
        ("account.upper.lo", "account.upper.lost_db"),
        ("poles.1.h", "poles.1.hz"),
        ("  n1.pole_hz ", "n1.pole_hz"),
        ("device.VF.beta.leverage.g", "device.VF.beta.leverage.gain"),
    ],
)
def test_a_unique_beginning_will_do(begun, whole):
    assert working(known(LISTENER), begun) == every(LISTENER)[whole]


def test_an_inner_node_and_an_upper_device():
    assert working(known("six-stage"), "Q4.mid.pole").figure == "Q4.mid.pole_hz"
    assert working(known("six-stage"), "bias.Q4_upper.control").figure == "bias.Q4_upper.control_v"


def test_a_beginning_of_several_lists_them():
    told = problem("Q1.cmu.at")
    assert told.what == '"Q1.cmu.at" is the beginning of 2 figures'
    assert told.why == "they are Q1.cmu.at_input and Q1.cmu.at_output"
    assert "more" in problem("Q1.").why


@pytest.mark.parametrize(
    ("wrong", "near"),
    [
        ("Q1.gian", "Q1.gain"),
        ("n1.pole_khz", "n1.pole_hz"),
        ("overall.uper_edge", "overall.upper_edge_hz"),
        ("q1.GAIN", "Q1.gain"),
        ("bias.Q1.curent_a", "bias.Q1.current_a"),
        ("Q9.pole_hz", "pole_hz"),
    ],
)
def test_a_wrong_name_lists_the_near_ones(wrong, near):
    told = problem(wrong)
    assert told.what == f'there is no figure "{wrong}"'
    assert near in told.fix


def test_a_wrong_key_of_a_known_owner_lists_its_keys():
    assert problem("n0.colour").why.startswith("the figures of n0 are ohm, farad, pole_hz")


@pytest.mark.parametrize("nothing", ["", "  ", ".", "nothing like it at all", "\x1b[31m"])
def test_what_is_no_name_at_all(nothing):
    assert problem(nothing).fix


def test_what_only_many_chains_can_tell_names_who_builds_them():
    told = of(BLOCK.format(more="").replace('noise = "5n"', 'yield = "95 %"'), "target.yield.got").why
    assert told == "run polebook spread"


def test_names_are_unique_and_the_same_as_the_workings():
    found = names(known("six-stage"))
    assert len(found) == len(set(found)) == len(every("six-stage"))


def of(text, name):
    return working(ledger(parse(text, "chain.toml")), name)


BLOCK = """format = 1
[source]
kind = "voltage"
resistance = "1k"
[[stage]]
name = "B-1"
kind = "block"
gain = 4
rin = "10k"
rout = "50"
poles = ["1M"]
clip = "2"
{more}
[[stage]]
name = "B2"
kind = "block"
gain = -2
left_out = true
[load]
resistance = "1k"
[target]
noise = "5n"
lower = "1k"
"""


@pytest.mark.parametrize(
    ("name", "says"),
    [
        ("overall.lower_edge", "the band has no lower edge"),
        ("overall.sctc", "no part makes a lower corner"),
        ("source.input", "a source has no input"),
        ("B2.open_gain", "B2 is left out"),
        ("B2.owns_upper", "B2 is left out"),
        ("B-1.k", "nothing bridges B-1"),
        ("B-1.transfer", "does not hold its input node"),
        ("B-1.pole1.ohm", "storage"),
        ("B-1.pole1.lost_upper", "between the stages"),
        ("n0.pole_hz", "no capacitance acts at the node"),
        ("n0.room", "the node has no pole"),
        ("n0.lost_lower", ""),
        ("B-1.rin.tau_s", "only a capacitance"),
        ("B-1.rin.leverage.lower", "the band has no lower edge"),
        ("target.lower.margin", "the band has no lower edge"),
        ("n0.largest_v", "source.largest is not stated"),
        ("n1.headroom_db", "source.largest is not stated"),
        ("n0.clip_v", "nothing that amplifies drives the node"),
        ("overall.supply_current", "the file has no supply"),
        ("overall.full_power", "source.largest is not stated"),
        ("overall.noise_margin", "source.smallest is not stated"),
    ],
)
def test_why_a_figure_is_null(name, says):
    found = of(BLOCK.format(more=""), name)
    if not says:  # the account is drawn up at the target, edge or none
        assert found.value == pytest.approx(0.0, abs=1e-9)
        return
    assert found.value is None
    assert says in found.why


def test_a_name_with_a_hyphen_makes_sound_symbols():
    found = of(BLOCK.format(more=""), "overall.gain")
    assert [number.symbol for number in found.numbers][:2] == ["A_source", "A_B_1"]
    assert found.steps[-1].value == pytest.approx(found.value)


def test_names_that_differ_in_a_hyphen_alone_stay_apart():
    twin = '[[stage]]\nname = "B_1"\nkind = "block"\ngain = 3\nrin = "5k"\n'
    found = of(BLOCK.format(more=twin), "overall.gain")
    symbols = [number.symbol for number in found.numbers]
    assert len(set(symbols)) == len(symbols) == 5
    assert found.steps[-1].value == pytest.approx(found.value)


def test_an_unstable_chain_says_so_for_what_rests_on_an_edge():
    for name in ("overall.upper_edge_hz", "overall.peaking_db", "account.upper.lost_db", "n0.lost_upper_db"):
        assert "unstable" in working(known("oscillating"), name).why, name
    assert working(known("oscillating"), "overall.unstable").value is True


def test_no_clean_midband_says_so():
    assert "no clean midband" in working(known("narrow-band"), "overall.upper_edge_hz").why


def test_a_held_node_says_where_its_loss_went():
    assert "holds the node" in working(known("photodiode-front"), "n0.lost_upper_db").why
    assert working(known("photodiode-front"), "n1.lost_upper_db").note == (
        "n0 is held by the stage behind it: what is lost there is booked here.")
