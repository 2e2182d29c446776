"""A second solver of level cruise: scalar, slow, written again from the documented formulas.

It shares with the package the numbers that describe an aircraft, the section constants, the points
of the mixture curve and the loss factor of helical wakes. Everything else is its own: atmosphere,
engine (full throttle by root finding instead of a quadratic), strip solution (other stations,
other quadrature, no table of coefficients), the governor and the balance of thrust and drag, all
by `scipy.optimize.brentq`, one point at a time.

Run ``python -m tests.independent_solver`` for the figures.
"""

from __future__ import annotations

import math
import sys
from dataclasses import dataclass
from functools import cached_property, lru_cache
from pathlib import Path

import numpy as np
from scipy.interpolate import BarycentricInterpolator, PchipInterpolator
from scipy.optimize import brentq

sys.path.insert(0, str(Path(__file__).parent))  # the tests import one another by bare name

from aircraft_specimens import random_aircraft, random_mass

from cardgen.aircraft import Aircraft, Condition, Setting
from cardgen.cruise import CruisePoint, CruiseStatus, solve_cruise
from cardgen.engine import BREATHING_NODES, Mixture, mixture
from cardgen.propeller import Propeller, section
from cardgen.propeller.loss import loss_factor

STATIONS = 24

# Standard atmosphere, ISO 2533 and U.S. Standard Atmosphere 1976.
G, R, P0, T0, GAMMA = 9.80665, 8.31432 / 28.9644e-3, 101325.0, 288.15, 1.4
R_VAPOUR = 8.31432 / 18.015268e-3
RHO0 = P0 / (R * T0)
FUEL_HEAT = 43.5e6


@dataclass(frozen=True)
class Air:
    """Air at a point, from pressure altitude, deviation and vapour pressure."""

    altitude: float
    deviation: float
    vapour: float

    @cached_property
    def temperature(self) -> float:
        """Temperature below the tropopause [K]."""
        return T0 - 0.0065 * self.altitude + self.deviation

    @cached_property
    def pressure(self) -> float:
        """Pressure [Pa]."""
        return P0 * (1.0 - 0.0065 * self.altitude / T0) ** (G / (R * 0.0065))

    @cached_property
    def density(self) -> float:
        """Density of dry air and vapour together [kg/m³]."""
        return (self.pressure - self.vapour) / (R * self.temperature) + self.vapour / (
            R_VAPOUR * self.temperature
        )

    @cached_property
    def sound(self) -> float:
        """Speed of sound [m/s]."""
        return math.sqrt(GAMMA * R * self.temperature)

    def impact(self, airspeed: float) -> float:
        """Impact pressure, compressible [Pa]."""
        mach = airspeed / self.sound
        return self.pressure * ((1.0 + 0.2 * mach * mach) ** 3.5 - 1.0)


