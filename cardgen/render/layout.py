"""Which part of which table goes on which page, and every box of every page."""

from __future__ import annotations

import contextlib
from collections.abc import Sequence
from dataclasses import replace
from itertools import groupby
from typing import Final

from cardgen.errors import ReleaseError
from cardgen.render.beside import listings
from cardgen.render.boxes import Box, Page
from cardgen.render.columns import (
    LEAST_SETTING,
    Part,
    Style,
    lay_out_grid,
)
from cardgen.render.edition import Edition
from cardgen.render.flow import BackPage, back_pages, left_out, place_back, subject
from cardgen.render.grid import grid_height, place_grid
from cardgen.render.legend import legend_height, legend_lines, place_legend
from cardgen.render.marking import Marking, mark_page, place_foot, place_head
from cardgen.render.notes import NotesPage, place_notes, share_out
from cardgen.render.paper import Paper, Room
from cardgen.render.wording import (
    OF_ALL,
    continued_text,
    left_out_text,
    note_sections,
    shows_temperature,
)
from cardgen.tables.card import Card, CardTable, Section

SETTING_SIZES: Final = (18.0, 17.0, 16.0, 15.0, 14.0, 13.0, LEAST_SETTING)
BETWEEN_TABLES: Final = 8.0
ABOVE_FOOT: Final = 4.0  # left free on a back, so that nothing touches the rule of the foot [pt]
TABLES_PER_PAGE: Final = 2

# Both say "page 99 of 99" while heights are measured, so that numbering cannot move a line.
_MANY: Final = 99


def lay_out(edition: Edition, paper: Paper) -> tuple[Page, ...]:
    """Return every page of a card with everything on it.

    Parameters
    ----------
    edition : Edition
        What is being released [-]
    paper : Paper
        What it is printed on [-]

    Returns
    -------
    tuple of Page
        Tables on fronts, what stands beside them on backs; two-up papers are not yet imposed [-]

    Raises
    ------
    ReleaseError
        Not even one row with its explanations fits the paper at the least sizes.
    """
    room = Room(paper)
    across, styles, plan = _best_plan(edition, room)
    height = _room_on_back(edition, room)
    backs = back_pages(edition.card, listings(edition.card), measure=room.measure, height=height)
    missing = left_out(edition.card, measure=room.measure, height=height)
    sections = note_sections(edition.card, edition.identity)
    if missing:
        sections = (*sections, Section("Left out", tuple(map(left_out_text, missing))))
    notes = share_out(sections, measure=room.measure, height=height)
    contents = _two_sided(plan, (*backs, *notes))
    return tuple(
        _table_page(edition, across, styles, plan, contents, page=page)
        if isinstance(content, int)
        else _back_page(edition, room, contents, page=page)
        for page, content in enumerate(contents, start=1)
    )


Content = int | BackPage | NotesPage  # a page of tables by its place in the plan, or a back page


def _two_sided(plan: Plan, backs: Sequence[BackPage | NotesPage]) -> tuple[Content, ...]:
    """Return the pages in order: tables on the fronts of sheets, everything else on the backs.

    What is left of either when the other is used up takes both sides.
    """
    fronts = range(len(plan))
    both = min(len(plan), len(backs))
    sheets = [side for k in range(both) for side in (fronts[k], backs[k])]
    return (*sheets, *fronts[both:], *backs[both:])


# --------------------------------------------------------------------------------------- planning

Plan = tuple[tuple[Part, ...], ...]  # the parts on each page


def _best_plan(edition: Edition, room: Room) -> tuple[Room, tuple[Style, ...], Plan]:
    """Return which way round the tables stand, the style of each page, and the pages.

    Upright, unless that parts the rpm of one row over pages and the broad side keeps them together
    on no more pages. Two pages to a sheet are always upright.
    """
    try:
        styles, plan = _plan(edition, room)
    except ReleaseError:
        if room.paper.sheet is not None:
            raise
        broad = Room(room.paper, landscape=True)
        return broad, *_plan(edition, broad)
    if room.paper.sheet is None and _parts_rpm(edition.card, plan):
        broad = Room(room.paper, landscape=True)
        with contextlib.suppress(ReleaseError):
            other_styles, other = _plan(edition, broad)
            if len(other) <= len(plan) and not _parts_rpm(edition.card, other):
                return broad, other_styles, other
    return room, styles, plan


