"""Reads the words of a finished PDF and where they stand; the only module that knows the reader."""

from __future__ import annotations

import re
from io import BytesIO
from typing import TYPE_CHECKING, Any, Final

from cardgen.errors import ReleaseError
from cardgen.records import dataclass
from cardgen.render.content_stream import PageFont, characters_of, shown_text
from cardgen.render.paper import carries_two

if TYPE_CHECKING:
    from pypdf import PageObject
    from pypdf.generic import DictionaryObject

# What bears on text in a page's contents: text objects, and what moves the axes outside them.
_STRING: Final = rb"\((?:\\.|[^\\()])*\)"
_TEXT: Final = re.compile(
    rb"\bBT\b(?:" + _STRING + rb"|[^()E]|E(?!T\b))*\bET\b"
    rb"|(?:[-+.0-9]+\s+){6}cm\b|(?<![\w/])[qQ](?![\w/])",
    re.DOTALL,
)


@dataclass(frozen=True, slots=True)
class Word:
    """One piece of text as it stands on a page [pt]."""

    text: str
    x: float
    y: float
    size: float
    font: str


def read_words(pdf: bytes) -> tuple[tuple[Word, ...], ...]:
    """Return the words of every card page in reading order.

    Parameters
    ----------
    pdf : bytes
        A finished file [-]

    Returns
    -------
    tuple of tuple of Word
        Per card page its words; a two-up sheet is two pages [-]

    Raises
    ------
    ReleaseError
        The file cannot be read.
    """
    # Only a caller that reads back pays for loading the PDF reader.
    from pypdf import PdfReader  # noqa: PLC0415
    from pypdf.errors import PyPdfError  # noqa: PLC0415

    pages: list[tuple[Word, ...]] = []
    known: dict[Any, PageFont | None] = {}
    try:
        for sheet in PdfReader(BytesIO(pdf)).pages:
            words = _plain_words(sheet, known)
            if words is None:
                words = _general_words(sheet)
            wide, high = float(sheet.mediabox.width), float(sheet.mediabox.height)
            if carries_two(wide, high):
                pages.append(tuple(word for word in words if word.x < 0.5 * wide))
                right = tuple(word for word in words if word.x >= 0.5 * wide)
                if right:
                    pages.append(right)
            else:
                pages.append(tuple(words))
    except (PyPdfError, ValueError, KeyError, TypeError, AttributeError, IndexError) as error:
        raise ReleaseError(f"the finished card cannot be read back: {error}") from error
    return tuple(pages)


def _plain_words(sheet: PageObject, known: dict[Any, PageFont | None]) -> list[Word] | None:
    """Return the words of a sheet in the canvas's plain form, None for one in another."""
    content = sheet.get_contents()
    if content is None:
        return None
    fonts = {}
    resources: Any = sheet["/Resources"]
    table = resources["/Font"]
    for name in table:
        place = table.raw_get(name)
        if place not in known:
            known[place] = _font(place.get_object())
        font = known[place]
        if font is not None:
            fonts[str(name)] = font
    shown = shown_text(content.get_data(), fonts)
    if shown is None:
        return None
    return [
        Word(" ".join(text.split()), x, y, size, font)
        for text, x, y, size, font in shown
        if text.strip()
    ]


def _font(font: DictionaryObject) -> PageFont | None:
    """Return a font with its characters, None where the font does not list them plainly."""
    to_unicode = font.get("/ToUnicode")
    if to_unicode is None or font.get("/Subtype") != "/TrueType":
        return None
    characters = characters_of(to_unicode.get_object().get_data())
    return None if characters is None else PageFont(str(font.get("/BaseFont", "")), characters)


def _general_words(sheet: PageObject) -> list[Word]:
    """Return the words of a sheet of any form, as the PDF library finds them."""
    from pypdf.generic import DecodedStreamObject, NameObject  # noqa: PLC0415

    words: list[Word] = []

    def visit(
        text: str,
        cm: list[float],
        tm: list[float],
        font: dict[str, str] | None,
        size: float,
    ) -> None:
        if text.strip():
            x, y = cm[0] * tm[4] + cm[4], cm[3] * tm[5] + cm[5]
            name = str((font or {}).get("/BaseFont", ""))
            words.append(Word(" ".join(text.split()), x, y, size * tm[0] * cm[0], name))

    contents = sheet.get_contents()
    if contents is not None:
        # Lines and hatching are most of a page and say nothing: the reader is spared them.
        text_only = DecodedStreamObject()
        text_only.set_data(b"\n".join(_TEXT.findall(contents.get_data())))
        sheet[NameObject("/Contents")] = text_only
    sheet.extract_text(visitor_text=visit)
    return words


def page_texts(pdf: bytes) -> tuple[str, ...]:
    """Return the text of every card page, one word group per line.

    Parameters
    ----------
    pdf : bytes
        A finished file [-]

    Returns
    -------
    tuple of str
        Text per page [-]
    """
    return tuple("\n".join(word.text for word in page) for page in read_words(pdf))
