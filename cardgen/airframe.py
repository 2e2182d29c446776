"""Airframe: drag in level flight, and the speeds that bound it."""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.records import dataclass

Floats = float | npt.NDArray[np.float64]
FloatArray = npt.NDArray[np.float64]

RETRACTABLE_ZERO_LIFT_DRAG: Final = 0.022
"""C_D0 of a clean single with retractable gear [-]; common practice, no source."""

FIXED_GEAR_ZERO_LIFT_DRAG: Final = 0.028
"""C_D0 of a single with faired fixed gear [-]; common practice, no source."""


@dataclass(frozen=True, slots=True)
class Airframe:
    """Wing and drag polar.

    Parameters
    ----------
    wing_area : float
        Reference area of the wing [m²]
    wing_span : float
        Span of the wing [m]
    zero_lift_drag : float or ndarray
        Drag coefficient C_D0 without lift [-]
    oswald_factor : float or ndarray
        Span efficiency e of the drag due to lift [-]
    greatest_lift : float
        Lift coefficient beyond which the model does not answer [-]
    """

    wing_area: float
    wing_span: float
    zero_lift_drag: Floats
    oswald_factor: Floats = 0.75
    greatest_lift: float = 1.2


def drag(airframe: Airframe, dynamic_pressure: npt.ArrayLike, *, weight: Floats) -> FloatArray:
    """Drag in level flight.

    Parameters
    ----------
    airframe : Airframe
        The airframe [-]
    dynamic_pressure : array_like
        Dynamic pressure q [Pa]
    weight : float or ndarray
        Weight, equal to lift [N]

    Returns
    -------
    ndarray
        Drag [N]

    Notes
    -----
    ``q S C_D0 + W² / (q π b² e)``, the parabolic polar; it holds below the rise of drag near the
    stall, so that `least_dynamic_pressure` bounds it.

    References
    ----------
    J. D. Anderson, Aircraft Performance and Design, McGraw-Hill 1999, sections 2.9 and 5.3.
    """
    parasite, induced = drag_terms(airframe, weight=weight)
    q = np.asarray(dynamic_pressure, dtype=np.float64)
    return np.asarray(parasite * q + induced / q)


def drag_terms(airframe: Airframe, *, weight: Floats) -> tuple[FloatArray, FloatArray]:
    """Coefficients a and b of ``drag = a q + b / q``.

    Parameters
    ----------
    airframe : Airframe
        The airframe [-]
    weight : float or ndarray
        Weight, equal to lift [N]

    Returns
    -------
    parasite : ndarray
        Drag area S C_D0 [m²]
    induced : ndarray
        W² / (π b² e) [N²/m²]
    """
    span = airframe.wing_span
    parasite = airframe.wing_area * airframe.zero_lift_drag
    induced = np.asarray(weight) ** 2 / (np.pi * span * span * airframe.oswald_factor)
    return np.asarray(parasite), np.asarray(induced)


def least_dynamic_pressure(airframe: Airframe, *, weight: Floats) -> FloatArray:
    """Dynamic pressure at the lift ceiling.

    Parameters
    ----------
    airframe : Airframe
        The airframe [-]
    weight : float or ndarray
        Weight, equal to lift [N]

    Returns
    -------
    ndarray
        Dynamic pressure [Pa]
    """
    return np.asarray(weight / (airframe.wing_area * airframe.greatest_lift))


def dynamic_pressure_of_least_power(airframe: Airframe, *, weight: Floats) -> FloatArray:
    """Dynamic pressure at which level flight asks for least power.

    Parameters
    ----------
    airframe : Airframe
        The airframe [-]
    weight : float or ndarray
        Weight, equal to lift [N]

    Returns
    -------
    ndarray
        Dynamic pressure [Pa]

    Notes
    -----
    ``sqrt(b / (3 a))`` of the drag ``a q + b / q``: there drag due to lift is three times the rest.
    """
    parasite, induced = drag_terms(airframe, weight=weight)
    return np.asarray(np.sqrt(induced / (3.0 * parasite)))
