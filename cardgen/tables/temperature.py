"""From pressure altitude and outside air temperature to the row of a density-altitude card."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.airspeed import indicated_temperature
from cardgen.atmosphere import (
    density_altitude,
    standard_pressure,
    standard_temperature,
    vapour_pressure,
)
from cardgen.tables.back import RowTable
from cardgen.tables.card import CardTable, CellState
from cardgen.tables.choices import CardChoices, UnitSet
from cardgen.tables.printed import temperature_step_in
from cardgen.units import from_unit, to_unit

FloatArray = npt.NDArray[np.float64]

MOST_ROWS: Final = 16
_STEPS: Final = {"ft": (1000.0, 2000.0, 5000.0), "m": (250.0, 500.0, 1000.0)}
_COLUMNS: Final = {
    "degC": tuple(float(value) for value in range(-30, 41, 10)),
    "degF": tuple(float(value) for value in range(-20, 101, 20)),
}


def row_table(
    choices: CardChoices, tables: Sequence[CardTable], *, recovery: float | None = None
) -> RowTable | None:
    """The rows of a card by pressure altitude and temperature.

    Parameters
    ----------
    choices : CardChoices
        What the card shows [-]
    tables : sequence of CardTable
        Its finished tables, for what rounding to a row moves [-]
    recovery : float, optional
        Recovery factor of the thermometer, None where it is not stated [-]

    Returns
    -------
    RowTable or None
        None for a card by pressure altitude, whose rows carry temperatures themselves [-]

    Notes
    -----
    A density altitude outside the rows by more than half a step has no row: nothing is carried on
    beyond the card.
    """
    if choices.altitude_kind != "density":
        return None
    units = choices.units
    rows = np.array(tables[0].altitude)
    temperature = np.array(_COLUMNS[units.temperature])
    pressure_altitude = _rows(units.altitude, float(rows[-1]))
    kelvin = np.asarray(from_unit(temperature, units.temperature, dimension="temperature"))
    humidity = choices.relative_humidity
    vapour = vapour_pressure(humidity, kelvin) if humidity else 0.0
    found = to_unit(
        density_altitude(
            standard_pressure(from_unit(pressure_altitude[:, None], units.altitude)),
            kelvin,
            vapour_pressure=vapour,
        ),
        units.altitude,
    )
    return RowTable(
        pressure_altitude=tuple(float(value) for value in pressure_altitude),
        temperature=tuple(float(value) for value in temperature),
        row=_nearest(rows, np.asarray(found), alone=_STEPS[units.altitude][0]),
        error=_error(tables),
        rise=None if recovery is None else _rise(tables, recovery, units),
    )


def _rise(tables: Sequence[CardTable], recovery: float, units: UnitSet) -> float:
    """What the thermometer reads too much at the greatest printed speed, in the card's degrees."""
    fastest = max(float(np.nanmax(table.true_airspeed, initial=0.0)) for table in tables)
    speed = from_unit(fastest, units.speed)
    standard = float(standard_temperature(0.0))  # of which the rise hardly depends [K]
    warm = indicated_temperature(standard, speed, recovery_factor=recovery)
    return float(temperature_step_in(warm - standard, units.temperature))


def _rows(unit: str, highest: float) -> FloatArray:
    """Pressure altitudes from sea level to the highest row, a round step apart."""
    steps = _STEPS[unit]
    step = next((step for step in steps if highest / step + 1.0 <= MOST_ROWS), steps[-1])
    return np.arange(0.0, highest + 0.5 * step, step)


def _nearest(rows: FloatArray, values: FloatArray, *, alone: float) -> FloatArray:
    """Nearest row, the lower of two; NaN farther than half a step outside the rows."""
    edges = 0.5 * (rows[1:] + rows[:-1])
    place = np.searchsorted(edges, values, side="left")
    below, above = _half_steps(rows, alone)
    inside = (values >= rows[0] - below) & (values <= rows[-1] + above)
    return np.where(inside, rows[place], np.nan)


def _half_steps(rows: FloatArray, alone: float) -> tuple[float, float]:
    """Half a step of the rows at either end; a single row has the step it is given."""
    if rows.size == 1:
        return 0.5 * alone, 0.5 * alone
    return 0.5 * float(rows[1] - rows[0]), 0.5 * float(rows[-1] - rows[-2])


def _error(tables: Sequence[CardTable]) -> tuple[float, float, float]:
    """Half the largest change from one row to the next, of pressure, fuel flow and speed."""
    worst = [0.0, 0.0, 0.0]
    for table in tables:
        value = table.state == CellState.VALUE
        both = value[1:] & value[:-1]
        arrays = (table.manifold_pressure, table.fuel_flow, table.true_airspeed)
        for place, array in enumerate(arrays):
            change = np.abs(np.diff(array, axis=0))[both]
            worst[place] = max(worst[place], 0.5 * float(np.max(change, initial=0.0)))
    return worst[0], worst[1], worst[2]
