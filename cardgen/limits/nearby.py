"""Settings near one that is not allowed which give the same power and are allowed."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np

from cardgen.limits.check import check
from cardgen.limits.finding import Findings, FloatArray, Verdict, VerdictWord
from cardgen.limits.flown import Flown
from cardgen.limits.gauges import Gauges
from cardgen.limits.kinds import Limits
from cardgen.limits.wording import MessageUnits
from cardgen.records import dataclass

STEP_RPM: Final = 25.0
"""Finest rpm that is set on a tachometer in flight. Common practice, no source."""

REACH_RPM: Final = 600.0
"""How far from the asked rpm another is looked for: beyond it the setting is a different one."""


@dataclass(frozen=True, slots=True)
class NearbySetting:
    """A setting of the same power that breaks no limit, as the gauges read it."""

    indicated_rpm: float
    indicated_manifold_pressure: float  # [Pa]
    verdict: VerdictWord
    reason: str


def candidate_rpm(
    indicated_rpm: float, *, step: float = STEP_RPM, reach: float = REACH_RPM
) -> FloatArray:
    """Return round rpm around an asked one, without it.

    Parameters
    ----------
    indicated_rpm : float
        What was asked [rpm]
    step : float
        Whole multiples of this are offered [rpm]
    reach : float
        Greatest distance from what was asked [rpm]

    Returns
    -------
    ndarray
        Rising readings [rpm]
    """
    first = np.ceil((indicated_rpm - reach) / step)
    last = np.floor((indicated_rpm + reach) / step)
    rounds = step * np.arange(first, last + 1.0)
    return rounds[(rounds > 0.0) & (np.abs(rounds - indicated_rpm) > 1e-9)]


def allowed_nearby(
    limits: Limits,
    gauges: Gauges,
    *,
    indicated_rpm: float,
    solve: Callable[[FloatArray], Flown],
    candidates: FloatArray | None = None,
    count: int = 3,
    units: MessageUnits | None = None,
) -> tuple[NearbySetting, ...]:
    """Return the nearest settings of equal power that no limit forbids.

    Parameters
    ----------
    limits : Limits
        What the sources state [-]
    gauges : Gauges
        The aircraft's gauges [-]
    indicated_rpm : float
        Tachometer reading that was asked [rpm]
    solve : callable
        Gives the settings of equal power at tachometer readings in rpm, `solved` false where the
        power is out of reach [-]
    candidates : ndarray, optional
        Readings to try; `candidate_rpm` by default [rpm]
    count : int
        How many to return at most [-]
    units : MessageUnits, optional
        Units of the reasons [-]

    Returns
    -------
    tuple of NearbySetting
        Best first, see `rank_nearby` [-]
    """
    tried = candidate_rpm(indicated_rpm) if candidates is None else candidates
    if tried.size == 0:
        return ()
    flown = solve(tried)
    findings = check(limits, gauges, flown, units=units or MessageUnits())
    return rank_nearby(findings, flown, indicated_rpm=indicated_rpm, count=count)


def rank_nearby(
    findings: Findings, flown: Flown, *, indicated_rpm: float, count: int = 3
) -> tuple[NearbySetting, ...]:
    """Rank checked settings by how well and how near they serve instead of an asked one.

    Parameters
    ----------
    findings : Findings
        What `check` says of `flown` [-]
    flown : Flown
        Settings of equal power, one-dimensional [-]
    indicated_rpm : float
        Tachometer reading that was asked [rpm]
    count : int
        How many to return at most [-]

    Returns
    -------
    tuple of NearbySetting
        Best first [-]

    Notes
    -----
    Fewer reservations come first, then the nearer rpm, then the lower. The second is taken from the
    other side of the asked rpm where there is one, since two neighbours are no choice.
    """
    rpm = np.broadcast_to(np.asarray(flown.indicated_rpm, dtype=np.float64), findings.shape)
    pressure = np.broadcast_to(
        np.asarray(flown.indicated_manifold_pressure, dtype=np.float64), findings.shape
    )
    solved = np.broadcast_to(np.asarray(flown.solved, dtype=np.bool_), findings.shape)
    verdict = findings.verdict
    usable = np.flatnonzero((verdict != Verdict.OUTSIDE) & solved & np.isfinite(pressure))
    away = rpm - indicated_rpm
    ranked = sorted((int(i) for i in usable), key=lambda i: (verdict[i], abs(away[i]), rpm[i]))
    if ranked:
        side = np.sign(away[ranked[0]])
        other = next((i for i in ranked if np.sign(away[i]) not in (side, 0.0)), None)
        if other is not None:
            ranked.remove(other)
            ranked.insert(1, other)
    return tuple(
        NearbySetting(
            indicated_rpm=float(rpm[i]),
            indicated_manifold_pressure=float(pressure[i]),
            verdict=Verdict(int(verdict[i])).word,
            reason=_reason(findings, i, away=float(away[i])),
        )
        for i in ranked[:count]
    )


def _reason(findings: Findings, place: int, *, away: float) -> str:
    """Return why a setting is offered, and with what reservation."""
    moved = f"same power {abs(away):.0f} rpm {'higher' if away > 0.0 else 'lower'}"
    match Verdict(int(findings.verdict[place])):
        case Verdict.INSIDE:
            return f"{moved}, inside every limit"
        case Verdict.CAUTION:
            return f"{moved}, with a caution: {findings.at((place,))[0].message}"
        case _:
            doubts = [f.message for f in findings.at((place,)) if f.verdict == "unknown"]
            return f"{moved}, breaks no limit that is known; {'; '.join(doubts)}"
