"""Curves and splines against scipy's and against the polynomials they must reproduce."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.interpolate import CubicSpline, PchipInterpolator

from cardgen.curves import LinearCurve, MonotoneCurve, SplineGrid, spline_coefficients

POINTS_X = (0.0, 1.0, 1.5, 4.0, 4.2, 7.0)
POINTS_Y = (1.0, 3.0, 3.0, -1.0, -1.5, 6.0)


def test_linear_curve_is_numpy_interp_inside_and_nan_outside() -> None:
    """A table stops where its points stop."""
    curve = LinearCurve(POINTS_X, POINTS_Y)
    at = np.linspace(0.0, 7.0, 101)
    np.testing.assert_array_equal(curve(at), np.interp(at, POINTS_X, POINTS_Y))
    assert np.isnan(curve([-1e-9, 7.0 + 1e-9, np.nan])).all()


def test_monotone_curve_agrees_with_scipy_pchip() -> None:
    """scipy.interpolate.PchipInterpolator is the same method, written by others."""
    at = np.linspace(0.0, 7.0, 501)
    ours = MonotoneCurve(POINTS_X, POINTS_Y)(at)
    np.testing.assert_allclose(ours, PchipInterpolator(POINTS_X, POINTS_Y)(at), atol=1e-13)


def test_monotone_curve_is_nan_outside_and_straight_between_two_points() -> None:
    """Two points make a line; beyond them there is nothing."""
    curve = MonotoneCurve((1.0, 3.0), (2.0, 8.0))
    np.testing.assert_allclose(curve([1.0, 2.0, 3.0]), [2.0, 5.0, 8.0])
    assert np.isnan(curve([0.999, 3.001])).all()


@given(st.lists(st.floats(0.01, 10.0), min_size=3, max_size=12))
def test_monotone_curve_never_falls_between_rising_points(rises: list[float]) -> None:
    """A rising table gives a rising curve."""
    y = tuple(np.cumsum(rises).tolist())
    x = tuple(float(i) for i in range(len(y)))
    values = MonotoneCurve(x, y)(np.linspace(0.0, x[-1], 400))
    assert np.diff(values).min() > -1e-12 * y[-1]


def test_scalar_reading_equals_array_element() -> None:
    """One place alone reads as it does in company."""
    curve = MonotoneCurve(POINTS_X, POINTS_Y)
    at = np.array([[0.3, 2.0], [4.1, 6.9]])
    assert curve(at).shape == (2, 2)
    assert float(curve(4.1)) == curve(at)[1, 0]


@pytest.mark.parametrize(
    ("x", "y"), [((0.0, 0.0), (1.0, 2.0)), ((1.0, 0.0), (1.0, 2.0)), ((0.0,), (1.0,))]
)
def test_points_that_make_no_curve_are_refused(x: tuple, y: tuple) -> None:
    """Repeated, falling or lone x values are a mistake in the data."""
    with pytest.raises(ValueError, match="curve"):
        LinearCurve(x, y)
    with pytest.raises(ValueError, match="curve"):
        MonotoneCurve(x, y)


def test_spline_agrees_with_scipy_not_a_knot_spline() -> None:
    """In each variable the grid spline is scipy.interpolate.CubicSpline, bc_type not-a-knot."""
    rng = np.random.default_rng(0)
    x, y, z = np.linspace(1.0, 3.0, 9), np.linspace(-1.0, 1.0, 7), np.linspace(0.0, 5.0, 6)
    values = rng.normal(size=(2, 9, 7, 6))
    grid = SplineGrid.through(values, lower=(1.0, -1.0, 0.0), upper=(3.0, 1.0, 5.0))
    at = (2.345, 0.123, 4.56)
    expected = CubicSpline(x, values, axis=1)(at[0])
    expected = CubicSpline(y, expected, axis=1)(at[1])
    expected = CubicSpline(z, expected, axis=1)(at[2])
    np.testing.assert_allclose(grid.values(at, (0, 1)), expected, rtol=1e-12)
    (second,) = grid.values(at, (1,))
    np.testing.assert_allclose(second, expected[1], rtol=1e-12)


def test_spline_reproduces_a_cubic_polynomial_up_to_the_edges() -> None:
    """A cubic is its own spline, the first and last cell included."""

    def cubic(x, y, z):
        return (x**3 - x) * (1.0 + y * y) * (2.0 - z**3)

    x, y, z = (np.linspace(0.0, 2.0, n) for n in (5, 6, 4))
    nodes = cubic(x[:, None, None], y[None, :, None], z[None, None, :])[None]
    grid = SplineGrid.through(nodes, lower=(0.0, 0.0, 0.0), upper=(2.0, 2.0, 2.0))
    at = np.random.default_rng(1).uniform(0.0, 2.0, (3, 5000))
    at[:, 0], at[:, 1] = 0.0, 2.0
    (values,) = grid.values(tuple(at), (0,))
    np.testing.assert_allclose(values, cubic(*at), atol=1e-11)


def test_spline_is_nan_outside_in_every_variable_and_for_nan() -> None:
    """No extrapolation, in no direction."""
    grid = SplineGrid.through(np.ones((1, 4, 4, 4)), lower=(0.0,) * 3, upper=(1.0,) * 3)
    for axis in range(3):
        for bad in (-1e-6, 1.0 + 1e-6, np.nan, np.inf, -np.inf):
            at = [np.array(0.5)] * 3
            at[axis] = np.array(bad)
            assert np.isnan(grid.values(tuple(at), (0,))[0])
    assert grid.values((0.5, 0.5, 0.5), (0,))[0] == pytest.approx(1.0)


def test_spline_needs_four_nodes() -> None:
    """Three values do not make a cubic."""
    with pytest.raises(ValueError, match="four"):
        spline_coefficients(np.ones(3), axis=0)
