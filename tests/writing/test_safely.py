"""Files appear whole or not at all."""

import errno
import os
import stat
from pathlib import Path

import pytest

from stdfit.base.errors import RequestError
from stdfit.writing.safely import write_whole


def names_in(folder):
    return sorted(path.name for path in folder.iterdir())


def test_a_new_file(tmp_path):
    write_whole(tmp_path / "kit.toml", "Γ = 1\n")
    assert (tmp_path / "kit.toml").read_bytes() == "Γ = 1\n".encode()
    assert names_in(tmp_path) == ["kit.toml"]


def test_a_new_file_has_the_usual_permissions(tmp_path):
    (tmp_path / "usual").write_text("x")
    write_whole(tmp_path / "kit.toml", "x")
    assert (tmp_path / "kit.toml").stat().st_mode == (tmp_path / "usual").stat().st_mode


@pytest.mark.parametrize("mode", [0o600, 0o640, 0o664])
def test_permissions_of_an_old_file_are_kept(tmp_path, mode):
    path = tmp_path / "kit.toml"
    path.write_text("old")
    path.chmod(mode)
    write_whole(path, "new")
    assert stat.S_IMODE(path.stat().st_mode) == mode
    assert path.read_text() == "new"


def full(*_):
    raise OSError(errno.ENOSPC, "No space left on device")


def forbidden(*_, **__):
    raise PermissionError(errno.EACCES, "Permission denied")


@pytest.mark.parametrize(
    "where, fault, words",
    [
        ("os.fsync", full, "No space left on device"),
        ("tempfile.mkstemp", forbidden, "Permission denied"),
        ("pathlib.Path.replace", forbidden, "Permission denied"),
        ("pathlib.Path.chmod", forbidden, "Permission denied"),
    ],
)
def test_the_old_file_is_kept_when_writing_fails(tmp_path, monkeypatch, where, fault, words):
    path = tmp_path / "kit.toml"
    path.write_text("old")
    with monkeypatch.context() as patch:
        patch.setattr(where, fault)
        with pytest.raises(RequestError) as caught:
            write_whole(path, "new")
    assert caught.value.what == f"cannot be written: {words}"
    assert caught.value.file == path
    assert path.read_text() == "old"
    assert names_in(tmp_path) == ["kit.toml"]


def test_a_stop_by_the_user_leaves_the_old_file(tmp_path, monkeypatch):
    path = tmp_path / "kit.toml"
    path.write_text("old")

    def stopped(_):
        raise KeyboardInterrupt

    with monkeypatch.context() as patch:
        patch.setattr(os, "fsync", stopped)
        with pytest.raises(KeyboardInterrupt):
            write_whole(path, "new")
    assert path.read_text() == "old"
    assert names_in(tmp_path) == ["kit.toml"]


def test_a_folder_that_cannot_be_written_to(tmp_path):
    folder = tmp_path / "locked"
    folder.mkdir()
    (folder / "kit.toml").write_text("old")
    folder.chmod(0o555)
    if os.access(folder, os.W_OK):
        pytest.skip("this user may write everywhere")
    with pytest.raises(RequestError, match="cannot be written: Permission denied"):
        write_whole(folder / "kit.toml", "new")
    assert (folder / "kit.toml").read_text() == "old"


def test_places_that_do_not_exist(tmp_path):
    with pytest.raises(RequestError, match="cannot be written: No such file or directory"):
        write_whole(tmp_path / "none" / "kit.toml", "x")
    with pytest.raises(RequestError, match="a folder stands where the file should go"):
        write_whole(tmp_path, "x")
    with pytest.raises(RequestError, match="cannot be written"):
        write_whole(tmp_path / ("x" * 400), "x")
    with pytest.raises(RequestError, match="cannot be written"):
        write_whole(tmp_path / "a\0b", "x")
    assert names_in(tmp_path) == []


def test_text_that_has_no_bytes(tmp_path):
    with pytest.raises(RequestError, match="cannot be written"):
        write_whole(tmp_path / "kit.toml", "\udc80")
    assert names_in(tmp_path) == []


def test_a_link_is_followed_and_stays(tmp_path):
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    real, link = tmp_path / "a" / "kit.toml", tmp_path / "b" / "kit.toml"
    real.write_text("old")
    real.chmod(0o640)
    link.symlink_to(Path("..") / "a" / "kit.toml")
    write_whole(link, "new")
    assert link.is_symlink()
    assert real.read_text() == "new"
    assert stat.S_IMODE(real.stat().st_mode) == 0o640
    assert names_in(tmp_path / "a") == names_in(tmp_path / "b") == ["kit.toml"]


def test_a_link_to_nothing_makes_its_target(tmp_path):
    (tmp_path / "link").symlink_to("kit.toml")
    write_whole(tmp_path / "link", "new")
    assert (tmp_path / "link").is_symlink()
    assert (tmp_path / "kit.toml").read_text() == "new"


def test_links_in_a_ring(tmp_path):
    (tmp_path / "a").symlink_to("b")
    (tmp_path / "b").symlink_to("a")
    with pytest.raises(RequestError, match="cannot be written"):
        write_whole(tmp_path / "a", "new")
    assert names_in(tmp_path) == ["a", "b"]


def test_a_name_that_is_nearly_too_long(tmp_path):
    name = "k" * 250 + ".toml"
    write_whole(tmp_path / name, "new")
    assert names_in(tmp_path) == [name]


def test_what_a_killed_run_left_is_cleared_away_when_it_is_old(tmp_path):
    """Young ones may belong to a run that is writing just now; others belong to somebody else."""
    path = tmp_path / "kit.toml"
    old = [".kit.toml.abcd1234.part", ".kit.toml._______9.part"]
    kept = [
        ".kit.toml.abcd1235.part",
        ".kit.toml.part",
        "kit.toml.abcd1234.part",
        ".other.toml.abcd1234.part",
    ]
    for name in old + kept:
        (tmp_path / name).write_text("half", encoding="utf-8")
        if name != kept[0]:
            os.utime(tmp_path / name, (0, 0))
    (tmp_path / ".kit.toml.folder12.part").mkdir()
    os.utime(tmp_path / ".kit.toml.folder12.part", (0, 0))
    write_whole(path, "new")
    assert names_in(tmp_path) == sorted([*kept, ".kit.toml.folder12.part", "kit.toml"])
