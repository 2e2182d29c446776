"""Flat tables: one row for each combination of altitude, temperature, rpm, power and mixture."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import pressure_altitude_at_density_altitude, standard_temperature
from cardgen.constants import (
    FOOT,
    GALLON_US,
    HORSEPOWER,
    HOUR,
    INCH_OF_MERCURY,
    KNOT,
    POUND,
    ZERO_CELSIUS,
)
from cardgen.records import dataclass
from cardgen.tables.solution import Model, Situation, Solution, solve
from cardgen.tables.verdict import judge, status_words

FloatArray = npt.NDArray[np.float64]

COLUMNS: Final = (
    "pressure_altitude_ft",
    "isa_deviation_c",
    "oat_c",
    "density_altitude_ft",
    "rpm",
    "percent_power",
    "power_hp",
    "manifold_pressure_inhg",
    "full_throttle",
    "fuel_flow_gph",
    "true_airspeed_kt",
    "calibrated_airspeed_kt",
    "propeller_efficiency",
    "blade_angle_deg",
    "mixture",
    "status",
    "manifold_pressure_tolerance_inhg",
    "fuel_flow_tolerance_gph",
    "true_airspeed_tolerance_kt",
    "weight_lb",
    "asked_percent_power",
)
"""Columns of the machine-readable table; other programs read the first sixteen by place."""

Value = float | int | str


@dataclass(frozen=True, slots=True)
class Combinations:
    """What a table is asked for; every sequence is crossed with every other.

    Parameters
    ----------
    altitude : ndarray
        Altitudes [m]
    by_density : bool
        Whether they are density rather than pressure altitudes [-]
    isa_deviation : ndarray
        Departures of temperature from standard at the pressure altitude [K]
    indicated_rpm : ndarray
        Tachometer readings [rpm]
    power_fraction : ndarray
        Shares of the percent rating [-]
    mass : ndarray
        Masses [kg]
    mixtures : tuple of int
        Indices of mixtures [-]
    """

    altitude: FloatArray
    by_density: bool
    isa_deviation: FloatArray
    indicated_rpm: FloatArray
    power_fraction: FloatArray
    mass: FloatArray
    mixtures: tuple[int, ...]

    def __len__(self) -> int:
        """Return the number of rows."""
        return (
            self.altitude.size
            * self.isa_deviation.size
            * self.indicated_rpm.size
            * self.power_fraction.size
            * self.mass.size
            * len(self.mixtures)
        )


def situation_of(
    altitude: FloatArray,
    isa_deviation: FloatArray,
    *,
    by_density: bool,
    mass: FloatArray,
    mixture: int,
) -> Situation:
    """Situation at altitudes of either kind.

    Parameters
    ----------
    altitude : ndarray
        Pressure altitudes, or density altitudes [m]
    isa_deviation : ndarray
        Departures of temperature from standard at the pressure altitude [K]
    by_density : bool
        Which kind the altitudes are [-]
    mass : ndarray
        Masses [kg]
    mixture : int
        Index of the mixture [-]

    Returns
    -------
    Situation
        With true temperatures [-]
    """
    pressure = (
        pressure_altitude_at_density_altitude(altitude, isa_deviation) if by_density else altitude
    )
    return Situation(
        pressure_altitude=pressure,
        temperature=standard_temperature(pressure) + isa_deviation,
        mass=mass,
        mixture=mixture,
    )


def rows(
    model: Model, asked: Combinations, *, with_tolerance: bool = True
) -> dict[str, FloatArray | list[str]]:
    """Columns of the machine-readable table.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    asked : Combinations
        What is asked for [-]
    with_tolerance : bool
        Whether to compute the tolerance columns, NaN otherwise [-]

    Returns
    -------
    dict
        `COLUMNS` in order, each of one length; rows vary fastest in altitude, then temperature,
        rpm, power, mass and mixture [-]
    """
    shape = (
        asked.mass.size,
        asked.power_fraction.size,
        asked.indicated_rpm.size,
        asked.isa_deviation.size,
        asked.altitude.size,
    )
    mass, power, rpm, deviation, altitude = np.meshgrid(
        asked.mass,
        asked.power_fraction,
        asked.indicated_rpm,
        asked.isa_deviation,
        asked.altitude,
        indexing="ij",
        sparse=True,
    )
    pieces = []
    for mixture in asked.mixtures:
        solution = solve(
            model,
            situation_of(
                altitude, deviation, by_density=asked.by_density, mass=mass, mixture=mixture
            ),
            indicated_rpm=rpm,
            power_fraction=power,
            with_tolerance=with_tolerance,
        )
        pieces.append(_columns(model, solution, shape, deviation=deviation, power=power))
    joined: dict[str, FloatArray | list[str]] = {}
    for name in COLUMNS:
        columns = [piece[name] for piece in pieces]
        joined[name] = (
            [word for column in columns for word in column]
            if isinstance(columns[0], list)
            else np.concatenate(columns)
        )
    return joined


def _columns(
    model: Model,
    solution: Solution,
    shape: tuple[int, ...],
    *,
    deviation: FloatArray,
    power: FloatArray,
) -> dict[str, FloatArray | list[str]]:
    """Columns of one mixture."""
    point = solution.point
    situation = solution.situation
    density = model.subject.aircraft.engine.fuel_density
    flow_unit = density * GALLON_US / HOUR

    def run(values: npt.ArrayLike, unit: float = 1.0) -> FloatArray:
        full = np.broadcast_to(np.asarray(values, dtype=np.float64), shape)
        return np.asarray(full.reshape(-1) / unit)

    tolerance = solution.tolerance
    nothing = np.full(shape, np.nan)
    size = int(np.prod(shape))
    return {
        "pressure_altitude_ft": run(situation.pressure_altitude, FOOT),
        "isa_deviation_c": run(deviation),
        "oat_c": run(np.asarray(situation.temperature) - ZERO_CELSIUS),
        "density_altitude_ft": run(solution.density_altitude, FOOT),
        "rpm": run(solution.indicated_rpm),
        "percent_power": run(solution.power_fraction, 0.01),
        "power_hp": run(point.power, HORSEPOWER),
        "manifold_pressure_inhg": run(solution.indicated_manifold_pressure, INCH_OF_MERCURY),
        "full_throttle": run(point.full_throttle),
        "fuel_flow_gph": run(point.fuel_flow, flow_unit),
        "true_airspeed_kt": run(point.true_airspeed, KNOT),
        "calibrated_airspeed_kt": run(point.calibrated_airspeed, KNOT),
        "propeller_efficiency": run(point.propeller_efficiency),
        "blade_angle_deg": run(np.degrees(point.blade_angle)),
        "mixture": [model.subject.mixtures[situation.mixture].name] * size,
        "status": status_words(judge(model, solution), solution),
        "manifold_pressure_tolerance_inhg": run(
            nothing if tolerance is None else tolerance.manifold_pressure, INCH_OF_MERCURY
        ),
        "fuel_flow_tolerance_gph": run(
            nothing if tolerance is None else tolerance.fuel_flow, flow_unit
        ),
        "true_airspeed_tolerance_kt": run(
            nothing if tolerance is None else tolerance.true_airspeed, KNOT
        ),
        "weight_lb": run(situation.mass, POUND),
        "asked_percent_power": run(power, 0.01),
    }


def cells(
    columns: dict[str, FloatArray | list[str]], names: Sequence[str] = COLUMNS
) -> list[list[Value]]:
    """Rows of plain values, for CSV and JSON.

    Parameters
    ----------
    columns : dict
        As `rows` returns them [-]
    names : sequence of str
        Columns wanted [-]

    Returns
    -------
    list of list
        Numbers as float, `full_throttle` as int, words as str [-]
    """
    ready: list[Sequence[Value]] = []
    for name in names:
        column = columns[name]
        if isinstance(column, list):
            ready.append(column)
        elif name == "full_throttle":
            ready.append([int(value) for value in column])
        else:
            ready.append([float(value) for value in column])
    return [list(row) for row in zip(*ready, strict=True)]
