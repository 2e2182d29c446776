"""Limits, their sources and the gauges behind them in plain words."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, assert_never

from cardgen.limits.gauges import GaugeError, Gauges
from cardgen.limits.kinds import (
    CATEGORIES,
    AirspeedLimit,
    AltitudeEnvelope,
    AltitudeSchedule,
    Category,
    LeaningCeiling,
    LeastManifoldPressure,
    Limit,
    Limits,
    ManifoldPressureCurve,
    Rating,
    RestrictedRpm,
    RpmRange,
    TemperatureEnvelope,
)
from cardgen.limits.wording import Measure, MessageUnits, amount, number, spread, unit_of
from cardgen.records import dataclass

CATEGORY_WORDS: Final[dict[Category, str]] = {
    "restricted_rpm": "restricted rpm ranges",
    "manifold_pressure_curve": "greatest manifold pressure against rpm",
    "ratings": "engine ratings",
    "rpm_range": "least and greatest rpm",
    "least_manifold_pressure": "least manifold pressure",
    "leaning": "leaning limits",
    "altitude_schedule": "manifold pressure against altitude",
    "airspeed": "airspeed limits",
    "altitude": "approved altitudes",
    "temperature": "approved temperatures",
}
"""Categories as a message or a card names them."""


def duration(time: float) -> str:
    """Return a time limit in words.

    Parameters
    ----------
    time : float
        Time [s]

    Returns
    -------
    str
        Minutes where they are whole, otherwise seconds [-]
    """
    minutes = time / 60.0
    return f"{minutes:.0f} min" if abs(minutes - round(minutes)) < 1e-9 else f"{time:.0f} s"


def _range(
    least: float | None, greatest: float | None, measure: Measure, *, units: MessageUnits
) -> str:
    """Return a range with either end open in words."""
    if least is None and greatest is None:
        return "no number stated"
    if least is None or greatest is None:
        end, words = (greatest, "at most") if least is None else (least, "at least")
        assert end is not None
        return f"{words} {amount(end, measure, units=units)}"
    return spread(least, greatest, measure, units=units)


def _curve(
    x: Sequence[float],
    y: Sequence[float],
    x_measure: Measure,
    *,
    units: MessageUnits,
) -> str:
    """Return the points of a pressure curve in words."""
    points = ", ".join(
        f"{number(value, 'pressure', units=units)} at {number(place, x_measure, units=units)}"
        for place, value in zip(x, y, strict=True)
    )
    return f"{points} ({units.pressure} at {unit_of(x_measure, units)})"


def state(  # noqa: PLR0911, PLR0912 - one case for each kind of limit
    limit: Limit, units: MessageUnits
) -> str:
    """Return a limit in words, the same wherever it is applied.

    Parameters
    ----------
    limit : Limit
        Any kind of limit [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    str
        Part of a sentence [-]
    """
    match limit:
        case RestrictedRpm():
            low, high = sorted((limit.low_rpm, limit.high_rpm))
            text = f"restricted {low:.0f}-{high:.0f} rpm"
            conditions = [
                f"at and {side} {amount(pressure, 'pressure', units=units)}"
                for side, pressure in (
                    ("above", limit.above_manifold_pressure),
                    ("below", limit.below_manifold_pressure),
                )
                if pressure is not None
            ]
            text += f" {' and '.join(conditions)}" if conditions else ""
            return f"{text} ({limit.phase.strip()})" if limit.phase else text
        case ManifoldPressureCurve():
            curve = _curve(limit.rpm, limit.manifold_pressure, "rpm", units=units)
            return f"greatest continuous manifold pressure {curve}"
        case LeastManifoldPressure():
            if len(limit.rpm) == 1:
                least = amount(limit.manifold_pressure[0], "pressure", units=units)
                return f"least manifold pressure {least}"
            curve = _curve(limit.rpm, limit.manifold_pressure, "rpm", units=units)
            return f"least manifold pressure {curve}"
        case Rating():
            text = f"{amount(limit.power, 'power', units=units)} at {limit.rpm:.0f} rpm"
            if limit.manifold_pressure is not None:
                text += f" and {amount(limit.manifold_pressure, 'pressure', units=units)}"
            time = limit.time_limit
            text += " continuous" if time is None else f" for {duration(time)}"
            return f"{limit.name} {text}".strip()
        case RpmRange():
            return f"allowed {_range(limit.least_rpm, limit.greatest_rpm, 'rpm', units=units)}"
        case LeaningCeiling():
            parts = []
            if limit.greatest_power_fraction is not None:
                parts.append(amount(limit.greatest_power_fraction, "share", units=units))
            if limit.greatest_manifold_pressure is not None:
                parts.append(amount(limit.greatest_manifold_pressure, "pressure", units=units))
            ceiling = f"at most {' and '.join(parts)}" if parts else "no ceiling"
            return f"mixture {limit.mixture}: {ceiling}"
        case AltitudeSchedule():
            curve = _curve(
                limit.pressure_altitude, limit.manifold_pressure, "altitude", units=units
            )
            return f"greatest manifold pressure with altitude {curve}"
        case AirspeedLimit():
            return f"{limit.kind} {amount(limit.calibrated_airspeed, 'speed', units=units)} CAS"
        case AltitudeEnvelope():
            span = _range(limit.least, limit.greatest, "altitude", units=units)
            return f"approved pressure altitudes {span}"
        case TemperatureEnvelope():
            span = _range(limit.least, limit.greatest, "temperature", units=units)
            return f"approved outside air temperatures {span}"
        case _:
            assert_never(limit)


def state_all(group: Sequence[Limit], units: MessageUnits) -> tuple[str, str]:
    """Return what one or several sources state of one limit, and the sources.

    Parameters
    ----------
    group : sequence of Limit
        One limit as each of its sources states it [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    tuple of str
        Statement, with the disagreement where there is one, and the sources [-]
    """
    statements = [state(limit, units) for limit in group]
    sources = "; ".join(dict.fromkeys(str(limit.source) for limit in group))
    if len(set(statements)) == 1:
        return statements[0], sources
    each = "; ".join(
        f"{text} ({limit.source})" for text, limit in zip(statements, group, strict=True)
    )
    cause = "sources disagree" if len({limit.source for limit in group}) > 1 else "stated twice"
    return f"{cause}, the most restrictive is applied: {each}", sources


def gauge_notes(gauges: Gauges, units: MessageUnits) -> tuple[str, ...]:
    """Return what a card must say of the gauges behind its limits.

    Parameters
    ----------
    gauges : Gauges
        The aircraft's gauges [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    tuple of str
        One line for the tachometer, one for the manifold-pressure gauge [-]
    """

    def note(name: str, gauge: GaugeError, measure: Measure) -> str:
        band = amount(gauge.band, measure, units=units)
        if gauge.measured:
            how = ", ".join(part for part in (gauge.method, gauge.date) if part)
            return f"{name} measured{f' ({how})' if how else ''}: limits widened by ±{band}"
        return f"{name} not measured: limits widened by ±{band}, common practice"

    return (
        note("Tachometer", gauges.tachometer, "rpm"),
        note("Manifold-pressure gauge", gauges.manifold_pressure, "pressure"),
    )


@dataclass(frozen=True, slots=True)
class Statement:
    """One limit as a card's notes print it: the category, the limit, its wording and its source."""

    category: Category
    text: str
    wording: str
    source: str


def statements(limits: Limits, units: MessageUnits) -> tuple[Statement, ...]:
    """Return every stated limit in words, one entry for each source.

    Parameters
    ----------
    limits : Limits
        What the sources state [-]
    units : MessageUnits
        The units of the text [-]

    Returns
    -------
    tuple of Statement
        In the order of categories, what a source says does not apply among them [-]
    """
    found = []
    for category in CATEGORIES:
        stated: tuple[Limit, ...] = getattr(limits, category)
        found += [
            Statement(category, state(limit, units), limit.wording, str(limit.source))
            for limit in stated
        ]
        found += [
            Statement(category, f"{CATEGORY_WORDS[category]}: none", none.wording, str(none.source))
            for none in limits.stated_none
            if none.category == category and not stated
        ]
    return tuple(found)
