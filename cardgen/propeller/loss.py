"""Loss factor of a propeller with few blades, from the helical vortex sheets they trail."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cardgen.records import dataclass

FloatArray = NDArray[np.float64]

#: Panels along the blade, at whose edges the vortices trail.
_PANELS = 32
#: Pitch ratios of the wake, x tan(phi), at which the factor is computed, and the degree of the
#: polynomials of sin(phi) drawn through them.
_PITCHES = tuple(float(pitch) for pitch in np.geomspace(0.04, 2.4, 24))
_DEGREE = 10


@dataclass(frozen=True, slots=True, eq=False)
class LossFactor:
    """Loss factor at a set of stations, as polynomials of the sine of the inflow angle.

    Parameters
    ----------
    middle, half_width : ndarray
        Range of the sine at each station, as columns [-]
    terms : ndarray
        Polynomial coefficients of the sine scaled to -1..1, constant last, a column each [-]
    """

    middle: FloatArray
    half_width: FloatArray
    terms: FloatArray

    def __call__(self, sine: FloatArray) -> FloatArray:
        """Factor at given inflow angles.

        Parameters
        ----------
        sine : ndarray
            Sine of the inflow angle, stations first; held at the ends of the range covered [-]

        Returns
        -------
        ndarray
            Circulation of the blades over that of infinitely many with the same induced flow [-]
        """
        scaled = (sine - self.middle) / self.half_width
        np.clip(scaled, -1.0, 1.0, out=scaled)
        factor: FloatArray = np.multiply(scaled, self.terms[0])
        for term in self.terms[1:-1]:
            factor += term
            factor *= scaled
        factor += self.terms[-1]
        return factor


@lru_cache(maxsize=64)
def loss_factor(blade_count: int, hub: float, *, stations: tuple[float, ...]) -> LossFactor:
    """Loss factor of blades between hub and tip.

    Parameters
    ----------
    blade_count : int
        Number of blades [-]
    hub : float
        Radius at which the blades begin, over tip radius [-]
    stations : tuple of float
        Where the factor is wanted, radius over tip radius [-]

    Returns
    -------
    LossFactor
        Factor at the stations [-]

    Notes
    -----
    Goldstein's problem: the circulation along a blade whose helical wake moves back like a rigid
    surface, over ``4 pi r u_t / B``. It is solved here with discrete helical vortices, which
    takes any number of blades and a hub, and used station by station with the local inflow angle,
    as Lock did. Prandtl's factor, its limit for a narrow wake, is 8 to 25 percent too great for
    2 and 3 blades at cruise.

    References
    ----------
    S. Goldstein, "On the vortex theory of screw propellers", Proc. Royal Society A 123 (1929),
    pp. 440-465.
    C. N. H. Lock, D. Yeatman, "Tables for use in an improved method of airscrew strip theory
    calculation", Aeronautical Research Committee R&M 1674 (1935).
    """
    x = np.asarray(stations)
    pitch = np.asarray(_PITCHES)
    factor = _factors_along_blade(blade_count, hub, pitch, x)
    sine = pitch[:, None] / np.hypot(pitch[:, None], x)
    middle = 0.5 * (sine[0] + sine[-1])
    half_width = 0.5 * (sine[-1] - sine[0])
    scaled = (sine - middle) / half_width
    # Least squares at all stations at once, by orthogonal factors of the matrices of powers.
    powers = scaled.T[:, :, None] ** np.arange(_DEGREE, -1, -1)
    rotation, triangle = np.linalg.qr(powers)
    terms = np.linalg.solve(triangle, rotation.transpose(0, 2, 1) @ factor.T[:, :, None])
    return LossFactor(middle[:, None], half_width[:, None], terms.transpose(1, 0, 2))


def _factors_along_blade(
    blade_count: int, hub: float, pitch: FloatArray, at: FloatArray
) -> FloatArray:
    """Loss factor at the stations `at`, a row for each pitch ratio of the wake, r tan(phi) / R."""
    angle = np.linspace(0.0, np.pi, _PANELS + 1)
    span = 0.5 * (1.0 - hub)
    edge = hub + span * (1.0 - np.cos(angle))
    inside = 0.5 * (angle[1:] + angle[:-1])
    x = hub + span * (1.0 - np.cos(inside))
    axial, swirl = vortex_speeds(blade_count, x, vortex=edge, pitch=pitch[:, None, None])
    hypotenuse = np.hypot(x, pitch[:, None])
    cosine, sine = x / hypotenuse, pitch[:, None] / hypotenuse
    normal = axial * cosine[:, :, None] + swirl * sine[:, :, None]
    # A panel's circulation starts at its inner edge and ends at its outer one.
    influence = normal[:, :, :-1] - normal[:, :, 1:]
    circulation = np.linalg.solve(influence, cosine[:, :, None])[:, :, 0]
    factor = blade_count * circulation / (4.0 * np.pi * x * cosine * sine)
    # It falls to zero at both ends like a square root, so it is smooth in the angle.
    wanted = np.arccos(1.0 - (at - hub) / span)
    smooth = factor / np.sin(inside)
    rows = np.stack([np.interp(wanted, inside, row) for row in smooth])
    return np.asarray(rows * np.sin(wanted))


def vortex_speeds(
    blade_count: int, x: FloatArray, *, vortex: FloatArray, pitch: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Speeds at a blade from helical vortices that all blades trail, of unit circulation.

    Parameters
    ----------
    blade_count : int
        Number of blades [-]
    x : ndarray
        Where the speeds are wanted, radius over tip radius; none at a vortex [-]
    vortex : ndarray
        Where the vortices leave the blades, radius over tip radius [-]
    pitch : array_like
        Radius times the tangent of the helix angle of each vortex, over tip radius [-]

    Returns
    -------
    axial, swirl : ndarray
        Speeds times tip radius over circulation, a row for each `x`, a column for each `vortex`;
        of a vortex that ends the blade's circulation, as at the tip, the negative [-]

    Notes
    -----
    Closed approximations of the sums of Kawada and Lerbs: J. W. Wrench, "The calculation of
    propeller induction factors", David Taylor Model Basin report 1116 (1957), in the form given
    by B. P. Epps and R. W. Kimball, "Unified rotor lifting line theory", Journal of Ship Research
    57 (2013), appendix.
    """
    z = float(blade_count)
    pitch = np.asarray(pitch, dtype=np.float64)
    y, y0 = np.broadcast_arrays(x[:, None] / pitch, vortex[None, :] / pitch)
    s, s0 = np.sqrt(1.0 + y * y), np.sqrt(1.0 + y0 * y0)
    exponent = z * (np.log(y0 * (s - 1.0) / (y * (s0 - 1.0))) + s - s0)
    inner = x[:, None] < vortex[None, :]
    # U inside the vortex, 1/U outside it: both below 1.
    u = np.exp(-np.abs(exponent))
    series = ((9.0 * y0**2 + 2.0) / s0**3 + (3.0 * y**2 - 2.0) / s**3) / (24.0 * z)
    scale = np.sqrt(s0 / s) / (2.0 * z * y0)
    logarithm = -np.log1p(-u)
    f_inner = -scale * (u / (1.0 - u) + series * logarithm)
    f_outer = scale * (u / (1.0 - u) - series * logarithm)
    r = x[:, None]
    axial = np.where(
        inner,
        z / (4.0 * np.pi * r) * (y - 2.0 * z * y * y0 * f_inner),
        -(z**2) / (2.0 * np.pi * r) * y * y0 * f_outer,
    )
    swirl = np.where(
        inner,
        z**2 / (2.0 * np.pi * r) * y0 * f_inner,
        z / (4.0 * np.pi * r) * (1.0 + 2.0 * z * y0 * f_outer),
    )
    # Backward axial speed counts against the sense of a vortex that starts at the root.
    return -axial, swirl
