"""The words and numbers of what stands beside the tables, as plain listings.

A listing is rows of a label and cells under grouped heads. Page, screen and read-back take the same
listing: a cell holds the text printed and the number that it must be.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Final

import numpy as np

from cardgen.records import dataclass
from cardgen.render.wording import (
    FULL_THROTTLE,
    OUT_OF_REACH,
    altitude_label,
    mass_text,
    number,
    percent,
    sign,
    step_up,
)
from cardgen.tables.back import BestSettings, BestTable, RangeTable, RowTable
from cardgen.tables.best import POWER_STEP, RPM_STEP, per_fuel_places
from cardgen.tables.card import Card
from cardgen.tables.range import DISTANCE_STEP, MINUTE_STEP, fuel_unit

AT_EDGE: Final = "*"
BREAKS: Final = "!"
_DISTANCES: Final = {"kt": "nm", "mph": "mi", "km/h": "km", "m/s": "km"}


@dataclass(frozen=True, slots=True)
class Cell:
    """What is printed, and the number it must be: minutes for "h:min", None for a mark alone.

    `mark` stands before the number in the same cell.
    """

    text: str
    value: float | None
    mark: str = ""

    @property
    def printed(self) -> str:
        """Mark and number as they stand on the page."""
        return f"{self.mark} {self.text}".strip()


@dataclass(frozen=True, slots=True)
class Group:
    """Neighbouring columns under one name; `strong` columns are settings and set largest."""

    name: str
    heads: tuple[str, ...]
    strong: tuple[bool, ...]


@dataclass(frozen=True, slots=True)
class ListingRow:
    """One row: its label, the number that is, and the cells of all groups in order."""

    label: str
    value: float
    cells: tuple[Cell, ...]


@dataclass(frozen=True, slots=True, eq=False)
class Listing:
    """A titled block of rows; `marks` says what each mark means.

    Compared and hashed by identity: widths measured once for a listing are remembered.
    """

    title: str
    lead: tuple[str, ...]
    label: str
    groups: tuple[Group, ...]
    rows: tuple[ListingRow, ...]
    marks: tuple[tuple[str, str], ...]
    large_heads: bool = False  # heads are numbers to look up, not units

    @property
    def columns(self) -> tuple[tuple[int, int], ...]:
        """Group and place within it of every column."""
        return tuple((g, k) for g, group in enumerate(self.groups) for k in range(len(group.heads)))


def distance_sign(card: Card) -> str:
    """Return the unit of distance that goes with the card's unit of speed."""
    return _DISTANCES[card.choices.units.speed]


def listings(card: Card) -> tuple[Listing, ...]:
    """Return every listing of a card in the order they are printed.

    Parameters
    ----------
    card : Card
        The card [-]

    Returns
    -------
    tuple of Listing
        Row to use, range, best settings; none where the card has nothing beside its tables [-]
    """
    back = card.back
    return (
        *((_rows(card, back.rows),) if back.rows is not None else ()),
        *(_range(card, table) for table in back.ranges),
        *(
            _best(card, [table for table in back.best if table.mass == mass])
            for mass in dict.fromkeys(table.mass for table in back.best)
        ),
    )


def _cell(value: float, decimals: int = 0, *, mark: str = "") -> Cell:
    """Return a number, or the mark of none."""
    if not math.isfinite(value):
        return Cell(OUT_OF_REACH, None)
    return Cell(number(value, decimals), value, mark)


def _signed(value: float, decimals: int) -> Cell:
    """Return a number to add, with its sign, or the mark of none."""
    cell = _cell(value, decimals)
    return Cell(f"+{cell.text}", value) if value > 0.0 else cell


def _hours(minutes: float, *, mark: str = "") -> Cell:
    """Return a time in hours and minutes, or the mark of none."""
    if not math.isfinite(minutes):
        return Cell(OUT_OF_REACH, None)
    hours, rest = divmod(round(minutes), 60)
    return Cell(f"{hours}:{rest:02d}", minutes, mark)


