"""Pages drawn from a small document made by hand."""

import json
import math
import re

import pytest

from polebook.report.audit import audit
from polebook.report.jsonout import dump
from polebook.report.look import Look, cells
from polebook.report.pages import PAGES, page
from tests.report.sample import document

AT = {"hz": 1e5, "lines": [{"name": "source", "gain_db": -0.1, "phase_deg": -3.2, "lost_db": 0.1}]}


def drawn(doc=None, name="ledger", look=None, file="two.toml"):
    return page(doc or document(), name, look or Look(), file)


@pytest.mark.parametrize("name", PAGES)
@pytest.mark.parametrize("encoding", ["utf-8", "ascii", "cp437"])
def test_every_page_fits_80_columns_in_every_encoding(name, encoding):
    text = page(document() | {"at": AT}, name, Look(encoding=encoding), "chains/two.toml")
    text.encode(encoding)
    assert max(map(cells, text.splitlines())) <= 80
    assert all(line == line.rstrip() for line in text.splitlines())


def test_long_names_are_cut_and_the_page_still_fits():
    doc = document()
    long = "a_stage_with_a_name_that_goes_on_and_on_and_on_" * 2
    text = json.dumps(doc).replace('"Q1"', json.dumps(long))
    for name in PAGES:
        shown = page(json.loads(text), name, Look(), "f" * 100 + ".toml")
        body = [line for line in shown.splitlines()[2:] if "owns" not in line]
        assert max(map(cells, body)) <= 80, name


def test_the_part_that_owns_most_of_each_edge_is_named_in_words():
    text = " ".join(drawn().split())
    assert "Q1.cmu owns 90 % of the upper edge: its 4.70 pF counts as 172 pF at n0 (K -35.60)" in text
    assert "with a time constant of 520 ns" in text
    assert re.search(r"Q1\.couple owns 75 % of the lower edge: 1\.00 .F, with a time constant of 3\.60 ms\.", text)


def test_a_figure_is_not_parted_from_its_unit():
    sentences = drawn().split("Q1.cmu owns")[1].split("cautions")[0].splitlines()
    assert len(sentences) > 3
    for line in sentences:
        assert not re.search(r"(K|[^n]\d)$", line)


def test_the_ledger_shows_targets_with_their_verdicts():
    lines = drawn().splitlines()
    upper = next(line for line in lines if line.startswith(" upper  "))
    assert upper.split() == ["upper", "1.00", "MHz", "274", "kHz", "-72.6", "%", "missed"]
    noise = next(line for line in lines if line.startswith(" noise"))
    assert noise.endswith("not judged  not computed")


def test_the_greatest_owner_of_each_edge_is_marked():
    q1 = next(line for line in drawn().splitlines() if line.startswith(" Q1 "))
    assert q1.count("◂") == 2
    assert sum(line.count("◂") for line in drawn().splitlines()) == 2


def test_missing_figures_are_dashes_and_missing_sections_are_left_out():
    doc = document()
    for section in ("targets", "parts", "bias", "rails", "account", "cautions"):
        doc[section] = None
    doc["nodes"] = []
    for name in PAGES:
        text = drawn(doc, name)
        assert "None" not in text
        assert "nan" not in text


def test_a_figure_that_is_no_number_is_a_dash_everywhere():
    def spoil(value):
        if isinstance(value, dict):
            return {key: spoil(item) for key, item in value.items()}
        if isinstance(value, list):
            return [spoil(item) for item in value]
        return math.nan if isinstance(value, float) else value

    for name in PAGES:
        assert "nan" not in drawn(spoil(document()), name)
    assert "nan" not in audit("two.toml", spoil(document()), Look())


def test_a_file_without_targets_says_so():
    assert "no targets are set" in drawn(document() | {"targets": []})


def test_instability_is_told_first():
    doc = document()
    doc["overall"]["unstable"] = True
    doc |= {"targets": None, "account": None}
    doc["overall"] |= {"upper_edge_hz": None, "lower_edge_hz": None}
    doc["verdict"] = "Unstable: a pair of poles at 3.00 MHz grows."
    for name in PAGES:
        text = drawn(doc, name)
        assert text.splitlines()[2].startswith(" Unstable: a pair of poles at 3.00 MHz")
        assert text.count("Unstable") == 1
    doc["verdict"] = None
    assert drawn(doc).splitlines()[2].startswith(" Unstable: the chain oscillates")


def test_the_verdict_leads_the_page_and_is_not_said_twice():
    told = "Upper edge 274 kHz for 1 MHz: Q1.cmu owns 90 %. It looks like 172 pF at n0 (K -35.6)."
    doc = document() | {"verdict": told}
    for name in ("ledger", "all"):
        lines = drawn(doc, name).splitlines()
        assert lines[2] == " Upper edge 274 kHz for 1 MHz: Q1.cmu owns 90 %. It looks like 172 pF at n0"
        assert lines[3] == " (K -35.6)."
        text = " ".join(" ".join(lines).split())
        assert "Q1.cmu owns 90 % of the upper edge" not in text
        assert "Q1.couple owns 75 % of the lower edge" in text
    assert "Q1.cmu owns 90 % of the upper edge" in " ".join(drawn(doc, "parts").split())


