"""One row of a points file, read into SI as it stands there."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import field
from typing import Final

import numpy as np

from cardgen.airspeed import airspeed_from_ground_legs
from cardgen.atmosphere import (
    pressure_altitude,
    pressure_altitude_at_density_altitude,
    standard_pressure,
    standard_temperature,
)
from cardgen.constants import FOOT, HORSEPOWER, HOUR, INCH_OF_MERCURY, KNOT, POUND
from cardgen.profile.cells import Row
from cardgen.profile.document import Profile
from cardgen.profile.values import shown as shown_value
from cardgen.records import dataclass
from cardgen.units import Dimension

MOST_LEGS: Final = 8

ALTITUDES: Final = ("pressure_altitude", "density_altitude")
POWERS: Final = ("percent_power", "power")
TEMPERATURES: Final = ("oat", "isa_deviation")
READ: Final = ("map", "fuel_flow", "tas")

COLUMNS: Final[Mapping[str, tuple[Dimension, ...]]] = {
    "pressure_altitude": ("length",),
    "density_altitude": ("length",),
    "oat": ("temperature",),
    "isa_deviation": ("temperature difference",),
    "rpm": (),
    "map": ("pressure",),
    "percent_power": (),
    "power": ("power",),
    "fuel_flow": ("volume flow", "mass flow"),
    "tas": ("speed",),
    "weight": ("mass",),
    "mixture": (),
    "source": (),
    **{f"leg{leg}_gs": ("speed",) for leg in range(1, MOST_LEGS + 1)},
    **{f"leg{leg}_track": ("angle",) for leg in range(1, MOST_LEGS + 1)},
}
"""Columns by the name without its unit, and what their unit may measure."""

# Beyond these nothing can be meant, whatever the unit; what is only unlikely is for the fit to say.
_BOUNDS: Final[Mapping[str, tuple[float, float]]] = {
    "pressure_altitude": (-2000.0 * FOOT, 60_000.0 * FOOT),
    "density_altitude": (-15_000.0 * FOOT, 60_000.0 * FOOT),
    "oat": (180.0, 480.0),
    "isa_deviation": (-100.0, 150.0),
    "rpm": (300.0, 8000.0),
    "map": (100.0, 1500.0 * INCH_OF_MERCURY),
    "percent_power": (1.0, 120.0),
    "power": (5.0 * HORSEPOWER, 3000.0 * HORSEPOWER),
    "fuel_flow": (0.1 * POUND / HOUR, 5000.0 * POUND / HOUR),
    "tas": (10.0 * KNOT, 800.0 * KNOT),
    "weight": (200.0 * POUND, 60_000.0 * POUND),
    "gs": (1.0 * KNOT, 800.0 * KNOT),
    "track": (-2.0 * np.pi, 4.0 * np.pi),
}


@dataclass(slots=True)
class Entry:
    """One row in SI; what the gauges of a flight read is not yet turned into true values."""

    place: str
    file: int
    flight: bool
    mixture: int
    pressure: float
    temperature: float
    temperature_read: bool  # by a thermometer, not stated as a deviation from standard
    rpm: float
    mass: float
    power: float = np.nan
    read: list[float] = field(default_factory=lambda: [np.nan] * 3)
    rounding: list[float] = field(default_factory=lambda: [0.0] * 3)
    airspeed_spread: float = 0.0
    filled: frozenset[str] = frozenset()
    digest: str = ""


def entry_of(profile: Profile, row: Row, file: int, assumed: dict[str, None]) -> Entry | None:
    """Read one row, None where it is reported."""
    before = len(row.sheet.problems)
    flight = _source(row, assumed)
    mixture = _mixture(profile, row, assumed)
    air = _air(row)
    rpm = _needed(row, "rpm")
    mass = _number(row, "weight")
    if not row.has("weight"):
        mass = profile.gross_mass
        assumed[
            f"{row.sheet.shown}: rows without a weight are taken at the greatest, "
            f"{mass / POUND:.0f} lb"
        ] = None
    power = _power(profile, row)
    read, rounding, spread = _measured(profile, row)
    if power is None and not row.has("map"):
        row.report("map", "neither power nor manifold pressure is given", "one of the two")
    if not any(row.has(quantity) for quantity in READ) and not _legs(row):
        row.report("map", "the row states nothing to fit to", "manifold pressure, fuel or airspeed")
    elif power is None and not row.has("fuel_flow") and not row.has("tas") and not _legs(row):
        row.report(
            "map",
            "a manifold pressure alone says nothing of what it gives",
            "power, fuel flow or airspeed beside it",
        )
    if len(row.sheet.problems) > before or air is None or rpm is None or mass is None:
        return None
    pressure, temperature, temperature_read = air
    entry = Entry(
        place=f"{row.sheet.shown}:{row.line}",
        file=file,
        flight=flight,
        mixture=mixture,
        pressure=pressure,
        temperature=temperature,
        temperature_read=temperature_read,
        rpm=rpm,
        mass=mass,
        power=np.nan if power is None else power,
        read=read,
        rounding=rounding,
        airspeed_spread=spread,
        filled=frozenset(row.filled),
    )
    numbers = (pressure, temperature, rpm, mass, entry.power, *read)
    words = ",".join(f"{number:.9g}" for number in numbers)
    words += f",{profile.mixtures[mixture].name},{flight}"
    entry.digest = hashlib.sha256(words.encode()).hexdigest()[:16]
    return entry


def _number(row: Row, quantity: str) -> float | None:
    """Read a cell within the bounds of its quantity."""
    least, greatest = _BOUNDS[quantity]
    return row.number(quantity, least, greatest)


def _needed(row: Row, quantity: str) -> float | None:
    """Read a cell that no row may leave empty."""
    if not row.has(quantity):
        row.report(quantity, "is missing", "a number in every row")
    return _number(row, quantity)


def _one_of(row: Row, quantities: Sequence[str], *, needed: bool) -> str | None:
    """Return which of several quantities a row states."""
    stated = [quantity for quantity in quantities if row.has(quantity)]
    if len(stated) > 1:
        row.report(stated[1], f"{stated[0]} is given as well", "one of the two")
        return None
    if not stated and needed:
        row.report(quantities[0], "is missing", f"{' or '.join(quantities)} in every row")
    return stated[0] if stated else None


def _source(row: Row, assumed: dict[str, None]) -> bool:
    """Return whether a row was flown."""
    text = (row.text("source") or "").casefold()
    if not text:
        assumed[f"{row.sheet.shown}: rows without a source are taken as handbook, true values"] = (
            None
        )
    elif text not in ("handbook", "flight"):
        row.report("source", f"{shown_value(text)} is not a source", "handbook or flight")
    return text == "flight"


def _mixture(profile: Profile, row: Row, assumed: dict[str, None]) -> int:
    """Return the index of a row's mixture."""
    names = [mixture.name for mixture in profile.mixtures]
    text = row.text("mixture")
    if text is None:
        if len(names) > 1:
            row.report("mixture", "is missing", f"one of {', '.join(names)}")
        else:
            assumed[f"{row.sheet.shown}: rows without a mixture are taken as {names[0]}"] = None
        return 0
    folded = [name.casefold() for name in names]
    if text.casefold() not in folded:
        row.report(
            "mixture",
            f"{shown_value(text)} is no mixture of {profile.path.name}",
            f"one of {', '.join(names)}",
        )
        return 0
    return folded.index(text.casefold())


