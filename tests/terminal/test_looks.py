"""Looks on the wire: colours, characters, modes; and text of a file that tries to be more than text."""

import re
import subprocess
import unicodedata
from contextlib import ExitStack

import pytest

from polebook.tui import setting, styles
from polebook.tui.lines import Span, line
from tests.terminal.pair import Pair
from tests.terminal.probe import ROOT, Terminal, app
from tests.tui.desk import LISTENER, Desk, copied
from tests.tui.places import PLACES

XTERM = ("000000", "cd0000", "00cd00", "cdcd00", "0000ee", "cd00cd", "00cdcd", "e5e5e5",
         "7f7f7f", "ff0000", "00ff00", "ffff00", "5c5cff", "ff00ff", "00ffff", "ffffff")
CONSOLE = ("000000", "aa0000", "00aa00", "aa5500", "0000aa", "aa00aa", "00aaaa", "aaaaaa",
           "555555", "ff5555", "55ff55", "ffff55", "5555ff", "ff55ff", "55ffff", "ffffff")
"""The sixteen colours as two terminals have them by default."""
LOCALE = {"TERM": "xterm", "LANG": "de_DE.UTF-8"}


def sgr(terminal):
    """Every number of every look that was asked for."""
    found = re.findall(rb"\x1b\[([0-9;]*)m", bytes(terminal.log))
    return {number.decode() or "0" for codes in found for number in codes.split(b";")}


def luminance(colour):
    parts = [int(colour[at:at + 2], 16) / 255 for at in (0, 2, 4)]
    red, green, blue = (part / 12.92 if part <= 0.03928 else ((part + 0.055) / 1.055) ** 2.4 for part in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one, other):
    """As WCAG 2 defines it, 1 to 21."""
    low, high = sorted((luminance(one), luminance(other)))
    return (high + 0.05) / (low + 0.05)


def test_every_colour_can_be_read_on_white_and_on_black():
    """3 is what WCAG asks of large text and of graphics; bold text may be shown in the bright colour of its hue."""
    asked = {name: styles.style(name, True) for name in styles.STYLES}
    coloured = {name: look for name, look in asked.items() if look.color is not None}
    assert {"bad", "warn", "good", "select", "moved", "bar"} == set(coloured)
    for name, look in coloured.items():
        assert look.bgcolor is None
        for palette in (XTERM, CONSOLE):
            number = look.color.number
            for shown in {palette[number], palette[number + 8 * (bool(look.bold) and number < 8)]}:
                assert contrast(shown, "ffffff") >= 3 and contrast(shown, "000000") >= 3, (name, shown)


def test_without_colours_an_attribute_tells_what_text_does_not():
    bare = {name: styles.style(name, False) for name in styles.STYLES}
    assert all(look.color is None and look.bgcolor is None for look in bare.values())
    assert bare["focus"].reverse and bare["field"].underline and bare["moved"].underline
    assert all(bare[name].bold for name in ("bad", "warn", "select", "head", "key"))
    assert not any(styles.style(name, colour).italic for name in styles.STYLES for colour in (True, False))


def test_what_moved_is_underlined_without_the_blanks_around_it():
    strip = styles.strip(line("1 ", Span(" +0.2  ", "moved"), Span("    ", "moved"), Span("4  ", "field")), True)
    assert strip.text == "1  +0.2      4  "
    assert [segment.text for segment in strip if segment.style.underline] == ["+0.2", "4  "]


@pytest.mark.parametrize(("environ", "plain"), [
    ({}, False), ({"TERM": "linux"}, True), ({"TERM": "linux-16color"}, True), ({"LANG": "C"}, True),
    ({"LANG": "POSIX"}, True), ({"LANG": "", "LC_ALL": ""}, False), ({"LC_ALL": "C"}, True), ({"LC_CTYPE": "C"}, True),
    ({"LC_ALL": "C.UTF-8", "LANG": "C"}, False), ({"LC_ALL": "de_DE.ISO-8859-1"}, True),
    ({"LC_CTYPE": "ja_JP.eucJP"}, True), ({"LANG": "en_US.utf8"}, False), ({"LANG": "ru_RU.KOI8-R@x"}, True),
    ({"LC_CTYPE": "de_DE.UTF-8", "LANG": "C"}, False), ({"TERM": "vt100"}, False)])
def test_characters_by_the_locale_s_name(environ, plain):
    assert setting.ascii_only(LOCALE | environ) is plain


