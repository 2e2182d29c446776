"""Card, table and check must tell one story: whichever way and unit a setting is asked in."""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache
from pathlib import Path

import numpy as np
import pytest

from cardgen.airspeed import indicated_temperature
from cardgen.atmosphere import density_altitude, standard_pressure, standard_temperature
from cardgen.constants import FOOT
from cardgen.cruise import CruiseStatus
from cardgen.limits.gauges import true_rpm
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.document import Profile
from cardgen.tables.card import Card, CellState
from cardgen.tables.choices import UnitSet
from cardgen.tables.compose import Words, compose
from cardgen.tables.rows import COLUMNS, Combinations, rows, situation_of
from cardgen.tables.solution import Model, Situation, solve, true_temperature_of
from cardgen.tables.verdict import settled_rpm
from cardgen.units import from_unit

PROFILES = Path(__file__).parents[1] / "profiles" / "aircraft"
METRIC = UnitSet("hPa", "L/h", "km/h", "degC", "m", "kg")


@lru_cache(maxsize=1)
def profile() -> Profile:
    """Return the demonstration aircraft."""
    return load_profile(PROFILES / "specimen.yaml")


@pytest.fixture
def model() -> Model:
    """Return the demonstration aircraft's model, not fitted."""
    return model_of(profile())


def everywhere(model: Model) -> Situation:
    """All altitudes and temperatures of a large table."""
    altitude = np.arange(0.0, 16_001.0, 1000.0)[:, None, None, None] * FOOT
    return situation_of(
        altitude,
        np.array([-20.0, 0.0, 20.0])[:, None, None],
        by_density=False,
        mass=np.array(1270.0),
        mixture=0,
    )


def test_what_the_table_says_to_set_is_what_the_check_gives(model: Model) -> None:
    """Percent power asked equals percent power checked, gauge errors and all."""
    situation = everywhere(model)
    rpm = np.array([2200.0, 2350.0, 2500.0])[:, None]
    table = solve(
        model,
        situation,
        indicated_rpm=rpm,
        power_fraction=np.array([0.55, 0.65, 0.75]),
        with_tolerance=False,
    )
    check = solve(
        model,
        situation,
        indicated_rpm=rpm,
        indicated_pressure=table.indicated_manifold_pressure,
        with_tolerance=False,
    )
    answered = table.point.status <= CruiseStatus.COARSE_STOP
    assert answered.mean() > 0.9
    for name in ("power", "fuel_flow", "true_airspeed", "calibrated_airspeed", "blade_angle"):
        np.testing.assert_allclose(
            getattr(check.point, name), getattr(table.point, name), rtol=1e-6, err_msg=name
        )
    within_reach = answered & ~table.point.full_throttle
    asked = np.broadcast_to(np.array([0.55, 0.65, 0.75]), table.power_fraction.shape)
    np.testing.assert_allclose(table.power_fraction[within_reach], asked[within_reach], rtol=1e-9)
    short = table.point.full_throttle & answered
    assert (table.power_fraction[short] < asked[short]).all()


def test_density_altitude_rows_are_pressure_altitude_rows_of_the_same_air(model: Model) -> None:
    """A density altitude asked with a temperature is one pressure altitude, solved the same."""

    def table(altitude: np.ndarray, by_density: bool) -> dict[str, np.ndarray | list[str]]:
        return rows(
            model,
            Combinations(
                altitude=altitude,
                by_density=by_density,
                isa_deviation=np.array([12.0]),
                indicated_rpm=np.array([2400.0]),
                power_fraction=np.array([0.65]),
                mass=np.array([1270.0]),
                mixtures=(0,),
            ),
            with_tolerance=False,
        )

    asked = np.arange(2000.0, 12_001.0, 2000.0) * FOOT
    by_density = table(asked, True)
    np.testing.assert_allclose(by_density["density_altitude_ft"], asked / FOOT, atol=1e-3)
    pressure = np.asarray(by_density["pressure_altitude_ft"]) * FOOT
    np.testing.assert_allclose(
        density_altitude(standard_pressure(pressure), standard_temperature(pressure) + 12.0),
        asked,
        atol=1e-3,
    )
    by_pressure = table(pressure, False)
    for name in COLUMNS:
        if isinstance(by_density[name], list):
            assert by_density[name] == by_pressure[name]
        else:
            np.testing.assert_allclose(by_density[name], by_pressure[name], rtol=1e-9)


def composed(model: Model, units: UnitSet) -> Card:
    """Return the demonstration aircraft's card in a set of units."""
    choices = replace(profile().card, units=units)
    return compose(model, choices, words=Words("of something", (), (), "0" * 64))


