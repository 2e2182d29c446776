"""Paths written in a profile: they stay within the folder tree that the profile stands in."""

from __future__ import annotations

import os
import stat
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from cardgen.profile.keys import Kind
from cardgen.profile.parsing import FileT, ProfileFile, parse_file


def tree_of(path: Path) -> Path:
    """Return the folder that references of an aircraft file may not leave.

    Parameters
    ----------
    path : Path
        The aircraft file [-]

    Returns
    -------
    Path
        The folder that holds `aircraft/`, or the file's own where it lies in no such folder [-]
    """
    folder = Path(os.path.abspath(path)).parent  # symbolic links as the user went through them
    return folder.parent if folder.name == "aircraft" else folder


def resolve(
    aircraft: ProfileFile[Any], path: Path, *, key: Sequence[str | int], reference: str
) -> Path | None:
    """Return the file a reference leads to; report it and return None where it leads astray.

    Parameters
    ----------
    aircraft : ProfileFile
        The file the reference stands in, which takes the problem [-]
    path : Path
        Path of that file [-]
    key : sequence of str or int
        Path of the reference within that file [-]
    reference : str
        The reference as written, relative to that file's folder [-]

    Returns
    -------
    Path or None
        An existing regular file within the tree [-]
    """
    if os.path.isabs(reference):
        aircraft.report(key, f"{reference!r} is an absolute path", "a path from this file's folder")
        return None
    target = Path(os.path.normpath(path.parent / reference))
    # Both ends with every symbolic link followed: a link may not lead out of the tree either.
    real, tree = Path(os.path.realpath(path.parent / reference)), tree_of(path)
    if not real.is_relative_to(os.path.realpath(tree)):
        aircraft.report(
            key,
            f"{reference!r} leads out of the profile's folder tree",
            f"a file within the folder {tree.name}/",
        )
        return None
    if real == Path(os.path.realpath(path)):
        aircraft.report(key, f"{reference!r} refers back to this file itself", "another file")
        return None
    try:
        mode = real.stat().st_mode
    except OSError:
        aircraft.report(key, f"there is no file {str(target)!r}", "an existing file")
        return None
    if not stat.S_ISREG(mode):
        aircraft.report(key, f"{str(target)!r} is not a regular file", "an existing file")
        return None
    return real


def parse_part(
    aircraft: ProfileFile[Any],
    path: Path,
    *,
    kind: Kind,
    model: type[FileT],
    instead: str | None = None,
) -> ProfileFile[FileT] | None:
    """Return the part file that an aircraft file names, None where it names none that can be read.

    Parameters
    ----------
    aircraft : ProfileFile
        The aircraft file, which takes the problems of the reference itself [-]
    path : Path
        Path of the aircraft file as the user gave it [-]
    kind : {"engine", "propeller"}
        Kind of part, and key of the reference [-]
    model : type
        Model of that kind of file [-]
    instead : str, optional
        Path, named by the user and so from anywhere, that is read instead of the reference [-]

    Returns
    -------
    ProfileFile or None
        The part file, which holds its own problems [-]
    """
    if instead is not None:
        part = parse_file(Path(instead), model, kind=kind, shown=instead)
        if part.other_kind:
            part.report(("kind",), f"is a file of kind {part.other_kind}", f"a file of kind {kind}")
        return part
    reference = aircraft.get(kind)
    if reference is None:
        return None
    target = resolve(aircraft, path, key=(kind,), reference=reference)
    if target is None:
        return None
    shown = os.path.normpath(os.path.join(os.path.dirname(aircraft.shown), reference))
    part = parse_file(target, model, kind=kind, shown=shown)
    if part.other_kind:
        aircraft.report(
            (kind,),
            f"{reference!r} is a file of kind {part.other_kind}",
            f"a file of kind {kind}",
        )
        return None
    return part
