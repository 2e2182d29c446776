"""`cardgen fit`: fits a profile to handbook rows and flight points."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

if TYPE_CHECKING:
    from cardgen.profile.document import Profile
    from cardgen.profile.fit_record import FitRecord


@click.command()
@click.argument("profile", type=click.Path(path_type=Path))
@click.option(
    "--points",
    multiple=True,
    type=click.Path(path_type=str),
    help="Points file (CSV); may be given several times. Default: the profile's evidence.",
)
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    help="Fit file to write. Default: NAME.fit.yaml beside the profile.",
)
@click.option(
    "--accept-suspect",
    is_flag=True,
    help="Write the fit file although a column looks like another unit than its name says.",
)
@click.option(
    "--corrected",
    is_flag=True,
    help="The part files were corrected and nothing on the aircraft was replaced: fit the same "
    "evidence again.",
)
@click.option(
    "--sheet",
    type=click.Path(path_type=Path),
    help="Write a sheet of the points to fly next (PDF); without --points nothing is fitted.",
)
@click.option("--json", "as_json", is_flag=True, help="Print JSON and nothing else.")
def fit(
    profile: Path,
    points: tuple[str, ...],
    out: Path | None,
    accept_suspect: bool,
    corrected: bool,
    sheet: Path | None,
    as_json: bool,
) -> int:
    """Fit PROFILE to handbook rows and flight points, and say how well it went.

    \b
    Examples:
      cardgen fit profiles/aircraft/specimen.yaml
      cardgen fit profiles/aircraft/specimen.yaml --points flights.csv --out new.fit.yaml
      cardgen fit profiles/aircraft/specimen.yaml --sheet fly-next.pdf
    """
    import json  # noqa: PLC0415

    from cardgen.errors import DataError, UsageError  # noqa: PLC0415
    from cardgen.profile import load_profile  # noqa: PLC0415
    from cardgen.profile.fit_file import fit_path  # noqa: PLC0415
    from cardgen.profile.fit_lines import report_lines  # noqa: PLC0415
    from cardgen.profile.fit_record import fit_text  # noqa: PLC0415
    from cardgen.profile.fit_report import report_object, report_of, warnings_of  # noqa: PLC0415
    from cardgen.profile.fit_words import suspicion_problem  # noqa: PLC0415
    from cardgen.profile.fitting import fit_points, record_of, start_of, suspect  # noqa: PLC0415
    from cardgen.profile.points import read_points  # noqa: PLC0415
    from cardgen.render.files import write_whole  # noqa: PLC0415

    read = load_profile(profile)
    if sheet is not None and not points:
        _write_sheet(read, sheet, fit_file=out)
        return 0
    paths = points or tuple(_shown(path) for path in read.evidence)
    if not paths:
        raise UsageError(
            f"{profile}: nothing to fit to; give --points FILE, or list files under the profile's "
            "key evidence"
        )
    target = out or fit_path(read)
    given = read_points(read, paths)
    start = start_of(read, given, record=_standing(read, target), corrected=corrected)
    suspicions = suspect(read, given, start)
    if suspicions and not accept_suspect:
        raise DataError([suspicion_problem(suspicion) for suspicion in suspicions])
    found = fit_points(read, given, start)
    report = report_of(read, given, start, found=found, suspicions=suspicions)
    record = record_of(read, given, start, found=found, warnings=warnings_of(report))
    write_whole(target, fit_text(record).encode())
    if as_json:
        click.echo(json.dumps(report_object(report), indent=1, allow_nan=False))
    else:
        for line in report_lines(report):
            click.echo(line)
    click.echo(f"Written: {target}", err=as_json)
    if sheet is not None:
        _write_sheet(read, sheet, fit_file=target)
    return 0


def _shown(path: Path) -> str:
    """Return a path as short as it can be said from here."""
    here = Path.cwd()
    return str(path.relative_to(here)) if path.is_relative_to(here) else str(path)


def _standing(profile: Profile, path: Path) -> FitRecord | None:
    """Return the fit that is about to be replaced, None where there is none that can be read."""
    from cardgen.errors import DataError  # noqa: PLC0415
    from cardgen.profile.fit_record import read_fit  # noqa: PLC0415

    if not path.exists():
        return None
    try:
        return read_fit(path, profile)
    except DataError as error:
        click.echo(f"{error}\nThe fit file is bad: it is not used and written anew.", err=True)
        return None


def _write_sheet(profile: Profile, sheet: Path, *, fit_file: Path | None) -> None:
    """Write the flight-test sheet of a profile, with the fit that goes with it."""
    from cardgen.errors import UsageError  # noqa: PLC0415
    from cardgen.profile.assembly import model_of  # noqa: PLC0415
    from cardgen.profile.fit_file import learned_for  # noqa: PLC0415
    from cardgen.render.files import write_whole  # noqa: PLC0415
    from cardgen.render.flight_sheet import flight_sheet  # noqa: PLC0415
    from cardgen.tables.flights import points_to_fly  # noqa: PLC0415

    if sheet.suffix.casefold() != ".pdf":
        raise UsageError(f"--sheet {sheet}: the sheet is a PDF; give a name that ends in .pdf")
    learned = learned_for(profile, fit=fit_file)
    plan = points_to_fly(model_of(profile, learned), profile.card)
    write_whole(sheet, flight_sheet(profile, learned, plan))
    click.echo(f"Written: {sheet}", err=True)
