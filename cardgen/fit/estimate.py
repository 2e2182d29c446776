"""Maximum a posteriori fit of an aircraft's parameters to its evidence.

References
----------
.. [1] A. Tarantola, Inverse Problem Theory, SIAM 2005, section 3.2: least squares with priors,
   posterior covariance.
.. [2] D. A. Belsley, E. Kuh, R. E. Welsch, Regression Diagnostics, Wiley 1980, section 2.1:
   the residual without a row from the residual with it and its leverage.
"""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.errors import NoSolutionError
from cardgen.fit.evidence import QUANTITIES, Evidence, standard_deviations
from cardgen.fit.loss import ROBUST_FROM, robust
from cardgen.fit.model import Subject, predict, predict_continued, slopes
from cardgen.fit.parameters import parameters, prior_covariance, prior_mean
from cardgen.fit.search import difference_step, most_likely
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]

SCATTER_WEIGHT: Final = 6.0
"""How many rows of evidence the assumed scatter counts for, against the scatter seen [-]."""


@dataclass(frozen=True, slots=True)
class Estimate:
    """What a fit found.

    Parameters
    ----------
    names : tuple of str
        Names of the parameters [-]
    values, prior : ndarray, shape (p,)
        Parameters found, and the mean of their prior [-]
    covariance : ndarray, shape (p, p)
        Covariance of the parameters found [-]
    prior_deviation : ndarray, shape (p,)
        Standard deviations of the prior [-]
    scatter : ndarray, shape (3,)
        Standard deviation of what model and table disagree in besides parameters, in the order of
        `cardgen.fit.evidence.QUANTITIES` [Pa, kg/s, m/s]
    residual : ndarray, shape (rows, 3)
        Model less evidence; NaN where nothing was read, and for a manifold pressure that was
        asked of the model [Pa, kg/s, m/s]
    left_out : ndarray, shape (rows, 3)
        The same for a fit that has not seen the row, to first order [Pa, kg/s, m/s]
    standardised : ndarray, shape (rows, 3)
        `left_out` over the deviation expected of it [-]
    """

    names: tuple[str, ...]
    values: FloatArray
    prior: FloatArray
    covariance: FloatArray
    prior_deviation: FloatArray
    scatter: FloatArray
    residual: FloatArray
    left_out: FloatArray
    standardised: FloatArray

    @property
    def standard_error(self) -> FloatArray:
        """Standard errors of the parameters."""
        return np.asarray(np.sqrt(np.diag(self.covariance)))

    def rms(self) -> FloatArray:
        """Root mean square residual per quantity, NaN where nothing was read.

        Returns
        -------
        ndarray, shape (3,)
            SI
        """
        return _rms(self.residual)

    def left_out_rms(self) -> FloatArray:
        """Root mean square residual of rows that the fit has not seen.

        Returns
        -------
        ndarray, shape (3,)
            SI
        """
        return _rms(self.left_out)


def _rms(residual: FloatArray) -> FloatArray:
    """Root mean square of each column, NaN where it is empty."""
    count = np.sum(~np.isnan(residual), axis=0)
    with np.errstate(invalid="ignore"):
        return np.asarray(np.sqrt(np.nansum(residual**2, axis=0) / np.where(count, count, np.nan)))


def estimate(
    subject: Subject,
    evidence: Evidence,
    *,
    mean: FloatArray | None = None,
    covariance: FloatArray | None = None,
) -> Estimate:
    """Fit the parameters of an aircraft to evidence.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures, as the profile builds them [-]
    evidence : Evidence
        What its handbook and its flights say [-]
    mean : ndarray, shape (p,), optional
        Mean of the prior, where it is not that of the profile (an earlier fit) [-]
    covariance : ndarray, shape (p, p), optional
        Covariance of the prior, likewise [-]

    Returns
    -------
    Estimate
        Parameters, covariance and residuals [-]

    Raises
    ------
    NoSolutionError
        Where the model has no answer for a row of evidence.

    Notes
    -----
    Minimises the squares of the residuals over their deviations plus the squared distance from the
    prior; residuals of many deviations count by the pseudo-Huber loss of `cardgen.fit.loss`.
    """
    prior = prior_mean(subject.aircraft, subject.mixtures) if mean is None else mean
    spread = prior_covariance(subject.mixtures) if covariance is None else covariance
    known = ~np.isnan(evidence.read())
    expected = standard_deviations(evidence)
    _refuse_unanswered(predict_continued(subject, evidence, values=prior), known, evidence)
    found = most_likely(subject, evidence, deviations=expected, mean=prior, covariance=spread)
    _refuse_unanswered(predict(subject, evidence, values=found), known, evidence)
    step = difference_step(subject.mixtures, spread)
    return _described(
        subject, evidence, values=found, prior=prior, spread=spread, step=step, expected=expected
    )


