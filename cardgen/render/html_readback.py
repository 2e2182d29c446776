"""Reads a finished HTML card and holds every number against the card it was made from."""

from __future__ import annotations

import re
from html.parser import HTMLParser
from typing import Any

from cardgen.errors import ReleaseError
from cardgen.render.beside import Listing, listings, marks_of
from cardgen.render.beside_readback import cell_is_right, read_chart
from cardgen.render.edition import Edition
from cardgen.render.expectation import (
    EXACT,
    cell_name,
    cells_of,
    expected_cell,
    is_right,
    is_same,
    state_of,
)
from cardgen.render.html import WHERE
from cardgen.render.wording import (
    SUPPLEMENTARY,
    basis_text,
    configuration,
    digest_text,
    issue_text,
    legend,
    mass_text,
    note_sections,
    percent,
    shows_temperature,
    stamps,
    tolerance_text,
    units_text,
)
from cardgen.render.words import Word
from cardgen.tables.card import Card, CardTable


class _Reader(HTMLParser):
    """Collects every text, and per table the texts of each cell of each row."""

    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.texts: list[str] = []
        self.tables: list[list[list[list[str]]]] = []
        self.says: list[list[str]] = []  # what the look-up says, per table
        self.digest = ""
        self.drawings: list[list[Word]] = []  # the texts of each drawing and where they stand
        self._silent = 0  # inside style or script
        self._text: tuple[float, float, float, str] | None = None
        self._cell: list[str] | None = None

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        given = dict(attrs)
        if tag in ("style", "script"):
            self._silent += 1
        elif tag == "meta" and given.get("name") == "profile-digest":
            self.digest = given.get("content") or ""
        elif tag == "table":
            self.tables.append([])
            self.says.append([])
        elif tag == "tr":
            self.tables[-1].append([])
        elif tag in ("td", "th"):
            self._cell = []
            self.tables[-1][-1].append(self._cell)
            if says := given.get("data-says"):
                self.says[-1].append(says)
        elif tag == "svg":
            self.drawings.append([])
        elif tag == "text":
            x, y, size = (float(given.get(name) or 0.0) for name in ("x", "y", "font-size"))
            # Upwards as on paper, so that one reader serves both.
            self._text = (x, -y, size, "Bold" if given.get("class") == "bold" else "Regular")

    def handle_endtag(self, tag: str) -> None:
        if tag in ("style", "script"):
            self._silent -= 1
        elif tag in ("td", "th"):
            self._cell = None
        elif tag == "text":
            self._text = None

    def handle_data(self, data: str) -> None:
        text = " ".join(data.split())
        if not text or self._silent:
            return
        self.texts.append(text)
        if self._cell is not None:
            self._cell.append(text)
        if self._text is not None:
            x, y, size, font = self._text
            self.drawings[-1].append(Word(text, x, y, size, font))

    def error(self, message: str) -> Any:
        raise ReleaseError(f"read-back: the HTML card cannot be parsed: {message}")


def read_back_html(page: bytes, edition: Edition) -> None:
    """Hold a finished HTML card against the edition it was made from.

    Parameters
    ----------
    page : bytes
        The finished file [-]
    edition : Edition
        What it must say [-]

    Raises
    ------
    ReleaseError
        Something differs; the first difference is named.
    """
    card, identity = edition.card, edition.identity
    reader = _Reader()
    reader.feed(page.decode())
    reader.close()
    if reader.digest != card.digest:
        raise ReleaseError("read-back: the HTML card carries another profile digest")
    beside = listings(card)
    due = len(card.tables) + len(beside)
    if len(reader.tables) != due:
        raise ReleaseError(f"read-back: the HTML card has {len(reader.tables)} tables, not {due}")
    for listing, rows in zip(beside, reader.tables[len(card.tables) :], strict=True):
        _check_listing(listing, rows)
    _check_charts(card, reader.drawings)
    for table, rows, says in zip(card.tables, reader.tables, reader.says, strict=False):
        _check_table(card, table, rows)
        _check_says(card, table, says)
    wanted = [
        identity.registration,
        issue_text(identity, edition.issue),
        configuration(identity),
        *stamps(card, identity),
        card.percent_of,
        units_text(card),
        tolerance_text(card, card.tables, where=WHERE),
        digest_text(card, edition.issue, edition.replaces),
        SUPPLEMENTARY,
    ]
    for table in card.tables:
        wanted += [
            percent(table.power_fraction),
            f"{table.mixture}, {mass_text(card, table.mass)}",
            basis_text(table),
            *(text for _, text in legend(card, {state_of(table, at) for at in cells_of(table)})),
        ]
    for listing in beside:
        cells = [cell for row in listing.rows for cell in row.cells]
        wanted += [listing.title, *listing.lead]
        wanted += [meaning for _, meaning in marks_of(listing, cells)]
    for chart in card.back.charts:
        wanted += [chart.title, chart.lead]
    for section in note_sections(card, identity):
        wanted += [section.title, *section.lines]
    said = set(reader.texts)
    for text in wanted:
        if " ".join(text.split()) not in said:
            raise ReleaseError(f"read-back: the HTML card does not say {text!r}")


