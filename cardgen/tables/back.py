"""What stands beside the power tables: temperature, range, best settings and charts, as numbers.

Everything here is in the units of the card and rounded as printed, except the lines of charts.
"""

from __future__ import annotations

from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from cardgen.records import dataclass

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Supply:
    """Fuel that distances are planned with, and the winds they are given for.

    Parameters
    ----------
    usable : float
        Usable fuel, tanks full [m³]
    reserve : float
        What is left of it at the end [m³]
    wind : tuple of float
        Winds along the track, headwind positive, increasing [m/s]
    """

    usable: float
    reserve: float
    wind: tuple[float, ...] = (0.0,)


@dataclass(frozen=True, slots=True)
class RowTable:
    """Which row of a density-altitude card belongs to a pressure altitude and a temperature.

    Parameters
    ----------
    pressure_altitude : tuple of float
        Rows, in the card's unit [-]
    temperature : tuple of float
        Columns, outside air temperature in the card's unit [-]
    row : ndarray, shape (rows, columns)
        The nearest density altitude that the card has a row for, NaN where none is near [-]
    change : ndarray, shape (rows, columns)
        What to add there to the manifold pressure of that row, NaN where no setting is known [-]
    breaks : ndarray of bool, shape (rows, columns)
        Whether some cell of that row, so changed, breaks a limit there [-]
    breaking : tuple of (float, str, float)
        Power fraction, mixture and rpm of every cell that does so anywhere [-]
    error : tuple of float
        What is then still wrong, at most, of manifold pressure, fuel flow and speed of the cells
        that are not at full throttle [-]
    rise : float, optional
        What the thermometer reads too much at the greatest printed speed, in the card's degrees;
        None where the profile does not state it [-]
    """

    pressure_altitude: tuple[float, ...]
    temperature: tuple[float, ...]
    row: FloatArray
    change: FloatArray
    breaks: BoolArray
    breaking: tuple[tuple[float, str, float], ...]
    error: tuple[float, float, float]
    rise: float | None = None


@dataclass(frozen=True, slots=True)
class RangeTable:
    """Range and endurance with one mixture and mass; distances and minutes are rounded down.

    Parameters
    ----------
    mixture : str
        Its name [-]
    mass : float
        Mass of the aircraft [kg]
    altitude : tuple of float
        Rows, in the card's unit [-]
    power_fraction : tuple of float
        Column groups [-]
    wind : tuple of float
        Columns of a group, headwind positive, in the card's unit of speed [-]
    minutes : ndarray, shape (rows, groups)
        Endurance, NaN where no column of the card holds a setting [min]
    distance : ndarray, shape (rows, groups, winds)
        Range, NaN likewise and where the wind is not outrun [-]
    full_throttle : ndarray of bool, shape (rows, groups)
        Whether the power asked is out of reach at every rpm, so that both are for full throttle [-]
    usable, reserve : float
        Fuel, in the card's unit of fuel [-]
    tolerance : tuple of float, optional
        95 % half widths of minutes and distance, None where the model is not fitted [-]
    """

    mixture: str
    mass: float
    altitude: tuple[float, ...]
    power_fraction: tuple[float, ...]
    wind: tuple[float, ...]
    minutes: FloatArray
    distance: FloatArray
    full_throttle: BoolArray
    usable: float
    reserve: float
    tolerance: tuple[float, float] | None


@dataclass(frozen=True, slots=True)
class BestSettings:
    """The setting of each row that is best for one aim.

    Parameters
    ----------
    aim : str
        Farthest on the fuel, or longest [-]
    rpm : ndarray, shape (rows,)
        As the tachometer reads, NaN where no setting is allowed [rpm]
    manifold_pressure, fuel_flow, true_airspeed : ndarray, shape (rows,)
        In the card's units, rounded to the safe side [-]
    distance_per_fuel : ndarray, shape (rows,)
        Distance in still air on one unit of fuel, rounded down [-]
    at_edge : ndarray of bool, shape (rows,)
        Whether less power, where the evidence ends, could do better [-]
    tolerance : tuple of float
        95 %, largest of all rows: manifold pressure, fuel flow, speed in the card's units [-]
    """

    aim: Literal["range", "endurance"]
    rpm: FloatArray
    manifold_pressure: FloatArray
    fuel_flow: FloatArray
    true_airspeed: FloatArray
    distance_per_fuel: FloatArray
    at_edge: BoolArray
    tolerance: tuple[float, float, float] = (0.0, 0.0, 0.0)


@dataclass(frozen=True, slots=True)
class BestTable:
    """Best settings with one mixture and mass, found within every limit.

    Parameters
    ----------
    mixture : str
        Its name [-]
    mass : float
        Mass of the aircraft [kg]
    altitude : tuple of float
        Rows, in the card's unit [-]
    settings : tuple of BestSettings
        One for each aim [-]
    """

    mixture: str
    mass: float
    altitude: tuple[float, ...]
    settings: tuple[BestSettings, ...]


@dataclass(frozen=True, slots=True)
class Axis:
    """One axis of a chart: what it measures, from where to where, and the values named on it."""

    label: str
    low: float
    high: float
    ticks: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Curve:
    """One line of a chart with the words that stand on it.

    Parameters
    ----------
    kind : str
        Setting: a manifold pressure, or what a setting gives; ceiling: full throttle; ray: a
        distance on one unit of fuel [-]
    label : str
        Words on the line [-]
    points : tuple
        Abscissa and ordinate of each corner [-]
    """

    kind: Literal["setting", "ceiling", "ray"]
    label: str
    points: tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True)
class Area:
    """Forbidden ground of a chart.

    Parameters
    ----------
    reason : int
        Index into the reasons of the card [-]
    pieces : tuple
        Neighbouring polygons, each a ring of corners [-]
    """

    reason: int
    pieces: tuple[tuple[tuple[float, float], ...], ...]


@dataclass(frozen=True, slots=True)
class Panel:
    """One field of a chart."""

    name: str
    curves: tuple[Curve, ...]
    areas: tuple[Area, ...] = ()


@dataclass(frozen=True, slots=True)
class Chart:
    """Panels that share their axes; `lead` says what is drawn and how to read it."""

    title: str
    lead: str
    across: Axis
    up: Axis
    panels: tuple[Panel, ...]


@dataclass(frozen=True, slots=True)
class Back:
    """Everything that stands beside the power tables of a card; empty where nothing does."""

    rows: RowTable | None = None
    ranges: tuple[RangeTable, ...] = ()
    best: tuple[BestTable, ...] = ()
    charts: tuple[Chart, ...] = ()


NOTHING_BESIDE: Final = Back()
"""Beside a card of tables alone."""
