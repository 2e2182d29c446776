"""`cardgen make`: the finished cards."""

from __future__ import annotations

import sys
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Final

import click

from cardgen.cli.failure import failure
from cardgen.cli.loading import fit_options, load
from cardgen.cli.parallel import spread
from cardgen.errors import CardgenError, ReleaseError, UsageError
from cardgen.records import dataclass

if TYPE_CHECKING:
    from cardgen.render.release import Outcome

FORMATS: Final = ("pdf", "html", "csv", "json")
PROFILE_FOLDER: Final = Path("profiles/aircraft")

_PRELOAD: Final = (
    "cardgen.cli.make",
    "cardgen.profile.loading",
    "cardgen.profile.assembly",
    "cardgen.render.pdf",
    "cardgen.render.produce",
    "cardgen.render.readback",
    "cardgen.render.release",
    "cardgen.render.typeset",
    "pypdf",
)
"""What every card needs, imported once for all processes."""


@dataclass(frozen=True, slots=True)
class _Job:
    """One card to make."""

    file: Path
    out: Path
    formats: tuple[str, ...]
    force: bool
    fit_file: Path | None
    no_fit: bool


@dataclass(frozen=True, slots=True)
class _Answer:
    """What became of it: words for stdout and stderr, and the exit code they stand for."""

    text: str
    error: str = ""
    exit_code: int = 0


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
@click.option("--force", is_flag=True, help="Make cards again that are up to date.")
@fit_options
def make(
    profiles: tuple[Path, ...],
    out: Path,
    formats: str,
    force: bool,
    fit_file: Path | None,
    no_fit: bool,
) -> int:
    """Typeset the card of each of PROFILES.

    A folder stands for every aircraft file in it; without PROFILES it is profiles/aircraft. For
    each card one line says new, unchanged, or replaced and why. Only what is out of date is made
    again. A card that cannot be made leaves the older one as it was.

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
    jobs = [_Job(file, out, wanted, force, fit_file, no_fit) for file in files]
    return _told(spread(_make_one, jobs, preload=_PRELOAD), count=len(jobs))


def _told(answers: Iterator[_Answer], *, count: int) -> int:
    """Tell what became of each card as soon as it is known; return the worst exit code."""
    worst = 0
    watched = count > 1 and sys.stderr.isatty()
    if watched:
        with click.progressbar(answers, length=count, label="Cards", file=sys.stderr) as bar:
            # Lines would break into the bar, so they wait for its end.
            answers = iter(list(bar))
    for answer in answers:
        if answer.text:
            click.echo(answer.text)
        if answer.error:
            click.echo(answer.error, err=True)
        worst = max(worst, answer.exit_code)
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


def _make_one(job: _Job) -> _Answer:
    """Make the card of one profile, in whichever process."""
    try:
        outcome = _released(job)
    except (CardgenError, OSError, MemoryError) as error:
        code, words = failure(error)
        return _Answer("", words, code)
    paths = ", ".join(str(path) for path in outcome.files)
    text = f"{job.file.stem}: {outcome}, issue {outcome.issue}: {paths}"
    if outcome.voids is not None:
        text += f"\n{job.file.stem}: issue {outcome.voids} is void, and so is every printed copy"
    return _Answer(text)


def _released(job: _Job) -> Outcome:
    """Make the card of one profile unless it stands."""
    profile, learned = load(str(job.file), fit_file=job.fit_file, no_fit=job.no_fit)
    from cardgen.profile.assembly import card_digest, part_digests  # noqa: PLC0415
    from cardgen.render.program import program_digest  # noqa: PLC0415
    from cardgen.render.release import Fingerprint, release_card, standing  # noqa: PLC0415

    parts, program = part_digests(profile, learned), program_digest()
    if not job.force:
        stands = standing(
            job.out,
            profile.name,
            digest=card_digest(profile, learned),
            parts=parts,
            program=program,
            formats=job.formats,
        )
        if stands is not None:
            return stands
    from cardgen.profile.card_content import card_of  # noqa: PLC0415
    from cardgen.render.data import content_digest  # noqa: PLC0415
    from cardgen.render.produce import produce  # noqa: PLC0415

    card = card_of(profile, learned)
    return release_card(
        job.out,
        profile.name,
        fingerprint=Fingerprint(card.digest, content_digest(card), parts, program),
        make=lambda issue, replaces: produce(
            card, profile.identity, issue=issue, replaces=replaces, formats=job.formats
        ),
    )
