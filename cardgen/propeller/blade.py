"""Shape of a propeller and its blades."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cardgen.curves import MonotoneCurve
from cardgen.records import dataclass

FloatArray = NDArray[np.float64]

#: Station at which blade angles are quoted here [r/R].
REFERENCE_STATION = 0.75
#: The activity factor counts the blade from here to the tip [r/R].
_ACTIVITY_ROOT = 0.15

#: Blade form 5868-9 of the US Navy Bureau of Aeronautics, Clark Y sections, as tested in
#: NACA TR 640 and TR 658: r/R, chord/diameter, thickness/chord, blade angle less the blade angle
#: at 0.75 R in degrees. The two outermost rows are the rounded tip, a half ellipse, which the
#: reports leave to the drawing; 0.20 R is a circular shank.
_FORM_5868_9 = (
    (0.200, 0.0365, 1.0000, 21.44),
    (0.250, 0.0448, 0.6799, 19.27),
    (0.300, 0.0533, 0.3600, 16.82),
    (0.350, 0.0613, 0.2400, 14.30),
    (0.400, 0.0695, 0.1740, 11.65),
    (0.450, 0.0743, 0.1390, 8.89),
    (0.500, 0.0760, 0.1189, 6.56),
    (0.550, 0.0754, 0.1090, 4.68),
    (0.600, 0.0732, 0.1020, 3.20),
    (0.650, 0.0700, 0.0970, 2.01),
    (0.700, 0.0660, 0.0930, 0.95),
    (0.750, 0.0614, 0.0901, 0.00),
    (0.800, 0.0563, 0.0870, -0.84),
    (0.850, 0.0509, 0.0851, -1.70),
    (0.900, 0.0450, 0.0831, -2.49),
    (0.950, 0.0384, 0.0810, -3.25),
    (0.975, 0.03326, 0.0800, -3.59),
    (1.000, 0.01573, 0.0788, -3.91),
)


@dataclass(frozen=True, slots=True)
class Blade:
    """Form of one blade, station by station from root to tip.

    Parameters
    ----------
    radius_fraction : tuple of float
        Stations, radius over tip radius, increasing, the last one 1 [-]
    chord_to_diameter : tuple of float
        Chord over propeller diameter [-]
    thickness_to_chord : tuple of float
        Greatest thickness over chord [-]
    twist : tuple of float
        Blade angle less the blade angle at 0.75 R [rad]
    """

    radius_fraction: tuple[float, ...]
    chord_to_diameter: tuple[float, ...]
    thickness_to_chord: tuple[float, ...]
    twist: tuple[float, ...]

    def __post_init__(self) -> None:
        """Refuse a form that is no blade."""
        stations = np.asarray(self.radius_fraction)
        lengths = {
            len(self.radius_fraction),
            len(self.chord_to_diameter),
            len(self.thickness_to_chord),
            len(self.twist),
        }
        if len(lengths) != 1 or stations.size < 3:
            raise ValueError("a blade needs at least three stations and four columns of one length")
        if np.any(np.diff(stations) <= 0.0) or stations[0] <= 0.0 or stations[-1] != 1.0:
            raise ValueError("blade stations must increase from above 0 to exactly 1")
        if min(self.chord_to_diameter) <= 0.0 or min(self.thickness_to_chord) <= 0.0:
            raise ValueError("chord and thickness must be positive at every station")

    def chord(self, station: ArrayLike) -> FloatArray:
        """Chord over diameter at a station.

        Parameters
        ----------
        station : array_like
            Radius over tip radius [-]

        Returns
        -------
        ndarray
            Chord over diameter, NaN off the blade [-]
        """
        return MonotoneCurve(self.radius_fraction, self.chord_to_diameter)(station)

    def thickness(self, station: ArrayLike) -> FloatArray:
        """Thickness over chord at a station.

        Parameters
        ----------
        station : array_like
            Radius over tip radius [-]

        Returns
        -------
        ndarray
            Thickness over chord, NaN off the blade [-]
        """
        return MonotoneCurve(self.radius_fraction, self.thickness_to_chord)(station)

    def twist_at(self, station: ArrayLike) -> FloatArray:
        """Blade angle at a station less the one at 0.75 R.

        Parameters
        ----------
        station : array_like
            Radius over tip radius [-]

        Returns
        -------
        ndarray
            Twist, NaN off the blade [rad]
        """
        return MonotoneCurve(self.radius_fraction, self.twist)(station)


@dataclass(frozen=True, slots=True)
class Body:
    """Body of revolution close behind the propeller, that slows the air the blades meet.

    Parameters
    ----------
    radius_fraction : float
        Radius of the body over the tip radius [-]
    distance_fraction : float
        Distance of the propeller ahead of the point source that shapes the nose of the body, over
        the tip radius; the nose itself is half a body radius ahead of that source [-]
    drag_coefficient : float
        Drag coefficient of the body on its frontal area, to charge the drag that the slipstream
        adds to it to the thrust [-]
    """

    radius_fraction: float
    distance_fraction: float
    drag_coefficient: float = 0.0


@dataclass(frozen=True, slots=True)
class Propeller:
    """A constant-speed propeller.

    Parameters
    ----------
    diameter : float
        Diameter [m]
    blade_count : int
        Number of blades [-]
    blade : Blade
        Form of the blades [-]
    fine_stop, coarse_stop : float
        Least and greatest blade angle the hub allows, at 0.75 R [rad]
    installation_factor : float
        Thrust left, as a share, after body blockage, spinner and cowling [-]
    reference_station : float
        Station at which the propeller's data sheet quotes its blade angles [r/R]
    body : Body, optional
        Body behind the propeller, where the blades' inflow is known to be slowed by it. Leave it
        out where `installation_factor` stands for the body [-]
    """

    diameter: float
    blade_count: int
    blade: Blade
    fine_stop: float
    coarse_stop: float
    installation_factor: float = 0.95
    reference_station: float = REFERENCE_STATION
    body: Body | None = None


def activity_factor(blade: Blade) -> float:
    """Activity factor of one blade: its capacity to absorb power, from its plan form.

    Parameters
    ----------
    blade : Blade
        Form of the blade [-]

    Returns
    -------
    float
        Activity factor [-]

    Notes
    -----
    ``AF = 100000/16 * integral from 0.15 to 1 of (b/D) x**3 dx``. Where the form starts outside
    0.15 R its innermost chord is carried inward; the cube makes that share negligible.
    """
    nodes, weights = np.polynomial.legendre.leggauss(64)
    start, end = _ACTIVITY_ROOT, 1.0
    x = 0.5 * (end - start) * nodes + 0.5 * (end + start)
    chord = blade.chord(np.maximum(x, blade.radius_fraction[0]))
    return float(1e5 / 16.0 * 0.5 * (end - start) * np.sum(weights * chord * x**3))


def blade_5868_9() -> Blade:
    """The published 5868-9 blade form, Clark Y sections.

    Returns
    -------
    Blade
        Form as tested [-]

    References
    ----------
    E. P. Hartman, D. Biermann, "The aerodynamic characteristics of full-scale propellers having
    2, 3, and 4 blades of Clark Y and R.A.F. 6 airfoil sections", NACA TR 640 (1938).
    D. Biermann, E. P. Hartman, "Tests of two full-scale propellers with different pitch
    distributions, at blade angles up to 60 degrees", NACA TR 658 (1939). The numbers were read in
    an open copy of TR 658, whose author added the rounded tip and the row at 0.25 R.
    """
    x, chord, thickness, twist = zip(*_FORM_5868_9, strict=True)
    return Blade(x, chord, thickness, tuple(float(a) for a in np.radians(twist)))


def blade_from_activity_factor(wanted: float, *, thickness_scale: float = 1.0) -> Blade:
    """The 5868-9 form with its chord scaled to a given activity factor.

    Parameters
    ----------
    wanted : float
        Activity factor of one blade [-]
    thickness_scale : float
        Factor on thickness over chord; the circular shank stays circular [-]

    Returns
    -------
    Blade
        Form with twist as published and chord scaled [-]
    """
    form = blade_5868_9()
    scale = wanted / activity_factor(form)
    return Blade(
        form.radius_fraction,
        tuple(scale * chord for chord in form.chord_to_diameter),
        tuple(min(thickness_scale * t, 1.0) for t in form.thickness_to_chord),
        form.twist,
    )


def blade_angle_at_reference(blade: Blade, angle: ArrayLike, *, station: ArrayLike) -> FloatArray:
    """Blade angle at 0.75 R of a blade whose angle is quoted at another station.

    Parameters
    ----------
    blade : Blade
        Form of the blade [-]
    angle : array_like
        Blade angle at `station` [rad]
    station : array_like
        Radius over tip radius at which `angle` is quoted, as 30 in of a 38 in radius [-]

    Returns
    -------
    ndarray
        Blade angle at 0.75 R; NaN where the station is off the blade [rad]
    """
    return np.asarray(angle, dtype=np.float64) - blade.twist_at(station)


def blade_angle_at_station(blade: Blade, angle: ArrayLike, *, station: ArrayLike) -> FloatArray:
    """Blade angle at a station of a blade whose angle is known at 0.75 R.

    Parameters
    ----------
    blade : Blade
        Form of the blade [-]
    angle : array_like
        Blade angle at 0.75 R [rad]
    station : array_like
        Radius over tip radius at which the angle is wanted [-]

    Returns
    -------
    ndarray
        Blade angle at `station`; NaN where the station is off the blade [rad]
    """
    return np.asarray(angle, dtype=np.float64) + blade.twist_at(station)
