"""One table on the page: how high it is, and where each piece of it goes."""

from __future__ import annotations

from functools import lru_cache
from itertools import groupby
from typing import Final

from cardgen.render.boxes import Box, Frame, Hatch, Rule, Run, Tint
from cardgen.render.columns import FRAME_PAD, GAP, LEADING, NOTE, PAD, Grid, cell_index
from cardgen.render.fonts import CAP_HEIGHT, Face, printable, width, wrap
from cardgen.render.wording import (
    altitude_label,
    basis_text,
    cell_texts,
    deviation_name,
    mass_text,
    number,
    percent,
    second_texts,
    second_units,
    sign,
    temperature_label,
)
from cardgen.tables.card import CellState

ROW_RULE: Final = 0.3  # between the rows of a band [pt]
BAND: Final = 0.92  # grey of every other band; gone on a poor copy, where the rules remain

# ---------------------------------------------------------------------------------------- heights


def title_lines(grid: Grid, continued: str) -> tuple[tuple[str, Face, float], ...]:
    """Return the lines under the asked power: mixture basis, and where the table goes on."""
    lines: list[tuple[str, Face, float]] = [
        (line, "regular", NOTE)
        for line in wrap(basis_text(grid.table), "regular", size=NOTE, measure=grid.columns.measure)
    ]
    if continued:
        lines.extend(
            (line, "bold", NOTE)
            for line in wrap(continued, "bold", size=NOTE, measure=grid.columns.measure)
        )
    return tuple(lines)


TITLE_SIZE: Final = 22.0
NAME_SIZE: Final = 14.0


def _name_lines(grid: Grid) -> tuple[str, ...]:
    """Return mixture and mass, broken to stand beside the asked power."""
    power = width(percent(grid.table.power_fraction), "bold", TITLE_SIZE)
    name = f"{grid.table.mixture}, {mass_text(grid.card, grid.table.mass)}"
    return wrap(name, "bold", size=NAME_SIZE, measure=grid.columns.measure - power - 10.0)


def title_height(grid: Grid, continued: str) -> float:
    """Return the height of a part's title [pt]."""
    names = LEADING * NAME_SIZE * (len(_name_lines(grid)) - 1)
    return LEADING * TITLE_SIZE + names + LEADING * NOTE * len(title_lines(grid, continued)) + 3.0


def head_height(grid: Grid) -> float:
    """Return the height of the column heads [pt]."""
    lines = (2 if grid.style.stacked else 1) + grid.columns.seconds_below
    groups = _group_height(grid)
    return groups + grid.style.lead + LEADING * NOTE * lines + 3.0


def _group_height(grid: Grid) -> float:
    """Return the height of the temperatures over the rpm, a full line gap between the two."""
    return NOTE + (LEADING - 1.0) * grid.style.setting if grid.across else 0.0


def row_height(grid: Grid, row: tuple[int, int]) -> float:
    """Return the height of one row [pt]: higher where a full-throttle mark needs its own line."""
    height = grid.style.lead * (2.0 if grid.style.stacked else 1.0) + 2.5
    if row in _marked(grid):
        height += LEADING * grid.style.figure
    if grid.columns.seconds_below:
        height += LEADING * NOTE
    return height


@lru_cache(maxsize=128)
def _marked(grid: Grid) -> frozenset[tuple[int, int]]:
    """Return the rows in which a full-throttle mark needs a line of its own."""
    if grid.columns.mark_inline:
        return frozenset()
    full = (grid.table.state[grid.part.cells] == CellState.FULL_THROTTLE).any(axis=1)
    return frozenset(row for row, marked in zip(grid.part.rows, full, strict=True) if marked)


def grid_height(grid: Grid, continued: str) -> float:
    """Return the height of a part with its title [pt]."""
    rows = sum(row_height(grid, row) for row in grid.part.rows)
    return title_height(grid, continued) + head_height(grid) + rows + 1.0


# ---------------------------------------------------------------------------------------- placing


