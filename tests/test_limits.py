"""Limits: what a finding says, which one wins, and what nobody stated."""

from __future__ import annotations

import json
import time
from dataclasses import asdict, replace

import numpy as np
import pytest
from limits_specimen import (
    ALL,
    BLADES,
    CONTINUOUS,
    CURVE,
    EXACT,
    INHG,
    LEANING,
    LEAST,
    MANUAL,
    SCHEDULE,
    SHEET,
    TAKE_OFF,
    V_NE,
    V_NO,
    flown,
    only,
)

from cardgen.constants import HORSEPOWER, KNOT
from cardgen.limits import (
    Evidence,
    Finding,
    Findings,
    Flown,
    GaugeError,
    Gauges,
    Limits,
    MessageUnits,
    Source,
    Verdict,
    check,
    gauge_notes,
    statements,
)
from cardgen.limits.gauges import UNMEASURED_GAUGES
from cardgen.limits.kinds import CATEGORIES, LeaningCeiling, RpmRange, StatedNone


def _one(findings: Findings, limit: str) -> Finding:
    """Return the only finding of one kind."""
    (found,) = (finding for finding in findings.at() if finding.limit == limit)
    return found


# --- Order of verdicts ---------------------------------------------------------------------------


def test_a_setting_that_keeps_every_stated_limit_is_inside() -> None:
    """The specimen states every category, so nothing is left unknown."""
    findings = check(ALL, EXACT, flown())
    assert findings.verdict_at() == "inside"
    assert findings.not_stated == ()


def test_a_broken_limit_wins_over_what_nobody_stated() -> None:
    """Outside beats unknown: a card must hatch the cell, not merely list a gap."""
    findings = check(Limits(restricted_rpm=(BLADES,)), EXACT, flown(indicated_rpm=2200.0))
    assert findings.verdict_at() == "outside"
    assert findings.at()[0].limit == "restricted_rpm"


def test_what_nobody_stated_wins_over_a_caution() -> None:
    """Unknown beats caution: silence is never taken for allowed."""
    silent = replace(ALL, temperature=())
    findings = check(silent, EXACT, flown(calibrated_airspeed=155.0 * KNOT))
    assert [f.verdict for f in findings.at()][:2] == ["unknown", "caution"]
    assert findings.verdict_at() == "unknown"


def test_findings_come_worst_first() -> None:
    """The first line a pilot reads is the one that matters most."""
    findings = check(replace(ALL, temperature=()), EXACT, flown(indicated_rpm=2200.0))
    order = ["outside", "unknown", "caution", "inside"]
    places = [order.index(finding.verdict) for finding in findings.at()]
    assert places == sorted(places)
    assert places[0] == 0


@pytest.mark.parametrize("category", CATEGORIES)
def test_a_category_that_nobody_stated_is_unknown_and_named(category: str) -> None:
    """Every category by itself; the message says where to look."""
    findings = check(replace(ALL, **{category: ()}), EXACT, flown())
    assert findings.verdict_at() == "unknown"
    assert _one(findings, category).verdict == "unknown"
    assert "approved flight manual" in _one(findings, category).message
    assert len(findings.not_stated) == 1


@pytest.mark.parametrize("category", CATEGORIES)
def test_a_category_that_a_source_says_does_not_apply_is_inside(category: str) -> None:
    """Stated none is knowledge: it is cited and lifts the unknown."""
    none = StatedNone(category, "None for this type", MANUAL)  # type: ignore[arg-type]
    findings = check(replace(ALL, **{category: ()}, stated_none=(none,)), EXACT, flown())
    assert findings.verdict_at() == "inside"
    assert _one(findings, category).source == str(MANUAL)
    assert findings.not_stated == ()


def test_a_number_that_is_not_known_is_never_inside() -> None:
    """NaN keeps no limit and breaks none."""
    for field in (
        "indicated_rpm",
        "indicated_manifold_pressure",
        "pressure_altitude",
        "temperature",
        "power_fraction",
        "power",
        "calibrated_airspeed",
        "full_throttle_manifold_pressure",
    ):
        assert check(ALL, EXACT, flown(**{field: np.nan})).verdict_at() == "unknown", field


# --- Restricted ranges ---------------------------------------------------------------------------


