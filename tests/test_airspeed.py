"""Airspeeds, temperature rise and ground-speed legs against published values and `fluids`."""

from __future__ import annotations

import math

import fluids
import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from cardgen import constants
from cardgen.airspeed import (
    PositionError,
    airspeed_from_ground_legs,
    calibrated_airspeed,
    calibrated_from_indicated,
    impact_pressure,
    indicated_airspeed,
    indicated_temperature,
    true_airspeed,
    true_temperature,
)
from cardgen.atmosphere import density, speed_of_sound, standard_pressure, standard_temperature
from cardgen.constants import KNOT, SEA_LEVEL_PRESSURE, SEA_LEVEL_TEMPERATURE
from cardgen.errors import DomainError

pressures = st.floats(20000.0, 105000.0)
temperatures = st.floats(210.0, 325.0)
speeds = st.floats(1.0, 200.0)

# Invented installation: reads low when slow, high when fast.
POSITION_ERROR = PositionError((25.0, 40.0, 60.0, 80.0), (2.0, 0.5, -0.5, -1.5))


@pytest.mark.parametrize(
    ("mach", "static_over_total"),
    [(0.1, 0.9930), (0.2, 0.9725), (0.3, 0.9395), (0.5, 0.8430), (0.8, 0.6560), (1.0, 0.5283)],
)
def test_impact_pressure_meets_the_compressible_flow_tables(
    mach: float, static_over_total: float
) -> None:
    """NACA TR 1135, "Equations, Tables, and Charts for Compressible Flow", 1953; from memory."""
    speed = mach * speed_of_sound(280.0)
    rise = float(impact_pressure(speed, 70000.0, temperature=280.0))
    assert 70000.0 / (70000.0 + rise) == pytest.approx(static_over_total, rel=0.0, abs=0.5e-4)


def _fluids_impact_pressure(speed: float, pressure: float, temperature: float) -> float:
    """Return impact pressure by way of stagnation temperature, as `fluids` programs it."""
    gas_constant, ratio = constants.GAS_CONSTANT_DRY_AIR, constants.HEAT_CAPACITY_RATIO
    heat_capacity = ratio / (ratio - 1.0) * gas_constant
    stagnation = fluids.compressible.T_stagnation_ideal(temperature, speed, heat_capacity)
    return fluids.compressible.P_stagnation(pressure, temperature, stagnation, ratio) - pressure


@given(speed=st.floats(20.0, 200.0), p=pressures, t=temperatures)
def test_calibrated_airspeed_feels_the_same_impact_pressure(
    speed: float, p: float, t: float
) -> None:
    """By definition, with impact pressures from `fluids` on both sides."""
    calibrated = float(calibrated_airspeed(speed, p, temperature=t))
    there = _fluids_impact_pressure(speed, p, t)
    at_sea_level = _fluids_impact_pressure(calibrated, SEA_LEVEL_PRESSURE, SEA_LEVEL_TEMPERATURE)
    assert at_sea_level == pytest.approx(there, rel=1e-9)
    assert impact_pressure(speed, p, temperature=t) == pytest.approx(there, rel=1e-9)


@given(speed=speeds)
def test_calibrated_is_true_airspeed_at_sea_level_on_a_standard_day(speed: float) -> None:
    """This is how the instrument is scaled."""
    calibrated = calibrated_airspeed(speed, SEA_LEVEL_PRESSURE, temperature=SEA_LEVEL_TEMPERATURE)
    assert calibrated == pytest.approx(speed, rel=1e-12)


@given(speed=st.floats(1.0, 10.0), p=pressures, t=temperatures)
def test_slow_flow_is_incompressible(speed: float, p: float, t: float) -> None:
    """At low Mach number calibrated airspeed is V √(ρ/ρ0), to first order in M²."""
    equivalent = speed * math.sqrt(float(density(p, t)) / constants.SEA_LEVEL_DENSITY)
    mach = speed / float(speed_of_sound(t))
    assert calibrated_airspeed(speed, p, temperature=t) == pytest.approx(
        equivalent, rel=mach**2 / 4.0
    )


@given(speed=speeds, p=pressures, t=temperatures)
def test_true_airspeed_undoes_calibrated_airspeed(speed: float, p: float, t: float) -> None:
    """The exact inverse, not a series cut off differently."""
    calibrated = calibrated_airspeed(speed, p, temperature=t)
    assert true_airspeed(calibrated, p, temperature=t) == pytest.approx(speed, rel=1e-10)