def place_grid(grid: Grid, *, x: float, top: float, continued: str) -> tuple[Box, ...]:
    """Return the boxes of a part of a table, in reading order.

    Parameters
    ----------
    grid : Grid
        The part and its widths [-]
    x, top : float
        Upper left corner [pt]
    continued : str
        Where the table goes on or came from, "" where it is whole [-]

    Returns
    -------
    tuple of Box
        Title, column heads, then rows from top to bottom [-]
    """
    boxes = _title(grid, x, top, continued)
    y = start = top - title_height(grid, continued)
    boxes += _heads(grid, x, y)
    y -= head_height(grid)
    bands = _bands(grid)
    right = x + _total_width(grid)
    named: set[int] = set()
    for band, rows in enumerate(bands):
        height = sum(row_height(grid, row) for row in rows)
        if band % 2 == 1:
            boxes.append(Tint(x, y - height, right - x, height, BAND))
        for row in rows:
            boxes += _row(grid, row, x, y, named=row[0] not in named)
            named.add(row[0])
            y -= row_height(grid, row)
            boxes.append(Rule(x, y, right, y, thickness=0.9 if row is rows[-1] else ROW_RULE))
    boxes.append(Rule(x, y, right, y, thickness=1.4))
    boxes += [Rule(cut, start, cut, y, thickness=weight) for cut, weight in _cuts(grid, x)]
    return tuple(boxes)


def _bands(grid: Grid) -> list[tuple[tuple[int, int], ...]]:
    """Return the rows in twos or threes: the temperatures of one altitude, or neighbours."""
    rows = grid.part.rows
    if len({temperature for _, temperature in rows}) > 1:
        return [tuple(band) for _, band in groupby(rows, key=lambda row: row[0])]
    size = 3 if len(rows) % 3 == 0 and not grid.style.stacked else 2
    return [rows[k : k + size] for k in range(0, len(rows), size)]


def _total_width(grid: Grid) -> float:
    groups = len({column[0] for column in grid.part.columns}) if grid.across else 1
    return (
        grid.columns.altitude_width
        + grid.columns.temperature_width * groups
        + grid.columns.column_width * len(grid.part.columns)
    )


def _columns(grid: Grid, x: float) -> list[tuple[tuple[int, int], float, float | None]]:
    """Return each column with its left edge, and that of the temperature column before it."""
    placed: list[tuple[tuple[int, int], float, float | None]] = []
    at = x + grid.columns.altitude_width + (0.0 if grid.across else grid.columns.temperature_width)
    for k, column in enumerate(grid.part.columns):
        temperature_at = None
        if grid.across and (k == 0 or grid.part.columns[k - 1][0] != column[0]):
            temperature_at = at
            at += grid.columns.temperature_width
        placed.append((column, at, temperature_at))
        at += grid.columns.column_width
    return placed


def _cuts(grid: Grid, x: float) -> list[tuple[float, float]]:
    """Return where uprights stand and how thick: heavier where another temperature begins."""
    return [(at, 0.5) if before is None else (before, 1.0) for _, at, before in _columns(grid, x)]


def _title(grid: Grid, x: float, top: float, continued: str) -> list[Box]:
    y = top - LEADING * TITLE_SIZE + 0.25 * TITLE_SIZE
    power = percent(grid.table.power_fraction)
    boxes: list[Box] = [Run(x, y, power, "bold", TITLE_SIZE)]
    at = x + width(power, "bold", TITLE_SIZE) + 10.0
    for line in _name_lines(grid):
        boxes.append(Run(at, y, line, "bold", NAME_SIZE))
        y -= LEADING * NAME_SIZE
    y += LEADING * NAME_SIZE
    for line, face, size in title_lines(grid, continued):
        y -= LEADING * size
        boxes.append(Run(x, y, line, face, size))
    return boxes


