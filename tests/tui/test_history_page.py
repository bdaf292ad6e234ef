"""Page 0 with a scratch repository: rows, what is told of them, baselines, posts; and the thread that finds it out."""

import asyncio
import shutil
import time
from dataclasses import replace
from datetime import date

import pytest

from polebook.record.post import post, posts
from polebook.record.posted import Post
from polebook.record.posted_names import record_of
from polebook.record.revisions import Revision
from polebook.tui.draw.screen import screen
from polebook.tui.historian import Historian
from polebook.tui.histories import Known, Text, _merged, _posts, _revisions, rows, wish
from tests.record.test_revisions import call
from tests.tui.desk import LISTENER, Desk
from tests.tui.drawn import faults
from tests.tui.history_told import TODAY, worked

pytestmark = pytest.mark.skipif(shutil.which("git") is None, reason="there is no git here")


@pytest.fixture(scope="module")
def repository(tmp_path_factory):
    """Three commits of the listener; between the first and the second it is posted twice."""
    folder = tmp_path_factory.mktemp("beside")
    path = folder / "chain.toml"
    text = LISTENER.read_text(encoding="utf-8")
    call(folder, "init", "-q", "-b", "main")
    path.write_text(text, encoding="utf-8")
    call(folder, "add", ".")
    call(folder, "commit", "-q", "-m", "As\x1b[31m drawn")
    post(path, text, "as \x1b built", date(2026, 5, 3))
    text = text.replace('"4p7" ', '"1p5" ')
    post(path, text, "less compensation", date(2026, 5, 5))
    path.write_text(text, encoding="utf-8")
    call(folder, "commit", "-q", "-a", "-m", "Less compensation")
    path.write_text(text + "\nno table\n", encoding="utf-8")
    call(folder, "commit", "-q", "-a", "-m", "A slip")
    path.write_text(text, encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def listed(repository):
    """A desk at the page with all of it known."""
    return worked(Desk(repository).press("tab", "0"))


@pytest.fixture
def desk(listed):
    return listed.again()


def names(desk):
    return [row.name for row in rows(desk.state)]


def at(desk, name):
    """The desk at the row of that name, its figures there."""
    desk.press("home", *["down"] * names(desk).index(name))
    return worked(desk)


def revision(desk, subject):
    return next(row.name for row in rows(desk.state) if row.text == subject)


def test_rows_by_date_with_what_has_the_same_chain(desk):
    found = rows(desk.state)
    slip, less, drawn = (revision(desk, text) for text in ("A slip", "Less compensation", "As\x1b[31m drawn"))
    assert names(desk) == ["now", "post 1", slip, less, drawn, "post 2"]
    same = {row.name: row.same for row in found}
    assert same["now"] == ("post 1", less) and same["post 1"] == ("now", less) and same["post 2"] == (drawn,)
    assert same[slip] == () and found[2].digest == ""
    shown = desk.screen()
    assert "2 posts   3 revisions" in shown and "as it is saved, posted" in shown
    assert "\x1b" not in desk.press("end").screen()


def test_before_anything_is_known_the_page_says_that_it_looks(repository):
    desk = Desk(repository).press("tab", "0")
    assert "looking for posts and revisions" in desk.screen()
    assert wish(desk.state).listing is not None
    assert wish(Desk(repository).state) is None  # nothing is asked before the page is opened


def test_a_revision_then_and_now_and_what_changed(desk):
    drawn = revision(desk, "As\x1b[31m drawn")
    shown = at(desk, drawn).screen()
    assert f"{drawn} of 2026-05-04" in shown and "c_comp of Q2: 4p7 to 1p5" in shown
    row = next(line for line in shown.splitlines() if line.startswith(" upper "))
    assert row.split()[1:4] == ["400", "kHz", "short"] and "+" in row
    assert "changed since" in desk.press("v").screen() and "then" not in desk.screen()


def test_a_revision_is_the_baseline_of_every_page_until_taken_off(desk):
    drawn = revision(desk, "As\x1b[31m drawn")
    at(desk, drawn).press("enter")
    assert f"against {drawn}" in desk.screen().splitlines()[0] and f"● {drawn}" in desk.screen()
    assert desk.state.session.baseline.chain.numbers["Q2.c_comp"] == pytest.approx(4.7e-12)
    assert f"{drawn} " in desk.press("3").screen() and f"against {drawn}" in desk.screen().splitlines()[-2]
    desk.press("0", "enter")
    assert desk.state.session.baseline is None and "against" not in desk.screen().splitlines()[0]
    assert "is the baseline no more" in desk.view.message


def test_a_revision_that_is_not_solved_yet_becomes_the_baseline_when_it_is(desk):
    desk.press("home", *["down"] * 4)
    assert "as soon as it is solved" in desk.press("enter").view.message
    desk.press("1")
    assert desk.state.session.baseline is None and desk.view.past.take
    worked(desk)
    assert desk.view.page == "ledger" and desk.state.session.baseline is not None and not desk.view.past.take


def test_a_revision_with_faults_says_so(desk):
    at(desk, revision(desk, "A slip"))
    assert "no figures" in desk.screen()
    assert "has no figures" in desk.press("enter").view.message and desk.view.bad
    assert desk.state.session.against is None


def test_a_post_is_a_baseline_of_figures_and_names_who_has_curves(desk):
    drawn = revision(desk, "As\x1b[31m drawn")
    at(desk, "post 2").press("enter")
    assert desk.view.message == f"post 2 of 2026-05-03 is the baseline; {drawn} has its curves"
    assert "against post 2" in desk.screen().splitlines()[0]
    for digit, needs in (("3", "no curves"), ("4", "no curves"), ("5", "no curves and shares"),
                         ("6", "no voltages and levels")):
        assert f"post 2 holds figures, {needs}; {drawn} of page 0 has them" in desk.press(digit).screen(), digit
    shown = desk.press("1").screen()
    assert "holds figures" not in shown and "against post 2 of 2026-05-03" in shown
    assert any("+" in line for line in shown.splitlines() if line.startswith("   total"))
    assert "baseline no more" in desk.press("p").view.message and desk.state.session.against is None


def test_of_one_day_a_post_stands_behind_the_commit_that_holds_it():
    def revision_(at, day):
        return Revision(f"{at:040x}", f"{day}T12:00:00+02:00", "", "x", f"{at}", False)

    there = tuple(revision_(at, "2026-05-04") for at in (3, 2, 1))
    texts = {f"{at}": Text("", f"{at}" * 64) for at in (1, 2, 3)}
    made = tuple(replace(_post(), date=date(2026, 5, 4), digest=f"{at}" * 64) for at in (9, 2))
    known = Known((1, None), made, None, there, None, texts)
    found = [row.digest[:1] for row in _merged(_posts(known), _revisions(known))]
    assert found == ["9", "3", "2", "2", "1"]
    assert [row.name for row in _merged(_posts(known), [])] == ["post 1", "post 2"]


def _post():
    return Post(TODAY, "", "", "", {})


@pytest.fixture
def alone(tmp_path):
    """The listener with no repository around it."""
    path = tmp_path / "chain.toml"
    path.write_text(LISTENER.read_text(encoding="utf-8"), encoding="utf-8")
    return path


def test_a_post_from_the_app_is_there_at_once_and_the_same_again_is_none(alone):
    desk = worked(Desk(alone).press("tab", "0"))
    assert "no post" in desk.screen() and "git: there is no git repository" in desk.screen().replace("\n ", " ")
    desk.press("P").type("why é").press("enter")
    assert desk.view.overlay is None and "posting" in desk.screen()
    worked(desk)
    (made,) = posts(alone)
    assert (made.message, made.date) == ("why é", TODAY)
    assert "post 1" in names(desk) and desk.view.message.startswith("posted in chain.posted.toml")
    assert "why é" in desk.screen() and rows(desk.state)[1].key == desk.view.past.row
    worked(desk.press("P", "enter"))
    assert "nothing to post" in desk.view.message and len(posts(alone)) == 1
    worked(desk.press("P").type("another").press("enter"))
    assert [one.message for one in posts(alone)] == ["another", "why é"] and names(desk) == ["now", "post 1", "post 2"]


def test_a_post_that_is_the_baseline_keeps_its_name_true_as_others_come(alone):
    desk = worked(Desk(alone).press("tab", "0", "P").type("one").press("enter"))
    desk.press("enter")
    assert desk.state.session.against.short == "post 1"
    worked(desk.press("P").type("two").press("enter"))
    assert desk.state.session.against.short == "post 2" and "against post 2" in desk.screen().splitlines()[0]


def test_what_can_be_posted_and_what_is_to_be_done_first(alone):
    desk = Desk(alone)
    assert "w writes the file" in desk.press("tab", "0", "tab", "+", "P").view.message and desk.overlay is None
    desk.press("u")
    state = desk.state
    for session in (replace(state.session, read_only="its folder is not yours"), replace(state.session, held="by x")):
        desk.state = replace(state, session=session)
        assert "nothing can be posted" in desk.press("P").view.message and desk.overlay is None
    desk.state = replace(state, session=replace(state.session, ledger=None))
    assert "no figures to post" in desk.press("P").view.message
    desk.state = state
    desk.press("P").paste("two\nlines").press("left", "!")
    assert desk.overlay.typed == "two line!s" and desk.press("escape").overlay is None
    assert not desk.view.past.post


def test_a_record_at_fault_is_told_by_its_line(alone):
    with open(record_of(alone), "w", encoding="utf-8") as file:
        file.write('format = 1\nchain = "chain.toml"\n\n[post]\ndate = "never"\n')
    desk = worked(Desk(alone).press("tab", "0"))
    assert "record, line 5: " in desk.screen()
    worked(desk.press("P", "enter"))
    assert desk.view.message.startswith("not posted: ") and desk.view.bad


def test_what_comes_meanwhile_is_seen_when_asked_when_written_and_when_opened_again(alone):
    desk = worked(Desk(alone).press("tab", "0"))
    post(alone, alone.read_text(encoding="utf-8"), "by another hand", TODAY)
    assert wish(desk.state) is None
    assert "post 1" in names(worked(desk.press("s")))
    assert wish(desk.press("1", "0").state).listing is not None
    worked(desk)
    desk.press("tab", "+", "w")
    assert wish(desk.state).listing is not None
    assert "as it is saved, other than post 1" in worked(desk).screen(140, 45)


def test_git_that_does_not_answer_is_told_in_words(repository, monkeypatch):
    monkeypatch.setattr("polebook.record.git.shutil.which", lambda name: None)
    shown = worked(Desk(repository).press("tab", "0")).screen()
    assert "git: there is no git program" in shown and "post 2" in shown


@pytest.mark.parametrize("size", [(80, 24), (140, 45), (60, 16), (61, 30), (200, 60)])
@pytest.mark.parametrize("plain", [False, True], ids=["unicode", "ascii"])
def test_every_row_is_drawn_at_every_size(listed, size, plain):
    desk = listed.again()
    desk.state = replace(desk.state, plain=plain)
    for _ in names(desk):
        worked(desk)
        assert not faults(desk.state, *size, screen(desk.state, *size))
        desk.press("v", "down")


def test_the_thread_finds_it_all_out_and_keys_do_not_wait(repository, monkeypatch):
    from polebook.tui import historian

    real, slow = historian.answer, []

    def waiting(wanted, today):
        time.sleep(0.05)
        slow.append(wanted)
        return real(wanted, today)

    monkeypatch.setattr(historian, "answer", waiting)

    async def shell():
        desk, faults_ = Desk(repository, seconds=0.01), []
        history = Historian()

        def change(work):
            desk.state = work(desk.state)
            history.see(desk.state)

        history.begin(asyncio.get_running_loop(), desk.state, change, faults_.append)
        begun = time.perf_counter()
        for key in ("tab", "0", "down", "down"):
            desk.press(key)
            history.see(desk.state)
        assert time.perf_counter() - begun < 0.05 and not slow
        for _ in range(400):
            await asyncio.sleep(0.02)
            if len(slow) >= 2 and wish(desk.state) is None:
                break
        assert not faults_ and wish(desk.state) is None and len(names(desk)) == 6
        history._ashore.broken(ValueError("ours"))
        await asyncio.sleep(0.02)
        assert [str(one) for one in faults_] == ["ours"]

    asyncio.run(shell())
