"""Comma-separated files as cells that know their place, under columns told by name and unit."""

from __future__ import annotations

import difflib
import re
from collections.abc import Mapping, Sequence
from dataclasses import field
from pathlib import Path
from typing import Final

from cardgen.errors import Problem, QuantityError
from cardgen.profile.reading import LARGEST_FILE, read_text
from cardgen.profile.values import shown as shown_value
from cardgen.records import dataclass
from cardgen.units import Dimension, Unit, split_suffix

MOST_ROWS: Final = 2000
"""Rows of numbers read from one file; a handbook's whole cruise section has a few hundred."""

_CELL: Final = re.compile(r'[ \t]*(?:"((?:[^"]|"")*)"[ \t]*(?=,|$)|([^,]*))(,|$)')
_LINE_END: Final = re.compile(r"\r\n|\r|\n")  # not the rarer ones that str.splitlines knows
_NUMBER: Final = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)")
_LONGEST_NUMBER: Final = 20


@dataclass(frozen=True, slots=True)
class Cell:
    """The text of one cell and the column of the line where it begins, counted from 1."""

    text: str
    column: int


@dataclass(frozen=True, slots=True)
class Column:
    """A column that is understood.

    Parameters
    ----------
    name : str
        Name as the header writes it [-]
    quantity : str
        What it holds, its unit taken off [-]
    unit : Unit, optional
        Unit of its numbers; None for words and for rpm [-]
    line, place : int
        Line and column of its name in the file, counted from 1 [-]
    """

    name: str
    quantity: str
    unit: Unit | None
    line: int
    place: int


@dataclass(slots=True)
class Sheet:
    """One file as far as it could be read.

    Parameters
    ----------
    shown : str
        How problems name the file [-]
    columns : tuple of Column or None
        By place; None where a column is not used [-]
    rows : list of tuple
        Line number and cells of every row [-]
    problems : list of Problem
        What is wrong [-]
    unused : tuple of str
        Names of columns that mean nothing here [-]
    """

    shown: str
    columns: tuple[Column | None, ...] = ()
    rows: list[tuple[int, tuple[Cell, ...]]] = field(default_factory=list)
    problems: list[Problem] = field(default_factory=list)
    unused: tuple[str, ...] = ()

    def report(self, line: int, column: int, key: str, found: str, expected: str = "") -> None:
        """Add a problem at a place of the file."""
        self.problems.append(Problem(self.shown, line, column, key, found, expected))

    def cells(self, line: int, cells: tuple[Cell, ...]) -> Row:
        """Return a row with its cells by quantity, empty ones left out."""
        filled = {
            column.quantity: (column, cell)
            for column, cell in zip(self.columns, cells, strict=False)
            if column is not None and cell.text
        }
        return Row(self, line, filled)


@dataclass(slots=True)
class Row:
    """The cells of one row that hold something, by quantity."""

    sheet: Sheet
    line: int
    filled: Mapping[str, tuple[Column, Cell]]

    def report(self, quantity: str, found: str, expected: str = "") -> None:
        """Add a problem at the cell of a quantity, or at the line where there is none."""
        if quantity in self.filled:
            column, cell = self.filled[quantity]
            self.sheet.report(self.line, cell.column, column.name, found, expected)
        else:
            self.sheet.report(self.line, 1, quantity, found, expected)

    def has(self, quantity: str) -> bool:
        """Return whether a cell is filled."""
        return quantity in self.filled

    def text(self, quantity: str) -> str | None:
        """Return the text of a cell."""
        found = self.filled.get(quantity)
        return found[1].text if found else None

    def number(self, quantity: str, least: float, greatest: float) -> float | None:
        """Return a number as written, None where there is none or it is reported.

        Parameters
        ----------
        quantity : str
            Which cell [-]
        least, greatest : float
            Bounds beyond which it cannot be meant, SI [-]

        Returns
        -------
        float or None
            Value [SI, rpm]
        """
        found = self.filled.get(quantity)
        if found is None:
            return None
        column, cell = found
        if len(cell.text) > _LONGEST_NUMBER or _NUMBER.fullmatch(cell.text) is None:
            hint = ", and a decimal point" if re.fullmatch(r"[+-]?\d+,\d+", cell.text) else ""
            self.report(
                quantity,
                f"{shown_value(cell.text)} is not a number",
                f"a number without its unit{hint}, or an empty cell",
            )
            return None
        unit = column.unit
        value = float(cell.text)
        si = value if unit is None else value * unit.factor + unit.offset
        if not least <= si <= greatest:
            low, high = (
                bound if unit is None else (bound - unit.offset) / unit.factor
                for bound in (least, greatest)
            )
            symbol = f" {unit.symbol}" if unit else ""
            self.report(
                quantity,
                f"{cell.text}{symbol} is not possible",
                f"{low:.4g} to {high:.4g}{symbol}",
            )
            return None
        return si

    def step(self, quantity: str) -> float:
        """Return the last printed step of a number, 0 where there is none [SI]."""
        found = self.filled.get(quantity)
        if found is None:
            return 0.0
        column, cell = found
        _, _, decimals = cell.text.partition(".")
        return 10.0 ** -len(decimals) * (column.unit.factor if column.unit else 1.0)


