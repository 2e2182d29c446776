"""One part of a table: which rows and columns it has, and how wide its columns are."""

from __future__ import annotations

from collections.abc import Iterable
from functools import lru_cache
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.records import dataclass
from cardgen.render.edition import Edition
from cardgen.render.fonts import Face, width
from cardgen.render.wording import (
    altitude_label,
    cell_texts,
    number,
    second_texts,
    second_units,
    shows_temperature,
    sign,
    temperature_label,
)
from cardgen.tables.card import Card, CardTable

IndexArray = npt.NDArray[np.intp]

LEADING: Final = 1.25  # least distance of baselines over the size
NOTE: Final = 9.0  # least size of notes [pt]
LEAST_SETTING: Final = 12.0
LEAST_FIGURE: Final = 11.0
PAD: Final = 3.0  # between a cell's content and its edge [pt]
PAD_IN_LINE: Final = 4.5  # so that a speed is not read with the pressure of the next rpm [pt]
GAP: Final = 5.0  # between the numbers of a cell [pt]
FRAME_PAD: Final = 2.0
GREATEST_SLACK: Final = 1.45  # a column is at most so much wider than its content


@dataclass(frozen=True, slots=True)
class Style:
    """Sizes of the type in a table [pt]; `stacked` sets fuel flow and speed under the pressure."""

    setting: float
    stacked: bool

    @property
    def figure(self) -> float:
        """Size of fuel flow, speed and altitude [pt]."""
        return max(LEAST_FIGURE, round(2.0 * 0.8 * self.setting) / 2.0)

    @property
    def pad(self) -> float:
        """Air on both sides of a column [pt]; more where three numbers stand in a line."""
        return PAD if self.stacked else PAD_IN_LINE

    @property
    def lead(self) -> float:
        """Distance of baselines [pt]."""
        return LEADING * self.setting


@dataclass(frozen=True, slots=True)
class Part:
    """Some rows and columns of a table.

    `rows` are (altitude, temperature) indices with temperature -1 where temperatures stand side by
    side; `columns` are (temperature, rpm) indices likewise. Rows of one altitude stay together.
    """

    table: int
    rows: tuple[tuple[int, int], ...]
    columns: tuple[tuple[int, int], ...]

    @property
    def altitudes(self) -> tuple[int, ...]:
        """The altitudes in order, each once."""
        return tuple(dict.fromkeys(altitude for altitude, _ in self.rows))

    @property
    def cells(self) -> tuple[IndexArray, IndexArray, IndexArray]:
        """Altitude, temperature and rpm indices of all cells, whichever way temperatures run."""
        rows, columns = np.array(self.rows), np.array(self.columns)
        temperature = np.maximum(np.maximum(rows[:, 1:], columns[:, 0]), 0)
        return rows[:, :1], temperature, columns[:, 1]


@dataclass(frozen=True, slots=True)
class Columns:
    """Widths that all parts of a table with the same columns share [pt]."""

    style: Style
    measure: float  # room across
    altitude_width: float
    temperature_width: float  # 0 where no temperature is shown
    pressure_width: float
    flow_width: float
    speed_width: float
    mark_width: float  # 0 where no cell is at full throttle
    mark_inline: bool
    second_pressure_width: float  # 0 where pressure is in one unit
    seconds_below: bool  # whether numbers in second units take a line of their own
    content_width: float
    column_width: float

    @property
    def fits(self) -> bool:
        """Whether every column is wide enough for its content."""
        return self.column_width >= self.content_width + 2.0 * self.style.pad


@dataclass(frozen=True, slots=True, eq=False)
class Grid:
    """A part of a table in a style; compared and hashed by identity."""

    card: Card
    table: CardTable
    part: Part
    columns: Columns

    @property
    def style(self) -> Style:
        """Sizes of its type."""
        return self.columns.style

    @property
    def across(self) -> bool:
        """Whether temperatures stand side by side."""
        return shows_temperature(self.card) and self.part.rows[0][1] < 0


def cell_index(row: tuple[int, int], column: tuple[int, int]) -> tuple[int, int, int]:
    """Return altitude, temperature and rpm index of a cell, whichever way temperatures run."""
    return row[0], max(row[1], column[0], 0), column[1]


def lay_out_grid(edition: Edition, part: Part, *, style: Style, measure: float) -> Grid:
    """Return a part of a table with its widths, which the whole table's numbers decide.

    Parameters
    ----------
    edition : Edition
        What is being released [-]
    part : Part
        Which rows and columns of which table [-]
    style : Style
        Sizes of type [-]
    measure : float
        Room across [pt]

    Returns
    -------
    Grid
        The part; `columns.fits` says whether the widths find room [-]
    """
    across = part.rows[0][1] < 0
    columns = _columns_of(
        edition, part.table, part.columns, across=across, style=style, measure=measure
    )
    return Grid(edition.card, edition.card.tables[part.table], part, columns)