def test_gauge_error_is_told_in_words() -> None:
    """An indicated 2360 above a range that ends at 2350 may be 2310, inside it."""
    findings = check(ALL, UNMEASURED_GAUGES, flown(indicated_rpm=2360.0))
    found = _one(findings, "restricted_rpm")
    assert found.verdict == "outside"
    assert "2360 rpm indicated may be 2310 to 2410 true" in found.message
    assert "restricted 2100-2350 rpm" in found.message
    assert "40 rpm within the range" in found.message
    assert BLADES.wording in found.message
    assert found.source == str(SHEET)
    assert (found.margin, found.unit) == (-40.0, "rpm")


@pytest.mark.parametrize(
    ("rpm", "words", "margin"),
    [(2390.0, "40 rpm above the range", 40.0), (2060.0, "40 rpm below the range", 40.0)],
)
def test_room_beside_a_restricted_range_is_told_with_its_side(
    rpm: float, words: str, margin: float
) -> None:
    """On exact gauges the room is the distance to the nearer end."""
    found = _one(check(ALL, EXACT, flown(indicated_rpm=rpm)), "restricted_rpm")
    assert found.verdict == "inside"
    assert words in found.message
    assert found.margin == margin


@pytest.mark.parametrize(
    ("above", "below", "pressure", "expected"),
    [
        (24.0, None, 23.9, "inside"),
        (24.0, None, 24.0, "outside"),
        (24.0, None, 25.0, "outside"),
        (None, 15.0, 15.1, "inside"),
        (None, 15.0, 15.0, "outside"),
        (None, 15.0, 14.0, "outside"),
        (15.0, 24.0, 14.9, "inside"),
        (15.0, 24.0, 20.0, "outside"),
        (15.0, 24.0, 24.1, "inside"),
        (24.0, 15.0, 25.0, "outside"),  # closed at and above 24, and at and below 15
        (24.0, 15.0, 20.0, "inside"),
        (24.0, 15.0, 14.0, "outside"),
    ],
)
def test_a_conditional_range_is_closed_at_its_manifold_pressures_only(
    above: float | None, below: float | None, pressure: float, expected: str
) -> None:
    """The ends of a condition belong to it, as those of the range do."""
    limit = replace(
        BLADES,
        above_manifold_pressure=None if above is None else above * INHG,
        below_manifold_pressure=None if below is None else below * INHG,
    )
    setting = flown(
        indicated_rpm=2200.0,
        indicated_manifold_pressure=pressure * INHG,
        full_throttle_manifold_pressure=29.0 * INHG,
    )
    assert check(only(restricted_rpm=(limit,)), EXACT, setting).verdict_at() == expected


def test_a_condition_is_met_if_any_true_pressure_meets_it() -> None:
    """23.7 inHg on a gauge that may be 0.4 off may be 24.1, and the range is closed from 24."""
    limit = replace(BLADES, above_manifold_pressure=24.0 * INHG)
    setting = flown(indicated_rpm=2200.0, indicated_manifold_pressure=23.7 * INHG)
    assert check(only(restricted_rpm=(limit,)), EXACT, setting).verdict_at() == "inside"
    assert check(only(restricted_rpm=(limit,)), UNMEASURED_GAUGES, setting).verdict_at() == (
        "outside"
    )


def test_a_range_that_is_not_closed_has_no_margin() -> None:
    """An rpm distance would mean nothing where the range does not apply."""
    limit = replace(BLADES, above_manifold_pressure=26.0 * INHG)
    findings = check(only(restricted_rpm=(limit,)), EXACT, flown(indicated_rpm=2200.0))
    found = _one(findings, "restricted_rpm")
    assert (found.verdict, found.margin, found.unit) == ("inside", None, "")
    assert "not closed at this manifold pressure" in found.message


def test_an_unknown_pressure_leaves_a_conditional_range_unknown_within_it_only() -> None:
    """Clear of the range the condition does not matter."""
    limits = only(restricted_rpm=(replace(BLADES, above_manifold_pressure=24.0 * INHG),))
    setting = flown(indicated_rpm=np.array([2200.0, 2400.0]), indicated_manifold_pressure=np.nan)
    judged = check(limits, EXACT, setting).judgements[0]
    assert list(judged.verdict) == [Verdict.UNKNOWN, Verdict.INSIDE]


