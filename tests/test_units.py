"""Units against pint, and the reading of quantities that people write."""

from __future__ import annotations

import math
import pickle
from typing import get_args

import numpy as np
import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cardgen.errors import QuantityError, UsageError
from cardgen.units import (
    EXAMPLES,
    Dimension,
    Unit,
    find_unit,
    from_unit,
    known_units,
    parse_quantity,
    split_suffix,
    to_unit,
)

DIMENSIONS: tuple[Dimension, ...] = get_args(Dimension)

# SI unit (rpm for rotational speed) of each dimension, in pint's spelling.
PINT_BASE = {
    "length": "meter",
    "area": "meter**2",
    "volume": "meter**3",
    "speed": "meter/second",
    "time": "second",
    "angle": "radian",
    "rotational speed": "revolution/minute",
    "mass": "kilogram",
    "force": "newton",
    "pressure": "pascal",
    "temperature": "kelvin",
    "temperature difference": "delta_degC",
    "power": "watt",
    "energy": "joule",
    "density": "kilogram/meter**3",
    "volume flow": "meter**3/second",
    "mass flow": "kilogram/second",
    "specific energy": "joule/kilogram",
    "specific fuel consumption": "kilogram/joule",
    "fraction": "dimensionless",
}

# Our symbol in pint's spelling, where pint reads the symbol otherwise or not at all.
PINT_NAME = {
    "in": "inch",
    "nm": "nautical_mile",
    "sm": "mile",
    "m2": "meter**2",
    "cm2": "cm**2",
    "ft2": "foot**2",
    "in2": "inch**2",
    "m3": "meter**3",
    "l": "liter",
    "cm3": "cm**3",
    "in3": "inch**3",
    "ft3": "foot**3",
    "gal": "US_liquid_gallon",
    "qt": "US_liquid_quart",
    "impgal": "imperial_gallon",
    "kt": "knot",
    "mph": "mile/hour",
    "km/h": "kilometer/hour",
    "h": "hour",
    "deg": "degree",
    "rpm": "revolution/minute",
    "rev/s": "revolution/second",
    "t": "metric_ton",
    "lbf": "pound_force",
    "kgf": "kilogram_force",
    "inHg": "inch_Hg",
    "mmHg": "millimeter_Hg",
    "cmHg": "centimeter_Hg",
    "ata": "technical_atmosphere",
    "degR": "degree_Rankine",
    "hp": "horsepower",
    "PS": "metric_horsepower",
    "hph": "horsepower*hour",
    "kg/m3": "kg/meter**3",
    "kg/l": "kg/liter",
    "lb/gal": "pound/US_liquid_gallon",
    "lb/impgal": "pound/imperial_gallon",
    "lb/ft3": "pound/foot**3",
    "slug/ft3": "slug/foot**3",
    "m3/s": "meter**3/second",
    "gph": "US_liquid_gallon/hour",
    "l/h": "liter/hour",
    "l/min": "liter/minute",
    "impgph": "imperial_gallon/hour",
    "kg/h": "kg/hour",
    "lb/h": "pound/hour",
    "lb/min": "pound/minute",
    "lb/s": "pound/second",
    "g/s": "gram/second",
    "Btu/lb": "Btu_it/pound",
    "Btu": "Btu_it",
    "g/kWh": "gram/(kilowatt*hour)",
    "lb/hp/h": "pound/horsepower/hour",
    "%": "percent",
}
# A step in each scale of temperature, which pint keeps apart from the scale.
PINT_STEP = {"K": "kelvin", "degC": "delta_degC", "degF": "delta_degF", "degR": "degree_Rankine"}

ALL_UNITS = [unit for dimension in DIMENSIONS for unit in known_units(dimension)]


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    """Return pint's own definitions."""
    return pint.UnitRegistry()


@pytest.mark.parametrize("unit", ALL_UNITS, ids=lambda unit: f"{unit.dimension}: {unit.symbol}")
@pytest.mark.parametrize("number", [0.0, 1.0, 59.0])
def test_every_unit_agrees_with_pint(
    registry: pint.UnitRegistry, unit: Unit, number: float
) -> None:
    """Every factor and offset of the table is checked; a new unit without a reference fails."""
    names = PINT_STEP if unit.dimension == "temperature difference" else PINT_NAME
    quantity = registry.Quantity(number, names.get(unit.symbol, unit.symbol))
    expected = quantity.to(PINT_BASE[unit.dimension]).magnitude
    assert from_unit(number, unit) == pytest.approx(expected, rel=1e-12, abs=1e-12)


@pytest.mark.parametrize("unit", ALL_UNITS, ids=lambda unit: f"{unit.dimension}: {unit.symbol}")
def test_symbol_of_a_unit_finds_that_unit(unit: Unit) -> None:
    """What is printed can be read back."""
    assert find_unit(unit.symbol, dimension=unit.dimension) == unit