class EngineAgain:
    """The engine at one rpm and mixture in one air."""

    def __init__(self, aircraft: Aircraft, air: Air, rpm: float, how: Mixture) -> None:
        """Work out what manifold pressure does not change."""
        engine = self.engine = aircraft.engine
        self.air, self.rpm = air, rpm
        self.displaced = engine.displacement * rpm / 60.0 / 2.0
        self.rated_displaced = engine.displacement * engine.rated_rpm / 60.0 / 2.0
        residual = engine.back_pressure_effect / (1.3 * (engine.compression_ratio - 1.0))
        self.residual = residual * engine.rated_rpm / rpm
        lost = engine.induction.loss * P0
        self.rated_effective = (P0 - lost) - residual * lost
        nodes = np.array(BREATHING_NODES)
        share = rpm / engine.rated_rpm
        eta = BarycentricInterpolator(nodes, 1.0 + np.array([*engine.breathing, 0.0]))(share)
        self.charge = (
            share
            * float(eta)
            * (T0 / air.temperature) ** engine.charge_temperature_exponent
            * (1.0 - air.vapour / air.pressure)
        )
        rated_indicated = (
            engine.rated_power
            + self.friction(engine.rated_rpm)
            + engine.back_pressure_effect * lost * self.rated_displaced
        )
        richness = how.fuel_air_ratio
        relative = float(_mixture_curve()(richness))
        self.indicated = engine.level * rated_indicated * relative
        compression = (1.0 - engine.compression_ratio**-0.3) / (1.0 - 8.5**-0.3)
        self.fuel = (
            engine.level
            * rated_indicated
            / (0.31 * compression * FUEL_HEAT)
            * richness
            / 0.0775
            * how.fuel_scale
        )

    def friction(self, rpm: float) -> float:
        """Friction power [W]."""
        n = rpm / 1000.0
        mep = self.engine.friction_scale * (97.0 + 15.0 * n + 5.0 * n * n) * 1000.0
        return mep * self.engine.displacement * rpm / 60.0 / 2.0

    def air_flow(self, manifold: float) -> float:
        """Air flow over rated air flow."""
        backed_up = self.residual * (manifold - self.air.pressure)
        return self.charge * (manifold + backed_up) / self.rated_effective

    def power(self, manifold: float) -> float:
        """Brake power [W]."""
        across = manifold - self.air.pressure
        pumped = self.engine.back_pressure_effect * across * self.displaced
        return self.indicated * self.air_flow(manifold) + pumped - self.friction(self.rpm)

    def full_throttle(self, airspeed: float) -> float:
        """Manifold pressure with the throttle wide open [Pa]."""
        induction = self.engine.induction
        offered = self.air.pressure + induction.ram_recovery * self.air.impact(airspeed)
        at_rated = induction.loss * P0 * RHO0 / self.air.density

        def excess(manifold: float) -> float:
            return manifold - offered + at_rated * self.air_flow(manifold) ** 2

        return brentq(excess, 0.2 * offered, 1.1 * offered, xtol=1e-6)

    def manifold_for(self, power: float) -> float:
        """Manifold pressure that gives a power, whether or not within reach [Pa]."""
        return brentq(lambda p: self.power(p) - power, 1e3, 3e5, xtol=1e-6)


@lru_cache(maxsize=1)
def _mixture_curve() -> PchipInterpolator:
    """Relative power against fuel-air ratio, through the package's points."""
    curve = mixture._POWER
    return PchipInterpolator(curve.x, curve.y, extrapolate=False)


class StripAgain:
    """The propeller, strip by strip."""

    def __init__(self, propeller: Propeller) -> None:
        """Lay out the stations: substitution x = tip - (1 - hub) u², another than the package's."""
        blade = propeller.blade
        nodes, weights = np.polynomial.legendre.leggauss(STATIONS)
        u = 0.5 * (nodes + 1.0)
        hub = blade.radius_fraction[0]
        x = 1.0 - (1.0 - hub) * u * u
        order = np.argsort(x)
        x = x[order]
        self.weight = ((1.0 - hub) * u * weights)[order].tolist()
        stations = np.array(blade.radius_fraction)
        self.x = x.tolist()
        self.chord = PchipInterpolator(stations, blade.chord_to_diameter)(x).tolist()
        self.thickness = PchipInterpolator(stations, blade.thickness_to_chord)(x).tolist()
        self.twist = PchipInterpolator(stations, blade.twist)(x).tolist()
        self.blades = propeller.blade_count
        loss = loss_factor(self.blades, hub, stations=tuple(self.x))
        self.loss = [
            (float(middle), float(half), [float(term[k, 0]) for term in loss.terms])
            for k, (middle, half) in enumerate(
                zip(loss.middle[:, 0], loss.half_width[:, 0], strict=True)
            )
        ]

    def coefficients(
        self, j: float, beta: float, tip_mach: float, start: list[float]
    ) -> tuple[float, float]:
        """C_P and C_T; `start` holds inflow angles nearby and receives the new ones."""
        power = thrust = 0.0
        for k, x in enumerate(self.x):
            ratio = j / (math.pi * x)
            chord = self.chord[k]
            strip = _section(
                self.thickness[k], tip_mach * math.hypot(x, j / math.pi), 2.0 * chord / x
            )
            solidity = self.blades * chord / (math.pi * x)
            angle = beta + self.twist[k]
            middle, half, terms = self.loss[k]

            def forces(
                phi: float, angle: float = angle, strip: tuple[float, ...] = strip
            ) -> tuple[float, float]:
                lift, drag = _lift_drag(strip, angle - phi)
                sine, cosine = math.sin(phi), math.cos(phi)
                return lift * cosine - drag * sine, lift * sine + drag * cosine

            def loss(
                sine: float, middle: float = middle, half: float = half, terms: list = terms
            ) -> float:
                scaled = min(max((sine - middle) / half, -1.0), 1.0)
                value = 0.0
                for term in terms:
                    value = value * scaled + term
                return value

            def residual(
                phi: float,
                ratio: float = ratio,
                solidity: float = solidity,
                forces=forces,
                loss=loss,
            ) -> float:
                normal, tangential = forces(phi)
                sine, cosine = math.sin(phi), math.cos(phi)
                momentum = 4.0 * loss(sine) * sine * (sine - ratio * cosine)
                return momentum - solidity * (normal + ratio * tangential)

            phi = start[k] = _near_root(
                residual, start[k], math.atan(ratio), max(angle - strip[0], 1e-3)
            )
            normal, tangential = forces(phi)
            sine, cosine = math.sin(phi), math.cos(phi)
            # Tangential momentum gives the speed past the section, over n D.
            speed = math.pi * x / (cosine + solidity * tangential / (4.0 * loss(sine) * sine))
            load = self.weight[k] * speed * speed * chord
            thrust += 0.25 * self.blades * load * normal
            power += 0.25 * math.pi * self.blades * load * tangential * x
        return power, thrust


