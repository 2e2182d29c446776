"""Curves through given points: straight, monotone cubic, and uniform cubic splines."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cardgen.records import dataclass

FloatArray = NDArray[np.float64]

#: Places evaluated at once: few enough that every temporary stays in the processor's cache.
_CHUNK = 4096
#: Places up to which one array of all terms of a spline is faster than one term after the other.
_FEW = 400

#: Weights of the four coefficients of one variable.
Weights = tuple[FloatArray, FloatArray, FloatArray, FloatArray]


def _checked(x: tuple[float, ...], y: tuple[float, ...]) -> None:
    """Refuse points that make no curve."""
    if len(x) != len(y) or len(x) < 2:
        raise ValueError("a curve needs at least two points, with as many x as y")
    if not all(a < b for a, b in pairwise(x)):
        raise ValueError("the x values of a curve must increase")


@dataclass(frozen=True, slots=True)
class LinearCurve:
    """Straight lines between points.

    Parameters
    ----------
    x, y : tuple of float
        Points, x increasing [-]
    """

    x: tuple[float, ...]
    y: tuple[float, ...]

    def __post_init__(self) -> None:
        """Check the points."""
        _checked(self.x, self.y)

    def __call__(self, at: ArrayLike) -> FloatArray:
        """Value at a place.

        Parameters
        ----------
        at : array_like
            Where to read the curve [-]

        Returns
        -------
        ndarray
            Values, NaN outside the first and last point [-]
        """
        place = np.asarray(at, dtype=np.float64)
        return np.asarray(np.interp(place, self.x, self.y, left=np.nan, right=np.nan))


@dataclass(frozen=True, slots=True)
class MonotoneCurve:
    """Smooth curve that rises and falls only where its points do.

    Parameters
    ----------
    x, y : tuple of float
        Points, x increasing [-]

    Notes
    -----
    Piecewise cubic Hermite polynomials. Inner slopes are Brodlie's weighted harmonic means of
    the neighbouring secants (zero at an extreme of the data); end slopes are the three-point ones,
    limited so that the first and last piece keep the data's direction.

    References
    ----------
    F. N. Fritsch, R. E. Carlson, "Monotone piecewise cubic interpolation", SIAM Journal on
    Numerical Analysis 17 (1980), pp. 238-246.
    F. N. Fritsch, J. Butland, "A method for constructing local monotone piecewise cubic
    interpolants", SIAM Journal on Scientific and Statistical Computing 5 (1984), pp. 300-304.
    """

    x: tuple[float, ...]
    y: tuple[float, ...]

    def __post_init__(self) -> None:
        """Check the points."""
        _checked(self.x, self.y)

    def __call__(self, at: ArrayLike) -> FloatArray:
        """Value at a place.

        Parameters
        ----------
        at : array_like
            Where to read the curve [-]

        Returns
        -------
        ndarray
            Values, NaN outside the first and last point [-]
        """
        x, y, slope = _hermite(self.x, self.y)
        place = np.asarray(at, dtype=np.float64)
        inside = (place >= x[0]) & (place <= x[-1])
        k = np.clip(np.searchsorted(x, place, side="right") - 1, 0, x.size - 2)
        width = x[k + 1] - x[k]
        t = (place - x[k]) / width
        u = 1.0 - t
        value = u * u * ((1.0 + 2.0 * t) * y[k] + t * width * slope[k]) + t * t * (
            (3.0 - 2.0 * t) * y[k + 1] - u * width * slope[k + 1]
        )
        return np.where(inside, value, np.nan)


@lru_cache(maxsize=256)
def _hermite(
    x: tuple[float, ...], y: tuple[float, ...]
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Points as arrays, and the slopes at them."""
    xs, ys = np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)
    h = np.diff(xs)
    secant = np.diff(ys) / h
    slope = np.empty_like(xs)
    if xs.size == 2:
        slope[:] = secant[0]
        return xs, ys, slope
    first, second = secant[:-1], secant[1:]
    w1, w2 = 2.0 * h[1:] + h[:-1], h[1:] + 2.0 * h[:-1]
    turning = first * second <= 0.0
    safe_first, safe_second = np.where(turning, 1.0, first), np.where(turning, 1.0, second)
    slope[1:-1] = np.where(turning, 0.0, (w1 + w2) / (w1 / safe_first + w2 / safe_second))
    slope[0] = _end_slope(h[0], h[1], secant[0], secant[1])
    slope[-1] = _end_slope(h[-1], h[-2], secant[-1], secant[-2])
    return xs, ys, slope


