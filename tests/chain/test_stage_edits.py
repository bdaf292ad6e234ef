"""Edits of whole stages: each one edit with a plain label, nothing else of the file touched, no fault added."""

from __future__ import annotations

import difflib
import tomllib
from typing import Any

import pytest

from polebook.book.build import ledger
from polebook.chain.kind_edits import change_kind
from polebook.chain.note_edits import set_note
from polebook.chain.read import parse
from polebook.chain.stage_edits import Made, add, copy, move, remove, rename, toggle_left_out
from polebook.problem import ProblemsFound
from polebook.stages.registry import KINDS
from tests.chain import good
from tests.laws.chains import BY_NAME

TEXT = """format = 1
[supply]
positive = 12
[source]
kind = "voltage"
resistance = "600"

# gives the gain
[[stage]]
name        = 'Q1'
kind        = "common-emitter"
device      = "D"
couple      = "1u"     # in
rb1         = "100k"
rb2         = "22k"
rc          = "4k7"    # sets the level
re          = "47"
re_bypassed = "1k"
ce          = "100u"
allot       = "1 dB"
free        = ["rc", "ce", "couple"]
tolerance   = { rc = "2 %", couple = "3 %", ce = "10 %" }

# drives the line
[[stage]]
name   = "Q2"
kind   = "emitter-follower"
device = "D"
re     = "1k"          # not for long

[load]
couple     = "10u"
resistance = "600"

[[bench]]
at   = "Q1"
gain = "30 dB"

[device.D]
family = "bjt"
beta   = 200
"""
FILE = "x.toml"


def done(made: Made, text: str = TEXT) -> str:
    edit, problems = made
    assert not problems
    after = edit.apply(text)
    assert edit.inverse().apply(after) == text
    parse(after, FILE)
    return after


def stage(text: str, at: int) -> dict[str, Any]:
    found: dict[str, Any] = tomllib.loads(text)["stage"][at]
    return found


def names(text: str) -> list[str]:
    return [one["name"] for one in tomllib.loads(text)["stage"]]


def changed_lines(before: str, after: str) -> tuple[list[str], list[str]]:
    """Lines taken out and put in."""
    told = list(difflib.ndiff(before.splitlines(), after.splitlines()))
    return [line[2:] for line in told if line[:2] == "- "], [line[2:] for line in told if line[:2] == "+ "]


def refused(made: Any, *args: Any) -> str:
    with pytest.raises(ProblemsFound) as found:
        made(TEXT, FILE, *args)
    problem = found.value.problems[0]
    assert problem.what and problem.why and problem.fix
    return problem.what


@pytest.mark.parametrize(("after", "at"), [("source", 0), ("Q1", 1), ("Q2", 2), ("load", 2), ("#1", 1)])
def test_a_stage_is_added_where_it_is_asked_for(after: str, at: int) -> None:
    made = add(TEXT, FILE, after, "common-emitter")
    text = done(made)
    assert names(text)[at] == "Q3" and stage(text, at)["device"] == "D"
    behind = {0: "the source", 1: "Q1", 2: "Q2"}[at]
    assert made[0].label == f"Q3 added after {behind}: common-emitter"
    assert not changed_lines(TEXT, text)[0]


@pytest.mark.parametrize("word", [f"{name}:{family}" if family else name for name, kind in KINDS.items()
                                  for family in kind.families or ("",)])
@pytest.mark.parametrize("chain", ["wire-break-listener", "photodiode-front"])
def test_a_new_stage_of_any_kind_is_biased_and_passes_the_signal(word: str, chain: str) -> None:
    text = BY_NAME[chain].read_text(encoding="utf-8")
    first = parse(text, FILE).stages[0].name
    after = done(add(text, FILE, first, word), text)
    found = ledger(parse(after, FILE))
    new = found.chain.stages[1]
    gain = next(line.gain for line in found.lines if line.name == new.name)
    assert 0.02 < abs(gain) < 1e8
    told = [problem.what for problem in found.cautions if new.name in problem.what]
    assert not [what for what in told if "saturated" in what or "pinched off" in what or "cut off" in what], told


