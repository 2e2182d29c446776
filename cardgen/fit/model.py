"""What the model says to rows of evidence, for one or many sets of parameters."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from cardgen.aircraft import Aircraft, Condition, Setting
from cardgen.airframe import dynamic_pressure_of_least_power, least_dynamic_pressure
from cardgen.atmosphere import density
from cardgen.constants import GRAVITY
from cardgen.cruise import CruisePoint, balance, solve_cruise
from cardgen.engine import Mixture
from cardgen.fit.evidence import Evidence
from cardgen.fit.parameters import applied
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Subject:
    """The aircraft and mixtures that are fitted, as the profile builds them."""

    aircraft: Aircraft
    mixtures: tuple[Mixture, ...]


def mixture_of_rows(mixtures: Sequence[Mixture], index: npt.NDArray[np.intp]) -> Mixture:
    """One mixture whose numbers are arrays, a row's own in each place.

    Parameters
    ----------
    mixtures : sequence of Mixture
        The mixtures [-]
    index : ndarray of int, shape (n,)
        Which of them each row uses [-]

    Returns
    -------
    Mixture
        With arrays of shape (n,), or (k, n) where the fuel scales have shape (k, 1) [-]
    """
    ratios = np.array([mixture.fuel_air_ratio for mixture in mixtures], dtype=np.float64)
    scales = np.concatenate(
        [np.atleast_1d(np.asarray(mixture.fuel_scale, dtype=np.float64)) for mixture in mixtures],
        axis=-1,
    )
    return Mixture("rows", ratios[index], fuel_scale=scales[..., index])


def predict(subject: Subject, evidence: Evidence, *, values: FloatArray) -> FloatArray:
    """Manifold pressure, fuel flow and true airspeed of rows of evidence.

    Parameters
    ----------
    subject : Subject
        What is fitted [-]
    evidence : Evidence
        The rows, n of them [-]
    values : ndarray, shape (p,) or (k, p)
        One or k sets of parameters [-]

    Returns
    -------
    ndarray, shape (n, 3) or (k, n, 3)
        In the order of `cardgen.fit.evidence.QUANTITIES`; NaN where the model has no answer [SI]

    Notes
    -----
    A row that states power is asked for that power, so that its manifold pressure is a prediction;
    a row that states only manifold pressure is asked for that, and predicts the rest.
    """
    point = cruise_of_rows(subject, evidence, values=values)
    return np.stack([point.manifold_pressure, point.fuel_flow, point.true_airspeed], axis=-1)


def predict_continued(subject: Subject, evidence: Evidence, *, values: FloatArray) -> FloatArray:
    """The same, continued to where there is no level flight, so that a search can cross it.

    Parameters
    ----------
    subject : Subject
        What is fitted [-]
    evidence : Evidence
        The rows, n of them [-]
    values : ndarray, shape (p,) or (k, p)
        One or k sets of parameters [-]

    Returns
    -------
    ndarray, shape (n, 3) or (k, n, 3)
        As `predict`; where drag exceeds thrust at every airspeed, what holds at the airspeed of
        least power, at which level flight ends: there is no jump at that border [SI]
    """
    predicted = predict(subject, evidence, values=values)
    lost = np.asarray(np.isnan(predicted).any(axis=-1))
    if not lost.any():
        return predicted
    rows = np.flatnonzero(lost.reshape(-1, len(evidence)).any(axis=0))
    short = evidence.rows(rows)
    aircraft, mixtures = applied(subject.aircraft, subject.mixtures, values=values)
    weight = short.mass * GRAVITY
    slowest = np.maximum(
        least_dynamic_pressure(aircraft.airframe, weight=weight),
        dynamic_pressure_of_least_power(aircraft.airframe, weight=weight),
    )
    condition, setting = _asked(mixtures, short)
    air = density(short.pressure, short.temperature)
    point = balance(aircraft, condition, setting=setting, true_airspeed=np.sqrt(2 * slowest / air))
    ends = np.stack([point.manifold_pressure, point.fuel_flow, point.true_airspeed], axis=-1)
    predicted[..., rows, :] = np.where(lost[..., rows, None], ends, predicted[..., rows, :])
    return predicted


def slopes(
    subject: Subject, evidence: Evidence, *, values: FloatArray, step: FloatArray
) -> FloatArray:
    """Derivatives of what the model says by each parameter.

    Parameters
    ----------
    subject : Subject
        What is fitted [-]
    evidence : Evidence
        The rows, n of them [-]
    values : ndarray, shape (p,)
        Parameters [-]
    step : ndarray, shape (p,)
        Half the distance of the central differences [-]

    Returns
    -------
    ndarray, shape (n, 3, p)
        0 where the model has no answer [SI]
    """
    shift = np.diag(step)
    both = predict_continued(
        subject, evidence, values=np.concatenate([values + shift, values - shift])
    )
    count = len(values)
    change = (both[:count] - both[count:]) / (2.0 * step[:, None, None])
    return np.nan_to_num(np.moveaxis(change, 0, -1))


def _asked(mixtures: Sequence[Mixture], evidence: Evidence) -> tuple[Condition, Setting]:
    """Where rows were flown, and what was asked there."""
    setting = Setting(
        evidence.rpm,
        mixture_of_rows(mixtures, evidence.mixture),
        power=evidence.power,
        manifold_pressure=evidence.manifold_pressure,
    )
    return Condition(evidence.pressure, evidence.temperature, evidence.mass), setting


def cruise_of_rows(subject: Subject, evidence: Evidence, *, values: FloatArray) -> CruisePoint:
    """Solve the cruise of rows of evidence.

    Parameters
    ----------
    subject : Subject
        What is fitted [-]
    evidence : Evidence
        The rows, n of them [-]
    values : ndarray, shape (p,) or (k, p)
        One or k sets of parameters [-]

    Returns
    -------
    CruisePoint
        Arrays of shape (n,) or (k, n) [-]
    """
    aircraft, mixtures = applied(subject.aircraft, subject.mixtures, values=values)
    condition, setting = _asked(mixtures, evidence)
    return solve_cruise(aircraft, condition, setting=setting)
