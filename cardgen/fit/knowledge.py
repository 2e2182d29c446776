"""What is known of an aircraft's parameters: from its profile alone, or from a fit as well."""

from __future__ import annotations

from collections.abc import Collection

import numpy as np
import numpy.typing as npt

from cardgen.fit.estimate import Estimate
from cardgen.fit.evidence import Evidence, assumed_scatter
from cardgen.fit.model import Subject, cruise_of_rows
from cardgen.fit.parameters import (
    FUEL_SCALE_PREFIX,
    PARTS,
    Part,
    parameters,
    prior_covariance,
    prior_mean,
)
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]
Bounds = tuple[float, float]


@dataclass(frozen=True, slots=True)
class EvidenceRange:
    """Least and greatest of what the evidence covers.

    Parameters
    ----------
    pressure : tuple of float
        Static pressure [Pa]
    temperature : tuple of float
        True static temperature [K]
    rpm : tuple of float
        True crankshaft speed [rpm]
    power : tuple of float
        Brake power by the fitted model [W]
    """

    pressure: Bounds
    temperature: Bounds
    rpm: Bounds
    power: Bounds


@dataclass(frozen=True, slots=True)
class Knowledge:
    """Parameters of an aircraft with their covariance.

    Parameters
    ----------
    names : tuple of str
        Names of the parameters [-]
    values : ndarray, shape (p,)
        Parameters [-]
    covariance : ndarray, shape (p, p)
        Their covariance [-]
    scatter : ndarray, shape (3,)
        Deviation of manifold pressure, fuel flow and airspeed besides the parameters
        [Pa, kg/s, m/s]
    fitted : tuple of str
        Parts whose parameters come from evidence of that very part [-]
    covers : EvidenceRange, optional
        What the evidence covers; None without a fit [-]
    """

    names: tuple[str, ...]
    values: FloatArray
    covariance: FloatArray
    scatter: FloatArray
    fitted: tuple[Part, ...] = ()
    covers: EvidenceRange | None = None


def knowledge_from_profile(subject: Subject) -> Knowledge:
    """What a profile alone says: the priors.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures as the profile builds them [-]

    Returns
    -------
    Knowledge
        Nothing fitted [-]
    """
    return Knowledge(
        names=tuple(parameter.name for parameter in parameters(subject.mixtures)),
        values=prior_mean(subject.aircraft, subject.mixtures),
        covariance=prior_covariance(subject.mixtures),
        scatter=assumed_scatter(),
    )


def knowledge_from_fit(subject: Subject, evidence: Evidence, estimate: Estimate) -> Knowledge:
    """What a fit says.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures as the profile builds them [-]
    evidence : Evidence
        What was fitted to [-]
    estimate : Estimate
        What was found [-]

    Returns
    -------
    Knowledge
        Every part fitted [-]
    """
    return Knowledge(
        names=estimate.names,
        values=estimate.values,
        covariance=estimate.covariance,
        scatter=estimate.scatter,
        fitted=PARTS,
        covers=evidence_range(subject, evidence, values=estimate.values),
    )


def evidence_range(subject: Subject, evidence: Evidence, *, values: FloatArray) -> EvidenceRange:
    """Least and greatest of what evidence covers.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures as the profile builds them [-]
    evidence : Evidence
        The rows [-]
    values : ndarray, shape (p,)
        Parameters with which the power of the rows is found [-]

    Returns
    -------
    EvidenceRange
        Ranges of the rows [-]
    """
    power = cruise_of_rows(subject, evidence, values=values).power

    def ends(numbers: FloatArray) -> Bounds:
        return float(np.nanmin(numbers)), float(np.nanmax(numbers))

    return EvidenceRange(
        pressure=ends(evidence.pressure),
        temperature=ends(evidence.temperature),
        rpm=ends(evidence.rpm),
        power=ends(power),
    )


def carried_over(
    subject: Subject,
    record: Knowledge,
    *,
    unchanged: Collection[Part],
    mixtures: Collection[str] = (),
) -> Knowledge:
    """What an earlier fit still says after some parts were replaced.

    Parameters
    ----------
    subject : Subject
        The aircraft as it is now [-]
    record : Knowledge
        What was known of the aircraft as it was [-]
    unchanged : collection of str
        Parts that are still the same [-]
    mixtures : collection of str
        Names of mixtures that are still the same where not all of them are [-]

    Returns
    -------
    Knowledge
        The groups of unchanged parts as they were found, with their own covariance; those of the
        others as the profile gives them; the range of the evidence only where nothing changed [-]

    Notes
    -----
    Between an unchanged group and a replaced one no covariance is left: what was found of the old
    part says nothing of the new one, and what is kept is the marginal of the unchanged groups.

    Scatter is never less than what is assumed of flights: the rows of a handbook are smoothed, and
    how far they lie from a smooth model says little of how far this aircraft lies from them.
    """
    fresh = knowledge_from_profile(subject)
    listed = parameters(subject.mixtures)
    known = {name: place for place, name in enumerate(record.names)}
    kept_scales = {FUEL_SCALE_PREFIX + name for name in mixtures}
    kept = [
        (here, known[item.name])
        for here, item in enumerate(listed)
        if item.name in known and (item.part in unchanged or item.name in kept_scales)
    ]
    here = np.array([a for a, _ in kept], dtype=np.intp)
    there = np.array([b for _, b in kept], dtype=np.intp)
    values, covariance = fresh.values.copy(), fresh.covariance.copy()
    values[here] = record.values[there]
    covariance[here, :] = 0.0
    covariance[:, here] = 0.0
    covariance[np.ix_(here, here)] = record.covariance[np.ix_(there, there)]
    fitted = tuple(part for part in record.fitted if part in unchanged)
    return Knowledge(
        names=fresh.names,
        values=values,
        covariance=covariance,
        scatter=np.maximum(record.scatter, fresh.scatter) if fitted else fresh.scatter,
        fitted=fitted,
        covers=record.covers if len(fitted) == len(PARTS) else None,
    )
