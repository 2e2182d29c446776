"""Sheets for the logbook and the test flight: blocks under the marking that every page carries."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from cardgen.errors import ReleaseError
from cardgen.records import dataclass
from cardgen.render.boxes import Box, Frame, Page, Rule, Run, moved
from cardgen.render.columns import LEADING, NOTE
from cardgen.render.fonts import CAP_HEIGHT, Face, printable, width, wrap
from cardgen.render.paper import INCH, MILLIMETRE, Paper, find_paper, impose
from cardgen.render.wording import SUPPLEMENTARY, page_text
from cardgen.render.words import read_words

REGISTRATION_SIZE: Final = 16.0
TITLE_SIZE: Final = 12.0
STAMP_SIZE: Final = 12.0
GOVERNS_SIZE: Final = 9.5
BETWEEN: Final = 8.0  # between two blocks [pt]
_PAD: Final = 4.0

FULL_SHEETS: Final[dict[str, Paper]] = {
    "letter": Paper("letter", 8.5 * INCH, 11.0 * INCH, binder=(0.5 + 9 / 64) * INCH, margin=20.0),
    "a4": Paper(
        "a4", 210.0 * MILLIMETRE, 297.0 * MILLIMETRE, binder=15.0 * MILLIMETRE, margin=20.0
    ),
}
"""Whole sheets for the logbook, upright, with the holes of `cardgen.render.paper`."""


@dataclass(frozen=True, slots=True)
class Marks:
    """What stands on every page of a sheet.

    Parameters
    ----------
    registration : str
        Whose numbers they are [-]
    title : str
        What the sheet is [-]
    date : str
        Date of the profile [-]
    stamps : tuple of str
        Warnings printed large [-]
    head : tuple of str
        Configuration [-]
    foot : tuple of str
        Units, what percent is of, digests [-]
    """

    registration: str
    title: str
    date: str
    stamps: tuple[str, ...]
    head: tuple[str, ...]
    foot: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Block:
    """Something that stays together; its boxes hang down from (0, 0) at the left margin.

    `keeps_next` ties it to the block that follows, as a heading to its table; `gap` is left below.
    """

    height: float
    boxes: tuple[Box, ...]
    keeps_next: bool = False
    gap: float = BETWEEN


def full_sheet(card_paper: str) -> Paper:
    """Return the whole sheet that goes with the paper of a card.

    Parameters
    ----------
    card_paper : str
        Paper of the card [-]

    Returns
    -------
    Paper
        A4 with A sizes, otherwise letter [-]
    """
    return FULL_SHEETS["a4" if find_paper(card_paper).name.startswith("a") else "letter"]


def measure_of(paper: Paper) -> float:
    """Return the room across a page [pt]."""
    return paper.width - paper.binder - paper.margin


def text_block(
    text: str,
    *,
    measure: float,
    face: Face = "regular",
    size: float = NOTE,
    indent: float = 0.0,
    keeps_next: bool = False,
    gap: float = BETWEEN,
) -> Block:
    """Return a paragraph; its second and further lines hang in by the indent.

    Parameters
    ----------
    text : str
        What it says [-]
    measure : float
        Room across [pt]
    face : str
        "regular" or "bold" [-]
    size : float
        Size of the type [pt]
    indent : float
        How far further lines stand in [pt]
    keeps_next : bool
        Whether the next block stays with it [-]
    gap : float
        Room left below [pt]

    Returns
    -------
    Block
        The paragraph [-]
    """
    lines = wrap(text, face, size=size, measure=measure - indent)
    boxes = tuple(
        Run(indent if k else 0.0, -LEADING * size * k - CAP_HEIGHT * size, line, face, size)
        for k, line in enumerate(lines)
    )
    return Block(LEADING * size * len(lines), boxes, keeps_next, gap)


def set_sheet(marks: Marks, blocks: Sequence[Block], paper: Paper) -> tuple[Page, ...]:
    """Return the pages of a sheet.

    Parameters
    ----------
    marks : Marks
        What stands on every page [-]
    blocks : sequence of Block
        What the sheet says, in reading order [-]
    paper : Paper
        What it is printed on [-]

    Returns
    -------
    tuple of Page
        Pages, each with the whole marking [-]

    Raises
    ------
    ReleaseError
        A block is higher than a page.
    """
    measure = measure_of(paper)
    head_height = _head(marks, measure, page=99, pages=99)[1]
    foot_height = _foot(marks, measure)[1]
    room = paper.height - 2.0 * paper.margin - head_height - foot_height
    shared = _shared_out(blocks, room)
    pages = []
    for index, content in enumerate(shared):
        x = paper.binder if index % 2 == 0 else paper.margin
        y = paper.height - paper.margin
        boxes = [
            moved(box, dx=x, dy=y)
            for box in _head(marks, measure, page=index + 1, pages=len(shared))[0]
        ]
        y -= head_height
        for block in content:
            boxes += [moved(box, dx=x, dy=y) for box in block.boxes]
            y -= block.height + block.gap
        foot = _foot(marks, measure)[0]
        boxes += [moved(box, dx=x, dy=paper.margin + foot_height) for box in foot]
        pages.append(Page(paper.width, paper.height, tuple(boxes)))
    return tuple(pages)


def _shared_out(blocks: Sequence[Block], room: float) -> list[list[Block]]:
    """Return the blocks of each page; what is tied together goes on together."""
    groups: list[list[Block]] = []
    tied = False
    for block in blocks:
        if tied:
            groups[-1].append(block)
        else:
            groups.append([block])
        tied = block.keeps_next
    pages: list[list[Block]] = [[]]
    used = 0.0
    for group in groups:
        height = sum(block.height + block.gap for block in group)
        last = group[-1].gap
        if height - last > room:
            raise ReleaseError(
                "a part of the sheet is higher than its paper; shorten names and stamps, or choose "
                "a larger paper"
            )
        if pages[-1] and used + height - last > room:
            pages.append([])
            used = 0.0
        pages[-1] += group
        used += height
    return pages


def _head(marks: Marks, measure: float, *, page: int, pages: int) -> tuple[tuple[Box, ...], float]:
    """Return the boxes above the blocks, hanging from (0, 0), and their height."""
    registration = printable(marks.registration)
    boxes: list[Box] = [
        Run(0.0, -CAP_HEIGHT * REGISTRATION_SIZE, registration, "bold", REGISTRATION_SIZE)
    ]
    for k, text in enumerate((printable(marks.date), page_text(page, pages))):
        at = measure - width(text, "bold", NOTE)
        boxes.append(Run(at, -CAP_HEIGHT * NOTE - LEADING * NOTE * k, text, "bold", NOTE))
    y = -LEADING * REGISTRATION_SIZE
    for line in wrap(marks.title, "bold", size=TITLE_SIZE, measure=measure):
        boxes.append(Run(0.0, y - CAP_HEIGHT * TITLE_SIZE, line, "bold", TITLE_SIZE))
        y -= LEADING * TITLE_SIZE
    stamps = [
        line
        for stamp in marks.stamps
        for line in wrap(stamp, "bold", size=STAMP_SIZE, measure=measure - 4.0 * _PAD)
    ]
    if stamps:
        height = LEADING * STAMP_SIZE * len(stamps) + 2.0 * _PAD
        boxes.append(Frame(0.0, y - height, measure, height, 1.8))
        for k, line in enumerate(stamps):
            at = 0.5 * (measure - width(line, "bold", STAMP_SIZE))
            base = y - _PAD - LEADING * STAMP_SIZE * k - 0.95 * STAMP_SIZE
            boxes.append(Run(at, base, line, "bold", STAMP_SIZE))
        y -= height + _PAD
    for text in marks.head:
        for line in wrap(text, "regular", size=NOTE, measure=measure):
            boxes.append(Run(0.0, y - CAP_HEIGHT * NOTE, line, "regular", NOTE))
            y -= LEADING * NOTE
    boxes.append(Rule(0.0, y, measure, y, thickness=0.6))
    return tuple(boxes), 6.0 - y


def _foot(marks: Marks, measure: float) -> tuple[tuple[Box, ...], float]:
    """Return the boxes below the blocks, hanging from (0, 0), and their height."""
    y = -5.0
    boxes: list[Box] = [Rule(0.0, y, measure, y, thickness=0.6)]
    y -= 3.0
    for text in marks.foot:
        for line in wrap(text, "regular", size=NOTE, measure=measure):
            boxes.append(Run(0.0, y - CAP_HEIGHT * NOTE, line, "regular", NOTE))
            y -= LEADING * NOTE
    governs = wrap(SUPPLEMENTARY, "bold", size=GOVERNS_SIZE, measure=measure - 3.0 * _PAD)
    height = LEADING * GOVERNS_SIZE * len(governs) + _PAD
    boxes.append(Frame(0.0, y - height, measure, height, 1.2))
    for k, line in enumerate(governs):
        at = 0.5 * (measure - width(line, "bold", GOVERNS_SIZE))
        base = y - 0.5 * _PAD - LEADING * GOVERNS_SIZE * k - 0.98 * GOVERNS_SIZE
        boxes.append(Run(at, base, line, "bold", GOVERNS_SIZE))
    return tuple(boxes), height - y


def finished(
    pages: Sequence[Page], paper: Paper, *, title: str, subject: str, keywords: str
) -> bytes:
    """Return a sheet as a PDF that was read back against its pages.

    Parameters
    ----------
    pages : sequence of Page
        The pages [-]
    paper : Paper
        What they are printed on, two to a sheet where it says so [-]
    title, subject, keywords : str
        What the file says about itself [-]

    Returns
    -------
    bytes
        The file; the same pages give the same bytes [-]

    Raises
    ------
    ReleaseError
        A finished page does not carry, in this order, exactly the words placed on it.
    """
    from cardgen.render.pdf import Metadata, draw  # noqa: PLC0415 - loads the PDF library

    content = draw(impose(pages, paper), Metadata(title, subject, keywords))
    found = read_words(content)
    if len(found) != len(pages):
        raise ReleaseError(f"read-back: {len(found)} pages instead of {len(pages)}")
    for place, (page, words) in enumerate(zip(pages, found, strict=True), start=1):
        wanted = "".join("".join(run.text.split()) for run in page.runs)
        read = "".join("".join(word.text.split()) for word in words)
        if read != wanted:
            raise ReleaseError(f"read-back: page {place} does not carry the words placed on it")
    return content
