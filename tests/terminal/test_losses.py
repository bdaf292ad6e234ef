"""What happens to the disk or the folder while a file is open: those of `tests.bench.losses` that no other test has."""

import pytest

from tests.bench.losses import tried
from tests.terminal.scene import Untried


@pytest.mark.parametrize("name", [
    "disk full at the file", "disk full everywhere", "read-only disk", "read-only folder", "file may not be read",
    "folder deleted"])
def test_the_file_is_whole_and_the_work_kept(name):
    try:
        tried(name, 1, thorough=False)
    except Untried as reason:
        pytest.skip(str(reason))
