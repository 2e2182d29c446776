"""A chart shows what the model computes, its words stand on their lines, and read-back holds it."""

from __future__ import annotations

import re
from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np
import pytest
from card_factory import Sketch, make_card, make_identity

from cardgen.errors import ReleaseError
from cardgen.limits import Verdict
from cardgen.profile import load_profile
from cardgen.profile.assembly import model_of
from cardgen.profile.card_content import card_of
from cardgen.render.boxes import Ground, Run, Trace
from cardgen.render.chart import ChartPart, place_panels, side_by_side
from cardgen.render.edition import Edition
from cardgen.render.html import to_html
from cardgen.render.html_readback import read_back_html
from cardgen.render.readback import read_back
from cardgen.render.typesetting import typeset
from cardgen.tables.back import Chart, Curve
from cardgen.tables.card import Card
from cardgen.tables.rows import situation_of
from cardgen.tables.solution import Model, Solution, solve
from cardgen.tables.verdict import judge
from cardgen.units import from_unit, to_unit

PROFILE = Path(__file__).parent.parent / "profiles" / "aircraft" / "specimen.yaml"
BACK = Sketch(altitudes=5, rpm=3, tables=2, reasons=2, back=True)


@cache
def demonstration() -> tuple[Model, Card]:
    profile = load_profile(PROFILE)
    return model_of(profile), card_of(profile)


def power_chart() -> tuple[Model, Card, Chart]:
    model, card = demonstration()
    return model, card, card.back.charts[0]


def solved(model: Model, card: Card, *, rpm: float, feet: float, inhg: float) -> Solution:
    return solve(
        model,
        situation_of(
            np.asarray(from_unit(feet, "ft")),
            np.zeros(1),
            by_density=True,
            mass=np.array(card.choices.mass[-1]),
            mixture=0,
        ),
        indicated_rpm=rpm,
        indicated_pressure=np.asarray(from_unit(inhg, "inHg")),
        with_tolerance=False,
    )


# --------------------------------------------------------------------------------------- numbers


def test_every_corner_of_a_pressure_line_is_what_the_model_gives_there() -> None:
    model, card, chart = power_chart()
    for panel in chart.panels:
        rpm = float(panel.name.split()[0])
        for curve in (one for one in panel.curves if one.kind == "setting"):
            for feet, percent in curve.points[:-1:4]:
                found = solved(model, card, rpm=rpm, feet=feet, inhg=float(curve.label))
                assert 100.0 * float(found.power_fraction[0]) == pytest.approx(percent, abs=0.02)


def test_pressure_lines_rise_with_altitude_and_end_at_full_throttle() -> None:
    """Less back pressure and colder air give more power at one pressure (Taylor, vol. 1)."""
    _, _, chart = power_chart()
    for panel in chart.panels:
        ceiling = next(curve for curve in panel.curves if curve.kind == "ceiling")
        x, y = np.array(ceiling.points).T
        assert (np.diff(y) < 0.0).all()
        for curve in (one for one in panel.curves if one.kind == "setting"):
            power = [point[1] for point in curve.points]
            assert power == sorted(power)
            for feet, percent in curve.points:
                assert percent <= np.interp(feet, x, y) + 0.15


def test_more_rpm_gives_more_power_at_one_pressure_and_altitude() -> None:
    _, _, chart = power_chart()
    first = [
        next(curve for curve in panel.curves if curve.label == "20").points[0][1]
        for panel in chart.panels
    ]
    assert first == sorted(first)


def test_forbidden_ground_lies_where_the_judge_says_and_nowhere_else() -> None:
    """A setting in the middle of each strip is outside the very limit its letter names; one just
    below the lowest strip is not outside that limit."""
    model, card, chart = power_chart()
    checked = 0
    for panel in chart.panels:
        rpm = float(panel.name.split()[0])
        for area in panel.areas:
            reason = card.reasons[area.reason]
            for piece in area.pieces[:6]:
                feet = sum(x for x, _ in piece) / len(piece)
                low, high = min(y for _, y in piece), max(y for _, y in piece)
                if high - low < 6.0:
                    continue
                inside = _at_power(model, card, rpm=rpm, feet=feet, percent=0.5 * (low + high))
                below = _at_power(model, card, rpm=rpm, feet=feet, percent=low - 4.0)
                assert _breaks(model, inside) is not None, (panel.name, feet)
                assert reason.text not in (_breaks(model, below) or ())
                checked += 1
    assert checked > 5


def _at_power(model: Model, card: Card, *, rpm: float, feet: float, percent: float) -> Solution:
    return solve(
        model,
        situation_of(
            np.asarray(from_unit(feet, "ft")),
            np.zeros(1),
            by_density=True,
            mass=np.array(card.choices.mass[-1]),
            mixture=0,
        ),
        indicated_rpm=rpm,
        power_fraction=percent / 100.0,
        with_tolerance=False,
    )


def _breaks(model: Model, solution: Solution) -> list[str] | None:
    """Statements of the limits that a setting breaks, None where it breaks none."""
    broken = [
        judgement.statement
        for judgement in judge(model, solution).judgements
        if (judgement.verdict == Verdict.OUTSIDE).any()
    ]
    return broken or None


