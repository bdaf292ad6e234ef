"""The listener as a file that may be written, the program at it, and the pair."""

import pytest

from tests.terminal.pair import Pair
from tests.terminal.probe import Terminal, app
from tests.tui.desk import copied


@pytest.fixture
def path(tmp_path):
    return copied(tmp_path)


@pytest.fixture
def terminal(path):
    with Terminal(app(path)) as terminal:
        yield terminal


@pytest.fixture
def pair(terminal, path):
    return Pair(terminal, path)