@lru_cache(maxsize=512)
def _columns_of(
    edition: Edition,
    index: int,
    columns: tuple[tuple[int, int], ...],
    *,
    across: bool,
    style: Style,
    measure: float,
) -> Columns:
    card, table = edition.card, edition.card.tables[index]
    units = card.choices.units
    cells = _cells(edition, index, columns, across)
    values = [cell for cell in cells if len(cell) >= 3]
    marks = {cell[3] for cell in values if len(cell) == 4}

    def widest(texts: Iterable[str], face: Face, size: float) -> float:
        return max((width(text, face, size) for text in set(texts)), default=0.0)

    seconds = _seconds(edition, index, columns, across)
    small = [
        max(
            widest((texts[k] or "" for texts in seconds), "regular", NOTE),
            width(sign(unit), "regular", NOTE) if unit else 0.0,
        )
        for k, unit in enumerate(second_units(card))
    ]
    pressure = max(
        widest((cell[0] for cell in cells), "bold", style.setting),
        width(sign(units.pressure), "regular", NOTE),
        0.0 if style.stacked else small[0],
    )
    flow = max(
        widest((cell[1] for cell in values), "regular", style.figure),
        width(sign(units.fuel_flow), "regular", NOTE),
        small[1],
    )
    speed = max(
        widest((cell[2] for cell in values), "regular", style.figure),
        width(sign(units.speed), "regular", NOTE),
        small[2],
    )
    beside = GAP + small[0] if style.stacked and small[0] else 0.0
    mark = widest(marks, "bold", NOTE) + 2.0 * FRAME_PAD if marks else 0.0
    altitude = 2.0 * PAD + max(
        widest((number(value) for value in table.altitude), "bold", style.figure),
        width(altitude_label(card), "regular", NOTE),
    )
    temperature = 0.0
    if shows_temperature(card):
        degrees = (number(float(value)) for value in table.outside_air_temperature.flat)
        temperature = 2.0 * PAD + max(
            widest(degrees, "regular", style.figure),
            width(temperature_label(card), "regular", NOTE),
        )
    groups = len({column[0] for column in columns}) if across else 1
    share = (measure - altitude - temperature * groups) / len(columns)
    pair = flow + GAP + speed
    if style.stacked:
        bare, marked = max(pressure + beside, pair), max(pressure + beside + GAP + mark, pair)
    else:
        bare, marked = pressure + GAP + pair, pressure + GAP + pair + GAP + mark
    inline = bool(marks) and marked + 2.0 * style.pad <= share
    rpm = (number(table.rpm[column[1]]) for column in columns)
    content = max(
        marked if inline else bare,
        mark,
        widest(rpm, "bold", style.setting),
    )
    return Columns(
        style=style,
        measure=measure,
        altitude_width=altitude,
        temperature_width=temperature,
        pressure_width=pressure,
        flow_width=flow,
        speed_width=speed,
        mark_width=mark,
        mark_inline=inline,
        second_pressure_width=small[0],
        seconds_below=any(small[1:]) or (bool(small[0]) and not style.stacked),
        content_width=content,
        column_width=min(share, GREATEST_SLACK * (content + 2.0 * style.pad)),
    )


@lru_cache(maxsize=256)
def _seconds(
    edition: Edition, index: int, columns: tuple[tuple[int, int], ...], across: bool
) -> frozenset[tuple[str | None, str | None, str | None]]:
    """Return the different numbers in second units of some columns of a table."""
    card, table = edition.card, edition.card.tables[index]
    if not any(second_units(card)):
        return frozenset()
    temperatures = (-1,) if across else range(len(table.isa_deviation))
    return frozenset(
        second_texts(card, table, cell_index((altitude, temperature), column))
        for altitude in range(len(table.altitude))
        for temperature in temperatures
        for column in columns
    )


@lru_cache(maxsize=256)
def _cells(
    edition: Edition, index: int, columns: tuple[tuple[int, int], ...], across: bool
) -> frozenset[tuple[str, ...]]:
    """Return the different cells of some columns of a table."""
    card, table = edition.card, edition.card.tables[index]
    temperatures = (-1,) if across else range(len(table.isa_deviation))
    return frozenset(
        cell_texts(card, table, cell_index((altitude, temperature), column))
        for altitude in range(len(table.altitude))
        for temperature in temperatures
        for column in columns
    )
