"""A listing on the page: how wide its columns are, which part fits, and where each piece goes."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from itertools import groupby
from typing import Final

from cardgen.records import dataclass
from cardgen.render.beside import Cell, Listing, ListingRow, marks_of
from cardgen.render.boxes import Box, Rule, Run, Tint
from cardgen.render.columns import LEADING, LEAST_FIGURE, LEAST_SETTING, NOTE
from cardgen.render.fonts import Face, width, wrap
from cardgen.render.grid import BAND, ROW_RULE

TITLE: Final = 13.0
PAD: Final = 3.0  # on both sides of a column [pt]
GREATEST_SLACK: Final = 1.5  # a column is at most so much wider than its content

Column = tuple[int, int]  # group, place within it


@dataclass(frozen=True, slots=True)
class ListingPart:
    """Some columns and rows of a listing."""

    listing: Listing
    columns: tuple[Column, ...]
    first: int
    last: int  # one past

    @property
    def rows(self) -> tuple[ListingRow, ...]:
        """The rows of the part."""
        return self.listing.rows[self.first : self.last]

    @property
    def cells(self) -> tuple[tuple[Cell, ...], ...]:
        """The cells of its columns, row by row."""
        places = {column: k for k, column in enumerate(self.listing.columns)}
        return tuple(
            tuple(row.cells[places[column]] for column in self.columns) for row in self.rows
        )

    @property
    def whole(self) -> bool:
        """Whether this is the whole listing."""
        every = len(self.columns) == len(self.listing.columns)
        return every and len(self.rows) == len(self.listing.rows)


def cell_size(listing: Listing, column: Column) -> tuple[Face, float]:
    """Return face and size of the cells of a column."""
    strong = listing.groups[column[0]].strong[column[1]]
    return ("bold", LEAST_SETTING) if strong else ("regular", LEAST_FIGURE)


def head_size(listing: Listing) -> tuple[Face, float]:
    """Return face and size of the heads of columns."""
    return ("bold", LEAST_FIGURE) if listing.large_heads else ("regular", NOTE)


@lru_cache(maxsize=256)
def _content_widths(listing: Listing) -> dict[Column, float]:
    """Return the width of every column's widest text; every row counts, wherever it is cut."""
    head_face, head = head_size(listing)
    found = {}
    for k, column in enumerate(listing.columns):
        face, size = cell_size(listing, column)
        texts = {row.cells[k].printed for row in listing.rows}
        name = listing.groups[column[0]].heads[column[1]]
        found[column] = max(
            width(name, head_face, head), *(width(text, face, size) for text in texts)
        )
    return found


@lru_cache(maxsize=256)
def _label_width(listing: Listing) -> float:
    labels = (width(row.label, "bold", LEAST_FIGURE) for row in listing.rows)
    return PAD + max(width(listing.label, "regular", NOTE), *labels)


def _natural(listing: Listing, columns: tuple[Column, ...]) -> float:
    return _label_width(listing) + PAD + sum(_column_widths(listing, columns).values())


def _column_widths(listing: Listing, columns: tuple[Column, ...]) -> dict[Column, float]:
    """Return the widths of columns with the air on both sides."""
    widths = _content_widths(listing)
    return {column: widths[column] + 2.0 * PAD for column in columns}


def _group_lines(part: ListingPart, measure: float) -> dict[int, tuple[str, ...]]:
    """Return the name of each group of a part, broken to stand over its columns."""
    ends, right = _ends(part, 0.0, measure)
    starts = [column for column in part.columns if ends[column][0] in _cuts(part, ends)]
    edges = [*(ends[column][0] for column in starts[1:]), right]
    return {
        column[0]: wrap(
            part.listing.groups[column[0]].name,
            "bold",
            size=LEAST_FIGURE,
            measure=edge - ends[column][0] - 2.0 * PAD,
        )
        for column, edge in zip(starts, edges, strict=True)
    }