def test_only_steps_and_scales_of_temperature_share_a_symbol() -> None:
    """Without a dimension a symbol must not mean two things, whatever the case it is written in."""
    for unit in ALL_UNITS:
        if unit.dimension != "temperature difference":
            assert find_unit(unit.symbol) == unit
        else:
            assert find_unit(unit.symbol).dimension == "temperature"


@pytest.mark.parametrize(
    ("text", "dimension", "expected"),
    [
        ("24.5 inHg", "pressure", 24.5 * 3386.388640341),
        ("800hPa", "pressure", 80000.0),
        ("24.5 in Hg", "pressure", 24.5 * 3386.388640341),
        ("-4 degC", "temperature", 269.15),
        ("−4 degC", "temperature", 269.15),
        ("15 °C", "temperature", 288.15),
        ("15 ℃", "temperature", 288.15),
        ("59 degF", "temperature", 288.15),
        ("59 F", "temperature", 288.15),
        ("10 degF", "temperature difference", 50.0 / 9.0),
        ("-20 degC", "temperature difference", -20.0),
        ("75 %", "fraction", 0.75),
        ("6.0 lb/gal", "density", 718.9585639),
        ("1.2e3 kg", "mass", 1200.0),
        (".5 h", "time", 1800.0),
        ("14.5°", "angle", math.radians(14.5)),
        ("360 cu in", "volume", 360.0 * 0.0254**3),
        ("16.2 m²", "area", 16.2),
        ("2400 rpm", "rotational speed", 2400.0),
        ("\u00a076\u00a0in ", "length", 76.0 * 0.0254),
    ],
)
def test_quantity_is_read_in_si(text: str, dimension: Dimension, expected: float) -> None:
    """Spaces, case, the typographic minus and the degree sign are how people write quantities."""
    assert parse_quantity(text, dimension=dimension) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize(
    ("text", "dimension", "words"),
    [
        ("12 kg", "length", "12 kg is a mass; expected a length such as 76 in or 1.93 m"),
        ("59 F", "length", "59 F is a temperature; expected a length"),
        ("69 lb/h", "volume flow", "69 lb/h is a mass flow; expected a volume flow"),
        ("76", "length", "'76' has no unit; expected a length such as 76 in"),
        ("0.75", "fraction", "'0.75' has no unit; expected a percentage such as 75 %"),
        ("24 inHgg", "pressure", "unknown unit 'inHgg' (did you mean inHg?)"),
        ("165 knotts", "speed", "did you mean kt?"),
        ("1,200 kg", "mass", "separator within its number"),
        ("1 200 kg", "mass", "separator within its number"),
        ("1'200 kg", "mass", "separator within its number"),
        ("12_000 ft", "length", "separator within its number"),
        ("24,5 inHg", "pressure", "with a decimal point"),
        ("nan inHg", "pressure", "not a number with a unit"),
        ("inf kg", "mass", "not a number with a unit"),
        ("1e999 kg", "mass", "too large"),
        ("-300 degC", "temperature", "below absolute zero"),
        ("", "mass", "not a number with a unit"),
        ("kg", "mass", "not a number with a unit"),
        ("2*3 kg", "mass", "unknown unit"),
        ("٣ kg", "mass", "not a number with a unit"),
        ("20-25 inHg", "pressure", "unknown unit"),
    ],
)
def test_wrong_quantity_is_refused_saying_why(text: str, dimension: Dimension, words: str) -> None:
    """The message says what was found and what was expected; nothing is guessed or evaluated."""
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, dimension=dimension)
    assert words in str(caught.value)
    assert caught.value.expected.startswith(EXAMPLES[dimension])
    assert caught.value.found


def test_quantity_error_is_a_usage_error_that_survives_pickling() -> None:
    """Errors may cross a process boundary and must keep their fields."""
    error = pickle.loads(pickle.dumps(QuantityError("12 kg is a mass", "a length")))
    assert isinstance(error, UsageError)
    assert (error.found, error.expected) == ("12 kg is a mass", "a length")
    assert error.exit_code == 2


@pytest.mark.parametrize("dimension", DIMENSIONS)
def test_examples_in_messages_can_themselves_be_read(dimension: Dimension) -> None:
    """A message that recommends something the program refuses is worse than none."""
    _, _, examples = EXAMPLES[dimension].partition(" such as ")
    for example in examples.split(" or "):
        assert parse_quantity(example, dimension=dimension) > 0.0