def test_a_card_is_added_where_none_of_the_family_stands() -> None:
    made = add(TEXT, FILE, "Q1", "common-source")
    text = done(made)
    assert stage(text, 1)["device"] == "JFET" and "with a new card JFET" in made[0].label
    assert tomllib.loads(text)["device"]["JFET"]["family"] == "jfet"
    again = add(text, FILE, "Q1", "common-source:mosfet")
    assert stage(done(again, text), 1)["device"] == "NMOS"
    assert stage(done(add(text, FILE, "Q1", "source-follower"), text), 1)["device"] == "JFET"


def test_a_card_of_that_name_is_left_alone() -> None:
    text = TEXT.replace('[device.D]', '[device.JFET]\nfamily = "bjt"\nbeta = 50\n\n[device.D]')
    after = done(add(text, FILE, "Q1", "common-source"), text)
    assert stage(after, 1)["device"] == "JFET2"


def test_a_p_type_card_does_not_serve_a_new_stage() -> None:
    text = TEXT.replace("beta   = 200", 'beta   = 200\npolarity = "pnp"')
    assert stage(done(add(text, FILE, "Q1", "common-emitter"), text), 1)["device"] == "NPN"


def test_what_would_take_the_bias_away_gets_a_couple() -> None:
    text = TEXT.replace('[load]\ncouple     = "10u"\n', "[load]\n")
    made = add(text, FILE, "Q2", "common-emitter")
    after = done(made, text)
    assert tomllib.loads(after)["load"]["couple"] == "33u" and made[0].label.endswith("takes no bias away")
    assert "couple" not in tomllib.loads(done(add(text, FILE, "Q1", "common-emitter"), text))["load"]


def test_without_a_rail_a_new_stage_states_its_current() -> None:
    text = TEXT.replace("positive = 12", "temperature = 25").replace('kind        = "common-emitter"',
                                                                     'kind = "common-emitter"\nic = "1m"\nvce = 5')
    text = text.replace('re     = "1k" ', 're     = "1k"\nic = "1m"\nvce = 5')
    after = done(add(text, FILE, "Q1", "common-source"), text)
    assert {"id", "vds"} <= stage(after, 1).keys()
    assert abs(ledger(parse(after, FILE)).lines[2].gain) > 1


def test_no_such_kind_or_stage_is_refused() -> None:
    assert "common-emiter" in refused(add, "Q1", "common-emiter")
    assert "mosfet" in refused(add, "Q1", "common-emitter:mosfet")
    for made in (copy, remove, toggle_left_out):
        assert "Q7" in refused(made, "Q7")
    assert "Q7" in refused(add, "Q7", "ladder") and "Q7" in refused(rename, "Q7", "A")
    assert "Q7" in refused(move, "Q7", 1) and "Q7" in refused(change_kind, "Q7", "ladder")


def test_a_copy_gets_a_name_of_its_own() -> None:
    made = copy(TEXT, FILE, "Q2")
    text = done(made)
    assert names(text) == ["Q1", "Q2", "Q3"] and made[0].label == "Q2 copied as Q3"
    assert stage(text, 2) == {**stage(text, 1), "name": "Q3"} and text.count("# not for long") == 2


def test_a_copy_leaves_an_allotment_behind_that_would_be_too_much() -> None:
    text = TEXT.replace("1 dB", "2 dB")
    made = copy(text, FILE, "Q1")
    assert "allot" not in stage(done(made, text), 1) and made[0].label == "Q1 copied as Q3, without its allot"
    assert stage(done(copy(TEXT, FILE, "Q1")), 1)["allot"] == "1 dB"


def test_a_stage_is_removed_with_its_comments() -> None:
    made = remove(TEXT, FILE, "Q2")
    out, put = changed_lines(TEXT, done(made))
    assert made[0].label == "Q2 removed" and not put
    assert out == TEXT[TEXT.index("# drives"):TEXT.index("[load]")].splitlines()


def test_what_a_bench_was_measured_at_is_not_removed() -> None:
    assert refused(remove, "Q1") == "Q1 can't be removed"
    with pytest.raises(ProblemsFound, match="only stage"):
        remove(done(remove(TEXT, FILE, "Q2")), FILE, "Q1")


