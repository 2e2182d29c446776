"""`cardgen compare`: what a change of engine or propeller moved."""

from __future__ import annotations

import contextlib
import csv
import io
import json
import math
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from cardgen.cli.loading import fit_options
from cardgen.errors import DataError, UsageError

if TYPE_CHECKING:
    from cardgen.compare import Change, Comparison
    from cardgen.profile.assembly import Learned
    from cardgen.profile.document import Profile
    from cardgen.render.compare_sheet import Compared

PARTS = ("engine", "propeller")


@click.command()
@click.argument("old", type=click.Path(path_type=Path))
@click.argument("new", required=False, type=click.Path(path_type=Path))
@click.option(
    "--with",
    "swaps",
    multiple=True,
    metavar="PART=FILE",
    help="Instead of NEW: OLD with another engine or propeller, such as propeller=FILE.",
)
@click.option(
    "-o",
    "--out",
    type=click.Path(path_type=Path),
    help="Write a sheet for the logbook to this PDF file.",
)
@click.option("--csv", "as_csv", is_flag=True, help="Print CSV, unrounded, and nothing else.")
@click.option("--json", "as_json", is_flag=True, help="Print JSON, unrounded, and nothing else.")
@fit_options
def compare(
    old: Path,
    new: Path | None,
    swaps: tuple[str, ...],
    out: Path | None,
    as_csv: bool,
    as_json: bool,
    fit_file: Path | None,
    no_fit: bool,
) -> None:
    """Show what moved between the profiles OLD and NEW, setting by setting and limit by limit.

    Altitudes, powers, mixtures and rpm are those of NEW's card. The first line says what moved most
    and whether that is more than its 95 % tolerance; parts that both have in common do not count
    in it.

    \b
    Examples:
      cardgen compare old.yaml new.yaml -o change.pdf
      cardgen compare profiles/aircraft/specimen.yaml \\
        --with propeller=profiles/propellers/specimen-p3-75.yaml
    """
    if as_csv and as_json:
        raise click.UsageError("--csv and --json exclude each other.")
    if (new is None) == (not swaps):
        raise click.UsageError("Give either NEW or --with PART=FILE, one of the two.")
    if out is not None and out.suffix.casefold() != ".pdf":
        raise click.UsageError(f"-o {out}: the sheet is a PDF; give a name that ends in .pdf.")
    sides = _sides(old, new, swaps, fit_file=fit_file, no_fit=no_fit)
    from cardgen.compare import compare as compared  # noqa: PLC0415
    from cardgen.profile.assembly import model_of  # noqa: PLC0415

    (before, learned_before), (now, learned_now) = sides
    comparison = compared(
        model_of(before, learned_before),
        model_of(now, learned_now),
        choices=now.card,
        unchanged=_unchanged(before, now),
    )
    if out is not None:
        from cardgen.render.compare_sheet import compare_sheet  # noqa: PLC0415
        from cardgen.render.files import write_whole  # noqa: PLC0415

        write_whole(out, compare_sheet(comparison, *(_named(*side) for side in sides)))
    if as_csv:
        click.echo(_csv(comparison), nl=False)
    elif as_json:
        click.echo(json.dumps(_object(comparison), indent=1, allow_nan=False))
    else:
        for line in _text(comparison, *(_named(*side) for side in sides)):
            click.echo(line)
        if out is not None:
            click.echo(f"Written: {out}")


def _sides(
    old: Path, new: Path | None, swaps: Sequence[str], *, fit_file: Path | None, no_fit: bool
) -> tuple[tuple[Profile, Learned | None], tuple[Profile, Learned | None]]:
    """Return both profiles, each with the fit that goes with it."""
    if fit_file is not None and no_fit:
        raise click.UsageError("--fit and --no-fit exclude each other.")
    from cardgen.profile import load_profile  # noqa: PLC0415 - loads pydantic
    from cardgen.profile.fit_file import fit_path, learned_for  # noqa: PLC0415

    before = load_profile(old)
    now = load_profile(new) if new is not None else load_profile(old, instead=_instead(swaps))
    known = learned_for(before, fit=fit_file, no_fit=no_fit)
    fresh = learned_for(now, fit=fit_file, no_fit=no_fit)
    if fresh is None and known is not None:
        # The new profile has no fit of its own yet: what was learned of the parts that both have
        # is true of it too, and a fitted aircraft against an unfitted one would show differences
        # that nobody made.
        with contextlib.suppress(DataError):  # nothing in common
            fresh = learned_for(now, fit=fit_path(before))
    return (before, known), (now, fresh)


def _instead(swaps: Sequence[str]) -> dict[Any, Path]:
    """Return the part files of `--with`."""
    found: dict[Any, Path] = {}
    for swap in swaps:
        part, _, file = swap.partition("=")
        part = part.strip().casefold()
        if part not in PARTS or not file:
            raise UsageError(f"--with {swap}; expected engine=FILE or propeller=FILE")
        if part in found:
            raise UsageError(f"--with {part} is given twice; an aircraft has one")
        found[part] = Path(file)
    return found


