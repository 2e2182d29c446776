"""95 % tolerances of computed numbers, from the covariance of the parameters."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.aircraft import Aircraft
from cardgen.engine import Mixture
from cardgen.fit.model import Subject
from cardgen.fit.parameters import applied

FloatArray = npt.NDArray[np.float64]

COVERAGE_FACTOR: Final = 1.959963984540054
"""Half width of the interval that holds 95 % of a normal distribution, in deviations [-]."""

Outputs = Callable[[Aircraft, tuple[Mixture, ...]], FloatArray]


def tolerances(
    subject: Subject,
    outputs: Outputs,
    *,
    values: FloatArray,
    covariance: FloatArray,
    scatter: FloatArray,
) -> FloatArray:
    """95 % tolerance of anything that is computed from the aircraft.

    Parameters
    ----------
    subject : Subject
        The aircraft and mixtures as the profile builds them [-]
    outputs : callable
        Given an aircraft whose numbers have shape (k, 1) and its mixtures, returns an array of
        shape (k, n, q): q quantities at n points [SI]
    values : ndarray, shape (p,)
        Parameters [-]
    covariance : ndarray, shape (p, p)
        Their covariance [-]
    scatter : ndarray, shape (q,) or (n, q)
        Deviation of each quantity besides the parameters [SI]

    Returns
    -------
    ndarray, shape (n, q)
        Half widths; NaN where a quantity has no answer [SI]

    Notes
    -----
    Central differences of one deviation along each axis of the covariance (its eigenvectors), which
    follow the curvature of the model better than derivatives at the middle.
    """
    power, axes = np.linalg.eigh(covariance)
    shift = (axes * np.sqrt(np.maximum(power, 0.0))).T
    both = outputs(
        *applied(
            subject.aircraft,
            subject.mixtures,
            values=np.concatenate([values + shift, values - shift]),
        )
    )
    count = len(shift)
    change = 0.5 * (both[:count] - both[count:])
    # Where a shifted aircraft has no answer that axis says nothing; where the middle has none,
    # the caller's own NaN stands.
    variance = np.nansum(change**2, axis=0) + scatter**2
    return np.asarray(COVERAGE_FACTOR * np.sqrt(variance))
