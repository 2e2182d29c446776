"""The `limits` of a profile: one key per category, each a list of limits or a stated none."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import Annotated, Any, TypeVar

from pydantic import Field, Tag, model_validator

from cardgen.limits import kinds
from cardgen.profile.section import (
    Section,
    Sourced,
    by_shape,
    require_increasing,
    require_order,
)
from cardgen.profile.values import (
    Airspeed,
    Altitude,
    Choice,
    Duration,
    ManifoldPressure,
    Name,
    PercentPower,
    Power,
    Rpm,
    Temperature,
    Wording,
    wrong,
)


class LimitSection(Section):
    """What every limit states."""

    name: Name = Field(
        description="Short name; limits of one category that share a name are one limit, as "
        "several sources state it"
    )
    wording: Wording = Field(description="The limit in the words of its source, printed as given")
    source: Sourced = Field(description="Where the limit is written down")

    def limit(self) -> Any:
        """Return the limit as the other layers know it."""
        raise NotImplementedError


class RestrictedRpmSection(LimitSection):
    """Rpm range closed to continuous operation."""

    low: Rpm = Field(description="Lower end of the range, itself closed")
    high: Rpm = Field(description="Upper end of the range, itself closed")
    above_manifold_pressure: ManifoldPressure | None = Field(
        None, description="Where the range is closed only at and above a manifold pressure"
    )
    below_manifold_pressure: ManifoldPressure | None = Field(
        None, description="Where the range is closed only at and below a manifold pressure"
    )
    phase: Annotated[str, Choice(("ground", "take-off", "climb", "cruise", "descent"))] | None = (
        Field(None, description="Where the range is closed only in one phase of flight")
    )

    @model_validator(mode="after")
    def _check(self) -> RestrictedRpmSection:
        require_order(self, "low", "high")
        require_order(self, "above_manifold_pressure", "below_manifold_pressure")
        return self

    def limit(self) -> kinds.RestrictedRpm:
        """Return the restricted range."""
        return kinds.RestrictedRpm(
            self.name,
            self.low,
            self.high,
            self.wording,
            self.source.source(),
            self.above_manifold_pressure,
            self.below_manifold_pressure,
            self.phase,
        )


class RpmPointSection(Section):
    """A point of a curve over rpm."""

    rpm: Rpm = Field(description="Rpm of the point, increasing from point to point")
    manifold_pressure: ManifoldPressure = Field(description="Manifold pressure of the point")


class RpmCurveSection(LimitSection):
    """Manifold pressure against rpm, linear between points."""

    points: list[RpmPointSection] = Field(
        min_length=2, max_length=20, description="Points of the curve, by increasing rpm"
    )

    @model_validator(mode="after")
    def _check(self) -> RpmCurveSection:
        require_increasing([point.rpm for point in self.points], at=("points",), leaf="rpm")
        return self


class ManifoldPressureCurveSection(RpmCurveSection):
    """Greatest continuous manifold pressure against rpm."""

    def limit(self) -> kinds.ManifoldPressureCurve:
        """Return the curve."""
        return kinds.ManifoldPressureCurve(
            self.name,
            tuple(point.rpm for point in self.points),
            tuple(point.manifold_pressure for point in self.points),
            self.wording,
            self.source.source(),
        )


class LeastManifoldPressureSection(RpmCurveSection):
    """Least manifold pressure against rpm."""

    def limit(self) -> kinds.LeastManifoldPressure:
        """Return the curve."""
        return kinds.LeastManifoldPressure(
            self.name,
            tuple(point.rpm for point in self.points),
            tuple(point.manifold_pressure for point in self.points),
            self.wording,
            self.source.source(),
        )


class RatingSection(LimitSection):
    """A rating: power at rpm, continuous or with a time limit."""

    power: Power = Field(description="Rated power")
    rpm: Rpm = Field(description="Rated rpm of the engine")
    manifold_pressure: ManifoldPressure | None = Field(
        None, description="Manifold pressure of the rating, where its source states one"
    )
    time_limit: Duration | None = Field(
        None, description="How long the rating may be used; leave it out where continuous"
    )

    def limit(self) -> kinds.Rating:
        """Return the rating."""
        return kinds.Rating(
            self.name,
            self.power,
            self.rpm,
            self.wording,
            self.source.source(),
            self.manifold_pressure,
            self.time_limit,
        )


class RangeSection(LimitSection):
    """A limit with a least value, a greatest value or both."""

    @model_validator(mode="after")
    def _check(self) -> RangeSection:
        if getattr(self, "least", None) is None and getattr(self, "greatest", None) is None:
            raise wrong("neither least nor greatest is given", "at least one of the two")
        require_order(self, "least", "greatest")
        return self


class RpmRangeSection(RangeSection):
    """Least and greatest rpm for continuous operation."""

    least: Rpm | None = Field(None, description="Least rpm")
    greatest: Rpm | None = Field(None, description="Greatest rpm")

    def limit(self) -> kinds.RpmRange:
        """Return the range."""
        return kinds.RpmRange(
            self.name, self.wording, self.source.source(), self.least, self.greatest
        )


class LeaningSection(LimitSection):
    """How much power and manifold pressure a mixture is allowed at."""

    mixture: Name = Field(description="Name of the mixture it holds for")
    greatest_power: PercentPower | None = Field(
        None, description="Greatest power with that mixture, in percent of the rating `percent_of`"
    )
    greatest_manifold_pressure: ManifoldPressure | None = Field(
        None, description="Greatest manifold pressure with that mixture"
    )

    @model_validator(mode="after")
    def _check(self) -> LeaningSection:
        if self.greatest_power is None and self.greatest_manifold_pressure is None:
            raise wrong("no ceiling is given", "greatest_power or greatest_manifold_pressure")
        return self

    def limit(self) -> kinds.LeaningCeiling:
        """Return the ceiling."""
        return kinds.LeaningCeiling(
            self.name,
            self.mixture,
            self.wording,
            self.source.source(),
            self.greatest_power,
            self.greatest_manifold_pressure,
        )


class AltitudePointSection(Section):
    """A point of a schedule over altitude."""

    altitude: Altitude = Field(description="Pressure altitude of the point, increasing")
    manifold_pressure: ManifoldPressure = Field(description="Greatest manifold pressure there")


class AltitudeScheduleSection(LimitSection):
    """Greatest manifold pressure against pressure altitude, linear between points."""

    points: list[AltitudePointSection] = Field(
        min_length=2, max_length=20, description="Points of the schedule, by increasing altitude"
    )

    @model_validator(mode="after")
    def _check(self) -> AltitudeScheduleSection:
        altitudes = [point.altitude for point in self.points]
        require_increasing(altitudes, at=("points",), leaf="altitude")
        return self

    def limit(self) -> kinds.AltitudeSchedule:
        """Return the schedule."""
        return kinds.AltitudeSchedule(
            self.name,
            tuple(point.altitude for point in self.points),
            tuple(point.manifold_pressure for point in self.points),
            self.wording,
            self.source.source(),
        )


class AirspeedSection(LimitSection):
    """An airspeed that cruise is held against."""

    kind: Annotated[str, Choice(("V_NO", "V_NE"))] = Field(
        description="V_NO (beyond it is a caution) or V_NE (beyond it is outside)"
    )
    calibrated_airspeed: Airspeed = Field(description="The speed as calibrated airspeed")

    def limit(self) -> kinds.AirspeedLimit:
        """Return the limit."""
        return kinds.AirspeedLimit(
            self.name,
            "V_NO" if self.kind == "V_NO" else "V_NE",
            self.calibrated_airspeed,
            self.wording,
            self.source.source(),
        )


class AltitudeSection(RangeSection):
    """Approved pressure altitudes."""

    least: Altitude | None = Field(None, description="Least pressure altitude")
    greatest: Altitude | None = Field(None, description="Greatest pressure altitude")

    def limit(self) -> kinds.AltitudeEnvelope:
        """Return the envelope."""
        return kinds.AltitudeEnvelope(
            self.name, self.wording, self.source.source(), self.least, self.greatest
        )


class TemperatureSection(RangeSection):
    """Approved outside air temperatures."""

    least: Temperature | None = Field(None, description="Least outside air temperature")
    greatest: Temperature | None = Field(None, description="Greatest outside air temperature")

    def limit(self) -> kinds.TemperatureEnvelope:
        """Return the envelope."""
        return kinds.TemperatureEnvelope(
            self.name, self.wording, self.source.source(), self.least, self.greatest
        )


class NoneSection(Section):
    """A source's statement that a category does not apply."""

    none: Wording = Field(description="In the words of the source: there is no such limit")
    source: Sourced = Field(description="Where that is written down")