def _near_root(residual, guess: float, first: float, second: float) -> float:
    """Root between two ends, tried first in a narrow bracket around a guess."""
    low, high = min(first, second), max(first, second)
    near_low, near_high = max(low, guess - 2e-3), min(high, guess + 2e-3)
    if near_low < near_high and residual(near_low) * residual(near_high) < 0.0:
        return brentq(residual, near_low, near_high, xtol=1e-8)
    return brentq(residual, low, high, xtol=1e-8)


@lru_cache(maxsize=4096)
def _section(thickness: float, mach: float, chord_to_radius: float) -> tuple[float, ...]:
    """Section data, from the constants and formulas in the documentation of `section`."""
    t, s = thickness, section
    blunt = (t / s.BLUNT_THICKNESS) ** 4
    effective = mach / (1.0 + (mach / s.GLAUERT_LIMIT) ** 12) ** (1.0 / 12.0)
    compression = math.sqrt(1.0 - effective * effective)

    def camber(of: float) -> float:
        return of / (1.0 + (of / s.CAMBER_LIMIT) ** 2)

    def form(of: float) -> float:
        return 1.0 + 2.0 * of + 60.0 * of**4

    own = s.CLARK_Y_THICKNESS
    round_share = (blunt / (1.0 + blunt)) ** 2
    return (
        s.CLARK_Y_ZERO_LIFT_ANGLE * camber(t) / camber(own),
        2.0 * math.pi * s.LIFT_SLOPE_SHARE / (1.0 + blunt) / compression,
        s.STALL_INCIDENCE * compression,
        max(1.0 - s.STALL_DELAY * chord_to_radius**2, 0.0),
        (1.0 - round_share) * s.MINIMUM_DRAG * form(t) / form(own) + round_share * s.SHANK_DRAG,
        mach - (s.KORN_FACTOR + s.TIP_RELIEF - t - (0.1 / 80.0) ** (1.0 / 3.0)),
    )


