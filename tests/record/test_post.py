"""The record of a chain: posts, newest first, in a text whose diff is short; never written over where at fault."""

import difflib
import os
import tomllib
from datetime import date
from functools import cache

import pytest

from polebook import __version__
from polebook.book.asked import Built
from polebook.book.ledger import ledger
from polebook.chain.read import parse
from polebook.problem import ProblemsFound, render
from polebook.record import post as record
from polebook.record import posted_write
from polebook.record.posted import Post, Record
from polebook.record.posted_names import chain_of, record_of
from tests.cli.helpers import CHAINS, LISTENER

FIRST, SECOND, THIRD = (date(2026, 11, day) for day in (3, 17, 30))
TEXT = LISTENER.read_text(encoding="utf-8")
LESS = TEXT.replace('"4p7"', '"1p"')
UNSTABLE = (
    'format = 1\n[supply]\npositive = 5\nnegative = -5\n[source]\nkind = "current"\ncapacitance = "10n"\n'
    '[[stage]]\nname = "U1"\nkind = "transimpedance"\ndevice = "A"\nrf = "1M"\n'
    '[target]\ngain = "1M"\n[device.A]\nfamily = "opamp"\ngbw = "10M"\nf2 = "100k"\n'
)


@cache
def of(text):
    return ledger(parse(text, "chain.toml"))


@pytest.fixture
def file(tmp_path):
    path = tmp_path / "chain.toml"
    path.write_text(TEXT, encoding="utf-8")
    return path


def put(file, text, message, day):
    file.write_text(text, encoding="utf-8")
    return record.post(file, text, message, day, of(text))


def kept(file):
    return (file.parent / "chain.posted.toml").read_text(encoding="utf-8")


def told(call, *args):
    with pytest.raises(ProblemsFound) as caught:
        call(*args)
    (problem,) = caught.value.problems
    assert problem.what and problem.why and problem.fix
    return render(problem, caught.value.text)


def added_and_gone(before, after):
    lines = list(difflib.unified_diff(before.splitlines(), after.splitlines(), n=0, lineterm=""))[2:]
    return [line[1:] for line in lines if line[0] == "+"], [line[1:] for line in lines if line[0] == "-"]


@pytest.mark.parametrize(("chain", "name"), [
    ("a/wire-break-listener.toml", "a/wire-break-listener.posted.toml"), ("a.b.toml", "a.b.posted.toml"),
    ("A.TOML", "A.posted.toml"), ("bare", "bare.posted.toml"), (".toml", ".posted.toml"),
])
def test_the_record_stands_beside_its_chain(chain, name):
    assert record_of(chain) == name


def test_a_record_is_known_by_its_name(tmp_path):
    assert chain_of("a/x.posted.toml") == "a/x.toml"
    assert chain_of("a/x.toml") is chain_of("posted.toml") is None
    bare = tmp_path / "bare"
    bare.write_text("")
    assert chain_of(record_of(bare)) == str(bare)


def test_nothing_is_posted_before_the_first_post(file):
    assert record.posts(file) == ()
    assert record.standing(file, of(TEXT)).state == "none"


def test_a_post_has_all_that_it_says(file):
    done = put(file, TEXT, "  as built ", FIRST)
    assert done.path == str(file.parent / "chain.posted.toml")
    assert done.before is None and done.moved == ()
    (post,) = record.posts(str(file))
    assert post == done.new
    assert (post.date, post.message, post.version) == (FIRST, "as built", __version__)
    assert post.digest == of(TEXT).chain.digest
    assert list(post.figures) == ["overall", "targets", "lines", "account"]
    assert post.figures["targets"]["upper"]["met"] is False
    assert record.standing(file, of(TEXT)).state == "current"


def test_posts_stand_newest_first_and_stay(file):
    first = put(file, TEXT, "as built", FIRST).new
    second = put(file, LESS, "the board does not sing", SECOND)
    assert second.before == first and second.moved
    third = put(file, TEXT, "it did sing", THIRD).new
    assert record.posts(file) == (third, second.new, first)
    assert third.figures == first.figures


