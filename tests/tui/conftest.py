"""The demo chains are opened by many tests and written by none: what is saved is always a copy."""

import pytest

from tests.tui.desk import CHAINS


@pytest.fixture(autouse=True)
def demo_chains_stay(monkeypatch):
    from polebook.text import files

    save = files.save

    def guarded(path, text):
        assert not str(path).startswith(str(CHAINS)), f"a test writes to {path}"
        save(path, text)

    monkeypatch.setattr(files, "save", guarded)
