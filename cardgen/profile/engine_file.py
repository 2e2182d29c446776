"""Engine files: what one type of engine is, whichever aircraft it hangs in."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from cardgen.engine import Engine
from cardgen.engine.model import DEFAULT_FUEL_DENSITY
from cardgen.profile.limit_sections import LimitsSection, RatingSection
from cardgen.profile.section import Section
from cardgen.profile.values import Choice, Format, Induction, Name, Number, Quantity, Words


class EngineFile(Section):
    """An engine file, `engines/NAME.yaml`."""

    kind: Annotated[str, Choice(("engine",))] = Field(description="What the file describes: engine")
    format: Format = Field(description="Version of the file format")
    model: Words = Field(description="Maker's designation, printed on the card")
    displacement: Annotated[float, Quantity("volume", "50 in3", "2000 in3")] = Field(
        description="Swept volume of all cylinders"
    )
    compression_ratio: Annotated[float, Number(5.0, 13.0)] = Field(description="Compression ratio")
    cylinders: Annotated[int, Number(2, 12, whole=True)] | None = Field(
        None, description="Number of cylinders, for the record"
    )
    induction: Annotated[str, Induction()] = Field(
        "natural", description="How the engine gets its air; only `natural` is modelled"
    )
    gear_ratio: Annotated[float, Number(0.3, 1.0)] = Field(
        1.0, description="Propeller rpm over engine rpm; 1, direct drive, where left out"
    )
    fuel_density: Annotated[float, Quantity("density", "0.65 kg/l", "0.85 kg/l")] = Field(
        DEFAULT_FUEL_DENSITY, description="Density of the fuel; 6.0 lb/gal where left out"
    )
    ratings: list[RatingSection] = Field(
        min_length=1,
        max_length=6,
        description="Ratings of the engine; percent power is of one of them",
    )
    full_throttle_rating: Name | None = Field(
        None,
        description="Name of the rating that full throttle gives at sea level on a standard day "
        "at best-power mixture, which sets the level of the model; "
        "the rating of greatest power where left out",
    )
    limits: LimitsSection | None = Field(None, description="Limits the engine's documents state")

    def engine(self) -> Engine:
        """Return the engine, its fitted parameters at their priors."""
        rating = max(self.ratings, key=lambda rating: rating.power)
        for stated in self.ratings:
            if stated.name == self.full_throttle_rating:
                rating = stated
        return Engine(
            displacement=self.displacement,
            compression_ratio=self.compression_ratio,
            rated_power=rating.power,
            rated_rpm=rating.rpm,
            gear_ratio=self.gear_ratio,
            fuel_density=self.fuel_density,
        )
