"""A lifting line with a helical wake: what strip theory approximates, solved blade as a whole.

The same section data and blade as the model; the circulation of every panel acts on every other
one through the helical vortices it trails. Independent of the strip theory's loss factor.
"""

from __future__ import annotations

import numpy as np
from scipy.optimize import root

from cardgen.propeller import Propeller
from cardgen.propeller.loss import vortex_speeds
from cardgen.propeller.section import clark_y, lift_drag

PANELS = 24


def lifting_line(
    propeller: Propeller, advance_ratio: float, *, blade_angle: float, tip_mach: float
) -> tuple[float, float]:
    """C_P and C_T of an isolated propeller; lengths over R, speeds over Omega R."""
    blade, count = propeller.blade, propeller.blade_count
    hub = blade.radius_fraction[0]
    angle = np.linspace(0.0, np.pi, PANELS + 1)
    edge = hub + 0.5 * (1.0 - hub) * (1.0 - np.cos(angle))
    x = hub + 0.5 * (1.0 - hub) * (1.0 - np.cos(0.5 * (angle[1:] + angle[:-1])))
    chord = 2.0 * blade.chord(x)
    section = clark_y(
        blade.thickness(x), tip_mach * np.hypot(x, advance_ratio / np.pi), chord_to_radius=chord / x
    )
    pitch_angle = blade_angle + blade.twist_at(x)
    flight = advance_ratio / np.pi
    phi = np.arctan(flight / x) + 0.05
    circulation = np.full(PANELS, 0.003)
    for _ in range(12):
        wake_pitch = edge * np.interp(edge, x, np.tan(phi))
        axial, swirl = vortex_speeds(count, x, vortex=edge, pitch=wake_pitch)

        def state(gamma, axial=axial, swirl=swirl):
            trailed = np.diff(np.concatenate(([0.0], gamma, [0.0])))
            forward, around = flight + axial @ trailed, x - swirl @ trailed
            inflow, speed = np.arctan2(forward, around), np.hypot(forward, around)
            lift, drag = lift_drag(section, pitch_angle - inflow)
            return inflow, speed, lift, drag

        def residual(gamma, state=state):
            _, speed, lift, _ = state(gamma)
            return gamma - 0.5 * speed * chord * lift

        solution = root(residual, circulation)
        assert solution.success
        circulation = solution.x
        inflow, speed, lift, drag = state(circulation)
        moved = np.abs(inflow - phi).max()
        phi = inflow
        if moved < 1e-5:
            break
    force = 0.5 * speed**2 * chord * np.diff(edge) * count
    thrust = np.sum(force * (lift * np.cos(phi) - drag * np.sin(phi)))
    torque = np.sum(force * (lift * np.sin(phi) + drag * np.cos(phi)) * x)
    turns, diameter = 1.0 / (2.0 * np.pi), 2.0
    return (
        2.0 * np.pi * torque / (turns**2 * diameter**5),
        thrust / (turns**2 * diameter**4),
    )
