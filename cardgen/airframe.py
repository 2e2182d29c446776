"""Airframe: parabolic drag polar in level flight."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = float | NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Airframe:
    """Wing and drag polar: wing area [m2], span [m], C_D0 [-], Oswald factor [-], lift ceiling [-]."""

    wing_area: float
    wing_span: float
    zero_lift_drag: Floats
    oswald_factor: Floats = 0.75
    greatest_lift: float = 1.3
