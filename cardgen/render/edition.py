"""What is being released: a card, whose it is, and which issue."""

from __future__ import annotations

import re
from typing import Final

import numpy as np

from cardgen.errors import ReleaseError
from cardgen.profile.document import Identity
from cardgen.records import dataclass
from cardgen.tables.card import Card, CardTable, CellState

_DIGEST: Final = re.compile(r"[0-9a-f]{64}")
_LETTER: Final = re.compile(r"[A-Za-z][A-Za-z0-9]{0,2}")
_GRIDS: Final = (
    "state",
    "reason",
    "manifold_pressure",
    "fuel_flow",
    "true_airspeed",
    "percent_power",
)


@dataclass(frozen=True, slots=True, eq=False)
class Edition:
    """One issue of one card; `replaces` is the issue it voids.

    A card that could not be told apart, or whose states and numbers contradict each other, is no
    edition. Compared and hashed by identity, because a card holds arrays: widths measured once
    for an edition are remembered while its pages are planned.
    """

    card: Card
    identity: Identity
    issue: int
    replaces: int | None = None

    def __post_init__(self) -> None:
        """Refuse a card that must not be printed."""
        for defect in _defects(self):
            raise ReleaseError(f"the card cannot be released: {defect}")


def _defects(edition: Edition) -> list[str]:
    """Return what is wrong with an edition."""
    card, identity = edition.card, edition.identity
    stated = {
        "registration": identity.registration,
        "date": identity.date,
        "engine model": identity.engine.model,
        "propeller model": identity.propeller.model,
        "what percent power is of": card.percent_of,
    }
    found = [f"it does not state the {name}" for name, text in stated.items() if not text.strip()]
    if not _DIGEST.fullmatch(card.digest):
        found.append("its profile digest is not 64 hexadecimal digits")
    if not card.tables:
        found.append("it has no table")
    letters = [reason.letter for reason in card.reasons]
    if len(set(letters)) < len(letters):
        found.append("two of its reasons share a letter")
    if not all(map(_LETTER.fullmatch, letters)):
        found.append("a reason is marked by something else than a letter")
    for table in card.tables:
        found += _table_defects(card, table)
    return found


def _table_defects(card: Card, table: CardTable) -> list[str]:
    name = f"table {100.0 * table.power_fraction:g} % {table.mixture}"
    shape = (len(table.altitude), len(table.isa_deviation), len(table.rpm))
    if 0 in shape:
        return [f"{name} is empty"]
    if any(getattr(table, grid).shape != shape for grid in _GRIDS):
        return [f"{name} has arrays of another shape than its altitudes, temperatures and rpm"]
    if table.outside_air_temperature.shape != shape[:2]:
        return [f"{name} has temperatures of another shape than its altitudes"]
    return [f"{name} has {defect}" for defect in _cell_defects(card, table)]


def _cell_defects(card: Card, table: CardTable) -> list[str]:
    """Return what is wrong with the cells of a table whose arrays have one shape."""
    found = []
    if not np.isin(table.state, [int(state) for state in CellState]).all():
        found.append("a cell in no known state")
    valued = table.state <= CellState.FULL_THROTTLE
    numbers = (table.manifold_pressure, table.fuel_flow, table.true_airspeed, table.percent_power)
    if not all(np.isfinite(array[valued]).all() for array in numbers):
        found.append("a cell said to hold a value that holds none")
    reasons = table.reason[table.state == CellState.FORBIDDEN]
    if ((reasons < 0) | (reasons >= len(card.reasons))).any():
        found.append("a forbidden cell without a reason")
    return found
