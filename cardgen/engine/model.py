"""Four-stroke spark-ignition engine, mean-value model."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = float | NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class NaturalInduction:
    """Induction of an unsupercharged engine.

    `loss` is the pressure lost at rated air flow in standard air as a share of standard pressure
    [-]; `ram_recovery` the share of flight impact pressure that reaches the throttle [-].
    """

    loss: Floats = 0.02
    ram_recovery: Floats = 0.7


@dataclass(frozen=True, slots=True)
class Engine:
    """A direct-drive or geared, naturally aspirated four-stroke engine (SI)."""

    displacement: float
    compression_ratio: float
    rated_power: float
    rated_rpm: float
    induction: NaturalInduction = NaturalInduction()
    gear_ratio: float = 1.0  # propeller rpm over engine rpm
    fuel_density: float = 719.0  # placeholder until constants: 6.0 lb/US gal
    level: Floats = 1.0
    breathing: tuple[Floats, Floats] = (0.0, 0.0)  # slope, curvature of volumetric efficiency
    friction_scale: Floats = 1.0
    back_pressure_effect: Floats = 1.0
    charge_temperature_exponent: Floats = 0.5
