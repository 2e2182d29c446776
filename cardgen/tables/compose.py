"""The content of one aircraft's card, computed.

Fuel flow and airspeed are those of the asked power, rounded to the safe side. Verdicts are those of
the *printed* setting: manifold pressure is rounded to what a gauge can be set to first, so that the
card and a check of what it prints cannot disagree.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import pressure_altitude_at_density_altitude, standard_temperature
from cardgen.cruise import CruiseStatus
from cardgen.limits import Findings, Judgement, Verdict
from cardgen.limits.bars import bars_of, letter
from cardgen.records import dataclass
from cardgen.tables.back import Back, Chart, Supply
from cardgen.tables.best import best_tables
from cardgen.tables.card import Card, CardTable, CellState, Reason, Section
from cardgen.tables.chart import Charted, charted, power_chart
from cardgen.tables.choices import BreakIn, CardChoices, UnitSet
from cardgen.tables.printed import (
    decimals,
    fuel_flow_in,
    message_units,
    pressure_from,
    rounded,
    rounded_down,
    rounded_up,
    temperature_step_in,
    unit_sign,
)
from cardgen.tables.range import range_tables
from cardgen.tables.rows import situation_of
from cardgen.tables.solution import Model, Situation, Solution, solve
from cardgen.tables.speed_chart import speed_chart
from cardgen.tables.temperature import row_table
from cardgen.tables.verdict import judge
from cardgen.units import to_unit

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]

TEMPERATURE_SPREAD: Final = 20.0
"""Departure from standard over which a density-altitude card states its error, either way [K]."""


_HAIR: Final = 1e-6  # share of rated power that solving may leave a setting off what was asked


@dataclass(frozen=True, slots=True)
class Words:
    """What a card says besides its numbers.

    Parameters
    ----------
    percent_of : str
        What percent power is of [-]
    stamps : tuple of str
        Warnings printed large on every page [-]
    sections : tuple of Section
        What stands on the notes page before the notes that come from the numbers [-]
    digest : str
        Digest of everything the numbers come from [-]
    """

    percent_of: str
    stamps: tuple[str, ...]
    sections: tuple[Section, ...]
    digest: str


@dataclass(frozen=True, slots=True)
class _Block:
    """All tables of one mixture; arrays have shape (mass, power, altitude, temperature, rpm)."""

    mixture: int
    solution: Solution
    findings: Findings
    pressure: FloatArray  # printed
    tolerance: tuple[FloatArray, FloatArray, FloatArray]  # SI


def compose(
    model: Model, choices: CardChoices, *, words: Words, supply: Supply | None = None
) -> Card:
    """Compute a card.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    choices : CardChoices
        What the card shows [-]
    words : Words
        What it says besides [-]
    supply : Supply, optional
        Fuel and winds for range and endurance; without it the card gives neither and says so [-]

    Returns
    -------
    Card
        Its content, rounded as printed [-]
    """
    blocks = [_block(model, choices, model.mixture_index(name)) for name in choices.mixtures]
    drawn = [charted(model, choices, mixture=block.mixture) for block in blocks]
    barred = bars_of([block.findings for block in blocks])
    reasons = [Reason(bar.letter, bar.text, bar.source) for bar in barred.reasons]
    tables = tuple(
        table
        for block, index in zip(blocks, barred.index, strict=True)
        for table in _tables(model, choices, block, index)
    )
    charts: list[Chart | None] = [
        power_chart(model, choices, chart, reasons=index)
        for chart, index in zip(drawn, _lettered(drawn, reasons), strict=True)
    ]
    charts.append(speed_chart(model, choices))
    density = model.subject.aircraft.engine.fuel_density
    back = Back(
        rows=row_table(model, choices, tables=tables),
        ranges=()
        if supply is None
        else range_tables(tables, supply, units=choices.units, fuel_density=density),
        best=best_tables(model, choices),
        charts=tuple(chart for chart in charts if chart is not None),
    )
    notes = (*_temperature_notes(model, choices, blocks), _humidity_note(choices))
    unchecked = Section(
        "Not checked, because the profile does not state it",
        tuple(f"{text}: look it up in the approved flight manual" for text in barred.not_checked),
    )
    return Card(
        choices=choices,
        decimals=decimals(choices.units),
        tables=tables,
        reasons=tuple(reasons),
        percent_of=words.percent_of,
        stamps=words.stamps,
        notes=notes,
        digest=words.digest,
        sections=(*words.sections, *_fuel_section(supply), unchecked),
        back=back,
    )


def _lettered(drawn: Sequence[Charted], reasons: list[Reason]) -> list[npt.NDArray[np.int16]]:
    """Index of the reason behind every charted setting; a reason no table has is added to them."""
    barred = bars_of([chart.findings for chart in drawn])
    places = []
    for bar in barred.reasons:
        known = [
            k for k, one in enumerate(reasons) if (one.text, one.source) == (bar.text, bar.source)
        ]
        if not known:
            known = [len(reasons)]
            reasons.append(Reason(letter(known[0]), bar.text, bar.source))
        places.append(known[0])
    renumber = np.array([*places, -1], dtype=np.int16)
    return [renumber[index] for index in barred.index]


def _fuel_section(supply: Supply | None) -> tuple[Section, ...]:
    """What the card says where it gives no range and endurance."""
    if supply is not None:
        return ()
    words = "Not given: the profile states no usable fuel and reserve."
    return (Section("Range and endurance", (words,)),)


def _situation(model: Model, choices: CardChoices, mixture: int) -> Situation:
    """Where the cells of one mixture are."""
    by_density = choices.altitude_kind == "density"
    deviation = np.zeros(1) if by_density else np.array(choices.isa_deviation)
    return situation_of(
        np.array(choices.altitude)[:, None, None],
        deviation[None, :, None],
        by_density=by_density,
        mass=np.array(choices.mass)[:, None, None, None, None],
        mixture=mixture,
    )


def _block(model: Model, choices: CardChoices, mixture: int) -> _Block:
    """Solve the tables of one mixture, rounded to what is printed."""
    situation = _situation(model, choices, mixture)
    rpm = np.array(choices.rpm)
    fraction = np.array(choices.power_fraction)[:, None, None, None]
    exact = solve(model, situation, indicated_rpm=rpm, power_fraction=fraction)
    if exact.tolerance is None:
        raise AssertionError("tolerances were asked for")
    unit, places = choices.units.pressure, decimals(choices.units).pressure
    reads = np.asarray(to_unit(exact.indicated_manifold_pressure, unit))
    full, down = exact.point.full_throttle, rounded_down(reads, places)
    nearest = rounded(reads, places)
    other = np.where(nearest > reads, down, rounded_up(reads, places))
    # At full throttle the lever is against its stop and the gauge reads what it reads, rounded
    # down where it is printed: neither may break a limit.
    first = np.where(full, exact.indicated_manifold_pressure, pressure_from(nearest, unit))
    second = pressure_from(np.where(full, down, other), unit)
    findings = _judged(model, exact, pressure=first, units=choices.units)
    refused = _refused(findings)
    refused_apart = _refused(_judged(model, exact, pressure=second, units=choices.units))
    # Near a limit the step away from it is taken, if that is allowed.
    swap = np.where(full, ~refused & refused_apart, refused & ~refused_apart)
    if swap.any():
        first = np.where(swap, second, first)
        findings = _judged(model, exact, pressure=first, units=choices.units)
    tolerance = exact.tolerance
    return _Block(
        mixture=mixture,
        solution=exact,
        findings=_with_break_in(findings, exact, choices.break_in),
        pressure=np.where(full, down, np.where(swap, other, nearest)),
        tolerance=(tolerance.manifold_pressure, tolerance.fuel_flow, tolerance.true_airspeed),
    )


def _judged(model: Model, exact: Solution, *, pressure: FloatArray, units: UnitSet) -> Findings:
    """Findings at other readings of the manifold-pressure gauge, given in Pa."""
    solution = solve(
        model,
        exact.situation,
        indicated_rpm=exact.indicated_rpm,
        indicated_pressure=pressure,
        with_tolerance=False,
    )
    return judge(model, solution, units=message_units(units))


def _unsolved(findings: Findings) -> BoolArray:
    """Where a reading has no level flight."""
    found = np.zeros(findings.shape, dtype=np.bool_)
    for judgement in findings.judgements:
        if judgement.limit == "solution":
            found |= judgement.verdict != Verdict.INSIDE
    return found


def _refused(findings: Findings) -> BoolArray:
    """Where a reading cannot be printed: it breaks a limit, or has no level flight."""
    return np.asarray((findings.verdict == Verdict.OUTSIDE) | _unsolved(findings))


def _with_break_in(findings: Findings, solution: Solution, band: BreakIn | None) -> Findings:
    """Findings with the operator's power band added: full throttle may fall below it."""
    if band is None:
        return findings
    fraction = solution.power_fraction
    low, high = band.least_power_fraction, band.greatest_power_fraction
    margin = np.minimum(fraction - low, high - fraction)
    words = f"break-in: keep {100.0 * low:.4g} to {100.0 * high:.4g} % power"
    judgement = Judgement(
        limit="break_in",
        name="Break-in",
        statement=words,
        source=str(band.source),
        verdict=np.where(margin < -_HAIR, Verdict.OUTSIDE, Verdict.INSIDE).astype(np.int8),
        margin=margin,
        unit="%",
        to_unit=lambda share: 100.0 * share,
        describe=lambda index: f"{100.0 * float(fraction[index]):.0f} % power; {words}",
    )
    return replace(findings, judgements=(*findings.judgements, judgement))


