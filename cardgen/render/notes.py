"""The limits-and-notes pages: broken into lines, shared out over pages, placed."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, Literal

from cardgen.records import dataclass
from cardgen.render.boxes import Box, Run
from cardgen.render.columns import LEADING, NOTE
from cardgen.render.fonts import wrap
from cardgen.tables.card import Section

SECTION_SIZE: Final = 11.0
INDENT: Final = {"title": 0.0, "first": 6.0, "more": 15.0}  # [pt]

NoteLine = tuple[str, Literal["title", "first", "more"]]  # first and further lines of one note


@dataclass(frozen=True, slots=True)
class NotesPage:
    """The lines of one page of notes, and what each is."""

    lines: tuple[NoteLine, ...]


def _blocks(sections: Sequence[Section], measure: float) -> list[list[NoteLine]]:
    """Return blocks that stay together: a heading with its first line, then line by line."""
    blocks: list[list[NoteLine]] = []
    for section in sections:
        pending: list[NoteLine] = [
            (line, "title")
            for line in wrap(section.title, "bold", size=SECTION_SIZE, measure=measure)
        ]
        for text in section.lines:
            first, *more = wrap(text, "regular", size=NOTE, measure=measure - INDENT["more"])
            pending += [(first, "first"), *((line, "more") for line in more)]
            blocks.append(pending)
            pending = []
    return blocks


def _height(line: NoteLine) -> float:
    return LEADING * (SECTION_SIZE + 4.0 if line[1] == "title" else NOTE)


def share_out(
    sections: Sequence[Section], *, measure: float, height: float
) -> tuple[NotesPage, ...]:
    """Return the lines of each page of notes; a block longer than a page is broken.

    Parameters
    ----------
    sections : sequence of Section
        What the notes say [-]
    measure, height : float
        Room across and down [pt]

    Returns
    -------
    tuple of NotesPage
        The pages in order [-]
    """
    limit = height - LEADING * NOTE  # room to say that the notes go on
    pages: list[list[NoteLine]] = [[]]
    used = 0.0
    for block in _blocks(sections, measure):
        if used + sum(_height(line) for line in block) > limit and pages[-1]:
            pages.append([])
            used = 0.0
        for line in block:
            if used + _height(line) > limit and pages[-1]:
                pages.append([])
                used = 0.0
            pages[-1].append(line)
            used += _height(line)
    return tuple(NotesPage(tuple(page)) for page in pages)


def place_notes(
    lines: Sequence[NoteLine], *, x: float, top: float, continued: str
) -> tuple[Box, ...]:
    """Return the boxes of one page of notes.

    Parameters
    ----------
    lines : sequence of (str, str)
        Lines and what each is [-]
    x, top : float
        Upper left corner [pt]
    continued : str
        Where the notes go on, "" where they end [-]

    Returns
    -------
    tuple of Box
        Boxes in reading order [-]
    """
    boxes: list[Box] = []
    y = top
    for line in lines:
        text, kind = line
        y -= _height(line)
        if kind == "title":
            boxes.append(Run(x, y, text, "bold", SECTION_SIZE))
        else:
            boxes.append(Run(x + INDENT[kind], y, text, "regular", NOTE))
    if continued:
        boxes.append(Run(x, y - LEADING * NOTE, continued, "bold", NOTE))
    return tuple(boxes)