@pytest.mark.parametrize(
    ("phase", "expected"),
    [
        (None, "outside"),
        ("cruise", "outside"),
        ("Cruise ", "outside"),
        ("descent", "caution"),
        ("ground", "caution"),
        ("continuous operation", "outside"),  # not a phase known to be another one
    ],
)
def test_a_range_of_another_phase_is_a_caution_and_an_unknown_phase_bars(
    phase: str | None, expected: str
) -> None:
    """A word nobody foresaw must not open the range."""
    limits = only(restricted_rpm=(replace(BLADES, phase=phase),))
    assert check(limits, EXACT, flown(indicated_rpm=2200.0)).verdict_at() == expected


def test_several_ranges_hold_at_once() -> None:
    """A setting between two ranges keeps both, within either breaks one."""
    second = replace(BLADES, name="mount", low_rpm=2450.0, high_rpm=2500.0)
    limits = only(restricted_rpm=(BLADES, second))
    rpm = np.array([2050.0, 2200.0, 2400.0, 2475.0, 2550.0])
    verdict = check(limits, EXACT, flown(indicated_rpm=rpm)).verdict
    assert [Verdict(v).word for v in verdict] == [
        "inside",
        "outside",
        "inside",
        "outside",
        "inside",
    ]


def test_a_range_written_from_high_to_low_is_the_same_range() -> None:
    """Swapped ends must not open it."""
    swapped = replace(BLADES, low_rpm=2350.0, high_rpm=2100.0)
    findings = check(only(restricted_rpm=(swapped,)), EXACT, flown(indicated_rpm=2200.0))
    assert findings.verdict_at() == "outside"


# --- Sources that disagree -----------------------------------------------------------------------


def test_of_two_sources_the_more_restrictive_is_applied_and_both_are_shown() -> None:
    """At each setting: here the manual is stricter above, the sheet below."""
    manual = replace(BLADES, low_rpm=2150.0, high_rpm=2400.0, source=MANUAL, wording="From manual")
    limits = only(restricted_rpm=(BLADES, manual))
    rpm = np.array([2050.0, 2120.0, 2380.0, 2420.0])
    findings = check(limits, EXACT, flown(indicated_rpm=rpm))
    assert list(findings.verdict) == [0, 3, 3, 0]
    found = findings.at((1,))[0]
    assert "sources disagree, the most restrictive is applied" in found.message
    assert "2100-2350 rpm (Invented propeller sheet" in found.message
    assert "2150-2400 rpm (Invented flight manual" in found.message
    assert found.source == f"{SHEET}; {MANUAL}"


def test_two_sources_that_agree_are_cited_together_without_a_disagreement() -> None:
    """The same numbers twice are one limit with two citations."""
    findings = check(only(restricted_rpm=(BLADES, replace(BLADES, source=MANUAL))), EXACT, flown())
    found = _one(findings, "restricted_rpm")
    assert "disagree" not in found.message
    assert found.source == f"{SHEET}; {MANUAL}"


def test_two_sources_for_a_curve_apply_pressure_by_pressure() -> None:
    """Where the curves cross, each is the limit on its own side."""
    other = replace(
        CURVE, rpm=(1800.0, 2700.0), manifold_pressure=(25.0 * INHG, 25.0 * INHG), source=SHEET
    )
    setting = flown(
        indicated_rpm=np.array([1800.0, 1800.0, 2600.0, 2600.0]),
        indicated_manifold_pressure=np.array([22.0, 22.1, 25.0, 25.1]) * INHG,
        full_throttle_manifold_pressure=29.0 * INHG,
    )
    limits = only(manifold_pressure_curve=(CURVE, other))
    assert list(check(limits, EXACT, setting).verdict) == [0, 3, 0, 3]


def test_limits_without_a_name_are_each_their_own() -> None:
    """Two nameless ranges are two ranges, not one that its sources disagree on."""
    first = replace(BLADES, name="")
    second = replace(BLADES, name="", low_rpm=1900.0, high_rpm=1950.0)
    findings = check(only(restricted_rpm=(first, second)), EXACT, flown())
    messages = [f.message for f in findings.at() if f.limit == "restricted_rpm"]
    assert len(messages) == 2
    assert not any("disagree" in message for message in messages)


# --- Curves --------------------------------------------------------------------------------------


def test_a_setting_under_the_curve_says_how_far() -> None:
    """26 inHg are charted at 2400 rpm; 25.4 lie 0.6 below."""
    setting = flown(
        indicated_manifold_pressure=25.4 * INHG, full_throttle_manifold_pressure=29.0 * INHG
    )
    found = _one(check(ALL, EXACT, setting), "manifold_pressure_curve")
    assert found.verdict == "inside"
    assert "0.6 inHg below the curve" in found.message
    assert found.margin == pytest.approx(0.6)
    assert found.unit == "inHg"


