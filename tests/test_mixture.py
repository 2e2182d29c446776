"""Mixture: the facts of NACA Report 189, and exhaust temperature beside its peak."""

from __future__ import annotations

import numpy as np
import pytest
from aircraft_specimens import SIX, air
from hypothesis import given
from hypothesis import strategies as st

from cardgen.engine import (
    BEST_ECONOMY_FUEL_AIR_RATIO,
    BEST_POWER_FUEL_AIR_RATIO,
    Mixture,
    brake_power,
    exhaust_offset,
    fuel_air_ratio_at_exhaust_offset,
    fuel_flow,
    power_line,
    relative_power,
)

RATIOS = np.linspace(0.050, 0.110, 601)


def test_power_is_greatest_between_0075_and_0080() -> None:
    """NACA Report 189: greatest power at fuel-air ratios of 0.075 to 0.080."""
    best = RATIOS[np.argmax(relative_power(RATIOS))]
    assert 0.075 <= best <= 0.080
    assert relative_power(BEST_POWER_FUEL_AIR_RATIO) == pytest.approx(1.0, rel=1e-12)
    # Flat there: both ends of the range are within half a percent.
    assert relative_power(np.array([0.075, 0.080])).min() > 0.995


def test_best_economy_has_95_percent_of_the_power() -> None:
    """NACA Report 189: about 95 % of greatest power at 0.0625, where consumption is least."""
    assert relative_power(BEST_ECONOMY_FUEL_AIR_RATIO) == pytest.approx(0.95, abs=0.01)


def test_fuel_per_brake_power_is_least_near_00625() -> None:
    """NACA Report 189: least consumption near 0.0625, here at one throttle setting."""
    pressure, temperature = air(5000.0)
    line = power_line(
        SIX, 2300.0, mixture=Mixture("any", RATIOS), pressure=pressure, temperature=temperature
    )
    specific = fuel_flow(line, 75e3) / brake_power(line, 75e3)
    assert RATIOS[np.argmin(specific)] == pytest.approx(0.0625, abs=0.003)


def test_power_follows_fuel_when_lean_and_oxygen_when_rich() -> None:
    """Lean of the best, power per fuel hardly varies; rich of it, fuel is thrown away."""
    lean = np.linspace(0.051, 0.0625, 40)
    efficiency = relative_power(lean) / lean
    assert np.ptp(efficiency) / efficiency.mean() < 0.01
    rich = np.linspace(0.080, 0.110, 40)
    assert (np.diff(relative_power(rich) / rich) < 0.0).all()
    assert (np.diff(relative_power(rich)) < 0.0).all()


def test_no_ratio_makes_more_than_best_power() -> None:
    """The curve is relative to its own greatest value."""
    assert np.nanmax(relative_power(RATIOS)) <= 1.0 + 1e-12


def test_mixtures_off_the_curves_are_not_answered() -> None:
    """No extrapolation: NaN beyond the published range of either curve."""
    assert np.isnan(relative_power(np.array([0.0499, 0.1101, np.nan]))).all()
    assert np.isnan(exhaust_offset(np.array([0.0499, 0.1001, np.nan]))).all()
    assert np.isnan(fuel_air_ratio_at_exhaust_offset(np.array([-116.0, 236.0, np.nan]))).all()


@given(st.floats(0.050, 0.100))
def test_ratio_and_exhaust_offset_are_inverse(ratio: float) -> None:
    """A mixture given as degrees from peak is a fuel-air ratio, and back."""
    offset = float(exhaust_offset(ratio))
    assert fuel_air_ratio_at_exhaust_offset(offset) == pytest.approx(ratio, abs=2e-6)


@given(st.floats(-115.0, 235.0))
def test_exhaust_offset_and_ratio_are_inverse(offset: float) -> None:
    """The other way round, to a hundredth of a kelvin."""
    ratio = float(fuel_air_ratio_at_exhaust_offset(offset))
    assert exhaust_offset(ratio) == pytest.approx(offset, abs=0.01)


def test_exhaust_offset_rises_from_lean_through_peak_to_rich() -> None:
    """Signed distance: negative lean of peak, zero at it, positive rich."""
    offset = exhaust_offset(np.linspace(0.050, 0.100, 400))
    assert (np.diff(offset) > 0.0).all()
    peak = float(fuel_air_ratio_at_exhaust_offset(0.0))
    assert peak == pytest.approx(0.067, abs=0.001)  # close to stoichiometric


def test_best_power_lies_100_to_125_fahrenheit_rich_of_peak() -> None:
    """Common practice, no source."""
    assert 100.0 / 1.8 < exhaust_offset(BEST_POWER_FUEL_AIR_RATIO) < 125.0 / 1.8


def test_best_economy_lies_25_to_50_fahrenheit_lean_of_peak() -> None:
    """Common practice, no source."""
    assert -50.0 / 1.8 < exhaust_offset(BEST_ECONOMY_FUEL_AIR_RATIO) < -25.0 / 1.8
