"""What the governor does, where it cannot, and the propeller figures that pilots know."""

from __future__ import annotations

from collections.abc import Callable
from enum import IntEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cardgen.propeller.blade import REFERENCE_STATION, Propeller
from cardgen.propeller.table import (
    GREATEST_TIP_MACH,
    LEAST_TIP_MACH,
    coefficient_table,
    effective_helix_angle,
    table_advance_ratios,
)
from cardgen.roots import find_root

FloatArray = NDArray[np.float64]

#: Share by which a bracket stays inside the table, so that rounding cannot leave it.
_INSIDE = 1e-9


class Governing(IntEnum):
    """Where the blades stand."""

    FINE_STOP = -1  # the engine cannot turn the propeller so fast: rpm sags
    HOLDING = 0  # the governor holds the rpm asked
    COARSE_STOP = 1  # the propeller cannot absorb the power: rpm climbs
    UNKNOWN = 2  # outside the table


def governing(propeller: Propeller, blade_angle: ArrayLike) -> NDArray[np.int8]:
    """Whether the hub allows a blade angle.

    Parameters
    ----------
    propeller : Propeller
        The propeller [-]
    blade_angle : array_like
        Blade angle at 0.75 R that absorbs the power at the rpm asked [rad]

    Returns
    -------
    ndarray of int8
        Values of `Governing` [-]
    """
    angle = np.asarray(blade_angle, dtype=np.float64)
    state = np.where(angle < propeller.fine_stop, Governing.FINE_STOP, Governing.HOLDING)
    state = np.where(angle > propeller.coarse_stop, Governing.COARSE_STOP, state)
    return np.where(np.isnan(angle), Governing.UNKNOWN, state).astype(np.int8)


def ungoverned_rpm(
    propeller: Propeller,
    power: Callable[[FloatArray], FloatArray],
    *,
    blade_angle: ArrayLike,
    true_airspeed: ArrayLike,
    density: ArrayLike,
    speed_of_sound: ArrayLike,
    rpm_range: tuple[float, float] = (0.0, np.inf),
) -> FloatArray:
    """Propeller speed to which a fixed blade angle lets the engine settle.

    Parameters
    ----------
    propeller : Propeller
        The propeller [-]
    power : callable
        Shaft power at given propeller rpm, called with arrays of the broadcast shape of the other
        arguments [W]
    blade_angle : array_like
        Blade angle at 0.75 R, usually that of a stop [rad]
    true_airspeed : array_like
        True airspeed, held constant [m/s]
    density : array_like
        Air density [kg/m^3]
    speed_of_sound : array_like
        Speed of sound [m/s]
    rpm_range : tuple of float
        Propeller speeds for which `power` has an answer [rpm]

    Returns
    -------
    ndarray
        Propeller speed at which power given and absorbed agree; NaN where there is none inside
        the propeller's table and `rpm_range` [rpm]

    Notes
    -----
    Root of ``C_P(J(n), beta, M(n)) rho n^3 D^5 - P(n)``, over the rpm for which the table holds.
    """
    angle, speed, rho, sound = np.broadcast_arrays(
        *(
            np.asarray(value, dtype=np.float64)
            for value in (blade_angle, true_airspeed, density, speed_of_sound)
        )
    )
    table = coefficient_table(propeller)
    diameter = propeller.diameter

    def surplus(rpm: FloatArray) -> FloatArray:
        turns = rpm / 60.0
        absorbed = table.coefficients(
            speed / (turns * diameter),
            blade_angle=angle,
            tip_mach=np.pi * turns * diameter / sound,
        ).power_coefficient
        surplus_power: FloatArray = absorbed * rho * turns**3 * diameter**5 - power(rpm)
        return surplus_power

    least_j, greatest_j = table_advance_ratios(table, angle)
    per_mach = 60.0 * sound / (np.pi * diameter)
    with np.errstate(divide="ignore"):
        slowest = 60.0 * speed / (greatest_j * diameter)
    lower = np.maximum(slowest, LEAST_TIP_MACH * per_mach)
    upper = np.minimum(60.0 * speed / (least_j * diameter), GREATEST_TIP_MACH * per_mach)
    lower, upper = np.maximum(lower, rpm_range[0]), np.minimum(upper, rpm_range[1])
    empty = ~(lower < upper)
    lower, upper = lower * (1.0 + _INSIDE), upper * (1.0 - _INSIDE)
    rpm = find_root(surplus, lower, upper, tolerance=1e-6)
    return np.where(empty, np.nan, rpm)


def slip(advance_ratio: ArrayLike, *, blade_angle: ArrayLike) -> FloatArray:
    """Share by which the propeller advances less per turn than its geometric pitch.

    Parameters
    ----------
    advance_ratio : array_like
        J = V / (n D): the effective pitch over the diameter [-]
    blade_angle : array_like
        Blade angle at 0.75 R [rad]

    Returns
    -------
    ndarray
        ``1 - J / (0.75 pi tan(beta))`` [-]
    """
    pitch = REFERENCE_STATION * np.pi * np.tan(np.asarray(blade_angle, dtype=np.float64))
    return 1.0 - np.asarray(advance_ratio, dtype=np.float64) / pitch


def blade_angle_of_attack(advance_ratio: ArrayLike, *, blade_angle: ArrayLike) -> FloatArray:
    """Angle between the blade and its helical path through still air, at 0.75 R.

    Parameters
    ----------
    advance_ratio : array_like
        J = V / (n D) [-]
    blade_angle : array_like
        Blade angle at 0.75 R [rad]

    Returns
    -------
    ndarray
        Blade angle less ``arctan(J / (0.75 pi))`` [rad]

    Notes
    -----
    The angle of pilots' textbooks, from the flat side of the blade and without induced flow, so
    greater than what the section feels (`Coefficients.angle_of_attack`).
    """
    return np.asarray(blade_angle, dtype=np.float64) - effective_helix_angle(advance_ratio)


def efficiency(
    advance_ratio: ArrayLike,
    *,
    power_coefficient: ArrayLike,
    thrust_coefficient: ArrayLike,
    installation_factor: ArrayLike = 1.0,
) -> FloatArray:
    """Thrust power over shaft power.

    Parameters
    ----------
    advance_ratio : array_like
        J = V / (n D) [-]
    power_coefficient, thrust_coefficient : array_like
        C_P and isolated C_T [-]
    installation_factor : array_like
        Share of the isolated thrust that is left when installed [-]

    Returns
    -------
    ndarray
        ``factor J C_T / C_P``, NaN where no power is absorbed [-]
    """
    power = np.asarray(power_coefficient, dtype=np.float64)
    thrust = np.asarray(thrust_coefficient, dtype=np.float64)
    j = np.asarray(advance_ratio, dtype=np.float64)
    absorbing = np.where(power > 0.0, power, np.nan)
    return np.asarray(installation_factor, dtype=np.float64) * j * thrust / absorbing
