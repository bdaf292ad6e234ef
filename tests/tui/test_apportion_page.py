"""The apportion page's keys: what may change and what is favoured, a run, its plan taken in, and what makes it old."""

from dataclasses import replace

import pytest

from polebook.plan.apportion.goals import FAVOURS
from polebook.report.apportion import plan_lines
from polebook.report.look import Look
from polebook.session import state as sessions
from polebook.tui import apportion_apart, apportions, spread_apart
from polebook.tui.apportions import asked, chosen, known, rows, standing
from tests.book.verdict_cases import CASES
from tests.tui.apportion_told import here
from tests.tui.desk import LISTENER, SIX, Desk

TEXT = LISTENER.read_text(encoding="utf-8")
MARKED = TEXT.replace('re          = "47"', 'free = ["rc", "re", "c_comp"]\nre          = "47"')
BLOCK = ('format = 1\n[source]\nkind = "voltage"\nresistance = "50"\n[[stage]]\nname = "B1"\nkind = "block"\n'
         'gain = "10"\nrin = "10k"\nrout = "50"\n[load]\nresistance = "10k"\n[target]\ngain = "30 dB"\n')


@pytest.fixture(autouse=True)
def no_process(monkeypatch):
    here(monkeypatch)


def page(text=TEXT):
    """A desk at the page, nothing run yet."""
    desk = Desk(LISTENER)
    if text != TEXT:
        desk.state = replace(desk.state, session=sessions.new_session("x.toml", text))
    return desk.press("tab", "9")


def aimed(**targets):
    """The listener with other targets."""
    session = sessions.new_session("x.toml", TEXT)
    for name, typed in targets.items():
        session = sessions.set_value(session, f"target.{name}", typed, 0.0)
    return session.history.text


def found(text=TEXT, *keys):
    return page(text).press(*keys, "s").work()


def moved(desk):
    return {row.path: row.key["text"] for row in rows(desk.state) if row.key is not None}


def head(desk):
    return desk.screen().splitlines()[5]


def test_before_a_run_it_shows_what_may_change_how_the_targets_stand_and_the_key_that_begins():
    desk = page()
    shown = desk.screen()
    assert head(desk) == " 18 keys may change: every part that is fitted   nothing favoured"
    for text in ("18/18 free", "● Q1.couple", "upper", "400k missed", "59.77 met", "Enter looks for values",
                 "Enter run   Space choose   v V favour"):
        assert text in shown, text
    assert desk.press("=").view.message == "there is no plan to account for: s looks for one"


def test_the_listener_is_mended_by_keys():
    desk = page().press("enter")
    assert desk.state.job.page == "apportion" and "begins" in head(desk) and "Esc stop" in desk.screen()
    desk.work()
    assert desk.state.job is None and moved(desk) == {"Q2.c_comp": "0"}
    assert head(desk) == " all targets are met   1 value moves"
    assert desk.view.message == "24 trials from 1 start: Enter puts 1 value in as one edit"
    assert (desk.key, desk.text) == ("Q2.c_comp", TEXT)
    shown = desk.screen()
    for text in ("Q2.c_comp", "not there", " 400k    1.20M met", "rise time", "Enter accept"):
        assert text in shown, text
    before = desk.state.session
    desk.press("enter")
    session = desk.state.session
    assert len(session.history.past) == len(before.history.past) + 1
    assert session.history.past[-1].edit.label == "apportioned: 1 value"
    assert all(target.met for target in session.ledger.targets)
    assert session.ledger.upper_hz == pytest.approx(1.2045e6, rel=1e-3)
    assert "# put in when the first board sang on the bench" in desk.text
    assert desk.view.message == "apportioned: 1 value   lower -400 Hz, upper +800 kHz"
    assert head(desk) == " accepted; u takes it back   all targets are met"
    assert standing(desk.state) == "accepted" and "4p7     0 not there" in desk.screen()
    assert desk.press("u").text == TEXT and standing(desk.state) == "fresh"
    assert desk.press("enter").text == session.history.text


def test_another_edit_makes_it_old_and_enter_looks_again():
    desk = found().press("+")
    edited = desk.text
    assert standing(desk.state) == "old" and edited != TEXT
    assert head(desk) == " of before the edit; s runs it again   all targets are met"
    assert "then proposed" in desk.screen() and "Enter run again" in desk.screen()
    assert desk.press("enter").state.job is not None and desk.text == edited
    desk.work()
    assert standing(desk.state) == "fresh" and moved(desk) == {"Q2.c_comp": "0"}


