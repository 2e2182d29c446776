"""Reads a finished PDF and holds every printed number against the card it was made from.

The page is taken as a pilot takes it: words and where they stand. A number counts as right only
if it has the value of its cell, stands under the rpm of its column and beside its altitude.
"""

from __future__ import annotations

import math
import re
from collections.abc import Sequence

from cardgen.errors import ReleaseError
from cardgen.records import dataclass
from cardgen.render.beside_readback import Beside, squeezed
from cardgen.render.edition import Edition
from cardgen.render.expectation import (
    EXACT,
    cell_name,
    cells_of,
    expected_cell,
    is_number,
    is_right,
    is_same,
    state_of,
)
from cardgen.render.fonts import printable
from cardgen.render.wording import (
    DIGEST_DIGITS,
    OF_ALL,
    SUPPLEMENTARY,
    altitude_label,
    basis_text,
    configuration,
    continued_text,
    deviation_name,
    digest_text,
    issue_text,
    legend,
    mass_text,
    note_sections,
    page_text,
    percent,
    second_units,
    shows_temperature,
    sign,
    stamps,
    temperature_label,
    tolerance_text,
    units_text,
)
from cardgen.render.words import Word, read_words
from cardgen.tables.card import Card, CardTable

_CONTINUED = re.compile(r"Continued (from|on) page [0-9]+\.")
_EDGE = 1.0  # slack when asking on which side of a column's edge a word starts [pt]


def read_back(pdf: bytes, edition: Edition) -> None:
    """Hold a finished PDF against the edition it was made from.

    Parameters
    ----------
    pdf : bytes
        The finished file [-]
    edition : Edition
        What it must say [-]

    Raises
    ------
    ReleaseError
        Something printed differs; the first difference is named.
    """
    card = edition.card
    pages = read_words(pdf)
    beside = Beside(card)
    unread = [set(cells_of(table)) for table in card.tables]
    spans: list[list[int]] = [[] for _ in card.tables]  # pages that carry each table
    for index, words in enumerate(pages):
        place = f"page {index + 1}"
        seen = _read_tables(card, words, unread, place)
        for k in sorted({k for k, _ in seen}):
            spans[k].append(index + 1)
        tables = [card.tables[k] for k in sorted({k for k, _ in seen})]
        _check_marking(edition, words, tables, page=index + 1, pages=len(pages))
        states = {state_of(card.tables[k], at) for k, at in seen}
        if not seen:
            states |= beside.read(words, index + 1)
        _check_present(
            words, place, [f"{mark} {meaning}" for mark, meaning in legend(card, states)]
        )
    for table, cells in zip(card.tables, unread, strict=True):
        if cells:
            missing = cell_name(card, table, min(cells))
            raise ReleaseError(f"read-back: {missing} is nowhere on the card as it should be")
    charts_missing = beside.require_all()
    _check_continued(pages, [*spans, *beside.listed, *beside.charted])
    everything = [word for page in pages for word in page]
    _check_present(everything, "the card", charts_missing)
    for section in note_sections(card, edition.identity):
        _check_present(everything, "the card", [section.title])
        for line in section.lines:
            _check_present_across_pages(pages, line)


# ------------------------------------------------------------------------------------------ words


def _check_present(words: Sequence[Word], place: str, texts: Sequence[str]) -> None:
    page = squeezed(" ".join(word.text for word in words))
    for text in texts:
        if squeezed(text) not in page:
            raise ReleaseError(f"read-back: {place} does not say {text!r}")


def _check_present_across_pages(pages: Sequence[Sequence[Word]], text: str) -> None:
    """Require a note on one page, or word for word in order where a page ends within it."""
    wanted = squeezed(text)
    if any(wanted in squeezed(" ".join(word.text for word in page)) for page in pages):
        return
    runs = iter(squeezed(word.text) for page in pages for word in page)
    while wanted:
        piece = next((run for run in runs if wanted.startswith(run)), None)
        if piece is None:
            raise ReleaseError(f"read-back: the card does not say {text!r}")
        wanted = wanted[len(piece) :]


def _check_marking(
    edition: Edition, words: Sequence[Word], tables: Sequence[CardTable], *, page: int, pages: int
) -> None:
    card, identity = edition.card, edition.identity
    tolerance = (
        tolerance_text(card, tables) if tables else tolerance_text(card, card.tables, where=OF_ALL)
    )
    exact = {word.text for word in words}
    place = f"page {page}"
    for text in (page_text(page, pages), printable(issue_text(identity, edition.issue))):
        if text not in exact:
            raise ReleaseError(f"read-back: {place} does not say {text!r}")
    _check_present(
        words,
        place,
        [
            identity.registration,
            configuration(identity),
            *stamps(card, identity),
            card.percent_of,
            units_text(card),
            tolerance,
            card.digest[:DIGEST_DIGITS],
            digest_text(card, edition.issue, edition.replaces),
            SUPPLEMENTARY,
        ],
    )


