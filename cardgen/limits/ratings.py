"""Ratings of the engine held against settings: what may be run for as long as fuel lasts."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from cardgen.limits.finding import BoolArray, FloatArray, Verdict
from cardgen.limits.flown import Spans
from cardgen.limits.judge import SLACK, Judged, same_limit
from cardgen.limits.kinds import Rating
from cardgen.records import dataclass


@dataclass(frozen=True, slots=True)
class Ceiling:
    """One rating as all its sources together allow it: the least each of them states.

    `manifold_pressure` [Pa] is inf where no source states one; `time_limit` [s] is None for
    continuous operation.
    """

    name: str
    power: float
    rpm: float
    manifold_pressure: float
    time_limit: float | None


def ceilings(ratings: Sequence[Rating]) -> tuple[Ceiling, ...]:
    """Return ratings with those of one name drawn together to the most restrictive.

    Parameters
    ----------
    ratings : sequence of Rating
        As the profile states them [-]

    Returns
    -------
    tuple of Ceiling
        One per name; limited in time where any of its sources limits it [-]
    """
    found = []
    for group in same_limit(ratings):
        pressures = [r.manifold_pressure for r in group if r.manifold_pressure is not None]
        times = [r.time_limit for r in group if r.time_limit is not None]
        found.append(
            Ceiling(
                name=group[0].name,
                power=min(r.power for r in group),
                rpm=min(r.rpm for r in group),
                manifold_pressure=min(pressures, default=np.inf),
                time_limit=min(times, default=None),
            )
        )
    return tuple(found)


def within(ceiling: Ceiling, spans: Spans) -> tuple[BoolArray, BoolArray, FloatArray]:
    """Return where a rating provably covers settings, where it does not, and the least room.

    Parameters
    ----------
    ceiling : Ceiling
        The rating [-]
    spans : Spans
        True values each setting may have [-]

    Returns
    -------
    tuple of ndarray
        Covered, exceeded, and the least room left as a share of the rated value [-]
    """
    rooms = [
        1.0 - spans.power.high / ceiling.power,
        1.0 - spans.rpm.high / ceiling.rpm,
    ]
    if np.isfinite(ceiling.manifold_pressure):
        rooms.append(1.0 - spans.manifold_pressure.high / ceiling.manifold_pressure)
    covered = np.logical_and.reduce([room >= -SLACK for room in rooms])
    exceeded = np.logical_or.reduce([room < -SLACK for room in rooms])
    return covered, exceeded, np.fmin.reduce(rooms)


def judge_ratings(ratings: Sequence[Rating], spans: Spans) -> Judged:
    """Judge settings as continuous operation under the engine's ratings.

    Parameters
    ----------
    ratings : sequence of Rating
        Every rating of the engine [-]
    spans : Spans
        True values each setting may have [-]

    Returns
    -------
    tuple of ndarray
        Verdict and least room, as a share of the rated value, under the rating that leaves most
        [-], [-]

    Notes
    -----
    A setting is inside if one continuous rating covers its power, rpm and manifold pressure
    together, and outside if each is exceeded in one of them; what a time-limited rating covers
    beyond that is not cruise. If no rating is continuous, what the limited ones cover is unknown.
    """
    every = ceilings(ratings)
    continuous = [c for c in every if c.time_limit is None]
    judged = [within(c, spans) for c in continuous or every]
    covered = np.logical_or.reduce([c for c, _, _ in judged])
    exceeded = np.logical_and.reduce([e for _, e, _ in judged])
    room = np.fmax.reduce([r for _, _, r in judged])
    inside = Verdict.INSIDE if continuous else Verdict.UNKNOWN
    verdict = np.where(
        exceeded, Verdict.OUTSIDE, np.where(covered, inside, Verdict.UNKNOWN)
    ).astype(np.int8)
    return verdict, room
