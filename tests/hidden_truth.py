"""An invented aeroplane that really flies: the truth behind the demonstration's evidence.

It shares nothing with the package: one point at a time, other equations (the charge by residual
gas in closed form, a cambered drag polar, Prandtl's tip loss, a section of its own), nested Brent
searches. What a fit makes of its handbook and flights can therefore be held against what it does.

Numbers are invented within what is usual for the class, except the blade form, which is that of
`tests/published/blade_form_5868-9.csv`. SI inside; pressure in Pa, temperature in K.
"""

from __future__ import annotations

import csv
import math
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
from scipy.optimize import brentq

FOOT, INCH, POUND, GALLON = 0.3048, 0.0254, 0.45359237, 231 * 0.0254**3
KNOT, INHG, HP = 1852.0 / 3600.0, 3386.389, 745.699872
GPH = 6.0 * POUND / 3600.0  # one US gallon of 6 lb an hour [kg/s]
GRAVITY, AIR, LAPSE = 9.80665, 287.053, 0.0065
RATED_POWER, RATED_RPM, PERCENT_OF = 238.0 * HP, 2700.0, 224.0 * HP


@dataclass(frozen=True)
class Truth:
    """What the aeroplane really is, which nobody in its club knows.

    Lengths in m, angles in rad, fractions without unit; `strength` is power over the data sheet's.
    """

    strength: float = 0.975
    breathing: float = 0.62  # how fast volumetric efficiency falls off either side of its best
    best_breathing_rpm: float = 2620.0
    temperature_exponent: float = 0.58
    induction_loss: float = 2300.0  # at rated air flow in standard air [Pa]
    ram: float = 0.62
    zero_lift_drag: float = 0.0226
    lift_of_least_drag: float = 0.08
    span_efficiency: float = 0.70
    body_factor: float = 0.94
    diameter: float = 77.0 * INCH
    blades: int = 2
    activity_factor: float = 104.0
    area: float = 152.0 * FOOT**2
    span: float = 33.6 * FOOT
    displacement: float = 462.0 * INCH**3
    compression: float = 8.2
    fuel_air: tuple[float, ...] = (0.0785, 0.0637)  # by mixture
    relative_power: tuple[float, ...] = (1.0, 0.957)
    best_power_efficiency: float = 0.322  # indicated


@dataclass(frozen=True)
class Flown:
    """One point of level flight, in the units of a handbook."""

    map_inhg: float
    percent_power: float
    fuel_flow_gph: float
    tas_kt: float
    full_throttle: bool


def air(pressure_altitude_ft: float, isa_deviation: float) -> tuple[float, float]:
    """Pressure and temperature of the troposphere."""
    standard = 288.15 - LAPSE * pressure_altitude_ft * FOOT
    return 101325.0 * (standard / 288.15) ** (GRAVITY / (AIR * LAPSE)), standard + isa_deviation


# Engine: power and fuel at a manifold pressure.


def charge(truth: Truth, rpm: float, manifold: float, ambient: float, temperature: float) -> float:
    """Air per time, not yet scaled [kg/s]."""
    filling = (truth.compression - (ambient / manifold) ** (1.0 / 1.3)) / (truth.compression - 1.0)
    shape = 1.0 - truth.breathing * ((rpm - truth.best_breathing_rpm) / 2700.0) ** 2
    heated = 288.15 * (temperature / 288.15) ** truth.temperature_exponent
    return filling * shape * manifold / (AIR * heated) * truth.displacement * rpm / 120.0


def losses(truth: Truth, rpm: float, manifold: float, ambient: float) -> float:
    """Friction and pumping [W]."""
    n = rpm / 1000.0
    friction = 26e3 + 3.1e3 * n * n
    return (friction + ambient - manifold) * truth.displacement * rpm / 120.0


@cache
def work_per_air(truth: Truth) -> float:
    """Indicated work per unscaled air that meets the rated point [J/kg]."""
    manifold = 101325.0 - truth.induction_loss
    needed = RATED_POWER + losses(truth, RATED_RPM, manifold, 101325.0)
    return truth.strength * needed / charge(truth, RATED_RPM, manifold, 101325.0, 288.15)


