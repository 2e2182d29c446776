"""Columns read again: what the same numbers would say if they were written in another unit."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import pressure_altitude, standard_temperature
from cardgen.fit.evidence import Evidence, Reading
from cardgen.units import Dimension, Unit, find_unit

FloatArray = npt.NDArray[np.float64]

AIRSPEEDS: Final = ("tas", "leg1_gs")
"""Columns that airspeed comes from; ground legs scale all together."""

_ALTERNATIVES: Final[dict[str, tuple[tuple[str, Dimension], ...]]] = {
    "map": (
        ("inHg", "pressure"),
        ("hPa", "pressure"),
        ("kPa", "pressure"),
        ("mmHg", "pressure"),
        ("psi", "pressure"),
    ),
    **dict.fromkeys(
        AIRSPEEDS, (("kt", "speed"), ("mph", "speed"), ("km/h", "speed"), ("m/s", "speed"))
    ),
    "fuel_flow": (
        ("gph", "volume flow"),
        ("lph", "volume flow"),
        ("impgph", "volume flow"),
        ("lb/h", "mass flow"),
        ("kg/h", "mass flow"),
    ),
    "oat": (("degC", "temperature"), ("degF", "temperature")),
    "isa_deviation": (("degC", "temperature difference"), ("degF", "temperature difference")),
    "power": (("hp", "power"), ("kW", "power")),
}
_COLUMNS: Final = {"map": 0, "fuel_flow": 1, "tas": 2, "leg1_gs": 2}


def alternatives(reading: Reading) -> Iterator[Unit]:
    """Yield the units that the numbers of a column may really be in.

    Parameters
    ----------
    reading : Reading
        The column [-]

    Yields
    ------
    Unit
        Other units of the trade than the one the column names [-]
    """
    for spelling, dimension in _ALTERNATIVES.get(reading.quantity, ()):
        unit = find_unit(spelling, dimension=dimension)
        if unit != reading.unit:
            yield unit


def scale_of(reading: Reading, unit: Unit, *, fuel_density: float) -> float:
    """Factor by which numbers grow when a column is taken to be in another unit.

    Parameters
    ----------
    reading : Reading
        The column [-]
    unit : Unit
        Unit it may really be in [-]
    fuel_density : float
        Density of the fuel, between volume and mass [kg/m3]

    Returns
    -------
    float
        New over old, apart from the zero of temperatures [-]
    """

    def factor(one: Unit) -> float:
        return one.factor * (fuel_density if one.dimension == "volume flow" else 1.0)

    return factor(unit) / factor(reading.unit)


def reread(evidence: Evidence, reading: Reading, *, unit: Unit, fuel_density: float) -> Evidence:
    """Evidence with one column taken to be in another unit.

    Parameters
    ----------
    evidence : Evidence
        As read [-]
    reading : Reading
        The column [-]
    unit : Unit
        Unit it may really be in [-]
    fuel_density : float
        Density of the fuel [kg/m3]

    Returns
    -------
    Evidence
        The same rows [-]

    Notes
    -----
    The corrections of gauges are taken to scale with the numbers: an approximation that is far
    smaller than any difference of units.
    """
    scale = scale_of(reading, unit, fuel_density=fuel_density)
    rows = reading.rows
    if reading.quantity == "oat":
        number = (evidence.temperature - reading.unit.offset) / reading.unit.factor
        temperature = number * unit.factor + unit.offset
        return replace(evidence, temperature=np.where(rows, temperature, evidence.temperature))
    if reading.quantity == "isa_deviation":
        standard = standard_temperature(pressure_altitude(evidence.pressure))
        temperature = standard + (evidence.temperature - standard) * scale
        return replace(evidence, temperature=np.where(rows, temperature, evidence.temperature))
    factor = np.where(rows, scale, 1.0)
    if reading.quantity == "power":
        return replace(evidence, power=evidence.power * factor)
    column = _COLUMNS[reading.quantity]
    steps = np.ones(3)
    steps[column] = scale
    grown = np.where(rows[:, None], steps, 1.0)
    read = evidence.read() * grown
    return replace(
        evidence,
        manifold_pressure=read[:, 0],
        fuel_flow=read[:, 1],
        true_airspeed=read[:, 2],
        rounding=evidence.rounding * grown,
        spread=evidence.spread * grown,
    )
