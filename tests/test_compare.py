"""Comparison of two configurations: settings, tolerances of differences, limits, words."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from demo_profiles import THREE_BLADES, TWO_BLADES, demo_folder, edit
from hypothesis import given, settings
from hypothesis import strategies as st

from cardgen.compare import QUANTITIES, Change, compare, scale_of
from cardgen.compare.joint import common_names, shifts
from cardgen.compare.limits import compare_limits
from cardgen.compare.settings import compare_settings
from cardgen.fit import PARTS, Knowledge, Parameter
from cardgen.fit.tolerance import COVERAGE_FACTOR
from cardgen.limits import MessageUnits
from cardgen.limits.kinds import Limits, RestrictedRpm, Source, StatedNone
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.document import Profile
from cardgen.tables.choices import CardChoices
from cardgen.tables.solution import Model, solve

UNITS = MessageUnits()
SOURCE = Source("Invented data sheet", "note 1", "1")


@pytest.fixture(scope="module")
def profiles(tmp_path_factory: pytest.TempPathFactory) -> tuple[Profile, Profile]:
    """The demonstration aircraft with two and with three blades."""
    two = demo_folder(tmp_path_factory.mktemp("two") / "p")
    three = edit(demo_folder(tmp_path_factory.mktemp("three") / "p"), TWO_BLADES, THREE_BLADES)
    return load_profile(two), load_profile(three)


@pytest.fixture(scope="module")
def few(profiles: tuple[Profile, Profile]) -> CardChoices:
    """A card of few cells."""
    card = profiles[0].card
    return replace(card, rpm=(2500.0,), altitude=card.altitude[::5], power_fraction=(0.55, 0.65))


def fuel_scaled(model: Model, by: float) -> Model:
    """The same aircraft, every mixture burning so much more."""
    knowledge = model.knowledge
    values = knowledge.values.copy()
    for place, name in enumerate(knowledge.names):
        if name.startswith("fuel_scale:"):
            values[place] *= by
    return replace(model, knowledge=replace(knowledge, values=values))


def test_an_aircraft_compared_with_itself_has_not_moved(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """All parts in common: differences are zero, and only scatter is left in tolerances."""
    model = model_of(profiles[0])
    found = compare(model, model, choices=few, unchanged=PARTS)
    assert found.verdict == "No setting moved by as much as a printed step."
    assert found.limits == ()
    scatter = COVERAGE_FACTOR * np.sqrt(2.0) * model.knowledge.scatter
    for change in found.changes:
        assert np.nanmax(np.abs(change.difference)) == 0.0
        assert not change.significant.any()
        density = model.subject.aircraft.engine.fuel_density
        wanted = scatter / [1.0, density, 1.0]
        assert change.tolerance[..., :3] == pytest.approx(
            np.broadcast_to(wanted, change.tolerance[..., :3].shape), rel=1e-6
        )


def test_ten_percent_more_fuel_is_ten_percent_more_flow_and_one_eleventh_less_range(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """Arithmetic: pressure and speed stay, range per gallon is speed over flow."""
    model = model_of(profiles[0])
    for change in compare_settings(
        model, fuel_scaled(model, 1.1), choices=few, basis="percent", unchanged=()
    ):
        moved = change.difference / change.old.values
        assert moved[..., 0] == pytest.approx(0.0, abs=1e-12)
        assert moved[..., 1] == pytest.approx(0.1, rel=1e-9)
        assert moved[..., 2] == pytest.approx(0.0, abs=1e-12)
        assert moved[..., 3] == pytest.approx(-1.0 / 11.0, rel=1e-9)


def test_a_new_rating_is_told_first_and_moves_nothing_at_the_same_power(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """A percent of a rating 10 % higher is 10 % more power; the aircraft is the same."""
    old = model_of(profiles[0])
    new = replace(
        old, percent_of=replace(old.percent_of, power=1.1 * old.percent_of.power, name="New rating")
    )
    found = compare(old, new, choices=few, unchanged=PARTS)
    assert found.verdict.startswith(
        "A percent is another power now: 100 % is 246 hp (New rating), it was 224 hp"
    )
    assert "At the same percent: manifold pressure moved most, by +" in found.verdict
    assert "at the same power: no setting moved by as much as a printed step" in found.verdict
    by_basis = {
        basis: [c for c in found.changes if c.basis == basis] for basis in ("percent", "power")
    }
    assert len(by_basis["percent"]) == len(by_basis["power"]) == 2
    for change in by_basis["power"]:
        assert np.abs(change.difference[change.compared]).max() < 1e-6 * 101325.0
        assert change.new.solution.point.power == pytest.approx(change.old.solution.point.power)
    for change in by_basis["percent"]:
        shown = change.compared
        ratio = change.new.solution.point.power[shown] / change.old.solution.point.power[shown]
        assert ratio == pytest.approx(1.1)
        assert (change.difference[shown][:, 0] > 0.0).all()


def test_without_a_new_rating_there_is_one_basis(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """The same percent is the same power: once is enough."""
    old, new = (model_of(profile) for profile in profiles)
    found = compare(old, new, choices=few, unchanged=("engine", "mixtures", "airframe"))
    assert {change.basis for change in found.changes} == {"percent"}
    assert not found.verdict.startswith("A percent")


def test_the_tolerance_of_a_difference_is_what_drawing_aircraft_at_random_gives(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """Common parameters drawn once for both aircraft, the propeller's for each.

    An independent reckoning: 1500 pairs of aircraft drawn from the prior, the deviation of the
    difference of their airspeeds counted. 1500 draws know a deviation to 1.8 %; the model's
    curvature is in both.
    """
    old, new = (model_of(profile) for profile in profiles)
    choices = replace(few, altitude=few.altitude[:1], power_fraction=(0.65,), mixtures=("Economy",))
    (change,) = compare_settings(
        old, new, choices=choices, basis="percent", unchanged=("engine", "mixtures", "airframe")
    )
    rng = np.random.default_rng(4)
    knowledge = old.knowledge
    drawn = rng.multivariate_normal(knowledge.values, knowledge.covariance, size=1500)
    place = knowledge.names.index("installation_factor")
    other = drawn.copy()
    other[:, place] = new.knowledge.values[place] + rng.normal(size=1500) * np.sqrt(
        new.knowledge.covariance[place, place]
    )
    speeds = []
    for model, values in ((old, drawn), (new, other)):
        # Sets of parameters of shape (k, 1) broadcast against the one point.
        many = replace(model, knowledge=replace(model.knowledge, values=values))
        solution = change.old.solution
        speeds.append(
            solve(
                many,
                solution.situation,
                indicated_rpm=np.array([2500.0]),
                power_fraction=np.array([0.65]),
                with_tolerance=False,
            ).point.true_airspeed.reshape(-1)
        )
    spread = np.nanstd(speeds[1] - speeds[0])
    alone = np.nanstd(speeds[0])
    scatter = np.sqrt(2.0) * knowledge.scatter[2]
    wanted = COVERAGE_FACTOR * np.hypot(spread, scatter)
    assert change.tolerance[0, 0, 0, 0, 0, 2] == pytest.approx(wanted, rel=0.06)
    assert spread < 0.5 * alone  # what both have in common dropped out


def test_what_is_not_in_common_widens_the_tolerance(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """The more parts are known to be the same, the surer the difference."""
    old, new = (model_of(profile) for profile in profiles)
    widths = [
        np.nanmean(
            compare_settings(old, new, choices=few, basis="percent", unchanged=parts)[0].tolerance[
                ..., 2
            ]
        )
        for parts in ((), ("airframe",), ("airframe", "engine", "mixtures"))
    ]
    assert widths[0] > 1.2 * widths[1]
    assert widths[1] > widths[2]


def knowledge_of(names: tuple[str, ...], covariance: np.ndarray, shift: float = 0.0) -> Knowledge:
    return Knowledge(
        names=names,
        values=np.arange(1.0, len(names) + 1.0) + shift,
        covariance=covariance,
        scatter=np.ones(3),
    )


LISTED = (
    Parameter("a", "engine", 1.0, -10.0, 10.0),
    Parameter("b", "engine", 1.0, -10.0, 10.0),
    Parameter("c", "propeller", 1.0, -10.0, 10.0),
)


@settings(max_examples=60, deadline=None)
@given(st.integers(0, 2**32 - 1))
def test_shifts_give_back_the_covariance_of_either_aircraft_and_share_the_common_part(
    seed: int,
) -> None:
    """Outer products of the shifts sum to the covariances; common parameters shift alike."""
    rng = np.random.default_rng(seed)
    roots = rng.normal(size=(3, 3)) * [[1.0], [1e-3], [1e2]]  # as different in size as in the model
    covariance = roots @ roots.T + np.diag([1e-2, 1e-8, 1e2])
    later = covariance.copy()
    later[:2, 2] *= 0.5
    later[2, :2] *= 0.5
    later[2, 2] *= 2.0
    old, new = knowledge_of(("a", "b", "c"), covariance), knowledge_of(("a", "b", "c"), later)
    common = common_names(old, new, listed=LISTED, unchanged=("engine",))
    assert common == ("a", "b")
    along = shifts(old, new, common=common)
    for moved, wanted in ((along.old, covariance), (along.new, later)):
        deviation = np.sqrt(np.diag(wanted))
        scaled = (moved.T @ moved - wanted) / np.outer(deviation, deviation)
        assert np.abs(scaled).max() < 1e-9
    assert along.old[:, :2] == pytest.approx(along.new[:, :2])


def test_a_part_that_was_fitted_anew_is_no_longer_taken_as_known_alike() -> None:
    """Another value or another covariance of the same part is another knowledge of it."""
    old = knowledge_of(("a", "b", "c"), np.eye(3))
    moved = knowledge_of(("a", "b", "c"), np.eye(3), shift=0.1)
    surer = knowledge_of(("a", "b", "c"), np.diag([1.0, 0.5, 1.0]))
    assert common_names(old, old, listed=LISTED, unchanged=("engine",)) == ("a", "b")
    assert common_names(old, moved, listed=LISTED, unchanged=("engine",)) == ()
    assert common_names(old, surer, listed=LISTED, unchanged=("engine", "propeller")) == ("c",)
    assert common_names(old, old, listed=LISTED, unchanged=()) == ()


def restricted(name: str, low: float, high: float, source: Source = SOURCE) -> RestrictedRpm:
    return RestrictedRpm(name, low, high, f"Avoid {low} to {high}.", source)


def test_limits_that_appeared_moved_vanished_or_changed_their_source_are_told_apart() -> None:
    """By name within a kind; a limit whose numbers stay is not said to have moved."""
    other = Source("Another data sheet", "note 2", "3")
    old = Limits(
        restricted_rpm=(
            restricted("Gone", 1800.0, 1900.0),
            restricted("Moved", 2000.0, 2100.0),
            restricted("Same", 2200.0, 2250.0),
            restricted("Resourced", 2300.0, 2350.0),
        )
    )
    new = Limits(
        restricted_rpm=(
            restricted("Moved", 2000.0, 2150.0),
            restricted("Same", 2200.0, 2250.0),
            restricted("Resourced", 2300.0, 2350.0, other),
            restricted("Fresh", 2400.0, 2450.0),
        )
    )
    found = {change.name: change for change in compare_limits(old, new, units=UNITS)}
    assert {name: change.kind for name, change in found.items()} == {
        "Gone": "vanished",
        "Moved": "moved",
        "Resourced": "new source",
        "Fresh": "appeared",
    }
    assert str(found["Moved"]) == (
        "Moved moved: before restricted 2000-2100 rpm (Invented data sheet, note 1, revision 1); "
        "now restricted 2000-2150 rpm (Invented data sheet, note 1, revision 1)"
    )
    assert str(found["Gone"]).startswith("Gone vanished: restricted 1800-1900 rpm (Invented")
    assert "Another data sheet, note 2, revision 3" in str(found["Resourced"])
    assert compare_limits(old, old, units=UNITS) == ()


def test_a_kind_of_limit_that_nobody_states_any_more_is_told() -> None:
    """What is unknown now must not pass for allowed."""
    none = StatedNone("altitude_schedule", "No schedule.", SOURCE)
    (lost,) = compare_limits(Limits(stated_none=(none,)), Limits(), units=UNITS)
    assert lost.kind == "no longer stated"
    assert "look it up in the approved flight manual" in str(lost)
    (known,) = compare_limits(Limits(), Limits(stated_none=(none,)), units=UNITS)
    assert known.kind == "now stated"


def test_a_setting_that_a_new_restricted_range_closes_is_counted_in_the_verdict(
    profiles: tuple[Profile, Profile],
) -> None:
    """What was flown for years and is forbidden from today stands in the first sentence."""
    old, new = (model_of(profile) for profile in profiles)
    found = compare(
        old, new, choices=profiles[1].card, unchanged=("engine", "mixtures", "airframe")
    )
    lost = sum(int(change.lost.sum()) for change in found.changes)
    assert lost > 0
    assert f"{lost} settings allowed before are not allowed now" in found.verdict
    rpm = np.array(profiles[1].card.rpm)
    for change in found.changes:
        assert set(rpm[np.argwhere(change.lost)[:, -1]]) <= {2350.0}  # 2300-2400 is closed


def test_the_verdict_names_what_moved_most_and_calls_it_significant_only_beyond_its_tolerance(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """A change of half the tolerance is not significant, one of twice the tolerance is."""
    model = model_of(profiles[0])
    base = compare(model, model, choices=few, unchanged=PARTS)
    share = max(
        float(np.nanmax(change.tolerance[..., 1] / change.old.values[..., 1]))
        for change in base.changes
    )
    small = compare(model, fuel_scaled(model, 1.0 + 0.3 * share), choices=few, unchanged=())
    assert small.verdict.startswith("Fuel flow moved most, by +")
    assert "not significant" in small.verdict
    # Nothing is in common here, so that the tolerance is wider than it was above.
    wide = max(
        float(np.nanmax(change.tolerance[..., 1] / change.old.values[..., 1]))
        for change in small.changes
    )
    large = compare(model, fuel_scaled(model, 1.0 + 2.5 * wide), choices=few, unchanged=())
    assert large.verdict.startswith("Fuel flow moved most, by +")
    assert "significant, everywhere more than its tolerance" in large.verdict


def test_settings_at_full_throttle_are_not_compared(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """They do not give the power asked, so that a difference would be of two powers."""
    old, new = (model_of(profile) for profile in profiles)
    choices = replace(few, power_fraction=(0.75,), rpm=(2200.0,))
    change: Change = compare_settings(old, new, choices=choices, basis="percent", unchanged=())[0]
    full = change.old.solution.point.full_throttle | change.new.solution.point.full_throttle
    assert full.any()
    assert not full.all()
    assert not (change.compared & full).any()
    assert not change.significant[full].any()


def test_mixtures_that_only_one_aircraft_has_are_named_and_left_out(
    profiles: tuple[Profile, Profile], few: CardChoices
) -> None:
    """There is nothing to compare them with."""
    model = model_of(profiles[0])
    subject = model.subject
    lean = replace(
        model,
        subject=replace(subject, mixtures=subject.mixtures[:1]),
        knowledge=model_of(profiles[0]).knowledge,
    )
    names = [name for name in model.knowledge.names if name != "fuel_scale:Economy"]
    keep = [model.knowledge.names.index(name) for name in names]
    lean = replace(
        lean,
        knowledge=replace(
            model.knowledge,
            names=tuple(names),
            values=model.knowledge.values[keep],
            covariance=model.knowledge.covariance[np.ix_(keep, keep)],
        ),
    )
    found = compare(lean, model, choices=few, unchanged=("engine", "propeller", "airframe"))
    assert found.only_new == ("Economy",)
    assert found.only_old == ()
    assert [change.mixture for change in found.changes] == ["Best power"]


def test_differences_are_printed_one_place_finer_than_the_card_in_its_own_units() -> None:
    """nm per gallon for knots and US gallons, km per litre for km/h and litres."""
    from cardgen.tables.choices import UnitSet  # noqa: PLC0415

    us = scale_of(UnitSet())
    assert us.unit == ("inHg", "gal/h", "kt", "nm/gal")
    metric = scale_of(UnitSet("hPa", "l/h", "km/h", "degC", "m", "kg"))
    assert metric.unit == ("hPa", "l/h", "km/h", "km/l")
    # 100 km/h on 20 l/h are 5 km per litre.
    assert 100.0 / 3.6 / (0.020 / 3600.0) * metric.factor[3] == pytest.approx(5.0)
    assert len(us.places) == len(QUANTITIES)


def test_unrelated_folders_are_fine(tmp_path: Path) -> None:
    """OLD and NEW need not lie together."""
    one, other = demo_folder(tmp_path / "a"), demo_folder(tmp_path / "b")
    assert load_profile(one).part_digests == load_profile(other).part_digests