def test_the_text_is_canonical(file):
    for text, message, day in ((TEXT, "as built", FIRST), (LESS, "less", SECOND), (UNSTABLE, "", THIRD)):
        put(file, text, message, day)
        posts = record.posts(file)
        assert posted_write.write(Record("chain.toml", posts), "x") == kept(file)
    again = file.parent / "again"
    again.mkdir()
    for text, message, day in ((TEXT, "as built", FIRST), (LESS, "less", SECOND), (UNSTABLE, "", THIRD)):
        (again / "chain.toml").write_text(text)
        record.post(again / "chain.toml", text, message, day)  # ledgers of its own: the same to the byte
    assert kept(again / "chain.toml") == kept(file)


def test_every_figure_is_a_line_that_names_its_stage(file):
    put(file, TEXT, "as built", FIRST)
    lines = kept(file).splitlines()
    assert "Q1.pole_hz = 485409" in lines and "upper.got_hz = 399946" in lines and "upper.want_hz = 1e6" in lines
    assert "Q3.pole_hz = 45.2879e6" in lines and "peaking.got_db = 0" in lines
    assert "source.owns_lower = -0.0005" in lines
    assert max(map(len, lines)) <= 110
    figures = [line for line in lines if " = " in line]
    assert len(figures) == len(list(_leaves(tomllib.loads(kept(file)))))


def _leaves(table):
    for value in table.values():
        if isinstance(value, dict):
            yield from _leaves(value)
        else:
            yield value


def test_the_diff_of_a_part_is_what_moved_and_the_earlier_post(file):
    put(file, TEXT, "as built", FIRST)
    before = kept(file)
    done = put(file, LESS, "c_comp down to 1 pF", SECOND)
    came, gone = added_and_gone(before, kept(file))
    assert "upper.got_hz = 399946" in gone and "upper.got_hz = 859864" in came
    assert 'message = "as built"' in gone and 'message = "c_comp down to 1 pF"' in came
    assert len(gone) == len(done.moved) + 3  # date, message and digest
    rows = sum(len(rows) for rows in done.before.figures.values())
    assert len(came) == len(gone) + rows + 6  # the earlier post: a row a line, its head, a blank line
    assert len(came) + len(gone) < 80
    archived = came[came.index("[[earlier]]"):]
    assert tomllib.loads("\n".join(archived))["earlier"][0]["lines"]["Q1"]["pole_hz"] == 485409


def test_a_note_or_a_comment_changes_no_figure(file):
    put(file, TEXT, "as built", FIRST)
    before = kept(file)
    done = put(file, TEXT.replace("First version", "The first version"), "", SECOND)
    assert done.new is None and done.before.date == FIRST
    assert kept(file) == before


@pytest.mark.parametrize(("message", "posts"), [("", 1), ("as built", 1), (" as built ", 1), ("once more", 2)])
def test_the_same_again_is_posted_only_with_a_message_of_its_own(file, message, posts):
    put(file, TEXT, "as built", FIRST)
    before, stood = kept(file), os.stat(record_of(file)).st_mtime_ns
    done = put(file, TEXT, message, SECOND)
    assert len(record.posts(file)) == posts
    assert (done.new is None) == (posts == 1)
    if posts == 1:
        assert (kept(file), os.stat(record_of(file)).st_mtime_ns) == (before, stood)


def test_a_chain_brought_back_is_posted_again(file):
    for text, day in ((TEXT, FIRST), (LESS, SECOND), (TEXT, THIRD)):
        assert put(file, text, "", day).new


def test_an_unstable_chain_is_posted_as_it_is(file):
    post = put(file, UNSTABLE, "", FIRST).new
    assert post.figures["overall"][""]["state"] == "unstable"
    assert post.figures["targets"] == {"gain": {"want_db": 120.0, "why": "the chain is unstable"}}
    assert post.figures["account"] == {}
    assert "upper_edge_hz" not in kept(file) and 'state = "unstable"' in kept(file)
    assert record.posts(file) == (post,)
    assert record.standing(file, of(UNSTABLE)).state == "current"


def test_a_chain_without_a_midband_or_targets_is_posted_as_it_is(file):
    text = ('format = 1\n[source]\nkind = "voltage"\nresistance = "1k"\n[[stage]]\nname = "L1"\nkind = "ladder"\n'
            'arms = [{ series_c = "1n" }, { shunt_r = "1k" }, { series_r = "1k" }, { shunt_c = "100n" }]\n'
            '[load]\nresistance = "1M"\n')
    post = put(file, text, "", FIRST).new
    assert post.figures["overall"][""]["state"] == "no clean midband"
    assert post.figures["targets"] == {} and "[post.targets]" not in kept(file)
    assert record.posts(file) == (post,)


