"""The `card` of a profile: what its pages show, and in which units."""

from __future__ import annotations

from dataclasses import replace
from typing import Annotated, Literal

from pydantic import Field, Tag, model_validator

from cardgen.profile.section import (
    Section,
    Sourced,
    by_shape,
    require_increasing,
    require_order,
)
from cardgen.profile.values import (
    Altitude,
    Choice,
    Fraction,
    IsaDeviation,
    Mass,
    Name,
    PercentPower,
    Rpm,
    Wind,
    wrong,
)
from cardgen.tables.choices import IN_ONE_UNIT, BreakIn, CardChoices, SecondUnits, UnitSet

UNIT_SETS = {
    "us": UnitSet(),
    "metric": UnitSet(
        pressure="hPa", fuel_flow="l/h", speed="kt", temperature="degC", altitude="ft", mass="kg"
    ),
}
"""Sets of units by name; `metric` keeps feet and knots, as flown nearly everywhere."""


PRESSURES = ("inHg", "hPa", "cmHg", "kPa", "mmHg", "mbar")
VOLUME_FLOWS = ("gal/h", "l/h", "impgal/h")
MASS_FLOWS = ("lb/h", "kg/h")
SPEEDS = ("kt", "mph", "km/h")


class UnitsSection(Section):
    """Units of the card: a set, and single units that depart from it."""

    set: Annotated[str, Choice(tuple(UNIT_SETS))] = Field(
        "us", description="Set that the units left out here come from"
    )
    pressure: Annotated[str, Choice(PRESSURES)] | None = Field(
        None, description="Unit of manifold pressure"
    )
    fuel_flow: Annotated[str, Choice((*VOLUME_FLOWS, *MASS_FLOWS))] | None = Field(
        None, description="Unit of fuel flow"
    )
    speed: Annotated[str, Choice(SPEEDS)] | None = Field(None, description="Unit of airspeed")
    temperature: Annotated[str, Choice(("degC", "degF"))] | None = Field(
        None, description="Unit of temperature"
    )
    altitude: Annotated[str, Choice(("ft", "m"))] | None = Field(
        None, description="Unit of altitude"
    )
    mass: Annotated[str, Choice(("lb", "kg"))] | None = Field(None, description="Unit of mass")

    def unit_set(self) -> UnitSet:
        """Return the units."""
        stated = {
            key: value
            for key in ("pressure", "fuel_flow", "speed", "temperature", "altitude", "mass")
            if (value := getattr(self, key)) is not None
        }
        return replace(UNIT_SETS[self.set], **stated)


class SecondUnitsSection(Section):
    """Units that numbers of the tables are printed in once more, in small type."""

    pressure: Annotated[str, Choice(PRESSURES)] | None = Field(
        None, description="Second unit of manifold pressure"
    )
    fuel_flow: Annotated[str, Choice((*VOLUME_FLOWS, *MASS_FLOWS))] | None = Field(
        None, description="Second unit of fuel flow; of volume where the first is, else of mass"
    )
    speed: Annotated[str, Choice(SPEEDS)] | None = Field(
        None, description="Second unit of airspeed"
    )

    def second_units(self) -> SecondUnits:
        """Return the units."""
        return SecondUnits(self.pressure, self.fuel_flow, self.speed)


_HAIR = 1e-9  # what converting a unit may leave of a share, or of a metre


class BreakInSection(Section):
    """Power band and ceiling that the operator keeps until a fresh engine is run in."""

    least_power: PercentPower = Field(description="Least percent power")
    greatest_power: PercentPower = Field(description="Greatest percent power")
    greatest_altitude: Altitude = Field(
        description="Greatest altitude, density or pressure as the rows of the card are"
    )
    source: Sourced

    @model_validator(mode="after")
    def _check(self) -> BreakInSection:
        require_order(self, "least_power", "greatest_power")
        return self

    def break_in(self) -> BreakIn:
        """Return the choice in SI."""
        return BreakIn(
            self.least_power, self.greatest_power, self.greatest_altitude, self.source.source()
        )


_ORDERED = ("rpm", "percent_powers", "altitudes", "temperatures", "masses", "winds")


