"""Random limits and settings, judged once by `check` and once by a reading of the rules.

The reading below knows nothing of arrays or intervals. It takes one true rpm, one true manifold
pressure, one altitude and one power, all as whole numbers of lattice steps, and applies each rule
in whole-number arithmetic. Gauge error is then every lattice value that a reading may stand for.
Since all corners of the random limits lie on the lattice and curves are straight between corners,
a curve's extremes and a range's ends over any window are met exactly, so the two must agree.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import pytest
from numpy.typing import NDArray

from cardgen.constants import INCH_OF_MERCURY
from cardgen.limits import Flown, GaugeError, Gauges, Limits, Source, Verdict, check
from cardgen.limits.bars import bars_of
from cardgen.limits.kinds import (
    AltitudeSchedule,
    LeaningCeiling,
    LeastManifoldPressure,
    ManifoldPressureCurve,
    Rating,
    RestrictedRpm,
    RpmRange,
    StatedNone,
)

RPM_STEP = 25.0
PRESSURE_STEP = 0.5 * INCH_OF_MERCURY
ALTITUDE_STEP = 600.0
POWER_STEP = 9000.0
RATED = 20  # power steps that are 100 %

RPM = range(60, 116)  # 1500 to 2875 rpm
PRESSURE = range(24, 63)  # 12 to 31 inHg
ALTITUDE = range(5)
POWER = range(12, 24)
REACH = 4  # steps that correction and band together may move a reading

SOURCE = Source("Invented flight manual", "section 2", "revision 1")
INSIDE, CAUTION, UNKNOWN, OUTSIDE = range(4)
Points = tuple[tuple[int, int], ...]


@dataclass(frozen=True)
class Range:
    """Restricted rpm range in lattice steps."""

    name: str
    low: int
    high: int
    above: int | None
    below: int | None
    phase: str | None


@dataclass(frozen=True)
class Box:
    """Rating in lattice steps."""

    name: str
    power: int
    rpm: int
    pressure: int | None
    limited: bool


@dataclass(frozen=True)
class Rules:
    """Random limits in lattice steps."""

    ranges: tuple[Range, ...]
    curve: Points
    least: Points
    schedule: Points
    rpm: tuple[int, int]
    ceiling_power: int
    ceiling_pressure: int
    boxes: tuple[Box, ...]


def _points(rng: np.random.Generator, x: range, y: range, *, count: int) -> Points:
    """Return a random broken line with `count` points; two or more span most of x."""
    ends = [x.start + int(rng.integers(0, 6)), x.stop - int(rng.integers(1, 6))]
    middle = rng.choice(np.arange(x.start + 6, x.stop - 6), max(count - 2, 0), replace=False)
    places = sorted([*ends, *(int(v) for v in middle)])[:count]
    return tuple((place, int(rng.integers(y.start, y.stop))) for place in places)


def _schedule(rng: np.random.Generator) -> Points:
    """Return a schedule over altitude whose ends may lie within the altitudes flown."""
    places = sorted({int(rng.integers(-1, 2)), int(rng.integers(2, 4)), int(rng.integers(4, 6))})
    return tuple((place, int(rng.integers(46, 62))) for place in places)


def _random_rules(rng: np.random.Generator) -> Rules:
    ranges = []
    for _ in range(rng.integers(1, 4)):
        low = int(rng.integers(70, 100))
        above, below = (int(v) for v in rng.integers(30, 56, 2))
        ranges.append(
            Range(
                name=str(rng.choice(["blades", "engine mount", "crankshaft"])),
                low=low,
                high=low + int(rng.integers(0, 9)),
                above=above if rng.random() < 0.4 else None,
                below=below if rng.random() < 0.4 else None,
                phase=str(rng.choice(["descent", "ground"])) if rng.random() < 0.6 else None,
            )
        )
    boxes = [
        Box(
            name=str(rng.choice(["Continuous", "Take-off", "Climb"])),
            power=int(rng.integers(17, 23)),
            rpm=int(rng.integers(100, 114)),
            pressure=int(rng.integers(48, 62)) if rng.random() < 0.4 else None,
            limited=bool(rng.random() < 0.3),
        )
        for _ in range(rng.integers(1, 5))
    ]
    return Rules(
        ranges=tuple(ranges),
        curve=_points(rng, range(62, 114), range(42, 62), count=int(rng.integers(2, 6))),
        least=_points(rng, range(62, 114), range(24, 36), count=int(rng.integers(1, 4))),
        schedule=_schedule(rng),
        rpm=(int(rng.integers(60, 75)), int(rng.integers(105, 115))),
        ceiling_power=int(rng.integers(16, 22)),
        ceiling_pressure=int(rng.integers(50, 62)),
        boxes=tuple(boxes),
    )


def _above_line(points: Points, x: int, y: int) -> bool | None:
    """Say whether y lies above a broken line at x, None beyond its ends; whole numbers only."""
    if x == points[0][0] == points[-1][0]:
        return y > points[0][1]
    for (x0, y0), (x1, y1) in pairwise(points):
        if x0 <= x <= x1:
            return (y - y0) * (x1 - x0) > (y1 - y0) * (x - x0)
    return None


def _below_line(points: Points, x: int, y: int) -> bool | None:
    """Say whether y lies below a broken line at x, None beyond its ends."""
    return _above_line(tuple((a, -b) for a, b in points), x, -y)


def _range_closed(rule: Range, rpm: int, pressure: int) -> bool:
    """Say whether a range is closed at one true rpm and pressure."""
    if not rule.low <= rpm <= rule.high:
        return False
    if rule.above is None or rule.below is None:
        return (rule.above is None or pressure >= rule.above) and (
            rule.below is None or pressure <= rule.below
        )
    if rule.above > rule.below:
        return pressure >= rule.above or pressure <= rule.below
    return rule.above <= pressure <= rule.below


def _read_setting(rules: Rules, rpm: int, pressure: int, altitude: int) -> int:
    """Return the verdict on one true rpm and manifold pressure at one altitude."""
    worst = INSIDE
    for rule in rules.ranges:
        if _range_closed(rule, rpm, pressure):
            worst = max(worst, OUTSIDE if rule.phase is None else CAUTION)
    if _above_line(rules.curve, rpm, pressure) in (True, None):
        return OUTSIDE
    if _above_line(rules.schedule, altitude, pressure) in (True, None):
        return OUTSIDE
    if not rules.rpm[0] <= rpm <= rules.rpm[1] or pressure > rules.ceiling_pressure:
        return OUTSIDE
    if len(rules.least) == 1:
        return OUTSIDE if pressure < rules.least[0][1] else worst
    too_low = _below_line(rules.least, rpm, pressure)
    if too_low is None:
        return max(worst, UNKNOWN)
    return OUTSIDE if too_low else worst


def _fits(box: Box, rpm: int, pressure: int, power: int) -> bool:
    return (
        rpm <= box.rpm and power <= box.power and (box.pressure is None or pressure <= box.pressure)
    )


def _read_ratings(rules: Rules, rpm: int, pressure: int, power: int) -> int:
    """Return the verdict of the ratings on one true rpm, manifold pressure and power."""
    names = {box.name for box in rules.boxes}
    groups = [[box for box in rules.boxes if box.name == name] for name in names]
    continuous = [group for group in groups if not any(box.limited for box in group)]
    covered = any(
        all(_fits(box, rpm, pressure, power) for box in group) for group in continuous or groups
    )
    if not covered:
        return OUTSIDE
    return INSIDE if continuous else UNKNOWN


def _limits(rules: Rules) -> Limits:
    """Return the same rules as a profile would state them."""
    pressure = PRESSURE_STEP
    said = ("as written", SOURCE)
    return Limits(
        restricted_rpm=tuple(
            RestrictedRpm(
                r.name,
                r.low * RPM_STEP,
                r.high * RPM_STEP,
                *said,
                above_manifold_pressure=None if r.above is None else r.above * pressure,
                below_manifold_pressure=None if r.below is None else r.below * pressure,
                phase=r.phase,
            )
            for r in rules.ranges
        ),
        manifold_pressure_curve=(
            ManifoldPressureCurve(
                "curve",
                tuple(x * RPM_STEP for x, _ in rules.curve),
                tuple(y * pressure for _, y in rules.curve),
                *said,
            ),
        ),
        ratings=tuple(
            Rating(
                b.name,
                b.power * POWER_STEP,
                b.rpm * RPM_STEP,
                *said,
                manifold_pressure=None if b.pressure is None else b.pressure * pressure,
                time_limit=300.0 if b.limited else None,
            )
            for b in rules.boxes
        ),
        rpm_range=(RpmRange("rpm", *said, rules.rpm[0] * RPM_STEP, rules.rpm[1] * RPM_STEP),),
        least_manifold_pressure=(
            LeastManifoldPressure(
                "least",
                tuple(x * RPM_STEP for x, _ in rules.least),
                tuple(y * pressure for _, y in rules.least),
                *said,
            ),
        ),
        leaning=(
            LeaningCeiling(
                "leaning",
                "economy",
                *said,
                rules.ceiling_power / RATED,
                rules.ceiling_pressure * pressure,
            ),
        ),
        altitude_schedule=(
            AltitudeSchedule(
                "schedule",
                tuple(x * ALTITUDE_STEP for x, _ in rules.schedule),
                tuple(y * pressure for _, y in rules.schedule),
                *said,
            ),
        ),
        stated_none=tuple(
            StatedNone(category, *said) for category in ("airspeed", "altitude", "temperature")
        ),
    )


def _tables(rules: Rules) -> tuple[NDArray[np.int8], NDArray[np.int8]]:
    """Return the reading of every true value on the lattice, one at a time."""
    setting = [[[_read_setting(rules, n, p, z) for z in ALTITUDE] for p in PRESSURE] for n in RPM]
    ratings = [[[_read_ratings(rules, n, p, w) for w in POWER] for p in PRESSURE] for n in RPM]
    return np.array(setting, dtype=np.int8), np.array(ratings, dtype=np.int8)


@pytest.mark.parametrize("seed", range(24))
def test_every_true_value_that_a_reading_may_stand_for_is_judged(seed: int) -> None:
    """An indicated setting is as bad as the worst true setting it may stand for, no worse."""
    rng = np.random.default_rng(seed)
    rules = _random_rules(rng)
    setting, ratings = _tables(rules)
    count = 10_000
    rpm_shift, pressure_shift = (int(v) for v in rng.integers(-2, 3, 2))
    rpm_band, pressure_band, power_band = (int(v) for v in rng.integers(0, 3, 3))
    n = rng.integers(RPM.start + REACH, RPM.stop - REACH, count)
    p = rng.integers(PRESSURE.start + REACH, PRESSURE.stop - REACH, count)
    z = rng.integers(0, len(ALTITUDE), count)
    w = rng.integers(POWER.start + 2, POWER.stop - 2, count)

    expected = np.zeros(count, dtype=np.int8)
    for dn in range(-rpm_band, rpm_band + 1):
        for dp in range(-pressure_band, pressure_band + 1):
            i = n + rpm_shift + dn - RPM.start
            j = p + pressure_shift + dp - PRESSURE.start
            expected = np.maximum(expected, setting[i, j, z])
            for dw in range(-power_band, power_band + 1):
                expected = np.maximum(expected, ratings[i, j, w + dw - POWER.start])
                too_strong = w + dw > rules.ceiling_power
                expected = np.where(too_strong, OUTSIDE, expected).astype(np.int8)

    def gauge(shift: float, band: float) -> GaugeError:
        return GaugeError((0.0,), (shift,), band, measured=True)

    gauges = Gauges(
        gauge(rpm_shift * RPM_STEP, rpm_band * RPM_STEP),
        gauge(pressure_shift * PRESSURE_STEP, pressure_band * PRESSURE_STEP),
    )
    flown = Flown(
        indicated_rpm=n * RPM_STEP,
        indicated_manifold_pressure=p * PRESSURE_STEP,
        pressure_altitude=z * ALTITUDE_STEP,
        temperature=280.0,
        mixture="economy",
        power_fraction=w / RATED,
        power=w * POWER_STEP,
        calibrated_airspeed=70.0,
        full_throttle_manifold_pressure=2e5,
        on_fine_stop=False,
        on_coarse_stop=False,
        power_fraction_tolerance=power_band / RATED,
    )
    findings = check(_limits(rules), gauges, flown)
    np.testing.assert_array_equal(findings.verdict, expected)
    forbidden = bars_of([findings]).index[0] >= 0
    np.testing.assert_array_equal(forbidden, expected == Verdict.OUTSIDE)


def test_random_rules_reach_every_verdict() -> None:
    """The comparison above would prove little if it met one verdict only."""
    met = np.zeros(4, dtype=np.int64)
    for seed in range(24):
        setting, ratings = _tables(_random_rules(np.random.default_rng(seed)))
        worst = np.maximum(setting[..., 2], ratings[..., 4])
        met += np.bincount(worst.ravel(), minlength=4)
    assert np.all(met / met.sum() > 0.01), met
