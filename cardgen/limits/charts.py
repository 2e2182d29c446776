"""Limits charted over rpm or altitude, held against every true value a setting may have."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from cardgen.limits.finding import BoolArray, FloatArray, Verdict
from cardgen.limits.flown import Span, Spans
from cardgen.limits.judge import SLACK, Judged, at_least, at_most, verdict_where
from cardgen.limits.kinds import AltitudeSchedule, LeastManifoldPressure, ManifoldPressureCurve
from cardgen.records import dataclass


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
    verdict, margin = at_most(pressure.high, charted.least)
    broken = (verdict == Verdict.OUTSIDE) | charted.not_wholly
    kept = (verdict == Verdict.INSIDE) & charted.wholly
    return (
        verdict_where(broken, kept, broken_as=Verdict.OUTSIDE),
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
        return at_least(spans.manifold_pressure.low, limit.manifold_pressure[0])
    charted = curve_over(limit.rpm, limit.manifold_pressure, low=low, high=high)
    verdict, margin = at_least(spans.manifold_pressure.low, charted.greatest)
    kept = (verdict == Verdict.INSIDE) & charted.wholly
    return verdict_where(verdict == Verdict.OUTSIDE, kept, broken_as=Verdict.OUTSIDE), margin
