"""kinds: every kind and key, from the reader's own tables."""

import pytest

from polebook.chain import kinds
from polebook.cli.main import main


def told(capsys, *args):
    code = main(["kinds", *args])
    out, err = capsys.readouterr()
    return code, out, err


def test_every_kind_and_every_key_is_printed(capsys):
    code, out, err = told(capsys)
    assert (code, err) == (0, "")
    blocks = {block.split()[0]: block for block in out.split("\n\n")}
    for one in kinds.listings():
        keys = {line.split()[0] for line in blocks[one.name].splitlines() if line.strip()}
        assert {row.key for row in one.rows} <= keys, one.name


@pytest.mark.parametrize("name", [one.name for one in kinds.listings()])
def test_one_alone(capsys, name):
    code, out, _ = told(capsys, name)
    one = kinds.listing(name)
    assert code == 0
    assert out.startswith(f" {name}")
    assert ("keys of every stage" in out) == (one.group == "stage")
    assert max(map(len, out.splitlines())) <= 80
    assert "…" not in out
    words = " ".join(out.split())
    for row in one.rows:
        assert row.key in words
        assert row.default in words


def test_a_key_comes_with_unit_role_and_purpose(capsys):
    _, out, _ = told(capsys, "common-emitter")
    (line,) = [line for line in out.splitlines() if line.startswith(" c_comp ")]
    assert line.split()[:3] == ["c_comp", "F", "high"]
    assert "collector to base" in line


@pytest.mark.parametrize(
    ("name", "fix"), [("comon-emitter", "did you mean common-emitter?"), ("zzz", "polebook kinds lists them all")]
)
def test_an_unknown_kind_gets_the_nearest(capsys, name, fix):
    code, out, err = told(capsys, name)
    assert (code, out) == (2, "")
    assert err.endswith(f"    fix  {fix}\n")
