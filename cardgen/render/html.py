"""The card on a screen: one file without a network, the same tables and the same marking."""

from __future__ import annotations

from functools import cache
from html import escape
from pathlib import Path
from typing import Final

from cardgen.render.edition import Edition
from cardgen.render.expectation import cells_of, state_of
from cardgen.render.html_beside import chart_figures, listing_tables
from cardgen.render.packaged import packaged
from cardgen.render.wording import (
    FULL_THROTTLE,
    SUPPLEMENTARY,
    altitude_label,
    basis_text,
    cell_texts,
    configuration,
    deviation_name,
    digest_text,
    issue_text,
    legend,
    mass_text,
    note_sections,
    number,
    percent,
    second_texts,
    second_units,
    shows_temperature,
    sign,
    stamps,
    temperature_label,
    tolerance_text,
    units_text,
)
from cardgen.tables.card import Card, CardTable, CellState

WHERE: Final = "in this file"
_POLICY: Final = (
    "default-src 'none'; style-src 'unsafe-inline'; script-src 'unsafe-inline'; base-uri 'none';"
    " form-action 'none'"
)
_CLASSES: Final = {
    CellState.FORBIDDEN: "forbidden",
    CellState.OUT_OF_REACH: "out",
    CellState.OUTSIDE_EVIDENCE: "outside",
}


@cache
def _asset(name: str) -> str:
    return packaged(Path(__file__).parent / "screen" / name).decode()


def to_html(edition: Edition) -> bytes:
    """Return the card as one HTML file.

    Parameters
    ----------
    edition : Edition
        What is being released [-]

    Returns
    -------
    bytes
        UTF-8; needs nothing outside itself, and no script but for the look-up [-]
    """
    card, identity = edition.card, edition.identity
    registration = escape(identity.registration)
    stamped = "".join(f"<p>{escape(stamp)}</p>" for stamp in stamps(card, identity))
    tables = "\n".join(_table(edition, table) for table in card.tables)
    held = " ".join(
        (*stamps(card, identity), "")
    )  # stays in sight with the line that says what governs
    notes = "\n".join(
        f"<h2>{escape(section.title)}</h2>\n<ul>"
        + "".join(f"<li>{escape(line)}</li>" for line in section.lines)
        + "</ul>"
        for section in note_sections(card, identity)
    )
    foot = "".join(
        f"<p>{escape(text)}</p>"
        for text in (
            card.percent_of,
            units_text(card),
            tolerance_text(card, card.tables, where=WHERE),
            digest_text(card, edition.issue, edition.replaces),
            f"Profile digest in full: {card.digest}",
        )
    )
    page = f"""<!DOCTYPE html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="{escape(_POLICY)}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="profile-digest" content="{escape(card.digest)}">
<title>{registration} cruise card, issue {edition.issue}</title>
<style>
{_asset("card.css")}</style>
</head>
<body>
<input type="radio" name="light" id="auto" checked aria-label="Light as the device">
<input type="radio" name="light" id="day" aria-label="Day">
<input type="radio" name="light" id="night" aria-label="Night">
<div class="page">
<header>
<h1>{registration}</h1>
<p><strong>{escape(issue_text(identity, edition.issue))}</strong></p>
{f'<div class="stamps">{stamped}</div>' if stamped else ""}
<p>{escape(configuration(identity))}</p>
<p class="light"><label for="auto">Device</label> <label for="day">Day</label>
<label for="night">Night</label></p>
</header>
<main>
{_look_up(card)}
{tables}
{listing_tables(card, registration=identity.registration, issue=edition.issue)}
{chart_figures(card)}
<footer>
{foot}
</footer>
{notes}
</main>
<div class="governs">{f'<p class="held">{escape(held)}</p>' if held else ""}
<p>{escape(SUPPLEMENTARY)}</p></div>
</div>
<script>
{_asset("look_up.js")}</script>
</body>
</html>
"""
    return page.encode()


def _name(card: Card, table: CardTable) -> str:
    return f"{percent(table.power_fraction)}, {table.mixture}, {mass_text(card, table.mass)}"


def _look_up(card: Card) -> str:
    """Return the form that shows one cell; hidden until its script runs."""
    options = "".join(
        f'<option value="{k}">{escape(_name(card, table))}</option>'
        for k, table in enumerate(card.tables)
    )
    temperature = ""
    if shows_temperature(card):
        temperature = '<label>Temperature <select name="temperature"></select></label>'
    return f"""<form id="look-up" hidden autocomplete="off">
<fieldset>
<legend>One setting, from the tables below</legend>
<label>Table <select name="table">{options}</select></label>
<label>{escape(altitude_label(card))} <select name="altitude"></select></label>
{temperature}
<label>rpm <select name="rpm"></select></label>
</fieldset>
<output aria-live="polite"></output>
</form>"""


