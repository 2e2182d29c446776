"""Units of measurement, dimension by dimension: reading, writing and column suffixes.

A unit is known only within its dimension: "10 degF" is 260.93 K as a temperature and 5.56 K as a
temperature difference, and "lb/h" is a mass flow, which no factor turns into a volume flow. Gallons
are US gallons unless called imperial. Values are SI, except that rotational speed is in rpm.
"""

from __future__ import annotations

import difflib
import math
import re
import unicodedata
from collections.abc import Iterable
from typing import Final, Literal

import numpy as np
import numpy.typing as npt

from cardgen import constants as c
from cardgen.errors import QuantityError
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]

Dimension = Literal[
    "length",
    "area",
    "volume",
    "speed",
    "time",
    "angle",
    "rotational speed",
    "mass",
    "force",
    "pressure",
    "temperature",
    "temperature difference",
    "power",
    "energy",
    "density",
    "volume flow",
    "mass flow",
    "specific energy",
    "specific fuel consumption",
    "fraction",
]


@dataclass(frozen=True, slots=True)
class Unit:
    """One unit of one dimension; SI value = number × factor + offset.

    Parameters
    ----------
    symbol : str
        How the unit is written out [-]
    dimension : Dimension
        What it measures [-]
    factor : float
        SI units in one of this unit [-]
    offset : float
        SI value of zero of this unit, other than 0 only for scales of temperature [-]
    """

    symbol: str
    dimension: Dimension
    factor: float
    offset: float = 0.0


EXAMPLES: Final[dict[Dimension, str]] = {
    "length": "a length such as 76 in or 1.93 m",
    "area": "an area such as 174 ft2 or 16.2 m2",
    "volume": "a volume such as 74 gal or 280 l",
    "speed": "a speed such as 165 kt or 85 m/s",
    "time": "a time such as 5 min or 1.5 h",
    "angle": "an angle such as 14.5 deg or 0.25 rad",
    "rotational speed": "a rotational speed such as 2400 rpm",
    "mass": "a mass such as 2650 lb or 1200 kg",
    "force": "a force such as 400 lbf or 1800 N",
    "pressure": "a pressure such as 24.5 inHg or 830 hPa",
    "temperature": "a temperature such as 15 degC or 59 degF",
    "temperature difference": "a temperature difference such as 10 degC or 18 degF",
    "power": "a power such as 200 hp or 150 kW",
    "energy": "an energy such as 43 MJ or 10 kWh",
    "density": "a density such as 6.0 lb/gal or 0.72 kg/l",
    "volume flow": "a volume flow such as 11.5 gph or 43.5 l/h",
    "mass flow": "a mass flow such as 69 lb/h or 31 kg/h",
    "specific energy": "a specific energy such as 43.5 MJ/kg or 18700 Btu/lb",
    "specific fuel consumption": "a specific fuel consumption such as 0.43 lb/hp/h or 260 g/kW/h",
    "fraction": "a percentage such as 75 %",
}
"""Each dimension with its article and two quantities, for error messages."""

_DEGREE = math.pi / 180.0
_FAHRENHEIT_ZERO = c.ZERO_CELSIUS - 32.0 * c.FAHRENHEIT_STEP  # 0 °F in kelvin
_HORSEPOWER_HOUR = c.HORSEPOWER * c.HOUR
_KILOWATT_HOUR = 1.0e3 * c.HOUR

