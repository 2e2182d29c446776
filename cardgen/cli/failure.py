"""What went wrong as an exit code and a line for stderr: the one place where the two are paired."""

from __future__ import annotations

from cardgen.errors import CardgenError


def failure(error: CardgenError | OSError | MemoryError) -> tuple[int, str]:
    """Return exit code and words of an error.

    Parameters
    ----------
    error : CardgenError, OSError or MemoryError
        What was raised [-]

    Returns
    -------
    tuple
        Exit code, and what to tell [-]

    Notes
    -----
    Files that cannot be read or written are told where they are opened. What reaches this place as
    an `OSError` is what nobody foresaw, such as a disk that fails or a name the system refuses.
    """
    if isinstance(error, CardgenError):
        return error.exit_code, str(error)
    if isinstance(error, MemoryError):
        return 3, "memory: there is not enough for what was asked; ask for fewer rows"
    # Only what is printed has no name.
    name = error.filename if error.filename is not None else "output"
    return 3, f"{str(name)[:200]}: {(error.strerror or str(error)).lower()}"
