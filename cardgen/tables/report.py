"""One setting reported: what it gives, what each limit says, and what to set instead."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import standard_temperature
from cardgen.constants import (
    GALLON_US,
    HORSEPOWER,
    HOUR,
    INCH_OF_MERCURY,
    KNOT,
    ZERO_CELSIUS,
)
from cardgen.cruise import CruiseStatus
from cardgen.limits import Finding, Flown, MessageUnits, allowed_nearby
from cardgen.limits.gauges import indicated_manifold_pressure
from cardgen.records import dataclass
from cardgen.tables.solution import Model, Situation, Solution, solve, true_temperature_of
from cardgen.tables.verdict import flown, judge

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class PropellerReport:
    """How the propeller works at a setting; angles in degrees, `on_stop` None while it governs."""

    efficiency: float
    blade_angle_deg: float
    advance_ratio: float
    angle_of_attack_deg: float
    slip_percent: float
    tip_mach: float
    on_stop: str | None


@dataclass(frozen=True, slots=True)
class Instead:
    """A setting of the same power that no limit forbids, as the gauges read it."""

    rpm: float
    manifold_pressure_inhg: float
    fuel_flow_gph: float
    true_airspeed_kt: float
    verdict: str
    reason: str


@dataclass(frozen=True, slots=True)
class SettingReport:
    """What one setting gives, in the units of the machine-readable output."""

    rpm: float
    manifold_pressure_inhg: float
    mixture: str
    oat_c: float
    percent_power: float
    power_hp: float
    fuel_flow_gph: float
    true_airspeed_kt: float
    calibrated_airspeed_kt: float
    full_throttle_map_inhg: float
    manifold_pressure_tolerance_inhg: float
    fuel_flow_tolerance_gph: float
    true_airspeed_tolerance_kt: float
    percent_power_tolerance: float
    propeller: PropellerReport
    verdict: str
    findings: tuple[Finding, ...]
    instead: tuple[Instead, ...]


def report_setting(
    model: Model,
    *,
    indicated_pressure: float,
    indicated_rpm: float,
    pressure_altitude: float,
    indicated_temperature: float | None,
    mass: float,
    mixture: int,
    units: MessageUnits,
) -> SettingReport | None:
    """Report one setting.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    indicated_pressure : float
        What the manifold-pressure gauge reads [Pa]
    indicated_rpm : float
        What the tachometer reads [rpm]
    pressure_altitude : float
        Pressure altitude [m]
    indicated_temperature : float, optional
        What the outside-air thermometer reads; standard temperature where None [K]
    mass : float
        Mass of the loaded aircraft [kg]
    mixture : int
        Index of the mixture [-]
    units : MessageUnits
        Units of the messages [-]

    Returns
    -------
    SettingReport or None
        None where the model has no level flight at the setting [-]
    """
    read = Situation(
        pressure_altitude=pressure_altitude,
        temperature=float(standard_temperature(pressure_altitude))
        if indicated_temperature is None
        else indicated_temperature,
        mass=mass,
        mixture=mixture,
    )
    situation = read
    if indicated_temperature is not None:
        true = true_temperature_of(
            model, read, indicated_rpm=indicated_rpm, indicated_pressure=indicated_pressure
        )
        situation = Situation(pressure_altitude, float(true), mass, mixture)
    solution = solve(
        model, situation, indicated_rpm=indicated_rpm, indicated_pressure=indicated_pressure
    )
    if math.isnan(float(solution.point.power)):
        return None
    findings = judge(model, solution, units=units)
    verdict = findings.verdict_at()
    instead = _instead(model, solution, units) if verdict == "outside" else ()
    return _report(model, solution, findings.at(), verdict=verdict, instead=instead)


def _report(
    model: Model,
    solution: Solution,
    findings: tuple[Finding, ...],
    *,
    verdict: str,
    instead: tuple[Instead, ...],
) -> SettingReport:
    """Put a solution into the units of the output."""
    point, tolerance = solution.point, solution.tolerance
    if tolerance is None:
        raise AssertionError("tolerances were asked for")
    flow_unit = model.subject.aircraft.engine.fuel_density * GALLON_US / HOUR
    rated = model.percent_of.power
    stop = {CruiseStatus.FINE_STOP: "fine", CruiseStatus.COARSE_STOP: "coarse"}
    return SettingReport(
        rpm=float(solution.indicated_rpm),
        manifold_pressure_inhg=float(solution.indicated_manifold_pressure) / INCH_OF_MERCURY,
        mixture=model.subject.mixtures[solution.situation.mixture].name,
        oat_c=float(np.asarray(solution.situation.temperature)) - ZERO_CELSIUS,
        percent_power=100.0 * float(solution.power_fraction),
        power_hp=float(point.power) / HORSEPOWER,
        fuel_flow_gph=float(point.fuel_flow) / flow_unit,
        true_airspeed_kt=float(point.true_airspeed) / KNOT,
        calibrated_airspeed_kt=float(point.calibrated_airspeed) / KNOT,
        full_throttle_map_inhg=_full_throttle_reading(model, solution) / INCH_OF_MERCURY,
        manifold_pressure_tolerance_inhg=float(tolerance.manifold_pressure) / INCH_OF_MERCURY,
        fuel_flow_tolerance_gph=float(tolerance.fuel_flow) / flow_unit,
        true_airspeed_tolerance_kt=float(tolerance.true_airspeed) / KNOT,
        percent_power_tolerance=100.0 * float(tolerance.power) / rated,
        propeller=PropellerReport(
            efficiency=float(point.propeller_efficiency),
            blade_angle_deg=math.degrees(float(point.blade_angle)),
            advance_ratio=float(point.advance_ratio),
            angle_of_attack_deg=math.degrees(float(point.angle_of_attack)),
            slip_percent=100.0 * float(point.slip),
            tip_mach=float(point.tip_mach),
            on_stop=stop.get(CruiseStatus(int(point.status))),
        ),
        verdict=verdict,
        findings=findings,
        instead=instead,
    )


def _full_throttle_reading(model: Model, solution: Solution) -> float:
    """What the manifold-pressure gauge reads at full throttle [Pa]."""
    full = solution.point.full_throttle_manifold_pressure
    return float(indicated_manifold_pressure(model.gauges, full))


def _instead(model: Model, solution: Solution, units: MessageUnits) -> tuple[Instead, ...]:
    """Settings of the same power that no limit forbids, with what they give."""
    fraction = float(solution.power_fraction)
    solved: dict[float, Solution] = {}

    def at(rpm: FloatArray) -> Flown:
        there = solve(
            model,
            solution.situation,
            indicated_rpm=rpm,
            power_fraction=fraction,
            with_tolerance=False,
        )
        short = there.point.full_throttle & (there.power_fraction < fraction * (1.0 - 1e-6))
        seen = flown(model, there)
        solved.update({float(value): there for value in rpm})
        return replace(seen, solved=np.asarray(seen.solved) & ~short)

    found = allowed_nearby(
        model.limits,
        model.gauges,
        indicated_rpm=float(solution.indicated_rpm),
        solve=at,
        units=units,
    )
    flow_unit = model.subject.aircraft.engine.fuel_density * GALLON_US / HOUR
    settings = []
    for setting in found:
        there = solved[setting.indicated_rpm]
        place = int(np.argmin(np.abs(there.indicated_rpm - setting.indicated_rpm)))
        settings.append(
            Instead(
                rpm=setting.indicated_rpm,
                manifold_pressure_inhg=setting.indicated_manifold_pressure / INCH_OF_MERCURY,
                fuel_flow_gph=float(there.point.fuel_flow[place]) / flow_unit,
                true_airspeed_kt=float(there.point.true_airspeed[place]) / KNOT,
                verdict=setting.verdict,
                reason=setting.reason,
            )
        )
    return tuple(settings)
