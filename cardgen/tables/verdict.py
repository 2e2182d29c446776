"""Solved settings held against every limit of the aircraft."""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import (
    density,
    pressure_altitude,
    speed_of_sound,
    standard_pressure,
    vapour_pressure,
)
from cardgen.constants import FOOT
from cardgen.cruise import CruiseStatus
from cardgen.engine import brake_power, power_line
from cardgen.engine.model import RPM_RANGE
from cardgen.limits import Evidence, Findings, Flown, MessageUnits, Verdict, check
from cardgen.propeller import ungoverned_rpm
from cardgen.tables.solution import Model, Solution

FloatArray = npt.NDArray[np.float64]

# Half a step of the rows that handbooks print: between two rows is not outside the evidence, and
# this far beyond the last is no farther from a row than that. Common practice, no source.
_ALTITUDE_STEP: Final = 1000.0 * FOOT
_RPM_STEP: Final = 50.0
_POWER_STEP: Final = 0.025
_TEMPERATURE_STEP: Final = 5.0


def flown(model: Model, solution: Solution) -> Flown:
    """A solution as the limits see it.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    solution : Solution
        Solved settings [-]

    Returns
    -------
    Flown
        Arrays of the same shape [-]

    Notes
    -----
    The tolerance of the model is not counted against a limit: it is stated beside the number. The
    error of the gauges is counted, by `cardgen.limits.check`.
    """
    point = solution.point
    situation = solution.situation
    words = np.array([status.word for status in CruiseStatus])
    return Flown(
        indicated_rpm=solution.indicated_rpm,
        indicated_manifold_pressure=solution.indicated_manifold_pressure,
        pressure_altitude=situation.pressure_altitude,
        temperature=situation.temperature,
        mixture=model.subject.mixtures[situation.mixture].name,
        power_fraction=solution.power_fraction,
        power=point.power,
        calibrated_airspeed=point.calibrated_airspeed,
        full_throttle_manifold_pressure=point.full_throttle_manifold_pressure,
        on_fine_stop=point.status == CruiseStatus.FINE_STOP,
        on_coarse_stop=point.status == CruiseStatus.COARSE_STOP,
        governed_rpm=settled_rpm(model, solution),
        power_fraction_at_best_power=solution.best_power_fraction,
        solved=~np.isnan(point.power),
        status=words[point.status],
        evidence=_evidence(model),
    )


def judge(model: Model, solution: Solution, *, units: MessageUnits | None = None) -> Findings:
    """Hold a solution against every limit of the aircraft.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    solution : Solution
        Solved settings [-]
    units : MessageUnits, optional
        Units of the messages [-]

    Returns
    -------
    Findings
        A judgement for every limit and setting [-]
    """
    return check(model.limits, model.gauges, flown(model, solution), units=units or MessageUnits())


def _evidence(model: Model) -> Evidence | None:
    """Range of the evidence as the limits see it, half a handbook's step wider."""
    covers = model.knowledge.covers
    if covers is None:
        return None
    high, low = (float(pressure_altitude(pressure)) for pressure in covers.pressure)
    rated = model.percent_of.power
    return Evidence(
        pressure_altitude=(low - _ALTITUDE_STEP, high + _ALTITUDE_STEP),
        rpm=(covers.rpm[0] - _RPM_STEP, covers.rpm[1] + _RPM_STEP),
        power_fraction=(
            covers.power[0] / rated - _POWER_STEP,
            covers.power[1] / rated + _POWER_STEP,
        ),
        temperature=(
            covers.temperature[0] - _TEMPERATURE_STEP,
            covers.temperature[1] + _TEMPERATURE_STEP,
        ),
    )


def settled_rpm(model: Model, solution: Solution) -> FloatArray:
    """Rpm that the engine takes where the governor cannot hold what was asked.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    solution : Solution
        Solved settings [-]

    Returns
    -------
    ndarray
        True crankshaft speed at the stop, manifold pressure and airspeed held; NaN where the
        governor holds, and where no speed inside the model balances [rpm]
    """
    point = solution.point
    settled = np.full(point.power.shape, np.nan)
    aircraft, mixtures = model.fitted()
    least, greatest = (share * aircraft.engine.rated_rpm for share in RPM_RANGE)
    for status, stop in (
        (CruiseStatus.FINE_STOP, aircraft.propeller.fine_stop),
        (CruiseStatus.COARSE_STOP, aircraft.propeller.coarse_stop),
    ):
        held = point.status == status
        if not held.any():
            continue
        shape = point.power.shape
        pressure = np.broadcast_to(standard_pressure(solution.situation.pressure_altitude), shape)[
            held
        ]
        temperature = np.broadcast_to(np.asarray(solution.situation.temperature), shape)[held]
        vapour = vapour_pressure(model.relative_humidity, temperature)
        setting = point.manifold_pressure[held]
        gear = aircraft.engine.gear_ratio

        def power(
            propeller_rpm: FloatArray,
            *,
            pressure: FloatArray = pressure,
            temperature: FloatArray = temperature,
            vapour: FloatArray = vapour,
            setting: FloatArray = setting,
            gear: float = gear,
        ) -> FloatArray:
            line = power_line(
                aircraft.engine,
                propeller_rpm / gear,
                mixture=mixtures[solution.situation.mixture],
                pressure=pressure,
                temperature=temperature,
                vapour_pressure=vapour,
            )
            return brake_power(line, setting)

        settled[held] = (
            ungoverned_rpm(
                aircraft.propeller,
                power,
                blade_angle=stop,
                true_airspeed=point.true_airspeed[held],
                density=density(pressure, temperature, vapour_pressure=vapour),
                speed_of_sound=speed_of_sound(temperature),
                rpm_range=(least * gear, greatest * gear),
            )
            / gear
        )
    return settled


def status_words(findings: Findings, solution: Solution) -> list[str]:
    """`ok`, or one word for why a setting is not.

    Parameters
    ----------
    findings : Findings
        What the limits say [-]
    solution : Solution
        The settings [-]

    Returns
    -------
    list of str
        One for each setting: the solver's word where it has no answer, else the first limit that is
        broken, else `evidence` where the evidence does not reach, else `ok` [-]
    """
    words = np.full(findings.shape, "ok", dtype=object)
    for judgement in findings.judgements:
        if judgement.limit == "evidence":
            words[judgement.verdict != Verdict.INSIDE] = judgement.limit
    for judgement in reversed(findings.judgements):
        words[judgement.verdict == Verdict.OUTSIDE] = judgement.limit
    for status in (CruiseStatus.NO_LEVEL_FLIGHT, CruiseStatus.OUTSIDE_MODEL):
        words[solution.point.status == status] = status.word
    return [str(word) for word in words.reshape(-1)]