def _lift_drag(strip: tuple[float, ...], angle: float) -> tuple[float, float]:
    """Lift and drag coefficients of a section."""
    zero, slope, stall, lost, least, beyond = strip
    incidence = angle - zero
    attached = slope * incidence
    stalled = 1.0 / (1.0 + math.exp(section.STALL_SHARPNESS * (stall - abs(incidence))))
    deep = section.STALLED_LIFT * incidence
    deep /= math.hypot(incidence, section.STALLED_LIFT_INCIDENCE)
    lift = attached + stalled * lost * (deep - attached)
    drag = (
        least
        + section.STALLED_DRAG * stalled * (incidence**2 - incidence**4 / 3.0)
        + section.DRAG_RISE_WITH_LIFT * (lift - section.LIFT_OF_LEAST_DRAG) ** 2
        + 20.0 * max(beyond + 0.1 * abs(lift), 0.0) ** 4
    )
    return lift, drag


@dataclass(frozen=True)
class Answer:
    """What the second solver finds at one point."""

    airspeed: float
    calibrated_airspeed: float
    power: float
    manifold_pressure: float
    fuel_flow: float
    blade_angle: float


def cruise(
    aircraft: Aircraft,
    air: Air,
    *,
    mass: float,
    rpm: float,
    how: Mixture,
    power: float | None = None,
    manifold: float | None = None,
) -> Answer:
    """Level cruise at one point, asked by power or by manifold pressure."""
    engine = EngineAgain(aircraft, air, rpm, how)
    propeller, frame = aircraft.propeller, aircraft.airframe
    strip = StripAgain(propeller)
    turns = rpm * aircraft.engine.gear_ratio / 60.0
    diameter, weight = propeller.diameter, mass * G
    asked = engine.manifold_for(power) if power is not None else manifold
    tip_mach = math.pi * turns * diameter / air.sound
    found: dict[str, float] = {}
    inflow = [0.0] * STATIONS

    def surplus(airspeed: float) -> float:
        taken = min(asked, engine.full_throttle(airspeed))
        shaft = engine.power(taken)
        j = airspeed / (turns * diameter)
        wanted = shaft / (air.density * turns**3 * diameter**5)
        helix = math.atan(j / (0.75 * math.pi))

        def absorbed(beta: float) -> float:
            return strip.coefficients(j, beta, tip_mach, inflow)[0] - wanted

        guess = found.get("angle", helix + 0.05)
        beta = _governed(absorbed, guess, helix - 0.05, helix + 0.26)
        thrust = strip.coefficients(j, beta, tip_mach, inflow)[1]
        thrust *= propeller.installation_factor * air.density * turns**2 * diameter**4
        q = 0.5 * air.density * airspeed**2
        lift = weight / (q * frame.wing_area)
        aspect = frame.wing_span**2 / frame.wing_area
        polar = frame.zero_lift_drag + lift**2 / (math.pi * aspect * frame.oswald_factor)
        found.update(angle=beta, shaft=shaft, taken=taken)
        return thrust - polar * q * frame.wing_area

    aspect = frame.wing_span**2 / frame.wing_area
    slow_lift = math.sqrt(3.0 * math.pi * aspect * frame.oswald_factor * frame.zero_lift_drag)
    slow_lift = min(slow_lift, frame.greatest_lift)
    slowest = math.sqrt(2.0 * weight / (air.density * frame.wing_area * slow_lift))
    airspeed = brentq(surplus, slowest, 130.0, xtol=1e-4)
    surplus(airspeed)
    return Answer(
        airspeed,
        _calibrated(air.impact(airspeed)),
        found["shaft"],
        found["taken"],
        engine.fuel * engine.air_flow(found["taken"]),
        found["angle"],
    )


def _governed(absorbed, guess: float, low: float, high: float) -> float:
    """Blade angle that absorbs the power, tried first around a guess."""
    near_low, near_high = guess - 0.01, guess + 0.01
    if absorbed(near_low) < 0.0 < absorbed(near_high):
        return brentq(absorbed, near_low, near_high, xtol=1e-6)
    return brentq(absorbed, low, high, xtol=1e-6)


def _calibrated(impact: float) -> float:
    """Calibrated airspeed of an impact pressure [m/s]."""
    return math.sqrt(GAMMA * R * T0) * math.sqrt(5.0 * ((impact / P0 + 1.0) ** (1.0 / 3.5) - 1.0))


