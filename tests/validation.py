"""Every published check in one table: what was asked, what would be better, what was measured.

Run ``python -m tests.validation`` for a Markdown table on stdout, or with ``--write`` to put it
between the validation marks of README.md; a test keeps the two equal. Figures are rounded so that
they come out alike on every machine. Nothing here is fitted to what it is compared with unless the
row says so.
"""

from __future__ import annotations

import csv
import sys
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import ambiance
import fluids
import numpy as np

TESTS = Path(__file__).parent
sys.path.insert(0, str(TESTS))  # the tests import one another by bare name

import independent_solver  # noqa: E402 - found by the line above
import published_fit  # noqa: E402
import published_propeller  # noqa: E402
from aircraft_specimens import AIRCRAFT, BEST_POWER, ENGINES, MASS, air, condition  # noqa: E402

from cardgen.aircraft import Setting  # noqa: E402
from cardgen.airspeed import airspeed_from_ground_legs  # noqa: E402
from cardgen.atmosphere import (  # noqa: E402
    density,
    density_altitude,
    power_correction_factor,
    standard_pressure,
    standard_temperature,
    vapour_pressure,
)
from cardgen.constants import (  # noqa: E402
    FOOT,
    HORSEPOWER,
    INCH,
    INCH_OF_MERCURY,
    KNOT,
    SEA_LEVEL_DENSITY,
)
from cardgen.cruise import solve_cruise  # noqa: E402
from cardgen.engine import (  # noqa: E402
    Engine,
    brake_power,
    full_throttle_manifold_pressure,
    manifold_pressure,
    power_line,
    relative_power,
)
from cardgen.propeller import (  # noqa: E402
    blade_5868_9,
    blade_angle_at_station,
    blade_angle_of_attack,
)
from cardgen.units import from_unit  # noqa: E402

README = TESTS.parent / "README.md"
BEGIN, END = "<!-- validation -->", "<!-- /validation -->"
INDEPENDENT_POINTS = (6, 10)  # aircraft, points of each; the test of that solver takes 500 in all


@dataclass(frozen=True)
class Check:
    """One row of the page; `asked` and `goal` are the greatest errors, in `unit`."""

    source: str
    what: str
    unit: str
    asked: float
    goal: float
    measured: float
    digits: int = 2

    @property
    def verdict(self) -> str:
        """Which of the two bounds the measured error keeps."""
        if self.measured <= self.goal:
            return "goal met" if self.goal < self.asked else "met"
        return "met" if self.measured <= self.asked else "**not met**"

    def line(self) -> str:
        """Row of the Markdown table."""
        goal = "same" if self.goal == self.asked else f"{self.goal:g}"
        unit = f" {self.unit}" if self.unit else ""
        return (
            f"| {self.source} | {self.what} | {self.asked:g}{unit} | {goal} "
            f"| {self.measured:.{self.digits}f}{unit} | {self.verdict} |"
        )


def published_rows(name: str) -> list[dict[str, str]]:
    """Rows of a file in tests/published, without its header lines."""
    with (TESTS / "published" / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(line for line in file if not line.startswith("#")))


# --- Air ----------------------------------------------------------------------------------------


def standard_atmosphere() -> Iterator[Check]:
    """The standard atmosphere against its printed table and two libraries."""
    rows = published_rows("standard_atmosphere_1976.csv")
    altitude = np.array([float(row["press_alt_ft"]) for row in rows]) * FOOT
    pressure, temperature = standard_pressure(altitude), standard_temperature(altitude)
    columns = {
        "delta": pressure / standard_pressure(0.0),
        "sigma": density(pressure, temperature) / SEA_LEVEL_DENSITY,
        "theta": temperature / standard_temperature(0.0),
        "T_degC": temperature - 273.15,
        "P_inHg": pressure / INCH_OF_MERCURY,
    }
    worst = max(
        abs(float(row[name]) - value) * 10.0 ** len(row[name].partition(".")[2])
        for name, values in columns.items()
        for row, value in zip(rows, values, strict=True)
    )
    yield Check(
        "U.S. Standard Atmosphere 1976, table to its last digit",
        "pressure, density and temperature ratios, °C, inHg",
        "digit",
        1.0,
        1.0,
        worst,
        1,
    )
    altitude = np.linspace(-4900.0, 19_900.0, 100)
    geometric = 6356766.0 * altitude / (6356766.0 - altitude)
    fluid = np.array([fluids.atmosphere.ATMOSPHERE_1976(one).P for one in geometric])
    iso = ambiance.Atmosphere(geometric).pressure
    for name, reference in (("fluids", fluid), ("ambiance (ISO 2533)", iso)):
        error = np.abs(standard_pressure(altitude) / reference - 1.0).max()
        yield Check(
            f"library {name}", "standard pressure, -5 to 20 km", "ppm", 5.0, 5.0, 1e6 * error, 1
        )


