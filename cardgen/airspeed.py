"""True, calibrated and indicated airspeed, true temperature, and airspeed from ground speeds.

Everything here is for subsonic flight; beyond Mach 1 results are NaN.

References
----------
.. [1] W. Gracey, "Measurement of Aircraft Speed and Altitude", NASA RP-1046, 1980, chapter III.
.. [2] D. Gray, "Using GPS to accurately establish true airspeed", 1998; the method taught at the
   National Test Pilot School: three ground speeds and tracks, and four for a check.
"""

from __future__ import annotations

from itertools import combinations
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import speed_of_sound
from cardgen.constants import (
    GAS_CONSTANT_DRY_AIR,
    HEAT_CAPACITY_RATIO,
    SEA_LEVEL_PRESSURE,
    SEA_LEVEL_TEMPERATURE,
)
from cardgen.errors import DomainError
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]

_ISENTROPIC_EXPONENT: Final = HEAT_CAPACITY_RATIO / (HEAT_CAPACITY_RATIO - 1.0)
_DYNAMIC_FACTOR: Final = (HEAT_CAPACITY_RATIO - 1.0) / 2.0
_HEAT_CAPACITY: Final = _ISENTROPIC_EXPONENT * GAS_CONSTANT_DRY_AIR  # c_p [J/(kg K)]

# Root sum square by which three legs may at most magnify errors of their ground velocities. Tracks
# 120° apart give 0.58, 90° 0.71, 60° 1.7. A choice, no source: common practice turns 90° or 120°.
_LARGEST_MAGNIFICATION: Final = 2.0


@dataclass(frozen=True, slots=True)
class PositionError:
    """Airspeed correction against calibrated airspeed, linear between the points.

    Parameters
    ----------
    calibrated : tuple of float
        Calibrated airspeeds, rising, at least two [m/s]
    correction : tuple of float
        What is added to indicated airspeed to give each calibrated airspeed [m/s]
    """

    calibrated: tuple[float, ...]
    correction: tuple[float, ...]

    def __post_init__(self) -> None:
        """Refuse a table that cannot be read both ways."""
        if len(self.calibrated) != len(self.correction):
            raise DomainError(
                f"position error has {len(self.calibrated)} airspeeds and "
                f"{len(self.correction)} corrections; expected as many of each"
            )
        if len(self.calibrated) < 2:
            raise DomainError("position error has fewer than two points; expected two or more")
        for name, speeds in (("calibrated", self.calibrated), ("indicated", self.indicated)):
            if not np.all(np.diff(speeds) > 0.0):  # also where one is NaN
                raise DomainError(
                    f"{name} airspeeds of the position error are {speeds} m/s; "
                    "expected each above the one before"
                )

    @property
    def indicated(self) -> tuple[float, ...]:
        """Indicated airspeeds at the points [m/s]."""
        return tuple(v - d for v, d in zip(self.calibrated, self.correction, strict=True))


@dataclass(frozen=True, slots=True)
class LegsResult:
    """What ground speeds on several tracks say about airspeed and wind.

    Parameters
    ----------
    true_airspeed : ndarray
        True airspeed, the mean over the sets of three legs [m/s]
    wind_speed : ndarray
        Speed of the mean wind vector [m/s]
    wind_direction : ndarray
        Direction the wind blows from, 0 to 2π, in the tracks' reference [rad]
    scatter : ndarray
        Standard deviation of airspeed between sets of three legs, NaN with fewer than two [m/s]
    """

    true_airspeed: FloatArray
    wind_speed: FloatArray
    wind_direction: FloatArray
    scatter: FloatArray


def _compression(mach: FloatArray) -> FloatArray:
    """Return impact pressure over static pressure, NaN unless 0 ≤ M ≤ 1."""
    mach = np.where((mach >= 0.0) & (mach <= 1.0), mach, np.nan)
    ratio: FloatArray = np.expm1(_ISENTROPIC_EXPONENT * np.log1p(_DYNAMIC_FACTOR * mach**2))
    return ratio


