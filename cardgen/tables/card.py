"""The content of a card: printed numbers, cell states and reasons, before any page exists."""

from __future__ import annotations

from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

from cardgen.records import dataclass
from cardgen.tables.back import NOTHING_BESIDE, Back
from cardgen.tables.choices import CardChoices
from cardgen.tables.printed import Decimals


class CellState(IntEnum):
    """What a cell of a printed table is."""

    VALUE = 0
    FULL_THROTTLE = 1  # the asked power is out of reach; the power it gives is printed
    FORBIDDEN = 2  # breaks a limit: hatched, with a letter; never a number
    OUT_OF_REACH = 3  # no level flight or no solution at this setting
    OUTSIDE_EVIDENCE = 4  # the fit has nothing near it


@dataclass(frozen=True, slots=True)
class Reason:
    """One line of the legend: why cells with `letter` are forbidden, and who says so."""

    letter: str
    text: str
    source: str


@dataclass(frozen=True, slots=True)
class CardTable:
    """One table: one mixture, one asked power, one mass.

    Arrays have shape (altitudes, temperatures, rpm columns) and hold numbers in the units of the
    card, already rounded to the safe side: they are what is printed, digit for digit.
    """

    mixture: str
    mixture_basis: str
    power_fraction: float
    mass: float  # [kg]
    altitude: tuple[float, ...]  # in the card's unit
    isa_deviation: tuple[
        float, ...
    ]  # in the card's unit (differences); one entry, 0, by density altitude
    outside_air_temperature: NDArray[np.float64]  # (altitudes, temperatures) in the card's unit
    rpm: tuple[float, ...]  # as the tachometer reads
    state: NDArray[np.int8]
    reason: NDArray[np.int8]  # index into Card.reasons, -1 where none
    manifold_pressure: NDArray[np.float64]  # as the gauge reads
    fuel_flow: NDArray[np.float64]
    true_airspeed: NDArray[np.float64]
    percent_power: NDArray[np.float64]  # what the cell really gives
    tolerance: tuple[float, float, float] | None  # 95 %: pressure, fuel flow, speed; None unfitted


@dataclass(frozen=True, slots=True)
class Section:
    """A titled group of lines on the limits-and-notes page."""

    title: str
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Card:
    """Everything that a card says in numbers, and the words that belong to them."""

    choices: CardChoices
    decimals: Decimals
    tables: tuple[CardTable, ...]
    reasons: tuple[Reason, ...]
    percent_of: str  # "75 % is of Maximum continuous, 230 hp at 2600 rpm"
    stamps: tuple[
        str, ...
    ]  # "DEMONSTRATION DATA, NOT FOR FLIGHT", "Not fitted: planning estimate only"
    notes: tuple[str, ...]  # guard bands, temperature assumption and its largest error, ...
    digest: str  # 64 hex digits; the first 12 are printed
    sections: tuple[Section, ...] = ()  # limits in words with sources, gauges, evidence, cautions
    back: Back = NOTHING_BESIDE