def test_units_of_a_card_do_not_move_its_numbers(model: Model) -> None:
    """Printed in hPa, L/h and km/h a card says what it says in inHg, gal/h and kt.

    They may differ by what was rounded: the printed pressure by half a step of each, flow up and
    speed down by a step of each, and by what a step of pressure gives.
    """
    trade, metric = composed(model, profile().card.units), composed(model, METRIC)
    for ours, theirs in zip(trade.tables, metric.tables, strict=True):
        numbers = np.isin(ours.state, (CellState.VALUE, CellState.FULL_THROTTLE))
        same = numbers & (ours.state == theirs.state)
        # Only a cell within a rounding of a limit may change its state.
        assert same.sum() >= numbers.sum() - 1
        pressure = [
            np.asarray(from_unit(table.manifold_pressure[same], unit))
            for table, unit in ((ours, "inHg"), (theirs, "hPa"))
        ]
        step = 0.1 * 3386.4 + 100.0
        assert np.abs(pressure[0] - pressure[1]).max(initial=0.0) <= step
        power = np.abs(ours.percent_power - theirs.percent_power)[same]
        assert power.max(initial=0.0) < 0.6  # what such a step of pressure gives
        flow = (ours.fuel_flow[same] * 3.785411784, theirs.fuel_flow[same])
        assert np.abs(flow[0] - flow[1]).max(initial=0.0) < 0.1 * 3.785411784 + 1.0 + 0.6
        speed = (ours.true_airspeed[same] * 1.852, theirs.true_airspeed[same])
        assert np.abs(speed[0] - speed[1]).max(initial=0.0) < 1.852 + 1.0 + 0.6
        assert ours.rpm == theirs.rpm


def test_printed_cells_are_on_the_safe_side_of_what_is_asked(model: Model) -> None:
    """Fuel flow up, airspeed down, by less than a step; set as printed, the power is as titled."""
    card = composed(model, profile().card.units)
    altitude = np.array(profile().card.altitude)[:, None, None]
    for table in card.tables:
        values = table.state == CellState.VALUE
        situation = situation_of(
            altitude,
            np.zeros(1)[:, None],
            by_density=True,
            mass=np.array(table.mass),
            mixture=model.mixture_index(table.mixture),
        )
        rpm = np.array(table.rpm)
        asked = solve(
            model,
            situation,
            indicated_rpm=rpm,
            power_fraction=table.power_fraction,
            with_tolerance=False,
        )
        flow = asked.point.fuel_flow / model.subject.aircraft.engine.fuel_density
        above = (np.asarray(from_unit(table.fuel_flow, "gal/h")) - flow)[values]
        below = (asked.point.true_airspeed - np.asarray(from_unit(table.true_airspeed, "kt")))[
            values
        ]
        for distance, step in (
            (above, float(from_unit(0.1, "gal/h"))),
            (below, float(from_unit(1.0, "kt"))),
        ):
            assert distance.min(initial=0.0) > -1e-5 * step
            assert distance.max(initial=0.0) < (1.0 + 1e-5) * step
        check = solve(
            model,
            situation,
            indicated_rpm=rpm,
            indicated_pressure=np.asarray(from_unit(table.manifold_pressure, "inHg")),
            with_tolerance=False,
        )
        # A step of 0.1 inHg is about half a percent of power; nearest rounding gives half of that.
        off = 100.0 * (check.power_fraction - table.power_fraction)[values]
        assert np.abs(off).max(initial=0.0) < 0.5


def test_true_temperature_is_the_reading_less_the_rise_it_flies_with(model: Model) -> None:
    """The rise belongs to the airspeed at the true temperature: consistent to a microkelvin."""
    read = Situation(
        pressure_altitude=np.array([500.0, 2000.0, 4500.0]),
        temperature=np.array([270.0, 285.0, 295.0]),
        mass=np.array(1270.0),
        mixture=0,
    )
    setting = {
        "indicated_rpm": np.array(2400.0),
        "indicated_pressure": np.array([80e3, 75e3, 55e3]),
    }
    true = true_temperature_of(model, read, **setting)
    speed = solve(model, replace(read, temperature=true), with_tolerance=False, **setting)
    recovery = model.gauges.temperature_recovery
    again = indicated_temperature(true, speed.point.true_airspeed, recovery_factor=recovery)
    np.testing.assert_allclose(again, read.temperature, rtol=0.0, atol=1e-6)


@pytest.mark.parametrize("humidity", [0.0, 1.0])
def test_rpm_on_a_stop_hardly_differs_where_the_stop_hardly_holds(
    model: Model, humidity: float
) -> None:
    """A stop a hair beyond the governed blade angle lets rpm sag by a hair, in humid air too."""
    situation = Situation(np.array(1500.0), np.array(305.0), np.array(1270.0), 0)
    asked = {"indicated_rpm": np.array(2400.0), "power_fraction": 0.65, "with_tolerance": False}
    humid = replace(model, relative_humidity=humidity)
    angle = float(solve(humid, situation, **asked).point.blade_angle)
    aircraft = model.subject.aircraft
    for stop in ({"fine_stop": angle + 1e-5}, {"coarse_stop": angle - 1e-5}):
        propeller = replace(aircraft.propeller, **stop)
        subject = replace(model.subject, aircraft=replace(aircraft, propeller=propeller))
        held = replace(humid, subject=subject)
        settled = settled_rpm(held, solve(held, situation, **asked))
        assert settled == pytest.approx(float(true_rpm(model.gauges, 2400.0)), abs=1.0)
