"""A profile fitted to points, on top of what an earlier fit still says."""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.errors import DataError, Problem
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
from cardgen.fit.suspicion import Suspicion, suspect_columns
from cardgen.profile.assembly import subject_of
from cardgen.profile.digest import MODEL_VERSION
from cardgen.profile.document import Profile
from cardgen.profile.fit_file import Match, match, mixture_digests, part_digests
from cardgen.profile.fit_record import Earlier, FitRecord
from cardgen.profile.points import Points
from cardgen.records import dataclass

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


def start_of(
    profile: Profile, points: Points, *, record: FitRecord | None, corrected: bool = False
) -> Start:
    """Return what is known before the points are looked at.

    Parameters
    ----------
    profile : Profile
        The aircraft as it is [-]
    points : Points
        What is to be fitted [-]
    record : FitRecord, optional
        The fit that stands so far [-]
    corrected : bool
        Whether the user says that part files were corrected and nothing was replaced [-]

    Returns
    -------
    Start
        The priors of the profile, or what the earlier fit still says [-]

    Raises
    ------
    DataError
        A part is another one than that which evidence given here was taken with.

    Notes
    -----
    After a part was replaced, and where none of the evidence of the standing fit is given again,
    that fit is the prior, with the parameters of the replaced part back at what its data sheet
    says. As long as nothing more is replaced every new fit starts from the same. In all other
    cases the points given are all there is: an earlier fit to rows that were corrected since, or
    to the same ones, must not count beside them.
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
    again = given & (set(record.rows) | before) or set(points.files) & set(record.files)
    if found.replaced:
        changed = " and ".join(found.replaced)
        if again and not corrected:
            raise DataError(
                [
                    Problem(
                        str(profile.path),
                        0,
                        0,
                        "",
                        f"{changed} changed since evidence given here was fitted, so that this "
                        "evidence is of the old one",
                        "only points flown since, with --points FILE: the earlier fit tells the "
                        "rest; or --corrected, if the file was mended and nothing was replaced",
                    )
                ]
            )
        if again:
            note = f"{changed} corrected in the profile since evidence given here was fitted."
            return Start(mean, covariance, None, (note,))
        return _carried(profile, record, found, changed)
    if record.earlier is not None and not given & before:
        note = _STARTS.format(len(before))
        return Start(record.earlier.values, record.earlier.covariance, record.earlier, (note,))
    left = len((set(record.rows) | before) - given)
    if left and not set(points.files) & set(record.files):
        note = (
            f"The standing fit was to {left} rows that are not given here and no longer count; "
            "give their files as well if they are of this aircraft as it is."
        )
        return Start(mean, covariance, None, (note,))
    return alone


def _carried(profile: Profile, record: FitRecord, found: Match, changed: str) -> Start:
    """Return what a fit still says after parts were replaced."""
    kept = carried_over(
        subject_of(profile), record.knowledge, unchanged=found.unchanged, mixtures=found.mixtures
    )
    rows = (*(record.earlier.rows if record.earlier else ()), *record.rows)
    note = _STARTS.format(len(rows)) + f" Replaced since: {changed}; back at data-sheet values."
    assert record.knowledge.covers is not None  # a fit file states it
    earlier = Earlier(kept.values, kept.covariance, rows, record.knowledge.covers)
    return Start(kept.values, kept.covariance, earlier, (note,))


_STARTS: Final = "Starts from an earlier fit to {} rows, not given here."


def suspect(profile: Profile, points: Points, start: Start) -> tuple[Suspicion, ...]:
    """Find columns whose numbers look like another unit than their name says.

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
    tuple of Suspicion
        None where everything is as its name says [-]
    """
    return suspect_columns(
        subject_of(profile),
        points.evidence,
        points.readings,
        mean=start.mean,
        covariance=start.covariance,
    ).columns


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
        It covers what the points cover and what an earlier fit covered that it starts from: the
        parts that are still the same were seen there [-]
    """
    knowledge = knowledge_from_fit(subject_of(profile), points.evidence, found)
    if start.earlier is None or knowledge.covers is None:
        return knowledge
    return replace(knowledge, covers=_both(start.earlier.covers, knowledge.covers))


def _both(one: EvidenceRange, other: EvidenceRange) -> EvidenceRange:
    """Return the ranges that hold two."""

    def ends(name: str) -> tuple[float, float]:
        (low, high), (least, greatest) = getattr(one, name), getattr(other, name)
        return min(low, least), max(high, greatest)

    return EvidenceRange(ends("pressure"), ends("temperature"), ends("rpm"), ends("power"))


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
