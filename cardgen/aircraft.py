"""An aircraft is an engine, a propeller and an airframe, flown in a condition at a setting."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cardgen.airframe import Airframe
from cardgen.engine import Engine, Mixture
from cardgen.propeller import Propeller

Floats = float | NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Aircraft:
    """Engine, propeller and airframe."""

    engine: Engine
    propeller: Propeller
    airframe: Airframe


@dataclass(frozen=True, slots=True)
class Condition:
    """The air and the load.

    Parameters
    ----------
    pressure : float or ndarray
        Static pressure [Pa]
    temperature : float or ndarray
        True static temperature [K]
    mass : float or ndarray
        Mass of the loaded aircraft [kg]
    vapour_pressure : float or ndarray
        Partial pressure of water vapour [Pa]
    """

    pressure: Floats
    temperature: Floats
    mass: Floats
    vapour_pressure: Floats = 0.0


@dataclass(frozen=True, slots=True)
class Setting:
    """What the pilot sets: true engine rpm, mixture, and power or manifold pressure.

    Exactly one of `power` [W] and `manifold_pressure` [Pa] is given; np.inf means full throttle.
    """

    rpm: Floats
    mixture: Mixture
    power: Floats | None = None
    manifold_pressure: Floats | None = None
