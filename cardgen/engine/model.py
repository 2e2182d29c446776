"""Four-stroke spark-ignition engine, mean values over a cycle.

Power is what the charge makes less what pumping and friction take:

    P = (imep - pmep - fmep) V_d N / 2

At one rpm in one air each of the three is linear in manifold pressure: the engine is a straight
`PowerLine`, and power at a manifold pressure, manifold pressure at a power and full throttle are
closed forms of its coefficients. The air flow is scaled so that the engine makes its rated power
at its rated point. Friction that rises with load rises with the charge, so that it stays inside
the indicated efficiency; only the rest is friction here, and with it the model falls along the
line of [3]_ at full throttle. Exhaust back pressure is ambient pressure: the small rise over it is
nearly the same everywhere, so that the rated point takes it up.

References
----------
.. [1] C. F. Taylor, The Internal Combustion Engine in Theory and Practice, vol. 1, MIT Press,
   chapter 6: volumetric efficiency with residual gas, exponents of inlet temperature.
.. [2] M. L. Barnes-Moss, "A designer's viewpoint", Passenger Car Engines, IMechE, 1975, as given
   by J. B. Heywood, Internal Combustion Engine Fundamentals, section 13.6: motored mean effective
   pressure 97 + 15 n + 5 n² kPa, n = rpm / 1000.
.. [3] R. F. Gagg, E. V. Farrar, "Altitude performance of aircraft engines equipped with
   gear-driven superchargers", SAE Transactions 29 (1934): 1.1324 σ - 0.1324 at full throttle.
.. [4] D. B. Brooks, E. A. Garlock, "The effect of humidity on engine power at altitude", NACA
   Report 426, 1932: indicated power follows the partial pressure of dry air.
.. [5] J. W. Fox, W. K. Cheng, J. B. Heywood, "A model for predicting residual gas fraction in
   spark-ignition engines", SAE 931025, 1993: backflow while the valves overlap goes with 1/N.
"""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import density
from cardgen.constants import (
    GALLON_US,
    POUND,
    SEA_LEVEL_DENSITY,
    SEA_LEVEL_PRESSURE,
    SEA_LEVEL_TEMPERATURE,
)
from cardgen.engine.mixture import BEST_POWER_FUEL_AIR_RATIO, Mixture, relative_power
from cardgen.records import dataclass

Floats = float | npt.NDArray[np.float64]
FloatArray = npt.NDArray[np.float64]

CHARGE_HEAT_CAPACITY_RATIO: Final = 1.3
"""Ratio of specific heats of the compressed residual gas [-]; [1]_."""

FUEL_HEATING_VALUE: Final = 43.5e6
"""Net heat of combustion of aviation gasoline, the least that ASTM D910 allows [J/kg]."""

EFFICIENCY_AT_BEST_POWER: Final = 0.31
"""Indicated efficiency at best-power mixture and compression ratio 8.5 [-].

About 0.84 of the fuel-air cycle's 0.37; [1]_ chapters 4 and 5, read from memory. The fitted fuel
scale of each mixture corrects it."""

EFFICIENCY_COMPRESSION_RATIO: Final = 8.5
"""Compression ratio that `EFFICIENCY_AT_BEST_POWER` is for [-]."""

DEFAULT_FUEL_DENSITY: Final = 6.0 * POUND / GALLON_US
"""6.0 lb per US gallon, the trade's figure for aviation gasoline at 15 °C [kg/m³]."""

BREATHING_NODES: Final = (0.6, 0.7, 0.8, 0.9, 1.0)
"""Shares of rated rpm at which the curve of volumetric efficiency is given [-]."""

DEFAULT_BREATHING: Final = tuple(-0.8 * (1.0 - node) ** 2 for node in BREATHING_NODES[:-1])
"""Volumetric efficiency at the nodes below rated rpm, less that at rated rpm, over it [-]."""

RPM_RANGE: Final = (0.55, 1.1)
"""Shares of rated rpm inside which the model answers [-]."""


