"""Chain files read: what they say, its places, its defaults."""

from __future__ import annotations

import pytest

from polebook.chain.read import examine, load, parse
from polebook.problem import ProblemsFound, render
from polebook.quantity import DIMENSIONS
from polebook.quantity import parse as quantity
from polebook.stages.registry import KINDS
from tests.chain import good

EVERYTHING = good.everything()


def sound(text):
    chain, problems = examine(text, "chain.toml")
    assert chain is not None, "\n".join(render(problem, text) for problem in problems)
    return chain


def test_the_small_file_is_sound():
    chain = sound(good.small())
    assert [stage.name for stage in chain.stages] == ["Q1"]
    assert chain.numbers["Q1.rc"] == 2200.0
    assert chain.numbers["Q1.ic"] == 1e-3
    assert chain.numbers["source.resistance"] == 600.0
    assert chain.source_kind == "voltage"
    assert not chain.has_targets


def test_every_key_of_every_kind_is_read():
    chain = sound(EVERYTHING)
    assert {stage.kind for stage in chain.stages} == set(KINDS)
    assert {card.family for card in chain.cards.values()} == {"bjt", "mosfet", "jfet", "triode", "opamp"}
    for stage in chain.stages:
        family = chain.cards[stage.device].family if stage.device else ""
        for param in KINDS[stage.kind].keys(family).values():
            path = f"{stage.name}.{param.key}"
            if path in chain.given:
                assert (
                    chain.numbers[path] == quantity(DIMENSIONS[param.dimension].example, param.dimension)
                    or param.key == "allot"
                )
    given = {path.split(".")[-1] for path in chain.given if path.startswith("common-emitter-bjt.")}
    assert given >= {
        "ic",
        "vce",
        "rb1",
        "rb2",
        "rc",
        "re",
        "re_bypassed",
        "ce",
        "c_peak",
        "stopper",
        "rf",
        "c_rf",
        "c_comp",
        "r_comp",
        "l_peak",
        "couple",
        "stray",
        "c_load",
        "allot",
    }
    assert chain.title == "every key"
    assert chain.note == "free\ntext"
    assert chain.target_note == "some text"
    assert chain.has_targets


def test_every_number_that_the_file_states_has_its_place():
    chain = sound(EVERYTHING)
    lines = EVERYTHING.split("\n")
    assert chain.given
    for path in chain.given:
        place = chain.places[path]
        key = path.split(".")[-1]
        stated = lines[place.line - 1][place.column - 1 : place.column - 1 + place.width]
        assert stated, path
        if not key.isdigit() and ".arms." not in path:
            assert key in lines[place.line - 1].split("=")[0] or "tolerance" in path
    for name in ("supply", "source", "load", "target", "device.bjt", "block-own"):
        assert lines[chain.places[name].line - 1].startswith("[")


def test_words_and_absent_tables_have_places_too():
    chain = sound(good.small())
    assert chain.places["Q1.device"].line == 8
    assert chain.places["Q1.kind"].line == 7
    assert chain.places["device.D.family"].line == 12
    assert chain.places["load"].line == 0
    assert chain.places["load"].file == "chain.toml"


def test_numbers_are_finite_and_are_floats():
    for path, value in sound(EVERYTHING).numbers.items():
        assert type(value) is float, path
        assert value - value == 0.0, path


@pytest.mark.parametrize(
    ("path", "value"),
    [
        ("supply.positive", 0.0), ("supply.negative", 0.0), ("supply.temperature", 25.0),
        ("target.gain_tolerance", 1.0),
        ("tolerance.resistor", 0.01), ("tolerance.capacitor", 0.05), ("tolerance.inductor", 0.1),
        ("tolerance.device", 0.2),
        ("tolerance.beta", 0.5), ("tolerance.matching", 0.0), ("tolerance.supply", 0.0), ("device.D.grading", 0.33),
        ("device.D.built_in", 0.75), ("device.D.vce_sat", 0.2), ("device.D.c_be0", 0.0),
    ],
)  # fmt: skip
def test_defaults(path, value):
    chain = sound(good.small())
    assert chain.numbers[path] == value
    assert path not in chain.given


