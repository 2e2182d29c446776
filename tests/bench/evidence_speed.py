"""Fitting 200 points, and checking 100 000 settings of a file."""

from __future__ import annotations

import csv
import tempfile
import time
from pathlib import Path

import numpy as np
from aircraft_specimens import BEST_POWER, CLEAN, ECONOMY, air
from measure import FLOOR, SPECIMEN, Measure, run

from cardgen.aircraft import Condition, Setting
from cardgen.constants import HOUR, INCH_OF_MERCURY, KNOT, POUND
from cardgen.cruise import CruisePoint, solve_cruise
from cardgen.fit import Evidence, Subject, estimate

FITTED, CHECKED = 200, 100_000


def evidence(count: int) -> Evidence:
    """Rows as the model flies them, with the scatter of flight points."""
    random = np.random.default_rng(6)
    pressure, temperature = air(random.uniform(1000.0, 11_000.0, count))
    rpm, mass = random.uniform(2200.0, 2600.0, count), random.uniform(1300.0, 1450.0, count)
    power = random.uniform(0.55, 0.75, count) * CLEAN.engine.rated_power
    mixture = np.arange(count) % 2
    flown = _flown(Condition(pressure, temperature, mass), rpm, power, mixture)
    steps = np.array([0.1 * INCH_OF_MERCURY, 0.6 * POUND / HOUR, KNOT])
    noise = random.normal(size=(3, count)) * steps[:, None]
    return Evidence(
        pressure=pressure,
        temperature=temperature,
        rpm=rpm,
        mass=mass,
        mixture=mixture,
        power=power,
        manifold_pressure=flown.manifold_pressure + noise[0],
        fuel_flow=flown.fuel_flow + noise[1],
        true_airspeed=flown.true_airspeed + noise[2],
        rounding=np.tile(steps, (count, 1)),
        spread=np.zeros((count, 3)),
        flight=np.ones(count, dtype=np.bool_),
        place=tuple(f"row {number}" for number in range(count)),
    )


def _flown(
    where: Condition, rpm: np.ndarray, power: np.ndarray, mixture: np.ndarray
) -> CruisePoint:
    """Fly rows of two mixtures in one array."""
    ratio = np.where(mixture == 0, BEST_POWER.fuel_air_ratio, ECONOMY.fuel_air_ratio)
    both = type(BEST_POWER)("rows", ratio)
    return solve_cruise(CLEAN, where, setting=Setting(rpm, both, power=power))


def write_settings(path: Path, count: int) -> None:
    """Write settings as a logger would."""
    draw = np.random.default_rng(7).uniform
    columns = {
        "map_inhg": draw(18.0, 26.0, count).round(1),
        "rpm": draw(2100.0, 2550.0, count).round(-1),
        "pressure_altitude_ft": draw(0.0, 12_000.0, count).round(),
        "oat_c": draw(-20.0, 30.0, count).round(),
    }
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(columns)
        writer.writerows(zip(*(values.tolist() for values in columns.values()), strict=True))


def measures() -> list[Measure]:
    """Seconds; stored over the time of a process that only imports."""
    floor = sorted(run(["-c", FLOOR]) for _ in range(5))[2]
    rows = evidence(FITTED)
    subject = Subject(CLEAN, (BEST_POWER, ECONOMY))
    estimate(subject, rows.rows(np.arange(20)))  # loads scipy
    start = time.perf_counter()
    estimate(subject, rows)
    fitted = time.perf_counter() - start
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "settings.csv"
        write_settings(path, CHECKED)
        checked = run(["-m", "cardgen", "check", SPECIMEN, "--points", str(path)])
    return [
        Measure(f"fit of {FITTED} points", fitted, "s", 2.0, fitted / floor),
        Measure(f"check of {CHECKED} settings of a file", checked, "s", 5.0, checked / floor),
    ]