def _end_slope(h_near: float, h_far: float, near: float, far: float) -> float:
    """Three-point slope at an end, limited so that the piece stays monotone."""
    slope = ((2.0 * h_near + h_far) * near - h_near * far) / (h_near + h_far)
    if slope * near <= 0.0:
        return 0.0
    if near * far <= 0.0 and abs(slope) > 3.0 * abs(near):
        return 3.0 * near
    return float(slope)


def spline_coefficients(values: FloatArray, *, axis: int) -> FloatArray:
    """Coefficients of the cubic B-spline through equally spaced values.

    Parameters
    ----------
    values : ndarray
        Values at the nodes, at least four along `axis` [-]
    axis : int
        Axis along which to interpolate [-]

    Returns
    -------
    ndarray
        Coefficients, two more than values along `axis` [-]

    Notes
    -----
    On the cell from node i to i + 1 the spline is the sum over m = 0..3 of coefficient i + m times
    ``spline_weights(t)[m]``. The third derivative is continuous at the second node from either
    end ("not a knot"), so that a cubic polynomial is reproduced exactly.

    References
    ----------
    C. de Boor, A Practical Guide to Splines, chapter IV (end conditions) and IX.
    """
    moved = np.moveaxis(np.asarray(values, dtype=np.float64), axis, 0)
    inverse = _spline_inverse(moved.shape[0])
    return np.moveaxis(np.tensordot(inverse, moved, axes=(1, 0)), 0, axis)


@lru_cache(maxsize=32)
def _spline_inverse(count: int) -> FloatArray:
    """Matrix that turns node values into B-spline coefficients."""
    if count < 4:
        raise ValueError("a cubic spline without other conditions needs at least four nodes")
    matrix = np.zeros((count + 2, count + 2))
    ends = np.array([1.0, -4.0, 6.0, -4.0, 1.0])
    matrix[0, :5] = ends
    matrix[-1, -5:] = ends
    for row in range(1, count + 1):
        matrix[row, row - 1 : row + 2] = (1.0 / 6.0, 4.0 / 6.0, 1.0 / 6.0)
    inverse: FloatArray = np.linalg.inv(matrix)[:, 1:-1].astype(np.float64)
    inverse.setflags(write=False)
    return inverse


def spline_weights(t: FloatArray) -> Weights:
    """Values of the four cubic B-splines that cover a cell.

    Parameters
    ----------
    t : ndarray
        Place in the cell, 0 at its lower and 1 at its upper node [-]

    Returns
    -------
    tuple of ndarray
        Weights of the four coefficients, which add up to 1 [-]
    """
    u = 1.0 - t
    t2, u2 = t * t, u * u
    w0 = u2 * u * (1.0 / 6.0)
    w3 = t2 * t * (1.0 / 6.0)
    w1 = 2.0 / 3.0 - t2 * (1.0 - 0.5 * t)
    w2 = 1.0 - w0 - w1 - w3
    return w0, w1, w2, w3


