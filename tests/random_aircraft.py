"""Random sound profiles: the demonstration aircraft with all that bears on a cell redrawn."""

from __future__ import annotations

import math
import random
from dataclasses import replace
from typing import Final

import numpy as np

from cardgen.fit import knowledge_from_profile
from cardgen.fit.knowledge import EvidenceRange
from cardgen.fit.parameters import parameters
from cardgen.limits.gauges import UNMEASURED_GAUGES, GaugeError, Gauges
from cardgen.limits.kinds import (
    AirspeedLimit,
    AltitudeEnvelope,
    AltitudeSchedule,
    LeaningCeiling,
    LeastManifoldPressure,
    Limits,
    ManifoldPressureCurve,
    Rating,
    RestrictedRpm,
    RpmRange,
    Source,
    TemperatureEnvelope,
)
from cardgen.profile.assembly import Learned, subject_of
from cardgen.profile.document import Profile
from cardgen.tables.choices import BreakIn, CardChoices, UnitSet

INCH: Final = 3386.389
FOOT: Final = 0.3048
KNOT: Final = 1852.0 / 3600.0
POUND: Final = 0.45359237
PRESSURES: Final = ("inHg", "hPa", "kPa", "mmHg", "cmHg")
SAID: Final = ("as written", Source("Invented manual", "2", "1"))


def _maybe(rng: random.Random, share: float) -> bool:
    return rng.random() < share


def _step(rng: random.Random, low: float, high: float, step: float) -> float:
    """Return a round number: limits and printed steps often meet, which is where errors hide."""
    return round(rng.uniform(low, high) / step) * step


def _restricted(rng: random.Random) -> RestrictedRpm:
    low = _step(rng, 1700.0, 2600.0, 25.0)
    pressures = sorted(_step(rng, 13.0, 28.0, 0.5) * INCH for _ in range(2))
    above = pressures[0] if _maybe(rng, 0.4) else None
    below = pressures[1] if _maybe(rng, 0.4) else None
    phase = rng.choice((None, None, None, "cruise", "descent", "ground", "climb", "take-off"))
    name = rng.choice(("blades", "mount", "crankshaft"))
    return RestrictedRpm(name, low, low + _step(rng, 0.0, 200.0, 25.0), *SAID, above, below, phase)


