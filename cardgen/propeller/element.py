"""Blade-element momentum solution of a propeller, all stations and points in one array."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cardgen.propeller.blade import REFERENCE_STATION, Blade, Body, Propeller
from cardgen.propeller.loss import LossFactor, loss_factor
from cardgen.propeller.section import Section, clark_y, lift_drag
from cardgen.records import dataclass
from cardgen.roots import find_root, secant_steps

FloatArray = NDArray[np.float64]

#: Gauss-Legendre stations along the blade; see `_stations`.
STATION_COUNT = 16
#: Inflow angles are solved to this [rad].
_ANGLE_TOLERANCE = 1e-9
#: Steps from the first guess, the second guess beside it, and a last step [rad] after which the
#: error, which goes with the product of the last two, is below the tolerance.
_SECANT_STEPS = 5
_NEAR = 1e-3
_SETTLED = 1e-6
#: Points solved at once: stations times points then stay in the processor's cache.
_CHUNK = 1024


@dataclass(frozen=True, slots=True, eq=False)
class Coefficients:
    """What a propeller does at given operating points, isolated (no installation factor).

    Parameters
    ----------
    power_coefficient : ndarray
        C_P = P / (rho n^3 D^5) [-]
    thrust_coefficient : ndarray
        C_T = T / (rho n^2 D^4) [-]
    angle_of_attack : ndarray
        Angle of attack of the section at 0.75 R, induced flow included [rad]
    """

    power_coefficient: FloatArray
    thrust_coefficient: FloatArray
    angle_of_attack: FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class _Stations:
    """Blade data at the stations of the spanwise integral, as columns."""

    x: FloatArray
    weight: FloatArray
    chord: FloatArray
    thickness: FloatArray
    twist: FloatArray
    hub: float


@lru_cache(maxsize=64)
def _stations(blade: Blade) -> _Stations:
    """Stations crowded towards the tip, where the loading falls like a square root."""
    nodes, weights = np.polynomial.legendre.leggauss(STATION_COUNT)
    s = 0.5 * (nodes + 1.0)
    hub = blade.radius_fraction[0]
    quarter = 0.5 * np.pi
    x = hub + (1.0 - hub) * np.sin(quarter * s)
    weight = 0.5 * weights * (1.0 - hub) * quarter * np.cos(quarter * s)
    return _Stations(
        x=x[:, None],
        weight=weight,
        chord=blade.chord(x)[:, None],
        thickness=blade.thickness(x)[:, None],
        twist=blade.twist_at(x)[:, None],
        hub=hub,
    )


def inflow_factor(body: Body | None, station: ArrayLike) -> FloatArray:
    """Axial speed at the propeller over flight speed, slowed by the body behind it.

    Parameters
    ----------
    body : Body or None
        Body behind the propeller [-]
    station : array_like
        Radius over tip radius [-]

    Returns
    -------
    ndarray
        Local over undisturbed axial speed [-]

    Notes
    -----
    Point source in a uniform stream, which makes a half body of final radius a:
    ``1 - (a^2/4) z / (z^2 + r^2)^(3/2)``, z the distance ahead of the source.
    """
    x = np.asarray(station, dtype=np.float64)
    if body is None:
        return np.ones_like(x)
    z = body.distance_fraction
    return 1.0 - 0.25 * body.radius_fraction**2 * z / (z * z + x * x) ** 1.5


def coefficients(
    propeller: Propeller,
    advance_ratio: ArrayLike,
    *,
    blade_angle: ArrayLike,
    tip_mach: ArrayLike,
) -> Coefficients:
    """Solve a propeller at given operating points.

    Parameters
    ----------
    propeller : Propeller
        The propeller; its diameter and stops play no part [-]
    advance_ratio : array_like
        J = V / (n D), not negative [-]
    blade_angle : array_like
        Blade angle at 0.75 R [rad]
    tip_mach : array_like
        Mach number of the tip's rotation alone, pi n D / a; flight speed is added here from J [-]

    Returns
    -------
    Coefficients
        Of the broadcast shape; NaN where the equations have no root [-]

    Notes
    -----
    Per station, with local solidity ``s = B c / (2 pi r)``, loss factor F and speed ratio
    ``l = V_x/(Omega r)``, momentum and blade forces balance at the inflow angle phi where

        4 F sin(phi) (sin(phi) - l cos(phi)) - s (c_n + l c_t) = 0,

    Ning's residual multiplied by its denominators, which leaves it without singularity. The
    angle without induced flow and the angle without lift always enclose the root. F is that of
    helical wakes (`loss_factor`); Prandtl's would do in its place. A blade that lifts backwards is
    solved too, as far as momentum theory goes: not where it slows the air by some 40 percent,
    which happens only far beyond zero thrust, outside the table.

    References
    ----------
    S. A. Ning, "A simple solution method for the blade element momentum equations with guaranteed
    convergence", Wind Energy 17 (2014), pp. 1327-1345.
    H. Glauert, "Airplane propellers", in W. F. Durand (ed.), Aerodynamic Theory IV (1935).
    """
    j, beta, mach = np.broadcast_arrays(
        np.asarray(advance_ratio, dtype=np.float64),
        np.asarray(blade_angle, dtype=np.float64),
        np.asarray(tip_mach, dtype=np.float64),
    )
    shape = j.shape
    j = np.where(j >= 0.0, j, np.nan).reshape(-1)
    beta, mach = beta.reshape(-1), mach.reshape(-1)
    out = np.empty((3, j.size))
    for start in range(0, j.size, _CHUNK):
        part = slice(start, start + _CHUNK)
        out[:, part] = _solve(propeller, j[part], beta[part], mach[part])
    power, thrust, angle = out.reshape((3, *shape))
    return Coefficients(power, thrust, angle)


@dataclass(frozen=True, slots=True, eq=False)
class _Strips:
    """Every station at every point, stations first."""

    ratio: FloatArray  # V_x / (Omega r)
    angle: FloatArray  # of the blade [rad]
    solidity: FloatArray
    section: Section
    loss: LossFactor

    def forces(
        self, phi: FloatArray, sine: FloatArray, cosine: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Normal and tangential force coefficients at inflow angles."""
        lift, drag = lift_drag(self.section, self.angle - phi)
        return lift * cosine - drag * sine, lift * sine + drag * cosine

    def residual(self, phi: FloatArray) -> FloatArray:
        """Momentum less blade forces; see `coefficients`."""
        sine, cosine = np.sin(phi), np.cos(phi)
        normal, tangential = self.forces(phi, sine, cosine)
        momentum = 4.0 * self.loss(sine) * sine * (sine - self.ratio * cosine)
        return momentum - self.solidity * (normal + self.ratio * tangential)

    def ends(self) -> tuple[FloatArray, FloatArray]:
        """Inflow angles without induced flow and without lift, which enclose the root [rad]."""
        return np.arctan(self.ratio), np.maximum(self.angle - self.section.zero_lift_angle, 1e-3)

    def first_guess(self, no_induction: FloatArray, no_lift: FloatArray) -> FloatArray:
        """Inflow angle of a straight lift line without drag, for small induced angles [rad]."""
        sine, cosine = np.sin(no_induction), np.cos(no_induction)
        loss = 4.0 * self.loss(sine)
        pull = self.solidity * self.section.lift_slope
        way = no_lift - no_induction
        linear = loss * sine + pull
        root = np.sqrt(np.maximum(linear * linear + 4.0 * loss * cosine * pull * way, 0.0))
        return no_induction + 2.0 * pull * way / (linear + root)


