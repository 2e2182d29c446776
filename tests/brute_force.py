"""A second reading of limits: one setting at a time, every true value it may stand for tried.

Nothing here is shared with `cardgen.limits` but the records that hold what a source states. A
reading of a gauge is turned into the true values it may stand for point by point; curves are looked
up at every true rpm on a fine comb and at every corner in between; ratings, ceilings and envelopes
are compared number by number. `slack` is how far, as a share, a limit must be passed to count:
above 0 only what is certainly broken counts, below 0 also what merely touches.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

from cardgen.limits.gauges import GaugeError, Gauges
from cardgen.limits.kinds import AltitudeSchedule, LeaningCeiling, Limits, RestrictedRpm

INCH = 3386.389
TACHOMETER_BAND = 50.0
PRESSURE_BAND = 0.4 * INCH
COMB = 2.0  # rpm between the true values tried; the corners of curves are tried besides
NOT_CRUISE = ("ground", "take-off", "climb", "descent")


def correction_at(gauge: GaugeError, reading: float) -> float:
    """Return the correction of one reading, that of the nearest point beyond the table."""
    pairs = sorted(zip(gauge.indicated, gauge.correction, strict=True))
    if reading <= pairs[0][0]:
        return pairs[0][1]
    for (x0, c0), (x1, c1) in pairwise(pairs):
        if reading <= x1:
            return c0 + (c1 - c0) * (reading - x0) / (x1 - x0)
    return pairs[-1][1]


def reading_of(gauge: GaugeError, true: float) -> float:
    """Return what a gauge reads at a true value, by halving an interval."""
    low, high = true - 2000.0 - abs(true), true + 2000.0 + abs(true)
    for _ in range(70):
        middle = 0.5 * (low + high)
        if middle + correction_at(gauge, middle) < true:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)


def stands_for(gauge: GaugeError, reading: float, default: float) -> tuple[float, float]:
    """Return the least and greatest true value that a reading may stand for."""
    likely = reading + correction_at(gauge, reading)
    if not gauge.measured:
        band = max(gauge.band, default)
        return likely - band, likely + band
    beyond = len(gauge.indicated) > 1 and not (
        min(gauge.indicated) <= reading <= max(gauge.indicated)
    )
    if beyond:
        band = max(gauge.band, default)
        return min(likely, reading) - band, max(likely, reading) + band
    return likely - gauge.band, likely + gauge.band


def on_line(x: Sequence[float], y: Sequence[float], at: float) -> float:
    """Return the value of a broken line, NaN beyond its ends."""
    for (x0, y0), (x1, y1) in pairwise(zip(x, y, strict=True)):
        if x0 <= at <= x1:
            return y0 + (y1 - y0) * (at - x0) / (x1 - x0)
    return math.nan


@dataclass(frozen=True, slots=True)
class Flying:
    """One setting as it is flown; pressures in Pa, power in W, angles in rad, else SI."""

    reading: float  # of the manifold-pressure gauge
    power: float
    power_fraction: float
    calibrated_airspeed: float
    full_throttle: float  # true manifold pressure there
    blade_angle: float
    pressure_altitude: float
    temperature: float
    mixture: str


@dataclass(frozen=True, slots=True)
class Column:
    """What all settings at one tachometer reading share.

    Parameters
    ----------
    low, high : float
        Least and greatest true rpm [rpm]
    barred : tuple of str
        Limits that are broken whatever the manifold pressure [-]
    closed : tuple of (float, float)
        Manifold pressures that close a restricted range met here, ends included [Pa]
    greatest : float
        Least value of every curve of greatest manifold pressure [Pa]
    least : float
        Greatest value of every curve of least manifold pressure [Pa]
    """

    low: float
    high: float
    barred: tuple[str, ...]
    closed: tuple[tuple[float, float], ...]
    greatest: float
    least: float


def _comb(low: float, high: float, corners: Sequence[float]) -> list[float]:
    """Return the true rpm to try."""
    count = max(1, math.ceil((high - low) / COMB))
    tried = [low + (high - low) * place / count for place in range(count + 1)]
    return [*tried, *(corner for corner in corners if low <= corner <= high)]


def _closed_at(limit: RestrictedRpm) -> Iterator[tuple[float, float]]:
    """Yield the manifold pressures at which a restricted range is closed."""
    above, below = limit.above_manifold_pressure, limit.below_manifold_pressure
    if above is not None and below is not None and above > below:
        yield above, math.inf
        yield -math.inf, below
    else:
        yield (
            -math.inf if above is None else above,
            math.inf if below is None else below,
        )


def read_column(limits: Limits, gauges: Gauges, rpm: float, slack: float) -> Column:
    """Return what holds at one tachometer reading.

    Parameters
    ----------
    limits : Limits
        What the sources state [-]
    gauges : Gauges
        The gauges [-]
    rpm : float
        What the tachometer reads [rpm]
    slack : float
        Share by which a limit must be passed to count [-]

    Returns
    -------
    Column
        For every manifold pressure [-]
    """
    low, high = stands_for(gauges.tachometer, rpm, TACHOMETER_BAND)
    barred: list[str] = []
    closed: list[tuple[float, float]] = []
    for limit in limits.restricted_rpm:
        if limit.phase in NOT_CRUISE:
            continue
        if low <= limit.high_rpm * (1.0 - slack) and high >= limit.low_rpm * (1.0 + slack):
            closed += _closed_at(limit)
    for rpm_range in limits.rpm_range:
        least, greatest = rpm_range.least_rpm, rpm_range.greatest_rpm
        if (least is not None and low < least * (1.0 - slack)) or (
            greatest is not None and high > greatest * (1.0 + slack)
        ):
            barred.append("rpm_range")
    top, bottom = math.inf, 0.0
    for curve in limits.manifold_pressure_curve:
        if low < curve.rpm[0] * (1.0 - slack) or high > curve.rpm[-1] * (1.0 + slack):
            barred.append("manifold_pressure_curve")
        for true in _comb(low, high, curve.rpm):
            # Within rounding of an end the curve still is that end.
            kept = min(max(true, curve.rpm[0]), curve.rpm[-1])
            if abs(kept - true) <= 1e-5 * true:
                top = min(top, on_line(curve.rpm, curve.manifold_pressure, kept))
    for floor in limits.least_manifold_pressure:
        for true in _comb(low, high, floor.rpm):
            value = on_line(floor.rpm, floor.manifold_pressure, true)
            if not math.isnan(value):
                bottom = max(bottom, value)
    return Column(low, high, tuple(barred), tuple(closed), top, bottom)


def broken(
    limits: Limits,
    gauges: Gauges,
    column: Column,
    flying: Flying,
    *,
    stops: tuple[float, float],
    slack: float,
) -> tuple[str, ...]:
    """Return the limits that a setting breaks.

    Parameters
    ----------
    limits : Limits
        What the sources state [-]
    gauges : Gauges
        The gauges [-]
    column : Column
        What holds at its tachometer reading [-]
    flying : Flying
        The setting [-]
    stops : tuple of float
        Fine and coarse stop of the propeller [rad]
    slack : float
        Share by which a limit must be passed to count [-]

    Returns
    -------
    tuple of str
        Names of kinds of limit [-]
    """
    low, high = stands_for(gauges.manifold_pressure, flying.reading, PRESSURE_BAND)
    found = list(column.barred)
    more, less = 1.0 + slack, 1.0 - slack
    for first, last in column.closed:
        if high >= first * more and low <= last * less:
            found.append("restricted_rpm")
    if high > column.greatest * more:
        found.append("manifold_pressure_curve")
    if low < column.least * less:
        found.append("least_manifold_pressure")
    if not _rated(limits, column.high, high, flying.power, more):
        found.append("ratings")
    if not all(_leaned(ceiling, flying, high, more) for ceiling in limits.leaning):
        found.append("leaning")
    if any(
        limit.kind == "V_NE" and flying.calibrated_airspeed > limit.calibrated_airspeed * more
        for limit in limits.airspeed
    ):
        found.append("airspeed")
    if any(
        not high <= _scheduled(schedule, flying.pressure_altitude, slack) * more
        for schedule in limits.altitude_schedule
    ):
        found.append("altitude_schedule")
    found += _outside(limits, flying, slack)
    if low > flying.full_throttle * more:
        found.append("full_throttle")
    if flying.blade_angle < stops[0] - slack or flying.blade_angle > stops[1] + slack:
        found.append("governing_range")
    return tuple(found)


def _leaned(ceiling: LeaningCeiling, flying: Flying, pressure: float, more: float) -> bool:
    """Say whether a setting keeps a ceiling, which another mixture's always does."""
    power, greatest = ceiling.greatest_power_fraction, ceiling.greatest_manifold_pressure
    return ceiling.mixture.casefold() != flying.mixture.casefold() or (
        (power is None or flying.power_fraction <= power * more)
        and (greatest is None or pressure <= greatest * more)
    )


