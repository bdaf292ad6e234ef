"""report and draw at the command line: what is written where, what is refused, what is told of chains in trouble."""

import re
import shutil
from xml.etree import ElementTree

import pytest
from markdown_it import MarkdownIt

from polebook.cli import report
from polebook.cli.main import main
from polebook.record.documents import intact
from tests.book.verdict_cases import CASES
from tests.cli.helpers import LISTENER, program

PICTURES = ("review-response.svg", "review-account.svg", "review-pulse.svg", "review-levels.svg")
UNSTABLE = next(text for name, text in CASES.items() if name.startswith("unstable"))
HEADINGS = ("Verdict", "Targets", "Cautions", "Response", "Lines", "Who owns the edges", "Nodes, and what they lose",
            "Poles and zeros", "Step response", "Noise", "Levels and bias", "Leverage", "Parts to fit",
            "How the figures of the verdict come about", "Words", "What these figures are, and are not")


def told(capsys, *args):
    code = main([str(arg) for arg in args])
    return code, *capsys.readouterr()


@pytest.fixture
def chain(tmp_path):
    return shutil.copy(LISTENER, tmp_path / "chain.toml")


def test_a_report_lies_beside_its_pictures_and_links_them(capsys, chain, tmp_path):
    review = tmp_path / "review.md"
    code, out, err = told(capsys, "report", chain, "-o", review)
    assert (code, err) == (0, "")
    assert all(name in out for name in ("review.md", *PICTURES))
    text = review.read_text(encoding="utf-8")
    tokens = MarkdownIt("gfm-like").parse(text)
    linked = [child.attrs["src"] for token in tokens for child in token.children or () if child.type == "image"]
    assert linked == list(PICTURES)
    assert all(ElementTree.parse(tmp_path / name).getroot().tag.endswith("svg") for name in linked)
    assert {path.name for path in tmp_path.iterdir()} == {"chain.toml", "review.md", *PICTURES}
    assert tuple(re.findall(r"^## (.*)$", text, re.MULTILINE)) == HEADINGS
    assert [token.type for token in tokens if token.type.startswith("html")] == ["html_block"]  # the mark alone
    assert str(tmp_path) not in text and "20" + "26-" not in text


def test_the_same_again_gives_the_same_bytes(capsys, chain, tmp_path):
    names = ("review.md", *PICTURES)
    told(capsys, "report", chain, "-o", tmp_path / "review.md")
    first = {name: (tmp_path / name).read_bytes() for name in names}
    assert told(capsys, "report", chain, "-o", tmp_path / "review.md")[0] == 0
    assert {name: (tmp_path / name).read_bytes() for name in names} == first


def test_remarks_in_a_report_are_not_lost(capsys, chain, tmp_path):
    review = tmp_path / "review.md"
    told(capsys, "report", chain, "-o", review)
    text = review.read_text(encoding="utf-8")
    assert intact(text)
    review.write_text(text.replace("## Targets", "I doubt this.\n\n## Targets"), encoding="utf-8")
    (tmp_path / PICTURES[3]).write_text("a photograph")
    code, out, err = told(capsys, "report", chain, "-o", review)
    assert (code, out) == (2, "")
    assert "was edited after it was written" in err and "there is another file of that name" in err and "--force" in err
    assert "I doubt this." in review.read_text(encoding="utf-8")
    assert told(capsys, "report", chain, "-o", review, "--force")[0] == 0
    assert review.read_text(encoding="utf-8") == text


def test_to_the_standard_output_goes_the_text_alone(capsys, chain, tmp_path):
    code, out, err = told(capsys, "report", chain)
    assert (code, err) == (0, "")
    assert "## Verdict" in out and "![" not in out
    assert told(capsys, "report", chain, "-o", "-")[1] == out
    assert [path.name for path in tmp_path.iterdir()] == ["chain.toml"]


def test_a_date_is_carried_where_it_is_given(capsys, chain):
    assert "- date: 2026-05-04" in told(capsys, "report", chain, "--date", "2026-05-04")[1]


def test_a_spread_and_benches_are_in_the_report(capsys, chain, tmp_path):
    with chain.open("a", encoding="utf-8") as file:
        file.write('\n[[bench]]\nunit = "board <3>"\ndate = 2026-05-04\nfile = "b.csv"\n')
    (tmp_path / "b.csv").write_text("Hz,dB\n20000,57\n100000,59\n400000,56\n")
    review = tmp_path / "review.md"
    code, _, err = told(capsys, "report", chain, "-o", review, "--spread", "--builds", "60", "--seed", "3")
    assert (code, err) == (0, "")
    text = review.read_text(encoding="utf-8")
    assert "60 built chains, seed 3" in text and "`polebook spread chain.toml --builds 60 --seed 3`" in text
    assert "bench 1 (board &lt;3&gt;, 2026-05-04), at the load" in text and "3 points" in text
    assert ">measured" in (tmp_path / PICTURES[0]).read_text(encoding="utf-8")


