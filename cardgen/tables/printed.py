"""Printed numbers: units, decimal places, and rounding to the safe side."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.limits import MessageUnits
from cardgen.records import dataclass
from cardgen.tables.choices import SecondUnits, UnitSet
from cardgen.units import find_unit, from_unit, to_unit

FloatArray = npt.NDArray[np.float64]

# Places finer than a pilot can read off the gauge are noise; coarser ones lose what was computed.
_PLACES: Final[Mapping[str, int]] = {
    "inHg": 1,
    "cmHg": 1,
    "hPa": 0,
    "kPa": 1,
    "mmHg": 0,
    "mbar": 0,
    "gal/h": 1,
    "impgal/h": 1,
    "l/h": 0,
    "lb/h": 0,
    "kg/h": 0,
}

_SIGNS: Final[Mapping[str, str]] = {
    "degC": "°C",
    "degF": "°F",
    "l/h": "L/h",
    "l": "L",
    "impgal/h": "imp gal/h",
    "impgal": "imp gal",
}

# A value within this share of a printed step of a whole step is that step: floating-point noise
# must not turn 10.0 into 10.1.
_HAIR: Final = 1e-6


@dataclass(frozen=True, slots=True)
class Decimals:
    """Decimal places that pressure, fuel flow and speed are printed with."""

    pressure: int = 1
    fuel_flow: int = 1
    speed: int = 0


def decimals(units: UnitSet) -> Decimals:
    """Decimal places that go with a set of units.

    Parameters
    ----------
    units : UnitSet
        Units of a card [-]

    Returns
    -------
    Decimals
        Places for pressure, fuel flow and speed [-]
    """
    return Decimals(
        pressure=_PLACES.get(units.pressure, 1),
        fuel_flow=_PLACES.get(units.fuel_flow, 1),
        speed=0,
    )


def rounded(values: FloatArray, places: int) -> FloatArray:
    """Nearest printed step.

    Parameters
    ----------
    values : ndarray
        Values in the printed unit [-]
    places : int
        Decimal places [-]

    Returns
    -------
    ndarray
        Values that print exactly with that many places [-]
    """
    return np.asarray(np.round(values, places))


def rounded_up(values: FloatArray, places: int) -> FloatArray:
    """Next printed step not below a value.

    Parameters
    ----------
    values : ndarray
        Values in the printed unit [-]
    places : int
        Decimal places [-]

    Returns
    -------
    ndarray
        Values that print exactly with that many places [-]
    """
    scale = 10.0**places
    return np.asarray(np.round(np.ceil(values * scale - _HAIR) / scale, places))


def rounded_down(values: FloatArray, places: int) -> FloatArray:
    """Next printed step not above a value.

    Parameters
    ----------
    values : ndarray
        Values in the printed unit [-]
    places : int
        Decimal places [-]

    Returns
    -------
    ndarray
        Values that print exactly with that many places [-]
    """
    scale = 10.0**places
    return np.asarray(np.round(np.floor(values * scale + _HAIR) / scale, places))


def unit_sign(unit: str) -> str:
    """Sign of a unit as printed, "°C" for "degC".

    Parameters
    ----------
    unit : str
        Name of the unit [-]

    Returns
    -------
    str
        Its printed sign [-]
    """
    return _SIGNS.get(unit, unit)


def in_second_units(
    pressure: float, fuel_flow: float, speed: float, *, units: UnitSet, second: SecondUnits
) -> tuple[float | None, float | None, float | None]:
    """Printed numbers in the second units of a card.

    Parameters
    ----------
    pressure, fuel_flow, speed : float
        As printed in the first units [-]
    units : UnitSet
        First units [-]
    second : SecondUnits
        Second units; that of fuel flow has the dimension of the first [-]

    Returns
    -------
    tuple of float or None
        Pressure to the nearest step, because it is the same setting; fuel flow rounded up and speed
        rounded down; None where there is no second unit [-]
    """

    def turned(value: float, first: str, other: str | None) -> FloatArray | None:
        return None if other is None else np.asarray(to_unit(from_unit(value, first), other))

    turns = (
        (turned(pressure, units.pressure, second.pressure), second.pressure, rounded),
        (turned(fuel_flow, units.fuel_flow, second.fuel_flow), second.fuel_flow, rounded_up),
        (turned(speed, units.speed, second.speed), None, rounded_down),
    )
    first, middle, last = (
        None if value is None else float(toward(value, _PLACES.get(unit or "", 0)))
        for value, unit, toward in turns
    )
    return first, middle, last


def places_of(unit: str) -> int:
    """Decimal places that a unit of pressure or fuel flow is printed with.

    Parameters
    ----------
    unit : str
        Unit [-]

    Returns
    -------
    int
        Places; none for a unit of speed [-]
    """
    return _PLACES.get(unit, 0)


def fuel_flow_in(mass_flow: FloatArray, unit: str, *, fuel_density: float) -> FloatArray:
    """Fuel flow in a unit of volume or of mass.

    Parameters
    ----------
    mass_flow : ndarray
        Fuel flow [kg/s]
    unit : str
        Unit of volume or mass per time [-]
    fuel_density : float
        Density of the fuel [kg/m³]

    Returns
    -------
    ndarray
        Fuel flow in that unit [-]
    """
    if find_unit(unit).dimension == "mass flow":
        return np.asarray(to_unit(mass_flow, unit))
    return np.asarray(to_unit(mass_flow / fuel_density, unit))


def temperature_step_in(step: npt.ArrayLike, unit: str) -> FloatArray:
    """Temperature difference in the degrees of a scale.

    Parameters
    ----------
    step : array_like
        Difference [K]
    unit : str
        Unit of temperature [-]

    Returns
    -------
    ndarray
        Difference in that unit [-]
    """
    return np.asarray(to_unit(np.asarray(step), unit, dimension="temperature difference"))


def pressure_from(values: FloatArray, unit: str) -> FloatArray:
    """Pressure from a printed unit.

    Parameters
    ----------
    values : ndarray
        Printed pressures [-]
    unit : str
        Their unit [-]

    Returns
    -------
    ndarray
        Pressure [Pa]
    """
    return np.asarray(from_unit(values, unit))


def message_units(units: UnitSet) -> MessageUnits:
    """Units of messages that go with the units of a card.

    Parameters
    ----------
    units : UnitSet
        Units of a card [-]

    Returns
    -------
    MessageUnits
        The same, and the unit of power that goes with them [-]
    """
    return MessageUnits(
        pressure=units.pressure,
        speed=units.speed,
        altitude=units.altitude,
        temperature=units.temperature,
        power="hp" if units.pressure == "inHg" else "kW",
    )
