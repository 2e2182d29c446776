"""Reads a finished HTML card and holds every number against the card it was made from."""

from __future__ import annotations

from html.parser import HTMLParser
from typing import Any

from cardgen.errors import ReleaseError
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
from cardgen.tables.card import Card, CardTable


class _Reader(HTMLParser):
    """Collects every text, and per table the texts of each cell of each row."""

    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.texts: list[str] = []
        self.tables: list[list[list[list[str]]]] = []
        self.says: list[list[str]] = []  # what the look-up says, per table
        self.digest = ""
        self._silent = 0  # inside style or script
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

    def handle_endtag(self, tag: str) -> None:
        if tag in ("style", "script"):
            self._silent -= 1
        elif tag in ("td", "th"):
            self._cell = None

    def handle_data(self, data: str) -> None:
        text = " ".join(data.split())
        if not text or self._silent:
            return
        self.texts.append(text)
        if self._cell is not None:
            self._cell.append(text)

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
    if len(reader.tables) != len(card.tables):
        raise ReleaseError(
            f"read-back: the HTML card has {len(reader.tables)} tables, not {len(card.tables)}"
        )
    for table, rows, says in zip(card.tables, reader.tables, reader.says, strict=True):
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
    for section in note_sections(card, identity):
        wanted += [section.title, *section.lines]
    said = set(reader.texts)
    for text in wanted:
        if " ".join(text.split()) not in said:
            raise ReleaseError(f"read-back: the HTML card does not say {text!r}")


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
        words = text.replace(",", " ").replace(":", " ").replace("%.", "%").split()
        for what, expected in expected_cell(card, table, at):
            wanted = expected.rpartition(" ")[2] if isinstance(expected, str) else expected
            if not any(is_right(word, wanted) for word in words):
                raise ReleaseError(
                    f"read-back: HTML look-up, {cell_name(card, table, at)}: {what} is not"
                    f" {expected!r} in {text!r}"
                )