def test_after_accepting_enter_looks_on_from_there():
    desk = found().press("enter", "enter").work()
    assert "all targets are met as the file is, nothing has to change" in head(desk)
    assert desk.view.message == "2 trials: no value moves"
    assert desk.press("enter").view.message.startswith("no value moves: v favours a figure")
    assert len(desk.state.session.history.past) == 1


def test_what_is_asked_otherwise_is_not_taken_in_unseen():
    desk = found().press("v")
    assert "next: 18 keys, gain favoured" in head(desk)
    assert desk.press("enter").text == TEXT and desk.state.job is not None
    desk.press("escape", "escape", "V")
    assert head(desk) == " all targets are met   1 value moves" and desk.state.job is None
    assert desk.press("enter").text != TEXT


def test_space_chooses_the_key_of_the_row():
    desk = page().press("down", "space")
    assert desk.view.message == "rb1 of Q1 stays as it is; 17 of 18 may change"
    assert "· Q1.rb1" in desk.screen() and "17/18 free" in desk.screen()
    assert "17 keys may change: as chosen" in head(desk)
    assert asked(desk.state).free == tuple(path for path in known(desk.state).handles if path != "Q1.rb1")
    assert desk.press("space").view.message == "rb1 of Q1 may change; 18 of 18 may change"
    assert asked(desk.state).free == () and desk.view.apportion.chosen is None


def test_a_stage_and_all_at_once():
    desk = page().press("right", "/")
    assert desk.view.message == "Q2 stays as it is; 10 of 18 may change"
    assert {path.partition(".")[0] for path in chosen(desk.state)} == {"Q1", "Q3", "load"}
    assert desk.press("/").view.message == "all of Q2 may change; 18 of 18 may change"
    assert desk.press("*").view.message == "none may change; 0 of 18 may change"
    assert "No key may change: Space lets" in desk.screen()
    assert desk.press("s").state.job is None and desk.view.message.startswith("no key may change")
    desk.press("/", "s")
    assert desk.state.job is not None
    assert {path.partition(".")[0] for path in desk.view.apportion.going.asked.free} == {"Q2"}
    assert desk.press("*").view.message == "all may change; 18 of 18 may change"


def test_what_is_chosen_alone_moves():
    desk = page(aimed(upper="450k")).press("*", *["down"] * 10, "space")
    assert desk.key == "Q2.rc" and asked(desk.state).free == ("Q2.rc",)
    assert set(moved(desk.press("s").work())) == {"Q2.rc"}


def test_what_the_file_calls_free_is_chosen_at_first_and_the_rest_can_be():
    desk = page(MARKED)
    assert chosen(desk.state) == {"Q2.rc", "Q2.re", "Q2.c_comp"} and len(rows(desk.state)) == 18
    assert head(desk) == " 3 keys may change: as the file says   nothing favoured"
    assert "· Q1.couple" in desk.screen()
    assert "Q1.couple" in chosen(desk.press("space").state) and len(chosen(desk.state)) == 4


def test_a_choice_outlives_edits_and_a_stage_that_goes_drops_out_of_it():
    desk = page().press("*", "space", "right", "space")
    assert chosen(desk.state) == {"Q1.couple", "Q2.couple"}
    assert chosen(desk.press("+").state) == {"Q1.couple", "Q2.couple"}
    desk.press("x")
    assert chosen(desk.state) == {"Q1.couple"} and not any(row.owner == "Q2" for row in rows(desk.state))
    assert chosen(desk.press("u").state) == {"Q1.couple", "Q2.couple"}
    desk.press("left", "r", "backspace", "9", "enter")
    assert chosen(desk.state) == {"Q1.couple", "Q9.couple"}
    assert chosen(desk.press("u", "1", "9").state) == {"Q1.couple", "Q2.couple"}
    assert 'free' not in desk.text


def test_favour_goes_through_every_figure_and_none():
    assert list(apportions.FAVOURS) == ["", *FAVOURS]
    desk = page()
    seen = [desk.press(key).view.apportion.favour for key in (*["v"] * len(FAVOURS), ".", "V", ",")]
    assert seen == [*FAVOURS, "", FAVOURS[-1], FAVOURS[-2]]
    assert desk.view.message.startswith(f"{FAVOURS[-2]} is favoured: the most is made of it")
    assert f"{FAVOURS[-2]} favoured" in head(desk)


