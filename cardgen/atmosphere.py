"""Standard atmosphere to 20 km, density with humidity, and the altitudes that follow from them.

Altitudes are geopotential. Outside −5 km to 20 km, and for air that cannot be, results are NaN.

References
----------
.. [1] NOAA, NASA, USAF, "U.S. Standard Atmosphere, 1976", table 2 (constants), table 4 (layers),
   equations 23, 33a, 33b, 42 and 50.
.. [2] ISO 2533:1975, "Standard Atmosphere", which agrees within 1.3 parts per million.
.. [3] D. M. Murphy, T. Koop, "Review of the vapour pressures of ice and supercooled water for
   atmospheric applications", Q. J. R. Meteorol. Soc. 131, 2005, pp. 1539-1565, equation 10.
.. [4] SAE J607, "Small Spark Ignition Engine Test Code" (power at 29.92 inHg dry and 60 °F).
"""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.constants import (
    GAS_CONSTANT_DRY_AIR,
    GRAVITY,
    HEAT_CAPACITY_RATIO,
    HIGHEST_STANDARD_ALTITUDE,
    LAPSE_RATE,
    LOWEST_STANDARD_ALTITUDE,
    POWER_TEST_PRESSURE,
    POWER_TEST_TEMPERATURE,
    SEA_LEVEL_DENSITY,
    SEA_LEVEL_PRESSURE,
    SEA_LEVEL_TEMPERATURE,
    TROPOPAUSE,
    TROPOPAUSE_TEMPERATURE,
    WATER_VAPOUR_MOLAR_RATIO,
)

FloatArray = npt.NDArray[np.float64]

# p/p0 = (T/T0)^_PRESSURE_EXPONENT below the tropopause.
_PRESSURE_EXPONENT: Final = -GRAVITY / (GAS_CONSTANT_DRY_AIR * LAPSE_RATE)
_DENSITY_EXPONENT: Final = _PRESSURE_EXPONENT - 1.0
# p falls to 1/e over this height above the tropopause.
_SCALE_HEIGHT: Final = GAS_CONSTANT_DRY_AIR * TROPOPAUSE_TEMPERATURE / GRAVITY
_TROPOPAUSE_PRESSURE: Final = (
    SEA_LEVEL_PRESSURE * (TROPOPAUSE_TEMPERATURE / SEA_LEVEL_TEMPERATURE) ** _PRESSURE_EXPONENT
)
_TROPOPAUSE_DENSITY: Final = _TROPOPAUSE_PRESSURE / (GAS_CONSTANT_DRY_AIR * TROPOPAUSE_TEMPERATURE)

# Altitude by which a value may miss the ends of the range through rounding alone [m].
_ROUNDING: Final = 1.0e-6
# Newton steps of `pressure_altitude_at_density_altitude`. The residual is nearly straight, so five
# reach rounding from any start in range; the count is fixed so that an element's result does not
# depend on its neighbours.
_NEWTON_STEPS: Final = 8

# Temperatures between which the saturation formula is valid [K]; Murphy and Koop, equation 10.
_SATURATION_RANGE: Final = (123.0, 332.0)


def _in_range(altitude: FloatArray) -> FloatArray:
    """Return altitudes, NaN where they lie outside the standard atmosphere used here."""
    inside = (altitude >= LOWEST_STANDARD_ALTITUDE - _ROUNDING) & (
        altitude <= HIGHEST_STANDARD_ALTITUDE + _ROUNDING
    )
    return np.where(inside, altitude, np.nan)[()]


def _temperature(altitude: FloatArray) -> FloatArray:
    """Return standard temperature without looking at the range."""
    return SEA_LEVEL_TEMPERATURE + LAPSE_RATE * np.minimum(altitude, TROPOPAUSE)


def _log_pressure_ratio(altitude: FloatArray) -> FloatArray:
    """Return ln(p/p0) without looking at the range; both layers in one expression."""
    above_tropopause = np.maximum(altitude - TROPOPAUSE, 0.0)
    below = _PRESSURE_EXPONENT * np.log(_temperature(altitude) / SEA_LEVEL_TEMPERATURE)
    log_ratio: FloatArray = below - above_tropopause / _SCALE_HEIGHT
    return log_ratio


