"""Bracketed root of many independent equations at once."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

#: Compressing the work to the unconverged elements pays once this share has converged.
_COMPRESS_BELOW = 0.7
#: Distance of two guesses below which secant steps stop.
_ARRIVED = 1e-11


def find_root(
    function: Callable[..., FloatArray],
    lower: ArrayLike,
    upper: ArrayLike,
    *,
    arguments: tuple[ArrayLike, ...] | None = None,
    tolerance: float = 1e-12,
    max_iterations: int = 60,
) -> FloatArray:
    """Root of each element of a vectorised function inside its own bracket.

    Parameters
    ----------
    function : callable
        ``function(x)``, or ``function(x, *arguments)`` where arguments are given; works element
        by element and returns an array of the shape of `x` [-]
    lower, upper : array_like
        Ends of the brackets, in either order; they broadcast, and with `arguments` too [-]
    arguments : tuple of array_like, optional
        Further arrays of the equations. With them the function is called only on the elements
        that still move, as one-dimensional arrays; without them always on the whole shape [-]
    tolerance : float
        Greatest distance between the result and the root, absolute [-]
    max_iterations : int
        Evaluations after which a bracket that is still open is given up [-]

    Returns
    -------
    ndarray
        Roots; NaN where the function has the same sign at both ends, is NaN there, becomes NaN on
        the way, or does not close within `max_iterations` [-]

    Notes
    -----
    Inverse quadratic interpolation where it is safe, bisection where it is not.

    References
    ----------
    T. R. Chandrupatla, "A new hybrid quadratic/bisection algorithm for finding the zero of a
    nonlinear function without using derivatives", Advances in Engineering Software 28 (1997),
    pp. 145-149.
    """
    ends = [np.asarray(end, dtype=np.float64) for end in (upper, lower)]
    extra = [np.asarray(argument) for argument in arguments or ()]
    shape = np.broadcast_shapes(*(item.shape for item in (*ends, *extra)))
    a, b, *flat = (np.broadcast_to(item, shape).reshape(-1) for item in (*ends, *extra))
    root = np.full(a.shape, np.nan)

    def evaluate(x: FloatArray, rest: list[FloatArray]) -> FloatArray:
        if arguments is None:
            return np.asarray(function(x.reshape(shape)), dtype=np.float64).reshape(-1)
        return function(x, *rest)

    f_a, f_b = evaluate(a, flat), evaluate(b, flat)
    root[f_a == 0.0] = a[f_a == 0.0]
    root[f_b == 0.0] = b[f_b == 0.0]
    moving = np.sign(f_a) * np.sign(f_b) < 0.0  # NaN compares false
    where = np.arange(root.size)
    step = np.full(a.shape, 0.5)
    for _ in range(max_iterations):
        if arguments is not None and moving.sum() < _COMPRESS_BELOW * moving.size:
            a, b, f_a, f_b, step, where, *flat = (
                item[moving] for item in (a, b, f_a, f_b, step, where, *flat)
            )
            moving = np.ones(where.shape, dtype=np.bool_)
        if not moving.any():
            break
        x = a + step * (b - a)
        f_x = evaluate(x, flat)
        same = (f_x > 0.0) == (f_a > 0.0)
        c, f_c = np.where(same, a, b), np.where(same, f_a, f_b)
        b, f_b = np.where(same, b, a), np.where(same, f_b, f_a)
        a, f_a = x, f_x
        width = np.abs(b - a)
        closed = moving & ((width < tolerance) | (f_a == 0.0) | (f_b == 0.0))
        best = np.where(np.abs(f_a) < np.abs(f_b), a, b)
        root[where[closed]] = best[closed]
        moving &= ~closed & ~np.isnan(f_x)
        edge = 0.5 * tolerance / np.maximum(width, tolerance)
        step = np.clip(_share((a, b, c), (f_a, f_b, f_c)), edge, 1.0 - edge)
    return root.reshape(shape)


def _share(points: tuple[FloatArray, ...], values: tuple[FloatArray, ...]) -> FloatArray:
    """Share of the way from the newest point to the other end at which to look next."""
    (a, b, c), (f_a, f_b, f_c) = points, values
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        xi = (a - b) / (c - b)
        phi = (f_a - f_b) / (f_c - f_b)
        safe = (phi * phi < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
        share = f_a / (f_b - f_a) * f_c / (f_b - f_c)
        share += (c - a) / (b - a) * f_a / (f_c - f_a) * f_b / (f_c - f_b)
    return np.where(safe & np.isfinite(share), share, 0.5)


def secant_steps(
    function: Callable[[FloatArray], FloatArray],
    first: FloatArray,
    second: FloatArray,
    *,
    lower: FloatArray,
    upper: FloatArray,
    steps: int,
) -> tuple[FloatArray, FloatArray]:
    """Improve guesses of roots, without any promise that they settle.

    Parameters
    ----------
    function : callable
        Works element by element on arrays of the shape of `first` [-]
    first, second : ndarray
        Two guesses of each root, the better one first [-]
    lower, upper : ndarray
        Ends of the brackets, in either order, that no step leaves [-]
    steps : int
        Steps, each one evaluation [-]

    Returns
    -------
    root : ndarray
        Guesses after the last step [-]
    step : ndarray
        Size of the last step; as steps shrink ever faster, the error left is far smaller [-]

    Notes
    -----
    Some half of the evaluations of `find_root`, which has to close its brackets. The caller takes
    that one where the last step is not small.
    """
    low, high = np.minimum(lower, upper), np.maximum(lower, upper)
    a, b = second, first
    f_a, f_b = function(a), function(b)
    step = b - a
    for taken in range(steps):
        # Closer together two guesses tell rounding from slope no more: they have arrived.
        apart = np.abs(step) > _ARRIVED
        slope = np.where(apart, (f_b - f_a) / np.where(apart, step, 1.0), np.inf)
        with np.errstate(divide="ignore", invalid="ignore"):
            moved = b - f_b / slope
        a, f_a = b, f_b
        b = np.clip(moved, low, high)
        step = b - a
        if taken < steps - 1:
            f_b = function(b)
    return b, np.abs(step)