def _states(block: _Block, barred: BoolArray) -> npt.NDArray[np.int8]:
    """State of every cell; a broken limit wins over everything else."""
    point = block.solution.point
    state = np.full(point.power.shape, CellState.VALUE, dtype=np.int8)
    state[block.solution.point.full_throttle] = CellState.FULL_THROTTLE
    for judgement in block.findings.judgements:
        if judgement.limit == "evidence":
            beyond = np.broadcast_to(judgement.verdict != Verdict.INSIDE, state.shape)
            state[beyond] = CellState.OUTSIDE_EVIDENCE
    unsolved = (point.status == CruiseStatus.NO_LEVEL_FLIGHT) | (
        point.status == CruiseStatus.OUTSIDE_MODEL
    )
    state[_unsolved(block.findings)] = CellState.OUT_OF_REACH
    state[barred] = CellState.FORBIDDEN
    state[unsolved] = CellState.OUT_OF_REACH
    return state


def _tables(
    model: Model, choices: CardChoices, block: _Block, reasons: npt.NDArray[np.int16]
) -> list[CardTable]:
    """Cut a block into its tables."""
    units, places = choices.units, decimals(choices.units)
    density = model.subject.aircraft.engine.fuel_density
    mixture = model.subject.mixtures[block.mixture]
    point = block.solution.point
    state = _states(block, reasons >= 0)
    shown = (state == CellState.VALUE) | (state == CellState.FULL_THROTTLE)
    flow = rounded_up(
        fuel_flow_in(point.fuel_flow, units.fuel_flow, fuel_density=density), places.fuel_flow
    )
    speed = rounded_down(np.asarray(to_unit(point.true_airspeed, units.speed)), places.speed)
    pressure_tolerance, flow_tolerance, speed_tolerance = block.tolerance
    spreads = (
        np.asarray(to_unit(pressure_tolerance, units.pressure)),
        fuel_flow_in(flow_tolerance, units.fuel_flow, fuel_density=density),
        np.asarray(to_unit(speed_tolerance, units.speed)),
    )
    situation = block.solution.situation
    temperature = np.asarray(to_unit(np.asarray(situation.temperature), units.temperature))
    by_density = choices.altitude_kind == "density"
    deviation = (0.0,) if by_density else choices.isa_deviation
    tables = []
    for i, mass in enumerate(choices.mass):
        for j, fraction in enumerate(choices.power_fraction):
            seen = shown[i, j]
            tables.append(
                CardTable(
                    mixture=mixture.name,
                    mixture_basis=mixture.basis,
                    power_fraction=fraction,
                    mass=mass,
                    altitude=tuple(
                        float(value)
                        for value in np.round(
                            np.asarray(to_unit(np.array(choices.altitude), units.altitude)), 6
                        )
                    ),
                    isa_deviation=tuple(
                        float(value)
                        for value in np.round(
                            temperature_step_in(np.array(deviation), units.temperature), 6
                        )
                    ),
                    outside_air_temperature=rounded(temperature[..., 0], 0),
                    rpm=choices.rpm,
                    state=state[i, j],
                    reason=reasons[i, j].astype(np.int8),
                    manifold_pressure=np.where(seen, block.pressure[i, j], np.nan),
                    fuel_flow=np.where(seen, flow[i, j], np.nan),
                    true_airspeed=np.where(seen, speed[i, j], np.nan),
                    percent_power=np.where(
                        seen, 100.0 * block.solution.power_fraction[i, j], np.nan
                    ),
                    tolerance=_largest(spreads, seen, (i, j)),
                )
            )
    return tables


