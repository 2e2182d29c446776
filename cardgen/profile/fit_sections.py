"""Fit files as models: what `cardgen fit` writes, and nothing else, is read back."""

from typing import Annotated, Self

from pydantic import Field, model_validator

from cardgen.profile.section import Section
from cardgen.profile.values import Choice, Format, Number, Text, wrong

MOST_PARAMETERS = 40
MOST_ROWS = 10_000

Real = Annotated[float, Number(-1e12, 1e12)]
Positive = Annotated[float, Number(0.0, 1e12)]
Count = Annotated[int, Number(0, MOST_ROWS, whole=True)]
Digest = Annotated[str, Text(64)]
Label = Annotated[str, Text(120)]
Pair = Annotated[list[Real], Field(min_length=2, max_length=2)]
Row = Annotated[list[Real], Field(max_length=MOST_PARAMETERS)]
Matrix = Annotated[list[Row], Field(max_length=MOST_PARAMETERS)]


class PartsSection(Section):
    """Digests of what the fit is of."""

    engine: Digest = Field(description="Digest of the engine")
    propeller: Digest = Field(description="Digest of the propeller")
    airframe: Digest = Field(description="Digest of the airframe")
    gauges: Digest = Field(description="Digest of the gauges that flights were read from")


class NamedDigestSection(Section):
    """Something that has a name, and its digest."""

    name: Label = Field(description="Name")
    digest: Digest = Field(description="Digest")


class CoversSection(Section):
    """Least and greatest of what the evidence covers, SI and rpm."""

    pressure: Pair = Field(description="Static pressure")
    temperature: Pair = Field(description="True temperature")
    rpm: Pair = Field(description="True rpm")
    power: Pair = Field(description="Brake power")

    @model_validator(mode="after")
    def _check(self) -> Self:
        for name in type(self).model_fields:
            low, high = getattr(self, name)
            if low > high:
                raise wrong("the ends are reversed", "the lesser first", at=(name,))
        return self


class EvidenceSection(Section):
    """What was fitted to."""

    files: list[NamedDigestSection] = Field(max_length=100, description="Points files")
    flight_rows: Count = Field(description="How many of the rows were flown")
    covers: CoversSection = Field(description="Ranges of the rows")
    rows: list[Digest] = Field(
        min_length=1, max_length=MOST_ROWS, description="Digest of every row"
    )


class ParameterSection(Section):
    """One parameter."""

    name: Label = Field(description="Name")
    prior: Real = Field(description="Mean before the evidence")
    prior_deviation: Positive = Field(description="Standard deviation before the evidence")
    value: Real = Field(description="What was found")
    standard_error: Positive = Field(description="Standard error of what was found")


class TripleSection(Section):
    """One number per quantity that evidence states, in SI; left out where none is stated."""

    manifold_pressure: Positive | None = Field(None, description="Manifold pressure, Pa")
    fuel_flow: Positive | None = Field(None, description="Fuel flow, kg/s")
    true_airspeed: Positive | None = Field(None, description="True airspeed, m/s")


class ScatterSection(Section):
    """Standard deviations of a row from the right model, SI."""

    manifold_pressure: Positive = Field(description="Manifold pressure, Pa")
    fuel_flow: Positive = Field(description="Fuel flow, kg/s")
    true_airspeed: Positive = Field(description="True airspeed, m/s")


class EarlierSection(Section):
    """What an earlier fit, whose rows were not given again, had told before."""

    rows: list[Digest] = Field(max_length=MOST_ROWS, description="Digest of every row of it")
    covers: CoversSection = Field(description="Ranges of its rows")
    values: Row = Field(description="Parameters, in the order of `parameters`")
    covariance: Matrix = Field(description="Covariance of them")


class FitFileSection(Section):
    """A fit file, `NAME.fit.yaml`."""

    kind: Annotated[str, Choice(("fit",))] = Field(description="What the file holds: fit")
    format: Format = Field(description="Version of the file format")
    model_version: Count = Field(description="Version of the equations that were fitted")
    aircraft: Label = Field(description="Name of the profile")
    parts: PartsSection = Field(description="Digests of the parts")
    mixtures: list[NamedDigestSection] = Field(
        min_length=1, max_length=20, description="Digests of the mixtures"
    )
    evidence: EvidenceSection = Field(description="What was fitted to")
    parameters: list[ParameterSection] = Field(
        min_length=1, max_length=MOST_PARAMETERS, description="What was found"
    )
    covariance: Matrix = Field(description="Covariance of the parameters")
    scatter: ScatterSection = Field(description="Scatter of the evidence")
    rms: TripleSection = Field(description="Root mean square residual")
    leave_one_out_rms: TripleSection = Field(
        description="Root mean square residual of rows that the fit has not seen"
    )
    warnings: list[Annotated[str, Text(600)]] = Field(
        [], max_length=200, description="What to be wary of"
    )
    earlier: EarlierSection | None = Field(None, description="What an earlier fit had told")