def _air(row: Row) -> tuple[float, float, bool] | None:
    """Return static pressure, temperature, and whether a thermometer read it."""
    altitude_name = _one_of(row, ALTITUDES, needed=True)
    temperature_name = _one_of(row, TEMPERATURES, needed=True)
    if altitude_name is None or temperature_name is None:
        return None
    altitude = _number(row, altitude_name)
    stated = _number(row, temperature_name)
    if altitude is None or stated is None:
        return None
    if altitude_name == "density_altitude":
        if temperature_name == "isa_deviation":
            altitude = float(pressure_altitude_at_density_altitude(altitude, stated))
        else:
            altitude = _pressure_altitude_at(altitude, stated)
        if np.isnan(altitude):
            row.report(altitude_name, "no air is like that", "another altitude or temperature")
            return None
    pressure = float(standard_pressure(altitude))
    if temperature_name == "oat":
        return pressure, stated, True
    return pressure, float(standard_temperature(altitude)) + stated, False


def _pressure_altitude_at(density_height: float, temperature: float) -> float:
    """Return the pressure altitude of a density altitude at a temperature."""
    # Density fixes pressure at a temperature.
    ratio = temperature / float(standard_temperature(density_height))
    return float(pressure_altitude(float(standard_pressure(density_height)) * ratio))


