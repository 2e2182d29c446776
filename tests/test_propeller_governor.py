"""Stops, slip and blade angle of attack, and what the trade says of a propeller in cruise."""

import numpy as np
import pytest

from cardgen.propeller import (
    Governing,
    Propeller,
    blade_angle_of_attack,
    blade_from_activity_factor,
    coefficient_table,
    efficiency,
    governing,
    slip,
    ungoverned_rpm,
)

PROPELLER = Propeller(
    1.93, 2, blade_from_activity_factor(105.0), np.radians(12.0), np.radians(28.0)
)
#: A cruise of an aeroplane with about 200 hp: 8000 ft, 65 %.
POWER, DENSITY, SOUND, SPEED, RPM = 97e3, 0.963, 330.0, 72.0, 2400.0


def cruise(*, speed: float = SPEED, rpm: float = RPM, power: float = POWER):
    """J, C_P, blade angle and C_T of the governed propeller."""
    turns = rpm / 60.0
    j = speed / (turns * PROPELLER.diameter)
    cp = power / (DENSITY * turns**3 * PROPELLER.diameter**5)
    mach = np.pi * turns * PROPELLER.diameter / SOUND
    angle, ct = coefficient_table(PROPELLER).governed(j, power_coefficient=cp, tip_mach=mach)
    return j, cp, float(angle), float(ct)


def test_cruise_efficiency_is_80_to_90_percent() -> None:
    """Common practice, no source: cruise efficiency 80-90 %."""
    j, cp, _, ct = cruise()
    assert 0.80 < efficiency(j, power_coefficient=cp, thrust_coefficient=ct) < 0.90


@pytest.mark.parametrize(
    ("power", "speed", "rpm"), [(97e3, 72.0, 2400.0), (105e3, 70.0, 2400.0), (97e3, 68.0, 2300.0)]
)
def test_blade_meets_the_air_at_2_to_4_degrees_in_cruise(
    power: float, speed: float, rpm: float
) -> None:
    """Common practice, no source: blade angle of attack in cruise about 2-4 whole degrees."""
    j, _, angle, _ = cruise(power=power, speed=speed, rpm=rpm)
    assert 2.0 <= np.round(np.degrees(blade_angle_of_attack(j, blade_angle=angle))) <= 4.0


def test_more_airspeed_lowers_the_blade_angle_of_attack_and_more_rpm_raises_it() -> None:
    """Common practice, no source: at a fixed blade angle."""
    _, _, angle, _ = cruise()
    at = {}
    for name, speed, rpm in (
        ("cruise", SPEED, RPM),
        ("fast", 80.0, RPM),
        ("revving", SPEED, 2600.0),
    ):
        j = speed / (rpm / 60.0 * PROPELLER.diameter)
        at[name] = blade_angle_of_attack(j, blade_angle=angle)
    assert at["fast"] < at["cruise"] < at["revving"]


def test_governor_coarsens_for_speed_and_power_and_fines_for_rpm() -> None:
    """Constant-speed propeller: blade angle rises with airspeed and power, falls with rpm asked."""
    _, _, angle, _ = cruise()
    assert cruise(speed=80.0)[2] > angle
    assert cruise(power=110e3)[2] > angle
    assert cruise(rpm=2600.0)[2] < angle


def test_slip_is_the_share_of_the_geometric_pitch_not_advanced() -> None:
    """Slip is geometric less effective pitch, over geometric pitch (FAA-H-8083-25's definition)."""
    pitch = 0.75 * np.pi * np.tan(np.radians(22.0))
    assert slip(pitch, blade_angle=np.radians(22.0)) == pytest.approx(0.0, abs=1e-15)
    assert slip(0.9 * pitch, blade_angle=np.radians(22.0)) == pytest.approx(0.1)


def test_blade_at_the_helix_angle_has_no_angle_of_attack() -> None:
    """The helix angle at 0.75 R is arctan(J / (0.75 pi))."""
    assert blade_angle_of_attack(0.75 * np.pi, blade_angle=np.pi / 4.0) == pytest.approx(0.0)


def test_stops_bound_what_the_governor_can_hold() -> None:
    """Fine of the fine stop and coarse of the coarse stop the hub does not turn."""
    angles = np.radians([11.9, 12.0, 20.0, 28.0, 28.1, np.nan])
    expected = [
        Governing.FINE_STOP,
        Governing.HOLDING,
        Governing.HOLDING,
        Governing.HOLDING,
        Governing.COARSE_STOP,
        Governing.UNKNOWN,
    ]
    # The stops are radians of 12 and 28 degrees, computed the same way.
    np.testing.assert_array_equal(governing(PROPELLER, angles), expected)


def test_rpm_settles_where_power_given_is_power_absorbed() -> None:
    """On a stop the propeller turns as fast as its blade lets it: checked by substitution."""
    stop, speed = PROPELLER.fine_stop, np.array([30.0, 40.0, 45.0])

    def power(rpm):
        return 60e3 * rpm / 2700.0

    rpm = ungoverned_rpm(
        PROPELLER,
        power,
        blade_angle=stop,
        true_airspeed=speed,
        density=1.2,
        speed_of_sound=340.0,
    )
    turns = rpm / 60.0
    absorbed = coefficient_table(PROPELLER).coefficients(
        speed / (turns * PROPELLER.diameter),
        blade_angle=stop,
        tip_mach=np.pi * turns * PROPELLER.diameter / 340.0,
    )
    watts = absorbed.power_coefficient * 1.2 * turns**3 * PROPELLER.diameter**5
    np.testing.assert_allclose(watts, power(rpm), rtol=1e-8)
    assert (np.diff(rpm) > 0.0).all()


def test_rpm_sags_on_the_fine_stop_and_climbs_on_the_coarse_stop() -> None:
    """Too little power for the rpm asked: it sags. Too much for the coarsest blade: it climbs."""
    diameter, asked = PROPELLER.diameter, 2500.0
    at = {"density": 1.2, "speed_of_sound": 340.0}
    turns = asked / 60.0
    for stop, speed, share, sags in (
        (PROPELLER.fine_stop, 35.0, 0.7, True),
        (PROPELLER.coarse_stop, 75.0, 1.3, False),
    ):
        holding = coefficient_table(PROPELLER).coefficients(
            speed / (turns * diameter),
            blade_angle=stop,
            tip_mach=np.pi * turns * diameter / 340.0,
        )
        watts = share * float(holding.power_coefficient) * 1.2 * turns**3 * diameter**5
        rpm = float(
            ungoverned_rpm(
                PROPELLER,
                lambda n, watts=watts: np.full_like(n, watts),
                blade_angle=stop,
                true_airspeed=speed,
                **at,
            )
        )
        assert (rpm < asked) is sags
        assert 0.7 * asked < rpm < 1.3 * asked


def test_no_rpm_inside_the_table_is_nan() -> None:
    """Ten kilowatts do not turn a coarse blade at any tip speed the table knows."""
    rpm = ungoverned_rpm(
        PROPELLER,
        lambda n: np.full_like(n, 1e6),
        blade_angle=[PROPELLER.coarse_stop, 1.4],
        true_airspeed=[60.0, 60.0],
        density=1.2,
        speed_of_sound=340.0,
    )
    assert np.isnan(rpm).all()


def test_efficiency_needs_absorbed_power_and_counts_the_installation() -> None:
    """Thrust power over shaft power; a windmill has none."""
    eta = efficiency(
        0.8, power_coefficient=[0.05, 0.0], thrust_coefficient=0.05, installation_factor=0.95
    )
    assert eta[0] == pytest.approx(0.76)
    assert np.isnan(eta[1])