def density_altitudes() -> Iterator[Check]:
    """The FAA's examples; answer keys from memory."""
    examples = (
        (12_000.0, 50.0, "degF", 14_130.0),
        (5_000.0, 30.0, "degC", 7_800.0),
        (6_000.0, 30.0, "degF", 5_500.0),
    )
    for altitude, temperature, unit, answer in examples:
        found = density_altitude(standard_pressure(altitude * FOOT), from_unit(temperature, unit))
        yield Check(
            "FAA example, answer from memory",
            f"density altitude of {altitude:.0f} ft at {temperature:.0f} "
            f"°{unit[-1]}: {answer:.0f} ft",
            "ft",
            20.0,
            20.0,
            abs(float(found) / FOOT - answer),
            0,
        )


def humidity() -> Iterator[Check]:
    """The worked corrections of SAE J607."""
    for degrees, relative, pressure, factor in (
        (85.0, 0.85, 28.85, 1.1005),
        (55.0, 0.35, 30.10, 0.994),
    ):
        temperature = from_unit(degrees, "degF")
        found = power_correction_factor(
            from_unit(pressure, "inHg"),
            temperature,
            vapour_pressure=vapour_pressure(relative, temperature),
        )
        yield Check(
            "SAE J607, worked",
            f"power correction at {degrees:.0f} °F, {100 * relative:.0f} %, {pressure:.2f} inHg: "
            f"{factor:g}",
            "",
            0.002,
            0.002,
            abs(float(found) - factor),
            4,
        )


def ground_legs() -> Iterator[Check]:
    """Airspeed from four ground speeds."""
    legs = airspeed_from_ground_legs(
        np.array([178.0, 185.0, 188.0, 184.0]) * KNOT,
        np.radians([178.0, 82.0, 355.0, 265.0]),
    )
    yield Check(
        "National Test Pilot School, four GPS legs",
        "true airspeed 183.72669557 kt",
        "kt",
        0.01,
        0.01,
        abs(float(legs.true_airspeed) / KNOT - 183.72669557),
        4,
    )


# --- Engine -------------------------------------------------------------------------------------


def altitude_power() -> Iterator[Check]:
    """Full-throttle power with altitude, of engines that nothing was fitted to."""
    altitude = np.arange(0.0, 20_001.0, 250.0)
    pressure, temperature = air(altitude)
    law = 1.1324 * density(pressure, temperature) / SEA_LEVEL_DENSITY - 0.1324
    for name, engine in ENGINES.items():
        error = full_throttle_power(engine, altitude) / engine.rated_power - law
        size = engine.displacement / INCH**3
        yield Check(
            "Gagg and Farrar 1934, 1.1324 σ - 0.1324",
            f"invented {name}: {engine.rated_power / HORSEPOWER:.0f} hp from {size:.0f} in³ at "
            f"{engine.rated_rpm:.0f} rpm, to 20 000 ft, not fitted",
            "% of rated",
            1.5,
            0.5,
            100.0 * float(np.abs(error).max()),
            1,
        )
    rows = published_rows("engine_chart_210hp_full_throttle.csv")
    engine = Engine(360.0 * INCH**3, 8.5, 210.0 * HORSEPOWER, 2800.0)
    power = full_throttle_power(engine, np.array([float(row["press_alt_ft"]) for row in rows]))
    chart = np.array([float(row["BHP_chart"]) for row in rows])
    yield Check(
        "210 hp engine chart, full throttle, digitised to 0.5 %",
        "14 points from 1210 to 18 390 ft, not fitted",
        "% of rated",
        1.5,
        0.5,
        100.0 * float(np.abs(power / HORSEPOWER - chart).max()) / 210.0,
        1,
    )


