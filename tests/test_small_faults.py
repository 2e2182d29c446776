"""Small things that no other test noticed when they were put wrong on purpose."""

from __future__ import annotations

import csv
import re
from collections import defaultdict
from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import pytest
from limits_specimen import ALL, BLADES, CONTINUOUS, EXACT, INHG, MANUAL, SHEET, flown, only

from cardgen.aircraft import Condition, Setting
from cardgen.cli.main import run
from cardgen.constants import HORSEPOWER
from cardgen.cruise import CruiseStatus, solve_cruise
from cardgen.engine import Engine
from cardgen.limits import GaugeError, Gauges, allowed_nearby, check
from cardgen.limits.finding import Finding, Findings
from cardgen.limits.kinds import ManifoldPressureCurve, RestrictedRpm, Source
from cardgen.limits.nearby import rank_nearby
from cardgen.limits.statement import state_all
from cardgen.limits.wording import MessageUnits
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.card_content import card_of
from cardgen.profile.fit_file import learned_for
from cardgen.propeller.blade import blade_5868_9
from cardgen.tables.card import CellState
from cardgen.tables.choices import SecondUnits, UnitSet
from cardgen.tables.printed import decimals, in_second_units
from cardgen.tables.solution import Situation, solve

DEMO = Path(__file__).parent.parent / "profiles" / "aircraft" / "specimen.yaml"
BAND = Gauges(
    GaugeError((0.0,), (0.0,), 30.0, measured=True),
    GaugeError((0.0,), (0.0,), 0.5 * INHG, measured=True),
)
"""Gauges that may be 30 rpm and half an inch off either way."""


def one(findings: Findings, limit: str) -> Finding:
    """Return the only finding of a kind."""
    (found,) = (finding for finding in findings.at() if finding.limit == limit)
    return found


def test_three_other_settings_are_offered_and_no_more() -> None:
    """A pilot chooses among three; a fourth is no help on a knee."""
    found = allowed_nearby(
        ALL,
        EXACT,
        indicated_rpm=2200.0,
        solve=lambda rpm: flown(indicated_rpm=rpm, solved=np.ones(rpm.shape, dtype=np.bool_)),
    )
    assert len(found) == 3


def test_excess_over_a_rating_is_told_at_the_greatest_true_value() -> None:
    """2590 rpm that may be 2620 is 20 rpm above 2600, not 40 below."""
    found = one(check(only(ratings=(CONTINUOUS,)), BAND, flown(indicated_rpm=2590.0)), "ratings")
    assert "20 rpm above the 2600 rpm of Maximum continuous" in found.message


def test_a_range_by_two_sources_is_noted_as_wide_as_both() -> None:
    """What the tachometer reads covers the range of either source, widened by its band."""
    other = replace(BLADES, low_rpm=2000.0, high_rpm=2300.0, source=Source("Another sheet"))
    findings = check(only(restricted_rpm=(BLADES, other)), BAND, flown())
    (judgement,) = (j for j in findings.judgements if j.limit == "restricted_rpm")
    assert judgement.statement.endswith("1970-2380 rpm as the tachometer reads")


@pytest.mark.parametrize("condition", ["above_manifold_pressure", "below_manifold_pressure"])
def test_a_conditional_range_tells_the_manifold_pressure(condition: str) -> None:
    """Whether it is closed hangs on the pressure, so the pressure is in the message."""
    closed = replace(BLADES, **{condition: 20.0 * INHG})
    found = one(check(only(restricted_rpm=(closed,)), EXACT, flown()), "restricted_rpm")
    assert "23.0 inHg" in found.message
    plain = one(check(only(restricted_rpm=(BLADES,)), EXACT, flown()), "restricted_rpm")
    assert "inHg" not in plain.message


def test_the_fuel_of_an_engine_weighs_six_pounds_a_gallon_unless_told() -> None:
    """Common practice, no source: 6.0 lb per US gallon, 719 kg/m³."""
    (default,) = (field.default for field in fields(Engine) if field.name == "fuel_density")
    assert default == pytest.approx(6.0 * 0.45359237 / 3.785411784e-3)


def test_what_the_propeller_table_does_not_cover_is_no_want_of_power() -> None:
    """A tip beyond the table is another answer than an aeroplane too heavy to fly."""
    profile = load_profile(DEMO)
    # In cold air the tip of 2850 rpm is as far outside as that of 4500 rpm.
    setting = Setting(np.array([4500.0, 2850.0, 2400.0]), profile.mixtures[0], power=264e3)
    air = Condition(1e5, 231.0, np.array([1200.0, 1850.0, 20_000.0]))
    point = solve_cruise(profile.aircraft, air, setting=setting)
    outside, short = CruiseStatus.OUTSIDE_MODEL, CruiseStatus.NO_LEVEL_FLIGHT
    assert point.status.tolist() == [outside, outside, short]


