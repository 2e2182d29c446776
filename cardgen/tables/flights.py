"""Flight points worth flying: allowed settings, at sensible altitudes, that tell most."""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import standard_pressure, standard_temperature
from cardgen.constants import FOOT, GALLON_US, HOUR, INCH_OF_MERCURY, KNOT
from cardgen.fit import Evidence
from cardgen.fit.design import design
from cardgen.fit.tolerance import COVERAGE_FACTOR
from cardgen.limits import Verdict
from cardgen.limits.gauges import true_manifold_pressure, true_rpm
from cardgen.records import dataclass
from cardgen.tables.choices import CardChoices
from cardgen.tables.printed import decimals
from cardgen.tables.rows import situation_of
from cardgen.tables.solution import Model, solve
from cardgen.tables.verdict import judge
from cardgen.units import from_unit, to_unit

FloatArray = npt.NDArray[np.float64]

# High enough for smooth air and terrain, low enough to need no oxygen. Common practice, no source.
_LEAST_ALTITUDE: Final = 3000.0 * FOOT
_GREATEST_ALTITUDE: Final = 10_000.0 * FOOT
_ROOM: Final = 50.0 * FOOT  # a row of a card in metres may miss a round number of feet

_THROTTLE_ROOM: Final = 0.7 * INCH_OF_MERCURY
"""Least distance from full throttle, so that a setting can be held in air a little warmer or higher
than reckoned. Common practice, no source."""

# Steps that a needle can be set to without interpolating.
_SET_STEPS: Final = {"inHg": 0.5, "hPa": 10.0, "mbar": 10.0, "kPa": 1.0, "mmHg": 10.0}
_RATED_SHARES: Final = (0.45, 0.55, 0.65, 0.75)
"""Powers that are flown where the card has fewer: a spread of power tells friction from drag."""


@dataclass(frozen=True, slots=True)
class FlightPoint:
    """One setting to fly; `mixture` by name.

    Parameters
    ----------
    indicated_rpm : float
        What the tachometer is to read [rpm]
    indicated_pressure : float
        What the manifold-pressure gauge is to read [Pa]
    pressure_altitude : float
        Pressure altitude [m]
    mixture : str
        Name of the mixture [-]
    power_fraction : float
        Share of the percent rating that the model expects in standard air [-]
    """

    indicated_rpm: float
    indicated_pressure: float
    pressure_altitude: float
    mixture: str
    power_fraction: float


@dataclass(frozen=True, slots=True)
class FlightPlan:
    """Points to fly, and what they are expected to do to the card.

    Parameters
    ----------
    points : tuple of FlightPoint
        In the order to fly them: by altitude, then rpm and pressure [-]
    mass : float
        Mass that was reckoned with [kg]
    before, after : ndarray, shape (3,)
        Typical 95 % tolerance of pressure, fuel flow and airspeed over the cells of the card
        [Pa, kg/s, m/s]
    """

    points: tuple[FlightPoint, ...]
    mass: float
    before: FloatArray
    after: FloatArray


def points_to_fly(model: Model, choices: CardChoices, *, count: int = 6) -> FlightPlan:
    """Choose settings whose flying would shrink the tolerances of a card most.

    Parameters
    ----------
    model : Model
        The aircraft with what is known of it [-]
    choices : CardChoices
        The card [-]
    count : int
        How many points [-]

    Returns
    -------
    FlightPlan
        Points that no limit forbids or warns of, none near full throttle; fewer than asked where
        there are not so many [-]
    """
    candidates, points = _candidates(model, choices)
    if not points:
        nothing = np.full(3, np.nan)
        return FlightPlan((), choices.mass[0], nothing, nothing)
    found = design(
        model.subject,
        model.knowledge,
        candidates=candidates,
        wanted=_cells(model, choices),
        count=count,
    )
    chosen = sorted(
        (points[place] for place in found.chosen),
        key=lambda p: (p.pressure_altitude, p.mixture, p.indicated_rpm, p.indicated_pressure),
    )

    def tolerance(deviation: FloatArray) -> FloatArray:
        return np.asarray(COVERAGE_FACTOR * np.hypot(deviation, model.knowledge.scatter))

    return FlightPlan(
        tuple(chosen), choices.mass[0], tolerance(found.before), tolerance(found.after)
    )


