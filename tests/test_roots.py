"""The bracketed root finder against scipy's and against closed forms."""

import numpy as np
import pytest
from scipy.optimize import brentq

from cardgen.roots import find_root, secant_steps


def test_roots_of_many_equations_agree_with_scipy_brentq() -> None:
    """Each element has its own equation and its own bracket."""
    target = np.linspace(0.1, 30.0, 200)
    ours = find_root(lambda x, y: x**3 + x - y, 0.0, 5.0, arguments=(target,))
    theirs = [brentq(lambda x, y=y: x**3 + x - y, 0.0, 5.0, xtol=1e-13) for y in target]
    np.testing.assert_allclose(ours, theirs, rtol=0.0, atol=1e-11)


@pytest.mark.parametrize(
    "function",
    [
        lambda x: np.cos(x) - x,
        lambda x: np.exp(-20.0 * x) - 1e-6,
        lambda x: (x - 0.3) ** 9,
        lambda x: np.sign(x - 0.7),
        lambda x: np.arctan(1e4 * (x - 0.2)),
    ],
)
def test_hard_shapes_close_to_the_tolerance(function) -> None:
    """Flat, steep, multiple and jumping functions all end within the tolerance of scipy's root."""
    ours = find_root(function, 0.0, 1.0, tolerance=1e-12)
    theirs = brentq(function, 0.0, 1.0, xtol=1e-14, rtol=1e-14, maxiter=500)
    # The ninth power is zero in floating point within 1e-36 of a value, so x within 1e-4 of 0.3.
    atol = 1e-3 if function(np.array(0.3)) == 0.0 and function(np.array(0.3001)) < 1e-30 else 1e-11
    assert abs(float(ours) - theirs) < atol


def test_no_sign_change_gives_nan_and_leaves_the_others_alone() -> None:
    """A bracket without a root is a result, not an exception."""
    shift = np.array([[0.5, 2.0], [-3.0, 0.25]])
    root = find_root(lambda x, s: x - s, 0.0, 1.0, arguments=(shift,))
    np.testing.assert_allclose(root, [[0.5, np.nan], [np.nan, 0.25]])


def test_nan_in_the_function_gives_nan() -> None:
    """A function outside its domain has no root there."""
    level = np.array([0.5, np.nan])
    np.testing.assert_allclose(find_root(lambda x: x - level, np.zeros(2), np.ones(2)), level)


def test_root_at_an_end_of_the_bracket_is_found() -> None:
    """An end where the function is exactly zero is the root, whatever the sign elsewhere."""
    lower = np.array([0.0, -1.0, 0.0])
    upper = np.array([1.0, 0.0, 0.0])
    np.testing.assert_array_equal(find_root(lambda x: x, lower, upper), [0.0, 0.0, 0.0])
    np.testing.assert_array_equal(find_root(lambda x: -x * (x + 2.0), 0.0, 1.0), 0.0)


def test_brackets_may_be_given_in_either_order() -> None:
    """The larger end may come first."""
    np.testing.assert_allclose(find_root(lambda x: x - 0.3, 1.0, 0.0), 0.3, atol=1e-12)


def test_shapes_broadcast_and_scalars_equal_array_elements() -> None:
    """One equation alone ends where it ends in company."""
    target = np.array([[1.0], [2.0], [7.0]])
    power = np.array([2.0, 3.0])
    together = find_root(lambda x, y, n: x**n - y, 0.0, 9.0, arguments=(target, power))
    assert together.shape == (3, 2)
    for i in range(3):
        for k in range(2):
            alone = find_root(
                lambda x, y, n: x**n - y, 0.0, 9.0, arguments=(target[i, 0], power[k])
            )
            assert alone.shape == ()
            assert alone == together[i, k]


def test_nothing_to_solve_is_no_error() -> None:
    """An empty table has no roots."""
    assert find_root(lambda x: x, np.empty((0, 3)), 1.0).shape == (0, 3)


def test_secant_steps_arrive_at_simple_roots_and_own_up_where_they_do_not() -> None:
    """x² = a from nearby arrives to rounding; without a root the guess ends at its bracket."""
    wanted = np.array([1.0, 2.0, 3.0, -1.0])
    lower, upper = np.full(4, 0.5), np.full(4, 4.0)
    guess = np.array([1.1, 1.4, 1.8, 1.0])
    root, step = secant_steps(
        lambda x: x * x - wanted, guess, guess + 0.01, lower=lower, upper=upper, steps=6
    )
    np.testing.assert_allclose(root[:3], np.sqrt(wanted[:3]), rtol=1e-12)
    assert step[:3].max() < 1e-6
    assert root[3] == lower[3]


def test_secant_steps_keep_a_root_once_they_are_there() -> None:
    """Steps beyond convergence divide rounding by rounding; they must not wander off."""
    guess = np.array([1.0])
    bounds = {"lower": np.array([0.0]), "upper": np.array([3.0])}
    root, step = secant_steps(lambda x: x - 1.25, guess, guess + 0.1, steps=12, **bounds)
    assert root[0] == pytest.approx(1.25, rel=1e-14)
    assert step[0] < 1e-9