def _unchanged(old: Profile, new: Profile) -> tuple[Any, ...]:
    """Return the parts that are the same in both."""
    from cardgen.fit import PARTS as FITTED  # noqa: PLC0415

    return tuple(part for part in FITTED if old.part_digests[part] == new.part_digests[part])


def _named(profile: Profile, learned: Learned | None) -> Compared:
    """Return a configuration as the sheet names it."""
    from cardgen.profile.assembly import card_digest, stamps  # noqa: PLC0415
    from cardgen.render.compare_sheet import Compared  # noqa: PLC0415

    return Compared(profile.identity, card_digest(profile, learned), stamps(profile, learned))


def _csv(comparison: Comparison) -> str:
    """Return every setting as CSV, unknown numbers empty."""
    from cardgen.compare.rows import COLUMNS, change_cells  # noqa: PLC0415

    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(COLUMNS)
    for change in comparison.changes:
        for line in change_cells(change):
            writer.writerow(["" if _unknown(value) else value for value in line])
    return out.getvalue()


def _object(comparison: Comparison) -> dict[str, Any]:
    """Return everything as the object that other programs read, unknown numbers null."""
    from dataclasses import asdict  # noqa: PLC0415

    from cardgen.compare.rows import COLUMNS, change_cells  # noqa: PLC0415
    from cardgen.constants import HORSEPOWER  # noqa: PLC0415

    return {
        "verdict": comparison.verdict,
        "percent_of": {
            side: {"name": rating.name, "power_hp": rating.power / HORSEPOWER, "rpm": rating.rpm}
            for side, rating in (("old", comparison.old_rating), ("new", comparison.new_rating))
        },
        "limits": [asdict(change) for change in comparison.limits],
        "gauges": list(comparison.gauges),
        "mixtures": {
            "old_only": list(comparison.only_old),
            "new_only": list(comparison.only_new),
        },
        "settings": [
            {
                name: None if _unknown(value) else value
                for name, value in zip(COLUMNS, line, strict=True)
            }
            for change in comparison.changes
            for line in change_cells(change)
        ],
    }


def _unknown(value: object) -> bool:
    return isinstance(value, float) and not math.isfinite(value)


def _text(comparison: Comparison, old: Compared, new: Compared) -> list[str]:
    """Return the comparison as lines for a terminal: in words, then setting by setting."""
    from cardgen.render.compare_sheet import marks_of, words_of  # noqa: PLC0415

    marks = marks_of(comparison, old, new)
    lines = [comparison.verdict, "", *marks.stamps, *marks.head]
    for title, told in words_of(comparison):
        lines += ["", title, *(f"  {line}" for line in told)]
    for change in comparison.changes:
        lines += ["", *_settings(comparison, change)]
    lines += ["", *marks.foot]
    return [*lines, "Supplementary: the approved flight manual, placards and markings govern."]


def _settings(comparison: Comparison, change: Change) -> list[str]:
    """Return the settings of one mixture, by altitude."""
    import numpy as np  # noqa: PLC0415

    from cardgen.compare import scale_of, signed  # noqa: PLC0415
    from cardgen.render.compare_sheet import BASES, LARGER, cell_words  # noqa: PLC0415
    from cardgen.units import to_unit  # noqa: PLC0415

    choices = comparison.choices
    scale = scale_of(choices.units)
    kind = "DA" if choices.altitude_kind == "density" else "PA"
    shape = change.compared.shape
    several = shape[0] > 1 or shape[3] > 1
    head = f"{f'{kind} {choices.units.altitude}':>8}  {'%':>5}  {'rpm':>5}"
    for unit in scale.unit:
        head += f"  {unit:>16}"
    lines = [f"Mixture {change.mixture}, at {BASES[change.basis]}"]
    for mass, temperature in np.ndindex(shape[0], shape[3]):
        if several:
            weight = float(to_unit(choices.mass[mass], choices.units.mass, dimension="mass"))
            lines.append(
                f"{weight:.0f} {choices.units.mass}, "
                f"ISA {change.isa_deviation.reshape(-1)[temperature]:+.0f} °C"
            )
        lines.append(head)
        for row, power, rpm in np.ndindex(shape[2], shape[1], shape[4]):
            cell = (mass, power, row, temperature, rpm)
            altitude = float(to_unit(choices.altitude[row], choices.units.altitude))
            line = f"{altitude:8.0f}  {100.0 * choices.power_fraction[power]:5.4g}  "
            line += f"{choices.rpm[rpm]:5.0f}"
            words = cell_words(change, cell)
            if words:
                lines.append(f"{line}  {words}")
                continue
            for k, (factor, places) in enumerate(zip(scale.factor, scale.places, strict=True)):
                moved = signed(float(change.difference[(*cell, k)]) * factor, places)
                spread = f"±{float(change.tolerance[(*cell, k)]) * factor:.{places}f}"
                mark = LARGER if change.significant[(*cell, k)] else " "
                line += f"  {f'{moved} {spread}{mark}':>16}"
            lines.append(line.rstrip())
    return lines
