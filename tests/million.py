"""Cards of random aircraft, every printed cell held under every limit by a second reading.

`python -m tests.million [--cells N] [--seed S]` composes cards until N cells were computed. Each
card is of the demonstration aircraft with limits, gauges, engine, mixtures, airframe, stops and
card choices drawn at random, every kind and shape of limit among them. Then, cell by cell, with
`tests.brute_force` and the solver of cruise points alone:

- no printed cell breaks a limit, by any true value that its printed reading may stand for;
- every forbidden cell breaks one, at both printed steps of manifold pressure that it could show;
- no printed cell lies outside the evidence, and every cell marked so does;
- no best setting of the back page breaks a limit.
"""

from __future__ import annotations

import argparse
import math
import random
import sys
import time
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Final

import numpy as np
from numpy.typing import NDArray

from cardgen.aircraft import Condition, Setting
from cardgen.atmosphere import vapour_pressure
from cardgen.cruise import CruisePoint, solve_cruise
from cardgen.fit import applied
from cardgen.limits.gauges import GaugeError
from cardgen.profile import load_profile
from cardgen.profile.assembly import Learned, model_of
from cardgen.profile.card_content import card_of
from cardgen.profile.document import Profile
from cardgen.tables.card import Card, CardTable, CellState

# Run as a module it stands in a package; pytest puts the folder of the tests on the path.
if __package__:
    from tests.brute_force import Column, Flying, broken, read_column, reading_of
    from tests.random_aircraft import FOOT, INCH, random_profile
else:
    from brute_force import Column, Flying, broken, read_column, reading_of
    from random_aircraft import FOOT, INCH, random_profile

PROFILES: Final = Path(__file__).parent.parent / "profiles" / "aircraft"
CERTAIN: Final = 4e-6  # share beyond a limit from which no rounding explains it
STEPS: Final = {"inHg": 1, "hPa": 0, "kPa": 1, "mmHg": 0, "cmHg": 1}
UNIT: Final = {
    "inHg": INCH, "hPa": 100.0, "kPa": 1000.0, "mmHg": 101325.0 / 760.0, "cmHg": 1013250.0 / 760.0,
}  # fmt: skip
FloatArray = NDArray[np.float64]


@dataclass(slots=True)
class Count:
    """Cells by state, what forbade them, and whatever is wrong."""

    cards: int = 0
    states: Counter[str] = field(default_factory=Counter)
    forbidden_by: Counter[str] = field(default_factory=Counter)
    near: int = 0  # printed within 1 % of manifold pressure of breaking something
    best: int = 0
    wrong: list[str] = field(default_factory=list)

    @property
    def cells(self) -> int:
        """Return how many cells were computed."""
        return sum(self.states.values())


def standard_temperature(altitude: float) -> float:
    """ISO 2533 below 11 km [K]."""
    return 288.15 - 0.0065 * altitude


def standard_pressure(altitude: float) -> float:
    """ISO 2533 below 11 km [Pa]."""
    return float(101325.0 * (standard_temperature(altitude) / 288.15) ** 5.255879812716677)


def calibrated(true_airspeed: float, pressure: float, temperature: float) -> float:
    """Calibrated airspeed of a true one by the subsonic pitot equation [m/s]."""
    mach = true_airspeed / math.sqrt(1.4 * 287.05287 * temperature)
    impact = pressure * ((1.0 + 0.2 * mach * mach) ** 3.5 - 1.0)
    return 340.29399 * math.sqrt(5.0 * ((impact / 101325.0 + 1.0) ** (2.0 / 7.0) - 1.0))


@dataclass(frozen=True, slots=True)
class _Place:
    """Where a run of settings is flown, and at what true rpm; arrays of one length."""

    altitude: FloatArray
    temperature: FloatArray
    mass: float
    rpm: FloatArray

    def solve(self, reader: Reader, mixture: int, **asked: FloatArray) -> CruisePoint:
        """Solve all of them, by power or by true manifold pressure."""
        humidity = reader.profile.card.relative_humidity
        vapour = vapour_pressure(humidity, self.temperature) if humidity else 0.0
        pressure = np.array([standard_pressure(value) for value in self.altitude.tolist()])
        return solve_cruise(
            reader.aircraft,
            Condition(pressure, self.temperature, self.mass, vapour),
            setting=Setting(self.rpm, reader.mixtures[mixture], **asked),
        )


