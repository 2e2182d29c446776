"""Standard atmosphere, density altitude and humidity against published tables and libraries."""

from __future__ import annotations

import csv
from pathlib import Path

import ambiance
import fluids.atmosphere
import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from cardgen import constants
from cardgen.atmosphere import (
    altimeter_setting_to_pressure_altitude,
    density,
    density_altitude,
    power_correction_factor,
    pressure_altitude,
    pressure_altitude_at_density_altitude,
    saturation_vapour_pressure,
    speed_of_sound,
    standard_pressure,
    standard_temperature,
    vapour_pressure,
)
from cardgen.constants import FOOT, HIGHEST_STANDARD_ALTITUDE, LOWEST_STANDARD_ALTITUDE
from cardgen.units import from_unit, parse_quantity, to_unit

PUBLISHED = Path(__file__).parent / "published" / "standard_atmosphere_1976.csv"

altitudes = st.floats(LOWEST_STANDARD_ALTITUDE, HIGHEST_STANDARD_ALTITUDE)
deviations = st.floats(-60.0, 60.0)
temperatures = st.floats(200.0, 330.0)
pressures = st.floats(
    float(standard_pressure(HIGHEST_STANDARD_ALTITUDE)),
    float(standard_pressure(LOWEST_STANDARD_ALTITUDE)),
)


def _published() -> list[dict[str, str]]:
    """Return the rows of the published table as printed."""
    with PUBLISHED.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(line for line in file if not line.startswith("#")))


def _density_ratio(altitude: float) -> float:
    """Return the standard atmosphere's density over that at sea level."""
    rho = density(standard_pressure(altitude), standard_temperature(altitude))
    return float(rho) / constants.SEA_LEVEL_DENSITY


# How each printed column is computed, and the tolerance: half a unit of the last printed digit.
# Defect of the source: its inches of mercury are delta times a sea-level pressure already rounded
# to 29.92126 (it is 29.921256), which costs up to another half unit.
COLUMNS = {
    "delta": (lambda h: standard_pressure(h) / constants.SEA_LEVEL_PRESSURE, 0.5e-6),
    "P_inHg": (lambda h: to_unit(standard_pressure(h), "inHg"), 1.0e-5),
    "sigma": (_density_ratio, 0.5e-6),
    "theta": (lambda h: standard_temperature(h) / constants.SEA_LEVEL_TEMPERATURE, 0.5e-5),
    "T_degC": (lambda h: to_unit(standard_temperature(h), "degC"), 0.5e-2),
}


@pytest.mark.parametrize("column", COLUMNS)
@pytest.mark.parametrize("row", _published(), ids=lambda row: f"{row['press_alt_ft']} ft")
def test_standard_atmosphere_rounds_to_the_published_table(
    row: dict[str, str], column: str
) -> None:
    """Every figure of the 1976 table is met to its last printed digit."""
    compute, tolerance = COLUMNS[column]
    computed = compute(float(row["press_alt_ft"]) * FOOT)
    assert computed == pytest.approx(float(row[column]), rel=0.0, abs=tolerance)


def _geometric(altitude: float) -> float:
    """Return the geometric altitude of a geopotential one; both libraries ask for geometric."""
    earth_radius = 6356766.0  # nominal, in both standards
    return earth_radius * altitude / (earth_radius - altitude)


@pytest.mark.parametrize("altitude", np.linspace(-4900.0, 19900.0, 32))
def test_standard_atmosphere_agrees_with_fluids(altitude: float) -> None:
    """`fluids` programs the U.S. Standard Atmosphere 1976."""
    reference = fluids.atmosphere.ATMOSPHERE_1976(_geometric(altitude))
    assert standard_temperature(altitude) == pytest.approx(reference.T, rel=1e-12)
    assert standard_pressure(altitude) == pytest.approx(reference.P, rel=1e-11)
    assert density(reference.P, reference.T) == pytest.approx(reference.rho, rel=1e-7)
    assert speed_of_sound(reference.T) == pytest.approx(reference.v_sonic, rel=1e-7)


