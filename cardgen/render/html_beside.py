"""What stands beside the tables, for the screen: listings as tables, charts as drawings."""

from __future__ import annotations

from html import escape
from typing import Final
from zlib import crc32

from cardgen.render.beside import Listing, listings, marks_of
from cardgen.render.boxes import Box, Frame, Ground, Rule, Run, Tint, Trace, hatching
from cardgen.render.chart import ChartPart, panel_height, place_panels, side_by_side
from cardgen.render.columns import LEADING, NOTE
from cardgen.render.wording import digest_text, legend
from cardgen.tables.back import Chart
from cardgen.tables.card import Card, CellState

MEASURE: Final = 380.0  # of a drawing; the screen scales it to its own width [pt]
FIELD: Final = 130.0


def listing_tables(card: Card, *, registration: str, issue: int) -> str:
    """Return every listing of a card as a table.

    Parameters
    ----------
    card : Card
        The card [-]
    registration : str
        Whose it is [-]
    issue : int
        Which issue [-]

    Returns
    -------
    str
        HTML [-]
    """
    whose = f"{registration}. {digest_text(card, issue, None)}"
    return "\n".join(_table(listing, whose) for listing in listings(card))


def _table(listing: Listing, whose: str) -> str:
    groups = "".join(
        f'<th scope="colgroup" colspan="{len(group.heads)}" class="group">{escape(group.name)}</th>'
        for group in listing.groups
    )
    large = ' class="large"' if listing.large_heads else ""
    heads = "".join(
        f'<th scope="col"{large}>{escape(head)}</th>'
        for group in listing.groups
        for head in group.heads
    )
    strong = [one for group in listing.groups for one in group.strong]
    rows = "\n".join(
        f'<tr><th scope="row">{escape(row.label)}</th>'
        + "".join(
            f"<td>{'<b>' if bold else ''}{escape(cell.printed)}{'</b>' if bold else ''}</td>"
            for cell, bold in zip(row.cells, strong, strict=True)
        )
        + "</tr>"
        for row in listing.rows
    )
    marks = "".join(
        f"<dt>{escape(mark)}</dt><dd>{escape(meaning)}</dd>"
        for mark, meaning in marks_of(listing, [c for row in listing.rows for c in row.cells])
    )
    lead = "".join(f"<small>{escape(text)}</small>" for text in listing.lead)
    return f"""<div class="wide" tabindex="0" role="region" aria-label="{escape(listing.title)}">
<table class="listing">
<caption><span class="name">{escape(listing.title)}</span>{lead}
<small>{escape(whose)}</small></caption>
<thead><tr><td></td>{groups}</tr>
<tr><th scope="col">{escape(listing.label)}</th>{heads}</tr></thead>
<tbody>
{rows}
</tbody>
</table></div>
<dl class="marks">{marks}</dl>"""


def chart_figures(card: Card) -> str:
    """Return every chart of a card as a drawing with its words.

    Parameters
    ----------
    card : Card
        The card [-]

    Returns
    -------
    str
        HTML with the drawings in it [-]
    """
    return "\n".join(_figure(card, chart) for chart in card.back.charts)


def _figure(card: Card, chart: Chart) -> str:
    across = side_by_side(chart, MEASURE)
    part = ChartPart(chart, tuple(range(len(chart.panels))), across, FIELD)
    rows = -(-len(chart.panels) // across)
    height = rows * panel_height(part, MEASURE) + LEADING * NOTE + 4.0
    boxes = place_panels(part, card, x=0.0, top=height, measure=MEASURE)
    drawn = "\n".join(_element(box, height) for box in boxes)
    states = {(CellState.FORBIDDEN, area.reason) for panel in chart.panels for area in panel.areas}
    marks = "".join(
        f"<dt>{escape(mark)}</dt><dd>{escape(text)}</dd>" for mark, text in legend(card, states)
    )
    return f"""<figure class="chart">
<figcaption><span class="name">{escape(chart.title)}</span>
<small>{escape(chart.lead)}</small></figcaption>
<svg viewBox="0 0 {MEASURE:g} {height:g}" role="img" aria-label="{escape(chart.title)}">
{drawn}
</svg>
</figure>
<dl class="marks">{marks}</dl>"""


def _n(value: float) -> str:
    return f"{value:.2f}".rstrip("0").rstrip(".")


def _points(points: tuple[tuple[float, float], ...], height: float) -> str:
    return " ".join(f"{_n(x)},{_n(height - y)}" for x, y in points)


def _element(box: Box, height: float) -> str:
    """Return a box as an element of a drawing whose ordinate runs down."""
    if isinstance(box, Run):
        bold = ' class="bold"' if box.face == "bold" else ""
        place = f'x="{_n(box.x)}" y="{_n(height - box.y)}" font-size="{_n(box.size)}"'
        return f"<text {place}{bold}>{escape(box.text)}</text>"
    if isinstance(box, Tint | Frame):
        kind = "white" if isinstance(box, Tint) else "frame"
        place = f'x="{_n(box.x)}" y="{_n(height - box.y - box.height)}"'
        return f'<rect class="{kind}" {place} width="{_n(box.width)}" height="{_n(box.height)}"/>'
    if isinstance(box, Rule):
        ends = _points(((box.x, box.y), (box.to_x, box.to_y)), height)
        return f'<polyline points="{ends}" stroke-width="{_n(box.thickness)}"/>'
    if isinstance(box, Trace):
        return (
            f'<polyline points="{_points(box.points, height)}" stroke-width="{_n(box.thickness)}"/>'
        )
    if isinstance(box, Ground):
        return _ground(box, height)
    raise TypeError(f"{type(box).__name__} stands in no chart")


def _ground(box: Ground, height: float) -> str:
    """Return a ground as hatching clipped to its pieces."""
    rings = "".join(f"M{_points(piece, height)}Z" for piece in box.pieces)
    name = f"g{crc32(rings.encode()):x}"
    lines = "".join(
        f"M{_points(((x, y), (to_x, to_y)), height)}" for x, y, to_x, to_y in hatching(box)
    )
    return (
        f'<clipPath id="{name}"><path d="{rings}"/></clipPath>'
        f'<path clip-path="url(#{name})" d="{lines}" stroke-width="{_n(box.thickness)}"/>'
    )
