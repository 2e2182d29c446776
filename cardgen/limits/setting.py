"""What the sources state of the setting itself: rpm, manifold pressure and ratings."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import Final

import numpy as np

from cardgen.limits.case import Case, Judge, beyond, stated
from cardgen.limits.charts import (
    judge_altitude_schedule,
    judge_least_manifold_pressure,
    judge_manifold_pressure_curve,
)
from cardgen.limits.finding import Index, Judgement
from cardgen.limits.flown import Span
from cardgen.limits.gauges import indicated_rpm_interval
from cardgen.limits.judge import SLACK, judge_restricted_rpm, judge_rpm_range, same_limit, stricter
from cardgen.limits.kinds import Category, RestrictedRpm
from cardgen.limits.ratings import Ceiling, ceilings, judge_ratings, within
from cardgen.limits.statement import duration, state_all
from cardgen.limits.wording import Measure, above, amount, below, distance


def _restricted_rpm(case: Case) -> Iterator[Judgement]:
    """Judge every restricted rpm range."""
    for group in same_limit(case.limits.restricted_rpm):
        scale = max(limit.high_rpm for limit in group)
        middle = sum(limit.low_rpm + limit.high_rpm for limit in group) / (2 * len(group))
        conditional = any(
            limit.above_manifold_pressure is not None or limit.below_manifold_pressure is not None
            for limit in group
        )

        def words(
            index: Index,
            margin: float,
            scale: float = scale,
            middle: float = middle,
            conditional: bool = conditional,
        ) -> str:
            said = case.rpm_words(index)
            if conditional:
                said += f", {case.pressure_words(index)}"
            if np.isinf(margin):
                return f"{said}: the range is not closed at this manifold pressure"
            if np.isnan(margin):
                return f"{said}: cannot be compared"
            size = distance(margin, "rpm", units=case.units, scale=scale)
            if not size:
                return f"{said}: on the edge of the range, which belongs to it"
            side = "above" if case.spans.rpm.likely[index] > middle else "below"
            where = f"{side} the range" if margin > 0.0 else "within the range"
            return f"{said}: {size} {where}"

        yield stated(
            case,
            "restricted_rpm",
            group,
            judged=stricter([judge_restricted_rpm(limit, case.spans) for limit in group]),
            measure="rpm",
            words=words,
            note=_as_read(case, group),
        )


def _as_read(case: Case, group: Sequence[RestrictedRpm]) -> str:
    """Return what a restricted range comes to on the tachometer, rounded away from it."""
    low = min(min(limit.low_rpm, limit.high_rpm) for limit in group)
    high = max(max(limit.low_rpm, limit.high_rpm) for limit in group)
    least, greatest = indicated_rpm_interval(case.gauges, low, high)
    if (least, greatest) == (low, high):
        return ""
    return f"{math.floor(least)}-{math.ceil(greatest)} rpm as the tachometer reads"


def _manifold_pressure_curve(case: Case) -> Iterator[Judgement]:
    """Judge every curve of greatest manifold pressure over rpm."""
    for group in same_limit(case.limits.manifold_pressure_curve):

        def words(index: Index, margin: float) -> str:
            said = f"{case.pressure_words(index)} with {case.rpm_words(index)}"
            if np.isnan(margin):
                return f"{said}: no continuous operation is charted at this rpm"
            scale = float(case.spans.manifold_pressure.high[index])
            return (
                f"{said}: {below(margin, 'pressure', 'the curve', units=case.units, scale=scale)}"
            )

        judged = [judge_manifold_pressure_curve(limit, case.spans) for limit in group]
        yield stated(
            case,
            "manifold_pressure_curve",
            group,
            judged=stricter(judged),
            measure="pressure",
            words=words,
        )


def _ratings(case: Case) -> Iterator[Judgement]:
    """Judge the ratings, which are one limit together."""
    if not case.limits.ratings:
        return
    every = ceilings(case.limits.ratings)
    continuous = [c for c in every if c.time_limit is None]

    def words(index: Index, margin: float) -> str:
        said = [
            case.model_words("power", case.spans.power, "power", index),
            case.rpm_words(index),
            case.pressure_words(index),
        ]
        text = ", ".join(said)
        if np.isnan(margin):
            return f"{text}: cannot be compared"
        if not continuous:
            return f"{text}: only ratings with a time limit are stated, none for continuous use"
        nearest = max(continuous, key=lambda c: _least_room(case, c, index))
        text = f"{text}: {_against(case, nearest, index)}"
        if margin >= -SLACK:
            return text
        times = [
            f"{duration(c.time_limit)} ({c.name})"
            for c in every
            if c.time_limit is not None and _least_room(case, c, index) >= -SLACK
        ]
        return f"{text}, allowed for {', '.join(times)} only" if times else text

    groups = same_limit(case.limits.ratings)
    yield stated(
        case,
        "ratings",
        case.limits.ratings,
        judged=judge_ratings(case.limits.ratings, case.spans),
        measure="share",
        words=words,
        statement="; ".join(state_all(group, case.units)[0] for group in groups),
    )


def _least_room(case: Case, ceiling: Ceiling, index: Index) -> float:
    """Return the least room of one setting under a rating, as a share of the rated value."""
    return float(within(ceiling, case.spans)[2][index])


def _against(case: Case, ceiling: Ceiling, index: Index) -> str:
    """Return what of one setting exceeds a rating, or else comes nearest to it."""
    spans = case.spans
    rated: tuple[tuple[Measure, float, Span], ...] = (
        ("power", ceiling.power, spans.power),
        ("rpm", ceiling.rpm, spans.rpm),
        ("pressure", ceiling.manifold_pressure, spans.manifold_pressure),
    )
    rooms: list[tuple[float, str]] = []
    for measure, greatest, span in rated:
        room = greatest - float(span.high[index])
        if np.isfinite(room):
            limit = f"the {amount(greatest, measure, units=case.units)} of {ceiling.name}"
            words = below(room, measure, limit, units=case.units, scale=greatest)
            rooms.append((room / greatest, words))
    exceeded = [words for room, words in rooms if room < -SLACK]
    return " and ".join(exceeded) or min(rooms)[1]


def _rpm_range(case: Case) -> Iterator[Judgement]:
    """Judge every least and greatest rpm."""
    for group in same_limit(case.limits.rpm_range):

        def words(index: Index, margin: float) -> str:
            return f"{case.rpm_words(index)}: {beyond(case, margin, 'rpm', scale=1e3)}"

        yield stated(
            case,
            "rpm_range",
            group,
            judged=stricter([judge_rpm_range(limit, case.spans) for limit in group]),
            measure="rpm",
            words=words,
        )


def _least_manifold_pressure(case: Case) -> Iterator[Judgement]:
    """Judge every least manifold pressure."""
    for group in same_limit(case.limits.least_manifold_pressure):

        def words(index: Index, margin: float) -> str:
            said = f"{case.pressure_words(index)} with {case.rpm_words(index)}"
            if np.isnan(margin):
                return f"{said}: not charted at this rpm"
            scale = float(case.spans.manifold_pressure.low[index])
            where = above(margin, "pressure", "the least", units=case.units, scale=scale)
            return f"{said}: {where}"

        judged = [judge_least_manifold_pressure(limit, case.spans) for limit in group]
        yield stated(
            case,
            "least_manifold_pressure",
            group,
            judged=stricter(judged),
            measure="pressure",
            words=words,
        )


def _altitude_schedule(case: Case) -> Iterator[Judgement]:
    """Judge every schedule of manifold pressure over altitude."""
    altitude = case.full(case.flown.pressure_altitude)
    for group in same_limit(case.limits.altitude_schedule):

        def words(index: Index, margin: float) -> str:
            place = case.amount(altitude, "altitude", index)
            said = f"{case.pressure_words(index)} at {place}"
            if np.isnan(margin):
                return f"{said}: nothing is charted at this altitude"
            scale = float(case.spans.manifold_pressure.high[index])
            where = below(margin, "pressure", "the schedule", units=case.units, scale=scale)
            return f"{said}: {where}"

        judged = [
            judge_altitude_schedule(limit, case.spans, pressure_altitude=altitude)
            for limit in group
        ]
        yield stated(
            case,
            "altitude_schedule",
            group,
            judged=stricter(judged),
            measure="pressure",
            words=words,
        )


OF_SETTING: Final[dict[Category, Judge]] = {
    "restricted_rpm": _restricted_rpm,
    "manifold_pressure_curve": _manifold_pressure_curve,
    "ratings": _ratings,
    "rpm_range": _rpm_range,
    "least_manifold_pressure": _least_manifold_pressure,
    "altitude_schedule": _altitude_schedule,
}
"""How each category that limits the setting is judged."""