# Per dimension: spellings (the first is the symbol), factor, offset. Case and inner spaces do not
# count when a unit is looked up, so "inhg" and "in Hg" need no line of their own.
_TABLE: Final[dict[Dimension, tuple[tuple[str, float, float], ...]]] = {
    "length": (
        ("m metre metres meter meters", 1.0, 0.0),
        ("mm", 1.0e-3, 0.0),
        ("cm", 1.0e-2, 0.0),
        ("km", 1.0e3, 0.0),
        ('in inch inches "', c.INCH, 0.0),
        ("ft foot feet '", c.FOOT, 0.0),
        ("nm nmi", c.NAUTICAL_MILE, 0.0),
        ("sm mi mile miles", c.STATUTE_MILE, 0.0),
    ),
    "area": (
        ("m2 m^2 sqm", 1.0, 0.0),
        ("cm2 cm^2", 1.0e-4, 0.0),
        ("ft2 ft^2 sqft", c.FOOT**2, 0.0),
        ("in2 in^2 sqin", c.INCH**2, 0.0),
    ),
    "volume": (
        ("m3 m^3", 1.0, 0.0),
        ("l litre litres liter liters", c.LITRE, 0.0),
        ("cm3 cm^3 cc ml", 1.0e-6, 0.0),
        ("in3 in^3 cuin", c.INCH**3, 0.0),
        ("ft3 ft^3 cuft", c.FOOT**3, 0.0),
        ("gal usgal gallon gallons", c.GALLON_US, 0.0),
        ("qt quart quarts", c.GALLON_US / 4.0, 0.0),
        ("impgal", c.GALLON_IMPERIAL, 0.0),
    ),
    "speed": (
        ("m/s mps", 1.0, 0.0),
        ("kt kts kn knot knots", c.KNOT, 0.0),
        ("mph mi/h", c.STATUTE_MILE / c.HOUR, 0.0),
        ("km/h kmh kph", 1.0e3 / c.HOUR, 0.0),
        ("ft/s fps", c.FOOT, 0.0),
        ("ft/min fpm", c.FOOT / c.MINUTE, 0.0),
    ),
    "time": (
        ("s sec second seconds", 1.0, 0.0),
        ("min minute minutes", c.MINUTE, 0.0),
        ("h hr hour hours", c.HOUR, 0.0),
    ),
    "angle": (
        ("rad", 1.0, 0.0),
        ("deg degree degrees", _DEGREE, 0.0),
    ),
    "rotational speed": (
        ("rpm rev/min 1/min", 1.0, 0.0),
        ("rev/s rps", 60.0, 0.0),
        ("rad/s", 30.0 / math.pi, 0.0),
    ),
    "mass": (
        ("kg", 1.0, 0.0),
        ("g", 1.0e-3, 0.0),
        ("t tonne tonnes", 1.0e3, 0.0),
        ("lb lbs lbm pound pounds", c.POUND, 0.0),
        ("oz", c.POUND / 16.0, 0.0),
        ("slug slugs", c.SLUG, 0.0),
    ),
    "force": (
        ("N", 1.0, 0.0),
        ("daN", 10.0, 0.0),
        ("lbf", c.POUND_FORCE, 0.0),
        ("kgf kp", c.GRAVITY, 0.0),
    ),
    "pressure": (
        ("Pa", 1.0, 0.0),
        ("hPa", 1.0e2, 0.0),
        ("kPa", 1.0e3, 0.0),
        ("mbar mb", 1.0e2, 0.0),
        ("bar", 1.0e5, 0.0),
        ('inHg "Hg', c.INCH_OF_MERCURY, 0.0),
        ("mmHg", c.MILLIMETRE_OF_MERCURY, 0.0),
        ("cmHg", 10.0 * c.MILLIMETRE_OF_MERCURY, 0.0),
        ("psi lbf/in2", c.POUND_PER_SQUARE_INCH, 0.0),
        ("atm", c.SEA_LEVEL_PRESSURE, 0.0),
        ("ata at", c.GRAVITY * 1.0e4, 0.0),
    ),
    "temperature": (
        ("K kelvin", 1.0, 0.0),
        ("degC C celsius", 1.0, c.ZERO_CELSIUS),
        ("degF F fahrenheit", c.FAHRENHEIT_STEP, _FAHRENHEIT_ZERO),
        ("degR rankine", c.FAHRENHEIT_STEP, 0.0),
    ),
    "temperature difference": (
        ("K kelvin", 1.0, 0.0),
        ("degC C celsius", 1.0, 0.0),
        ("degF F fahrenheit", c.FAHRENHEIT_STEP, 0.0),
        ("degR rankine", c.FAHRENHEIT_STEP, 0.0),
    ),
    "power": (
        ("W", 1.0, 0.0),
        ("kW", 1.0e3, 0.0),
        ("hp bhp", c.HORSEPOWER, 0.0),
        ("PS CV", c.METRIC_HORSEPOWER, 0.0),
    ),
    "energy": (
        ("J", 1.0, 0.0),
        ("kJ", 1.0e3, 0.0),
        ("MJ", 1.0e6, 0.0),
        ("kWh", _KILOWATT_HOUR, 0.0),
        ("hph", _HORSEPOWER_HOUR, 0.0),
        ("Btu", c.BRITISH_THERMAL_UNIT, 0.0),
    ),
    "density": (
        ("kg/m3 kg/m^3", 1.0, 0.0),
        ("kg/l g/cm3 g/cm^3 g/ml", 1.0e3, 0.0),
        ("lb/gal lb/usgal ppg", c.POUND / c.GALLON_US, 0.0),
        ("lb/impgal", c.POUND / c.GALLON_IMPERIAL, 0.0),
        ("lb/ft3 lb/ft^3", c.POUND / c.FOOT**3, 0.0),
        ("slug/ft3 slug/ft^3", c.SLUG / c.FOOT**3, 0.0),
    ),
    "volume flow": (
        ("m3/s m^3/s", 1.0, 0.0),
        ("gph gal/h gal/hr usgal/h usgph", c.GALLON_US / c.HOUR, 0.0),
        ("l/h l/hr lph", c.LITRE / c.HOUR, 0.0),
        ("l/min", c.LITRE / c.MINUTE, 0.0),
        ("impgph impgal/h impgal/hr", c.GALLON_IMPERIAL / c.HOUR, 0.0),
    ),
    "mass flow": (
        ("kg/s", 1.0, 0.0),
        ("g/s", 1.0e-3, 0.0),
        ("kg/h kg/hr kgph", 1.0 / c.HOUR, 0.0),
        ("lb/h lb/hr lbs/h lbs/hr pph", c.POUND / c.HOUR, 0.0),
        ("lb/min", c.POUND / c.MINUTE, 0.0),
        ("lb/s", c.POUND, 0.0),
    ),
    "specific energy": (
        ("J/kg", 1.0, 0.0),
        ("kJ/kg", 1.0e3, 0.0),
        ("MJ/kg", 1.0e6, 0.0),
        ("Btu/lb", c.BRITISH_THERMAL_UNIT / c.POUND, 0.0),
    ),
    "specific fuel consumption": (
        ("kg/J", 1.0, 0.0),
        ("g/kWh g/kW/h g/(kW.h)", 1.0e-3 / _KILOWATT_HOUR, 0.0),
        ("lb/hp/h lb/hp/hr lb/hph lb/bhp/h lb/bhp/hr lb/(hp.h)", c.POUND / _HORSEPOWER_HOUR, 0.0),
    ),
    "fraction": (("% percent pct", 0.01, 0.0),),
}


