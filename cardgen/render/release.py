"""Gives a card its issue number and puts it beside the others, whole or not at all.

The order makes a crash at any moment harmless. The files are made and read back in memory, for the
number that comes next; the number is then reserved in the history together with the digests of the
files; the files are written; the number is confirmed. A reservation found by the next run is
settled by looking at the files: if one of them reached the disk the issue may have been printed, so
its number is spent; if none did, the number is free again. So no number is ever given twice, and
none is left out.

The folder is locked while the history is read and while files are written, not while they are
made: where another run released the same card meanwhile, it is made again for the next number.
"""

from __future__ import annotations

import hashlib
import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Final, Literal

from cardgen.errors import ReleaseError
from cardgen.records import dataclass
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


_STATED_ISSUE: Final = re.compile(rb"cruise card, issue ([0-9]{1,6})")  # in a card's title

_MOST_TRIES: Final = 5  # runs that release one card at the same moment are a mistake, not a load


@dataclass(frozen=True, slots=True)
class Fingerprint:
    """What decides whether a card is another one: digests of profile, printed numbers, parts.

    `program` is the digest of the program that made it; it decides only whether it is made again.
    """

    digest: str
    content: str
    parts: dict[str, str]
    program: str = ""


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of a card; `because` names the parts that changed, `voids` the older issue."""

    status: Literal["new", "unchanged", "replaced"]
    issue: int
    because: tuple[str, ...]
    files: tuple[Path, ...]
    voids: int | None = None

    def __str__(self) -> str:
        """Return the words told to the user."""
        if self.because:
            return f"{self.status} because {', '.join(self.because)}"
        return self.status


def standing(
    folder: Path,
    name: str,
    *,
    digest: str,
    parts: Mapping[str, str],
    program: str,
    formats: Sequence[str],
) -> Outcome | None:
    """Return a card that stands and need not even be computed, None where it must be made.

    Parameters
    ----------
    folder : Path
        Where the cards are [-]
    name : str
        Name of the card [-]
    digest : str
        Digest of the profile and the fit [-]
    parts : mapping
        Digest of each part [-]
    program : str
        Digest of this program [-]
    formats : sequence of str
        Suffixes of the files wanted [-]

    Returns
    -------
    Outcome or None
        Unchanged, where the same program made the last issue of the same profile and every file
        still is on the disk as it was written [-]
    """
    issues = load_history(folder).get(name, ())
    if not issues:
        return None
    last = issues[-1]
    same = (last.state, last.digest, last.program, last.parts) == (
        "released",
        digest,
        program,
        dict(parts),
    )
    paths = {suffix: folder / f"{name}.{suffix}" for suffix in formats}
    if not same or not all(
        suffix in last.files and _is_on_disk(path, last.files[suffix])
        for suffix, path in paths.items()
    ):
        return None
    return Outcome("unchanged", last.number, (), tuple(paths.values()))


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
        Makes the files for an issue number and the number it replaces; the folder is not locked
        meanwhile [-]

    Returns
    -------
    Outcome
        new, unchanged, or replaced and why [-]

    Raises
    ------
    ReleaseError
        Nothing was released; the older card stands as it was.
    """
    for _ in range(_MOST_TRIES):
        with locked(folder):
            last = _last(folder, name, load_history(folder))
        issue = _coming(last, fingerprint)
        files = make(issue.number, issue.replaces)
        with locked(folder):
            history = load_history(folder)
            if _last(folder, name, history) != last:
                continue
            _refuse_later_card(folder, name, history.get(name, ()), files)
            earlier = _settled(folder, name, history)
            if issue.state == "released":
                earlier = earlier[:-1]
            paths = _complete(folder, name, history, (*earlier, issue), files)
        if last is None:
            return Outcome("new", issue.number, (), paths)
        if issue.state == "released":
            return Outcome("unchanged", issue.number, (), paths)
        return Outcome("replaced", issue.number, changed_parts(last, issue), paths, last.number)
    raise ReleaseError(f"{folder}: other runs keep releasing {name}; wait for them and run again")


def _last(folder: Path, name: str, history: History) -> Issue | None:
    """Return the issue that stands; refuse cards of an unknown history."""
    issues = _settled(folder, name, history)
    if not issues:
        _refuse_unknown_cards(folder, name)
        return None
    return issues[-1]


def _coming(last: Issue | None, fingerprint: Fingerprint) -> Issue:
    """Return the last issue itself where nothing changed, otherwise the one that comes next."""
    if last is not None and (last.digest, last.content, last.parts) == (
        fingerprint.digest,
        fingerprint.content,
        fingerprint.parts,
    ):
        return replace(last, program=fingerprint.program)
    return Issue(
        number=1 if last is None else last.number + 1,
        digest=fingerprint.digest,
        content=fingerprint.content,
        parts=dict(fingerprint.parts),
        replaces=None if last is None else last.number,
        files={},
        state="reserved",
        program=fingerprint.program,
    )


def _sha256(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()


def _is_on_disk(path: Path, digest: str) -> bool:
    content = read_if_there(path)
    return content is not None and _sha256(content) == digest


def _settled(folder: Path, name: str, history: History) -> tuple[Issue, ...]:
    """Return the issues of a card with an unconfirmed last one confirmed or dropped."""
    issues = history.get(name, ())
    if not issues or issues[-1].state == "released":
        return issues
    last = issues[-1]
    for suffix, digest in last.files.items():
        if _is_on_disk(folder / f"{name}.{suffix}", digest):
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


def _refuse_later_card(
    folder: Path, name: str, issues: Sequence[Issue], files: Mapping[str, bytes]
) -> None:
    """Refuse to write over a card of a later issue than the history knows.

    A folder synced from elsewhere, or restored in part, may hold a history older than its cards.
    """
    known = {digest for issue in issues for digest in issue.files.values()}
    for suffix in ("pdf", "html"):
        path = folder / f"{name}.{suffix}"
        content = read_if_there(path)
        if content is None or content == files.get(suffix) or _sha256(content) in known:
            continue
        stated = _STATED_ISSUE.search(content)
        if stated is not None and int(stated[1]) > len(issues):
            raise ReleaseError(
                f"{path}: is issue {int(stated[1])}, which {HISTORY_NAME} does not know, so its"
                " number could be given twice; restore the newer history or move the card away"
            )


def _refuse_unknown_cards(folder: Path, name: str) -> None:
    """Refuse to number a card from 1 over one whose history is gone."""
    found = sorted(path.name for path in folder.glob("*") if path.stem == name and path.is_file())
    if any(file.endswith((".pdf", ".html")) for file in found):
        raise ReleaseError(
            f"{folder}: {', '.join(found)} stands here but {HISTORY_NAME} does not know it, so its"
            " issue number could be given twice; restore the history or move the card away"
        )