def _power(profile: Profile, row: Row) -> float | None:
    """Return the brake power a row asks for [W]."""
    name = _one_of(row, POWERS, needed=False)
    if name is None:
        return None
    number = _number(row, name)
    if number is None or name == "power":
        return number
    return number / 100.0 * profile.percent_of.power


def _legs(row: Row) -> list[int]:
    """Return the numbers of the ground legs that a row states."""
    return [
        leg
        for leg in range(1, MOST_LEGS + 1)
        if row.has(f"leg{leg}_gs") or row.has(f"leg{leg}_track")
    ]


def _measured(profile: Profile, row: Row) -> tuple[list[float], list[float], float]:
    """Return what a row measures, the last steps printed, and the spread of its airspeed."""
    density = profile.aircraft.engine.fuel_density
    values = [_number_of(row, quantity, density) for quantity in READ]
    steps = [row.step(quantity) for quantity in READ]
    spread = 0.0
    if row.has("fuel_flow") and row.filled["fuel_flow"][0].unit is not None:
        unit = row.filled["fuel_flow"][0].unit
        steps[1] *= density if unit.dimension == "volume flow" else 1.0
    if legs := _legs(row):
        values[2], spread = _airspeed_of_legs(row, legs)
        steps[2] = 0.0
    return values, steps, spread


def _number_of(row: Row, quantity: str, fuel_density: float) -> float:
    """Return a measured number, NaN where there is none [SI]."""
    least, greatest = _BOUNDS[quantity]
    volume = (
        quantity == "fuel_flow"
        and row.has(quantity)
        and (unit := row.filled[quantity][0].unit) is not None
        and unit.dimension == "volume flow"
    )
    factor = fuel_density if volume else 1.0
    number = row.number(quantity, least / factor, greatest / factor)
    return np.nan if number is None else number * factor


def _airspeed_of_legs(row: Row, legs: Sequence[int]) -> tuple[float, float]:
    """Return airspeed from ground legs, and its spread between sets of three."""
    if row.has("tas"):
        row.report("tas", "ground legs are given as well", "one of the two")
        return np.nan, 0.0
    speeds: list[float] = []
    tracks: list[float] = []
    for leg in legs:
        for what, numbers in (("gs", speeds), ("track", tracks)):
            name = f"leg{leg}_{what}"
            if not row.has(name):
                row.report(name, "is missing", "ground speed and track of every leg")
            number = row.number(name, *_BOUNDS[what])
            numbers.append(np.nan if number is None else number)
    if len(legs) < 3:
        row.report(f"leg{legs[-1]}_gs", f"{len(legs)} leg(s) given", "three or more")
        return np.nan, 0.0
    if np.isnan([*speeds, *tracks]).any():
        return np.nan, 0.0
    found = airspeed_from_ground_legs(speeds, tracks)
    if np.isnan(found.true_airspeed):
        row.report(
            f"leg{legs[0]}_track",
            "the tracks do not fix an airspeed",
            "tracks spread over the compass, such as 90° or 120° apart",
        )
        return np.nan, 0.0
    return float(found.true_airspeed), float(np.nan_to_num(found.scatter))