def brake_power(
    truth: Truth, rpm: float, manifold: float, ambient: float, temperature: float, mixture: int
) -> float:
    """Power at the propeller shaft [W]."""
    taken = charge(truth, rpm, manifold, ambient, temperature)
    work = work_per_air(truth) * truth.relative_power[mixture]
    return work * taken - losses(truth, rpm, manifold, ambient)


def fuel(
    truth: Truth, rpm: float, manifold: float, ambient: float, temperature: float, mixture: int
) -> float:
    """Fuel flow [kg/s]."""
    best = work_per_air(truth) / (truth.best_power_efficiency * 43.6e6)
    richness = truth.fuel_air[mixture] / truth.fuel_air[0]
    return best * richness * charge(truth, rpm, manifold, ambient, temperature)


def wide_open(truth: Truth, rpm: float, ambient: float, temperature: float, speed: float) -> float:
    """Manifold pressure at full throttle [Pa]."""
    density = ambient / (AIR * temperature)
    rated = charge(truth, RATED_RPM, 101325.0 - truth.induction_loss, 101325.0, 288.15)
    head = ambient + truth.ram * 0.5 * density * speed**2

    def short(manifold: float) -> float:
        flow = charge(truth, rpm, manifold, ambient, temperature) / rated
        return head - truth.induction_loss * flow**2 * 1.225 / density - manifold

    return float(brentq(short, 0.3 * ambient, 1.2 * ambient))


# Propeller: blade elements, one station after the other.


@cache
def stations(truth: Truth) -> tuple[tuple[float, float, float, float, float], ...]:
    """Radius, chord, thickness, twist [rad] and weight of ten Gauss points on the blade."""
    file = Path(__file__).parent / "published" / "blade_form_5868-9.csv"
    lines = [line for line in file.read_text().splitlines() if not line.startswith("#")]
    rows = list(csv.reader(lines))[1:]
    form = np.array([[float(cell) for cell in row[:4]] for row in rows])
    fine = np.linspace(0.15, 1.0, 2001)
    chord = np.interp(fine, form[:, 0], form[:, 1])
    factor = 100000.0 / 16.0 * np.trapezoid(chord * fine**3, fine)
    points, weights = np.polynomial.legendre.leggauss(10)
    found = []
    for point, weight in zip(points, weights, strict=True):
        x = 0.6 + 0.4 * point
        column = [float(np.interp(x, form[:, 0], form[:, k])) for k in (1, 2, 3)]
        found.append(
            (
                x * truth.diameter / 2.0,
                column[0] * truth.diameter * truth.activity_factor / float(factor),
                column[1],
                math.radians(column[2]),
                weight * 0.4 * truth.diameter / 2.0,
            )
        )
    return tuple(found)


def section(incidence: float, thickness: float, mach: float) -> tuple[float, float]:
    """Lift and drag coefficient of a cambered section.

    With it the blade form 5868-9 is within 0.015 of the efficiency of NACA TR 640 in cruise.
    """
    stiff = math.sqrt(1.0 - min(mach, 0.85) ** 2)
    lift = 5.9 * (1.0 - 0.6 * max(thickness - 0.12, 0.0)) * (incidence + 0.068) / stiff
    lift = max(-0.8, min(lift, 1.35))
    drag = 0.012 + 0.02 * thickness**2 + 0.009 * (lift - 0.45) ** 2
    critical = 0.90 - thickness - 0.08 * abs(lift)
    return lift, drag + 9.0 * max(mach - critical, 0.0) ** 2


def element(
    truth: Truth, station: tuple[float, ...], angle: float, speed: float, turn: float, sound: float
) -> tuple[float, float]:
    """Thrust and torque per blade and span, over density [m³/s²] and [m⁴/s²]."""
    radius, chord, thickness, twist, _ = station
    solidity = truth.blades * chord / (2.0 * math.pi * radius)
    mach = math.hypot(turn * radius, speed) / sound

    def forces(inflow: float) -> tuple[float, float, float]:
        lift, drag = section(angle + twist - inflow, thickness, mach)
        sine, cosine = math.sin(inflow), math.cos(inflow)
        edge = truth.blades / 2.0 * (truth.diameter / 2.0 - radius) / (radius * abs(sine))
        loss = 2.0 / math.pi * math.acos(math.exp(-edge))
        return lift * cosine - drag * sine, lift * sine + drag * cosine, loss

    def mismatch(inflow: float) -> float:
        axial, around, loss = forces(inflow)
        sine, cosine = math.sin(inflow), math.cos(inflow)
        swirl = 1.0 + solidity * around / (4.0 * loss * sine * cosine)
        push = 1.0 - solidity * axial / (4.0 * loss * sine**2)
        return turn * radius * sine * push - speed * cosine * swirl

    still = math.atan2(speed, turn * radius)
    low, high = 0.6 * still, min(still + 0.35, 1.5)
    if mismatch(low) * mismatch(high) > 0.0:
        return 0.0, 0.0
    inflow = float(brentq(mismatch, low, high, xtol=1e-8))
    axial, around, loss = forces(inflow)
    push = 1.0 - solidity * axial / (4.0 * loss * math.sin(inflow) ** 2)
    wash = speed / push / math.sin(inflow)  # resultant velocity
    pressure = 0.5 * wash * wash * chord
    return pressure * axial, pressure * around * radius


