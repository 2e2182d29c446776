"""Blade forms, activity factor, and blade angles quoted at other stations."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cardgen.propeller import (
    Blade,
    activity_factor,
    blade_5868_9,
    blade_angle_at_reference,
    blade_angle_at_station,
    blade_from_activity_factor,
)


def test_activity_factor_of_a_straight_blade_is_its_integral() -> None:
    """Constant b/D: 100000/16 * b/D * (1 - 0.15^4)/4, by hand."""
    blade = Blade((0.15, 0.5, 1.0), (0.06,) * 3, (0.1,) * 3, (0.2, 0.1, -0.05))
    assert activity_factor(blade) == pytest.approx(1e5 / 16.0 * 0.06 * (1.0 - 0.15**4) / 4.0)


def test_activity_factor_of_the_published_form_agrees_with_the_trapezium_rule() -> None:
    """The form's own rows, straight lines between them; the model rounds the corners off."""
    blade = blade_5868_9()
    x = np.linspace(0.15, 1.0, 100001)
    chord = np.interp(x, blade.radius_fraction, blade.chord_to_diameter)
    rough = 1e5 / 16.0 * np.trapezoid(chord * x**3, x)
    assert activity_factor(blade) == pytest.approx(rough, rel=0.005)


@given(wanted=st.floats(60.0, 180.0))
def test_scaled_form_has_the_activity_factor_asked(wanted: float) -> None:
    """Chord scales, twist and thickness ratio do not."""
    blade, form = blade_from_activity_factor(wanted), blade_5868_9()
    assert activity_factor(blade) == pytest.approx(wanted, rel=1e-12)
    assert blade.twist == form.twist
    assert blade.thickness_to_chord == form.thickness_to_chord


def test_blade_angle_falls_from_root_to_tip() -> None:
    """Common practice, no source: pitch falls from root to tip, as the tip moves faster."""
    twist = blade_from_activity_factor(100.0).twist_at(np.linspace(0.2, 1.0, 200))
    assert (np.diff(twist) < 0.0).all()


@given(angle=st.floats(0.1, 0.8), station=st.floats(0.25, 1.0))
def test_blade_angles_round_trip_between_stations(angle: float, station: float) -> None:
    """To another station and back is where one started."""
    blade = blade_5868_9()
    there = blade_angle_at_station(blade, angle, station=station)
    back = blade_angle_at_reference(blade, there, station=station)
    assert float(back) == pytest.approx(angle, abs=1e-14)


def test_blade_angle_quoted_inboard_is_finer_at_three_quarters() -> None:
    """30 in of a 76 in propeller is 0.789 R: coarser by under a degree at 0.75 R."""
    blade = blade_5868_9()
    at_reference = blade_angle_at_reference(blade, np.radians(14.0), station=30.0 / 38.0)
    assert 14.0 < np.degrees(at_reference) < 15.0
    assert np.isnan(blade_angle_at_reference(blade, 0.3, station=[0.1, 1.01])).all()
    assert float(blade_angle_at_reference(blade, 0.3, station=0.75)) == pytest.approx(0.3)


@pytest.mark.parametrize(
    "columns",
    [
        ((0.2, 1.0), (0.05, 0.02), (0.3, 0.1), (0.2, 0.0)),
        ((0.2, 0.6, 0.9), (0.05,) * 3, (0.1,) * 3, (0.0,) * 3),
        ((0.2, 0.2, 1.0), (0.05,) * 3, (0.1,) * 3, (0.0,) * 3),
        ((0.2, 0.6, 1.0), (0.05, 0.0, 0.05), (0.1,) * 3, (0.0,) * 3),
        ((0.2, 0.6, 1.0), (0.05,) * 2, (0.1,) * 3, (0.0,) * 3),
    ],
)
def test_form_that_is_no_blade_is_refused(columns: tuple) -> None:
    """Too few stations, not reaching the tip, repeated, without chord, or of unequal length."""
    with pytest.raises(ValueError, match=r"blade|chord"):
        Blade(*columns)
