"""Physical constants and the exact definitions of trade units, in SI, each with its source.

Derived numbers are computed here, never typed in rounded.

References
----------
.. [1] ISO 2533:1975, "Standard Atmosphere", tables 1 and 2.
.. [2] NOAA, NASA, USAF, "U.S. Standard Atmosphere, 1976", tables 2 to 4.
.. [3] A. Thompson, B. N. Taylor, "Guide for the Use of the International System of Units",
   NIST Special Publication 811, 2008, appendix B.
.. [4] IAPWS, "Guideline on the Use of Fundamental Physical Constants and Basic Constants of Water",
   G5-01, 2016 (molar mass of water).
"""

from __future__ import annotations

from typing import Final

# --- Air and the standard atmosphere -----------------------------------------------------------

GRAVITY: Final = 9.80665
"""Standard acceleration of free fall, exact [m/s²]; ISO 2533 table 1."""

UNIVERSAL_GAS_CONSTANT: Final = 8.31432
"""Gas constant that defines the standard atmosphere [J/(mol K)]; U.S. Standard Atmosphere 1976,
table 2. Today's value is 20 ppm larger; changing it would shift every standard pressure."""

MOLAR_MASS_DRY_AIR: Final = 28.9644e-3
"""Molar mass of dry air at sea level [kg/mol]; U.S. Standard Atmosphere 1976, table 2."""

GAS_CONSTANT_DRY_AIR: Final = UNIVERSAL_GAS_CONSTANT / MOLAR_MASS_DRY_AIR
"""Specific gas constant of dry air, 287.05307 J/(kg K) [J/(kg K)]; from the two above.

ISO 2533 gives 287.05287, from a molar mass of 28.964420 g/mol. The two standards differ by 0.7 ppm
here and at most 1.3 ppm in pressure below 20 km; only the 1976 value meets the published 1976 table
to its last digit."""

HEAT_CAPACITY_RATIO: Final = 1.4
"""Ratio of the specific heats of air [-]; ISO 2533 table 1."""

SEA_LEVEL_PRESSURE: Final = 101325.0
"""Standard pressure at sea level [Pa]; ISO 2533 table 1."""

SEA_LEVEL_TEMPERATURE: Final = 288.15
"""Standard temperature at sea level [K]; ISO 2533 table 1."""

SEA_LEVEL_DENSITY: Final = SEA_LEVEL_PRESSURE / (GAS_CONSTANT_DRY_AIR * SEA_LEVEL_TEMPERATURE)
"""Standard density at sea level [kg/m³]; perfect gas."""

LAPSE_RATE: Final = -0.0065
"""Temperature gradient below the tropopause, per geopotential metre [K/m]; ISO 2533 table 2."""

TROPOPAUSE: Final = 11000.0
"""Geopotential altitude of the tropopause [m]; ISO 2533 table 2."""

TROPOPAUSE_TEMPERATURE: Final = SEA_LEVEL_TEMPERATURE + LAPSE_RATE * TROPOPAUSE
"""Standard temperature of the isothermal layer above the tropopause [K]; ISO 2533 table 2."""

LOWEST_STANDARD_ALTITUDE: Final = -5000.0
"""Lower end of the standard atmosphere used here [m]; U.S. Standard Atmosphere 1976, table I."""

HIGHEST_STANDARD_ALTITUDE: Final = 20000.0
"""Upper end of the isothermal layer, geopotential [m]; ISO 2533 table 2."""

MOLAR_MASS_WATER: Final = 18.015268e-3
"""Molar mass of water [kg/mol]; IAPWS G5-01."""

WATER_VAPOUR_MOLAR_RATIO: Final = MOLAR_MASS_WATER / MOLAR_MASS_DRY_AIR
"""Molar mass of water over that of dry air, 0.62198 [-]; from the two above."""

ZERO_CELSIUS: Final = 273.15
"""Thermodynamic temperature of 0 °C, exact [K]; NIST SP 811 B.1.2."""

# --- Length, area, volume -----------------------------------------------------------------------