def _check_listing(listing: Listing, rows: list[list[list[str]]]) -> None:
    """Hold a table of the screen against the listing it shows."""
    name = f"read-back: the HTML card, {listing.title}"
    groups, heads, *body = [[" ".join(cell) for cell in row] for row in rows]
    if groups != ["", *(group.name for group in listing.groups)]:
        raise ReleaseError(f"{name}: groups are {groups}")
    if heads != [listing.label, *(head for group in listing.groups for head in group.heads)]:
        raise ReleaseError(f"{name}: heads are {heads}")
    if len(body) != len(listing.rows):
        raise ReleaseError(f"{name}: has {len(body)} rows")
    for row, texts in zip(listing.rows, body, strict=True):
        label, *cells = texts
        right = len(cells) == len(row.cells) and all(map(cell_is_right, cells, row.cells))
        if not right or not is_same(label, row.value):
            raise ReleaseError(f"{name}, {row.label}: printed {texts}")


def _check_charts(card: Card, drawings: list[list[Word]]) -> None:
    """Hold the texts of every drawing against the chart it shows."""
    if len(drawings) != len(card.back.charts):
        raise ReleaseError(f"read-back: the HTML card has {len(drawings)} drawings")
    for chart, words in zip(card.back.charts, drawings, strict=True):
        head = [Word(text, 0.0, 0.0, 0.0, "") for text in (chart.title, chart.lead)]
        found = read_chart([*head, *words], card, chart, "the HTML card")
        if found is None or len(found) < len(chart.panels):
            raise ReleaseError(f"read-back: the HTML card, {chart.title}: lacks panels")


def _check_table(card: Card, table: CardTable, rows: list[list[list[str]]]) -> None:
    lead = 2 if shows_temperature(card) else 1
    heads = [cell[0] for cell in rows[0][lead:]]
    if len(heads) != len(table.rpm) or not all(map(is_same, heads, table.rpm)):
        raise ReleaseError(f"read-back: the HTML card heads its columns {heads}")
    temperatures = len(table.isa_deviation)
    body = rows[1:]
    if len(body) != len(table.altitude) * temperatures:
        raise ReleaseError(f"read-back: a table of the HTML card has {len(body)} rows")
    for k, row in enumerate(body):
        a, t = divmod(k, temperatures)
        cells = iter(row)
        name = cell_name(card, table, (a, t, 0))
        if t == 0 and not is_same(" ".join(next(cells)), table.altitude[a]):
            raise ReleaseError(f"read-back: the HTML card names another altitude than {name}")
        if shows_temperature(card):
            value = float(table.outside_air_temperature[a, t])
            if not is_same(" ".join(next(cells)), value, tolerance=0.5 + EXACT):
                raise ReleaseError(f"read-back: the HTML card names another OAT at {name}")
        found = list(cells)
        if len(found) != len(table.rpm):
            raise ReleaseError(f"read-back: a row of the HTML card has {len(found)} cells: {name}")
        for r, words in enumerate(found):
            expected = expected_cell(card, table, (a, t, r))
            if len(words) != len(expected) or not all(
                is_right(word, value) for word, (_, value) in zip(words, expected, strict=True)
            ):
                raise ReleaseError(
                    f"read-back: HTML card, {cell_name(card, table, (a, t, r))}: shows"
                    f" {' '.join(words)}, computed {[value for _, value in expected]}"
                )


def _check_says(card: Card, table: CardTable, says: list[str]) -> None:
    """Require what the look-up shows to carry the same numbers, cell by cell."""
    cells = list(cells_of(table))
    if len(says) != len(cells):
        raise ReleaseError("read-back: the look-up of the HTML card misses cells")
    for at, text in zip(cells, says, strict=True):
        words = re.sub(r"[,:()]", " ", text).replace("%.", "%").split()
        for what, expected in expected_cell(card, table, at):
            wanted = expected.rpartition(" ")[2] if isinstance(expected, str) else expected
            if not any(is_right(word, wanted) for word in words):
                raise ReleaseError(
                    f"read-back: HTML look-up, {cell_name(card, table, at)}: {what} is not"
                    f" {expected!r} in {text!r}"
                )
