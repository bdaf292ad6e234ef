"""How much of a row is painted anew."""

import random

from polebook.report.look import cells
from polebook.tui.lines import Span, width
from polebook.tui.paint import changed


def flat(line):
    """Every cell's text and style."""
    return [(char, span.style) for span in line for char in span.text]


def test_up_to_the_last_cell_that_differs():
    a = (Span("abc", "dim"), Span("def"))
    assert changed(a, a) == 0
    assert changed(a, (Span("abc", "dim"), Span("dxf"))) == 5
    assert changed(a, (Span("abc", "head"), Span("def"))) == 3
    assert changed(a, (Span("a", "dim"), Span("bc", "dim"), Span("d"), Span("ef"))) == 0
    assert changed(a, (Span("Xbc", "dim"), Span("def"))) == 1
    assert changed((), (Span("  "),)) == 2
    assert changed((Span("漢字b"),), (Span("漢字c"),)) == 5
    assert changed((Span("漢b字"),), (Span("漢c字"),)) == 3


def test_random_rows_differ_nowhere_behind_and_at_the_last_cell_painted():
    rng = random.Random(3)
    for _ in range(2000):
        def line(count):
            cut, rest = [], count
            while rest:
                size = rng.randint(1, rest)
                cut.append(Span("".join(rng.choice("ab ⠁") for _ in range(size)), rng.choice(("", "dim"))))
                rest -= size
            return tuple(cut)

        old, new = line(8), line(8)
        size = changed(old, new)
        a, b = flat(old), flat(new)
        assert a[size:] == b[size:]
        assert size == 0 or a[size - 1] != b[size - 1]
        assert size <= width(new) == sum(cells(char) for char, _ in b)