INCH: Final = 0.0254
"""International inch, exact [m]; NIST SP 811 B.8."""

FOOT: Final = 0.3048
"""International foot of 12 inches, exact [m]; NIST SP 811 B.8."""

STATUTE_MILE: Final = 5280.0 * FOOT
"""Mile of 5280 international feet [m]; NIST SP 811 B.8."""

NAUTICAL_MILE: Final = 1852.0
"""International nautical mile, exact [m]; NIST SP 811 B.8."""

LITRE: Final = 1.0e-3
"""Litre, exact [m³]; NIST SP 811 B.8."""

GALLON_US: Final = 231.0 * INCH**3
"""US liquid gallon of 231 cubic inches [m³]; NIST SP 811 B.8."""

GALLON_IMPERIAL: Final = 4.54609e-3
"""Imperial gallon, exact [m³]; NIST SP 811 B.8."""

# --- Time and speed -----------------------------------------------------------------------------

MINUTE: Final = 60.0
"""Minute, exact [s]."""

HOUR: Final = 60.0 * MINUTE
"""Hour, exact [s]."""

KNOT: Final = NAUTICAL_MILE / HOUR
"""Nautical mile per hour [m/s]; NIST SP 811 B.8."""

# --- Mass, force, pressure ----------------------------------------------------------------------

POUND: Final = 0.45359237
"""Avoirdupois pound, exact [kg]; NIST SP 811 B.8."""

POUND_FORCE: Final = POUND * GRAVITY
"""Weight of one pound under standard gravity [N]; NIST SP 811 B.8."""

SLUG: Final = POUND_FORCE / FOOT
"""Mass that one pound-force accelerates by 1 ft/s² [kg]; NIST SP 811 B.8."""

POUND_PER_SQUARE_INCH: Final = POUND_FORCE / INCH**2
"""Pound-force per square inch [Pa]; NIST SP 811 B.8."""

MERCURY_DENSITY: Final = 13595.1
"""Conventional density of mercury at 0 °C, exact [kg/m³]; behind the "conventional" inch and
millimetre of mercury of NIST SP 811 B.8 (3386.389 Pa, 133.3224 Pa)."""

INCH_OF_MERCURY: Final = MERCURY_DENSITY * GRAVITY * INCH
"""Conventional inch of mercury, 0 °C, standard gravity, 3386.389 Pa [Pa]; NIST SP 811 B.8.

Not the inch at 60 °F (3376.85 Pa), which is 0.28 % smaller."""

MILLIMETRE_OF_MERCURY: Final = MERCURY_DENSITY * GRAVITY * 1.0e-3
"""Conventional millimetre of mercury, 0 °C, standard gravity [Pa]; NIST SP 811 B.8."""

# --- Power and energy ---------------------------------------------------------------------------

HORSEPOWER: Final = 550.0 * FOOT * POUND_FORCE
"""Mechanical horsepower of 550 ft lbf/s, 745.6999 W [W]; NIST SP 811 B.8."""

METRIC_HORSEPOWER: Final = 75.0 * GRAVITY
"""Metric horsepower of 75 m kgf/s, 735.4988 W [W]; NIST SP 811 B.8."""

FAHRENHEIT_STEP: Final = 5.0 / 9.0
"""One degree Fahrenheit or Rankine as a difference [K]; NIST SP 811 B.8."""

BRITISH_THERMAL_UNIT: Final = 4186.8 * POUND * FAHRENHEIT_STEP
"""British thermal unit, International Table, 1055.056 J [J]; NIST SP 811 B.8, from the
International Table calorie of 4.1868 J."""

# --- Engine test code ---------------------------------------------------------------------------

POWER_TEST_PRESSURE: Final = 29.92 * INCH_OF_MERCURY
"""Pressure of dry air that SAE J607 corrects power to [Pa]."""

POWER_TEST_TEMPERATURE: Final = ZERO_CELSIUS + (60.0 - 32.0) * FAHRENHEIT_STEP
"""Temperature that SAE J607 corrects power to, 60 °F [K]."""
