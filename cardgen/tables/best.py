"""The settings that go farthest and stay up longest, found within every limit."""

from __future__ import annotations

import math
from typing import Any, Final, Literal

import numpy as np
import numpy.typing as npt

from cardgen.limits import Findings, Verdict
from cardgen.records import dataclass
from cardgen.tables.back import BestSettings, BestTable
from cardgen.tables.choices import CardChoices, UnitSet
from cardgen.tables.printed import (
    decimals,
    fuel_flow_in,
    pressure_from,
    rounded,
    rounded_down,
    rounded_up,
)
from cardgen.tables.rows import situation_of
from cardgen.tables.solution import Model, Situation, Solution, solve
from cardgen.tables.verdict import judge
from cardgen.units import to_unit

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]
AIMS: Final[tuple[Literal["range", "endurance"], ...]] = ("range", "endurance")

RPM_STEP: Final = 50.0
"""Between the rpm searched: what a tachometer is set to."""

POWER_STEP: Final = 0.02
"""Between the powers searched; about the best both aims change by less than the tolerance."""

LEAST_POWER: Final = 0.30
"""Where the search begins; less does not keep a loaded aeroplane up in cruise."""


@dataclass(frozen=True, slots=True)
class _Search:
    """Settings solved and held against every limit; shape (mass, altitude, rpm, power)."""

    solution: Solution
    allowed: BoolArray


def best_tables(model: Model, choices: CardChoices) -> tuple[BestTable, ...]:
    """Best settings of every mixture and mass of a card.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    choices : CardChoices
        What the card shows [-]

    Returns
    -------
    tuple of BestTable
        Mixture by mixture, masses within [-]

    Notes
    -----
    The settings searched are a grid of rpm by power at the altitudes of the card, in still air and
    in air of standard temperature. Each is solved and judged; the best of those that no limit
    forbids is rounded as printed and judged again.
    """
    return tuple(
        table
        for name in choices.mixtures
        for table in _mixture(model, choices, model.mixture_index(name))
    )


def _grid(model: Model, choices: CardChoices) -> tuple[FloatArray, FloatArray]:
    """Rpm and powers searched: what card and evidence span."""
    low, high = choices.rpm[0], choices.rpm[-1]
    covers = model.knowledge.covers
    if covers is not None:
        low, high = min(low, covers.rpm[0]), max(high, covers.rpm[1])
    rpm = np.arange(np.floor(low / RPM_STEP), np.ceil(high / RPM_STEP) + 1.0) * RPM_STEP
    least, most = LEAST_POWER, max(choices.power_fraction)
    if covers is not None:
        # One step below the evidence shows that its edge is what ends the search.
        lowest = covers.power[0] / model.percent_of.power - POWER_STEP
        least = max(least, POWER_STEP * math.floor(lowest / POWER_STEP - 1.0))
    if choices.break_in is not None:
        least = max(least, choices.break_in.least_power_fraction)
    return rpm, np.arange(least, most + 0.5 * POWER_STEP, POWER_STEP)


def _situation(choices: CardChoices, mixture: int) -> Situation:
    """Where the settings are: every mass and altitude, standard temperature."""
    return situation_of(
        np.array(choices.altitude)[:, None, None],
        np.zeros(1),
        by_density=choices.altitude_kind == "density",
        mass=np.array(choices.mass)[:, None, None, None],
        mixture=mixture,
    )


def _allowed(model: Model, solution: Solution, findings: Findings) -> BoolArray:
    """Settings that no limit forbids, that are solved, and that the evidence covers."""
    allowed = (findings.verdict != Verdict.OUTSIDE) & ~np.isnan(solution.point.power)
    if model.knowledge.covers is not None:
        for judgement in findings.judgements:
            if judgement.limit == "evidence":
                allowed = allowed & (judgement.verdict == Verdict.INSIDE)
    return np.asarray(allowed)


def _search(model: Model, choices: CardChoices, mixture: int) -> _Search:
    """Solve and judge the whole grid."""
    rpm, power = _grid(model, choices)
    solution = solve(
        model,
        _situation(choices, mixture),
        indicated_rpm=rpm[:, None],
        power_fraction=power,
        with_tolerance=False,
    )
    # Full throttle stands in for powers out of reach: one setting under several names.
    allowed = _allowed(model, solution, judge(model, solution)) & ~solution.point.full_throttle
    return _Search(solution, allowed)


def _mixture(model: Model, choices: CardChoices, mixture: int) -> list[BestTable]:
    """Best settings with one mixture."""
    search = _search(model, choices, mixture)
    point = search.solution.point
    # For every aim, mass and altitude the best of all rpm and powers.
    merit = np.stack([point.true_airspeed / point.fuel_flow, 1.0 / point.fuel_flow])
    shape = (*merit.shape[:3], -1)
    place = np.argmax(np.where(search.allowed, merit, -np.inf).reshape(shape), axis=-1)
    units = choices.units
    altitude = tuple(
        float(value)
        for value in np.round(np.asarray(to_unit(np.array(choices.altitude), units.altitude)), 6)
    )
    settings = _printed(model, choices, search, place)
    return [
        BestTable(
            mixture=model.subject.mixtures[mixture].name,
            mass=mass,
            altitude=altitude,
            settings=tuple(_of_mass(all_masses, k) for all_masses in settings),
        )
        for k, mass in enumerate(choices.mass)
    ]