@dataclass(frozen=True, slots=True)
class NaturalInduction:
    """Induction of an engine that breathes ambient air.

    Parameters
    ----------
    loss : float or ndarray
        Pressure lost at rated air flow in standard sea-level air, over standard pressure [-]
    ram_recovery : float or ndarray
        Share of the flight impact pressure that reaches the throttle [-]
    """

    loss: Floats = 0.04
    ram_recovery: Floats = 0.7


@dataclass(frozen=True, slots=True)
class Engine:
    """A naturally aspirated four-stroke engine.

    Parameters
    ----------
    displacement : float
        Swept volume of all cylinders [m³]
    compression_ratio : float
        Greatest over least cylinder volume [-]
    rated_power : float
        Brake power at rated rpm, full throttle, standard sea-level air, best-power mixture [W]
    rated_rpm : float
        Crankshaft speed of the rated point [rpm]
    induction : NaturalInduction
        How air reaches the cylinders [-]
    gear_ratio : float
        Propeller rpm over crankshaft rpm [-]
    fuel_density : float
        Density of the fuel [kg/m³]
    level : float or ndarray
        Air flow (and so power) over what the rated point asks [-]
    breathing : tuple of float or ndarray
        Volumetric efficiency at each of `BREATHING_NODES` below rated rpm, less that at rated
        rpm, over it [-]
    friction_scale : float or ndarray
        Friction that does not depend on load, over the Barnes-Moss line; with 0.3 full throttle
        follows Gagg and Farrar within 1.2 % of rated power to 25 000 ft, for ratings of 0.45 to
        0.6 hp per cubic inch [-]
    back_pressure_effect : float or ndarray
        Effect of exhaust back pressure on charge and pumping, over theory's [-]
    charge_temperature_exponent : float or ndarray
        Exponent with which indicated power falls with inlet temperature [-]
    """

    displacement: float
    compression_ratio: float
    rated_power: float
    rated_rpm: float
    induction: NaturalInduction = NaturalInduction()
    gear_ratio: float = 1.0
    fuel_density: float = DEFAULT_FUEL_DENSITY
    level: Floats = 1.0
    breathing: tuple[Floats, ...] = DEFAULT_BREATHING
    friction_scale: Floats = 0.3
    back_pressure_effect: Floats = 1.0
    charge_temperature_exponent: Floats = 0.5


def volumetric_efficiency_ratio(engine: Engine, rpm: npt.ArrayLike) -> FloatArray:
    """Volumetric efficiency over that at rated rpm, pressures and temperature alike.

    Parameters
    ----------
    engine : Engine
        The engine [-]
    rpm : array_like
        Crankshaft speed [rpm]

    Returns
    -------
    ndarray
        Ratio, NaN outside `RPM_RANGE` [-]

    Notes
    -----
    Fourth-degree polynomial through the five nodes; 1 at rated rpm.
    """
    share = np.asarray(rpm, dtype=np.float64) / engine.rated_rpm
    inside = (share >= RPM_RANGE[0]) & (share <= RPM_RANGE[1])
    ratio = np.where(inside, 1.0, np.nan)
    for node, offset in zip(BREATHING_NODES[:-1], engine.breathing, strict=True):
        basis: Floats = 1.0
        for other in BREATHING_NODES:
            if other != node:
                basis = basis * (share - other) / (node - other)
        ratio = ratio + offset * basis
    return np.asarray(ratio)


def friction_power(engine: Engine, rpm: npt.ArrayLike) -> FloatArray:
    """Power that rubbing and the accessories take.

    Parameters
    ----------
    engine : Engine
        The engine [-]
    rpm : array_like
        Crankshaft speed [rpm]

    Returns
    -------
    ndarray
        Friction power [W]

    References
    ----------
    M. L. Barnes-Moss 1975, in J. B. Heywood, Internal Combustion Engine Fundamentals, sec. 13.6.
    """
    n = np.asarray(rpm, dtype=np.float64) / 1000.0
    pressure = engine.friction_scale * (97.0 + 15.0 * n + 5.0 * n * n) * 1e3
    return np.asarray(pressure * engine.displacement * n * 1000.0 / 120.0)


