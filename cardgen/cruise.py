"""Level cruise: the airspeed at which thrust balances drag, and everything known there.

`balance` gives the residual and every output at any airspeed; `solve_cruise` finds the airspeed
at which the residual vanishes and returns what `balance` says there. The number that is solved for
and the number that is printed therefore cannot differ.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields
from enum import IntEnum
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.aircraft import Aircraft, Condition, Setting
from cardgen.airframe import drag_terms, dynamic_pressure_of_least_power, least_dynamic_pressure
from cardgen.airspeed import calibrated_airspeed, impact_pressure
from cardgen.atmosphere import density, speed_of_sound
from cardgen.constants import GRAVITY
from cardgen.engine import (
    PowerLine,
    brake_power,
    fuel_flow,
    full_throttle_manifold_pressure,
    manifold_pressure,
    power_line,
    relative_air_flow,
)
from cardgen.propeller import (
    CoefficientTable,
    Governing,
    blade_angle_of_attack,
    coefficient_table,
    governing,
    slip,
)
from cardgen.propeller.table import LEAST_ADVANCE_RATIO
from cardgen.records import dataclass
from cardgen.roots import find_root, secant_steps

FloatArray = npt.NDArray[np.float64]

CHUNK: Final = 16384
"""Points solved at a time, so that the work stays in the processor's cache."""

AIRSPEED_TOLERANCE: Final = 1e-7
"""Largest error of a solved airspeed [m/s]."""

# Where the airspeed is first looked for, over the one that drag alone allows; how many steps are
# taken from there, and the last step [m/s] after which the error is below the tolerance.
_SHARE_OF_FASTEST: Final = 0.87
_SECANT_STEPS: Final = 4
_SETTLED: Final = 1e-4


class CruiseStatus(IntEnum):
    """Why a point has, or has not, an answer."""

    OK = 0
    FINE_STOP = 1  # solved, but the governor cannot hold the rpm: it sags
    COARSE_STOP = 2  # solved, but the governor cannot hold the rpm: it climbs
    NO_LEVEL_FLIGHT = 3  # not enough power to fly level
    OUTSIDE_MODEL = 4  # rpm, mixture, air or propeller outside what the model covers

    @property
    def word(self) -> str:
        """The reason word of the machine-readable output."""
        return self.name.lower()


@dataclass(frozen=True, slots=True)
class CruisePoint:
    """Level cruise at any number of points; every field is an array of one shape.

    Parameters
    ----------
    residual : ndarray
        Thrust less drag [N]
    true_airspeed, calibrated_airspeed : ndarray
        Airspeeds [m/s]
    power : ndarray
        Brake power [W]
    manifold_pressure : ndarray
        Manifold pressure that gives it [Pa]
    full_throttle_manifold_pressure : ndarray
        Manifold pressure with the throttle wide open at this airspeed [Pa]
    full_throttle : ndarray of bool
        Whether what was asked lies beyond full throttle, which was taken instead [-]
    fuel_flow : ndarray
        Fuel flow [kg/s]
    relative_air_flow : ndarray
        Air flow over rated air flow [-]
    thrust : ndarray
        Installed thrust [N]
    propeller_efficiency : ndarray
        Thrust power over brake power [-]
    blade_angle : ndarray
        Blade angle at 0.75 R [rad]
    angle_of_attack : ndarray
        Blade angle less helix angle at 0.75 R [rad]
    advance_ratio : ndarray
        V / (n D) [-]
    tip_mach : ndarray
        Mach number of the blade tip, rotation and flight together [-]
    slip : ndarray
        Geometric less effective pitch, over geometric [-]
    status : ndarray of int8
        Values of `CruiseStatus` [-]
    """

    residual: FloatArray
    true_airspeed: FloatArray
    calibrated_airspeed: FloatArray
    power: FloatArray
    manifold_pressure: FloatArray
    full_throttle_manifold_pressure: FloatArray
    full_throttle: npt.NDArray[np.bool_]
    fuel_flow: FloatArray
    relative_air_flow: FloatArray
    thrust: FloatArray
    propeller_efficiency: FloatArray
    blade_angle: FloatArray
    angle_of_attack: FloatArray
    advance_ratio: FloatArray
    tip_mach: FloatArray
    slip: FloatArray
    status: npt.NDArray[np.int8]