def test_a_chain_without_figures_is_not_posted(file):
    put(file, TEXT, "as built", FIRST)
    before = kept(file)
    for text in (TEXT.replace('"33"', '"33 F"'), "format = 1\n", "]["):
        with pytest.raises(ProblemsFound):
            record.post(file, text, "", SECOND)
        assert kept(file) == before


def test_a_yield_is_built_where_nobody_has(file):
    text = (CHAINS / "leaf-probe.toml").read_text(encoding="utf-8")
    one = ledger(parse(text, "x"))
    row = record.post(file, text, "", FIRST).new.figures["targets"]["yield"]
    assert row["want_percent"] == 80.0 and 84.0 < row["got_percent"] < 85.0 and row["met"] is True
    assert record.standing(file, one).state == "current"  # nobody has built any of this one: its yield is not judged
    one.hand(Built(0.7, ""))
    assert [moved.name for moved in record.standing(file, one).moved] == [
        "targets.yield.got_percent", "targets.yield.met"]


def test_a_record_is_stale_when_the_file_says_something_else(file):
    put(file, TEXT, "as built", FIRST)
    found = record.standing(file, of(LESS))
    assert (found.state, found.newest.date, found.moved) == ("older", FIRST, ())


@pytest.mark.parametrize(("old", "new", "state", "names"), [
    ("Q1.pole_hz = 485409", "Q1.pole_hz = 485410", "current", []),
    ("Q1.pole_hz = 485409", "Q1.pole_hz = 485411", "otherwise", ["lines.Q1.pole_hz"]),
    ("upper.met = false", "upper.met = true", "otherwise", ["targets.upper.met"]),
    ("Q2.lost_upper_db = 0.5944\n", "", "otherwise", ["lines.Q2.lost_upper_db"]),
    ("peaking_db = 0\n", "peaking_db = 0\nnew_hz = 3\n", "otherwise", ["overall.new_hz"]),
])
def test_a_record_is_stale_when_other_figures_come_out(file, old, new, state, names):
    put(file, TEXT, "as built", FIRST)
    assert old in kept(file)
    (file.parent / "chain.posted.toml").write_text(kept(file).replace(old, new, 1))
    found = record.standing(file, of(TEXT))
    assert (found.state, [one.name for one in found.moved]) == (state, names)
    assert (put(file, TEXT, "", SECOND).new is not None) == (state == "otherwise")


def test_a_figure_that_an_older_version_did_not_keep_says_nothing_against_it(file):
    put(file, TEXT, "as built", FIRST)
    older = kept(file).replace("Q2.lost_upper_db = 0.5944\n", "").replace(f'"{__version__}"', '"0.0.9"')
    (file.parent / "chain.posted.toml").write_text(older)
    assert record.standing(file, of(TEXT)).state == "current"
    assert put(file, TEXT, "", SECOND).new.figures["lines"]["Q2"]["lost_upper_db"] == 0.5944