def _heads(grid: Grid, x: float, top: float) -> list[Box]:
    style, units = grid.style, grid.card.choices.units
    boxes: list[Box] = []
    if grid.across:
        y = top - NOTE
        for column, _, before in _columns(grid, x):
            if before is not None:
                name = deviation_name(grid.card, grid.table.isa_deviation[column[0]])
                boxes.append(Run(before + PAD, y, printable(name), "bold", NOTE))
        top -= _group_height(grid)
    y = top - style.lead + 0.25 * style.setting
    left = (
        x + grid.columns.altitude_width + (0.0 if grid.across else grid.columns.temperature_width)
    )
    boxes.append(_right_run("rpm", left - PAD, y, "regular", NOTE))
    boxes += [
        Run(_content_at(grid, at), y, number(grid.table.rpm[column[1]]), "bold", style.setting)
        for column, at, _ in _columns(grid, x)
    ]
    y -= LEADING * NOTE
    if style.stacked:
        boxes += [
            Run(_content_at(grid, at), y, sign(units.pressure), "regular", NOTE)
            for _, at, _ in _columns(grid, x)
        ]
        y -= LEADING * NOTE
    boxes.append(
        _right_run(
            altitude_label(grid.card), x + grid.columns.altitude_width - PAD, y, "regular", NOTE
        )
    )
    if grid.columns.temperature_width and not grid.across:
        boxes.append(_right_run(temperature_label(grid.card), left - PAD, y, "regular", NOTE))
    for _, at, before in _columns(grid, x):
        if before is not None:
            end = before + grid.columns.temperature_width - PAD
            boxes.append(_right_run(temperature_label(grid.card), end, y, "regular", NOTE))
        if not style.stacked:
            end = _content_at(grid, at) + grid.columns.pressure_width
            boxes.append(_right_run(sign(units.pressure), end, y, "regular", NOTE))
        flow_end, speed_end = _ends(grid, at)
        boxes.append(_right_run(sign(units.fuel_flow), flow_end, y, "regular", NOTE))
        boxes.append(_right_run(sign(units.speed), speed_end, y, "regular", NOTE))
    boxes += _second_heads(grid, x, y)
    if grid.columns.seconds_below:
        y -= LEADING * NOTE
    boxes.append(Rule(x, y - 4.0, x + _total_width(grid), y - 4.0, thickness=1.2))
    return boxes


def _second_heads(grid: Grid, x: float, y: float) -> list[Box]:
    """Return the second units under the first, or beside the pressure where it stands alone."""
    boxes: list[Box] = []
    pressure, flow, speed = second_units(grid.card)
    for _, at, _ in _columns(grid, x):
        start = _content_at(grid, at)
        flow_end, speed_end = _ends(grid, at)
        below = y - LEADING * NOTE
        if pressure and grid.style.stacked:
            beside = start + grid.columns.pressure_width + GAP + grid.columns.second_pressure_width
            boxes.append(_right_run(sign(pressure), beside, y + LEADING * NOTE, "regular", NOTE))
        elif pressure:
            end = start + grid.columns.pressure_width
            boxes.append(_right_run(sign(pressure), end, below, "regular", NOTE))
        if flow:
            boxes.append(_right_run(sign(flow), flow_end, below, "regular", NOTE))
        if speed:
            boxes.append(_right_run(sign(speed), speed_end, below, "regular", NOTE))
    return boxes


def _right_run(text: str, right: float, y: float, face: Face, size: float) -> Run:
    return Run(right - width(text, face, size), y, text, face, size)


def _content_at(grid: Grid, at: float) -> float:
    """Return where the content of a column starts: it is centred in the column."""
    return at + 0.5 * (grid.columns.column_width - grid.columns.content_width)


def _ends(grid: Grid, at: float) -> tuple[float, float]:
    """Return where fuel flow and speed of a column end."""
    start = _content_at(grid, at)
    if not grid.style.stacked:
        start += grid.columns.pressure_width + GAP
    return (
        start + grid.columns.flow_width,
        start + grid.columns.flow_width + GAP + grid.columns.speed_width,
    )