@dataclass(frozen=True, slots=True)
class _Problem:
    """What does not change while the airspeed is sought; the fields broadcast together."""

    line: PowerLine
    asked: FloatArray  # manifold pressure [Pa]
    pressure: FloatArray
    temperature: FloatArray
    density: FloatArray
    sound: FloatArray
    parasite: FloatArray
    induced: FloatArray
    advance: FloatArray  # n D, so that J = V / advance [m/s]
    power_scale: FloatArray  # rho n^3 D^5 [W]
    thrust_scale: FloatArray  # installation factor x rho n^2 D^4 [N]
    rotation: FloatArray  # Mach number of the tip's rotation [-]


@dataclass(frozen=True, slots=True)
class _Engine:
    """The engine at an airspeed."""

    manifold_pressure: FloatArray
    full_throttle: FloatArray
    power: FloatArray


def _problem(aircraft: Aircraft, condition: Condition, setting: Setting) -> _Problem:
    """Everything about the points that airspeed does not change."""
    engine, propeller = aircraft.engine, aircraft.propeller
    line = power_line(
        engine,
        setting.rpm,
        mixture=setting.mixture,
        pressure=condition.pressure,
        temperature=condition.temperature,
        vapour_pressure=condition.vapour_pressure,
    )
    asked = _asked_manifold_pressure(line, setting)
    air = density(
        condition.pressure, condition.temperature, vapour_pressure=condition.vapour_pressure
    )
    sound = speed_of_sound(condition.temperature)
    parasite, induced = drag_terms(aircraft.airframe, weight=condition.mass * GRAVITY)
    diameter = propeller.diameter
    turns = np.asarray(setting.rpm, dtype=np.float64) * engine.gear_ratio / 60.0
    return _Problem(
        line=line,
        asked=asked,
        pressure=np.asarray(condition.pressure, dtype=np.float64),
        temperature=np.asarray(condition.temperature, dtype=np.float64),
        density=air,
        sound=sound,
        parasite=parasite,
        induced=induced,
        advance=turns * diameter,
        power_scale=air * turns**3 * diameter**5,
        thrust_scale=propeller.installation_factor * air * turns**2 * diameter**4,
        rotation=np.pi * turns * diameter / sound,
    )


def _asked_manifold_pressure(line: PowerLine, setting: Setting) -> FloatArray:
    """Manifold pressure of a setting, within reach or not [Pa]."""
    if setting.power is None:
        return np.asarray(setting.manifold_pressure, dtype=np.float64)
    needed = manifold_pressure(line, setting.power)
    if setting.manifold_pressure is None:
        return needed
    return np.where(np.isnan(setting.power), setting.manifold_pressure, needed)


def _engine_at(problem: _Problem, airspeed: FloatArray) -> _Engine:
    """Power at an airspeed: what was asked, or full throttle where that is less."""
    impact = impact_pressure(airspeed, problem.pressure, temperature=problem.temperature)
    full = full_throttle_manifold_pressure(problem.line, impact)
    taken = np.minimum(problem.asked, full)
    return _Engine(taken, full, brake_power(problem.line, taken))


def _drag_at(problem: _Problem, airspeed: FloatArray) -> FloatArray:
    """Drag of level flight [N]."""
    q = 0.5 * problem.density * airspeed * airspeed
    return np.asarray(problem.parasite * q + problem.induced / q)


def _residual(table: CoefficientTable, problem: _Problem, airspeed: FloatArray) -> FloatArray:
    """Thrust less drag [N]."""
    thrust = problem.thrust_scale * table.governed_thrust(
        airspeed / problem.advance,
        power_coefficient=_engine_at(problem, airspeed).power / problem.power_scale,
        tip_mach=problem.rotation,
    )
    return np.asarray(thrust - _drag_at(problem, airspeed))


