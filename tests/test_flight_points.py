"""Points to fly: chosen to tell most, allowed by every limit, printed with blanks to fill in."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from demo_profiles import THREE_BLADES, TWO_BLADES, demo_folder, edit
from pypdf import PdfReader

from cardgen.atmosphere import standard_pressure, standard_temperature
from cardgen.cli.main import run
from cardgen.fit import Evidence, Knowledge, Subject, predict, standard_deviations
from cardgen.fit.design import design
from cardgen.limits import Verdict
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.document import Profile
from cardgen.profile.points import read_points
from cardgen.render.flight_sheet import csv_header, flight_sheet
from cardgen.render.words import read_words
from cardgen.tables.choices import UnitSet
from cardgen.tables.flights import FlightPlan, points_to_fly
from cardgen.tables.solution import Situation, solve
from cardgen.tables.verdict import judge

SUPPLEMENTARY = "SUPPLEMENTARY. The approved flight manual, placards and markings govern."


@pytest.fixture(scope="module")
def profile(tmp_path_factory: pytest.TempPathFactory) -> Profile:
    return load_profile(demo_folder(tmp_path_factory.mktemp("demo") / "p"))


@pytest.fixture(scope="module")
def plan(profile: Profile) -> FlightPlan:
    return points_to_fly(model_of(profile), profile.card)


def rows(
    profile: Profile, altitude: list[float], rpm: list[float], pressure: list[float]
) -> Evidence:
    """Rows of flight at stated settings, economy mixture."""
    count = len(altitude)
    unknown = np.full(count, np.nan)
    return Evidence(
        pressure=standard_pressure(np.array(altitude)),
        temperature=standard_temperature(np.array(altitude)),
        rpm=np.array(rpm),
        mass=np.full(count, 1270.0),
        mixture=np.ones(count, dtype=np.intp),
        power=unknown,
        manifold_pressure=np.array(pressure),
        fuel_flow=unknown,
        true_airspeed=unknown,
        rounding=np.zeros((count, 3)),
        spread=np.zeros((count, 3)),
        flight=np.ones(count, dtype=np.bool_),
        place=tuple(str(k) for k in range(count)),
    )


def covariance_after(subject: Subject, knowledge: Knowledge, measured: Evidence) -> np.ndarray:
    """Covariance after rows were measured, in the textbook's information form."""
    steps = 1e-4 * np.sqrt(np.diag(knowledge.covariance))
    slopes = (
        np.stack(
            [
                (
                    predict(subject, measured, values=knowledge.values + shift)
                    - predict(subject, measured, values=knowledge.values - shift)
                )
                / (2.0 * step)
                for shift, step in zip(np.diag(steps), steps, strict=True)
            ],
            axis=-1,
        )
        / standard_deviations(measured)[..., None]
    )
    flat = slopes.reshape(-1, slopes.shape[-1])
    return np.asarray(np.linalg.inv(np.linalg.inv(knowledge.covariance) + flat.T @ flat))


def test_what_a_design_promises_is_what_information_adds_up_to(profile: Profile) -> None:
    """Covariance after data by the information matrix (Chaloner and Verdinelli 1995, section 2)."""
    model = model_of(profile)
    pool = rows(
        profile,
        [1000.0, 1500.0, 2000.0, 2500.0],
        [2300.0, 2500.0, 2200.0, 2400.0],
        [70e3, 60e3, 72e3, 65e3],
    )
    wanted = rows(profile, [1800.0], [2350.0], [68e3])
    found = design(model.subject, model.knowledge, candidates=pool, wanted=wanted, count=2)
    after = covariance_after(
        model.subject, model.knowledge, pool.rows(np.array(found.chosen, dtype=np.intp))
    )
    surer = replace(model.knowledge, covariance=after)
    none = pool.rows(np.array([], dtype=np.intp))
    reckoned = design(model.subject, surer, candidates=none, wanted=wanted, count=0).before
    assert found.after == pytest.approx(reckoned, rel=0.02)
    assert (found.after[1:] < found.before[1:]).all()


