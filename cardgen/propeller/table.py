"""Coefficients of a propeller tabulated once, and the blade angle its governor finds."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cardgen.curves import SplineGrid
from cardgen.errors import DomainError
from cardgen.propeller.blade import REFERENCE_STATION, Propeller
from cardgen.propeller.element import Coefficients, coefficients
from cardgen.records import dataclass
from cardgen.roots import find_root

FloatArray = NDArray[np.float64]

#: Domain of every table. The second axis is the blade angle less `_datum_angle`, in which all
#: propellers look alike at all advance ratios.
LEAST_ADVANCE_RATIO = 0.2
LEAST_TIP_MACH, GREATEST_TIP_MACH = 0.40, 0.95
_LEAST_ANGLE, _GREATEST_ANGLE = float(np.radians(-4.0)), float(np.radians(18.0))
#: Keeps the datum away from blades so fine, at low advance ratios, that they blow backwards.
_LIFTED_BY = 0.2
#: Nodes over J, blade angle and tip Mach number, and over J, relative power and tip Mach number.
_NODES = (14, 18, 10)
_GOVERNED_NODES = (18, 28, 10)
#: Incidences at which the rise of C_P is looked over for its first peak, the stall.
_SCAN = 45
#: Advance ratio goes up to where the blade at its coarse stop, and this much more, windmills.
_COARSE_MARGIN = np.radians(6.0)
_ADVANCE_RATIO_STEP = 0.1


@dataclass(frozen=True, slots=True, eq=False)
class CoefficientTable:
    """Coefficients over advance ratio, blade angle and tip Mach number, and their inverse.

    Build it with `coefficient_table`.

    Parameters
    ----------
    forward : SplineGrid
        C_P, C_T and section angle of attack over (J, blade angle above datum, Mach) [-, -, rad]
    inverse : SplineGrid
        Blade angle above datum and C_T over (J, relative power, Mach) [rad, -]
    least_power, greatest_power : tuple of float
        Polynomials of J, highest power first, between which C_P can be inverted [-]
    """

    forward: SplineGrid
    inverse: SplineGrid
    least_power: tuple[float, ...]
    greatest_power: tuple[float, ...]

    @property
    def greatest_advance_ratio(self) -> float:
        """Upper end of the advance ratios [-]."""
        return self.forward.upper[0]

    def coefficients(
        self, advance_ratio: ArrayLike, *, blade_angle: ArrayLike, tip_mach: ArrayLike
    ) -> Coefficients:
        """Coefficients at given blade angles.

        Parameters
        ----------
        advance_ratio : array_like
            J = V / (n D) [-]
        blade_angle : array_like
            Blade angle at 0.75 R [rad]
        tip_mach : array_like
            Mach number of the tip's rotation alone [-]

        Returns
        -------
        Coefficients
            NaN outside the table [-]
        """
        j = np.asarray(advance_ratio, dtype=np.float64)
        above = np.asarray(blade_angle, dtype=np.float64) - _datum_angle(j)
        power, thrust, angle = self.forward.values((j, above, tip_mach), (0, 1, 2))
        return Coefficients(power, thrust, angle)

    def governed(
        self, advance_ratio: ArrayLike, *, power_coefficient: ArrayLike, tip_mach: ArrayLike
    ) -> tuple[FloatArray, FloatArray]:
        """Blade angle that absorbs a power, as a governor finds it, and its thrust.

        Parameters
        ----------
        advance_ratio : array_like
            J = V / (n D) [-]
        power_coefficient : array_like
            C_P to absorb [-]
        tip_mach : array_like
            Mach number of the tip's rotation alone [-]

        Returns
        -------
        blade_angle : ndarray
            Blade angle at 0.75 R, wherever the stops are; NaN outside the table [rad]
        thrust_coefficient : ndarray
            C_T, isolated; NaN outside the table [-]
        """
        j = np.asarray(advance_ratio, dtype=np.float64)
        share = self._relative_power(j, np.asarray(power_coefficient, dtype=np.float64))
        above, thrust = self.inverse.values((j, share, tip_mach), (0, 1))
        return above + _datum_angle(j), thrust

    def governed_thrust(
        self, advance_ratio: ArrayLike, *, power_coefficient: ArrayLike, tip_mach: ArrayLike
    ) -> FloatArray:
        """Thrust coefficient of `governed` alone, in half the time.

        Parameters
        ----------
        advance_ratio : array_like
            J = V / (n D) [-]
        power_coefficient : array_like
            C_P to absorb [-]
        tip_mach : array_like
            Mach number of the tip's rotation alone [-]

        Returns
        -------
        ndarray
            C_T, isolated; NaN outside the table [-]
        """
        j = np.asarray(advance_ratio, dtype=np.float64)
        share = self._relative_power(j, np.asarray(power_coefficient, dtype=np.float64))
        (thrust,) = self.inverse.values((j, share, tip_mach), (1,))
        return thrust

    def _relative_power(self, j: FloatArray, power: FloatArray) -> FloatArray:
        """C_P between the least (0) and the greatest (1) that can be inverted at this J."""
        with np.errstate(over="ignore", invalid="ignore"):  # far outside it ends as NaN
            least = _polynomial(self.least_power, j)
            share: FloatArray = (power - least) / (_polynomial(self.greatest_power, j) - least)
        return share


def effective_helix_angle(advance_ratio: ArrayLike) -> FloatArray:
    """Angle of the undisturbed helix at 0.75 R.

    Parameters
    ----------
    advance_ratio : array_like
        J = V / (n D) [-]

    Returns
    -------
    ndarray
        ``arctan(J / (0.75 pi))`` [rad]
    """
    return np.arctan(np.asarray(advance_ratio, dtype=np.float64) / (REFERENCE_STATION * np.pi))


def table_advance_ratios(
    table: CoefficientTable, blade_angle: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Least and greatest advance ratio at which a table knows a blade angle.

    Parameters
    ----------
    table : CoefficientTable
        The table [-]
    blade_angle : array_like
        Blade angle at 0.75 R [rad]

    Returns
    -------
    least, greatest : ndarray
        Advance ratios; least above greatest where there are none [-]
    """
    angle = np.asarray(blade_angle, dtype=np.float64)
    helix = REFERENCE_STATION * np.pi

    def at(above: float) -> FloatArray:
        lifted = helix * np.tan(angle - above)
        return np.sqrt(np.maximum(np.sign(lifted) * lifted**2 - _LIFTED_BY**2, 0.0))

    least = np.maximum(at(_GREATEST_ANGLE), LEAST_ADVANCE_RATIO)
    greatest = np.minimum(at(_LEAST_ANGLE), table.greatest_advance_ratio)
    return least, greatest


