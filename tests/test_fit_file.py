"""Fit files keep what was learned, part by part, and believe nothing that does not fit together."""

from __future__ import annotations

import re
import shutil
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from cardgen.errors import DataError
from cardgen.fit import estimate
from cardgen.profile import load_profile
from cardgen.profile.assembly import subject_of
from cardgen.profile.fit_file import fit_path, learned_for
from cardgen.profile.fit_record import fit_text, read_fit
from cardgen.profile.fitting import fit_points, record_of, start_of
from cardgen.profile.points import read_points

PROFILES = Path(__file__).parents[1] / "profiles"
ROWS = """\
pressure_altitude_ft,oat_c,rpm,map_inhg,percent_power,fuel_flow_gph,tas_kt,weight_lb,mixture
4000,7,2350,22.6,65,12.1,147,2800,Best power
8000,-1,2350,21.5,65,12.1,153,2800,Best power
8000,-1,2500,20.4,65,12.4,153,2800,Best power
6000,3,2350,22.4,65,11.0,150,2800,Economy
10000,-5,2350,18.4,55,9.3,145,2800,Economy
"""
MORE = """\
pressure_altitude_ft,oat_c,rpm,map_inhg,fuel_flow_gph,tas_kt,weight_lb,mixture,source
7000,1,2400,21.6,11.9,151,2700,Best power,flight
9000,-3,2300,20.0,10.8,148,2700,Best power,flight
"""


@pytest.fixture
def tree(tmp_path: Path) -> Path:
    """A copy of the demonstration profiles without its fit."""
    folder = tmp_path / "profiles"
    shutil.copytree(PROFILES, folder)
    aircraft = folder / "aircraft" / "specimen.yaml"
    fit_path(load_profile(aircraft)).unlink(missing_ok=True)
    return aircraft


def written(aircraft: Path, rows: str, name: str) -> Path:
    """Write a points file beside an aircraft."""
    file = aircraft.with_name(name)
    file.write_text(rows)
    return file


def fit(aircraft: Path, rows: str, name: str = "rows.csv") -> Path:
    """Fit an aircraft to rows and write its fit file."""
    profile = load_profile(aircraft)
    points = read_points(profile, [written(aircraft, rows, name)])
    target = fit_path(profile)
    start = start_of(profile, points, record=read_fit(target, profile) if target.exists() else None)
    found = fit_points(profile, points, start)
    target.write_text(
        fit_text(record_of(profile, points, start, found=found, warnings=start.notes))
    )
    return target


def exchange(aircraft: Path, old: str, new: str) -> None:
    """Change a text of the aircraft file."""
    text = aircraft.read_text()
    assert old in text
    aircraft.write_text(text.replace(old, new))


def test_no_fit_file_is_no_fit(tree: Path) -> None:
    """A profile without a fit file has learned nothing, and says so by having none."""
    assert learned_for(load_profile(tree)) is None


def test_a_fit_read_back_is_the_fit_written(tree: Path) -> None:
    """Every number survives the file to its last digit."""
    target = fit(tree, ROWS)
    profile = load_profile(tree)
    record = read_fit(target, profile)
    assert fit_text(record) == target.read_text()
    learned = learned_for(profile)
    assert learned is not None
    assert learned.replaced == ()
    assert np.array_equal(learned.knowledge.values, record.knowledge.values)
    assert np.array_equal(learned.knowledge.covariance, record.knowledge.covariance)
    assert learned.knowledge.covers is not None
    assert "5 rows of the handbook (rows.csv)" in learned.note


def test_a_fit_may_be_left_aside(tree: Path) -> None:
    """The user can ask for typical values."""
    fit(tree, ROWS)
    assert learned_for(load_profile(tree), no_fit=True) is None


def test_a_new_propeller_returns_its_parameter_alone_to_the_data_sheet(tree: Path) -> None:
    """The engine and the airframe keep what they learned."""
    fit(tree, ROWS)
    before = learned_for(load_profile(tree))
    exchange(
        tree,
        "propeller: ../propellers/specimen-p2-77.yaml",
        "propeller: ../propellers/specimen-p3-75.yaml",
    )
    after = learned_for(load_profile(tree))
    assert before is not None
    assert after is not None
    assert after.replaced == ("propeller",)
    assert after.knowledge.fitted == ("engine", "mixtures", "airframe")
    assert after.knowledge.covers is None
    moved = [
        name
        for name, was, now in zip(
            before.knowledge.names, before.knowledge.values, after.knowledge.values, strict=True
        )
        if was != now
    ]
    assert moved == ["installation_factor"]
    assert after.digest != before.digest


