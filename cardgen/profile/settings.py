"""Settings files: many settings to check, as the gauges read them."""

from __future__ import annotations

import contextlib
import re
from collections.abc import Mapping
from pathlib import Path
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import standard_temperature
from cardgen.constants import FOOT, INCH_OF_MERCURY, POUND
from cardgen.errors import DataError
from cardgen.profile.cells import Column, Row, Sheet, read_sheet
from cardgen.profile.document import Profile
from cardgen.records import dataclass
from cardgen.units import Dimension

FloatArray = npt.NDArray[np.float64]

MOST_SETTINGS: Final = 200_000
"""Settings read from one file."""

LARGEST_SETTINGS_FILE: Final = 20_000_000
"""Size of such a file [bytes]."""

COLUMNS: Final[Mapping[str, tuple[Dimension, ...]]] = {
    "map": ("pressure",),
    "rpm": (),
    "pressure_altitude": ("length",),
    "oat": ("temperature",),
    "weight": ("mass",),
    "mixture": (),
}
"""Columns by the name without its unit, and what their unit may measure."""

# Beyond these nothing can be meant, whatever the unit.
_BOUNDS: Final[Mapping[str, tuple[float, float]]] = {
    "map": (INCH_OF_MERCURY, 100.0 * INCH_OF_MERCURY),
    "rpm": (300.0, 8000.0),
    "pressure_altitude": (-2000.0 * FOOT, 60_000.0 * FOOT),
    "oat": (180.0, 340.0),
    "weight": (200.0 * POUND, 60_000.0 * POUND),
}


_PLAIN: Final = re.compile(r"[0-9.,+-]*")


@dataclass(frozen=True, slots=True)
class Settings:
    """Settings as the gauges read them, one entry of every array a setting.

    Parameters
    ----------
    line : ndarray of int
        Line of the file [-]
    manifold_pressure : ndarray
        What the manifold-pressure gauge reads [Pa]
    rpm : ndarray
        What the tachometer reads [rpm]
    pressure_altitude : ndarray
        Pressure altitude [m]
    temperature : ndarray
        What the thermometer reads, or standard temperature where `read` is false [K]
    read : ndarray of bool
        Whether the temperature was read [-]
    mass : ndarray
        Mass of the aircraft [kg]
    mixture : ndarray of int
        Index of the mixture [-]
    """

    line: npt.NDArray[np.intp]
    manifold_pressure: FloatArray
    rpm: FloatArray
    pressure_altitude: FloatArray
    temperature: FloatArray
    read: npt.NDArray[np.bool_]
    mass: FloatArray
    mixture: npt.NDArray[np.intp]


def read_settings(profile: Profile, path: Path, *, mixture: int, mass: float) -> Settings:
    """Read a file of settings.

    Parameters
    ----------
    profile : Profile
        The aircraft they are for [-]
    path : Path
        The file [-]
    mixture : int
        Index of the mixture of rows that name none [-]
    mass : float
        Mass of rows that state none [kg]

    Returns
    -------
    Settings
        Every row [-]

    Raises
    ------
    DataError
        Something is wrong; it carries every problem of the file.
    """
    sheet = read_sheet(
        path, COLUMNS, shown=str(path), most_rows=MOST_SETTINGS, largest=LARGEST_SETTINGS_FILE
    )
    have = {column.quantity for column in sheet.columns if column is not None}
    if sheet.columns and not sheet.problems:
        for needed, name in (
            ("map", "map_inhg"),
            ("rpm", "rpm"),
            ("pressure_altitude", "pressure_altitude_ft"),
        ):
            if needed not in have:
                sheet.report(0, 0, "", f"has no column {name}", "a header with it")
    if sheet.problems:
        raise DataError(sorted(set(sheet.problems))[:50])
    pressure = _numbers(sheet, "map", needed=True)
    rpm = _numbers(sheet, "rpm", needed=True)
    altitude = _numbers(sheet, "pressure_altitude", needed=True)
    oat = _numbers(sheet, "oat", needed=False)
    stated_mass = _numbers(sheet, "weight", needed=False)
    mixtures = _mixtures(sheet, profile, mixture)
    if sheet.problems:
        raise DataError(sorted(set(sheet.problems))[:50])
    read = ~np.isnan(oat)
    return Settings(
        line=np.array([line for line, _ in sheet.rows], dtype=np.intp),
        manifold_pressure=pressure,
        rpm=rpm,
        pressure_altitude=altitude,
        temperature=np.where(read, oat, standard_temperature(altitude)),
        read=read,
        mass=np.where(np.isnan(stated_mass), mass, stated_mass),
        mixture=mixtures,
    )


def _place(sheet: Sheet, quantity: str) -> tuple[int, Column] | None:
    """Return where a quantity stands in every row."""
    for place, column in enumerate(sheet.columns):
        if column is not None and column.quantity == quantity:
            return place, column
    return None


def _texts(sheet: Sheet, place: int) -> list[str]:
    """Return the cells of one column, empty where a row is too short."""
    return [cells[place].text if place < len(cells) else "" for _, cells in sheet.rows]


def _numbers(sheet: Sheet, quantity: str, *, needed: bool) -> FloatArray:
    """Return a column in SI, NaN where a cell is empty; what is wrong is reported cell by cell."""
    found = _place(sheet, quantity)
    if found is None:
        return np.full(len(sheet.rows), np.nan)
    place, column = found
    texts = _texts(sheet, place)
    least, greatest = _BOUNDS[quantity]
    plain = np.full(len(texts), np.inf)  # where some cell is no number, all are looked at singly
    # What NumPy takes for a number besides: 1_000, nan, digits of other scripts.
    if _PLAIN.fullmatch(",".join(texts)):
        with contextlib.suppress(ValueError):
            plain = np.array([text or "nan" for text in texts], dtype=np.float64)
    unit = column.unit
    values = plain if unit is None else plain * unit.factor + unit.offset
    empty = np.array([not text for text in texts], dtype=np.bool_)
    doubtful = ~((values >= least) & (values <= greatest)) & (~empty | needed)
    for index in np.flatnonzero(doubtful):
        line, cells = sheet.rows[int(index)]
        values[index] = _one(sheet.cells(line, cells), quantity, needed=needed)
        if len(sheet.problems) >= 200:
            break
    return values


def _one(row: Row, quantity: str, *, needed: bool) -> float:
    """Return one number, NaN where it is empty or reported."""
    if needed and not row.has(quantity):
        row.report(quantity, "is missing", "a number in every row")
        return np.nan
    number = row.number(quantity, *_BOUNDS[quantity])
    return np.nan if number is None else number


def _mixtures(sheet: Sheet, profile: Profile, default: int) -> npt.NDArray[np.intp]:
    """Return the mixture of every row."""
    found = _place(sheet, "mixture")
    if found is None:
        return np.full(len(sheet.rows), default, dtype=np.intp)
    place, _ = found
    known = {mixture.name.casefold(): index for index, mixture in enumerate(profile.mixtures)}
    known[""] = default
    indices = np.empty(len(sheet.rows), dtype=np.intp)
    for index, text in enumerate(_texts(sheet, place)):
        chosen = known.get(text.casefold())
        if chosen is None:
            line, cells = sheet.rows[index]
            names = ", ".join(mixture.name for mixture in profile.mixtures)
            sheet.cells(line, cells).report(
                "mixture", f"{text!r} is no mixture of this profile", f"one of {names}"
            )
            chosen = default
        indices[index] = chosen
    return indices