def _spoilt(text):
    last = text.index("[[earlier]]")
    second = "\n<<<<<<< HEAD\ndate = 2026-11-17\n=======\ndate = 2026-11-16\n>>>>>>> other\n"
    yield "a merge", text.replace("date = 2026-11-17\n", second, 1), "two versions of the record stand here"
    yield "no record", "format = 1\n[source]\nresistance = 1\n", "this is no record of a chain"
    yield "empty", "", "this is no record of a chain"
    yield "no TOML", text[:last] + "[[earlier\n", "posted.toml:"
    yield "format 2", text.replace("format = 1", "format = 2"), "2 is no known format of a record"
    yield "format as a text", text.replace("format = 1", 'format = "1"'), "is no known format"
    yield "another folder", text.replace('"chain.toml"', '"../chain.toml"'), "is no chain"
    yield "no date", text.replace("date = 2026-11-17\n", ""), "the date of a post is missing"
    yield "a time", text.replace("2026-11-17", "2026-11-17T10:00:00"), "the date of a post is missing, or is not a date"
    yield "a short digest", text.replace('digest = "3', 'digest = "'), "the digest of a post is missing"
    yield "no message", text.replace('message = "as built"\n', ""), "the message of a post is missing"
    yield "post as a number", text[: text.index("[post]")] + "post = 3\n" + text[last:], "stands where a table belongs"
    yield "earlier as a table", text.replace("[[earlier]]", "[earlier]"), "this is no list of posts"
    yield "earlier of numbers", text[:last].replace("[post]", "earlier = [1]\n[post]"), "stands where a table belongs"
    yield "a list", text.replace("peaking_db = 0", "peaking_db = [0]", 1), "a list is no figure"
    yield "a date for a figure", text.replace("peaking_db = 0", "peaking_db = 2026-11-17", 1), "is no figure"
    yield "not a number", text.replace("peaking_db = 0", "peaking_db = nan", 1), "nan is no figure"
    yield "infinite", text.replace("peaking_db = 0", "peaking_db = -inf", 1), "-inf is no figure"
    yield "vast", text.replace("peaking_db = 0", f"peaking_db = 1{'0' * 400}", 1), "is no figure"
    yield "a row too flat", text.replace("[post.targets]", "[post.targets]\nupper2 = 3"), "stands where a table belongs"
    yield "a group unknown", text.replace("[post.account]", "[post.weather]\nrain_mm = 3\n[post.account]"), (
        '"weather" has no place in a record')
    yield "a table unknown", text + "\n[later]\n", '"later" has no place in a record'


@cache
def _two():
    """A record of two posts."""
    posts = tuple(record.Post(day, message, of(text).chain.digest, __version__, record_figures(text))
                  for text, message, day in ((LESS, "less", SECOND), (TEXT, "as built", FIRST)))
    return posted_write.write(Record("chain.toml", posts), "x")


def record_figures(text):
    from polebook.record.posted_figures import figures

    return figures(of(text))


@pytest.mark.parametrize("name", [name for name, _, _ in _spoilt(_two())])
def test_a_record_at_fault_is_told_and_never_written_over(file, name):
    text, what = next((text, what) for known, text, what in _spoilt(_two()) if known == name)
    assert text != _two()
    target = file.parent / "chain.posted.toml"
    target.write_text(text, encoding="utf-8")
    for call in ((record.posts, file), (record.standing, file, of(TEXT)), (put, file, TEXT, "again", THIRD)):
        message = told(*call)
        assert what in message and str(target) in message
    assert target.read_text(encoding="utf-8") == text


def test_a_fault_is_told_with_its_line(file):
    target = file.parent / "chain.posted.toml"
    target.write_text(_two().replace("Q1.k = -32.5525", "Q1.k = [1]"), encoding="utf-8")
    line = 1 + target.read_text(encoding="utf-8").splitlines().index("Q1.k = [1]")
    assert f"chain.posted.toml:{line}:4: a list is no figure" in told(record.posts, file)


def test_a_comment_put_in_by_hand_is_not_lost(file):
    target = file.parent / "chain.posted.toml"
    text = _two().replace("upper.met = false", "upper.met = false  # ask the board house", 1)
    assert "board house" in text
    target.write_text(text, encoding="utf-8")
    assert len(record.posts(file)) == 2
    message = told(put, file, TEXT, "again", THIRD)
    assert "a comment stands in the record" in message and "# ask the board house" in message
    assert target.read_text(encoding="utf-8") == text
    target.write_text(_two().replace('message = "less"', 'message = "R7 # 3"'), encoding="utf-8")
    assert put(file, TEXT, "again", THIRD).new  # no comment at all


def test_earlier_posts_may_be_taken_out_by_hand(file):
    target = file.parent / "chain.posted.toml"
    target.write_text(_two()[: _two().index("\n[[earlier]]")], encoding="utf-8")
    put(file, TEXT, "again", THIRD)
    assert [post.message for post in record.posts(file)] == ["again", "less"]


def test_line_ends_stay(file):
    target = file.parent / "chain.posted.toml"
    target.write_bytes(_two().replace("\n", "\r\n").encode())
    put(file, TEXT, "again", THIRD)
    data = target.read_bytes()
    assert data.count(b"\r\n") == data.count(b"\n") > 100
    assert [post.message for post in record.posts(file)] == ["again", "less", "as built"]


