"""Papers: sizes of a card page, margins that clear binder holes, and two pages to a sheet."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from cardgen.errors import UsageError
from cardgen.render.boxes import Box, Page, Rule, moved

INCH: Final = 72.0
MILLIMETRE: Final = 72.0 / 25.4

# Holes of US sheets: centre 1/2 in from the edge, 9/32 in across (common practice, no source).
# ISO 838:1974: centre 12 mm from the edge, 6 mm across.
_US_HOLES: Final = (0.5 + 9 / 64) * INCH
_ISO_HOLES: Final = 15.0 * MILLIMETRE


@dataclass(frozen=True, slots=True)
class Paper:
    """One size of card page.

    `binder` is the margin at the edge with holes (left on a front, right on a back), `margin` the
    other three, which desk printers cannot fill [pt]. `sheet` is the landscape sheet that carries
    two pages side by side, None where every page is its own sheet [pt].
    """

    name: str
    width: float
    height: float
    binder: float
    margin: float
    sheet: tuple[float, float] | None = None


_HALF_LETTER: Final = (5.5 * INCH, 8.5 * INCH)
_A5: Final = (148.0 * MILLIMETRE, 210.0 * MILLIMETRE)

PAPERS: Final[dict[str, Paper]] = {
    paper.name: paper
    for paper in (
        Paper("half-letter", *_HALF_LETTER, binder=_US_HOLES, margin=18.0),
        Paper("a5", *_A5, binder=_ISO_HOLES, margin=17.0),
        Paper("a6", 105.0 * MILLIMETRE, 148.0 * MILLIMETRE, binder=24.0, margin=14.0),
        Paper(
            "letter", *_HALF_LETTER, binder=_US_HOLES, margin=18.0, sheet=(11 * INCH, 8.5 * INCH)
        ),
        Paper(
            "a4", *_A5, binder=_ISO_HOLES, margin=17.0, sheet=(297 * MILLIMETRE, 210 * MILLIMETRE)
        ),
    )
}
"""Papers by name. "letter" and "a4" are two half-size pages on one landscape sheet."""


def find_paper(name: str) -> Paper:
    """Return a paper by its name.

    Parameters
    ----------
    name : str
        A key of `PAPERS`; case does not count [-]

    Returns
    -------
    Paper
        The paper [-]

    Raises
    ------
    UsageError
        No paper has that name.
    """
    try:
        return PAPERS[name.casefold()]
    except KeyError:
        known = ", ".join(PAPERS)
        raise UsageError(f"unknown paper {name!r}; expected one of {known}") from None


def impose(pages: Sequence[Page], paper: Paper) -> tuple[Page, ...]:
    """Return the sheets that carry the pages.

    Two pages share a landscape sheet, the front on the left: folded along the marks with the print
    outside, front and back have their holes on the same edge.

    Parameters
    ----------
    pages : sequence of Page
        Card pages in order [-]
    paper : Paper
        The paper they were laid out for [-]

    Returns
    -------
    tuple of Page
        The pages themselves, or sheets with two pages each [-]
    """
    if paper.sheet is None:
        return tuple(pages)
    width, height = paper.sheet
    middle = width / 2.0
    marks: tuple[Box, ...] = (
        *(_dashes(middle, height - 4.0, height - 16.0)),
        *(_dashes(middle, 16.0, 4.0)),
    )
    sheets = []
    for first in range(0, len(pages), 2):
        boxes: list[Box] = []
        for side, page in enumerate(pages[first : first + 2]):
            dx = middle - page.width if side == 0 else middle
            dy = (height - page.height) / 2.0
            boxes.extend(moved(box, dx=dx, dy=dy) for box in page.boxes)
        sheets.append(Page(width, height, (*boxes, *marks)))
    return tuple(sheets)


def _dashes(x: float, top: float, bottom: float) -> tuple[Rule, ...]:
    """Return a short dashed upright: where to fold, and where to cut instead."""
    step = (top - bottom) / 3.0
    return tuple(
        Rule(x, top - k * step, x, top - k * step - 0.7 * step, thickness=0.6) for k in range(3)
    )
