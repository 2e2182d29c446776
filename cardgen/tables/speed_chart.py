"""The numbers behind the chart of fuel flow against airspeed: what to draw, not how.

A panel for each mixture, a line for each of a few altitudes, and lines of one distance on a unit of
fuel. A line ends where limits or evidence end.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final

import numpy as np

from cardgen.limits import Verdict
from cardgen.tables.back import Axis, Chart, Curve, Panel
from cardgen.tables.chart import covered_by_evidence, multiples
from cardgen.tables.choices import CardChoices
from cardgen.tables.printed import fuel_flow_in, unit_sign
from cardgen.tables.range import fuel_unit
from cardgen.tables.rows import situation_of
from cardgen.tables.solution import Model, solve
from cardgen.tables.verdict import judge
from cardgen.units import to_unit

FLIGHT_LEVELS: Final = 3
"""Most altitudes drawn in the speed chart; more would run into each other."""

LEAST_DRAWN: Final = 0.40
MORE_DRAWN: Final = 0.10
POWER_STEP: Final = 0.02
"""Where lines of the speed chart begin, how far beyond the tables they go, and in which steps."""


_NICE: Final = (1.0, 2.0, 5.0)


def speed_chart(model: Model, choices: CardChoices) -> Chart | None:
    """Fuel flow against airspeed, a panel for each mixture.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    choices : CardChoices
        What the card shows [-]

    Returns
    -------
    Chart or None
        None where nothing can be drawn [-]
    """
    units = choices.units
    rpm = choices.rpm[len(choices.rpm) // 2]
    levels = _levels(choices)
    drawn = [
        (name, _speed_curves(model, choices, mixture=model.mixture_index(name), rpm=rpm))
        for name in choices.mixtures
    ]
    points = [point for _, curves in drawn for curve in curves for point in curve.points]
    if not points:
        return None
    speeds, flows = zip(*points, strict=True)
    across = _axis(f"True airspeed, {units.speed}", min(speeds), max(speeds), 5)
    up = _axis(f"Fuel flow, {unit_sign(units.fuel_flow)}", min(flows), max(flows), 4)
    distance = {"kt": "nm", "mph": "mi", "km/h": "km"}[units.speed]
    per = f"{distance}/{unit_sign(fuel_unit(units.fuel_flow))}"
    rays = tuple(_rays(across, up, per))
    at = ", ".join(f"{float(to_unit(level, units.altitude)):.0f}" for level in levels)
    kind = "density" if choices.altitude_kind == "density" else "pressure"
    return Chart(
        title="Fuel flow and airspeed",
        lead=(
            f"At {rpm:.0f} rpm and {kind} altitudes {at} {units.altitude}, heaviest mass of this "
            f"card, standard temperature. Thick lines: fuel flow, ending where limits or evidence "
            f"end. Thin lines: {per} in still air."
        ),
        across=across,
        up=up,
        panels=tuple(Panel(name, (*rays, *curves)) for name, curves in drawn),
    )


def _levels(choices: CardChoices) -> tuple[float, ...]:
    """Lowest, middle and highest altitude of the card [m]."""
    altitude = choices.altitude
    places = sorted({0, (len(altitude) - 1) // 2, len(altitude) - 1})
    return tuple(altitude[place] for place in places)[:FLIGHT_LEVELS]


def _speed_curves(
    model: Model, choices: CardChoices, *, mixture: int, rpm: float
) -> tuple[Curve, ...]:
    """Fuel flow against airspeed at each level."""
    units = choices.units
    levels = _levels(choices)
    least, most = LEAST_DRAWN, max(choices.power_fraction) + MORE_DRAWN
    if choices.break_in is not None:
        least, most = choices.break_in.least_power_fraction, max(choices.power_fraction)
    power = np.arange(least, most + 0.5 * POWER_STEP, POWER_STEP)
    solution = solve(
        model,
        situation_of(
            np.array(levels)[:, None],
            np.zeros(1),
            by_density=choices.altitude_kind == "density",
            mass=np.array(choices.mass[-1]),
            mixture=mixture,
        ),
        indicated_rpm=rpm,
        power_fraction=power,
        with_tolerance=False,
    )
    findings = judge(model, solution)
    density = model.subject.aircraft.engine.fuel_density
    seen = (
        (findings.verdict != Verdict.OUTSIDE)
        & covered_by_evidence(model, findings)
        & ~solution.point.full_throttle
        & np.isfinite(solution.point.power)
    )
    speed = np.asarray(to_unit(solution.point.true_airspeed, units.speed))
    flow = fuel_flow_in(solution.point.fuel_flow, units.fuel_flow, fuel_density=density)
    curves = []
    for k, level in enumerate(levels):
        points = tuple(
            (float(x), float(y)) for x, y in zip(speed[k][seen[k]], flow[k][seen[k]], strict=True)
        )
        if len(points) >= 2:
            label = f"{float(to_unit(level, units.altitude)):.0f} {units.altitude}"
            curves.append(Curve("setting", label, points))
    return tuple(curves)


def _axis(label: str, low: float, high: float, count: int) -> Axis:
    """An axis about values, with some round ticks."""
    step = _nice((high - low) / count)
    start, end = step * np.floor(low / step), step * np.ceil(high / step + 0.05)
    return Axis(label, float(start), float(end), multiples(float(start), float(end), step))


def _nice(raw: float) -> float:
    """The least of 1, 2, 5, 10, ... that is not below a number."""
    if raw <= 0.0:
        return 1.0
    decade: float = 10.0 ** math.floor(math.log10(raw))
    steps = (n * decade for n in _NICE if n * decade >= raw * 0.999)
    return next(steps, 10.0 * decade)


def _rays(across: Axis, up: Axis, per: str) -> Iterator[Curve]:
    """Lines of one distance on a unit of fuel, within the axes."""
    least = across.low / up.high
    most = across.high / max(up.low, 1e-9)
    for value in multiples(least, most, _nice((most - least) / 9.0)):
        if value <= 0.0:
            continue
        start = max(across.low, up.low * value)
        end = min(across.high, up.high * value)
        if end - start > 0.12 * (across.high - across.low):
            points = ((start, start / value), (end, end / value))
            yield Curve("ray", f"{value:g} {per}", points)