def test_a_changed_mixture_leaves_the_scale_of_the_other(tree: Path) -> None:
    """Fuel scales belong to their mixture by name."""
    fit(tree, ROWS)
    before = learned_for(load_profile(tree))
    exchange(tree, "lean_of_peak: 30 degF", "lean_of_peak: 50 degF")
    after = learned_for(load_profile(tree))
    assert before is not None
    assert after is not None
    assert after.replaced == ("mixture Economy",)
    names = before.knowledge.names
    rich, lean = names.index("fuel_scale:Best power"), names.index("fuel_scale:Economy")
    assert after.knowledge.values[rich] == before.knowledge.values[rich]
    assert before.knowledge.values[lean] != after.knowledge.values[lean] == 1.0
    assert "mixtures" not in after.knowledge.fitted


def test_words_and_card_choices_leave_a_fit_as_it_is(tree: Path) -> None:
    """Only what a number depends on voids a fit."""
    fit(tree, ROWS)
    before = learned_for(load_profile(tree))
    exchange(tree, "registration: QX-417", "registration: QX-418")
    exchange(tree, "winds: [-20 kt, 0 kt, 20 kt]", "winds: [0 kt]")
    assert learned_for(load_profile(tree)).digest == before.digest  # type: ignore[union-attr]


def test_flights_after_a_change_are_fitted_on_top_of_what_is_still_true(tree: Path) -> None:
    """The old rows are not needed again, and the result is all of the aircraft as it is."""
    fit(tree, ROWS)
    exchange(
        tree,
        "propeller: ../propellers/specimen-p2-77.yaml",
        "propeller: ../propellers/specimen-p3-75.yaml",
    )
    profile = load_profile(tree)
    carried = learned_for(profile)
    target = fit(tree, MORE, "flights.csv")
    record = read_fit(target, profile)
    learned = learned_for(profile)
    assert carried is not None
    assert learned is not None
    assert np.array_equal(record.prior, carried.knowledge.values)
    assert learned.replaced == ()
    assert learned.knowledge.fitted == ("engine", "mixtures", "propeller", "airframe")
    assert record.earlier is not None
    assert len(record.earlier.rows) == 5
    assert record.knowledge.covers is not None
    # Flown at 2300 by the tachometer, printed to 2500: what both cover together.
    assert record.knowledge.covers.rpm == pytest.approx((2309.3, 2500.0), abs=0.1)
    assert "An earlier fit to 5 rows went before" in learned.note


def test_a_second_run_on_the_same_flights_counts_them_once(tree: Path) -> None:
    """Fitting again what was fitted after a change gives the same parameters."""
    fit(tree, ROWS)
    exchange(tree, "specimen-p2-77.yaml", "specimen-p3-75.yaml")
    once = read_fit(fit(tree, MORE, "flights.csv"), load_profile(tree))
    twice = read_fit(fit(tree, MORE, "flights.csv"), load_profile(tree))
    assert np.array_equal(once.knowledge.values, twice.knowledge.values)
    assert twice.earlier is not None
    assert len(twice.earlier.rows) == 5


def test_rows_that_were_corrected_leave_nothing_behind(tree: Path) -> None:
    """What was fitted to a mistake must not linger as the prior of the next fit."""
    fit(tree, ROWS.replace("22.6", "26.6"))
    record = read_fit(fit(tree, ROWS), load_profile(tree))
    fit_path(load_profile(tree)).unlink()
    fresh = read_fit(fit(tree, ROWS), load_profile(tree))
    assert np.array_equal(record.knowledge.values, fresh.knowledge.values)
    assert record.earlier is None


def test_other_evidence_replaces_the_earlier_and_says_so(tree: Path) -> None:
    """Without a change of parts, what is to count must be given."""
    fit(tree, ROWS)
    profile = load_profile(tree)
    points = read_points(profile, [written(tree, MORE, "flights.csv")])
    start = start_of(profile, points, record=read_fit(fit_path(profile), profile))
    assert start.earlier is None
    assert "5 rows that are not given here" in start.notes[0]


def test_the_old_handbook_is_not_taken_for_the_new_propeller(tree: Path) -> None:
    """A mended data sheet and a replaced part look the same: only the user can tell which it is."""
    fit(tree, ROWS)
    exchange(tree, "specimen-p2-77.yaml", "specimen-p3-75.yaml")
    profile = load_profile(tree)
    points = read_points(profile, [tree.with_name("rows.csv")])
    record = read_fit(fit_path(profile), profile)
    with pytest.raises(DataError, match="evidence is of the old one"):
        start_of(profile, points, record=record)
    start = start_of(profile, points, record=record, corrected=True)
    assert start.earlier is None
    assert "propeller corrected" in start.notes[0]


