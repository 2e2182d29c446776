"""No printed cell breaks a limit, and card and check tell one story."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
from million import computed

from cardgen.limits import Verdict
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.card_content import card_of
from cardgen.tables.card import Card, CellState
from cardgen.tables.many import check_many
from cardgen.tables.solution import Model
from cardgen.units import from_unit

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


def _checked(model: Model, card: Card) -> list[tuple[np.ndarray, np.ndarray]]:
    """Check what every table prints by the function behind `cardgen check --points`."""
    found = []
    units, choices = card.choices.units, card.choices
    for table in card.tables:
        shown = table.state <= CellState.FULL_THROTTLE
        altitude = np.array(choices.altitude)[:, None, None]
        temperature = 288.15 - 0.0065 * altitude + np.array(choices.isa_deviation)[:, None]
        arrays = np.broadcast_arrays(altitude, temperature, np.array(table.rpm))
        flat = [array[shown] for array in arrays]
        count = int(shown.sum())
        checked = check_many(
            model,
            manifold_pressure=from_unit(table.manifold_pressure[shown], units.pressure),
            rpm=flat[2],
            pressure_altitude=flat[0],
            temperature=flat[1],
            temperature_read=np.zeros(count, dtype=np.bool_),
            mass=np.full(count, table.mass),
            mixture=np.full(count, model.mixture_index(table.mixture)),
        )
        found.append((checked.verdict, checked.power_fraction))
    return found