def _mach(compression: FloatArray) -> FloatArray:
    """Return Mach number from impact over static pressure; the inverse of `_compression`."""
    rise = np.expm1(np.log1p(compression) / _ISENTROPIC_EXPONENT)
    mach = np.sqrt(rise / _DYNAMIC_FACTOR)
    # A hair of rounding at Mach 1 must not turn a valid point into NaN on the way back.
    return np.where(mach <= 1.0 + 1.0e-12, np.minimum(mach, 1.0), np.nan)[()]


def impact_pressure(
    true_airspeed: npt.ArrayLike, pressure: npt.ArrayLike, *, temperature: npt.ArrayLike
) -> FloatArray:
    """Return the rise of pitot over static pressure in compressible flow.

    Parameters
    ----------
    true_airspeed : array_like
        True airspeed [m/s]
    pressure : array_like
        Static pressure [Pa]
    temperature : array_like
        Static temperature [K]

    Returns
    -------
    ndarray
        Impact pressure, NaN for a negative speed, beyond Mach 1 or in impossible air [Pa]

    Notes
    -----
    q_c = p [(1 + (γ−1)/2 M²)^(γ/(γ−1)) − 1] [1]_.

    References
    ----------
    .. [1] W. Gracey, NASA RP-1046, 1980, chapter III.
    """
    mach = np.asarray(true_airspeed, dtype=np.float64) / speed_of_sound(temperature)
    p = np.asarray(pressure, dtype=np.float64)
    return np.where(p > 0.0, p, np.nan) * _compression(mach)


def calibrated_airspeed(
    true_airspeed: npt.ArrayLike, pressure: npt.ArrayLike, *, temperature: npt.ArrayLike
) -> FloatArray:
    """Return the airspeed an instrument without error reads; the inverse of `true_airspeed`.

    Parameters
    ----------
    true_airspeed : array_like
        True airspeed [m/s]
    pressure : array_like
        Static pressure [Pa]
    temperature : array_like
        Static temperature [K]

    Returns
    -------
    ndarray
        Calibrated airspeed, NaN where it or the true airspeed is supersonic [m/s]

    Notes
    -----
    The speed that gives the same impact pressure at sea level on a standard day [1]_.

    References
    ----------
    .. [1] W. Gracey, NASA RP-1046, 1980, chapter III.
    """
    impact = impact_pressure(true_airspeed, pressure, temperature=temperature)
    return speed_of_sound(SEA_LEVEL_TEMPERATURE) * _mach(impact / SEA_LEVEL_PRESSURE)


def true_airspeed(
    calibrated_airspeed: npt.ArrayLike, pressure: npt.ArrayLike, *, temperature: npt.ArrayLike
) -> FloatArray:
    """Return the speed through the air at which an instrument without error reads an airspeed.

    Parameters
    ----------
    calibrated_airspeed : array_like
        Calibrated airspeed [m/s]
    pressure : array_like
        Static pressure [Pa]
    temperature : array_like
        Static temperature [K]

    Returns
    -------
    ndarray
        True airspeed, NaN where it or the calibrated airspeed is supersonic [m/s]

    Notes
    -----
    The formulas of `calibrated_airspeed` in the other order; exact.
    """
    impact = impact_pressure(
        calibrated_airspeed, SEA_LEVEL_PRESSURE, temperature=SEA_LEVEL_TEMPERATURE
    )
    p = np.asarray(pressure, dtype=np.float64)
    return speed_of_sound(temperature) * _mach(impact / np.where(p > 0.0, p, np.nan))


def indicated_airspeed(
    calibrated_airspeed: npt.ArrayLike, position_error: PositionError
) -> FloatArray:
    """Return what the airspeed indicator reads; the inverse of `calibrated_from_indicated`.

    Parameters
    ----------
    calibrated_airspeed : array_like
        Calibrated airspeed [m/s]
    position_error : PositionError
        Corrections of this installation [-]

    Returns
    -------
    ndarray
        Indicated airspeed, NaN outside the table [m/s]
    """
    calibrated = np.asarray(calibrated_airspeed, dtype=np.float64)
    return _interpolate(calibrated, position_error.calibrated, position_error.indicated)


