"""Single rows that look wrong, and why."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, Literal

import numpy as np
import numpy.typing as npt

from cardgen.fit.estimate import Estimate
from cardgen.fit.evidence import Evidence, Reading, standard_deviations
from cardgen.fit.model import Subject, cruise_of_rows, predict
from cardgen.fit.rereading import AIRSPEEDS, alternatives, reread
from cardgen.records import dataclass
from cardgen.units import Unit

FloatArray = npt.NDArray[np.float64]

ODD_FROM: Final = 4.0
"""Deviations from what the other rows lead to, beyond which a number looks wrong [-]."""

_FINE: Final = 2.0  # deviations within which another reading explains a row
_MOST_RAM: Final = 6.0e3  # manifold pressure over ambient, without a compressor [Pa]

Why = Literal["unit", "temperature unit", "not full throttle", "full throttle", "above", ""]


@dataclass(frozen=True, slots=True)
class Oddity:
    """A number that does not go with the others.

    Parameters
    ----------
    row : int
        Row of the evidence [-]
    quantity : int
        Which number, by `cardgen.fit.evidence.QUANTITIES` [-]
    read : float
        What the row states, in true values [SI]
    expected : float
        What the other rows lead to [SI]
    deviations : float
        How far apart the two are, over the deviation expected of that [-]
    why : str
        What it looks like: a number in another unit, a temperature in another unit, a row that
        cannot be at full throttle as it states, one that is though it states less, a pressure
        above that of the air; "" where nothing explains it [-]
    unit : Unit, optional
        The unit it looks like [-]
    """

    row: int
    quantity: int
    read: float
    expected: float
    deviations: float
    why: Why
    unit: Unit | None = None


def odd_rows(
    subject: Subject, evidence: Evidence, estimate: Estimate, readings: Sequence[Reading]
) -> tuple[Oddity, ...]:
    """Find numbers that do not go with the other rows.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures as the profile builds them [-]
    evidence : Evidence
        The rows [-]
    estimate : Estimate
        The fit to them [-]
    readings : sequence of Reading
        Columns of the files [-]

    Returns
    -------
    tuple of Oddity
        Of every odd row its worst number, worst row first [-]
    """
    expected = standard_deviations(evidence)
    # Where all rows scatter more than assumed, a row must be odd beside those.
    deviations = np.abs(estimate.standardised) * expected / np.maximum(expected, estimate.scatter)
    worst = np.nan_to_num(deviations).max(axis=1)
    order = [int(row) for row in np.argsort(-worst, kind="stable") if worst[row] > ODD_FROM]
    point = cruise_of_rows(subject, evidence, values=estimate.values)
    found = []
    for row in order:
        quantity = int(np.nanargmax(deviations[row]))
        read = float(evidence.read()[row, quantity])
        why, unit = _why(subject, evidence, estimate, readings, row=row, quantity=quantity)
        if not why and quantity == 0:
            full = float(point.full_throttle_manifold_pressure[row])
            near = ODD_FROM * float(np.maximum(expected, estimate.scatter)[row, 0])
            if read > evidence.pressure[row] + _MOST_RAM:
                why = "above"
            elif point.full_throttle[row]:
                why = "not full throttle"
            elif abs(read - full) < near:
                why = "full throttle"
        found.append(
            Oddity(
                row=row,
                quantity=quantity,
                read=read,
                expected=read + float(estimate.left_out[row, quantity]),
                deviations=float(deviations[row, quantity]),
                why=why,
                unit=unit,
            )
        )
    return tuple(found)


def _why(
    subject: Subject,
    evidence: Evidence,
    estimate: Estimate,
    readings: Sequence[Reading],
    *,
    row: int,
    quantity: int,
) -> tuple[Why, Unit | None]:
    """Return whether another unit explains a row."""
    density = subject.aircraft.engine.fuel_density
    allowed = np.maximum(standard_deviations(evidence), estimate.scatter)[row]
    names = (("map",), ("fuel_flow",), AIRSPEEDS)[quantity]
    for reading in readings:
        if not reading.rows[row]:
            continue
        for unit in alternatives(reading):
            other = reread(evidence, reading, unit=unit, fuel_density=density).rows(np.array([row]))
            if reading.quantity in names:
                error = _error(subject, other, estimate)[quantity] / allowed[quantity]
                if abs(error) < _FINE:
                    return "unit", unit
            elif reading.quantity in ("oat", "isa_deviation"):
                errors = _error(subject, other, estimate) / allowed
                if (np.abs(errors[~np.isnan(errors)]) < _FINE).all():
                    return "temperature unit", unit
    return "", None


def _error(subject: Subject, one: Evidence, estimate: Estimate) -> FloatArray:
    """Return model less evidence of one row."""
    return np.asarray((predict(subject, one, values=estimate.values) - one.read())[0])