def _spellings() -> dict[str, dict[Dimension, Unit]]:
    """Return every spelling, folded, with the units it stands for, one per dimension."""
    spellings: dict[str, dict[Dimension, Unit]] = {}
    for dimension, rows in _TABLE.items():
        for names, factor, offset in rows:
            symbol, *_ = names.split()
            unit = Unit(symbol, dimension, factor, offset)
            for name in names.split():
                meanings = spellings.setdefault(name.casefold(), {})
                if dimension in meanings:
                    raise AssertionError(f"two units of {dimension} are spelt {name}")
                meanings[dimension] = unit
    return spellings


_UNITS: Final = _spellings()

# Spellings in the table above that may end a column or option name. Not all of them: a name such as
# `warm_up_at` must not be taken for a pressure. `rpm` is a name of its own, never a suffix.
_SUFFIXES: Final = frozenset(
    suffix
    for suffixes in (
        "m mm cm km in ft nm sm m2 ft2 m3 l gal impgal in3 cm3",
        "mps kt mph kmh fps fpm s min h rad deg kg lb n lbf",
        "pa hpa kpa mbar bar inhg mmhg cmhg psi k c f w kw hp ps",
        "gph lph impgph kgph pph percent",
    )
    for suffix in suffixes.split()
)

_QUANTITY: Final = re.compile(r"([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)(.*)")
_SAME_CHARACTER: Final = str.maketrans({"−": "-", "–": "-", "°": "deg", "º": "deg", "·": "."})