def _rows(card: Card, table: RowTable) -> Listing:
    units, places = card.choices.units, card.decimals.pressure
    degrees = sign(units.temperature)
    pressure, flow, speed = _amounts(card, table.error)
    lead = [
        "At the nearest pressure altitude (PA) and air temperature: the row to use "
        f"({altitude_label(card)}), and what to add to its manifold pressure.",
        f"Still wrong then: at most {pressure}, {flow}, {speed}. {FULL_THROTTLE} numbers hold in "
        "standard air only.",
    ]
    if table.rise:
        lead.append(
            "The temperature is true: in cruise this thermometer reads up to "
            f"{number(math.ceil(table.rise))} {degrees} more."
        )
    return Listing(
        title="Which row, and what to add to it",
        lead=tuple(lead),
        label=f"PA {sign(units.altitude)}",
        groups=tuple(
            Group(
                f"{number(value)} {degrees}",
                (altitude_label(card).split()[0], sign(units.pressure)),
                (False, False),
            )
            for value in table.temperature
        ),
        rows=tuple(
            ListingRow(
                number(altitude),
                altitude,
                tuple(
                    cell
                    for row, change, breaks in zip(
                        table.row[k], table.change[k], table.breaks[k], strict=True
                    )
                    for cell in (
                        _cell(float(row), mark=BREAKS if breaks else ""),
                        _signed(float(change), places),
                    )
                ),
            )
            for k, altitude in enumerate(table.pressure_altitude)
        ),
        marks=(
            (OUT_OF_REACH, "No row of this card is near, or it holds no part-throttle number."),
            (BREAKS, _breaking(table)),
        ),
    )


def _breaking(table: RowTable) -> str:
    """Return which settings break a limit once they are changed."""
    groups: dict[str, list[str]] = {}
    for power, mixture, rpm in table.breaking:
        groups.setdefault(f"{percent(power)} {mixture} at", []).append(number(rpm))
    named = "; ".join(f"{name} {', '.join(speeds)} rpm" for name, speeds in groups.items())
    return f"There a setting of that row breaks a limit: {named}. Choose another."


def _wind(value: float) -> str:
    """Return the head of a range column."""
    if value == 0.0:
        return "still"
    return f"{'head' if value > 0.0 else 'tail'} {number(abs(value))}"


def _range(card: Card, table: RangeTable) -> Listing:
    units = card.choices.units
    fuel, distance = sign(fuel_unit(units.fuel_flow)), distance_sign(card)
    places = 1 if "gal" in fuel else 0

    def amount(value: float) -> str:
        text = number(value, places)
        return f"{text.removesuffix('.0')} {fuel}"

    step = f"{number(MINUTE_STEP)} min, {number(DISTANCE_STEP)} {distance}"
    if table.tolerance is None:
        tolerance = "Tolerance: not known (model not fitted)."
    else:
        minutes = MINUTE_STEP * math.ceil(table.tolerance[0] / MINUTE_STEP)
        reach = DISTANCE_STEP * math.ceil(table.tolerance[1] / DISTANCE_STEP)
        tolerance = f"95 % tolerance ±{_hours(minutes).text} h, ±{number(reach)} {distance}."
    groups = tuple(
        Group(
            percent(power),
            ("h:min", *(_wind(wind) for wind in table.wind)),
            (False,) * (1 + len(table.wind)),
        )
        for power in table.power_fraction
    )
    rows = tuple(
        ListingRow(
            number(altitude),
            altitude,
            tuple(
                cell
                for j in range(len(table.power_fraction))
                for cell in (
                    _hours(
                        float(table.minutes[i, j]),
                        mark=FULL_THROTTLE if table.full_throttle[i, j] else "",
                    ),
                    *(_cell(float(value)) for value in table.distance[i, j]),
                )
            ),
        )
        for i, altitude in enumerate(table.altitude)
    )
    return Listing(
        title=f"Range and endurance, {table.mixture}, {mass_text(card, table.mass)}",
        lead=(
            f"On {amount(table.usable - table.reserve)}: usable {amount(table.usable)} less "
            f"reserve {amount(table.reserve)}. Not included: start, taxi, climb, approach.",
            f"{distance}, wind {sign(units.speed)}; least of the rpm columns, down to {step}. "
            f"{tolerance}",
        ),
        label=altitude_label(card),
        groups=groups,
        rows=rows,
        marks=(
            (FULL_THROTTLE, "Full throttle at every rpm: the power asked is out of reach."),
            (OUT_OF_REACH, "No setting allowed or within reach, or wind not outrun."),
        ),
    )