@pytest.mark.parametrize("rpm", [1790.0, 2710.0])
def test_beyond_the_ends_of_the_chart_no_continuous_operation_is_allowed(rpm: float) -> None:
    """A chart is not extrapolated."""
    findings = check(only(manifold_pressure_curve=(CURVE,)), EXACT, flown(indicated_rpm=rpm))
    assert findings.verdict_at() == "outside"
    assert "no continuous operation is charted" in findings.at()[0].message
    assert findings.at()[0].margin is None


def test_a_dip_between_readings_is_not_missed() -> None:
    """A charted point within the guard band counts although neither end of the band meets it."""
    dip = replace(
        CURVE,
        rpm=(1800.0, 2390.0, 2400.0, 2410.0, 2700.0),
        manifold_pressure=tuple(p * INHG for p in (27.0, 27.0, 22.0, 27.0, 27.0)),
    )
    limits = only(manifold_pressure_curve=(dip,))
    setting = flown(indicated_rpm=2430.0, indicated_manifold_pressure=23.0 * INHG)
    assert check(limits, EXACT, setting).verdict_at() == "inside"
    assert check(limits, UNMEASURED_GAUGES, setting).verdict_at() == "outside"


def test_a_curve_may_step() -> None:
    """Of two points at one rpm the lower holds there."""
    step = replace(
        CURVE,
        rpm=(1800.0, 2400.0, 2400.0, 2700.0),
        manifold_pressure=tuple(p * INHG for p in (22.0, 22.0, 26.0, 26.0)),
    )
    setting = flown(
        indicated_rpm=np.array([2399.0, 2400.0, 2401.0]),
        indicated_manifold_pressure=25.0 * INHG,
        full_throttle_manifold_pressure=29.0 * INHG,
    )
    verdict = check(only(manifold_pressure_curve=(step,)), EXACT, setting).verdict
    assert list(verdict) == [3, 3, 0]


def test_a_curve_over_points_in_any_order_is_the_same_curve() -> None:
    """An unsorted curve must not be read as another one."""
    shuffled = replace(
        CURVE,
        rpm=(2700.0, 1800.0, 2400.0),
        manifold_pressure=(29.0 * INHG, 22.0 * INHG, 26.0 * INHG),
    )
    rng = np.random.default_rng(7)
    setting = flown(
        indicated_rpm=rng.uniform(1750.0, 2750.0, 500),
        indicated_manifold_pressure=rng.uniform(20.0, 30.0, 500) * INHG,
    )
    np.testing.assert_array_equal(
        check(only(manifold_pressure_curve=(shuffled,)), EXACT, setting).verdict,
        check(only(manifold_pressure_curve=(CURVE,)), EXACT, setting).verdict,
    )


def test_least_pressure_beyond_its_curve_is_unknown() -> None:
    """Nobody said that less is allowed there."""
    findings = check(only(least_manifold_pressure=(LEAST,)), EXACT, flown(indicated_rpm=1700.0))
    assert findings.verdict_at() == "unknown"


def test_least_pressure_charted_over_part_of_the_guard_band_is_unknown_or_broken() -> None:
    """2690 may be 2740, past the chart's 2700: enough pressure is unknown, too little is not."""
    setting = flown(indicated_rpm=2690.0, indicated_manifold_pressure=np.array([20.0, 14.0]) * INHG)
    verdict = check(only(least_manifold_pressure=(LEAST,)), UNMEASURED_GAUGES, setting).verdict
    assert list(verdict) == [Verdict.UNKNOWN, Verdict.OUTSIDE]


def test_one_least_pressure_holds_at_every_rpm() -> None:
    """A number is not a curve with an end."""
    number = replace(LEAST, rpm=(2400.0,), manifold_pressure=(15.0 * INHG,))
    setting = flown(indicated_rpm=1700.0, indicated_manifold_pressure=np.array([14.9, 15.0]) * INHG)
    assert list(check(only(least_manifold_pressure=(number,)), EXACT, setting).verdict) == [3, 0]


