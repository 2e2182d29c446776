"""Papers: sizes of a card page, margins that clear binder holes, and two pages to a sheet."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from cardgen.errors import UsageError
from cardgen.records import dataclass
from cardgen.render.boxes import Box, Page, Rule, Run, moved
from cardgen.render.fonts import width as width_of

FOLD: Final = "fold or cut"
_LABEL: Final = 9.0  # size of those words [pt]

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


@dataclass(frozen=True, slots=True)
class Room:
    """The part of a page that may be printed on [pt].

    Holes are left on a front and right on a back. With the broad side down they are above or below,
    whichever way the printer turns the page, so both stay free.
    """

    paper: Paper
    landscape: bool = False

    @property
    def width(self) -> float:
        """Width of the page [pt]."""
        return self.paper.height if self.landscape else self.paper.width

    @property
    def height(self) -> float:
        """Height of the page [pt]."""
        return self.paper.width if self.landscape else self.paper.height

    @property
    def measure(self) -> float:
        """Room across [pt]."""
        if self.landscape:
            return self.width - 2.0 * self.paper.margin
        return self.width - self.paper.binder - self.paper.margin

    @property
    def top(self) -> float:
        """Upper end of the room [pt]."""
        return self.height - (self.paper.binder if self.landscape else self.paper.margin)

    @property
    def bottom(self) -> float:
        """Lower end of the room [pt]."""
        return self.paper.binder if self.landscape else self.paper.margin

    def left(self, page: int) -> float:
        """Return the left end of the room.

        Parameters
        ----------
        page : int
            Number of the page; odd ones are fronts [-]

        Returns
        -------
        float
            Its abscissa [pt]
        """
        front = page % 2 == 1
        return self.paper.binder if front and not self.landscape else self.paper.margin


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


def carries_two(width: float, height: float) -> bool:
    """Return whether a sheet of a finished card carries two pages side by side.

    Parameters
    ----------
    width, height : float
        Size of the sheet [pt]

    Returns
    -------
    bool
        Whether it is the sheet of one of the papers, not a page with its broad side down [-]
    """
    sheets = (paper.sheet for paper in PAPERS.values() if paper.sheet is not None)
    return any(abs(width - w) < 1.0 and abs(height - h) < 1.0 for w, h in sheets)


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
        # On the left page, which every sheet has.
        Run(
            middle - 4.0 - width_of(FOLD, "regular", _LABEL),
            height - 14.0,
            FOLD,
            "regular",
            _LABEL,
        ),
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
