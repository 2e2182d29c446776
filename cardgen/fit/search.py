"""The search for the most likely parameters.

This is the only module that imports scipy, and it does so when it is called.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.engine import Mixture
from cardgen.fit.evidence import Evidence
from cardgen.fit.loss import robust, robust_slope
from cardgen.fit.model import Subject, predict_continued, slopes
from cardgen.fit.parameters import parameters

FloatArray = npt.NDArray[np.float64]

_STEP: Final = 1e-3  # of a prior deviation, for central differences
_BLUNT: Final = 10.0  # deviations of the evidence, over the real ones, on the way
_FINE: Final = 1e-10
_COARSE: Final = 1e-3


def difference_step(mixtures: Sequence[Mixture], covariance: FloatArray) -> FloatArray:
    """Half the distance of central differences in each parameter.

    Parameters
    ----------
    mixtures : sequence of Mixture
        The mixtures of the profile [-]
    covariance : ndarray, shape (p, p)
        Covariance of the prior [-]

    Returns
    -------
    ndarray, shape (p,)
        A thousandth of a deviation, within the bounds [-]
    """
    lower, upper = _bounds(mixtures)
    return np.minimum(_STEP * np.sqrt(np.diag(covariance)), 0.25 * (upper - lower))


def _bounds(mixtures: Sequence[Mixture]) -> tuple[FloatArray, FloatArray]:
    """Bounds of the parameters."""
    listed = parameters(mixtures)
    lower = np.array([parameter.lower for parameter in listed])
    return lower, np.array([parameter.upper for parameter in listed])


def within_bounds(mixtures: Sequence[Mixture], values: FloatArray) -> FloatArray:
    """Parameters moved to where they have a physical meaning.

    Parameters
    ----------
    mixtures : sequence of Mixture
        The mixtures of the profile [-]
    values : ndarray, shape (p,)
        Parameters [-]

    Returns
    -------
    ndarray, shape (p,)
        The nearest that are inside their bounds [-]
    """
    lower, upper = _bounds(mixtures)
    return np.asarray(np.clip(values, lower + 1e-9, upper - 1e-9))


def most_likely(
    subject: Subject,
    evidence: Evidence,
    *,
    deviations: FloatArray,
    mean: FloatArray,
    covariance: FloatArray,
    near: FloatArray | None = None,
) -> FloatArray:
    """Parameters that explain evidence best without straying far from the prior.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures, as the profile builds them [-]
    evidence : Evidence
        What is to be explained [-]
    deviations : ndarray, shape (rows, 3)
        Standard deviation of everything read [SI]
    mean : ndarray, shape (p,)
        Mean of the prior [-]
    covariance : ndarray, shape (p, p)
        Its covariance [-]
    near : ndarray, shape (p,), optional
        Parameters close by, from where a coarse search is enough; the prior and a fine search
        without them [-]

    Returns
    -------
    ndarray, shape (p,)
        Parameters, within their bounds [-]

    Notes
    -----
    The robust loss is flat far from its middle and a search would stop there: it is approached
    with evidence that is taken for less exact, which the squares near its middle still see.
    """
    from scipy.optimize import least_squares  # noqa: PLC0415 - slow to import, needed only here

    lower, upper = _bounds(subject.mixtures)
    whiten = np.linalg.inv(np.linalg.cholesky(covariance))
    step = difference_step(subject.mixtures, covariance)
    read = evidence.read()
    known = ~np.isnan(read)

    def improved(start: FloatArray, *, allowed: FloatArray, tolerance: float) -> FloatArray:
        def errors(values: FloatArray) -> FloatArray:
            said = predict_continued(subject, evidence, values=values)
            return np.asarray(((said - read) / allowed)[known])

        def residuals(values: FloatArray) -> FloatArray:
            return np.concatenate([robust(errors(values)), whiten @ (values - mean)])

        def jacobian(values: FloatArray) -> FloatArray:
            slope = slopes(subject, evidence, values=values, step=step) / allowed[..., None]
            bend = robust_slope(errors(values))
            return np.concatenate([bend[:, None] * slope[known], whiten])

        found = least_squares(
            residuals,
            within_bounds(subject.mixtures, start),
            jac=jacobian,
            bounds=(lower, upper),
            x_scale=np.sqrt(np.diag(covariance)),
            xtol=tolerance,
            ftol=tolerance,
        )
        return np.asarray(found.x)

    if near is not None:
        return improved(near, allowed=deviations, tolerance=_COARSE)
    close = improved(mean, allowed=_BLUNT * deviations, tolerance=_COARSE)
    return improved(close, allowed=deviations, tolerance=_FINE)
