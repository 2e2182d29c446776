"""Faces a card is set in: where they lie, how wide a text runs, which letters they have.

The two faces are read straight from their TrueType files, so that measuring a page needs no PDF
library. Advance widths only: a card is set without kerning.
"""

from __future__ import annotations

import re
import struct
from functools import cache, lru_cache
from pathlib import Path
from typing import Final, Literal

from cardgen.records import dataclass
from cardgen.render.packaged import damaged, packaged

Face = Literal["regular", "bold"]

FACES: Final[dict[Face, Path]] = {
    "regular": Path(__file__).parent / "faces" / "RobotoCondensed-Regular.ttf",
    "bold": Path(__file__).parent / "faces" / "RobotoCondensed-Bold.ttf",
}

# Height of capitals over the size (OS/2 sCapHeight), and depth of the "p" with a little air, in
# both faces 2048 units to the em.
CAP_HEIGHT: Final = 1456 / 2048
DESCENT: Final = 430 / 2048

BREAKS: Final = re.compile(r"[ \t\n\r]+")  # a no-break space keeps a number with its unit

# A number and its unit, and the number of a section or revision, never part at the end of a line.
_PAIRS: Final = re.compile(
    r"(?<=[0-9]) (?=(?:%|°[CF]|(?:rpm|inHg|hPa|kPa|cmHg|mmHg|mbar|kt|mph|km/h|nm|mi|km|ft|m|gal|L"
    r"|lb|kg|hp|kW|min|h|CAS|gal/h|L/h|lb/h|kg/h)(?![\w/])))"
    r"|(?<=section) (?=\S)|(?<=revision) (?=\S)|(?<=note) (?=[0-9])|(?<=page) (?=[0-9])"
)

_REMEMBERED: Final = 2048
"""Texts whose width is remembered: more than one card has, few enough for a run of hundreds."""

SUBSTITUTES: Final[dict[str, str]] = {
    "\t": " ",
    "\n": " ",
    "\N{NO-BREAK SPACE}": " ",
    "\N{NARROW NO-BREAK SPACE}": " ",
    "\N{THIN SPACE}": " ",
    "\N{RIGHTWARDS ARROW}": "to",
    "\N{NON-BREAKING HYPHEN}": "-",
    "\N{HYPHEN}": "-",
}
"""What stands in for letters that no face has or that would break a line of text."""


@dataclass(frozen=True, slots=True)
class Metrics:
    """Advance widths of one face.

    `advance` maps a code point to its width over the size [-]; letters the face lacks are absent.
    """

    advance: dict[int, float]


@cache
def metrics(face: Face) -> Metrics:
    """Return the metrics of a face.

    Parameters
    ----------
    face : str
        "regular" or "bold" [-]

    Returns
    -------
    Metrics
        Advance widths over the size [-]

    Raises
    ------
    ReleaseError
        The file is missing or damaged.
    """
    data = packaged(FACES[face])
    try:
        return Metrics(_advances(data))
    except (struct.error, KeyError, ValueError, ZeroDivisionError) as error:
        raise damaged(FACES[face]) from error


def _advances(data: bytes) -> dict[int, float]:
    """Return the width over the size of every letter of a TrueType file."""
    tables = _directory(data)
    units_per_em = struct.unpack_from(">H", data, tables["head"] + 18)[0]
    count = struct.unpack_from(">H", data, tables["hhea"] + 34)[0]
    long_metrics = struct.unpack_from(f">{2 * count}H", data, tables["hmtx"])
    widths = [width / units_per_em for width in long_metrics[::2]]
    return {
        code: widths[min(glyph, count - 1)]
        for code, glyph in _character_map(data, tables["cmap"]).items()
    }


def _directory(data: bytes) -> dict[str, int]:
    """Return the offset of every table of a TrueType file."""
    count = struct.unpack_from(">H", data, 4)[0]
    entries = (struct.unpack_from(">4sIII", data, 12 + 16 * k) for k in range(count))
    return {tag.decode("ascii"): offset for tag, _, offset, _ in entries}


