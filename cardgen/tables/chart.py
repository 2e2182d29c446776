"""The numbers behind a card's charts: what to draw, not how.

A chart for each mixture shows percent power against altitude, a panel for each rpm: lines of one
manifold pressure, the full-throttle line that ends them, and the ground that limits forbid.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import pairwise
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.limits import Findings, Verdict
from cardgen.records import dataclass
from cardgen.tables.back import Area, Axis, Chart, Curve, Panel
from cardgen.tables.choices import CardChoices, UnitSet
from cardgen.tables.printed import message_units, pressure_from
from cardgen.tables.rows import situation_of
from cardgen.tables.solution import Model, Solution, solve
from cardgen.tables.verdict import judge
from cardgen.units import to_unit

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]
Point = tuple[float, float]

ALTITUDES: Final = 13
"""Places at which the lines of the power chart are computed."""

_POWER_STEP: Final = 10.0  # between the named percent powers [%]
_BEYOND: Final = 3.0  # a power that no engine gives, to ask for full throttle [-]

# Between named pressures, and between the pressures at which limits are asked: fine enough that the
# edge of forbidden ground lies within a gauge's width.
_PRESSURE_STEPS: Final = {
    "inHg": (2.0, 0.5),
    "cmHg": (5.0, 1.0),
    "mmHg": (50.0, 10.0),
    "hPa": (50.0, 12.5),
    "mbar": (50.0, 12.5),
    "kPa": (5.0, 1.25),
}
_ALTITUDE_STEPS: Final = {"ft": 2000.0, "m": 500.0}


@dataclass(frozen=True, slots=True)
class Charted:
    """The settings of a power chart, solved and judged; shape (rpm, altitude, pressure).

    Parameters
    ----------
    mixture : int
        Index of the mixture [-]
    altitude : ndarray
        In the card's unit [-]
    pressure : ndarray
        In the card's unit [-]
    solution : Solution
        Settings at those pressures [-]
    ceiling : Solution
        Full throttle, and the least power drawn; shape (rpm, altitude, 2) [-]
    findings : Findings
        What the limits say of the settings [-]
    """

    mixture: int
    altitude: FloatArray
    pressure: FloatArray
    solution: Solution
    ceiling: Solution
    findings: Findings


def charted(model: Model, choices: CardChoices, *, mixture: int) -> Charted:
    """Solve and judge what a power chart shows.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    choices : CardChoices
        What the card shows [-]
    mixture : int
        Index of the mixture [-]

    Returns
    -------
    Charted
        Ready to be drawn once reasons have their letters [-]
    """
    units = choices.units
    by_density = choices.altitude_kind == "density"
    altitude = np.linspace(min(choices.altitude[0], 0.0), choices.altitude[-1], ALTITUDES)
    if choices.altitude[-1] <= choices.altitude[0]:
        altitude = np.linspace(0.0, max(choices.altitude[-1], 1000.0), ALTITUDES)
    situation = situation_of(
        altitude[:, None],
        np.zeros(1),
        by_density=by_density,
        mass=np.array(choices.mass[-1]),
        mixture=mixture,
    )
    rpm = np.array(choices.rpm)[:, None, None]
    least = min(choices.power_fraction) - 0.5 * _POWER_STEP / 100.0
    ends = solve(
        model,
        situation,
        indicated_rpm=rpm,
        power_fraction=np.array([_BEYOND, least]),  # full throttle, and where lines begin
        with_tolerance=False,
    )
    _, fine = _PRESSURE_STEPS[units.pressure]
    low, high = _span(to_unit(ends.indicated_manifold_pressure, units.pressure))
    pressure = fine * np.arange(np.floor(low / fine), np.ceil(high / fine) + 1.0)
    solution = solve(
        model,
        situation,
        indicated_rpm=rpm,
        indicated_pressure=pressure_from(pressure, units.pressure),
        with_tolerance=False,
    )
    return Charted(
        mixture=mixture,
        altitude=np.asarray(to_unit(altitude, units.altitude)),
        pressure=pressure,
        solution=solution,
        ceiling=ends,
        findings=_within_reach(judge(model, solution, units=message_units(units)), solution),
    )


def _within_reach(findings: Findings, solution: Solution) -> Findings:
    """Findings with nothing said beyond full throttle, where no line is drawn either."""
    reached = ~solution.point.full_throttle & np.isfinite(solution.point.power)
    judgements = tuple(
        replace(one, verdict=np.where(reached, one.verdict, np.int8(Verdict.INSIDE)))
        for one in findings.judgements
    )
    return replace(findings, judgements=judgements)


def _span(values: npt.ArrayLike) -> tuple[float, float]:
    """Least and greatest of what is solved, zero where nothing is."""
    known = np.asarray(values)[np.isfinite(values)]
    return (float(known.min()), float(known.max())) if known.size else (0.0, 0.0)


def power_chart(
    model: Model, choices: CardChoices, charted: Charted, *, reasons: npt.NDArray[np.int16]
) -> Chart | None:
    """Percent power against altitude with one mixture.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    choices : CardChoices
        What the card shows [-]
    charted : Charted
        Its settings [-]
    reasons : ndarray
        Index of the reason that forbids each, -1 where none does [-]

    Returns
    -------
    Chart or None
        None where nothing can be drawn [-]
    """
    units = choices.units
    percent = 100.0 * np.where(
        charted.solution.point.full_throttle, np.nan, charted.solution.power_fraction
    )
    ceiling = 100.0 * charted.ceiling.power_fraction[..., 0]
    if not np.isfinite(ceiling).any():
        return None
    up = _power_axis(choices, ceiling)
    name = model.subject.mixtures[charted.mixture].name
    kind = "Density" if choices.altitude_kind == "density" else "Pressure"
    across = Axis(
        f"{kind} altitude, {units.altitude}",
        float(charted.altitude[0]),
        float(charted.altitude[-1]),
        multiples(
            float(charted.altitude[0]), float(charted.altitude[-1]), _ALTITUDE_STEPS[units.altitude]
        ),
    )
    covered = covered_by_evidence(model, charted.findings)
    panels = tuple(
        Panel(
            name=f"{rpm:.0f} rpm",
            curves=(
                *_pressure_lines(
                    charted,
                    k,
                    percent=percent[k],
                    ceiling=ceiling[k],
                    covered=covered[k],
                    units=units,
                ),
                *_ceiling_line(charted, ceiling[k], up),
            ),
            areas=tuple(_areas(charted, percent[k], ceiling[k], reasons[k])),
        )
        for k, rpm in enumerate(choices.rpm)
    )
    return Chart(
        title=f"Power and altitude, {name}",
        lead=(
            f"Thin lines: manifold pressure, {units.pressure}, as the gauge reads, ending where "
            "the evidence ends. Thick line: full throttle. Hatched: forbidden, see the letter. "
            "Standard temperature. Set by the tables, not from here."
        ),
        across=across,
        up=up,
        panels=panels,
    )


def _power_axis(choices: CardChoices, ceiling: FloatArray) -> Axis:
    """Percent powers from below the least asked to above the most there is."""
    least = 100.0 * min(choices.power_fraction)
    most = min(max(100.0 * max(choices.power_fraction) + 5.0, float(np.nanmax(ceiling))), 110.0)
    low = _POWER_STEP * np.floor((least - 5.0) / _POWER_STEP)
    high = _POWER_STEP * np.ceil(most / _POWER_STEP)
    return Axis("% power", float(low), float(high), multiples(low, high, _POWER_STEP))


def multiples(low: float, high: float, step: float) -> tuple[float, ...]:
    """Multiples of a step from one value to another.

    Parameters
    ----------
    low, high : float
        First and last value that may be one [-]
    step : float
        Their distance [-]

    Returns
    -------
    tuple of float
        In rising order [-]
    """
    count = np.arange(np.ceil(low / step - 1e-9), np.floor(high / step + 1e-9) + 1.0)
    return tuple(float(step * k) + 0.0 for k in count)  # + 0.0 makes -0.0 the zero it is


def covered_by_evidence(model: Model, findings: Findings) -> BoolArray:
    """Settings that the evidence covers.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    findings : Findings
        What the limits say of the settings [-]

    Returns
    -------
    ndarray of bool
        All true where there is no fit [-]
    """
    covered = np.ones(findings.shape, dtype=np.bool_)
    if model.knowledge.covers is None:
        return covered
    for judgement in findings.judgements:
        if judgement.limit == "evidence":
            covered &= np.asarray(judgement.verdict == Verdict.INSIDE)
    return covered


def _pressure_lines(
    charted: Charted,
    rpm: int,
    *,
    percent: FloatArray,
    ceiling: FloatArray,
    covered: BoolArray,
    units: UnitSet,
) -> Iterator[Curve]:
    """Lines of one manifold pressure, drawn to full throttle and to the end of the evidence."""
    step, _ = _PRESSURE_STEPS[units.pressure]
    full = to_unit(charted.ceiling.indicated_manifold_pressure[rpm, :, 0], units.pressure)
    full = np.asarray(full)
    for value in multiples(float(charted.pressure[0]), float(charted.pressure[-1]), step):
        place = int(np.argmin(np.abs(charted.pressure - value)))
        points: list[Point] = [
            (float(x), float(y))
            for x, y, seen in zip(
                charted.altitude, percent[:, place], covered[:, place], strict=True
            )
            if seen and np.isfinite(y)
        ]
        end = _meeting(charted.altitude, full, ceiling, value)
        if points and end is not None and points[-1][0] < end[0]:
            step_width = float(charted.altitude[1] - charted.altitude[0])
            if end[0] - points[-1][0] <= 1.001 * step_width:
                points.append(end)
        if len(points) >= 2:
            yield Curve("setting", f"{value:g}", tuple(points))


def _meeting(
    altitude: FloatArray, full: FloatArray, ceiling: FloatArray, pressure: float
) -> Point | None:
    """Where a line of one manifold pressure meets full throttle."""
    for k, (one, other) in enumerate(pairwise(full)):
        if np.isfinite(one) and np.isfinite(other) and one >= pressure > other:
            share = (one - pressure) / (one - other)
            x = altitude[k] + share * (altitude[k + 1] - altitude[k])
            y = ceiling[k] + share * (ceiling[k + 1] - ceiling[k])
            return float(x), float(y)
    return None


def _ceiling_line(charted: Charted, ceiling: FloatArray, up: Axis) -> Iterator[Curve]:
    """The full-throttle line."""
    points = tuple(
        (float(x), float(y))
        for x, y in zip(charted.altitude, ceiling, strict=True)
        if np.isfinite(y) and y >= up.low
    )
    if len(points) >= 2:
        yield Curve("ceiling", "full throttle", points)


# ------------------------------------------------------------------------------- forbidden ground


def _areas(
    charted: Charted, percent: FloatArray, ceiling: FloatArray, reasons: npt.NDArray[np.int16]
) -> Iterator[Area]:
    """Forbidden ground of one panel, reason by reason."""
    edges = _edges(percent, ceiling)
    for reason in sorted(set(reasons.ravel().tolist()) - {-1}):
        pieces = tuple(_pieces(charted.altitude, edges, reasons == reason))
        if pieces:
            yield Area(reason, pieces)


def _edges(percent: FloatArray, ceiling: FloatArray) -> FloatArray:
    """Power half way between neighbouring pressures; shape (altitude, pressure + 1).

    Beyond full throttle it is that of full throttle.
    """
    top = ceiling[:, None]
    known = np.where(np.isfinite(percent), percent, top)
    first = known[:, :1] - 0.5 * (known[:, 1:2] - known[:, :1])
    between = 0.5 * (known[:, 1:] + known[:, :-1])
    last = np.broadcast_to(top, first.shape)
    return np.asarray(np.minimum(np.concatenate([first, between, last], axis=1), top))


def _pieces(
    altitude: FloatArray, edges: FloatArray, forbidden: BoolArray
) -> Iterator[tuple[Point, ...]]:
    """Strips between neighbouring altitudes: runs of pressures forbidden at both or at either."""
    for k in range(altitude.size - 1):
        middle = 0.5 * (altitude[k] + altitude[k + 1])
        both = forbidden[k] & forbidden[k + 1]
        for first, last in _runs(both):
            ends = (altitude[k], altitude[k + 1])
            yield _strip(ends, edges[k], edges[k + 1], run=(first, last))
        half = 0.5 * (edges[k] + edges[k + 1])
        for first, last in _runs(forbidden[k] & ~both):
            yield _strip((altitude[k], middle), edges[k], half, run=(first, last))
        for first, last in _runs(forbidden[k + 1] & ~both):
            yield _strip((middle, altitude[k + 1]), half, edges[k + 1], run=(first, last))


def _runs(flags: BoolArray) -> Iterator[tuple[int, int]]:
    """First and one past the last of every run of true flags."""
    steps = np.diff(np.concatenate([[0], flags.astype(np.int8), [0]]))
    yield from zip(
        np.flatnonzero(steps == 1).tolist(), np.flatnonzero(steps == -1).tolist(), strict=True
    )


def _strip(
    ends: tuple[float, float], low: FloatArray, high: FloatArray, *, run: tuple[int, int]
) -> tuple[Point, ...]:
    """Corners of a strip."""
    (left, right), (first, last) = ends, run
    return (
        (float(left), float(low[first])),
        (float(right), float(high[first])),
        (float(right), float(high[last])),
        (float(left), float(low[last])),
    )
