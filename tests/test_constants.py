"""Constants against scipy.constants (CODATA, NIST SP 811) and figures printed in standards."""

from __future__ import annotations

import pytest
from scipy import constants as reference

from cardgen import constants


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("GRAVITY", reference.g),
        ("SEA_LEVEL_PRESSURE", reference.atm),
        ("ZERO_CELSIUS", reference.zero_Celsius),
        ("INCH", reference.inch),
        ("FOOT", reference.foot),
        ("STATUTE_MILE", reference.mile),
        ("NAUTICAL_MILE", reference.nautical_mile),
        ("LITRE", reference.liter),
        ("GALLON_US", reference.gallon_US),
        ("GALLON_IMPERIAL", reference.gallon_imp),
        ("MINUTE", reference.minute),
        ("HOUR", reference.hour),
        ("KNOT", reference.knot),
        ("POUND", reference.pound),
        ("POUND_FORCE", reference.pound_force),
        ("SLUG", reference.slug),
        ("POUND_PER_SQUARE_INCH", reference.psi),
        ("HORSEPOWER", reference.horsepower),
        ("FAHRENHEIT_STEP", reference.degree_Fahrenheit),
        ("BRITISH_THERMAL_UNIT", reference.Btu_IT),
    ],
)
def test_constant_agrees_with_scipy(name: str, expected: float) -> None:
    """A definition typed in wrongly would shift every number by its error."""
    assert getattr(constants, name) == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize(
    ("name", "printed", "half_digit"),
    [
        # NIST SP 811 (2008) appendix B.8, printed to seven digits; from memory.
        ("INCH_OF_MERCURY", 3386.389, 0.0005),
        ("MILLIMETRE_OF_MERCURY", 133.3224, 0.00005),
        ("HORSEPOWER", 745.6999, 0.00005),
        ("METRIC_HORSEPOWER", 735.4988, 0.00005),
        # U.S. Standard Atmosphere 1976, tables I and IV; from memory.
        ("SEA_LEVEL_DENSITY", 1.2250, 0.00005),
        ("TROPOPAUSE_TEMPERATURE", 216.65, 0.005),
        # Ratio of molar masses as meteorological handbooks print it; from memory.
        ("WATER_VAPOUR_MOLAR_RATIO", 0.62198, 0.000005),
    ],
)
def test_computed_constant_rounds_to_the_printed_figure(
    name: str, printed: float, half_digit: float
) -> None:
    """A derived constant is computed, and must still round to what the standard prints."""
    assert getattr(constants, name) == pytest.approx(printed, rel=0.0, abs=half_digit)


def test_gas_constant_differs_from_iso_2533_by_less_than_a_millionth() -> None:
    """ISO 2533:1975 table 1 gives 287.05287 J/(kg K), from a molar mass in one more digit."""
    assert pytest.approx(287.05287, rel=1e-6) == constants.GAS_CONSTANT_DRY_AIR
