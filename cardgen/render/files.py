"""Files written whole or not at all, and a lock on a folder of cards."""

from __future__ import annotations

import contextlib
import errno
import os
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Final

from cardgen.errors import ReleaseError

try:
    import fcntl
except ImportError:  # a platform without advisory locks: two runs at once are on their own
    fcntl = None  # type: ignore[assignment]

LOCK_NAME: Final = ".issues.lock"
_POLL: Final = 0.01  # between two tries for the lock [s]

_OPENING: Final = os.O_WRONLY | os.O_CREAT | os.O_TRUNC | getattr(os, "O_NOFOLLOW", 0)

_MEANINGS: Final[dict[int, str]] = {
    errno.ENOSPC: "the disk is full; free some room and run again",
    errno.EDQUOT: "the disk quota is used up; free some room and run again",
    errno.EROFS: "the disk is read-only; choose another folder",
    errno.EACCES: "writing there is not allowed; choose another folder or change its permissions",
    errno.EPERM: "writing there is not allowed; choose another folder or change its permissions",
    errno.ENOENT: "the folder does not exist; create it first",
    errno.ENOTDIR: "the folder is a file; choose another folder",
    errno.EISDIR: "a folder of that name stands in the way; move it",
    errno.ENOTEMPTY: "a folder of that name stands in the way; move it",
    errno.ENAMETOOLONG: "the name is too long; choose a shorter one",
}


def write_whole(path: Path, content: bytes) -> None:
    """Write a file so that at every moment the old or the new content stands there, whole.

    Parameters
    ----------
    path : Path
        Where to write [-]
    content : bytes
        What to write [-]

    Raises
    ------
    ReleaseError
        It could not be written; what stood there before still does.
    """
    if path.is_dir():
        raise ReleaseError(f"{path}: not written, {_MEANINGS[errno.EISDIR]}")
    # One fixed name beside the file: what a killed run leaves behind is overwritten by the next.
    beside = path.with_name(f".{path.name}.part")
    try:
        if beside.is_symlink():
            beside.unlink()  # planted or left over: what it points to is nobody's business here
        with open(os.open(beside, _OPENING, 0o666), "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.replace(beside, path)
        _sync_folder(path.parent)
    except OSError as error:
        with contextlib.suppress(OSError):
            beside.unlink(missing_ok=True)
        raise ReleaseError(f"{path}: not written, {_meaning(error)}") from error


def _meaning(error: OSError) -> str:
    return _MEANINGS.get(error.errno or 0, error.strerror or str(error))


def _sync_folder(folder: Path) -> None:
    """Make a rename survive a power cut, where folders can be opened for that."""
    if not hasattr(os, "O_DIRECTORY"):
        return
    handle = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def read_if_there(path: Path) -> bytes | None:
    """Return a file's content, None where there is no file.

    Parameters
    ----------
    path : Path
        What to read [-]

    Returns
    -------
    bytes or None
        Its content [-]

    Raises
    ------
    ReleaseError
        It is there but cannot be read.
    """
    try:
        return path.read_bytes()
    except FileNotFoundError:
        return None
    except OSError as error:
        raise ReleaseError(f"{path}: cannot be read, {_meaning(error)}") from error


@contextlib.contextmanager
def locked(folder: Path, *, patience: float = 10.0) -> Iterator[None]:
    """Keep other runs out of a folder of cards.

    Parameters
    ----------
    folder : Path
        The folder [-]
    patience : float
        How long to wait for another run [s]

    Raises
    ------
    ReleaseError
        Another run kept the folder, or it is not there or not writable.
    """
    try:
        handle = os.open(folder / LOCK_NAME, os.O_RDWR | os.O_CREAT, 0o644)
    except OSError as error:
        raise ReleaseError(f"{folder}: nothing written, {_meaning(error)}") from error
    try:
        _acquire(handle, folder, patience)
        yield
    finally:
        os.close(handle)  # which also gives the lock back


def _acquire(handle: int, folder: Path, patience: float) -> None:
    if fcntl is None:
        return
    deadline = time.monotonic() + patience
    while True:
        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError as error:
            if error.errno not in (errno.EAGAIN, errno.EACCES):
                return  # a file system without locks
            if time.monotonic() >= deadline:
                raise ReleaseError(
                    f"{folder}: another run is releasing cards here; wait for it and run again"
                ) from None
            time.sleep(_POLL)
        else:
            return