def standard_temperature(pressure_altitude: npt.ArrayLike) -> FloatArray:
    """Return the temperature of the standard atmosphere.

    Parameters
    ----------
    pressure_altitude : array_like
        Pressure altitude, geopotential [m]

    Returns
    -------
    ndarray
        Temperature, NaN outside −5 km to 20 km [K]

    Notes
    -----
    T = T0 + L H up to the tropopause, constant above [1]_.

    References
    ----------
    .. [1] U.S. Standard Atmosphere 1976, equation 23 and table 4.
    """
    return _temperature(_in_range(np.asarray(pressure_altitude, dtype=np.float64)))


def standard_pressure(pressure_altitude: npt.ArrayLike) -> FloatArray:
    """Return the pressure of the standard atmosphere; the inverse of `pressure_altitude`.

    Parameters
    ----------
    pressure_altitude : array_like
        Pressure altitude, geopotential [m]

    Returns
    -------
    ndarray
        Static pressure, NaN outside −5 km to 20 km [Pa]

    Notes
    -----
    p = p0 (T/T0)^(−g/(R L)) up to the tropopause, p = p_t exp(−g (H − H_t)/(R T_t)) above [1]_.

    References
    ----------
    .. [1] U.S. Standard Atmosphere 1976, equations 33a and 33b.
    """
    altitude = _in_range(np.asarray(pressure_altitude, dtype=np.float64))
    pressure: FloatArray = SEA_LEVEL_PRESSURE * np.exp(_log_pressure_ratio(altitude))
    return pressure


def pressure_altitude(pressure: npt.ArrayLike) -> FloatArray:
    """Return the altitude at which the standard atmosphere has a pressure.

    Parameters
    ----------
    pressure : array_like
        Static pressure [Pa]

    Returns
    -------
    ndarray
        Pressure altitude, NaN outside −5 km to 20 km [m]

    Notes
    -----
    The formulas of `standard_pressure` solved for H; exact in both layers.
    """
    p = np.asarray(pressure, dtype=np.float64)
    return _altitude(p / SEA_LEVEL_PRESSURE, p / _TROPOPAUSE_PRESSURE, _PRESSURE_EXPONENT)


def _altitude(ratio: FloatArray, tropopause_ratio: FloatArray, exponent: float) -> FloatArray:
    """Return the altitude of a pressure or density ratio to sea level and to the tropopause."""
    ratio = np.where(ratio > 0.0, ratio, np.nan)
    tropopause_ratio = np.where(tropopause_ratio > 0.0, tropopause_ratio, np.nan)
    below = (ratio ** (1.0 / exponent) - 1.0) * SEA_LEVEL_TEMPERATURE / LAPSE_RATE
    above = TROPOPAUSE - _SCALE_HEIGHT * np.log(tropopause_ratio)
    return _in_range(np.where(tropopause_ratio >= 1.0, below, above))


def altimeter_setting_to_pressure_altitude(
    indicated_altitude: npt.ArrayLike, altimeter_setting: npt.ArrayLike
) -> FloatArray:
    """Return the pressure altitude where an altimeter on a given setting reads an altitude.

    Parameters
    ----------
    indicated_altitude : array_like
        Altitude read, or field elevation where the setting is that of the field [m]
    altimeter_setting : array_like
        Pressure on the altimeter's subscale (QNH) [Pa]

    Returns
    -------
    ndarray
        Pressure altitude, NaN outside −5 km to 20 km [m]

    Notes
    -----
    Turning the subscale shifts the altimeter's standard scale by the pressure altitude of the
    setting [1]_, so H_p = H_indicated + H_p(setting).

    References
    ----------
    .. [1] R. J. List, "Smithsonian Meteorological Tables", 6th edition, 1951, section on the
       altimeter setting; the formula there is the same shift written in pressures.
    """
    indicated = np.asarray(indicated_altitude, dtype=np.float64)
    return _in_range(indicated + pressure_altitude(altimeter_setting))


