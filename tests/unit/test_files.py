"""Files are written whole or not at all."""

import errno
import os

import pytest

from actuator_sizing.errors import OutputError
from actuator_sizing.files import replace_folder_files, write_atomically


def listing(folder):
    return {str(path.relative_to(folder)): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def test_writes_and_replaces(tmp_path):
    target = tmp_path / "new" / "deep" / "a.txt"
    write_atomically(target, b"one")
    write_atomically(target, b"two")
    assert listing(tmp_path) == {os.path.join("new", "deep", "a.txt"): b"two"}


def test_folder_files_come_together_and_strangers_stay(tmp_path):
    (tmp_path / "mine.txt").write_bytes(b"keep")
    (tmp_path / "a").write_bytes(b"old")
    written = replace_folder_files(tmp_path, {"a": b"new", "figures/b.svg": b"<svg/>"})
    assert written == (tmp_path / "a", tmp_path / "figures/b.svg")
    assert listing(tmp_path) == {
        "mine.txt": b"keep",
        "a": b"new",
        os.path.join("figures", "b.svg"): b"<svg/>",
    }


def test_obsolete_files_go_and_strangers_stay(tmp_path):
    for name in ("old.svg", "kept.svg", "stranger.txt"):
        (tmp_path / name).write_bytes(b"old")
    replace_folder_files(tmp_path, {"kept.svg": b"new"}, obsolete=("old.svg", "kept.svg", "never_there.svg"))
    assert {path.name: path.read_bytes() for path in tmp_path.iterdir()} == {
        "kept.svg": b"new",
        "stranger.txt": b"old",
    }


def test_obsolete_files_come_back_when_a_new_one_cannot_be_placed(tmp_path):
    (tmp_path / "old.svg").write_bytes(b"old")
    (tmp_path / "b").mkdir()
    with pytest.raises(OutputError):
        replace_folder_files(tmp_path, {"a": b"new", "b": b"new"}, obsolete=("old.svg",))
    assert (tmp_path / "old.svg").read_bytes() == b"old"
    assert not (tmp_path / "a").exists()


def test_symbolic_link_is_followed(tmp_path):
    (tmp_path / "real").write_bytes(b"old")
    (tmp_path / "link").symlink_to(tmp_path / "real")
    write_atomically(tmp_path / "link", b"new")
    assert (tmp_path / "link").is_symlink()
    assert (tmp_path / "real").read_bytes() == b"new"


def test_a_file_in_the_way_of_a_folder(tmp_path):
    (tmp_path / "file").write_bytes(b"x")
    with pytest.raises(OutputError, match="a file, not a folder"):
        write_atomically(tmp_path / "file" / "a.txt", b"one")
    assert listing(tmp_path) == {"file": b"x"}


def test_a_folder_in_the_way_of_a_file_leaves_the_others_alone(tmp_path):
    (tmp_path / "a").write_bytes(b"old")
    (tmp_path / "b").mkdir()
    with pytest.raises(OutputError, match="'.*b': there is a folder of that name"):
        replace_folder_files(tmp_path, {"a": b"new", "b": b"new"})
    assert listing(tmp_path) == {"a": b"old"}


@pytest.mark.parametrize(
    ("code", "text"), [(errno.ENOSPC, "the disk is full"), (errno.EROFS, "read-only"), (errno.EIO, "error")]
)
def test_full_or_read_only_disk_loses_nothing(tmp_path, monkeypatch, code, text):
    (tmp_path / "a").write_bytes(b"old")
    calls = []

    def fail_second_time(handle):
        calls.append(handle)
        if len(calls) == 2:
            raise OSError(code, os.strerror(code))

    monkeypatch.setattr(os, "fsync", fail_second_time)
    with pytest.raises(OutputError, match=text):
        replace_folder_files(tmp_path, {"a": b"new", "sub/b": b"new"})
    assert listing(tmp_path) == {"a": b"old"}
    assert not (tmp_path / "sub").exists()


@pytest.mark.parametrize("failing", [1, 2, 3, 4])
@pytest.mark.parametrize("error", [PermissionError(errno.EACCES, "no"), KeyboardInterrupt()])
def test_a_failing_rename_puts_everything_back(tmp_path, monkeypatch, failing, error):
    """Two old files: two renames aside, then two into place; each in turn fails."""
    (tmp_path / "a").write_bytes(b"old a")
    (tmp_path / "b").write_bytes(b"old b")
    calls = []
    real = os.replace

    def replace(source, target):
        calls.append(source)
        if len(calls) == failing:
            raise error
        real(source, target)

    monkeypatch.setattr(os, "replace", replace)
    with pytest.raises(OutputError if isinstance(error, OSError) else KeyboardInterrupt):
        replace_folder_files(tmp_path, {"a": b"new", "b": b"new"})
    assert listing(tmp_path) == {"a": b"old a", "b": b"old b"}


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="root may write anywhere")
def test_read_only_folder(tmp_path):
    tmp_path.chmod(0o500)
    try:
        with pytest.raises(OutputError, match="permission denied"):
            write_atomically(tmp_path / "a", b"x")
    finally:
        tmp_path.chmod(0o700)