def _candidates(model: Model, choices: CardChoices) -> tuple[Evidence, list[FlightPoint]]:
    """Every setting that may be flown, as the row it would make and as what is to be set."""
    altitude = _altitudes(choices)
    rpm = np.array(choices.rpm)
    power = np.array(sorted({*choices.power_fraction, *_band(choices)}))
    step = _SET_STEPS.get(choices.units.pressure, 1.0)
    points: list[FlightPoint] = []
    rows: list[tuple[float, float, float, int]] = []
    for name in choices.mixtures:
        index = model.mixture_index(name)
        situation = situation_of(
            altitude,
            np.zeros(1),
            by_density=False,
            mass=np.array(choices.mass[0]),
            mixture=index,
        )
        ask = np.meshgrid(power, rpm, altitude, indexing="ij", sparse=True)
        asked = solve(
            model,
            situation,
            indicated_rpm=ask[1],
            power_fraction=ask[0],
            with_tolerance=False,
        )
        reads = np.asarray(to_unit(asked.indicated_manifold_pressure, choices.units.pressure))
        setting = np.asarray(from_unit(np.round(reads / step) * step, choices.units.pressure))
        flown = solve(
            model, situation, indicated_rpm=ask[1], indicated_pressure=setting, with_tolerance=False
        )
        verdict = judge(model, flown).verdict
        fine = (verdict != Verdict.OUTSIDE) & (verdict != Verdict.CAUTION)
        room = flown.point.full_throttle_manifold_pressure - flown.point.manifold_pressure
        fine &= ~asked.point.full_throttle & (room >= _THROTTLE_ROOM)
        fine &= ~np.isnan(flown.point.true_airspeed)
        seen: set[tuple[float, float, float]] = set()
        for at in np.argwhere(fine):
            k = tuple(at)
            key = (float(rpm[k[1]]), float(setting[k]), float(altitude[k[2]]))
            if key in seen:
                continue
            seen.add(key)
            points.append(FlightPoint(*key, name, float(flown.power_fraction[k])))
            rows.append((*key, index))
    return _rows_of(model, choices, rows), points


def _altitudes(choices: CardChoices) -> FloatArray:
    """Altitudes of the card that are sensible to fly at; all of them where none is."""
    altitude = np.array(choices.altitude)
    fine = altitude[
        (altitude >= _LEAST_ALTITUDE - _ROOM) & (altitude <= _GREATEST_ALTITUDE + _ROOM)
    ]
    return fine if fine.size else altitude


def _band(choices: CardChoices) -> tuple[float, ...]:
    """Powers to fly besides those of the card; none while an engine is being run in."""
    return () if choices.break_in is not None else _RATED_SHARES


def _rows_of(
    model: Model, choices: CardChoices, rows: list[tuple[float, float, float, int]]
) -> Evidence:
    """Rows of a flight that reads rpm, pressure, altitude, fuel flow and airspeed."""
    table = np.array([row[:3] for row in rows], dtype=np.float64).reshape(-1, 3)
    unknown = np.full(len(rows), np.nan)
    density = model.subject.aircraft.engine.fuel_density
    step = float(from_unit(10.0 ** -decimals(choices.units).pressure, choices.units.pressure))
    # What a pilot writes down: the pressure and a tenth of a gallon an hour, whole knots.
    rounding = np.array([step, 0.1 * density * GALLON_US / HOUR, KNOT])
    return Evidence(
        pressure=standard_pressure(table[:, 2]),
        temperature=standard_temperature(table[:, 2]),
        rpm=true_rpm(model.gauges, table[:, 0]),
        mass=np.full(len(rows), choices.mass[0]),
        mixture=np.array([row[3] for row in rows], dtype=np.intp),
        power=unknown,
        manifold_pressure=true_manifold_pressure(model.gauges, table[:, 1]),
        fuel_flow=unknown,
        true_airspeed=unknown,
        rounding=np.tile(rounding, (len(rows), 1)),
        spread=np.zeros((len(rows), 3)),
        flight=np.ones(len(rows), dtype=np.bool_),
        place=tuple(f"candidate {place}" for place in range(len(rows))),
    )


def _cells(model: Model, choices: CardChoices) -> Evidence:
    """The cells of a card, asked for by power."""
    by_density = choices.altitude_kind == "density"
    deviation = np.zeros(1) if by_density else np.array(choices.isa_deviation)
    mixtures = np.array([model.mixture_index(name) for name in choices.mixtures])
    situation = situation_of(
        np.array(choices.altitude)[:, None],
        deviation[None, :],
        by_density=by_density,
        mass=np.zeros(1),
        mixture=0,
    )
    pressure = standard_pressure(situation.pressure_altitude)
    temperature = np.broadcast_to(
        np.asarray(situation.temperature),
        np.broadcast_shapes(pressure.shape, np.shape(situation.temperature)),
    )
    place, mass, fraction, rpm, mixture = (
        grid.reshape(-1)
        for grid in np.meshgrid(
            np.arange(temperature.size),
            np.array(choices.mass),
            np.array(choices.power_fraction),
            np.array(choices.rpm),
            mixtures,
            indexing="ij",
        )
    )
    unknown = np.full(place.size, np.nan)
    return Evidence(
        pressure=np.broadcast_to(pressure, temperature.shape).reshape(-1)[place],
        temperature=temperature.reshape(-1)[place],
        rpm=true_rpm(model.gauges, rpm),
        mass=mass,
        mixture=mixture.astype(np.intp),
        power=fraction * model.percent_of.power,
        manifold_pressure=unknown,
        fuel_flow=unknown,
        true_airspeed=unknown,
        rounding=np.zeros((place.size, 3)),
        spread=np.zeros((place.size, 3)),
        flight=np.zeros(place.size, dtype=np.bool_),
        place=tuple(f"cell {number}" for number in range(place.size)),
    )
