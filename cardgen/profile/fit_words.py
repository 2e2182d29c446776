"""Fits in words: parameters, units and columns that look wrong."""

from __future__ import annotations

from typing import Final

import numpy as np

from cardgen.errors import Problem
from cardgen.fit.suspicion import Suspicion
from cardgen.units import Unit

_WORDS: Final = {
    "level": "engine power, over its rating",
    "friction_scale": "friction, over the standard line",
    "back_pressure_effect": "effect of back pressure",
    "charge_temperature_exponent": "power with temperature, exponent",
    "induction_loss": "induction loss at rated flow",
    "ram_recovery": "ram recovery",
    "installation_factor": "propeller installation factor",
    "zero_lift_drag": "drag coefficient without lift",
    "oswald_factor": "span efficiency",
}

_SUFFIX: Final = {
    "inHg": "inhg",
    "hPa": "hpa",
    "kPa": "kpa",
    "mmHg": "mmhg",
    "psi": "psi",
    "kt": "kt",
    "mph": "mph",
    "km/h": "kmh",
    "m/s": "mps",
    "gph": "gph",
    "l/h": "lph",
    "impgph": "impgph",
    "lb/h": "pph",
    "kg/h": "kgph",
    "degC": "c",
    "degF": "f",
    "hp": "hp",
    "kW": "kw",
}
_SIGN: Final = {
    "gph": "US gal/h",
    "impgph": "imperial gal/h",
    "l/h": "L/h",
    "degC": "°C",
    "degF": "°F",
}


def parameter_words(name: str) -> str:
    """Return a parameter in words.

    Parameters
    ----------
    name : str
        Its name [-]

    Returns
    -------
    str
        What it is [-]
    """
    kind, _, of = name.partition(":")
    if kind == "breathing":
        return f"breathing at {float(of):.0%} of rated rpm"
    if kind == "fuel_scale":
        return f"fuel flow, {of}"
    return _WORDS.get(name, name)


def suspicion_text(suspicion: Suspicion) -> str:
    """Return why a column is suspected.

    Parameters
    ----------
    suspicion : Suspicion
        The column [-]

    Returns
    -------
    str
        One clause [-]
    """
    reading = suspicion.reading
    named = sign_of(reading.unit)
    if suspicion.meant is None:
        return f"these numbers are not possible in {named}, nor in any other unit of the trade"
    meant = sign_of(suspicion.meant)
    if np.isinf(suspicion.gain):
        return f"the numbers look like {meant}: in {named} they are not possible"
    return (
        f"the numbers look like {meant}: read so they agree better with the other columns and "
        f"with aircraft of this kind than as {named}"
    )


def suspicion_problem(suspicion: Suspicion) -> Problem:
    """Return a suspected column as a problem of its file.

    Parameters
    ----------
    suspicion : Suspicion
        The column [-]

    Returns
    -------
    Problem
        At the column's name in the header [-]
    """
    reading = suspicion.reading
    if suspicion.meant is None:
        hint = "numbers in the unit of the column's name"
    else:
        stem = reading.column[: len(reading.column) - len(reading.column.rpartition("_")[2])]
        hint = f"a column {stem}{_SUFFIX[suspicion.meant.symbol]}"
    return Problem(
        reading.file,
        reading.line,
        reading.place,
        reading.column,
        suspicion_text(suspicion),
        f"{hint}, or --accept-suspect if the name is right after all",
    )


def sign_of(unit: Unit) -> str:
    """Return a unit as written in a sentence."""
    return _SIGN.get(unit.symbol, unit.symbol)
