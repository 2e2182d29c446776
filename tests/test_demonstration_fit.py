"""The demonstration aircraft: its invented handbook, and how near the fit comes to the truth."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hidden_truth import KNOT, Truth, fly
from specimen_handbook import FILE, MIXTURES, line

from cardgen.atmosphere import standard_temperature
from cardgen.constants import FOOT, HOUR, INCH_OF_MERCURY, POUND
from cardgen.limits.gauges import true_manifold_pressure
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.card_content import card_of
from cardgen.profile.fit_file import fit_path, learned_for
from cardgen.profile.fit_record import read_fit
from cardgen.profile.fitting import fit_points, start_of
from cardgen.profile.points import read_points
from cardgen.tables.card import CardTable, CellState
from cardgen.tables.solution import Situation, solve
from cardgen.tables.verdict import judge, status_words

AIRCRAFT = Path(__file__).parents[1] / "profiles" / "aircraft" / "specimen.yaml"


def test_the_handbook_is_what_the_hidden_aeroplane_does() -> None:
    """Rows picked from the file are those of the independent computation, to the printed digit."""
    rows = [text for text in FILE.read_text().splitlines() if text[0].isdigit()]
    for text in rows[::9]:
        altitude, deviation, rpm, _, percent, _, _, weight, mixture, _ = text.split(",")
        numbers = [int(cell) for cell in (altitude, deviation, rpm, percent, weight)]
        assert text == line(Truth(), *numbers, MIXTURES.index(mixture))[0]


def test_the_committed_fit_is_the_fit_of_the_committed_handbook() -> None:
    """A fit file that belongs to other rows, or to older equations, would go unnoticed."""
    profile = load_profile(AIRCRAFT)
    record = read_fit(fit_path(profile), profile)
    points = read_points(profile, profile.evidence)
    assert record.rows == points.row_digests
    found = fit_points(profile, points, start_of(profile, points, record=None))
    away = (record.knowledge.values - found.values) / found.standard_error
    assert np.abs(away).max() < 0.01


def test_the_card_holds_the_truth_within_its_tolerances() -> None:
    """Between the rows of the handbook at least 90 % of the numbers lie in their 95 % tolerance.

    The tolerance also covers how flights scatter, which the truth does not: all may lie inside.
    """
    profile = load_profile(AIRCRAFT)
    model = model_of(profile, learned_for(profile))
    altitudes, rpms, shares = np.arange(2000, 12001, 2000), (2200, 2350, 2500), (0.55, 0.65, 0.75)
    inside: list[bool] = []
    for mixture in range(2):
        height, rpm, share = np.meshgrid(altitudes * FOOT, rpms, shares, indexing="ij")
        situation = Situation(height, standard_temperature(height), 2800.0 * POUND, mixture)
        solved = solve(model, situation, indicated_rpm=rpm, power_fraction=share)
        assert solved.tolerance is not None
        reads = solved.indicated_manifold_pressure
        pressure = true_manifold_pressure(profile.gauges, reads) / INCH_OF_MERCURY
        flow = solved.point.fuel_flow / (6.0 * POUND) * HOUR
        tolerance = solved.tolerance
        for index in np.ndindex(height.shape):
            truth = fly(
                Truth(),
                height[index] / FOOT,
                0.0,
                float(rpm[index]) + 9.0,  # what the tachometer's calibration makes of it, about
                2800.0,
                mixture,
                percent=100.0 * share[index],
            )
            inside += [
                abs(truth.map_inhg - pressure[index])
                <= tolerance.manifold_pressure[index] / INCH_OF_MERCURY,
                abs(truth.fuel_flow_gph - flow[index])
                <= tolerance.fuel_flow[index] / (6.0 * POUND) * HOUR,
                abs(truth.tas_kt - solved.point.true_airspeed[index] / KNOT)
                <= tolerance.true_airspeed[index] / KNOT,
            ]
    assert np.mean(inside) >= 0.90


@pytest.mark.parametrize(("quantity", "most"), [(0, 0.35), (1, 0.45), (2, 3.5)])
def test_the_demonstration_card_has_tolerances_one_can_fly_with(quantity: int, most: float) -> None:
    """About what the gauges of a light aeroplane can be read to; common practice, no source."""
    profile = load_profile(AIRCRAFT)
    model = model_of(profile, learned_for(profile))
    height = np.arange(2000, 12001, 2000) * FOOT
    situation = Situation(height, standard_temperature(height), 2800.0 * POUND, 0)
    tolerance = solve(model, situation, indicated_rpm=2350.0, power_fraction=0.65).tolerance
    assert tolerance is not None
    found = (
        tolerance.manifold_pressure / INCH_OF_MERCURY,
        tolerance.fuel_flow / (6.0 * POUND) * HOUR,
        tolerance.true_airspeed / KNOT,
    )[quantity]
    assert found.max() < most


def test_beyond_the_handbook_table_and_card_say_so() -> None:
    """The handbook ends at 44 % power: 40 % is told as outside the evidence, 55 % is not."""
    profile = load_profile(AIRCRAFT)
    learned = learned_for(profile)
    model = model_of(profile, learned)
    height = np.array([8000.0]) * FOOT
    situation = Situation(height, standard_temperature(height), 2800.0 * POUND, 0)
    words = [
        status_words(judge(model, solved), solved)
        for share in (0.40, 0.55)
        for solved in (solve(model, situation, indicated_rpm=2350.0, power_fraction=share),)
    ]
    assert words == [["evidence"], ["ok"]]
    few = replace(profile.card, power_fraction=(0.40, 0.55))
    card = card_of(replace(profile, card=few), learned)

    def marked(table: CardTable) -> bool:
        return bool((table.state == CellState.OUTSIDE_EVIDENCE).any())

    assert all(marked(table) == (table.power_fraction < 0.5) for table in card.tables)
