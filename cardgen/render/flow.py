"""Which listing and which chart goes on which back page, cut where it must be."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Final

from cardgen.errors import ReleaseError
from cardgen.records import dataclass
from cardgen.render.beside import Listing
from cardgen.render.boxes import Box
from cardgen.render.chart import (
    GREATEST_PANEL,
    LEAST_PANEL,
    ChartPart,
    chart_height,
    place_chart,
    side_by_side,
)
from cardgen.render.legend import legend_height, meanings, place_legend
from cardgen.render.listing import ListingPart, column_blocks, part_height, place_part
from cardgen.render.wording import continued_text
from cardgen.tables.back import Chart
from cardgen.tables.card import Card, CellState

GAP: Final = 6.0
FEWEST_ROWS: Final = 3  # a part of fewer rows is not begun at the foot of a page
_MANY: Final = 99

Part = ListingPart | ChartPart
BackPage = tuple[Part, ...]


def subject(part: Part) -> Listing | Chart:
    """Return what a part is a part of."""
    return part.listing if isinstance(part, ListingPart) else part.chart


@dataclass(slots=True)
class _Pages:
    """Pages being filled from the top."""

    card: Card
    measure: float
    height: float
    done: list[list[Part]]

    def used(
        self, parts: Sequence[Part], *, continued: str = continued_text(_MANY, _MANY)
    ) -> float:
        """Return the height that parts take, each with room to say where it goes on [pt]."""
        heights = (
            _height(self.card, parts, k, measure=self.measure, continued=continued)
            for k in range(len(parts))
        )
        return sum(heights) + GAP * (len(parts) - 1)

    def fits(self, part: Part) -> bool:
        """Return whether a part still fits the page that is being filled."""
        return self.used([*self.done[-1], part]) <= self.height

    def turn(self) -> None:
        """Begin a new page unless this one is empty."""
        if self.done[-1]:
            self.done.append([])


def _titled(part: ListingPart, before: Sequence[Part]) -> bool:
    """Return whether a part is the first of its listing on its page."""
    return all(subject(other) is not part.listing for other in before)


def _explains(page: Sequence[Part], k: int) -> list[ListingPart]:
    """Return the parts whose marks are explained under part k: under the last all of a listing."""
    what = subject(page[k])
    if any(subject(other) is what for other in page[k + 1 :]):
        return []
    return [part for part in page if isinstance(part, ListingPart) and part.listing is what]


def _height(card: Card, page: Sequence[Part], k: int, *, measure: float, continued: str) -> float:
    """Return the height of one part of a page [pt]."""
    part = page[k]
    if isinstance(part, ListingPart):
        return part_height(
            part,
            measure=measure,
            continued="" if part.whole else continued,
            titled=_titled(part, page[:k]),
            explains=_explains(page, k),
        )
    whole = "" if len(part.panels) == len(part.chart.panels) else continued
    legend = legend_height(_chart_legend(card, part, measure))
    return chart_height(part, measure=measure, continued=whole) + legend


def back_pages(
    card: Card, listings: Sequence[Listing], *, measure: float, height: float
) -> tuple[BackPage, ...]:
    """Return the parts on each back page.

    Parameters
    ----------
    card : Card
        The card, for its charts and reasons [-]
    listings : sequence of Listing
        Its listings in order [-]
    measure, height : float
        Room across and down between head and foot [pt]

    Returns
    -------
    tuple of tuple
        Parts per page: listings first, then charts [-]

    Raises
    ------
    ReleaseError
        Not even one row or one panel fits.
    """
    pages = _Pages(card, measure, height, [[]])
    for listing in listings:
        _add_listing(pages, listing)
    too_large = left_out(card, measure=measure, height=height)
    for chart in card.back.charts:
        if chart.title in too_large:
            continue
        pages.turn()
        _add_chart(pages, chart)
    return tuple(tuple(page) for page in pages.done if page)


def _add_listing(pages: _Pages, listing: Listing) -> None:
    blocks = column_blocks(listing, pages.measure)
    if blocks is None:
        raise ReleaseError(
            f"a column of {listing.title!r} does not fit the paper at the least sizes of type; "
            "choose a larger paper"
        )
    count = len(listing.rows)
    whole = [ListingPart(listing, block, 0, count) for block in blocks]
    if pages.used(whole, continued="") <= pages.height:
        # It stands whole on a page of its own rather than cut, and nothing says that it goes on.
        if pages.used([*pages.done[-1], *whole], continued="") > pages.height:
            pages.turn()
        pages.done[-1] += whole
        return
    for part in whole:
        first = 0
        while first < count:
            last = count
            while last > first and not pages.fits(replace(part, first=first, last=last)):
                last -= 1
            begun = last - first
            if begun < min(FEWEST_ROWS, count - first) and pages.done[-1]:
                pages.turn()
                continue
            if begun == 0:
                raise ReleaseError(
                    f"one row of {listing.title!r} does not fit the paper at the least sizes of "
                    "type; choose a larger paper"
                )
            pages.done[-1].append(replace(part, first=first, last=last))
            first = last


def left_out(card: Card, *, measure: float, height: float) -> tuple[str, ...]:
    """Return the titles of charts of which a page cannot hold even one panel with its reasons.

    Parameters
    ----------
    card : Card
        The card [-]
    measure, height : float
        Room across and down between head and foot [pt]

    Returns
    -------
    tuple of str
        Charts that a paper so small must leave to the screen [-]
    """
    pages = _Pages(card, measure, height, [[]])
    return tuple(
        chart.title
        for chart in card.back.charts
        if not all(
            pages.fits(ChartPart(chart, (index,), side_by_side(chart, measure), LEAST_PANEL))
            for index in range(len(chart.panels))
        )
    )


def _add_chart(pages: _Pages, chart: Chart) -> None:
    across = side_by_side(chart, pages.measure)
    first = 0
    while first < len(chart.panels):
        panels = tuple(range(first, len(chart.panels)))
        while panels and not pages.fits(ChartPart(chart, panels, across, LEAST_PANEL)):
            panels = panels[: -across if len(panels) % across == 0 else -(len(panels) % across)]
        part = ChartPart(chart, panels, across, LEAST_PANEL)
        rows = -(-len(panels) // across)
        spare = (pages.height - pages.used([part])) / rows
        pages.done[-1].append(replace(part, field=min(LEAST_PANEL + spare, GREATEST_PANEL)))
        first = panels[-1] + 1
        if first < len(chart.panels):
            pages.turn()


def _chart_legend(
    card: Card, part: ChartPart, measure: float
) -> tuple[tuple[str, tuple[str, ...]], ...]:
    """Return the reasons behind the forbidden ground of a part."""
    states = {
        (CellState.FORBIDDEN, area.reason)
        for index in part.panels
        for area in part.chart.panels[index].areas
    }
    return meanings(card, states, measure)


def place_back(
    card: Card,
    page: BackPage,
    continued: Sequence[str],
    *,
    x: float,
    top: float,
    measure: float,
) -> list[Box]:
    """Return the boxes of a back page between head and foot.

    Parameters
    ----------
    card : Card
        The card [-]
    page : tuple
        Its parts [-]
    continued : sequence of str
        For each part where its listing or chart goes on [-]
    x, top : float
        Upper left corner [pt]
    measure : float
        Room across [pt]

    Returns
    -------
    list of Box
        Boxes in reading order [-]
    """
    boxes: list[Box] = []
    y = top - 2.0
    for k, (part, where) in enumerate(zip(page, continued, strict=True)):
        height = _height(card, page, k, measure=measure, continued=where)
        if isinstance(part, ListingPart):
            boxes += place_part(
                part,
                x=x,
                top=y,
                measure=measure,
                continued=where,
                titled=_titled(part, page[:k]),
                explains=_explains(page, k),
            )
        else:
            boxes += place_chart(part, card, x=x, top=y, measure=measure, continued=where)
            legend = _chart_legend(card, part, measure)
            boxes += place_legend(legend, x=x, top=y - height + legend_height(legend))
        y -= height + GAP
    return boxes
