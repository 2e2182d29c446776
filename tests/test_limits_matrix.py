"""Every kind of limit, just inside, exactly on and just beyond it, under every gauge error."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product

import pytest
from limits_specimen import (
    ALTITUDE,
    BLADES,
    CONTINUOUS,
    CURVE,
    INHG,
    LEANING,
    LEAST,
    RPM_LIMITS,
    SCHEDULE,
    TEMPERATURE,
    V_NE,
    V_NO,
    flown,
    only,
)

from cardgen.constants import HORSEPOWER, KNOT
from cardgen.limits import GaugeError, Gauges, Limits, check


@dataclass(frozen=True)
class Row:
    """One edge of one limit: which number meets it, and from which side.

    `side` is +1 where more breaks the limit and -1 where less does; `on` and `beyond` are the
    verdicts there. `edge` is the true value, by altitude [m] where it depends on it.
    """

    label: str
    limits: Limits
    field: str
    edge: dict[float, float]
    side: int
    step: float
    on: str = "inside"
    beyond: str = "outside"


def _row(
    label: str,
    limits: Limits,
    field: str,
    *,
    edge: float | dict[float, float],
    side: int,
    step: float,
    on: str = "inside",
    beyond: str = "outside",
) -> Row:
    by_altitude = edge if isinstance(edge, dict) else dict.fromkeys(ALTITUDES, edge)
    return Row(label, limits, field, by_altitude, side, step, on, beyond)


ALTITUDES = (0.0, 1500.0, 4500.0)
# Of the specimen: 29 inHg at sea level, halfway from there to 26 at 3000 m, halfway on to 20.
SCHEDULED = {0.0: 29.0 * INHG, 1500.0: 27.5 * INHG, 4500.0: 23.0 * INHG}
RPM, PRESSURE = "indicated_rpm", "indicated_manifold_pressure"

ROWS = (
    _row(
        "restricted range from below",
        only(restricted_rpm=(BLADES,)),
        RPM,
        edge=2100.0,
        side=+1,
        step=1.0,
        on="outside",
    ),
    _row(
        "restricted range from above",
        only(restricted_rpm=(BLADES,)),
        RPM,
        edge=2350.0,
        side=-1,
        step=1.0,
        on="outside",
    ),
    _row("greatest rpm", only(rpm_range=(RPM_LIMITS,)), RPM, edge=2650.0, side=+1, step=1.0),
    _row("least rpm", only(rpm_range=(RPM_LIMITS,)), RPM, edge=1800.0, side=-1, step=1.0),
    _row("rated rpm", only(ratings=(CONTINUOUS,)), RPM, edge=2600.0, side=+1, step=1.0),
    _row(
        "lower end of the chart",
        only(manifold_pressure_curve=(CURVE,)),
        RPM,
        edge=1800.0,
        side=-1,
        step=1.0,
    ),
    _row(
        "upper end of the chart",
        only(manifold_pressure_curve=(CURVE,)),
        RPM,
        edge=2700.0,
        side=+1,
        step=1.0,
    ),
    _row(
        "leaning pressure",
        only(leaning=(LEANING,)),
        PRESSURE,
        edge=25.0 * INHG,
        side=+1,
        step=0.01 * INHG,
    ),
    _row(
        "schedule",
        only(altitude_schedule=(SCHEDULE,)),
        PRESSURE,
        edge=SCHEDULED,
        side=+1,
        step=0.01 * INHG,
    ),
    _row(
        "leaning power",
        only(leaning=(LEANING,)),
        "power_fraction",
        edge=0.75,
        side=+1,
        step=0.001,
    ),
    _row(
        "V_NO",
        only(airspeed=(V_NO,)),
        "calibrated_airspeed",
        edge=150.0 * KNOT,
        side=+1,
        step=0.1 * KNOT,
        beyond="caution",
    ),
    _row(
        "V_NE",
        only(airspeed=(V_NE,)),
        "calibrated_airspeed",
        edge=185.0 * KNOT,
        side=+1,
        step=0.1 * KNOT,
    ),
    _row(
        "coldest air",
        only(temperature=(TEMPERATURE,)),
        "temperature",
        edge=243.15,
        side=-1,
        step=0.1,
    ),
    _row(
        "hottest air",
        only(temperature=(TEMPERATURE,)),
        "temperature",
        edge=318.15,
        side=+1,
        step=0.1,
    ),
)
GAUGE_ERRORS = tuple(product((-1.0, 0.0, +1.0), (0.0, 1.0)))  # sign of the correction, band


def _gauges(sign: float, width: float) -> Gauges:
    """Return gauges with corrections of 40 rpm and 0.8 inHg and bands of 25 rpm and 0.3 inHg."""
    return Gauges(
        GaugeError((0.0,), (sign * 40.0,), width * 25.0, measured=True),
        GaugeError((0.0,), (sign * 0.8 * INHG,), width * 0.3 * INHG, measured=True),
    )


def _reading(row: Row, altitude: float, *, sign: float, width: float, past: float) -> float:
    """Return the number to fly so that its worst true value lies `past` the edge."""
    correction = {RPM: sign * 40.0, PRESSURE: sign * 0.8 * INHG}.get(row.field, 0.0)
    uncertain = {
        RPM: 25.0,
        PRESSURE: 0.3 * INHG,
        "power_fraction": 0.01,
        "calibrated_airspeed": 2.0 * KNOT,
    }.get(row.field, 0.0)
    worst = row.edge[altitude] + row.side * past
    return worst - row.side * width * uncertain - correction


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row.label)
@pytest.mark.parametrize(("sign", "width"), GAUGE_ERRORS)
@pytest.mark.parametrize("altitude", ALTITUDES)
def test_a_limit_is_kept_up_to_its_edge_by_every_true_value(
    row: Row, sign: float, width: float, altitude: float
) -> None:
    """Gauge error and model tolerance move the edge to the safe side, whatever their sign."""
    for past, expected in ((-row.step, "inside"), (0.0, row.on), (row.step, row.beyond)):
        changes = {
            "pressure_altitude": altitude,
            # Low enough for the chart, in sight of no edge but the one that is met.
            "indicated_manifold_pressure": (18.0 - sign * 0.8) * INHG,
            "full_throttle_manifold_pressure": 31.0 * INHG,
            "power_fraction_tolerance": width * 0.01,
            "calibrated_airspeed_tolerance": width * 2.0 * KNOT,
            row.field: _reading(row, altitude, sign=sign, width=width, past=past),
        }
        findings = check(row.limits, _gauges(sign, width), flown(**changes))
        assert findings.verdict_at() == expected, (past, [f.message for f in findings.at()])


@pytest.mark.parametrize(("sign", "width"), GAUGE_ERRORS)
@pytest.mark.parametrize("past", [-0.01, 0.0, 0.01])
def test_a_sloping_curve_is_met_at_the_worst_corner_of_rpm_and_pressure(
    sign: float, width: float, past: float
) -> None:
    """Least permitted pressure at the least true rpm, against the greatest true pressure."""
    rpm = 2100.0
    least_true_rpm = rpm + sign * 40.0 - width * 25.0
    permitted = 22.0 + (26.0 - 22.0) * (least_true_rpm - 1800.0) / 600.0  # inHg on the chart
    reads = permitted + past - sign * 0.8 - width * 0.3
    setting = flown(
        indicated_rpm=rpm,
        indicated_manifold_pressure=reads * INHG,
        full_throttle_manifold_pressure=31.0 * INHG,
    )
    findings = check(only(manifold_pressure_curve=(CURVE,)), _gauges(sign, width), setting)
    assert findings.verdict_at() == ("outside" if past > 0.0 else "inside")


@pytest.mark.parametrize(("sign", "width"), GAUGE_ERRORS)
@pytest.mark.parametrize("past", [-0.01, 0.0, 0.01])
def test_a_sloping_floor_is_met_at_the_worst_corner_of_rpm_and_pressure(
    sign: float, width: float, past: float
) -> None:
    """Greatest required pressure at the greatest true rpm, against the least true pressure."""
    rpm = 2250.0
    greatest_true_rpm = rpm + sign * 40.0 + width * 25.0
    required = 12.0 + 3.0 * (greatest_true_rpm - 1800.0) / 900.0  # inHg on the specimen's floor
    reads = required - past - sign * 0.8 + width * 0.3
    setting = flown(indicated_rpm=rpm, indicated_manifold_pressure=reads * INHG)
    findings = check(only(least_manifold_pressure=(LEAST,)), _gauges(sign, width), setting)
    assert findings.verdict_at() == ("outside" if past > 0.0 else "inside")


@pytest.mark.parametrize("tolerance", [0.0, 0.02])
@pytest.mark.parametrize("past", [-0.001, 0.0, 0.001])
def test_rated_power_is_held_against_the_power_with_its_tolerance(
    tolerance: float, past: float
) -> None:
    """The 95 % tolerance of the power fraction is the same share of the power."""
    fraction = 1.0 + past - tolerance
    setting = flown(
        power_fraction=fraction,
        power=fraction * 230.0 * HORSEPOWER,
        power_fraction_tolerance=tolerance,
    )
    findings = check(only(ratings=(CONTINUOUS,)), _gauges(0.0, 0.0), setting)
    assert findings.verdict_at() == ("outside" if past > 0.0 else "inside")


@pytest.mark.parametrize("altitude", [4999.9, 5000.0, 5000.1])
def test_an_approved_altitude_includes_its_end(altitude: float) -> None:
    """Altitude is a given of the table, not a gauge reading, so no error widens it."""
    setting = flown(pressure_altitude=altitude)
    findings = check(only(altitude=(ALTITUDE,)), _gauges(1.0, 1.0), setting)
    assert findings.verdict_at() == ("outside" if altitude > 5000.0 else "inside")
