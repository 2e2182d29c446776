"""The kinds of limit a profile can state; each carries its wording and its source.

Two limits of one kind that share a `name` are the same limit as two sources state it: the more
restrictive is applied and both are shown. Every pressure and rpm here is a *true* value; what the
gauges read is widened by their error in `cardgen.limits.gauges`.
"""

from __future__ import annotations

from typing import Literal

from cardgen.records import dataclass

Category = Literal[
    "restricted_rpm",
    "manifold_pressure_curve",
    "ratings",
    "rpm_range",
    "least_manifold_pressure",
    "leaning",
    "altitude_schedule",
    "airspeed",
    "altitude",
    "temperature",
]
CATEGORIES: tuple[Category, ...] = (
    "restricted_rpm",
    "manifold_pressure_curve",
    "ratings",
    "rpm_range",
    "least_manifold_pressure",
    "leaning",
    "altitude_schedule",
    "airspeed",
    "altitude",
    "temperature",
)


@dataclass(frozen=True, slots=True)
class Source:
    """Where a limit is written down."""

    document: str
    section: str = ""
    revision: str = ""

    def __str__(self) -> str:
        """Return the citation as printed, a bare "2.2" or "C" with what it counts."""
        section = f"section {self.section}" if self.section[:1].isdigit() else self.section
        bare = len(self.revision.split()) == 1
        revision = f"revision {self.revision}" if bare else self.revision
        return ", ".join(part for part in (self.document, section, revision) if part)


@dataclass(frozen=True, slots=True)
class RestrictedRpm:
    """Rpm range closed to continuous operation, its ends included.

    Where `above_manifold_pressure` is given the range is closed only at and above that pressure
    [Pa], where `below_manifold_pressure` is given only at and below it, with both between them (or
    outside them, where "above" is the greater). A `phase` known to be another than cruise, such as
    "ground" or "descent", makes the range a note rather than a bar.
    """

    name: str
    low_rpm: float
    high_rpm: float
    wording: str
    source: Source
    above_manifold_pressure: float | None = None
    below_manifold_pressure: float | None = None
    phase: str | None = None


@dataclass(frozen=True, slots=True)
class ManifoldPressureCurve:
    """Greatest continuous manifold pressure [Pa] against rpm, linear between points.

    Beyond its ends no continuous operation is charted, so none is allowed. Two points at one rpm
    are a step.
    """

    name: str
    rpm: tuple[float, ...]
    manifold_pressure: tuple[float, ...]
    wording: str
    source: Source


@dataclass(frozen=True, slots=True)
class LeastManifoldPressure:
    """Least manifold pressure [Pa] against rpm, linear between points.

    One point is a number that holds at every rpm; a pressure of 0 says that an rpm has no limit;
    beyond the ends of a curve it is *unknown*. Two points at one rpm are a step.
    """

    name: str
    rpm: tuple[float, ...]
    manifold_pressure: tuple[float, ...]
    wording: str
    source: Source


@dataclass(frozen=True, slots=True)
class Rating:
    """A rating of the engine: power [W] at rpm; manifold pressure [Pa] and time [s] if limited."""

    name: str
    power: float
    rpm: float
    wording: str
    source: Source
    manifold_pressure: float | None = None
    time_limit: float | None = None


@dataclass(frozen=True, slots=True)
class RpmRange:
    """Least and greatest rpm for continuous operation."""

    name: str
    wording: str
    source: Source
    least_rpm: float | None = None
    greatest_rpm: float | None = None


@dataclass(frozen=True, slots=True)
class LeaningCeiling:
    """Greatest share of rated power [-] and manifold pressure [Pa] that a mixture is allowed at.

    A mixture whose source sets no ceiling (full rich, say) is stated with neither number; one that
    no ceiling names is *unknown*.
    """

    name: str
    mixture: str
    wording: str
    source: Source
    greatest_power_fraction: float | None = None
    greatest_manifold_pressure: float | None = None


@dataclass(frozen=True, slots=True)
class AltitudeSchedule:
    """Greatest manifold pressure [Pa] against pressure altitude [m], linear between points.

    Beyond its ends nothing is charted, so nothing is allowed.
    """

    name: str
    pressure_altitude: tuple[float, ...]
    manifold_pressure: tuple[float, ...]
    wording: str
    source: Source


@dataclass(frozen=True, slots=True)
class AirspeedLimit:
    """V_NO (a caution above it) or V_NE (outside above it), calibrated [m/s]."""

    name: str
    kind: Literal["V_NO", "V_NE"]
    calibrated_airspeed: float
    wording: str
    source: Source


@dataclass(frozen=True, slots=True)
class AltitudeEnvelope:
    """Approved pressure altitudes [m], ends included; None where one side is open."""

    name: str
    wording: str
    source: Source
    least: float | None = None
    greatest: float | None = None


@dataclass(frozen=True, slots=True)
class TemperatureEnvelope:
    """Approved outside air temperatures [K], ends included; None where one side is open."""

    name: str
    wording: str
    source: Source
    least: float | None = None
    greatest: float | None = None


@dataclass(frozen=True, slots=True)
class StatedNone:
    """A category that a source says does not apply, so that it is not reported as unknown."""

    category: Category
    wording: str
    source: Source


Limit = (
    RestrictedRpm
    | ManifoldPressureCurve
    | LeastManifoldPressure
    | Rating
    | RpmRange
    | LeaningCeiling
    | AltitudeSchedule
    | AirspeedLimit
    | AltitudeEnvelope
    | TemperatureEnvelope
)


@dataclass(frozen=True, slots=True)
class Limits:
    """Every limit of one aircraft, kind by kind, and the categories stated as not applying."""

    restricted_rpm: tuple[RestrictedRpm, ...] = ()
    manifold_pressure_curve: tuple[ManifoldPressureCurve, ...] = ()
    ratings: tuple[Rating, ...] = ()
    rpm_range: tuple[RpmRange, ...] = ()
    least_manifold_pressure: tuple[LeastManifoldPressure, ...] = ()
    leaning: tuple[LeaningCeiling, ...] = ()
    altitude_schedule: tuple[AltitudeSchedule, ...] = ()
    airspeed: tuple[AirspeedLimit, ...] = ()
    altitude: tuple[AltitudeEnvelope, ...] = ()
    temperature: tuple[TemperatureEnvelope, ...] = ()
    stated_none: tuple[StatedNone, ...] = ()
