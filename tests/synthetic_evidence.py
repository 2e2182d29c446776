"""Evidence made by the model itself from parameters drawn from the prior, with noise as assumed.

Run as a program it prints how often the parameters are found again.
"""
# ruff: noqa: T201

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import standard_pressure, standard_temperature
from cardgen.constants import FOOT, HORSEPOWER, HOUR, INCH_OF_MERCURY, KNOT, POUND
from cardgen.fit import (
    Evidence,
    Subject,
    estimate,
    parameters,
    predict,
    prior_covariance,
    prior_mean,
    standard_deviations,
)
from cardgen.profile import load_profile
from cardgen.profile.assembly import subject_of

FloatArray = npt.NDArray[np.float64]
PROFILE = Path(__file__).parents[1] / "profiles" / "aircraft" / "specimen.yaml"
STEPS = (0.1 * INCH_OF_MERCURY, 0.1 * 6.0 * POUND / HOUR, KNOT)
"""What a handbook prints to."""


def subject() -> Subject:
    """The demonstration aircraft, not fitted."""
    return subject_of(load_profile(PROFILE))


def blank_rows() -> Evidence:
    """Rows over two rpm, two powers, three altitudes, temperatures, weights and both mixtures."""
    altitude, rpm, share, mixture = (
        axis.ravel()
        for axis in np.meshgrid(
            np.array([2000.0, 6000.0, 10000.0]) * FOOT,
            [2200.0, 2500.0],
            [0.55, 0.75],
            [0, 1],
            indexing="ij",
        )
    )
    count = altitude.size
    nothing = np.full(count, np.nan)
    return Evidence(
        pressure=np.asarray(standard_pressure(altitude)),
        temperature=standard_temperature(altitude) + np.resize([-15.0, 0.0, 15.0], count),
        rpm=rpm,
        mass=np.resize([2600.0, 3000.0], count) * POUND,
        mixture=mixture.astype(np.intp),
        power=share * 224.0 * HORSEPOWER,
        manifold_pressure=nothing,
        fuel_flow=nothing,
        true_airspeed=nothing,
        rounding=np.tile(STEPS, (count, 1)),
        spread=np.zeros((count, 3)),
        flight=np.zeros(count, dtype=np.bool_),
        place=tuple(f"row {row + 1}" for row in range(count)),
    )


def drawn_truth(aircraft: Subject, random: np.random.Generator) -> FloatArray:
    """Parameters from the prior, inside their bounds, with which every row can be flown."""
    listed = parameters(aircraft.mixtures)
    mean = prior_mean(aircraft.aircraft, aircraft.mixtures)
    root = np.linalg.cholesky(prior_covariance(aircraft.mixtures))
    lower = np.array([item.lower for item in listed])
    upper = np.array([item.upper for item in listed])
    while True:
        truth = mean + root @ random.standard_normal(len(mean))
        inside = ((truth > lower) & (truth < upper)).all()
        if inside and not np.isnan(predict(aircraft, blank_rows(), values=truth)).any():
            return np.asarray(truth)


def observed(aircraft: Subject, truth: FloatArray, random: np.random.Generator) -> Evidence:
    """What a handbook of such an aircraft would print."""
    rows = blank_rows()
    exact = predict(aircraft, rows, values=truth)
    scatter = np.sqrt(standard_deviations(rows) ** 2 - rows.rounding**2 / 12.0)
    noisy = exact + scatter * random.standard_normal(exact.shape)
    printed = np.round(noisy / rows.rounding) * rows.rounding
    return replace(
        rows,
        manifold_pressure=printed[:, 0],
        fuel_flow=printed[:, 1],
        true_airspeed=printed[:, 2],
    )


@cache
def recovery(draws: int, seed: int = 20260504) -> FloatArray:
    """Errors of fitted parameters over their stated standard errors, one row per draw."""
    aircraft = subject()
    random = np.random.default_rng(seed)
    found = []
    for _ in range(draws):
        truth = drawn_truth(aircraft, random)
        fit = estimate(aircraft, observed(aircraft, truth, random))
        found.append((fit.values - truth) / fit.standard_error)
    return np.array(found)


if __name__ == "__main__":
    errors = recovery(200)
    within = np.abs(errors) <= 1.96
    print("within stated 95 % errors:", within.mean().round(4))
    for item, share in zip(parameters(subject().mixtures), within.mean(axis=0), strict=True):
        print(f"  {item.name:32s} {share:.3f}")
