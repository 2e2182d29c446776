"""Solved cruise points per second in one array, against brentq in a loop; and the memory."""

from __future__ import annotations

import resource
import subprocess
import sys
import time

import numpy as np
from aircraft_specimens import BEST_POWER, CLEAN, air
from measure import ROOT, Measure, environment
from scipy.optimize import brentq

from cardgen import cruise
from cardgen.aircraft import Condition, Setting
from cardgen.propeller import coefficient_table

MANY, FEW, REPEATS = 200_000, 100, 3
MILLION = 1_000_000


def points(count: int) -> tuple[Condition, Setting]:
    """Points all over the working range."""
    draw = np.random.default_rng(5).uniform
    where = Condition(*air(draw(0.0, 12_000.0, count)), draw(1250.0, 1450.0, count))
    power = draw(0.55, 0.75, count) * CLEAN.engine.rated_power
    return where, Setting(draw(2200.0, 2600.0, count), BEST_POWER, power=power)


def in_one_array(count: int) -> float:
    """Points per second of `solve_cruise`."""
    where, setting = points(count)
    best = np.inf
    for _ in range(REPEATS):
        start = time.perf_counter()
        cruise.solve_cruise(CLEAN, where, setting=setting)
        best = min(best, time.perf_counter() - start)
    return count / best


def in_a_loop(count: int) -> float:
    """Points per second of the same residual under `scipy.optimize.brentq`, one by one."""
    where, setting = points(count)
    table = coefficient_table(CLEAN.propeller)
    start = time.perf_counter()
    for k in range(count):
        here = Condition(where.pressure[k], where.temperature[k], where.mass[k])
        asked = Setting(setting.rpm[k], BEST_POWER, power=setting.power[k])
        problem = cruise._problem(CLEAN, here, asked)
        lower, upper = cruise._brackets(CLEAN, here, problem)
        speed = brentq(
            lambda v, problem=problem: float(cruise._residual(table, problem, np.asarray(v))),
            float(lower),
            float(upper),
            xtol=cruise.AIRSPEED_TOLERANCE,
        )
        cruise.balance(CLEAN, here, setting=asked, true_airspeed=speed)
    return count / (time.perf_counter() - start)


def peak_memory() -> float:
    """Peak resident memory of a process that solves a million points [GiB]."""
    code = "import cruise_speed; cruise_speed.solve_a_million()"
    path = f"{ROOT}:{ROOT / 'tests'}:{ROOT / 'tests' / 'bench'}"
    done = subprocess.run(
        [sys.executable, "-c", code],
        env={**environment(), "PYTHONPATH": path},
        capture_output=True,
        text=True,
        check=True,
    )
    return float(done.stdout)


def solve_a_million() -> None:
    """Solve a million points and print this process's peak memory [GiB]."""
    where, setting = points(MILLION)
    cruise.solve_cruise(CLEAN, where, setting=setting)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss  # KiB on Linux
    sys.stdout.write(str(peak / 1024**2))


def measures() -> list[Measure]:
    """Speed as a ratio, memory in GiB."""
    coefficient_table(CLEAN.propeller)
    many = in_one_array(MANY)
    ratio = many / in_a_loop(FEW)
    memory = peak_memory()
    return [
        Measure("points per second, over a loop of brentq", ratio, "x", 200.0, 1e3 / ratio, True),
        Measure("memory for 1 000 000 points", memory, "GiB", 1.0, memory),
    ]