def propeller(
    truth: Truth, angle: float, speed: float, rpm: float, temperature: float
) -> tuple[float, float]:
    """Thrust and power over density at a blade angle."""
    turn, sound = rpm * math.pi / 30.0, math.sqrt(1.4 * AIR * temperature)
    thrust = torque = 0.0
    for station in stations(truth):
        push, twist = element(truth, station, angle, speed, turn, sound)
        thrust += station[4] * push
        torque += station[4] * twist
    return truth.blades * thrust, truth.blades * torque * turn


def governed_thrust(
    truth: Truth, power: float, speed: float, rpm: float, ambient: float, temperature: float
) -> float:
    """Installed thrust with the blades where they absorb a power [N]."""
    density = ambient / (AIR * temperature)

    def excess(angle: float) -> float:
        return density * propeller(truth, angle, speed, rpm, temperature)[1] - power

    still = math.atan2(speed, 0.75 * rpm * math.pi / 60.0 * truth.diameter)
    angle = float(brentq(excess, still - 0.06, still + 0.25, xtol=1e-7))
    return truth.body_factor * density * propeller(truth, angle, speed, rpm, temperature)[0]


# Airframe, and all of it together.


def drag(truth: Truth, weight: float, density: float, speed: float) -> float:
    """Drag of level flight [N]."""
    q = 0.5 * density * speed**2
    lift = weight / (q * truth.area)
    shape = math.pi * truth.span**2 / truth.area * truth.span_efficiency
    return q * truth.area * (truth.zero_lift_drag + (lift - truth.lift_of_least_drag) ** 2 / shape)


def fly(
    truth: Truth,
    pressure_altitude_ft: float,
    isa_deviation: float,
    rpm: float,
    weight_lb: float,
    mixture: int,
    *,
    percent: float | None = None,
    map_inhg: float | None = None,
) -> Flown:
    """Settle into level flight at a power or a manifold pressure, full throttle at most.

    `mixture` is 0 for best power and 1 for economy; all values are true ones.
    """
    ambient, temperature = air(pressure_altitude_ft, isa_deviation)
    density = ambient / (AIR * temperature)
    if map_inhg is not None:
        asked = map_inhg * INHG
    else:
        assert percent is not None
        wanted = percent / 100.0 * PERCENT_OF
        asked = float(
            brentq(
                lambda p: brake_power(truth, rpm, p, ambient, temperature, mixture) - wanted,
                0.2 * ambient,
                3.0 * ambient,
            )
        )

    def setting(speed: float) -> tuple[float, float]:
        manifold = min(asked, wide_open(truth, rpm, ambient, temperature, speed))
        return manifold, brake_power(truth, rpm, manifold, ambient, temperature, mixture)

    def surplus(speed: float) -> float:
        thrust = governed_thrust(truth, setting(speed)[1], speed, rpm, ambient, temperature)
        return thrust - drag(truth, weight_lb * POUND * GRAVITY, density, speed)

    speed = float(brentq(surplus, 58.0, 105.0, xtol=1e-5))
    manifold, power = setting(speed)
    return Flown(
        map_inhg=manifold / INHG,
        percent_power=power / PERCENT_OF * 100.0,
        fuel_flow_gph=fuel(truth, rpm, manifold, ambient, temperature, mixture) / GPH,
        tas_kt=speed / KNOT,
        full_throttle=manifold < asked - 1.0,
    )
