"""The package against a second solver, written again from the documented formulas."""

from __future__ import annotations

import independent_solver as again
import numpy as np
import pytest
from aircraft_specimens import random_aircraft

from cardgen.propeller import coefficient_table, coefficients, effective_helix_angle


def test_two_solvers_agree_on_random_aircraft_and_points() -> None:
    """500 points of 25 aircraft, asked by power or by manifold pressure: within 0.1 % everywhere.

    Measured: airspeed 0.055 % at worst and 0.016 % rms, which is the package's quadrature of 16
    stations (0.04 % of C_P) and its table; power and fuel flow 0.002 %, through ram alone.
    """
    compared = again.compare(25, 20)
    assert compared.power.size == 500
    for quantity, (worst, rms) in again.figures(compared).items():
        assert worst < 1e-3, quantity
        assert rms < 3e-4, quantity
    assert np.degrees(np.abs(compared.blade_angle).max()) < 0.02


@pytest.mark.parametrize("seed", range(6))
def test_difference_of_the_solvers_is_quadrature_and_table(seed: int) -> None:
    """Stations cost up to 0.05 % of C_P; interpolation in the table less than 0.02 % of C_T."""
    propeller = random_aircraft(seed).propeller
    strip = again.StripAgain(propeller)
    draw = np.random.default_rng(seed).uniform
    j, mach = draw(0.5, 1.1, 30), draw(0.55, 0.8, 30)
    beta = effective_helix_angle(j) + np.radians(draw(1.5, 6.0, 30))
    inflow = [0.0] * again.STATIONS
    power, thrust = np.array(
        [strip.coefficients(*one, inflow) for one in zip(j, beta, mach, strict=True)]
    ).T
    direct = coefficients(propeller, j, blade_angle=beta, tip_mach=mach)
    np.testing.assert_allclose(direct.power_coefficient, power, rtol=5e-4)
    np.testing.assert_allclose(direct.thrust_coefficient, thrust, rtol=3e-4)
    table = coefficient_table(propeller)
    _, governed = table.governed(j, power_coefficient=direct.power_coefficient, tip_mach=mach)
    np.testing.assert_allclose(governed, direct.thrust_coefficient, rtol=2e-4)
