"""What a card shows: columns, rows, powers, mixtures, units, paper."""

from __future__ import annotations

from typing import Final, Literal

from cardgen.limits.kinds import Source
from cardgen.records import dataclass


@dataclass(frozen=True, slots=True)
class UnitSet:
    """Units a card is printed in, by the names of `cardgen.units`."""

    pressure: str = "inHg"
    fuel_flow: str = "gal/h"
    speed: str = "kt"
    temperature: str = "degC"
    altitude: str = "ft"
    mass: str = "lb"


@dataclass(frozen=True, slots=True)
class SecondUnits:
    """Units that numbers are printed in once more, in small type; None where in one unit only."""

    pressure: str | None = None
    fuel_flow: str | None = None
    speed: str | None = None


IN_ONE_UNIT: Final = SecondUnits()


@dataclass(frozen=True, slots=True)
class BreakIn:
    """Power band and ceiling that an operator keeps while a fresh engine is run in.

    Powers are shares of the percent rating; the ceiling [m] is of the kind of the card's rows.
    """

    least_power_fraction: float
    greatest_power_fraction: float
    greatest_altitude: float
    source: Source


@dataclass(frozen=True, slots=True)
class CardChoices:
    """What one aircraft's card shows; altitudes in m, temperatures in K, masses in kg."""

    rpm: tuple[float, ...]  # as the tachometer reads
    power_fraction: tuple[float, ...]
    altitude: tuple[float, ...]
    altitude_kind: Literal["density", "pressure"]
    isa_deviation: tuple[float, ...]  # temperature columns of a pressure-altitude card
    mass: tuple[float, ...]
    mixtures: tuple[str, ...]
    units: UnitSet = UnitSet()
    second_units: SecondUnits = IN_ONE_UNIT
    paper: str = "half-letter"
    relative_humidity: float = 0.0
    break_in: BreakIn | None = None  # powers and altitudes above are already narrowed to it
