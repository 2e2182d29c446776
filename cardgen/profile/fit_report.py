"""What a fit tells: lines for the mechanic, an object for programs, warnings for the fit file."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any, Final

import numpy as np
import numpy.typing as npt

from cardgen.constants import GALLON_US, HOUR, INCH_OF_MERCURY, KNOT
from cardgen.fit import (
    PARTS,
    Estimate,
    carried_over,
    parameters,
    standard_deviations,
)
from cardgen.fit.oddities import Oddity, odd_rows
from cardgen.fit.suspicion import Suspicion
from cardgen.profile.assembly import model_of, subject_of
from cardgen.profile.document import Profile
from cardgen.profile.fit_words import parameter_words, sign_of, suspicion_text
from cardgen.profile.fitting import Start, knowledge_of
from cardgen.profile.points import Points
from cardgen.records import dataclass
from cardgen.tables.flights import FlightPlan, points_to_fly
from cardgen.tables.printed import decimals, fuel_flow_in, unit_sign
from cardgen.units import to_unit

FloatArray = npt.NDArray[np.float64]

_UNUSUAL_FROM: Final = 2.5  # prior deviations
QUANTITIES: Final = ("manifold pressure", "fuel flow", "true airspeed")
_JSON_NAMES: Final = ("manifold_pressure_inhg", "fuel_flow_gph", "true_airspeed_kt")
_MOST_ODD: Final = 12


@dataclass(frozen=True, slots=True)
class FitReport:
    """Everything there is to tell of a fit.

    Parameters
    ----------
    profile : Profile
        The aircraft [-]
    points : Points
        The evidence [-]
    start : Start
        What was known before [-]
    found : Estimate
        What was found [-]
    suspicions : tuple of Suspicion
        Columns that look wrong and were fitted all the same [-]
    oddities : tuple of Oddity
        Rows that look wrong [-]
    plan : FlightPlan
        What to fly next [-]
    """

    profile: Profile
    points: Points
    start: Start
    found: Estimate
    suspicions: tuple[Suspicion, ...]
    oddities: tuple[Oddity, ...]
    plan: FlightPlan


def report_of(
    profile: Profile,
    points: Points,
    start: Start,
    *,
    found: Estimate,
    suspicions: tuple[Suspicion, ...] = (),
) -> FitReport:
    """Look for what is odd in a fit and for what to fly next.

    Parameters
    ----------
    profile : Profile
        The aircraft [-]
    points : Points
        The evidence [-]
    start : Start
        What was known before [-]
    found : Estimate
        What was found [-]
    suspicions : tuple of Suspicion
        Columns that look wrong and were fitted all the same [-]

    Returns
    -------
    FitReport
        Everything there is to tell [-]
    """
    subject = subject_of(profile)
    knowledge = carried_over(
        subject, knowledge_of(profile, points, start, found=found), unchanged=PARTS
    )
    return FitReport(
        profile,
        points,
        start,
        found,
        suspicions,
        odd_rows(subject, points.evidence, found, points.readings),
        points_to_fly(replace(model_of(profile), knowledge=knowledge), profile.card),
    )


def warnings_of(report: FitReport) -> tuple[str, ...]:
    """Return what a user of a fit must be wary of.

    Parameters
    ----------
    report : FitReport
        The fit [-]

    Returns
    -------
    tuple of str
        One sentence each [-]
    """
    return (
        *(
            f"{suspicion.reading.file}: {suspicion.reading.column}: {suspicion_text(suspicion)} "
            "(accepted as it is)"
            for suspicion in report.suspicions
        ),
        *(_oddity_text(report, oddity) for oddity in report.oddities[:_MOST_ODD]),
        *_more_odd(report),
        *_unusual(report),
        *_weights(report),
        *report.start.notes,
        *report.points.notes,
    )


def _more_odd(report: FitReport) -> Iterator[str]:
    """Yield how many odd rows are not told one by one."""
    if len(report.oddities) > _MOST_ODD:
        yield f"{len(report.oddities) - _MOST_ODD} more rows look wrong."


def _unusual(report: FitReport) -> Iterator[str]:
    """Yield parameters that the evidence drove far from where such aircraft have them."""
    found = report.found
    away = (found.values - found.prior) / found.prior_deviation
    for place, name in enumerate(found.names):
        if abs(away[place]) > _UNUSUAL_FROM:
            yield (
                f"{parameter_words(name)} came out {found.values[place]:.3g}, far from the usual "
                f"{found.prior[place]:.3g}: check the data sheet behind it, and the evidence."
            )


def _weights(report: FitReport) -> Iterator[str]:
    """Yield how many rows have a weight that this aircraft can hardly have."""
    share = report.points.evidence.mass / report.profile.gross_mass
    odd = (share > 1.05) | (share < 0.5)
    if odd.any():
        first = report.points.evidence.place[int(np.argmax(odd))]
        yield (
            f"{int(odd.sum())} rows have a weight above the greatest of the profile or below half "
            f"of it, the first at {first}: is the unit right?"
        )


def _in_units(report: FitReport, values: npt.ArrayLike, quantity: int) -> FloatArray:
    """Return values of a quantity in the units of the card."""
    units = report.profile.card.units
    si = np.asarray(values, dtype=np.float64)
    if quantity == 1:
        density = report.profile.aircraft.engine.fuel_density
        return np.asarray(fuel_flow_in(si, units.fuel_flow, fuel_density=density))
    return np.asarray(to_unit(si, units.pressure if quantity == 0 else units.speed))


def printed(report: FitReport, value: float, quantity: int, *, more: int = 0) -> str:
    """Return a value with its unit, as on the card.

    Parameters
    ----------
    report : FitReport
        The fit, whose card has the units [-]
    value : float
        The value [SI]
    quantity : int
        Which, by `QUANTITIES` [-]
    more : int
        Decimal places beyond those of the card [-]

    Returns
    -------
    str
        Such as "22.5 inHg" [-]
    """
    units = report.profile.card.units
    places = decimals(units)
    digits = (places.pressure, places.fuel_flow, places.speed)[quantity] + more
    unit = (units.pressure, units.fuel_flow, units.speed)[quantity]
    number = float(_in_units(report, value, quantity))
    return f"{number:.{digits}f} {unit_sign(unit)}"


def _oddity_text(report: FitReport, oddity: Oddity) -> str:
    """Return why a row looks wrong."""
    place = report.points.evidence.place[oddity.row]
    name = QUANTITIES[oddity.quantity]
    said = printed(report, oddity.read, oddity.quantity)
    others = printed(report, oddity.expected, oddity.quantity)
    unit = sign_of(oddity.unit) if oddity.unit else ""
    reasons = {
        "unit": f"; it looks like {unit}",
        "temperature unit": f"; with its temperature in {unit} it would agree",
        "not full throttle": (
            "; the power it states needs full throttle here, and full throttle does not give this "
            "manifold pressure: check altitude, rpm and power"
        ),
        "full throttle": "; it looks like full throttle, with less power than it states",
        "above": "; that is above the pressure of the air at this altitude",
        "": "; a slip of a digit, or a row flown in unsteady air?",
    }
    return f"{place}: {name} {said}, the other rows lead to {others}{reasons[oddity.why]}"


def report_object(report: FitReport) -> dict[str, Any]:
    """Return a report for programs.

    Parameters
    ----------
    report : FitReport
        The fit [-]

    Returns
    -------
    dict
        Parameters, residuals, rms, leave_one_out_rms and warnings; units in the names [-]
    """
    found = report.found
    evidence = report.points.evidence
    read = evidence.read()
    deviations = standard_deviations(evidence)
    gallon = GALLON_US * report.profile.aircraft.engine.fuel_density
    units = (INCH_OF_MERCURY, gallon / HOUR, KNOT)
    residuals = []
    for row, place in enumerate(evidence.place):
        file, _, line = place.rpartition(":")
        for quantity, name in enumerate(_JSON_NAMES):
            if np.isnan(found.residual[row, quantity]):
                continue
            unit = units[quantity]
            residuals.append(
                {
                    "file": file,
                    "line": int(line),
                    "source": "flight" if evidence.flight[row] else "handbook",
                    "quantity": name,
                    "value": float(read[row, quantity] / unit),
                    "predicted": float((read + found.residual)[row, quantity] / unit),
                    "residual": float(found.residual[row, quantity] / unit),
                    "leave_one_out": float(found.left_out[row, quantity] / unit),
                    "standard_deviation": float(deviations[row, quantity] / unit),
                }
            )
    return {
        "parameters": [
            {
                "name": item.name,
                "value": float(found.values[place]),
                "prior": float(found.prior[place]),
                "standard_error": float(found.standard_error[place]),
            }
            for place, item in enumerate(parameters(report.profile.mixtures))
        ],
        "residuals": residuals,
        "rms": _named(found.rms(), units),
        "leave_one_out_rms": _named(found.left_out_rms(), units),
        "warnings": list(warnings_of(report)),
    }


def _named(values: FloatArray, units: tuple[float, float, float]) -> dict[str, float | None]:
    """Return one number per quantity by name, null where nothing was read."""
    return {
        name: None if np.isnan(value) else float(value / unit)
        for name, value, unit in zip(_JSON_NAMES, values, units, strict=True)
    }