def test_beyond_the_ends_of_the_schedule_nothing_is_allowed() -> None:
    """Neither above its last altitude nor below its first."""
    setting = flown(pressure_altitude=np.array([-100.0, 0.0, 6000.0, 6100.0]))
    setting = replace(setting, indicated_manifold_pressure=18.0 * INHG)
    verdict = check(only(altitude_schedule=(SCHEDULE,)), EXACT, setting).verdict
    assert list(verdict) == [3, 0, 0, 3]


# --- Ratings -------------------------------------------------------------------------------------


def test_a_time_limited_rating_used_for_cruise_is_outside_and_says_for_how_long() -> None:
    """What the take-off rating covers beyond the continuous one is not cruise."""
    setting = flown(indicated_rpm=2680.0, power=235.0 * HORSEPOWER)
    found = _one(check(only(ratings=(CONTINUOUS, TAKE_OFF)), EXACT, setting), "ratings")
    assert found.verdict == "outside"
    assert "allowed for 5 min (Take-off) only" in found.message


def test_above_every_rating_no_time_is_offered() -> None:
    """250 hp exceed even the take-off rating."""
    setting = flown(power=250.0 * HORSEPOWER)
    found = _one(check(only(ratings=(CONTINUOUS, TAKE_OFF)), EXACT, setting), "ratings")
    assert found.verdict == "outside"
    assert "allowed for" not in found.message


def test_one_continuous_rating_must_cover_a_setting_as_a_whole() -> None:
    """High pressure from one rating and high rpm from another do not add up to a third."""
    slow = replace(
        CONTINUOUS, name="slow", rpm=2300.0, manifold_pressure=29.0 * INHG, power=250.0 * HORSEPOWER
    )
    fast = replace(
        CONTINUOUS, name="fast", rpm=2700.0, manifold_pressure=25.0 * INHG, power=250.0 * HORSEPOWER
    )
    setting = flown(
        indicated_rpm=np.array([2250.0, 2650.0, 2650.0]),
        indicated_manifold_pressure=np.array([28.5, 24.5, 28.5]) * INHG,
        full_throttle_manifold_pressure=29.0 * INHG,
    )
    assert list(check(only(ratings=(slow, fast)), EXACT, setting).verdict) == [0, 0, 3]


def test_a_rating_is_told_by_what_comes_nearest_to_it() -> None:
    """Neither 150 hp of 230 nor 23 inHg matter where 2590 rpm of 2600 do."""
    found = _one(check(only(ratings=(CONTINUOUS,)), EXACT, flown(indicated_rpm=2590.0)), "ratings")
    assert "10 rpm below the 2600 rpm of Maximum continuous" in found.message
    assert found.margin == pytest.approx(100.0 * 10.0 / 2600.0)


def test_everything_that_exceeds_a_rating_is_told() -> None:
    """5 hp and 80 rpm too much are two reasons to reduce."""
    setting = flown(indicated_rpm=2680.0, power=235.0 * HORSEPOWER)
    found = _one(check(only(ratings=(CONTINUOUS,)), EXACT, setting), "ratings")
    assert (
        "5 hp above the 230 hp of Maximum continuous and "
        "80 rpm above the 2600 rpm of Maximum continuous"
    ) in found.message


def test_a_rating_that_one_source_limits_in_time_is_not_continuous() -> None:
    """The more restrictive of two statements of one rating."""
    limited = replace(CONTINUOUS, source=SHEET, time_limit=1800.0)
    findings = check(only(ratings=(CONTINUOUS, limited)), EXACT, flown())
    assert findings.verdict_at() == "unknown"
    assert "none for continuous use" in _one(findings, "ratings").message


# --- Leaning -------------------------------------------------------------------------------------


def test_a_ceiling_binds_the_mixture_it_names_only() -> None:
    """For a mixture that no ceiling names the category is unknown, by name."""
    findings = check(only(leaning=(LEANING,)), EXACT, flown(mixture="best power"))
    assert findings.verdict_at() == "unknown"
    assert findings.not_stated == ("leaning limits for mixture best power",)


def test_a_mixture_that_its_source_sets_no_ceiling_for_is_inside() -> None:
    """Full rich, say: stated, with neither number."""
    free = LeaningCeiling("rich", "full rich", "Full rich at any power", MANUAL)
    findings = check(
        only(leaning=(LEANING, free)), EXACT, flown(mixture="full rich", power_fraction=0.95)
    )
    assert findings.verdict_at() == "inside"
    assert "no ceiling" in _one(findings, "leaning").message


