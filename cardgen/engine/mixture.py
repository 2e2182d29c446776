"""Mixtures: fuel-air ratio, its effect on power, and exhaust-gas temperature."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = float | NDArray[np.float64]


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
