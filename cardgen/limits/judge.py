"""Each kind of limit held against arrays of settings: a verdict and a margin, no words.

A setting is judged over everything it may truly be: the box of true rpm and true manifold pressure
that gauge error allows, and the model's tolerance on power and airspeed. It is *outside* if any of
that breaks the limit, *inside* only if all of it provably keeps it, and *unknown* otherwise; a NaN
satisfies neither. Margins are negative or zero where a limit is broken.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, TypeVar

import numpy as np

from cardgen.limits.finding import BoolArray, FloatArray, Verdict, VerdictArray
from cardgen.limits.flown import Span, Spans
from cardgen.limits.kinds import (
    Limit,
    RestrictedRpm,
    RpmRange,
)

SLACK: Final = 1e-6
"""Relative difference that counts as equal: solvers close to about this, gauges read coarser."""

OTHER_PHASES: Final = frozenset(
    {"ground", "taxi", "run-up", "take-off", "takeoff", "climb", "descent", "approach", "landing"}
)
"""Phases that make a restricted range a note to a cruise card. Any other word bars cruise."""

Judged = tuple[VerdictArray, FloatArray]
AnyLimit = TypeVar("AnyLimit", bound=Limit)


def verdict_where(broken: BoolArray, kept: BoolArray, *, broken_as: Verdict) -> VerdictArray:
    """Return the verdict where a limit is broken, provably kept, or neither.

    Parameters
    ----------
    broken, kept : ndarray of bool
        Where some true value breaks it, where every true value keeps it [-]
    broken_as : Verdict
        What breaking it is [-]

    Returns
    -------
    ndarray of int8
        A `Verdict` for each setting, unknown where neither holds [-]
    """
    verdict: VerdictArray = np.where(
        broken, broken_as, np.where(kept, Verdict.INSIDE, Verdict.UNKNOWN)
    ).astype(np.int8)
    return verdict


def at_most(
    value: FloatArray, greatest: float | FloatArray, *, broken_as: Verdict = Verdict.OUTSIDE
) -> Judged:
    """Return the verdict on values that may reach a limit but not pass it.

    Parameters
    ----------
    value : ndarray
        Greatest value each setting may have [SI]
    greatest : float or ndarray
        The limit [SI]
    broken_as : Verdict
        What a value above it is [-]

    Returns
    -------
    tuple of ndarray
        Verdict and room below the limit [-], [SI]
    """
    margin: FloatArray = np.asarray(greatest - value)
    slack = SLACK * np.abs(greatest)
    return verdict_where(margin < -slack, margin >= -slack, broken_as=broken_as), margin


def at_least(
    value: FloatArray, least: float | FloatArray, *, broken_as: Verdict = Verdict.OUTSIDE
) -> Judged:
    """Return the verdict on values that may fall to a limit but not below it.

    Parameters
    ----------
    value : ndarray
        Least value each setting may have [SI]
    least : float or ndarray
        The limit [SI]
    broken_as : Verdict
        What a value below it is [-]

    Returns
    -------
    tuple of ndarray
        Verdict and room above the limit [-], [SI]
    """
    margin: FloatArray = np.asarray(value - least)
    slack = SLACK * np.abs(least)
    return verdict_where(margin < -slack, margin >= -slack, broken_as=broken_as), margin


def stricter(judged: Sequence[Judged]) -> Judged:
    """Return the worst verdict and the least margin, setting by setting.

    Parameters
    ----------
    judged : sequence of (ndarray, ndarray)
        Verdicts and margins in one unit [-]

    Returns
    -------
    tuple of ndarray
        Verdict and margin; a margin that is not known does not hide another [-]
    """
    verdict, margin = judged[0]
    for other_verdict, other_margin in judged[1:]:
        verdict = np.maximum(verdict, other_verdict)
        margin = np.fmin(margin, other_margin)
    return verdict, margin


def judge_between(
    span: Span,
    least: float | None,
    greatest: float | None,
    *,
    broken_as: Verdict = Verdict.OUTSIDE,
) -> Judged:
    """Judge values that must lie between two numbers, ends included, either of them open.

    Parameters
    ----------
    span : Span
        True values each setting may have [SI]
    least, greatest : float or None
        Ends of the range [SI]
    broken_as : Verdict
        What a value beyond an end is [-]

    Returns
    -------
    tuple of ndarray
        Verdict and margin to the nearer end [-], [SI]
    """
    judged: list[Judged] = []
    if least is not None:
        judged.append(at_least(span.low, least, broken_as=broken_as))
    if greatest is not None:
        judged.append(at_most(span.high, greatest, broken_as=broken_as))
    if not judged:  # a limit without a number allows nothing
        return constant(span.low.shape, Verdict.UNKNOWN)
    return stricter(judged)


def constant(shape: tuple[int, ...], verdict: Verdict) -> Judged:
    """Return one verdict for every setting, without a margin.

    Parameters
    ----------
    shape : tuple of int
        Shape of the settings [-]
    verdict : Verdict
        The verdict [-]

    Returns
    -------
    tuple of ndarray
        Verdict and margins of NaN [-]
    """
    return np.full(shape, verdict, dtype=np.int8), np.full(shape, np.nan)


def bars_cruise(limit: RestrictedRpm) -> bool:
    """Return whether a restricted range bars cruise rather than being a note.

    Parameters
    ----------
    limit : RestrictedRpm
        The range [-]

    Returns
    -------
    bool
        False only where its phase is known to be another one than cruise [-]
    """
    return limit.phase is None or limit.phase.strip().casefold() not in OTHER_PHASES


def condition_met(limit: RestrictedRpm, pressure: Span) -> tuple[BoolArray, BoolArray]:
    """Return where the manifold pressure may close a restricted range, and where it cannot.

    Parameters
    ----------
    limit : RestrictedRpm
        The range [-]
    pressure : Span
        True manifold pressures each setting may have [Pa]

    Returns
    -------
    tuple of ndarray of bool
        May close it, cannot close it; both false where the pressure is not known [-]

    Notes
    -----
    With both conditions the range is closed between them; where "above" is the greater of the two
    that would be never, so each then closes the range on its own.
    """
    above, below = limit.above_manifold_pressure, limit.below_manifold_pressure
    every = np.ones(pressure.low.shape, dtype=np.bool_)
    if above is None and below is None:
        return every, ~every
    above_may = every if above is None else pressure.high >= above * (1.0 - SLACK)
    above_not = ~every if above is None else pressure.high < above * (1.0 - SLACK)
    below_may = every if below is None else pressure.low <= below * (1.0 + SLACK)
    below_not = ~every if below is None else pressure.low > below * (1.0 + SLACK)
    if above is not None and below is not None and above > below:
        return above_may | below_may, above_not & below_not
    return above_may & below_may, above_not | below_not


def judge_restricted_rpm(limit: RestrictedRpm, spans: Spans) -> Judged:
    """Judge settings against one restricted rpm range.

    Parameters
    ----------
    limit : RestrictedRpm
        The range; its ends belong to it [-]
    spans : Spans
        True values each setting may have [-]

    Returns
    -------
    tuple of ndarray
        Verdict and rpm to the nearer end, inf where the range does not apply [-], [rpm]
    """
    low, high = sorted((limit.low_rpm, limit.high_rpm))
    margin = np.maximum(low - spans.rpm.high, spans.rpm.low - high)
    may, cannot = condition_met(limit, spans.manifold_pressure)
    clear = margin > SLACK * high
    touched = margin <= SLACK * high
    broken_as = Verdict.OUTSIDE if bars_cruise(limit) else Verdict.CAUTION
    verdict = verdict_where(touched & may, clear | cannot, broken_as=broken_as)
    return verdict, np.where(cannot, np.inf, margin)


def judge_rpm_range(limit: RpmRange, spans: Spans) -> Judged:
    """Judge settings against the least and greatest rpm.

    Parameters
    ----------
    limit : RpmRange
        The range, ends included [-]
    spans : Spans
        True values each setting may have [-]

    Returns
    -------
    tuple of ndarray
        Verdict and rpm to the nearer end [-], [rpm]
    """
    return judge_between(spans.rpm, limit.least_rpm, limit.greatest_rpm)


def same_limit(limits: Sequence[AnyLimit]) -> tuple[tuple[AnyLimit, ...], ...]:
    """Return limits gathered by name: the members of a group are one limit by several sources.

    Parameters
    ----------
    limits : sequence
        Limits of one kind, each with a `name` [-]

    Returns
    -------
    tuple of tuple
        Groups in the order of their first members; a limit without a name is its own group [-]
    """
    groups: dict[str | int, list[AnyLimit]] = {}
    for place, limit in enumerate(limits):
        groups.setdefault(limit.name or place, []).append(limit)
    return tuple(tuple(group) for group in groups.values())


def judge_leaning_power(greatest: float, power_fraction: Span) -> Judged:
    """Judge settings against the greatest share of rated power that a mixture is allowed at.

    Parameters
    ----------
    greatest : float
        The ceiling [-]
    power_fraction : Span
        Power that each setting may give, or would give with the best-power mixture [-]

    Returns
    -------
    tuple of ndarray
        Verdict and room below the ceiling [-], [-]
    """
    return at_most(power_fraction.high, greatest)


def judge_leaning_pressure(greatest: float, spans: Spans) -> Judged:
    """Judge settings against the greatest manifold pressure that a mixture is allowed at.

    Parameters
    ----------
    greatest : float
        The ceiling [Pa]
    spans : Spans
        True values each setting may have [-]

    Returns
    -------
    tuple of ndarray
        Verdict and room below the ceiling [-], [Pa]
    """
    return at_most(spans.manifold_pressure.high, greatest)


def judge_full_throttle(spans: Spans, *, full_throttle: FloatArray) -> Judged:
    """Judge whether a throttle can give the manifold pressure of a setting.

    Parameters
    ----------
    spans : Spans
        True values each setting may have [-]
    full_throttle : ndarray
        True manifold pressure at full throttle [Pa]

    Returns
    -------
    tuple of ndarray
        Verdict and pressure below full throttle [-], [Pa]

    Notes
    -----
    Nothing breaks here, so gauge error works the other way: only a pressure that even the least
    true value exceeds cannot be reached (outside); one the likely value exceeds may not be
    (caution).
    """
    verdict, _ = at_most(spans.manifold_pressure.low, full_throttle)
    doubtful, margin = at_most(
        spans.manifold_pressure.likely, full_throttle, broken_as=Verdict.CAUTION
    )
    return np.maximum(verdict, doubtful), margin
