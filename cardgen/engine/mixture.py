"""Mixture: fuel-air ratio, the power it gives, and where it sits beside peak exhaust temperature.

The curves are properties of gasoline and air, not of one engine: what an engine adds to them
(uneven distribution between cylinders, a fuel-flow gauge that is off) is the fitted `fuel_scale`.

References
----------
.. [1] S. W. Sparrow, "Relation of Fuel-Air Ratio to Engine Performance", NACA Report 189, 1924:
   power is greatest at fuel-air ratios of 0.075-0.080; consumption is least near 0.0625, with
   about 95 % of that power.
.. [2] C. F. Taylor, The Internal Combustion Engine in Theory and Practice, vol. 1, chapter 12,
   and J. B. Heywood, Internal Combustion Engine Fundamentals, section 15.3: efficiency hardly
   changes lean of the best, so that power follows fuel; rich of best power, oxygen limits.
"""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.curves import MonotoneCurve
from cardgen.records import dataclass

Floats = float | npt.NDArray[np.float64]
FloatArray = npt.NDArray[np.float64]

STOICHIOMETRIC_FUEL_AIR_RATIO: Final = 0.067
"""Fuel-air ratio that leaves neither fuel nor oxygen [-]; [1]_."""

BEST_POWER_FUEL_AIR_RATIO: Final = 0.0775
"""Fuel-air ratio of greatest power, the middle of the published 0.075-0.080 [-]; [1]_."""

BEST_ECONOMY_FUEL_AIR_RATIO: Final = 0.0625
"""Fuel-air ratio of least consumption per power [-]; [1]_."""

# Indicated power at fixed air flow, over that at best power. 0.0625, 0.075-0.080: [1]_. Rich and
# lean ends: shape of [1]_ and [2]_ from memory, lean of 0.058 drawn at constant efficiency.
_POWER: Final = MonotoneCurve(
    (0.050, 0.054, 0.058, 0.0625, 0.067, 0.072, 0.0775, 0.083, 0.090, 0.100, 0.110),
    (0.760, 0.823, 0.885, 0.950, 0.981, 0.996, 1.000, 0.996, 0.983, 0.950, 0.905),
)

# Exhaust gas below its peak [K] against fuel-air ratio. Common practice, no source: peak close to
# stoichiometric; best power some 100-125 °F rich of it, least consumption some 25-50 °F lean.
_PEAK: Final = 0.0665
_RICH_OFFSET: Final = MonotoneCurve(
    (_PEAK, 0.069, 0.0725, 0.0775, 0.083, 0.090, 0.100), (0.0, 8.0, 30.0, 65.0, 105.0, 158.0, 235.0)
)
_LEAN_OFFSET: Final = MonotoneCurve(
    (0.050, 0.054, 0.058, 0.0625, 0.0648, _PEAK), (115.0, 80.0, 46.0, 16.0, 4.5, 0.0)
)


@dataclass(frozen=True, slots=True)
class Mixture:
    """A named way of leaning.

    Parameters
    ----------
    name : str
        Name used in the profile and on the command line [-]
    fuel_air_ratio : float or ndarray
        Mass of fuel per mass of dry air [-]
    basis : str
        How the pilot sets it, as printed on the card [-]
    fuel_scale : float or ndarray
        Fitted ratio of the fuel flow seen to the one the fuel-air ratio gives [-]
    """

    name: str
    fuel_air_ratio: Floats
    basis: str = ""
    fuel_scale: Floats = 1.0


def relative_power(fuel_air_ratio: npt.ArrayLike) -> FloatArray:
    """Indicated power at a fuel-air ratio over that at best power, for the same air flow.

    Parameters
    ----------
    fuel_air_ratio : array_like
        Mass of fuel per mass of dry air, 0.050 to 0.110 [-]

    Returns
    -------
    ndarray
        Relative indicated power, NaN outside the range [-]

    References
    ----------
    S. W. Sparrow, "Relation of Fuel-Air Ratio to Engine Performance", NACA Report 189, 1924.
    """
    return _POWER(fuel_air_ratio)


def exhaust_offset(fuel_air_ratio: npt.ArrayLike) -> FloatArray:
    """Signed distance of the exhaust-gas temperature from its peak.

    Parameters
    ----------
    fuel_air_ratio : array_like
        Mass of fuel per mass of dry air, 0.050 to 0.100 [-]

    Returns
    -------
    ndarray
        Positive rich of peak, negative lean of peak, NaN outside the range [K]
    """
    ratio = np.asarray(fuel_air_ratio, dtype=np.float64)
    return np.where(ratio >= _PEAK, _RICH_OFFSET(ratio), -_LEAN_OFFSET(ratio))


def fuel_air_ratio_at_exhaust_offset(offset: npt.ArrayLike) -> FloatArray:
    """Fuel-air ratio at a distance of the exhaust-gas temperature from its peak.

    Parameters
    ----------
    offset : array_like
        Positive rich of peak, negative lean of peak [K]

    Returns
    -------
    ndarray
        Mass of fuel per mass of dry air, NaN beyond 235 K rich and 115 K lean of peak [-]

    Notes
    -----
    Inverse of `exhaust_offset`, by bisection of each monotone branch to rounding.
    """
    wanted = np.asarray(offset, dtype=np.float64)
    rich = wanted >= 0.0
    low = np.where(rich, _PEAK, _LEAN_OFFSET.x[0])
    high = np.where(rich, _RICH_OFFSET.x[-1], _PEAK)
    inside = (wanted <= _RICH_OFFSET.y[-1]) & (wanted >= -_LEAN_OFFSET.y[0])
    for _ in range(50):
        middle = 0.5 * (low + high)
        above = exhaust_offset(middle) > wanted
        low, high = np.where(above, low, middle), np.where(above, middle, high)
    return np.where(inside, 0.5 * (low + high), np.nan)