def full_throttle_power(engine: Engine, altitude_ft: np.ndarray) -> np.ndarray:
    """Brake power at full throttle, standing still, in standard air [W]."""
    pressure, temperature = air(altitude_ft)
    line = power_line(
        engine, engine.rated_rpm, mixture=BEST_POWER, pressure=pressure, temperature=temperature
    )
    return brake_power(line, full_throttle_manifold_pressure(line))


def chart_method() -> Iterator[Check]:
    """A cold inlet raises power at the same setting."""
    pressure, standard = air(1400.0)  # 54 °F
    lines = [
        power_line(
            ENGINES["four"], 2400.0, mixture=BEST_POWER, pressure=pressure, temperature=temperature
        )
        for temperature in (standard, from_unit(14.0, "degF"))
    ]
    set_at = manifold_pressure(lines[0], 157.0 * HORSEPOWER)
    yield Check(
        "chart method of an engine maker's manual, from memory",
        "157 hp at 54 °F becomes 163 hp at 14 °F inlet",
        "hp",
        1.0,
        1.0,
        abs(float(brake_power(lines[1], set_at)) / HORSEPOWER - 163.0),
        1,
    )


def mixture() -> Iterator[Check]:
    """Where power is greatest and what best economy costs."""
    ratios = np.linspace(0.05, 0.11, 601)
    best = ratios[np.argmax(relative_power(ratios))]
    yield Check(
        "NACA Report 189",
        "fuel-air ratio of greatest power, 0.075 to 0.080",
        "",
        0.0025,
        0.0025,
        abs(float(best) - 0.0775),
        4,
    )
    yield Check(
        "NACA Report 189",
        "power at 0.0625, about 95 % of greatest",
        "%",
        1.0,
        1.0,
        abs(100.0 * float(relative_power(0.0625)) - 95.0),
        1,
    )


def fits() -> Iterator[Check]:
    """Few rows of published tables predict the others."""
    chart = published_fit.engine_chart_prediction()
    yield Check(
        "210 hp engine chart, digitised to 0.7 hp",
        "fitted on 6 points, the other 30 predicted: rms, median of ten choices",
        "hp",
        2.0,
        1.0,
        float(chart.median[0]),
        1,
    )
    table = published_fit.cruise_table_prediction()
    names = ("manifold pressure", "fuel flow", "true airspeed")
    for name, unit, asked, goal, measured, digits in zip(
        names,
        ("inHg", "gal/h", "kt"),
        (0.09, 0.09, 0.8),
        (0.045, 0.05, 0.45),
        table.median,
        (3, 3, 2),
        strict=True,
    ):
        yield Check(
            "FAA-H-8083-25 cruise table, 65 %, most rows from memory",
            f"fitted on 6 rows, the other 21 predicted: {name}, rms, median of ten choices",
            unit,
            asked,
            goal,
            float(measured),
            digits,
        )


# --- Propeller ----------------------------------------------------------------------------------


def propeller() -> Iterator[Check]:
    """Wind-tunnel tests of one blade form, 15 to 35°, 60 to 100 % of best advance ratio."""
    calibration = "section data calibrated on both reports"
    for title, reports in (("TR 640, 2 blades", (640,)), ("TR 658, 3 blades", (658,))):
        found = published_propeller.agreement(*reports)
        yield from _propeller_rows(title, calibration, found)
    crossed = published_propeller.cross_validation()
    for report, other, blades in ((640, 658, 2), (658, 640, 3)):
        found = crossed[f"calibrated on TR {other}, TR {report} predicted"]
        yield from _propeller_rows(
            f"TR {report}, {blades} blades", f"predicted, calibrated on TR {other} alone", found
        )


def _propeller_rows(title: str, how: str, found: published_propeller.Agreement) -> Iterator[Check]:
    """Power coefficient and efficiency of one comparison."""
    source = f"NACA {title}, {found.count} points"
    yield Check(source, f"C_P, rms; {how}", "%", 8.0, 3.0, 100.0 * found.power_rms, 1)
    yield Check(source, f"efficiency, rms; {how}", "", 0.03, 0.01, found.efficiency_rms, 3)


# --- Trade practice, and the second solver ------------------------------------------------------


