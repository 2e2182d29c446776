"""Reads the listings and charts of a finished page back and holds every number against its cell."""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import lru_cache
from itertools import pairwise

from cardgen.errors import ReleaseError
from cardgen.records import dataclass
from cardgen.render.beside import Cell, Listing, listings, marks_of
from cardgen.render.expectation import is_same
from cardgen.render.fonts import CAP_HEIGHT, Face, printable, width
from cardgen.render.wording import left_out_text, number
from cardgen.render.words import Word
from cardgen.tables.back import Axis, Chart, Panel
from cardgen.tables.card import Card, CellState

_NEAR = 1.0  # slack for positions [pt]


@lru_cache(maxsize=4096)
def squeezed(text: str) -> str:
    """Return the text without spaces, so that line breaks do not count."""
    return "".join(printable(text).split())


def find_text(words: Sequence[Word], text: str, start: int = 0) -> int | None:
    """Return the index after a text that may be broken over words, None where it is not there.

    Parameters
    ----------
    words : sequence of Word
        The words of a page [-]
    text : str
        What is sought [-]
    start : int
        Where to begin [-]

    Returns
    -------
    int or None
        Index of the word after its first occurrence [-]
    """
    wanted = squeezed(text)
    ends = (_text_at(words, wanted, first) for first in range(start, len(words)))
    return next((end for end in ends if end is not None), None)


def _text_at(words: Sequence[Word], wanted: str, first: int) -> int | None:
    """Return the index after a text that begins at a word, None where another does."""
    found, k = "", first
    while k < len(words) and len(found) < len(wanted) and wanted.startswith(found):
        found += squeezed(words[k].text)
        k += 1
    return k if found == wanted else None


def cell_is_right(printed: str, cell: Cell) -> bool:
    """Return whether a printed word is what a cell must be.

    Parameters
    ----------
    printed : str
        The word, a mark before its number [-]
    cell : Cell
        What it must be [-]

    Returns
    -------
    bool
        Whether mark and number agree [-]
    """
    mark, _, text = printed.rpartition(" ")
    if mark != cell.mark:
        return False
    if cell.value is None:
        return text == cell.text
    if ":" in cell.text:
        hours, colon, minutes = text.partition(":")
        if not (colon and hours.isdigit() and minutes.isdigit() and len(minutes) == 2):
            return False
        return is_same(str(60 * int(hours) + int(minutes)), cell.value)
    return is_same(text, cell.value)


@dataclass(slots=True)
class Unread:
    """Cells of a listing that no page has carried yet, as (row, column)."""

    listing: Listing
    cells: set[tuple[int, int]]


def unread_of(listing: Listing) -> Unread:
    """Return a listing of which nothing has been read."""
    columns = len(listing.columns)
    return Unread(listing, {(r, c) for r in range(len(listing.rows)) for c in range(columns)})


class Beside:
    """Everything beside the tables of a card, struck off as pages carry it.

    Parameters
    ----------
    card : Card
        The card [-]
    """

    def __init__(self, card: Card) -> None:
        self.card = card
        self.unread = [unread_of(listing) for listing in listings(card)]
        self.panels: list[set[int]] = [set() for _ in card.back.charts]
        self.listed: list[list[int]] = [[] for _ in self.unread]
        self.charted: list[list[int]] = [[] for _ in card.back.charts]

    def read(self, words: Sequence[Word], page: int) -> set[tuple[CellState, int]]:
        """Read a page; return the states whose meaning it must give.

        Parameters
        ----------
        words : sequence of Word
            The words of the page [-]
        page : int
            Its number [-]

        Returns
        -------
        set of (CellState, int)
            Forbidden, with the reasons of its charts [-]
        """
        place = f"page {page}"
        for unread, pages in zip(self.unread, self.listed, strict=True):
            if read_listing(words, unread, place):
                pages.append(page)
        states: set[tuple[CellState, int]] = set()
        for k, chart in enumerate(self.card.back.charts):
            found = read_chart(words, self.card, chart, place)
            if found is None:
                continue
            self.charted[k].append(page)
            self.panels[k] |= found
            for panel in found:
                areas = chart.panels[panel].areas
                states |= {(CellState.FORBIDDEN, area.reason) for area in areas}
        return states

    def require_all(self) -> tuple[str, ...]:
        """Require that nothing is missing.

        Returns
        -------
        tuple of str
            What the notes must say of charts that no page carries [-]

        Raises
        ------
        ReleaseError
            A cell or a panel is nowhere on the card.
        """
        for unread in self.unread:
            if unread.cells:
                row, _ = min(unread.cells)
                name = f"{unread.listing.title}, {unread.listing.rows[row].label}"
                raise ReleaseError(f"read-back: {name} is nowhere on the card as it should be")
        charts = self.card.back.charts
        for chart, panels in zip(charts, self.panels, strict=True):
            if 0 < len(panels) < len(chart.panels):
                raise ReleaseError(f"read-back: {chart.title} lacks panels")
        return tuple(
            left_out_text(chart.title)
            for chart, panels in zip(charts, self.panels, strict=True)
            if not panels
        )


