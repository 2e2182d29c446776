"""Columns that look as if their numbers were in another unit than their name says.

A column is held against what air, engine and airspeed can be at all, and then against the rest of
the evidence: it is read again in each other unit of the trade, the fit is made again, and what that
explains better, misfit and distance from typical aircraft together, is the more likely reading.

References
----------
.. [1] H. Jeffreys, Theory of Probability, Oxford 1961, chapter 5: two hypotheses compared by how
   well each explains the same data.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.atmosphere import pressure_altitude, standard_temperature
from cardgen.constants import HORSEPOWER, HOUR, INCH_OF_MERCURY, KNOT, POUND
from cardgen.fit.evidence import Evidence, Reading, standard_deviations
from cardgen.fit.loss import robust
from cardgen.fit.model import Subject, predict_continued, slopes
from cardgen.fit.parameters import parameters
from cardgen.fit.rereading import AIRSPEEDS, alternatives, reread, scale_of
from cardgen.fit.search import difference_step, most_likely, within_bounds
from cardgen.records import dataclass
from cardgen.units import Unit

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]

LEAST_GAIN: Final = 1.0
"""Squared deviations by which another unit must explain the evidence better to be suspected [-].

Odds of five to three (half the gain is the logarithm of the likelihood ratio): a wrong unit in a
fit is dangerous, a false alarm costs the user one option."""

_NEAR: Final = 8.0  # a unit worse than this by a linear estimate is not fitted
_MOST_SUSPECTS: Final = 6
_ENOUGH_ROWS: Final = 30  # of one column
_TEMPERATURES: Final = ("oat", "isa_deviation")

# How far the drag of aircraft of one class lies from its typical value, as a share of it; and how
# far the span efficiency may lie from its own. Common practice, no source.
_CLASS_DRAG: Final = 0.15
_SHAPE: Final = 0.2

# How far the model may be off in many rows alike; common practice, no source.
_MODEL: Final = (0.2 * INCH_OF_MERCURY, 0.2 * 6.0 * POUND / HOUR, 2.0 * KNOT)

# What no light piston aeroplane's numbers lie outside of; common practice, no source.
_AIRSPEED: Final = (50.0 * KNOT, 350.0 * KNOT)
_CONSUMPTION: Final = (0.28 * POUND / HORSEPOWER / HOUR, 0.95 * POUND / HORSEPOWER / HOUR)
_LEAST_SHARE: Final = 0.35  # manifold pressure over ambient
_MOST_RAM: Final = 6.0e3  # manifold pressure over ambient, without a compressor [Pa]
_WEATHER: Final = 15.0  # deviation of a set of temperatures from standard [K]
_MOST_WEATHER: Final = 45.0  # [K]
_POWER_SHARE: Final = (0.15, 1.25)  # of rated power


@dataclass(frozen=True, slots=True)
class Suspicion:
    """A column that looks wrong.

    Parameters
    ----------
    reading : Reading
        The column [-]
    meant : Unit, optional
        Unit its numbers look like; None where none makes sense of them [-]
    gain : float
        Squared deviations by which that explains the evidence better; infinite where the column as
        it stands is impossible [-]
    """

    reading: Reading
    meant: Unit | None
    gain: float


@dataclass(frozen=True, slots=True)
class Suspicions:
    """Columns that look wrong, and the evidence without that.

    Parameters
    ----------
    columns : tuple of Suspicion
        Strongest first [-]
    evidence : Evidence
        The evidence with those columns in the units they look like [-]
    """

    columns: tuple[Suspicion, ...]
    evidence: Evidence


def suspect_columns(
    subject: Subject,
    evidence: Evidence,
    readings: Sequence[Reading],
    *,
    mean: FloatArray,
    covariance: FloatArray,
) -> Suspicions:
    """Find columns whose numbers look like another unit.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures as the profile builds them [-]
    evidence : Evidence
        The rows as read [-]
    readings : sequence of Reading
        Columns of the files, by source [-]
    mean : ndarray, shape (p,)
        Mean of the prior [-]
    covariance : ndarray, shape (p, p)
        Its covariance [-]

    Returns
    -------
    Suspicions
        No columns where everything is as its name says [-]

    Notes
    -----
    One column at a time, the most suspect first, the others judged anew after each.
    """
    density = subject.aircraft.engine.fuel_density
    judge = _Judge(subject, mean, _judging(subject, mean, covariance))
    few = _few(evidence, readings)
    found: list[Suspicion] = []
    left: list[Reading] = []
    for reading in readings:
        if _possible(subject, evidence, reading):
            left.append(reading)
        else:
            found.append(Suspicion(reading, None, np.inf))
    for place, suspicion in enumerate(found):
        # With several impossible columns the first is judged beside the others as they stand.
        unit = judge.best_possible(evidence, suspicion.reading, few)
        found[place] = Suspicion(suspicion.reading, unit, np.inf)
        if unit is not None:
            evidence = reread(evidence, suspicion.reading, unit=unit, fuel_density=density)
    while len(found) < _MOST_SUSPECTS:
        best = judge.worst(evidence, left, few)
        if best is None or best.meant is None or best.gain < LEAST_GAIN:
            break
        found.append(best)
        left = [reading for reading in left if reading is not best.reading]
        evidence = reread(evidence, best.reading, unit=best.meant, fuel_density=density)
    return Suspicions(tuple(found), evidence)


def _few(evidence: Evidence, readings: Sequence[Reading]) -> BoolArray:
    """Return a mask of rows enough to judge by, spread over every column of every file."""
    chosen = np.zeros(len(evidence), dtype=np.bool_)
    for reading in readings:
        rows = np.flatnonzero(reading.rows)
        chosen[rows[np.linspace(0, len(rows) - 1, min(len(rows), _ENOUGH_ROWS)).astype(int)]] = True
    return chosen


def _judging(subject: Subject, mean: FloatArray, covariance: FloatArray) -> FloatArray:
    """Return the prior with which units are judged.

    A wrong unit of airspeed hides in drag. What most aircraft of a class have is then worth more
    than the room a fit leaves for the exception, and the shape of the polar, which this model gets
    wrong as easily as a unit, is worth less.
    """
    scale = np.ones(len(mean))
    for place, item in enumerate(parameters(subject.mixtures)):
        deviation = float(np.sqrt(covariance[place, place]))
        if item.name == "zero_lift_drag":
            scale[place] = min(1.0, _CLASS_DRAG * mean[place] / deviation)
        elif item.name == "oswald_factor":
            scale[place] = max(1.0, _SHAPE / deviation)
    return np.asarray(covariance * scale * scale[:, None])


def _possible(subject: Subject, evidence: Evidence, reading: Reading) -> bool:
    """Return whether at least half the numbers of a column can be."""
    rated = subject.aircraft.engine.rated_power
    rows = evidence.rows(reading.rows)
    fine: BoolArray
    if reading.quantity == "map":
        pressure = rows.manifold_pressure
        fine = (pressure > _LEAST_SHARE * rows.pressure) & (pressure < rows.pressure + _MOST_RAM)
    elif reading.quantity in AIRSPEEDS:
        fine = (rows.true_airspeed > _AIRSPEED[0]) & (rows.true_airspeed < _AIRSPEED[1])
    elif reading.quantity == "fuel_flow":
        # At the power of the row where it states one, else at any from a third of rated to all.
        least = np.where(np.isnan(rows.power), rated / 3.0, np.minimum(rows.power, rated) * 0.6)
        most = np.where(np.isnan(rows.power), rated, np.minimum(rows.power, rated))
        fine = (rows.fuel_flow > _CONSUMPTION[0] * least) & (
            rows.fuel_flow < _CONSUMPTION[1] * most
        )
    elif reading.quantity == "power":
        fine = (rows.power > _POWER_SHARE[0] * rated) & (rows.power < _POWER_SHARE[1] * rated)
    elif reading.quantity in _TEMPERATURES:
        fine = np.abs(_isa_deviation(rows)) < _MOST_WEATHER
    else:
        return True
    return bool(np.mean(fine) >= 0.5)


def _isa_deviation(evidence: Evidence) -> FloatArray:
    """Return temperatures less standard [K]."""
    return np.asarray(
        evidence.temperature - standard_temperature(pressure_altitude(evidence.pressure))
    )


def _allowed(evidence: Evidence) -> FloatArray:
    """Return the deviations that columns are judged with, of evidence and model together.

    What a model gets wrong it gets wrong in many rows alike: counted row by row it would seem to
    prove any unit that happens to bend the same way.
    """
    return np.asarray(np.hypot(standard_deviations(evidence), _MODEL))


class _Judge:
    """Weighs readings of one column against each other, everything else as it is."""

    def __init__(self, subject: Subject, mean: FloatArray, covariance: FloatArray) -> None:
        self.subject, self.mean, self.covariance = subject, mean, covariance
        self.density = subject.aircraft.engine.fuel_density
        self.whiten = np.linalg.inv(np.linalg.cholesky(covariance))

    def best_possible(self, evidence: Evidence, reading: Reading, few: BoolArray) -> Unit | None:
        """Return the unit that makes most sense of an impossible column."""
        costs: list[tuple[float, Unit]] = []
        for unit in alternatives(reading):
            other = reread(evidence, reading, unit=unit, fuel_density=self.density)
            if _possible(self.subject, other, reading):
                rows = other.rows(few)
                deviations = _allowed(rows)
                costs.append((self._cost(rows, self._found(rows, deviations), deviations), unit))
        return min(costs, key=lambda item: item[0])[1] if costs else None

    def worst(
        self, evidence: Evidence, readings: Sequence[Reading], few: BoolArray
    ) -> Suspicion | None:
        """Return the column that another unit would improve most."""
        rows = evidence.rows(few)
        deviations = _allowed(rows)
        values = self._found(rows, deviations)
        if np.isnan(values).any():
            return None  # the fit itself will name the row that has no answer
        step = difference_step(self.subject.mixtures, self.covariance)
        slope = slopes(self.subject, rows, values=values, step=step)
        cost = self._cost(rows, values, deviations)
        found: list[Suspicion] = []
        for reading in readings:
            for unit in alternatives(reading):
                other = reread(evidence, reading, unit=unit, fuel_density=self.density)
                if not _possible(self.subject, other, reading):
                    continue
                scaled = self._scaled(deviations, reading, unit, few)
                other = other.rows(few)
                near, guess = self._linear(other, scaled, values, slope)
                # Temperature bends everything: a straight line from here says little of it.
                warm = reading.quantity in _TEMPERATURES
                if not warm and cost - guess < -_NEAR:
                    continue
                there = self._found(other, scaled, near=values if warm else near)
                gain = cost - self._cost(other, there, scaled)
                if warm:
                    gain += self._weather(reading, few, rows, other)
                found.append(Suspicion(reading, unit, float(gain)))
        return max(found, key=lambda suspicion: suspicion.gain, default=None)

    def _found(
        self, evidence: Evidence, deviations: FloatArray, *, near: FloatArray | None = None
    ) -> FloatArray:
        """Return the parameters that explain evidence best, NaN where none do at all."""
        start = within_bounds(self.subject.mixtures, self.mean if near is None else near)
        said = predict_continued(self.subject, evidence, values=start)
        if (np.isnan(said) & ~np.isnan(evidence.read())).any():
            return np.full_like(start, np.nan)
        return most_likely(
            self.subject,
            evidence,
            deviations=deviations,
            mean=self.mean,
            covariance=self.covariance,
            near=start,
        )

    def _scaled(
        self, deviations: FloatArray, reading: Reading, unit: Unit, few: BoolArray
    ) -> FloatArray:
        """Return the deviations of the evidence, those of a column grown with its numbers.

        A smaller unit would else seem more exact only because its numbers scatter less.
        """
        column = {"map": 0, "fuel_flow": 1, **dict.fromkeys(AIRSPEEDS, 2)}.get(reading.quantity)
        grown = deviations.copy()
        if column is not None:
            grown[reading.rows[few], column] *= scale_of(reading, unit, fuel_density=self.density)
        return grown

    def _weather(self, reading: Reading, few: BoolArray, rows: Evidence, other: Evidence) -> float:
        """Return by how much the weather of another reading is more usual."""
        now, then = (
            float(np.mean(_isa_deviation(each)[reading.rows[few]])) / _WEATHER
            for each in (rows, other)
        )
        return now**2 - then**2

    def _linear(
        self, other: Evidence, deviations: FloatArray, values: FloatArray, slope: FloatArray
    ) -> tuple[FloatArray, float]:
        """Return about where the fit to another reading lies, and what it would cost."""
        error = predict_continued(self.subject, other, values=values) - other.read()
        known = ~np.isnan(error)
        matrix = np.concatenate([(slope / deviations[..., None])[known], self.whiten])
        wanted = -np.concatenate([(error / deviations)[known], self.whiten @ (values - self.mean)])
        change = np.linalg.lstsq(matrix, wanted, rcond=None)[0]
        left = robust(((error + slope @ change) / deviations)[known])
        away = self.whiten @ (values + change - self.mean)
        return values + change, float(left @ left + away @ away)

    def _cost(self, evidence: Evidence, values: FloatArray, deviations: FloatArray) -> float:
        """Return misfit and distance from the prior in squared deviations, infinite without fit."""
        if np.isnan(values).any():
            return np.inf
        error = predict_continued(self.subject, evidence, values=values) - evidence.read()
        bent = robust((error / deviations)[~np.isnan(error)])
        away = self.whiten @ (values - self.mean)
        return float(bent @ bent + away @ away)
