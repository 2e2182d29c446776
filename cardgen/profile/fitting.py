"""A profile fitted to points, on top of what an earlier fit still says."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from cardgen.fit import (
    Estimate,
    EvidenceRange,
    Knowledge,
    carried_over,
    estimate,
    knowledge_from_fit,
    prior_covariance,
    prior_mean,
)
from cardgen.profile.assembly import subject_of
from cardgen.profile.digest import MODEL_VERSION
from cardgen.profile.document import Profile
from cardgen.profile.fit_file import (
    Earlier,
    FitRecord,
    match,
    mixture_digests,
    part_digests,
)
from cardgen.profile.points import Points

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Start:
    """What is known before the points are looked at.

    Parameters
    ----------
    mean : ndarray, shape (p,)
        Parameters [-]
    covariance : ndarray, shape (p, p)
        Their covariance [-]
    earlier : Earlier, optional
        The earlier fit it comes from; None where it is the profile alone [-]
    notes : tuple of str
        Why, in words [-]
    """

    mean: FloatArray
    covariance: FloatArray
    earlier: Earlier | None
    notes: tuple[str, ...]


def start_of(profile: Profile, points: Points, *, record: FitRecord | None) -> Start:
    """Return what is known before the points are looked at.

    Parameters
    ----------
    profile : Profile
        The aircraft as it is [-]
    points : Points
        What is to be fitted [-]
    record : FitRecord, optional
        The fit that stands so far [-]

    Returns
    -------
    Start
        The priors of the profile, or what the earlier fit still says [-]

    Notes
    -----
    No row counts twice. Where rows of the standing fit are given again, everything starts from
    what that fit started from; where none is, its result is the prior, with the parameters of
    parts that were replaced since back at what their data sheets say.
    """
    subject = subject_of(profile)
    mean = prior_mean(subject.aircraft, subject.mixtures)
    covariance = prior_covariance(subject.mixtures)
    alone = Start(mean, covariance, None, ())
    if record is None or record.model_version != MODEL_VERSION:
        return alone
    given = set(points.row_digests)
    before = set(record.earlier.rows) if record.earlier else set()
    found = match(profile, record)
    if not given & (set(record.rows) | before):
        if not found.unchanged and not found.mixtures:
            return alone
        kept = carried_over(
            subject, record.knowledge, unchanged=found.unchanged, mixtures=found.mixtures
        )
        rows = (*(record.earlier.rows if record.earlier else ()), *record.rows)
        covers = None if found.replaced else record.knowledge.covers
        words = f"Starts from an earlier fit to {len(rows)} rows, not given here."
        changed = (
            f" Replaced since: {', '.join(found.replaced)}; back at data-sheet values."
            if found.replaced
            else ""
        )
        return Start(
            kept.values,
            kept.covariance,
            Earlier(kept.values, kept.covariance, rows, covers),
            (words + changed,),
        )
    notes = []
    if found.replaced:
        notes.append(
            f"{' and '.join(found.replaced)} changed in the profile since rows given here were "
            "fitted. If a part was replaced, those rows are of the old one: fit only flights made "
            "since, the earlier fit tells the rest."
        )
    elif record.earlier is not None and not given & before:
        notes.append(f"Starts from an earlier fit to {len(before)} rows, not given here.")
        return Start(record.earlier.values, record.earlier.covariance, record.earlier, tuple(notes))
    left = len((set(record.rows) | before) - given)
    if left:
        notes.append(f"{left} rows of the earlier fit are not given here and no longer count.")
    return Start(mean, covariance, None, tuple(notes))


def fit_points(profile: Profile, points: Points, start: Start) -> Estimate:
    """Fit the parameters of a profile to points.

    Parameters
    ----------
    profile : Profile
        The aircraft [-]
    points : Points
        Its evidence [-]
    start : Start
        What is known before [-]

    Returns
    -------
    Estimate
        What was found [-]
    """
    return estimate(
        subject_of(profile), points.evidence, mean=start.mean, covariance=start.covariance
    )


def record_of(
    profile: Profile,
    points: Points,
    start: Start,
    *,
    found: Estimate,
    warnings: tuple[str, ...],
) -> FitRecord:
    """Return what a fit file holds.

    Parameters
    ----------
    profile : Profile
        The aircraft [-]
    points : Points
        Its evidence [-]
    start : Start
        What was known before [-]
    found : Estimate
        What was found [-]
    warnings : tuple of str
        What to be wary of [-]

    Returns
    -------
    FitRecord
        Every part fitted, for the parts as they are [-]
    """
    return FitRecord(
        aircraft=profile.name,
        knowledge=knowledge_of(profile, points, start, found=found),
        prior=found.prior,
        prior_deviation=found.prior_deviation,
        parts=part_digests(profile),
        mixtures=mixture_digests(profile),
        files=points.files,
        rows=points.row_digests,
        flight_rows=int(points.evidence.flight.sum()),
        rms=found.rms(),
        left_out_rms=found.left_out_rms(),
        warnings=warnings,
        earlier=start.earlier,
    )


def knowledge_of(profile: Profile, points: Points, start: Start, *, found: Estimate) -> Knowledge:
    """Return what is known after a fit.

    Parameters
    ----------
    profile : Profile
        The aircraft [-]
    points : Points
        Its evidence [-]
    start : Start
        What was known before [-]
    found : Estimate
        What was found [-]

    Returns
    -------
    Knowledge
        With the ranges of an earlier fit added, where that was of the same parts [-]
    """
    knowledge = knowledge_from_fit(subject_of(profile), points.evidence, found)
    before = start.earlier.covers if start.earlier else None
    if before is None or knowledge.covers is None:
        return knowledge
    return replace(knowledge, covers=_both(before, knowledge.covers))


def _both(one: EvidenceRange, other: EvidenceRange) -> EvidenceRange:
    """Return the ranges that hold two."""

    def ends(name: str) -> tuple[float, float]:
        (low, high), (least, greatest) = getattr(one, name), getattr(other, name)
        return min(low, least), max(high, greatest)

    return EvidenceRange(ends("pressure"), ends("temperature"), ends("rpm"), ends("power"))