def _scheduled(schedule: AltitudeSchedule, altitude: float, slack: float) -> float:
    """Return the pressure allowed at an altitude, NaN where the schedule does not reach."""
    first, last = schedule.pressure_altitude[0], schedule.pressure_altitude[-1]
    near = 0.01 if slack > 0.0 else -0.01  # 1 cm, since 0 m has no share
    if not first - near <= altitude <= last + near:
        return math.nan
    kept = min(max(altitude, first), last)
    return on_line(schedule.pressure_altitude, schedule.manifold_pressure, kept)


def _rated(limits: Limits, rpm: float, pressure: float, power: float, more: float) -> bool:
    """Say whether some rating covers a setting; a continuous one where there are any."""
    by_name: dict[str, list[bool]] = {}
    limited: dict[str, bool] = {}
    for rating in limits.ratings:
        covers = (
            rpm <= rating.rpm * more
            and power <= rating.power * more
            and (rating.manifold_pressure is None or pressure <= rating.manifold_pressure * more)
        )
        by_name.setdefault(rating.name, []).append(covers)
        limited[rating.name] = limited.get(rating.name, False) or rating.time_limit is not None
    if not by_name:
        return True
    continuous = [name for name in by_name if not limited[name]]
    return any(all(by_name[name]) for name in continuous or by_name)


def _outside(limits: Limits, flying: Flying, slack: float) -> Iterator[str]:
    """Yield the envelopes of altitude and temperature that a setting leaves."""
    for kind, envelopes, value in (
        ("altitude", limits.altitude, flying.pressure_altitude),
        ("temperature", limits.temperature, flying.temperature),
    ):
        for envelope in envelopes:
            # Altitude may be 0 or less, where a share is no distance.
            least, greatest = envelope.least, envelope.greatest
            if least is not None and value < least - slack * max(abs(least), 1.0):
                yield kind
            if greatest is not None and value > greatest + slack * max(abs(greatest), 1.0):
                yield kind
