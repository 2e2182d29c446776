"""Each kind of limit held against arrays of settings: a verdict and a margin, no words.

A setting is judged over everything it may truly be: the box of true rpm and true manifold pressure
that gauge error allows, and the model's tolerance on power and airspeed. It is *outside* if any of
that breaks the limit, *inside* only if all of it provably keeps it, and *unknown* otherwise; a NaN
satisfies neither. Margins are negative or zero where a limit is broken.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, TypeVar

import numpy as np

from cardgen.limits.finding import BoolArray, FloatArray, Verdict, VerdictArray
from cardgen.limits.flown import Span, Spans
from cardgen.limits.kinds import (
    AltitudeSchedule,
    LeastManifoldPressure,
    Limit,
    ManifoldPressureCurve,
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


def _verdict(broken: BoolArray, kept: BoolArray, *, broken_as: Verdict) -> VerdictArray:
    """Return the verdict where a limit is broken, provably kept, or neither."""
    verdict: VerdictArray = np.where(
        broken, broken_as, np.where(kept, Verdict.INSIDE, Verdict.UNKNOWN)
    ).astype(np.int8)
    return verdict


def _at_most(
    value: FloatArray, greatest: float | FloatArray, *, broken_as: Verdict = Verdict.OUTSIDE
) -> Judged:
    """Return the verdict on values that may reach a limit but not pass it."""
    margin: FloatArray = np.asarray(greatest - value)
    slack = SLACK * np.abs(greatest)
    return _verdict(margin < -slack, margin >= -slack, broken_as=broken_as), margin


def _at_least(
    value: FloatArray, least: float | FloatArray, *, broken_as: Verdict = Verdict.OUTSIDE
) -> Judged:
    """Return the verdict on values that may fall to a limit but not below it."""
    margin: FloatArray = np.asarray(value - least)
    slack = SLACK * np.abs(least)
    return _verdict(margin < -slack, margin >= -slack, broken_as=broken_as), margin


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
        judged.append(_at_least(span.low, least, broken_as=broken_as))
    if greatest is not None:
        judged.append(_at_most(span.high, greatest, broken_as=broken_as))
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
    verdict = _verdict(touched & may, clear | cannot, broken_as=broken_as)
    return verdict, np.where(cannot, np.inf, margin)


@dataclass(frozen=True, slots=True)
class Charted:
    """Least and greatest value of a curve over an interval, and how much of it is charted."""

    least: FloatArray
    greatest: FloatArray
    wholly: BoolArray
    not_wholly: BoolArray


def curve_over(
    x: Sequence[float], y: Sequence[float], *, low: FloatArray, high: FloatArray
) -> Charted:
    """Return the extremes of a broken line over intervals, taken where it is charted.

    Parameters
    ----------
    x, y : sequence of float
        Points, in any order; two at one `x` are a step and both count there [-]
    low, high : ndarray
        Ends of the intervals [unit of x]

    Returns
    -------
    Charted
        Extremes, NaN where no part of an interval is charted [unit of y]

    Notes
    -----
    A broken line has its extremes over an interval at the interval's ends or at a point within.
    """
    order = np.argsort(np.asarray(x, dtype=np.float64), kind="stable")
    xs = np.asarray(x, dtype=np.float64)[order]
    ys = np.asarray(y, dtype=np.float64)[order]
    first, last = xs[0] - SLACK * abs(xs[0]), xs[-1] + SLACK * abs(xs[-1])
    charted = (high >= first) & (low <= last)
    at_low = np.interp(np.clip(low, xs[0], xs[-1]), xs, ys)
    at_high = np.interp(np.clip(high, xs[0], xs[-1]), xs, ys)
    least, greatest = np.minimum(at_low, at_high), np.maximum(at_low, at_high)
    for point, value in zip(xs, ys, strict=True):
        near = SLACK * abs(point)
        within = (low <= point + near) & (high >= point - near)
        least = np.where(within, np.minimum(least, value), least)
        greatest = np.where(within, np.maximum(greatest, value), greatest)
    return Charted(
        least=np.where(charted, least, np.nan),
        greatest=np.where(charted, greatest, np.nan),
        wholly=(low >= first) & (high <= last),
        not_wholly=(low < first) | (high > last),
    )


def _under_curve(charted: Charted, pressure: Span) -> Judged:
    """Judge pressures against a greatest-value curve; beyond its ends nothing is permitted."""
    verdict, margin = _at_most(pressure.high, charted.least)
    broken = (verdict == Verdict.OUTSIDE) | charted.not_wholly
    kept = (verdict == Verdict.INSIDE) & charted.wholly
    return (
        _verdict(broken, kept, broken_as=Verdict.OUTSIDE),
        np.where(charted.not_wholly, np.nan, margin),
    )


def judge_manifold_pressure_curve(limit: ManifoldPressureCurve, spans: Spans) -> Judged:
    """Judge settings against a curve of greatest manifold pressure over rpm.

    Parameters
    ----------
    limit : ManifoldPressureCurve
        The curve; one point permits operation at its rpm only [-]
    spans : Spans
        True values each setting may have [-]

    Returns
    -------
    tuple of ndarray
        Verdict, outside beyond the curve's ends, and pressure below the curve, NaN there [-], [Pa]
    """
    charted = curve_over(limit.rpm, limit.manifold_pressure, low=spans.rpm.low, high=spans.rpm.high)
    return _under_curve(charted, spans.manifold_pressure)


def judge_altitude_schedule(
    limit: AltitudeSchedule, spans: Spans, *, pressure_altitude: FloatArray
) -> Judged:
    """Judge settings against a schedule of greatest manifold pressure over altitude.

    Parameters
    ----------
    limit : AltitudeSchedule
        The schedule [-]
    spans : Spans
        True values each setting may have [-]
    pressure_altitude : ndarray
        Pressure altitude [m]

    Returns
    -------
    tuple of ndarray
        Verdict, outside beyond the schedule's ends, and pressure below it, NaN there [-], [Pa]
    """
    # The sea-level end is 0 m, where a relative slack is none: a millimetre stands in for it.
    near = 1e-3
    charted = curve_over(
        limit.pressure_altitude,
        limit.manifold_pressure,
        low=pressure_altitude - near,
        high=pressure_altitude + near,
    )
    first, last = min(limit.pressure_altitude), max(limit.pressure_altitude)
    whole = (pressure_altitude >= first - near) & (pressure_altitude <= last + near)
    beyond = (pressure_altitude < first - near) | (pressure_altitude > last + near)
    within = Charted(charted.least, charted.greatest, whole, beyond)
    return _under_curve(within, spans.manifold_pressure)


def judge_least_manifold_pressure(limit: LeastManifoldPressure, spans: Spans) -> Judged:
    """Judge settings against a curve of least manifold pressure over rpm.

    Parameters
    ----------
    limit : LeastManifoldPressure
        The curve; one point is a number that holds at every rpm, and a pressure of 0 says that
        there is no limit at that rpm [-]
    spans : Spans
        True values each setting may have [-]

    Returns
    -------
    tuple of ndarray
        Verdict, unknown beyond the curve's ends, and pressure above the curve [-], [Pa]
    """
    low, high = spans.rpm.low, spans.rpm.high
    if len(limit.rpm) == 1:
        return _at_least(spans.manifold_pressure.low, limit.manifold_pressure[0])
    charted = curve_over(limit.rpm, limit.manifold_pressure, low=low, high=high)
    verdict, margin = _at_least(spans.manifold_pressure.low, charted.greatest)
    kept = (verdict == Verdict.INSIDE) & charted.wholly
    return _verdict(verdict == Verdict.OUTSIDE, kept, broken_as=Verdict.OUTSIDE), margin


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
    return _at_most(power_fraction.high, greatest)


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
    return _at_most(spans.manifold_pressure.high, greatest)


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
    verdict, _ = _at_most(spans.manifold_pressure.low, full_throttle)
    doubtful, margin = _at_most(
        spans.manifold_pressure.likely, full_throttle, broken_as=Verdict.CAUTION
    )
    return np.maximum(verdict, doubtful), margin
