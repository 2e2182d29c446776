"""What is fitted: physically named parameters, their priors, and how they enter an aircraft.

Parameters are grouped by the part of the aircraft they describe, so that the group of a replaced
part can return to its prior while the others keep what they learned.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Final, Literal

import numpy as np
import numpy.typing as npt

from cardgen.aircraft import Aircraft
from cardgen.engine import BREATHING_NODES, Mixture
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]
Part = Literal["engine", "mixtures", "propeller", "airframe"]
PARTS: Final[tuple[Part, ...]] = ("engine", "mixtures", "propeller", "airframe")

BREATHING_DEVIATION: Final = 0.10
"""Prior standard deviation of volumetric efficiency far from rated rpm, over that at it [-]."""

BREATHING_LENGTH: Final = 0.25
"""Change of rpm, over rated rpm, across which volumetric efficiency may turn freely [-]."""

FUEL_SCALE_PREFIX: Final = "fuel_scale:"


@dataclass(frozen=True, slots=True)
class Parameter:
    """One fitted number.

    Parameters
    ----------
    name : str
        Name in reports and fit files [-]
    part : str
        One of `PARTS` [-]
    deviation : float
        Standard deviation of the prior; its mean is what the profile states or implies [-]
    lower, upper : float
        Bounds beyond which the number has no physical meaning [-]
    """

    name: str
    part: Part
    deviation: float
    lower: float
    upper: float


_ENGINE: Final = (
    # Level, drag: spread between sisters of one type; common practice, no source.
    Parameter("level", "engine", 0.05, 0.7, 1.3),
    *(
        Parameter(f"breathing:{node:g}", "engine", BREATHING_DEVIATION, -0.5, 0.3)
        for node in BREATHING_NODES[:-1]
    ),
    Parameter("friction_scale", "engine", 0.15, 0.0, 1.5),
    Parameter("back_pressure_effect", "engine", 0.5, 0.0, 4.0),
    # Charts of makers range from the square root (0.5) to nearly the first power.
    Parameter("charge_temperature_exponent", "engine", 0.12, 0.0, 1.2),
    # Full throttle on the ground: from hardly below ambient to 28.0 inHg (6 %), which a chart of a
    # 210 hp engine shows (SFTE Reference Handbook 2013, figure 10.2a).
    Parameter("induction_loss", "engine", 0.02, 0.0, 0.15),
    Parameter("ram_recovery", "engine", 0.25, 0.0, 1.2),
)
# Published body factors run from 0.91 to 0.98.
_PROPELLER: Final = (Parameter("installation_factor", "propeller", 0.03, 0.75, 1.05),)
_AIRFRAME: Final = (
    Parameter("zero_lift_drag", "airframe", 0.006, 0.008, 0.08),
    Parameter("oswald_factor", "airframe", 0.10, 0.4, 1.1),
)
FUEL_SCALE_DEVIATION: Final = 0.08


def parameters(mixtures: Sequence[Mixture]) -> tuple[Parameter, ...]:
    """Everything that is fitted for an aircraft with these mixtures.

    Parameters
    ----------
    mixtures : sequence of Mixture
        The mixtures of the profile, in its order [-]

    Returns
    -------
    tuple of Parameter
        In the order of every vector of parameters [-]
    """
    scales = tuple(
        Parameter(FUEL_SCALE_PREFIX + mixture.name, "mixtures", FUEL_SCALE_DEVIATION, 0.5, 1.6)
        for mixture in mixtures
    )
    return (*_ENGINE, *scales, *_PROPELLER, *_AIRFRAME)


def prior_mean(aircraft: Aircraft, mixtures: Sequence[Mixture]) -> FloatArray:
    """Parameters of an aircraft as its profile builds it.

    Parameters
    ----------
    aircraft : Aircraft
        The aircraft, not fitted [-]
    mixtures : sequence of Mixture
        Its mixtures [-]

    Returns
    -------
    ndarray, shape (p,)
        Mean of the prior [-]
    """
    engine = aircraft.engine
    return np.array(
        [
            engine.level,
            *engine.breathing,
            engine.friction_scale,
            engine.back_pressure_effect,
            engine.charge_temperature_exponent,
            engine.induction.loss,
            engine.induction.ram_recovery,
            *(mixture.fuel_scale for mixture in mixtures),
            aircraft.propeller.installation_factor,
            aircraft.airframe.zero_lift_drag,
            aircraft.airframe.oswald_factor,
        ],
        dtype=np.float64,
    )


def prior_covariance(mixtures: Sequence[Mixture]) -> FloatArray:
    """Covariance of the prior.

    Parameters
    ----------
    mixtures : sequence of Mixture
        The mixtures of the profile [-]

    Returns
    -------
    ndarray, shape (p, p)
        Diagonal but for the nodes of volumetric efficiency [-]

    Notes
    -----
    Volumetric efficiency is a Gaussian process of rpm with a squared-exponential covariance, held
    at rated rpm, where the level of the engine stands for it.

    References
    ----------
    C. E. Rasmussen, C. K. I. Williams, Gaussian Processes for Machine Learning, MIT Press 2006,
    equations 2.16 and 2.19.
    """
    listed = parameters(mixtures)
    covariance = np.diag([parameter.deviation**2 for parameter in listed])
    nodes = np.array(BREATHING_NODES)
    kernel = BREATHING_DEVIATION**2 * np.exp(
        -0.5 * ((nodes[:, None] - nodes[None, :]) / BREATHING_LENGTH) ** 2
    )
    held = kernel[:-1, :-1] - np.outer(kernel[:-1, -1], kernel[-1, :-1]) / kernel[-1, -1]
    first = next(i for i, item in enumerate(listed) if item.name.startswith("breathing"))
    last = first + len(held)
    # A hair on the diagonal keeps the smooth kernel invertible.
    covariance[first:last, first:last] = (
        held + np.eye(len(held)) * (1e-3 * BREATHING_DEVIATION) ** 2
    )
    return covariance


def applied(
    aircraft: Aircraft, mixtures: Sequence[Mixture], *, values: FloatArray
) -> tuple[Aircraft, tuple[Mixture, ...]]:
    """Aircraft and mixtures with given parameters.

    Parameters
    ----------
    aircraft : Aircraft
        The aircraft as its profile builds it [-]
    mixtures : sequence of Mixture
        Its mixtures [-]
    values : ndarray, shape (p,) or (k, p)
        Parameters; k sets of them make an aircraft whose numbers have shape (k, 1) and broadcast
        against rows of points [-]

    Returns
    -------
    aircraft : Aircraft
        The aircraft with them [-]
    mixtures : tuple of Mixture
        The mixtures with their fuel scales [-]
    """
    columns = list(values if values.ndim == 1 else np.moveaxis(values[..., None], -2, 0))
    take = iter(columns if values.ndim > 1 else [float(value) for value in columns])
    engine = replace(
        aircraft.engine,
        level=next(take),
        breathing=tuple(next(take) for _ in BREATHING_NODES[:-1]),
        friction_scale=next(take),
        back_pressure_effect=next(take),
        charge_temperature_exponent=next(take),
        induction=replace(aircraft.engine.induction, loss=next(take), ram_recovery=next(take)),
    )
    scaled = tuple(replace(mixture, fuel_scale=next(take)) for mixture in mixtures)
    propeller = replace(aircraft.propeller, installation_factor=next(take))
    airframe = replace(aircraft.airframe, zero_lift_drag=next(take), oswald_factor=next(take))
    return Aircraft(engine, propeller, airframe), scaled