def _row(grid: Grid, row: tuple[int, int], x: float, top: float, *, named: bool) -> list[Box]:
    style, height = grid.style, row_height(grid, row)
    y = top - 1.0 - 0.5 * (style.lead + CAP_HEIGHT * style.setting)
    boxes: list[Box] = []
    if named:
        text = number(grid.table.altitude[row[0]])
        right = x + grid.columns.altitude_width - PAD
        boxes.append(_right_run(text, right, y, "bold", style.figure))
    if grid.columns.temperature_width and not grid.across:
        value = float(grid.table.outside_air_temperature[row[0], max(row[1], 0)])
        right = x + grid.columns.altitude_width + grid.columns.temperature_width - PAD
        boxes.append(_right_run(number(value), right, y, "regular", style.figure))
    for column, at, before in _columns(grid, x):
        if before is not None:
            value = float(grid.table.outside_air_temperature[row[0], column[0]])
            right = before + grid.columns.temperature_width - PAD
            boxes.append(_right_run(number(value), right, y, "regular", style.figure))
        boxes += _cell(grid, cell_index(row, column), at=at, top=top, y=y, height=height)
    return boxes


def _cell(
    grid: Grid, index: tuple[int, int, int], *, at: float, top: float, y: float, height: float
) -> list[Box]:
    """Return one cell: its numbers, or a mark with a hatch behind it where it is forbidden."""
    style, columns = grid.style, grid.columns
    texts = cell_texts(grid.card, grid.table, index)
    if len(texts) == 1:
        return _mark(
            grid, texts[0], at, top, height, hatched=grid.table.state[index] == CellState.FORBIDDEN
        )
    start = _content_at(grid, at)
    pressure = _right_run(texts[0], start + columns.pressure_width, y, "bold", style.setting)
    boxes: list[Box] = [pressure]
    below = y - style.lead if style.stacked else y
    flow_end, speed_end = _ends(grid, at)
    boxes.append(_right_run(texts[1], flow_end, below, "regular", style.figure))
    boxes.append(_right_run(texts[2], speed_end, below, "regular", style.figure))
    if len(texts) == 4:
        if not columns.mark_inline:
            mark_x, mark_y = start, below - LEADING * style.figure
            if columns.seconds_below:
                mark_y -= LEADING * NOTE
        elif style.stacked:
            mark_x, mark_y = start + columns.pressure_width + GAP, y
            if columns.second_pressure_width:
                mark_x += columns.second_pressure_width + GAP
        else:
            mark_x, mark_y = speed_end + GAP, y
        boxes.append(Run(mark_x + FRAME_PAD, mark_y, texts[3], "bold", NOTE))
        boxes.append(
            Frame(
                mark_x,
                mark_y - FRAME_PAD,
                width(texts[3], "bold", NOTE) + 2.0 * FRAME_PAD,
                CAP_HEIGHT * NOTE + 2.0 * FRAME_PAD,
                0.8,
            )
        )
    second = second_texts(grid.card, grid.table, index)
    under = below - LEADING * NOTE
    pressure_end = start + columns.pressure_width
    if style.stacked:
        pressure_end += GAP + columns.second_pressure_width
    places = (
        (pressure_end, y if style.stacked else under),
        (flow_end, under),
        (speed_end, under),
    )
    boxes += [
        _right_run(text, end, base, "regular", NOTE)
        for text, (end, base) in zip(second, places, strict=True)
        if text is not None
    ]
    return boxes


def _mark(
    grid: Grid, text: str, at: float, top: float, height: float, *, hatched: bool
) -> list[Box]:
    size = grid.style.setting
    columns = grid.columns
    middle = at + 0.5 * columns.column_width
    y = top - 0.5 * height - 0.5 * CAP_HEIGHT * size
    run_width = width(text, "bold", size)
    boxes: list[Box] = []
    if hatched:
        boxes.append(
            Hatch(
                at + 1.5,
                top - height + 1.5,
                columns.column_width - 3.0,
                height - 3.0,
                4.0,
                0.7,
            )
        )
        boxes.append(
            Tint(
                middle - 0.5 * run_width - 3.0,
                y - 2.5,
                run_width + 6.0,
                CAP_HEIGHT * size + 5.0,
                1.0,
            )
        )
    boxes.append(Run(middle - 0.5 * run_width, y, text, "bold", size))
    return boxes
