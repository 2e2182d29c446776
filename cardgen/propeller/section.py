"""Lift and drag of a blade section of the Clark Y family."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cardgen.records import dataclass

FloatArray = NDArray[np.float64]

# Round values from memory of the wind-tunnel literature. Those marked * are known only roughly and
# were set inside their plausible range with the tests of NACA TR 640 and TR 658 in view.

#: Thickness of the Clark Y itself over its chord. Thinner and thicker sections of the family
#: scale every ordinate with it, and so the camber.
CLARK_Y_THICKNESS = 0.117
#: * Thickness over chord at which half the camber's effect is lost: the thick sections near the
#: hub separate on their rounded backs and pass into the round shank.
CAMBER_LIMIT = 0.27
#: * Thickness over chord at which a section makes half the lift of a thin one, and about which its
#: drag turns into that of a round shank.
BLUNT_THICKNESS = 0.48
#: Drag coefficient of a round shank above its critical Reynolds number.
SHANK_DRAG = 0.6
#: * Lift coefficient of least drag, and how drag rises with the square of the lift beyond it.
LIFT_OF_LEAST_DRAG = 0.23
DRAG_RISE_WITH_LIFT = 0.012
#: * Lift coefficient deep in the stall, and the incidence at which it is reached to 70 % [rad].
STALLED_LIFT = 1.08
STALLED_LIFT_INCIDENCE = 0.15
#: Factor of (c/r)^2 by which rotation gives stalled lift back (Snel).
STALL_DELAY = 3.0
#: Korn's technology factor for conventional sections is 0.87 (Mason); near the end of a blade,
#: where the air escapes around the tip, shocks come later by about this much.
KORN_FACTOR = 0.87
TIP_RELIEF = 0.08
#: Mach number at which the Prandtl-Glauert rise of the lift slope levels off.
GLAUERT_LIMIT = 0.78

# Calibrated on the propeller tests of NACA TR 640 and TR 658 together, Reynolds number of the
# blades about a million, starting from the two-dimensional values named. They stand for what strip
# theory leaves out: radial flow in the boundary layer, and the curvature that the wake gives the
# flow along the chord, which takes away some camber.

#: Angle of zero lift of the Clark Y from its flat lower surface, from which blade angles are
#: measured [rad]; two-dimensional tests -5.0 to -5.8 degrees.
CLARK_Y_ZERO_LIFT_ANGLE = float(np.radians(-4.62))
#: Slope of the lift line over the thin-aerofoil value 2 pi; two-dimensional tests 0.90 to 1.0.
LIFT_SLOPE_SHARE = 0.929
#: Least drag coefficient of the Clark Y; two-dimensional tests 0.006 to 0.009.
MINIMUM_DRAG = 0.0082
#: Incidence from zero lift about which the sections stall [rad], and how suddenly [1/rad];
#: two-dimensional tests of thin sections 14 to 17 degrees.
STALL_INCIDENCE = float(np.radians(14.0))
STALL_SHARPNESS = 24.0
#: Drag of the stalled section over the squared sine of its incidence; 2 would be a flat plate.
STALLED_DRAG = 2.49


@dataclass(frozen=True, slots=True, eq=False)
class Section:
    """Blade sections at given Mach numbers: all that does not vary with incidence.

    Parameters
    ----------
    zero_lift_angle : ndarray
        Angle of zero lift from the flat lower surface [rad]
    lift_slope : ndarray
        Slope of the attached lift line at the local Mach number [1/rad]
    stall_incidence : ndarray
        Incidence from zero lift about which the section stalls [rad]
    stall_loss : ndarray
        Share of the lift lost by stall that rotation does not give back [-]
    minimum_drag : ndarray
        Least drag coefficient [-]
    critical_mach_excess : ndarray
        Local Mach number less the critical one at zero lift [-]
    """

    zero_lift_angle: FloatArray
    lift_slope: FloatArray
    stall_incidence: FloatArray
    stall_loss: FloatArray
    minimum_drag: FloatArray
    critical_mach_excess: FloatArray


def clark_y(
    thickness_to_chord: ArrayLike, mach: ArrayLike, *, chord_to_radius: ArrayLike = 0.0
) -> Section:
    """Sections of the Clark Y family.

    Parameters
    ----------
    thickness_to_chord : array_like
        Greatest thickness over chord; 1 is a round shank [-]
    mach : array_like
        Mach number of the flow past the section [-]
    chord_to_radius : array_like
        Chord over the radius at which the section turns; 0 for a section in straight flow [-]

    Returns
    -------
    Section
        Sections ready for `lift_drag` [-]

    Notes
    -----
    Lift slope by Prandtl and Glauert, ``1/sqrt(1 - M^2)``, levelling off at high subsonic Mach
    numbers; the lift at the stall does not rise with it. Critical Mach number by Korn's relation,
    ``M_dd = k - t/c - c_l/10``, and ``M_cr = M_dd - (0.1/80)^(1/3)``.

    References
    ----------
    W. H. Mason, "Analytic models for technology integration in aircraft design", AIAA 90-3262
    (1990): Korn's relation and Lock's drag rise.
    H. Snel, R. Houwink, J. Bosschers, "Sectional prediction of lift coefficients on rotating wind
    turbine blades in stall", ECN-C--93-052 (1994).
    """
    t = np.asarray(thickness_to_chord, dtype=np.float64)
    m = np.asarray(mach, dtype=np.float64)
    bluntness = (t / BLUNT_THICKNESS) ** 4
    effective = m / (1.0 + (m / GLAUERT_LIMIT) ** 12) ** (1.0 / 12.0)
    compression = np.sqrt(1.0 - effective**2)
    camber = t / (1.0 + (t / CAMBER_LIMIT) ** 2) / CLARK_Y_THICKNESS
    own = 1.0 + (CLARK_Y_THICKNESS / CAMBER_LIMIT) ** 2  # so that the Clark Y itself keeps its own
    round_share = np.square(bluntness / (1.0 + bluntness))
    streamlined = MINIMUM_DRAG * _form_factor(t) / _form_factor(np.asarray(CLARK_Y_THICKNESS))
    turning = np.square(np.asarray(chord_to_radius, dtype=np.float64))
    critical = KORN_FACTOR + TIP_RELIEF - t - (0.1 / 80.0) ** (1.0 / 3.0)
    return Section(
        zero_lift_angle=CLARK_Y_ZERO_LIFT_ANGLE * own * camber,
        lift_slope=2.0 * np.pi * LIFT_SLOPE_SHARE / (1.0 + bluntness) / compression,
        stall_incidence=STALL_INCIDENCE * compression,
        stall_loss=np.maximum(1.0 - STALL_DELAY * turning, 0.0),
        minimum_drag=(1.0 - round_share) * streamlined + round_share * SHANK_DRAG,
        critical_mach_excess=m - critical,
    )


def lift_drag(section: Section, angle_of_attack: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Lift and drag coefficients of sections.

    Parameters
    ----------
    section : Section
        Sections, from `clark_y` [-]
    angle_of_attack : ndarray
        Angle between the flow and the flat lower surface [rad]

    Returns
    -------
    lift, drag : ndarray
        Lift and drag coefficients [-]

    Notes
    -----
    A logistic share of the flow is stalled; the rest follows the straight lift line and a
    parabola of drag. Beyond the critical Mach number drag rises by ``20 (M - M_cr)^4`` (Lock).
    """
    incidence = angle_of_attack - section.zero_lift_angle
    square = incidence * incidence
    lift = section.lift_slope * incidence
    size = np.sqrt(square)
    stalled = 1.0 / (1.0 + np.exp(STALL_SHARPNESS * (section.stall_incidence - size)))
    deep = STALLED_LIFT * incidence / np.sqrt(square + STALLED_LIFT_INCIDENCE**2)
    lift += stalled * section.stall_loss * (deep - lift)
    # The square of the sine, to its second term: incidences stay under half a radian.
    square -= square * square * (1.0 / 3.0)
    drag = section.minimum_drag + STALLED_DRAG * stalled * square
    drag += DRAG_RISE_WITH_LIFT * np.square(lift - LIFT_OF_LEAST_DRAG)
    shock = np.maximum(section.critical_mach_excess + 0.1 * np.abs(lift), 0.0)
    shock *= shock
    drag += 20.0 * shock * shock
    return lift, drag


def _form_factor(thickness_to_chord: FloatArray) -> FloatArray:
    """Growth of a section's drag with thickness (S. F. Hoerner, Fluid-Dynamic Drag, chapter VI)."""
    t = thickness_to_chord
    factor: FloatArray = 1.0 + 2.0 * t + 60.0 * t**4
    return factor
