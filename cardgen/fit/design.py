"""What to measure next: the few settings that shrink the tolerances of a card most.

References
----------
.. [1] K. Chaloner, I. Verdinelli, Bayesian experimental design: a review, Statistical Science 10
   (1995) 273-304, section 2: with priors, covariance after data that are not yet taken.
.. [2] A. C. Atkinson, A. N. Donev, R. D. Tobias, Optimum Experimental Designs, with SAS, Oxford
   2007, section 10.6: average variance of prediction (I-optimality, there called V).
"""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.fit.evidence import Evidence, standard_deviations
from cardgen.fit.knowledge import Knowledge
from cardgen.fit.model import Subject, predict
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]

_STEP: Final = 0.05  # of a deviation, for central differences along an axis of the covariance


@dataclass(frozen=True, slots=True)
class Design:
    """What is worth measuring, and what it is worth.

    Parameters
    ----------
    chosen : tuple of int
        Candidates, most telling first [-]
    before, after : ndarray, shape (3,)
        Root mean square standard deviation of what is wanted, from the parameters alone, without
        and with the candidates chosen, in the order of `cardgen.fit.evidence.QUANTITIES`
        [Pa, kg/s, m/s]
    """

    chosen: tuple[int, ...]
    before: FloatArray
    after: FloatArray


def design(
    subject: Subject,
    knowledge: Knowledge,
    *,
    candidates: Evidence,
    wanted: Evidence,
    count: int,
) -> Design:
    """Choose what to measure next.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures as the profile builds them [-]
    knowledge : Knowledge
        What is known so far [-]
    candidates : Evidence
        Rows that could be measured; what they would read does not matter, what they state does [-]
    wanted : Evidence
        Rows whose numbers are to become sure, such as the cells of a card [-]
    count : int
        How many to choose, each candidate at most once [-]

    Returns
    -------
    Design
        Fewer where there are fewer candidates with an answer [-]

    Notes
    -----
    Greedy: each choice is the one that lowers the mean variance of the wanted numbers most, every
    number counted in units of its own scatter. With C the covariance, H the slopes of a candidate
    over its deviations and M the mean outer product of the slopes wanted, that lowers it by
    trace((1 + H C Hᵀ)⁻¹ H C M C Hᵀ).
    """
    axes = _axes(knowledge.covariance)
    scatter = knowledge.scatter
    told = (
        _slopes(subject, candidates, knowledge.values, axes)
        / (standard_deviations(candidates)[..., None])
    )
    asked = _slopes(subject, wanted, knowledge.values, axes) / scatter[:, None]
    asked = asked[~np.isnan(asked).any(axis=(1, 2))]
    free = np.asarray(~np.isnan(told).any(axis=(1, 2)))
    told = np.nan_to_num(told)
    aim = np.einsum("nqi,nqj->ij", asked, asked) / max(len(asked), 1)
    covariance = np.eye(len(axes))  # the axes are one deviation long and independent
    before = _spread(asked, covariance)
    chosen: list[int] = []
    while len(chosen) < count and free.any():
        seen = told @ covariance
        noise = np.eye(told.shape[1]) + seen @ np.swapaxes(told, 1, 2)
        gain = np.trace(
            np.linalg.solve(noise, seen @ aim @ np.swapaxes(seen, 1, 2)), axis1=1, axis2=2
        )
        best = int(np.argmax(np.where(free, gain, -np.inf)))
        chosen.append(best)
        free[best] = False
        covariance = covariance - seen[best].T @ np.linalg.solve(noise[best], seen[best])
    after = _spread(asked, covariance)
    return Design(tuple(chosen), before * scatter, after * scatter)


def _axes(covariance: FloatArray) -> FloatArray:
    """One-deviation shifts along independent axes of a covariance, one per row."""
    deviation = np.sqrt(np.diag(covariance))
    power, axes = np.linalg.eigh(covariance / np.outer(deviation, deviation))
    return np.asarray((axes * np.sqrt(np.maximum(power, 0.0))).T * deviation)


def _slopes(subject: Subject, rows: Evidence, values: FloatArray, axes: FloatArray) -> FloatArray:
    """Change of what the model says of rows per deviation of each axis, shape (rows, 3, axes)."""
    shift = _STEP * axes
    both = predict(subject, rows, values=np.concatenate([values + shift, values - shift]))
    count = len(axes)
    return np.asarray(np.moveaxis(both[:count] - both[count:], 0, -1) / (2.0 * _STEP))


def _spread(asked: FloatArray, covariance: FloatArray) -> FloatArray:
    """Root mean square deviation of each quantity asked."""
    variance = np.einsum("nqi,ij,nqj->nq", asked, covariance, asked)
    return np.asarray(np.sqrt(np.maximum(variance, 0.0).mean(axis=0)))
