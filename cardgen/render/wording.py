"""Every printed word and number of a card, so that page, screen and read-back say the same."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from typing import Final

from cardgen.errors import ReleaseError
from cardgen.profile.document import Identity, PartIdentity
from cardgen.tables.card import Card, CardTable, CellState, Section
from cardgen.tables.printed import in_second_units, places_of, unit_sign
from cardgen.units import to_unit

SUPPLEMENTARY: Final = "SUPPLEMENTARY. The approved flight manual, placards and markings govern."
DEMONSTRATION: Final = "DEMONSTRATION DATA, NOT FOR FLIGHT"
NOT_FITTED: Final = "NOT FITTED: PLANNING ESTIMATE ONLY"
DIGEST_DIGITS: Final = 12
ON_PAGE: Final = "on this page"
OF_ALL: Final = "of all tables"
"""What the tolerance printed on a page is the largest of: its own tables, or those of the card."""

FULL_THROTTLE: Final = "FT"
OUT_OF_REACH: Final = "\N{EM DASH}"
OUTSIDE_EVIDENCE: Final = "?"

sign = unit_sign

_ALTITUDE: Final = {
    "density": ("DA", "density altitude"),
    "pressure": ("PA", "pressure altitude"),
}


_MINUS: Final = re.compile(r"(?<![\w.)\]-])-(?=[0-9])")
_DEGREE: Final = re.compile(r"\bdeg([CF])\b")


def set_text(text: str) -> str:
    """Return words of ours as a printer would set them: a true minus, "°F" for "degF".

    Parameters
    ----------
    text : str
        A sentence [-]

    Returns
    -------
    str
        The same words [-]
    """
    return _MINUS.sub("\N{MINUS SIGN}", _DEGREE.sub(r"°\1", text))


def number(value: float, decimals: int = 0) -> str:
    """Return a number as printed.

    Parameters
    ----------
    value : float
        A number in the unit of the card, already rounded to the safe side [-]
    decimals : int
        Decimal places [-]

    Returns
    -------
    str
        Digits with a decimal point; a true minus sign, never a negative zero [-]

    Raises
    ------
    ReleaseError
        The value is not finite: a cell that holds no number must say so in its state.
    """
    if not math.isfinite(value):
        raise ReleaseError(f"a cell said to hold a value holds {value}; nothing was written")
    text = f"{value:.{decimals}f}"
    if float(text) == 0.0:
        text = text.removeprefix("-")
    return text.replace("-", "\N{MINUS SIGN}")


def altitude_label(card: Card) -> str:
    """Return the head of the altitude column, such as "DA ft"."""
    return f"{_ALTITUDE[card.choices.altitude_kind][0]} {sign(card.choices.units.altitude)}"


def shows_temperature(card: Card) -> bool:
    """Return whether rows carry an outside air temperature: those by pressure altitude do."""
    return card.choices.altitude_kind == "pressure"


def temperature_label(card: Card) -> str:
    """Return the head of the temperature column, such as "OAT °C"."""
    return f"OAT {sign(card.choices.units.temperature)}"


def deviation_name(card: Card, deviation: float) -> str:
    """Return the name of a temperature, such as "ISA +20 °C"."""
    if deviation == 0.0:
        return "ISA"
    plus = "+" if deviation > 0.0 else ""
    return f"ISA {plus}{number(deviation)} {sign(card.choices.units.temperature)}"


def cell_texts(card: Card, table: CardTable, at: tuple[int, int, int]) -> tuple[str, ...]:
    """Return what is printed in one cell, in reading order.

    Parameters
    ----------
    card : Card
        The card [-]
    table : CardTable
        One of its tables [-]
    at : tuple of int
        Altitude, temperature and rpm index [-]

    Returns
    -------
    tuple of str
        Pressure, fuel flow, speed and the full-throttle mark if any; or one mark [-]
    """
    state = CellState(int(table.state[at]))
    if state is CellState.FORBIDDEN:
        return (reason_letter(card, table, at),)
    if state is CellState.OUT_OF_REACH:
        return (OUT_OF_REACH,)
    if state is CellState.OUTSIDE_EVIDENCE:
        return (OUTSIDE_EVIDENCE,)
    pressure = number(float(table.manifold_pressure[at]), card.decimals.pressure)
    flow = number(float(table.fuel_flow[at]), card.decimals.fuel_flow)
    speed = number(float(table.true_airspeed[at]), card.decimals.speed)
    if state is CellState.FULL_THROTTLE:
        return pressure, flow, speed, full_throttle_mark(float(table.percent_power[at]))
    return pressure, flow, speed


def second_units(card: Card) -> tuple[str | None, str | None, str | None]:
    """Return the second units of pressure, fuel flow and speed."""
    second = card.choices.second_units
    return second.pressure, second.fuel_flow, second.speed


def second_numbers(
    card: Card, table: CardTable, at: tuple[int, int, int]
) -> tuple[float | None, float | None, float | None]:
    """Return the numbers of a cell in the second units, None where there is none."""
    shown = CellState(int(table.state[at])) <= CellState.FULL_THROTTLE
    if not shown or not any(second_units(card)):
        return None, None, None
    return in_second_units(
        float(table.manifold_pressure[at]),
        float(table.fuel_flow[at]),
        float(table.true_airspeed[at]),
        units=card.choices.units,
        second=card.choices.second_units,
    )


def second_texts(
    card: Card, table: CardTable, at: tuple[int, int, int]
) -> tuple[str | None, str | None, str | None]:
    """Return pressure, fuel flow and speed of a cell in the second units, as printed."""
    pressure, flow, speed = (
        None if value is None else number(value, places_of(unit or ""))
        for value, unit in zip(second_numbers(card, table, at), second_units(card), strict=True)
    )
    return pressure, flow, speed


def reason_letter(card: Card, table: CardTable, at: tuple[int, int, int]) -> str:
    """Return the letter of a forbidden cell."""
    index = int(table.reason[at])
    if not 0 <= index < len(card.reasons):
        raise ReleaseError("a forbidden cell names no reason; nothing was written")
    return card.reasons[index].letter


def full_throttle_mark(percent_power: float) -> str:
    """Return the mark of a full-throttle cell with the power it gives, rounded down [%]."""
    return f"{FULL_THROTTLE} {number(math.floor(percent_power + 1e-6))}%"


def percent(power_fraction: float) -> str:
    """Return an asked power such as "65 %"."""
    return f"{power_fraction * 100.0:.4g} %"


def mass_text(card: Card, mass: float) -> str:
    """Return a mass [kg] in the unit of the card."""
    unit = card.choices.units.mass
    return f"{number(float(to_unit(mass, unit, dimension='mass')))}\N{NO-BREAK SPACE}{sign(unit)}"


def basis_text(table: CardTable) -> str:
    """Return how the mixture is set."""
    return f"Mixture: {set_text(table.mixture_basis) or 'basis not stated'}"


def legend(card: Card, states: Iterable[tuple[CellState, int]]) -> tuple[tuple[str, str], ...]:
    """Return the marks that occur and what each means.

    Parameters
    ----------
    card : Card
        The card [-]
    states : iterable of (CellState, int)
        State and reason index of the cells on the page [-]

    Returns
    -------
    tuple of (str, str)
        Mark and meaning: forbidden letters first, then the others [-]
    """
    occurring = set(states)
    lines: list[tuple[str, str]] = []
    for index, reason in enumerate(card.reasons):
        if (CellState.FORBIDDEN, index) in occurring:
            source = f" Source: {reason.source}" if reason.source else " Source: not stated"
            text = set_text(reason.text[:1].upper() + reason.text[1:].rstrip("."))
            lines.append((reason.letter, f"Forbidden. {text}.{source}"))
    kinds = {state for state, _ in occurring}
    if CellState.FULL_THROTTLE in kinds:
        lines.append(
            (
                FULL_THROTTLE,
                "Full throttle; the power asked is out of reach, boxed is the power it gives.",
            )
        )
    if CellState.OUT_OF_REACH in kinds:
        lines.append((OUT_OF_REACH, "Out of reach: no level flight at this setting."))
    if CellState.OUTSIDE_EVIDENCE in kinds:
        lines.append(
            (OUTSIDE_EVIDENCE, "Outside the evidence: nothing measured or approved near it.")
        )
    return tuple(lines)


def stamps(card: Card, identity: Identity) -> tuple[str, ...]:
    """Return what is stamped on every page.

    Parameters
    ----------
    card : Card
        The card with the stamps it asks for [-]
    identity : Identity
        Whose card it is [-]

    Returns
    -------
    tuple of str
        Its stamps, and in any case that data are invented or a model was never fitted [-]
    """
    asked = card.stamps
    said = " ".join(asked).casefold()
    if identity.demo and "demonstration" not in said:
        asked = (DEMONSTRATION, *asked)
    if any(table.tolerance is None for table in card.tables) and "not fitted" not in said:
        asked = (*asked, NOT_FITTED)
    return asked


def part_text(kind: str, part: PartIdentity) -> str:
    """Return an engine or propeller with its serial number."""
    return f"{kind} {part.model} s/n {part.serial or 'not stated'}"


def configuration(identity: Identity) -> str:
    """Return the configuration the numbers belong to."""
    return f"{part_text('Engine', identity.engine)}; {part_text('propeller', identity.propeller)}"


def units_text(card: Card) -> str:
    """Return the units of every column in words."""
    units = card.choices.units
    short, long = _ALTITUDE[card.choices.altitude_kind]
    parts = [
        f"manifold pressure {sign(units.pressure)}",
        f"fuel flow {sign(units.fuel_flow)}",
        f"true airspeed {sign(units.speed)}",
        f"{long} ({short}) {sign(units.altitude)}",
    ]
    for k, unit in enumerate(second_units(card)):
        if unit is not None:
            parts[k] += f" (small {sign(unit)})"
    if shows_temperature(card):
        parts.append(f"outside air temperature (OAT) {sign(units.temperature)}")
    return "Units: " + ", ".join(parts)


def tolerance_text(card: Card, tables: Iterable[CardTable], *, where: str = ON_PAGE) -> str:
    """Return the largest 95 % tolerance of the tables, rounded up.

    Parameters
    ----------
    card : Card
        The card [-]
    tables : iterable of CardTable
        The tables it is the largest of [-]
    where : str
        What to call the place they stand in [-]

    Returns
    -------
    str
        The line printed [-]
    """
    stated = [table.tolerance for table in tables]
    known = [tolerance for tolerance in stated if tolerance is not None]
    if not known or len(known) < len(stated):
        return "Tolerance: not known (model not fitted)"
    units, decimals = card.choices.units, card.decimals
    largest = [max(column) for column in zip(*known, strict=True)]
    pieces = [
        f"±{number(step_up(value, places), places)} {sign(unit)}"
        for value, places, unit in zip(
            largest,
            (decimals.pressure, decimals.fuel_flow, decimals.speed),
            (units.pressure, units.fuel_flow, units.speed),
            strict=True,
        )
    ]
    # What other air does to a row by density altitude is told where the row is chosen.
    air = "; standard air" if card.choices.altitude_kind == "density" else ""
    return f"Tolerance (95 %, largest {where}): {', '.join(pieces)}{air}"


def step_up(value: float, decimals: int) -> float:
    """Return a value rounded up to a printed step.

    Parameters
    ----------
    value : float
        In the unit printed [-]
    decimals : int
        Decimal places [-]

    Returns
    -------
    float
        The next step not below it; 1e-9 keeps a value already rounded where it is [-]
    """
    step: float = 10.0**decimals
    return math.ceil(value * step - 1e-9) / step


def issue_text(identity: Identity, issue: int) -> str:
    """Return issue number and date."""
    return f"Issue {issue}, {identity.date}"


def page_text(page: int, pages: int) -> str:
    """Return the page number out of how many."""
    return f"page {page} of {pages}"


def continued_text(before: int | None, after: int | None) -> str:
    """Return which pages hold what comes before and after, "" where there is neither."""
    pieces = []
    if before is not None:
        pieces.append(f"Continued from page {before}.")
    if after is not None:
        pieces.append(f"Continued on page {after}.")
    return " ".join(pieces)


def digest_text(card: Card, issue: int, replaces: int | None) -> str:
    """Return the profile digest, and which issue this one voids."""
    void = f"; replaces issue {replaces}, which is void" if replaces is not None else ""
    return f"Profile {card.digest[:DIGEST_DIGITS]}, issue {issue}{void}"


def left_out_text(title: str) -> str:
    """Return what a card says of a chart that its paper has no room for."""
    return f"{title}: the chart does not fit this paper; it is in the card for the screen."


def note_sections(card: Card, identity: Identity) -> tuple[Section, ...]:
    """Return the sections of the limits-and-notes pages.

    Parameters
    ----------
    card : Card
        The card, whose own sections come first [-]
    identity : Identity
        Whose card it is [-]

    Returns
    -------
    tuple of Section
        Sections that have something to say [-]
    """
    tables: dict[tuple[str, str, float], list[str]] = {}
    for table in card.tables:
        powers = tables.setdefault((table.mixture, basis_text(table), table.mass), [])
        powers.append(percent(table.power_fraction))
    handbook = str(identity.handbook)
    aircraft = (
        f"Type {identity.aircraft_type}, s/n {identity.serial or 'not stated'}",
        *((f"Operator: {identity.operator}",) if identity.operator else ()),
        *(f"Approval: {approval}" for approval in identity.approvals),
        f"Approved flight manual: {handbook or 'not stated'}",
    )
    sections = (
        *(Section(one.title, tuple(map(set_text, one.lines))) for one in card.sections),
        Section("Notes", tuple(map(set_text, card.notes))),
        Section(
            "Tables of this card",
            tuple(
                f"{mixture}, {mass_text(card, mass)}: {', '.join(dict.fromkeys(powers))}. {basis}"
                for (mixture, basis, mass), powers in tables.items()
            ),
        ),
        Section("Aircraft", aircraft),
    )
    return tuple(section for section in sections if section.lines)
