"""set and unset: one line of the text changes, or none."""

import os
import shutil

import pytest

from polebook.cli.main import main
from tests.cli.helpers import LISTENER


@pytest.fixture
def chain(tmp_path):
    return shutil.copy(LISTENER, tmp_path / "chain.toml")


def told(capsys, *args):
    code = main([str(arg) for arg in args])
    out, err = capsys.readouterr()
    return code, out, err


def changed(chain):
    """Lines that went and lines that came."""
    old, new = LISTENER.read_text().splitlines(), chain.read_text().splitlines()
    return [line for line in old if line not in new], [line for line in new if line not in old]


def test_set_changes_one_line_and_says_which(capsys, chain):
    code, out, err = told(capsys, "set", chain, "Q2.c_comp", "2p2")
    assert (code, err) == (0, "")
    old = 'c_comp      = "4p7"     # put in when the first board sang on the bench; never looked at again'
    assert changed(chain) == ([old], [old.replace("4p7", "2p2")])
    line = LISTENER.read_text().splitlines().index(old) + 1
    assert out == f"{chain}:{line}\n  - {old}\n  + {old.replace('4p7', '2p2')}\n"


def test_set_adds_a_key(capsys, chain):
    code, out, _ = told(capsys, "set", chain, "target.gain_tolerance", "2 dB")
    assert code == 0
    gone, come = changed(chain)
    assert gone == []
    assert [line.split("=")[0].strip() for line in come] == ["gain_tolerance"]
    assert '"2 dB"' in come[0]
    assert "  + gain_tolerance" in out


def test_unset_takes_one_line_out(capsys, chain):
    code, out, _ = told(capsys, "unset", chain, "Q2.c_comp")
    assert code == 0
    gone, come = changed(chain)
    assert come == []
    assert len(gone) == 1
    assert out.splitlines()[1] == f"  - {gone[0]}"


@pytest.mark.parametrize("value", ["-5", "-4k7"])
def test_a_value_below_zero_is_no_option(capsys, chain, value):
    assert told(capsys, "set", chain, "supply.negative", value)[0] == 0
    assert value in changed(chain)[1][0]


def test_the_same_value_again_writes_nothing(capsys, chain):
    os.utime(chain, (1, 1))
    code, out, _ = told(capsys, "set", chain, "Q2.c_comp", "4p7")
    assert code == 0
    assert "nothing is changed" in out
    assert os.stat(chain).st_mtime == 1


@pytest.mark.parametrize(
    ("path", "value", "says"),
    [
        ("Q2.rc", "10 nF", "is not a resistance"),
        ("Q2.rc", "-3k9", "-3k9"),
        ("Q2.rcc", "1k", "rcc"),
        ("Q9.rc", "1k", "Q9"),
        ("Q2", "1k", "is a table"),
        ("target.upper", "fast", "fast"),
        ("", "1", "is not a path"),
    ],
)
def test_an_edit_that_adds_a_fault_is_refused_and_the_file_stays(capsys, chain, path, value, says):
    code, out, err = told(capsys, "set", chain, path, value)
    assert (code, out) == (2, "")
    assert says in err
    assert "    fix  " in err
    assert chain.read_bytes() == LISTENER.read_bytes()


def test_a_key_that_is_not_there_cannot_be_taken_out(capsys, chain):
    code, out, err = told(capsys, "unset", chain, "Q1.c_comp")
    assert (code, out) == (2, "")
    assert "    fix  " in err
    assert chain.read_bytes() == LISTENER.read_bytes()


def test_an_edit_that_leaves_fewer_faults_is_taken_and_lists_the_rest(capsys, chain):
    text = chain.read_text().replace('"33"', '"3k3k"').replace('"1k2"', '"3 F"')
    chain.write_text(text)
    code, out, err = told(capsys, "set", chain, "Q1.re", "33R")
    assert code == 0
    assert '  + re          = "33R"' in out
    assert "a fault remains in the file" in err
    assert '"3 F" is not a resistance' in err
    assert chain.read_text() == text.replace('"3k3k"', '"33R"')


def test_a_missing_file(capsys, tmp_path):
    code, _, err = told(capsys, "set", tmp_path / "none.toml", "Q1.rc", "1k")
    assert code == 2
    assert "no such file" in err


def test_a_file_that_is_not_toml_is_left_alone(capsys, chain):
    chain.write_text("format = = 1\n")
    code, out, err = told(capsys, "set", chain, "Q1.rc", "1k")
    assert (code, out) == (2, "")
    assert f"{chain}:1" in err
    assert chain.read_text() == "format = = 1\n"


def test_line_ends_and_mode_are_kept(capsys, chain):
    chain.write_bytes(chain.read_bytes().replace(b"\n", b"\r\n"))
    chain.chmod(0o640)
    assert told(capsys, "set", chain, "Q1.re", "3k9")[0] == 0
    assert chain.read_bytes() == LISTENER.read_bytes().replace(b"\n", b"\r\n").replace(b'"33"', b'"3k9"')
    assert chain.stat().st_mode & 0o777 == 0o640


def test_no_file_is_left_beside_it(capsys, chain):
    told(capsys, "set", chain, "Q1.rc", "3k9")
    assert os.listdir(chain.parent) == ["chain.toml"]


def test_what_the_file_holds_reaches_the_terminal_made_visible(capsys, chain):
    chain.write_text(LISTENER.read_text().replace("never looked at again", "never \u202e looked at"))
    code, out, _ = told(capsys, "set", chain, "Q2.c_comp", "2p2")
    assert code == 0
    assert "\u202e" not in out
    assert "\\u202e" in out