def _largest(
    spreads: Sequence[FloatArray], seen: BoolArray, at: tuple[int, int]
) -> tuple[float, float, float]:
    """Largest tolerance of each quantity among the numbers of a table, 0 where it has none."""
    pressure, flow, speed = (float(np.max(spread[at][seen], initial=0.0)) for spread in spreads)
    return pressure, flow, speed


def _temperature_notes(
    model: Model, choices: CardChoices, blocks: Sequence[_Block]
) -> tuple[str, ...]:
    """What a density-altitude card assumes of temperature, and the largest error it makes."""
    if choices.altitude_kind != "density":
        return ()
    units = choices.units
    density = model.subject.aircraft.engine.fuel_density
    worst = np.zeros(3)
    altitude = np.array(choices.altitude)[:, None, None]
    spread = np.array([-TEMPERATURE_SPREAD, TEMPERATURE_SPREAD])[:, None]
    for block in blocks:
        pressure = pressure_altitude_at_density_altitude(altitude, spread)
        moved = solve(
            model,
            Situation(
                pressure_altitude=pressure,
                temperature=standard_temperature(pressure) + spread,
                mass=block.solution.situation.mass,
                mixture=block.mixture,
            ),
            indicated_rpm=np.array(choices.rpm),
            power_fraction=np.array(choices.power_fraction)[:, None, None, None],
            with_tolerance=False,
        )
        exact = block.solution
        both = ~exact.point.full_throttle & ~moved.point.full_throttle
        changes = (
            to_unit(
                moved.indicated_manifold_pressure - exact.indicated_manifold_pressure,
                units.pressure,
            ),
            fuel_flow_in(
                moved.point.fuel_flow - exact.point.fuel_flow,
                units.fuel_flow,
                fuel_density=density,
            ),
            to_unit(moved.point.true_airspeed - exact.point.true_airspeed, units.speed),
        )
        for place, change in enumerate(changes):
            found = np.where(both, np.abs(change), 0.0)
            worst[place] = max(worst[place], float(np.nanmax(found, initial=0.0)))
    places = decimals(units)
    pressure_error, flow_error, speed_error = (
        float(rounded_up(np.array(value), count))
        for value, count in zip(worst, (places.pressure, places.fuel_flow, 0), strict=True)
    )
    step = float(temperature_step_in(TEMPERATURE_SPREAD, units.temperature))
    return (
        "Rows are density altitudes, computed in air of standard temperature. In air up to "
        f"{step:.0f} {unit_sign(units.temperature)} warmer or colder, at the same density "
        "altitude, the right numbers of cells that are not at full throttle differ by at most "
        f"{pressure_error:.{places.pressure}f} {units.pressure}, "
        f"{flow_error:.{places.fuel_flow}f} {unit_sign(units.fuel_flow)} and "
        f"{speed_error:.0f} {units.speed}.",
    )


def _humidity_note(choices: CardChoices) -> str:
    """What the card assumes of humidity."""
    if choices.relative_humidity:
        return f"Computed for {100.0 * choices.relative_humidity:.0f} % relative humidity."
    return (
        "Computed for dry air. Humid air gives less power at the same setting: up to some 4 % at "
        "30 °C and saturation."
    )
