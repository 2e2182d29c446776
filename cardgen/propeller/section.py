"""Lift and drag of a blade section of the Clark Y family."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

#: Clark Y itself: thickness 11.7 % of the chord; thinner and thicker sections of the family
#: scale every ordinate, and so the camber, with the thickness.
CLARK_Y_THICKNESS = 0.117
#: Angle of zero lift of the Clark Y from its flat lower surface, from which blade angles are
#: measured, two-dimensional, Reynolds number about a million [rad]. Wind-tunnel values from
#: -5.0 to -5.8 degrees.
CLARK_Y_ZERO_LIFT_ANGLE = np.radians(-5.4)
#: Slope of the lift line, share of the thin-aerofoil value 2 pi; measured 0.90 to 0.96.
LIFT_SLOPE_SHARE = 0.93
#: Lift coefficient about which the sections of the family stall.
STALL_ANGLE_FROM_ZERO_LIFT = np.radians(17.0)
STALL_SHARPNESS = 30.0
MINIMUM_DRAG = 0.0085
DRAG_RISE_WITH_LIFT = 0.010
LIFT_OF_LEAST_DRAG = 0.35
#: Technology factor of the Korn relation for conventional sections (Mason), 0.87, plus the
#: relief of a blade tip, where the flow escapes around the end.
KORN_FACTOR = 0.95


@dataclass(frozen=True, slots=True)
class Section:
    """Blade sections at given Mach numbers, with all that does not vary with incidence.

    Parameters
    ----------
    zero_lift_angle : ndarray
        Angle of zero lift from the flat lower surface [rad]
    lift_slope : ndarray
        Slope of the attached lift line at the local Mach number [1/rad]
    minimum_drag : ndarray
        Least drag coefficient [-]
    critical_mach_margin : ndarray
        Local Mach number less the critical one at zero lift [-]
    stall_delay : ndarray
        Share of the lift lost by stall that rotation gives back [-]
    """

    zero_lift_angle: FloatArray
    lift_slope: FloatArray
    minimum_drag: FloatArray
    critical_mach_margin: FloatArray
    stall_delay: FloatArray


def clark_y(
    thickness_to_chord: ArrayLike, mach: ArrayLike, *, chord_to_radius: ArrayLike = 0.0
) -> Section:
    """Sections of the Clark Y family.

    Parameters
    ----------
    thickness_to_chord : array_like
        Greatest thickness over chord; 1 is a circular shank [-]
    mach : array_like
        Mach number of the flow past the section [-]
    chord_to_radius : array_like
        Chord over the radius at which the section turns, for stall delay [-]

    Returns
    -------
    Section
        Sections ready for `lift_drag`.
    """
    t = np.asarray(thickness_to_chord, dtype=np.float64)
    m = np.asarray(mach, dtype=np.float64)
    lifting = 1.0 / (1.0 + (t / 0.45) ** 4)
    # Prandtl-Glauert, levelling off where shocks would undo it.
    effective = m / (1.0 + (m / 0.82) ** 16) ** (1.0 / 16.0)
    glauert = 1.0 / np.sqrt(1.0 - effective**2)
    slope = 2.0 * np.pi * LIFT_SLOPE_SHARE * lifting * glauert
    scale = np.minimum(t, 0.22) / CLARK_Y_THICKNESS
    zero = CLARK_Y_ZERO_LIFT_ANGLE * scale
    streamline = (
        MINIMUM_DRAG
        * (1.0 + 2.0 * t + 60.0 * t**4)
        / (1.0 + 2.0 * CLARK_Y_THICKNESS + 60.0 * CLARK_Y_THICKNESS**4)
    )
    shank = 0.6
    share = t**4 / (t**4 + 0.45**4)
    minimum = (1.0 - share) * streamline + share * shank
    critical = KORN_FACTOR - t - (0.1 / 80.0) ** (1.0 / 3.0)
    delay = np.minimum(3.0 * np.square(np.asarray(chord_to_radius, dtype=np.float64)), 0.9)
    return Section(
        zero_lift_angle=zero,
        lift_slope=slope,
        minimum_drag=minimum,
        critical_mach_margin=m - critical,
        stall_delay=delay + 0.0 * m,
    )


def lift_drag(section: Section, angle_of_attack: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Lift and drag coefficients.

    Parameters
    ----------
    section : Section
        From `clark_y`.
    angle_of_attack : ndarray
        Angle between the flow and the flat lower surface [rad]

    Returns
    -------
    lift, drag : ndarray
        Lift and drag coefficients [-]
    """
    z = angle_of_attack - section.zero_lift_angle
    attached = section.lift_slope * z
    stalled = 1.0 / (1.0 + np.exp(-STALL_SHARPNESS * (np.abs(z) - STALL_ANGLE_FROM_ZERO_LIFT)))
    sine = np.sin(z)
    plate = 2.2 * sine * np.sqrt(np.maximum(1.0 - sine * sine, 0.0))
    lift = attached + stalled * (1.0 - section.stall_delay) * (plate - attached)
    drag = (
        section.minimum_drag
        + DRAG_RISE_WITH_LIFT * np.square(lift - LIFT_OF_LEAST_DRAG)
        + stalled * 2.0 * sine * sine
    )
    over = np.maximum(section.critical_mach_margin + 0.1 * np.abs(lift), 0.0)
    over *= over
    drag += 20.0 * over * over
    return lift, drag