def test_a_stage_changes_places_with_its_neighbour() -> None:
    made = move(TEXT, FILE, "Q2", -1)
    text = done(made)
    assert names(text) == ["Q2", "Q1"] and made[0].label == "Q2 moved towards the source"
    assert sorted(text.splitlines()) == sorted(TEXT.splitlines())
    assert text.index("# drives the line") < text.index('"Q2"') < text.index("# gives the gain") < text.index("'Q1'")
    assert done(move(text, FILE, "Q2", 1), text) == TEXT
    assert refused(move, "Q1", -1) == "Q1 is the first stage" and refused(move, "Q2", 1) == "Q2 is the last stage"


def test_references_follow_a_new_name() -> None:
    made = rename(TEXT, FILE, "Q1", "in")
    text = done(made)
    assert changed_lines(TEXT, text) == (["name        = 'Q1'", 'at   = "Q1"'], ["name        = 'in'", 'at   = "in"'])
    assert made[0].label == "Q1 renamed in, bench 1 with it"
    assert done(rename(text, FILE, "in", "Q1"), text) == TEXT


@pytest.mark.parametrize("name", ["Q2", "load", "n3", "a b", "", "supply", "ü"])
def test_a_name_that_none_may_have_is_refused(name: str) -> None:
    assert refused(rename, "Q1", name)


def test_a_stage_is_left_out_and_in_again() -> None:
    text = TEXT.replace('allot       = "1 dB"\n', "")
    made = toggle_left_out(text, FILE, "Q1")
    after = done(made, text)
    assert stage(after, 0)["left_out"] is True and made[0].label == "Q1 left out"
    again = toggle_left_out(after, FILE, "Q1")
    assert done(again, after) == text and again[0].label == "Q1 in again"


def test_another_kind_keeps_what_fits() -> None:
    made = change_kind(TEXT, FILE, "Q1", "emitter-follower")
    text = done(made)
    one = stage(text, 0)
    assert one.keys() == {"name", "kind", "device", "couple", "rb1", "rb2", "re", "allot", "free", "tolerance"}
    assert one["re"] == "1k", "47 Ω and 1 kΩ, in E24"
    assert one["free"] == ["couple"] and one["tolerance"] == {"couple": "3 %"}
    assert made[0].label == ("Q1: common-emitter to emitter-follower; re takes in re_bypassed: 1k; "
                             "taken out: rc, ce")


def test_another_family_names_the_same_parts_otherwise() -> None:
    made = change_kind(TEXT, FILE, "Q1", "common-source")
    one = stage(done(made), 0)
    parts = {"rg1": "100k", "rg2": "22k", "rd": "4k7", "rs": "47", "rs_bypassed": "1k", "cs": "100u"}
    assert parts.items() <= one.items()
    assert one["device"] == "JFET" and one["free"] == ["rd", "cs", "couple"]
    assert one["tolerance"] == {"rd": "2 %", "couple": "3 %", "cs": "10 %"}
    assert "rc is rd" in made[0].label and "taken out" not in made[0].label
    text = done(made)
    back = done(change_kind(text, FILE, "Q1", "common-emitter"), text)
    assert stage(back, 0) == stage(TEXT, 0), "and back again"
    assert "# sets the level" in back and back.count("#") == text.count("#")


def test_what_the_new_kind_asks_for_is_given() -> None:
    text = done(change_kind(TEXT, FILE, "Q1", "common-base"))
    assert stage(text, 0)["cb"] and "ce" not in stage(text, 0)
    text = done(change_kind(TEXT, FILE, "Q2", "common-emitter"))
    assert stage(text, 1)["rc"] and "couple" not in stage(text, 1)
    valve = done(change_kind(TEXT, FILE, "Q1", "common-cathode"))
    assert stage(valve, 0)["rg"] == "1M" and "rb1" not in stage(valve, 0) and stage(valve, 0)["ra"] == "4k7"
    mosfet = done(change_kind(valve, FILE, "Q1", "common-source:mosfet"), valve)
    assert {"rg1", "rg2"} <= stage(mosfet, 0).keys() and "rg" not in stage(mosfet, 0)


@pytest.mark.parametrize("tables", [
    'tolerance = { rc = "2 %", couple = "3 %" }\n', 'tolerance.rc = "2 %"\ntolerance.couple = "3 %"\n',
    '[stage.tolerance]\nrc = "2 %"\ncouple = "3 %"\n'])
@pytest.mark.parametrize(("kind", "left"), [("emitter-follower", {"couple": "3 %"}), ("block", {"couple": "3 %"}),
                                            ("common-source", {"rd": "2 %", "couple": "3 %"})])
