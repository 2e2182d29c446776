"""Section data of the Clark Y family against published formulas."""

import numpy as np
import pytest

from cardgen.propeller.section import CLARK_Y_THICKNESS, clark_y, lift_drag


def lift_at(angle_deg, *, thickness=CLARK_Y_THICKNESS, mach=0.2, chord_to_radius=0.0):
    """Lift and drag coefficients at angles in degrees."""
    section = clark_y(thickness, mach, chord_to_radius=chord_to_radius)
    return lift_drag(section, np.radians(np.asarray(angle_deg, dtype=float)))


def test_clark_y_lift_line_is_the_wind_tunnels() -> None:
    """Two-dimensional tests (from memory): 0.095 to 0.11 per degree, zero lift near -5 degrees."""
    lift, _ = lift_at([-4.62, 0.0, 1.0])
    assert lift[0] == pytest.approx(0.0, abs=1e-3)
    assert 0.095 < lift[2] - lift[1] < 0.110
    assert 0.40 < lift[1] < 0.55


def test_greatest_lift_and_least_drag_are_those_of_a_thin_section() -> None:
    """From memory: greatest lift 1.1 to 1.6, least drag 0.005 to 0.009 at a million Reynolds."""
    lift, drag = lift_at(np.linspace(-4.0, 20.0, 200))
    assert 1.1 < lift.max() < 1.6
    assert 0.005 < drag.min() < 0.009
    assert drag[-1] > 0.15


def test_lift_slope_grows_by_prandtl_and_glauert() -> None:
    """1/sqrt(1 - M^2), below the critical Mach number."""
    slopes = [float(clark_y(0.09, mach).lift_slope) for mach in (0.0, 0.3, 0.5)]
    assert slopes[1] / slopes[0] == pytest.approx(1.0 / np.sqrt(1.0 - 0.09), rel=1e-4)
    assert slopes[2] / slopes[0] == pytest.approx(1.0 / np.sqrt(1.0 - 0.25), rel=2e-3)
    assert np.isfinite(clark_y(0.09, 1.1).lift_slope)


def test_drag_rises_by_twenty_counts_at_the_divergence_mach_number() -> None:
    """Lock's fourth power passes M_dd = k - t/c - c_l/10 with slope 0.1: 20 (0.1/80)^(4/3)."""
    angle = -1.0
    lift, _ = lift_at(angle, thickness=0.08, mach=0.8)
    divergence = 0.95 - 0.08 - 0.1 * float(lift)
    step = 1e-4
    drag = [
        float(lift_drag(clark_y(0.08, m), np.radians(np.array(angle)))[1])
        for m in (divergence - step, divergence + step)
    ]
    assert (drag[1] - drag[0]) / (2.0 * step) == pytest.approx(0.1, rel=0.12)


def test_thicker_sections_carry_more_camber_and_drag_until_they_turn_round() -> None:
    """Camber scales with thickness in the family; a round shank lifts little and drags much."""
    thin, thick, shank = (clark_y(t, 0.2) for t in (0.08, 0.14, 1.0))
    assert thick.zero_lift_angle < thin.zero_lift_angle < 0.0
    assert thick.minimum_drag > thin.minimum_drag
    assert shank.lift_slope < 0.1 * thin.lift_slope
    assert 0.4 < shank.minimum_drag < 0.7


def test_rotation_gives_stalled_lift_back_near_the_hub() -> None:
    """Snel's stall delay: more lift past the stall where the chord is long for the radius."""
    straight, _ = lift_at(16.0)
    turning, _ = lift_at(16.0, chord_to_radius=0.4)
    assert turning > straight + 0.1
    low, low_turning = lift_at(2.0)[0], lift_at(2.0, chord_to_radius=0.4)[0]
    assert low_turning == pytest.approx(float(low), rel=0.02)
