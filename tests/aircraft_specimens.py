"""Invented aircraft that the tests of engine, airframe and cruise compute with, and random ones."""

from __future__ import annotations

import numpy as np

from cardgen.aircraft import Aircraft, Condition
from cardgen.airframe import Airframe
from cardgen.atmosphere import standard_pressure, standard_temperature
from cardgen.constants import FOOT, HORSEPOWER, INCH, POUND
from cardgen.engine import Engine, Mixture, NaturalInduction
from cardgen.propeller import Propeller, blade_from_activity_factor

BEST_POWER = Mixture("best power", 0.0775)
ECONOMY = Mixture("economy", 0.0625)

FOUR = Engine(360.0 * INCH**3, 8.5, 180.0 * HORSEPOWER, 2700.0)
SIX = Engine(470.0 * INCH**3, 8.0, 225.0 * HORSEPOWER, 2600.0)
HIGH = Engine(540.0 * INCH**3, 8.7, 300.0 * HORSEPOWER, 2700.0)
GEARED = Engine(480.0 * INCH**3, 8.7, 270.0 * HORSEPOWER, 3400.0, gear_ratio=0.64)
ENGINES = {"four": FOUR, "six": SIX, "high": HIGH, "geared": GEARED}

TWO_BLADES = Propeller(
    1.93, 2, blade_from_activity_factor(100.0), np.radians(12.0), np.radians(32.0)
)
THREE_BLADES = Propeller(
    1.98, 3, blade_from_activity_factor(95.0), np.radians(12.0), np.radians(34.0)
)
SLOW_BLADES = Propeller(
    2.24, 3, blade_from_activity_factor(100.0), np.radians(12.0), np.radians(36.0)
)

TOURER = Aircraft(FOUR, TWO_BLADES, Airframe(16.2, 11.0, 0.026))
CLEAN = Aircraft(HIGH, THREE_BLADES, Airframe(16.8, 10.2, 0.020))
TWIN_SIZED = Aircraft(GEARED, SLOW_BLADES, Airframe(17.0, 11.2, 0.024))
AIRCRAFT = {"tourer": TOURER, "clean": CLEAN, "geared": TWIN_SIZED}
MASS = {"tourer": 1100.0, "clean": 1450.0, "geared": 1600.0}


def air(altitude_ft: float, *, deviation: float = 0.0) -> tuple[np.ndarray, np.ndarray]:
    """Pressure and temperature at pressure altitudes in standard air, some kelvins off."""
    altitude = np.asarray(altitude_ft) * FOOT
    return standard_pressure(altitude), standard_temperature(altitude) + deviation


def condition(altitude_ft: float, *, mass: float = 1100.0, deviation: float = 0.0) -> Condition:
    """Air and load of a point."""
    return Condition(*air(altitude_ft, deviation=deviation), mass)


def random_aircraft(seed: int) -> Aircraft:
    """An aircraft with every number drawn from the range of single-engined tourers."""
    draw = np.random.default_rng(seed).uniform
    displacement = draw(320.0, 550.0) * INCH**3
    rated_rpm = draw(2500.0, 2800.0)
    engine = Engine(
        displacement,
        draw(7.0, 10.0),
        # 11 to 12.5 bar of brake mean effective pressure at the rated point.
        draw(0.90e6, 1.02e6) * displacement * rated_rpm / 120.0,
        rated_rpm,
        NaturalInduction(loss=draw(0.01, 0.05), ram_recovery=draw(0.3, 0.9)),
        level=draw(0.95, 1.03),
        breathing=tuple(-draw(0.4, 1.2) * (1.0 - node) ** 2 for node in (0.6, 0.7, 0.8, 0.9)),
        friction_scale=draw(0.2, 0.5),
        back_pressure_effect=draw(0.5, 1.5),
        charge_temperature_exponent=draw(0.4, 0.8),
    )
    propeller = Propeller(
        draw(1.88, 2.1),
        int(draw(2.0, 3.99)),
        blade_from_activity_factor(draw(85.0, 115.0)),
        np.radians(11.0),
        np.radians(36.0),
        installation_factor=draw(0.90, 0.98),
    )
    airframe = Airframe(
        draw(14.0, 18.5),
        draw(9.5, 11.5),
        draw(0.019, 0.032),
        oswald_factor=draw(0.65, 0.85),
        greatest_lift=1.3,
    )
    return Aircraft(engine, propeller, airframe)


def random_mass(aircraft: Aircraft, share: float) -> float:
    """Mass between light and heavy for the power of an aircraft; share 0 to 1 [kg]."""
    per_power = 10.0 + 4.0 * share  # lb per hp
    return per_power * aircraft.engine.rated_power / HORSEPOWER * POUND
