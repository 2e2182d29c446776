"""What must hold at any cruise point: more of this never gives less of that."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from aircraft_specimens import AIRCRAFT, MASS, TOURER, condition
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from cardgen.aircraft import Aircraft, Setting
from cardgen.cruise import CruisePoint, CruiseStatus, solve_cruise
from cardgen.engine import Mixture

names = st.sampled_from(sorted(AIRCRAFT))
altitudes = st.floats(0.0, 12_000.0)
shares_of_rpm = st.floats(0.72, 0.98)
shares_of_power = st.floats(0.5, 0.8)
pressures = st.floats(60e3, 95e3)
ratios = st.floats(0.058, 0.0775)


def solve(
    name: str,
    *,
    altitude: float = 5000.0,
    deviation: float = 0.0,
    share: float = 0.88,
    ratio: float = 0.0775,
    mass: float | None = None,
    aircraft: Aircraft | None = None,
    **asked: float,
) -> CruisePoint:
    """Solve one point of a named aircraft."""
    flown = aircraft or AIRCRAFT[name]
    where = condition(altitude, mass=mass or MASS[name], deviation=deviation)
    setting = Setting(share * flown.engine.rated_rpm, Mixture("any", ratio), **asked)
    return solve_cruise(flown, where, setting=setting)


def both_answered(first: CruisePoint, second: CruisePoint) -> None:
    """Go on only where both points have an answer and neither is at full throttle."""
    for point in (first, second):
        assume(point.status <= CruiseStatus.COARSE_STOP)
        assume(not point.full_throttle)


@given(names, altitudes, shares_of_rpm, ratios, pressures, st.floats(200.0, 5e3))
def test_more_manifold_pressure_gives_more_of_everything(
    name: str, altitude: float, share: float, ratio: float, pressure: float, more: float
) -> None:
    """Power, fuel flow, airspeed and blade angle all rise with the throttle."""
    first, second = (
        solve(name, altitude=altitude, share=share, ratio=ratio, manifold_pressure=asked)
        for asked in (pressure, pressure + more)
    )
    both_answered(first, second)
    assert second.power > first.power
    assert second.fuel_flow > first.fuel_flow
    assert second.true_airspeed > first.true_airspeed
    assert second.blade_angle > first.blade_angle


@given(names, altitudes, shares_of_rpm, pressures, st.floats(0.5, 20.0))
def test_hotter_air_gives_less_power_at_the_same_setting(
    name: str, altitude: float, share: float, pressure: float, hotter: float
) -> None:
    """Less air enters: less power, less fuel."""
    first, second = (
        solve(name, altitude=altitude, share=share, manifold_pressure=pressure, deviation=off)
        for off in (0.0, hotter)
    )
    both_answered(first, second)
    assert second.power < first.power
    assert second.fuel_flow < first.fuel_flow


@given(names, altitudes, shares_of_rpm, shares_of_power, st.floats(0.5, 20.0))
def test_hotter_air_needs_more_pressure_for_the_same_power_and_flies_faster(
    name: str, altitude: float, share: float, power: float, hotter: float
) -> None:
    """Thin air resists less; every cruise table shows both."""
    asked = power * AIRCRAFT[name].engine.rated_power
    first, second = (
        solve(name, altitude=altitude, share=share, power=asked, deviation=off)
        for off in (0.0, hotter)
    )
    both_answered(first, second)
    assert second.manifold_pressure > first.manifold_pressure
    assert second.true_airspeed > first.true_airspeed
    assert second.calibrated_airspeed < first.calibrated_airspeed


@given(names, altitudes, shares_of_rpm, shares_of_power, st.floats(100.0, 3000.0))
def test_altitude_needs_less_pressure_for_the_same_power_and_flies_faster(
    name: str, altitude: float, share: float, power: float, higher: float
) -> None:
    """Less back pressure and colder air, and thinner air to fly through."""
    asked = power * AIRCRAFT[name].engine.rated_power
    first, second = (
        solve(name, altitude=there, share=share, power=asked)
        for there in (altitude, altitude + higher)
    )
    both_answered(first, second)
    assert second.manifold_pressure < first.manifold_pressure
    assert second.true_airspeed > first.true_airspeed
    assert second.full_throttle_manifold_pressure < first.full_throttle_manifold_pressure


@given(names, altitudes, st.floats(0.72, 0.94), shares_of_power, st.floats(0.005, 0.04))
def test_more_rpm_needs_less_pressure_and_flatter_blades_for_the_same_power(
    name: str, altitude: float, share: float, power: float, faster: float
) -> None:
    """The two levers trade against each other, and friction is paid in fuel."""
    asked = power * AIRCRAFT[name].engine.rated_power
    first, second = (
        solve(name, altitude=altitude, share=there, power=asked)
        for there in (share, share + faster)
    )
    both_answered(first, second)
    assert second.manifold_pressure < first.manifold_pressure
    assert second.blade_angle < first.blade_angle
    assert second.fuel_flow > first.fuel_flow


@given(names, altitudes, st.floats(0.72, 0.94), pressures, st.floats(0.005, 0.04))
def test_more_rpm_gives_more_power_at_the_same_manifold_pressure(
    name: str, altitude: float, share: float, pressure: float, faster: float
) -> None:
    """More strokes draw more air, below the rpm at which breathing chokes."""
    first, second = (
        solve(name, altitude=altitude, share=there, manifold_pressure=pressure)
        for there in (share, share + faster)
    )
    both_answered(first, second)
    assert second.power > first.power
    assert second.fuel_flow > first.fuel_flow


@given(names, altitudes, shares_of_rpm, shares_of_power, st.floats(1.0, 200.0))
def test_weight_costs_speed_and_nothing_else_at_the_same_power(
    name: str, altitude: float, share: float, power: float, heavier: float
) -> None:
    """Engine settings of a power do not know the load, but for ram at full throttle."""
    asked = power * AIRCRAFT[name].engine.rated_power
    first, second = (
        solve(name, altitude=altitude, share=share, power=asked, mass=MASS[name] + more)
        for more in (0.0, heavier)
    )
    both_answered(first, second)
    assert second.true_airspeed < first.true_airspeed
    assert second.manifold_pressure == first.manifold_pressure
    assert second.fuel_flow == first.fuel_flow


@given(names, altitudes, shares_of_rpm, pressures, st.floats(0.058, 0.076), st.floats(5e-4, 1e-3))
def test_leaner_of_best_power_gives_less_power_for_less_fuel(
    name: str, altitude: float, share: float, pressure: float, ratio: float, richer: float
) -> None:
    """Lean of best power, mixture is a third lever that lowers both."""
    first, second = (
        solve(name, altitude=altitude, share=share, ratio=there, manifold_pressure=pressure)
        for there in (ratio, ratio + richer)
    )
    both_answered(first, second)
    assert second.power > first.power
    assert second.fuel_flow > first.fuel_flow


@given(altitudes, shares_of_power, st.floats(1.01, 1.4))
def test_drag_costs_speed(altitude: float, power: float, dirtier: float) -> None:
    """A rough airframe, a smaller Oswald factor, a poorer installation: slower each."""
    asked = power * TOURER.engine.rated_power
    clean = solve("tourer", altitude=altitude, power=asked)
    frame, propeller = TOURER.airframe, TOURER.propeller
    for worse in (
        replace(TOURER, airframe=replace(frame, zero_lift_drag=frame.zero_lift_drag * dirtier)),
        replace(TOURER, airframe=replace(frame, oswald_factor=frame.oswald_factor / dirtier)),
        replace(
            TOURER,
            propeller=replace(
                propeller, installation_factor=propeller.installation_factor / dirtier
            ),
        ),
    ):
        slower = solve("tourer", altitude=altitude, power=asked, aircraft=worse)
        both_answered(clean, slower)
        assert slower.true_airspeed < clean.true_airspeed


@given(names, altitudes, shares_of_rpm, ratios, shares_of_power)
def test_power_asked_and_power_checked_agree(
    name: str, altitude: float, share: float, ratio: float, power: float
) -> None:
    """Set the manifold pressure a table gives, and the check says the power the table was for."""
    asked = power * AIRCRAFT[name].engine.rated_power
    table = solve(name, altitude=altitude, share=share, ratio=ratio, power=asked)
    both_answered(table, table)
    check = solve(
        name,
        altitude=altitude,
        share=share,
        ratio=ratio,
        manifold_pressure=float(table.manifold_pressure),
    )
    assert check.power == pytest.approx(asked, rel=1e-9)
    assert check.true_airspeed == pytest.approx(float(table.true_airspeed), rel=1e-8)
    assert check.fuel_flow == pytest.approx(float(table.fuel_flow), rel=1e-9)


@settings(max_examples=200)
@given(
    names,
    st.floats(-500.0, 30_000.0),
    st.floats(-40.0, 40.0),
    st.floats(0.5, 1.15),
    st.floats(0.04, 0.12),
    st.floats(1e3, 4e5),
)
def test_any_question_has_whole_numbers_or_none(
    name: str, altitude: float, deviation: float, share: float, ratio: float, power: float
) -> None:
    """However odd the question, no half answer, no zero speed, no power that was not there."""
    point = solve(
        name, altitude=altitude, deviation=deviation, share=share, ratio=ratio, power=power
    )
    answered = point.status <= CruiseStatus.COARSE_STOP
    for number in (point.true_airspeed, point.power, point.fuel_flow, point.blade_angle):
        assert np.isfinite(number) == answered
    if answered:
        assert point.true_airspeed > 25.0
        assert point.fuel_flow > 0.0
        assert point.power <= power * (1.0 + 1e-12)
        assert point.manifold_pressure <= point.full_throttle_manifold_pressure
        assert point.full_throttle == (point.power < power * (1.0 - 1e-12))