def _curve(
    rng: random.Random, x: tuple[float, float], y: tuple[float, float]
) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return a broken line of 2 to 6 points whose pressures go up and down, [Pa]."""
    places = sorted({_step(rng, *x, 50.0) for _ in range(rng.randint(2, 6))})
    if len(places) < 2:
        places = [x[0], x[1]]
    return tuple(places), tuple(_step(rng, *y, 0.5) * INCH for _ in places)


def random_limits(rng: random.Random, mixtures: tuple[str, ...], rated: float) -> Limits:
    """Return limits of every kind, each there or not, one or several.

    Parameters
    ----------
    rng : random.Random
        Source of chance [-]
    mixtures : tuple of str
        Names of the mixtures [-]
    rated : float
        Power of the percent rating [W]

    Returns
    -------
    Limits
        As a sound profile may state them [-]
    """
    strict = rng.choice((0.25, 0.5, 0.8))  # so that some cards are nearly free and some nearly full

    def some(most: int) -> range:
        return range(rng.randint(1, most) if _maybe(rng, strict) else 0)

    curves = []
    for _ in some(2):
        x, y = _curve(rng, (1500.0, 2800.0), (22.0, 30.0))
        if _maybe(rng, 0.8):  # else charted in part only
            x = (1400.0, *x[1:-1], 2900.0)
        curves.append(ManifoldPressureCurve(rng.choice(("chart", "supplement")), x, y, *SAID))
    floors = [
        LeastManifoldPressure("least", *_curve(rng, (1500.0, 2800.0), (10.0, 19.0)), *SAID)
        for _ in some(1)
    ]
    schedules = []
    for _ in some(1):
        x, y = _curve(rng, (-500.0, 5500.0), (20.0, 30.0))
        if _maybe(rng, 0.7):  # else charted in part only
            x = (-600.0, *x[1:-1], 6000.0)
        schedules.append(AltitudeSchedule("schedule", x, y, *SAID))
    ratings = [
        Rating(
            rng.choice(("Take-off", "Continuous", "Climb")),
            rated * rng.uniform(0.6, 1.1),
            _step(rng, 2300.0, 2800.0, 50.0),
            *SAID,
            _step(rng, 22.0, 29.0, 0.5) * INCH if _maybe(rng, 0.4) else None,
            300.0 if _maybe(rng, 0.3) else None,
        )
        for _ in some(3)
    ]
    return Limits(
        restricted_rpm=tuple(_restricted(rng) for _ in some(4)),
        manifold_pressure_curve=tuple(curves),
        ratings=(Rating("Maximum continuous", rated, 2700.0, *SAID), *ratings),
        rpm_range=tuple(
            RpmRange(
                "rpm",
                *SAID,
                _step(rng, 1600.0, 1900.0, 50.0) if _maybe(rng, 0.7) else None,
                _step(rng, 2500.0, 2800.0, 25.0),
            )
            for _ in some(2)
        ),
        least_manifold_pressure=tuple(floors),
        leaning=tuple(
            LeaningCeiling(
                "leaning",
                rng.choice(mixtures).swapcase(),
                *SAID,
                _step(rng, 0.5, 0.8, 0.05),
                _step(rng, 20.0, 26.0, 0.5) * INCH if _maybe(rng, 0.5) else None,
            )
            for _ in some(3)
        ),
        altitude_schedule=tuple(schedules),
        airspeed=tuple(
            AirspeedLimit(kind, kind, _step(rng, 130.0, 200.0, 1.0) * KNOT, *SAID)
            for kind in ("V_NO", "V_NE")
            for _ in some(1)
        ),
        altitude=tuple(
            AltitudeEnvelope("altitude", *SAID, None, _step(rng, 8000.0, 16000.0, 500.0) * FOOT)
            for _ in some(1)
        ),
        temperature=tuple(
            TemperatureEnvelope(
                "temperature",
                *SAID,
                273.15 + _step(rng, -60.0, -10.0, 5.0),
                273.15 + _step(rng, 10.0, 45.0, 5.0),
            )
            for _ in some(1)
        ),
    )


def random_gauge(
    rng: random.Random, unmeasured: GaugeError, x: tuple[float, float], scale: float
) -> GaugeError:
    """Return a calibration: none, one correction for all, or a table that may end too early."""
    kind = rng.randrange(3)
    if kind == 0:
        return unmeasured
    band = rng.choice((0.0, _step(rng, 0.0, 2.0, 0.25) * scale, rng.uniform(0.0, 2.0) * scale))
    if kind == 1:
        return GaugeError((0.0,), (rng.uniform(-2.0, 2.0) * scale,), band, True, "m", "2026-01-01")
    count = rng.randint(2, 5)
    ends = sorted((rng.uniform(x[0], x[1] * 0.8), rng.uniform(x[1] * 0.8, x[1] * 1.1)))
    places = np.linspace(*ends, count)
    corrections: tuple[float, ...] = ()
    # As the profile demands, true values rise from point to point.
    while not corrections or not (np.diff(places + np.array(corrections)) > 1.0).all():
        corrections = tuple(rng.uniform(-1.5, 1.5) * scale for _ in places)
    return GaugeError(tuple(map(float, places)), corrections, band, True, "m", "2026-01-01")


def random_choices(rng: random.Random, mixtures: tuple[str, ...]) -> CardChoices:
    """Return what a large card shows."""
    kind = rng.choice(("density", "pressure"))
    base = _step(rng, 0.0, 4000.0, 500.0)
    step = rng.choice((500.0, 1000.0))
    altitudes = tuple((base + step * place) * FOOT for place in range(12))
    powers = sorted({round(_step(rng, 0.4, 0.9, 0.05), 2) for _ in range(rng.randint(2, 8))})
    rpm = sorted({_step(rng, 1800.0, 2700.0, 10.0) for _ in range(6)})
    band = None
    if _maybe(rng, 0.15):
        band = BreakIn(powers[0], powers[-1], altitudes[-1], SAID[1])
    deviations = sorted({_step(rng, -30.0, 30.0, 5.0) for _ in range(rng.randint(1, 3))})
    return CardChoices(
        rpm=tuple(rpm),
        power_fraction=tuple(powers),
        altitude=altitudes,
        altitude_kind="density" if kind == "density" else "pressure",
        isa_deviation=(0.0,) if kind == "density" else tuple(deviations),
        mass=tuple(sorted(rng.uniform(2200.0, 3100.0) * POUND for _ in range(rng.randint(1, 2)))),
        mixtures=mixtures[: rng.randint(1, len(mixtures))],
        units=UnitSet(pressure=rng.choice(PRESSURES)),
        relative_humidity=rng.choice((0.0, 0.0, 0.6)),
        break_in=band,
    )


def random_profile(rng: random.Random, base: Profile) -> tuple[Profile, Learned | None]:
    """Return the demonstration aircraft with everything that bears on a cell drawn at random."""
    aircraft, scale = base.aircraft, rng.uniform(0.9, 1.15)
    stops = (
        math.radians(rng.choice((8.0, 10.0, 12.0, 12.0, 15.0))),
        math.radians(rng.choice((26.0, 32.0, 34.0, 38.0))),
    )
    aircraft = replace(
        aircraft,
        engine=replace(aircraft.engine, level=aircraft.engine.level * scale),
        propeller=replace(aircraft.propeller, fine_stop=stops[0], coarse_stop=stops[1]),
        airframe=replace(aircraft.airframe, wing_area=aircraft.airframe.wing_area * scale),
    )
    lean = replace(base.mixtures[1], name="Long range", fuel_air_ratio=rng.uniform(0.056, 0.062))
    mixtures = (*base.mixtures, lean)
    names = tuple(mixture.name for mixture in mixtures)
    rated = base.percent_of.power * rng.uniform(0.9, 1.05)
    limits = random_limits(rng, names, rated)
    profile = replace(
        base,
        aircraft=aircraft,
        mixtures=mixtures,
        limits=limits,
        percent_of=limits.ratings[0],
        gauges=Gauges(
            random_gauge(rng, UNMEASURED_GAUGES.tachometer, (1600.0, 2700.0), 30.0),
            random_gauge(
                rng, UNMEASURED_GAUGES.manifold_pressure, (12.0 * INCH, 29.0 * INCH), 0.3 * INCH
            ),
        ),
        card=random_choices(rng, names),
        fuel=base.fuel if _maybe(rng, 0.3) else None,
    )
    return profile, random_fit(rng, profile) if _maybe(rng, 0.6) else None


def random_fit(rng: random.Random, profile: Profile) -> Learned:
    """Return a fit that found other values within their bounds, and covers part of the card."""
    subject = subject_of(profile)
    prior = knowledge_from_profile(subject)
    values = [
        min(max(value + 0.6 * rng.gauss(0.0, 1.0) * one.deviation, one.lower), one.upper)
        for value, one in zip(prior.values, parameters(subject.mixtures), strict=True)
    ]
    power = profile.percent_of.power
    covers = EvidenceRange(
        pressure=(rng.uniform(4.8e4, 7.0e4), 101325.0),
        temperature=(rng.uniform(235.0, 265.0), rng.uniform(290.0, 310.0)),
        rpm=(rng.uniform(1700.0, 2000.0), rng.uniform(2450.0, 2700.0)),
        power=(rng.uniform(0.35, 0.55) * power, rng.uniform(0.7, 0.9) * power),
    )
    knowledge = replace(
        prior,
        values=np.array(values),
        covariance=0.1 * prior.covariance,
        fitted=("engine", "mixtures", "propeller", "airframe"),
        covers=covers,
    )
    return Learned(knowledge, "f" * 64, "Fitted to nothing real.")
