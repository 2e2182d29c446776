"""How well a few rows of published tables predict the others: figures for tests and for a page.

FAA-H-8083-25, cruise power settings, 65 %: `published/faa_cruise_table_65pct.csv`, 27 rows, most
of them from memory; assumptions in `published/faa_65pct/aircraft.yaml`. Power chart of a 210 hp
engine: `published/engine_chart_210hp_*.csv`, digitised from the Reference Handbook 2013, figure
10.2a. Run as a program it prints the figures.
"""
# ruff: noqa: T201

from __future__ import annotations

import csv
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path

import numpy as np
import numpy.typing as npt
from scipy.optimize import least_squares

from cardgen.aircraft import Aircraft, Condition, Setting
from cardgen.atmosphere import standard_pressure, standard_temperature
from cardgen.constants import FOOT, HORSEPOWER, HOUR, INCH, INCH_OF_MERCURY, KNOT, POUND
from cardgen.cruise import solve_cruise
from cardgen.engine import Engine, Mixture, brake_power, power_line
from cardgen.fit import (
    Evidence,
    Subject,
    estimate,
    mixture_of_rows,
    parameters,
    predict,
    prior_covariance,
    prior_mean,
    tolerances,
)
from cardgen.profile import load_profile
from cardgen.profile.assembly import subject_of
from cardgen.profile.points import read_points

PUBLISHED = Path(__file__).parent / "published"
FloatArray = npt.NDArray[np.float64]

PRINTED = np.array([INCH_OF_MERCURY, 6.0 * POUND / HOUR, KNOT])
"""Units of the table's manifold pressure, fuel flow and airspeed."""

SEED = 20260504
"""Of the random choices; fixed before any result was seen, and never changed."""

CHOICES = 10
FITTED_ROWS = 6


@dataclass(frozen=True)
class Prediction:
    """Rows that a fit has not seen, over several random choices of those it has.

    `rms` has one row per choice; `covered` is the share of numbers inside their 95 % tolerance.
    """

    rms: FloatArray
    covered: FloatArray
    fitted_to_all: FloatArray

    @property
    def median(self) -> FloatArray:
        """Median over the choices."""
        return np.asarray(np.median(self.rms, axis=0))

    @property
    def worst(self) -> FloatArray:
        """Worst of the choices."""
        return np.asarray(self.rms.max(axis=0))


def cruise_table() -> tuple[Subject, Evidence]:
    """The FAA's table as evidence, and the aeroplane that a reader assumes behind it."""
    profile = load_profile(PUBLISHED / "faa_65pct" / "aircraft.yaml")
    return subject_of(profile), read_points(profile, profile.evidence).evidence


@cache
def cruise_table_prediction(choices: int = CHOICES, seed: int = SEED) -> Prediction:
    """Fit to 6 random rows of the FAA's table and predict the other 21: inHg, gal/h, kt."""
    subject, evidence = cruise_table()
    random = np.random.default_rng(seed)
    rms, covered = [], []
    for _ in range(choices):
        seen = np.zeros(len(evidence), dtype=np.bool_)
        seen[random.choice(len(evidence), FITTED_ROWS, replace=False)] = True
        found = estimate(subject, evidence.rows(seen))
        rest = evidence.rows(~seen)
        error = predict(subject, rest, values=found.values) - rest.read()
        rms.append(np.sqrt(np.mean((error / PRINTED) ** 2, axis=0)))
        half_width = tolerances(
            subject,
            lambda aircraft, mixtures, rest=rest: _asked(aircraft, mixtures, rest),
            values=found.values,
            covariance=found.covariance,
            scatter=found.scatter,
        )
        covered.append(np.mean(np.abs(error) <= half_width, axis=0))
    return Prediction(
        np.array(rms), np.mean(covered, axis=0), estimate(subject, evidence).rms() / PRINTED
    )


def _asked(aircraft: Aircraft, mixtures: tuple[Mixture, ...], rows: Evidence) -> FloatArray:
    """What an aircraft does at the powers of rows."""
    point = solve_cruise(
        aircraft,
        Condition(rows.pressure, rows.temperature, rows.mass),
        setting=Setting(rows.rpm, mixture_of_rows(mixtures, rows.mixture), power=rows.power),
    )
    return np.stack([point.manifold_pressure, point.fuel_flow, point.true_airspeed], axis=-1)


@dataclass(frozen=True)
class Chart:
    """Points of a power chart; `line` is 0 at full throttle and 1 at low pressure, both at sea
    level, and 2 at full throttle with altitude; `deviation` of the reading in hp.
    """

    rpm: FloatArray
    manifold_pressure: FloatArray
    pressure: FloatArray
    temperature: FloatArray
    power_hp: FloatArray
    deviation: FloatArray
    line: npt.NDArray[np.intp]


def _columns(name: str) -> dict[str, FloatArray]:
    """Columns of a published file by name."""
    lines = (PUBLISHED / name).read_text().splitlines()
    rows = list(csv.DictReader(line for line in lines if not line.startswith("#")))
    return {key: np.array([float(row[key]) for row in rows]) for key in rows[0]}


