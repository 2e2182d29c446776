"""What the sources state of the flight: leaning, airspeed, altitude and temperature."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from itertools import chain, groupby
from typing import Final

import numpy as np

from cardgen.limits.case import Case, Judge, beyond, stated
from cardgen.limits.finding import FloatArray, Index, Judgement, Verdict
from cardgen.limits.flown import Span
from cardgen.limits.judge import (
    Judged,
    constant,
    judge_between,
    judge_leaning_power,
    judge_leaning_pressure,
    same_limit,
    stricter,
)
from cardgen.limits.kinds import AltitudeEnvelope, Category, LeaningCeiling, TemperatureEnvelope
from cardgen.limits.wording import Measure, below


def _leaning(case: Case) -> Iterator[Judgement]:
    """Judge the ceilings of the mixture flown; another mixture's say nothing of it."""
    mixture = case.flown.mixture.strip().casefold()
    ours = [c for c in case.limits.leaning if c.mixture.strip().casefold() == mixture]
    for group in same_limit(ours):
        fractions = [
            c.greatest_power_fraction for c in group if c.greatest_power_fraction is not None
        ]
        pressures = [
            c.greatest_manifold_pressure for c in group if c.greatest_manifold_pressure is not None
        ]
        if fractions:
            yield _leaning_power(case, group, min(fractions))
            yield _leaning_at_best_power(case, group, min(fractions))
        if pressures:
            yield _leaning_pressure(case, group, min(pressures))
        if not fractions and not pressures:
            yield stated(
                case,
                "leaning",
                group,
                judged=constant(case.shape, Verdict.INSIDE),
                measure="share",
                words=lambda _index, _margin: "the source sets no ceiling",
            )


def _leaning_power(case: Case, group: Sequence[LeaningCeiling], greatest: float) -> Judgement:
    """Judge the power of a mixture."""
    span = case.spans.power_fraction

    def words(index: Index, margin: float) -> str:
        said = case.model_words("power", span, "share", index)
        if np.isnan(margin):
            return f"{said}: cannot be compared"
        where = below(margin, "share", "the leaning ceiling", units=case.units, scale=greatest)
        return f"{said}: {where}"

    judged = judge_leaning_power(greatest, span)
    return stated(case, "leaning", group, judged=judged, measure="share", words=words)


def _leaning_pressure(case: Case, group: Sequence[LeaningCeiling], greatest: float) -> Judgement:
    """Judge the manifold pressure of a mixture."""

    def words(index: Index, margin: float) -> str:
        said = case.pressure_words(index)
        if np.isnan(margin):
            return f"{said}: cannot be compared"
        where = below(margin, "pressure", "the leaning ceiling", units=case.units, scale=greatest)
        return f"{said}: {where}"

    judged = judge_leaning_pressure(greatest, case.spans)
    return stated(case, "leaning", group, judged=judged, measure="pressure", words=words)


def _leaning_at_best_power(
    case: Case, group: Sequence[LeaningCeiling], greatest: float
) -> Judgement:
    """Note where only the leaner mixture keeps the power under its ceiling.

    Some handbooks mean by such a ceiling the power before leaning, and enriching at the same
    levers gives that power.
    """
    span = case.spans.best_power_fraction
    verdict, margin = judge_leaning_power(greatest, span)
    lean = judge_leaning_power(greatest, case.spans.power_fraction)[0] != Verdict.OUTSIDE
    over = (verdict == Verdict.OUTSIDE) & lean
    # Not known is not a caution of its own: the ceiling itself is judged beside this.
    noted = np.where(over, Verdict.CAUTION, Verdict.INSIDE).astype(np.int8)

    def words(index: Index, margin: float) -> str:
        if not over[index]:
            return ""
        said = case.model_words("power with the best-power mixture", span, "share", index)
        where = below(margin, "share", "the leaning ceiling", units=case.units, scale=greatest)
        return f"{said} at the same rpm and manifold pressure: {where}"

    return stated(
        case,
        "leaning_at_best_power",
        group,
        judged=(noted, margin),
        measure="share",
        words=words,
    )


def _airspeed(case: Case) -> Iterator[Judgement]:
    """Judge V_NO, a caution above it, and V_NE."""
    span = case.spans.calibrated_airspeed
    # V_NO before V_NE, and never one group, whatever the profile calls them.
    ordered = sorted(case.limits.airspeed, key=lambda limit: limit.kind, reverse=True)
    kinds = (tuple(limits) for _, limits in groupby(ordered, key=lambda limit: limit.kind))
    for group in chain.from_iterable(same_limit(limits) for limits in kinds):
        judged = [
            judge_between(
                span,
                None,
                limit.calibrated_airspeed,
                broken_as=Verdict.CAUTION if limit.kind == "V_NO" else Verdict.OUTSIDE,
            )
            for limit in group
        ]
        kind = group[0].kind
        scale = min(limit.calibrated_airspeed for limit in group)

        def words(index: Index, margin: float, kind: str = kind, scale: float = scale) -> str:
            said = case.model_words("calibrated airspeed", span, "speed", index)
            if np.isnan(margin):
                return f"{said}: cannot be compared"
            return f"{said}: {below(margin, 'speed', kind, units=case.units, scale=scale)}"

        yield stated(case, "airspeed", group, judged=stricter(judged), measure="speed", words=words)


def _altitude(case: Case) -> Iterator[Judgement]:
    """Judge the approved altitudes."""
    value = case.full(case.flown.pressure_altitude)
    for group in same_limit(case.limits.altitude):
        judged = stricter([_enveloped(limit, value) for limit in group])
        words = _envelope_words(case, "pressure altitude", value, "altitude")
        yield stated(case, "altitude", group, judged=judged, measure="altitude", words=words)


def _temperature(case: Case) -> Iterator[Judgement]:
    """Judge the approved outside air temperatures."""
    value = case.full(case.flown.temperature)
    for group in same_limit(case.limits.temperature):
        judged = stricter([_enveloped(limit, value) for limit in group])
        words = _envelope_words(case, "outside air temperature", value, "temperature")
        yield stated(case, "temperature", group, judged=judged, measure="temperature", words=words)


def _enveloped(limit: AltitudeEnvelope | TemperatureEnvelope, value: FloatArray) -> Judged:
    """Judge a condition of the air against its envelope."""
    return judge_between(Span(value, value, value), limit.least, limit.greatest)


def _envelope_words(
    case: Case, name: str, value: FloatArray, measure: Measure
) -> Callable[[Index, float], str]:
    """Return what to say of a condition of the air."""

    def words(index: Index, margin: float) -> str:
        where = beyond(case, margin, measure, scale=1e-3)
        return f"{name} {case.amount(value, measure, index)}: {where}"

    return words


OF_FLIGHT: Final[dict[Category, Judge]] = {
    "leaning": _leaning,
    "airspeed": _airspeed,
    "altitude": _altitude,
    "temperature": _temperature,
}
"""How each category that limits the flight is judged."""
