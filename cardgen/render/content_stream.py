"""Text out of page content of the one plain form that the canvas writes.

A general reader takes longer over a card than everything else together. This one answers only where
every byte of a page is of that form, each text in a block of its own, set by an absolute matrix;
for anything else it has no answer, and the general reader is asked.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Final

from cardgen.records import dataclass

_NUMBER: Final = rb"-?(?:\d+\.?\d*|\.\d+)"
_SHOWN: Final = re.compile(
    rb"BT ((?:%(n)s ){6})Tm /(\S+) (%(n)s) Tf %(n)s TL \(((?:[^\\()]|\\.)*)\) Tj T\* ET"
    % {b"n": _NUMBER},
    re.DOTALL,
)
# Each page begins with the identity and a font that nothing is written in.
_PRELUDE: Final = re.compile(rb"1 0 0 1 0 0 cm  BT /\S+ %(n)s Tf %(n)s TL ET" % {b"n": _NUMBER})
_GRAPHICS: Final = frozenset(b"q Q g G w J j M d n m l c h re S s f f* W W* B [ ] []".split())
_PLAIN: Final = re.compile(_NUMBER)
_ESCAPE: Final = re.compile(rb"\\([0-7]{1,3}|.)", re.DOTALL)
_CONTROL: Final = {b"n": b"\n", b"r": b"\r", b"t": b"\t", b"b": b"\b", b"f": b"\f"}
_CHARACTER: Final = re.compile(rb"<([0-9A-Fa-f]{2})> <([0-9A-Fa-f]{4})>")


@dataclass(frozen=True, slots=True)
class PageFont:
    """A font of a page: its name, and the character that each of its codes stands for."""

    name: str
    characters: Sequence[str]


def characters_of(to_unicode: bytes) -> tuple[str, ...] | None:
    """Return the characters of a font's single-byte codes.

    Parameters
    ----------
    to_unicode : bytes
        The font's own table from codes to Unicode [-]

    Returns
    -------
    tuple of str or None
        By code; None where the table is not a plain list of single codes [-]
    """
    pairs = _CHARACTER.findall(to_unicode)
    if b"beginbfrange" in to_unicode or not pairs or len(pairs) != to_unicode.count(b"> <") - 1:
        return None  # the one further pair is the range of codes
    characters = [""] * 256
    for code, character in pairs:
        characters[int(code, 16)] = chr(int(character, 16))
    return tuple(characters)


def shown_text(
    content: bytes, fonts: Mapping[str, PageFont]
) -> tuple[tuple[str, float, float, float, str], ...] | None:
    """Return every text of a page, in the order in which it was written.

    Parameters
    ----------
    content : bytes
        Content of the page, not compressed [-]
    fonts : mapping of str to PageFont
        Fonts of the page by the name that the content calls them [-]

    Returns
    -------
    tuple or None
        Text, x, y, size [pt] and font of each; None where the content is of another form [-]
    """
    rest = _SHOWN.sub(b"", _PRELUDE.sub(b"", content, count=1))
    if any(word not in _GRAPHICS and not _PLAIN.fullmatch(word) for word in set(rest.split())):
        return None
    found = []
    for matrix, name, size, text in _SHOWN.findall(content):
        font = fonts.get("/" + name.decode("latin-1"))
        if font is None:
            return None
        across, up, lean, down, x, y = map(float, matrix.split())
        if up or lean or across != down:
            return None
        codes = _ESCAPE.sub(_unescaped, text) if b"\\" in text else text
        written = "".join([font.characters[code] for code in codes])
        found.append((written, x, y, float(size) * across, font.name))
    return tuple(found)


def _unescaped(match: re.Match[bytes]) -> bytes:
    """Return the byte that an escape in a string stands for."""
    escaped = match[1]
    if escaped[:1].isdigit():
        return bytes([int(escaped, 8) & 0xFF])
    return _CONTROL.get(escaped, escaped)