@pytest.mark.parametrize(("environ", "colours", "console"), [
    ({}, True, False), ({"NO_COLOR": ""}, True, False), ({"NO_COLOR": "0"}, False, False),
    ({"TERM": "vt100"}, False, True), ({"TERM": "vt220"}, False, True), ({"TERM": "xterm-mono"}, False, False),
    ({"TERM": "vte-256color"}, True, False), ({"TERM": "linux"}, True, True), ({"TERM": "tmux-256color"}, True, False),
    ({"TERM": "screen.xterm-256color"}, True, False), ({"TERM": "ansi"}, True, True)])
def test_colours_and_consoles(environ, colours, console):
    assert setting.colours(LOCALE | environ) is colours
    assert setting.console(LOCALE | environ) is console


def test_few_of_sixteen_colours_never_a_ground_and_no_italics(tmp_path):
    """The attributes are bold, dim, underlined and reversed; some terminals show italics as if they were reversed."""
    with ExitStack() as stack:
        begun = []
        for number, env in enumerate(({"COLORTERM": "truecolor", "NO_COLOR": ""}, {"TERM": "linux"},
                                      {"TERM": "screen"}, {"TERM": "vt100"})):
            path = copied(tmp_path, name=f"chain{number}.toml")
            begun.append((env, stack.enter_context(Terminal(app(path), **env))))
        for _, terminal in begun:
            terminal.until("? help")
            terminal.write(b"p\x1b[C++\t2?")
        for env, terminal in begun:
            terminal.until("keys and words")
            terminal.press("escape", "tab")
            colours = set() if env.get("TERM") == "vt100" else {"35", "91", "94"}
            assert sgr(terminal) == {"0", "1", "2", "4", "7"} | colours, env


def test_the_focus_is_seen_without_colours(tmp_path):
    with Terminal(app(copied(tmp_path)), NO_COLOR="1", COLORTERM="truecolor") as terminal:
        terminal.until("? help")
        for keys, shown in ((), "4n7"), (("down",), "56k"), (("tab",), "30.22"), (("f",), "source.kind"):
            terminal.press(*keys, quiet=0.06)
            marked = [cell for row in terminal.cells() for cell in row if cell.reverse]
            assert "".join(cell.data for cell in marked).split()[:1] == [shown] and all(cell.bold for cell in marked)
        assert sgr(terminal) <= {"0", "1", "2", "4", "7"}


def test_a_console_gets_nothing_that_it_would_print(tmp_path):
    """No second screen, no newer keyboard, no paste, no questions; and it is left clear."""
    known = re.compile(rb"\x1b\[(?:[0-9;]*[Hm]|2J|\?(?:7|25)[hl])|[^\x1b\x80-\xff]")
    path = copied(tmp_path)
    with Terminal(app(path), TERM="linux") as terminal:
        terminal.shows(Desk(path, plain=True).screen())
        terminal.press("right", "tab", "q", quiet=0.06)
        assert terminal.ends() == 0
        assert not known.sub(b"", bytes(terminal.log))
        assert not terminal.screen().strip()


FAULT = ("import sys; import polebook.tui.app as app; from polebook.cli.main import main; app.press = None; "
         "sys.exit(main())")


def test_a_fault_of_ours_leaves_the_terminal_as_it_was(tmp_path):
    words = ["sh", "-c", 'echo before; exec "$@"', "sh", app()[0], "-c", FAULT, str(copied(tmp_path))]
    with Terminal(words) as terminal:
        terminal.until("? help")
        terminal.write(b"+")
        assert terminal.ends() == 70
        assert terminal.left == ""
        assert terminal.screen().startswith("before\n") and "EMF" not in terminal.screen()
        assert b"Traceback" not in terminal.log


def test_the_size_and_the_looks_are_the_terminal_s_whatever_the_environment_says(tmp_path):
    desk = Desk(copied(tmp_path))
    with Terminal(app(desk.state.session.path), COLUMNS="132", LINES="50", TEXTUAL_COLOR_SYSTEM="none",
                  TEXTUAL="debug,devtools", TEXTUAL_DRIVER="nothing:Nothing") as terminal:
        terminal.shows(desk.screen())
        terminal.resize(90, 26)
        terminal.shows(desk.screen(90, 26))


