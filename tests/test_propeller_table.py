"""The table of coefficients against the direct solution, and what the governor finds in it."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cardgen.propeller import (
    Propeller,
    blade_5868_9,
    blade_from_activity_factor,
    coefficient_table,
    coefficients,
    effective_helix_angle,
    efficiency,
)

TWO_BLADES = Propeller(
    1.93, 2, blade_from_activity_factor(100.0), np.radians(12.0), np.radians(30.0)
)
THREE_BLADES = Propeller(2.03, 3, blade_5868_9(), np.radians(13.0), np.radians(35.0))
PROPELLERS = [TWO_BLADES, THREE_BLADES]


def working_range(count: int = 4000) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """J, blade angle and tip Mach number from climb to fast descent, drawn at random."""
    draw = np.random.default_rng(4).uniform
    j = draw(0.3, 1.3, count)
    return (
        j,
        effective_helix_angle(j) + np.radians(draw(-1.0, 10.0, count)),
        draw(0.45, 0.88, count),
    )


@pytest.mark.parametrize("propeller", PROPELLERS)
def test_table_agrees_with_the_direct_solution(propeller: Propeller) -> None:
    """Interpolation stays under 2e-4 rms and 1e-3 at worst, of C_P and of C_T (not under 0.02)."""
    j, beta, mach = working_range()
    direct = coefficients(propeller, j, blade_angle=beta, tip_mach=mach)
    table = coefficient_table(propeller).coefficients(j, blade_angle=beta, tip_mach=mach)
    power = table.power_coefficient / direct.power_coefficient - 1.0
    thrust = (table.thrust_coefficient - direct.thrust_coefficient) / np.maximum(
        direct.thrust_coefficient, 0.02
    )
    for error in (power, thrust):
        assert np.sqrt(np.mean(error**2)) < 2e-4
        assert np.abs(error).max() < 1e-3
    angle = np.degrees(table.angle_of_attack - direct.angle_of_attack)
    assert np.abs(angle).max() < 0.02


@pytest.mark.parametrize("propeller", PROPELLERS)
def test_governed_blade_absorbs_the_power_asked(propeller: Propeller) -> None:
    """Put back into the direct solution, the governed blade angle gives the C_P asked for."""
    j, beta, mach = working_range()
    direct = coefficients(propeller, j, blade_angle=beta, tip_mach=mach)
    table = coefficient_table(propeller)
    angle, thrust = table.governed(j, power_coefficient=direct.power_coefficient, tip_mach=mach)
    assert np.degrees(np.abs(angle - beta)).max() < 0.01
    error = (thrust - direct.thrust_coefficient) / np.maximum(direct.thrust_coefficient, 0.02)
    assert np.sqrt(np.mean(error**2)) < 2e-4
    assert np.abs(error).max() < 1e-3
    alone = table.governed_thrust(j, power_coefficient=direct.power_coefficient, tip_mach=mach)
    np.testing.assert_array_equal(alone, thrust)


@pytest.mark.parametrize("propeller", PROPELLERS)
def test_power_rises_with_blade_angle_up_to_the_stall(propeller: Propeller) -> None:
    """A governor that coarsens the blade always finds more torque."""
    j = np.linspace(0.3, 1.4, 12)[:, None, None]
    beta = effective_helix_angle(j) + np.radians(np.linspace(-2.0, 12.0, 60))[None, :, None]
    mach = np.linspace(0.45, 0.9, 4)
    direct = coefficients(propeller, j, blade_angle=beta, tip_mach=mach).power_coefficient
    table = coefficient_table(propeller).coefficients(j, blade_angle=beta, tip_mach=mach)
    assert np.diff(direct, axis=1).min() > 0.0
    assert np.diff(table.power_coefficient, axis=1).min() > 0.0


@pytest.mark.parametrize("propeller", PROPELLERS)
def test_governed_blade_angle_rises_with_power(propeller: Propeller) -> None:
    """More power at the same rpm and airspeed always means a coarser blade."""
    j, mach = np.linspace(0.3, 1.4, 23)[:, None, None], np.linspace(0.42, 0.93, 5)[:, None]
    power = np.linspace(0.02, 0.1, 100)
    angle, _ = coefficient_table(propeller).governed(j, power_coefficient=power, tip_mach=mach)
    assert np.isfinite(angle).all()
    assert np.diff(angle, axis=-1).min() > 0.0


def test_table_is_nan_outside_its_domain_in_every_variable() -> None:
    """No advance ratio, blade angle, power or Mach number is extrapolated."""
    table = coefficient_table(TWO_BLADES)
    inside = {"blade_angle": 0.35, "tip_mach": 0.7}
    assert np.isfinite(table.coefficients(0.8, **inside).power_coefficient)
    top = table.greatest_advance_ratio
    for j, change in (
        (0.19, {}),
        (top + 0.01, {"blade_angle": 0.7}),
        (0.8, {"blade_angle": 0.2}),
        (0.8, {"blade_angle": 0.7}),
        (0.8, {"tip_mach": 0.39}),
        (0.8, {"tip_mach": 0.96}),
        (np.nan, {}),
        (np.inf, {}),
        (0.8, {"tip_mach": np.inf}),
    ):
        result = table.coefficients(j, **{**inside, **change})
        assert np.isnan(result.power_coefficient)
        assert np.isnan(result.thrust_coefficient)
    governed = {"power_coefficient": 0.06, "tip_mach": 0.7}
    assert np.isfinite(table.governed(0.8, **governed)).all()
    for j, change in (
        (0.19, {}),
        (top + 0.01, {}),
        (0.8, {"power_coefficient": -0.01}),
        (0.8, {"power_coefficient": 0.25}),
        (0.8, {"tip_mach": 0.39}),
        (0.8, {"power_coefficient": np.nan}),
        (0.8, {"power_coefficient": np.inf}),
        (np.inf, {}),
        (1e200, {}),
    ):
        assert np.isnan(table.governed(j, **{**governed, **change})).all()


def test_scalar_equals_array_element() -> None:
    """One point alone is solved as it is in company, directly and from the table."""
    j, beta, mach = working_range(7)
    direct = coefficients(TWO_BLADES, j, blade_angle=beta, tip_mach=mach)
    table = coefficient_table(TWO_BLADES)
    _, thrust = table.governed(j, power_coefficient=direct.power_coefficient, tip_mach=mach)
    for k in range(7):
        one = coefficients(TWO_BLADES, j[k], blade_angle=beta[k], tip_mach=mach[k])
        assert one.power_coefficient.shape == ()
        # The root ends at a tolerance; which of the last steps is taken may differ.
        assert float(one.power_coefficient) == pytest.approx(
            float(direct.power_coefficient[k]), rel=1e-9
        )
        _, alone = table.governed(
            j[k], power_coefficient=direct.power_coefficient[k], tip_mach=mach[k]
        )
        assert float(alone) == thrust[k]


def test_arguments_broadcast() -> None:
    """A column of J and a row of Mach numbers make a table."""
    table = coefficient_table(TWO_BLADES)
    j, mach = np.array([[0.6], [0.8], [1.0]]), np.array([0.6, 0.7])
    angle, thrust = table.governed(j, power_coefficient=0.06, tip_mach=mach)
    assert angle.shape == thrust.shape == (3, 2)
    assert coefficients(TWO_BLADES, j, blade_angle=0.4, tip_mach=mach).power_coefficient.shape == (
        3,
        2,
    )


def test_table_is_shared_by_propellers_that_differ_only_in_what_it_does_not_depend_on() -> None:
    """Diameter, fine stop and installation factor are fitted or read; the table stays."""
    other = Propeller(
        2.1, 2, TWO_BLADES.blade, np.radians(14.0), TWO_BLADES.coarse_stop, installation_factor=0.9
    )
    assert coefficient_table(other) is coefficient_table(TWO_BLADES)


@settings(max_examples=40, deadline=None)
@given(
    blade_count=st.integers(2, 5),
    wanted=st.floats(70.0, 150.0),
    thickness_scale=st.floats(0.7, 1.3),
    coarse_stop_deg=st.floats(20.0, 45.0),
)
def test_every_likely_propeller_can_be_tabulated(
    blade_count: int, wanted: float, thickness_scale: float, coarse_stop_deg: float
) -> None:
    """No light-aircraft blade form leaves a hole in its table."""
    blade = blade_from_activity_factor(wanted, thickness_scale=thickness_scale)
    propeller = Propeller(1.9, blade_count, blade, 0.2, float(np.radians(coarse_stop_deg)))
    table = coefficient_table(propeller)
    angle, thrust = table.governed(0.7, power_coefficient=0.05, tip_mach=0.7)
    assert np.isfinite([angle, thrust]).all()


@given(j=st.floats(0.35, 1.3), incidence_deg=st.floats(-1.0, 10.0), mach=st.floats(0.42, 0.9))
@settings(max_examples=60, deadline=None)
def test_more_blades_absorb_more_power_and_none_beats_the_ideal(
    j: float, incidence_deg: float, mach: float
) -> None:
    """The third blade adds power, less than its share; no propeller beats the actuator disk."""
    beta = effective_helix_angle(j) + np.radians(incidence_deg)
    two, three = (
        coefficients(
            Propeller(1.9, n, TWO_BLADES.blade, 0.2, 0.6), j, blade_angle=beta, tip_mach=mach
        )
        for n in (2, 3)
    )
    ratio = float(three.power_coefficient / two.power_coefficient)
    assert 1.0 < ratio < 1.51
    for solved in (two, three):
        power, thrust = solved.power_coefficient, solved.thrust_coefficient
        if thrust > 0.0:
            loading = 8.0 * thrust / (np.pi * j**2)
            ideal = 2.0 / (1.0 + np.sqrt(1.0 + loading))
            eta = efficiency(j, power_coefficient=power, thrust_coefficient=thrust)
            assert 0.0 < eta < ideal


def test_direct_solution_refuses_what_it_cannot_mean() -> None:
    """A negative advance ratio or a NaN has no solution; static thrust has one."""
    at = {"blade_angle": 0.3, "tip_mach": 0.6}
    assert np.isnan(coefficients(TWO_BLADES, [-0.1, np.nan], **at).power_coefficient).all()
    static = coefficients(TWO_BLADES, 0.0, **at)
    assert static.thrust_coefficient > 0.08
    assert static.power_coefficient > 0.0