def density(
    pressure: npt.ArrayLike, temperature: npt.ArrayLike, *, vapour_pressure: npt.ArrayLike = 0.0
) -> FloatArray:
    """Return the density of dry or moist air.

    Parameters
    ----------
    pressure : array_like
        Static pressure of the mixture [Pa]
    temperature : array_like
        Static temperature [K]
    vapour_pressure : array_like
        Partial pressure of water vapour, 0 for dry air [Pa]

    Returns
    -------
    ndarray
        Density, NaN where a temperature is not above 0 K or the vapour exceeds the mixture [kg/m³]

    Notes
    -----
    Dalton's law for two perfect gases: ρ = (p − (1 − ε) p_v)/(R T), ε the ratio of molar masses,
    so moist air is lighter than dry air at the same pressure and temperature.
    """
    p, t, p_v = np.broadcast_arrays(
        *(np.asarray(a, dtype=np.float64) for a in (pressure, temperature, vapour_pressure))
    )
    possible = (t > 0.0) & (p > 0.0) & (p_v >= 0.0) & (p_v <= p)
    t = np.where(possible, t, np.nan)
    dry_equivalent = p - (1.0 - WATER_VAPOUR_MOLAR_RATIO) * p_v
    rho: FloatArray = dry_equivalent / (GAS_CONSTANT_DRY_AIR * t)
    return rho


def density_altitude(
    pressure: npt.ArrayLike, temperature: npt.ArrayLike, *, vapour_pressure: npt.ArrayLike = 0.0
) -> FloatArray:
    """Return the altitude at which the standard atmosphere has the density of this air.

    Parameters
    ----------
    pressure : array_like
        Static pressure of the mixture [Pa]
    temperature : array_like
        Static temperature [K]
    vapour_pressure : array_like
        Partial pressure of water vapour, 0 for dry air [Pa]

    Returns
    -------
    ndarray
        Density altitude, NaN outside −5 km to 20 km [m]

    Notes
    -----
    ρ = ρ0 (T/T0)^(−g/(R L) − 1) up to the tropopause, exponential above, solved for H.
    """
    rho = density(pressure, temperature, vapour_pressure=vapour_pressure)
    return _altitude(rho / SEA_LEVEL_DENSITY, rho / _TROPOPAUSE_DENSITY, _DENSITY_EXPONENT)


def pressure_altitude_at_density_altitude(
    density_altitude: npt.ArrayLike, isa_deviation: npt.ArrayLike
) -> FloatArray:
    """Return the pressure altitude that has a density altitude on a non-standard day.

    Parameters
    ----------
    density_altitude : array_like
        Density altitude of dry air [m]
    isa_deviation : array_like
        Temperature above standard at the pressure altitude sought [K]

    Returns
    -------
    ndarray
        Pressure altitude, NaN where it or the density altitude is outside −5 km to 20 km [m]

    Notes
    -----
    ln p(H) − ln(T(H) + ΔT) = ln p(H_d) − ln T(H_d), solved for H by Newton's method. The left side
    falls with H for every ΔT above −0.8 T, and its slope jumps by a fifth at the tropopause, too
    little for the iteration to cycle.
    """
    target_altitude = _in_range(np.asarray(density_altitude, dtype=np.float64))
    deviation = np.asarray(isa_deviation, dtype=np.float64)
    target = _log_pressure_ratio(target_altitude) - np.log(_temperature(target_altitude))
    # Below this the density would rise with altitude: such air does not lie still.
    possible = deviation > -0.8 * TROPOPAUSE_TEMPERATURE
    deviation = np.where(possible, deviation, np.nan)
    altitude = target_altitude + 0.0 * deviation
    for _ in range(_NEWTON_STEPS):
        standard = _temperature(altitude)
        actual = standard + deviation
        residual = _log_pressure_ratio(altitude) - np.log(actual) - target
        lapse_rate = np.where(altitude < TROPOPAUSE, LAPSE_RATE, 0.0)
        slope = -GRAVITY / (GAS_CONSTANT_DRY_AIR * standard) - lapse_rate / actual
        altitude = altitude - residual / slope
    return _in_range(altitude)


