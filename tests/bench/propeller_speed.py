"""How long the propeller's table takes to build and to read; run it alone on an idle core."""

from __future__ import annotations

import sys
from time import perf_counter

import numpy as np

from cardgen.propeller import Propeller, blade_from_activity_factor, coefficient_table

POINTS = 100_000
REPEATS = 5


def speed_figures() -> dict[str, float]:
    """Best of several: seconds per table, seconds per governed point and per thrust alone."""
    # A table is kept, so every one that is timed needs a blade of its own.
    shapes = iter(
        [
            Propeller(1.93, 2, blade_from_activity_factor(100.0 + 0.1 * k), 0.21, 0.52)
            for k in range(REPEATS + 1)
        ]
    )
    draw = np.random.default_rng(0).uniform
    j, power, mach = draw(0.4, 1.1, POINTS), draw(0.03, 0.08, POINTS), draw(0.5, 0.85, POINTS)
    table = coefficient_table(next(shapes))

    def build() -> None:
        coefficient_table(next(shapes))

    def governed() -> None:
        table.governed(j, power_coefficient=power, tip_mach=mach)

    def governed_thrust() -> None:
        table.governed_thrust(j, power_coefficient=power, tip_mach=mach)

    figures = {}
    for name, work, share in (
        ("table", build, 1),
        ("governed", governed, POINTS),
        ("governed_thrust", governed_thrust, POINTS),
    ):
        times = []
        for _ in range(REPEATS):
            start = perf_counter()
            work()
            times.append(perf_counter() - start)
        figures[name] = min(times) / share
    return figures


if __name__ == "__main__":
    for title, seconds in speed_figures().items():
        sys.stdout.write(f"{title:16} {seconds:.3e} s\n")
