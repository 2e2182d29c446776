"""The content of a fit file: read with every number held against the others, and written.

The numbers are SI, with all their digits: the same record gives the same text.
"""

from __future__ import annotations

import json
import math
from collections.abc import Collection, Mapping, Sequence
from pathlib import Path
from typing import Any, Final

import numpy as np
import numpy.typing as npt

from cardgen.errors import DataError
from cardgen.fit import FUEL_SCALE_PREFIX, PARTS, EvidenceRange, Knowledge, parameters
from cardgen.profile.digest import MODEL_VERSION
from cardgen.profile.document import Profile
from cardgen.profile.fit_sections import CoversSection, EarlierSection, FitFileSection
from cardgen.profile.parsing import ProfileFile, parse_file
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]

_COVERED: Final = ("pressure", "temperature", "rpm", "power")
_SYMMETRY: Final = 1e-6  # of the two deviations; what printing all digits leaves is 1e-16


@dataclass(frozen=True, slots=True)
class Earlier:
    """What an earlier fit had told, whose rows were not given again.

    Parameters
    ----------
    values : ndarray, shape (p,)
        Parameters [-]
    covariance : ndarray, shape (p, p)
        Their covariance [-]
    rows : tuple of str
        Digests of its rows [-]
    covers : EvidenceRange
        Ranges of its rows [-]
    """

    values: FloatArray
    covariance: FloatArray
    rows: tuple[str, ...]
    covers: EvidenceRange


@dataclass(frozen=True, slots=True)
class FitRecord:
    """Content of a fit file.

    Parameters
    ----------
    aircraft : str
        Name of the profile [-]
    knowledge : Knowledge
        What was found [-]
    prior, prior_deviation : ndarray, shape (p,)
        Mean and standard deviation before the evidence [-]
    parts : mapping
        Digest by name of the part, and of the gauges [-]
    mixtures : mapping
        Digest by name of the mixture [-]
    files : mapping
        SHA-256 of the points files by name [-]
    rows : tuple of str
        Digest of every row [-]
    flight_rows : int
        How many of them were flown [-]
    rms, left_out_rms : ndarray, shape (3,)
        Root mean square residuals, NaN where nothing was read, SI
    warnings : tuple of str
        What to be wary of [-]
    earlier : Earlier, optional
        What an earlier fit had told [-]
    model_version : int
        Version of the equations [-]
    """

    aircraft: str
    knowledge: Knowledge
    prior: FloatArray
    prior_deviation: FloatArray
    parts: Mapping[str, str]
    mixtures: Mapping[str, str]
    files: Mapping[str, str]
    rows: tuple[str, ...]
    flight_rows: int
    rms: FloatArray
    left_out_rms: FloatArray
    warnings: tuple[str, ...]
    earlier: Earlier | None = None
    model_version: int = MODEL_VERSION


def read_fit(path: Path, profile: Profile) -> FitRecord:
    """Read a fit file.

    Parameters
    ----------
    path : Path
        The file [-]
    profile : Profile
        The profile it is read for, whose parameters it must hold [-]

    Returns
    -------
    FitRecord
        Its content [-]

    Raises
    ------
    DataError
        Something is wrong; it carries every problem.
    """
    file: ProfileFile[FitFileSection] = parse_file(
        path, FitFileSection, kind="fit", shown=str(path)
    )
    if file.other_kind:
        file.report(("kind",), f"is a file of kind {file.other_kind}", "a file of kind fit")
    content = file.content
    if file.problems or content is None:
        raise DataError(sorted(file.problems))
    names = tuple(item.name for item in content.parameters)
    covariance = _covariance(file, content.covariance, len(names), at=("covariance",))
    _check_parameters(file, content, profile, covariance)
    earlier = None
    if content.earlier is not None:
        earlier = _earlier(file, content.earlier, len(names))
    if file.problems or covariance is None:
        raise DataError(sorted(file.problems))
    scatter = content.scatter
    return FitRecord(
        aircraft=content.aircraft,
        knowledge=Knowledge(
            names=names,
            values=np.array([item.value for item in content.parameters]),
            covariance=covariance,
            scatter=np.array([scatter.manifold_pressure, scatter.fuel_flow, scatter.true_airspeed]),
            fitted=PARTS,
            covers=_range(content.evidence.covers),
        ),
        prior=np.array([item.prior for item in content.parameters]),
        prior_deviation=np.array([item.prior_deviation for item in content.parameters]),
        parts=content.parts.model_dump(),
        mixtures={item.name: item.digest for item in content.mixtures},
        files={item.name: item.digest for item in content.evidence.files},
        rows=tuple(content.evidence.rows),
        flight_rows=content.evidence.flight_rows,
        rms=_triple(content.rms),
        left_out_rms=_triple(content.leave_one_out_rms),
        warnings=tuple(content.warnings),
        earlier=earlier,
        model_version=content.model_version,
    )