def _check_continued(pages: Sequence[Sequence[Word]], spans: Sequence[Sequence[int]]) -> None:
    """Require each table, and the notes, to say rightly where they go on."""
    notes = [page for page in range(1, len(pages) + 1) if not any(page in span for span in spans)]
    for page in range(1, len(pages) + 1):
        expected = []
        for span in (s for s in spans if page in s):
            here = span.index(page)
            before = span[here - 1] if here > 0 else None
            after = span[here + 1] if here + 1 < len(span) else None
            expected.append(continued_text(before, after))
        if page in notes[:-1]:
            expected.append(continued_text(None, notes[notes.index(page) + 1]))
        found = [word.text for word in pages[page - 1] if _CONTINUED.match(word.text)]
        if found != [text for text in expected if text]:
            raise ReleaseError(f"read-back: page {page} says {found} for where it goes on")


# ----------------------------------------------------------------------------------------- tables


@dataclass(frozen=True, slots=True)
class _Column:
    temperature: int  # -1 where temperatures stand under each other
    rpm: int
    left: float
    right: float


def _read_tables(
    card: Card, words: Sequence[Word], unread: list[set[tuple[int, int, int]]], place: str
) -> list[tuple[int, tuple[int, int, int]]]:
    """Read every part of a table on a page, strike its cells off, and return them."""
    seen: list[tuple[int, tuple[int, int, int]]] = []
    start = 0
    while (head := _find_head(words, start)) is not None:
        index = next((k for k, cells in enumerate(unread) if cells), None)
        if index is None:
            raise ReleaseError(f"read-back: {place} carries a table that the card has not")
        table = card.tables[index]
        _check_title(card, table, words[start:head], place)
        names = _temperatures_across(card, table, words[start:head])
        columns, first = _read_columns(table, words, head, names, unread[index])
        labels = {
            altitude_label(card),
            temperature_label(card),
            *(sign(u) for u in (card.choices.units.pressure, card.choices.units.fuel_flow)),
            sign(card.choices.units.speed),
            *(sign(unit) for unit in second_units(card) if unit),
        }
        while first < len(words) and words[first].text in labels:
            first += 1
        reader = _Rows(card, table, columns, words, first, place)
        cells, start = _read_rows(reader, unread[index])
        if start < len(words) and is_number(words[start].text):
            raise ReleaseError(
                f"read-back: {place}, {percent(table.power_fraction)} {table.mixture}: the page"
                f" says {words[start].text!r} where a row of the table should begin or end"
            )
        unread[index] -= cells
        seen.extend((index, at) for at in sorted(cells))
    return seen


def _find_head(words: Sequence[Word], start: int) -> int | None:
    """Return where the next row of rpm begins: the word with figures beside it, not a mere line."""
    return next(
        (
            k
            for k in range(start, len(words) - 1)
            if words[k].text == "rpm"
            and words[k + 1].text.isdigit()
            and words[k + 1].y == words[k].y
        ),
        None,
    )


def _check_title(card: Card, table: CardTable, words: Sequence[Word], place: str) -> None:
    if percent(table.power_fraction) not in {word.text for word in words}:
        raise ReleaseError(
            f"read-back: {place} should have a table for {percent(table.power_fraction)} here"
        )
    _check_present(
        words, place, [f"{table.mixture}, {mass_text(card, table.mass)}", basis_text(table)]
    )


def _temperatures_across(
    card: Card, table: CardTable, words: Sequence[Word]
) -> list[tuple[int, float]]:
    """Return which temperatures head groups of columns, and where each group begins [pt]."""
    if not shows_temperature(card):
        return []
    names = {
        printable(deviation_name(card, value)): k for k, value in enumerate(table.isa_deviation)
    }
    return [(names[word.text], word.x) for word in words if word.text in names]


