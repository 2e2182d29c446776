"""What a finished page or screen must carry, straight from the numbers of the card."""

from __future__ import annotations

import math
from collections.abc import Iterator

from cardgen.render.wording import (
    FULL_THROTTLE,
    OUT_OF_REACH,
    OUTSIDE_EVIDENCE,
    altitude_label,
    deviation_name,
    percent,
    reason_letter,
    second_numbers,
    shows_temperature,
)
from cardgen.tables.card import Card, CardTable, CellState

EXACT = 1e-6  # cards hold numbers already rounded; more than this apart is another number


def cells_of(table: CardTable) -> Iterator[tuple[int, int, int]]:
    """Return the indices of a table's cells in reading order."""
    return (
        (a, t, r)
        for a in range(len(table.altitude))
        for t in range(len(table.isa_deviation))
        for r in range(len(table.rpm))
    )


def state_of(table: CardTable, at: tuple[int, int, int]) -> tuple[CellState, int]:
    """Return state and reason index of a cell."""
    return CellState(int(table.state[at])), int(table.reason[at])


def cell_name(card: Card, table: CardTable, at: tuple[int, int, int]) -> str:
    """Return what to call a cell in a message."""
    altitude = f"{altitude_label(card)} {table.altitude[at[0]]:.0f}"
    degrees = ""
    if shows_temperature(card):
        degrees = f", {deviation_name(card, table.isa_deviation[at[1]])}"
    name = f"{percent(table.power_fraction)} {table.mixture}"
    return f"{name}, {altitude}{degrees}, {table.rpm[at[2]]:.0f} rpm"


def is_number(text: str) -> bool:
    """Return whether a printed word is a number."""
    return text.replace("\N{MINUS SIGN}", "").replace(".", "").isdigit()


def is_same(text: str, value: float, *, tolerance: float = EXACT) -> bool:
    """Return whether a printed word is a number of this value.

    Parameters
    ----------
    text : str
        The word [-]
    value : float
        What it must be, in the unit printed [-]
    tolerance : float
        How far apart they may be, in the unit printed [-]

    Returns
    -------
    bool
        Whether they agree [-]
    """
    try:
        printed = float(text.replace("\N{MINUS SIGN}", "-"))
    except ValueError:
        return False
    return abs(printed - value) <= tolerance


def expected_cell(
    card: Card, table: CardTable, at: tuple[int, int, int]
) -> list[tuple[str, float | str]]:
    """Return what a cell must carry, as numbers where they are numbers.

    Parameters
    ----------
    card : Card
        The card [-]
    table : CardTable
        One of its tables [-]
    at : tuple of int
        Altitude, temperature and rpm index [-]

    Returns
    -------
    list of (str, float or str)
        What each word is, and its number or text, in reading order [-]
    """
    state, _ = state_of(table, at)
    if state is CellState.FORBIDDEN:
        return [("letter", reason_letter(card, table, at))]
    if state is CellState.OUT_OF_REACH:
        return [("mark", OUT_OF_REACH)]
    if state is CellState.OUTSIDE_EVIDENCE:
        return [("mark", OUTSIDE_EVIDENCE)]
    expected: list[tuple[str, float | str]] = [
        ("manifold pressure", float(table.manifold_pressure[at])),
        ("fuel flow", float(table.fuel_flow[at])),
        ("true airspeed", float(table.true_airspeed[at])),
    ]
    if state is CellState.FULL_THROTTLE:
        power = math.floor(float(table.percent_power[at]) + EXACT)
        expected.append(("full-throttle mark", f"{FULL_THROTTLE} {power}%"))
    names = ("second manifold pressure", "second fuel flow", "second true airspeed")
    expected += [
        (name, value)
        for name, value in zip(names, second_numbers(card, table, at), strict=True)
        if value is not None
    ]
    return expected


def is_right(word: str, expected: float | str) -> bool:
    """Return whether a printed word is what it must be."""
    return is_same(word, expected) if isinstance(expected, float) else word == expected