def balance(
    aircraft: Aircraft, condition: Condition, *, setting: Setting, true_airspeed: npt.ArrayLike
) -> CruisePoint:
    """Thrust less drag at an airspeed, and everything else that is known there.

    Parameters
    ----------
    aircraft : Aircraft
        Engine, propeller and airframe [-]
    condition : Condition
        The air and the load [-]
    setting : Setting
        What the pilot sets [-]
    true_airspeed : array_like
        Airspeed, level or not [m/s]

    Returns
    -------
    CruisePoint
        Arrays of the broadcast shape; NaN and `OUTSIDE_MODEL` where the model has no answer [-]
    """
    problem = _problem(aircraft, condition, setting)
    airspeed = np.asarray(true_airspeed, dtype=np.float64)
    shape = np.broadcast_shapes(_shape(problem), airspeed.shape)
    return _outputs(aircraft, problem, np.broadcast_to(airspeed, shape))


def _outputs(aircraft: Aircraft, problem: _Problem, airspeed: FloatArray) -> CruisePoint:
    """Every output at an airspeed of full shape."""
    table = coefficient_table(aircraft.propeller)
    engine = _engine_at(problem, airspeed)
    j = airspeed / problem.advance
    angle, thrust_coefficient = table.governed(
        j, power_coefficient=engine.power / problem.power_scale, tip_mach=problem.rotation
    )
    thrust = problem.thrust_scale * thrust_coefficient
    held = governing(aircraft.propeller, angle)
    status = np.full(airspeed.shape, CruiseStatus.OK, dtype=np.int8)
    status[held == Governing.FINE_STOP] = CruiseStatus.FINE_STOP
    status[held == Governing.COARSE_STOP] = CruiseStatus.COARSE_STOP
    status[np.isnan(thrust)] = CruiseStatus.OUTSIDE_MODEL

    def full(values: npt.ArrayLike) -> FloatArray:
        return np.where(np.isnan(thrust), np.nan, values)

    with np.errstate(divide="ignore", invalid="ignore"):
        efficiency = thrust * airspeed / engine.power
    return CruisePoint(
        residual=np.asarray(thrust - _drag_at(problem, airspeed)),
        true_airspeed=full(airspeed),
        calibrated_airspeed=full(
            calibrated_airspeed(airspeed, problem.pressure, temperature=problem.temperature)
        ),
        power=full(engine.power),
        manifold_pressure=full(engine.manifold_pressure),
        full_throttle_manifold_pressure=full(engine.full_throttle),
        full_throttle=np.asarray((problem.asked > engine.full_throttle) & ~np.isnan(thrust)),
        fuel_flow=full(fuel_flow(problem.line, engine.manifold_pressure)),
        relative_air_flow=full(relative_air_flow(problem.line, engine.manifold_pressure)),
        thrust=thrust,
        propeller_efficiency=efficiency,
        blade_angle=np.asarray(angle),
        angle_of_attack=blade_angle_of_attack(j, blade_angle=angle),
        advance_ratio=full(j),
        tip_mach=full(problem.rotation * np.sqrt(1.0 + (j / np.pi) ** 2)),
        slip=slip(j, blade_angle=angle),
        status=status,
    )


def solve_cruise(aircraft: Aircraft, condition: Condition, *, setting: Setting) -> CruisePoint:
    """Level cruise on the fast side of the drag curve.

    Parameters
    ----------
    aircraft : Aircraft
        Engine, propeller and airframe [-]
    condition : Condition
        The air and the load; arrays broadcast with those of the setting and the aircraft [-]
    setting : Setting
        What the pilot sets [-]

    Returns
    -------
    CruisePoint
        Arrays of the broadcast shape. Where the asked power or manifold pressure is out of reach,
        the full-throttle setting with what it really gives; where there is no level flight or the
        model does not cover the point, NaN and the reason in `status` [-]

    Notes
    -----
    The airspeed lies between the speed of least power in level flight (or the lift
    ceiling, if faster) and the speed at which drag alone would take all the power.
    """
    problem = _problem(aircraft, condition, setting)
    shape = _shape(problem)
    lower, upper = _brackets(aircraft, condition, problem)
    flat = tuple(_flat(values, shape) for values in (lower, upper, *_values(problem)))
    size = int(np.prod(shape))
    pieces = [
        _solve_chunk(
            aircraft, *(item if item.ndim == 0 else item[start : start + CHUNK] for item in flat)
        )
        for start in range(0, max(size, 1), CHUNK)
    ]
    return CruisePoint(
        **{
            field.name: np.concatenate(
                [np.atleast_1d(getattr(piece, field.name)) for piece in pieces]
            )[:size].reshape(shape)
            for field in fields(CruisePoint)
        }
    )