@dataclass(frozen=True, slots=True)
class PowerLine:
    """An engine at one rpm and mixture in one air, where everything is linear.

    With manifold pressure p and ``e = (1 + residual) p - residual · exhaust`` the relative air
    flow is ``breath · e`` and brake power ``indicated · breath · e + pumping (p - exhaust) -
    friction``.

    Parameters
    ----------
    breath : ndarray
        Air flow over rated air flow, per effective pressure e [1/Pa]
    residual : float or ndarray
        Share of a back-pressure excess that the residual gas takes from the charge [-]
    exhaust : float or ndarray
        Exhaust back pressure, equal to ambient pressure [Pa]
    indicated : ndarray
        Indicated power at rated air flow [W]
    pumping : ndarray
        Pumping power per pressure across the cylinder [W/Pa]
    friction : ndarray
        Friction power [W]
    fuel : ndarray
        Fuel flow at rated air flow [kg/s]
    loss : ndarray
        Induction pressure loss at rated air flow in this air [Pa]
    ram_recovery : float or ndarray
        Share of the flight impact pressure that reaches the throttle [-]
    """

    breath: FloatArray
    residual: Floats
    exhaust: Floats
    indicated: FloatArray
    pumping: FloatArray
    friction: FloatArray
    fuel: FloatArray
    loss: FloatArray
    ram_recovery: Floats


def power_line(
    engine: Engine,
    rpm: npt.ArrayLike,
    *,
    mixture: Mixture,
    pressure: Floats,
    temperature: Floats,
    vapour_pressure: Floats = 0.0,
) -> PowerLine:
    """Coefficients of the engine at one rpm and mixture in one air.

    Parameters
    ----------
    engine : Engine
        The engine [-]
    rpm : array_like
        Crankshaft speed [rpm]
    mixture : Mixture
        The mixture [-]
    pressure : float or ndarray
        Ambient pressure [Pa]
    temperature : float or ndarray
        Inlet temperature, taken as ambient [K]
    vapour_pressure : float or ndarray
        Partial pressure of water vapour in the ambient air [Pa]

    Returns
    -------
    PowerLine
        Coefficients, NaN outside `RPM_RANGE` and the range of `relative_power` [-]

    References
    ----------
    C. F. Taylor, The Internal Combustion Engine in Theory and Practice, vol. 1, chapter 6.
    """
    swept = np.asarray(np.asarray(rpm, dtype=np.float64) * engine.displacement / 120.0)
    rated_residual = engine.back_pressure_effect / (
        CHARGE_HEAT_CAPACITY_RATIO * (engine.compression_ratio - 1.0)
    )
    speed = np.asarray(rpm, dtype=np.float64) / engine.rated_rpm
    # The slower it turns, the longer exhaust flows back while both valves stand open.
    residual = rated_residual / speed
    rated_pressure = SEA_LEVEL_PRESSURE * (1.0 - engine.induction.loss)
    rated_indicated = (
        engine.rated_power
        + friction_power(engine, engine.rated_rpm)
        + (SEA_LEVEL_PRESSURE - rated_pressure)
        * (engine.back_pressure_effect * engine.rated_rpm * engine.displacement / 120.0)
    )
    rated_effective = rated_pressure - rated_residual * (SEA_LEVEL_PRESSURE - rated_pressure)
    # Water vapour takes the place of dry air; its share of the pressure stays the same throughout.
    dry = 1.0 - np.asarray(vapour_pressure) / pressure
    heat = (SEA_LEVEL_TEMPERATURE / np.asarray(temperature)) ** engine.charge_temperature_exponent
    air = density(pressure, temperature, vapour_pressure=vapour_pressure)
    best_power_fuel = rated_indicated / (_best_power_efficiency(engine) * FUEL_HEATING_VALUE)
    return PowerLine(
        breath=np.asarray(
            speed * volumetric_efficiency_ratio(engine, rpm) * heat * dry / rated_effective
        ),
        residual=residual,
        exhaust=pressure,
        indicated=np.asarray(
            engine.level * rated_indicated * relative_power(mixture.fuel_air_ratio)
        ),
        pumping=np.asarray(engine.back_pressure_effect * swept),
        friction=friction_power(engine, rpm),
        fuel=np.asarray(
            engine.level
            * best_power_fuel
            * mixture.fuel_scale
            * np.asarray(mixture.fuel_air_ratio)
            / BEST_POWER_FUEL_AIR_RATIO
        ),
        loss=np.asarray(engine.induction.loss * SEA_LEVEL_PRESSURE * SEA_LEVEL_DENSITY / air),
        ram_recovery=engine.induction.ram_recovery,
    )