def column_blocks(listing: Listing, measure: float) -> tuple[tuple[Column, ...], ...] | None:
    """Return the columns in blocks that fit across, whole groups together where they can be.

    Parameters
    ----------
    listing : Listing
        The listing [-]
    measure : float
        Room across [pt]

    Returns
    -------
    tuple of tuple, or None
        Columns of each block; None where not even one column fits [-]
    """
    groups = [tuple(group) for _, group in groupby(listing.columns, key=lambda column: column[0])]
    units: list[tuple[Column, ...]] = []
    for group in groups:
        if _natural(listing, group) <= measure:
            units.append(group)
        else:
            units.extend((column,) for column in group)
    if any(_natural(listing, unit) > measure for unit in units):
        return None
    blocks: list[tuple[Column, ...]] = []
    for unit in units:
        if blocks and _natural(listing, (*blocks[-1], *unit)) <= measure:
            blocks[-1] = (*blocks[-1], *unit)
        else:
            blocks.append(unit)
    return tuple(blocks)


# ---------------------------------------------------------------------------------------- heights


def _title_lines(
    listing: Listing, measure: float, continued: str
) -> tuple[tuple[str, Face, float], ...]:
    lines: list[tuple[str, Face, float]] = [
        (line, "bold", TITLE) for line in wrap(listing.title, "bold", size=TITLE, measure=measure)
    ]
    for text in listing.lead:
        lines += [
            (line, "regular", NOTE) for line in wrap(text, "regular", size=NOTE, measure=measure)
        ]
    if continued:
        lines += [
            (line, "bold", NOTE) for line in wrap(continued, "bold", size=NOTE, measure=measure)
        ]
    return tuple(lines)


def _legend(
    parts: Sequence[ListingPart], measure: float
) -> tuple[tuple[str, tuple[str, ...]], ...]:
    """Return the marks in parts of one listing with the lines of their meaning."""
    if not parts:
        return ()
    listing = parts[0].listing
    marks = marks_of(listing, [cell for part in parts for row in part.cells for cell in row])
    return tuple(
        (mark, wrap(text, "regular", size=NOTE, measure=measure - _indent(listing)))
        for mark, text in marks
    )


def _indent(listing: Listing) -> float:
    return 6.0 + max((width(mark, "bold", NOTE) for mark, _ in listing.marks), default=0.0)


def row_height(listing: Listing) -> float:
    """Return the height of a row [pt]."""
    strong = any(any(group.strong) for group in listing.groups)
    return LEADING * (LEAST_SETTING if strong else LEAST_FIGURE)


def _head_height(part: ListingPart, measure: float) -> float:
    _, head = head_size(part.listing)
    lines = max(len(lines) for lines in _group_lines(part, measure).values())
    return LEADING * LEAST_FIGURE * lines + LEADING * head + 4.0


def part_height(
    part: ListingPart,
    *,
    measure: float,
    continued: str,
    titled: bool,
    explains: Sequence[ListingPart],
) -> float:
    """Return the height of a part [pt].

    Parameters
    ----------
    part : ListingPart
        The part [-]
    measure : float
        Room across [pt]
    continued : str
        Where the listing goes on, "" where it is whole [-]
    titled : bool
        Whether it carries the title, as the first part on a page does [-]
    explains : sequence of ListingPart
        The parts whose marks are explained under it: all on the page under the last [-]

    Returns
    -------
    float
        Height with title, heads, rows and the meaning of marks [pt]
    """
    listing = part.listing
    height = _head_height(part, measure) + row_height(listing) * len(part.rows) + 2.0
    if titled:
        lines = _title_lines(listing, measure, continued)
        height += sum(LEADING * size for _, _, size in lines) + 2.0
    legend = _legend(explains, measure)
    return height + sum(LEADING * NOTE * len(lines) for _, lines in legend) + (3.0 * bool(legend))


# ---------------------------------------------------------------------------------------- placing


