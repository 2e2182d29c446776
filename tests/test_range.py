"""Range, endurance and best settings hold what a pilot would work out from the printed tables."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from card_factory import Sketch, make_card

from cardgen.constants import FOOT, INCH_OF_MERCURY
from cardgen.limits import Verdict
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.card_content import card_of
from cardgen.tables.back import RangeTable, Supply
from cardgen.tables.best import best_tables
from cardgen.tables.card import Card, CardTable, CellState
from cardgen.tables.printed import pressure_from
from cardgen.tables.range import DISTANCE_STEP, MINUTE_STEP, fuel_in, range_tables
from cardgen.tables.rows import situation_of
from cardgen.tables.solution import Model, Situation, solve
from cardgen.tables.verdict import judge
from cardgen.units import from_unit, to_unit

PROFILE = Path(__file__).parent.parent / "profiles" / "aircraft" / "specimen.yaml"
LITRES = 0.001
GALLON = 231.0 * 0.0254**3  # the US gallon is 231 cubic inches (15 CFR / NIST Handbook 44)
KNOT = 1852.0 / 3600.0  # the international nautical mile is 1852 m (BIPM SI brochure, 8th ed.)


@cache
def demonstration() -> tuple[Model, Card]:
    """The demonstration without its fit, so that no other file decides about these tests."""
    profile = load_profile(PROFILE)
    return model_of(profile), card_of(profile)


def shown(table: CardTable) -> np.ndarray:
    return table.state <= CellState.FULL_THROTTLE


def of_card(card: Card, supply: Supply) -> tuple[RangeTable, ...]:
    return range_tables(card.tables, supply, units=card.choices.units, fuel_density=719.0)


def test_range_and_endurance_are_the_least_that_the_printed_numbers_give() -> None:
    card = make_card(Sketch(tables=4, rpm=5))
    supply = Supply(usable=70.0 * GALLON, reserve=10.0 * GALLON, wind=(-20.0 * KNOT, 0.0))
    first = of_card(card, supply)[0]
    tables = [table for table in card.tables if table.mixture == first.mixture]
    for j, table in enumerate(tables):
        for i in range(len(table.altitude)):
            cells = [
                (60.0 / table.fuel_flow[i, 0, r], float(table.true_airspeed[i, 0, r]))
                for r in range(len(table.rpm))
                if shown(table)[i, 0, r]
            ]
            if not cells:
                assert math.isnan(first.minutes[i, j])
                continue
            for got, due, step in (
                (first.minutes[i, j], min(60.0 * hours for hours, _ in cells), MINUTE_STEP),
                (first.distance[i, j, 1], min(h * v for h, v in cells), DISTANCE_STEP),
                (first.distance[i, j, 0], min(h * (v + 20.0) for h, v in cells), DISTANCE_STEP),
            ):
                assert due - step - 1e-6 < got <= due + 1e-6
                assert got % step == 0.0


def test_headwind_costs_and_tailwind_gives_and_a_wind_not_outrun_leaves_a_mark() -> None:
    card = make_card(Sketch(reasons=0))
    winds = (-30.0 * KNOT, 0.0, 30.0 * KNOT, 400.0 * KNOT)
    for table in of_card(card, Supply(0.25, 0.05, winds)):
        known = np.isfinite(table.minutes)
        assert (np.diff(table.distance[known][:, :3], axis=1) < 0.0).all()
        assert np.isnan(table.distance[..., 3]).all()


def test_more_reserve_never_gives_more_range() -> None:
    card = make_card(Sketch())
    little, much = (of_card(card, Supply(0.25, reserve))[0] for reserve in (0.02, 0.06))
    known = np.isfinite(little.minutes)
    assert (much.minutes[known] < little.minutes[known]).all()


def test_full_throttle_at_every_rpm_is_marked() -> None:
    card = make_card(Sketch(reasons=0))
    table = card.tables[0]
    state = np.where(table.state == CellState.VALUE, CellState.FULL_THROTTLE, table.state)
    marked = replace(card, tables=(replace(table, state=state),))
    found = of_card(marked, Supply(0.25, 0.05))[0]
    assert (found.full_throttle == np.isfinite(found.minutes)).all()


def test_forbidden_cells_count_for_nothing() -> None:
    card = make_card(Sketch(reasons=1))
    table = card.tables[0]
    flow = np.where(table.state == CellState.FORBIDDEN, 0.001, table.fuel_flow)
    lured = replace(card, tables=(replace(table, fuel_flow=flow), *card.tables[1:]))
    supply = Supply(0.25, 0.05)
    np.testing.assert_array_equal(
        of_card(card, supply)[0].minutes, of_card(lured, supply)[0].minutes
    )


def test_tolerance_covers_the_worst_end_of_fuel_flow_and_speed() -> None:
    """Reference: range with the fuel flow up and the speed down by their tolerances, worked out."""
    card = make_card(Sketch(tables=1, reasons=0))
    table = card.tables[0]
    found = of_card(card, Supply(60.0 * GALLON, 0.0))[0]
    assert found.tolerance is not None
    assert table.tolerance is not None
    _, flow_tolerance, speed_tolerance = table.tolerance
    flow, speed = table.fuel_flow[shown(table)], table.true_airspeed[shown(table)]
    worse = 60.0 / (flow + flow_tolerance) * (speed - speed_tolerance)
    assert (60.0 / flow * speed - worse).max() <= found.tolerance[1]
    assert (3600.0 / flow - 3600.0 / (flow + flow_tolerance)).max() <= found.tolerance[0]


def test_fuel_is_told_in_the_unit_of_the_card() -> None:
    assert fuel_in(74.0 * GALLON, "gal/h", fuel_density=719.0) == pytest.approx(74.0)
    assert fuel_in(280.0 * LITRES, "l/h", fuel_density=719.0) == pytest.approx(280.0)
    assert fuel_in(0.1, "kg/h", fuel_density=719.0) == pytest.approx(71.9)
    assert fuel_in(0.1, "lb/h", fuel_density=719.0) == pytest.approx(71.9 / 0.45359237)


def test_card_without_fuel_says_that_it_gives_no_range() -> None:
    profile = replace(load_profile(PROFILE), fuel=None)
    card = card_of(profile)
    assert card.back.ranges == ()
    said = [section for section in card.sections if section.title == "Range and endurance"]
    assert len(said) == 1
    assert "no usable fuel" in said[0].lines[0]


# ------------------------------------------------------------------------------------ best settings


def test_best_settings_are_allowed_as_printed_and_give_what_is_printed() -> None:
    model, card = demonstration()
    choices = card.choices
    for table in card.back.best:
        for settings in table.settings:
            solution = solve(
                model,
                situation_of(
                    np.array(choices.altitude),
                    np.zeros(1),
                    by_density=True,
                    mass=np.array(table.mass),
                    mixture=model.mixture_index(table.mixture),
                ),
                indicated_rpm=settings.rpm,
                indicated_pressure=pressure_from(settings.manifold_pressure, "inHg"),
                with_tolerance=False,
            )
            assert (judge(model, solution).verdict != Verdict.OUTSIDE).all()
            density = model.subject.aircraft.engine.fuel_density
            flow = to_unit(solution.point.fuel_flow / density, "gal/h")
            speed = to_unit(solution.point.true_airspeed, "kt")
            assert ((settings.fuel_flow >= flow - 1e-6) & (settings.fuel_flow < flow + 0.1)).all()
            down = speed - settings.true_airspeed
            assert ((down > -1e-6) & (down < 1.0)).all()


def test_no_cell_of_the_tables_goes_farther_or_lasts_longer_than_the_best() -> None:
    """The search covers every power of the tables and less, so no cell can beat it by more than
    rounding."""
    _, card = demonstration()
    for best in card.back.best:
        ranged, lasting = best.settings
        for table in card.tables:
            if table.mixture != best.mixture:
                continue
            seen = table.state[:, 0, :] == CellState.VALUE
            flow = np.where(seen, table.fuel_flow[:, 0, :], np.inf)
            reach = np.where(seen, table.true_airspeed[:, 0, :], 0.0) / flow
            assert (flow.min(axis=1) >= lasting.fuel_flow - 0.1).all()
            assert (reach.max(axis=1) <= ranged.distance_per_fuel * 1.03).all()


def test_a_finer_search_finds_nothing_much_better(monkeypatch: pytest.MonkeyPatch) -> None:
    model, card = demonstration()
    monkeypatch.setattr("cardgen.tables.best.POWER_STEP", 0.004)
    for coarse, fine in zip(card.back.best, best_tables(model, card.choices), strict=True):
        for one, other in zip(coarse.settings, fine.settings, strict=True):
            if one.aim == "range":
                assert (other.distance_per_fuel <= 1.025 * one.distance_per_fuel).all()


# -------------------------------------------------------------------------------- which row to use


def test_row_is_the_nearest_to_the_density_altitude() -> None:
    """Reference: FAA knowledge-test example, 5 000 ft at +30 °C is 7 800 ft (answer key from
    memory), and any standard temperature, whose density altitude is the pressure altitude."""
    _, card = demonstration()
    table = card.back.rows
    assert table is not None
    row = table.pressure_altitude.index(5000.0)
    cooler, warmer = (table.row[row, table.temperature.index(value)] for value in (20.0, 35.0))
    assert cooler < 7800.0 <= warmer + 500.0
    for altitude, celsius in ((5000.0, 5.1), (8000.0, -0.8)):
        nearest = min(table.temperature, key=lambda value: abs(value - celsius))
        if abs(nearest - celsius) < 0.3 and altitude in table.pressure_altitude:
            place = table.pressure_altitude.index(altitude), table.temperature.index(nearest)
            assert table.row[place] == altitude


def test_row_is_never_carried_on_beyond_the_card() -> None:
    _, card = demonstration()
    table = card.back.rows
    assert table is not None
    altitudes = set(card.tables[0].altitude)
    assert set(table.row[np.isfinite(table.row)]) <= altitudes
    assert np.isnan(table.row[0, 0])  # sea level in the cold lies far below the lowest row
    assert np.isnan(table.row[-1, -1])


def test_row_rises_with_altitude_and_with_temperature() -> None:
    _, card = demonstration()
    table = card.back.rows
    assert table is not None
    for axis in (0, 1):
        change = np.diff(table.row, axis=axis)
        assert (change[np.isfinite(change)] >= 0.0).all()


def test_row_and_change_lead_to_the_right_setting() -> None:
    """At every place, and half a step away from it, what is left is at most what is said."""
    model, card = demonstration()
    table = card.back.rows
    assert table is not None
    rows = list(card.tables[0].altitude)
    seen, changed = 0, 0.0
    for i, altitude in enumerate(table.pressure_altitude):
        for j, celsius in enumerate(table.temperature):
            if np.isnan(table.change[i, j]):
                continue
            place = rows.index(table.row[i, j])
            for up, warm in ((0.0, 0.0), (500.0, 7.5), (-500.0, -7.5), (500.0, -7.5)):
                for printed in card.tables:
                    right = solve(
                        model,
                        Situation(
                            (altitude + up) * FOOT,
                            celsius + warm + 273.15,
                            printed.mass,
                            model.mixture_index(printed.mixture),
                        ),
                        indicated_rpm=np.array(printed.rpm),
                        power_fraction=printed.power_fraction,
                        with_tolerance=False,
                    )
                    held = (printed.state[place, 0] == CellState.VALUE) & ~right.point.full_throttle
                    said = printed.manifold_pressure[place, 0] + table.change[i, j]
                    left = right.indicated_manifold_pressure / INCH_OF_MERCURY - said
                    assert (np.abs(left[held]) <= table.error[0] + 1e-9).all()
                    seen += int(held.sum())
            changed = max(changed, abs(float(table.change[i, j])))
    assert seen > 1000
    assert changed > table.error[0]  # the change is worth its page


def with_choices(**changed: Any) -> Card:
    """The demonstration card with other choices."""
    profile = load_profile(PROFILE)
    return card_of(replace(profile, card=replace(profile.card, **changed)))


def test_card_by_pressure_altitude_needs_no_row_table() -> None:
    assert with_choices(altitude_kind="pressure").back.rows is None


def test_thermometer_rise_is_that_of_the_recovery_formula() -> None:
    """Reference: T_r = T (1 + r (γ − 1)/2 M²), with r = 0.8 at 160 kt about 2.7 °C."""
    _, card = demonstration()
    table = card.back.rows
    assert table is not None
    assert table.rise is not None
    fastest = max(float(np.nanmax(one.true_airspeed)) for one in card.tables)
    speed = float(from_unit(fastest, "kt"))
    assert table.rise == pytest.approx(0.8 * speed**2 / (2.0 * 1004.7), rel=1e-3)


def test_best_settings_state_how_far_they_may_be_off() -> None:
    """As wide as the tolerance of any printed setting, computed here one by one."""
    model, card = demonstration()
    table = card.back.best[0]
    settings = table.settings[0]
    worst = 0.0
    for i, altitude in enumerate(card.choices.altitude):
        one = solve(
            model,
            situation_of(
                np.array(altitude),
                np.zeros(1),
                by_density=True,
                mass=np.array(table.mass),
                mixture=0,
            ),
            indicated_rpm=settings.rpm[i],
            indicated_pressure=pressure_from(settings.manifold_pressure[i : i + 1], "inHg"),
        )
        assert one.tolerance is not None
        worst = max(worst, float(to_unit(one.tolerance.true_airspeed, "kt")[0]))
    assert settings.tolerance[2] == pytest.approx(worst, rel=1e-6)


def test_a_single_row_is_taken_within_half_a_step_of_it() -> None:
    table = with_choices(altitude=(6000.0 * 0.3048,)).back.rows
    assert table is not None
    known = np.isfinite(table.row)
    assert known.any()
    assert not known.all()
    assert set(table.row[known]) == {6000.0}
