"""Points files: rows of a handbook and of flights, read as evidence in true SI values.

A row of a handbook states true values. A row of a flight states what the gauges read: rpm,
manifold pressure, fuel flow and outside air temperature are turned into true values by what the
profile says of its gauges. Airspeed is true airspeed, or ground speeds on three or more tracks.
"""

from __future__ import annotations

import hashlib
import os
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Final

import numpy as np

from cardgen.airspeed import true_temperature
from cardgen.errors import DataError, Problem
from cardgen.fit import Evidence, Reading, cruise_of_rows, prior_mean
from cardgen.limits.gauges import true_manifold_pressure, true_rpm
from cardgen.profile.assembly import subject_of
from cardgen.profile.cells import Sheet, read_sheet
from cardgen.profile.document import Profile
from cardgen.profile.parsing import MOST_PROBLEMS
from cardgen.profile.point_row import (
    ALTITUDES,
    COLUMNS,
    POWERS,
    READ,
    TEMPERATURES,
    Entry,
    entry_of,
)
from cardgen.records import dataclass

_SCALED: Final = (*READ, "oat", "isa_deviation", "power", "leg1_gs")


@dataclass(frozen=True, slots=True)
class Points:
    """Evidence, and what is worth knowing of how it was written.

    Parameters
    ----------
    evidence : Evidence
        The rows, in true values [-]
    readings : tuple of Reading
        Runs of rows that were written in one column of one file from one source [-]
    row_digests : tuple of str
        One per row, of its numbers as read [-]
    files : mapping
        SHA-256 of each file by its name [-]
    notes : tuple of str
        What was assumed where the files say nothing [-]
    """

    evidence: Evidence
    readings: tuple[Reading, ...]
    row_digests: tuple[str, ...]
    files: Mapping[str, str]
    notes: tuple[str, ...]


def read_points(profile: Profile, paths: Sequence[str | os.PathLike[str]]) -> Points:
    """Read points files.

    Parameters
    ----------
    profile : Profile
        The aircraft they are of [-]
    paths : sequence of path-like
        The files [-]

    Returns
    -------
    Points
        All their rows [-]

    Raises
    ------
    DataError
        Something is wrong; it carries every problem of all the files.
    """
    sheets = [
        read_sheet(Path(path), COLUMNS, shown=os.fspath(path)) for path in dict.fromkeys(paths)
    ]
    assumed: dict[str, None] = {}
    entries: list[Entry] = []
    for place, sheet in enumerate(sheets):
        if sheet.columns:
            _check_columns(sheet)
        for line, cells in sheet.rows:
            entry = entry_of(profile, sheet.cells(line, cells), place, assumed)
            if entry is not None:
                entries.append(entry)
        if sheet.unused:
            assumed[f"{sheet.shown}: not used: {', '.join(sheet.unused)}"] = None
    problems: list[Problem] = []
    for sheet in sheets:
        found = sorted(set(sheet.problems))
        problems += found[:MOST_PROBLEMS]
        if len(found) > MOST_PROBLEMS:
            more = len(found) - MOST_PROBLEMS
            problems.append(Problem(sheet.shown, 0, 0, "", f"has {more} more problems"))
    if problems:
        raise DataError(problems)
    evidence = _corrected(profile, entries)
    return Points(
        evidence=evidence,
        readings=tuple(_readings(sheets, entries)),
        row_digests=tuple(entry.digest for entry in entries),
        files={
            Path(sheet.shown).name: hashlib.sha256(Path(sheet.shown).read_bytes()).hexdigest()
            for sheet in sheets
        },
        notes=tuple(assumed),
    )


def _check_columns(sheet: Sheet) -> None:
    """Report a header that lacks what every row needs."""
    have = {column.quantity for column in sheet.columns if column is not None}
    if sheet.problems:
        return  # a misspelt column would be reported a second time as a missing one
    for needed, names in (
        (ALTITUDES, "pressure_altitude_ft"),
        (TEMPERATURES, "oat_c or isa_deviation_c"),
        (("rpm",), "rpm"),
        ((*POWERS, "map"), "map_inhg, percent_power or power_hp"),
        (("map", "fuel_flow", "tas", "leg1_gs"), "map_inhg, fuel_flow_gph or tas_kt"),
    ):
        if not have.intersection(needed):
            sheet.report(0, 0, "", f"has no column {names}", "a header with it")


def _corrected(profile: Profile, entries: Sequence[Entry]) -> Evidence:
    """Turn what gauges read into true values."""
    gauges = profile.gauges
    flight = np.array([entry.flight for entry in entries], dtype=np.bool_)
    read = np.array([entry.read for entry in entries], dtype=np.float64)
    rpm = np.array([entry.rpm for entry in entries])
    spread = np.zeros((len(entries), 3))
    spread[:, 2] = [entry.airspeed_spread for entry in entries]
    evidence = Evidence(
        pressure=np.array([entry.pressure for entry in entries]),
        temperature=np.array([entry.temperature for entry in entries]),
        rpm=np.where(flight, true_rpm(gauges, rpm), rpm),
        mass=np.array([entry.mass for entry in entries]),
        mixture=np.array([entry.mixture for entry in entries], dtype=np.intp),
        power=np.array([entry.power for entry in entries]),
        manifold_pressure=np.where(flight, true_manifold_pressure(gauges, read[:, 0]), read[:, 0]),
        fuel_flow=np.where(flight, gauges.fuel_flow_factor, 1.0) * read[:, 1],
        true_airspeed=read[:, 2],
        rounding=np.array([entry.rounding for entry in entries]),
        spread=spread,
        flight=flight,
        place=tuple(entry.place for entry in entries),
    )
    probed = flight & np.array([entry.temperature_read for entry in entries], dtype=np.bool_)
    if gauges.temperature_recovery is None or not probed.any():
        return evidence
    speed = evidence.true_airspeed
    if np.isnan(speed[probed]).any():
        # The rise hardly depends on the model: 5 kt of airspeed are 0.3 K at most.
        subject = subject_of(profile)
        start = prior_mean(subject.aircraft, subject.mixtures)
        guess = cruise_of_rows(subject, evidence, values=start).true_airspeed
        speed = np.where(np.isnan(speed), np.nan_to_num(guess), speed)
    true = true_temperature(
        evidence.temperature, speed, recovery_factor=gauges.temperature_recovery
    )
    return replace(evidence, temperature=np.where(probed, true, evidence.temperature))


def _readings(sheets: Sequence[Sheet], entries: Sequence[Entry]) -> Iterator[Reading]:
    """Yield the runs of rows that share a column and a source."""
    for place, sheet in enumerate(sheets):
        for column in sheet.columns:
            # Of ground legs the first stands for all: their speeds scale together.
            if (
                column is None
                or column.unit is None
                or column.quantity not in (*_SCALED, "leg1_gs")
            ):
                continue
            for flight in (False, True):
                rows = np.array(
                    [
                        e.file == place and e.flight == flight and column.quantity in e.filled
                        for e in entries
                    ]
                )
                if rows.any():
                    yield Reading(
                        file=sheet.shown,
                        column=column.name,
                        line=column.line,
                        place=column.place,
                        quantity=column.quantity,
                        unit=column.unit,
                        rows=rows,
                    )
