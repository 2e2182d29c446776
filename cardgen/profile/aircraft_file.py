"""Aircraft files: one aircraft, the parts it is made of, and the card its pilots want."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field, model_validator

from cardgen.airframe import Airframe
from cardgen.engine import Mixture
from cardgen.engine import mixture as model
from cardgen.profile.card_section import CardSection
from cardgen.profile.instrument_sections import InstrumentsSection
from cardgen.profile.limit_sections import Category, LimitsSection, RatingSection
from cardgen.profile.section import Section, SourceSection, require_one
from cardgen.profile.values import (
    Choice,
    Date,
    Flag,
    Format,
    FuelVolume,
    LeanOffset,
    Mass,
    Name,
    Number,
    Quantity,
    RichOffset,
    Text,
    Words,
    wrong,
)

ZERO_LIFT_DRAG = {"fixed": 0.028, "retractable": 0.022}
"""Zero-lift drag coefficient that a fit starts from, by undercarriage [-]. Common practice."""

Reference = Annotated[str, Text(200)]


class IdentitySection(Section):
    """Whose card this is, printed on every page."""

    registration: Annotated[str, Text(16)] = Field(description="Registration of the aircraft")
    type: Words = Field(description="Type of the aircraft")
    serial: Name | None = Field(None, description="Serial number of the aircraft")
    operator: Words | None = Field(None, description="Owner, club or school")
    engine_serial: Name | None = Field(None, description="Serial number of the engine installed")
    propeller_serial: Name | None = Field(
        None, description="Serial number of the propeller installed"
    )
    approvals: list[Words] = Field(
        [], max_length=20, description="Supplemental approvals that the configuration rests on"
    )
    handbook: SourceSection = Field(
        description="Approved flight manual that governs: title, section and revision"
    )


class AirframeSection(Section):
    """Wing, drag and mass."""

    wing_area: Annotated[float, Quantity("area", "50 ft2", "600 ft2")] = Field(
        description="Reference area of the wing"
    )
    wing_span: Annotated[float, Quantity("length", "15 ft", "90 ft")] = Field(
        description="Span of the wing"
    )
    gross_mass: Mass = Field(description="Greatest approved mass in flight")
    gear: Annotated[str, Choice(tuple(ZERO_LIFT_DRAG))] = Field(
        description="Undercarriage, fixed or retractable; sets the drag where none is stated"
    )
    zero_lift_drag: Annotated[float, Number(0.010, 0.080)] | None = Field(
        None,
        description="Zero-lift drag coefficient; left out, 0.028 with fixed and 0.022 with "
        "retractable gear until a fit finds better",
    )
    oswald_factor: Annotated[float, Number(0.4, 1.0)] = Field(
        0.75,
        description="Span efficiency factor until a fit finds better; 0.75 where left out",
    )
    greatest_lift_coefficient: Annotated[float, Number(0.8, 2.2)] = Field(
        1.3,
        description="Lift coefficient, flaps up, beyond which level flight is not shown; "
        "1.3 where left out",
    )

    @model_validator(mode="after")
    def _check(self) -> AirframeSection:
        aspect_ratio = self.wing_span**2 / self.wing_area
        if not 3.0 <= aspect_ratio <= 25.0:
            raise wrong(
                f"span and area give an aspect ratio of {aspect_ratio:.1f}",
                "3 to 25; check both",
                at=("wing_span",),
            )
        return self

    def airframe(self) -> Airframe:
        """Return the airframe."""
        drag = self.zero_lift_drag
        return Airframe(
            wing_area=self.wing_area,
            wing_span=self.wing_span,
            zero_lift_drag=ZERO_LIFT_DRAG[self.gear] if drag is None else drag,
            oswald_factor=self.oswald_factor,
            greatest_lift=self.greatest_lift_coefficient,
        )


_MIXTURE_KEYS = ("fuel_air_ratio", "rich_of_peak", "lean_of_peak", "setting")


class MixtureSection(Section):
    """A named way of leaning."""

    name: Name = Field(description="Name, used on the card and on the command line")
    basis: Words = Field(description="How the pilot sets it, printed on the card")
    fuel_air_ratio: Annotated[float, Number(0.050, 0.100)] | None = Field(
        None, description="Mass of fuel per mass of dry air"
    )
    rich_of_peak: RichOffset | None = Field(
        None, description="How far below its peak the exhaust-gas temperature is, on the rich side"
    )
    lean_of_peak: LeanOffset | None = Field(
        None, description="How far below its peak the exhaust-gas temperature is, on the lean side"
    )
    setting: Annotated[str, Choice(("best_power", "best_economy", "peak", "as_flown"))] | None = (
        Field(
            None,
            description="A named point: best_power, best_economy, peak exhaust temperature, or "
            "as_flown (whatever the evidence was flown with)",
        )
    )

    @model_validator(mode="after")
    def _check(self) -> MixtureSection:
        require_one(self, _MIXTURE_KEYS)
        return self

    def mixture(self) -> Mixture:
        """Return the mixture."""
        return Mixture(self.name, self.ratio(), self.basis)

    def ratio(self) -> float:
        """Return the fuel-air ratio."""
        if self.fuel_air_ratio is not None:
            return self.fuel_air_ratio
        if self.setting == "best_power":
            return model.BEST_POWER_FUEL_AIR_RATIO
        if self.setting == "best_economy":
            return model.BEST_ECONOMY_FUEL_AIR_RATIO
        if self.setting == "as_flown":  # between the two optima; a fit scales it to what was seen
            return model.STOICHIOMETRIC_FUEL_AIR_RATIO
        offset = (self.rich_of_peak or 0.0) - (self.lean_of_peak or 0.0)
        return float(model.fuel_air_ratio_at_exhaust_offset(offset))


class FuelSection(Section):
    """Fuel on board."""

    usable: FuelVolume = Field(description="Usable fuel, tanks full")
    reserve: FuelVolume = Field(description="Fuel kept back from range and endurance")

    @model_validator(mode="after")
    def _check(self) -> FuelSection:
        if self.reserve >= self.usable:
            raise wrong("the reserve is not less than the usable fuel", "less", at=("reserve",))
        return self


class AircraftLimitsSection(LimitsSection):
    """Limits that the aircraft's documents state; ratings as well, where they differ."""

    ratings: Category[RatingSection] | None = Field(
        None, description="Ratings that the flight manual states besides the engine's own"
    )


