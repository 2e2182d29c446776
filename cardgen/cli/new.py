"""`cardgen new`: a starter profile, or the format of profiles."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING, cast

import click

from cardgen.errors import UsageError

if TYPE_CHECKING:
    from cardgen.profile.keys import Kind


@click.command()
@click.argument("file", required=False, type=click.Path(path_type=str))
@click.option(
    "--schema",
    type=click.Choice(["aircraft", "engine", "propeller"]),
    help="Print the JSON Schema of one kind of file instead, for an editor.",
)
@click.option(
    "--keys",
    type=click.Choice(["aircraft", "engine", "propeller"]),
    help="List the keys of one kind of file instead, with what may be written.",
)
def new(file: str | None, schema: str | None, keys: str | None) -> None:
    """Write a commented starter profile.

    FILE is the aircraft file to write, such as profiles/aircraft/mine.yaml; its engine and
    propeller files are written into the folders beside it. Nothing that exists is overwritten.

    \b
    Examples:
      cardgen new profiles/aircraft/mine.yaml
      cardgen new --schema aircraft > aircraft.schema.json
      cardgen new --keys propeller
    """
    if sum(given is not None for given in (file, schema, keys)) != 1:
        raise click.UsageError("Give a FILE to write, --schema KIND or --keys KIND, one of them.")
    if keys is not None:
        from cardgen.profile.keys import list_keys  # noqa: PLC0415 - slow to import

        for key in list_keys(cast("Kind", keys)):
            need = "" if key.required else " (may be left out)"
            click.echo(f"{key.path}{need}\n    {key.description}\n    {key.value}")
        return
    if schema is not None:
        from cardgen.profile.schema import schema as schema_of  # noqa: PLC0415 - slow to import

        click.echo(json.dumps(schema_of(cast("Kind", schema)), indent=2))
        return
    for path in _write_starter(Path(str(file))):
        click.echo(f"wrote {path}")
    click.echo("Now replace every number by those of your aircraft's own documents.")


def _write_starter(file: Path) -> list[Path]:
    """Write the three files of a starter profile, or none of them."""
    from cardgen.profile.starter import starter  # noqa: PLC0415
    from cardgen.render.files import write_whole  # noqa: PLC0415

    if file.suffix not in (".yaml", ".yml"):
        raise UsageError(f"{file}: expected a name that ends in .yaml")
    in_folder = file.parent.name == "aircraft"
    root = file.parent.parent if in_folder else file.parent
    texts = starter(file.stem, in_aircraft_folder=in_folder)
    paths = {root / name: text for name, text in texts.items()}
    paths = {file if place == 0 else path: paths[path] for place, path in enumerate(paths)}
    standing = [str(path) for path in paths if path.exists()]
    if standing:
        raise UsageError(f"{', '.join(standing)}: exists already and is not overwritten")
    try:
        for path in paths:
            path.parent.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise UsageError(f"{file}: its folder cannot be made ({error.strerror})") from error
    for path, text in paths.items():
        write_whole(path, text.encode())
    return list(paths)
