"""The numbers of a card as CSV and JSON, digit for digit as printed."""

from __future__ import annotations

import csv
import hashlib
import json
from io import StringIO
from typing import Any, Final

from cardgen.render.beside import Listing, listings
from cardgen.render.edition import Edition
from cardgen.render.expectation import cells_of, state_of
from cardgen.render.wording import (
    SUPPLEMENTARY,
    cell_texts,
    mass_text,
    note_sections,
    number,
    reason_letter,
    shows_temperature,
    stamps,
    tolerance_text,
)
from cardgen.tables.back import Chart
from cardgen.tables.card import Card, CardTable, CellState
from cardgen.units import to_unit

_SUFFIXES: Final[dict[str, str]] = {
    "gal/h": "gph",
    "impgal/h": "impgph",
    "l/h": "lph",
    "kg/h": "kgph",
    "lb/h": "pph",
    "km/h": "kmh",
    "m/s": "mps",
    "degC": "c",
    "degF": "f",
}


def suffix(unit: str) -> str:
    """Return the suffix of a column in a unit, such as "gph".

    Parameters
    ----------
    unit : str
        Name of the unit [-]

    Returns
    -------
    str
        Suffix in lower case [-]
    """
    return _SUFFIXES.get(unit, unit.replace("/", "").casefold())


def card_rows(card: Card) -> list[dict[str, str]]:
    """Return one row per cell of every table, in reading order, all texts as printed.

    Parameters
    ----------
    card : Card
        The card [-]

    Returns
    -------
    list of dict
        Column name to text; "" where a cell has no number [-]
    """
    return [_row(card, table, at) for table in card.tables for at in cells_of(table)]


def _row(card: Card, table: CardTable, at: tuple[int, int, int]) -> dict[str, str]:
    units = card.choices.units
    state, _ = state_of(table, at)
    texts = cell_texts(card, table, at) if state <= CellState.FULL_THROTTLE else ("", "", "")
    row = {
        "mixture": table.mixture,
        "percent_asked": f"{100.0 * table.power_fraction:.6g}",
        f"mass_{suffix(units.mass)}": number(
            float(to_unit(table.mass, units.mass, dimension="mass"))
        ),
        f"{card.choices.altitude_kind}_altitude_{suffix(units.altitude)}": number(
            table.altitude[at[0]]
        ),
    }
    if shows_temperature(card):
        row[f"isa_deviation_{suffix(units.temperature)}"] = number(table.isa_deviation[at[1]])
        row[f"oat_{suffix(units.temperature)}"] = number(
            float(table.outside_air_temperature[at[0], at[1]])
        )
    row |= {
        "rpm": number(table.rpm[at[2]]),
        "state": state.name.casefold(),
        "reason": reason_letter(card, table, at) if state is CellState.FORBIDDEN else "",
        f"manifold_pressure_{suffix(units.pressure)}": texts[0],
        f"fuel_flow_{suffix(units.fuel_flow)}": texts[1],
        f"true_airspeed_{suffix(units.speed)}": texts[2],
        "percent_power": (
            number(float(table.percent_power[at]), 1) if state <= CellState.FULL_THROTTLE else ""
        ),
    }
    return {name: text.replace("\N{MINUS SIGN}", "-") for name, text in row.items()}


def content_digest(card: Card) -> str:
    """Return a digest of everything the card prints, whatever it was computed from.

    Parameters
    ----------
    card : Card
        The card [-]

    Returns
    -------
    str
        64 hexadecimal digits [-]
    """
    words = [
        card_rows(card),
        [[reason.letter, reason.text, reason.source] for reason in card.reasons],
        [[table.mixture_basis, table.tolerance] for table in card.tables],
        [card.percent_of, card.stamps, card.notes],
        [[section.title, section.lines] for section in card.sections],
        [_printed(listing) for listing in listings(card)],
        [_drawn(chart) for chart in card.back.charts],
    ]
    return hashlib.sha256(json.dumps(words, sort_keys=True).encode()).hexdigest()


def _printed(listing: Listing) -> dict[str, Any]:
    """Return a listing as printed."""
    heads = [f"{group.name} {head}" for group in listing.groups for head in group.heads]
    return {
        "title": listing.title,
        "lead": list(listing.lead),
        "heads": [listing.label, *heads],
        "rows": [[row.label, *(cell.printed for cell in row.cells)] for row in listing.rows],
        "marks": [list(mark) for mark in listing.marks],
    }


def _drawn(chart: Chart) -> list[Any]:
    """Return a chart as drawn, its places to a hundredth of a unit."""
    return [
        [chart.title, chart.lead, repr((chart.across, chart.up))],
        [
            [
                panel.name,
                [
                    [curve.kind, curve.label, [[round(x, 2), round(y, 2)] for x, y in curve.points]]
                    for curve in panel.curves
                ],
                [
                    [area.reason, [[round(x, 2), round(y, 2)] for x, y in sum(area.pieces, ())]]
                    for area in panel.areas
                ],
            ]
            for panel in chart.panels
        ],
    ]


def to_csv(edition: Edition) -> bytes:
    """Return the numbers as CSV; every row says whose, which issue, and from which profile.

    Parameters
    ----------
    edition : Edition
        What is being released [-]

    Returns
    -------
    bytes
        UTF-8 with a header line [-]
    """
    origin = {
        "registration": edition.identity.registration,
        "issue": str(edition.issue),
        "profile": edition.card.digest,
    }
    rows = [row | origin for row in card_rows(edition.card)]
    text = StringIO()
    writer = csv.DictWriter(text, fieldnames=list(rows[0]), lineterminator="\n")
    writer.writeheader()
    writer.writerows(rows)
    return text.getvalue().encode()


def to_json(edition: Edition) -> bytes:
    """Return the numbers as JSON together with everything that marks a card.

    Parameters
    ----------
    edition : Edition
        What is being released [-]

    Returns
    -------
    bytes
        UTF-8; numbers are numbers, cells without one are null [-]
    """
    card, identity = edition.card, edition.identity
    document = {
        "notice": SUPPLEMENTARY,
        "stamps": list(stamps(card, identity)),
        "registration": identity.registration,
        "aircraft_type": identity.aircraft_type,
        "engine": {"model": identity.engine.model, "serial": identity.engine.serial},
        "propeller": {"model": identity.propeller.model, "serial": identity.propeller.serial},
        "issue": edition.issue,
        "replaces": edition.replaces,
        "date": identity.date,
        "profile": card.digest,
        "percent_of": card.percent_of,
        "tables": [
            {
                "mixture": table.mixture,
                "mixture_basis": table.mixture_basis,
                "mass": mass_text(card, table.mass).replace("\N{NO-BREAK SPACE}", " "),
                "tolerance": tolerance_text(card, [table], where="in this table"),
                "cells": [_numbers(_row(card, table, at)) for at in cells_of(table)],
            }
            for table in card.tables
        ],
        "reasons": [
            {"letter": reason.letter, "text": reason.text, "source": reason.source}
            for reason in card.reasons
        ],
        "beside": [_printed(listing) for listing in listings(card)],
        "notes": [
            {"title": section.title, "lines": list(section.lines)}
            for section in note_sections(card, identity)
        ],
    }
    return (json.dumps(document, ensure_ascii=False, indent=1) + "\n").encode()


_WORDS: Final = frozenset({"mixture", "state", "reason"})


def _numbers(row: dict[str, str]) -> dict[str, Any]:
    """Return a row with numbers for texts, None where there is none."""
    return {
        name: (text or None) if name in _WORDS else (float(text) if text else None)
        for name, text in row.items()
    }
