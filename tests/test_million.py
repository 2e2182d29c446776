"""No printed cell breaks a limit, and card and check tell one story."""

from __future__ import annotations

import csv
import json
import random
from collections import Counter
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from million import computed
from numpy.typing import NDArray
from random_aircraft import random_profile

from cardgen.cli.main import run
from cardgen.limits import GaugeError, Limits, Source, Verdict
from cardgen.limits.kinds import LeastManifoldPressure
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.card_content import card_of
from cardgen.tables.card import Card, CardTable, CellState
from cardgen.tables.many import Checked, check_many
from cardgen.tables.solution import Model, Situation, solve
from cardgen.units import from_unit, to_unit

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

DEMO = Path(__file__).parent.parent / "profiles" / "aircraft" / "specimen.yaml"


def test_no_printed_cell_breaks_a_limit_and_every_forbidden_one_does() -> None:
    """A small share of `python -m tests.million`, which reads a million cells."""
    count = computed(20_000, seed=0)
    assert count.wrong == []
    assert count.cells >= 20_000
    # Every kind of limit has forbidden something, and enough was printed to speak of.
    kinds = {
        "restricted_rpm", "manifold_pressure_curve", "ratings", "rpm_range", "leaning",
        "least_manifold_pressure", "altitude_schedule", "airspeed", "altitude", "temperature",
        "full_throttle", "governing_range",
    }  # fmt: skip
    assert kinds <= set(count.forbidden_by) | {"altitude", "airspeed"}
    assert count.states["value"] + count.states["full_throttle"] > 2_000
    assert count.near > 500


def test_every_printed_setting_flies() -> None:
    """Near the least power of level flight the printed step below it has none: it is not shown."""
    profile = load_profile(DEMO)
    card = replace(
        profile.card,
        altitude_kind="pressure",
        altitude=tuple(300.0 * step for step in range(12)),
        power_fraction=tuple(0.28 + 0.004 * step for step in range(30)),
        mass=(1360.0,),
    )
    # Wide stops and no limits: nothing else may stand in the way.
    aircraft = profile.aircraft
    propeller = replace(aircraft.propeller, fine_stop=0.05, coarse_stop=0.8)
    bare = replace(
        profile,
        aircraft=replace(aircraft, propeller=propeller),
        card=card,
        limits=replace(profile.limits, least_manifold_pressure=(), rpm_range=()),
    )
    composed, model = card_of(bare), model_of(bare)
    states = np.concatenate([table.state.ravel() for table in composed.tables])
    assert (states == CellState.OUT_OF_REACH).sum() > 100
    assert (states == CellState.VALUE).sum() > 100
    for verdict, power in _checked(model, composed):
        assert not np.isnan(power).any()
        assert not (verdict == Verdict.OUTSIDE).any()


def test_full_throttle_is_forbidden_where_its_printed_reading_breaks_a_limit() -> None:
    """The gauge reads a little more than the digits shown: both must keep a least pressure."""
    profile = load_profile(DEMO)
    exact = GaugeError((0.0,), (0.0,), 0.0, measured=True)
    bare = replace(
        profile,
        gauges=replace(profile.gauges, tachometer=exact, manifold_pressure=exact),
        limits=Limits(ratings=profile.limits.ratings[1:], stated_none=()),
    )
    card, model = card_of(bare), model_of(bare)
    table = card.tables[-1]
    reads, full = _readings(model, card, table)
    shown = table.state == CellState.FULL_THROTTLE
    printed = np.asarray(from_unit(table.manifold_pressure, card.choices.units.pressure))
    assert (full == shown).all()
    at = tuple(int(place[0]) for place in np.nonzero(shown & (reads > printed + 50.0)))
    # Kept by what the gauge reads, not by what is printed of it.
    floor = (float(reads[at] + printed[at]) / 2.0,)
    least = LeastManifoldPressure("least", (0.0,), floor, "as written", Source("Invented"))
    strict = replace(bare, limits=replace(bare.limits, least_manifold_pressure=(least,)))
    assert card_of(strict).tables[-1].state[at] == CellState.FORBIDDEN


