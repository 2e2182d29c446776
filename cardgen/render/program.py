"""Tells one state of this program from another, so that a card made by the same one may stand."""

from __future__ import annotations

import hashlib
from functools import cache
from pathlib import Path
from typing import Final

from cardgen import __version__

_ROOT: Final = Path(__file__).resolve().parent.parent


@cache
def program_digest() -> str:
    """Return the digest of everything in this package that can change a page.

    Returns
    -------
    str
        SHA-256 over version, source files and faces, 64 hexadecimal digits [-]

    Notes
    -----
    Where the package lies in an archive its files cannot be listed; the version then stands alone.
    """
    digest = hashlib.sha256(__version__.encode())
    files = (path for path in _ROOT.rglob("*") if path.is_file())
    for path in sorted(path for path in files if "__pycache__" not in path.parts):
        content = path.read_bytes()
        place = path.relative_to(_ROOT).as_posix()
        digest.update(f"\n{place} {len(content)}\n".encode())
        digest.update(content)
    return digest.hexdigest()