def test_one_fit_after_the_other_tells_what_both_tell_together(tree: Path) -> None:
    """A posterior taken as the next prior is Bayes' rule, but for the curvature of the model."""
    profile = load_profile(tree)
    subject = subject_of(profile)
    rows = [written(tree, text, f"{place}.csv") for place, text in enumerate((ROWS, MORE))]
    first, second = (read_points(profile, [file]).evidence for file in rows)
    one = estimate(subject, first)
    two = estimate(subject, second, mean=one.values, covariance=one.covariance)
    both = estimate(subject, read_points(profile, rows).evidence)
    assert np.abs((two.values - both.values) / both.standard_error).max() < 0.5


def test_a_fit_of_other_equations_is_not_used(tree: Path) -> None:
    """Parameters mean nothing under equations they were not found with."""
    target = fit(tree, ROWS)
    target.write_text(target.read_text().replace("model_version: ", "model_version: 9", 1))
    profile = load_profile(tree)
    learned = learned_for(profile)
    assert learned is not None
    assert learned.knowledge.fitted == ()
    assert "Fit again" in learned.note
    with pytest.raises(DataError, match="other equations"):
        learned_for(profile, target)


def test_evidence_changed_since_is_told(tree: Path) -> None:
    """Someone who corrects a handbook row must hear that the fit does not know it."""
    exchange(tree, "evidence: [specimen-handbook.csv]", "evidence: [rows.csv]")
    tree.with_name("rows.csv").write_text(ROWS)
    fit(tree, ROWS)
    tree.with_name("rows.csv").write_text(ROWS.replace("22.6", "22.7"))
    learned = learned_for(load_profile(tree))
    assert learned is not None
    assert "rows.csv changed since: fit again" in learned.note


def broken(target: Path, pattern: str, new: str) -> Path:
    """Change the first match of a pattern in a fit file."""
    text, count = re.subn(pattern, new, target.read_text(), count=1, flags=re.MULTILINE)
    assert count == 1
    target.write_text(text)
    return target


@pytest.mark.parametrize(
    ("pattern", "new", "words"),
    [
        (r"^kind: fit", "kind: aircraft", "is a file of kind aircraft"),
        (r"value: [0-9.]+", "value: .nan", "is not a number"),
        (r"value: [0-9.]+", "value: 9.5", "not plausible"),
        (r"standard_error: [0-9.]+", "standard_error: 0.5", "does not belong to the covariance"),
        (r"^  - \[[^,]*,", "  - [-1.0,", "is no variance"),
        (r"^  - \[([^,]*), [^,]*,", r"  - [\1, 0.001,", "is not symmetric"),
        (r"^  - \[[^\]]*\]\n", "", "is not square"),
        (r'^  - name: "level"', '  - name: "leve1"', "no parameter of this model"),
        (r'^  - name: "level"', '  - name: "friction_scale"', "is given twice"),
        (r"^scatter: .*$", "scatter: {}", "is missing"),
        (r"^scatter: .*$", "scatter: {a: b}", "unknown key"),
        (r"rpm: \[[^\]]*\]", "rpm: [2500, 2300]", "ends are reversed"),
        (r"^warnings:.*$", "warnings: &a [*a]", "alias"),
    ],
)
def test_a_fit_file_that_does_not_hold_together_is_refused(
    tree: Path, pattern: str, new: str, words: str
) -> None:
    """Every complaint names its line; nothing of a bad file is used."""
    broken(fit(tree, ROWS), pattern, new)
    with pytest.raises(DataError, match=words) as caught:
        learned_for(load_profile(tree))
    assert all(problem.line > 0 for problem in caught.value.problems)


def test_a_covariance_that_no_data_could_have_is_refused(tree: Path) -> None:
    """A negative variance along some direction would print tolerances that are too small."""
    target = fit(tree, ROWS)
    profile = load_profile(tree)
    record = read_fit(target, profile)
    deviation = np.sqrt(np.diag(record.knowledge.covariance))
    correlation = np.full((len(deviation),) * 2, -0.9) + 1.9 * np.eye(len(deviation))
    bad = replace(record.knowledge, covariance=correlation * deviation * deviation[:, None])
    target.write_text(fit_text(replace(record, knowledge=bad)))
    with pytest.raises(DataError, match="positive semidefinite"):
        learned_for(profile)


def test_a_missing_fit_file_that_was_asked_for_is_an_error(tree: Path) -> None:
    """A mistyped name must not pass for no fit."""
    with pytest.raises(DataError, match="does not exist"):
        learned_for(load_profile(tree), tree.with_name("none.fit.yaml"))
