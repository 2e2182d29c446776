"""Engine: air flow, power, fuel flow and their inverses."""

from cardgen.engine.mixture import (
    BEST_ECONOMY_FUEL_AIR_RATIO,
    BEST_POWER_FUEL_AIR_RATIO,
    Mixture,
    exhaust_offset,
    fuel_air_ratio_at_exhaust_offset,
    relative_power,
)
from cardgen.engine.model import (
    BREATHING_NODES,
    DEFAULT_BREATHING,
    DEFAULT_FUEL_DENSITY,
    Engine,
    NaturalInduction,
    PowerLine,
    brake_power,
    friction_power,
    fuel_flow,
    full_throttle_manifold_pressure,
    manifold_pressure,
    power_line,
    relative_air_flow,
    volumetric_efficiency_ratio,
)

__all__ = [
    "BEST_ECONOMY_FUEL_AIR_RATIO",
    "BEST_POWER_FUEL_AIR_RATIO",
    "BREATHING_NODES",
    "DEFAULT_BREATHING",
    "DEFAULT_FUEL_DENSITY",
    "Engine",
    "Mixture",
    "NaturalInduction",
    "PowerLine",
    "brake_power",
    "exhaust_offset",
    "friction_power",
    "fuel_air_ratio_at_exhaust_offset",
    "fuel_flow",
    "full_throttle_manifold_pressure",
    "manifold_pressure",
    "power_line",
    "relative_air_flow",
    "relative_power",
    "volumetric_efficiency_ratio",
]
