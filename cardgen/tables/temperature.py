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
from cardgen.limits import Verdict
from cardgen.tables.back import RowTable
from cardgen.tables.card import CardTable, CellState
from cardgen.tables.choices import CardChoices, UnitSet
from cardgen.tables.printed import decimals, fuel_flow_in, rounded, temperature_step_in
from cardgen.tables.solution import Model, Situation, solve
from cardgen.tables.verdict import judge
from cardgen.units import from_unit, to_unit

FloatArray = npt.NDArray[np.float64]

MOST_ROWS: Final = 16
_STEPS: Final = {"ft": (1000.0, 2000.0, 5000.0), "m": (250.0, 500.0, 1000.0)}
_COLUMNS: Final = {
    "degC": (-25.0, -10.0, 5.0, 20.0, 35.0),
    "degF": (-15.0, 10.0, 35.0, 60.0, 85.0),
}

_OUT_OF_REACH: Final = ("full_throttle", "solution")
"""Findings that say a setting cannot be made, and not that it must not."""

_OWN_ERROR: Final = 0.02
"""Share of rated power by which the change itself may be off (it is told as a pressure): a ceiling
of power that is passed by less, as where a 75 % column stands under a 75 % ceiling, is not told."""


def row_table(
    model: Model, choices: CardChoices, *, tables: Sequence[CardTable]
) -> RowTable | None:
    """The rows of a card by pressure altitude and temperature, and what they lack there.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    choices : CardChoices
        What the card shows [-]
    tables : sequence of CardTable
        Its finished tables [-]

    Returns
    -------
    RowTable or None
        None for a card by pressure altitude, whose rows carry temperatures themselves [-]

    Notes
    -----
    A density altitude outside the rows by more than half a step has no row: nothing is carried on
    beyond the card. Equal density asks for less manifold pressure where air is colder, and for more
    where it is warmer, than the standard air of the row; the change given is the middle of those
    that the cells of the row ask for.
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
    row = _nearest(rows, np.asarray(found), alone=_STEPS[units.altitude][0])
    altitudes = np.asarray(from_unit(pressure_altitude, units.altitude))
    step = float(np.diff(altitudes)[0]) if altitudes.size > 1 else 0.0
    # Every place, and right between places, where "the nearest" is farthest.
    up, warm = np.array([(0.0, 0.0), (-0.5, -0.5), (-0.5, 0.5), (0.5, -0.5), (0.5, 0.5)]).T
    at = np.nonzero(np.isfinite(row))
    pressure, flow, speed = _moved(
        model,
        choices,
        tables=tables,
        place=np.searchsorted(rows, row[at]),
        pressure_altitude=altitudes[at[0]] + up[:, None] * step,
        temperature=kelvin[at[1]] + warm[:, None] * (kelvin[1] - kelvin[0]),
    )
    change = np.full(row.shape, np.nan)
    change[at] = _middle(pressure[0], decimals(units).pressure)
    left = (pressure - change[at][:, None], flow, speed)
    worst = (float(np.nanmax(np.abs(values), initial=0.0)) for values in left)
    breaks = np.zeros(row.shape, dtype=np.bool_)
    breaks[at], breaking = _breaks(
        model,
        choices,
        tables=tables,
        place=np.searchsorted(rows, row[at]),
        pressure_altitude=altitudes[at[0]],
        temperature=kelvin[at[1]],
        change=change[at],
    )
    recovery = model.gauges.temperature_recovery
    return RowTable(
        pressure_altitude=tuple(float(value) for value in pressure_altitude),
        temperature=tuple(float(value) for value in temperature),
        row=row,
        change=change,
        breaks=breaks,
        breaking=breaking,
        error=(next(worst), next(worst), next(worst)),
        rise=None if recovery is None else _rise(tables, recovery, units),
    )


def _moved(
    model: Model,
    choices: CardChoices,
    *,
    tables: Sequence[CardTable],
    place: npt.NDArray[np.intp],
    pressure_altitude: FloatArray,
    temperature: FloatArray,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Right less printed pressure, fuel flow and speed, in the card's units.

    Altitudes and temperatures have shape (k, places); results (k, places, cells).
    """
    units = choices.units
    density = model.subject.aircraft.engine.fuel_density
    changes: tuple[list[FloatArray], ...] = ([], [], [])
    for mixture in dict.fromkeys(table.mixture for table in tables):
        group = [table for table in tables if table.mixture == mixture]
        right = solve(
            model,
            Situation(
                pressure_altitude[..., None, None],
                temperature[..., None, None],
                np.array([table.mass for table in group])[:, None],
                model.mixture_index(mixture),
            ),
            indicated_rpm=np.array(choices.rpm),
            power_fraction=np.array([table.power_fraction for table in group])[:, None],
            with_tolerance=False,
        )
        state = np.stack([table.state[place, 0] for table in group], axis=1)
        held = (state == CellState.VALUE) & ~right.point.full_throttle
        for found, printed, collected in zip(
            (
                to_unit(right.indicated_manifold_pressure, units.pressure),
                fuel_flow_in(right.point.fuel_flow, units.fuel_flow, fuel_density=density),
                to_unit(right.point.true_airspeed, units.speed),
            ),
            zip(
                *(
                    (table.manifold_pressure, table.fuel_flow, table.true_airspeed)
                    for table in group
                ),
                strict=True,
            ),
            changes,
            strict=True,
        ):
            there = np.stack([values[place, 0] for values in printed], axis=1)
            missing = np.where(held, found - there, np.nan)
            collected.append(missing.reshape(*missing.shape[:2], -1))
    pressure, flow, speed = (np.concatenate(collected, axis=-1) for collected in changes)
    return pressure, flow, speed