@dataclass(frozen=True, slots=True, eq=False)
class SplineGrid:
    """Cubic splines in three variables through values on a regular grid.

    Build it with `SplineGrid.through`.

    Parameters
    ----------
    lower, upper : tuple of float
        First and last node of each of the three variables [-]
    size : tuple of int
        Cells along each variable [-]
    tables : tuple of ndarray
        Spline coefficients of each output, flattened, last variable fastest [-]
    """

    lower: tuple[float, float, float]
    upper: tuple[float, float, float]
    size: tuple[int, int, int]
    tables: tuple[FloatArray, ...]

    @classmethod
    def through(
        cls,
        values: FloatArray,
        *,
        lower: tuple[float, float, float],
        upper: tuple[float, float, float],
    ) -> SplineGrid:
        """Splines through values at equally spaced nodes.

        Parameters
        ----------
        values : ndarray
            Shape (outputs, n0, n1, n2), every n at least 4 [-]
        lower, upper : tuple of float
            First and last node of each variable [-]

        Returns
        -------
        SplineGrid
            One spline per output.
        """
        coefficients = np.asarray(values, dtype=np.float64)
        for axis in (1, 2, 3):
            coefficients = spline_coefficients(coefficients, axis=axis)
        _, n0, n1, n2 = values.shape
        tables = tuple(np.ascontiguousarray(one).reshape(-1) for one in coefficients)
        return cls(lower, upper, (n0 - 1, n1 - 1, n2 - 1), tables)

    def values(
        self, at: tuple[ArrayLike, ArrayLike, ArrayLike], outputs: tuple[int, ...]
    ) -> tuple[FloatArray, ...]:
        """Outputs at given places.

        Parameters
        ----------
        at : tuple of array_like
            The three variables; they broadcast [-]
        outputs : tuple of int
            Numbers of the outputs wanted [-]

        Returns
        -------
        tuple of ndarray
            One array per output, NaN outside the grid [-]
        """
        x, y, z = np.broadcast_arrays(*(np.asarray(v, dtype=np.float64) for v in at))
        shape = x.shape
        x, y, z = x.reshape(-1), y.reshape(-1), z.reshape(-1)
        result = np.empty((len(outputs), x.size))
        for start in range(0, x.size, _CHUNK):
            part = slice(start, start + _CHUNK)
            self._chunk((x[part], y[part], z[part]), outputs, result[:, part])
        return tuple(row.reshape(shape) for row in result)

    def _chunk(
        self, at: tuple[FloatArray, ...], outputs: tuple[int, ...], result: FloatArray
    ) -> None:
        """Evaluate so few places that every temporary stays in the processor's cache."""
        base = np.zeros(at[0].shape, dtype=np.intp)
        outside = np.zeros(at[0].shape, dtype=np.bool_)
        weights = []
        for value, low, high, cells in zip(at, self.lower, self.upper, self.size, strict=True):
            place = (value - low) * (cells / (high - low))
            slack = cells * 1e-12
            beyond = ~((place >= -slack) & (place <= cells + slack))
            outside |= beyond
            np.copyto(place, 0.0, where=beyond)
            cell = np.minimum(place.astype(np.intp), cells - 1)
            place -= cell
            base *= cells + 3
            base += cell
            weights.append(spline_weights(place))
        add_up = self._together if base.size <= _FEW else self._one_by_one
        for number, output in enumerate(outputs):
            total = add_up(self.tables[output], base, weights)
            total[outside] = np.nan
            result[number] = total

    def _together(
        self, table: FloatArray, base: NDArray[np.intp], weights: Sequence[Weights]
    ) -> FloatArray:
        """Add up all 64 terms in one array: fewest calls, for few places."""
        first, second, third = (np.stack(weight) for weight in weights)
        terms = table[base + self._offsets().reshape(4, 4, 4, 1)]
        terms *= third
        plane = terms.sum(axis=2)
        plane *= second
        line = plane.sum(axis=1)
        line *= first
        total: FloatArray = line.sum(axis=0)
        return total

    def _one_by_one(
        self, table: FloatArray, base: NDArray[np.intp], weights: Sequence[Weights]
    ) -> FloatArray:
        """Add up term by term: least memory, for many places."""
        index, offsets = np.empty_like(base), self._offsets()
        term, line = np.empty(base.shape), np.empty(base.shape)
        total = np.zeros(base.shape)
        for first, weight_first in enumerate(weights[0]):
            plane = np.zeros(base.shape)
            for second, weight_second in enumerate(weights[1]):
                for third, weight_third in enumerate(weights[2]):
                    np.add(base, offsets[first, second, third], out=index)
                    into = line if third == 0 else term
                    np.take(table, index, out=into, mode="clip")
                    into *= weight_third
                    if third:
                        line += term
                line *= weight_second
                plane += line
            plane *= weight_first
            total += plane
        return total

    def _offsets(self) -> NDArray[np.intp]:
        """Places of the 64 coefficients of a cell after its first, by variable."""
        m = np.arange(4)
        along = self.size[2] + 3
        across = (self.size[1] + 3) * along
        return m[:, None, None] * across + m[:, None] * along + m
