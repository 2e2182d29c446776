"""A comparison as flat rows, one for each setting, in the units that other programs read."""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.compare.settings import QUANTITIES, Change
from cardgen.constants import (
    FOOT,
    GALLON_US,
    HORSEPOWER,
    HOUR,
    INCH_OF_MERCURY,
    KNOT,
    NAUTICAL_MILE,
    POUND,
)

FloatArray = npt.NDArray[np.float64]
Value = float | int | str

_FLOW: Final = GALLON_US / HOUR
_READ: Final = (
    ("manifold_pressure", "inhg", INCH_OF_MERCURY),
    ("fuel_flow", "gph", _FLOW),
    ("true_airspeed", "kt", KNOT),
    ("specific_range", "nm_per_gal", NAUTICAL_MILE / GALLON_US),
)

COLUMNS: Final = (
    "basis",
    "mixture",
    "pressure_altitude_ft",
    "isa_deviation_c",
    "density_altitude_ft",
    "weight_lb",
    "rpm",
    "asked_percent_power",
    "old_percent_power",
    "new_percent_power",
    "old_power_hp",
    "new_power_hp",
    *(f"{side}_{name}_{unit}" for name, unit, _ in _READ for side in ("old", "new")),
    *(f"{name}_{word}_{unit}" for name, unit, _ in _READ for word in ("change", "tolerance")),
    *(f"{name}_significant" for name, _, _ in _READ),
    "compared",
    "old_status",
    "new_status",
)
"""Columns of a comparison; what is asked is of the newer rating, tolerances are of 95 %."""


def change_columns(change: Change) -> dict[str, FloatArray | list[str]]:
    """Return the settings of one mixture as columns.

    Parameters
    ----------
    change : Change
        Settings before and after [-]

    Returns
    -------
    dict
        `COLUMNS` in order, each of one length; rows vary fastest in rpm, then temperature,
        altitude, power and mass [-]
    """
    shape = change.compared.shape

    def run(values: npt.ArrayLike, unit: float = 1.0) -> FloatArray:
        full = np.broadcast_to(np.asarray(values, dtype=np.float64), shape)
        return np.asarray(full.reshape(-1) / unit)

    old, new = change.old.solution, change.new.solution
    situation = new.situation
    size = int(np.prod(shape))
    altitude = np.asarray(situation.pressure_altitude)
    columns: dict[str, FloatArray | list[str]] = {
        "basis": [change.basis] * size,
        "mixture": [change.mixture] * size,
        "pressure_altitude_ft": run(altitude, FOOT),
        "isa_deviation_c": run(change.isa_deviation),
        "density_altitude_ft": run(new.density_altitude, FOOT),
        "weight_lb": run(situation.mass, POUND),
        "rpm": run(new.indicated_rpm),
        "asked_percent_power": run(change.power_fraction, 0.01),
        "old_percent_power": run(old.power_fraction, 0.01),
        "new_percent_power": run(new.power_fraction, 0.01),
        "old_power_hp": run(old.point.power, HORSEPOWER),
        "new_power_hp": run(new.point.power, HORSEPOWER),
    }
    for place, (name, suffix, unit) in enumerate(_READ):
        columns[f"old_{name}_{suffix}"] = run(change.old.values[..., place], unit)
        columns[f"new_{name}_{suffix}"] = run(change.new.values[..., place], unit)
    for place, (name, suffix, unit) in enumerate(_READ):
        columns[f"{name}_change_{suffix}"] = run(change.difference[..., place], unit)
        columns[f"{name}_tolerance_{suffix}"] = run(change.tolerance[..., place], unit)
    for place, name in enumerate(QUANTITIES):
        columns[f"{name}_significant"] = run(change.significant[..., place])
    columns["compared"] = run(change.compared)
    columns["old_status"] = [str(word) for word in change.old.status.reshape(-1)]
    columns["new_status"] = [str(word) for word in change.new.status.reshape(-1)]
    return {name: columns[name] for name in COLUMNS}


def change_cells(change: Change) -> list[list[Value]]:
    """Return the settings of one mixture as rows of plain values.

    Parameters
    ----------
    change : Change
        Settings before and after [-]

    Returns
    -------
    list of list
        In the order of `COLUMNS`: words as str, yes and no as 1 and 0, numbers as float [-]
    """
    ready: list[list[Value]] = []
    for name, column in change_columns(change).items():
        if isinstance(column, list):
            ready.append(list(column))
        elif name == "compared" or name.endswith("_significant"):
            ready.append([int(value) for value in column])
        else:
            ready.append([float(value) for value in column])
    return [list(row) for row in zip(*ready, strict=True)]
