"""The page as a reader has it: what is printed comes to what is printed, to its last digit; and it fits."""

import re

import pytest

from polebook.report.look import Look, cells
from polebook.report.working import figure, names, working
from tests.working.arithmetic import printed, read
from tests.working.chains import DEMOS, NAMES, every

EVERY = 5  # of the figures of a chain, one in so many is read, each chain beginning with another


def blocks(page):
    """The expressions of a page, each as one line: what is set off by three spaces, its broken lines joined."""
    found = []
    for block in page.split("\n\n"):
        lines = block.split("\n")
        if lines[0].startswith(" source: ") or re.match(r" [^ ]+ +-?[0-9]", lines[0]):
            continue  # what is published, and the table of numbers
        joined = ""
        for line in lines:
            if line.startswith("   "):
                joined += ("" if joined.endswith("·") or not joined else " ") + line.strip()
        if joined:
            found.append(joined)
    return found


def number_of(page, symbol):
    """The value that the page prints beside a symbol."""
    found = re.search(rf"^ {re.escape(symbol)} +(-?[0-9][^ ]*(?: [^ ]*)?)  ", page, re.MULTILINE)
    assert found, symbol
    return found[1]


def plain(text):
    """A printed figure without a unit that is no single word."""
    value, _, unit = text.partition(" ")
    return text if unit.isalpha() else value


def check(one, page):
    """Reads every step of a page with the page's own numbers."""
    symbols = {n.symbol: printed(plain(number_of(page, n.symbol))) for n in one.numbers}
    told = [block for block in blocks(page) if " = " in block and block != one.formula]
    told = told[len(told) - len(one.steps) :]
    assert len(told) == len(one.steps)
    for step, block in zip(one.steps, told, strict=True):
        if step.must:
            left, must, *rest = re.split(r" = |; ", block)
            put_in, result = must[len(step.must) :].strip() or left, rest[0]
            assert left == step.text
            exact = read(left, symbols)
            assert abs(exact.value - read(step.must, symbols).value) <= exact.off + abs(step.must_value or 1) * 1e-5
        else:
            symbol, text, *rest = block.split(" = ")
            assert (symbol, text) == (step.symbol, step.text)
            put_in, result = (rest or [text])[0], (rest or [text])[-1]  # a number alone is not said twice
        result = printed(plain(result))
        for expression, known_values in ((step.text, symbols), (put_in, None)):
            found = read(expression, known_values)
            assert abs(found.value - result.value) <= 1.01 * (found.off + result.off), (one.figure, expression)
        symbols[step.symbol] = result
        if step.result:
            assert figure(one.value, one.unit) == figure(step.value, step.unit)


@pytest.mark.parametrize("name", NAMES)
def test_what_is_printed_comes_to_what_is_printed(name):
    shown = [one for one in every(name).values() if one.value is not None][NAMES.index(name) % EVERY :: EVERY]
    assert len(shown) > 4
    for one in shown:
        page = working(one.document(), "a chain", f"{name}.toml", Look())
        assert max(map(cells, page.split("\n")[2:])) <= 80, one.figure
        assert "…" not in page
        check(one, page)


@pytest.mark.parametrize("name", DEMOS)
def test_every_page_of_a_demo_chain_fits_in_80_columns_and_in_ascii(name):
    look = Look(encoding="ascii")
    for one in every(name).values():
        page = working(one.document(), "a chain", f"{name}.toml", look)
        assert page.isascii(), one.figure
        assert max(map(len, page.split("\n"))) <= 80, (one.figure, page)
        assert "\\" not in page, one.figure


def test_a_null_figure_prints_why():
    page = working(every("wire-break-listener")["Q1.transfer_ohm"].document(), "a chain", "chain.toml", Look())
    assert " Q1.transfer_ohm = –\n" in page
    assert "It is null: Q1 does not hold its input node" in page
    assert "source" not in page


def test_figures_have_six_digits_and_no_idle_zeros():
    assert figure(4.7e-12, "F") == "4.7 pF"
    assert figure(-34.43993, "") == "-34.4399"
    assert figure(1e6, "Hz") == "1 MHz"
    assert figure(999999.6, "Hz") == "1 MHz"
    assert figure(123456.7, "") == "123457"
    assert figure(1.5e-7, "") == "1.5e-7"
    assert figure(-2.0e9, "rad/s") == "-2e9 rad/s"
    assert figure(0.0, "V") == "0 V"
    assert figure(3.0103, "dB") == "3.0103 dB"
    assert figure(True, "") == "yes"
    assert figure(None, "V") == "–"
    assert figure(float("inf"), "V") == "–"


def test_the_names_are_listed_by_owner():
    page = names(["Q1.gain", "Q1.rc.value", "Q1.rc.leverage.gain", "poles.1.hz"], Look())
    assert page == " Q1  gain\n Q1.rc  value leverage.gain\n poles.1  hz\n"


def test_colour_changes_no_text():
    one = every("wire-break-listener")["n1.pole_hz"]
    bare = working(one.document(), "a chain", "chain.toml", Look())
    painted = working(one.document(), "a chain", "chain.toml", Look(colour=True))
    assert painted != bare
    assert re.sub(r"\x1b\[[0-9;]*m", "", painted) == bare