def test_a_favoured_figure_is_made_the_most_of_and_a_seed_asked_for():
    desk = found(TEXT, "]", "*", *["down"] * 10, "space", *["down"] * 4, "space", "v", "v", "v")
    assert set(moved(desk)) <= {"Q2.rc", "Q2.c_comp"} and head(desk).endswith("upper favoured, seed 2")
    run = desk.view.apportion.run
    assert (run.told["favour"], run.told["seed"]) == ("upper", 2)
    assert run.told["overall"]["after"]["upper_edge_hz"] > 1.2045e6
    assert desk.press("[", "[", "[").view.apportion.seed == 0


def test_esc_stops_and_what_is_found_so_far_is_shown(monkeypatch):
    monkeypatch.undo()

    def none(*_):
        raise OSError(11, "")

    monkeypatch.setattr(apportion_apart, "Apart", none)
    desk = page().press("v", "v", "v", "s").work(40)
    assert " trials, " in head(desk) and "missed so far" in head(desk) and "today so far" in desk.screen()
    desk.press("escape")
    assert desk.state.job is not None and "stopping, with the best so far" in head(desk)
    assert "Esc give it up" in desk.screen()
    desk.work()
    assert desk.state.job is None and desk.view.page == "apportion"
    assert head(desk).startswith(" stopped: the best so far") and desk.view.message.startswith("stopped: ")
    assert desk.view.apportion.run.told["stopped"]
    desk.press("s").work(5).press("escape", "escape")
    assert desk.state.job is None and desk.view.message == "apportioning stopped"
    assert desk.press("escape").view.page == "ledger"


def test_a_run_goes_on_elsewhere_and_other_work_takes_its_place():
    desk = page().press("s", "1", "+", "escape")
    assert desk.state.job is not None and desk.view.page == "ledger"
    desk.work()
    assert desk.view.message.endswith("of before the edit: s runs it again") and standing(desk.state) == "old"
    desk = page().press("s", "8", "s")
    assert desk.state.job.page == "spread" and desk.view.apportion.going is None
    desk.press("escape")
    assert not spread_apart._living


def test_a_plan_for_what_was_asked_before_says_so():
    desk = page().press("s", "v").work()
    assert desk.view.message.endswith("for what was asked before: s runs it again")
    assert "next: 18 keys, gain favoured" in head(desk) and "Enter run again" in desk.screen()


def test_what_can_not_be_favoured_is_told_when_it_is_tried():
    desk = found(TEXT, "V")
    assert desk.view.apportion.favour == "sag" and desk.state.job is None and desk.view.bad
    assert desk.view.message.startswith("apportioning: sag can't be favoured: ")
    assert desk.view.apportion.going is None and "nothing" not in head(desk)


def test_a_field_that_is_open_when_it_ends_stays():
    desk = page().press("s", "tab").go("Q1.rc").press("3").work()
    assert desk.view.field.typed == "3" and desk.key == "Q1.rc" and moved(desk)


@pytest.mark.parametrize(("text", "told"), [
    (TEXT.replace('"2k2"', '"2kk2"'), "there is no chain to plan for: ! tells what is wrong with the file"),
    (TEXT[:TEXT.index("[target]")] + TEXT[TEXT.index("[device"):],
     "a plan has to know what to reach: t sets targets, v favours a figure"),
    (BLOCK, "no part is soldered in: Tab, then Space on a key of the sheet lets it change"),
])
def test_what_keeps_a_run_from_beginning_is_said_on_the_page_and_by_the_key(text, told):
    desk = page(text)
    shown = " ".join(desk.screen().split())
    for key in ("s", "enter"):
        assert desk.press(key).state.job is None and desk.view.message == told
    assert "faults" in shown or told.partition(": ")[2].partition(",")[0] in shown


def test_without_targets_a_figure_is_favoured():
    desk = found(TEXT[:TEXT.index("[target]")] + TEXT[TEXT.index("[device"):], "*", *["down"] * 10, "space", "v")
    assert set(moved(desk)) == {"Q2.rc"} and "the file states no targets" in head(desk)


