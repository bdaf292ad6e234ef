"""The state folder: where it is, that it is the user's own and shut, and that a file in it is whole or not there."""

import os
import stat

import pytest

from polebook.session import places
from polebook.session.places import Unfit


@pytest.mark.parametrize(("environ", "platform", "wanted"), [
    ({"XDG_STATE_HOME": "/x/state", "HOME": "/home/u"}, "linux", "/x/state/polebook"),
    ({"XDG_STATE_HOME": "state", "HOME": "/home/u"}, "linux", "/home/u/.local/state/polebook"),
    ({"XDG_STATE_HOME": "", "HOME": "/home/u"}, "linux", "/home/u/.local/state/polebook"),
    ({"HOME": "/home/u"}, "freebsd14", "/home/u/.local/state/polebook"),
    ({"HOME": "/Users/u", "XDG_STATE_HOME": "/x"}, "darwin", "/Users/u/Library/Application Support/polebook"),
    ({"LOCALAPPDATA": "/c/local"}, "win32", "/c/local/polebook"),
])
def test_the_folder_of_each_platform(environ, platform, wanted):
    assert places.folder(environ, platform) == wanted


def test_without_a_home_nothing_can_be_kept(monkeypatch):
    monkeypatch.setattr(os.path, "expanduser", lambda path: path)
    with pytest.raises(Unfit, match="no home folder"):
        places.folder({}, "linux")


def test_it_is_made_for_its_user_alone(tmp_path):
    folder = tmp_path / "a" / "polebook"
    before = os.umask(0)
    try:
        places.ready(str(folder))
        assert stat.S_IMODE(folder.stat().st_mode) == 0o700
        folder.chmod(0o755)
        places.ready(str(folder))
        assert stat.S_IMODE(folder.stat().st_mode) == 0o700
        places.put(str(folder / "one"), b"text")
        assert stat.S_IMODE((folder / "one").stat().st_mode) == 0o600
    finally:
        os.umask(before)


def test_a_link_a_file_and_another_user_s_folder_are_refused(tmp_path, monkeypatch):
    (tmp_path / "real").mkdir()
    (tmp_path / "link").symlink_to(tmp_path / "real")
    (tmp_path / "file").write_text("")
    for name in ("link", "file"):
        with pytest.raises(Unfit, match="a link or a file"):
            places.ready(str(tmp_path / name))
    with pytest.raises(Unfit, match="in its folder's place"):
        places.ready(str(tmp_path / "file" / "polebook"))
    uid = os.geteuid()
    monkeypatch.setattr(os, "geteuid", lambda: uid + 1)
    with pytest.raises(Unfit, match="another user's"):
        places.ready(str(tmp_path / "real"))


def test_a_link_in_a_file_s_place_is_replaced_not_followed(tmp_path):
    (tmp_path / "theirs").write_text("theirs")
    (tmp_path / "one").symlink_to(tmp_path / "theirs")
    places.put(str(tmp_path / "one"), b"mine")
    assert (tmp_path / "theirs").read_text() == "theirs"
    assert (tmp_path / "one").read_text() == "mine" and not (tmp_path / "one").is_symlink()
    (tmp_path / "two").symlink_to(tmp_path / "theirs")
    with pytest.raises(OSError):
        places.get(str(tmp_path / "two"), 100)


def test_a_write_that_fails_leaves_the_file_as_it_was(tmp_path, monkeypatch):
    file = tmp_path / "one"
    places.put(str(file), b"before")

    def full(handle, data):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "write", full)
    with pytest.raises(Unfit, match="disk full"):
        places.put(str(file), b"after")
    assert file.read_bytes() == b"before"
    assert os.listdir(tmp_path) == ["one"]


def test_no_more_is_read_than_asked_for_and_nothing_of_a_pipe(tmp_path):
    places.put(str(tmp_path / "one"), b"0123456789")
    assert places.get(str(tmp_path / "one"), 4)[0] == b"01234"
    os.mkfifo(tmp_path / "pipe")
    with pytest.raises(OSError):
        places.get(str(tmp_path / "pipe"), 4)
