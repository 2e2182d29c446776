"""Gauges: what they read, what that may stand for, and how sure that is.

A reading stands for every true value within its calibration's band. Two rules keep that honest: a
gauge that nobody measured never gets less than its default band, and a reading beyond the points
of a correction table is taken at its worst (the end correction or none, and at least the default
band) and reported by `calibrated`, so that limits still bar what they can bar and the verdict on
the rest is *unknown*.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from cardgen.airspeed import PositionError
from cardgen.constants import INCH_OF_MERCURY
from cardgen.errors import DomainError
from cardgen.records import dataclass

Floats = float | NDArray[np.float64]
FloatArray = NDArray[np.float64]

UNMEASURED_TACHOMETER_BAND_RPM: Final = 50.0
"""Guard band for a tachometer nobody has measured [rpm]. Common practice, no source."""

UNMEASURED_MANIFOLD_PRESSURE_BAND: Final = 0.4 * INCH_OF_MERCURY
"""Guard band for a manifold-pressure gauge nobody has measured [Pa]. Common practice, no source."""


@dataclass(frozen=True, slots=True)
class GaugeError:
    """Calibration of one gauge: true = indicated + correction, known to within ± `band`.

    `indicated` and `correction` are equally long; one entry is a constant correction that holds at
    every reading. A gauge that was never measured has `measured` false, a zero correction and the
    stated default band.
    """

    indicated: tuple[float, ...]
    correction: tuple[float, ...]
    band: float
    measured: bool
    method: str = ""
    date: str = ""


@dataclass(frozen=True, slots=True)
class Gauges:
    """The gauges that a cruise setting is read from.

    `tachometer` in rpm, `manifold_pressure` in Pa, `fuel_flow_factor` true over indicated [-],
    `temperature_recovery` the share of the full adiabatic rise an outside-air probe shows [-]
    (None where the gauge is read as true), `position_error` None where none is stated.
    """

    tachometer: GaugeError
    manifold_pressure: GaugeError
    fuel_flow_factor: float = 1.0
    temperature_recovery: float | None = None
    position_error: PositionError | None = None


UNMEASURED_TACHOMETER: Final = GaugeError((0.0,), (0.0,), UNMEASURED_TACHOMETER_BAND_RPM, False)
"""Tachometer without a calibration."""

UNMEASURED_MANIFOLD_PRESSURE_GAUGE: Final = GaugeError(
    (0.0,), (0.0,), UNMEASURED_MANIFOLD_PRESSURE_BAND, False
)
"""Manifold-pressure gauge without a calibration."""

UNMEASURED_GAUGES: Final = Gauges(UNMEASURED_TACHOMETER, UNMEASURED_MANIFOLD_PRESSURE_GAUGE)
"""Both gauges without a calibration: what a profile that says nothing has."""


def _points(gauge: GaugeError) -> tuple[FloatArray, FloatArray]:
    """Return the readings of a calibration in rising order and the correction at each."""
    indicated = np.asarray(gauge.indicated, dtype=np.float64)
    correction = np.asarray(gauge.correction, dtype=np.float64)
    if indicated.shape != correction.shape or indicated.size == 0:
        raise ValueError("a calibration needs one correction for each reading, at least one")
    order = np.argsort(indicated, kind="stable")
    return indicated[order], correction[order]


def calibrated(gauge: GaugeError, indicated: Floats) -> NDArray[np.bool_]:
    """Return whether readings lie within the points a gauge was calibrated at.

    Parameters
    ----------
    gauge : GaugeError
        The gauge [-]
    indicated : float or ndarray
        Readings [unit of the gauge]

    Returns
    -------
    ndarray of bool
        True within the table, ends included, and everywhere for a constant correction [-]
    """
    reading = np.asarray(indicated, dtype=np.float64)
    known, _ = _points(gauge)
    if known.size == 1:
        return np.isfinite(reading)
    slack = 1e-9 * np.abs(known[[0, -1]])
    covered: NDArray[np.bool_] = (reading >= known[0] - slack[0]) & (
        reading <= known[-1] + slack[1]
    )
    return covered


def true_value(gauge: GaugeError, indicated: Floats) -> FloatArray:
    """Return the most likely true value of readings, the end correction held beyond the table.

    Parameters
    ----------
    gauge : GaugeError
        The gauge [-]
    indicated : float or ndarray
        Readings [unit of the gauge]

    Returns
    -------
    ndarray
        Reading plus correction, linear between points [unit of the gauge]
    """
    reading = np.asarray(indicated, dtype=np.float64)
    known, correction = _points(gauge)
    corrected: FloatArray = reading + np.interp(reading, known, correction)
    return corrected


def indicated_value(gauge: GaugeError, true: Floats) -> FloatArray:
    """Return what a gauge reads at true values: the inverse of `true_value`.

    Parameters
    ----------
    gauge : GaugeError
        The gauge [-]
    true : float or ndarray
        True values [unit of the gauge]

    Returns
    -------
    ndarray
        Readings; beyond the table with the end correction, see `calibrated` [unit of the gauge]

    Raises
    ------
    DomainError
        The correction falls so fast between two points that two readings stand for one true value.
    """
    value = np.asarray(true, dtype=np.float64)
    known, correction = _points(gauge)
    true_points = known + correction
    if known.size > 1 and not np.all(np.diff(true_points) > 0.0):
        raise DomainError(
            "the gauge's correction falls faster than its reading rises, so that two readings "
            "stand for one true value; check the calibration points"
        )
    reading: FloatArray = value - np.interp(value, true_points, correction)
    return reading


def band_of(gauge: GaugeError, *, default_band: float) -> float:
    """Return the band within which the true value lies about the corrected reading.

    Parameters
    ----------
    gauge : GaugeError
        The gauge [-]
    default_band : float
        What a gauge nobody measured has at least [unit of the gauge]

    Returns
    -------
    float
        Half the width of the band [unit of the gauge]
    """
    return gauge.band if gauge.measured else max(gauge.band, default_band)


def _interval(
    gauge: GaugeError, indicated: Floats, *, default_band: float
) -> tuple[FloatArray, FloatArray]:
    """Return the least and greatest true value that readings may stand for."""
    reading = np.asarray(indicated, dtype=np.float64)
    value = true_value(gauge, reading)
    band = band_of(gauge, default_band=default_band)
    if not gauge.measured:
        return value - band, value + band
    wide = max(band, default_band)
    covered = calibrated(gauge, reading)
    low = np.where(covered, value - band, np.minimum(value, reading) - wide)
    high = np.where(covered, value + band, np.maximum(value, reading) + wide)
    return low, high


def true_rpm_interval(gauges: Gauges, indicated: Floats) -> tuple[FloatArray, FloatArray]:
    """Return the least and greatest true rpm that tachometer readings may stand for.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    indicated : float or ndarray
        Tachometer readings [rpm]

    Returns
    -------
    tuple of ndarray
        Least and greatest true value [rpm]

    Notes
    -----
    Reading + correction ± band. Beyond the calibration the correction may be anything between that
    of the nearest point and none, ± the larger of the band and `UNMEASURED_TACHOMETER_BAND_RPM`.
    """
    return _interval(gauges.tachometer, indicated, default_band=UNMEASURED_TACHOMETER_BAND_RPM)


def true_manifold_pressure_interval(
    gauges: Gauges, indicated: Floats
) -> tuple[FloatArray, FloatArray]:
    """Return the least and greatest true manifold pressure that readings may stand for.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    indicated : float or ndarray
        Readings of the manifold-pressure gauge [Pa]

    Returns
    -------
    tuple of ndarray
        Least and greatest true value [Pa]

    Notes
    -----
    As for `true_rpm_interval`, with `UNMEASURED_MANIFOLD_PRESSURE_BAND`.
    """
    return _interval(
        gauges.manifold_pressure, indicated, default_band=UNMEASURED_MANIFOLD_PRESSURE_BAND
    )


def true_rpm(gauges: Gauges, indicated: Floats) -> FloatArray:
    """Return the most likely true rpm of tachometer readings.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    indicated : float or ndarray
        Tachometer readings [rpm]

    Returns
    -------
    ndarray
        True values [rpm]
    """
    return true_value(gauges.tachometer, indicated)


def true_manifold_pressure(gauges: Gauges, indicated: Floats) -> FloatArray:
    """Return the most likely true manifold pressure of readings.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    indicated : float or ndarray
        Readings of the manifold-pressure gauge [Pa]

    Returns
    -------
    ndarray
        True values [Pa]
    """
    return true_value(gauges.manifold_pressure, indicated)


def indicated_rpm(gauges: Gauges, true: Floats) -> FloatArray:
    """Return what the tachometer reads at true rpm.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    true : float or ndarray
        True values [rpm]

    Returns
    -------
    ndarray
        Readings [rpm]
    """
    return indicated_value(gauges.tachometer, true)


def indicated_manifold_pressure(gauges: Gauges, true: Floats) -> FloatArray:
    """Return what the manifold-pressure gauge reads at true pressures.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    true : float or ndarray
        True values [Pa]

    Returns
    -------
    ndarray
        Readings [Pa]
    """
    return indicated_value(gauges.manifold_pressure, true)


def indicated_rpm_interval(gauges: Gauges, low: float, high: float) -> tuple[float, float]:
    """Return the readings that may stand for any true rpm of a range.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    low, high : float
        Ends of the range, true [rpm]

    Returns
    -------
    tuple of float
        Least and greatest reading that may stand for one of them, within the calibration [rpm]
    """
    band = band_of(gauges.tachometer, default_band=UNMEASURED_TACHOMETER_BAND_RPM)
    least, greatest = indicated_rpm(gauges, np.array([low - band, high + band]))
    return float(least), float(greatest)