def _breaks(
    model: Model,
    choices: CardChoices,
    *,
    tables: Sequence[CardTable],
    place: npt.NDArray[np.intp],
    pressure_altitude: FloatArray,
    temperature: FloatArray,
    change: FloatArray,
) -> tuple[npt.NDArray[np.bool_], tuple[tuple[float, str, float], ...]]:
    """Whether cells, changed as told, break a limit at each place, and which ones do anywhere.

    A cell at full throttle is judged at the full throttle of the place.
    """
    unit = choices.units.pressure
    broken = np.zeros(place.shape, dtype=np.bool_)
    which: dict[tuple[float, str, float], None] = {}
    for mixture in dict.fromkeys(table.mixture for table in tables):
        group = [table for table in tables if table.mixture == mixture]
        situation = Situation(
            pressure_altitude[:, None, None],
            temperature[:, None, None],
            np.array([table.mass for table in group])[:, None],
            model.mixture_index(mixture),
        )
        rpm = np.array(choices.rpm)
        asked = solve(
            model,
            situation,
            indicated_rpm=rpm,
            power_fraction=np.array([table.power_fraction for table in group])[:, None],
            with_tolerance=False,
        )
        state = np.stack([table.state[place, 0] for table in group], axis=1)
        printed = np.stack([table.manifold_pressure[place, 0] for table in group], axis=1)
        reading = np.where(
            state == CellState.VALUE,
            from_unit(printed + change[:, None, None], unit),
            asked.indicated_manifold_pressure,
        )
        shown = ((state == CellState.VALUE) | (state == CellState.FULL_THROTTLE)) & np.isfinite(
            reading
        )
        there = solve(
            model,
            situation,
            indicated_rpm=rpm,
            indicated_pressure=np.where(shown, reading, asked.indicated_manifold_pressure),
            with_tolerance=False,
        )
        outside: npt.NDArray[np.bool_] = np.zeros(shown.shape, dtype=np.bool_)
        for judgement in judge(model, there).judgements:
            if judgement.limit not in _OUT_OF_REACH:
                over = np.asarray(judgement.verdict == Verdict.OUTSIDE)
                if judgement.unit == "%":
                    over = np.asarray(over & (judgement.margin < -_OWN_ERROR))
                outside = np.asarray(outside | (shown & over))
        broken |= np.any(outside, axis=(1, 2))
        for table, cells in zip(group, np.any(outside, axis=0).tolist(), strict=True):
            for speed, hit in zip(choices.rpm, cells, strict=True):
                if hit:
                    which[(table.power_fraction, mixture, speed)] = None
    return broken, tuple(which)


def _middle(pressure: FloatArray, places: int) -> FloatArray:
    """Change of pressure as printed: the middle of what the cells of a place ask for."""
    known = ~np.isnan(pressure)
    least = np.min(np.where(known, pressure, np.inf), axis=-1)
    greatest = np.max(np.where(known, pressure, -np.inf), axis=-1)
    with np.errstate(invalid="ignore"):  # of a place without cells, inf less inf
        middle = rounded(0.5 * (least + greatest), places) + 0.0
    return np.where(known.any(axis=-1), middle, np.nan)


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
