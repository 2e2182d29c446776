"""Gives a card its issue number and puts it beside the others, whole or not at all.

The order makes a crash at any moment harmless. The files are made and read back in memory; the
number is then reserved in the history together with the digests of the files; the files are
written; the number is confirmed. A reservation found by the next run is settled by looking at the
files: if one of them reached the disk the issue may have been printed, so its number is spent; if
none did, the number is free again. So no number is ever given twice, and none is left out.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Literal

from cardgen.errors import ReleaseError
from cardgen.render.files import locked, read_if_there, write_whole
from cardgen.render.history import (
    HISTORY_NAME,
    History,
    Issue,
    changed_parts,
    load_history,
    save_history,
)

Make = Callable[[int, int | None], Mapping[str, bytes]]
"""From issue number and the issue it replaces to finished files by suffix, already read back."""


@dataclass(frozen=True, slots=True)
class Fingerprint:
    """What decides whether a card is another one: digests of profile, printed numbers, parts."""

    digest: str
    content: str
    parts: dict[str, str]


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of a card; `because` names the parts that changed."""

    status: Literal["new", "unchanged", "replaced"]
    issue: int
    because: tuple[str, ...]
    files: tuple[Path, ...]

    def __str__(self) -> str:
        """Return the words told to the user."""
        if self.because:
            return f"{self.status} because {', '.join(self.because)}"
        return self.status


def release_card(folder: Path, name: str, *, fingerprint: Fingerprint, make: Make) -> Outcome:
    """Release a card into a folder.

    Parameters
    ----------
    folder : Path
        Where the cards are; must exist [-]
    name : str
        Name of the card, its files are `name.suffix` [-]
    fingerprint : Fingerprint
        Tells one card from another [-]
    make : callable
        Makes the files for an issue number and the number it replaces [-]

    Returns
    -------
    Outcome
        new, unchanged, or replaced and why [-]

    Raises
    ------
    ReleaseError
        Nothing was released; the older card stands as it was.
    """
    with locked(folder):
        history = load_history(folder)
        issues = _settled(folder, name, history)
        last = issues[-1] if issues else None
        if last is None:
            _refuse_unknown_cards(folder, name)
        same = (
            last is not None
            and last.digest == fingerprint.digest
            and last.content == fingerprint.content
            and last.parts == fingerprint.parts
        )
        if last is not None and same:
            files = make(last.number, last.replaces)
            paths = _complete(folder, name, history, (*issues[:-1], last), files)
            return Outcome("unchanged", last.number, (), paths)
        number = 1 if last is None else last.number + 1
        replaces = None if last is None else last.number
        issue = Issue(
            number=number,
            digest=fingerprint.digest,
            content=fingerprint.content,
            parts=dict(fingerprint.parts),
            replaces=replaces,
            files={},
            state="reserved",
        )
        files = make(number, replaces)
        paths = _complete(folder, name, history, (*issues, issue), files)
        if last is None:
            return Outcome("new", number, (), paths)
        return Outcome("replaced", number, changed_parts(last, issue), paths)


def _sha256(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()


def _settled(folder: Path, name: str, history: History) -> tuple[Issue, ...]:
    """Return the issues of a card with an unconfirmed last one confirmed or dropped."""
    issues = history.get(name, ())
    if not issues or issues[-1].state == "released":
        return issues
    last = issues[-1]
    for suffix, digest in last.files.items():
        content = read_if_there(folder / f"{name}.{suffix}")
        if content is not None and _sha256(content) == digest:
            return (*issues[:-1], replace(last, state="released"))
    return issues[:-1]


def _complete(
    folder: Path,
    name: str,
    history: History,
    issues: tuple[Issue, ...],
    files: Mapping[str, bytes],
) -> tuple[Path, ...]:
    """Reserve the last issue, write what is not on disk yet, confirm; return the paths."""
    last = issues[-1]
    digests = {suffix: _sha256(content) for suffix, content in files.items()}
    paths = {suffix: folder / f"{name}.{suffix}" for suffix in files}
    stale = [suffix for suffix in files if read_if_there(paths[suffix]) != files[suffix]]
    # Files in other formats of the same issue, from an earlier run, stay part of it.
    kept = last.files if last.state == "released" else {}
    confirmed = replace(last, files={**kept, **digests}, state="released")
    if last.state == "reserved":
        # Only what is about to be written tells later whether this issue reached the disk.
        coming = replace(last, files={suffix: digests[suffix] for suffix in stale})
        save_history(folder, {**history, name: (*issues[:-1], coming)})
    for suffix in stale:
        write_whole(paths[suffix], files[suffix])
    settled = {**history, name: (*issues[:-1], confirmed)}
    if settled != history or last.state == "reserved":
        save_history(folder, settled)
    return tuple(paths.values())


def _refuse_unknown_cards(folder: Path, name: str) -> None:
    """Refuse to number a card from 1 over one whose history is gone."""
    found = sorted(path.name for path in folder.glob("*") if path.stem == name and path.is_file())
    if any(file.endswith((".pdf", ".html")) for file in found):
        raise ReleaseError(
            f"{folder}: {', '.join(found)} stands here but {HISTORY_NAME} does not know it, so its"
            " issue number could be given twice; restore the history or move the card away"
        )