@dataclass(frozen=True, slots=True)
class _Cell:
    """One cell: what it says, and the settings it could show by what would be printed."""

    state: CellState
    rpm: float
    full: bool
    settings: dict[float, Flying]
    shown: float
    exact: float
    share: float  # of the percent rating, at the power asked


class Reader:
    """Reads the card of one profile with the second reading of its limits."""

    def __init__(self, profile: Profile, learned: Learned | None) -> None:
        model = model_of(profile, learned)
        self.profile = profile
        self.covers = model.knowledge.covers
        self.aircraft, self.mixtures = applied(
            model.subject.aircraft, model.subject.mixtures, values=model.knowledge.values
        )
        propeller = profile.aircraft.propeller
        self.stops = (propeller.fine_stop, propeller.coarse_stop)
        self.names = [mixture.name for mixture in profile.mixtures]
        unit = profile.card.units.pressure
        self.unit, self.scale = UNIT[unit], 10.0 ** STEPS[unit]
        self.columns: dict[tuple[float, float], Column] = {}

    def true_rpm(self, reading: float) -> float:
        """Return the likely true rpm of a reading."""
        return _true(self.profile.gauges.tachometer, reading)

    def broken(self, rpm: float, flying: Flying, slack: float) -> tuple[str, ...]:
        """Return what a setting breaks."""
        key = (rpm, slack)
        if key not in self.columns:
            self.columns[key] = read_column(self.profile.limits, self.profile.gauges, *key)
        return broken(
            self.profile.limits,
            self.profile.gauges,
            self.columns[key],
            flying,
            stops=self.stops,
            slack=slack,
        )

    def flying(
        self, point: CruisePoint, at: int, place: _Place, reading: float, mixture: int
    ) -> Flying:
        """Return one solved setting, its airspeed calibrated here."""
        altitude, temperature = float(place.altitude[at]), float(place.temperature[at])
        speed = float(point.true_airspeed[at])
        power = float(point.power[at])
        return Flying(
            reading=reading,
            power=power,
            power_fraction=power / self.profile.percent_of.power,
            calibrated_airspeed=calibrated(speed, standard_pressure(altitude), temperature),
            full_throttle=float(point.full_throttle_manifold_pressure[at]),
            blade_angle=float(point.blade_angle[at]),
            pressure_altitude=altitude,
            temperature=temperature,
            mixture=self.names[mixture],
        )

    def outside_evidence(self, rpm: float, flying: Flying, slack: float) -> bool:
        """Say whether a setting is farther from the evidence than half a handbook's step."""
        seen = self.covers
        if seen is None:
            return False
        rated = self.profile.percent_of.power
        # The lowest pressure of the evidence is its greatest altitude.
        high, low = (_altitude_of(pressure) for pressure in seen.pressure)
        ranges = (
            (flying.pressure_altitude, low - 1000.0 * FOOT, high + 1000.0 * FOOT),
            (self.true_rpm(rpm), seen.rpm[0] - 50.0, seen.rpm[1] + 50.0),
            (flying.power_fraction, seen.power[0] / rated - 0.025, seen.power[1] / rated + 0.025),
            (flying.temperature, seen.temperature[0] - 5.0, seen.temperature[1] + 5.0),
        )
        return any(
            value < least - slack * max(abs(least), 1.0)
            or value > most + slack * max(abs(most), 1.0)
            for value, least, most in ranges
        )

    def read(self, card: Card, count: Count) -> None:
        """Hold every cell and every best setting of a card."""
        for table in card.tables:
            for complaint in self._table(table, count):
                where = f"{table.mixture} {table.power_fraction:.2f} {table.mass:.0f} kg"
                count.wrong.append(f"{where}: {complaint}")
        for complaint in self._best(card, count):
            count.wrong.append(f"best settings: {complaint}")

    def _table(self, table: CardTable, count: Count) -> Iterator[str]:
        """Yield what is wrong with the cells of a table."""
        choices = self.profile.card
        mixture = self.names.index(table.mixture)
        rows = [
            (altitude, deviation, rpm)
            for altitude in choices.altitude
            for deviation in choices.isa_deviation
            for rpm in choices.rpm
        ]
        place = _Place(
            np.array([altitude for altitude, _, _ in rows]),
            np.array([standard_temperature(a) + deviation for a, deviation, _ in rows]),
            table.mass,
            np.array([self.true_rpm(rpm) for _, _, rpm in rows]),
        )
        asked = np.full(len(rows), table.power_fraction * self.profile.percent_of.power)
        exact = place.solve(self, mixture, power=asked)
        gauge = self.profile.gauges.manifold_pressure
        reads = [reading_of(gauge, float(true)) / self.unit for true in exact.manifold_pressure]
        # No solution has no reading, which NumPy rounds to none.
        downs = (np.floor(np.array(reads) * self.scale + 1e-6) / self.scale).tolist()
        ups = (np.ceil(np.array(reads) * self.scale - 1e-6) / self.scale).tolist()
        steps = [
            (printed, place.solve(self, mixture, manifold_pressure=self._true_pressures(printed)))
            for printed in (downs, ups)
        ]
        states = table.state.reshape(-1).tolist()
        shown = table.manifold_pressure.reshape(-1).tolist()
        for at, (_, _, rpm) in enumerate(rows):
            state = CellState(states[at])
            count.states[state.name.casefold()] += 1
            full = bool(exact.full_throttle[at])
            # At full throttle both what the gauge reads and what is printed of it count.
            candidates = [(reads[at], exact)] if full else []
            candidates += [(values[at], point) for values, point in steps[: 1 if full else 2]]
            cell = _Cell(
                state,
                rpm,
                full,
                {
                    printed: self.flying(point, at, place, printed * self.unit, mixture)
                    for printed, point in candidates
                },
                shown[at],
                reads[at],
                float(exact.power[at]) / self.profile.percent_of.power,
            )
            for complaint in self._cell(cell, count):
                yield f"{complaint}: {cell}"

    def _true_pressures(self, printed: list[float]) -> FloatArray:
        """Return the likely true manifold pressures of printed ones [Pa]."""
        gauge = self.profile.gauges.manifold_pressure
        return np.array([_true(gauge, value * self.unit) for value in printed])

    def _cell(self, cell: _Cell, count: Count) -> Iterator[str]:
        """Yield what is wrong with one cell."""
        every = any if cell.full else all
        flown = list(cell.settings.values())
        band = self.profile.card.break_in
        running_in = band is not None and not (
            band.least_power_fraction - 1e-5 <= cell.share <= band.greatest_power_fraction + 1e-5
        )
        match cell.state:
            case CellState.OUT_OF_REACH:
                # Where only one step flies and that one breaks a limit, there is nothing to set.
                unsolved = [math.isnan(flying.power) for flying in flown]
                why = [self.broken(cell.rpm, flying, -CERTAIN) for flying in flown]
                if not any(unsolved) or not (cell.full or all(why)):
                    yield "out of reach, but flies"
            case CellState.FORBIDDEN:
                why = [self.broken(cell.rpm, flying, -CERTAIN) for flying in flown]
                count.forbidden_by.update({name for names in why for name in names})
                if not every(why) and not running_in:
                    yield "forbidden, but breaks nothing"
            case CellState.OUTSIDE_EVIDENCE:
                if not any(self.outside_evidence(cell.rpm, one, -CERTAIN) for one in flown):
                    yield "outside the evidence, but within it"
            case _:
                if running_in:
                    yield "printed, but outside the band of the break-in"
                yield from self._printed(cell, count)

    def _printed(self, cell: _Cell, count: Count) -> Iterator[str]:
        """Yield what is wrong with a cell that shows numbers."""
        nearest = min(cell.settings, key=lambda printed: abs(printed - cell.shown))
        # On a whole step the two solutions may lie on either side of it by their own closeness.
        steps = (cell.exact - cell.shown) * self.scale
        if not (-1e-3 if cell.full else -1.0 - 1e-3) < steps < 1.0 + 1e-3:
            yield "shows another manifold pressure than either step"
        # What is shown is flown; at full throttle so is what the gauge reads there.
        for flying in cell.settings.values() if cell.full else [cell.settings[nearest]]:
            if names := self.broken(cell.rpm, flying, CERTAIN):
                yield f"printed, but breaks {' and '.join(names)}"
            if self.outside_evidence(cell.rpm, flying, CERTAIN) and not cell.full:
                yield "printed, but outside the evidence"
        count.near += bool(self.broken(cell.rpm, cell.settings[nearest], -0.01))

    def _best(self, card: Card, count: Count) -> Iterator[str]:
        """Yield what is wrong with the best settings of the back page."""
        back = getattr(card, "back", None)
        for table in back.best if back is not None else ():
            mixture = self.names.index(table.mixture)
            for settings in table.settings:
                for at, altitude in enumerate(self.profile.card.altitude):
                    rpm, shown = float(settings.rpm[at]), float(settings.manifold_pressure[at])
                    if math.isnan(rpm):
                        continue
                    count.best += 1
                    place = _Place(
                        np.array([altitude]),
                        np.array([standard_temperature(altitude)]),
                        table.mass,
                        np.array([self.true_rpm(rpm)]),
                    )
                    point = place.solve(
                        self, mixture, manifold_pressure=self._true_pressures([shown])
                    )
                    flying = self.flying(point, 0, place, shown * self.unit, mixture)
                    if names := self.broken(rpm, flying, CERTAIN):
                        yield f"{settings.aim} {rpm:.0f} rpm {flying} breaks {names}"
                    band = self.profile.card.break_in
                    if band is not None and not (
                        band.least_power_fraction - 0.02
                        <= flying.power_fraction
                        <= band.greatest_power_fraction + 0.02
                    ):
                        yield f"{settings.aim} {rpm:.0f} rpm {flying} leaves the break-in band"


