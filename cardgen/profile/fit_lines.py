"""What a fit tells, as lines for whoever keeps the aircraft."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Final

import numpy as np

from cardgen.profile.fit_report import QUANTITIES, FitReport, printed, warnings_of
from cardgen.profile.fit_words import parameter_words
from cardgen.units import to_unit

UNDETERMINED_FROM: Final = 0.8
"""Standard error over prior deviation, beyond which the evidence has not determined a number."""


def report_lines(report: FitReport) -> list[str]:
    """Return a report for people.

    Parameters
    ----------
    report : FitReport
        The fit [-]

    Returns
    -------
    list of str
        Lines [-]
    """
    flown = int(report.points.evidence.flight.sum())
    count = len(report.points.evidence)
    lines = [
        f"{report.profile.name}: fitted to {count} rows, {count - flown} of a handbook and "
        f"{flown} flown, from {', '.join(report.points.files)}.",
        *report.start.notes,
        "",
        *_quality_lines(report),
        "",
        *_parameter_lines(report),
        "",
        *_doubt_lines(report),
        "",
        *_plan_lines(report),
    ]
    if report.points.notes:
        lines += ["", "Assumed", *(f"  {note}" for note in report.points.notes)]
    return lines


def _quality_lines(report: FitReport) -> Iterator[str]:
    """Yield how well each quantity is met."""
    yield "How well it fits     all rows    rows not seen   worst row"
    rms, unseen = report.found.rms(), report.found.left_out_rms()
    for quantity, name in enumerate(QUANTITIES):
        column = report.found.residual[:, quantity]
        if np.isnan(rms[quantity]):
            yield f"  {name:18s} no row states it, or it was what each row set"
            continue
        worst = int(np.nanargmax(np.abs(column)))
        yield (
            f"  {name:18s} {printed(report, rms[quantity], quantity, more=1):11s} "
            f"{printed(report, unseen[quantity], quantity, more=1):15s} "
            f"{printed(report, column[worst], quantity, more=1)} at "
            f"{report.points.evidence.place[worst]}"
        )
    yield "Root mean squares. Rows not seen: each row predicted from all the others."


def _parameter_lines(report: FitReport) -> Iterator[str]:
    """Yield what was found, and what was not."""
    found = report.found
    yield f"{'What was found':38s} before    found    standard error"
    for place, name in enumerate(found.names):
        yield (
            f"  {parameter_words(name):36s} {found.prior[place]:7.3f}  {found.values[place]:7.3f}  "
            f"± {found.standard_error[place]:.3f}"
        )
    weak = found.standard_error > UNDETERMINED_FROM * found.prior_deviation
    if weak.any():
        yield "Not determined by these rows, hardly surer than before:"
        yield from (
            f"  {parameter_words(name)}"
            for name, is_weak in zip(found.names, weak, strict=True)
            if is_weak
        )


def _doubt_lines(report: FitReport) -> Iterator[str]:
    """Yield what looks wrong."""
    doubts = [
        warning
        for warning in warnings_of(report)
        if warning not in (*report.start.notes, *report.points.notes)
    ]
    yield "What looks wrong" if doubts else "No column and no row looks wrong."
    yield from (f"  {doubt}" for doubt in doubts)


def _plan_lines(report: FitReport) -> Iterator[str]:
    """Yield what to fly next."""
    plan = report.plan
    if not plan.points:
        yield "What to fly next: no setting of this card is free of limits and cautions."
        return
    yield "What to fly next, to learn most (gauge readings; --sheet prints them with blanks)"
    units = report.profile.card.units
    for place, point in enumerate(plan.points, start=1):
        altitude = float(to_unit(point.pressure_altitude, units.altitude))
        yield (
            f"  {place}. {altitude:.0f} {units.altitude}, {point.indicated_rpm:.0f} rpm, "
            f"{printed(report, point.indicated_pressure, 0)}, {point.mixture}"
        )
    for word, tolerance in (("now", plan.before), ("then", plan.after)):
        parts = ", ".join(
            f"±{printed(report, tolerance[quantity], quantity, more=int(quantity == 2))}"
            for quantity in range(3)
        )
        yield f"  Tolerance of the card {word}: {parts}"