def _best(card: Card, tables: Sequence[BestTable]) -> Listing:
    """Return the best settings of one mass, mixtures side by side."""
    units, mass = card.choices.units, tables[0].mass
    per = f"{distance_sign(card)}/{sign(fuel_unit(units.fuel_flow))}"
    heads = ("rpm", sign(units.pressure), sign(units.fuel_flow), sign(units.speed))
    groups: list[Group] = []
    shown: list[BestSettings] = []
    for table in tables:
        names = {"range": "farthest", "endurance": "longest"}
        settings = table.settings
        if _one_and_the_same(settings):
            settings, names["range"] = settings[:1], "farthest and longest"
        for one in settings:
            ranged = one.aim == "range"
            groups.append(
                Group(
                    f"{table.mixture}: {names[one.aim]}",
                    (*heads, per) if ranged else heads,
                    (True, True, False, False, False)[: len(heads) + ranged],
                )
            )
            shown.append(one)
    rows = tuple(
        ListingRow(
            number(altitude),
            altitude,
            tuple(cell for one in shown for cell in _best_cells(card, one, i)),
        )
        for i, altitude in enumerate(tables[0].altitude)
    )
    return Listing(
        title=f"Best settings, {mass_text(card, mass)}",
        lead=(
            f"Of all settings within limits and evidence, {number(RPM_STEP)} rpm and "
            f"{number(100.0 * POWER_STEP)} % apart: farthest and longest on the fuel, in still air "
            "of standard temperature.",
            _tolerance(card, shown),
        ),
        label=altitude_label(card),
        groups=tuple(groups),
        rows=rows,
        marks=(
            (
                AT_EDGE,
                "Less power would break a limit, leave the evidence or is not searched; it may do "
                "better.",
            ),
            (OUT_OF_REACH, "No setting searched is allowed."),
        ),
    )


def _tolerance(card: Card, settings: Sequence[BestSettings]) -> str:
    """Return the largest tolerance of some settings in words."""
    if any(table.tolerance is None for table in card.tables):
        return "Tolerance: not known (model not fitted)."
    largest = [max(column) for column in zip(*(one.tolerance for one in settings), strict=True)]
    return f"95 % tolerance ±{', ±'.join(_amounts(card, largest))}."


def _amounts(card: Card, values: Sequence[float]) -> list[str]:
    """Return pressure, fuel flow and speed, rounded up, with their units."""
    units, places = card.choices.units, card.decimals
    return [
        f"{number(step_up(value, count), count)} {sign(unit)}"
        for value, count, unit in zip(
            values,
            (places.pressure, places.fuel_flow, places.speed),
            (units.pressure, units.fuel_flow, units.speed),
            strict=True,
        )
    ]


def _one_and_the_same(settings: Sequence[BestSettings]) -> bool:
    """Return whether one setting is best for both aims in every row."""
    first, *others = settings
    return all(
        np.array_equal(getattr(first, name), getattr(other, name), equal_nan=True)
        for other in others
        for name in ("rpm", "manifold_pressure", "fuel_flow", "true_airspeed", "at_edge")
    )


def _best_cells(card: Card, settings: BestSettings, i: int) -> tuple[Cell, ...]:
    places = card.decimals
    edge = AT_EDGE if settings.at_edge[i] else ""
    cells = (
        _cell(float(settings.rpm[i]), mark=edge),
        _cell(float(settings.manifold_pressure[i]), places.pressure),
        _cell(float(settings.fuel_flow[i]), places.fuel_flow),
        _cell(float(settings.true_airspeed[i]), places.speed),
    )
    if settings.aim != "range":
        return cells
    per = per_fuel_places(card.choices.units.fuel_flow)
    return (*cells, _cell(float(settings.distance_per_fuel[i]), per))


def marks_of(listing: Listing, cells: Sequence[Cell]) -> tuple[tuple[str, str], ...]:
    """Return the marks that occur in some cells of a listing and what each means.

    Parameters
    ----------
    listing : Listing
        The listing [-]
    cells : sequence of Cell
        Cells of it [-]

    Returns
    -------
    tuple of (str, str)
        Mark and meaning [-]
    """
    found = {cell.mark or cell.text for cell in cells if cell.mark or cell.value is None}
    return tuple((mark, meaning) for mark, meaning in listing.marks if mark in found)