@given(speed=speeds, p=pressures, t=temperatures)
def test_calibrated_airspeed_rises_with_true_airspeed(speed: float, p: float, t: float) -> None:
    """Monotone, so the inverse is the only answer."""
    pair = calibrated_airspeed(np.array([speed, speed + 0.1]), p, temperature=t)
    assert pair[1] > pair[0]


def test_two_percent_a_thousand_feet_holds_roughly() -> None:
    """Pilots' rule: true airspeed exceeds calibrated by 2 % per 1000 ft; common practice."""
    height = 8000.0 * constants.FOOT
    true = true_airspeed(
        130.0 * KNOT, standard_pressure(height), temperature=standard_temperature(height)
    )
    assert true / (130.0 * KNOT) == pytest.approx(1.16, abs=0.04)


@pytest.mark.parametrize(
    "value",
    [
        impact_pressure(-1.0, 1e5, temperature=288.0),
        impact_pressure(341.0, 1e5, temperature=288.0),
        impact_pressure(50.0, -1e5, temperature=288.0),
        impact_pressure(50.0, 1e5, temperature=-1.0),
        impact_pressure(np.nan, 1e5, temperature=288.0),
        impact_pressure(np.inf, 1e5, temperature=288.0),
        calibrated_airspeed(-1.0, 1e5, temperature=288.0),
        calibrated_airspeed(341.0, 1e5, temperature=288.0),
        true_airspeed(-1.0, 1e5, temperature=288.0),
        true_airspeed(341.0, 1e5, temperature=288.0),
        true_airspeed(300.0, 2e4, temperature=220.0),
        true_airspeed(50.0, 0.0, temperature=220.0),
        true_airspeed(50.0, 5e4, temperature=0.0),
    ],
)
def test_supersonic_or_impossible_flow_has_no_number(value: float) -> None:
    """The pitot equation without a shock ends at Mach 1."""
    assert np.isnan(value)


def test_mach_one_itself_is_inside_and_returns() -> None:
    """Rounding at the edge of the domain must not lose the point."""
    t, p = np.linspace(210.0, 325.0, 500), np.linspace(20000.0, 101000.0, 500)
    calibrated = calibrated_airspeed(speed_of_sound(t), p, temperature=t)
    back = true_airspeed(calibrated, p, temperature=t)
    np.testing.assert_allclose(back, speed_of_sound(t), rtol=1e-9)


@given(rows=st.lists(st.tuples(speeds, pressures, temperatures), min_size=1, max_size=5))
def test_scalar_equals_array_element(rows: list[tuple[float, float, float]]) -> None:
    """A number does not depend on what else is computed in the same call."""
    speed, p, t = (np.array(column) for column in zip(*rows, strict=True))
    whole = calibrated_airspeed(speed, p, temperature=t)
    for k, (v, pressure, temperature) in enumerate(rows):
        one = calibrated_airspeed(v, pressure, temperature=temperature)
        assert one == pytest.approx(whole[k], rel=1e-13)


# --- Position error -----------------------------------------------------------------------------


def test_correction_is_added_to_indicated_airspeed() -> None:
    """An airspeed correction table gives what to add to the reading; checked at each point."""
    np.testing.assert_allclose(
        indicated_airspeed(POSITION_ERROR.calibrated, POSITION_ERROR), [23.0, 39.5, 60.5, 81.5]
    )
    assert indicated_airspeed(50.0, POSITION_ERROR) == pytest.approx(50.0)


@given(calibrated=st.floats(25.0, 80.0))
def test_position_error_reads_both_ways(calibrated: float) -> None:
    """Indicated to calibrated and back is the same airspeed, between the points too."""
    indicated = indicated_airspeed(calibrated, POSITION_ERROR)
    assert calibrated_from_indicated(indicated, POSITION_ERROR) == pytest.approx(calibrated)


def test_position_error_is_not_extrapolated() -> None:
    """Outside the table nothing is known."""
    assert np.all(np.isnan(indicated_airspeed([24.9, 80.1, np.nan], POSITION_ERROR)))
    assert np.all(np.isnan(calibrated_from_indicated([22.9, 81.6], POSITION_ERROR)))


@pytest.mark.parametrize(
    ("calibrated", "correction", "words"),
    [
        ((25.0, 40.0), (0.0,), "as many of each"),
        ((25.0,), (0.0,), "two or more"),
        ((40.0, 25.0), (0.0, 0.0), "calibrated airspeeds"),
        ((25.0, 26.0), (0.0, 5.0), "indicated airspeeds"),
        ((25.0, math.nan), (0.0, 0.0), "calibrated airspeeds"),
    ],
)
def test_position_error_that_cannot_be_inverted_is_refused(
    calibrated: tuple[float, ...], correction: tuple[float, ...], words: str
) -> None:
    """One reading must mean one airspeed."""
    with pytest.raises(DomainError, match=words):
        PositionError(calibrated, correction)