def test_standard_atmosphere_agrees_with_ambiance() -> None:
    """`ambiance` programs ISO 2533, whose gas constant is 0.7 ppm smaller.

    It starts each layer from a pressure rounded to six digits, up to 2.8 ppm off by itself.
    """
    altitude = np.linspace(-4900.0, 19900.0, 200)
    reference = ambiance.Atmosphere(_geometric(altitude))
    temperature = standard_temperature(altitude)
    pressure = standard_pressure(altitude)
    np.testing.assert_allclose(temperature, reference.temperature, rtol=1e-12)
    np.testing.assert_allclose(pressure, reference.pressure, rtol=4e-6)
    np.testing.assert_allclose(density(pressure, temperature), reference.density, rtol=4e-6)
    np.testing.assert_allclose(speed_of_sound(temperature), reference.speed_of_sound, rtol=4e-7)


@pytest.mark.parametrize(
    ("altitude_ft", "temperature", "expected_ft"),
    [
        (12_000.0, "50 degF", 14_130.0),
        (5_000.0, "30 degC", 7_800.0),
        (6_000.0, "30 degF", 5_500.0),
    ],
)
def test_density_altitude_meets_the_faa_examples(
    altitude_ft: float, temperature: str, expected_ft: float
) -> None:
    """FAA examples, the altitude read as pressure altitude, dry air; answer keys from memory."""
    pressure = standard_pressure(altitude_ft * FOOT)
    computed = density_altitude(pressure, parse_quantity(temperature, dimension="temperature"))
    assert to_unit(computed, "ft") == pytest.approx(expected_ft, rel=0.0, abs=20.0)


# --- Humidity -----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("temperature_f", "humidity", "pressure_inhg", "expected"),
    [(85.0, 0.85, 28.85, 1.1005), (55.0, 0.35, 30.10, 0.994)],
)
def test_power_correction_meets_the_worked_examples(
    temperature_f: float, humidity: float, pressure_inhg: float, expected: float
) -> None:
    """Worked examples of the SAE J607 correction for humidity, pressure and temperature."""
    temperature = from_unit(temperature_f, "degF")
    factor = power_correction_factor(
        from_unit(pressure_inhg, "inHg"),
        temperature,
        vapour_pressure=vapour_pressure(humidity, temperature),
    )
    assert factor == pytest.approx(expected, rel=0.0, abs=0.002)


def test_power_correction_is_one_in_test_code_air() -> None:
    """Dry air at 29.92 inHg and 60 °F needs no correction."""
    factor = power_correction_factor(from_unit(29.92, "inHg"), from_unit(60.0, "degF"))
    assert factor == pytest.approx(1.0, rel=1e-12)


def _iapws_saturation_pressure(temperature: float) -> float:
    """Return the saturation pressure of water [Pa], IAPWS-IF97 region 4, equation 30.

    Coefficients from memory; table 35 of IF97 gives 3536.58941 Pa at 300 K, checked below.
    """
    n = (
        *(0.11670521452767e4, -0.72421316703206e6, -0.17073846940092e2, 0.12020824702470e5),
        *(-0.32325550322333e7, 0.14915108613530e2, -0.48232657361591e4, 0.40511340542057e6),
        *(-0.23855557567849, 0.65017534844798e3),
    )
    theta = temperature + n[8] / (temperature - n[9])
    a = theta**2 + n[0] * theta + n[1]
    b = n[2] * theta**2 + n[3] * theta + n[4]
    c = n[5] * theta**2 + n[6] * theta + n[7]
    return 1.0e6 * (2.0 * c / (-b + (b**2 - 4.0 * a * c) ** 0.5)) ** 4