def _fold(spelling: str) -> str:
    """Return a spelling as it stands in the table: one form per character, no case, no spaces."""
    plain = unicodedata.normalize("NFKC", spelling.translate(_SAME_CHARACTER))
    plain = plain.translate(_SAME_CHARACTER)  # "℃" has just become "°C"
    return "".join(plain.split()).casefold()


def _suggest(spelling: str, known: Iterable[str]) -> str:
    """Return " (did you mean ...?)" for a misspelt unit, "" where nothing is near."""
    near = difflib.get_close_matches(spelling, list(known), n=1, cutoff=0.6)
    if not near:
        return ""
    unit = next(iter(_UNITS[near[0]].values()))
    return f" (did you mean {unit.symbol}?)"


def find_unit(spelling: str, *, dimension: Dimension | None = None) -> Unit:
    """Return the unit that a spelling stands for.

    Parameters
    ----------
    spelling : str
        Symbol or another spelling; case and spaces do not count [-]
    dimension : Dimension, optional
        What it must measure. Without it "degC" and the like are scales of temperature [-]

    Returns
    -------
    Unit
        The unit [-]

    Raises
    ------
    QuantityError
        The spelling is unknown or stands for another dimension only.
    """
    folded = _fold(spelling)
    meanings = _UNITS.get(folded)
    expected = EXAMPLES[dimension] if dimension else "a unit such as inHg, kt or degC"
    if meanings is None:
        of_dimension = [k for k, units in _UNITS.items() if dimension in units]
        hint = _suggest(folded, of_dimension) or _suggest(folded, _UNITS)
        raise QuantityError(f"unknown unit {spelling!r}{hint}", expected)
    if dimension is None:
        return next(iter(meanings.values()))
    if dimension not in meanings:
        other = next(iter(meanings))
        raise QuantityError(f"{spelling} is a unit of {other}", expected)
    return meanings[dimension]


def parse_quantity(text: str, *, dimension: Dimension) -> float:
    """Return the SI value of a number written with its unit.

    Parameters
    ----------
    text : str
        For example "24.5 inHg", "800hPa", "−4 °C" or "75 %"; no thousands separators [-]
    dimension : Dimension
        What the text must measure [-]

    Returns
    -------
    float
        The value; rotational speed in rpm, everything else in SI [SI]

    Raises
    ------
    QuantityError
        The text is not one finite number with a unit of that dimension.
    """
    expected = EXAMPLES[dimension]
    given = text.strip()
    plain = unicodedata.normalize("NFKC", given.translate(_SAME_CHARACTER)).strip()
    match = _QUANTITY.fullmatch(plain)
    if match is None:
        raise QuantityError(f"{given!r} is not a number with a unit", expected)
    number, spelling = match[1], match[2].strip()
    if not spelling:
        raise QuantityError(f"{given!r} has no unit", expected)
    if re.match(r"[0-9.,'_]+\s*[0-9]", spelling):
        raise QuantityError(
            f"{given!r} has a separator within its number", f"{expected}, with a decimal point"
        )
    unit = _unit_in(given, spelling, dimension)
    value = float(number) * unit.factor + unit.offset
    if not math.isfinite(value):
        raise QuantityError(f"{given!r} is too large a number", expected)
    if dimension == "temperature" and value < 0.0:
        raise QuantityError(f"{given!r} is below absolute zero", expected)
    return value


