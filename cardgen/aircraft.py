"""An aircraft is an engine, a propeller and an airframe; it flies in a condition at a setting."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from cardgen.airframe import Airframe
from cardgen.engine import Engine, Mixture
from cardgen.propeller import Propeller
from cardgen.records import dataclass

Floats = float | npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Aircraft:
    """Engine, propeller and airframe.

    Parameters
    ----------
    engine : Engine
        The engine [-]
    propeller : Propeller
        The propeller [-]
    airframe : Airframe
        The airframe [-]
    """

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
    """What the pilot sets, in true values.

    Parameters
    ----------
    rpm : float or ndarray
        Crankshaft speed [rpm]
    mixture : Mixture
        The mixture [-]
    power : float or ndarray, optional
        Brake power asked; the throttle is where it gives it, or wide open [W]
    manifold_pressure : float or ndarray, optional
        Manifold pressure asked, infinite for full throttle [Pa]

    Notes
    -----
    At least one of `power` and `manifold_pressure` is given; with both, manifold pressure counts
    where power is NaN, so that one array can hold rows of either kind.
    """

    rpm: Floats
    mixture: Mixture
    power: Floats | None = None
    manifold_pressure: Floats | None = None

    def __post_init__(self) -> None:
        """Refuse a setting that asks for nothing."""
        if self.power is None and self.manifold_pressure is None:
            raise ValueError("a setting asks for power or for manifold pressure")
