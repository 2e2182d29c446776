"""Range and endurance from the printed numbers of a card, rounded down, in still air and in wind.

They are taken from the printed fuel flow and speed and not from the model behind them, so that a
pilot who divides what stands in the tables finds what stands here.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.tables.back import RangeTable, Supply
from cardgen.tables.card import CardTable, CellState
from cardgen.tables.choices import UnitSet
from cardgen.units import to_unit

FloatArray = npt.NDArray[np.float64]

MINUTE_STEP: Final = 5.0
"""Endurance is printed in steps of this many minutes [min]."""

DISTANCE_STEP: Final = 5.0
"""Range is printed in steps of this many units of distance [-]."""

_HAIR: Final = 1e-6  # noise must not turn a whole step into the one below


def fuel_unit(flow_unit: str) -> str:
    """Unit of fuel that goes with a unit of fuel flow.

    Parameters
    ----------
    flow_unit : str
        Such as "gal/h" [-]

    Returns
    -------
    str
        Such as "gal" [-]
    """
    return flow_unit.removesuffix("/h")


def fuel_in(volume: float, flow_unit: str, *, fuel_density: float) -> float:
    """Fuel in the unit that goes with a unit of fuel flow.

    Parameters
    ----------
    volume : float
        Fuel [m³]
    flow_unit : str
        Unit of fuel flow [-]
    fuel_density : float
        Density of the fuel [kg/m³]

    Returns
    -------
    float
        Volume or mass in that unit [-]
    """
    unit = fuel_unit(flow_unit)
    if unit in ("lb", "kg"):
        return float(to_unit(volume * fuel_density, unit, dimension="mass"))
    return float(to_unit(volume, unit, dimension="volume"))


def range_tables(
    tables: Sequence[CardTable], supply: Supply, *, units: UnitSet, fuel_density: float
) -> tuple[RangeTable, ...]:
    """Range and endurance of every mixture and mass of a card.

    Parameters
    ----------
    tables : sequence of CardTable
        The finished tables [-]
    supply : Supply
        Fuel and winds [-]
    units : UnitSet
        Units of the card [-]
    fuel_density : float
        Density of the fuel [kg/m³]

    Returns
    -------
    tuple of RangeTable
        In the order of the tables [-]

    Notes
    -----
    Endurance is fuel over fuel flow, range is endurance times speed less headwind. Each is the
    least over the rpm (and temperature) columns that hold a setting: it holds whichever is flown.
    """
    groups: dict[tuple[str, float], list[CardTable]] = {}
    for table in tables:
        groups.setdefault((table.mixture, table.mass), []).append(table)
    usable, reserve = (
        fuel_in(volume, units.fuel_flow, fuel_density=fuel_density)
        for volume in (supply.usable, supply.reserve)
    )
    wind = np.asarray(to_unit(np.array(supply.wind), units.speed))
    return tuple(
        _range_table(group, usable=usable, reserve=reserve, wind=wind) for group in groups.values()
    )


def _range_table(
    tables: Sequence[CardTable], *, usable: float, reserve: float, wind: FloatArray
) -> RangeTable:
    """Range and endurance of the tables of one mixture and mass."""
    first = tables[0]
    state = np.stack([table.state for table in tables], axis=1)
    flow = np.stack([table.fuel_flow for table in tables], axis=1)
    speed = np.stack([table.true_airspeed for table in tables], axis=1)
    # Cells run over (altitude, power); temperature and rpm are what the least is taken over.
    shape = (*state.shape[:2], -1)
    state, flow, speed = state.reshape(shape), flow.reshape(shape), speed.reshape(shape)
    shown = (state == CellState.VALUE) | (state == CellState.FULL_THROTTLE)
    any_shown = shown.any(axis=-1)
    hours = (usable - reserve) / np.where(shown, flow, np.inf)
    # Where no cell is shown the least is over nothing: it stays empty.
    endurance = np.where(any_shown, np.min(np.where(shown, hours, np.inf), axis=-1), np.nan)
    ground = speed[..., None] - wind
    reach = np.where(shown[..., None], hours[..., None] * ground, np.inf)
    distance = np.min(reach, axis=-2)
    distance[~any_shown] = np.nan
    distance[distance <= 0.0] = np.nan
    return RangeTable(
        mixture=first.mixture,
        mass=first.mass,
        altitude=first.altitude,
        power_fraction=tuple(table.power_fraction for table in tables),
        wind=tuple(float(value) for value in np.round(wind, 6)),
        minutes=_down(60.0 * endurance, MINUTE_STEP),
        distance=_down(distance, DISTANCE_STEP),
        full_throttle=any_shown & ~(state == CellState.VALUE).any(axis=-1),
        usable=usable,
        reserve=reserve,
        tolerance=_tolerance(tables, shown, hours=hours, flow=flow, ground=ground),
    )


def _tolerance(
    tables: Sequence[CardTable],
    shown: npt.NDArray[np.bool_],
    *,
    hours: FloatArray,
    flow: FloatArray,
    ground: FloatArray,
) -> tuple[float, float] | None:
    """95 % half widths of minutes and distance: those of flow and speed, added up."""
    known = [table.tolerance for table in tables if table.tolerance is not None]
    if len(known) < len(tables):
        return None
    flow_spread = np.array([tolerance[1] for tolerance in known])[:, None]
    speed_spread = np.array([tolerance[2] for tolerance in known])[:, None]
    # At the slow, thirsty end of the tolerance; to first order it is as wide on the other side.
    share = np.where(shown, flow_spread / flow, 0.0)
    minutes = np.where(shown, 60.0 * hours * share, 0.0)
    reach = np.where(
        shown[..., None],
        hours[..., None] * (ground * share[..., None] + speed_spread[..., None]),
        0.0,
    )
    return float(np.max(minutes, initial=0.0)), float(np.max(reach, initial=0.0))


def _down(values: FloatArray, step: float) -> FloatArray:
    """Whole steps not above the values."""
    return np.asarray(np.floor(values / step + _HAIR) * step)