def _parts_rpm(card: Card, plan: Plan) -> bool:
    """Return whether the rpm of one row stand on different pages."""
    return any(
        len({column[1] for column in part.columns}) < len(card.tables[part.table].rpm)
        for parts in plan
        for part in parts
    )


def _plan(edition: Edition, room: Room) -> tuple[tuple[Style, ...], Plan]:
    """Return the pages and the style of each: fewest pages first, then the largest type.

    Numbers stand in one arrangement through the whole card, and a table has one size wherever
    it goes on.
    """
    choices: list[tuple[tuple[float, float], tuple[Style, ...], Plan]] = []
    plans = {
        stacked: _paginate(edition, room, Style(LEAST_SETTING, stacked))
        for stacked in (False, True)
    }
    fewest = min((len(plan) for plan in plans.values() if plan is not None), default=0)
    for stacked, plan in plans.items():
        if plan is None or len(plan) > fewest:
            continue
        styles = _grown(edition, room, plan, stacked=stacked)
        sizes = [style.setting for style in styles]
        choices.append(((min(sizes), sum(sizes)), styles, plan))
    if not choices:
        raise ReleaseError(
            f"one row of a table with its explanations does not fit {room.paper.name} at the least"
            " sizes of type; choose a larger paper or shorten the wording of the limits"
        )
    _, styles, plan = max(choices, key=lambda choice: choice[0])
    return styles, plan


def _grown(edition: Edition, room: Room, plan: Plan, *, stacked: bool) -> tuple[Style, ...]:
    """Return the largest style for each page, the same on all pages of one table."""
    sizes: dict[tuple[int, ...], float] = {}
    tables = [tuple(part.table for part in parts) for parts in plan]
    for key, parts in zip(tables, plan, strict=True):
        size = next(
            size for size in SETTING_SIZES if _fits(edition, room, Style(size, stacked), parts)
        )
        sizes[key] = min(size, sizes.get(key, size))
    return tuple(Style(sizes[key], stacked) for key in tables)


def _paginate(edition: Edition, room: Room, style: Style) -> Plan | None:
    """Return the pages of a card in a style, None where a row or a column does not fit."""
    pages: list[tuple[Part, ...]] = []
    waiting: list[Part] = []  # a whole table that may share its page with the next
    for index in range(len(edition.card.tables)):
        parts = _parts(edition, room, style, index)
        if parts is None:
            return None
        if len(parts) == 1:
            if waiting and _fits(edition, room, style, (*waiting, *parts)):
                waiting.extend(parts)
            else:
                if waiting:
                    pages.append(tuple(waiting))
                waiting = list(parts)
            if len(waiting) < TABLES_PER_PAGE:
                continue
        if waiting:
            pages.append(tuple(waiting))
            waiting = []
        if len(parts) > 1:
            pages.extend((part,) for part in parts)
    if waiting:
        pages.append(tuple(waiting))
    return tuple(pages)


def _parts(edition: Edition, room: Room, style: Style, index: int) -> tuple[Part, ...] | None:
    """Return a table cut into as few parts as fit a page each, evenly."""
    whole = _whole(edition, room, style, index)
    for block in _column_blocks(edition, room, style, whole):
        cut = _cut_rows(edition, room, style, block)
        if cut is not None:
            return cut
    return None