def read_listing(words: Sequence[Word], unread: Unread, place: str) -> bool:
    """Read every part of a listing on a page and strike its cells off.

    Parameters
    ----------
    words : sequence of Word
        The words of the page [-]
    unread : Unread
        What is still to be found [-]
    place : str
        What to call the page [-]

    Returns
    -------
    bool
        Whether the page carries the listing [-]

    Raises
    ------
    ReleaseError
        Something printed differs.
    """
    listing = unread.listing
    at = find_text(words, listing.title)
    if at is None or not unread.cells:
        return False
    for text in listing.lead:
        if find_text(words, text, at) is None:
            raise ReleaseError(f"read-back: {place}, {listing.title}: does not say {text!r}")
    title, before = at, set(unread.cells)
    while unread.cells and (head := _find_label(words, at, listing)) is not None:
        at = _read_part(words, head, unread, place)
    struck = before - unread.cells
    if not struck:
        raise ReleaseError(f"read-back: {place}, {listing.title}: no rows follow")
    for mark, meaning in marks_of(listing, [listing.rows[r].cells[c] for r, c in struck]):
        if find_text(words, meaning, title) is None:
            raise ReleaseError(f"read-back: {place}, {listing.title}: {mark} is not {meaning!r}")
    return True


def _find_label(words: Sequence[Word], start: int, listing: Listing) -> int | None:
    """Return where the heads of the next part of this listing begin, before any other listing."""
    for k in range(start, len(words) - 1):
        if words[k].size > 12.5:  # the title of whatever comes next
            return None
        if words[k].text == listing.label and words[k + 1].y == words[k].y:
            return k
    return None


def _face(word: Word) -> Face:
    return "bold" if "Bold" in word.font else "regular"


def _end(word: Word) -> float:
    return word.x + width(word.text, _face(word), word.size)


def _read_part(words: Sequence[Word], head: int, unread: Unread, place: str) -> int:
    """Read heads and rows of one part; return the index of the word after it."""
    listing = unread.listing
    name = f"{place}, {listing.title}"
    first = min(column for _, column in unread.cells)
    # Blocks of columns come with all their rows: the first with anything unread is next.
    heads: list[Word] = []
    k = head + 1
    while k < len(words) and words[k].y == words[head].y:
        heads.append(words[k])
        k += 1
    columns = listing.columns[first : first + len(heads)]
    expected = [listing.groups[g].heads[c] for g, c in columns]
    if not heads or [word.text for word in heads] != [printable(text) for text in expected]:
        raise ReleaseError(f"read-back: {name}: heads are {[word.text for word in heads]}")
    _check_groups(words[:head], listing, columns, heads, name)
    rows = sorted({row for row, column in unread.cells if column == first})
    for row in rows:
        if k >= len(words) or not is_same(words[k].text, listing.rows[row].value):
            return k
        label = words[k]
        cells = words[k + 1 : k + 1 + len(heads)]
        for c, column_head in enumerate(heads):
            cell = listing.rows[row].cells[first + c]
            where = f"{name}, {listing.rows[row].label}, {expected[c]}"
            if c >= len(cells) or not cell_is_right(cells[c].text, cell):
                found = cells[c].text if c < len(cells) else "nothing"
                raise ReleaseError(
                    f"read-back: {where}: printed {found!r}, computed {cell.printed!r}"
                )
            if abs(_end(cells[c]) - _end(column_head)) > _NEAR:
                raise ReleaseError(f"read-back: {where}: stands under another head")
            if abs(cells[c].y - label.y) > _NEAR:
                raise ReleaseError(f"read-back: {where}: stands beside another row")
            unread.cells.discard((row, first + c))
        k += 1 + len(heads)
    return k


def _check_groups(
    before: Sequence[Word],
    listing: Listing,
    columns: Sequence[tuple[int, int]],
    heads: Sequence[Word],
    name: str,
) -> None:
    """Require the name of each group over the first of its columns."""
    starts = [c for c, column in enumerate(columns) if c == 0 or columns[c - 1][0] != column[0]]
    right = math.inf
    at = len(before)
    # From the last group to the first: a long name is broken over lines.
    for c, after in reversed(list(pairwise([*starts, len(heads)]))):
        wanted = squeezed(listing.groups[columns[c][0]].name)
        found = ""
        while at > 0 and found != wanted and wanted.endswith(found):
            at -= 1
            found = squeezed(before[at].text) + found
        if found != wanted:
            raise ReleaseError(f"read-back: {name}: a group is named {found!r}")
        left = before[at].x
        if not all(left <= _end(head) <= right + _NEAR for head in heads[c:after]):
            raise ReleaseError(f"read-back: {name}: a head stands under another group")
        right = left


# ------------------------------------------------------------------------------------------ charts