def test_enriching_past_the_ceiling_is_a_caution() -> None:
    """At 73 % lean the best-power mixture would give 77 %, above the 75 % of the ceiling."""
    setting = flown(power_fraction=0.73, power_fraction_at_best_power=0.77)
    findings = check(only(leaning=(LEANING,)), EXACT, setting)
    assert findings.verdict_at() == "caution"
    found = _one(findings, "leaning_at_best_power")
    assert "77.0 %" in found.message
    assert "2.0 % above the leaning ceiling" in found.message


def test_under_the_ceiling_with_either_mixture_nothing_is_noted() -> None:
    """No finding at all, rather than one that says nothing."""
    setting = flown(power_fraction=0.65, power_fraction_at_best_power=0.69)
    findings = check(only(leaning=(LEANING,)), EXACT, setting)
    assert findings.verdict_at() == "inside"
    assert not [f for f in findings.at() if f.limit == "leaning_at_best_power"]


# --- Model ---------------------------------------------------------------------------------------


def test_above_full_throttle_is_not_reachable() -> None:
    """24.0 inHg are all there is; 24.5 on an exact gauge cannot be set."""
    setting = flown(indicated_manifold_pressure=24.5 * INHG)
    found = _one(check(ALL, EXACT, setting), "full_throttle")
    assert found.verdict == "outside"
    assert "0.5 inHg above full throttle" in found.message
    assert "not reachable" in found.message


def test_within_the_gauges_band_of_full_throttle_a_setting_may_not_be_reachable() -> None:
    """Nothing breaks there, so only what even the least true value exceeds is outside."""
    pressure = np.array([24.0, 24.3, 24.5]) * INHG
    setting = flown(indicated_manifold_pressure=pressure)
    findings = check(only(), UNMEASURED_GAUGES, setting)
    assert [Verdict(v).word for v in findings.verdict] == ["inside", "caution", "outside"]


@pytest.mark.parametrize(
    ("stop", "words"),
    [("on_fine_stop", "sags to 2230 indicated"), ("on_coarse_stop", "climbs to 2230 indicated")],
)
def test_off_the_governing_range_the_rpm_it_would_take_is_told(stop: str, words: str) -> None:
    """In the tachometer's own numbers: it reads 20 high here."""
    gauges = Gauges(GaugeError((0.0,), (-20.0,), 0.0, measured=True), EXACT.manifold_pressure)
    findings = check(ALL, gauges, flown(**{stop: True}, governed_rpm=2210.0))
    found = _one(findings, "governing_range")
    assert found.verdict == "outside"
    assert words in found.message


def test_an_unknown_governing_range_is_unknown() -> None:
    """A model without stops cannot say that the rpm holds."""
    findings = check(ALL, EXACT, flown(on_fine_stop=None, on_coarse_stop=None))
    assert findings.verdict_at() == "unknown"


@pytest.mark.parametrize(
    ("evidence", "words"),
    [
        (Evidence(pressure_altitude=(0.0, 1500.0)), "ft beyond the limit of the evidence"),
        (Evidence(rpm=(2450.0, 2600.0)), "50 rpm beyond the limit of the evidence"),
        (Evidence(power_fraction=(0.7, 0.8)), "5.0 % beyond the limit of the evidence"),
        (Evidence(temperature=(283.0, 300.0)), "5 °C beyond the limit of the evidence"),
    ],
)
def test_beyond_the_evidence_is_a_caution(evidence: Evidence, words: str) -> None:
    """The fit has seen nothing there; the limit itself is not broken."""
    findings = check(ALL, EXACT, flown(evidence=evidence))
    assert findings.verdict_at() == "caution"
    assert words in findings.at()[0].message


def test_outside_a_gauges_calibration_a_setting_is_unknown_at_best() -> None:
    """A broken limit still shows, since the reading is taken at its worst."""
    tachometer = GaugeError((2380.0, 2600.0), (0.0, 0.0), 5.0, measured=True)
    gauges = Gauges(tachometer, EXACT.manifold_pressure)
    rpm = np.array([2200.0, 2375.0, 2385.0, 2450.0, 2640.0])
    findings = check(only(restricted_rpm=(BLADES,)), gauges, flown(indicated_rpm=rpm))
    words = [Verdict(v).word for v in findings.verdict]
    assert words == ["outside", "outside", "inside", "inside", "unknown"]
    assert "outside what the tachometer was measured at" in findings.at((4,))[0].message


