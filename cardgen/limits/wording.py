"""Readings and margins in plain words, rounded so that no room looks larger than it is."""

from __future__ import annotations

import math
from typing import Literal, assert_never

from cardgen.limits.judge import SLACK
from cardgen.records import dataclass
from cardgen.units import Dimension, to_unit

Measure = Literal[
    "rpm", "pressure", "speed", "altitude", "temperature", "temperature step", "power", "share"
]


@dataclass(frozen=True, slots=True)
class MessageUnits:
    """Units that messages are written in, by the names of `cardgen.units`."""

    pressure: str = "inHg"
    speed: str = "kt"
    altitude: str = "ft"
    temperature: str = "degC"
    power: str = "hp"


_DECIMALS = {"inHg": 1, "psi": 1, "kPa": 1, "m/s": 1, "%": 1}
_PRINTED = {"degC": "°C", "degF": "°F"}


def unit_of(measure: Measure, units: MessageUnits) -> str:
    """Return the unit that a measure is written in.

    Parameters
    ----------
    measure : str
        What is measured [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    str
        Symbol known to `cardgen.units` [-]
    """
    match measure:
        case "rpm":
            return "rpm"
        case "share":
            return "%"
        case "temperature step":
            return units.temperature
        case "pressure" | "speed" | "altitude" | "temperature" | "power":
            return str(getattr(units, measure))
        case _:
            assert_never(measure)


def in_unit(value: float, measure: Measure, *, units: MessageUnits) -> float:
    """Return a value in the unit that messages give it in.

    Parameters
    ----------
    value : float
        The value [SI]
    measure : str
        What is measured [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    float
        The value [unit of the message]
    """
    dimension: Dimension | None = (
        "temperature difference" if measure == "temperature step" else None
    )
    if measure == "share":
        return 100.0 * value
    return float(to_unit(value, unit_of(measure, units), dimension=dimension))


def number(value: float, measure: Measure, *, units: MessageUnits) -> str:
    """Return a value as text without its unit.

    Parameters
    ----------
    value : float
        The value [SI]
    measure : str
        What is measured [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    str
        Number, rounded as it is read [-]
    """
    decimals = _DECIMALS.get(unit_of(measure, units), 0)
    rounded = round(in_unit(value, measure, units=units), decimals) + 0.0  # no "-0"
    return f"{rounded:.{decimals}f}"


def amount(value: float, measure: Measure, *, units: MessageUnits) -> str:
    """Return a value as text with its unit.

    Parameters
    ----------
    value : float
        The value [SI]
    measure : str
        What is measured [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    str
        Number and unit [-]
    """
    unit = unit_of(measure, units)
    return f"{number(value, measure, units=units)} {_PRINTED.get(unit, unit)}"


def spread(least: float, greatest: float, measure: Measure, *, units: MessageUnits) -> str:
    """Return a range as text with its unit.

    Parameters
    ----------
    least, greatest : float
        Its ends [SI]
    measure : str
        What is measured [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    str
        Such as "2400 to 2600 rpm" [-]
    """
    return f"{number(least, measure, units=units)} to {amount(greatest, measure, units=units)}"


def distance(margin: float, measure: Measure, *, units: MessageUnits, scale: float = 1.0) -> str:
    """Return the size of a margin in words, never larger than the room nor smaller than the excess.

    Parameters
    ----------
    margin : float
        Room left, negative where exceeded [SI]
    measure : str
        What is measured [-]
    units : MessageUnits
        The units of the message [-]
    scale : float
        Size of the limit itself: what differs from it by less than rounding is on it [SI]

    Returns
    -------
    str
        Number and unit, "less than" one step of it, or "" on the limit [-]
    """
    if abs(margin) <= SLACK * abs(scale):
        return ""
    unit = unit_of(measure, units)
    decimals = _DECIMALS.get(unit, 0)
    steps = abs(in_unit(margin, measure, units=units)) * 10.0**decimals
    whole = math.floor(steps + 1e-6) if margin > 0.0 else math.ceil(steps - 1e-6)
    symbol = _PRINTED.get(unit, unit)
    if whole == 0:
        return f"less than {10.0**-decimals:.{decimals}f} {symbol}"
    return f"{whole / 10.0**decimals:.{decimals}f} {symbol}"


def below(margin: float, measure: Measure, limit: str, *, units: MessageUnits, scale: float) -> str:
    """Return where a value lies against a greatest value, such as "0.6 inHg below the curve".

    Parameters
    ----------
    margin : float
        Room left, negative where exceeded [SI]
    measure : str
        What is measured [-]
    limit : str
        What the limit is called in the sentence [-]
    units : MessageUnits
        The units of the message [-]
    scale : float
        The greatest value [SI]

    Returns
    -------
    str
        Part of a sentence [-]
    """
    size = distance(margin, measure, units=units, scale=scale)
    return f"{size} {'below' if margin > 0.0 else 'above'} {limit}" if size else f"on {limit}"


def above(margin: float, measure: Measure, limit: str, *, units: MessageUnits, scale: float) -> str:
    """Return where a value lies against a least value, such as "40 rpm above the least rpm".

    Parameters
    ----------
    margin : float
        Room left, negative where fallen short of [SI]
    measure : str
        What is measured [-]
    limit : str
        What the limit is called in the sentence [-]
    units : MessageUnits
        The units of the message [-]
    scale : float
        The least value [SI]

    Returns
    -------
    str
        Part of a sentence [-]
    """
    size = distance(margin, measure, units=units, scale=scale)
    return f"{size} {'above' if margin > 0.0 else 'below'} {limit}" if size else f"on {limit}"


def reading(
    indicated: float, low: float, high: float, *, measure: Measure, units: MessageUnits
) -> str:
    """Return a gauge reading and what it may stand for.

    Parameters
    ----------
    indicated : float
        What the gauge reads [SI]
    low, high : float
        Least and greatest true value [SI]
    measure : str
        What is measured [-]
    units : MessageUnits
        The units of the message [-]

    Returns
    -------
    str
        Such as "2360 rpm indicated may be 2310 to 2410 true" [-]
    """
    shown = amount(indicated, measure, units=units)
    least, most = number(low, measure, units=units), number(high, measure, units=units)
    if least != most:
        return f"{shown} indicated may be {least} to {most} true"
    if least != number(indicated, measure, units=units):
        return f"{shown} indicated is {least} true"
    return shown
