"""Level cruise: balance, energy, statuses, shapes."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest
from aircraft_specimens import (
    AIRCRAFT,
    BEST_POWER,
    CLEAN,
    ECONOMY,
    MASS,
    TOURER,
    TWIN_SIZED,
    air,
    condition,
)

from cardgen import cruise
from cardgen.aircraft import Aircraft, Condition, Setting
from cardgen.airframe import drag
from cardgen.airspeed import calibrated_airspeed
from cardgen.atmosphere import density, speed_of_sound
from cardgen.constants import GRAVITY, INCH_OF_MERCURY
from cardgen.cruise import CruisePoint, CruiseStatus, balance, solve_cruise
from cardgen.engine import Mixture, power_line, relative_air_flow
from cardgen.engine.model import FUEL_HEATING_VALUE
from cardgen.propeller import coefficients

every_aircraft = pytest.mark.parametrize(
    ("aircraft", "mass"),
    [(AIRCRAFT[name], MASS[name]) for name in AIRCRAFT],
    ids=AIRCRAFT.keys(),
)


def drawn(aircraft: Aircraft, mass: float, count: int = 400) -> tuple[Condition, Setting]:
    """Points all over the working range, asked by power and by manifold pressure in turn."""
    draw = np.random.default_rng(3).uniform
    pressure, temperature = air(draw(0.0, 16_000.0, count), deviation=draw(-25.0, 25.0, count))
    power = draw(0.40, 0.85, count) * aircraft.engine.rated_power
    return (
        Condition(pressure, temperature, mass * draw(0.85, 1.1, count), draw(0.0, 700.0, count)),
        Setting(
            draw(0.70, 1.0, count) * aircraft.engine.rated_rpm,
            Mixture("drawn", draw(0.055, 0.095, count)),
            power=np.where(np.arange(count) % 2 == 0, power, np.nan),
            manifold_pressure=draw(60e3, 105e3, count),
        ),
    )


def solved(point: CruisePoint) -> np.ndarray:
    """Where there is an answer."""
    return point.status <= CruiseStatus.COARSE_STOP


def taken(values: object, index: object) -> object:
    """Rows of a dataclass whose fields are arrays, numbers, mixtures or None."""
    if isinstance(values, np.ndarray):
        return values[index]
    if isinstance(values, (Condition, Setting, Mixture)):
        names = [field.name for field in fields(values)]
        return replace(values, **{name: taken(getattr(values, name), index) for name in names})
    return values


# --- Balance and energy -------------------------------------------------------------------------


@every_aircraft
def test_thrust_balances_drag_where_there_is_an_answer(aircraft: Aircraft, mass: float) -> None:
    """The residual is nil to the tolerance of airspeed, and most points have an answer."""
    where, setting = drawn(aircraft, mass)
    point = solve_cruise(aircraft, where, setting=setting)
    answered = solved(point)
    assert answered.mean() > 0.8
    assert np.abs(point.residual[answered]).max() < 1e-4
    weight = where.mass * GRAVITY
    rho = density(where.pressure, where.temperature, vapour_pressure=where.vapour_pressure)
    resisted = drag(aircraft.airframe, 0.5 * rho * point.true_airspeed**2, weight=weight)
    np.testing.assert_allclose(point.thrust[answered], resisted[answered], rtol=1e-7)


@every_aircraft
def test_energy_closes(aircraft: Aircraft, mass: float) -> None:
    """Fuel power > indicated > brake > thrust power, each by a share an engineer expects."""
    where, setting = drawn(aircraft, mass)
    point = solve_cruise(aircraft, where, setting=setting)
    line = power_line(
        aircraft.engine,
        setting.rpm,
        mixture=setting.mixture,
        pressure=where.pressure,
        temperature=where.temperature,
        vapour_pressure=where.vapour_pressure,
    )
    answered = solved(point)
    burned = (point.fuel_flow * FUEL_HEATING_VALUE)[answered]
    flow = relative_air_flow(line, point.manifold_pressure)
    indicated = (line.indicated * flow)[answered]
    brake = point.power[answered]
    thrust_power = (point.thrust * point.true_airspeed)[answered]
    assert (burned > indicated).all()
    assert (indicated > brake).all()
    assert (brake > thrust_power).all()
    np.testing.assert_allclose(thrust_power / brake, point.propeller_efficiency[answered])
    thermal = indicated / burned
    assert thermal.min() > 0.22  # rich of best power
    assert thermal.max() < 0.40  # below the fuel-air cycle (Taylor, chapter 4)
    np.testing.assert_allclose(flow[answered], point.relative_air_flow[answered], rtol=1e-12)


@every_aircraft
def test_cruise_efficiency_and_incidence_are_the_trades(aircraft: Aircraft, mass: float) -> None:
    """Efficiency 80 to 90 %, blade angle of attack about 2 to 4°; common practice, no source.

    The model's angle is from the flat face of the blade, on which the chord line of a Clark Y of
    9 % leans 1.5° (its leading edge lies 3.5 % of the chord above the face at 11.7 % thickness).
    Efficiency is of the propeller alone; installed it is some 5 % lower.
    """
    power = np.array([0.55, 0.65, 0.75]) * aircraft.engine.rated_power
    setting = Setting(0.87 * aircraft.engine.rated_rpm, BEST_POWER, power=power)
    point = solve_cruise(aircraft, condition(6000.0, mass=mass), setting=setting)
    isolated = point.propeller_efficiency / aircraft.propeller.installation_factor
    assert isolated.min() > 0.80
    assert isolated.max() < 0.90
    from_chord_line = np.degrees(point.angle_of_attack + np.arctan(0.035 * 0.0901 / 0.117))
    assert set(np.round(from_chord_line)) <= {2.0, 3.0, 4.0}


@every_aircraft
def test_balance_at_the_solution_is_the_solution(aircraft: Aircraft, mass: float) -> None:
    """The number that is solved for and the number that is printed cannot differ."""
    where, setting = drawn(aircraft, mass)
    point = solve_cruise(aircraft, where, setting=setting)
    index = np.flatnonzero(solved(point))
    again = balance(
        aircraft,
        taken(where, index),
        setting=taken(setting, index),
        true_airspeed=point.true_airspeed[index],
    )
    for field in fields(CruisePoint):
        np.testing.assert_allclose(
            getattr(again, field.name),
            getattr(point, field.name)[index],
            rtol=1e-12,
            atol=1e-9,
            err_msg=field.name,
        )


def test_balance_is_positive_below_and_negative_above_the_cruise() -> None:
    """It is the fast root: more speed means drag wins, less means thrust wins."""
    where, setting = condition(4000.0), Setting(2400.0, BEST_POWER, power=90e3)
    speed = solve_cruise(TOURER, where, setting=setting).true_airspeed
    around = balance(
        TOURER, where, setting=setting, true_airspeed=speed * np.array([0.9, 0.99, 1.01, 1.1])
    )
    assert (np.sign(around.residual) == [1.0, 1.0, -1.0, -1.0]).all()


def test_outputs_agree_with_the_modules_below() -> None:
    """Calibrated airspeed, advance ratio, tip Mach, thrust: recomputed from their own modules."""
    where, setting = condition(7500.0), Setting(2400.0, BEST_POWER, power=90e3)
    point = solve_cruise(TOURER, where, setting=setting)
    speed, propeller = float(point.true_airspeed), TOURER.propeller
    assert point.calibrated_airspeed == pytest.approx(
        float(calibrated_airspeed(speed, where.pressure, temperature=where.temperature)), rel=1e-12
    )
    turns, sound = 2400.0 / 60.0, float(speed_of_sound(where.temperature))
    assert point.advance_ratio == pytest.approx(speed / (turns * propeller.diameter), rel=1e-12)
    tip = np.hypot(np.pi * turns * propeller.diameter, speed) / sound
    assert point.tip_mach == pytest.approx(float(tip), rel=1e-12)
    direct = coefficients(
        propeller,
        point.advance_ratio,
        blade_angle=point.blade_angle,
        tip_mach=np.pi * turns * propeller.diameter / sound,
    )
    rho = density(where.pressure, where.temperature)
    thrust = direct.thrust_coefficient * rho * turns**2 * propeller.diameter**4
    assert point.thrust == pytest.approx(float(thrust) * propeller.installation_factor, rel=3e-4)
    power = direct.power_coefficient * rho * turns**3 * propeller.diameter**5
    assert point.power == pytest.approx(float(power), rel=3e-4)


# --- What is asked ------------------------------------------------------------------------------


def test_power_within_reach_is_given_exactly() -> None:
    """Percent power asked is percent power got."""
    power = np.linspace(0.45, 0.75, 7) * TOURER.engine.rated_power
    point = solve_cruise(TOURER, condition(3000.0), setting=Setting(2400.0, ECONOMY, power=power))
    assert not point.full_throttle.any()
    np.testing.assert_allclose(point.power, power, rtol=1e-12)
    back = solve_cruise(
        TOURER,
        condition(3000.0),
        setting=Setting(2400.0, ECONOMY, manifold_pressure=point.manifold_pressure),
    )
    np.testing.assert_allclose(back.power, power, rtol=1e-12)
    np.testing.assert_allclose(back.true_airspeed, point.true_airspeed, rtol=1e-9)


@pytest.mark.parametrize("asked", [{"power": 1e9}, {"manifold_pressure": np.inf}])
def test_beyond_reach_full_throttle_is_taken_and_said(asked: dict[str, float]) -> None:
    """The row is the full-throttle setting, with the power it really gives."""
    point = solve_cruise(
        CLEAN, condition(9000.0, mass=1450.0), setting=Setting(2500.0, BEST_POWER, **asked)
    )
    assert point.full_throttle
    assert point.status == CruiseStatus.OK
    assert point.manifold_pressure == point.full_throttle_manifold_pressure
    assert 0.5 * CLEAN.engine.rated_power < point.power < CLEAN.engine.rated_power


def test_ram_lifts_full_throttle_above_the_static_air() -> None:
    """The airspeed it is solved with is the airspeed it is printed with."""
    where = condition(8000.0, mass=1450.0)
    free = replace(
        CLEAN, engine=replace(CLEAN.engine, induction=replace(CLEAN.engine.induction, loss=0.0))
    )
    point = solve_cruise(free, where, setting=Setting(2500.0, BEST_POWER, manifold_pressure=np.inf))
    assert point.manifold_pressure > float(where.pressure) + 0.5 * INCH_OF_MERCURY


def test_rows_of_either_kind_stand_in_one_array() -> None:
    """Manifold pressure counts where power is NaN."""
    where = condition(5000.0)
    both = solve_cruise(
        TOURER,
        where,
        setting=Setting(
            2400.0,
            BEST_POWER,
            power=np.array([90e3, np.nan]),
            manifold_pressure=np.array([np.nan, 70e3]),
        ),
    )
    by_power = solve_cruise(TOURER, where, setting=Setting(2400.0, BEST_POWER, power=90e3))
    by_pressure = solve_cruise(
        TOURER, where, setting=Setting(2400.0, BEST_POWER, manifold_pressure=70e3)
    )
    assert both.true_airspeed.tolist() == [
        float(by_power.true_airspeed),
        float(by_pressure.true_airspeed),
    ]


def test_setting_that_asks_for_nothing_is_refused() -> None:
    """Neither power nor manifold pressure is a mistake of the caller."""
    with pytest.raises(ValueError, match="power or for manifold pressure"):
        Setting(2400.0, BEST_POWER)


# --- No answer is a result ----------------------------------------------------------------------


def assert_no_number(point: CruisePoint) -> None:
    """Every number is NaN, and no flag is set."""
    for field in fields(CruisePoint):
        value = getattr(point, field.name)
        if value.dtype == np.float64:
            assert np.isnan(value).all(), field.name
    assert not point.full_throttle.any()


def test_too_little_power_is_no_level_flight() -> None:
    """Idling there is no level cruise: no number, and the reason."""
    point = solve_cruise(
        TOURER,
        condition(6000.0),
        setting=Setting(2300.0, BEST_POWER, power=np.array([0.10, 0.18]) * 134e3),
    )
    assert (point.status == CruiseStatus.NO_LEVEL_FLIGHT).all()
    assert [CruiseStatus(int(one)).word for one in point.status] == ["no_level_flight"] * 2
    assert_no_number(point)


@pytest.mark.parametrize(
    ("rpm", "ratio"), [(1400.0, 0.0775), (3000.0, 0.0775), (2400.0, 0.045), (2400.0, 0.12)]
)
def test_outside_the_model_there_is_no_number(rpm: float, ratio: float) -> None:
    """An rpm or mixture that the model does not cover is named, not guessed."""
    setting = Setting(rpm, Mixture("off", ratio), power=90e3)
    point = solve_cruise(TOURER, condition(4000.0), setting=setting)
    assert point.status == CruiseStatus.OUTSIDE_MODEL
    assert_no_number(point)


def test_missing_numbers_have_no_answer() -> None:
    """NaN in, NaN and a reason out, and the neighbours unharmed."""
    where = condition(np.array([4000.0, np.nan, 4000.0]))
    point = solve_cruise(TOURER, where, setting=Setting(2400.0, BEST_POWER, power=90e3))
    assert (point.status == [0, CruiseStatus.OUTSIDE_MODEL, 0]).all()
    assert point.true_airspeed[0] == point.true_airspeed[2]
    assert np.isnan(point.true_airspeed[1])


@every_aircraft
def test_every_point_has_either_all_numbers_or_none(aircraft: Aircraft, mass: float) -> None:
    """A half-filled row would be printed half right."""
    where, setting = drawn(aircraft, mass)
    point = solve_cruise(aircraft, where, setting=setting)
    answered = solved(point)
    for field in fields(CruisePoint):
        value = getattr(point, field.name)
        if value.dtype == np.float64:
            np.testing.assert_array_equal(np.isfinite(value), answered, field.name)


@every_aircraft
def test_no_gap_inside_the_domain(aircraft: Aircraft, mass: float) -> None:
    """Between 55 and 85 % power, 2000 to 12 000 ft and usual rpm every point has an answer."""
    altitude, rpm, share = np.meshgrid(
        np.arange(0.0, 12_001.0, 1000.0),
        np.linspace(0.75, 1.0, 11) * aircraft.engine.rated_rpm,
        np.linspace(0.55, 0.85, 7),
        indexing="ij",
    )
    setting = Setting(rpm, BEST_POWER, power=share * aircraft.engine.rated_power)
    point = solve_cruise(aircraft, condition(altitude, mass=mass), setting=setting)
    assert solved(point).all()


def test_blade_stops_are_findings_with_numbers() -> None:
    """Where the governor cannot hold, the point is solved as if it could, and says so."""
    setting = Setting(2400.0, BEST_POWER, power=95e3)
    free = solve_cruise(TOURER, condition(4000.0), setting=setting)
    angle = float(free.blade_angle)
    for stop, status in (
        ({"fine_stop": angle + 0.01}, CruiseStatus.FINE_STOP),
        ({"coarse_stop": angle - 0.01}, CruiseStatus.COARSE_STOP),
    ):
        held = replace(TOURER, propeller=replace(TOURER.propeller, **stop))
        point = solve_cruise(held, condition(4000.0), setting=setting)
        assert point.status == status
        assert point.true_airspeed == pytest.approx(float(free.true_airspeed), rel=1e-4)


# --- Gears --------------------------------------------------------------------------------------


def test_gear_turns_the_propeller_slower_than_the_engine() -> None:
    """Advance ratio and tip Mach number are the propeller's, friction and breath the engine's."""
    setting = Setting(3000.0, BEST_POWER, power=120e3)
    point = solve_cruise(TWIN_SIZED, condition(6000.0, mass=1600.0), setting=setting)
    turns = 3000.0 * 0.64 / 60.0
    expected = float(point.true_airspeed) / (turns * TWIN_SIZED.propeller.diameter)
    assert point.advance_ratio == pytest.approx(expected, rel=1e-12)
    # Asked by power, an ungeared engine at the propeller's rpm flies the same.
    direct = replace(
        TWIN_SIZED, engine=replace(TWIN_SIZED.engine, gear_ratio=1.0, rated_rpm=3400.0 * 0.64)
    )
    same = solve_cruise(
        direct,
        condition(6000.0, mass=1600.0),
        setting=Setting(3000.0 * 0.64, BEST_POWER, power=120e3),
    )
    assert same.true_airspeed == pytest.approx(float(point.true_airspeed), rel=1e-9)
    assert same.blade_angle == pytest.approx(float(point.blade_angle), rel=1e-9)
    # The faster engine rubs more: more fuel for the same power.
    assert point.fuel_flow > same.fuel_flow


# --- Shapes -------------------------------------------------------------------------------------


@every_aircraft
def test_scalar_equals_array_element(aircraft: Aircraft, mass: float) -> None:
    """Whatever is asked one by one must come out the same in one array, to the tolerance."""
    where, setting = drawn(aircraft, mass, 12)
    together = solve_cruise(aircraft, where, setting=setting)
    for place in range(12):
        one = solve_cruise(aircraft, taken(where, place), setting=taken(setting, place))
        for field in fields(CruisePoint):
            np.testing.assert_allclose(
                getattr(one, field.name),
                getattr(together, field.name)[place],
                rtol=1e-9,
                atol=1e-6,
                err_msg=field.name,
            )


def test_order_does_not_matter() -> None:
    """A shuffled array gives the shuffled answers, to the last bit."""
    where, setting = drawn(TOURER, 1100.0)
    shuffled = np.random.default_rng(8).permutation(400)
    there = solve_cruise(TOURER, taken(where, shuffled), setting=taken(setting, shuffled))
    here = solve_cruise(TOURER, where, setting=setting)
    for field in fields(CruisePoint):
        np.testing.assert_allclose(
            getattr(there, field.name),
            getattr(here, field.name)[shuffled],
            rtol=1e-10,
            atol=1e-6,
            err_msg=field.name,
        )


@pytest.mark.parametrize("chunk", [1, 7, 399, 400, 401])
def test_chunking_does_not_matter(monkeypatch: pytest.MonkeyPatch, chunk: int) -> None:
    """Work is cut for the cache's sake only."""
    where, setting = drawn(TOURER, 1100.0)
    whole = solve_cruise(TOURER, where, setting=setting)
    monkeypatch.setattr(cruise, "CHUNK", chunk)
    pieces = solve_cruise(TOURER, where, setting=setting)
    for field in fields(CruisePoint):
        np.testing.assert_allclose(
            getattr(pieces, field.name),
            getattr(whole, field.name),
            rtol=1e-10,
            atol=1e-6,
            err_msg=field.name,
        )


def test_axes_broadcast() -> None:
    """Altitudes down, rpm across, powers behind: one call, the full shape."""
    point = solve_cruise(
        TOURER,
        condition(np.array([2000.0, 4000.0, 6000.0])[:, None, None]),
        setting=Setting(
            np.array([2200.0, 2400.0])[:, None],
            BEST_POWER,
            power=np.array([80e3, 90e3, 95e3, 99e3]),
        ),
    )
    assert point.true_airspeed.shape == (3, 2, 4)
    one = solve_cruise(TOURER, condition(4000.0), setting=Setting(2400.0, BEST_POWER, power=95e3))
    assert one.true_airspeed.shape == ()
    assert point.true_airspeed[1, 1, 2] == pytest.approx(float(one.true_airspeed), abs=1e-6)


def test_no_points_make_an_empty_answer() -> None:
    """An empty table is a table."""
    setting = Setting(np.zeros(0), BEST_POWER, power=np.zeros(0))
    point = solve_cruise(TOURER, condition(4000.0), setting=setting)
    assert point.true_airspeed.shape == (0,)
    assert point.status.shape == (0,)
