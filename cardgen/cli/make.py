"""`cardgen make`: the finished cards."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Final

import click

from cardgen.cli.loading import fit_options, load
from cardgen.errors import CardgenError, ReleaseError, UsageError

if TYPE_CHECKING:
    from cardgen.render.release import Outcome

FORMATS: Final = ("pdf", "html", "csv", "json")
PROFILE_FOLDER: Final = Path("profiles/aircraft")


@click.command()
@click.argument("profiles", nargs=-1, type=click.Path(path_type=Path))
@click.option(
    "-o",
    "--out",
    default="out",
    type=click.Path(path_type=Path),
    show_default=True,
    help="Folder for the cards; made if it is not there.",
)
@click.option(
    "--format",
    "formats",
    default="pdf",
    show_default=True,
    help=f"Comma list of {', '.join(FORMATS)}.",
)
@fit_options
def make(
    profiles: tuple[Path, ...], out: Path, formats: str, fit_file: Path | None, no_fit: bool
) -> int:
    """Typeset the card of each of PROFILES.

    A folder stands for every aircraft file in it; without PROFILES it is profiles/aircraft. For
    each card one line says new, unchanged, or replaced and why. A card that cannot be made leaves
    the older one as it was.

    \b
    Examples:
      cardgen make profiles/aircraft/specimen.yaml
      cardgen make profiles/aircraft -o cards --format pdf,html,csv
    """
    wanted = _formats(formats)
    files = _files(profiles or (PROFILE_FOLDER,))
    if fit_file is not None and len(files) > 1:
        raise UsageError("--fit names the fit of one profile; give one profile with it")
    try:
        out.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise ReleaseError(f"{out}: the folder cannot be made ({error.strerror})") from error
    worst = 0
    for file in files:
        try:
            outcome = _make_one(file, out, wanted, fit_file=fit_file, no_fit=no_fit)
        except CardgenError as error:
            click.echo(str(error), err=True)
            worst = max(worst, error.exit_code)
            continue
        paths = ", ".join(str(path) for path in outcome.files)
        click.echo(f"{file.stem}: {outcome}, issue {outcome.issue}: {paths}")
    return worst


def _formats(text: str) -> tuple[str, ...]:
    """Return the formats of a comma list."""
    wanted = tuple(dict.fromkeys(part.strip().lower() for part in text.split(",") if part.strip()))
    unknown = [name for name in wanted if name not in FORMATS]
    if unknown or not wanted:
        raise UsageError(f"format {text!r}; expected a comma list of {', '.join(FORMATS)}")
    return wanted


def _files(profiles: Sequence[Path]) -> list[Path]:
    """Return the aircraft files that paths stand for."""
    files: list[Path] = []
    for path in profiles:
        if path.is_dir():
            found = sorted(
                file
                for pattern in ("*.yaml", "*.yml")
                for file in path.glob(pattern)
                if not file.name.endswith((".fit.yaml", ".fit.yml"))
            )
            if not found:
                raise UsageError(f"{path}: there is no aircraft file in this folder")
            files += found
        else:
            files.append(path)
    names: dict[str, Path] = {}
    for file in files:
        other = names.setdefault(file.stem, file)
        if other != file:
            raise UsageError(f"{other} and {file} would make cards of one name; rename one")
    return list(names.values())


def _make_one(
    file: Path, out: Path, formats: Sequence[str], *, fit_file: Path | None, no_fit: bool
) -> Outcome:
    """Make the card of one profile."""
    profile, learned = load(str(file), fit_file=fit_file, no_fit=no_fit)
    from cardgen.profile.assembly import card_of, part_digests  # noqa: PLC0415
    from cardgen.render.data import content_digest  # noqa: PLC0415
    from cardgen.render.produce import produce  # noqa: PLC0415
    from cardgen.render.release import Fingerprint, release_card  # noqa: PLC0415

    card = card_of(profile, learned)
    fingerprint = Fingerprint(card.digest, content_digest(card), part_digests(profile, learned))
    return release_card(
        out,
        profile.name,
        fingerprint=fingerprint,
        make=lambda issue, replaces: produce(
            card, profile.identity, issue=issue, replaces=replaces, formats=formats
        ),
    )
