"""The meaning of every mark that occurs on a page, on that page."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from functools import cache

from cardgen.render.boxes import Box, Frame, Run
from cardgen.render.columns import FRAME_PAD, LEADING, NOTE, Part
from cardgen.render.fonts import CAP_HEIGHT, width, wrap
from cardgen.render.wording import FULL_THROTTLE, legend
from cardgen.tables.card import Card, CellState

Meaning = tuple[str, tuple[str, ...]]  # a mark and the lines that say what it means


def _states(card: Card, parts: Sequence[Part]) -> set[tuple[CellState, int]]:
    """Return state and reason of every cell of the parts."""
    found: set[tuple[int, int]] = set()
    for part in parts:
        table, at = card.tables[part.table], part.cells
        pairs = zip(
            table.state[at].ravel().tolist(), table.reason[at].ravel().tolist(), strict=True
        )
        found |= set(pairs)
    return {(CellState(int(state)), int(reason)) for state, reason in found}


def legend_lines(card: Card, parts: Sequence[Part], measure: float) -> tuple[Meaning, ...]:
    """Return each mark that occurs with the lines of its meaning.

    Parameters
    ----------
    card : Card
        The card [-]
    parts : sequence of Part
        The parts of tables on the page [-]
    measure : float
        Room across [pt]

    Returns
    -------
    tuple of (str, tuple of str)
        Marks with their lines [-]
    """
    return meanings(card, _states(card, parts), measure)


def meanings(
    card: Card, states: Iterable[tuple[CellState, int]], measure: float
) -> tuple[Meaning, ...]:
    """Return each mark of some states with the lines of its meaning.

    Parameters
    ----------
    card : Card
        The card [-]
    states : iterable of (CellState, int)
        States with the index of their reasons [-]
    measure : float
        Room across [pt]

    Returns
    -------
    tuple of (str, tuple of str)
        Marks with their lines [-]
    """
    indent = _legend_indent()
    return tuple(
        (mark, wrap(text, "regular", size=NOTE, measure=measure - indent))
        for mark, text in legend(card, states)
    )


@cache
def _legend_indent() -> float:
    return width(FULL_THROTTLE, "bold", NOTE) + 2.0 * FRAME_PAD + 6.0


def legend_height(lines: Sequence[Meaning]) -> float:
    """Return the height of the explanations [pt]."""
    return sum(LEADING * NOTE * len(text) + 2.0 for _, text in lines) + (4.0 if lines else 0.0)


def place_legend(lines: Sequence[Meaning], *, x: float, top: float) -> list[Box]:
    """Return the boxes of the explanations below `top` [pt]."""
    boxes: list[Box] = []
    y = top - 2.0
    for mark, text in lines:
        y -= LEADING * NOTE + 2.0
        boxes.append(Run(x + FRAME_PAD, y, mark, "bold", NOTE))
        if mark == FULL_THROTTLE:
            boxes.append(
                Frame(
                    x,
                    y - FRAME_PAD,
                    width(mark, "bold", NOTE) + 2.0 * FRAME_PAD,
                    CAP_HEIGHT * NOTE + 2.0 * FRAME_PAD,
                    0.8,
                )
            )
        for line in text:
            boxes.append(Run(x + _legend_indent(), y, line, "regular", NOTE))
            y -= LEADING * NOTE
        y += LEADING * NOTE
    return boxes
