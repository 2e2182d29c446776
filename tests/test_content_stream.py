"""The quick reader of finished cards against the PDF library's own, and what it leaves to it."""

from __future__ import annotations

from io import BytesIO

import pytest
from card_factory import Sketch, make_card, make_identity
from pypdf import PdfReader

from cardgen.render import words
from cardgen.render.content_stream import PageFont, characters_of, shown_text
from cardgen.render.paper import PAPERS
from cardgen.render.typesetting import typeset

FONT = {"/F1+0": PageFont("/Sans", tuple(chr(code) for code in range(256)))}
LINE = rb"BT 1 0 0 1 10 20.5 Tm /F1+0 9 Tf 10.8 TL (%s) Tj T* ET"


@pytest.mark.parametrize("paper", PAPERS)
@pytest.mark.parametrize("sketch", [Sketch(), Sketch(metric=True, long=True, stamps=False)])
def test_quick_reader_finds_what_the_library_finds(paper: str, sketch: Sketch) -> None:
    """Every word, place, size and font of every page, and no page left to the slow reader."""
    pdf = typeset(make_card(sketch), make_identity(long=sketch.long), issue=3, paper=paper)
    known: dict[object, PageFont | None] = {}
    for quick, slow in zip(
        PdfReader(BytesIO(pdf)).pages, PdfReader(BytesIO(pdf)).pages, strict=True
    ):
        found = words._plain_words(quick, known)
        assert found
        assert found == words._general_words(slow)


def test_escapes_in_strings_are_undone() -> None:
    """Brackets, backslashes and codes without a letter are written with escapes."""
    content = LINE % rb"a \(b\) \\ \260 c"
    assert shown_text(content, FONT) == (("a (b) \\ ° c", 10.0, 20.5, 9.0, "/Sans"),)


def test_operators_inside_a_text_are_text() -> None:
    """What a card says may look like what a page does."""
    content = LINE % rb"ET Q 1 0 0 1 5 5 cm BT"
    assert shown_text(content, FONT) == (("ET Q 1 0 0 1 5 5 cm BT", 10.0, 20.5, 9.0, "/Sans"),)


@pytest.mark.parametrize(
    "more",
    [
        b"BT /F1+0 9 Tf 10 20 Td (hidden) Tj ET",
        b"BT 1 0 0 1 10 20 Tm /F1+0 9 Tf 10.8 TL [(a) -20 (b)] TJ T* ET",
        b"2 0 0 2 0 0 cm",
        b"/X1 Do",
        b"BT 0 1 -1 0 10 20 Tm /F1+0 9 Tf 10.8 TL (turned) Tj T* ET",
        b"BT 1 0 0 1 10 20 Tm /F9+0 9 Tf 10.8 TL (no such font) Tj T* ET",
        b"3 Tr",
    ],
)
def test_content_of_another_form_is_left_to_the_general_reader(more: bytes) -> None:
    """Nothing is overlooked: one foreign operator and the whole page has no quick answer."""
    assert shown_text(LINE % b"plain", FONT) is not None
    assert shown_text(LINE % b"plain" + b"\n" + more, FONT) is None


def test_fonts_that_map_ranges_are_left_to_the_general_reader() -> None:
    """Only a plain list of single codes is read."""
    plain = (
        b"1 begincodespacerange\n<00> <7F>\nendcodespacerange\n"
        b"2 beginbfchar\n<01> <00B0>\n<41> <0041>\nendbfchar\n"
    )
    characters = characters_of(plain)
    assert characters is not None
    assert (characters[0x01], characters[0x41]) == ("°", "A")
    assert characters_of(plain + b"1 beginbfrange\n<20> <7E> <0020>\nendbfrange\n") is None
    assert characters_of(b"") is None
