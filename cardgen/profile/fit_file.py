"""Fit files: what was learned of one aircraft, kept beside its profile.

A fit is good for the parts it was made with. Each part is known by its digest: after a change the
parameters of the others stay as they were found, with their covariance, and those of the changed
part return to what its data sheet says.
"""

from __future__ import annotations

from pathlib import Path
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.errors import DataError, Problem
from cardgen.fit import (
    Part,
    carried_over,
    knowledge_from_profile,
)
from cardgen.profile.assembly import Learned, subject_of
from cardgen.profile.digest import MODEL_VERSION, digest_of
from cardgen.profile.document import Profile
from cardgen.profile.fit_record import FitRecord, read_fit
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]

_DIGESTED: Final[tuple[Part, ...]] = ("engine", "propeller", "airframe")


def fit_path(profile: Profile) -> Path:
    """Return where the fit of a profile lies unless the user says otherwise.

    Parameters
    ----------
    profile : Profile
        The profile [-]

    Returns
    -------
    Path
        `NAME.fit.yaml` beside it [-]
    """
    return profile.path.with_name(f"{profile.name}.fit.yaml")


def part_digests(profile: Profile) -> dict[str, str]:
    """Return the digests that tell whether a fit is still good.

    Parameters
    ----------
    profile : Profile
        The profile [-]

    Returns
    -------
    dict
        Digest by name of the part, and of the gauges [-]
    """
    return {name: profile.part_digests[name] for name in (*_DIGESTED, "gauges")}


def mixture_digests(profile: Profile) -> dict[str, str]:
    """Return what tells whether a mixture is still the one that was fitted.

    Parameters
    ----------
    profile : Profile
        The profile [-]

    Returns
    -------
    dict
        Digest by name [-]
    """
    return {
        mixture.name: digest_of([mixture.fuel_air_ratio, mixture.basis])
        for mixture in profile.mixtures
    }


@dataclass(frozen=True, slots=True)
class Match:
    """What of a fit still holds for a profile.

    Parameters
    ----------
    unchanged : tuple of str
        Parts that are the same; the mixtures where all of them are [-]
    mixtures : tuple of str
        Names of mixtures that are the same [-]
    replaced : tuple of str
        What is not, in words [-]
    """

    unchanged: tuple[Part, ...]
    mixtures: tuple[str, ...]
    replaced: tuple[str, ...]


def match(profile: Profile, record: FitRecord) -> Match:
    """Return what of a fit still holds.

    Parameters
    ----------
    profile : Profile
        The aircraft as it is [-]
    record : FitRecord
        A fit of it as it was [-]

    Returns
    -------
    Match
        Part by part [-]
    """
    now = part_digests(profile)
    parts = tuple(part for part in _DIGESTED if record.parts[part] == now[part])
    mixtures = mixture_digests(profile)
    same = tuple(name for name, digest in mixtures.items() if record.mixtures.get(name) == digest)
    replaced = [part for part in _DIGESTED if part not in parts]
    words = [*replaced, *(f"mixture {name}" for name in mixtures if name not in same)]
    unchanged: tuple[Part, ...] = (*parts, "mixtures") if len(same) == len(mixtures) else parts
    return Match(unchanged, same, tuple(words))


def learned_for(
    profile: Profile, fit: Path | None = None, *, no_fit: bool = False
) -> Learned | None:
    """Return what is learned of a profile's aircraft.

    Parameters
    ----------
    profile : Profile
        The profile [-]
    fit : Path, optional
        Fit file named by the user; the one beside the profile if left out [-]
    no_fit : bool
        Whether none is wanted [-]

    Returns
    -------
    Learned or None
        What applies to the aircraft as it is; None where there is no fit file [-]

    Raises
    ------
    DataError
        The fit file is bad, or the one the user named is of other equations or of nothing that
        this aircraft still has.
    """
    if no_fit:
        return None
    path = fit_path(profile) if fit is None else fit
    if fit is None and not path.exists():
        return None
    record = read_fit(path, profile)
    found = match(profile, record)
    reason = ""
    if record.model_version != MODEL_VERSION:
        reason = "it was made with other equations than those of this version"
    elif not found.unchanged and not found.mixtures:
        reason = "engine, propeller, airframe and mixtures are all others than those fitted"
    if reason:
        if fit is not None:
            raise DataError([Problem(str(path), 0, 0, "", reason, "a new `cardgen fit`")])
        unused = knowledge_from_profile(subject_of(profile))
        note = f"{path.name} is not used: {reason}. Fit again."
        return Learned(unused, digest_of(note), note)
    knowledge = carried_over(
        subject_of(profile), record.knowledge, unchanged=found.unchanged, mixtures=found.mixtures
    )
    digest = digest_of(
        [
            knowledge.values,
            knowledge.covariance,
            knowledge.scatter,
            knowledge.covers,
            found.replaced,
        ]
    )
    return Learned(knowledge, digest, _note(profile, record), found.replaced)


def _note(profile: Profile, record: FitRecord) -> str:
    """Return where the numbers come from, in words."""
    flown = record.flight_rows
    count = len(record.rows)
    kind = (
        f"{count} rows of the handbook"
        if not flown
        else f"{flown} flight points"
        if flown == count
        else f"{count - flown} rows of the handbook and {flown} flight points"
    )
    words = [f"Fitted to {kind} ({', '.join(record.files)})."]
    if record.earlier is not None:
        words.append(f"An earlier fit to {len(record.earlier.rows)} rows went before.")
    now = {path.name: path for path in profile.evidence}
    stale = [
        name
        for name, digest in record.files.items()
        if name in now and file_digest(now[name]) not in (None, digest)
    ]
    if stale:
        words.append(f"{' and '.join(stale)} changed since: fit again.")
    if flown and record.parts["gauges"] != profile.part_digests["gauges"]:
        words.append("The gauges were calibrated anew since: fit again.")
    return " ".join(words)


def file_digest(path: Path) -> str | None:
    """Return the SHA-256 of a file, None where it cannot be read.

    Parameters
    ----------
    path : Path
        The file [-]

    Returns
    -------
    str or None
        64 hexadecimal digits [-]
    """
    import hashlib  # noqa: PLC0415

    try:
        return hashlib.sha256(path.read_bytes()).hexdigest()
    except OSError:
        return None