def test_space_on_the_sheet_lets_any_number_of_the_file_change():
    desk = page(BLOCK)
    assert "Tab, then Space on a key of the sheet" in " ".join(desk.screen().split())
    desk.press("tab").go("B1.gain").press("space")
    assert desk.view.message == "gain of B1 may change; 1 of 1 may change"
    desk.press("s").work()
    assert moved(desk) == {"B1.gain": "32.6"} or set(moved(desk)) == {"B1.gain"}
    assert desk.view.apportion.run.told["met"]
    desk.go("B1.gain").press("space")
    assert desk.view.message == "gain of B1 stays as it is; 0 of 1 may change" and len(rows(desk.state)) == 1
    desk.go("B1.cin").press("space")
    assert desk.view.bad and desk.view.message.startswith("cin of B1 is absent: a plan begins at a value")


def test_a_key_that_the_plan_has_taken_off_can_not_be_chosen():
    desk = found().press("enter")
    assert "17/17 free" in desk.screen()
    desk.press("space")
    assert desk.view.bad and desk.view.message.startswith("c_comp of Q2 is zero: a plan scales what stands")


def test_keys_are_chosen_on_this_page_alone():
    assert Desk(LISTENER).press("space").view.message == "keys are chosen for a plan: 9 is its page"
    assert Desk(LISTENER).press("tab", "8", "space").view.bad


def test_rows_lines_and_the_sheet_go_together():
    desk = page().press("down", "down")
    assert (desk.key, desk.view.focus) == ("Q1.rb2", "page")
    assert desk.view.message == "rb2 of Q1 may change from 1.20 kΩ to 120 kΩ"
    assert desk.press("end").key == "load.couple"
    assert desk.view.message == ""
    assert desk.press("up").key == "Q3.re"
    assert desk.press("left").key == "Q2.couple"
    desk.press("tab").go("Q3.stopper").press("tab", "down")
    assert desk.key == "Q3.re"
    assert desk.press(*["up"] * 99).key == "Q1.couple" and desk.press(*["down"] * 99).key == "load.couple"
    assert desk.press("tab", "*").text != TEXT  # with the sheet focused a decade is one of the value


def test_an_unstable_chain_is_brought_to_life():
    desk = page(CASES["unstable, an op-amp that drives a capacitance"])
    assert "Unstable as it is. Enter looks for" in desk.screen()
    desk.press("s").work()
    assert moved(desk) == {"U1.c_load": "0"} and "24.2M met" in desk.screen()
    assert not desk.press("enter").state.session.ledger.unstable


def test_what_can_not_be_reached_is_told_in_words():
    desk = found(aimed(upper="8M"), "*", *["down"] * 10, "space")
    shown = desk.screen()
    assert head(desk) == " 2 of 4 targets not met   1 value moves"
    assert "400k     434k missed" in shown and "14.1k    14.1k met" in shown
    assert "This is the nearest plan. All others" in shown and "= tells the rest" in shown
    desk.press("=")
    run = desk.view.apportion.run
    assert [f" {text}".rstrip() for text in desk.overlay.text] == [
        text.rstrip() for text in plan_lines(run.told, Look(width=74))]
    words = " ".join(" ".join(desk.overlay.text).split())
    assert "with upper at 432 kHz. Not free, and would better gain: 1 %" in words
    assert desk.press("=").overlay is None
    assert "--write" not in "".join(plan_lines(run.told, Look()))


def test_a_read_only_file_takes_a_plan_as_it_takes_any_edit():
    desk = page()
    desk.state = replace(desk.state, session=replace(desk.state.session, read_only="its folder is not yours"))
    desk.press("s").work().press("enter")
    assert desk.text != TEXT and "read-only" in desk.screen()


def test_a_fault_of_the_file_leaves_the_plan_an_old_one():
    desk = found()
    desk.state = replace(desk.state, session=sessions.set_text(desk.state.session, "format = 1\n", 0.0))
    assert standing(desk.state) == "old" and rows(desk.state) == ()
    assert "of before the edit" in desk.screen()
    assert desk.press("enter").view.message.startswith("there is no chain to plan for")


def test_six_stages_have_all_their_keys():
    desk = Desk(SIX).press("tab", "9")
    assert "34 keys may change" in head(desk) and "All are met as the file is" in desk.screen()
    assert all(row.handle is not None and row.text for row in rows(desk.state))