@pytest.mark.parametrize("temperature", [273.16, 283.15, 293.15, 300.0, 313.15, 323.15, 331.0])
def test_saturation_pressure_agrees_with_the_steam_tables(temperature: float) -> None:
    """Two independent fits of water's vapour pressure agree to 0.05 % above freezing."""
    assert _iapws_saturation_pressure(300.0) == pytest.approx(3536.58941, rel=1e-8)
    expected = _iapws_saturation_pressure(temperature)
    assert saturation_vapour_pressure(temperature) == pytest.approx(expected, rel=5e-4)


@pytest.mark.parametrize(
    ("temperature", "expected", "digits"),
    [(180.0, 0.011239, 5), (210.0, 1.2335, 5), (240.0, 37.667, 5), (273.16, 611.657, 6)],
)
def test_saturation_pressure_meets_the_authors_check_values(
    temperature: float, expected: float, digits: int
) -> None:
    """Check values of Murphy and Koop 2005 over supercooled liquid; from memory."""
    computed = float(saturation_vapour_pressure(temperature))
    assert float(f"{computed:.{digits}g}") == expected


@given(p=pressures, t=temperatures, humidity=st.floats(0.01, 1.0))
def test_moist_air_is_lighter_than_dry_air(p: float, t: float, humidity: float) -> None:
    """Vapour replaces heavier air, so density falls and density altitude rises."""
    p_v = float(vapour_pressure(humidity, t))
    assume(1e-9 * p < p_v < p)
    assert density(p, t, vapour_pressure=p_v) < density(p, t)


def test_moist_density_is_that_of_two_gases() -> None:
    """Dalton's law with the molar masses, computed from the universal gas constant."""
    p, t, p_v = 95000.0, 305.0, 3500.0
    gas_constant = constants.GAS_CONSTANT_DRY_AIR * constants.MOLAR_MASS_DRY_AIR
    expected = ((p - p_v) * constants.MOLAR_MASS_DRY_AIR + p_v * constants.MOLAR_MASS_WATER) / (
        gas_constant * t
    )
    assert density(p, t, vapour_pressure=p_v) == pytest.approx(expected, rel=1e-12)


# --- Inverses -----------------------------------------------------------------------------------


@given(altitude=altitudes)
def test_pressure_altitude_undoes_standard_pressure(altitude: float) -> None:
    """Both layers invert exactly, and the ends of the range are inside it."""
    assert pressure_altitude(standard_pressure(altitude)) == pytest.approx(altitude, abs=1e-7)


@pytest.mark.parametrize("offset", [-100.0, -30.0, -0.01, 0.0, 0.01, 30.0, 100.0])
def test_altitudes_invert_close_to_the_tropopause(offset: float) -> None:
    """Each side of the tropopause is solved with its own layer's formula."""
    altitude = constants.TROPOPAUSE + offset
    pressure = standard_pressure(altitude)
    assert pressure_altitude(pressure) == pytest.approx(altitude, abs=1e-8)
    there = density_altitude(pressure, standard_temperature(altitude))
    assert there == pytest.approx(altitude, abs=1e-8)


@given(altitude=altitudes)
def test_density_altitude_on_a_standard_day_is_pressure_altitude(altitude: float) -> None:
    """On a standard day the two altitudes are the same thing."""
    computed = density_altitude(standard_pressure(altitude), standard_temperature(altitude))
    assert computed == pytest.approx(altitude, abs=1e-6)


@given(altitude=altitudes, deviation=deviations)
def test_pressure_altitude_at_density_altitude_undoes_density_altitude(
    altitude: float, deviation: float
) -> None:
    """The Newton iteration reaches rounding from either side of the tropopause."""
    temperature = standard_temperature(altitude) + deviation
    there = density_altitude(standard_pressure(altitude), temperature)
    assume(np.isfinite(there))
    back = pressure_altitude_at_density_altitude(there, deviation)
    assert back == pytest.approx(altitude, abs=1e-6)


