"""The `instruments` of a profile: what its gauges are known to be wrong by."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field, Tag, model_validator

from cardgen.airspeed import PositionError
from cardgen.limits.gauges import (
    UNMEASURED_MANIFOLD_PRESSURE_GAUGE,
    UNMEASURED_TACHOMETER,
    GaugeError,
    Gauges,
)
from cardgen.profile.section import Section, by_shape, require_increasing, require_one
from cardgen.profile.values import (
    Airspeed,
    Choice,
    Date,
    ManifoldPressure,
    Number,
    PressureBand,
    PressureCorrection,
    Rpm,
    RpmBand,
    RpmCorrection,
    Words,
    wrong,
)


class TachometerPointSection(Section):
    """What the tachometer read at one true rpm."""

    indicated: Rpm = Field(description="Reading, increasing from point to point")
    actual: Rpm = Field(description="True rpm at that reading, increasing too")


class PressurePointSection(Section):
    """What the manifold-pressure gauge read at one true pressure."""

    indicated: ManifoldPressure = Field(description="Reading, increasing from point to point")
    actual: ManifoldPressure = Field(description="True pressure at that reading, increasing too")


class CalibrationSection(Section):
    """How a gauge was measured, and how well."""

    date: Date = Field(description="Day of the measurement")
    method: Words = Field(description="How it was measured")


class TachometerSection(CalibrationSection):
    """Calibration of the tachometer."""

    correction: RpmCorrection | None = Field(
        None, description="What is added to any reading to give the true rpm"
    )
    points: list[TachometerPointSection] | None = Field(
        None, min_length=2, max_length=20, description="Readings and true rpm, linear between"
    )
    band: RpmBand = Field(description="How far the true rpm may still lie from that, either way")

    @model_validator(mode="after")
    def _check(self) -> TachometerSection:
        require_one(self, ("correction", "points"))
        _require_readable(self.points or [])
        return self

    def gauge(self) -> GaugeError:
        """Return the calibration."""
        return _gauge(self, self.correction, self.points or [], self.band)


class PressureGaugeSection(CalibrationSection):
    """Calibration of the manifold-pressure gauge."""

    correction: PressureCorrection | None = Field(
        None, description="What is added to any reading to give the true pressure"
    )
    points: list[PressurePointSection] | None = Field(
        None, min_length=2, max_length=20, description="Readings and true pressures, linear between"
    )
    band: PressureBand = Field(
        description="How far the true pressure may still lie from that, either way"
    )

    @model_validator(mode="after")
    def _check(self) -> PressureGaugeSection:
        require_one(self, ("correction", "points"))
        _require_readable(self.points or [])
        return self

    def gauge(self) -> GaugeError:
        """Return the calibration."""
        return _gauge(self, self.correction, self.points or [], self.band)


_Points = list[TachometerPointSection] | list[PressurePointSection]


def _require_readable(points: _Points) -> None:
    """Refuse a calibration that cannot be read both ways."""
    require_increasing([p.indicated for p in points], at=("points",), leaf="indicated")
    require_increasing([p.actual for p in points], at=("points",), leaf="actual")


def _gauge(
    section: CalibrationSection, correction: float | None, points: _Points, band: float
) -> GaugeError:
    """Return a calibration as the limits know it."""
    pairs = [(point.indicated, point.actual - point.indicated) for point in points]
    if correction is not None:
        pairs = [(0.0, correction)]
    indicated, corrections = zip(*pairs, strict=True)
    return GaugeError(indicated, corrections, band, True, section.method, section.date)


class PositionPointSection(Section):
    """A point of the position-error table."""

    indicated: Airspeed = Field(description="Indicated airspeed, increasing from point to point")
    calibrated: Airspeed = Field(description="Calibrated airspeed there, increasing too")


_NotMeasured = Annotated[str, Choice(("not measured",), "or its calibration"), Tag("<text>")]
_SHAPES = by_shape(
    text="the words not measured", mapping="a mapping with correction or points, band, date, method"
)


class InstrumentsSection(Section):
    """Errors of the instruments that a cruise setting is read from."""

    tachometer: Annotated[
        _NotMeasured | Annotated[TachometerSection, Tag("<mapping>")], _SHAPES
    ] = Field(
        "not measured",
        description="Error of the tachometer; unmeasured, a band of ±50 rpm guards every limit",
    )
    manifold_pressure: Annotated[
        _NotMeasured | Annotated[PressureGaugeSection, Tag("<mapping>")], _SHAPES
    ] = Field(
        "not measured",
        description="Error of the manifold-pressure gauge; unmeasured, a default band guards",
    )
    fuel_flow_factor: Annotated[float, Number(0.8, 1.25)] = Field(
        1.0, description="True fuel flow over indicated fuel flow; 1 where left out"
    )
    temperature_recovery: Annotated[float, Number(0.0, 1.0)] | None = Field(
        None,
        description="Share of the temperature rise of air brought to rest that the outside-air "
        "probe shows; left out, its reading is taken as true",
    )
    position_error: list[PositionPointSection] | None = Field(
        None, min_length=2, max_length=20, description="Calibrated against indicated airspeed"
    )

    @model_validator(mode="after")
    def _check(self) -> InstrumentsSection:
        points = self.position_error or []
        for leaf in ("indicated", "calibrated"):
            speeds = [getattr(point, leaf) for point in points]
            require_increasing(speeds, at=("position_error",), leaf=leaf)
        for index, point in enumerate(points):
            if abs(point.calibrated - point.indicated) > 0.2 * point.indicated:
                raise wrong(
                    "the two speeds differ by more than a fifth",
                    "a position error of a few knots",
                    at=("position_error", index, "calibrated"),
                )
        return self

    def gauges(self) -> Gauges:
        """Return the gauges."""
        points = self.position_error
        return Gauges(
            tachometer=(
                UNMEASURED_TACHOMETER
                if isinstance(self.tachometer, str)
                else self.tachometer.gauge()
            ),
            manifold_pressure=(
                UNMEASURED_MANIFOLD_PRESSURE_GAUGE
                if isinstance(self.manifold_pressure, str)
                else self.manifold_pressure.gauge()
            ),
            fuel_flow_factor=self.fuel_flow_factor,
            temperature_recovery=self.temperature_recovery,
            position_error=None
            if points is None
            else PositionError(
                tuple(point.calibrated for point in points),
                tuple(point.calibrated - point.indicated for point in points),
            ),
        )
