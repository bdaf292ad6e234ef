"""The shell in Textual without a terminal: keys reach the state, and what is painted is what is drawn."""

import pytest
from textual import events

from polebook.tui import keys
from polebook.tui.app import PolebookApp
from polebook.tui.control import jobs, opening
from polebook.tui.draw.screen import screen
from polebook.tui.lines import plain_text
from tests.tui.desk import LISTENER, SIX, copied
from tests.tui.places import PLACES, sample


def event(name):
    """A key as the driver hands it over."""
    character = name if len(name) == 1 else {"space": " ", "escape": "\x1b", "enter": "\r", "tab": "\t"}.get(name)
    return events.Key(name, character)


async def press(pilot, *names):
    """Key events posted one behind the other, as fast as a terminal hands over type-ahead."""
    for name in names:
        pilot.app.post_message(event(name))
    await settled(pilot)


async def settled(pilot):
    await pilot.pause()
    await pilot.pause(0.03)


def painted(app):
    """The screen as Textual has it."""
    return "\n".join(strip.text.rstrip() for strip in app.screen._compositor.render_strips()) + "\n"


def drawn(app):
    return plain_text(screen(app.state, *app.size))


@pytest.mark.parametrize("size", [(80, 24), (140, 45), (40, 10)])
async def test_the_screen_is_what_is_drawn(size):
    app = PolebookApp(opening(str(LISTENER)))
    async with app.run_test(size=size) as pilot:
        await settled(pilot)
        assert painted(app) == drawn(app)
        await press(pilot, "right", "down", "+", "tab", "2", "?")
        assert app.state.view.overlay.purpose == "help"
        assert painted(app) == drawn(app)


async def test_a_story(tmp_path):
    path = copied(tmp_path)
    before = path.read_text(encoding="utf-8")
    app = PolebookApp(opening(str(path)))
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "tab", "2", "enter", "enter", "ctrl+u", "enter")
        assert "c_comp" not in app.state.session.history.text
        await press(pilot, "right", "f", *"Q1.rc", "enter", "3", "k", "9", "enter")
        assert painted(app) == drawn(app)
        await press(pilot, "u", "u")
        assert app.state.session.history.text == before
        await press(pilot, "U", "U", "w", "q")
    assert app.return_code == 0
    after = path.read_text(encoding="utf-8")
    assert "c_comp" not in after and 'rc          = "3k9"' in after


async def test_what_textual_binds_itself_is_not_bound():
    app = PolebookApp(opening(str(LISTENER)))
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "ctrl+p", "f1", "ctrl+backslash", "shift+tab", "ctrl+o")
        assert len(app.screen_stack) == 1
        assert app.state.view.focus == "page"
        await press(pilot, "escape", "+", "ctrl+q")
        assert app.is_running and app.state.view.overlay.purpose == "leave"
        await press(pilot, "ctrl+c")
        assert app.is_running and app.state.view.overlay is None


async def test_esc_and_a_character_at_once_are_two_keys():
    app = PolebookApp(opening(str(LISTENER)))
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "1", "2")
        assert app.state.view.field.typed == "12"
        app.post_message(events.Key("alt+f", None))
        await settled(pilot)
        assert app.state.view.field is None
        assert app.state.view.overlay.purpose == "find"


async def test_paste_goes_into_the_field():
    app = PolebookApp(opening(str(LISTENER)))
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "1")
        app.post_message(events.Paste("0n\n"))
        await settled(pilot)
        assert app.state.view.field.typed == "10n"


async def test_resizing_paints_the_new_size():
    app = PolebookApp(opening(str(SIX)))
    async with app.run_test(size=(80, 24)) as pilot:
        for size in ((20, 5), (140, 45), (1, 1), (80, 24)):
            await pilot.resize_terminal(*size)
            await settled(pilot)
            assert painted(app) == drawn(app)
        await press(pilot, "right")
        assert painted(app) == drawn(app)


@pytest.mark.parametrize("place", PLACES)
async def test_every_key_posted_at_every_place(place, tmp_path):
    """The same matrix as without the shell, through Textual: no key ends the app but those that leave."""
    app = PolebookApp(opening(str(copied(tmp_path))))
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, *PLACES[place])
        begun, over = app.state, app.state.view.overlay
        ends = {"ctrl+z"} | ({"q", "ctrl+q", "ctrl+c"} if begun.session.history.saved else set()) | (
            {"enter", "tab"} if over and over.purpose == "leave" else set())  # the pseudo-terminal has these
        for name in sample(tuple(keys.ACTIONS), place, 4):
            if name not in ends:
                app.call_later(setattr, app, "state", begun)
                app.post_message(event(name))
        await settled(pilot)
        assert app.is_running
        app.state = jobs.stopped(app.state)  # what runs goes on between one look and the next
        app.face.show()
        await settled(pilot)
        assert painted(app) == drawn(app)


async def test_only_rows_that_changed_are_painted():
    app = PolebookApp(opening(str(SIX)))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        asked = set()
        refresh = app.face.refresh
        app.face.refresh = lambda *regions: asked.update(region.y for region in regions) or refresh(*regions)
        before = drawn(app).splitlines()
        await press(pilot, "down")
        assert asked == {row for row, line in enumerate(drawn(app).splitlines()) if line != before[row]}
        assert asked