def _whole(edition: Edition, room: Room, style: Style, index: int) -> Part:
    """Return a whole table, its temperatures side by side if they fit, else under each other."""
    table = edition.card.tables[index]
    altitudes, temperatures = range(len(table.altitude)), range(len(table.isa_deviation))
    rpm = range(len(table.rpm))
    if not shows_temperature(edition.card) or len(temperatures) == 1:
        return Part(index, tuple((a, 0) for a in altitudes), tuple((-1, r) for r in rpm))
    across = Part(
        index,
        tuple((a, -1) for a in altitudes),
        tuple((t, r) for t in temperatures for r in rpm),
    )
    if lay_out_grid(edition, across, style=style, measure=room.measure).columns.fits:
        return across
    return Part(
        index,
        tuple((a, t) for a in altitudes for t in temperatures),
        tuple((-1, r) for r in rpm),
    )


def _column_blocks(
    edition: Edition, room: Room, style: Style, whole: Part
) -> Sequence[tuple[Part, ...]]:
    """Return ways to cut the columns so that each block fits across, fewest blocks first."""
    ways = []
    for blocks in range(1, len(whole.columns) + 1):
        parts = tuple(
            Part(whole.table, whole.rows, whole.columns[slice(*span)])
            for span in _even_spans(len(whole.columns), blocks)
        )
        if all(
            lay_out_grid(edition, part, style=style, measure=room.measure).columns.fits
            for part in parts
        ):
            ways.append(parts)
    return ways


def _cut_rows(
    edition: Edition, room: Room, style: Style, blocks: tuple[Part, ...]
) -> tuple[Part, ...] | None:
    """Return blocks of columns cut into parts of a page each, None where one row is too high."""
    parts: list[Part] = []
    for block in blocks:
        altitudes = [tuple(rows) for _, rows in groupby(block.rows, key=lambda row: row[0])]
        cut = _cut_block(edition, room, style, block, altitudes)
        if cut is None:  # the temperatures of one altitude do not fit a page together
            cut = _cut_block(edition, room, style, block, [(row,) for row in block.rows])
        if cut is None:
            return None
        parts.extend(cut)
    return tuple(parts)


def _cut_block(
    edition: Edition,
    room: Room,
    style: Style,
    block: Part,
    groups: Sequence[tuple[tuple[int, int], ...]],
) -> tuple[Part, ...] | None:
    """Return a block cut between groups of rows: fewest parts first, then evenly."""

    def part(start: int, end: int) -> Part:
        return replace(block, rows=tuple(row for group in groups[start:end] for row in group))

    greedy: list[Part] = []
    start = 0
    while start < len(groups):
        # More rows never need less room, so the most that fit are found by halving.
        end, beyond = start, len(groups) + 1
        trial = len(groups)
        while beyond - end > 1:
            if _fits(edition, room, style, (part(start, trial),)):
                end = trial
            else:
                beyond = trial
            trial = (end + beyond) // 2
        if end == start:
            return None
        greedy.append(part(start, end))
        start = end
    even = tuple(part(*span) for span in _even_spans(len(groups), len(greedy)))
    if all(_fits(edition, room, style, (one,)) for one in even):
        return even
    return tuple(greedy)


def _even_spans(length: int, count: int) -> list[tuple[int, int]]:
    """Return `count` neighbouring spans of nearly equal length, the longer ones first."""
    short, longer = divmod(length, count)
    spans, start = [], 0
    for k in range(count):
        end = start + short + (1 if k < longer else 0)
        spans.append((start, end))
        start = end
    return spans


def _fits(edition: Edition, room: Room, style: Style, parts: tuple[Part, ...]) -> bool:
    """Return whether parts share one page with its marking and the meaning of their marks."""
    card = edition.card
    grids = [lay_out_grid(edition, part, style=style, measure=room.measure) for part in parts]
    if not all(grid.columns.fits for grid in grids):
        return False
    whole = all(_is_whole(card, part) for part in parts)
    continued = "" if whole else continued_text(_MANY, _MANY)
    marking = mark_page(
        edition, _tables(card, parts), page=_MANY, pages=_MANY, measure=room.measure
    )
    height = (
        marking.head_height
        + marking.foot_height
        + sum(grid_height(grid, continued) for grid in grids)
        + BETWEEN_TABLES * len(grids)
        + legend_height(legend_lines(card, parts, room.measure))
    )
    return height <= room.top - room.bottom