def test_the_first_point_chosen_is_the_best_single_one(profile: Profile) -> None:
    """Held against trying every candidate alone."""
    model = model_of(profile)
    settings = list(itertools.product((1000.0, 2500.0), (2200.0, 2500.0), (60e3, 70e3)))
    pool = rows(profile, *(list(column) for column in zip(*settings, strict=True)))
    wanted = rows(profile, [1500.0, 2200.0], [2400.0, 2300.0], [66e3, 62e3])
    chosen = design(model.subject, model.knowledge, candidates=pool, wanted=wanted, count=1)
    none = pool.rows(np.array([], dtype=np.intp))
    costs = []
    for place in range(len(pool)):
        after = covariance_after(
            model.subject, model.knowledge, pool.rows(np.array([place], dtype=np.intp))
        )
        surer = replace(model.knowledge, covariance=after)
        spread = design(model.subject, surer, candidates=none, wanted=wanted, count=0).before
        costs.append(float(np.sum((spread / model.knowledge.scatter) ** 2)))
    assert chosen.chosen == (int(np.argmin(costs)),)


def test_points_to_fly_are_six_different_settings_in_the_order_of_altitude(
    plan: FlightPlan,
) -> None:
    """A climb between points costs time, a descent shocks cylinders: upwards only."""
    assert len(plan.points) == len(set(plan.points)) == 6
    altitudes = [point.pressure_altitude for point in plan.points]
    assert altitudes == sorted(altitudes)
    assert min(altitudes) >= 3000 * 0.3048 - 1.0
    assert max(altitudes) <= 10_000 * 0.3048 + 1.0


def test_six_points_promise_smaller_tolerances_and_twelve_smaller_ones_still(
    profile: Profile, plan: FlightPlan
) -> None:
    """More evidence never tells less."""
    more = points_to_fly(model_of(profile), profile.card, count=12)
    assert (plan.after < plan.before).all()
    assert (more.after < plan.after).all()
    assert plan.after[2] < 0.5 * plan.before[2]


def test_points_chosen_tell_more_than_any_of_fifty_random_choices(profile: Profile) -> None:
    """Greedy is not proved best, but chance must not beat it."""
    model = model_of(profile)
    settings = list(
        itertools.product((1000.0, 2000.0, 3000.0), (2200.0, 2350.0, 2500.0), (55e3, 62e3, 68e3))
    )
    pool = rows(profile, *(list(column) for column in zip(*settings, strict=True)))
    wanted = rows(profile, [1500.0, 2500.0], [2400.0, 2300.0], [66e3, 60e3])
    none = pool.rows(np.array([], dtype=np.intp))

    def cost(chosen: Sequence[int]) -> float:
        measured = pool.rows(np.array(chosen, dtype=np.intp))
        after = covariance_after(model.subject, model.knowledge, measured)
        surer = replace(model.knowledge, covariance=after)
        spread = design(model.subject, surer, candidates=none, wanted=wanted, count=0).before
        return float(np.sum((spread / model.knowledge.scatter) ** 2))

    best = design(model.subject, model.knowledge, candidates=pool, wanted=wanted, count=4).chosen
    rng = np.random.default_rng(2)
    random = [cost(rng.choice(len(pool), 4, replace=False)) for _ in range(50)]
    assert cost(best) < min(random)


def test_no_point_breaks_a_limit_or_is_at_full_throttle(tmp_path: Path) -> None:
    """With the three-blade propeller 2300 to 2400 rpm is closed at 23.5 inHg and above."""
    three = load_profile(edit(demo_folder(tmp_path / "p"), TWO_BLADES, THREE_BLADES))
    model = model_of(three)
    for point in points_to_fly(model, three.card, count=40).points:
        solution = solve(
            model,
            Situation(
                np.array([point.pressure_altitude]),
                standard_temperature(np.array([point.pressure_altitude])),
                np.array([three.card.mass[0]]),
                model.mixture_index(point.mixture),
            ),
            indicated_rpm=np.array([point.indicated_rpm]),
            indicated_pressure=np.array([point.indicated_pressure]),
            with_tolerance=False,
        )
        assert judge(model, solution).verdict[0] in (Verdict.INSIDE, Verdict.UNKNOWN)
        assert not solution.point.full_throttle[0]
        inhg = point.indicated_pressure / 3386.389
        assert not (2300 <= point.indicated_rpm <= 2400 and inhg >= 23.5)
        assert inhg * 2.0 == pytest.approx(round(inhg * 2.0), abs=1e-4)  # a needle's half inch


