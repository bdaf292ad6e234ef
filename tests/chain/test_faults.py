"""One fault, one message: where it stands, what it says, why, how to mend it, and nothing else beside it."""

from __future__ import annotations

import pytest

from polebook.chain.read import examine
from polebook.problem import render
from tests.chain import faults_of_stages, faults_of_tables
from tests.chain.fault_texts import MARK, fet
from tests.chain.good import HEAD, JFET, STAGE, small, stage

CASES = [*faults_of_tables.CASES, *faults_of_stages.CASES]


@pytest.mark.parametrize(("text", "what", "why", "fix"), [case[1:] for case in CASES], ids=[case[0] for case in CASES])
def test_one_fault_one_message(text, what, why, fix):
    chain, problems = examine(text, "chain.toml")
    assert chain is None
    assert len(problems) == 1, "\n".join(render(problem, text) for problem in problems)
    problem = problems[0]
    assert problem.severity == "fault"
    assert what in problem.what
    assert why in problem.why
    assert fix in problem.fix
    marked = [number for number, line in enumerate(text.split("\n"), 1) if line.endswith(MARK)]
    assert problem.place is not None
    assert problem.place.file == "chain.toml"
    assert [problem.place.line] == (marked or [0])
    if marked:
        line = text.split("\n")[problem.place.line - 1]
        assert (
            1
            <= problem.place.column
            <= problem.place.column + problem.place.width - 1
            <= len(line.removesuffix(MARK).rstrip())
        )


def test_no_two_cases_are_the_same():
    assert len({case[0] for case in CASES}) == len(CASES)
    assert len({case[1] for case in CASES}) == len(CASES)


def test_every_fault_is_told_at_once_in_the_order_of_the_file():
    text = (
        "format = 3\n"
        '[source]\nkind = "voltage"\nresistance = "10 nF"\n'
        '[[stage]]\nname = "Q1"\nkind = "common-emiter"\n'
        '[[stage]]\nname = "Q1"\nkind = "common-emitter"\ndevice = "E"\nrd = 3\nrb2 = -1\n'
        "[target]\nuper = 3\n"
        '[device.D]\nfamily = "bjt"\nbeta = nan\n'
    )
    _, problems = examine(text, "x")
    assert [problem.what for problem in problems] == [
        "3 is not a known format", '"10 nF" is not a resistance', '"common-emiter" is not a kind of stage',
        'a second stage is named "Q1"', 'there is no card "E"', 'unknown key "rd" in stage number 2', "-1 is negative",
        'unknown key "uper" in the target', "nan is not a plain number",
    ]  # fmt: skip
    lines = [problem.place.line for problem in problems]
    assert lines == sorted(lines)


def test_without_a_known_kind_only_keys_that_no_kind_takes_are_told():
    text = small(stage=STAGE.replace("common-emitter", "emitter") + "rd = 3\nrcc = 3\n")
    _, problems = examine(text, "x")
    assert [problem.what for problem in problems] == [
        '"emitter" is not a kind of stage',
        'unknown key "rcc" in stage Q1',
    ]


def test_without_a_known_family_only_keys_that_no_card_takes_are_told():
    text = small(card='[device.D]\nfamily = "bipolar"\nidss = 3\nbetta = 3\n')
    _, problems = examine(text, "x")
    assert [problem.what for problem in problems] == [
        '"bipolar" is not a family of cards',
        'unknown key "betta" in card D',
    ]


def test_syntax_faults_of_toml_come_back_as_problems():
    chain, problems = examine("format = 1\nrc = = 3\n", "x.toml")
    assert chain is None
    assert (problems[0].place.file, problems[0].place.line) == ("x.toml", 2)


def test_a_file_of_nonsense_ends_soon_and_says_so():
    _, problems = examine("[source]\n" + "".join(f"a{k} = 1\n" for k in range(5000)), "x")
    assert len(problems) == 1001
    assert "over 1000 faults" in problems[-1].what


def test_a_message_repeats_no_more_than_the_beginning_of_a_long_value():
    _, problems = examine(small(stage=STAGE + f'stray = "{"9" * 5000}"\n{"k" * 3000} = 1\n'), "x")
    assert len(problems) == 2
    assert all(len(problem.what) < 200 for problem in problems)


def test_control_characters_in_a_text_stay_in_the_text():
    chain, _ = examine(small(head='format = 1\ntitle = "a\\u001b[31mb"\n'), "x")
    assert chain.title == "a\x1b[31mb"


def test_the_head_alone_is_not_enough():
    assert [problem.what for problem in examine(HEAD, "x")[1]] == ["the chain has no source", "the chain has no stage"]


def test_jfet_with_gm_at_a_current_and_idss_is_enough():
    assert examine(fet("gm = 1\ngm_id = 1\nidss = 1", "jfet"), "x")[0] is not None
    assert examine(small(stage=stage("common-source", "id = 1e-3", "J"), card=JFET), "x")[0] is not None