def test_defaults_of_op_amp_block_and_series():
    text = good.small(
        stage=good.stage("noninverting", device="A") + good.stage("block", "gain = 2", name="B"), card=good.OPAMP
    )
    chain = sound(text)
    assert chain.numbers["device.A.a0"] == 1e5
    assert chain.numbers["device.A.rout"] == 50.0
    assert chain.numbers["device.A.headroom"] == 1.5
    assert chain.numbers["B.rout"] == 1e-3
    assert chain.numbers["B.nf_source"] == 50.0
    assert chain.preferred == {"resistor": "E24", "capacitor": "E12", "inductor": "E12"}
    assert chain.spread_shape == "normal"


@pytest.mark.parametrize(
    ("raw", "value", "inverting"),
    [("-25", -25.0, None), ("25", 25.0, None), ('"20 dB"\ninverting = true', -10.0, True),
     ('"20dB"\ninverting = false', 10.0, False),
     ('"-20 dB"\ninverting = true', -0.1, True)],
)  # fmt: skip
def test_the_gain_of_a_block_carries_its_sign(raw, value, inverting):
    chain = sound(good.small(stage=good.BLOCK + f"gain = {raw}\n"))
    assert chain.numbers["B1.gain"] == pytest.approx(value, rel=1e-15)
    assert chain.stages[0].inverting is inverting


def test_poles_and_arms_are_numbered_from_one():
    text = good.small(stage=good.BLOCK + 'gain = 1\npoles = ["1M", 2e6]\nlower_poles = [10]\n'
                      + good.LADDER + 'arms = [ { series_r = "50", series_c = "1u" },'
                      ' { shunt_c = "22p", shunt_r = 1, role = "low" } ]\n')  # fmt: skip
    chain = sound(text)
    assert (chain.numbers["B1.poles.1"], chain.numbers["B1.poles.2"]) == (1e6, 2e6)
    assert chain.numbers["B1.lower_poles.1"] == 10.0
    assert (chain.stages[0].poles, chain.stages[0].lower_poles) == (2, 1)
    first, second = chain.stages[1].arms
    assert (first.number, first.series, first.parts, first.role) == (1, True, ("series_r", "series_c"), "")
    assert (second.number, second.series, second.parts, second.role) == (2, False, ("shunt_c", "shunt_r"), "low")
    assert chain.numbers["L1.arms.2.shunt_c"] == 22e-12


@pytest.mark.parametrize(
    ("series", "part", "role", "end"),
    [(True, "series_c", "", "low"), (True, "series_l", "", "high"), (False, "shunt_c", "", "high"),
     (False, "shunt_l", "", "low"),
     (True, "series_c", "high", "high"), (False, "shunt_l", "high", "high"), (False, "shunt_r", "low", "")],
)  # fmt: skip
def test_roles_of_arms(series, part, role, end):
    chain = sound(good.small(stage=good.LADDER + "arms = [ { series_r = 1 } ]\n"))
    arm = type(chain.stages[0].arms[0])(1, series, (part,), role)
    assert arm.role_of(part) == end


@pytest.mark.parametrize(
    ("polarity", "rails"),
    [
        ('polarity = "npn"', ("positive", "ground")),
        ('polarity = "pnp"', ("ground", "positive")),
        ("", ("positive", "ground")),
    ],
)
def test_rails_follow_the_polarity(polarity, rails):
    stage = sound(good.small(card=f"{good.CARD}{polarity}\n")).stages[0]
    assert (stage.output_to, stage.lower_to) == rails


def test_a_rail_that_is_stated_stands():
    stage = sound(good.small(stage=good.STAGE + 'lower_to = "negative"\n')).stages[0]
    assert (stage.output_to, stage.lower_to) == ("positive", "negative")


def test_the_upper_device_of_a_cascode_is_the_lower_one_unless_stated():
    card = good.CARD + good.FET
    assert sound(good.small(stage=good.stage("cascode", "ic = 1e-3", "D"), card=card)).stages[0].upper == "D"
    both = good.stage("cascode", 'ic = 1e-3\nupper = "F"', "D")
    assert sound(good.small(stage=both, card=card)).stages[0].upper == "F"