def saturation_vapour_pressure(temperature: npt.ArrayLike) -> FloatArray:
    """Return the saturation pressure of water vapour over liquid water, supercooled below 0 °C.

    Relative humidity is reported over liquid water at all temperatures, so ice plays no part.

    Parameters
    ----------
    temperature : array_like
        Temperature [K]

    Returns
    -------
    ndarray
        Saturation vapour pressure, NaN outside 123 K to 332 K [Pa]

    Notes
    -----
    ln p = a(T) + tanh(0.0415 (T − 218.8)) b(T) [1]_, of pure vapour; air raises it by about 0.4 %
    at sea level, which is left out.

    References
    ----------
    .. [1] D. M. Murphy, T. Koop, Q. J. R. Meteorol. Soc. 131, 2005, pp. 1539-1565, equation 10.
    """
    t = np.asarray(temperature, dtype=np.float64)
    coldest, hottest = _SATURATION_RANGE
    t = np.where((t >= coldest) & (t <= hottest), t, np.nan)
    log_t = np.log(t)
    cold = 54.842763 - 6763.22 / t - 4.210 * log_t + 0.000367 * t
    warm = 53.878 - 1331.22 / t - 9.44523 * log_t + 0.014025 * t
    saturation: FloatArray = np.exp(cold + np.tanh(0.0415 * (t - 218.8)) * warm)
    return saturation


def vapour_pressure(relative_humidity: npt.ArrayLike, temperature: npt.ArrayLike) -> FloatArray:
    """Return the partial pressure of water vapour at a relative humidity.

    Parameters
    ----------
    relative_humidity : array_like
        Vapour pressure over its saturation value over liquid water, 0 to 1 [-]
    temperature : array_like
        Temperature [K]

    Returns
    -------
    ndarray
        Vapour pressure, NaN for a humidity outside 0 to 1 or a temperature outside 123 K to 332 K
        [Pa]
    """
    humidity = np.asarray(relative_humidity, dtype=np.float64)
    humidity = np.where((humidity >= 0.0) & (humidity <= 1.0), humidity, np.nan)
    return humidity * saturation_vapour_pressure(temperature)


def speed_of_sound(temperature: npt.ArrayLike) -> FloatArray:
    """Return the speed of sound in dry air.

    Parameters
    ----------
    temperature : array_like
        Static temperature [K]

    Returns
    -------
    ndarray
        Speed of sound, NaN for a temperature not above 0 K [m/s]

    Notes
    -----
    a = √(γ R T) [1]_. Water vapour raises it by at most 0.7 % at 35 °C, which is left out.

    References
    ----------
    .. [1] U.S. Standard Atmosphere 1976, equation 50.
    """
    t = np.asarray(temperature, dtype=np.float64)
    t = np.where(t > 0.0, t, np.nan)
    speed: FloatArray = np.sqrt(HEAT_CAPACITY_RATIO * GAS_CONSTANT_DRY_AIR * t)
    return speed


def power_correction_factor(
    pressure: npt.ArrayLike, temperature: npt.ArrayLike, *, vapour_pressure: npt.ArrayLike = 0.0
) -> FloatArray:
    """Return the factor from full-throttle power observed in this air to power in test-code air.

    Parameters
    ----------
    pressure : array_like
        Barometric pressure, of dry air and vapour together [Pa]
    temperature : array_like
        Temperature of the air drawn in [K]
    vapour_pressure : array_like
        Partial pressure of water vapour, which burns nothing [Pa]

    Returns
    -------
    ndarray
        Corrected over observed power, NaN where no dry air is left [-]

    Notes
    -----
    (p_s/(p − p_v)) √(T/T_s) with p_s = 29.92 inHg and T_s = 60 °F [1]_: full-throttle power goes
    with the dry air drawn in, which goes with its pressure and the root of its temperature.

    References
    ----------
    .. [1] SAE J607, "Small Spark Ignition Engine Test Code".
    """
    dry = np.asarray(pressure, dtype=np.float64) - np.asarray(vapour_pressure, dtype=np.float64)
    t = np.asarray(temperature, dtype=np.float64)
    dry = np.where(dry > 0.0, dry, np.nan)
    t = np.where(t > 0.0, t, np.nan)
    factor: FloatArray = POWER_TEST_PRESSURE / dry * np.sqrt(t / POWER_TEST_TEMPERATURE)
    return factor