class AircraftFile(Section):
    """An aircraft file, `aircraft/NAME.yaml`."""

    kind: Annotated[str, Choice(("aircraft",))] = Field(
        description="What the file describes: aircraft"
    )
    format: Format = Field(description="Version of the file format")
    demo: Flag = Field(
        False, description="yes for invented data: the card says it is not for flight"
    )
    date: Date = Field(description="Day the profile was last changed, printed on the card")
    engine: Reference = Field(description="Path of the engine file, from this file's folder")
    propeller: Reference = Field(description="Path of the propeller file, from this file's folder")
    identity: IdentitySection = Field(description="Whose card this is")
    airframe: AirframeSection = Field(description="Wing, drag and mass")
    percent_of: Name = Field(description="Name of the rating that percent power is a share of")
    mixtures: list[MixtureSection] = Field(
        min_length=1, max_length=6, description="Named ways of leaning"
    )
    limits: AircraftLimitsSection | None = Field(
        None, description="Limits the aircraft's documents state"
    )
    instruments: InstrumentsSection | None = Field(
        None, description="Errors of the gauges; left out, none has been measured"
    )
    fuel: FuelSection | None = Field(None, description="Fuel on board, for range and endurance")
    card: CardSection = Field(description="What the card shows")
    evidence: list[Reference] = Field(
        [],
        max_length=20,
        description="Paths of points files the model is fitted to, from this file's folder",
    )