def _refuse_unanswered(
    predicted: FloatArray, known: npt.NDArray[np.bool_], evidence: Evidence
) -> None:
    """Raise where the model cannot say anything about what a row states."""
    dumb = np.any(known & np.isnan(predicted), axis=-1)
    if dumb.any():
        first = evidence.place[int(np.argmax(dumb))]
        raise NoSolutionError(
            f"{first}: the model of this profile has no level flight here "
            f"({int(dumb.sum())} such rows); check the row's rpm, power and altitude, and the "
            "profile's engine, propeller and wing"
        )


def _described(
    subject: Subject,
    evidence: Evidence,
    *,
    values: FloatArray,
    prior: FloatArray,
    spread: FloatArray,
    step: FloatArray,
    expected: FloatArray,
) -> Estimate:
    """Covariance, scatter and leave-one-out residuals at the parameters found."""
    residual = predict(subject, evidence, values=values) - evidence.read()
    # Where a manifold pressure was asked and is within reach, it is no prediction that could fail.
    asked = np.isnan(evidence.power) & (residual[:, 0] == 0.0)
    residual[asked, 0] = np.nan
    known = ~np.isnan(residual)
    plain = np.where(known, residual / expected, 0.0)
    weight = np.where(known, (1.0 + (plain / ROBUST_FROM) ** 2) ** -0.5, 0.0)
    slope = slopes(subject, evidence, values=values, step=step) / expected[..., None]
    weighted = slope * np.sqrt(weight)[..., None]
    information = np.einsum("nqi,nqj->ij", weighted, weighted)
    inverse_spread = np.linalg.inv(spread)
    covariance = np.linalg.inv(information + inverse_spread)
    left_out = np.full_like(residual, np.nan)
    standardised = np.full_like(residual, np.nan)
    for row in range(len(evidence)):  # one small matrix a row; a row is left out whole
        seen = known[row]
        if not seen.any():
            continue
        at = weighted[row, seen]
        leverage = at @ covariance @ at.T
        without = np.linalg.solve(
            np.eye(len(at)) - leverage, (plain[row] * weight[row] ** 0.5)[seen]
        )
        root = weight[row, seen] ** 0.5
        left_out[row, seen] = without / root * expected[row, seen]
        # Deviation of a row not seen: its own and that of the parameters found without it.
        unseen = np.linalg.inv(np.linalg.inv(covariance) - at.T @ at)
        own = np.einsum("qi,ij,qj->q", slope[row, seen], unseen, slope[row, seen])
        standardised[row, seen] = without / root / np.sqrt(1.0 + own)
    scatter = _scatter(residual, evidence, expected)
    # Where the evidence scatters more than was assumed, the parameters are less sure too.
    excess = _excess(plain, known)
    return Estimate(
        names=tuple(parameter.name for parameter in parameters(subject.mixtures)),
        values=values,
        prior=prior,
        covariance=_symmetric(np.linalg.inv(information / excess + inverse_spread)),
        prior_deviation=np.asarray(np.sqrt(np.diag(spread))),
        scatter=scatter,
        residual=residual,
        left_out=left_out,
        standardised=standardised,
    )


def _symmetric(matrix: FloatArray) -> FloatArray:
    """Take the last bits of rounding out of a matrix that is symmetric by its making."""
    return np.asarray(0.5 * (matrix + matrix.T))


def _excess(plain: FloatArray, known: npt.NDArray[np.bool_]) -> float:
    """Variance seen over variance assumed, not below 1, steadied by what was assumed."""
    bent = robust(plain[known])
    return max(1.0, float((SCATTER_WEIGHT + bent @ bent) / (SCATTER_WEIGHT + bent.size)))


def _scatter(residual: FloatArray, evidence: Evidence, expected: FloatArray) -> FloatArray:
    """Deviation, per quantity, of a row from the right model: assumed and seen together."""
    known = ~np.isnan(residual)
    count = known.sum(axis=0)
    assumed = np.array(
        [
            np.mean(expected[known[:, column], column] ** 2) if count[column] else np.nan
            for column in range(len(QUANTITIES))
        ]
    )
    default = np.nanmax(standard_deviations(evidence) ** 2, axis=0)
    assumed = np.where(np.isnan(assumed), default, assumed)
    bent = np.where(known, robust(np.where(known, residual / expected, 0.0)), 0.0) * expected
    seen = np.sum(bent**2, axis=0)
    return np.asarray(np.sqrt((SCATTER_WEIGHT * assumed + seen) / (SCATTER_WEIGHT + count)))