def test_a_sweep_that_can_t_be_read_is_told_and_the_rest_written(capsys, chain, tmp_path):
    with chain.open("a", encoding="utf-8") as file:
        file.write('\n[[bench]]\nfile = "none.csv"\n')
    for words, name in ((("report",), "r.md"), (("draw",), "d.svg")):
        code, _, err = told(capsys, *words, chain, "-o", tmp_path / name)
        assert code == 2 and "none.csv" in err
        assert (tmp_path / name).exists()


def test_what_can_be_told_of_an_unstable_chain_is_told(capsys, tmp_path):
    chain = tmp_path / "chain.toml"
    chain.write_text(UNSTABLE)
    review = tmp_path / "review.md"
    assert told(capsys, "report", chain, "-o", review)[0] == 0
    text = review.read_text(encoding="utf-8")
    assert "**Unstable: a pair of poles" in text and "**grows**" in text and "![no step response" in text
    assert told(capsys, "draw", chain, "-o", tmp_path / "r.svg")[0] == 0
    code, out, err = told(capsys, "draw", chain, "--what", "pulse", "-o", tmp_path / "p.svg")
    assert (code, out) == (2, "")
    assert "no step response: the chain is unstable" in err and "    fix  " in err
    assert not (tmp_path / "p.svg").exists()


def test_a_yield_is_judged_as_an_audit_judges_it(capsys, chain):
    text = chain.read_text(encoding="utf-8")
    chain.write_text(text.replace("[target]", '[target]\nyield = "10 %"'), encoding="utf-8")
    done = told(capsys, "report", chain)[1]
    assert "| yield " in done and "not judged" not in done
    assert "The yield is that of 10000 built chains, seed 1." in done


@pytest.mark.parametrize("command", ["report", "draw"])
def test_a_file_at_fault_is_told_and_nothing_written(capsys, tmp_path, command):
    chain = tmp_path / "chain.toml"
    chain.write_text("format = 2\n")
    name = tmp_path / {"report": "r.md", "draw": "r.svg"}[command]
    code, out, err = told(capsys, command, chain, "-o", name)
    assert (code, out) == (2, "")
    assert "chain.toml:1:" in err
    assert told(capsys, command, tmp_path / "none.toml")[0] == 2
    assert [path.name for path in tmp_path.iterdir()] == ["chain.toml"]


@pytest.mark.parametrize(
    ("args", "says"),
    [
        (("report", "-o", "x.txt"), "does not end in .md"),
        (("report", "-o", "chain.toml"), "does not end in .md"),
        (("report", "-o", "no/x.md"), "its folder is not there"),
        (("report", "-o", "chain.toml/x.md"), "chain.toml/x.md: the file can't be written"),
        (("report", "-o", "folder.md"), "folder.md: this is a folder"),
        (("report", "--builds", "5"), "belong to --spread"),
        (("report", "--spread", "--builds", "x"), "no whole number"),
        (("report", "--date", "tomorrow"), "is no date"),
        (("draw", "-o", "x.png"), "does not end in .svg"),
        (("draw", "-o", "no/x.svg"), "its folder is not there"),
        (("draw", "--what", "picture"), "invalid choice"),
    ],
)
def test_refusals_say_what_and_how_to_mend_it(capsys, chain, tmp_path, monkeypatch, args, says):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "folder.md").mkdir()
    before = chain.read_bytes()
    code, out, err = told(capsys, args[0], chain, *args[1:])
    assert (code, out) == (2, "")
    assert says in err
    assert "    fix  " in err
    assert chain.read_bytes() == before
    assert {path.name for path in tmp_path.iterdir()} == {"chain.toml", "folder.md"}


def test_a_stopped_spread_writes_no_report(capsys, chain, tmp_path, monkeypatch):
    class Half:
        complete = False

    monkeypatch.setattr(report, "done", lambda request, out: Half())
    code, _, err = told(capsys, "report", chain, "-o", tmp_path / "review.md", "--spread")
    assert (code, err) == (130, "stopped: no review is written\n")
    assert not (tmp_path / "review.md").exists()


def test_a_stream_without_these_characters_gets_them_spelt(tmp_path):
    for words in (("draw", LISTENER), ("report", LISTENER)):
        done = program(*words, PYTHONIOENCODING="ascii")
        assert (done.returncode, done.stderr) == (0, b"")
        assert done.stdout.isascii()
    assert b"1.52 kohm" in done.stdout
