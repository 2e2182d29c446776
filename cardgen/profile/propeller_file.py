"""Propeller files: what one type of propeller is, whichever aircraft it is bolted to."""

from __future__ import annotations

import math
from typing import Annotated

from pydantic import Field, model_validator

from cardgen.curves import MonotoneCurve
from cardgen.profile.limit_sections import LimitsSection
from cardgen.profile.section import Section, require_increasing, require_one, require_order
from cardgen.profile.values import Choice, Format, Number, Quantity, Words, wrong
from cardgen.propeller import (
    REFERENCE_STATION,
    Blade,
    Propeller,
    blade_angle_at_reference,
    blade_from_activity_factor,
)

_INNERMOST = 0.35
"""The innermost stated station may not lie farther out [r/R]: the blade inside it still works."""


class StationSection(Section):
    """A blade measured at one radius."""

    radius_fraction: Annotated[float, Number(0.05, 1.0)] = Field(
        description="Radius of the station over the radius of the tip, increasing to exactly 1"
    )
    chord: Annotated[float, Quantity("length", "0.2 in", "20 in")] = Field(
        description="Chord of the blade there"
    )
    thickness_ratio: Annotated[float, Number(0.02, 1.0)] = Field(
        description="Greatest thickness over chord there"
    )
    angle: Annotated[float, Quantity("angle", "-10 deg", "80 deg")] = Field(
        description="Blade angle there, all stations at one setting of the hub"
    )


class BladeSection(Section):
    """Form of the blades: a published form scaled, or measured stations."""

    activity_factor: Annotated[float, Number(50.0, 200.0)] | None = Field(
        None,
        description="Activity factor of one blade; the published blade form 5868-9 scaled to it",
    )
    stations: list[StationSection] | None = Field(
        None, min_length=4, max_length=40, description="Measured stations from root to tip"
    )

    @model_validator(mode="after")
    def _check(self) -> BladeSection:
        require_one(self, ("activity_factor", "stations"))
        if self.stations is not None:
            radii = [station.radius_fraction for station in self.stations]
            require_increasing(radii, at=("stations",), leaf="radius_fraction")
            if radii[0] > _INNERMOST:
                raise wrong(
                    f"the innermost station is at {radii[0]:g}",
                    f"one at {_INNERMOST:g} or farther in",
                    at=("stations", 0, "radius_fraction"),
                )
            if radii[-1] != 1.0:
                raise wrong(
                    f"the outermost station is at {radii[-1]:g}",
                    "the tip, radius_fraction 1",
                    at=("stations", len(radii) - 1, "radius_fraction"),
                )
        return self

    def blade(self, diameter: float) -> Blade:
        """Return the form of the blades."""
        if self.stations is None:
            assert self.activity_factor is not None  # require_one saw to it
            return blade_from_activity_factor(self.activity_factor)
        radii = tuple(station.radius_fraction for station in self.stations)
        angles = tuple(station.angle for station in self.stations)
        at_reference = float(MonotoneCurve(radii, angles)(REFERENCE_STATION))
        return Blade(
            radii,
            tuple(station.chord / diameter for station in self.stations),
            tuple(station.thickness_ratio for station in self.stations),
            tuple(angle - at_reference for angle in angles),
        )


class StopsSection(Section):
    """Blade angles between which the governor can work."""

    fine: Annotated[float, Quantity("angle", "0 deg", "60 deg")] = Field(
        description="Least blade angle, on the fine-pitch stop"
    )
    coarse: Annotated[float, Quantity("angle", "0 deg", "60 deg")] = Field(
        description="Greatest blade angle in flight, on the coarse-pitch stop"
    )
    station: Annotated[float, Quantity("length", "10 in", "60 in")] | None = Field(
        None,
        description="Radius at which the data sheet quotes both; three quarters of the tip "
        "radius where left out",
    )

    @model_validator(mode="after")
    def _check(self) -> StopsSection:
        require_order(self, "fine", "coarse")
        return self


class PropellerFile(Section):
    """A propeller file, `propellers/NAME.yaml`."""

    kind: Annotated[str, Choice(("propeller",))] = Field(
        description="What the file describes: propeller"
    )
    format: Format = Field(description="Version of the file format")
    model: Words = Field(description="Maker's designation, printed on the card")
    blades: Annotated[int, Number(2, 6, whole=True)] = Field(description="Number of blades")
    diameter: Annotated[float, Quantity("length", "50 in", "120 in")] = Field(
        description="Diameter as installed, after any cropping"
    )
    blade: BladeSection = Field(description="Form of the blades")
    stops: StopsSection = Field(description="Pitch stops")
    limits: LimitsSection | None = Field(None, description="Limits the propeller's documents state")

    def propeller(self) -> Propeller:
        """Return the propeller, its blade angles converted to three quarters of the radius."""
        blade = self.blade.blade(self.diameter)
        station = REFERENCE_STATION
        if self.stops.station is not None:
            station = 2.0 * self.stops.station / self.diameter
        fine, coarse = (
            float(blade_angle_at_reference(blade, angle, station=station))
            for angle in (self.stops.fine, self.stops.coarse)
        )
        assert math.isfinite(fine), "the station lies on the blade"
        return Propeller(
            diameter=self.diameter,
            blade_count=self.blades,
            blade=blade,
            fine_stop=fine,
            coarse_stop=coarse,
            reference_station=station,
        )