def read_sheet(
    path: Path,
    known: Mapping[str, Sequence[Dimension] | None],
    *,
    shown: str,
    most_rows: int = MOST_ROWS,
    largest: int = LARGEST_FILE,
) -> Sheet:
    """Read a comma-separated file whose first line names the columns.

    Parameters
    ----------
    path : Path
        The file [-]
    known : mapping
        Quantities understood, with the dimensions their unit may have; none for words and for
        numbers that are written without a unit [-]
    shown : str
        How problems name the file [-]
    most_rows : int
        Rows beyond which the file is refused [-]
    largest : int
        Size beyond which it is [bytes]

    Returns
    -------
    Sheet
        Columns, rows and problems; lines that begin with # and empty lines are passed over [-]
    """
    sheet = Sheet(shown)
    text = read_text(path, shown=shown, kind="a CSV file", largest=largest)
    if isinstance(text, Problem):
        sheet.problems.append(text)
        return sheet
    headed = False
    for line, content in enumerate(_LINE_END.split(text), start=1):
        if not content.strip(" \t,;") or content.lstrip().startswith("#"):
            continue
        cells = _split(sheet, line, content)
        if cells is None:
            continue
        if not headed:
            headed = True
            if len(cells) == 1 and ";" in content:
                sheet.report(
                    line, 1, "", "cells are separated by semicolons", "commas, and decimal points"
                )
                return sheet
            _head(sheet, line, cells, known)
        elif len(cells) > len(sheet.columns) and any(
            cell.text for cell in cells[len(sheet.columns) :]
        ):
            extra = cells[len(sheet.columns)]
            sheet.report(
                line,
                extra.column,
                "",
                f"the row has {len(cells)} cells",
                f"{len(sheet.columns)}, as the header has",
            )
        elif len(sheet.rows) >= most_rows:
            sheet.report(line, 1, "", f"more than {most_rows} rows", "several smaller files")
            break
        else:
            sheet.rows.append((line, cells))
    if not headed:
        sheet.report(0, 0, "", "is empty", "a header line that names the columns, then rows")
    elif not sheet.rows and not sheet.problems:
        sheet.report(0, 0, "", "has a header but no rows", "at least one row of numbers")
    return sheet


def _split(sheet: Sheet, line: int, content: str) -> tuple[Cell, ...] | None:
    """Return the cells of a line."""
    if '"' not in content:
        # Nearly every line: the same cells as below, in a fraction of the time.
        unquoted, begin = [], 0
        for text in content.split(","):
            unquoted.append(Cell(text.strip(), begin + len(text) - len(text.lstrip()) + 1))
            begin += len(text) + 1
        return tuple(unquoted)
    cells, place = [], 0
    while True:
        match = _CELL.match(content, place)
        if match is None or (match[1] is None and match[2].lstrip().startswith('"')):
            sheet.report(line, place + 1, "", "a quotation mark is not closed", "a closing mark")
            return None
        quoted, plain = match[1], match[2]
        text = quoted.replace('""', '"') if quoted is not None else plain
        start = match.start(1) if quoted is not None else match.start(2)
        cells.append(Cell(text.strip(), start + 1))
        place = match.end()
        if match[3] == "":
            return tuple(cells)


def _head(
    sheet: Sheet,
    line: int,
    cells: tuple[Cell, ...],
    known: Mapping[str, Sequence[Dimension] | None],
) -> None:
    """Tell the columns of a header."""
    columns: list[Column | None] = []
    unused: list[str] = []
    seen: dict[str, str] = {}
    for cell in cells:
        column = _column(sheet, line, cell, known)
        if column is None:
            if cell.text:
                unused.append(cell.text)
        elif column.quantity in seen:
            sheet.report(
                line,
                cell.column,
                column.name,
                f"is given twice, first as {seen[column.quantity]}",
            )
            column = None
        else:
            seen[column.quantity] = column.name
        columns.append(column)
    sheet.columns = tuple(columns)
    sheet.unused = tuple(unused)


def _column(
    sheet: Sheet, line: int, cell: Cell, known: Mapping[str, Sequence[Dimension] | None]
) -> Column | None:
    """Return what a column holds, None where it is reported or means nothing here."""
    name = cell.text.casefold().replace(" ", "_")
    if not name:
        return None
    if name in known:
        dimensions = known[name]
        if not dimensions:
            return Column(cell.text, name, None, line, cell.column)
        sheet.report(
            line, cell.column, cell.text, "has no unit", f"a name such as {_example(name, known)}"
        )
        return None
    stem, unit = split_suffix(name)
    if unit is not None and known.get(stem):
        for dimension in known[stem] or ():
            try:
                right = split_suffix(name, dimension=dimension)[1]
            except QuantityError:
                continue
            return Column(cell.text, stem, right, line, cell.column)
        sheet.report(
            line,
            cell.column,
            cell.text,
            f"{unit.symbol} is a unit of {unit.dimension}",
            f"a name such as {_example(stem, known)}",
        )
        return None
    spellings = {_example(quantity, known): quantity for quantity in known}
    near = difflib.get_close_matches(name, spellings, n=1, cutoff=0.84)
    stem_near = difflib.get_close_matches(name.rpartition("_")[0], known, n=1, cutoff=0.84)
    if near or stem_near:
        meant = near[0] if near else _example(stem_near[0], known)
        sheet.report(line, cell.column, cell.text, "unknown column", f"{meant}, if that is meant")
    return None


_EXAMPLE_SUFFIX: Final[Mapping[Dimension, str]] = {
    "length": "ft",
    "temperature": "c",
    "temperature difference": "c",
    "pressure": "inhg",
    "power": "hp",
    "volume flow": "gph",
    "speed": "kt",
    "mass": "lb",
    "angle": "deg",
}


def _example(quantity: str, known: Mapping[str, Sequence[Dimension] | None]) -> str:
    """Return the usual name of a column of a quantity."""
    dimensions = known[quantity]
    return f"{quantity}_{_EXAMPLE_SUFFIX[dimensions[0]]}" if dimensions else quantity
