"""Every figure of every chain has a working, and its text comes to the figure, evaluated apart from the program."""

import math
import re
from pathlib import Path

import pytest

from polebook.book.working import names, working
from tests.working.arithmetic import Rough, read
from tests.working.chains import NAMES, every, known, told

NEAR = 1e-11  # of the sizes that a result is made of
SECTIONS = ("lines", "nodes", "parts", "cards", "bias", "targets", "poles", "zeros", "rails", "levels")
FALLBACK = "out of the whole d.c. network at once"


def figures(value, path=()):
    """Every number, truth and null of a document with the keys that lead to it; words and what names a row not."""
    if isinstance(value, dict):
        for key, item in value.items():
            yield from figures(item, (*path, key))
    elif isinstance(value, list):
        for at, item in enumerate(value):
            yield from figures(item, (*path, at))
    elif not isinstance(value, str):
        yield path, value


def figure_name(document, path):
    """The name of a leaf by the rules of the JSON, put together here anew; "" for what is no figure."""
    section, rest = path[0], path[1:]
    if section == "overall":
        return f"overall.{rest[0]}" if rest[0] not in ("clips_first",) else ""
    if section == "account":
        return f"account.{rest[0]}.{rest[1]}"
    if section not in SECTIONS or not rest:
        return ""
    row, keys = document[section][rest[0]], rest[1:]
    if keys[0] == "bridges":
        return f"{row['name']}.{row['bridges'][keys[1]]['part']}.{keys[2]}"
    if keys[0] in ("role", "interstage", "from", "stage", "clips_by"):
        return ""
    owner = {
        "lines": lambda: row["name"],
        "nodes": lambda: row["name"],
        "parts": lambda: f"{row['stage']}.{row['part']}",
        "cards": lambda: f"device.{row['device']}.{row['figure']}",
        "bias": lambda: f"bias.{row['stage']}",
        "targets": lambda: f"target.{row['name']}",
        "rails": lambda: f"rail.{row['rail']}",
        "levels": lambda: row["node"],
    }.get(section, lambda: f"{section}.{rest[0] + 1}")()
    return f"{owner}.{'.'.join(map(str, keys))}"


@pytest.mark.parametrize("name", NAMES)
def test_every_figure_of_the_document_has_its_working(name):
    document, workings = told(name), every(name)
    leaves = {figure_name(document, path): value for path, value in figures(document)}
    leaves.pop("", None)
    assert set(leaves) == set(workings)
    assert len(leaves) > 60
    assert names(known(name)) == list(workings)
    for figure, value in leaves.items():
        one = workings[figure]
        assert one.value == value, figure
        assert one.about, figure
        if value is None:
            assert len(one.why) > 15 and not one.why.endswith("."), figure
            assert not one.numbers and not one.steps, figure
        else:
            assert one.formula and one.source and not one.why, figure
            assert one.steps or one.note, figure
            assert FALLBACK not in one.note, figure


@pytest.mark.parametrize("name", NAMES)
def test_the_text_of_every_working_comes_to_its_figure(name):
    for figure, one in every(name).items():
        symbols = {number.symbol: Rough(number.value, abs(number.value) * NEAR) for number in one.numbers}
        assert len(symbols) == len(one.numbers), figure
        shown = 0
        for step in one.steps:
            found = read(step.text, symbols)
            room = max(found.off, NEAR * abs(found.value))
            if step.must:
                wanted = read(step.must, symbols)
                shown += 1
                assert abs(found.value - wanted.value) <= max(1e-9 * abs(wanted.value), 1e-9, 10 * room), figure
                continue
            symbols[step.symbol] = Rough(step.value, room)
            assert abs(found.value - step.value) <= room, (figure, step.symbol)
            if step.result:
                shown += 1
                assert abs(step.value - one.value) <= max(100 * room, 1e-9 * abs(one.value)), (figure, step.text)
        if one.value is not None and not isinstance(one.value, bool):
            assert shown or one.note, figure


@pytest.mark.parametrize("name", NAMES)
def test_every_number_says_truly_where_it_comes_from(name):
    workings, chain = every(name), known(name).chain
    lines = Path(chain.path).read_text(encoding="utf-8").split("\n")
    for figure, one in workings.items():
        for number in one.numbers:
            assert math.isfinite(number.value), figure
            if number.kind == "figure":
                assert workings[number.origin].value == number.value, (figure, number)
                assert workings[number.origin].unit == number.unit, (figure, number)
            elif number.kind == "file":
                at, path = re.fullmatch(r"line (\d+): (.*)", number.origin).groups()
                assert chain.numbers[path] == number.value, (figure, number)
                key = path.rpartition(".")[2]
                assert key in lines[int(at) - 1] or key.isdigit(), (figure, number)
            elif number.kind == "default":
                assert number.origin not in chain.given, (figure, number)
            else:
                assert number.kind in ("solution", "constant"), (figure, number)
                assert number.about and number.origin, (figure, number)


def test_a_figure_by_its_name_is_the_one_among_all():
    for figure, one in list(every("wire-break-listener").items())[::7]:
        assert working(known("wire-break-listener"), figure) == one


def test_no_working_of_a_demo_chain_rests_on_the_figure_itself_alone():
    """A result must come from other numbers: a figure may stand in its own working only beside an equation."""
    for name in ("wire-break-listener", "six-stage", "photodiode-front"):
        for figure, one in every(name).items():
            own = [number for number in one.numbers if number.origin == figure]
            if own:
                assert any(step.must for step in one.steps), figure
                assert not any(step.result for step in one.steps), figure