_T = TypeVar("_T")
Category = Annotated[
    Annotated[list[_T], Field(min_length=1, max_length=20), Tag("<list>")]
    | Annotated[NoneSection, Tag("<mapping>")],
    by_shape(list="a list of limits", mapping="a mapping with the keys none and source"),
]


class LimitsSection(Section):
    """Limits by category. A category that no file states is reported as unknown, never allowed."""

    restricted_rpm: Category[RestrictedRpmSection] | None = Field(
        None, description="Rpm ranges closed to continuous operation"
    )
    manifold_pressure_curve: Category[ManifoldPressureCurveSection] | None = Field(
        None, description="Greatest continuous manifold pressure against rpm"
    )
    rpm_range: Category[RpmRangeSection] | None = Field(
        None, description="Least and greatest rpm for continuous operation"
    )
    least_manifold_pressure: Category[LeastManifoldPressureSection] | None = Field(
        None, description="Least manifold pressure against rpm"
    )
    leaning: Category[LeaningSection] | None = Field(
        None, description="Greatest power and manifold pressure with a mixture"
    )
    altitude_schedule: Category[AltitudeScheduleSection] | None = Field(
        None, description="Greatest manifold pressure against pressure altitude"
    )
    airspeed: Category[AirspeedSection] | None = Field(
        None, description="V_NO and V_NE, calibrated"
    )
    altitude: Category[AltitudeSection] | None = Field(
        None, description="Approved pressure altitudes"
    )
    temperature: Category[TemperatureSection] | None = Field(
        None, description="Approved outside air temperatures"
    )

    def stated(self, category: kinds.Category) -> tuple[Any, ...]:
        """Return the limits of a category, none where it has none."""
        entries = getattr(self, category, None)
        return tuple(entry.limit() for entry in entries) if isinstance(entries, list) else ()

    def stated_none(self) -> Iterator[kinds.StatedNone]:
        """Yield the categories stated as not applying."""
        for category in kinds.CATEGORIES:
            entry = getattr(self, category, None)
            if isinstance(entry, NoneSection):
                yield kinds.StatedNone(category, entry.none, entry.source.source())


def merge_limits(
    sections: Iterable[LimitsSection | None], *, ratings: Iterable[kinds.Rating]
) -> kinds.Limits:
    """Return the limits of all files together.

    Parameters
    ----------
    sections : iterable of LimitsSection
        The `limits` of the engine, propeller and aircraft file, None where a file has none [-]
    ratings : iterable of Rating
        The ratings of the engine file [-]

    Returns
    -------
    Limits
        Every limit of every file, in the order of the files [-]
    """
    stated = [section for section in sections if section is not None]
    by_category = {
        category: tuple(limit for section in stated for limit in section.stated(category))
        for category in kinds.CATEGORIES
    }
    by_category["ratings"] = (*ratings, *by_category["ratings"])
    none = tuple(entry for section in stated for entry in section.stated_none())
    return kinds.Limits(**by_category, stated_none=none)