def _true(gauge: GaugeError, reading: float) -> float:
    """Return the likely true value of a reading."""
    pairs = sorted(zip(gauge.indicated, gauge.correction, strict=True))
    return reading + float(np.interp(reading, [x for x, _ in pairs], [c for _, c in pairs]))


def _altitude_of(pressure: float) -> float:
    """Pressure altitude of a pressure, ISO 2533 below 11 km [m]."""
    return float((288.15 / 0.0065) * (1.0 - (pressure / 101325.0) ** (1.0 / 5.255879812716677)))


def computed(cells: int, seed: int, *, told: int = 0) -> Count:
    """Compose and read cards until a number of cells was computed.

    Parameters
    ----------
    cells : int
        How many at least [-]
    seed : int
        Where chance begins [-]
    told : int
        Cards between two lines of progress on stderr, none where 0 [-]

    Returns
    -------
    Count
        What was found [-]
    """
    bases = (load_profile(PROFILES / "specimen.yaml"),)
    count = Count()
    while count.cells < cells:
        rng = random.Random(f"{seed} {count.cards}")
        profile, learned = random_profile(rng, rng.choice(bases))
        before = len(count.wrong)
        Reader(profile, learned).read(card_of(profile, learned), count)
        count.wrong[before:] = [f"card {count.cards}: {text}" for text in count.wrong[before:]]
        count.cards += 1
        if told and count.cards % told == 0:
            sys.stderr.write(f"{count.cells} cells, {len(count.wrong)} wrong\n")
    return count


def main() -> int:
    """Compute, print the counts, and return 1 where anything is wrong."""
    parser = argparse.ArgumentParser(prog="python -m tests.million", description=__doc__)
    parser.add_argument("--cells", type=int, default=1_000_000)
    parser.add_argument("--seed", type=int, default=1)
    asked = parser.parse_args()
    began = time.monotonic()
    count = computed(asked.cells, asked.seed, told=25)
    lines = [
        f"{count.cells} cells of {count.cards} cards in {time.monotonic() - began:.0f} s",
        *(f"  {number:8} {name}" for name, number in count.states.most_common()),
        f"  {count.near:8} of the printed within 1 % of breaking a limit",
        f"  {count.best:8} best settings besides",
        "forbidden by (several may forbid one)",
        *(f"  {number:8} {name}" for name, number in count.forbidden_by.most_common()),
        f"wrong: {len(count.wrong)}",
        *count.wrong[:30],
    ]
    sys.stdout.write("\n".join(lines) + "\n")
    return 1 if count.wrong else 0


if __name__ == "__main__":
    sys.exit(main())