def _at(values: npt.NDArray[Any], place: npt.NDArray[np.intp]) -> npt.NDArray[Any]:
    """Values of shape (mass, altitude, rpm, power) at places of shape (aim, mass, altitude)."""
    flat = np.broadcast_to(values.reshape(*values.shape[:2], -1), (*place.shape, values[0, 0].size))
    return np.take_along_axis(flat, place[..., None], axis=-1)[..., 0]


def _lower_barred(search: _Search, place: npt.NDArray[np.intp]) -> BoolArray:
    """Whether the next lower power at the same rpm was solved but not allowed, or not searched."""
    lower = np.maximum(place - 1, 0)
    first = place % search.allowed.shape[-1] == 0
    flies = ~np.isnan(_at(search.solution.point.power, lower))
    return np.asarray(first | (~_at(search.allowed, lower) & flies))


def _printed(
    model: Model, choices: CardChoices, search: _Search, place: npt.NDArray[np.intp]
) -> list[BestSettings]:
    """The best settings as printed, for each aim with arrays of shape (mass, altitude)."""
    units, places = choices.units, decimals(choices.units)
    exact = search.solution
    found = _at(search.allowed, place)
    rpm = _at(exact.indicated_rpm, place)
    reads = np.asarray(to_unit(_at(exact.indicated_manifold_pressure, place), units.pressure))
    nearest = rounded(reads, places.pressure)
    situation = exact.situation
    flat = Situation(
        pressure_altitude=np.asarray(situation.pressure_altitude)[..., 0, 0],
        temperature=np.asarray(situation.temperature)[..., 0, 0],
        mass=np.asarray(situation.mass)[..., 0, 0],
        mixture=situation.mixture,
    )
    solved, allowed = _judged(model, flat, rpm=rpm, printed=nearest, unit=units.pressure)
    swap = ~allowed & found
    if swap.any():  # the step to the other side of what was computed
        up, down = rounded_up(reads, places.pressure), rounded_down(reads, places.pressure)
        nearest = np.where(swap, np.where(nearest > reads, down, up), nearest)
        solved, allowed = _judged(model, flat, rpm=rpm, printed=nearest, unit=units.pressure)
    shown = allowed & found
    density = model.subject.aircraft.engine.fuel_density
    flow = rounded_up(
        fuel_flow_in(solved.point.fuel_flow, units.fuel_flow, fuel_density=density),
        places.fuel_flow,
    )
    speed = rounded_down(np.asarray(to_unit(solved.point.true_airspeed, units.speed)), places.speed)
    reach = rounded_down(speed / flow, per_fuel_places(units.fuel_flow))
    edge = _lower_barred(search, place) & shown
    rpm, nearest, flow, speed, reach = (
        np.where(shown, values, np.nan) for values in (rpm, nearest, flow, speed, reach)
    )
    return [
        BestSettings(
            aim=aim,
            rpm=rpm[k],
            manifold_pressure=nearest[k],
            fuel_flow=flow[k],
            true_airspeed=speed[k],
            distance_per_fuel=reach[k],
            at_edge=edge[k],
            tolerance=_tolerance(solved, k, shown, units=units, fuel_density=density),
        )
        for k, aim in enumerate(AIMS)
    ]


def _tolerance(
    solved: Solution, aim: int, shown: BoolArray, *, units: UnitSet, fuel_density: float
) -> tuple[float, float, float]:
    """Largest 95 % tolerance of pressure, fuel flow and speed of the settings for one aim."""
    spread = solved.tolerance
    if spread is None:
        raise AssertionError("tolerances were asked for")
    pressure, flow, speed = (
        float(np.max(values[aim][shown[aim]], initial=0.0))
        for values in (
            np.asarray(to_unit(spread.manifold_pressure, units.pressure)),
            fuel_flow_in(spread.fuel_flow, units.fuel_flow, fuel_density=fuel_density),
            np.asarray(to_unit(spread.true_airspeed, units.speed)),
        )
    )
    return pressure, flow, speed


def per_fuel_places(flow_unit: str) -> int:
    """Decimal places of a distance on one unit of fuel.

    Parameters
    ----------
    flow_unit : str
        Unit of fuel flow [-]

    Returns
    -------
    int
        One for gallons, which take an aeroplane some ten units of distance, else two [-]
    """
    return 1 if "gal" in flow_unit else 2


def _judged(
    model: Model, situation: Situation, *, rpm: FloatArray, printed: FloatArray, unit: str
) -> tuple[Solution, BoolArray]:
    """Printed settings solved, and whether each is allowed."""
    solution = solve(
        model,
        situation,
        indicated_rpm=rpm,
        indicated_pressure=pressure_from(printed, unit),
    )
    return solution, _allowed(model, solution, judge(model, solution))


def _of_mass(settings: BestSettings, k: int) -> BestSettings:
    """The rows of one mass."""
    return BestSettings(
        settings.aim,
        settings.rpm[k],
        settings.manifold_pressure[k],
        settings.fuel_flow[k],
        settings.true_airspeed[k],
        settings.distance_per_fuel[k],
        settings.at_edge[k],
        settings.tolerance,
    )
