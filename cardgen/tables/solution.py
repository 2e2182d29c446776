"""Settings solved, toleranced and held against every limit: the one path to every number.

A pilot asks two questions: what must the gauges read for this power, and what does this reading
give. Card, table and check all ask them through `solve`.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from cardgen.aircraft import Aircraft, Condition, Setting
from cardgen.airspeed import true_temperature
from cardgen.atmosphere import (
    density_altitude,
    standard_pressure,
    vapour_pressure,
)
from cardgen.cruise import CruisePoint, solve_cruise
from cardgen.engine import (
    BEST_POWER_FUEL_AIR_RATIO,
    Mixture,
    PowerLine,
    brake_power,
    power_line,
    power_per_pressure,
)
from cardgen.fit import Knowledge, Subject, applied, tolerances
from cardgen.limits import Gauges, Limits
from cardgen.limits.gauges import (
    indicated_manifold_pressure,
    true_manifold_pressure,
    true_rpm,
)
from cardgen.limits.kinds import Rating
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]
Floats = float | FloatArray


@dataclass(frozen=True, slots=True)
class Model:
    """An aircraft with what is known of it, its limits and its gauges.

    Parameters
    ----------
    subject : Subject
        Aircraft and mixtures as the profile builds them [-]
    knowledge : Knowledge
        Their parameters, from the priors or a fit [-]
    limits : Limits
        What the sources state [-]
    gauges : Gauges
        The gauges that settings are read from [-]
    percent_of : Rating
        The rating that percent power is of [-]
    relative_humidity : float
        Relative humidity of the air [-]
    """

    subject: Subject
    knowledge: Knowledge
    limits: Limits
    gauges: Gauges
    percent_of: Rating
    relative_humidity: float = 0.0

    def fitted(self) -> tuple[Aircraft, tuple[Mixture, ...]]:
        """Aircraft and mixtures with what is known of their parameters.

        Returns
        -------
        tuple
            Aircraft, and mixtures in the order of the profile [-]
        """
        return applied(self.subject.aircraft, self.subject.mixtures, values=self.knowledge.values)

    def mixture_index(self, name: str) -> int:
        """Place of a mixture.

        Parameters
        ----------
        name : str
            Name, in any case [-]

        Returns
        -------
        int
            Index into the mixtures [-]

        Raises
        ------
        KeyError
            There is no such mixture.
        """
        for index, mixture in enumerate(self.subject.mixtures):
            if mixture.name.casefold() == name.strip().casefold():
                return index
        raise KeyError(name)


@dataclass(frozen=True, slots=True)
class Situation:
    """Where settings are asked for; arrays broadcast together and with the settings.

    Parameters
    ----------
    pressure_altitude : float or ndarray
        Pressure altitude [m]
    temperature : float or ndarray
        True outside air temperature [K]
    mass : float or ndarray
        Mass of the loaded aircraft [kg]
    mixture : int
        Index of the mixture [-]
    """

    pressure_altitude: Floats
    temperature: Floats
    mass: Floats
    mixture: int


@dataclass(frozen=True, slots=True)
class Tolerance:
    """95 % tolerances, half widths; arrays of one shape.

    Parameters
    ----------
    manifold_pressure : ndarray
        Of the manifold pressure that gives the power [Pa]
    fuel_flow : ndarray
        Of the fuel flow [kg/s]
    true_airspeed : ndarray
        Of the true airspeed [m/s]
    power : ndarray
        Of the power that the manifold pressure gives [W]
    """

    manifold_pressure: FloatArray
    fuel_flow: FloatArray
    true_airspeed: FloatArray
    power: FloatArray


@dataclass(frozen=True, slots=True)
class Solution:
    """Solved settings; arrays of one shape.

    Parameters
    ----------
    situation : Situation
        Where [-]
    indicated_rpm : ndarray
        What the tachometer reads [rpm]
    indicated_manifold_pressure : ndarray
        What the manifold-pressure gauge reads [Pa]
    point : CruisePoint
        What the model gives there, in true values [-]
    power_fraction : ndarray
        Power over the percent rating [-]
    density_altitude : ndarray
        Density altitude [m]
    best_power_fraction : ndarray
        Power at the same rpm and manifold pressure with the best-power mixture, over the rating [-]
    tolerance : Tolerance, optional
        95 % tolerances; None where none was asked for [-]
    """

    situation: Situation
    indicated_rpm: FloatArray
    indicated_manifold_pressure: FloatArray
    point: CruisePoint
    power_fraction: FloatArray
    density_altitude: FloatArray
    best_power_fraction: FloatArray
    tolerance: Tolerance | None


def solve(
    model: Model,
    situation: Situation,
    *,
    indicated_rpm: Floats,
    power_fraction: Floats | None = None,
    indicated_pressure: Floats | None = None,
    with_tolerance: bool = True,
) -> Solution:
    """Solve settings asked by power or by manifold pressure.

    Parameters
    ----------
    model : Model
        The aircraft [-]
    situation : Situation
        Where [-]
    indicated_rpm : float or ndarray
        What the tachometer reads [rpm]
    power_fraction : float or ndarray, optional
        Share of the percent rating; full throttle is taken where that is less [-]
    indicated_pressure : float or ndarray, optional
        What the manifold-pressure gauge reads, instead of a power; beyond full throttle the point
        is solved at full throttle while the reading stays what was asked [Pa]
    with_tolerance : bool
        Whether to compute tolerances, which costs some thirty times the solution [-]

    Returns
    -------
    Solution
        Arrays of the broadcast shape [-]

    Raises
    ------
    ValueError
        Neither or both of power and pressure are given.
    """
    if (power_fraction is None) == (indicated_pressure is None):
        raise ValueError("a setting is asked by power or by manifold pressure, one of the two")
    ask = _asked(
        model,
        situation,
        indicated_rpm=indicated_rpm,
        power_fraction=power_fraction,
        indicated_pressure=indicated_pressure,
    )
    aircraft, mixtures = model.fitted()
    point = _cruise(ask, aircraft, mixtures[situation.mixture])
    shape = point.power.shape
    reads = indicated_manifold_pressure(model.gauges, point.manifold_pressure)
    if indicated_pressure is not None:
        reads = np.asarray(indicated_pressure, dtype=np.float64)
    condition = ask.condition
    return Solution(
        situation=situation,
        indicated_rpm=np.broadcast_to(np.asarray(indicated_rpm, dtype=np.float64), shape),
        indicated_manifold_pressure=np.broadcast_to(reads, shape),
        point=point,
        power_fraction=point.power / model.percent_of.power,
        density_altitude=np.broadcast_to(
            density_altitude(
                condition.pressure,
                condition.temperature,
                vapour_pressure=condition.vapour_pressure,
            ),
            shape,
        ),
        best_power_fraction=_best_power(ask, aircraft, point) / model.percent_of.power,
        tolerance=_tolerance(model, ask, situation.mixture, point) if with_tolerance else None,
    )


@dataclass(frozen=True, slots=True)
class _Ask:
    """A setting in true values."""

    pressure: FloatArray
    temperature: FloatArray
    mass: FloatArray
    rpm: FloatArray
    power: FloatArray | None
    manifold_pressure: FloatArray | None
    humidity: float

    @property
    def condition(self) -> Condition:
        """The air and the load."""
        vapour = vapour_pressure(self.humidity, self.temperature) if self.humidity else 0.0
        return Condition(self.pressure, self.temperature, self.mass, vapour)

    def flat(self, shape: tuple[int, ...]) -> _Ask:
        """The same as one run of points."""

        def run(values: FloatArray) -> FloatArray:
            return np.broadcast_to(values, shape).reshape(-1)

        return _Ask(
            run(self.pressure),
            run(self.temperature),
            run(self.mass),
            run(self.rpm),
            None if self.power is None else run(self.power),
            None if self.manifold_pressure is None else run(self.manifold_pressure),
            self.humidity,
        )


def _asked(
    model: Model,
    situation: Situation,
    *,
    indicated_rpm: Floats,
    power_fraction: Floats | None = None,
    indicated_pressure: Floats | None = None,
) -> _Ask:
    """Turn what gauges read into true values."""
    return _Ask(
        pressure=standard_pressure(situation.pressure_altitude),
        temperature=np.asarray(situation.temperature, dtype=np.float64),
        mass=np.asarray(situation.mass, dtype=np.float64),
        rpm=true_rpm(model.gauges, indicated_rpm),
        power=None
        if power_fraction is None
        else np.asarray(power_fraction) * model.percent_of.power,
        manifold_pressure=None
        if indicated_pressure is None
        else true_manifold_pressure(model.gauges, indicated_pressure),
        humidity=model.relative_humidity,
    )


def _cruise(ask: _Ask, aircraft: Aircraft, mixture: Mixture) -> CruisePoint:
    """The cruise of a setting."""
    setting = Setting(ask.rpm, mixture, power=ask.power, manifold_pressure=ask.manifold_pressure)
    return solve_cruise(aircraft, ask.condition, setting=setting)


def _line(ask: _Ask, aircraft: Aircraft, mixture: Mixture) -> PowerLine:
    """The engine of a setting."""
    condition = ask.condition
    return power_line(
        aircraft.engine,
        ask.rpm,
        mixture=mixture,
        pressure=condition.pressure,
        temperature=condition.temperature,
        vapour_pressure=condition.vapour_pressure,
    )


def _best_power(ask: _Ask, aircraft: Aircraft, point: CruisePoint) -> FloatArray:
    """Power at the same rpm and manifold pressure with the best-power mixture."""
    rich = Mixture("best power", BEST_POWER_FUEL_AIR_RATIO)
    return brake_power(_line(ask, aircraft, rich), point.manifold_pressure)


def _tolerance(model: Model, ask: _Ask, mixture: int, point: CruisePoint) -> Tolerance:
    """95 % tolerances of a setting."""
    shape = point.power.shape
    flat = ask.flat(shape)
    aircraft, mixtures = model.fitted()
    slope = np.broadcast_to(power_per_pressure(_line(ask, aircraft, mixtures[mixture])), shape)
    pressure_scatter, fuel_scatter, speed_scatter = model.knowledge.scatter

    def outputs(moved: Aircraft, moved_mixtures: tuple[Mixture, ...]) -> FloatArray:
        there = _cruise(flat, moved, moved_mixtures[mixture])
        asked = there.power if ask.power is None else there.manifold_pressure
        return np.stack([asked, there.fuel_flow, there.true_airspeed], axis=-1)

    # A power asked leaves the pressure open and the other way round; the slope of the engine turns
    # the uncertainty of one into that of the other.
    turned = slope.reshape(-1) if ask.power is None else np.ones(flat.rpm.shape)
    scatter = np.stack(
        [pressure_scatter * turned, *np.broadcast_arrays(fuel_scatter, speed_scatter, turned)[:2]],
        axis=-1,
    )
    found = tolerances(
        model.subject,
        outputs,
        values=model.knowledge.values,
        covariance=model.knowledge.covariance,
        scatter=scatter,
    )
    first, fuel, speed = (found[:, column].reshape(shape) for column in range(3))
    answered = ~np.isnan(point.power)

    def where_answered(values: FloatArray) -> FloatArray:
        return np.where(answered, values, np.nan)

    pressure, power = (first / slope, first) if ask.power is None else (first, first * slope)
    return Tolerance(*(where_answered(values) for values in (pressure, fuel, speed, power)))


def true_temperature_of(
    model: Model,
    situation: Situation,
    *,
    indicated_rpm: Floats,
    indicated_pressure: Floats,
) -> FloatArray:
    """True temperature where `situation.temperature` is what the thermometer reads in flight.

    Parameters
    ----------
    model : Model
        The aircraft; its thermometer reads true where no recovery is stated [-]
    situation : Situation
        Where, with the temperature as read [-]
    indicated_rpm : float or ndarray
        What the tachometer reads [rpm]
    indicated_pressure : float or ndarray
        What the manifold-pressure gauge reads [Pa]

    Returns
    -------
    ndarray
        True static temperature; the reading itself where there is no level flight [K]

    Notes
    -----
    The rise depends on airspeed and airspeed hardly on temperature: three rounds of substitution
    leave less than a microkelvin.
    """
    read = np.asarray(situation.temperature, dtype=np.float64)
    recovery = model.gauges.temperature_recovery
    if recovery is None:
        return read
    aircraft, mixtures = model.fitted()
    true = read
    for _ in range(3):
        ask = _asked(
            model,
            replace(situation, temperature=true),
            indicated_rpm=indicated_rpm,
            indicated_pressure=indicated_pressure,
        )
        speed = _cruise(ask, aircraft, mixtures[situation.mixture]).true_airspeed
        corrected = true_temperature(read, speed, recovery_factor=recovery)
        true = np.where(np.isnan(corrected), read, corrected)
    return np.asarray(true)