def test_a_missed_target_is_explained_below_its_audit_and_not_in_the_table():
    doc = document()
    doc["targets"][1]["why"] = "Q1.cmu owns 90 %, its 4.7 pF looks like 172 pF at n0 (K -35.6), on 500 Ω"
    lines = audit("two.toml", doc, Look()).splitlines()
    assert lines[3].endswith("missed")
    assert lines[5] == " upper: Q1.cmu owns 90 %, its 4.7 pF looks like 172 pF at n0 (K -35.6), on"
    assert lines[6] == "   500 Ω"
    assert lines[7:] == [" 1 of 3 missed, 1 not judged"]
    assert "owns 90 %, its" not in drawn(doc)


def test_what_a_held_node_passes_on_is_shown():
    doc = document()
    doc["lines"][1]["transfer_ohm"] = -47e3
    assert "Q1 holds its input node: transfer -47.0 kΩ" in drawn(doc, "lines")


def test_a_bridge_lands_on_the_nodes_of_its_stage():
    row = next(line for line in drawn(name="nodes").splitlines() if line.startswith(" Q1.cmu"))
    assert row.split() == ["Q1.cmu", "4.70", "pF", "-35.60", "172", "pF", "at", "n0", "4.83", "pF", "at", "n1"]


def test_a_cascodes_bridge_lands_on_its_middle_node():
    doc = document()
    doc["lines"][1]["kind"] = "cascode"
    row = next(line for line in drawn(doc, "nodes").splitlines() if line.startswith(" Q1.cmu"))
    assert row.endswith("at Q1.mid")


def test_nodes_that_are_one_go_by_the_lower_number():
    doc = document()
    doc["nodes"][1:2] = []
    doc["lines"][2]["bridges"] = [doc["lines"][1]["bridges"][0]]
    row = next(line for line in drawn(doc, "nodes").splitlines() if line.startswith(" Q2.cmu"))
    assert re.findall(r"at (\S+)", row) == ["n0", "n2"]


def test_parts_are_sorted_by_the_share_they_own():
    lines = drawn(name="parts").splitlines()
    order = [line.split()[0] for line in lines if line.startswith(" Q") and "%" in line and "owns" not in line]
    assert order == ["Q1.cmu", "Q1.couple", "Q2.couple", "Q2.cpi"]


def test_figures_at_one_frequency_come_last():
    text = drawn(document() | {"at": AT})
    assert " ".join(text.splitlines()[-1].split()) == "source -0.10 -3.20 0.10"
    assert " at 100 kHz" in text


def test_control_characters_of_a_file_are_made_visible():
    doc = document()
    doc["chain"]["title"] = "red \x1b[31m and \u202e back"
    doc["cautions"] = [{"stage": "Q1", "text": "bell \x07"}]
    text = drawn(doc, file="a\x1b.toml")
    assert "\x1b" not in text
    assert "\x07" not in text
    assert "\u202e" not in text
    assert "red \\x1b[31m" in text
    assert "a\\x1b.toml" in text


def test_colour_only_where_it_is_asked_for():
    assert "\x1b" not in drawn()
    painted = drawn(look=Look(colour=True))
    assert "\x1b[31mmissed\x1b[0m" in painted
    assert re.sub(r"\x1b\[\d*m", "", painted) == drawn()


def test_json_has_full_precision_and_no_infinity():
    doc = document()
    doc["overall"]["gain"] = 0.1 + 0.2
    doc["overall"]["shrinkage"] = math.nan
    doc["nodes"][0]["room"] = math.inf
    doc["chain"]["title"] = "\x7f\x1b\u202e"
    text = dump(doc)
    assert text.isascii()
    assert all(char.isprintable() or char == "\n" for char in text)
    read = json.loads(text)
    assert read["overall"]["gain"] == 0.1 + 0.2
    assert read["overall"]["shrinkage"] is None
    assert read["nodes"][0]["room"] is None
    assert read["chain"]["title"] == "\x7f\x1b\u202e"


@pytest.mark.parametrize(
    ("verdicts", "last"),
    [
        ([True, True], " all 2 met"),
        ([True], " met"),
        ([True, False], " 1 of 2 missed"),
        ([True, False, None], " 1 of 3 missed, 1 not judged"),
        ([True, None], " 0 of 2 missed, 1 not judged"),
    ],
)
def test_an_audit_counts_what_is_missed(verdicts, last):
    rows = [document()["targets"][0] | {"met": met} for met in verdicts]
    text = audit("two.toml", document() | {"targets": rows}, Look())
    assert text.splitlines()[0] == "two.toml"
    assert text.splitlines()[-1] == last
    assert len(text.splitlines()) == 3 + len(verdicts)


def test_an_audit_without_targets_says_so():
    text = audit("two.toml", document() | {"targets": []}, Look())
    assert text == "two.toml\n no targets are set: nothing to judge\n"