def test_points_of_the_speed_chart_are_flown_at_their_altitude() -> None:
    model, card = demonstration()
    chart = card.back.charts[-1]
    density = model.subject.aircraft.engine.fuel_density
    rpm = card.choices.rpm[len(card.choices.rpm) // 2]
    curves = [curve for curve in chart.panels[0].curves if curve.kind == "setting"]
    assert len(curves) == 3
    for curve in curves:
        feet = float(curve.label.split()[0])
        asked = np.linspace(0.40, 0.90, 400)
        found = solve(
            model,
            situation_of(
                np.asarray(from_unit(feet, "ft")),
                np.zeros(1),
                by_density=True,
                mass=np.array(card.choices.mass[-1]),
                mixture=0,
            ),
            indicated_rpm=rpm,
            power_fraction=asked,
            with_tolerance=False,
        )
        speed = to_unit(found.point.true_airspeed, "kt")
        flow = to_unit(found.point.fuel_flow / density, "gal/h")
        for knots, gallons in curve.points:
            assert np.interp(knots, speed, flow) == pytest.approx(gallons, abs=0.02)


def test_rays_are_of_one_distance_on_a_unit_of_fuel() -> None:
    _, card = demonstration()
    for panel in card.back.charts[-1].panels:
        for curve in (one for one in panel.curves if one.kind == "ray"):
            per = float(curve.label.split()[0])
            for knots, gallons in curve.points:
                assert knots / gallons == pytest.approx(per)


# ----------------------------------------------------------------------------------------- drawing


def boxes_of(card: Card, chart: Chart) -> list[object]:
    part = ChartPart(chart, tuple(range(len(chart.panels))), side_by_side(chart, 332.0), 110.0)
    return list(place_panels(part, card, x=0.0, top=800.0, measure=332.0))


@pytest.mark.parametrize("place", [0, 1, 2])
def test_every_line_drawn_carries_its_words(place: int) -> None:
    _, card = demonstration()
    chart = card.back.charts[place]
    labels = {curve.label for panel in chart.panels for curve in panel.curves}
    boxes = boxes_of(card, chart)
    lines = [box for box in boxes if isinstance(box, Trace)]
    # Figures of the axes are regular, words on lines bold, and on rays unlike any figure.
    said = [
        box
        for box in boxes
        if isinstance(box, Run) and box.text in labels and (box.face == "bold" or "/" in box.text)
    ]
    assert len(lines) == len(said) >= 4 * len(chart.panels)


def test_lines_and_ground_stay_within_the_fields() -> None:
    _, card, chart = power_chart()
    for box in boxes_of(card, chart):
        if isinstance(box, Trace):
            assert all(-0.01 <= x <= 332.01 for x, _ in box.points)
        elif isinstance(box, Ground):
            assert all(-0.01 <= x <= 332.01 for piece in box.pieces for x, _ in piece)


# --------------------------------------------------------------------------------------- read-back


def edition_of(card: Card) -> Edition:
    return Edition(card, make_identity(), 1, None)


def with_label(card: Card, label: str) -> Card:
    """Return the card with other words on the second line of its first chart."""
    chart = card.back.charts[0]
    panel = chart.panels[0]
    curves = (panel.curves[0], replace(panel.curves[1], label=label), *panel.curves[2:])
    other = replace(chart, panels=(replace(panel, curves=curves), *chart.panels[1:]))
    return replace(card, back=replace(card.back, charts=(other, *card.back.charts[1:])))


@pytest.mark.parametrize("label", ["22", "19", "20 "])
def test_other_words_on_a_line_are_caught_on_page_and_screen(label: str) -> None:
    card = make_card(BACK)
    other = edition_of(with_label(card, label if label != "20 " else "21"))
    page = typeset(other.card, other.identity, issue=1)
    with pytest.raises(ReleaseError, match="Power and altitude"):
        read_back(page, edition_of(card))
    with pytest.raises(ReleaseError):
        read_back_html(to_html(other), edition_of(card))


def test_a_line_drawn_elsewhere_is_caught() -> None:
    """Its words stand where the card has no such line."""
    card = make_card(BACK)
    chart = card.back.charts[0]
    panel = chart.panels[0]
    moved = tuple((x, y + 6.0) for x, y in panel.curves[1].points)
    curves = (panel.curves[0], Curve("setting", panel.curves[1].label, moved), *panel.curves[2:])
    other = replace(chart, panels=(replace(panel, curves=curves), *chart.panels[1:]))
    shifted = replace(card, back=replace(card.back, charts=(other, *card.back.charts[1:])))
    with pytest.raises(ReleaseError, match=r"another line|says"):
        read_back(typeset(shifted, make_identity(), issue=1), edition_of(card))


def test_every_changed_digit_of_a_back_page_is_caught() -> None:
    """Corrupts digits of listings and charts, one at a time."""
    edition = edition_of(make_card(replace(BACK, altitudes=2, rpm=2, tables=1)))
    good = typeset(edition.card, edition.identity, issue=1, compress=False)
    read_back(good, edition)
    places = [
        match.start(1) + k
        for match in re.finditer(rb"\(([^()]*)\) Tj", good)
        for k, byte in enumerate(match.group(1))
        if 48 <= byte <= 57
    ]
    assert len(places) > 400
    missed = []
    for place in places[:: len(places) // 150]:
        bad = bytearray(good)
        bad[place] = 48 + (bad[place] - 47) % 10
        try:
            read_back(bytes(bad), edition)
        except ReleaseError:
            continue
        missed.append(good[place - 30 : place + 10])
    assert missed == []
