"""`cardgen check --points`: many settings, one line each."""

from __future__ import annotations

import json
import math
from pathlib import Path
from typing import TYPE_CHECKING

import click

from cardgen.cli.loading import allowed_masses
from cardgen.errors import UsageError

if TYPE_CHECKING:
    from cardgen.profile.assembly import Learned
    from cardgen.profile.document import Profile


def check_points(
    profile: Profile,
    learned: Learned | None,
    points: Path,
    *,
    mixture: str | None,
    weight: float | None,
    as_json: bool,
) -> int:
    """Check every setting of a file and print one line each.

    Parameters
    ----------
    profile : Profile
        The aircraft [-]
    learned : Learned, optional
        The fit that goes with it [-]
    points : Path
        The file [-]
    mixture : str, optional
        Mixture of rows that name none; the first of the card if None [-]
    weight : float, optional
        Mass of rows that state none; the first of the card if None [kg]
    as_json : bool
        Whether to print JSON [-]

    Returns
    -------
    int
        Exit code: 1 where any setting is outside a limit, else 4 where any has no solution [-]
    """
    from cardgen.constants import GALLON_US, HOUR, KNOT  # noqa: PLC0415
    from cardgen.limits import Verdict  # noqa: PLC0415
    from cardgen.profile.assembly import model_of  # noqa: PLC0415
    from cardgen.profile.settings import read_settings  # noqa: PLC0415
    from cardgen.tables.many import check_many  # noqa: PLC0415

    model = model_of(profile, learned)
    try:
        index = model.mixture_index(profile.card.mixtures[0] if mixture is None else mixture)
    except KeyError as error:
        known = ", ".join(item.name for item in profile.mixtures)
        raise UsageError(f"{error.args[0]!r} is no mixture; the profile has {known}") from None
    (mass, *_) = allowed_masses(profile, None if weight is None else (weight,))
    settings = read_settings(profile, points, mixture=index, mass=mass)
    allowed_masses(profile, (float(settings.mass.max()),))
    checked = check_many(
        model,
        manifold_pressure=settings.manifold_pressure,
        rpm=settings.rpm,
        pressure_altitude=settings.pressure_altitude,
        temperature=settings.temperature,
        temperature_read=settings.read,
        mass=settings.mass,
        mixture=settings.mixture,
    )
    flow_unit = profile.aircraft.engine.fuel_density * GALLON_US / HOUR
    words = [Verdict(value).word for value in range(len(Verdict))]
    columns = zip(
        settings.line.tolist(),
        (words[value] for value in checked.verdict.tolist()),
        checked.reasons,
        (100.0 * checked.power_fraction).tolist(),
        (checked.fuel_flow / flow_unit).tolist(),
        (checked.true_airspeed / KNOT).tolist(),
        strict=True,
    )
    if as_json:
        names = ("line", "verdict", "reasons", "percent_power", "fuel_flow_gph", "true_airspeed_kt")
        rows = [
            {
                name: (value.split() if name == "reasons" else _known(value))
                for name, value in zip(names, row, strict=True)
            }
            for row in columns
        ]
        click.echo(json.dumps(rows, allow_nan=False))
    else:
        click.echo(
            "\n".join(
                f"line {line}: {verdict}{f' ({reasons})' if reasons else ''}"
                + (
                    ""
                    if math.isnan(power)
                    else f"; {power:.1f} %, {fuel:.1f} gal/h, {speed:.0f} kt"
                )
                for line, verdict, reasons, power, fuel, speed in columns
            )
        )
    if (checked.verdict == Verdict.OUTSIDE).any():
        return 1
    return 4 if any(math.isnan(value) for value in checked.power_fraction.tolist()) else 0


def _known(value: float | int | str) -> float | int | str | None:
    """Return a value, None for a number that is not known."""
    return None if isinstance(value, float) and math.isnan(value) else value