def _best_power_efficiency(engine: Engine) -> float:
    """Indicated efficiency at best-power mixture, with the air cycle's effect of compression."""
    exponent = 1.0 - CHARGE_HEAT_CAPACITY_RATIO
    cycle = 1.0 - engine.compression_ratio**exponent
    return float(EFFICIENCY_AT_BEST_POWER * cycle / (1.0 - EFFICIENCY_COMPRESSION_RATIO**exponent))


def relative_air_flow(line: PowerLine, manifold_pressure: Floats) -> FloatArray:
    """Air flow over rated air flow.

    Parameters
    ----------
    line : PowerLine
        The engine at one rpm in one air [-]
    manifold_pressure : float or ndarray
        Absolute manifold pressure [Pa]

    Returns
    -------
    ndarray
        Relative air flow, never below zero [-]
    """
    effective = (1.0 + line.residual) * manifold_pressure - line.residual * line.exhaust
    return np.asarray(np.maximum(line.breath * effective, 0.0))


def brake_power(line: PowerLine, manifold_pressure: Floats) -> FloatArray:
    """Brake power at a manifold pressure.

    Parameters
    ----------
    line : PowerLine
        The engine at one rpm in one air [-]
    manifold_pressure : float or ndarray
        Absolute manifold pressure [Pa]

    Returns
    -------
    ndarray
        Brake power, negative where friction wins [W]
    """
    return np.asarray(
        line.indicated * relative_air_flow(line, manifold_pressure)
        + line.pumping * (manifold_pressure - line.exhaust)
        - line.friction
    )


def manifold_pressure(line: PowerLine, power: Floats) -> FloatArray:
    """Manifold pressure at a brake power, whether or not the throttle can give it.

    Parameters
    ----------
    line : PowerLine
        The engine at one rpm in one air [-]
    power : float or ndarray
        Brake power [W]

    Returns
    -------
    ndarray
        Absolute manifold pressure [Pa]
    """
    charge = line.indicated * line.breath
    wanted = power + line.friction + (line.pumping + charge * line.residual) * line.exhaust
    return np.asarray(wanted / power_per_pressure(line))


def power_per_pressure(line: PowerLine) -> FloatArray:
    """Brake power that one unit of manifold pressure adds.

    Parameters
    ----------
    line : PowerLine
        The engine at one rpm in one air [-]

    Returns
    -------
    ndarray
        Slope of the line [W/Pa]
    """
    return np.asarray(line.indicated * line.breath * (1.0 + line.residual) + line.pumping)


def full_throttle_manifold_pressure(line: PowerLine, impact_pressure: Floats = 0.0) -> FloatArray:
    """Manifold pressure with the throttle wide open.

    Parameters
    ----------
    line : PowerLine
        The engine at one rpm in one air [-]
    impact_pressure : float or ndarray
        Total less static pressure of the flight [Pa]

    Returns
    -------
    ndarray
        Absolute manifold pressure [Pa]

    Notes
    -----
    ``p = ambient + recovery · impact - loss · (relative air flow)²``: a quadratic in the effective
    pressure e, solved in the form that stays exact for a vanishing loss.
    """
    share = 1.0 / (1.0 + line.residual)
    available = line.exhaust + line.ram_recovery * impact_pressure
    offset = available - line.residual * share * line.exhaust
    quadratic = line.loss * line.breath * line.breath
    effective = 2.0 * offset / (share + np.sqrt(share * share + 4.0 * quadratic * offset))
    return np.asarray(share * (effective + line.residual * line.exhaust))


def fuel_flow(line: PowerLine, manifold_pressure: Floats) -> FloatArray:
    """Mass of fuel burned per second.

    Parameters
    ----------
    line : PowerLine
        The engine at one rpm in one air [-]
    manifold_pressure : float or ndarray
        Absolute manifold pressure [Pa]

    Returns
    -------
    ndarray
        Fuel flow [kg/s]
    """
    return np.asarray(line.fuel * relative_air_flow(line, manifold_pressure))
