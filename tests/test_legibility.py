"""A card can be read at arm's length at night: measured from the finished PDF, not from layout.

Least sizes, line gap, margins and marking are those the project sets itself; common practice for
cockpit documents, no single source.
"""

from __future__ import annotations

import shutil
import subprocess
from io import BytesIO
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from card_factory import Sketch
from pypdf import PdfReader
from test_render_pdf import RANDOM_CARDS, edition_of, pdf_of, random_sketch

from cardgen.render.boxes import Hatch, Tint
from cardgen.render.edition import Edition
from cardgen.render.fonts import Face, width
from cardgen.render.layout import lay_out
from cardgen.render.paper import FOLD, PAPERS, find_paper
from cardgen.render.wording import SUPPLEMENTARY, cell_texts
from cardgen.render.words import Word, read_words
from cardgen.tables.card import CellState

LEAST_SETTING, LEAST_FIGURE, LEAST_NOTE, LEAST_STAMP = 12.0, 11.0, 9.0, 13.0
LINE_GAP = 1.25
ROUNDING = 0.02  # positions in the file are rounded to two or three decimals [pt]

# Height of a figure and depth of a descender over the size, a little less than drawn so that
# neighbours may touch but not cross.
FIGURE_HEIGHT, DEPTH = 0.71, 0.19

EXTREMES = (
    Sketch(),
    Sketch(altitudes=12, rpm=6, tables=2, long=True, reasons=4, fitted=False),
    Sketch(altitudes=12, rpm=6, temperatures=3, kind="pressure", tables=1, metric=True, reasons=3),
    Sketch(altitudes=8, rpm=1, temperatures=3, kind="pressure"),
    Sketch(altitudes=1, rpm=1, tables=1, reasons=0, stamps=False),
    Sketch(altitudes=12, rpm=6, tables=4, long=True, reasons=3, back=True),
    Sketch(altitudes=12, rpm=6, tables=2, metric=True, reasons=2, back=True, second=True),
)


def face(word: Word) -> Face:
    return "bold" if "Bold" in word.font else "regular"


def right(word: Word) -> float:
    return word.x + width(word.text, face(word), word.size)


def pages_of(edition: Edition, paper: str) -> tuple[tuple[Word, ...], ...]:
    return read_words(pdf_of(edition, paper=paper))


def check_sizes(edition: Edition, pages: tuple[tuple[Word, ...], ...]) -> None:
    words = [word for page in pages for word in page]
    assert min(word.size for word in words) >= LEAST_NOTE - ROUNDING
    texts = [word.text for word in words]
    for table in edition.card.tables:
        for at in zip(*(table.state <= CellState.FULL_THROTTLE).nonzero(), strict=True):
            cell = list(cell_texts(edition.card, table, at))
            places = [k for k in range(len(texts)) if texts[k : k + len(cell)] == cell]
            assert places, f"{cell} is nowhere"
            for k in places:
                pressure, flow, speed = words[k : k + 3]
                assert pressure.size >= LEAST_SETTING - ROUNDING
                assert face(pressure) == "bold"
                assert pressure.size >= max(flow.size, speed.size)
                assert min(flow.size, speed.size) >= LEAST_FIGURE - ROUNDING


def check_gaps(page: tuple[Word, ...]) -> None:
    """Require baselines 1.25 sizes apart wherever one word stands over another."""
    for lower in page:
        above = [
            word
            for word in page
            if word.y > lower.y + ROUNDING and word.x < right(lower) and right(word) > lower.x
        ]
        for word in above:
            assert word.y - lower.y >= LINE_GAP * lower.size - ROUNDING, (word, lower)


def check_no_overlap(page: tuple[Word, ...]) -> None:
    for k, one in enumerate(page):
        for other in page[k + 1 :]:
            apart = (
                right(one) <= other.x + ROUNDING
                or right(other) <= one.x + ROUNDING
                or one.y - DEPTH * one.size >= other.y + FIGURE_HEIGHT * other.size
                or other.y - DEPTH * other.size >= one.y + FIGURE_HEIGHT * one.size
            )
            assert apart, (one, other)


def check_margins(pdf: bytes, pages: tuple[tuple[Word, ...], ...], name: str) -> None:
    paper = find_paper(name)
    sheets = [
        (float(sheet.mediabox.width), float(sheet.mediabox.height))
        for sheet in PdfReader(BytesIO(pdf)).pages
    ]
    for index, page in enumerate(pages):
        start, (wide, high) = 0.0, (paper.width, paper.height)
        if paper.sheet is not None:
            middle = 0.5 * paper.sheet[0]
            start = middle if index % 2 else middle - paper.width
        broad = paper.sheet is None and sheets[index][0] > sheets[index][1]
        if broad:
            wide, high = high, wide
        sides = (paper.margin, paper.margin) if broad else (paper.binder, paper.margin)
        left_margin, right_margin = sides if index % 2 == 0 else reversed(sides)
        ends = paper.binder if broad else paper.margin
        for word in page:
            if word.text == FOLD:  # beside the mark, outside both pages
                assert right(word) < middle
                continue
            assert word.x >= start + left_margin - ROUNDING, word
            assert right(word) <= start + wide - right_margin + ROUNDING, word
            assert word.y - DEPTH * word.size >= ends - ROUNDING, word
            assert word.y + FIGURE_HEIGHT * word.size <= high - ends + ROUNDING