def test_tolerances_follow_however_they_are_written(tables: str, kind: str, left: dict[str, str]) -> None:
    keys = 'couple = "1u"\nrb1 = "100k"\nrb2 = "22k"\nrc = "4k7"\n' + tables
    text = good.small(stage=good.stage("common-emitter", keys, "D"))
    assert stage(done(change_kind(text, FILE, "S1", kind), text), 0)["tolerance"] == left


@pytest.mark.parametrize("kind", list(KINDS))
@pytest.mark.parametrize("chain", ["wire-break-listener", "photodiode-front", "shellac-desk"])
def test_every_kind_becomes_every_other(kind: str, chain: str) -> None:
    text = BY_NAME[chain].read_text(encoding="utf-8")
    name = parse(text, FILE).stages[1].name
    edit, _ = change_kind(text, FILE, name, kind)
    after = edit.apply(text)
    assert parse(after, FILE).stages[1].kind == kind
    assert edit.label or after == text
    again, _ = change_kind(after, FILE, name, kind)
    assert not again, "the same kind again changes nothing"


def test_other_stages_and_their_comments_are_never_touched() -> None:
    block = TEXT[TEXT.index("# drives"):TEXT.index("[load]")]
    for made in (copy(TEXT, FILE, "Q1"), move(TEXT, FILE, "Q1", 1), rename(TEXT, FILE, "Q1", "A"),
                 change_kind(TEXT, FILE, "Q1", "block"), add(TEXT, FILE, "Q1", "ladder"),
                 set_note(TEXT, FILE, "Q1", "a\nb")):
        assert block in done(made)


@pytest.mark.parametrize("note", ["one line", "two\nlines", 'with """ and \\ and "', "a\n\nb", "tab\tand \x1b escape"])
@pytest.mark.parametrize("feed", ["\n", "\r\n"])
@pytest.mark.parametrize("sheet", ["Q1", "Q2", "device.D", "file", "target", "bench.1"])
def test_a_note_says_what_was_typed(note: str, feed: str, sheet: str) -> None:
    text = TEXT.replace("\n", feed)
    after = done(set_note(text, FILE, sheet, note), text)
    assert after.count("\n") == after.count("\r\n") or feed == "\n"
    holder: Any = tomllib.loads(after)
    holder = {"Q1": lambda: holder["stage"][0], "Q2": lambda: holder["stage"][1], "file": lambda: holder,
              "device.D": lambda: holder["device"]["D"], "target": lambda: holder["target"],
              "bench.1": lambda: holder["bench"][0]}[sheet]()
    assert holder["note"].strip("\n") == note
    assert not set_note(after, FILE, sheet, note)[0], "the same note again changes nothing"
    gone = set_note(after, FILE, sheet, "\n")
    assert "note" not in gone[0].apply(after) and "taken out" in gone[0].label
    assert not changed_lines(text, done(gone, after))[0]


def test_a_table_without_notes_says_so() -> None:
    assert refused(set_note, "load", "a") and refused(set_note, "nothing", "a")


def test_stages_in_a_list_of_inline_tables_are_refused_not_spoiled() -> None:
    text = ('format = 1\nstage = [{ name = "L1", kind = "ladder", arms = [{ series_r = 1 }] }, '
            '{ name = "L2", kind = "ladder", arms = [{ series_r = 1 }] }]\n'
            '[source]\nkind = "voltage"\nresistance = 1\n')
    parse(text, FILE)
    for work in (lambda: move(text, FILE, "L1", 1), lambda: copy(text, FILE, "L1"), lambda: remove(text, FILE, "L1")):
        with pytest.raises(ProblemsFound, match="header of its own"):
            work()
    assert stage(done(rename(text, FILE, "L1", "pad"), text), 0)["name"] == "pad"


def test_a_faulty_file_can_still_be_edited() -> None:
    text = TEXT.replace('rb1         = "100k"', 'rb1         = "100 uV"')
    for made in (copy(text, FILE, "Q2"), move(text, FILE, "Q2", -1), rename(text, FILE, "Q2", "out")):
        edit, problems = made
        assert edit.apply(text) != text and [problem.what for problem in problems] == ['"100 uV" is not a resistance']
    with pytest.raises(ProblemsFound):
        rename("format = [", FILE, "Q1", "A")