@given(
    unit=st.sampled_from(ALL_UNITS),
    number=st.floats(-1e6, 1e6, allow_nan=False),
)
def test_number_survives_the_way_to_si_and_back(unit: Unit, number: float) -> None:
    """`to_unit` and `from_unit` are inverses, to rounding at the size of the offset."""
    back = to_unit(from_unit(number, unit), unit)
    assert back == pytest.approx(number, rel=1e-12, abs=1e-9)


@given(number=st.floats(-1e6, 1e6, allow_nan=False))
def test_text_reads_the_same_as_the_number(number: float) -> None:
    """Reading "x kt" gives exactly what `from_unit(x, "kt")` gives."""
    assert parse_quantity(f"{number!r} kt", dimension="speed") == from_unit(number, "kt")


def test_arrays_convert_element_by_element() -> None:
    """Arrays keep their shape, NaN stays NaN, and a scalar equals the array's element."""
    numbers = np.array([[20.0, np.nan], [24.5, 29.92]])
    pressures = from_unit(numbers, "inHg")
    assert pressures.shape == (2, 2)
    assert np.isnan(pressures[0, 1])
    assert pressures[1, 0] == from_unit(24.5, "inHg")


def test_temperature_difference_has_no_offset_in_arrays() -> None:
    """An ISA deviation of 10 °C is 10 K, not 283.15 K."""
    assert from_unit(10.0, "degC", dimension="temperature difference") == 10.0
    assert to_unit(10.0, "degF", dimension="temperature difference") == pytest.approx(18.0)
    assert from_unit(10.0, find_unit("degC"), dimension="temperature difference") == 10.0
    with pytest.raises(QuantityError, match="kg is a unit of mass"):
        from_unit(10.0, find_unit("kg"), dimension="length")


@pytest.mark.parametrize(
    ("column", "quantity", "symbol", "dimension"),
    [
        ("pressure_altitude_ft", "pressure_altitude", "ft", "length"),
        ("map_inhg", "map", "inHg", "pressure"),
        ("map_hpa", "map", "hPa", "pressure"),
        ("map_kpa", "map", "kPa", "pressure"),
        ("map_cmhg", "map", "cmHg", "pressure"),
        ("map_mmhg", "map", "mmHg", "pressure"),
        ("oat_c", "oat", "degC", "temperature"),
        ("oat_f", "oat", "degF", "temperature"),
        ("oat_k", "oat", "K", "temperature"),
        ("fuel_flow_gph", "fuel_flow", "gph", "volume flow"),
        ("fuel_flow_lph", "fuel_flow", "l/h", "volume flow"),
        ("fuel_flow_kgph", "fuel_flow", "kg/h", "mass flow"),
        ("fuel_flow_pph", "fuel_flow", "lb/h", "mass flow"),
        ("tas_kt", "tas", "kt", "speed"),
        ("tas_mph", "tas", "mph", "speed"),
        ("tas_kmh", "tas", "km/h", "speed"),
        ("tas_mps", "tas", "m/s", "speed"),
        ("power_hp", "power", "hp", "power"),
        ("power_kw", "power", "kW", "power"),
        ("power_ps", "power", "PS", "power"),
        ("weight_lb", "weight", "lb", "mass"),
        ("weight_kg", "weight", "kg", "mass"),
        ("blade_angle_deg", "blade_angle", "deg", "angle"),
        ("distance_nm", "distance", "nm", "length"),
        ("distance_sm", "distance", "sm", "length"),
        ("distance_km", "distance", "km", "length"),
        ("span_m", "span", "m", "length"),
        ("fuel_gal", "fuel", "gal", "volume"),
        ("fuel_l", "fuel", "l", "volume"),
        ("fuel_impgal", "fuel", "impgal", "volume"),
        ("slip_percent", "slip", "%", "fraction"),
    ],
)
def test_column_suffix_names_its_unit(
    column: str, quantity: str, symbol: str, dimension: Dimension
) -> None:
    """Mass flow and volume flow stay apart: only a fuel density turns one into the other."""
    assert split_suffix(column) == (quantity, find_unit(symbol, dimension=dimension))


@pytest.mark.parametrize("column", ["rpm", "mixture", "percent_power", "full_throttle", "ft", "_c"])
def test_name_without_a_suffix_stays_whole(column: str) -> None:
    """A name that merely looks like a unit is not split."""
    assert split_suffix(column) == (column, None)


def test_suffix_of_an_isa_deviation_is_a_difference_when_asked() -> None:
    """`isa_deviation_c` and `oat_c` share a suffix; the caller knows which is which."""
    name, unit = split_suffix("isa_deviation_c", dimension="temperature difference")
    assert name == "isa_deviation"
    assert unit == Unit("degC", "temperature difference", 1.0, 0.0)
    with pytest.raises(QuantityError, match="expected a pressure"):
        split_suffix("map_kt", dimension="pressure")
