"""Settings of two aircraft side by side: what moved, and by more than is known of it?"""

from __future__ import annotations

from collections.abc import Collection
from typing import Final, Literal

import numpy as np
import numpy.typing as npt

from cardgen.aircraft import Condition, Setting
from cardgen.atmosphere import standard_pressure, vapour_pressure
from cardgen.compare.joint import common_names, shifts
from cardgen.cruise import CruiseStatus, solve_cruise
from cardgen.fit import Part, applied, parameters
from cardgen.fit.tolerance import COVERAGE_FACTOR
from cardgen.limits.gauges import indicated_manifold_pressure, true_rpm
from cardgen.records import dataclass
from cardgen.tables.choices import CardChoices
from cardgen.tables.rows import situation_of
from cardgen.tables.solution import Model, Situation, Solution, solve
from cardgen.tables.verdict import judge, status_words

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]

Basis = Literal["percent", "power"]

QUANTITIES: Final = ("manifold_pressure", "fuel_flow", "true_airspeed", "specific_range")
"""What is compared, in the order of every last axis: indicated pressure [Pa], volume of fuel
[m³/s], speed [m/s], distance per volume of fuel in still air [m/m³]."""


_UNSOLVED: Final = (CruiseStatus.NO_LEVEL_FLIGHT.word, CruiseStatus.OUTSIDE_MODEL.word)


@dataclass(frozen=True, slots=True)
class Side:
    """One aircraft's settings.

    Parameters
    ----------
    solution : Solution
        The settings [-]
    values : ndarray, shape (..., 4)
        `QUANTITIES` [SI]
    status : ndarray of str
        `ok`, or the word for why a setting is not [-]
    """

    solution: Solution
    values: FloatArray
    status: npt.NDArray[np.str_]


@dataclass(frozen=True, slots=True)
class Change:
    """Settings of one mixture before and after; arrays (mass, power, altitude, temperature, rpm).

    Parameters
    ----------
    basis : str
        Whether both make the same percent power or the same power [-]
    mixture : str
        Name of the mixture [-]
    power_fraction : ndarray
        Share of the newer rating that is asked of the newer aircraft [-]
    isa_deviation : ndarray
        Departure of temperature from standard at the pressure altitude [K]
    old, new : Side
        The settings [-]
    difference : ndarray, shape (..., 4)
        New less old [SI]
    tolerance : ndarray, shape (..., 4)
        95 % tolerance of the difference [SI]
    compared : ndarray of bool
        Where both give the power asked; elsewhere one is at full throttle or has no answer [-]
    """

    basis: Basis
    mixture: str
    power_fraction: FloatArray
    isa_deviation: FloatArray
    old: Side
    new: Side
    difference: FloatArray
    tolerance: FloatArray
    compared: BoolArray

    @property
    def lost(self) -> BoolArray:
        """Where a setting was allowed before and is not now."""
        barred = (self.new.status != "ok") & ~np.isin(self.new.status, _UNSOLVED)
        return np.asarray((self.old.status == "ok") & barred)

    @property
    def significant(self) -> BoolArray:
        """Where a difference is larger than its tolerance, shape (..., 4)."""
        larger = np.abs(self.difference) > self.tolerance
        return np.asarray(larger & self.compared[..., None])


def bases(old: Model, new: Model) -> tuple[Basis, ...]:
    """Return the ways in which settings can be compared.

    Parameters
    ----------
    old, new : Model
        The aircraft before and after [-]

    Returns
    -------
    tuple of str
        One where the same percent is the same power [-]
    """
    if np.isclose(old.percent_of.power, new.percent_of.power, rtol=1e-9):
        return ("percent",)
    return ("percent", "power")


def compare_settings(
    old: Model, new: Model, *, choices: CardChoices, basis: Basis, unchanged: Collection[Part]
) -> tuple[Change, ...]:
    """Compare the settings of two aircraft.

    Parameters
    ----------
    old, new : Model
        The aircraft before and after [-]
    choices : CardChoices
        Altitudes, temperatures, masses, powers and rpm that are compared [-]
    basis : str
        Whether the same percent power or the same power is asked of both [-]
    unchanged : collection of str
        Parts that are the same in both [-]

    Returns
    -------
    tuple of Change
        One for each mixture that both have [-]
    """
    before = {mixture.name.casefold() for mixture in old.subject.mixtures}
    return tuple(
        _change(old, new, choices, basis, mixture=name, unchanged=unchanged)
        for name in choices.mixtures
        if name.casefold() in before
    )


