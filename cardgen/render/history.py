"""The issues of every card in a folder, in one small JSON file beside them."""

from __future__ import annotations

import json
from dataclasses import fields
from pathlib import Path
from typing import Any, Final, Literal

from cardgen.errors import ReleaseError
from cardgen.records import dataclass
from cardgen.render.files import read_if_there, write_whole

HISTORY_NAME: Final = "issues.json"

PARTS: Final = (
    "engine",
    "propeller",
    "airframe",
    "mixtures",
    "limits",
    "gauges",
    "card",
    "fit",
    "model",
    "identity",
)
"""What can replace a card, in the order it is told."""


@dataclass(frozen=True, slots=True)
class Issue:
    """One issue of one card.

    `digest` is of the profile, `content` of the printed numbers, `parts` of each part of the
    profile, `files` (suffix to SHA-256) of what was written, `program` of the program that made
    them. A `reserved` issue has its number but perhaps not all its files; a `released` one has.
    """

    number: int
    digest: str
    content: str
    parts: dict[str, str]
    replaces: int | None
    files: dict[str, str]
    state: Literal["reserved", "released"]
    program: str = ""


History = dict[str, tuple[Issue, ...]]  # card name -> its issues, oldest first


def load_history(folder: Path) -> History:
    """Return the issues of every card in a folder.

    Parameters
    ----------
    folder : Path
        Where the cards are [-]

    Returns
    -------
    dict
        Issues by card name, oldest first; empty where there is no history yet [-]

    Raises
    ------
    ReleaseError
        The history cannot be read: numbering anew could repeat an issue number.
    """
    path = folder / HISTORY_NAME
    content = read_if_there(path)
    if content is None:
        return {}
    try:
        cards: dict[str, list[dict[str, Any]]] = json.loads(content)["cards"]
        history = {name: tuple(map(_issue, issues)) for name, issues in cards.items()}
    except (ValueError, TypeError, KeyError, AttributeError, RecursionError) as error:
        raise ReleaseError(
            f"{path}: is not a history of issues ({error}); restore it, or move it and the cards"
            " beside it away to number from 1 again"
        ) from error
    for name, issues in history.items():
        numbers = [issue.number for issue in issues]
        if numbers != list(range(1, len(numbers) + 1)):
            raise ReleaseError(f"{path}: the issues of {name} are numbered {numbers}; restore it")
    return history


def _issue(raw: dict[str, Any]) -> Issue:
    """Return an issue as read; refuse what another program or a hand made of it."""
    issue = Issue(**raw)
    digests = (issue.parts, issue.files)
    if not (
        type(issue.number) is int
        and all(type(text) is str for text in (issue.digest, issue.content, issue.program))
        and all(type(each) is dict for each in digests)
        and all(type(text) is str for each in digests for text in each.values())
        and (issue.replaces is None or type(issue.replaces) is int)
        and issue.state in ("reserved", "released")
    ):
        raise ValueError("an issue has a value of the wrong kind")
    return issue


def save_history(folder: Path, history: History) -> None:
    """Write the history whole.

    Parameters
    ----------
    folder : Path
        Where the cards are [-]
    history : dict
        Issues by card name [-]

    Raises
    ------
    ReleaseError
        It could not be written; the old one stands.
    """
    # A line per card: readable, quick to write for hundreds of them, and easily compared.
    names = [field.name for field in fields(Issue)]
    lines = [
        f"{json.dumps(card)}: "
        + json.dumps([{name: getattr(issue, name) for name in names} for issue in issues])
        for card, issues in sorted(history.items())
    ]
    text = '{"cards": {\n' + ",\n".join(lines) + "\n}}\n"
    write_whole(folder / HISTORY_NAME, text.encode())


def changed_parts(old: Issue, new: Issue) -> tuple[str, ...]:
    """Return what makes one issue replace another.

    Parameters
    ----------
    old, new : Issue
        The issue that stands and the one that replaces it [-]

    Returns
    -------
    tuple of str
        Names of parts; "model" where the numbers moved though no part did, "profile" where
        something outside every part changed [-]
    """
    names = dict.fromkeys((*PARTS, *sorted(old.parts.keys() | new.parts.keys())))
    changed = tuple(name for name in names if old.parts.get(name) != new.parts.get(name))
    if changed:
        return changed
    return ("profile",) if old.digest != new.digest else ("model",)