# --- Temperature --------------------------------------------------------------------------------


def test_full_temperature_rise_meets_the_navigation_rule() -> None:
    """Rise in °C = (true airspeed in kt)² / 7592 for a recovery factor of 1; from memory."""
    read = 270.0
    rise = read - true_temperature(read, 200.0 * KNOT, recovery_factor=1.0)
    assert rise == pytest.approx(200.0**2 / 7592.0, rel=1e-3)


@given(t=temperatures, speed=speeds, recovery=st.floats(0.0, 1.0))
def test_true_temperature_undoes_indicated_temperature(
    t: float, speed: float, recovery: float
) -> None:
    """A moving probe reads at least the true temperature, and the way back is exact."""
    read = indicated_temperature(t, speed, recovery_factor=recovery)
    assert read >= t
    assert true_temperature(read, speed, recovery_factor=recovery) == pytest.approx(t, rel=1e-13)


def test_recovery_factor_outside_0_to_1_gives_no_number() -> None:
    """No probe feels more than the full rise."""
    assert np.all(np.isnan(true_temperature(280.0, 80.0, recovery_factor=[-0.1, 1.1, np.nan])))
    assert np.isnan(true_temperature(1.0, 300.0, recovery_factor=1.0))
    assert np.isnan(indicated_temperature(-1.0, 30.0, recovery_factor=1.0))


# --- Ground-speed legs --------------------------------------------------------------------------


def test_four_ground_legs_meet_the_published_example() -> None:
    """Four-leg example of the National Test Pilot School's method: 183.72669557 kt.

    The printed result is the mean over the four sets of three legs.
    """
    ground_speed = np.array([178.0, 185.0, 188.0, 184.0]) * KNOT
    track = np.radians([178.0, 82.0, 355.0, 265.0])
    legs = airspeed_from_ground_legs(ground_speed, track)
    assert legs.true_airspeed / KNOT == pytest.approx(183.72669557, rel=0.0, abs=1e-8)

    sets = np.array([[0, 1, 2], [0, 1, 3], [0, 2, 3], [1, 2, 3]])
    alone = airspeed_from_ground_legs(ground_speed[sets], track[sets]).true_airspeed
    assert legs.true_airspeed == pytest.approx(np.mean(alone))
    assert legs.scatter == pytest.approx(np.std(alone, ddof=1))