def calibrated_from_indicated(
    indicated_airspeed: npt.ArrayLike, position_error: PositionError
) -> FloatArray:
    """Return calibrated airspeed from what the airspeed indicator reads.

    Parameters
    ----------
    indicated_airspeed : array_like
        Indicated airspeed [m/s]
    position_error : PositionError
        Corrections of this installation [-]

    Returns
    -------
    ndarray
        Calibrated airspeed, NaN outside the table [m/s]
    """
    indicated = np.asarray(indicated_airspeed, dtype=np.float64)
    return _interpolate(indicated, position_error.indicated, position_error.calibrated)


def _interpolate(
    at: FloatArray, points: tuple[float, ...], values: tuple[float, ...]
) -> FloatArray:
    """Return the values on straight lines between points, NaN outside them."""
    result: FloatArray = np.asarray(np.interp(at, points, values, left=np.nan, right=np.nan))
    return result[()]


def true_temperature(
    indicated_temperature: npt.ArrayLike,
    true_airspeed: npt.ArrayLike,
    *,
    recovery_factor: npt.ArrayLike,
) -> FloatArray:
    """Return the static temperature from what a probe in the airstream reads.

    Parameters
    ----------
    indicated_temperature : array_like
        Temperature read, gauge error removed [K]
    true_airspeed : array_like
        True airspeed [m/s]
    recovery_factor : array_like
        Share of the full rise that the probe feels, 0 to 1 [-]

    Returns
    -------
    ndarray
        Static temperature, NaN where no air so slow could read so cold [K]

    Notes
    -----
    T = T_i − r V²/(2 c_p), with c_p = γ R/(γ − 1) [1]_; r is 0.6 to 0.9 for simple probes.

    References
    ----------
    .. [1] W. Gracey, NASA RP-1046, 1980, chapter on true airspeed and temperature.
    """
    indicated = np.asarray(indicated_temperature, dtype=np.float64)
    true = indicated - _temperature_rise(true_airspeed, recovery_factor)
    return np.where(true > 0.0, true, np.nan)[()]


def indicated_temperature(
    true_temperature: npt.ArrayLike,
    true_airspeed: npt.ArrayLike,
    *,
    recovery_factor: npt.ArrayLike,
) -> FloatArray:
    """Return what a probe in the airstream reads; the inverse of `true_temperature`.

    Parameters
    ----------
    true_temperature : array_like
        Static temperature [K]
    true_airspeed : array_like
        True airspeed [m/s]
    recovery_factor : array_like
        Share of the full rise that the probe feels, 0 to 1 [-]

    Returns
    -------
    ndarray
        Temperature read, NaN for a temperature not above 0 K [K]
    """
    true = np.asarray(true_temperature, dtype=np.float64)
    true = np.where(true > 0.0, true, np.nan)
    return true + _temperature_rise(true_airspeed, recovery_factor)


def _temperature_rise(true_airspeed: npt.ArrayLike, recovery_factor: npt.ArrayLike) -> FloatArray:
    """Return by how much a probe reads above static temperature."""
    speed = np.asarray(true_airspeed, dtype=np.float64)
    recovery = np.asarray(recovery_factor, dtype=np.float64)
    recovery = np.where((recovery >= 0.0) & (recovery <= 1.0), recovery, np.nan)
    rise: FloatArray = recovery * speed**2 / (2.0 * _HEAT_CAPACITY)
    return rise