def test_two_readings_of_one_limit_are_shown_with_who_states_them() -> None:
    """Two sections of one document that differ are stated twice, not two sources that disagree."""
    again = RestrictedRpm("blades", 2100.0, 2360.0, "2100 to 2360", SHEET)
    text, source = state_all([BLADES, again], MessageUnits())
    assert text.startswith("stated twice, the most restrictive is applied: ")
    assert "2100-2350" in text
    assert "2100-2360" in text
    assert source == str(SHEET)


@pytest.mark.parametrize(("share", "noted"), [(0.70, True), (0.78, False)])
def test_enriching_is_no_second_reason_where_the_lean_mixture_is_over_itself(
    share: float, noted: bool
) -> None:
    """At 78 % of a 75 % ceiling the ceiling is broken; that a richer mixture would too is noise."""
    setting = flown(power_fraction=share, power_fraction_at_best_power=0.82)
    found = [finding.limit for finding in check(ALL, EXACT, setting).at()]
    assert ("leaning_at_best_power" in found) == noted


def test_what_comes_nearest_to_a_rating_is_told_by_its_share() -> None:
    """0.1 hp of 230 is nearer than 10 rpm of 2600, though watts are more than turns."""
    setting = flown(indicated_rpm=2590.0, power=229.9 * HORSEPOWER)
    found = one(check(only(ratings=(CONTINUOUS,)), EXACT, setting), "ratings")
    said, _, _ = found.message.partition(";")
    assert "the 230 hp of Maximum continuous" in said
    assert "the 2600 rpm of Maximum continuous" not in said


def test_off_the_governing_range_the_margin_is_the_rpm_lost() -> None:
    """100 rpm of sag, not the sum of both speeds."""
    found = one(check(ALL, EXACT, flown(on_fine_stop=True, governed_rpm=2300.0)), "governing_range")
    assert found.margin == pytest.approx(-100.0)
    assert found.unit == "rpm"


def test_a_range_that_one_source_closes_conditionally_tells_the_manifold_pressure() -> None:
    """One condition among two sources is enough for the pressure to matter."""
    closed = replace(BLADES, above_manifold_pressure=20.0 * INHG, source=Source("Another sheet"))
    limits = only(restricted_rpm=(BLADES, closed))
    assert "23.0 inHg" in one(check(limits, EXACT, flown()), "restricted_rpm").message


def test_what_a_falling_chart_permits_over_square_is_its_least_in_the_band() -> None:
    """At 2200 ± 30 rpm a chart that falls permits what it gives at 2230."""
    chart = ManifoldPressureCurve(
        "chart", (1800.0, 2700.0), (29.0 * INHG, 20.0 * INHG), "See chart", MANUAL
    )
    setting = flown(indicated_rpm=2200.0, indicated_manifold_pressure=23.0 * INHG)
    said = one(check(only(manifold_pressure_curve=(chart,)), BAND, setting), "over_square").message
    assert "up to 24.7 inHg true at this rpm" in said


@pytest.mark.parametrize(
    "conditions", [("above",), ("below",), ("above", "below"), ("below", "above")]
)
def test_an_unknown_pressure_leaves_every_kind_of_condition_unknown(
    conditions: tuple[str, ...],
) -> None:
    """Whether a range is closed at a pressure nobody knows, nobody knows."""
    pressures = dict(zip(conditions, (20.0 * INHG, 25.0 * INHG), strict=False))
    closed = replace(
        BLADES,
        above_manifold_pressure=pressures.get("above"),
        below_manifold_pressure=pressures.get("below"),
    )
    setting = flown(indicated_rpm=2200.0, indicated_manifold_pressure=np.nan)
    assert check(only(restricted_rpm=(closed,)), EXACT, setting).verdict_at() == "unknown"


def test_the_packaged_blade_form_is_the_published_one() -> None:
    """NACA TR 640 and 658, design 5868-9, digit for digit."""
    path = Path(__file__).parent / "published" / "blade_form_5868-9.csv"
    lines = [line for line in path.read_text().splitlines() if not line.startswith("#")]
    published = np.array([[float(cell) for cell in line.split(",")[:4]] for line in lines[1:]])
    blade = blade_5868_9()
    ours = np.column_stack(
        [blade.radius_fraction, blade.chord_to_diameter, blade.thickness_to_chord, blade.twist]
    )
    published[:, 3] = np.radians(published[:, 3])
    np.testing.assert_allclose(ours, published, rtol=1e-12)