def _change(
    old: Model,
    new: Model,
    choices: CardChoices,
    basis: Basis,
    *,
    mixture: str,
    unchanged: Collection[Part],
) -> Change:
    """Compare the settings of one mixture."""
    fraction = np.array(choices.power_fraction)[:, None, None, None]
    # Asked of the newer aircraft is what the older one makes at its own percent.
    ratio = old.percent_of.power / new.percent_of.power if basis == "power" else 1.0
    sides = []
    for model, asked in ((old, fraction), (new, fraction * ratio)):
        situation = _situation(model, choices, mixture)
        solution = solve(
            model,
            situation,
            indicated_rpm=np.array(choices.rpm),
            power_fraction=asked,
            with_tolerance=False,
        )
        words = status_words(judge(model, solution), solution)
        shape = solution.point.power.shape
        values = _values(
            solution.indicated_manifold_pressure,
            solution.point.fuel_flow,
            solution.point.true_airspeed,
            fuel_density=model.subject.aircraft.engine.fuel_density,
        )
        sides.append(Side(solution, values, np.array(words).reshape(shape)))
    before, after = sides
    answered = ~np.isnan(before.values).any(axis=-1) & ~np.isnan(after.values).any(axis=-1)
    full = before.solution.point.full_throttle | after.solution.point.full_throttle
    return Change(
        basis=basis,
        mixture=mixture,
        power_fraction=np.broadcast_to(fraction * ratio, answered.shape),
        isa_deviation=_deviation(choices)[None, :, None],
        old=before,
        new=after,
        difference=after.values - before.values,
        tolerance=_tolerance((old, new), (before, after), (fraction, fraction * ratio), unchanged),
        compared=answered & ~full,
    )


def _situation(model: Model, choices: CardChoices, mixture: str) -> Situation:
    """Where the settings are, as on a card."""
    return situation_of(
        np.array(choices.altitude)[:, None, None],
        _deviation(choices)[None, :, None],
        by_density=choices.altitude_kind == "density",
        mass=np.array(choices.mass)[:, None, None, None, None],
        mixture=model.mixture_index(mixture),
    )


def _deviation(choices: CardChoices) -> FloatArray:
    """Departures from standard temperature: a card by density altitude has no other than 0."""
    by_density = choices.altitude_kind == "density"
    return np.zeros(1) if by_density else np.array(choices.isa_deviation)


def _values(
    pressure: FloatArray, fuel_flow: FloatArray, speed: FloatArray, *, fuel_density: float
) -> FloatArray:
    """`QUANTITIES` of settings."""
    volume = fuel_flow / fuel_density
    return np.stack(np.broadcast_arrays(pressure, volume, speed, speed / volume), axis=-1)


def _tolerance(
    models: tuple[Model, Model],
    sides: tuple[Side, Side],
    asked: tuple[FloatArray, FloatArray],
    unchanged: Collection[Part],
) -> FloatArray:
    """95 % tolerance of the difference, common parameters shifted in both at once."""
    old, new = models
    common = common_names(
        old.knowledge,
        new.knowledge,
        listed=parameters(new.subject.mixtures),
        unchanged=unchanged,
    )
    along = shifts(old.knowledge, new.knowledge, common=common)
    moved = [
        _shifted(model, side, power, shift)
        for model, side, power, shift in zip(
            models, sides, asked, (along.old, along.new), strict=True
        )
    ]
    apart = moved[1] - moved[0]
    count = len(along.old)
    change = 0.5 * (apart[:count] - apart[count:])
    # Where a shifted aircraft has no answer that axis says nothing, as in a single tolerance.
    variance = np.nansum(change**2, axis=0)
    for model, side in zip(models, sides, strict=True):
        pressure, flow, speed = model.knowledge.scatter
        density = model.subject.aircraft.engine.fuel_density
        values = side.values.reshape(-1, len(QUANTITIES))
        scatter = np.empty_like(values)
        scatter[:, 0], scatter[:, 1], scatter[:, 2] = pressure, flow / density, speed
        relative = np.hypot(scatter[:, 1] / values[:, 1], scatter[:, 2] / values[:, 2])
        scatter[:, 3] = values[:, 3] * relative
        variance = variance + scatter**2
    return np.asarray(COVERAGE_FACTOR * np.sqrt(variance)).reshape(sides[0].values.shape)


def _shifted(model: Model, side: Side, asked: FloatArray, shift: FloatArray) -> FloatArray:
    """`QUANTITIES` of an aircraft with its parameters shifted up and down, (2 k, points, 4)."""
    solution = side.solution
    shape = solution.point.power.shape

    def run(values: npt.ArrayLike) -> FloatArray:
        return np.broadcast_to(np.asarray(values, dtype=np.float64), shape).reshape(-1)

    values = model.knowledge.values
    aircraft, mixtures = applied(
        model.subject.aircraft,
        model.subject.mixtures,
        values=np.concatenate([values + shift, values - shift]),
    )
    temperature = run(solution.situation.temperature)
    humidity = model.relative_humidity
    condition = Condition(
        standard_pressure(run(solution.situation.pressure_altitude)),
        temperature,
        run(solution.situation.mass),
        vapour_pressure(humidity, temperature) if humidity else 0.0,
    )
    setting = Setting(
        true_rpm(model.gauges, run(solution.indicated_rpm)),
        mixtures[solution.situation.mixture],
        power=run(asked) * model.percent_of.power,
        manifold_pressure=None,
    )
    point = solve_cruise(aircraft, condition, setting=setting)
    return _values(
        indicated_manifold_pressure(model.gauges, point.manifold_pressure),
        point.fuel_flow,
        point.true_airspeed,
        fuel_density=model.subject.aircraft.engine.fuel_density,
    )