def _covariance(
    file: ProfileFile[Any], rows: Sequence[Sequence[float]], size: int, *, at: tuple[str, ...]
) -> FloatArray | None:
    """Return a covariance matrix, None where it is reported."""
    if len(rows) != size or any(len(row) != size for row in rows):
        file.report(at, "is not square", f"{size} rows of {size} numbers, one per parameter")
        return None
    matrix = np.array(rows, dtype=np.float64)
    variance = np.diag(matrix)
    if not (variance > 0.0).all():
        place = int(np.argmin(variance > 0.0))
        file.report((*at, place, place), "is no variance", "a number above 0")
        return None
    deviation = np.sqrt(variance)
    correlation = matrix / deviation / deviation[:, None]
    skew = np.abs(correlation - correlation.T)
    if skew.max() > _SYMMETRY:
        row, column = np.unravel_index(int(np.argmax(skew)), skew.shape)
        file.report((*at, int(row), int(column)), "is not symmetric", "its mirror image")
        return None
    if np.linalg.eigvalsh(0.5 * (correlation + correlation.T))[0] < -_SYMMETRY:
        file.report(at, "is not positive semidefinite", "the matrix as `cardgen fit` wrote it")
        return None
    return np.asarray(0.5 * (matrix + matrix.T))


def _check_parameters(
    file: ProfileFile[Any],
    content: FitFileSection,
    profile: Profile,
    covariance: FloatArray | None,
) -> None:
    """Report parameters that are unknown, missing or out of bounds."""
    bounds = {item.name: item for item in parameters(profile.mixtures)}
    others = {FUEL_SCALE_PREFIX + item.name for item in content.mixtures}
    seen: set[str] = set()
    for place, item in enumerate(content.parameters):
        at = ("parameters", place)
        if item.name in seen:
            file.report((*at, "name"), f"{item.name!r} is given twice", "each parameter once")
        seen.add(item.name)
        known = bounds.get(item.name)
        if known is None and item.name not in others:
            file.report((*at, "name"), f"{item.name!r} is no parameter of this model")
        elif known is not None and not known.lower <= item.value <= known.upper:
            file.report(
                (*at, "value"),
                f"{item.value:g} is not plausible",
                f"{known.lower:g} to {known.upper:g}",
            )
        if covariance is not None and not math.isclose(
            item.standard_error, math.sqrt(covariance[place, place]), rel_tol=1e-3
        ):
            file.report(
                (*at, "standard_error"),
                f"{item.standard_error:g} does not belong to the covariance",
                f"{math.sqrt(covariance[place, place]):g}",
            )
    missing = [
        name for name in bounds if name not in seen and not name.startswith(FUEL_SCALE_PREFIX)
    ]
    if missing:
        file.report(("parameters",), f"lacks {', '.join(missing)}", "every parameter of the model")


def _earlier(file: ProfileFile[Any], section: EarlierSection, size: int) -> Earlier | None:
    """Return what an earlier fit had told."""
    if len(section.values) != size:
        file.report(("earlier", "values"), f"has {len(section.values)} numbers", f"{size}")
        return None
    covariance = _covariance(file, section.covariance, size, at=("earlier", "covariance"))
    if covariance is None:
        return None
    covers = _range(section.covers)
    return Earlier(np.array(section.values), covariance, tuple(section.rows), covers)


def _range(section: CoversSection) -> EvidenceRange:
    """Return the ranges of evidence."""
    ends = (tuple(getattr(section, name)) for name in _COVERED)
    return EvidenceRange(*ends)