def test_a_density_altitude_card_states_its_largest_error(
    capsys: pytest.CaptureFixture[str],
) -> None:
    """What its note says is what `cardgen table` gives 20 °C off standard, rounded up."""
    profile = load_profile(DEMO)
    card = card_of(profile)
    (note,) = (note for note in card.notes if note.startswith("Rows are density altitudes"))
    found = re.search(r"at most ([0-9.]+) inHg, ([0-9.]+) gal/h and ([0-9]+) kt", note)
    assert found is not None
    altitudes = ",".join(f"{altitude:.6f}m" for altitude in profile.card.altitude)
    words = ["table", str(DEMO), "--no-fit", "--density-altitude", altitudes, "--isa", "-20,0,20"]
    assert run([*words, "--csv"]) == 0
    rows = list(csv.DictReader(capsys.readouterr().out.splitlines()))
    by_cell = defaultdict(dict)
    for row in rows:
        keys = ("density_altitude_ft", "rpm", "asked_percent_power", "mixture")
        cell = tuple(row[k] if k == "mixture" else f"{float(row[k]):.3f}" for k in keys)
        by_cell[cell][round(float(row["isa_deviation_c"]))] = row
    names = ("manifold_pressure_inhg", "fuel_flow_gph", "true_airspeed_kt")
    worst = dict.fromkeys(names, 0.0)
    for cell in by_cell.values():
        for other in (-20, 20):
            pair = (cell[0], cell[other])
            if all(row["full_throttle"] == "0" and row["power_hp"] for row in pair):
                for name in names:
                    change = abs(float(pair[1][name]) - float(pair[0][name]))
                    worst[name] = max(worst[name], change)
    for name, stated, step in zip(names, found.groups(), (0.1, 0.1, 1.0), strict=True):
        assert 0.0 <= float(stated) - worst[name] < step + 1e-6, name


def test_the_tolerance_of_a_table_is_the_largest_of_its_numbers() -> None:
    """No more, or nobody would believe it; no less, or somebody would."""
    profile = load_profile(DEMO)
    card, model = card_of(profile, learned_for(profile)), model_of(profile, learned_for(profile))
    altitude = np.array(profile.card.altitude)[:, None, None]
    for table in card.tables:
        found = solve(
            model,
            Situation(
                altitude, 288.15 - 0.0065 * altitude, table.mass, model.mixture_index(table.mixture)
            ),
            indicated_rpm=np.array(table.rpm),
            power_fraction=table.power_fraction,
        ).tolerance
        assert found is not None
        assert table.tolerance is not None
        shown = table.state <= CellState.FULL_THROTTLE
        assert shown.any()
        assert table.tolerance[0] == pytest.approx(found.manifold_pressure[shown].max() / INHG)
        assert table.tolerance[2] == pytest.approx(found.true_airspeed[shown].max() * 3600 / 1852)


@pytest.mark.parametrize(
    ("above", "below"), [(20.0, None), (None, 25.0), (20.0, 25.0), (24.0, 22.0), (22.0, 20.0)]
)
def test_a_range_that_is_closed_here_is_never_told_as_open(
    above: float | None, below: float | None
) -> None:
    """Outside by 100 rpm, not "not closed at this manifold pressure"; or inside and told so."""
    closed = replace(
        BLADES,
        above_manifold_pressure=None if above is None else above * INHG,
        below_manifold_pressure=None if below is None else below * INHG,
    )
    setting = flown(indicated_rpm=2250.0)  # at 23.0 inHg
    found = one(check(only(restricted_rpm=(closed,)), EXACT, setting), "restricted_rpm")
    is_closed = (above, below) != (24.0, 22.0)
    assert found.verdict == ("outside" if is_closed else "inside")
    assert (found.margin is None) == (not is_closed)
    assert ("not closed at this manifold pressure" in found.message) == (not is_closed)


def test_ranking_offers_three_unless_asked_for_another_number() -> None:
    """The same three, whoever asks."""
    rpm = np.arange(2000.0, 2300.0, 25.0)
    setting = flown(indicated_rpm=rpm, solved=np.ones(rpm.shape, dtype=np.bool_))
    findings = check(only(), EXACT, setting)
    assert len(rank_nearby(findings, setting, indicated_rpm=2150.0)) == 3
    assert len(rank_nearby(findings, setting, indicated_rpm=2150.0, count=2)) == 2


@pytest.mark.parametrize(
    ("pressure", "flow", "places"),
    [
        ("inHg", "gal/h", (1, 1, 0)), ("cmHg", "impgal/h", (1, 1, 0)), ("hPa", "l/h", (0, 0, 0)),
        ("mmHg", "lb/h", (0, 0, 0)), ("mbar", "kg/h", (0, 0, 0)), ("kPa", "l/h", (1, 0, 0)),
    ],
)  # fmt: skip
def test_numbers_are_as_fine_as_a_gauge_is_read(
    pressure: str, flow: str, places: tuple[int, int, int]
) -> None:
    """A tenth of an inch, a hectopascal, a tenth of a gallon, a litre, a pound, a knot."""
    found = decimals(UnitSet(pressure=pressure, fuel_flow=flow))
    assert (found.pressure, found.fuel_flow, found.speed) == places


def test_second_units_are_rounded_to_the_safe_side_too() -> None:
    """10.1 gal/h are 38.23 L/h, which is 39; 150 kt are 277.8 km/h, which is 277."""
    second = SecondUnits(pressure="hPa", fuel_flow="l/h", speed="km/h")
    found = in_second_units(24.5, 10.1, 150.0, units=UnitSet(), second=second)
    assert found == (830.0, 39.0, 277.0)
