"""What is written beside a chain is known again, and what others have put there stays."""

import os

import pytest

from polebook.problem import ProblemsFound
from polebook.record.documents import check, intact, marked, save

TEXT = "# Title\n\nWords.\n"
XML = '<?xml version="1.0" encoding="UTF-8"?>\n<svg/>\n'


def told(*names, chain="chain.toml", force=False):
    with pytest.raises(ProblemsFound) as found:
        check([str(name) for name in names], str(chain), force)
    return [problem.what for problem in found.value.problems]


@pytest.mark.parametrize("text", [TEXT, XML, ""])
def test_a_marked_text_is_known_again(text):
    done = marked(text, "report")
    assert intact(done) and not intact(text)
    assert intact(done.replace("\n", "\r\n"))
    assert done.replace(done.splitlines(keepends=True)[done.startswith("<?xml")], "") == text


def test_the_mark_of_xml_stands_behind_its_declaration():
    assert marked(XML, "draw").splitlines()[0] == XML.splitlines()[0]


@pytest.mark.parametrize("edit", [lambda s: s + "remark\n", lambda s: s.replace("Words", "words"), lambda s: s[:-1],
                                  lambda s: "x\n" + s])
def test_an_edited_text_is_not_intact(edit):
    assert not intact(edit(marked(TEXT, "report")))


def test_new_names_and_own_documents_may_be_written(tmp_path):
    own = tmp_path / "own.md"
    save({str(own): marked(TEXT, "report")})
    check([str(own), str(tmp_path / "new.md")], "chain.toml", False)
    assert own.read_text(encoding="utf-8") == marked(TEXT, "report")


def test_what_others_wrote_or_edited_stays_unless_forced(tmp_path):
    other, edited, binary = tmp_path / "other.md", tmp_path / "edited.md", tmp_path / "b.svg"
    other.write_text("mine")
    edited.write_text(marked(TEXT, "report") + "remark")
    binary.write_bytes(b"\xff\xfe\x00")
    assert told(other, edited, binary) == ["there is another file of that name",
                                           "this document was edited after it was written",
                                           "there is another file of that name"]
    check([str(other), str(edited), str(binary)], "chain.toml", True)


def test_the_chain_itself_is_never_written_over(tmp_path):
    chain = tmp_path / "chain.md"
    chain.write_text("format = 1")
    link = tmp_path / "link.md"
    link.symlink_to(chain)
    assert told(link, chain=chain, force=True) == ["this is the chain itself"]


@pytest.mark.parametrize(("name", "what"), [
    ("no/x.md", "the file can't be written"), ("file/x.md", "the file can't be written"),
    ("folder.md", "this is a folder")])
def test_a_place_where_nothing_can_be_written_is_told_before_anything_is(tmp_path, name, what):
    (tmp_path / "folder.md").mkdir()
    (tmp_path / "file").write_text("")
    assert told(tmp_path / name, force=True) == [what]


def test_a_folder_that_takes_no_files_is_told(tmp_path, monkeypatch):
    monkeypatch.setattr(os, "access", lambda path, mode: os.path.realpath(path) != os.path.realpath(tmp_path))
    assert told(tmp_path / "x.md") == ["the file can't be written"]


def test_a_name_that_no_file_can_have_is_told_by_the_saving():
    check(["nul\0.md"], "chain.toml", False)
    with pytest.raises(ProblemsFound, match="NUL"):
        save({"nul\0.md": TEXT})
