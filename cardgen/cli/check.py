"""`cardgen check`: what one setting gives, and whether each limit allows it."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from cardgen.cli.loading import allowed_masses, fit_options, load
from cardgen.cli.options import quantity
from cardgen.errors import NoSolutionError, UsageError

if TYPE_CHECKING:
    from cardgen.tables.report import SettingReport


@click.command()
@click.argument("profile", type=click.Path(path_type=str))
@click.option(
    "--map",
    "manifold_pressure",
    callback=quantity("pressure", "inHg"),
    help="What the manifold-pressure gauge reads, such as 23 or 780hPa.",
)
@click.option(
    "--rpm", callback=quantity("rotational speed", "rpm"), help="What the tachometer reads."
)
@click.option(
    "--altitude",
    callback=quantity("length", "ft"),
    help="Pressure altitude, such as 6000 or 1800m.",
)
@click.option(
    "--oat",
    callback=quantity("temperature", "degC"),
    help="What the outside-air thermometer reads, such as 5 or 41degF; standard if left out.",
)
@click.option("--mixture", help="Name of the mixture; the first of the card if left out.")
@click.option(
    "--weight", callback=quantity("mass", "lb"), help="Weight; the first of the card if left out."
)
@click.option(
    "--points",
    type=click.Path(path_type=Path),
    help="CSV file of settings: map_inhg, rpm, pressure_altitude_ft, oat_c, mixture, weight_lb.",
)
@click.option("--json", "as_json", is_flag=True, help="Print JSON and nothing else.")
@fit_options
@click.pass_context
def check(
    ctx: click.Context,
    profile: str,
    manifold_pressure: float | None,
    rpm: float | None,
    altitude: float | None,
    oat: float | None,
    mixture: str | None,
    weight: float | None,
    points: Path | None,
    as_json: bool,
    fit_file: Path | None,
    no_fit: bool,
) -> int:
    """Hold a setting of PROFILE against every limit.

    Exit code 0 unless a limit is broken (1) or there is no level flight at the setting (4).
    A verdict of "unknown" means that the profile does not state some limit.

    \b
    Examples:
      cardgen check profiles/aircraft/specimen.yaml --map 23 --rpm 2400 --altitude 6000 --oat 5
      cardgen check profiles/aircraft/specimen.yaml --map 780hPa --rpm 2400 --altitude 1800m --json
      cardgen check profiles/aircraft/specimen.yaml --points settings.csv
    """
    single = {"--map": manifold_pressure, "--rpm": rpm, "--altitude": altitude}
    if points is not None:
        given = [name for name, value in single.items() if value is not None]
        if given or oat is not None:
            raise click.UsageError(
                "--points takes its settings from the file; leave out --map, --rpm, --altitude and "
                "--oat."
            )
        return _many(
            profile,
            points,
            mixture=mixture,
            weight=weight,
            as_json=as_json,
            fit_file=fit_file,
            no_fit=no_fit,
        )
    missing = [name for name, value in single.items() if value is None]
    if manifold_pressure is None or rpm is None or altitude is None:
        raise click.UsageError(
            f"{', '.join(missing)} missing; a setting needs --map, --rpm and --altitude."
        )
    read, learned = load(profile, fit_file=fit_file, no_fit=no_fit)
    from cardgen.profile.assembly import model_of, stamps  # noqa: PLC0415
    from cardgen.tables.printed import message_units  # noqa: PLC0415
    from cardgen.tables.report import report_setting  # noqa: PLC0415

    model = model_of(read, learned)
    name = read.card.mixtures[0] if mixture is None else mixture
    try:
        index = model.mixture_index(name)
    except KeyError:
        known = ", ".join(item.name for item in read.mixtures)
        raise UsageError(f"{name!r} is no mixture of this profile; it has {known}") from None
    report = report_setting(
        model,
        indicated_pressure=manifold_pressure,
        indicated_rpm=rpm,
        pressure_altitude=altitude,
        indicated_temperature=oat,
        mass=allowed_masses(read, None if weight is None else (weight,))[0],
        mixture=index,
        units=message_units(read.card.units),
    )
    if report is None:
        raise NoSolutionError(
            "No level flight at this setting: too little power for this weight and altitude, or "
            "outside what the model covers. Ask for more power or a lower altitude."
        )
    if as_json:
        click.echo(json.dumps(_object(report), indent=1, allow_nan=False))
    else:
        for line in (*stamps(read, learned), *_text(report)):
            click.echo(line)
    return 1 if report.verdict == "outside" else 0


def _object(report: SettingReport) -> dict[str, Any]:
    """Return a report as the object that other programs read; unknown numbers null."""
    from dataclasses import asdict  # noqa: PLC0415

    whole = asdict(report)
    order = (
        "percent_power",
        "power_hp",
        "fuel_flow_gph",
        "true_airspeed_kt",
        "calibrated_airspeed_kt",
        "full_throttle_map_inhg",
        "propeller",
        "verdict",
        "findings",
    )
    return {name: whole[name] for name in (*order, *(n for n in whole if n not in order))}


def _text(report: SettingReport) -> list[str]:
    """Return a report as lines: verdict, findings, what to set instead, what the setting gives."""
    lines = [report.verdict.upper(), ""]
    for finding in report.findings:
        if finding.verdict != "inside":
            source = f" ({finding.source})" if finding.source else ""
            lines.append(f"{finding.verdict}: {finding.message}{source}")
    # What is kept is told by its margin alone; the whole wording stands in the JSON.
    lines += [
        f"inside: {finding.limit.replace('_', ' ')}: {finding.message.split('; ')[0]}"
        for finding in report.findings
        if finding.verdict == "inside"
    ]
    if report.instead:
        lines += ["", "Same power within the limits:"]
        lines += [
            f"  {item.rpm:.0f} rpm  {item.manifold_pressure_inhg:.1f} inHg  "
            f"{item.fuel_flow_gph:.1f} gal/h  {item.true_airspeed_kt:.0f} kt  {item.reason}"
            for item in report.instead
        ]
    elif report.verdict == "outside":
        lines += ["", "No setting of the same power within the limits was found nearby."]
    propeller = report.propeller
    stop = f", on its {propeller.on_stop} stop" if propeller.on_stop else ""
    lines += [
        "",
        f"{report.rpm:.0f} rpm and {report.manifold_pressure_inhg:.1f} inHg, mixture "
        f"{report.mixture}, give",
        f"  power           {report.percent_power:.1f} % ± {report.percent_power_tolerance:.1f}, "
        f"{report.power_hp:.0f} hp",
        f"  fuel flow       {report.fuel_flow_gph:.1f} gal/h "
        f"± {report.fuel_flow_tolerance_gph:.1f}",
        f"  true airspeed   {report.true_airspeed_kt:.0f} kt "
        f"± {report.true_airspeed_tolerance_kt:.0f}, "
        f"calibrated {report.calibrated_airspeed_kt:.0f} kt",
        f"  full throttle   {report.full_throttle_map_inhg:.1f} inHg",
        f"  propeller       efficiency {propeller.efficiency:.3f}, blade angle "
        f"{propeller.blade_angle_deg:.1f}° at 0.75 R, angle of attack "
        f"{propeller.angle_of_attack_deg:.1f}°,",
        f"                  advance ratio {propeller.advance_ratio:.2f}, slip "
        f"{propeller.slip_percent:.0f} %, tip Mach {propeller.tip_mach:.2f}{stop}",
        "",
        "± is the 95 % tolerance. Supplementary: the approved flight manual, placards and markings "
        "govern.",
    ]
    return lines


def _many(
    profile: str,
    points: Path,
    *,
    mixture: str | None,
    weight: float | None,
    as_json: bool,
    fit_file: Path | None,
    no_fit: bool,
) -> int:
    """Check every setting of a file, one line each."""
    from cardgen.cli.check_points import check_points  # noqa: PLC0415

    read, learned = load(profile, fit_file=fit_file, no_fit=no_fit)
    return check_points(read, learned, points, mixture=mixture, weight=weight, as_json=as_json)
