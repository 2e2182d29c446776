"""The command group: commands loaded when called, errors turned into exit codes in one place."""

from __future__ import annotations

import gc
import importlib
import io
import os
import sys
from typing import Any, Final

import click

from cardgen import __version__
from cardgen.cli.failure import failure
from cardgen.errors import CardgenError

# Command: its module, and the line in the overview (kept here so that help loads no command).
_COMMANDS: Final[dict[str, tuple[str, str]]] = {
    "new": ("cardgen.cli.new", "Write a commented starter profile."),
    "make": ("cardgen.cli.make", "Typeset the card of one or more profiles."),
    "table": ("cardgen.cli.table", "Print settings for any altitude, rpm and power."),
    "check": ("cardgen.cli.check", "Hold one setting against every limit."),
    "fit": ("cardgen.cli.fit", "Fit a profile to handbook rows and flight points."),
    "compare": ("cardgen.cli.compare", "Show what a change of engine or propeller moved."),
}


class Commands(click.Group):
    """Commands that are imported only when they are run."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the names in the order of a user's day."""
        return list(_COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Return a command, importing its module."""
        if cmd_name not in _COMMANDS:
            return None
        command = getattr(importlib.import_module(_COMMANDS[cmd_name][0]), cmd_name)
        if not isinstance(command, click.Command):
            raise TypeError(f"{cmd_name} is not a command")
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the overview without importing any command."""
        with formatter.section("Commands"):
            formatter.write_dl([(name, line) for name, (_, line) in _COMMANDS.items()])

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """Name the nearest command for a misspelt one."""
        name = args[0] if args else ""
        if name and name not in _COMMANDS and not name.startswith("-"):
            import difflib  # noqa: PLC0415 - only for a mistake

            near = difflib.get_close_matches(name, _COMMANDS, n=1)
            hint = f" Did you mean {near[0]}?" if near else ""
            ctx.fail(f"There is no command {name!r}.{hint}")
        return super().resolve_command(ctx, args)


@click.group(
    cls=Commands,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
    epilog="Supplementary only: the approved flight manual, placards and markings govern.",
)
@click.version_option(__version__, prog_name="cardgen")
def cli() -> None:
    """Cruise tables for one piston aeroplane with a constant-speed propeller.

    Exit codes: 0 done or inside the limits, 1 a limit is broken, 2 wrong usage, 3 bad profile or
    data file, 4 no solution exists.
    """


def main(arguments: list[str] | None = None) -> None:
    """Run the command line and leave with its exit code.

    Parameters
    ----------
    arguments : list of str, optional
        Words after the program's name; those of the process by default [-]
    """
    # A command lives for a moment and drops hardly anything in cycles: looking for them among all
    # that imports make, and once more at the end, would take a sixth of the time of a check.
    gc.set_threshold(100_000)
    # The matrices here have some fifteen rows: threads to multiply them take longer to start.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    code = run(arguments)
    gc.freeze()
    sys.exit(code)


def run(arguments: list[str] | None = None) -> int:
    """Run the command line.

    Parameters
    ----------
    arguments : list of str, optional
        Words after the program's name; those of the process by default [-]

    Returns
    -------
    int
        Exit code [-]
    """
    # A file name may hold what the terminal has no letters for; that must not cost the answer.
    if isinstance(sys.stdout, io.TextIOWrapper):
        sys.stdout.reconfigure(errors="backslashreplace")
    try:
        result: Any = cli.main(args=arguments, prog_name="cardgen", standalone_mode=False)
    except click.ClickException as error:
        error.show()
        return 2
    except click.Abort:
        click.echo("Stopped; nothing was changed.", err=True)
        return 2
    except (BrokenPipeError, SystemExit):
        # The reader of a pipe left, as `head` does, which click tells by leaving itself. Python
        # must not complain when it closes stdout.
        sys.stderr.close()
        return 0
    except (CardgenError, OSError, MemoryError) as error:
        code, words = failure(error)
        click.echo(words, err=True)
        return code
    return result if isinstance(result, int) else 0
