"""Invented listings and charts for cards of tests: numbers without a model behind them."""

from __future__ import annotations

import random

import numpy as np

from cardgen.tables.back import (
    Area,
    Axis,
    Back,
    BestSettings,
    BestTable,
    Chart,
    Curve,
    Panel,
    RowTable,
    Supply,
)
from cardgen.tables.card import CardTable
from cardgen.tables.choices import CardChoices
from cardgen.tables.printed import decimals
from cardgen.tables.range import range_tables

WINDS = (-15.0, -7.5, 0.0, 7.5, 15.0)  # [m/s]


def make_back(
    choices: CardChoices, tables: tuple[CardTable, ...], *, reasons: int, seed: int
) -> Back:
    rng = random.Random(seed)
    winds = WINDS[rng.randrange(3) :: rng.randint(1, 3)] or (0.0,)
    return Back(
        rows=_rows(tables[0], rng, decimals(choices.units).pressure)
        if choices.altitude_kind == "density"
        else None,
        ranges=range_tables(
            tables,
            Supply(usable=0.28, reserve=0.04, wind=winds),
            units=choices.units,
            fuel_density=719.0,
        ),
        best=tuple(_best(table, rng) for table in _one_of_each(tables)),
        charts=(
            _power_chart(choices, reasons=reasons, rng=rng),
            _speed_chart([table.mixture for table in _one_of_each(tables)]),
        ),
    )


def _one_of_each(tables: tuple[CardTable, ...]) -> list[CardTable]:
    found: dict[tuple[str, float], CardTable] = {}
    for table in tables:
        found.setdefault((table.mixture, table.mass), table)
    return list(found.values())


def _rows(table: CardTable, rng: random.Random, places: int) -> RowTable:
    rows = [[rng.choice([*table.altitude, float("nan")]) for _ in range(8)] for _ in range(13)]
    return RowTable(
        pressure_altitude=tuple(float(1000 * k) for k in range(13)),
        temperature=tuple(float(value) for value in range(-30, 41, 10)),
        row=np.array(rows),
        change=np.where(
            np.isnan(rows),
            np.nan,
            np.array([[rng.randint(-21, 21) / 10**places for _ in r] for r in rows]),
        ),
        breaks=np.array([[rng.random() < 0.1 for _ in r] for r in rows]) & ~np.isnan(rows),
        breaking=((0.65, "Best power", 2200.0), (0.75, "Economy", 2500.0)),
        error=(0.15, 0.05, 1.0),
        rise=rng.choice([None, 2.4]),
    )


def _best(table: CardTable, rng: random.Random) -> BestTable:
    count = len(table.altitude)

    def settings(aim: str, scale: float) -> BestSettings:
        none = np.array([rng.random() < 0.1 for _ in range(count)])

        def known(low: float, high: float, places: int) -> np.ndarray:
            values = [round(rng.uniform(low, high), places) for _ in range(count)]
            return np.where(none, np.nan, values)

        return BestSettings(
            aim="range" if aim == "range" else "endurance",
            rpm=np.where(none, np.nan, 2100.0 + 50.0 * np.arange(count)),
            manifold_pressure=known(16.0, 22.0, 0),
            fuel_flow=known(5.0 * scale, 8.0 * scale, 0),
            true_airspeed=known(90.0, 140.0, 0),
            distance_per_fuel=known(4.0, 19.0, 1),
            at_edge=np.array([rng.random() < 0.5 for _ in range(count)]) & ~none,
        )

    return BestTable(
        mixture=table.mixture,
        mass=table.mass,
        altitude=table.altitude,
        settings=(settings("range", 1.0), settings("endurance", 0.8)),
    )


def _power_chart(choices: CardChoices, *, reasons: int, rng: random.Random) -> Chart:
    def ceiling(x: float, k: int) -> float:
        return 92.0 + 4.0 * k - 0.0028 * x

    def lines(k: int) -> tuple[Curve, ...]:
        found = []
        for pressure in range(16, 30, 2):
            points = [
                (float(x), 20.0 + 2.4 * (pressure - 8.0) + 4.0 * k + 0.0008 * x)
                for x in range(0, 12001, 1000)
            ]
            inside = tuple((x, y) for x, y in points if y <= ceiling(x, k))
            if len(inside) > 1:
                found.append(Curve("setting", str(pressure), inside))
        top = tuple((float(x), ceiling(x, k)) for x in range(0, 12001, 1000))
        return (*found, Curve("ceiling", "full throttle", top))

    def areas(k: int) -> tuple[Area, ...]:
        if not reasons:
            return ()
        pieces = tuple(
            (
                (float(x), 78.0),
                (float(x + 1000), 78.0),
                (float(x + 1000), max(78.0, ceiling(x + 1000, k))),
                (float(x), max(78.0, ceiling(x, k))),
            )
            for x in range(0, 5000, 1000)
        )
        return (Area(rng.randrange(reasons), pieces),)

    return Chart(
        title="Power and altitude, Best power",
        lead="Thin lines: manifold pressure. Thick line: full throttle. Hatched: forbidden.",
        across=Axis("Altitude, ft", 0.0, 12000.0, tuple(float(x) for x in range(0, 12001, 2000))),
        up=Axis("% power", 40.0, 110.0, tuple(float(y) for y in range(40, 111, 10))),
        panels=tuple(
            Panel(f"{rpm:.0f} rpm", lines(k), areas(k)) for k, rpm in enumerate(choices.rpm)
        ),
    )


def _speed_chart(mixtures: list[str]) -> Chart:
    rays = tuple(
        Curve("ray", f"{per} nm/gal", ((100.0, 100.0 / per), (170.0, 170.0 / per)))
        for per in (12, 14, 16, 18)
    )
    curves = tuple(
        Curve(
            "setting",
            f"{feet} ft",
            tuple((v + 0.001 * feet, 5.0 + 0.0022 * (v - 95.0) ** 2) for v in range(110, 151, 5)),
        )
        for feet in (2000, 7000, 12000)
    )
    return Chart(
        title="Fuel flow and airspeed",
        lead="Thick lines: fuel flow. Thin lines: nm/gal in still air.",
        across=Axis(
            "True airspeed, kt", 100.0, 170.0, tuple(float(v) for v in range(100, 171, 10))
        ),
        up=Axis("Fuel flow, gal/h", 4.0, 14.0, tuple(float(f) for f in range(4, 15, 2))),
        panels=tuple(Panel(name, (*rays, *curves)) for name in mixtures),
    )
