"""What a save says where the disk takes nothing."""

import os
from types import SimpleNamespace

import pytest

from polebook.problem import ProblemsFound
from polebook.text import files


@pytest.mark.parametrize(("flag", "why"), [(os.ST_RDONLY, "it is on a read-only file system"),
                                           (0, "its permissions, or those of its folder, do not allow it")])
def test_a_read_only_disk_is_told_from_a_permission(tmp_path, monkeypatch, flag, why):
    path = tmp_path / "chain.toml"
    path.write_text("format = 1\n")
    monkeypatch.setattr(os, "access", lambda name, mode: False)
    monkeypatch.setattr(os, "statvfs", lambda name: SimpleNamespace(f_flag=flag))
    with pytest.raises(ProblemsFound) as found:
        files.save(path, "format = 2\n")
    assert found.value.problems[0].why == why
    assert path.read_text() == "format = 1\n"