def test_reports_that_nobody_asked_for_do_nothing(tmp_path):
    """The mouse in four dialects, the focus, sizes, pastes without a beginning, questions' answers, absurd keys."""
    junk = (b"\x1b[<0;10;10M", b"\x1b[<64;10;10M", b"\x1b[32;10;10M", b"\x1b[M !!", b"\x1b[MC\xc3\xa1q", b"\x1b[I",
            b"\x1b[O", b"\x1b[48;5;20;0;0t", b"\x1b[?2048;2$y", b"\x1b[201~", b"\x1b]11;rgb:0000/0000/0000\x1b\\",
            b"\x1bP>|term 1\x1b\\", b"\x1b[?62;22c", b"\x1b[12;40R", b"\x1b[99999999u", b"\x1b[117;1:3u",
            b"\x1b_Gi=1;OK\x1b\\")
    with Terminal(app(copied(tmp_path))) as terminal:
        pair = Pair(terminal, tmp_path / "chain.toml")
        pair.press("tab")
        terminal.quiet(0.3)
        for one in junk:
            terminal.write(one)
        assert terminal.quiet(0.3).count == 0
        pair.press("right").press(*"2", "?")


BAD = ("[bold]b[/] \\u001b[31mred\\u001b]0;owned\\u0007 \u202eback\u202c \u2066iso\u2069 a\u0301e\u0301 "
       "\u200bzero \u200djoined \u6f22\u5b57\uff57 \U0001f600 \U0001f44d\U0001f3fd \U0001f39b\ufe0f "
       "\U0001f1e9\U0001f1ea \u0085c1\u009b31m \u1161\u1100 \ufeff\U0001fae8")
HIDDEN = re.compile("\\x1b(?!\\[)|\x1b\\[31|[\u0080-\u009f\u202a-\u202e\u2066-\u2069\u200b-\u200f\ufe0f\ufeff\u1161"
                    "\U0001f3fd\U0001f1e9\U0001fae8]")


def hostile(folder):
    """A chain with such a text in every place that has one, under a name of the same kind."""
    text = LISTENER.read_text(encoding="utf-8").replace('"Wire-break listener"', f'"{BAD}"')
    text = text.replace('"""\n', f'"""\n{BAD}\n', 1)
    comment = BAD.replace("\\u001b", "").replace("\\u0007", "")
    text = text.replace('stray       = "2p"\n', f'stray       = "2p"  # {comment}\nnote = "{BAD}"\n', 1)
    path = folder / "a\x1b[31m\nb\u202e\x9b漢[red].toml"
    path.write_text(text, encoding="utf-8")
    return path


def test_text_of_the_file_is_shown_and_never_interpreted(tmp_path):
    """And it keeps its place: the emulator's screen is the drawing, cell for cell."""
    path = hostile(tmp_path)
    desk = Desk(path, seconds=0.01)
    with Terminal(app(path), 100, 30, NO_COLOR="1") as terminal:
        pair = Pair(terminal, desk, lambda: unicodedata.normalize("NFC", desk.screen(100, 30)))
        for place in ("leave", "file", "card", "note", "working", "cautions", "find", "sheets", "help", "card list"):
            pair.press(*PLACES[place]).press("escape").press("escape").press("escape", "escape")
        pair.press("e").press(*["down"] * 11)
        assert "[31mred]0;owned \\u202eback\\u202c" in terminal.screen()
        log = bytes(terminal.log).decode("utf-8")
        assert "[bold]b[/] \\x1b[31mred\\x1b]0;owned\\x07" in log
        assert not HIDDEN.search(log)
    text = path.read_text(encoding="utf-8")
    path.write_text(text.replace('"VF"', '"V\\u202eF\\u001b[31m"') + '"\x1b[31m\u202e" = "\x9b"', encoding="utf-8")
    with Terminal(app(path), 100, 30, NO_COLOR="1") as terminal:
        terminal.until("fault")
        terminal.press("!", "down", "e", quiet=0.1)
        assert not HIDDEN.search(bytes(terminal.log).decode("utf-8"))


@pytest.mark.parametrize("command", [[], ["show"], ["set", "Q1.rc", "x"]])
def test_a_file_s_name_is_shown_and_never_interpreted(tmp_path, command):
    path = tmp_path / "no\x1b[31m\n\u202e\x9b.toml"
    words = [*app(), *command[:1], str(path), *command[1:]]
    if not command:
        path.mkdir()
    run = subprocess.run(words, check=False, capture_output=True, text=True, encoding="utf-8", timeout=20,
                         env={"PYTHONPATH": str(ROOT / "src")})
    assert run.returncode == 2
    assert "no\\x1b[31m\\n\\u202e\\x9b.toml" in run.stderr
    assert not HIDDEN.search(run.stderr) and not run.stdout