def test_density_altitude_inverts_at_extreme_temperatures() -> None:
    """Deviations no atmosphere shows still converge, wherever the tropopause lies on the way."""
    altitude, deviation = np.meshgrid(
        np.linspace(-5000.0, 20000.0, 101), [-100.0, -60.0, 60.0, 100.0]
    )
    there = pressure_altitude_at_density_altitude(altitude, deviation)
    temperature = standard_temperature(there) + deviation
    back = density_altitude(standard_pressure(there), temperature)
    inside = np.isfinite(there)
    assert inside.mean() > 0.8
    np.testing.assert_allclose(back[inside], altitude[inside], rtol=0.0, atol=1e-8)


def test_rounding_at_the_ends_of_the_range_stays_inside() -> None:
    """20 km that went through feet and back is still 20 km; a millimetre more is outside."""
    ends = np.array([LOWEST_STANDARD_ALTITUDE - 1e-9, HIGHEST_STANDARD_ALTITUDE + 1e-9])
    assert np.all(np.isfinite(standard_pressure(ends)))
    assert np.all(np.isnan(standard_pressure(ends + np.array([-1e-3, 1e-3]))))


@given(field=st.floats(-400.0, 4500.0), setting_inhg=st.floats(28.0, 31.0))
def test_altimeter_setting_follows_the_meteorological_formula(
    field: float, setting_inhg: float
) -> None:
    """Smithsonian Meteorological Tables: A^n = p^n + p0^n (−L/T0) h, n = −R L/g.

    The weather services put the altimeter 3 m above the station; that is left out on both sides.
    """
    setting = float(from_unit(setting_inhg, "inHg"))
    n = -constants.GAS_CONSTANT_DRY_AIR * constants.LAPSE_RATE / constants.GRAVITY
    per_metre = -constants.LAPSE_RATE / constants.SEA_LEVEL_TEMPERATURE
    p0 = constants.SEA_LEVEL_PRESSURE
    station_pressure = (setting**n - p0**n * per_metre * field) ** (1.0 / n)
    computed = standard_pressure(altimeter_setting_to_pressure_altitude(field, setting))
    assert computed == pytest.approx(station_pressure, rel=1e-9)


@pytest.mark.parametrize(
    ("setting_inhg", "correction_ft"),
    [
        *((28.0, 1824.0), (28.5, 1340.0), (29.0, 863.0), (29.5, 392.0)),
        *((29.92, 0.0), (30.0, -73.0), (30.5, -531.0), (31.0, -983.0)),
    ],
)
def test_altimeter_setting_correction_meets_the_faa_table(
    setting_inhg: float, correction_ft: float
) -> None:
    """FAA-H-8083-25, density altitude chart, pressure altitude conversion factors; from memory.

    The table counts from 29.92 inHg, 1.2 ft from the standard 29.9213 inHg, and prints whole feet.
    """
    computed = altimeter_setting_to_pressure_altitude(0.0, from_unit(setting_inhg, "inHg"))
    assert to_unit(computed, "ft") == pytest.approx(correction_ft, abs=2.0)


# --- Shape, order and domain ---------------------------------------------------------------------


@given(altitude=st.floats(LOWEST_STANDARD_ALTITUDE, HIGHEST_STANDARD_ALTITUDE - 1.0))
def test_pressure_and_density_fall_with_altitude(altitude: float) -> None:
    """Also across the tropopause."""
    pair = np.array([altitude, altitude + 1.0])
    assert np.all(np.diff(standard_pressure(pair)) < 0.0)
    assert np.all(np.diff(density(standard_pressure(pair), standard_temperature(pair))) < 0.0)
    assert np.all(np.diff(standard_temperature(pair)) <= 0.0)


@given(altitude=st.floats(-1000.0, 12000.0), deviation=st.floats(-30.0, 29.0))
def test_warmer_air_has_a_higher_density_altitude(altitude: float, deviation: float) -> None:
    """The direction every pilot is taught."""
    temperature = standard_temperature(altitude) + np.array([deviation, deviation + 1.0])
    assert np.all(np.diff(density_altitude(standard_pressure(altitude), temperature)) > 0.0)


