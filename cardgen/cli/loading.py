"""What every command that computes begins with: a profile, and the fit that goes with it."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from cardgen.errors import UsageError

if TYPE_CHECKING:
    from cardgen.profile.assembly import Learned
    from cardgen.profile.document import Profile

Function = TypeVar("Function", bound=Callable[..., Any])


def fit_options(command: Function) -> Function:
    """Add `--fit` and `--no-fit` to a command.

    Parameters
    ----------
    command : callable
        The command's function [-]

    Returns
    -------
    callable
        The same, taking `fit_file` and `no_fit` [-]
    """
    command = click.option(
        "--no-fit", is_flag=True, help="Use no fit: typical values with their wide tolerances."
    )(command)
    return click.option(
        "--fit",
        "fit_file",
        type=click.Path(path_type=Path),
        help="Fit file to use instead of NAME.fit.yaml beside the profile.",
    )(command)


def allowed_masses(profile: Profile, asked: tuple[float, ...] | None) -> tuple[float, ...]:
    """Return the masses asked for, or those of the card.

    Parameters
    ----------
    profile : Profile
        The aircraft [-]
    asked : tuple of float, optional
        What the user asks for [kg]

    Returns
    -------
    tuple of float
        None of them above the gross mass of the profile [kg]

    Raises
    ------
    UsageError
        One of them is.
    """
    masses = asked or profile.card.mass
    greatest = profile.gross_mass * (1.0 + 1e-9)
    if max(masses) > greatest:
        from cardgen.constants import POUND  # noqa: PLC0415

        raise UsageError(
            f"weight {max(masses) / POUND:.0f} lb is above the gross {greatest / POUND:.0f} lb of "
            "the profile; nothing is computed for it"
        )
    return masses


def load(profile: str, *, fit_file: Path | None, no_fit: bool) -> tuple[Profile, Learned | None]:
    """Read a profile and the fit that goes with it.

    Parameters
    ----------
    profile : str
        Path of the aircraft file [-]
    fit_file : Path, optional
        Fit file named by the user [-]
    no_fit : bool
        Whether the user wants none [-]

    Returns
    -------
    tuple
        The profile, and what was learned of it or None [-]
    """
    if fit_file is not None and no_fit:
        raise click.UsageError("--fit and --no-fit exclude each other.")
    from cardgen.profile import load_profile  # noqa: PLC0415 - loads pydantic
    from cardgen.profile.fit_file import learned_for  # noqa: PLC0415

    read = load_profile(Path(profile))
    return read, learned_for(read, fit=fit_file, no_fit=no_fit)
