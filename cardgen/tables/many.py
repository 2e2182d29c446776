"""Many settings checked at once: a verdict and what breaks, one of each for every setting."""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.limits import Verdict
from cardgen.records import dataclass
from cardgen.tables.solution import Model, Situation, Solution, solve, true_temperature_of
from cardgen.tables.verdict import judge, status_words

FloatArray = npt.NDArray[np.float64]

CHUNK: Final = 20_000
"""Settings held in memory at a time with all their judgements."""


@dataclass(frozen=True, slots=True)
class Checked:
    """Settings with their verdicts; arrays of one entry a setting.

    Parameters
    ----------
    verdict : ndarray of int8
        A `Verdict` each [-]
    reasons : list of str
        Names of the limits that give the verdict, apart by blanks; the solver's word where there
        is no level flight; "" where all is inside [-]
    power_fraction : ndarray
        Power over the percent rating, NaN without level flight [-]
    fuel_flow : ndarray
        Fuel flow [kg/s]
    true_airspeed : ndarray
        True airspeed [m/s]
    """

    verdict: npt.NDArray[np.int8]
    reasons: list[str]
    power_fraction: FloatArray
    fuel_flow: FloatArray
    true_airspeed: FloatArray


def check_many(
    model: Model,
    *,
    manifold_pressure: FloatArray,
    rpm: FloatArray,
    pressure_altitude: FloatArray,
    temperature: FloatArray,
    temperature_read: npt.NDArray[np.bool_],
    mass: FloatArray,
    mixture: npt.NDArray[np.intp],
) -> Checked:
    """Hold many settings against every limit.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    manifold_pressure : ndarray, shape (n,)
        What the manifold-pressure gauge reads [Pa]
    rpm : ndarray, shape (n,)
        What the tachometer reads [rpm]
    pressure_altitude : ndarray, shape (n,)
        Pressure altitude [m]
    temperature : ndarray, shape (n,)
        What the thermometer reads in flight where `temperature_read`, else true temperature [K]
    temperature_read : ndarray of bool, shape (n,)
        Which of the two [-]
    mass : ndarray, shape (n,)
        Mass of the aircraft [kg]
    mixture : ndarray of int, shape (n,)
        Index of the mixture [-]

    Returns
    -------
    Checked
        In the order of the settings [-]
    """
    size = rpm.size
    verdict = np.zeros(size, dtype=np.int8)
    reasons = np.full(size, "", dtype=object)
    power, fuel, speed = (np.full(size, np.nan) for _ in range(3))
    for index in np.unique(mixture):
        places = np.flatnonzero(mixture == index)
        for start in range(0, places.size, CHUNK):
            at = places[start : start + CHUNK]
            situation = Situation(pressure_altitude[at], temperature[at], mass[at], int(index))
            true = true_temperature_of(
                model, situation, indicated_rpm=rpm[at], indicated_pressure=manifold_pressure[at]
            )
            situation = replace(
                situation, temperature=np.where(temperature_read[at], true, temperature[at])
            )
            solution = solve(
                model,
                situation,
                indicated_rpm=rpm[at],
                indicated_pressure=manifold_pressure[at],
                with_tolerance=False,
            )
            verdict[at], reasons[at] = _verdicts(model, solution)
            power[at] = solution.power_fraction
            fuel[at] = solution.point.fuel_flow
            speed[at] = solution.point.true_airspeed
    return Checked(verdict, [str(reason) for reason in reasons], power, fuel, speed)


def _verdicts(
    model: Model, solution: Solution
) -> tuple[npt.NDArray[np.int8], npt.NDArray[np.object_]]:
    """Verdicts, and the names of the limits that give them."""
    findings = judge(model, solution)
    verdict = findings.verdict
    reasons = np.full(verdict.shape, "", dtype=object)
    for judgement in findings.judgements:
        gives = (judgement.verdict == verdict) & (verdict != Verdict.INSIDE)
        named = reasons[gives]
        joined = [
            old if judgement.limit in old.split() else f"{old} {judgement.limit}".strip()
            for old in named
        ]
        reasons[gives] = joined
    unsolved = np.isnan(solution.point.power)
    if unsolved.any():
        words = np.array(status_words(findings, solution), dtype=object)
        reasons[unsolved] = words[unsolved]
    return verdict, reasons