@pytest.mark.parametrize("message", [
    'a "quote", a \\ and a # and \t', "two\nlines", "Ω → µ \u202e \x1b[31m \x7f", "<<<<<<< HEAD", "[[earlier]]",
    "x" * 5000, "'''\"\"\"", " ",
])
def test_a_message_comes_back_as_it_was(file, message):
    put(file, TEXT, message, FIRST)
    put(file, LESS, message, SECOND)
    assert [post.message for post in record.posts(file)] == [message.strip()] * 2


def test_a_message_that_no_file_can_hold_is_refused(file):
    assert "half of a character pair" in told(put, file, TEXT, "\udce4", FIRST)
    assert not os.path.lexists(record_of(file))


@pytest.mark.parametrize("leads_to", ["elsewhere.toml", "nowhere.toml", "."])
def test_a_link_is_not_followed(file, leads_to):
    elsewhere = file.parent / "elsewhere.toml"
    elsewhere.write_text(_two())
    os.symlink(leads_to, record_of(file))
    for call in ((record.posts, file), (put, file, TEXT, "x", THIRD), (record.standing, file, of(TEXT))):
        assert "the record is a symbolic link" in told(*call)
    assert elsewhere.read_text() == _two()
    assert not (file.parent / "nowhere.toml").exists()


def test_a_folder_at_its_place_is_told(file):
    os.mkdir(record_of(file))
    assert "this is a folder" in told(put, file, TEXT, "x", FIRST)


def test_two_chains_do_not_share_a_record(file):
    other = file.parent / "chain"
    other.write_text(TEXT)
    put(file, TEXT, "as built", FIRST)
    before = kept(file)
    assert "this is the record of chain.toml, not of chain" in told(put, other, TEXT, "x", SECOND)
    assert kept(file) == before


def test_a_chain_that_was_renamed_takes_its_record_along(file):
    put(file, TEXT, "as built", FIRST)
    renamed = file.rename(file.parent / "sounder.toml")
    os.rename(record_of(file), record_of(renamed))
    assert len(record.posts(renamed)) == 1
    put(renamed, LESS, "less", SECOND)
    assert 'chain = "sounder.toml"' in (file.parent / "sounder.posted.toml").read_text()


def test_a_record_is_no_chain(file):
    put(file, TEXT, "as built", FIRST)
    message = told(record.post, record_of(file), TEXT, "", FIRST)
    assert "this is a record, not a chain" in message and message.endswith(f"name the chain file: {file}")


def test_what_comes_in_meanwhile_is_not_written_over(file, monkeypatch):
    put(file, TEXT, "as built", FIRST)
    target = file.parent / "chain.posted.toml"
    write = posted_write.write

    def meanwhile(*args):
        target.write_text(_two())
        return write(*args)

    monkeypatch.setattr(posted_write, "write", meanwhile)
    assert "the record has changed" in told(put, file, LESS, "less", SECOND)
    assert target.read_text() == _two()


def test_a_full_record_says_how_to_go_on(file):
    (newest, *_) = (put(file, TEXT, "as built", FIRST).new,)
    many = Record("chain.toml", tuple(Post(newest.date, f"{at}", newest.digest, __version__, newest.figures)
                                      for at in range(400)))
    message = told(posted_write.write, many, "chain.posted.toml")
    assert "at most 524288 (512 KiB) are read" in message and "move it away" in message


def test_a_folder_that_is_shut_is_told(file):
    if os.geteuid() == 0:
        pytest.skip("nothing is shut to root")
    os.chmod(file.parent, 0o500)
    try:
        assert "permissions" in told(record.post, file, TEXT, "x", FIRST, of(TEXT))
    finally:
        os.chmod(file.parent, 0o700)


@pytest.mark.parametrize("path", sorted(CHAINS.glob("*.toml")), ids=lambda path: path.stem)
def test_every_demo_chain_has_a_short_post(path, tmp_path):
    file = tmp_path / path.name
    text = path.read_text(encoding="utf-8")
    post = record.post(file, text, "", FIRST, ledger(parse(text, str(file)))).new
    assert record.posts(file) == (post,)
    lines = (tmp_path / f"{path.stem}.posted.toml").read_text().splitlines()
    assert len(lines) <= 50 + 9 * len(post.figures["lines"])
