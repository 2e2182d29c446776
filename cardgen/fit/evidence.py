"""Evidence: what a handbook or a flight says the aircraft does."""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.constants import HOUR, INCH_OF_MERCURY, KNOT, POUND
from cardgen.records import dataclass
from cardgen.units import Unit

FloatArray = npt.NDArray[np.float64]

QUANTITIES: Final = ("manifold_pressure", "fuel_flow", "true_airspeed")
"""What the model answers and evidence is compared in, in the order of every residual."""


@dataclass(frozen=True, slots=True)
class Evidence:
    """Rows of evidence, SI; every array has one entry per row.

    Parameters
    ----------
    pressure, temperature : ndarray
        Static pressure [Pa] and true static temperature [K]
    rpm : ndarray
        True crankshaft speed [rpm]
    mass : ndarray
        Mass of the loaded aircraft [kg]
    mixture : ndarray of int
        Index into the mixtures of the profile [-]
    power : ndarray
        Brake power asked, NaN where the row does not state it; a row that asks for more than full
        throttle gives is a full-throttle row [W]
    manifold_pressure, fuel_flow, true_airspeed : ndarray
        What was read, NaN where it was not; true pressure [Pa], mass flow [kg/s], speed [m/s]
    rounding : ndarray, shape (rows, 3)
        Last printed step of the three, in the same units; 0 where unknown [-]
    spread : ndarray, shape (rows, 3)
        Standard deviation that the measurement itself shows, such as between sets of ground legs,
        in the same units; 0 where it shows none [-]
    flight : ndarray of bool
        Whether the row was flown rather than printed in a handbook [-]
    place : tuple of str
        File and line of each row, for messages [-]
    """

    pressure: FloatArray
    temperature: FloatArray
    rpm: FloatArray
    mass: FloatArray
    mixture: npt.NDArray[np.intp]
    power: FloatArray
    manifold_pressure: FloatArray
    fuel_flow: FloatArray
    true_airspeed: FloatArray
    rounding: FloatArray
    spread: FloatArray
    flight: npt.NDArray[np.bool_]
    place: tuple[str, ...]

    def __len__(self) -> int:
        """Return the number of rows."""
        return len(self.place)

    def read(self) -> FloatArray:
        """What was read, one column per quantity.

        Returns
        -------
        ndarray, shape (rows, 3)
            In the order of `QUANTITIES`, NaN where nothing was read [-]
        """
        return np.stack([self.manifold_pressure, self.fuel_flow, self.true_airspeed], axis=-1)

    def rows(self, chosen: npt.NDArray[np.bool_] | npt.NDArray[np.intp]) -> Evidence:
        """Some of the rows.

        Parameters
        ----------
        chosen : ndarray of bool or int
            Mask or indices of rows [-]

        Returns
        -------
        Evidence
            The rows chosen [-]
        """
        index = np.arange(len(self))[chosen]
        return Evidence(
            pressure=self.pressure[index],
            temperature=self.temperature[index],
            rpm=self.rpm[index],
            mass=self.mass[index],
            mixture=self.mixture[index],
            power=self.power[index],
            manifold_pressure=self.manifold_pressure[index],
            fuel_flow=self.fuel_flow[index],
            true_airspeed=self.true_airspeed[index],
            rounding=self.rounding[index],
            spread=self.spread[index],
            flight=self.flight[index],
            place=tuple(self.place[i] for i in index),
        )


@dataclass(frozen=True, slots=True)
class Reading:
    """Rows that were written in one column of one file and come from one source.

    Parameters
    ----------
    file, column : str
        Where they stand, for messages [-]
    line, place : int
        Line and column of the header's cell, counted from 1 [-]
    quantity : str
        Name of the column without its unit [-]
    unit : Unit
        Unit that the column says its numbers are in [-]
    rows : ndarray of bool
        Mask of the rows of the evidence that have a number there [-]
    """

    file: str
    column: str
    line: int
    place: int
    quantity: str
    unit: Unit
    rows: npt.NDArray[np.bool_]


# How far a row may stand from a model that is right, besides the rounding of its last digit.
# Handbook: smoothing and chart reading by whoever made the table. Flight: needle width, unsteady
# air and throttle, fuel-flow pulsation. Common practice, no source. Order of `QUANTITIES`.
_HANDBOOK_SCATTER: Final = (
    0.04 * INCH_OF_MERCURY,
    0.05 * 6.0 * POUND / HOUR,
    0.4 * KNOT,
)
_FLIGHT_SCATTER: Final = (
    0.15 * INCH_OF_MERCURY,
    0.2 * 6.0 * POUND / HOUR,
    1.5 * KNOT,
)


def standard_deviations(evidence: Evidence) -> FloatArray:
    """Standard deviation of each thing read.

    Parameters
    ----------
    evidence : Evidence
        The rows [-]

    Returns
    -------
    ndarray, shape (rows, 3)
        Rounding (a uniform step), scatter and spread together, in SI, in the order of
        `QUANTITIES` [-]
    """
    scatter = np.where(evidence.flight[:, None], _FLIGHT_SCATTER, _HANDBOOK_SCATTER)
    return np.asarray(np.sqrt(scatter**2 + evidence.rounding**2 / 12.0 + evidence.spread**2))


def assumed_scatter() -> FloatArray:
    """Scatter assumed where no evidence shows it.

    Returns
    -------
    ndarray, shape (3,)
        Standard deviations, in the order of `QUANTITIES` [SI]
    """
    return np.array(_FLIGHT_SCATTER)