def test_without_level_flight_nothing_is_called_inside() -> None:
    """The model's reason is passed on."""
    setting = flown(
        solved=np.array([True, False]), status=np.array(["ok", "too little power to fly level"])
    )
    findings = check(ALL, EXACT, setting)
    assert list(findings.verdict) == [Verdict.INSIDE, Verdict.UNKNOWN]
    assert "too little power" in findings.at((1,))[0].message


def test_over_square_is_a_fact_judged_by_the_chart() -> None:
    """25 inHg at 2400 rpm is over square and allowed, because the chart allows it."""
    setting = flown(
        indicated_manifold_pressure=25.0 * INHG, full_throttle_manifold_pressure=29.0 * INHG
    )
    findings = check(ALL, EXACT, setting)
    found = _one(findings, "over_square")
    assert findings.verdict_at() == "inside"
    assert found.verdict == "inside"
    assert "which the chart permits: up to 26.0 inHg true" in found.message
    assert str(MANUAL) in found.message


def test_under_square_is_not_mentioned() -> None:
    """There is no rule about it in either direction."""
    assert "over_square" not in [f.limit for f in check(ALL, EXACT, flown()).at()]


def test_over_square_above_the_chart_is_the_charts_finding() -> None:
    """The chart bars it; the fact itself bars nothing."""
    setting = flown(
        indicated_manifold_pressure=27.0 * INHG, full_throttle_manifold_pressure=29.0 * INHG
    )
    findings = check(only(manifold_pressure_curve=(CURVE,)), EXACT, setting)
    assert [f.limit for f in findings.at() if f.verdict == "outside"] == ["manifold_pressure_curve"]
    assert "does not permit" in _one(findings, "over_square").message


# --- Airspeed ------------------------------------------------------------------------------------


def test_the_two_airspeeds_are_two_limits_even_under_one_name() -> None:
    """V_NO is a caution and must not be drawn into V_NE."""
    limits = only(airspeed=(replace(V_NE, name="speeds"), replace(V_NO, name="speeds")))
    knots = np.array([150.0, 151.0, 185.0, 186.0])
    findings = check(limits, EXACT, flown(calibrated_airspeed=knots * KNOT))
    assert [Verdict(v).word for v in findings.verdict] == [
        "inside",
        "caution",
        "caution",
        "outside",
    ]
    assert "disagree" not in findings.at((3,))[0].message


# --- Words, units, shapes ------------------------------------------------------------------------


def test_room_is_never_told_larger_nor_excess_smaller_than_it_is() -> None:
    """0.07 inHg of room are less than 0.1; 0.01 inHg too much are 0.1."""
    limits = only(manifold_pressure_curve=(CURVE,))

    def message(inches: float) -> str:
        setting = flown(
            indicated_manifold_pressure=inches * INHG, full_throttle_manifold_pressure=29.0 * INHG
        )
        return _one(check(limits, EXACT, setting), "manifold_pressure_curve").message

    assert "less than 0.1 inHg below the curve" in message(25.93)
    assert "on the curve" in message(26.0)
    assert "0.1 inHg above the curve" in message(26.01)
    assert "0.1 inHg below the curve" in message(25.81)


def test_messages_and_margins_follow_the_units_asked_for() -> None:
    """A card in hectopascals does not cite its limits in inches."""
    units = MessageUnits(pressure="hPa", speed="km/h", altitude="m", power="kW")
    findings = check(ALL, EXACT, flown(), units=units)
    found = _one(findings, "manifold_pressure_curve")
    assert "hPa" in found.message
    assert "inHg" not in found.message
    assert found.unit == "hPa"
    assert found.margin == pytest.approx(3.0 * INHG / 100.0)
    assert "172 kW" in _one(findings, "ratings").message


def test_temperature_margins_are_differences() -> None:
    """40.15 degrees above the coldest, not 40.15 kelvin turned into Celsius."""
    found = _one(check(ALL, EXACT, flown(temperature=253.15)), "temperature")
    assert found.margin == pytest.approx(10.0)
    fahrenheit = check(
        ALL, EXACT, flown(temperature=253.15), units=MessageUnits(temperature="degF")
    )
    assert _one(fahrenheit, "temperature").margin == pytest.approx(18.0)


