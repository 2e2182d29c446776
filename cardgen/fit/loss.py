"""The loss of a residual: its square near the middle, its size far out.

References
----------
.. [1] P. J. Huber, E. M. Ronchetti, Robust Statistics, Wiley 2009, chapter 7.
.. [2] P. Charbonnier, L. Blanc-Féraud, G. Aubert, M. Barlaud, "Deterministic edge-preserving
   regularization in computed imaging", IEEE Transactions on Image Processing 6 (1997) 298-311:
   the smooth form used here.
"""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

ROBUST_FROM: Final = 2.0
"""Residual, in standard deviations, beyond which it pulls less than its square [-]."""


def robust(residual: FloatArray) -> FloatArray:
    """Residual whose square is twice the pseudo-Huber loss.

    Parameters
    ----------
    residual : ndarray
        Residuals in standard deviations [-]

    Returns
    -------
    ndarray
        With the sign of the residual [-]

    Notes
    -----
    ``2 d² (√(1 + (r/d)²) - 1)`` is its square, with d = `ROBUST_FROM`.
    """
    scaled = (residual / ROBUST_FROM) ** 2
    return np.asarray(
        np.sign(residual) * ROBUST_FROM * np.sqrt(2.0 * scaled / (np.sqrt(1.0 + scaled) + 1.0))
    )


def robust_slope(residual: FloatArray) -> FloatArray:
    """Derivative of `robust`.

    Parameters
    ----------
    residual : ndarray
        Residuals in standard deviations [-]

    Returns
    -------
    ndarray
        Change of the robust residual per residual [-]
    """
    root = np.sqrt(1.0 + (residual / ROBUST_FROM) ** 2)
    return np.asarray(np.sqrt(0.5 * (root + 1.0)) / root)
