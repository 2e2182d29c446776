"""Numbers on the command line: with a unit, or bare in the trade's."""

from __future__ import annotations

import functools
import math
import re
from collections.abc import Callable, Mapping
from typing import Final

import click

from cardgen.errors import CardgenError
from cardgen.units import Dimension, parse_quantity

MOST_VALUES: Final = 10_000
"""Most values that one option may stand for."""

# Beyond these nothing can be meant; what is only unusual is for the model and the limits to judge.
# Density altitude reaches lower than pressure altitude. Common practice, no source.
_POSSIBLE: Final[Mapping[Dimension, tuple[str, str]]] = {
    "pressure": ("1 inHg", "100 inHg"),
    "rotational speed": ("300 rpm", "8000 rpm"),
    "length": ("-15000 ft", "60000 ft"),
    "temperature": ("-93 degC", "67 degC"),
    "temperature difference": ("-100 degC", "100 degC"),
    "mass": ("200 lb", "60000 lb"),
    "fraction": ("1 %", "200 %"),
}

_BARE: Final = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")

PATH: Final = click.Path(path_type=str)


def quantity(
    dimension: Dimension, bare_unit: str
) -> Callable[[object, object, str | None], float | None]:
    """Return a click callback that reads one quantity.

    Parameters
    ----------
    dimension : str
        What is measured [-]
    bare_unit : str
        Unit of a number without one [-]

    Returns
    -------
    callable
        Callback giving SI, or None where the option is absent [-]
    """

    def read(_ctx: object, _param: object, text: str | None) -> float | None:
        if text is None:
            return None
        return _possible(_one(text, dimension, bare_unit), text, dimension)

    return read


def quantities(
    dimension: Dimension, bare_unit: str
) -> Callable[[object, object, str | None], tuple[float, ...] | None]:
    """Return a click callback that reads a comma list, or `from:to:step`.

    Parameters
    ----------
    dimension : str
        What is measured [-]
    bare_unit : str
        Unit of numbers without one [-]

    Returns
    -------
    callable
        Callback giving SI values, or None where the option is absent [-]
    """

    def read(_ctx: object, _param: object, text: str | None) -> tuple[float, ...] | None:
        if text is None:
            return None
        if ":" in text:
            values = _stepped(text, dimension, bare_unit)
            parts = [text] * len(values)
        else:
            parts = text.split(",")
            if len(parts) > MOST_VALUES:
                raise click.BadParameter(f"more than {MOST_VALUES} values")
            values = tuple(_one(part, dimension, bare_unit) for part in parts)
        for value, part in zip(values, parts, strict=True):
            _possible(value, part, dimension)
        return values

    return read


def _one(text: str, dimension: Dimension, bare_unit: str) -> float:
    """Read one quantity."""
    cleaned = text.strip()
    if _BARE.fullmatch(cleaned):
        cleaned = f"{cleaned} {bare_unit}"
    try:
        return parse_quantity(cleaned, dimension=dimension)
    except CardgenError as error:
        raise click.BadParameter(str(error)) from error


def _possible(value: float, text: str, dimension: Dimension) -> float:
    """Return a value that can be meant; refuse any other."""
    least, greatest = _bounds(dimension)
    if not least <= value <= greatest:
        expected = " to ".join(_POSSIBLE[dimension])
        raise click.BadParameter(f"{text!r} is not possible; expected {expected}")
    return value


@functools.cache
def _bounds(dimension: Dimension) -> tuple[float, float]:
    """Return what can be meant, in SI."""
    least, greatest = _POSSIBLE[dimension]
    return parse_quantity(least, dimension=dimension), parse_quantity(greatest, dimension=dimension)


def _stepped(text: str, dimension: Dimension, bare_unit: str) -> tuple[float, ...]:
    """Read `from:to:step`, both ends included."""
    parts = text.split(":")
    if len(parts) != 3:
        raise click.BadParameter(f"{text!r}; expected from:to:step, such as 0:16000:2000")
    first, last, step = (
        _one(part, _stepping(dimension, place), bare_unit) for place, part in enumerate(parts)
    )
    if step <= 0.0 or last < first:
        raise click.BadParameter(f"{text!r}; expected from below to, and a step above 0")
    count = math.floor((last - first) / step * (1.0 + 1e-12) + 1e-9) + 1
    if count > MOST_VALUES:
        raise click.BadParameter(f"{text!r} is {count} values; expected at most {MOST_VALUES}")
    return tuple(first + place * step for place in range(count))


def _stepping(dimension: Dimension, place: int) -> Dimension:
    """Dimension of a part of `from:to:step`: a step of temperature is a difference."""
    return "temperature difference" if dimension == "temperature" and place == 2 else dimension