def airspeed_from_ground_legs(ground_speed: npt.ArrayLike, track: npt.ArrayLike) -> LegsResult:
    """Return true airspeed and wind from ground speeds on three or more tracks.

    All legs are flown at one true airspeed in one wind. Three legs give one exact answer; more give
    one for each set of three, whose mean is returned and whose scatter tells how steady they were.

    Parameters
    ----------
    ground_speed : array_like
        Ground speeds, legs along the last axis [m/s]
    track : array_like
        Tracks over the ground, true or magnetic, legs along the last axis [rad]

    Returns
    -------
    LegsResult
        Airspeed, wind and scatter, each without the last axis; NaN where no three tracks are spread
        enough to fix them [m/s]

    Raises
    ------
    DomainError
        There are fewer than three legs.

    Notes
    -----
    Each ground velocity is the wind plus a vector of length V, so the wind is the centre of the
    circle through the tips of three ground velocities and V its radius [1]_. A set is left out when
    it would magnify errors of the ground velocities more than twice (root sum square), as three
    tracks without wind do that all lie within about 112°.

    References
    ----------
    .. [1] D. Gray, "Using GPS to accurately establish true airspeed", 1998.
    """
    speed, direction = np.broadcast_arrays(
        np.asarray(ground_speed, dtype=np.float64), np.asarray(track, dtype=np.float64)
    )
    legs = speed.shape[-1] if speed.ndim else 1
    if legs < 3:
        raise DomainError(f"{legs} leg(s) given; expected three or more on spread tracks")
    speed = np.where((speed > 0.0) & np.isfinite(speed), speed, np.nan)
    direction = np.where(np.isfinite(direction), direction, np.nan)
    north, east = speed * np.cos(direction), speed * np.sin(direction)

    sets = np.array(list(combinations(range(legs), 3)))
    airspeed, wind_north, wind_east = _three_legs(north[..., sets], east[..., sets])

    usable = np.isfinite(airspeed)
    count = usable.sum(axis=-1)
    some = np.where(count > 0, count, np.nan)
    mean = np.where(usable, airspeed, 0.0).sum(axis=-1) / some
    mean_north = np.where(usable, wind_north, 0.0).sum(axis=-1) / some
    mean_east = np.where(usable, wind_east, 0.0).sum(axis=-1) / some
    squares = np.where(usable, (airspeed - mean[..., np.newaxis]) ** 2, 0.0).sum(axis=-1)
    scatter = np.sqrt(squares / np.where(count > 1, count - 1, np.nan))
    # The wind vector points where the air goes; a wind is named by where it comes from.
    from_direction = np.arctan2(-mean_east, -mean_north) % (2.0 * np.pi)
    return LegsResult(
        mean[()], np.hypot(mean_north, mean_east)[()], from_direction[()], scatter[()]
    )


def _three_legs(north: FloatArray, east: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return airspeed and wind to north and east from three ground velocities on the last axis."""
    # Differences to the first leg make the circle's equations linear in its centre:
    # 2 (G_i − G_0)·(W − G_0) = |G_i − G_0|².
    north0, east0 = north[..., 0], east[..., 0]
    n1, e1 = north[..., 1] - north0, east[..., 1] - east0
    n2, e2 = north[..., 2] - north0, east[..., 2] - east0
    twice_area = n1 * e2 - n2 * e1
    twice_area = np.where(twice_area != 0.0, twice_area, np.nan)
    half_square1, half_square2 = (n1**2 + e1**2) / 2.0, (n2**2 + e2**2) / 2.0
    centre_north = (half_square1 * e2 - half_square2 * e1) / twice_area
    centre_east = (n1 * half_square2 - n2 * half_square1) / twice_area

    # Moving leg i by δ changes the radius by w_i u_i·δ, u_i the unit vector from the centre to the
    # leg and w the weights with Σ w = 1, Σ w u = 0: the centre's barycentric coordinates.
    weight1 = (centre_north * e2 - centre_east * n2) / twice_area
    weight2 = (n1 * centre_east - e1 * centre_north) / twice_area
    magnification = np.sqrt((1.0 - weight1 - weight2) ** 2 + weight1**2 + weight2**2)
    fixed = magnification <= _LARGEST_MAGNIFICATION
    airspeed = np.where(fixed, np.hypot(centre_north, centre_east), np.nan)
    return airspeed, north0 + centre_north, east0 + centre_east