def check_marking(edition: Edition, pages: tuple[tuple[Word, ...], ...]) -> None:
    for index, page in enumerate(pages):
        text = " ".join(word.text for word in page)
        assert edition.identity.registration in text
        assert edition.identity.engine.serial in text
        assert edition.identity.propeller.serial in text
        assert SUPPLEMENTARY in text
        assert edition.card.digest[:12] in text
        assert f"page {index + 1} of {len(pages)}" in text
        assert edition.identity.date in text
        assert "Tolerance" in text
        assert edition.card.percent_of in text
        stamped = " ".join(word.text for word in page if word.size >= LEAST_STAMP - ROUNDING)
        for stamp in edition.card.stamps:
            assert stamp in stamped


def check_card(edition: Edition, paper: str) -> None:
    pdf = pdf_of(edition, paper=paper)
    pages = read_words(pdf)
    check_sizes(edition, pages)
    check_margins(pdf, pages, paper)
    check_marking(edition, pages)
    for page in pages:
        check_gaps(page)
        check_no_overlap(page)


@pytest.mark.parametrize("paper", ["half-letter", "a4", "a6"])
@pytest.mark.parametrize("sketch", EXTREMES)
def test_extreme_cards_are_legible(sketch: Sketch, paper: str) -> None:
    check_card(edition_of(sketch), paper)


@pytest.mark.parametrize("seed", range(100, 100 + RANDOM_CARDS))
def test_random_cards_are_legible(seed: int) -> None:
    papers = tuple(PAPERS)
    check_card(edition_of(random_sketch(seed)), papers[seed % len(papers)])


def test_numbers_of_a_cell_stand_close_together() -> None:
    """The eye must not have to bridge a gap wider than two figures."""
    edition = edition_of(Sketch(reasons=0))
    pages = pages_of(edition, "half-letter")
    words = [word for page in pages for word in page]
    texts = [word.text for word in words]
    table = edition.card.tables[0]
    cell = list(cell_texts(edition.card, table, (0, 0, 0)))
    k = next(k for k in range(len(texts)) if texts[k : k + len(cell)] == cell)
    for one, other in pairwise(words[k : k + 3]):
        if one.y == other.y:
            assert other.x - right(one) <= 2.0 * width("00", face(one), one.size)


def test_nothing_is_set_in_colour() -> None:
    """Meaning survives a photocopier and a red lamp: every ink on the page is a grey."""
    pdf = pdf_of(edition_of(Sketch()), compress=False)
    operators = {line.split()[-1] for line in pdf.split(b"\n") if line.strip()}
    assert not operators & {b"rg", b"RG", b"k", b"K", b"sc", b"SC", b"scn", b"SCN"}


# ------------------------------------------------------------------------------- pixels of the page

DOTS = 150  # per inch
PDFTOPPM = shutil.which("pdftoppm")


def pixels(pdf: bytes, folder: Path, page: int) -> np.ndarray:
    """Return red, green and blue of a page, 0 to 255; shape (rows, columns, 3)."""
    file = folder / "page.pdf"
    file.write_bytes(pdf)
    place = ["-f", str(page), "-l", str(page), "-singlefile", "-r", str(DOTS)]
    subprocess.run([str(PDFTOPPM), *place, str(file), str(folder / "page")], check=True, timeout=60)
    data = (folder / "page.ppm").read_bytes()
    _, size, _, raw = data.split(b"\n", 3)
    wide, high = map(int, size.split())
    return np.frombuffer(raw, np.uint8).reshape(high, wide, 3)


def within(image: np.ndarray, box: Hatch | Tint, height: float) -> np.ndarray:
    """Return the part of a page's image that a box covers, a point in from its edges."""
    scale = DOTS / 72.0
    top, bottom = height - box.y - box.height, height - box.y
    rows = slice(int((top + 1.0) * scale), int((bottom - 1.0) * scale))
    return image[rows, int((box.x + 1.0) * scale) : int((box.x + box.width - 1.0) * scale)]


@pytest.mark.skipif(PDFTOPPM is None, reason="no pdftoppm on this machine")
@pytest.mark.parametrize("seed", [3, 5, 8])
def test_hatching_and_figures_survive_a_photocopy_and_a_red_lamp(seed: int, tmp_path: Path) -> None:
    """A copy knows black and white alone, and a red lamp shows the red channel alone: forbidden
    cells stay hatched, the grey of bands goes, and figures stay."""
    edition = edition_of(Sketch(altitudes=8, rpm=4, tables=1, reasons=3, seed=seed))
    page = lay_out(edition, find_paper("half-letter"))[0]
    image = pixels(pdf_of(edition, paper="half-letter"), tmp_path, 1)
    assert (image[..., 0] == image[..., 1]).all()  # no colour at all
    assert (image[..., 0] == image[..., 2]).all()
    red = image[..., 0]
    hatched = [box for box in page.boxes if isinstance(box, Hatch)]
    bands = [box for box in page.boxes if isinstance(box, Tint) and 0.5 < box.grey < 1.0]
    assert hatched
    assert bands
    for threshold in (90, 128, 190):  # a light copy, a fair one, a dark one
        for box in hatched:
            black = (within(red, box, page.height) < threshold).mean()
            assert 0.05 < black < 0.6, threshold
    for box in bands:
        ground = np.median(within(red, box, page.height))
        assert ground > 190


def test_ink_is_black_and_ground_nearly_white() -> None:
    """WCAG 2.1 asks 7:1 of text at its strictest (success criterion 1.4.6): here at least 15:1."""
    sketch = Sketch(altitudes=8, rpm=4, tables=2, reasons=3, back=True)
    for page in lay_out(edition_of(sketch), find_paper("half-letter")):
        greys = {box.grey for box in page.boxes if isinstance(box, Tint)}
        for grey in greys:
            linear = ((grey + 0.055) / 1.055) ** 2.4  # sRGB, IEC 61966-2-1
            assert (linear + 0.05) / 0.05 >= 15.0
