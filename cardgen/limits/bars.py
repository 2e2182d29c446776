"""Bars: which cells of a card break a limit, and the lettered reasons printed below it."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Final

import numpy as np
from numpy.typing import NDArray

from cardgen.limits.check import check
from cardgen.limits.finding import BoolArray, FindingName, Findings, Judgement, Verdict
from cardgen.limits.flown import Flown
from cardgen.limits.gauges import Gauges
from cardgen.limits.kinds import Limits
from cardgen.limits.wording import MessageUnits
from cardgen.records import dataclass

LETTERS: Final = "ABCDEFGHJKLMNPQRSTUVWXYZ"
"""Letters of reasons; I and O are left out because they read as digits on a shaking knee."""

_Key = tuple[FindingName, str, str]


@dataclass(frozen=True, slots=True)
class Bar:
    """One reason why cells are forbidden: its letter, the limit in words and who states it."""

    letter: str
    limit: FindingName
    text: str
    source: str


@dataclass(frozen=True, slots=True)
class Bars:
    """Forbidden cells of one or more tables with one set of letters.

    Parameters
    ----------
    index : tuple of ndarray of int16
        For each table and cell the place in `reasons`, -1 where no limit is broken [-]
    reasons : tuple of Bar
        Reasons that forbid at least one cell, in the order of their letters [-]
    not_checked : tuple of str
        What could not be checked, in words; it forbids nothing and must be printed [-]
    """

    index: tuple[NDArray[np.int16], ...]
    reasons: tuple[Bar, ...]
    not_checked: tuple[str, ...]


def letter(place: int) -> str:
    """Return the letter of a reason.

    Parameters
    ----------
    place : int
        Place of the reason, counted from 0 [-]

    Returns
    -------
    str
        A to Z without I and O, then AA, AB and so on [-]
    """
    rest, last = divmod(place, len(LETTERS))
    return (letter(rest - 1) if rest else "") + LETTERS[last]


def bars(
    limits: Limits, gauges: Gauges, flown: Sequence[Flown], *, units: MessageUnits | None = None
) -> Bars:
    """Return which cells of a card's tables are forbidden, and why.

    Parameters
    ----------
    limits : Limits
        What the sources state [-]
    gauges : Gauges
        The aircraft's gauges [-]
    flown : sequence of Flown
        One for each table of the card [-]
    units : MessageUnits, optional
        Units of the reasons; inHg, kt, ft, °C and hp by default [-]

    Returns
    -------
    Bars
        A cell has a reason if and only if `check` says that it is outside [-]
    """
    chosen = units or MessageUnits()
    return bars_of([check(limits, gauges, each, units=chosen) for each in flown])


def bars_of(tables: Sequence[Findings]) -> Bars:
    """Return the forbidden cells of tables that are already checked.

    Parameters
    ----------
    tables : sequence of Findings
        One for each table of the card [-]

    Returns
    -------
    Bars
        Forbidden cells, lettered reasons and what was not checked [-]

    Notes
    -----
    Where several limits forbid one cell it carries the first of them in the order of kinds. Letters
    follow that order too and not the cells, so they change only with the limits that are met.
    """
    ranked = [_ranked(findings) for findings in tables]
    forbidding: dict[_Key, Judgement] = {}
    for keyed in ranked:
        for key, judgement in keyed:
            if np.any(judgement.verdict == Verdict.OUTSIDE):
                forbidding.setdefault(key, judgement)
    order = {name: place for place, name in enumerate(_kinds(tables))}
    keys = sorted(forbidding, key=lambda key: order[key[0]])
    places = {key: place for place, key in enumerate(keys)}
    index = tuple(
        _first_broken(findings, keyed, places)
        for findings, keyed in zip(tables, ranked, strict=True)
    )
    # A reason that always stands behind another forbids no cell of its own: it needs no letter.
    met = sorted({place for cells in index for place in cells.ravel().tolist()} - {-1})
    renumber = np.full(len(places) + 1, -1, dtype=np.int16)
    renumber[met] = np.arange(len(met), dtype=np.int16)
    reasons = tuple(
        Bar(letter(place), *_printed(forbidding[keys[old]])) for place, old in enumerate(met)
    )
    unchecked = dict.fromkeys(words for findings in tables for words in _not_checked(findings))
    return Bars(tuple(renumber[cells] for cells in index), reasons, tuple(unchecked))


def _ranked(findings: Findings) -> list[tuple[_Key, Judgement]]:
    """Return judgements with what makes one the same limit in several tables."""
    return [((j.limit, j.statement, j.source), j) for j in findings.judgements]


def _kinds(tables: Sequence[Findings]) -> tuple[FindingName, ...]:
    """Return the kinds of finding in the order they are judged."""
    return tuple(dict.fromkeys(j.limit for findings in tables for j in findings.judgements))


def _printed(judgement: Judgement) -> tuple[FindingName, str, str]:
    """Return kind, text and source of a reason."""
    return judgement.limit, judgement.statement, judgement.source


def _first_broken(
    findings: Findings, keyed: Sequence[tuple[_Key, Judgement]], places: dict[_Key, int]
) -> NDArray[np.int16]:
    """Return for each cell the place of the first limit it breaks, -1 where it breaks none."""
    cells = np.full(findings.shape, -1, dtype=np.int16)
    for key, judgement in sorted(keyed, key=lambda pair: places.get(pair[0], -1)):
        if key in places:
            cells[(cells < 0) & (judgement.verdict == Verdict.OUTSIDE)] = places[key]
    return cells


def _not_checked(findings: Findings) -> Iterator[str]:
    """Yield in words what was not checked in cells that are printed."""
    yield from findings.not_stated
    printed: BoolArray = findings.verdict != Verdict.OUTSIDE
    for judgement in findings.judgements:
        if judgement.limit == "solution":
            printed = printed & (judgement.verdict != Verdict.UNKNOWN)
    for judgement in findings.judgements:
        # A category that nobody stated is in the list already.
        if judgement.limit == "solution" or judgement.unstated:
            continue
        unknown = (judgement.verdict == Verdict.UNKNOWN) & printed
        if unknown.any():
            yield f"{judgement.statement} (in {'some' if not unknown.all() else 'all'} cells)"
