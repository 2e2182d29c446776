"""What stands on every page and cannot be switched off: whose numbers, how good, who governs."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from cardgen.records import dataclass
from cardgen.render.boxes import Box, Frame, Rule, Run
from cardgen.render.columns import LEADING, NOTE
from cardgen.render.edition import Edition
from cardgen.render.fonts import CAP_HEIGHT, Face, printable, width, wrap
from cardgen.render.wording import (
    ON_PAGE,
    SUPPLEMENTARY,
    configuration,
    digest_text,
    issue_text,
    page_text,
    stamps,
    tolerance_text,
    units_text,
)
from cardgen.tables.card import CardTable

REGISTRATION_SIZE: Final = 14.0
STAMP_SIZE: Final = 13.0
GOVERNS_SIZES: Final = (10.5, 10.0, 9.5)  # the largest that fits one line, else the last
_PAD: Final = 4.0
_CORNER_GAP: Final = 10.0

Line = tuple[str, Face, float]


@dataclass(frozen=True, slots=True)
class Marking:
    """Head and foot of one page, broken into lines for a measure [pt]."""

    registration: tuple[str, ...]
    corner: tuple[str, str]  # issue and date; page n of m
    corner_below: bool  # a long registration leaves no room beside it
    stamps: tuple[str, ...]
    configuration: tuple[str, ...]
    foot: tuple[str, ...]
    governs: tuple[str, ...]
    governs_size: float

    @property
    def head_height(self) -> float:
        """Height of everything above the tables [pt]."""
        height = LEADING * REGISTRATION_SIZE * len(self.registration)
        height += LEADING * NOTE if self.corner_below else 0.0
        height += LEADING * NOTE * len(self.configuration)
        if self.stamps:
            height += LEADING * STAMP_SIZE * len(self.stamps) + 2.0 * _PAD + 4.0
        return height + 7.0

    @property
    def foot_height(self) -> float:
        """Height of everything below the tables [pt]."""
        lines = LEADING * NOTE * len(self.foot)
        return lines + LEADING * self.governs_size * len(self.governs) + 2.0 * _PAD + 6.0


def mark_page(
    edition: Edition,
    tables: Sequence[CardTable],
    *,
    page: int,
    pages: int,
    measure: float,
    where: str = ON_PAGE,
) -> Marking:
    """Return the marking of one page.

    Parameters
    ----------
    edition : Edition
        What is being released [-]
    tables : sequence of CardTable
        The tables on the page; all tables for a back page [-]
    page, pages : int
        Which page of how many [-]
    measure : float
        Room across [pt]
    where : str
        What to call the place that the tables stand in [-]

    Returns
    -------
    Marking
        Lines of head and foot [-]
    """
    card, identity = edition.card, edition.identity
    inner = measure - 3.0 * _PAD
    governs_size = next(
        (size for size in GOVERNS_SIZES if width(SUPPLEMENTARY, "bold", size) <= inner),
        GOVERNS_SIZES[-1],
    )

    def lines(text: str, face: Face = "regular", size: float = NOTE) -> tuple[str, ...]:
        return wrap(text, face, size=size, measure=measure)

    registration = lines(identity.registration, "bold", REGISTRATION_SIZE)
    corner = (printable(issue_text(identity, edition.issue)), page_text(page, pages))
    taken = width(registration[-1], "bold", REGISTRATION_SIZE) + _corner_width(corner)
    return Marking(
        registration=registration,
        corner=corner,
        corner_below=taken + _CORNER_GAP > measure,
        stamps=tuple(
            line
            for stamp in stamps(card, identity)
            for line in wrap(stamp, "bold", size=STAMP_SIZE, measure=measure - 4.0 * _PAD)
        ),
        configuration=lines(configuration(identity)),
        foot=(
            *lines(card.percent_of),
            *lines(units_text(card)),
            *lines(tolerance_text(card, tables, where=where)),
            *lines(digest_text(card, edition.issue, edition.replaces)),
        ),
        governs=wrap(SUPPLEMENTARY, "bold", size=governs_size, measure=inner),
        governs_size=governs_size,
    )


def _corner_width(corner: tuple[str, str]) -> float:
    """Return how wide issue and page number run side by side [pt]."""
    return sum(width(text, "bold", NOTE) for text in corner) + _CORNER_GAP


def place_head(marking: Marking, *, x: float, top: float, measure: float) -> tuple[Box, ...]:
    """Return the boxes of the head: registration, issue, page, stamps, configuration.

    Parameters
    ----------
    marking : Marking
        The lines [-]
    x, top, measure : float
        Upper left corner and room across [pt]

    Returns
    -------
    tuple of Box
        Boxes in reading order [-]
    """
    y = top - CAP_HEIGHT * REGISTRATION_SIZE
    boxes: list[Box] = []
    for line in marking.registration:
        boxes.append(Run(x, y, line, "bold", REGISTRATION_SIZE))
        y -= LEADING * REGISTRATION_SIZE
    y += LEADING * REGISTRATION_SIZE
    line_y = y - LEADING * NOTE if marking.corner_below else y
    issue, page = marking.corner
    end = x + measure
    boxes.append(Run(end - _corner_width(marking.corner), line_y, issue, "bold", NOTE))
    boxes.append(Run(end - width(page, "bold", NOTE), line_y, page, "bold", NOTE))
    y = line_y - (LEADING - CAP_HEIGHT) * REGISTRATION_SIZE
    if marking.stamps:
        height = LEADING * STAMP_SIZE * len(marking.stamps) + 2.0 * _PAD
        boxes.append(Frame(x, y - height, measure, height, 1.8))
        line_y = y - _PAD + 0.1 * STAMP_SIZE
        for line in marking.stamps:
            line_y -= LEADING * STAMP_SIZE
            start = x + 0.5 * (measure - width(line, "bold", STAMP_SIZE))
            boxes.append(Run(start, line_y + 0.15 * STAMP_SIZE, line, "bold", STAMP_SIZE))
        y -= height + 4.0
    for line in marking.configuration:
        y -= LEADING * NOTE
        boxes.append(Run(x, y + 0.2 * NOTE, line, "regular", NOTE))
    boxes.append(Rule(x, y - 3.0, x + measure, y - 3.0, thickness=0.6))
    return tuple(boxes)


def place_foot(marking: Marking, *, x: float, bottom: float, measure: float) -> tuple[Box, ...]:
    """Return the boxes of the foot, ending with the line that says what governs.

    Parameters
    ----------
    marking : Marking
        The lines [-]
    x, bottom, measure : float
        Lower left corner and room across [pt]

    Returns
    -------
    tuple of Box
        Boxes in reading order [-]
    """
    y = bottom + marking.foot_height - 2.0
    boxes: list[Box] = [Rule(x, y, x + measure, y, thickness=0.6)]
    for line in marking.foot:
        y -= LEADING * NOTE
        boxes.append(Run(x, y, line, "regular", NOTE))
    size = marking.governs_size
    height = LEADING * size * len(marking.governs) + _PAD
    boxes.append(Frame(x, bottom, measure, height, 1.2))
    line_y = bottom + height - 0.5 * _PAD
    for line in marking.governs:
        line_y -= LEADING * size
        start = x + 0.5 * (measure - width(line, "bold", size))
        boxes.append(Run(start, line_y + 0.28 * size, line, "bold", size))
    return tuple(boxes)
