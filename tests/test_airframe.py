"""Airframe: the parabolic polar and the speeds that bound it."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cardgen.airframe import (
    Airframe,
    drag,
    drag_terms,
    dynamic_pressure_of_least_power,
    least_dynamic_pressure,
)

WING = Airframe(wing_area=16.0, wing_span=11.0, zero_lift_drag=0.025, oswald_factor=0.8)
WEIGHT = 11_000.0


def test_least_drag_is_that_of_the_best_glide() -> None:
    """L/D max = sqrt(pi A e / C_D0) / 2 (Anderson, Aircraft Performance and Design, eq. 5.30)."""
    aspect = WING.wing_span**2 / WING.wing_area
    best = 0.5 * np.sqrt(np.pi * aspect * 0.8 / 0.025)
    parasite, induced = drag_terms(WING, weight=WEIGHT)
    slow = np.sqrt(induced / parasite)  # both halves equal
    assert WEIGHT / drag(WING, slow, weight=WEIGHT) == pytest.approx(best, rel=1e-12)
    around = drag(WING, slow * np.array([0.99, 1.0, 1.01]), weight=WEIGHT)
    assert around.argmin() == 1


def test_drag_coefficient_is_the_parabolic_polar() -> None:
    """C_D = C_D0 + C_L² / (pi A e), Anderson section 2.9."""
    q = np.linspace(500.0, 6000.0, 12)
    lift = WEIGHT / (q * WING.wing_area)
    aspect = WING.wing_span**2 / WING.wing_area
    polar = 0.025 + lift**2 / (np.pi * aspect * 0.8)
    np.testing.assert_allclose(drag(WING, q, weight=WEIGHT), polar * q * WING.wing_area, rtol=1e-12)


def test_least_power_needs_three_times_as_much_drag_due_to_lift() -> None:
    """At the speed of least power drag due to lift is three times the rest (Anderson, 5.6.2)."""
    q = dynamic_pressure_of_least_power(WING, weight=WEIGHT)
    parasite, induced = drag_terms(WING, weight=WEIGHT)
    assert induced / q == pytest.approx(3.0 * parasite * q, rel=1e-12)
    around = q * np.array([0.99, 1.0, 1.01])
    power = drag(WING, around, weight=WEIGHT) * np.sqrt(around)
    assert power.argmin() == 1


def test_lift_ceiling_is_met_at_the_least_dynamic_pressure() -> None:
    """The model answers down to the stated lift coefficient."""
    q = least_dynamic_pressure(WING, weight=WEIGHT)
    assert WEIGHT / (q * WING.wing_area) == pytest.approx(WING.greatest_lift, rel=1e-12)


@given(
    q=st.floats(300.0, 8000.0),
    weight=st.floats(5e3, 2e4),
    more=st.floats(1.001, 1.5),
)
def test_weight_and_parasite_drag_only_ever_add(q: float, weight: float, more: float) -> None:
    """Drag rises with weight, with C_D0 and with a smaller Oswald factor."""
    here = drag(WING, q, weight=weight)
    assert drag(WING, q, weight=weight * more) > here
    dirty = Airframe(16.0, 11.0, 0.025 * more, oswald_factor=0.8)
    assert drag(dirty, q, weight=weight) > here
    worse = Airframe(16.0, 11.0, 0.025, oswald_factor=0.8 / more)
    assert drag(worse, q, weight=weight) > here


def test_scalar_equals_array_element() -> None:
    """Whatever is asked one by one must come out the same in one array."""
    q = np.array([800.0, 2000.0, 5000.0])
    together = drag(WING, q, weight=WEIGHT)
    assert [float(drag(WING, one, weight=WEIGHT)) for one in q] == together.tolist()