@dataclass(frozen=True)
class Comparison:
    """Relative differences between the two solvers, a row for each point."""

    power: np.ndarray
    fuel_flow: np.ndarray
    airspeed: np.ndarray
    calibrated_airspeed: np.ndarray
    manifold_pressure: np.ndarray
    blade_angle: np.ndarray  # [rad]


QUANTITIES = ("power", "fuel_flow", "airspeed", "calibrated_airspeed", "manifold_pressure")


def compare(aircraft_count: int, points_each: int, *, seed: int = 0) -> Comparison:
    """Draw aircraft and points at random, solve them with both, and compare."""
    rows = [
        row
        for number in range(aircraft_count)
        for row in _compare_one(random_aircraft(seed + number), points_each, seed + number)
    ]
    return Comparison(*np.array(rows).T)


def _compare_one(aircraft: Aircraft, count: int, seed: int) -> list[list[float]]:
    """Differences at points of one aircraft that the package solves."""
    draw = np.random.default_rng(10_000 + seed).uniform
    size = 3 * count  # more than wanted, as some have no level flight
    altitude = draw(0.0, 5000.0, size)
    deviation = draw(-25.0, 25.0, size)
    vapour = draw(0.0, 700.0, size)
    rpm = draw(0.76, 1.0, size) * aircraft.engine.rated_rpm
    share = draw(0.45, 0.85, size)
    manifold = draw(60e3, 105e3, size)
    ratio = draw(0.056, 0.090, size)
    scale = draw(0.92, 1.08, size)
    mass = np.array([random_mass(aircraft, one) for one in draw(0.0, 1.0, size)])
    airs = [Air(*one) for one in zip(altitude, deviation, vapour, strict=True)]
    by_power = np.arange(size) % 2 == 0
    point = solve_cruise(
        aircraft,
        Condition(
            np.array([air.pressure for air in airs]),
            np.array([air.temperature for air in airs]),
            mass,
            vapour,
        ),
        setting=Setting(
            rpm,
            Mixture("drawn", ratio, fuel_scale=scale),
            power=np.where(by_power, share * aircraft.engine.rated_power, np.nan),
            manifold_pressure=manifold,
        ),
    )
    solved = point.status <= CruiseStatus.COARSE_STOP
    rows = []
    for k in np.flatnonzero(solved)[:count]:
        answer = cruise(
            aircraft,
            airs[k],
            mass=mass[k],
            rpm=rpm[k],
            how=Mixture("drawn", ratio[k], fuel_scale=scale[k]),
            power=share[k] * aircraft.engine.rated_power if by_power[k] else None,
            manifold=manifold[k],
        )
        rows.append(_differences(point, int(k), answer))
    return rows


def _differences(point: CruisePoint, k: int, answer: Answer) -> list[float]:
    """Relative differences at one point; the blade angle's is absolute [rad]."""
    return [
        point.power[k] / answer.power - 1.0,
        point.fuel_flow[k] / answer.fuel_flow - 1.0,
        point.true_airspeed[k] / answer.airspeed - 1.0,
        point.calibrated_airspeed[k] / answer.calibrated_airspeed - 1.0,
        point.manifold_pressure[k] / answer.manifold_pressure - 1.0,
        point.blade_angle[k] - answer.blade_angle,
    ]


def figures(comparison: Comparison) -> dict[str, tuple[float, float]]:
    """Worst and rms relative difference of each quantity."""
    return {
        name: (
            float(np.abs(getattr(comparison, name)).max()),
            float(np.sqrt(np.mean(getattr(comparison, name) ** 2))),
        )
        for name in QUANTITIES
    }


if __name__ == "__main__":
    result = compare(25, 20)
    sys.stdout.write(f"{result.power.size} points\n")
    for quantity, (worst, rms) in figures(result).items():
        sys.stdout.write(f"{quantity:20} worst {worst:.1e}  rms {rms:.1e}\n")
    angle = np.degrees(np.abs(result.blade_angle).max())
    sys.stdout.write(f"blade angle          worst {angle:.4f} deg\n")