def _triple(section: Any) -> FloatArray:
    """Return one number per quantity, NaN where there is none."""
    numbers = (section.manifold_pressure, section.fuel_flow, section.true_airspeed)
    return np.array([np.nan if number is None else number for number in numbers])


def fit_text(record: FitRecord) -> str:
    """Return the text of a fit file.

    Parameters
    ----------
    record : FitRecord
        What was found [-]

    Returns
    -------
    str
        YAML; the same record gives the same text [-]
    """
    knowledge = record.knowledge
    lines = [
        "# Written by `cardgen fit`. Do not edit: fit again.",
        "kind: fit",
        "format: 1",
        f"model_version: {record.model_version}",
        f"aircraft: {_word(record.aircraft)}",
        "parts:",
        *(f"  {name}: {_word(digest)}" for name, digest in record.parts.items()),
        "mixtures:",
        *_named(record.mixtures),
        "evidence:",
        "  files:",
        *_named(record.files),
        f"  flight_rows: {record.flight_rows}",
    ]
    if knowledge.covers is not None:
        lines += ["  covers:", *_ranges(knowledge.covers, indent="    ")]
    lines += [f"  rows: {_words(record.rows)}", "parameters:"]
    for place, name in enumerate(knowledge.names):
        lines += [
            f"  - name: {_word(name)}",
            f"    prior: {_number(record.prior[place])}",
            f"    prior_deviation: {_number(record.prior_deviation[place])}",
            f"    value: {_number(knowledge.values[place])}",
            f"    standard_error: {_number(math.sqrt(knowledge.covariance[place, place]))}",
        ]
    lines += ["covariance:", *_matrix(knowledge.covariance, indent="  ")]
    for label, numbers in (
        ("scatter", knowledge.scatter),
        ("rms", record.rms),
        ("leave_one_out_rms", record.left_out_rms),
    ):
        parts = zip(("manifold_pressure", "fuel_flow", "true_airspeed"), numbers, strict=True)
        known = ", ".join(f"{name}: {_number(value)}" for name, value in parts if value >= 0.0)
        lines.append(f"{label}: {{{known}}}")
    lines.append("warnings:" if record.warnings else "warnings: []")
    lines += [f"  - {_word(warning[:600])}" for warning in record.warnings]
    if record.earlier is not None:
        lines += ["earlier:", f"  rows: {_words(record.earlier.rows)}", "  covers:"]
        lines += _ranges(record.earlier.covers, indent="    ")
        lines += [f"  values: {_numbers(record.earlier.values)}", "  covariance:"]
        lines += _matrix(record.earlier.covariance, indent="    ")
    return "\n".join(lines) + "\n"


def _word(text: str) -> str:
    """Return text as a quoted scalar, as YAML and JSON write it alike.

    Characters beyond U+FFFF stand as they are, for YAML knows no pairs of escapes; what cannot be
    printed, such as bytes of a file name that are no text, becomes a question mark.
    """
    printable = "".join(letter if letter.isprintable() else "?" for letter in text)
    return json.dumps(printable, ensure_ascii=False)


def _words(texts: Collection[str]) -> str:
    """Return texts as a list."""
    return "[" + ", ".join(_word(text) for text in texts) + "]"


def _number(value: float) -> str:
    """Return a number with all its digits."""
    return repr(float(value))


def _numbers(values: FloatArray) -> str:
    """Return numbers as a list."""
    return "[" + ", ".join(_number(value) for value in values) + "]"


def _matrix(matrix: FloatArray, *, indent: str) -> list[str]:
    """Return the rows of a matrix."""
    return [f"{indent}- {_numbers(row)}" for row in matrix]


def _ranges(covers: EvidenceRange, *, indent: str) -> list[str]:
    """Return the ranges of evidence."""
    return [
        f"{indent}{name}: [{_number(low)}, {_number(high)}]"
        for name in _COVERED
        for low, high in (getattr(covers, name),)
    ]


def _named(digests: Mapping[str, str]) -> list[str]:
    """Return names with their digests."""
    return [f"  - {{name: {_word(name)}, digest: {_word(d)}}}" for name, d in digests.items()]
