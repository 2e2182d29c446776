"""Gauges: what a reading may stand for, and what a true value reads."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cardgen.constants import INCH_OF_MERCURY
from cardgen.errors import DomainError
from cardgen.limits.gauges import (
    UNMEASURED_GAUGES,
    GaugeError,
    Gauges,
    calibrated,
    indicated_manifold_pressure,
    indicated_rpm,
    indicated_rpm_interval,
    true_manifold_pressure_interval,
    true_rpm,
    true_rpm_interval,
)

UNMEASURED_PRESSURE = UNMEASURED_GAUGES.manifold_pressure


def _gauges(*points: tuple[float, float], band: float = 10.0) -> Gauges:
    """Return gauges whose tachometer was measured at (reading, correction) points."""
    tachometer = GaugeError(
        tuple(reading for reading, _ in points),
        tuple(correction for _, correction in points),
        band,
        measured=True,
    )
    return Gauges(tachometer, UNMEASURED_PRESSURE)


TABLE = _gauges((1800.0, -20.0), (2200.0, -60.0), (2600.0, 40.0))


def test_a_reading_on_a_calibration_point_is_corrected_by_that_points_correction() -> None:
    """True = indicated + correction."""
    assert true_rpm(TABLE, np.array([1800.0, 2200.0, 2600.0])) == pytest.approx(
        [1780.0, 2140.0, 2640.0]
    )


def test_between_calibration_points_the_correction_is_linear() -> None:
    """A quarter of the way from -60 to +40 rpm is -35 rpm."""
    assert true_rpm(TABLE, 2300.0) == pytest.approx(2265.0)


def test_a_measured_gauge_is_known_to_within_its_own_band() -> None:
    """A measured band may be narrower than the default for gauges nobody measured."""
    low, high = true_rpm_interval(TABLE, 2200.0)
    assert (float(low), float(high)) == pytest.approx((2130.0, 2150.0))


def test_an_unmeasured_tachometer_may_be_fifty_rpm_off_either_way() -> None:
    """The stated default guard band; common practice, no source."""
    low, high = true_rpm_interval(UNMEASURED_GAUGES, 2360.0)
    assert (float(low), float(high)) == (2310.0, 2410.0)


def test_an_unmeasured_pressure_gauge_may_be_four_tenths_of_an_inch_off_either_way() -> None:
    """The stated default guard band; common practice, no source."""
    low, high = true_manifold_pressure_interval(UNMEASURED_GAUGES, 25.0 * INCH_OF_MERCURY)
    assert float(low) / INCH_OF_MERCURY == pytest.approx(24.6)
    assert float(high) / INCH_OF_MERCURY == pytest.approx(25.4)


def test_an_unmeasured_gauge_never_gets_less_than_its_default_band() -> None:
    """A narrow band without a measurement behind it is not believed."""
    hopeful = Gauges(GaugeError((0.0,), (0.0,), 5.0, measured=False), UNMEASURED_PRESSURE)
    low, high = true_rpm_interval(hopeful, 2400.0)
    assert (float(low), float(high)) == (2350.0, 2450.0)


def test_a_constant_correction_holds_at_every_reading() -> None:
    """One point is not a table with an end."""
    gauges = _gauges((2400.0, -30.0))
    readings = np.array([500.0, 2400.0, 3000.0])
    assert np.all(calibrated(gauges.tachometer, readings))
    assert true_rpm(gauges, readings) == pytest.approx(readings - 30.0)


def test_a_reading_beyond_the_table_is_not_calibrated_and_taken_at_its_worst() -> None:
    """It may be off by the end's correction or by none, and by the default band at least."""
    assert not calibrated(TABLE.tachometer, 2601.0)
    low, high = true_rpm_interval(TABLE, 2700.0)
    assert (float(low), float(high)) == pytest.approx((2700.0 - 50.0, 2740.0 + 50.0))


def test_the_ends_of_the_table_are_calibrated() -> None:
    """The points themselves were measured."""
    assert np.all(calibrated(TABLE.tachometer, np.array([1800.0, 2600.0])))


def test_calibration_points_may_stand_in_any_order() -> None:
    """A table written from high to low is the same table."""
    reversed_table = _gauges((2600.0, 40.0), (2200.0, -60.0), (1800.0, -20.0))
    readings = np.linspace(1700.0, 2700.0, 41)
    np.testing.assert_array_equal(true_rpm(reversed_table, readings), true_rpm(TABLE, readings))


@given(st.floats(1000.0, 3000.0))
def test_reading_and_true_value_are_an_inverse_pair(reading: float) -> None:
    """What a gauge reads at the true value of a reading is that reading, table or no table."""
    assert float(indicated_rpm(TABLE, true_rpm(TABLE, reading))) == pytest.approx(reading, rel=1e-9)


def test_an_unmeasured_gauge_reads_the_true_value() -> None:
    """Where no error is stated a printed setting is the true one."""
    assert indicated_rpm(UNMEASURED_GAUGES, 2400.0) == 2400.0
    assert indicated_manifold_pressure(UNMEASURED_GAUGES, 8e4) == 8e4


def test_a_table_that_gives_one_true_value_for_two_readings_cannot_be_inverted() -> None:
    """A correction that falls faster than the reading rises is a mistake in the table."""
    folded = _gauges((2000.0, 100.0), (2100.0, -50.0))
    with pytest.raises(DomainError, match="two readings"):
        indicated_rpm(folded, 2075.0)


def test_a_range_of_true_rpm_widens_to_every_reading_that_may_stand_for_it() -> None:
    """True 2100 to 2350 with a gauge that reads 20 rpm high and is known to 10 rpm."""
    gauges = _gauges((0.0, -20.0), band=10.0)
    assert indicated_rpm_interval(gauges, 2100.0, 2350.0) == pytest.approx((2110.0, 2380.0))


def test_an_unknown_reading_stands_for_nothing_known() -> None:
    """NaN stays NaN and is not calibrated."""
    low, high = true_rpm_interval(TABLE, np.nan)
    assert np.isnan(low)
    assert np.isnan(high)
    assert not calibrated(TABLE.tachometer, np.nan)


def test_gauges_broadcast_over_arrays() -> None:
    """Each element is what the scalar gives."""
    readings = np.linspace(1700.0, 2700.0, 12).reshape(3, 4)
    low, _ = true_rpm_interval(TABLE, readings)
    assert low.shape == (3, 4)
    for place in np.ndindex(3, 4):
        assert low[place] == true_rpm_interval(TABLE, float(readings[place]))[0]