def _legs(
    airspeed: float, wind_speed: float, wind_direction: float, headings: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Return ground speeds and tracks of an aircraft on headings in a wind."""
    north = airspeed * np.cos(headings) - wind_speed * np.cos(wind_direction)
    east = airspeed * np.sin(headings) - wind_speed * np.sin(wind_direction)
    return np.hypot(north, east), np.arctan2(east, north)


@given(
    airspeed=st.floats(30.0, 120.0),
    wind_speed=st.floats(0.5, 25.0),
    wind_direction=st.floats(0.0, 2.0 * math.pi - 1e-6),
    first=st.floats(0.0, 2.0 * math.pi),
    count=st.integers(3, 6),
)
def test_steady_legs_give_back_airspeed_and_wind(
    airspeed: float, wind_speed: float, wind_direction: float, first: float, count: int
) -> None:
    """Three legs are exact and further ones agree with them when nothing changed in flight."""
    headings = first + np.arange(count) * 2.0 * math.pi / count
    ground_speed, track = _legs(airspeed, wind_speed, wind_direction, headings)
    legs = airspeed_from_ground_legs(ground_speed, track)
    assert legs.true_airspeed == pytest.approx(airspeed, rel=1e-9)
    assert legs.wind_speed == pytest.approx(wind_speed, rel=1e-7)
    turn = (float(legs.wind_direction) - wind_direction + math.pi) % (2.0 * math.pi) - math.pi
    assert turn == pytest.approx(0.0, abs=1e-6)
    if count == 3:
        assert np.isnan(legs.scatter)
    else:
        assert legs.scatter == pytest.approx(0.0, abs=1e-6)


def test_wind_is_named_by_where_it_comes_from() -> None:
    """Flying north is slow and south is fast: the wind is from the north."""
    legs = airspeed_from_ground_legs(
        [50.0, 70.0, math.hypot(60.0, 10.0)], [0.0, math.pi, math.pi / 2.0 + math.atan2(10.0, 60.0)]
    )
    assert legs.true_airspeed == pytest.approx(60.0)
    assert legs.wind_speed == pytest.approx(10.0)
    assert math.cos(float(legs.wind_direction)) == pytest.approx(1.0)


def test_scatter_shows_a_leg_that_was_flown_faster() -> None:
    """Four legs let one see that they do not agree; three cannot."""
    ground_speed, track = _legs(60.0, 5.0, 1.0, np.radians([0.0, 90.0, 180.0, 270.0]))
    ground_speed[2] += 2.0
    legs = airspeed_from_ground_legs(ground_speed, track)
    assert 0.3 < legs.scatter < 3.0


@pytest.mark.parametrize("order", [(0, 1, 2), (1, 0, 2), (2, 0, 1)])
@pytest.mark.parametrize("spread_deg", [0.0, 5.0, 30.0, 50.0])
def test_tracks_with_little_spread_give_no_number(
    spread_deg: float, order: tuple[int, ...]
) -> None:
    """Three legs within an arc magnify a ground-speed error; no airspeed is better than that."""
    track = np.radians(40.0 + spread_deg * np.array(order))
    legs = airspeed_from_ground_legs(np.array([60.0, 60.0, 60.0]), track)
    for value in (legs.true_airspeed, legs.wind_speed, legs.wind_direction, legs.scatter):
        assert np.isnan(value)


@pytest.mark.parametrize("spread_deg", [60.0, 90.0, 120.0])
def test_tracks_as_flown_in_practice_give_a_number(spread_deg: float) -> None:
    """Turns of 60°, 90° and 120° between three legs are all enough; common practice."""
    track = np.radians(40.0 + spread_deg * np.arange(3))
    assert airspeed_from_ground_legs([60.0, 60.0, 60.0], track).true_airspeed == pytest.approx(60.0)


@pytest.mark.parametrize(
    ("speed", "track"), [(-60.0, 0.0), (0.0, 0.0), (np.inf, 0.0), (60.0, np.inf), (60.0, np.nan)]
)
def test_leg_that_cannot_be_spoils_only_the_sets_it_is_in(speed: float, track: float) -> None:
    """A missing or impossible leg is left out, the other three still give their answer."""
    ground_speed, tracks = _legs(60.0, 5.0, 1.0, np.radians([0.0, 120.0, 240.0]))
    legs = airspeed_from_ground_legs([*ground_speed, speed], [*tracks, track])
    assert legs.true_airspeed == pytest.approx(60.0)
    assert np.isnan(legs.scatter)


def test_repeated_track_leaves_out_only_the_sets_it_spoils() -> None:
    """Of four legs with two nearly alike, the sets with both are dropped and the rest kept."""
    ground_speed, track = _legs(60.0, 5.0, 1.0, np.radians([0.0, 4.0, 120.0, 240.0]))
    ground_speed[1] += 0.2
    legs = airspeed_from_ground_legs(ground_speed, track)
    assert legs.true_airspeed == pytest.approx(60.0, abs=0.1)
    assert 0.0 < legs.scatter < 0.1


def test_legs_lie_along_the_last_axis_of_an_array() -> None:
    """Several flights at once, one of them with a missing reading."""
    ground_speed, track = _legs(60.0, 5.0, 1.0, np.radians([0.0, 120.0, 240.0]))
    flights = np.stack([ground_speed, ground_speed * 1.1, ground_speed])
    flights[2, 0] = np.nan
    legs = airspeed_from_ground_legs(flights, track)
    assert legs.true_airspeed.shape == (3,)
    assert legs.true_airspeed[0] == airspeed_from_ground_legs(ground_speed, track).true_airspeed
    assert legs.true_airspeed[1] == pytest.approx(66.0)
    assert np.isnan(legs.true_airspeed[2])


@pytest.mark.parametrize("legs", [(50.0,), (50.0, 60.0), 50.0])
def test_fewer_than_three_legs_are_refused(legs: tuple[float, ...] | float) -> None:
    """Airspeed and two components of wind are three unknowns."""
    with pytest.raises(DomainError, match="three or more"):
        airspeed_from_ground_legs(legs, 0.0)


@given(error=st.floats(-0.5, 0.5), spread=st.floats(60.0, 120.0))
def test_ground_speed_error_is_at_most_doubled(error: float, spread: float) -> None:
    """The bound the selection of sets promises, here for one wrong leg."""
    ground_speed, track = _legs(60.0, 5.0, 1.0, np.radians([0.0, spread, 2.0 * spread]))
    ground_speed[1] += error
    legs = airspeed_from_ground_legs(ground_speed, track)
    assume(np.isfinite(legs.true_airspeed))
    assert abs(float(legs.true_airspeed) - 60.0) <= 2.0 * abs(error) * 1.05 + 1e-9