def coefficient_table(propeller: Propeller) -> CoefficientTable:
    """Table of a propeller, computed once per shape and kept.

    Parameters
    ----------
    propeller : Propeller
        The propeller; its diameter, fine stop and installation factor play no part [-]

    Returns
    -------
    CoefficientTable
        Covers advance ratios from 0.2 to where the blade windmills at its coarse stop, tip Mach
        numbers from 0.40 to 0.95, and blade angles from about zero thrust to beyond the stall
        [-]

    Raises
    ------
    DomainError
        The blade form is so unlike a propeller's that it cannot be solved over that range.
    """
    reach = REFERENCE_STATION * np.pi * np.tan(propeller.coarse_stop + _COARSE_MARGIN)
    steps = int(np.ceil((min(reach, 4.0) - LEAST_ADVANCE_RATIO) / _ADVANCE_RATIO_STEP))
    shape = Propeller(
        diameter=1.0,
        blade_count=propeller.blade_count,
        blade=propeller.blade,
        fine_stop=0.0,
        coarse_stop=0.0,
        installation_factor=1.0,
        body=propeller.body,
    )
    return _build(shape, max(steps, 8))


@lru_cache(maxsize=32)
def _build(shape: Propeller, steps: int) -> CoefficientTable:
    """Solve the nodes, then invert the splines through them."""
    greatest_j = LEAST_ADVANCE_RATIO + steps * _ADVANCE_RATIO_STEP
    forward = _forward(shape, greatest_j)
    j, share, mach = _axes(
        (LEAST_ADVANCE_RATIO, 0.0, LEAST_TIP_MACH),
        (greatest_j, 1.0, GREATEST_TIP_MACH),
        _GOVERNED_NODES,
    )
    scan = np.linspace(_LEAST_ANGLE, _GREATEST_ANGLE, _SCAN)
    (power,) = forward.values((j, scan[:, None], mach), (0,))
    peak = _first_peak(power)
    peak_power = np.take_along_axis(power, peak, axis=1)
    least = _envelope(j.ravel(), power[:, 0, :].max(axis=1), above=True)
    greatest = _envelope(j.ravel(), peak_power.min(axis=(1, 2)), above=False)
    floor = _polynomial(least, j)
    wanted = floor + share * (_polynomial(greatest, j) - floor)

    def excess(
        angle: FloatArray, at_j: FloatArray, at_mach: FloatArray, power: FloatArray
    ) -> FloatArray:
        (absorbed,) = forward.values((at_j, angle, at_mach), (0,))
        return absorbed - power

    angle = find_root(
        excess, _LEAST_ANGLE, scan[peak], arguments=(j, mach, wanted), tolerance=1e-10
    )
    _check_solved(angle)
    (thrust,) = forward.values((j, angle, mach), (1,))
    inverse = SplineGrid.through(
        np.stack((angle, thrust)),
        lower=(LEAST_ADVANCE_RATIO, 0.0, LEAST_TIP_MACH),
        upper=(greatest_j, 1.0, GREATEST_TIP_MACH),
    )
    return CoefficientTable(forward, inverse, least, greatest)