def test_tolerances_and_free_keys_of_a_stage():
    keys = 'c_load = "10p"\nfree = ["rc", "couple"]\ntolerance = { rc = "1 %", c_load = 0.1 }\n'
    chain = sound(good.small(stage=good.STAGE + keys))
    assert chain.stages[0].free == ("rc", "couple")
    assert chain.numbers["Q1.tolerance.rc"] == 0.01
    assert chain.numbers["Q1.tolerance.c_load"] == 0.1


@pytest.mark.parametrize(
    "spelled",
    ['{ "arms.1.series_r" = "1 %" }', "{ arms.1.series_r = 0.01 }", '{ arms = { 1 = { series_r = "1 %" } } }'],
)
def test_arms_have_tolerances_of_their_own(spelled):
    text = good.LADDER + f'arms = [ {{ series_r = 50 }} ]\nfree = ["arms.1.series_r"]\ntolerance = {spelled}\n'
    chain = sound(good.small(stage=text))
    assert chain.numbers["L1.tolerance.arms.1.series_r"] == 0.01
    assert chain.stages[0].free == ("arms.1.series_r",)


def test_a_current_source():
    chain = sound(
        good.small(
            source='[source]\nkind = "current"\nlargest = "1u"\n', rest='[target]\ngain = "100k"\nnoise = "1p"\n'
        )
    )
    assert chain.source_kind == "current"
    assert "source.resistance" not in chain.numbers
    assert chain.numbers["target.gain"] == 1e5


def test_an_unused_card_is_no_fault_even_where_it_says_little():
    assert "X" in sound(good.small(card=good.CARD + '[device.X]\nfamily = "jfet"\n')).cards


def test_zero_means_that_a_part_is_not_there():
    keys = 'stray = 0\nc_load = "0p"\nstopper = 0\nre = 0\nl_peak = 0\nc_comp = 0\n'
    assert sound(good.small(stage=good.STAGE + keys)).numbers["Q1.stopper"] == 0.0


def test_benches_are_read():
    text = good.small(rest='[[bench]]\ndate = 2026-05-04\nunit = "board 3"\nat = "Q1"\ngain = "58.7 dB"\n'
                      'lower = "17k"\n'
                      'file = "b.csv"\n[[bench]]\nupper = "0.92M"\n')  # fmt: skip
    chain = sound(text)
    first, second = chain.benches
    assert (first.number, first.date, first.unit, first.at, first.file) == (1, "2026-05-04", "board 3", "Q1", "b.csv")
    assert chain.numbers["bench.1.gain"] == pytest.approx(861.0, rel=1e-3)
    assert (second.number, second.at, chain.numbers["bench.2.upper"]) == (2, "", 0.92e6)


def test_a_stage_that_is_left_out_stays_in_the_chain():
    assert sound(good.small(stage=good.STAGE + "left_out = true\n")).stages[0].left_out


def test_only_settings_are_no_target():
    assert not sound(good.small(rest='[target]\nreference = "1k"\n')).has_targets
    assert sound(good.small(rest='[target]\nupper = "1M"\n')).has_targets


def test_sixty_four_stages_are_taken():
    stages = "".join(good.stage("block", "gain = 1", name=f"B{k}") for k in range(64))
    assert len(sound(good.small(stage=stages)).stages) == 64


def test_claims_of_the_whole_budget_are_taken():
    assert sound(good.small(stage=good.STAGE + 'allot = "3.0103 dB"\n'))
    assert sound(
        good.small(stage=good.STAGE + 'allot = "3 dB"\n' + good.stage("block", "gain = 1\nallot = 1\nleft_out = true"))
    )


def test_load_reads_a_file_and_raises_every_fault(tmp_path):
    path = tmp_path / "chain.toml"
    path.write_text(good.small(), encoding="utf-8")
    assert load(str(path)).path == str(path)
    path.write_text("format = 2\n", encoding="utf-8")
    with pytest.raises(ProblemsFound) as caught:
        load(str(path))
    assert [problem.what for problem in caught.value.problems] == [
        "the chain has no source", "the chain has no stage", "2 is not a known format",
    ]  # fmt: skip
    with pytest.raises(ProblemsFound):
        load(str(tmp_path / "absent.toml"))


def test_parse_raises_with_the_text_for_excerpts():
    with pytest.raises(ProblemsFound) as caught:
        parse("format = ", "x.toml")
    assert caught.value.text == "format = "