def _many(model: Model, table: CardTable, card: Card, shown: Bools, pressure: Floats) -> Checked:
    """Check some cells of a table at given readings [Pa], as `cardgen check --points` does."""
    choices = card.choices
    altitude = np.array(choices.altitude)[:, None, None]
    temperature = 288.15 - 0.0065 * altitude + np.array(choices.isa_deviation)[:, None]
    arrays = np.broadcast_arrays(altitude, temperature, np.array(table.rpm))
    altitude, temperature, rpm = (array[shown] for array in arrays)
    return check_many(
        model,
        manifold_pressure=pressure,
        rpm=rpm,
        pressure_altitude=altitude,
        temperature=temperature,
        temperature_read=np.zeros(rpm.size, dtype=np.bool_),
        mass=np.full(rpm.size, table.mass),
        mixture=np.full(rpm.size, model.mixture_index(table.mixture)),
    )


def _checked(model: Model, card: Card) -> Iterator[tuple[Floats, Floats]]:
    """Yield verdicts and powers of what every table prints."""
    for table in card.tables:
        shown = table.state <= CellState.FULL_THROTTLE
        printed = from_unit(table.manifold_pressure[shown], card.choices.units.pressure)
        checked = _many(model, table, card, shown, np.asarray(printed))
        yield checked.verdict, checked.power_fraction


def _readings(model: Model, card: Card, table: CardTable) -> tuple[Floats, Bools]:
    """Return what the gauge reads at the asked power in every cell [Pa], and where it is full."""
    choices = card.choices
    altitude = np.array(choices.altitude)[:, None, None]
    solution = solve(
        model,
        Situation(
            altitude,
            288.15 - 0.0065 * altitude + np.array(choices.isa_deviation)[:, None],
            table.mass,
            model.mixture_index(table.mixture),
        ),
        indicated_rpm=np.array(table.rpm),
        power_fraction=table.power_fraction,
        with_tolerance=False,
    )
    return solution.indicated_manifold_pressure, solution.point.full_throttle


@pytest.mark.parametrize("seed", ["demo", *range(5)])
def test_a_cell_is_forbidden_if_and_only_if_check_says_outside(seed: int | str) -> None:
    """What is printed is not outside; what is forbidden is, at either step it could show."""
    profile, learned = load_profile(DEMO), None
    if seed != "demo":
        profile, learned = random_profile(random.Random(seed), profile)
        profile = replace(profile, card=replace(profile.card, break_in=None))
    card, model = card_of(profile, learned), model_of(profile, learned)
    unit, places = card.choices.units.pressure, card.decimals.pressure
    counted = Counter[str]()
    for verdict, power in _checked(model, card):
        assert not (verdict == Verdict.OUTSIDE).any()
        assert not np.isnan(power).any()
        counted["printed"] += verdict.size
    for table in card.tables:
        forbidden = table.state == CellState.FORBIDDEN
        reads, full = _readings(model, card, table)
        exact = np.asarray(to_unit(reads[forbidden], unit))
        steps = [
            np.asarray(from_unit(way(exact * 10.0**places + hair) / 10.0**places, unit))
            for way, hair in ((np.floor, 1e-6), (np.ceil, -1e-6))
        ]
        lower, upper, open_throttle = (
            _many(model, table, card, forbidden, pressure).verdict == Verdict.OUTSIDE
            for pressure in (*steps, reads[forbidden])
        )
        assert np.where(full[forbidden], lower | open_throttle, lower & upper).all()
        counted["forbidden"] += int(forbidden.sum())
    assert counted["printed"] > 50
    assert counted["forbidden"] > 5


def test_the_command_allows_what_the_demonstration_card_prints(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The card's own CSV, handed to `cardgen check --points`, breaks nothing."""
    assert run(["make", str(DEMO), "-o", str(tmp_path), "--format", "csv"]) == 0
    rows = list(csv.DictReader((tmp_path / "specimen.csv").read_text().splitlines()))
    printed = [row for row in rows if row["state"] in ("value", "full_throttle")]
    lines = ["map_inhg,rpm,pressure_altitude_ft,weight_lb,mixture"]
    for row in printed:
        # In standard air, which a card by density altitude is for, both altitudes are one.
        numbers = (row["manifold_pressure_inhg"], row["rpm"], row["density_altitude_ft"])
        lines.append(",".join((*numbers, row["mass_lb"], row["mixture"])))
    settings = tmp_path / "settings.csv"
    settings.write_text("\n".join(lines) + "\n")
    capsys.readouterr()
    assert run(["check", str(DEMO), "--points", str(settings), "--json"]) == 0
    checked = json.loads(capsys.readouterr().out)
    assert len(checked) == len(printed) > 50
    assert {one["verdict"] for one in checked} <= {"inside", "caution", "unknown"}
