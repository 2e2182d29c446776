"""Files that come with the program and that no card is whole without."""

from __future__ import annotations

from pathlib import Path

from cardgen.errors import ReleaseError


def packaged(path: Path) -> bytes:
    """Return a file of the program.

    Parameters
    ----------
    path : Path
        The file [-]

    Returns
    -------
    bytes
        Its content, never empty [-]

    Raises
    ------
    ReleaseError
        It is missing, empty or cannot be read.
    """
    try:
        content = path.read_bytes()
    except OSError as error:
        raise damaged(path) from error
    if not content:
        raise damaged(path)
    return content


def damaged(path: Path) -> ReleaseError:
    """Return the complaint about a file of the program.

    Parameters
    ----------
    path : Path
        The file [-]

    Returns
    -------
    ReleaseError
        To be raised [-]
    """
    return ReleaseError(f"{path}: this file of cardgen is missing or damaged; install it again")
