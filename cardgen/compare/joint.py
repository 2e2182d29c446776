"""What two aircraft have in common, so that it does not count twice in their difference."""

from __future__ import annotations

from collections.abc import Collection, Sequence

import numpy as np
import numpy.typing as npt

from cardgen.fit import PARTS, Knowledge, Parameter, Part
from cardgen.records import dataclass

FloatArray = npt.NDArray[np.float64]

_SAME = 1e-9  # of a value or a variance; what a fit file keeps of a number is far closer


@dataclass(frozen=True, slots=True)
class Shifts:
    """One-deviation shifts of two sets of parameters, together along each independent axis.

    Parameters
    ----------
    old : ndarray, shape (k, p)
        Shifts of the parameters of the older aircraft [-]
    new : ndarray, shape (k, q)
        Shifts of those of the newer one, along the same axes [-]
    """

    old: FloatArray
    new: FloatArray


def common_names(
    old: Knowledge, new: Knowledge, *, listed: Sequence[Parameter], unchanged: Collection[Part]
) -> tuple[str, ...]:
    """Return the parameters that are one and the same number in two aircraft.

    Parameters
    ----------
    old, new : Knowledge
        What is known of either [-]
    listed : sequence of Parameter
        Parameters of the newer aircraft [-]
    unchanged : collection of str
        Parts that are the same in both [-]

    Returns
    -------
    tuple of str
        Names, whole parts at a time [-]

    Notes
    -----
    A part counts as common where it is unchanged and both know the same of it. Where one of them
    was fitted since, how its error hangs together with that of the other is not recorded; taking
    them as independent makes the tolerance of the difference too wide rather than too narrow.
    """
    names: tuple[str, ...] = ()
    for part in PARTS:
        if part not in unchanged:
            continue
        known = [item.name for item in listed if item.part == part and item.name in old.names]
        trial = (*names, *known)
        if _same(old, new, trial):
            names = trial
    return names


def _same(old: Knowledge, new: Knowledge, names: Sequence[str]) -> bool:
    """Whether two fits say the same of some parameters."""
    here, there = _places(old, names), _places(new, names)
    deviation = np.sqrt(np.diag(old.covariance))[here]
    return bool(
        np.allclose(old.values[here], new.values[there], rtol=_SAME, atol=_SAME)
        and np.allclose(
            old.covariance[np.ix_(here, here)] / np.outer(deviation, deviation),
            new.covariance[np.ix_(there, there)] / np.outer(deviation, deviation),
            rtol=0.0,
            atol=_SAME,
        )
    )


def _places(knowledge: Knowledge, names: Sequence[str]) -> npt.NDArray[np.intp]:
    """Places of parameters."""
    return np.array([knowledge.names.index(name) for name in names], dtype=np.intp)


def shifts(old: Knowledge, new: Knowledge, *, common: Sequence[str]) -> Shifts:
    """Return the shifts along which the parameters of two aircraft may be off.

    Parameters
    ----------
    old, new : Knowledge
        What is known of either [-]
    common : sequence of str
        Parameters that are one and the same number in both [-]

    Returns
    -------
    Shifts
        The joint covariance is the sum of their outer products [-]

    Notes
    -----
    Given the common parameters, what is known of a part of the old aircraft and what is known of a
    part of the new one are independent. So with o, s, n for old, common and new
    cov(o, n) = cov(o, s) cov(s, s)⁻¹ cov(s, n), and the joint covariance stays positive.
    """
    shared_old, shared_new = _places(old, common), _places(new, common)
    own = np.setdiff1d(np.arange(len(new.names)), shared_new)
    size = len(old.names)
    joint = np.zeros((size + own.size, size + own.size))
    joint[:size, :size] = old.covariance
    joint[size:, size:] = new.covariance[np.ix_(own, own)]
    if len(common):
        within = old.covariance[np.ix_(shared_old, shared_old)]
        to_new = new.covariance[np.ix_(shared_new, own)]
        cross = old.covariance[:, shared_old] @ np.linalg.solve(within, to_new)
        joint[:size, size:] = cross
        joint[size:, :size] = cross.T
    # Parameters differ in size by orders of magnitude: axes are found of their correlation.
    deviation = np.sqrt(np.diag(joint))
    power, axes = np.linalg.eigh(joint / np.outer(deviation, deviation))
    along = (axes * np.sqrt(np.maximum(power, 0.0))).T * deviation
    moved_new = np.empty((len(along), len(new.names)))
    moved_new[:, shared_new] = along[:, shared_old]
    moved_new[:, own] = along[:, size:]
    return Shifts(along[:, :size], moved_new)
