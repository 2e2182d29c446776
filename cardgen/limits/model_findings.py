"""What the model, the gauges and the evidence say of a setting, beside the stated limits."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Final

import numpy as np

from cardgen.constants import INCH_OF_MERCURY
from cardgen.limits.case import Case, Judge, beyond, modelled
from cardgen.limits.charts import curve_over, judge_manifold_pressure_curve
from cardgen.limits.finding import BoolArray, FloatArray, Index, Judgement, Verdict
from cardgen.limits.flown import Bools, Bounds, Span
from cardgen.limits.gauges import GaugeError, calibrated, indicated_rpm
from cardgen.limits.judge import constant, judge_between, judge_full_throttle, stricter
from cardgen.limits.wording import Measure, amount, below, spread


def _full_throttle(case: Case) -> Iterator[Judgement]:
    """Judge whether the engine can reach the manifold pressure in this air."""
    limit = case.full(case.flown.full_throttle_manifold_pressure)
    judged = judge_full_throttle(case.spans, full_throttle=limit)

    def words(index: Index, margin: float) -> str:
        said = case.pressure_words(index)
        if np.isnan(margin):
            return f"{said}: full-throttle manifold pressure is not known here"
        scale = float(limit[index])
        where = below(margin, "pressure", "full throttle", units=case.units, scale=scale)
        text = f"{said}: {where}, which gives {case.amount(limit, 'pressure', index)} true here"
        match int(judged[0][index]):
            case Verdict.OUTSIDE:
                return f"{text}; not reachable"
            case Verdict.CAUTION:
                return f"{text}; may not be reachable"
            case _:
                return text

    yield modelled(
        case,
        "full_throttle",
        "manifold pressure above full throttle, not reachable",
        judged=judged,
        measure="pressure",
        words=words,
    )


def _governing_range(case: Case) -> Iterator[Judgement]:
    """Judge whether the propeller governor can hold the rpm."""
    fine, coarse = case.flown.on_fine_stop, case.flown.on_coarse_stop
    on_fine, on_coarse = _flags(case, fine), _flags(case, coarse)
    on_stop = on_fine | on_coarse
    known = Verdict.UNKNOWN if fine is None or coarse is None else Verdict.INSIDE
    verdict = np.where(on_stop, Verdict.OUTSIDE, known).astype(np.int8)
    taken = case.full(case.flown.governed_rpm)
    margin = np.where(on_stop, -np.abs(taken - case.spans.rpm.likely), np.nan)

    def words(index: Index, margin: float) -> str:
        if not on_stop[index]:
            if known == Verdict.INSIDE:
                return "the propeller governs here, its blades clear of both stops"
            return "not known whether the governor can hold the rpm"
        stop, moves = ("fine", "sags") if on_fine[index] else ("coarse", "climbs")
        said = f"the governor cannot hold the rpm: blades on the {stop} stop, the rpm {moves}"
        if np.isnan(margin):
            return said
        reads = float(indicated_rpm(case.gauges, float(taken[index])))
        return f"{said} to {reads:.0f} indicated"

    yield modelled(
        case,
        "governing_range",
        "the governor cannot hold this rpm, blades on a stop",
        judged=(verdict, margin),
        measure="rpm",
        words=words,
    )


def _flags(case: Case, flags: Bools | None) -> BoolArray:
    """Return flags at full shape, false where they are not known."""
    return np.broadcast_to(np.asarray(flags is not None and flags, dtype=np.bool_), case.shape)


def _gauge_calibration(case: Case) -> Iterator[Judgement]:
    """Judge whether the readings lie within what the gauges were measured at."""
    rpm = case.full(case.flown.indicated_rpm)
    pressure = case.full(case.flown.indicated_manifold_pressure)
    yield from _calibration(case, case.gauges.tachometer, rpm, "tachometer", "rpm")
    yield from _calibration(
        case, case.gauges.manifold_pressure, pressure, "manifold-pressure gauge", "pressure"
    )


def _calibration(
    case: Case, gauge: GaugeError, indicated: FloatArray, name: str, measure: Measure
) -> Iterator[Judgement]:
    """Judge the readings of one measured gauge."""
    if not gauge.measured:
        return
    covered = calibrated(gauge, indicated)
    verdict = np.where(covered, Verdict.INSIDE, Verdict.UNKNOWN).astype(np.int8)

    def words(index: Index, margin: float) -> str:
        if covered[index]:
            return ""
        shown = case.amount(indicated, measure, index)
        return f"{shown} indicated is outside what the {name} was measured at"

    yield modelled(
        case,
        "gauge_calibration",
        f"outside what the {name} was measured at",
        judged=(verdict, np.full(case.shape, np.nan)),
        measure=measure,
        words=words,
    )


def _evidence(case: Case) -> Iterator[Judgement]:
    """Judge whether the data behind a fit reach as far as the setting."""
    seen = case.flown.evidence
    if seen is None:
        return
    altitude = case.full(case.flown.pressure_altitude)
    temperature = case.full(case.flown.temperature)
    likely_rpm, likely_power = case.spans.rpm.likely, case.spans.power_fraction.likely
    yield from _evident(case, "pressure altitude", altitude, seen.pressure_altitude, "altitude")
    yield from _evident(case, "rpm", likely_rpm, seen.rpm, "rpm")
    yield from _evident(case, "power", likely_power, seen.power_fraction, "share")
    yield from _evident(case, "temperature", temperature, seen.temperature, "temperature")


def _evident(
    case: Case, name: str, value: FloatArray, bounds: Bounds | None, measure: Measure
) -> Iterator[Judgement]:
    """Judge one quantity against the range the evidence covers."""
    if bounds is None:
        return
    least, greatest = min(bounds), max(bounds)
    judged = judge_between(Span(value, value, value), least, greatest, broken_as=Verdict.CAUTION)
    ends = spread(least, greatest, measure, units=case.units)

    def words(index: Index, margin: float) -> str:
        shown = case.amount(value, measure, index)
        where = beyond(case, margin, measure, scale=abs(greatest))
        said = shown if measure == "rpm" else f"{name} {shown}"
        return f"{said}: {where} of the evidence, which covers {ends}"

    yield modelled(
        case,
        "evidence",
        f"{name} outside the evidence, which covers {ends}",
        judged=judged,
        measure=measure,
        words=words,
    )


def _solution(case: Case) -> Iterator[Judgement]:
    """Report settings at which the model has no level flight: nothing there can be checked."""
    solved = np.broadcast_to(np.asarray(case.flown.solved, dtype=np.bool_), case.shape)
    status = np.broadcast_to(np.asarray(case.flown.status, dtype=np.str_), case.shape)
    if solved.all():
        return
    verdict = np.where(solved, Verdict.INSIDE, Verdict.UNKNOWN).astype(np.int8)

    def words(index: Index, margin: float) -> str:
        if solved[index]:
            return ""
        why = str(status[index])
        return f"the model has no level flight at this setting{f': {why}' if why else ''}"

    yield modelled(
        case,
        "solution",
        "the model has no level flight here",
        judged=(verdict, np.full(case.shape, np.nan)),
        measure="share",
        words=words,
    )


def _over_square(case: Case) -> Iterator[Judgement]:
    """State where manifold pressure in inHg exceeds hundreds of rpm: a fact, never a limit."""
    rpm = case.full(case.flown.indicated_rpm)
    pressure = case.full(case.flown.indicated_manifold_pressure)
    over = pressure / INCH_OF_MERCURY > rpm / 100.0
    curves = case.limits.manifold_pressure_curve

    def words(index: Index, margin: float) -> str:
        if not over[index]:
            return ""
        inches = float(pressure[index]) / INCH_OF_MERCURY
        said = f"over square: {inches:.1f} inHg at {float(rpm[index]):.0f} rpm indicated"
        if not curves:
            return f"{said}; no chart of manifold pressure against rpm is stated to judge it by"
        verdict, _ = stricter([judge_manifold_pressure_curve(c, case.spans) for c in curves])
        match int(verdict[index]):
            case Verdict.INSIDE:
                return f"{said}, which the chart permits: {'; '.join(_charted(case, index))}"
            case Verdict.OUTSIDE:
                return f"{said}, which the chart does not permit; see manifold_pressure_curve"
            case _:
                return f"{said}, which cannot be compared with the chart here"

    yield modelled(
        case,
        "over_square",
        "over square",
        judged=(constant(case.shape, Verdict.INSIDE)),
        measure="pressure",
        words=words,
    )


def _charted(case: Case, index: Index) -> Iterator[str]:
    """Return what each chart allows at one setting, with its source."""
    low, high = case.spans.rpm.low[index], case.spans.rpm.high[index]
    for curve in case.limits.manifold_pressure_curve:
        least = curve_over(
            curve.rpm, curve.manifold_pressure, low=np.asarray(low), high=np.asarray(high)
        ).least
        greatest = amount(float(least), "pressure", units=case.units)
        yield f"up to {greatest} true at this rpm ({curve.source})"


BESIDE_LIMITS: Final[tuple[Judge, ...]] = (
    _full_throttle,
    _governing_range,
    _gauge_calibration,
    _evidence,
    _solution,
    _over_square,
)
"""What is judged beside the stated limits, in the order of the findings."""