def read_chart(
    words: Sequence[Word], card: Card, chart: Chart, place: str
) -> frozenset[int] | None:
    """Read the panels of a chart on a page: their names, figures and the words on their lines.

    Parameters
    ----------
    words : sequence of Word
        The words of the page [-]
    card : Card
        The card, for the letters of its reasons [-]
    chart : Chart
        What is drawn [-]
    place : str
        What to call the page [-]

    Returns
    -------
    frozenset of int, or None
        Indices of the panels on the page, None where the page does not carry the chart [-]

    Raises
    ------
    ReleaseError
        A figure or a word differs, or stands where its value is not.
    """
    at = find_text(words, chart.title)
    if at is None:
        return None
    if find_text(words, chart.lead, at) is None:
        raise ReleaseError(f"read-back: {place}, {chart.title}: does not say how to read it")
    seen: set[int] = set()
    for index, panel in enumerate(chart.panels):
        named = panel.name + chart.up.label
        start = find_text(words, named, at)
        if start is not None:
            name = f"read-back: {place}, {chart.title}, {panel.name}"
            if seen and _text_at(words, squeezed(named), at) is None:
                raise ReleaseError(f"{name}: {words[at].text!r} stands before it")
            at = _read_panel(_Panel(words, start, card, chart, panel, name))
            seen.add(index)
    if seen and (at >= len(words) or words[at].text != printable(chart.across.label)):
        found = words[at].text if at < len(words) else "nothing"
        raise ReleaseError(f"read-back: {place}, {chart.title}: says {found!r} after its panels")
    return frozenset(seen)


@dataclass(slots=True)
class _Panel:
    """Where reading stands within one panel."""

    words: Sequence[Word]
    at: int
    card: Card
    chart: Chart
    panel: Panel
    name: str

    def take(self, text: str, *, bold: bool) -> Word | None:
        """Return the next word and step past it if it is this one."""
        if self.at >= len(self.words):
            return None
        word = self.words[self.at]
        if word.text != printable(text) or ("Bold" in word.font) is not bold:
            return None
        self.at += 1
        return word

    def figures(self, axis: Axis) -> list[tuple[Word, float]]:
        """Return the figures of an axis that come next, in rising order."""
        found = []
        for tick in axis.ticks:
            word = self.take(number(tick), bold=False)
            if word is not None:
                found.append((word, tick))
        return found


def _read_panel(panel: _Panel) -> int:
    """Read one panel; return the index of the word after it."""
    for area in panel.panel.areas:
        panel.take(panel.card.reasons[area.reason].letter, bold=True)
    on_lines = [
        (word, curve)
        for curve in panel.panel.curves
        if (word := panel.take(curve.label, bold=curve.kind != "ray")) is not None
    ]
    up = panel.figures(panel.chart.up)
    across = panel.figures(panel.chart.across)
    if len(up) < 2 or len(across) < 2:
        found = panel.words[panel.at].text if panel.at < len(panel.words) else "nothing"
        raise ReleaseError(f"{panel.name}: says {found!r} where figures should be")
    x_of = _scale([(0.5 * (word.x + _end(word)), value) for word, value in across], panel.name)
    y_of = _scale([(_middle(word), value) for word, value in up], panel.name)
    if x_of is not None and y_of is not None:
        for word, curve in on_lines:
            if curve.kind == "ceiling":  # its words stand above it
                continue
            line = [(_on(x_of, x), _on(y_of, y)) for x, y in curve.points]
            if _distance(line, 0.5 * (word.x + _end(word)), _middle(word)) > 3.0 * _NEAR:
                raise ReleaseError(f"{panel.name}: {word.text!r} stands on another line")
    return panel.at


def _middle(word: Word) -> float:
    return word.y + 0.5 * CAP_HEIGHT * word.size


Scale = tuple[float, float]  # place at zero, places per unit


def _scale(places: Sequence[tuple[float, float]], name: str) -> Scale | None:
    """Return where values lie; the outermost figures may be moved inwards to stay in the field."""
    inner = places[1:-1]
    if len(inner) < 2:
        return None
    (first, low), (last, high) = inner[0], inner[-1]
    slope = (last - first) / (high - low)
    scale = (first - slope * low, slope)
    for place, value in inner:
        if abs(place - _on(scale, value)) > 1.5 * _NEAR:
            raise ReleaseError(f"{name}: the figure {value:g} stands at another value")
    return scale


def _on(scale: Scale, value: float) -> float:
    return scale[0] + scale[1] * value


def _distance(line: Sequence[tuple[float, float]], x: float, y: float) -> float:
    """Return how far a point is from a line of straight stretches [pt]."""
    nearest = math.inf
    for (x0, y0), (x1, y1) in pairwise(line):
        length = (x1 - x0) ** 2 + (y1 - y0) ** 2
        share = 0.0 if length == 0.0 else ((x - x0) * (x1 - x0) + (y - y0) * (y1 - y0)) / length
        share = min(max(share, 0.0), 1.0)
        nearest = min(nearest, math.hypot(x - x0 - share * (x1 - x0), y - y0 - share * (y1 - y0)))
    return nearest