def _is_whole(card: Card, part: Part) -> bool:
    table = card.tables[part.table]
    return len(part.rows) * len(part.columns) == table.state.size


def _tables(card: Card, parts: Sequence[Part]) -> tuple[CardTable, ...]:
    return tuple(card.tables[part.table] for part in parts)


# ----------------------------------------------------------------------------------------- placing


def _where(pages: Sequence[int], page: int) -> str:
    """Return where something that stands on some pages goes on, seen from one of them."""
    here = pages.index(page)
    return continued_text(
        pages[here - 1] if here > 0 else None,
        pages[here + 1] if here + 1 < len(pages) else None,
    )


def _table_page(
    edition: Edition,
    room: Room,
    styles: Sequence[Style],
    plan: Plan,
    contents: Sequence[Content],
    *,
    page: int,
) -> Page:
    card, index = edition.card, contents[page - 1]
    assert isinstance(index, int)
    parts, style = plan[index], styles[index]
    pages_of: dict[int, list[int]] = {}
    for number, content in enumerate(contents, start=1):
        if isinstance(content, int):
            for part in plan[content]:
                pages_of.setdefault(part.table, []).append(number)
    x, measure = room.left(page), room.measure
    marking = mark_page(
        edition, _tables(card, parts), page=page, pages=len(contents), measure=measure
    )
    boxes = list(place_head(marking, x=x, top=room.top, measure=measure))
    y = room.top - marking.head_height
    for part in parts:
        grid = lay_out_grid(edition, part, style=style, measure=measure)
        continued = _where(pages_of[part.table], page)
        boxes += place_grid(grid, x=x, top=y, continued=continued)
        y -= grid_height(grid, continued) + BETWEEN_TABLES
    boxes += place_legend(legend_lines(card, parts, measure), x=x, top=y + BETWEEN_TABLES)
    boxes += place_foot(marking, x=x, bottom=room.bottom, measure=measure)
    return Page(room.width, room.height, tuple(boxes))


def _mark_back(edition: Edition, room: Room, *, page: int, pages: int) -> Marking:
    tables = edition.card.tables
    return mark_page(edition, tables, page=page, pages=pages, measure=room.measure, where=OF_ALL)


def _room_on_back(edition: Edition, room: Room) -> float:
    """Return the height a back page has between its head and its foot."""
    marking = _mark_back(edition, room, page=_MANY, pages=_MANY)
    return room.top - room.bottom - marking.head_height - marking.foot_height - ABOVE_FOOT


def _back_page(edition: Edition, room: Room, contents: Sequence[Content], *, page: int) -> Page:
    x, measure, content = room.left(page), room.measure, contents[page - 1]
    marking = _mark_back(edition, room, page=page, pages=len(contents))
    top = room.top - marking.head_height
    boxes: Sequence[Box]
    if isinstance(content, NotesPage):
        later = [
            number
            for number, other in enumerate(contents, start=1)
            if isinstance(other, NotesPage) and number > page
        ]
        continued = continued_text(None, later[0] if later else None)
        boxes = place_notes(content.lines, x=x, top=top, continued=continued)
    else:
        assert not isinstance(content, int)
        where = [_where(_pages_of(contents, subject(part)), page) for part in content]
        boxes = place_back(edition.card, content, where, x=x, top=top, measure=measure)
    return Page(
        room.width,
        room.height,
        (
            *place_head(marking, x=x, top=room.top, measure=measure),
            *boxes,
            *place_foot(marking, x=x, bottom=room.bottom, measure=measure),
        ),
    )


def _pages_of(contents: Sequence[Content], what: object) -> list[int]:
    """Return the pages that carry parts of a listing or of a chart."""
    return [
        number
        for number, content in enumerate(contents, start=1)
        if isinstance(content, tuple) and any(subject(part) is what for part in content)
    ]