def _table(edition: Edition, table: CardTable) -> str:
    card, units = edition.card, edition.card.choices.units
    whose = f"{edition.identity.registration}. {digest_text(card, edition.issue, None)}"
    under = f"{sign(units.pressure)}, {sign(units.fuel_flow)}, {sign(units.speed)}"
    small = [sign(unit) for unit in second_units(card) if unit]
    if small:
        under += f"; small {', '.join(small)}"
    heads = "".join(
        f'<th scope="col">{number(rpm)} <small>rpm: {escape(under)}</small></th>'
        for rpm in table.rpm
    )
    degrees = ""
    if shows_temperature(card):
        degrees = (
            f'<th scope="col" class="oat"><small>{escape(temperature_label(card))}</small></th>'
        )
    bodies = "\n".join(_bands(card, table))
    states = {state_of(table, at) for at in cells_of(table)}
    marks = "".join(
        f"<dt{' class=full' if mark == FULL_THROTTLE else ''}>{escape(mark)}</dt>"
        f"<dd>{escape(text)}</dd>"
        for mark, text in legend(card, states)
    )
    return f"""<table>
<caption><span class="power">{escape(percent(table.power_fraction))}</span>
<span class="name">{escape(table.mixture)}, {escape(mass_text(card, table.mass))}</span>
<small>{escape(basis_text(table))}</small>
<small>{escape(whose)}</small></caption>
<thead><tr><th scope="col" class="row"><small>{escape(altitude_label(card))}</small></th>{degrees}\
{heads}</tr></thead>
{bodies}
</table>
<dl class="marks">{marks}</dl>"""


def _bands(card: Card, table: CardTable) -> list[str]:
    """Return the bodies of a table: two altitudes to a band, or the temperatures of one."""
    temperatures = len(table.isa_deviation)
    size = 1 if temperatures > 1 else 2
    bands = []
    for band, start in enumerate(range(0, len(table.altitude), size)):
        rows = "\n".join(
            _row(card, table, a, t)
            for a in range(start, min(start + size, len(table.altitude)))
            for t in range(temperatures)
        )
        bands.append(f"<tbody{' class=band' if band % 2 else ''}>\n{rows}\n</tbody>")
    return bands


def _row(card: Card, table: CardTable, a: int, t: int) -> str:
    temperatures = len(table.isa_deviation)
    head = ""
    if t == 0:
        span = f' rowspan="{temperatures}"' if temperatures > 1 else ""
        scope = "rowgroup" if temperatures > 1 else "row"
        altitude = number(table.altitude[a])
        head = f'<th scope="{scope}" class="row"{span}>{altitude}</th>'
    degrees = ""
    if shows_temperature(card):
        value = number(float(table.outside_air_temperature[a, t]))
        degrees = f'<th scope="row" class="oat">{value}</th>'
    cells = "".join(_cell(card, table, (a, t, r)) for r in range(len(table.rpm)))
    return f"<tr>{head}{degrees}{cells}</tr>"


def _cell(card: Card, table: CardTable, at: tuple[int, int, int]) -> str:
    texts = cell_texts(card, table, at)
    state, _ = state_of(table, at)
    place = f'data-altitude="{number(table.altitude[at[0]])}" data-rpm="{number(table.rpm[at[2]])}"'
    if shows_temperature(card):
        name = deviation_name(card, table.isa_deviation[at[1]])
        value = number(float(table.outside_air_temperature[at[0], at[1]]))
        full = f"{name}, {temperature_label(card)} {value}"
        # The outside air temperature differs from row to row, so the deviation is what is chosen.
        place += f' data-temperature="{escape(name)}" title="{escape(full)}"'
    place += f' data-says="{escape(_says(card, table, at))}"'
    if len(texts) == 1:
        return f'<td class="{_CLASSES[state]}" {place}><b>{escape(texts[0])}</b></td>'
    pressure, flow, speed, *mark = texts
    full = f' <span class="full">{escape(mark[0])}</span>' if mark else ""
    small = " ".join(
        f"<small>{text}</small>" for text in second_texts(card, table, at) if text is not None
    )
    return (
        f'<td {place}><b>{pressure}</b> <span class="flow">{flow}</span>'
        f' <span class="speed">{speed}</span>{full}{small}</td>'
    )


def _says(card: Card, table: CardTable, at: tuple[int, int, int]) -> str:
    """Return what the look-up says of a cell: its numbers with their units, or its reason."""
    texts = cell_texts(card, table, at)
    units = card.choices.units
    if len(texts) == 1:
        mark, meaning = legend(card, [state_of(table, at)])[0]
        return f"{mark}: {meaning}"
    pressure, flow, speed = (
        f"{text} {sign(unit)}" + (f" ({small} {sign(other)})" if small and other else "")
        for text, unit, small, other in zip(
            texts[:3],
            (units.pressure, units.fuel_flow, units.speed),
            second_texts(card, table, at),
            second_units(card),
            strict=True,
        )
    )
    says = f"{pressure} at {number(table.rpm[at[2]])} rpm: {flow}, {speed}"
    if len(texts) == 4:
        says += f". Full throttle, gives {texts[3].removeprefix(FULL_THROTTLE).strip()}"
    return f"{says}. {SUPPLEMENTARY.partition('.')[0].capitalize()}: the flight manual governs."