def _strips(propeller: Propeller, j: FloatArray, beta: FloatArray, mach: FloatArray) -> _Strips:
    """Lay out the strips of some points."""
    at = _stations(propeller.blade)
    x = at.x
    local_mach = mach * np.hypot(x, j / np.pi)
    return _Strips(
        ratio=inflow_factor(propeller.body, x) * j / (np.pi * x),
        angle=beta + at.twist,
        solidity=float(propeller.blade_count) * at.chord / (np.pi * x),
        section=clark_y(at.thickness, local_mach, chord_to_radius=2.0 * at.chord / x),
        loss=loss_factor(propeller.blade_count, at.hub, stations=tuple(x[:, 0].tolist())),
    )


def _inflow_angle(
    propeller: Propeller, strips: _Strips, points: tuple[FloatArray, FloatArray, FloatArray]
) -> FloatArray:
    """Inflow angle at which momentum and blade forces balance [rad]."""
    no_induction, no_lift = strips.ends()
    guess = strips.first_guess(no_induction, no_lift)
    near = guess + np.where(no_lift > no_induction, _NEAR, -_NEAR)
    phi, step = secant_steps(
        strips.residual, guess, near, lower=no_induction, upper=no_lift, steps=_SECANT_STEPS
    )
    # A few points, stalled ones above all, have a station that does not settle so fast, or at the
    # end of its bracket only.
    settled = (step < _SETTLED) & (phi != no_induction) & (phi != no_lift)
    unsettled = ~settled.all(axis=0)
    if unsettled.any():
        there = _strips(propeller, *(values[unsettled] for values in points))
        phi[:, unsettled] = find_root(there.residual, *there.ends(), tolerance=_ANGLE_TOLERANCE)
    return phi


def _solve(propeller: Propeller, j: FloatArray, beta: FloatArray, mach: FloatArray) -> FloatArray:
    """Power coefficient, thrust coefficient and angle of attack of one chunk of points."""
    blades = float(propeller.blade_count)
    at = _stations(propeller.blade)
    x = at.x
    strips = _strips(propeller, j, beta, mach)
    phi = _inflow_angle(propeller, strips, (j, beta, mach))

    sine, cosine = np.sin(phi), np.cos(phi)
    normal, tangential = strips.forces(phi, sine, cosine)
    # W / (n D), from the tangential component: never singular.
    speed = np.pi * x / (cosine + strips.solidity * tangential / (4.0 * strips.loss(sine) * sine))
    load = at.weight[:, None] * speed * speed * at.chord
    thrust = 0.25 * blades * np.sum(load * normal, axis=0)
    power = 0.25 * np.pi * blades * np.sum(load * tangential * x, axis=0)
    thrust = _less_slipstream_drag(propeller.body, thrust)
    incidence = beta - _inflow_at_reference(x[:, 0], phi)
    return np.stack((power, thrust, incidence))


def _less_slipstream_drag(body: Body | None, thrust: FloatArray) -> FloatArray:
    """Thrust less the drag that the slipstream's added dynamic pressure, T/A, puts on the body."""
    if body is None:
        return thrust
    return thrust * (1.0 - body.drag_coefficient * body.radius_fraction**2)


def _inflow_at_reference(x: FloatArray, phi: FloatArray) -> FloatArray:
    """Inflow angle at 0.75 R, from the stations around it; x tan(phi) hardly varies there."""
    k = int(np.searchsorted(x, REFERENCE_STATION))
    share = (REFERENCE_STATION - x[k - 1]) / (x[k] - x[k - 1])
    pitch = (1.0 - share) * x[k - 1] * np.tan(phi[k - 1]) + share * x[k] * np.tan(phi[k])
    inflow: FloatArray = np.arctan(pitch / REFERENCE_STATION)
    return inflow