def place_part(
    part: ListingPart,
    *,
    x: float,
    top: float,
    measure: float,
    continued: str,
    titled: bool,
    explains: Sequence[ListingPart],
) -> list[Box]:
    """Return the boxes of a part in reading order.

    Parameters
    ----------
    part : ListingPart
        The part [-]
    x, top : float
        Upper left corner [pt]
    measure : float
        Room across [pt]
    continued : str
        Where the listing goes on, "" where it is whole [-]
    titled : bool
        Whether it carries the title [-]
    explains : sequence of ListingPart
        The parts whose marks are explained under it [-]

    Returns
    -------
    list of Box
        Title, heads, rows from top to bottom, meaning of marks [-]
    """
    boxes: list[Box] = []
    y = top
    if titled:
        for text, face, size in _title_lines(part.listing, measure, continued):
            y -= LEADING * size
            boxes.append(Run(x, y + 0.2 * size, text, face, size))
        y -= 2.0
    ends, right = _ends(part, x, measure)
    start = y
    boxes += _heads(part, x, y, measure=measure)
    y -= _head_height(part, measure)
    y, rows = _rows(part, x, y, ends, right)
    boxes += rows
    boxes.append(Rule(x, y, right, y, thickness=1.2))
    boxes += [Rule(cut, start - 2.0, cut, y, thickness=0.6) for cut in _cuts(part, ends)]
    y -= 3.0
    for mark, lines in _legend(explains, measure):
        for k, line in enumerate(lines):
            y -= LEADING * NOTE
            if k == 0:
                boxes.append(Run(x, y, mark, "bold", NOTE))
            boxes.append(Run(x + _indent(part.listing), y, line, "regular", NOTE))
    return boxes


def _ends(
    part: ListingPart, x: float, measure: float
) -> tuple[dict[Column, tuple[float, float]], float]:
    """Return left edge and end of content of each column, and the right edge of the part."""
    widths = _column_widths(part.listing, part.columns)
    label = _label_width(part.listing) + PAD
    natural = _natural(part.listing, part.columns)
    room = min(measure, label + GREATEST_SLACK * (natural - label))
    spare = (room - natural) / len(part.columns)
    at = x + label
    ends: dict[Column, tuple[float, float]] = {}
    for column in part.columns:
        full = widths[column] + spare
        ends[column] = (at, at + full - PAD - 0.5 * spare)
        at += full
    return ends, at


def _cuts(part: ListingPart, ends: dict[Column, tuple[float, float]]) -> list[float]:
    """Return where uprights stand: before every group."""
    return [
        ends[column][0]
        for k, column in enumerate(part.columns)
        if k == 0 or part.columns[k - 1][0] != column[0]
    ]


def _right(text: str, end: float, y: float, face: Face, size: float) -> Run:
    return Run(end - width(text, face, size), y, text, face, size)


def _heads(part: ListingPart, x: float, top: float, *, measure: float) -> list[Box]:
    listing = part.listing
    ends, right = _ends(part, x, measure)
    boxes: list[Box] = []
    names = _group_lines(part, measure)
    most = max(len(lines) for lines in names.values())
    for cut, lines in zip(_cuts(part, ends), names.values(), strict=True):
        for k, line in enumerate(lines):
            base = top - LEADING * LEAST_FIGURE * (most - len(lines) + k + 1)
            boxes.append(Run(cut + PAD, base, line, "bold", LEAST_FIGURE))
    y = top - LEADING * LEAST_FIGURE * most
    face, size = head_size(listing)
    y -= LEADING * size
    label = x + _label_width(listing)
    boxes.append(_right(listing.label, label, y, "regular", NOTE))
    for column in part.columns:
        head = listing.groups[column[0]].heads[column[1]]
        boxes.append(_right(head, ends[column][1], y, face, size))
    boxes.append(Rule(x, y - 3.2, right, y - 3.2, thickness=1.2))
    return boxes


def _rows(
    part: ListingPart,
    x: float,
    top: float,
    ends: dict[Column, tuple[float, float]],
    right: float,
) -> tuple[float, list[Box]]:
    """Return where the rows end, and their boxes, banded in twos."""
    listing, height = part.listing, row_height(part.listing)
    boxes: list[Box] = []
    y = top
    cells = part.cells
    for band in range(0, len(part.rows), 2):
        rows = part.rows[band : band + 2]
        if band % 4 == 2:
            boxes.append(Tint(x, y - height * len(rows), right - x, height * len(rows), BAND))
        for k, row in enumerate(rows):
            base = y - 0.5 * height - 0.35 * LEAST_FIGURE
            label = x + _label_width(listing)
            boxes.append(_right(row.label, label, base, "bold", LEAST_FIGURE))
            for column, cell in zip(part.columns, cells[band + k], strict=True):
                face, size = cell_size(listing, column)
                boxes.append(_right(cell.printed, ends[column][1], base, face, size))
            y -= height
            last = k == len(rows) - 1
            boxes.append(Rule(x, y, right, y, thickness=0.7 if last else ROW_RULE))
    return y, boxes