class CardSection(Section):
    """Columns, rows, pages, units and paper of the card."""

    rpm: list[Rpm] = Field(
        min_length=1, max_length=6, description="Rpm columns as the tachometer reads, increasing"
    )
    percent_powers: list[PercentPower] = Field(
        min_length=1, max_length=8, description="Percent powers, increasing; one table each"
    )
    altitudes: list[Altitude] = Field(
        min_length=1, max_length=12, description="Altitude rows, increasing"
    )
    altitude_kind: Annotated[str, Choice(("density", "pressure"))] = Field(
        "density",
        description="What the altitude rows are: density (where left out) or pressure altitude",
    )
    temperatures: list[IsaDeviation] = Field(
        [0.0],
        min_length=1,
        max_length=5,
        description="Deviations from the standard temperature, increasing; "
        "columns of a pressure-altitude card; standard alone where left out",
    )
    masses: list[Mass] | None = Field(
        None,
        min_length=1,
        max_length=4,
        description="Aircraft masses, increasing; the gross mass where left out",
    )
    mixtures: list[Name] | None = Field(
        None,
        min_length=1,
        max_length=6,
        description="Names of the mixtures shown, in this order; all where left out",
    )
    winds: list[Wind] = Field(
        [0.0],
        min_length=1,
        max_length=7,
        description="Winds along the track for distances, headwind positive, increasing; "
        "still air where left out",
    )
    relative_humidity: Fraction = Field(
        0.0, description="Relative humidity of the air; dry where left out"
    )
    units: Annotated[
        Annotated[str, Choice(tuple(UNIT_SETS)), Tag("<text>")]
        | Annotated[UnitsSection, Tag("<mapping>")],
        by_shape(text="us or metric", mapping="a mapping of single units"),
    ] = Field(
        "us",
        description="Units of the card: the name of a set (us where left out), or unit by unit",
    )
    second_units: SecondUnitsSection | None = Field(
        None, description="Units in small type beside the first; none where left out"
    )
    paper: Annotated[str, Choice(("half-letter", "A5", "A6", "letter", "A4"))] = Field(
        "half-letter",
        description="Paper; letter and A4 carry two pages each; half-letter where left out",
    )

    break_in: BreakInSection | None = Field(
        None,
        description="Narrows the card to the operator's power band and ceiling for a fresh engine; "
        "left out once it is run in",
    )

    @model_validator(mode="after")
    def _check(self) -> CardSection:
        for key in _ORDERED:
            require_increasing(getattr(self, key) or [], at=(key,), leaf="")
        if self.altitude_kind == "density" and self.temperatures != [0.0]:
            raise wrong(
                "temperature columns on a card by density altitude",
                "altitude_kind: pressure, or no temperatures",
                at=("temperatures",),
            )
        for index, name in enumerate(self.mixtures or ()):
            if name in (self.mixtures or ())[:index]:
                raise wrong(f"{name!r} is listed twice", "each once", at=("mixtures", index))
        self._check_second_units()
        for key, kept in (("percent_powers", self._powers()), ("altitudes", self._altitudes())):
            if not kept:
                raise wrong("none of them lies within break_in", "one or more that do", at=(key,))
        return self

    def _unit_set(self) -> UnitSet:
        """Return the first units."""
        return UNIT_SETS[self.units] if isinstance(self.units, str) else self.units.unit_set()

    def _check_second_units(self) -> None:
        """Require second units to differ from the first and to need no fuel density."""
        if self.second_units is None:
            return
        first, second = self._unit_set(), self.second_units.second_units()
        for key in ("pressure", "fuel_flow", "speed"):
            if getattr(second, key) == getattr(first, key):
                raise wrong("is the first unit as well", "another unit", at=("second_units", key))
        same = (first.fuel_flow in MASS_FLOWS) == (second.fuel_flow in MASS_FLOWS)
        if second.fuel_flow is not None and not same:
            raise wrong(
                "turns volume into mass or mass into volume",
                "a unit of volume where the first is one, else of mass",
                at=("second_units", "fuel_flow"),
            )

    def _powers(self) -> list[float]:
        """Return the powers that are shown."""
        band = self.break_in
        if band is None:
            return self.percent_powers
        low, high = band.least_power - _HAIR, band.greatest_power + _HAIR
        return [power for power in self.percent_powers if low <= power <= high]

    def _altitudes(self) -> list[float]:
        """Return the altitudes that are shown."""
        band = self.break_in
        if band is None:
            return self.altitudes
        return [a for a in self.altitudes if a <= band.greatest_altitude + _HAIR]

    def choices(self, *, gross_mass: float, mixtures: tuple[str, ...]) -> CardChoices:
        """Return the choices, with what is left out filled in.

        Parameters
        ----------
        gross_mass : float
            Greatest mass of the aircraft [kg]
        mixtures : tuple of str
            Names of all mixtures of the profile [-]

        Returns
        -------
        CardChoices
            What the card shows [-]
        """
        kind: Literal["density", "pressure"] = (
            "density" if self.altitude_kind == "density" else "pressure"
        )
        units = self._unit_set()
        return CardChoices(
            rpm=tuple(self.rpm),
            power_fraction=tuple(self._powers()),
            altitude=tuple(self._altitudes()),
            altitude_kind=kind,
            isa_deviation=tuple(self.temperatures),
            mass=tuple(self.masses) if self.masses else (gross_mass,),
            mixtures=tuple(self.mixtures) if self.mixtures else mixtures,
            units=units,
            second_units=self.second_units.second_units() if self.second_units else IN_ONE_UNIT,
            paper=self.paper,
            relative_humidity=self.relative_humidity,
            break_in=self.break_in.break_in() if self.break_in else None,
        )