def trade_practice() -> Iterator[Check]:
    """What every pilot's textbook says; common practice, no source."""
    efficiency, incidence = [], []
    for name, aircraft in AIRCRAFT.items():
        setting = Setting(
            0.87 * aircraft.engine.rated_rpm,
            BEST_POWER,
            power=np.array([0.55, 0.65, 0.75]) * aircraft.engine.rated_power,
        )
        point = solve_cruise(aircraft, condition(6000.0, mass=MASS[name]), setting=setting)
        efficiency.append(point.propeller_efficiency / aircraft.propeller.installation_factor)
        # From the chord line, which leans on the flat face of a 9 % Clark Y.
        incidence.append(np.degrees(point.angle_of_attack + np.arctan(0.035 * 0.0901 / 0.117)))
    practice = "common practice, no source"
    yield Check(
        practice,
        "cruise efficiency of the propeller alone, 80 to 90 %: distance from 85 %",
        "%",
        5.0,
        5.0,
        float(np.abs(100.0 * np.array(efficiency) - 85.0).max()),
        1,
    )
    yield Check(
        practice,
        "angle of attack of the blade in cruise, about 2 to 4°: distance from 3°",
        "°",
        1.5,
        1.5,
        float(np.abs(np.array(incidence) - 3.0).max()),
        1,
    )
    pressure, temperature = air(4000.0)
    losses = []
    for engine in ENGINES.values():
        cold, warm = (
            brake_power(
                power_line(
                    engine,
                    0.9 * engine.rated_rpm,
                    mixture=BEST_POWER,
                    pressure=pressure,
                    temperature=temperature + step,
                ),
                80e3,
            )
            for step in (0.0, 10.0 / 1.8)
        )
        losses.append(100.0 * (1.0 - float(warm / cold)))
    yield Check(
        practice,
        "10 °F cost 1 % of power: distance from 1 %",
        "%",
        0.3,
        0.3,
        float(np.abs(np.array(losses) - 1.0).max()),
        1,
    )
    yield _directions(practice)


def _directions(practice: str) -> Check:
    """Signs that must hold at a fixed blade angle; counted where they do not."""
    speed, rpm = np.array([60.0, 62.0]), np.array([2300.0, 2350.0])
    angle = np.radians(20.0)
    faster = blade_angle_of_attack(speed / (2300.0 / 60.0 * 1.93), blade_angle=angle)
    spinning = blade_angle_of_attack(60.0 / (rpm / 60.0 * 1.93), blade_angle=angle)
    stations = np.linspace(0.25, 0.99, 40)
    along = blade_angle_at_station(blade_5868_9(), angle, station=stations)
    wrong = (
        int(not faster[1] < faster[0])
        + int(not spinning[1] > spinning[0])
        + int((np.diff(along) >= 0.0).any())
    )
    return Check(
        practice,
        "airspeed lowers, rpm raises the angle of attack; blade angle falls to the tip: exceptions",
        "",
        0.0,
        0.0,
        float(wrong),
        0,
    )


def second_solver() -> Iterator[Check]:
    """The package against code written again from the formulas, one point at a time."""
    aircraft, each = INDEPENDENT_POINTS
    found = independent_solver.figures(independent_solver.compare(aircraft, each, seed=500))
    for name in ("power", "fuel_flow", "airspeed"):
        yield Check(
            f"second solver of these tests, {aircraft * each} random points",
            f"{name.replace('_', ' ')}, worst",
            "%",
            0.1,
            0.1,
            100.0 * found[name][0],
            2,
        )


CHECKS: tuple[Callable[[], Iterator[Check]], ...] = (
    standard_atmosphere,
    density_altitudes,
    humidity,
    ground_legs,
    altitude_power,
    chart_method,
    mixture,
    fits,
    propeller,
    trade_practice,
    second_solver,
)


def checks() -> list[Check]:
    """Every check, measured."""
    return [check for group in CHECKS for check in group()]


def page(measured: list[Check]) -> str:
    """Return the Markdown table."""
    head = "| source | what | asked, at most | goal | measured | |\n|---|---|---|---|---|---|"
    return "\n".join([head, *(check.line() for check in measured)])


def put_into(text: str, table: str) -> str:
    """Return a text with the table between its marks."""
    before, _, rest = text.partition(BEGIN)
    _, _, after = rest.partition(END)
    return f"{before}{BEGIN}\n{table}\n{END}{after}"


if __name__ == "__main__":
    finished = page(checks())
    if "--write" in sys.argv[1:]:
        README.write_text(put_into(README.read_text(encoding="utf-8"), finished), encoding="utf-8")
    sys.stdout.write(finished + "\n")