def _unit_in(given: str, spelling: str, dimension: Dimension) -> Unit:
    """Return the unit of a quantity, with the whole quantity in the message if it is wrong."""
    meanings = _UNITS.get(_fold(spelling))
    if meanings is not None and dimension not in meanings:
        article, _, _ = EXAMPLES[next(iter(meanings))].partition(" such as ")
        raise QuantityError(f"{given} is {article}", EXAMPLES[dimension])
    try:
        return find_unit(spelling, dimension=dimension)
    except QuantityError as error:
        raise QuantityError(f"{given!r} has an {error.found}", error.expected) from None


def _as_unit(unit: str | Unit, dimension: Dimension | None) -> Unit:
    """Return the unit itself, looked up where it is a spelling."""
    if isinstance(unit, str):
        return find_unit(unit, dimension=dimension)
    if dimension is not None and unit.dimension != dimension:
        return find_unit(unit.symbol, dimension=dimension)
    return unit


def from_unit(
    value: npt.ArrayLike, unit: str | Unit, *, dimension: Dimension | None = None
) -> FloatArray:
    """Return SI values of numbers given in a unit.

    Parameters
    ----------
    value : array_like
        Numbers in `unit` [unit]
    unit : str or Unit
        The unit or its spelling [-]
    dimension : Dimension, optional
        Needed for a difference of temperatures in "degC", "degF" [-]

    Returns
    -------
    ndarray
        The values, a numpy scalar for a scalar; rotational speed in rpm [SI]
    """
    found = _as_unit(unit, dimension)
    si: FloatArray = np.asarray(value, dtype=np.float64) * found.factor + found.offset
    return si


def to_unit(
    value: npt.ArrayLike, unit: str | Unit, *, dimension: Dimension | None = None
) -> FloatArray:
    """Return SI values as numbers in a unit; the inverse of `from_unit`.

    Parameters
    ----------
    value : array_like
        Values; rotational speed in rpm [SI]
    unit : str or Unit
        The unit or its spelling [-]
    dimension : Dimension, optional
        Needed for a difference of temperatures in "degC", "degF" [-]

    Returns
    -------
    ndarray
        The numbers, a numpy scalar for a scalar [unit]
    """
    found = _as_unit(unit, dimension)
    number: FloatArray = (np.asarray(value, dtype=np.float64) - found.offset) / found.factor
    return number


def split_suffix(name: str, *, dimension: Dimension | None = None) -> tuple[str, Unit | None]:
    """Return the quantity and the unit in a column or option name such as `fuel_flow_lph`.

    Parameters
    ----------
    name : str
        Name in lower case with underscores; `rpm` alone has no suffix [-]
    dimension : Dimension, optional
        What it must measure; needed for a difference of temperatures such as `isa_deviation_c` [-]

    Returns
    -------
    tuple of str and Unit
        Name without its suffix and the unit; the whole name and None without a known suffix [-]

    Raises
    ------
    QuantityError
        The suffix is a unit of another dimension than the one asked for.
    """
    quantity, _, suffix = name.rpartition("_")
    if not quantity or suffix.casefold() not in _SUFFIXES:
        return name, None
    return quantity, find_unit(suffix, dimension=dimension)


def known_units(dimension: Dimension) -> tuple[Unit, ...]:
    """Return all units of one dimension, the SI unit first.

    Parameters
    ----------
    dimension : Dimension
        What they measure [-]

    Returns
    -------
    tuple of Unit
        The units, in the order of the table [-]
    """
    units = (meanings[dimension] for meanings in _UNITS.values() if dimension in meanings)
    return tuple(dict.fromkeys(units))