def _shape(problem: _Problem) -> tuple[int, ...]:
    """Shape of the points."""
    return np.broadcast_shapes(*(values.shape for values in _values(problem)))


def _values(problem: _Problem) -> tuple[FloatArray, ...]:
    """The numbers of a problem in the order in which `_rebuilt` takes them."""
    line = (np.asarray(getattr(problem.line, field.name)) for field in fields(PowerLine))
    rest = (getattr(problem, field.name) for field in fields(_Problem) if field.name != "line")
    return (*line, *rest)


def _rebuilt(values: tuple[FloatArray, ...]) -> _Problem:
    """Inverse of `_values`."""
    count = len(fields(PowerLine))
    return _Problem(PowerLine(*values[:count]), *values[count:])


def _flat(values: FloatArray, shape: tuple[int, ...]) -> FloatArray:
    """Values as one run of all points, or as one number where they are all the same."""
    if values.size == 1:
        return values.reshape(())
    return np.broadcast_to(values, shape).reshape(-1)


def _brackets(
    aircraft: Aircraft, condition: Condition, problem: _Problem
) -> tuple[FloatArray, FloatArray]:
    """Airspeeds between which the fast root lies [m/s]."""
    table = coefficient_table(aircraft.propeller)
    weight = condition.mass * GRAVITY
    slowest = np.maximum(
        least_dynamic_pressure(aircraft.airframe, weight=weight),
        dynamic_pressure_of_least_power(aircraft.airframe, weight=weight),
    )
    lower = np.sqrt(2.0 * slowest / problem.density)
    # The margins keep the ends of the bracket inside the table, and ram inside the power bound.
    lower = np.maximum(lower, LEAST_ADVANCE_RATIO * problem.advance * (1.0 + 1e-9))
    greatest = _engine_at(problem, 0.5 * problem.sound).power
    fastest = np.cbrt(2.0 * np.maximum(greatest, 0.0) / (problem.density * problem.parasite))
    upper = np.minimum(fastest, table.greatest_advance_ratio * problem.advance * (1.0 - 1e-9))
    upper = np.minimum(upper, 0.5 * problem.sound)
    # Without power the fastest is 0, where drag is not a number: a bracket of no width instead.
    return np.asarray(lower), np.asarray(np.maximum(upper, lower))


def _fast_root(
    surplus: Callable[..., FloatArray],
    lower: FloatArray,
    upper: FloatArray,
    values: tuple[FloatArray, ...],
) -> FloatArray:
    """Airspeed at which the surplus of thrust vanishes, NaN where it does not [m/s]."""
    shape = np.broadcast_shapes(lower.shape, upper.shape, *(item.shape for item in values))
    low, high = (np.broadcast_to(end, shape) for end in (lower, upper))
    guess = np.maximum(_SHARE_OF_FASTEST * high, low)
    root, step = secant_steps(
        lambda airspeed: surplus(airspeed, *values),
        guess,
        0.98 * guess,
        lower=low,
        upper=high,
        steps=_SECANT_STEPS,
    )
    settled = (surplus(low, *values) > 0.0) & (step < _SETTLED) & (root > low) & (root < high)
    if settled.all():
        return root
    rest = ~settled
    picked = (np.broadcast_to(item, shape)[rest] for item in values)
    root = np.array(root)
    root[rest] = find_root(
        surplus, low[rest], high[rest], arguments=tuple(picked), tolerance=AIRSPEED_TOLERANCE
    )
    return root


def _solve_chunk(
    aircraft: Aircraft, lower: FloatArray, upper: FloatArray, *values: FloatArray
) -> CruisePoint:
    """Solve a run of points."""
    table = coefficient_table(aircraft.propeller)

    def surplus(airspeed: FloatArray, *numbers: FloatArray) -> FloatArray:
        return _residual(table, _rebuilt(numbers), airspeed)

    root = _fast_root(surplus, lower, upper, values)
    point = _outputs(aircraft, _rebuilt(values), root)
    unsolved = np.isnan(root)
    if unsolved.any():
        short = (surplus(lower, *values) < 0.0) | (upper <= lower)
        point.status[unsolved & short] = CruiseStatus.NO_LEVEL_FLIGHT
    return point
