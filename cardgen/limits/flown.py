"""What is known about settings when they are held against limits."""

from __future__ import annotations

from dataclasses import fields

import numpy as np
from numpy.typing import NDArray

from cardgen.limits.gauges import (
    Gauges,
    true_manifold_pressure,
    true_manifold_pressure_interval,
    true_rpm,
    true_rpm_interval,
)
from cardgen.records import dataclass

Floats = float | NDArray[np.float64]
FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
Bools = bool | NDArray[np.bool_]
Bounds = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Evidence:
    """Ranges that the data behind a fit cover; None where they say nothing.

    Parameters
    ----------
    pressure_altitude : tuple of float, optional
        Lowest and highest [m]
    rpm : tuple of float, optional
        Least and greatest true rpm [rpm]
    power_fraction : tuple of float, optional
        Least and greatest share of the percent rating [-]
    temperature : tuple of float, optional
        Lowest and highest outside air temperature [K]
    """

    pressure_altitude: Bounds | None = None
    rpm: Bounds | None = None
    power_fraction: Bounds | None = None
    temperature: Bounds | None = None


@dataclass(frozen=True, slots=True)
class Flown:
    """Settings as the gauges read them and what the model gives for each; arrays broadcast.

    A number that is not known is NaN, and what depends on it is judged *unknown*.

    Parameters
    ----------
    indicated_rpm : float or ndarray
        Tachometer reading [rpm]
    indicated_manifold_pressure : float or ndarray
        Reading of the manifold-pressure gauge [Pa]
    pressure_altitude : float or ndarray
        Pressure altitude [m]
    temperature : float or ndarray
        Outside air temperature, true static [K]
    mixture : str
        Name of the mixture [-]
    power_fraction : float or ndarray
        Power as a share of the percent rating [-]
    power : float or ndarray
        Brake power [W]
    calibrated_airspeed : float or ndarray
        Calibrated airspeed [m/s]
    full_throttle_manifold_pressure : float or ndarray
        True manifold pressure at full throttle in this air [Pa]
    on_fine_stop : bool or ndarray, optional
        Propeller held by its fine stop, so that the rpm sags [-]
    on_coarse_stop : bool or ndarray, optional
        Propeller held by its coarse stop, so that the rpm climbs [-]
    governed_rpm : float or ndarray
        True rpm that the engine takes on a stop [rpm]
    power_fraction_at_best_power : float or ndarray
        Share of the percent rating at this rpm and pressure with the best-power mixture [-]
    power_fraction_tolerance : float or ndarray
        95 % tolerance of the power fraction, both ways [-]
    calibrated_airspeed_tolerance : float or ndarray
        95 % tolerance of the airspeed, both ways [m/s]
    solved : bool or ndarray
        Whether the model has level flight here [-]
    status : str or ndarray
        Reason word where it has none [-]
    evidence : Evidence, optional
        What the fit behind the numbers has seen; None for a model that is not fitted [-]
    """

    indicated_rpm: Floats
    indicated_manifold_pressure: Floats
    pressure_altitude: Floats
    temperature: Floats
    mixture: str
    power_fraction: Floats = np.nan
    power: Floats = np.nan
    calibrated_airspeed: Floats = np.nan
    full_throttle_manifold_pressure: Floats = np.nan
    on_fine_stop: Bools | None = None
    on_coarse_stop: Bools | None = None
    governed_rpm: Floats = np.nan
    power_fraction_at_best_power: Floats = np.nan
    power_fraction_tolerance: Floats = 0.0
    calibrated_airspeed_tolerance: Floats = 0.0
    solved: Bools = True
    status: str | NDArray[np.str_] = ""
    evidence: Evidence | None = None

    @property
    def shape(self) -> tuple[int, ...]:
        """Return the common shape of all arrays."""
        values = (getattr(self, field.name) for field in fields(self))
        shapes = (np.shape(v) for v in values if isinstance(v, np.ndarray | np.generic | float))
        return np.broadcast_shapes(*shapes)


@dataclass(frozen=True, slots=True)
class Span:
    """Least, likely and greatest value that a number may truly have."""

    low: FloatArray
    likely: FloatArray
    high: FloatArray


@dataclass(frozen=True, slots=True)
class Spans:
    """True values that each setting may stand for, all of one shape, SI and rpm."""

    rpm: Span
    manifold_pressure: Span
    power_fraction: Span
    power: Span
    calibrated_airspeed: Span
    best_power_fraction: Span


def true_spans(gauges: Gauges, flown: Flown) -> Spans:
    """Return the true values that settings may stand for, by gauge error and model tolerance.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    flown : Flown
        The settings [-]

    Returns
    -------
    Spans
        Spans of the shape of `flown` [-]

    Notes
    -----
    The tolerance of power is that of its fraction, which is the same number in another unit.
    """
    shape = flown.shape

    def full(value: Floats) -> FloatArray:
        return np.broadcast_to(np.asarray(value, dtype=np.float64), shape)

    def around(value: Floats, tolerance: Floats) -> Span:
        middle, wide = full(value), np.abs(full(tolerance))
        return Span(middle - wide, middle, middle + wide)

    rpm, pressure = full(flown.indicated_rpm), full(flown.indicated_manifold_pressure)
    rpm_low, rpm_high = true_rpm_interval(gauges, rpm)
    pressure_low, pressure_high = true_manifold_pressure_interval(gauges, pressure)
    fraction = full(flown.power_fraction)
    tolerance = full(flown.power_fraction_tolerance)
    relative = np.divide(
        tolerance, fraction, out=np.zeros(shape), where=(tolerance != 0.0) & (fraction != 0.0)
    )
    return Spans(
        rpm=Span(rpm_low, true_rpm(gauges, rpm), rpm_high),
        manifold_pressure=Span(
            pressure_low, true_manifold_pressure(gauges, pressure), pressure_high
        ),
        power_fraction=around(fraction, tolerance),
        power=around(flown.power, full(flown.power) * relative),
        calibrated_airspeed=around(flown.calibrated_airspeed, flown.calibrated_airspeed_tolerance),
        best_power_fraction=around(flown.power_fraction_at_best_power, tolerance),
    )
