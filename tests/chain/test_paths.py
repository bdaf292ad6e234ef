"""Paths as people write them."""

from __future__ import annotations

import tomllib

import pytest

from polebook.chain.paths import PathRefused, locate
from polebook.chain.read import parse
from tests.chain import good

TEXT = good.small(
    stage=good.STAGE + 'tolerance = { rc = "1 %" }\n'
    + good.LADDER + 'arms = [ { series_r = "50" }, { shunt_c = "22p" } ]\n'
    + good.BLOCK + 'gain = 2\npoles = ["1M", "2M"]\n'
    + good.stage("cascode", 'upper = "F"\nic = 1e-3', "D", "C1"),
    card=good.CARD + good.FET,
    rest='[target]\nupper = "1M"\n[[bench]]\ngain = 3\n',
)  # fmt: skip
DATA = tomllib.loads(TEXT)


@pytest.mark.parametrize(
    ("words", "path"),
    [
        ("Q1.rc", ("stage", 0, "rc")),
        ("Q1.couple", ("stage", 0, "couple")),
        ("Q1.note", ("stage", 0, "note")),
        ("Q1.kind", ("stage", 0, "kind")),
        ("Q1.tolerance", ("stage", 0, "tolerance")),
        ("Q1.tolerance.rc", ("stage", 0, "tolerance", "rc")),
        ("Q1.tolerance.couple", ("stage", 0, "tolerance", "couple")),
        ("L1.arms", ("stage", 1, "arms")),
        ("L1.arms.2.shunt_c", ("stage", 1, "arms", 1, "shunt_c")),
        ("L1.arms.1.role", ("stage", 1, "arms", 0, "role")),
        ("L1.tolerance.arms.2.shunt_c", ("stage", 1, "tolerance", "arms.2.shunt_c")),
        ("B1.poles.2", ("stage", 2, "poles", 1)),
        ("C1.rc", ("stage", 3, "rc")),
        ("#2.name", ("stage", 1, "name")),
        ("source.couple", ("source", "couple")),
        ("load.resistance", ("load", "resistance")),
        ("target.upper", ("target", "upper")),
        ("supply.positive", ("supply", "positive")),
        ("tolerance.resistor", ("tolerance", "resistor")),
        ("preferred.capacitor", ("preferred", "capacitor")),
        ("device.D.beta", ("device", "D", "beta")),
        ("device.F.vgs_th", ("device", "F", "vgs_th")),
        ("bench.1.gain", ("bench", 0, "gain")),
        ("title", ("title",)),
        (" note ", ("note",)),
    ],
)
def test_paths_that_lead_somewhere(words, path):
    assert locate(words, DATA).path == path


def test_every_number_of_a_chain_is_named_by_its_path():
    chain = parse(TEXT, "x")
    assert len(chain.given) > 10
    for path in chain.given:
        found = locate(path, DATA)
        assert found.number == path
        assert found.param is not None


@pytest.mark.parametrize(
    ("words", "what", "why", "fix"),
    [
        ("", '"" is not a path', "joined by single dots", "Q1.rc"),
        ("Q1..rc", '"Q1..rc" is not a path', "single dots", "Q1.rc"),
        ("Q1", "Q1 is a table", "ends in a key", "Q1.couple"),
        ("source", "source is a table", "ends in a key", "source.kind"),
        ("device", "device is a table", "ends in a key", "device.D.beta"),
        ("device.D", "device.D is a table", "ends in a key", "device.D.family"),
        ("bench.1", "bench.1 is a table", "ends in a key", "bench.1.gain"),
        ("L1.arms.1", "L1.arms.1 is a table", "ends in a key", "L1.arms.1.series_r"),
        ("Q2.rc", 'nothing is named "Q2"', "the stages are Q1, L1, B1 and C1", "did you mean Q1?"),
        ("surce.couple", 'nothing is named "surce"', "begins with a stage", "did you mean source?"),
        ("Q1.rcc", 'stage Q1 has no key "rcc"', "polebook kinds common-emitter", "did you mean rc?"),
        ("Q1.rd", 'stage Q1 has no key "rd"', "common-emitter", "did you mean"),
        ("Q1.rc.x", 'stage Q1 has no key "rc.x"', "common-emitter", "did you mean rc?"),
        ("Q1.tolerance.ic", 'tolerance of stage Q1 has no key "ic"', "keys are couple", "did you mean"),
        ("L1.arms.3.shunt_c", "there is no arm 3", "stage L1 has 2 of them", "that is there"),
        ("L1.arms.x.shunt_c", "there is no arm x", "counted from 1", "that is there"),
        ("L1.arms.0.shunt_c", "there is no arm 0", "counted from 1", "that is there"),
        ("L1.arms.1.serie_r", 'arm 1 of stage L1 has no key "serie_r"', "series_r", "did you mean series_r?"),
        ("B1.poles.3", "there is no item of poles 3", "has 2 of them", "that is there"),
        ("device.E.beta", 'there is no card "E"', "the cards of the file are D and F", "[device.E]"),
        ("device.D.betta", 'card D has no key "betta"', "no key of it", "did you mean beta?"),
        ("device.D.idss", 'card D has no key "idss"', "no key of it", "name one of its keys"),
        ("bench.2.gain", "there is no bench 2", "the file has 1 of them", "that is there"),
        ("target.uper", '[target] has no key "uper"', "its keys are gain", "did you mean upper?"),
    ],
)
def test_paths_that_lead_nowhere(words, what, why, fix):
    with pytest.raises(PathRefused) as caught:
        locate(words, DATA)
    (problem,) = caught.value.problems
    assert what in problem.what
    assert why in problem.why
    assert fix in problem.fix


def test_two_stages_of_a_name_are_told_apart_by_position():
    data = tomllib.loads(good.STAGE + good.STAGE)
    with pytest.raises(PathRefused, match="2 stages are named"):
        locate("Q1.rc", data)
    assert locate("#2.rc", data).path == ("stage", 1, "rc")


@pytest.mark.parametrize(
    "data",
    [
        {}, {"stage": 3}, {"stage": [3]}, {"stage": [{"name": 3}]},
        {"stage": [{"name": "Q1", "kind": 3, "device": []}]},
        {"stage": [{"name": "Q1", "kind": "cascode", "device": "D"}], "device": {"D": 3}},
        {"stage": [{"name": "Q1", "kind": "ladder", "arms": [3], "tolerance": 3}],
         "device": 3, "bench": 3, "source": 3},
    ],
)  # fmt: skip
def test_content_of_any_shape_is_looked_through(data):
    for words in (
        "Q1.rc",
        "Q1.arms.1.series_r",
        "Q1.tolerance.rc",
        "device.D.beta",
        "bench.1.gain",
        "source.kind",
        "title",
    ):
        try:
            assert locate(words, data).path
        except PathRefused as refused:
            assert refused.problems[0].fix


def test_a_key_that_is_not_known_can_be_named_where_the_file_holds_it():
    data = tomllib.loads(good.STAGE + "rcc = 3\n")
    found = locate("Q1.rcc", data)
    assert (found.path, found.param) == (("stage", 0, "rcc"), None)