def engine_chart() -> Chart:
    """The chart as digitised, 36 points."""
    sea, high = (
        _columns(f"engine_chart_210hp_{name}.csv") for name in ("sea_level", "full_throttle")
    )
    rated = 2800.0
    altitude = np.concatenate([np.zeros(2 * len(sea["rpm"])), high["press_alt_ft"] * FOOT])
    line = np.repeat([0, 1, 2], [len(sea["rpm"]), len(sea["rpm"]), len(high["press_alt_ft"])])
    pressure_inhg = np.concatenate(
        [sea["MP_full_throttle_inHg"], sea["MP_low_inHg"], high["MP_inHg_full_throttle"]]
    )
    # What the source states of its reading, through slopes of 9 hp/inHg and 4.5 hp per 1000 ft:
    # ±0.7 hp and ±0.05 inHg at sea level, ±1 hp and ±150 ft with altitude; limits taken as
    # deviations. The altitude line was read at exact pressures.
    reading = np.where(line < 2, np.hypot(0.7, 9.0 * 0.05), np.hypot(1.0, 4.5 * 0.15))
    # And what a smooth curve of rpm cannot follow: waves in the intake pipes make the volumetric
    # efficiency of a real engine ripple (Taylor, vol. 1, chapter 6; its size is an assumption).
    deviation = np.hypot(reading, RIPPLE * CHART_ENGINE.rated_power / HORSEPOWER)
    return Chart(
        rpm=np.concatenate([sea["rpm"], sea["rpm"], np.full(len(high["press_alt_ft"]), rated)]),
        manifold_pressure=pressure_inhg * INCH_OF_MERCURY,
        pressure=np.asarray(standard_pressure(altitude)),
        temperature=np.asarray(standard_temperature(altitude)),
        power_hp=np.concatenate([sea["BHP_full_throttle"], sea["BHP_low"], high["BHP_chart"]]),
        deviation=deviation,
        line=line,
    )


RIPPLE = 0.005
"""Deviation of an engine from a smooth curve of rpm, over its rated power."""

CHART_ENGINE = Engine(360.0 * INCH**3, 8.5, 210.0 * HORSEPOWER, 2800.0)
CHART_MIXTURE = Mixture("best power", 0.0775)


def chart_power(values: FloatArray, chart: Chart) -> FloatArray:
    """Power of the points of the chart with engine parameters, hp."""
    names = [item.name for item in parameters((CHART_MIXTURE,)) if item.part == "engine"]
    named = dict(zip(names, values, strict=True))
    engine = replace(
        CHART_ENGINE,
        level=named["level"],
        breathing=tuple(value for name, value in named.items() if name.startswith("breathing")),
        friction_scale=named["friction_scale"],
        back_pressure_effect=named["back_pressure_effect"],
        charge_temperature_exponent=named["charge_temperature_exponent"],
    )
    line = power_line(
        engine,
        chart.rpm,
        mixture=CHART_MIXTURE,
        pressure=chart.pressure,
        temperature=chart.temperature,
    )
    return np.asarray(brake_power(line, chart.manifold_pressure)) / HORSEPOWER


def fitted_chart(chart: Chart, seen: npt.NDArray[np.intp]) -> FloatArray:
    """Engine parameters fitted to some points of the chart, with the priors of every fit."""
    subject_free = Aircraft(CHART_ENGINE, *_no_aeroplane())
    listed = parameters((CHART_MIXTURE,))
    engine = np.array([item.part == "engine" for item in listed])
    mean = prior_mean(subject_free, (CHART_MIXTURE,))[engine]
    covariance = prior_covariance((CHART_MIXTURE,))[np.ix_(engine, engine)]
    whiten = np.linalg.inv(np.linalg.cholesky(covariance))

    def residuals(values: FloatArray) -> FloatArray:
        error = (chart_power(values, chart) - chart.power_hp) / chart.deviation
        return np.concatenate([error[seen], whiten @ (values - mean)])

    found = least_squares(residuals, mean, x_scale=np.sqrt(np.diag(covariance)))
    return np.asarray(found.x)


def _no_aeroplane() -> tuple[object, object]:
    """Propeller and airframe of any aeroplane: the chart needs none."""
    subject, _ = cruise_table()
    return subject.aircraft.propeller, subject.aircraft.airframe


@cache
def engine_chart_prediction(choices: int = CHOICES, seed: int = SEED) -> Prediction:
    """Fit to 6 points of the chart, two well inside each of its lines, and predict the rest: hp."""
    chart = engine_chart()
    everything = np.arange(len(chart.rpm))
    thirds = [_inner_halves(everything[chart.line == line]) for line in range(3)]
    random = np.random.default_rng(seed)
    rms = []
    for _ in range(choices):
        seen = np.array([random.choice(part) for line in thirds for part in line])
        values = fitted_chart(chart, seen)
        rest = np.setdiff1d(everything, seen)
        error = (chart_power(values, chart) - chart.power_hp)[rest]
        rms.append([np.sqrt(np.mean(error**2))])
    all_error = chart_power(fitted_chart(chart, everything), chart) - chart.power_hp
    return Prediction(np.array(rms), np.array([np.nan]), np.array([np.sqrt(np.mean(all_error**2))]))


def _inner_halves(points: npt.NDArray[np.intp]) -> tuple[npt.NDArray[np.intp], ...]:
    """About the quarter and three-quarter point of a line: three neighbours each."""
    count = len(points)
    return tuple(
        points[round(share * (count - 1)) - 1 : round(share * (count - 1)) + 2]
        for share in (0.25, 0.75)
    )


if __name__ == "__main__":
    for title, found in (
        ("cruise table, inHg gal/h kt", cruise_table_prediction()),
        ("engine chart, hp", engine_chart_prediction()),
    ):
        print(title)
        print("  all rows fitted", found.fitted_to_all.round(3))
        print("  median", found.median.round(3), "worst", found.worst.round(3))
        print("  covered", found.covered.round(3))
