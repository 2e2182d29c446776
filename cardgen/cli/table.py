"""`cardgen table`: settings as text, CSV or JSON."""

from __future__ import annotations

import csv
import io
import json
import math
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Final

import click

from cardgen.cli.loading import allowed_masses, fit_options, load
from cardgen.cli.options import quantities
from cardgen.errors import NoSolutionError, UsageError

if TYPE_CHECKING:
    from cardgen.profile.document import Profile
    from cardgen.tables.rows import Combinations, Value
    from cardgen.tables.solution import Model

MOST_ROWS: Final = 2_000_000

# Columns of the table on a terminal: name, heading, decimals.
_SHOWN: Final = (
    ("pressure_altitude_ft", "press alt ft", 0),
    ("density_altitude_ft", "dens alt ft", 0),
    ("oat_c", "OAT °C", 0),
    ("rpm", "rpm", 0),
    ("manifold_pressure_inhg", "MAP inHg", 1),
    ("percent_power", "power %", 1),
    ("fuel_flow_gph", "fuel gal/h", 1),
    ("true_airspeed_kt", "TAS kt", 0),
    ("status", "status", 0),
)


@click.command()
@click.argument("profile", type=click.Path(path_type=str))
@click.option(
    "--rpm",
    callback=quantities("rotational speed", "rpm"),
    help="Tachometer readings: list, or from:to:step.",
)
@click.option("--percent", callback=quantities("fraction", "%"), help="Percent powers: list.")
@click.option(
    "--altitude",
    callback=quantities("length", "ft"),
    help="Pressure altitudes: list, or from:to:step; bare numbers are ft.",
)
@click.option(
    "--density-altitude",
    callback=quantities("length", "ft"),
    help="Density altitudes, in place of --altitude.",
)
@click.option(
    "--isa",
    callback=quantities("temperature difference", "degC"),
    help="Departures from standard temperature: list; bare numbers are °C.",
)
@click.option(
    "--weight", callback=quantities("mass", "lb"), help="Weights: list; bare numbers are lb."
)
@click.option("--mixture", multiple=True, help="Name of a mixture; may be given several times.")
@click.option("--csv", "as_csv", is_flag=True, help="Print CSV, unrounded, and nothing else.")
@click.option("--json", "as_json", is_flag=True, help="Print JSON, unrounded, and nothing else.")
@fit_options
def table(
    profile: str,
    rpm: tuple[float, ...] | None,
    percent: tuple[float, ...] | None,
    altitude: tuple[float, ...] | None,
    density_altitude: tuple[float, ...] | None,
    isa: tuple[float, ...] | None,
    weight: tuple[float, ...] | None,
    mixture: tuple[str, ...],
    as_csv: bool,
    as_json: bool,
    fit_file: Path | None,
    no_fit: bool,
) -> int:
    """Print the settings of PROFILE.

    What is not asked for is taken from the profile's card. Rpm and manifold pressure are what the
    gauges read. Where the asked power is out of reach the row is the full-throttle setting.

    \b
    Examples:
      cardgen table profiles/aircraft/specimen.yaml
      cardgen table profiles/aircraft/specimen.yaml --rpm 2300:2500:50 --percent 60,70 --isa -10,10
      cardgen table profiles/aircraft/specimen.yaml --altitude 0:16000:2000 --csv > settings.csv
    """
    if as_csv and as_json:
        raise click.UsageError("--csv and --json exclude each other.")
    if altitude is not None and density_altitude is not None:
        raise click.UsageError("--altitude and --density-altitude exclude each other.")
    read, learned = load(profile, fit_file=fit_file, no_fit=no_fit)
    from cardgen.cruise import CruiseStatus  # noqa: PLC0415
    from cardgen.profile.assembly import model_of, stamps  # noqa: PLC0415
    from cardgen.tables.rows import COLUMNS, cells, rows  # noqa: PLC0415

    model = model_of(read, learned)
    asked = _combinations(
        read,
        model,
        rpm=rpm,
        percent=percent,
        altitude=altitude,
        density_altitude=density_altitude,
        isa=isa,
        weight=weight,
        mixture=mixture,
    )
    if len(asked) > MOST_ROWS:
        raise UsageError(f"{len(asked)} rows are asked for; at most {MOST_ROWS} are computed")
    columns = rows(model, asked, with_tolerance=as_csv or as_json)
    if as_csv:
        click.echo(_csv(COLUMNS, cells(columns)), nl=False)
    elif as_json:
        click.echo(_json(COLUMNS, cells(columns)))
    else:
        for line in (
            *stamps(read, learned),
            *_text(cells(columns, ["mixture", *(n for n, _, _ in _SHOWN), "full_throttle"])),
        ):
            click.echo(line)
    unsolved = {CruiseStatus.NO_LEVEL_FLIGHT.word, CruiseStatus.OUTSIDE_MODEL.word}
    return NoSolutionError.exit_code if set(columns["status"]) <= unsolved else 0


