"""An invented aircraft's limits and settings, for the tests of limits."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from cardgen.constants import HORSEPOWER, INCH_OF_MERCURY, KNOT
from cardgen.limits import Flown, GaugeError, Gauges, Limits, Source
from cardgen.limits.kinds import (
    CATEGORIES,
    AirspeedLimit,
    AltitudeEnvelope,
    AltitudeSchedule,
    Category,
    LeaningCeiling,
    LeastManifoldPressure,
    ManifoldPressureCurve,
    Rating,
    RestrictedRpm,
    RpmRange,
    StatedNone,
    TemperatureEnvelope,
)

INHG = INCH_OF_MERCURY
MANUAL = Source("Invented flight manual", "section 2", "revision 3")
SHEET = Source("Invented propeller sheet", "page 4")

EXACT = Gauges(
    GaugeError((0.0,), (0.0,), 0.0, measured=True), GaugeError((0.0,), (0.0,), 0.0, measured=True)
)
"""Gauges that read the true value."""

FLOWN = Flown(
    indicated_rpm=2400.0,
    indicated_manifold_pressure=23.0 * INHG,
    pressure_altitude=1800.0,
    temperature=278.0,
    mixture="economy",
    power_fraction=0.65,
    power=0.65 * 230.0 * HORSEPOWER,
    calibrated_airspeed=130.0 * KNOT,
    full_throttle_manifold_pressure=24.0 * INHG,
    on_fine_stop=False,
    on_coarse_stop=False,
)
"""A setting that every limit of `ALL` allows on exact gauges."""

BLADES = RestrictedRpm("blades", 2100.0, 2350.0, "Avoid 2100 to 2350 rpm", SHEET)
CURVE = ManifoldPressureCurve(
    "chart", (1800.0, 2400.0, 2700.0), (22.0 * INHG, 26.0 * INHG, 29.0 * INHG), "See chart", MANUAL
)
CONTINUOUS = Rating("Maximum continuous", 230.0 * HORSEPOWER, 2600.0, "230 hp at 2600", MANUAL)
TAKE_OFF = Rating(
    "Take-off", 240.0 * HORSEPOWER, 2700.0, "240 hp at 2700, 5 minutes", MANUAL, time_limit=300.0
)
RPM_LIMITS = RpmRange("green arc", "1800 to 2650 rpm", MANUAL, 1800.0, 2650.0)
LEAST = LeastManifoldPressure(
    "floor", (1800.0, 2700.0), (12.0 * INHG, 15.0 * INHG), "Keep load on the propeller", SHEET
)
LEANING = LeaningCeiling(
    "leaning", "economy", "Lean at 75 % power or below", MANUAL, 0.75, 25.0 * INHG
)
SCHEDULE = AltitudeSchedule(
    "schedule", (0.0, 3000.0, 6000.0), (29.0 * INHG, 26.0 * INHG, 20.0 * INHG), "Table 2-1", MANUAL
)
V_NO = AirspeedLimit("V_NO", "V_NO", 150.0 * KNOT, "Smooth air only above", MANUAL)
V_NE = AirspeedLimit("V_NE", "V_NE", 185.0 * KNOT, "Never exceed", MANUAL)
ALTITUDE = AltitudeEnvelope("ceiling", "Up to 5000 m", MANUAL, None, 5000.0)
TEMPERATURE = TemperatureEnvelope("air", "-30 to +45 °C", MANUAL, 243.15, 318.15)

ALL = Limits(
    restricted_rpm=(BLADES,),
    manifold_pressure_curve=(CURVE,),
    ratings=(CONTINUOUS, TAKE_OFF),
    rpm_range=(RPM_LIMITS,),
    least_manifold_pressure=(LEAST,),
    leaning=(LEANING,),
    altitude_schedule=(SCHEDULE,),
    airspeed=(V_NO, V_NE),
    altitude=(ALTITUDE,),
    temperature=(TEMPERATURE,),
)


def only(**stated: Any) -> Limits:
    """Return limits in the categories given, every other one stated not to apply."""
    none: list[Category] = [category for category in CATEGORIES if not stated.get(category)]
    return replace(
        Limits(**stated), stated_none=tuple(StatedNone(c, "no such limit", MANUAL) for c in none)
    )


def flown(**changes: Any) -> Flown:
    """Return the specimen setting with changes."""
    return replace(FLOWN, **changes)