def _character_map(data: bytes, start: int) -> dict[int, int]:
    """Return code point -> glyph from the format 4 subtable (the Unicode basic plane)."""
    count = struct.unpack_from(">H", data, start + 2)[0]
    for k in range(count):
        _, _, offset = struct.unpack_from(">HHI", data, start + 4 + 8 * k)
        if struct.unpack_from(">H", data, start + offset)[0] == 4:
            return _segments(data, start + offset)
    raise AssertionError("the face has no format 4 character map")


def _segments(data: bytes, at: int) -> dict[int, int]:
    """Return code point -> glyph from one format 4 subtable."""
    n = struct.unpack_from(">H", data, at + 6)[0] // 2
    ends = struct.unpack_from(f">{n}H", data, at + 14)
    starts = struct.unpack_from(f">{n}H", data, at + 16 + 2 * n)
    deltas = struct.unpack_from(f">{n}H", data, at + 16 + 4 * n)
    offsets_at = at + 16 + 6 * n
    offsets = struct.unpack_from(f">{n}H", data, offsets_at)
    glyphs: dict[int, int] = {}
    for k, (first, last, delta, offset) in enumerate(
        zip(starts, ends, deltas, offsets, strict=True)
    ):
        for code in range(first, last + 1):
            glyph = code
            if offset:
                place = offsets_at + 2 * k + offset + 2 * (code - first)
                glyph = struct.unpack_from(">H", data, place)[0]
                if glyph == 0:
                    continue
            glyph = (glyph + delta) & 0xFFFF
            if glyph and code != 0xFFFF:
                glyphs[code] = glyph
    return glyphs


@lru_cache(_REMEMBERED)
def printable(text: str) -> str:
    """Return the text with every letter that the faces lack replaced.

    Parameters
    ----------
    text : str
        Any text [-]

    Returns
    -------
    str
        Text in one line, single spaces, only letters that both faces have [-]
    """
    known = _common_letters()
    letters = (
        SUBSTITUTES[letter] if letter in SUBSTITUTES else letter if ord(letter) in known else "?"
        for letter in text
    )
    return " ".join("".join(letters).split())


@cache
def _common_letters() -> frozenset[int]:
    """Return the code points that both faces have."""
    return frozenset(metrics("regular").advance.keys() & metrics("bold").advance.keys())


@lru_cache(_REMEMBERED)
def width(text: str, face: Face, size: float) -> float:
    """Return how wide a text runs.

    Parameters
    ----------
    text : str
        Text whose letters the face has [-]
    face : str
        "regular" or "bold" [-]
    size : float
        Size of the type [pt]

    Returns
    -------
    float
        Width [pt]
    """
    advance = metrics(face).advance
    return size * sum(advance[ord(letter)] for letter in text)


@lru_cache(_REMEMBERED)
def wrap(text: str, face: Face, *, size: float, measure: float) -> tuple[str, ...]:
    """Return the text broken into lines no wider than the measure.

    Parameters
    ----------
    text : str
        Text to break at spaces; a word wider than the measure is broken within [-]
    face : str
        "regular" or "bold" [-]
    size : float
        Size of the type [pt]
    measure : float
        Greatest width of a line [pt]

    Returns
    -------
    tuple of str
        The lines, at least one [-]
    """
    lines: list[str] = []
    line = ""
    bound = _PAIRS.sub("\N{NO-BREAK SPACE}", text.strip())
    for word in (printable(part) for part in BREAKS.split(bound)):
        longer = f"{line} {word}" if line else word
        if width(longer, face, size) <= measure:
            line = longer
            continue
        if line:
            lines.append(line)
        line = word
        while width(line, face, size) > measure and len(line) > 1:
            cut = next(
                k
                for k in range(len(line) - 1, 0, -1)
                if k == 1 or width(line[:k], face, size) <= measure
            )
            lines.append(line[:cut])
            line = line[cut:]
    return (*lines, line)
