"""Write files whole or not at all: temporary siblings first, then renames."""

from __future__ import annotations

import contextlib
import errno
import os
import secrets
from collections.abc import Iterable, Mapping
from pathlib import Path

from actuator_sizing.errors import OutputError

_REASONS = {
    errno.EACCES: "permission denied",
    errno.EPERM: "permission denied",
    errno.EROFS: "the file system is read-only",
    errno.ENOSPC: "the disk is full",
    errno.EDQUOT: "the disk quota is used up",
    errno.ENAMETOOLONG: "the name is too long",
    errno.ENOTDIR: "a part of the path is a file, not a folder",
    errno.EISDIR: "there is a folder of that name",
    errno.EEXIST: "there is already something of that name",
}


def write_atomically(path: str | Path, content: bytes) -> None:
    """Write one file whole or not at all; an older file stays untouched until the new one is complete.

    Parameters
    ----------
    path : str or Path
        File to write; its folder is made if missing. A symbolic link is followed.
    content : bytes
        The whole content.

    Raises
    ------
    OutputError
        If the file cannot be written; what was there before is untouched.
    """
    target = Path(os.path.realpath(path))
    sibling = target.with_name(f".{os.getpid():x}{secrets.token_hex(4)}.new")
    made: list[Path] = []
    try:
        _make_folder(target.parent, made)
        if target.is_dir():
            raise IsADirectoryError(errno.EISDIR, os.strerror(errno.EISDIR))
        _write_through(sibling, content)
        os.replace(sibling, target)
    except OSError as error:
        _discard([sibling], made)
        raise _output_error(target, error) from error
    except BaseException:
        _discard([sibling], made)
        raise


def replace_folder_files(
    folder: str | Path, contents: Mapping[str, bytes], obsolete: Iterable[str] = ()
) -> tuple[Path, ...]:
    """Write several files of a folder together: all are replaced, or none is.

    Other files in the folder stay. Every file is first written to a temporary sibling; only when all of
    them are on the disk are the old ones moved aside and the new ones renamed into place.

    Parameters
    ----------
    folder : str or Path
        Target folder, made if missing.
    contents : mapping of str to bytes
        File name, or path relative to `folder` with ``/``, to whole content.
    obsolete : iterable of str
        Files of an earlier run, named in the same way, that go when the new ones are in place.

    Returns
    -------
    tuple of Path
        The files written, in the order of `contents`.

    Raises
    ------
    OutputError
        If a file cannot be written; what was there before is untouched.
    """
    folder = Path(folder)
    targets = [folder / name for name in contents]
    token = f"{os.getpid():x}{secrets.token_hex(4)}"
    temporary = [target.with_name(f".{token}.{index}.new") for index, target in enumerate(targets)]
    made: list[Path] = []
    try:
        current = folder
        for target, sibling, content in zip(targets, temporary, contents.values(), strict=True):
            current = target
            _make_folder(target.parent, made)
            if target.is_dir():
                raise IsADirectoryError(errno.EISDIR, os.strerror(errno.EISDIR))
            _write_through(sibling, content)
        old = [folder / name for name in obsolete if name not in contents]
        _rename_all(targets, temporary, token, [path for path in old if path.is_file() or path.is_symlink()])
    except OSError as error:
        _discard(temporary, made)
        raise _output_error(current, error) from error
    except BaseException:
        _discard(temporary, made)
        raise
    return tuple(targets)


def _make_folder(folder: Path, made: list[Path]) -> None:
    """Make a folder with its parents; the new ones are added to `made`, outermost first."""
    missing: list[Path] = []
    while not folder.exists():
        missing.append(folder)
        folder = folder.parent
    for path in reversed(missing):
        path.mkdir(exist_ok=True)
        made.append(path)
    if not folder.is_dir():
        raise NotADirectoryError(errno.ENOTDIR, os.strerror(errno.ENOTDIR))


def _write_through(path: Path, content: bytes) -> None:
    """Write to the disk, not only to a cache, so that a full disk shows before anything is replaced."""
    with path.open("xb") as stream:
        stream.write(content)
        stream.flush()
        os.fsync(stream.fileno())


def _rename_all(targets: list[Path], temporary: list[Path], token: str, obsolete: list[Path]) -> None:
    """Rename every temporary file into place; put the old files back if one rename fails."""
    moved: list[tuple[Path, Path]] = []  # (old file's new place, where it was)
    placed: list[Path] = []
    try:
        for index, target in enumerate((*targets, *obsolete)):
            aside = target.with_name(f".{token}.{index}.old")
            with contextlib.suppress(FileNotFoundError):
                os.replace(target, aside)
                moved.append((aside, target))
        for sibling, target in zip(temporary, targets, strict=True):
            os.replace(sibling, target)
            placed.append(target)
    except BaseException:
        for target in placed:
            target.unlink(missing_ok=True)
        for aside, target in moved:
            os.replace(aside, target)
        raise
    for aside, _ in moved:
        with contextlib.suppress(OSError):
            aside.unlink()


def _discard(temporary: Iterable[Path], made: list[Path]) -> None:
    for path in temporary:
        with contextlib.suppress(OSError):
            path.unlink()
    for folder in reversed(made):
        with contextlib.suppress(OSError):  # not empty: somebody else uses it already
            folder.rmdir()


def _output_error(path: Path, error: OSError) -> OutputError:
    reason = _REASONS.get(error.errno or 0, error.strerror or str(error))
    return OutputError(
        f"Cannot write '{path}': {reason}. Nothing was changed; free it or choose another place."
    )