def _combinations(
    profile: Profile,
    model: Model,
    *,
    rpm: tuple[float, ...] | None,
    percent: tuple[float, ...] | None,
    altitude: tuple[float, ...] | None,
    density_altitude: tuple[float, ...] | None,
    isa: tuple[float, ...] | None,
    weight: tuple[float, ...] | None,
    mixture: tuple[str, ...],
) -> Combinations:
    """Return what is asked, filled up from the profile's card."""
    import numpy as np  # noqa: PLC0415

    from cardgen.tables.rows import Combinations  # noqa: PLC0415

    card = profile.card
    by_density = density_altitude is not None or (
        altitude is None and card.altitude_kind == "density"
    )
    altitudes = density_altitude or altitude or card.altitude
    names = mixture or card.mixtures
    try:
        mixtures = tuple(model.mixture_index(name) for name in names)
    except KeyError as error:
        known = ", ".join(item.name for item in profile.mixtures)
        raise UsageError(
            f"{error.args[0]!r} is no mixture of this profile; it has {known}"
        ) from None
    deviations = isa or (card.isa_deviation if card.altitude_kind == "pressure" else (0.0,))
    return Combinations(
        altitude=np.array(altitudes),
        by_density=by_density,
        isa_deviation=np.array(deviations),
        indicated_rpm=np.array(rpm or card.rpm),
        power_fraction=np.array(percent or card.power_fraction),
        mass=np.array(allowed_masses(profile, weight)),
        mixtures=mixtures,
    )


def _csv(names: Sequence[str], lines: list[list[Value]]) -> str:
    """Return CSV; numbers in the shortest form that reads back the same, unknown ones empty."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(names)
    for line in lines:
        writer.writerow(["" if _unknown(value) else value for value in line])
    return out.getvalue()


def _json(names: Sequence[str], lines: list[list[Value]]) -> str:
    """Return a JSON list of rows, unknown numbers null."""
    return json.dumps(
        [
            {
                name: None if _unknown(value) else value
                for name, value in zip(names, line, strict=True)
            }
            for line in lines
        ],
        indent=1,
        allow_nan=False,
    )


def _unknown(value: Value) -> bool:
    return isinstance(value, float) and not math.isfinite(value)


def _text(lines: list[list[Value]]) -> list[str]:
    """Return the table as lines for a terminal, mixture by mixture."""
    shown: list[str] = []
    mixture = None
    heads = [head for _, head, _ in _SHOWN]
    for line in lines:
        if line[0] != mixture:
            mixture = line[0]
            shown += ["", f"Mixture {mixture}", "  ".join(heads)]
        numbers = line[1:-1]
        texts = []
        for value, (_, head, places) in zip(numbers, _SHOWN, strict=True):
            if isinstance(value, str):
                texts.append(value)
            elif _unknown(value):
                texts.append("-".rjust(len(head)))
            else:
                texts.append(f"{value:.{places}f}".rjust(len(head)))
        if line[-1]:
            texts.append("full throttle")
        shown.append("  ".join(texts).rstrip())
    shown += ["", "Supplementary: the approved flight manual, placards and markings govern."]
    return shown