def _read_columns(
    table: CardTable,
    words: Sequence[Word],
    head: int,
    names: list[tuple[int, float]],
    unread: set[tuple[int, int, int]],
) -> tuple[list[_Column], int]:
    """Return the columns that the figures after "rpm" head, and the index of the next word."""
    end = head + 1
    while end < len(words) and words[end].text.isdigit() and words[end].y == words[head].y:
        end += 1
    figures = words[head + 1 : end]
    rpm = range(len(table.rpm))
    # Columns come in blocks with all their rows: the first with anything unread is next.
    if names:
        first = min((t, r) for _, t, r in unread)
        order = [(t, r) for t in range(len(table.isa_deviation)) for r in rpm if (t, r) >= first]
    else:
        order = [(-1, r) for r in rpm if r >= min(cell[2] for cell in unread)]
    columns: list[_Column] = []
    for k, word in enumerate(figures):
        if k >= len(order) or not is_same(word.text, table.rpm[order[k][1]]):
            raise ReleaseError(f"read-back: a column is headed {word.text} rpm, which is not next")
        right = figures[k + 1].x if k + 1 < len(figures) else math.inf
        columns.append(_Column(*order[k], word.x, right))
        group = [name for name, x in names if x <= word.x + _EDGE]
        if names and (not group or group[-1] != order[k][0]):
            raise ReleaseError(f"read-back: {word.text} rpm stands under another temperature")
    if not columns:
        raise ReleaseError("read-back: a table has no rpm columns")
    return columns, end


@dataclass(slots=True)
class _Rows:
    """Where reading stands within the rows of one part of a table."""

    card: Card
    table: CardTable
    columns: list[_Column]
    words: Sequence[Word]
    at: int
    place: str

    def next_is(self, value: float, *, tolerance: float = EXACT) -> bool:
        """Return whether the next word is a number of about this value."""
        return self.at < len(self.words) and is_same(
            self.words[self.at].text, value, tolerance=tolerance
        )

    def take(self) -> Word:
        """Return the next word and step past it."""
        if self.at >= len(self.words):
            raise ReleaseError(f"read-back: {self.place} ends within a table")
        word = self.words[self.at]
        self.at += 1
        return word


def _read_rows(
    rows: _Rows, unread: set[tuple[int, int, int]]
) -> tuple[set[tuple[int, int, int]], int]:
    """Read rows until the next word is not the next row; return the cells and the next index."""
    table, across = rows.table, rows.columns[0].temperature >= 0
    temperatures = [-1] if across else list(range(len(table.isa_deviation)))
    degrees = shows_temperature(rows.card)
    cells: set[tuple[int, int, int]] = set()
    lowest = math.inf
    named: int | None = None
    for a in range(len(table.altitude)):
        for t in temperatures:
            row = [(a, max(t, column.temperature, 0), column.rpm) for column in rows.columns]
            if not unread.issuperset(row):
                continue
            level: float | None = None
            if named != a:
                if not rows.next_is(table.altitude[a]):
                    return cells, rows.at
                level = rows.take().y
                named = a
            if degrees and not across:
                if not rows.next_is(
                    float(table.outside_air_temperature[a, t]), tolerance=0.5 + EXACT
                ):
                    return cells, rows.at
                level = rows.take().y
            if level is None:
                return cells, rows.at
            if level >= lowest:
                raise ReleaseError(f"read-back: {rows.place} has rows in each other's way")
            lowest = min(level, _read_row(rows, row, level))
            cells.update(row)
    return cells, rows.at


def _read_row(rows: _Rows, row: list[tuple[int, int, int]], level: float) -> float:
    """Read the cells of one row; return the lowest baseline in it [pt]."""
    across = rows.columns[0].temperature >= 0
    lowest = level
    group = -2
    for at, column in zip(row, rows.columns, strict=True):
        name = cell_name(rows.card, rows.table, at)
        if across and column.temperature != group:
            group = column.temperature
            value = float(rows.table.outside_air_temperature[at[0], at[1]])
            if not rows.next_is(value, tolerance=0.5 + EXACT):
                found = rows.take().text
                raise ReleaseError(f"read-back: {name}: OAT printed {found}, computed {value:g}")
            rows.take()
        for what, expected in expected_cell(rows.card, rows.table, at):
            word = rows.take()
            if not is_right(word.text, expected):
                raise ReleaseError(
                    f"read-back: {rows.place}, {name}: {what} printed {word.text!r},"
                    f" computed {expected!r}"
                )
            if not column.left - _EDGE <= word.x < column.right - _EDGE:
                raise ReleaseError(
                    f"read-back: {rows.place}, {name}: {what} {word.text} stands under another rpm"
                )
            if what == "manifold pressure" and abs(word.y - level) > _EDGE:
                raise ReleaseError(
                    f"read-back: {rows.place}, {name}: {word.text} stands beside another altitude"
                )
            lowest = min(lowest, word.y)
    return lowest
