"""Draws placed boxes as a PDF; the only module that knows the PDF library."""

from __future__ import annotations

from collections.abc import Sequence
from io import BytesIO

from reportlab import rl_config
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont
from reportlab.pdfgen.canvas import Canvas
from reportlab.pdfgen.pathobject import PDFPathObject

from cardgen.records import dataclass
from cardgen.render.boxes import (
    Box,
    Frame,
    Ground,
    Hatch,
    Page,
    Rule,
    Run,
    Tint,
    Trace,
    hatching,
)
from cardgen.render.fonts import FACES

_NAMES = {"regular": "CardRegular", "bold": "CardBold"}


@dataclass(frozen=True, slots=True)
class Metadata:
    """What the file says about itself."""

    title: str
    subject: str
    keywords: str


def draw(pages: Sequence[Page], metadata: Metadata, *, compress: bool = True) -> bytes:
    """Return the pages as a PDF.

    Parameters
    ----------
    pages : sequence of Page
        Sheets in order [-]
    metadata : Metadata
        Title, subject, keywords [-]
    compress : bool
        Whether page contents are compressed [-]

    Returns
    -------
    bytes
        The file; the same pages give the same bytes [-]
    """
    for face, path in FACES.items():
        # A fresh font each time: the library numbers glyph subsets per font object, so a font
        # shared between two files would let the first change the bytes of the second.
        pdfmetrics.registerFont(TTFont(_NAMES[face], str(path)))
    buffer = BytesIO()
    canvas = Canvas(buffer, pageCompression=int(compress), invariant=1)
    canvas.setTitle(metadata.title)
    canvas.setSubject(metadata.subject)
    canvas.setKeywords(metadata.keywords)
    canvas.setAuthor("cardgen")
    canvas.setCreator("cardgen")
    canvas.setProducer("cardgen")
    for page in pages:
        canvas.setPageSize((page.width, page.height))
        for box in page.boxes:
            _draw_box(canvas, box)
        canvas.showPage()
    canvas.save()
    return buffer.getvalue()


def _draw_box(canvas: Canvas, box: Box) -> None:
    """Draw one box; a page begins with black ink and every box leaves it so."""
    if isinstance(box, Run):
        canvas.setFont(_NAMES[box.face], box.size)
        canvas.drawString(box.x, box.y, box.text)
    elif isinstance(box, Rule):
        canvas.setLineWidth(box.thickness)
        canvas.line(box.x, box.y, box.to_x, box.to_y)
    elif isinstance(box, Tint):
        canvas.setFillGray(box.grey)
        canvas.rect(box.x, box.y, box.width, box.height, stroke=0, fill=1)
        canvas.setFillGray(0.0)
    elif isinstance(box, Frame):
        canvas.setLineWidth(box.thickness)
        canvas.rect(box.x, box.y, box.width, box.height, stroke=1, fill=0)
    elif isinstance(box, Trace):
        _draw_trace(canvas, box)
    elif isinstance(box, Ground):
        _draw_ground(canvas, box)
    else:
        _draw_hatch(canvas, box)


def _draw_trace(canvas: Canvas, box: Trace) -> None:
    canvas.saveState()
    canvas.setLineWidth(box.thickness)
    canvas.setLineJoin(1)
    if box.dash:
        canvas.setDash(list(box.dash))
    canvas.drawPath(_path(canvas, (box.points,), closed=False), stroke=1, fill=0)
    canvas.restoreState()


def _draw_ground(canvas: Canvas, box: Ground) -> None:
    canvas.saveState()
    canvas.setLineWidth(box.thickness)
    canvas.clipPath(_path(canvas, box.pieces, closed=True), stroke=0, fill=0)
    lines = [((x, y), (to_x, to_y)) for x, y, to_x, to_y in hatching(box)]
    canvas.drawPath(_path(canvas, lines, closed=False), stroke=1, fill=0)
    canvas.restoreState()


def _path(
    canvas: Canvas, rings: Sequence[Sequence[tuple[float, float]]], *, closed: bool
) -> PDFPathObject:
    path = canvas.beginPath()
    for first, *rest in rings:
        path.moveTo(*first)
        for point in rest:
            path.lineTo(*point)
        if closed:
            path.close()
    return path


def _draw_hatch(canvas: Canvas, box: Hatch) -> None:
    canvas.saveState()
    canvas.setLineWidth(box.thickness)
    path = canvas.beginPath()
    path.rect(box.x, box.y, box.width, box.height)
    canvas.clipPath(path, stroke=1, fill=0)
    step = box.spacing * 2.0**0.5
    starts = [
        box.x - box.height + k * step for k in range(int((box.width + box.height) / step) + 1)
    ]
    lines = [((x, box.y), (x + box.height, box.y + box.height)) for x in starts]
    canvas.drawPath(_path(canvas, lines, closed=False), stroke=1, fill=0)
    canvas.restoreState()


# The library would put the clock into a file were it not told otherwise everywhere.
rl_config.invariant = 1
# Text armour round compressed pages is for mail of another age: a quarter larger and slower.
rl_config.useA85 = 0