def test_findings_are_plain_data() -> None:
    """They are written to JSON as they are, without NaN or infinity."""
    for finding in check(ALL, UNMEASURED_GAUGES, flown()).at():
        text = json.dumps(asdict(finding), allow_nan=False)
        assert set(json.loads(text)) == {
            "limit",
            "verdict",
            "message",
            "source",
            "margin",
            "unit",
        }


def test_an_array_is_judged_element_by_element() -> None:
    """Broadcast shapes, and each element what the scalar gives."""
    rpm = np.linspace(1700.0, 2750.0, 15)[:, None]
    pressure = np.linspace(12.0, 30.0, 10)[None, :] * INHG
    findings = check(
        ALL, UNMEASURED_GAUGES, flown(indicated_rpm=rpm, indicated_manifold_pressure=pressure)
    )
    assert findings.verdict.shape == (15, 10)
    assert np.unique(findings.verdict).size > 1
    for i, j in np.ndindex(15, 10):
        setting = flown(
            indicated_rpm=float(rpm[i, 0]), indicated_manifold_pressure=float(pressure[0, j])
        )
        alone = check(ALL, UNMEASURED_GAUGES, setting)
        assert alone.verdict_at() == findings.verdict_at((i, j))
        assert alone.at() == findings.at((i, j))


def test_a_limit_without_a_number_allows_nothing() -> None:
    """An rpm range with both ends open is no knowledge."""
    empty = RpmRange("nothing", "", MANUAL)
    assert check(only(rpm_range=(empty,)), EXACT, flown()).verdict_at() == "unknown"


def test_gauge_notes_say_what_was_not_measured() -> None:
    """The guard band is printed on the card."""
    tachometer, pressure = gauge_notes(UNMEASURED_GAUGES, MessageUnits())
    assert "not measured" in tachometer
    assert "±50 rpm" in tachometer
    assert "±0.4 inHg" in pressure
    measured = Gauges(
        GaugeError((0.0,), (0.0,), 10.0, True, "optical tachometer", "2024-05-01"),
        EXACT.manifold_pressure,
    )
    assert "optical tachometer, 2024-05-01" in gauge_notes(measured, MessageUnits())[0]


def test_a_source_is_cited_without_empty_parts() -> None:
    """Document, section and revision, as far as they are given."""
    assert str(Source("Manual", "", "rev 2")) == "Manual, rev 2"


def test_a_bare_section_or_revision_is_cited_with_what_it_counts() -> None:
    """ "note 4, 2" would leave the reader to guess."""
    assert str(Source("Sheet", "note 4", "2")) == "Sheet, note 4, revision 2"
    assert str(Source("Manual", "2.2", "C")) == "Manual, section 2.2, revision C"
    assert str(MANUAL) == "Invented flight manual, section 2, revision 3"


def test_every_stated_limit_is_listed_in_words_with_wording_and_source() -> None:
    """For the notes of a card: one line for each, what does not apply among them."""
    listed = statements(replace(ALL, airspeed=()), MessageUnits())
    assert [s.category for s in listed] == [
        "restricted_rpm",
        "manifold_pressure_curve",
        "ratings",
        "ratings",
        "rpm_range",
        "least_manifold_pressure",
        "leaning",
        "altitude_schedule",
        "altitude",
        "temperature",
    ]
    assert listed[0].text == "restricted 2100-2350 rpm"
    assert (listed[0].wording, listed[0].source) == (BLADES.wording, str(SHEET))
    none = statements(only(restricted_rpm=(BLADES,)), MessageUnits())[-1]
    assert none.text == "approved temperatures: none"
    assert none.source == str(MANUAL)


def test_a_hundred_thousand_settings_take_well_under_a_second() -> None:
    """No loop over settings: the card's limits cost less than its numbers."""
    rng = np.random.default_rng(3)
    count = 100_000
    settings: Flown = flown(
        indicated_rpm=rng.uniform(1700.0, 2750.0, count),
        indicated_manifold_pressure=rng.uniform(12.0, 30.0, count) * INHG,
        pressure_altitude=rng.uniform(0.0, 6000.0, count),
        power_fraction=rng.uniform(0.4, 1.0, count),
        evidence=Evidence((0.0, 3000.0), (2000.0, 2600.0), (0.5, 0.8), (250.0, 300.0)),
    )
    start = time.perf_counter()
    verdict = check(ALL, UNMEASURED_GAUGES, settings).verdict
    assert time.perf_counter() - start < 0.5
    assert np.unique(verdict).size >= 3