def _forward(shape: Propeller, greatest_j: float) -> SplineGrid:
    """Splines of C_P, C_T and section angle of attack through directly solved nodes."""
    lower = (LEAST_ADVANCE_RATIO, _LEAST_ANGLE, LEAST_TIP_MACH)
    upper = (greatest_j, _GREATEST_ANGLE, GREATEST_TIP_MACH)
    j, above, mach = _axes(lower, upper, _NODES)
    solved = coefficients(shape, j, blade_angle=_datum_angle(j) + above, tip_mach=mach)
    nodes = np.stack((solved.power_coefficient, solved.thrust_coefficient, solved.angle_of_attack))
    _check_solved(nodes)
    return SplineGrid.through(nodes, lower=lower, upper=upper)


def _axes(
    lower: tuple[float, float, float],
    upper: tuple[float, float, float],
    counts: tuple[int, int, int],
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Equally spaced nodes of three variables, shaped to broadcast into their grid."""
    first, second, third = (
        np.linspace(low, high, count) for low, high, count in zip(lower, upper, counts, strict=True)
    )
    return first[:, None, None], second[:, None], third


def _datum_angle(j: FloatArray) -> FloatArray:
    """Blade angle from which the tables count: nearly that of the undisturbed helix."""
    lifted = np.hypot(j, _LIFTED_BY)
    datum: FloatArray = np.arctan(lifted / (REFERENCE_STATION * np.pi))
    return datum


def _check_solved(nodes: FloatArray) -> None:
    """Refuse to draw splines through a node that has no solution: they would all be NaN."""
    missing = int(np.isnan(nodes).sum())
    if missing:
        raise DomainError(
            f"the propeller cannot be solved at {missing} of {nodes.size} nodes of its table; "
            "expected a blade form like a propeller's, check twist, thickness and stops"
        )


def _polynomial(terms: tuple[float, ...], j: FloatArray) -> FloatArray:
    """Value of a polynomial of J, highest power first."""
    value = terms[0] * j + terms[1]
    for term in terms[2:]:
        value = value * j + term
    return value


def _envelope(j: FloatArray, values: FloatArray, *, above: bool) -> tuple[float, ...]:
    """Quartic of J along values, moved so that none lies beyond it."""
    terms = np.polyfit(j, values, 4)
    gap = values - np.polyval(terms, j)
    inward = 1e-6 if above else -1e-6  # so that rounding cannot put a node beyond its bracket
    terms[-1] += inward + (gap.max() if above else gap.min())
    return tuple(float(term) for term in terms)


def _first_peak(power: FloatArray) -> NDArray[np.intp]:
    """Index, along the second axis, up to which C_P rises without a break."""
    rising = np.logical_and.accumulate(np.diff(power, axis=1) > 0.0, axis=1)
    last: NDArray[np.intp] = rising.sum(axis=1, keepdims=True)
    return last