def test_while_an_engine_is_run_in_no_point_leaves_the_band(tmp_path: Path) -> None:
    """Test points may not undo what the overhauler asks for."""
    aircraft = demo_folder(tmp_path / "p")
    edit(
        aircraft,
        "  paper: half-letter\n",
        "  paper: half-letter\n  break_in: {least_power: 65 %, greatest_power: 75 %, "
        "greatest_altitude: 8000 ft, source: {document: Invented overhaul sheet}}\n",
    )
    profile = load_profile(aircraft)
    plan = points_to_fly(model_of(profile), profile.card)
    assert len(plan.points) == 6
    for point in plan.points:
        assert 0.63 <= point.power_fraction <= 0.77  # half an inch of pressure is 2 % power
        assert point.pressure_altitude <= 8000 * 0.3048 + 1.0


def test_an_aircraft_that_can_fly_none_of_its_settings_gets_a_sheet_that_says_so(
    profile: Profile,
) -> None:
    """No point is a finding, not a crash."""
    model = model_of(profile)
    limits = replace(
        model.limits,
        rpm_range=tuple(replace(limit, greatest_rpm=1900.0) for limit in model.limits.rpm_range),
    )
    empty = points_to_fly(replace(model, limits=limits), profile.card)
    assert empty.points == ()
    words = " ".join(word.text for word in read_words(flight_sheet(profile, None, empty))[0])
    assert "No setting of this card can be flown" in words


@pytest.mark.parametrize(
    "units", [UnitSet(), UnitSet("hPa", "l/h", "km/h", "degF", "m", "kg")], ids=["us", "metric"]
)
def test_the_header_on_the_sheet_is_one_that_the_fit_reads(
    profile: Profile, tmp_path: Path, units: UnitSet
) -> None:
    """What is typed in under it comes back as a flown row with an airspeed from its legs."""
    us = units.speed == "kt"
    line = (
        "6000,8,2350,22.5,11.2,2700,Best power,flight"
        if us
        else "1829,46,2350,762,42,1225,Best power,flight"
    )
    speed = 150 if us else 278
    legs = ",".join(f"{speed},{track}" for track in (0, 90, 180, 270))
    file = tmp_path / "flown.csv"
    file.write_text(f"{csv_header(units)}\n{line},{legs}\n")
    evidence = read_points(profile, [file]).evidence
    assert len(evidence) == 1
    assert evidence.flight.all()
    assert evidence.true_airspeed[0] == pytest.approx(speed / (3.6 if not us else 3600 / 1852))


@pytest.fixture(scope="module")
def sheet(tmp_path_factory: pytest.TempPathFactory) -> bytes:
    folder = tmp_path_factory.mktemp("sheet")
    aircraft = demo_folder(folder / "p")
    assert run(["fit", str(aircraft), "--sheet", str(folder / "fly.pdf")]) == 0
    assert not aircraft.with_name("specimen.fit.yaml").exists()  # asked for a sheet, not for a fit
    return (folder / "fly.pdf").read_bytes()


def test_every_page_of_the_flight_sheet_is_marked_and_large_enough_to_read(sheet: bytes) -> None:
    """Registration, configuration, stamps and what governs; nothing below nine points."""
    pages = read_words(sheet)
    for place, words in enumerate(pages, start=1):
        text = " ".join(word.text for word in words)
        for wanted in (
            "QX-417",
            f"page {place} of {len(pages)}",
            "DEMONSTRATION DATA, NOT FOR FLIGHT",
            "NOT FITTED: planning estimate only",
            "propeller Specimen P2-77",
            SUPPLEMENTARY,
        ):
            assert wanted in text
        assert min(word.size for word in words) >= 9.0


def test_the_flight_sheet_has_six_points_with_blanks_advice_and_the_header(
    sheet: bytes, tmp_path: Path
) -> None:
    """Before or after the change, how to fly, what to write, where to type it in."""
    path = tmp_path / "fly.pdf"
    path.write_bytes(sheet)
    text = " ".join(" ".join(page.extract_text().split()) for page in PdfReader(path).pages)
    assert [f"Point {k}:" in text for k in range(1, 8)] == [True] * 6 + [False]
    for label in ("time", "altimeter ft", "OAT °C", "weight lb", "MAP inHg", "fuel flow gal/h"):
        assert text.count(label) >= 6, label
    for leg in range(1, 5):
        assert text.count(f"leg {leg} GS kt") == text.count(f"leg {leg} track °") == 6
    for words in (
        "Before the change: baseline",
        "After the change: follow-up",
        "29.92 inHg (1013.25 hPa)",
        "smooth air",
        "three minutes",
    ):
        assert words in text
    assert csv_header(UnitSet()) in "".join(text.split())