@given(rows=st.lists(st.tuples(altitudes, deviations), min_size=1, max_size=6))
def test_scalar_equals_array_element(rows: list[tuple[float, float]]) -> None:
    """A number does not depend on what else is computed in the same call."""
    altitude, deviation = (np.array(column) for column in zip(*rows, strict=True))
    temperature = standard_temperature(altitude) + deviation
    whole = density_altitude(standard_pressure(altitude), temperature)
    inverse = pressure_altitude_at_density_altitude(altitude, deviation)
    for k, (h, d) in enumerate(rows):
        one = density_altitude(standard_pressure(h), standard_temperature(h) + d)
        assert one == pytest.approx(whole[k], rel=1e-14, nan_ok=True)
        one = pressure_altitude_at_density_altitude(h, d)
        assert one == pytest.approx(inverse[k], rel=1e-13, abs=1e-8, nan_ok=True)


def test_arguments_broadcast_against_each_other() -> None:
    """A column of altitudes and a row of temperatures give a table."""
    pressure = standard_pressure(np.array([[0.0], [1000.0], [2000.0]]))
    temperature = np.array([260.0, 280.0])
    assert density(pressure, temperature, vapour_pressure=[0.0, 100.0]).shape == (3, 2)
    assert density_altitude(pressure, temperature).shape == (3, 2)
    assert pressure_altitude_at_density_altitude([[0.0], [1.0]], [0.0, 5.0, 9.0]).shape == (2, 3)


@pytest.mark.parametrize("altitude", [-5001.0, 20001.0, 1e9, -1e9, np.inf, -np.inf, np.nan])
def test_outside_the_range_there_is_no_number(altitude: float) -> None:
    """The two layers are never carried on above 20 km or below −5 km."""
    assert np.isnan(standard_temperature(altitude))
    assert np.isnan(standard_pressure(altitude))
    assert np.isnan(pressure_altitude_at_density_altitude(altitude, 0.0))
    assert np.isnan(altimeter_setting_to_pressure_altitude(altitude, 101325.0))


@pytest.mark.parametrize("pressure", [0.0, -1.0, 5e-324, 5400.0, 180000.0, np.inf, np.nan])
def test_pressure_outside_the_range_has_no_altitude(pressure: float) -> None:
    """5400 Pa lies above 20 km, 180 kPa below −5 km."""
    assert np.isnan(pressure_altitude(pressure))
    assert np.isnan(density_altitude(pressure, standard_temperature(0.0)))


def test_a_deviation_that_leaves_the_range_gives_no_number() -> None:
    """On a hot day the top of the range cannot be reached in density altitude."""
    assert np.isnan(pressure_altitude_at_density_altitude(-5000.0, 30.0))
    assert np.isnan(pressure_altitude_at_density_altitude(20000.0, -30.0))
    assert np.isnan(pressure_altitude_at_density_altitude(0.0, -250.0))
    assert np.isnan(pressure_altitude_at_density_altitude(0.0, np.nan))


@pytest.mark.parametrize(
    "value",
    [
        density(101325.0, 0.0),
        density(101325.0, -5.0),
        density(101325.0, np.nan),
        density(-1.0, 288.15),
        density(101325.0, 288.15, vapour_pressure=-1.0),
        density(101325.0, 288.15, vapour_pressure=101326.0),
        speed_of_sound(0.0),
        speed_of_sound(-1.0),
        saturation_vapour_pressure(122.0),
        saturation_vapour_pressure(333.0),
        vapour_pressure(-0.01, 288.15),
        vapour_pressure(1.01, 288.15),
        power_correction_factor(3000.0, 288.15, vapour_pressure=3000.0),
        power_correction_factor(101325.0, 0.0),
    ],
)
def test_impossible_air_has_no_number(value: float) -> None:
    """Neither a zero nor an error halfway through an array: NaN where the air cannot be."""
    assert np.isnan(value)
