"""Small files written whole or not at all, one writer at a time.

Nothing here knows what is in a file. A file is written beside its target, synced and then put in
the target's place, so that a reader, a killed process or a full disk never meets half a file.
"""

from __future__ import annotations

import errno
import os
import stat
import time
from contextlib import contextmanager, suppress
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from calcbook.errors import CalcbookError

LOCK_SECONDS = 10.0
_POLL_SECONDS = 0.005
_REPLACE_TRIES = 5
_REPLACE_PAUSE = 0.05


class FileHeldError(PermissionError):
    """A file that another program holds open, so that it cannot be replaced."""


@contextmanager
def locked(path: Path, kind: type[CalcbookError], wait: float = LOCK_SECONDS) -> Iterator[None]:
    """Hold the lock of a file (a hidden file beside it), waiting at most `wait` seconds.

    Raises
    ------
    CalcbookError
        Of the given kind: another process kept the lock all the time, or the folder is not there
        or cannot be written.
    """
    from filelock import FileLock  # noqa: PLC0415 - reading a record must not pay for it

    target = _real(path)
    lock = FileLock(target.with_name(f".{target.name}.lock"))
    with in_plain_words(path, kind):
        if not target.parent.is_dir():  # filelock would make the folder
            raise FileNotFoundError(errno.ENOENT, os.strerror(errno.ENOENT))
        lock.acquire(timeout=wait, poll_interval=_POLL_SECONDS)
    try:
        yield
    finally:
        lock.release()


def read_bytes(path: Path) -> bytes | None:
    """Return what a file holds, or None when there is no such file."""
    try:
        return path.read_bytes()
    except FileNotFoundError:
        return None


def write_whole(path: Path, data: bytes) -> None:
    """Write a file so that it holds its old or its new bytes at any moment; its mode is kept.

    The caller holds the file's lock, or is alone in the folder.

    Raises
    ------
    FileHeldError
        Another program holds the file open (a spreadsheet or an editor on Windows).
    OSError
        The disk is full, the folder cannot be written, ...; the old file is untouched and no
        temporary file is left.
    """
    target = _real(path)
    temporary = target.with_name(f".{target.name}.tmp")
    try:
        temporary.unlink(missing_ok=True)
        _write_synced(temporary, data)
        with suppress(FileNotFoundError):
            temporary.chmod(stat.S_IMODE(target.stat().st_mode))
        _replace(temporary, target)
    except BaseException:
        with suppress(OSError):
            temporary.unlink(missing_ok=True)
        raise
    _sync_folder(target.parent)


@contextmanager
def in_plain_words(path: Path, kind: type[CalcbookError]) -> Iterator[None]:
    """Turn what the operating system says about a file into an error of the given kind."""
    try:
        yield
    except OSError as error:
        what, hint = _explained(error, path)
        raise kind(what, hint=hint, where=path.name) from error


def _real(path: Path) -> Path:
    """Return the file behind links, so that a link stays a link and has the one lock."""
    return path.resolve()


def _write_synced(path: Path, data: bytes) -> None:
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0)
    descriptor = os.open(path, flags, 0o666)
    try:
        rest = memoryview(data)
        while rest:
            rest = rest[os.write(descriptor, rest) :]
        os.fsync(descriptor)
    finally:
        os.close(descriptor)


def _replace(temporary: Path, target: Path) -> None:
    for _ in range(_REPLACE_TRIES - 1):
        try:
            temporary.replace(target)
        except PermissionError:
            time.sleep(_REPLACE_PAUSE)
        else:
            return
    try:
        temporary.replace(target)
    except PermissionError as error:
        raise FileHeldError(error.errno, error.strerror) from error


def _sync_folder(folder: Path) -> None:
    # The file itself is whole by now; where folders cannot be synced (Windows) nothing is lost.
    with suppress(OSError):
        descriptor = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)


def _explained(error: OSError, path: Path) -> tuple[str, str]:
    """Return what is wrong and what to do about it."""
    what, cure = f"the file cannot be used: {error.strerror or error}", "put that right"
    if isinstance(error, TimeoutError):
        what, cure = "another process is writing this file", "wait a moment"
    elif isinstance(error, FileHeldError):
        what = "another program holds this file open"
        cure = "close it there (a spreadsheet, an editor)"
    elif error.errno in (errno.ENOSPC, getattr(errno, "EDQUOT", errno.ENOSPC)):
        what, cure = "the disk is full", "free some space"
    elif isinstance(error, PermissionError) or error.errno == errno.EROFS:
        what = f"no permission to read or write it in the folder '{path.parent}'"
        cure = "change the permission, or work in a copy of the folder"
    elif isinstance(error, IsADirectoryError):
        what, cure = "a folder stands where this file belongs", "move the folder away"
    elif isinstance(error, FileNotFoundError | NotADirectoryError):
        what, cure = f"there is no such file or folder: '{path}'", "check the path"
    return what, f"nothing was changed; {cure} and try again"
