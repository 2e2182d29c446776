"""Bars on a card's cells, and the settings offered instead."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from limits_specimen import (
    ALL,
    BLADES,
    CURVE,
    EXACT,
    INHG,
    LEANING,
    MANUAL,
    SHEET,
    flown,
    only,
)

from cardgen.constants import KNOT
from cardgen.limits import Flown, GaugeError, Gauges, Limits, Verdict, allowed_nearby, bars, check
from cardgen.limits.bars import bars_of, letter
from cardgen.limits.finding import FloatArray
from cardgen.limits.gauges import UNMEASURED_GAUGES
from cardgen.limits.nearby import candidate_rpm

RPM = np.array([2000.0, 2200.0, 2300.0, 2400.0])


def test_a_cell_is_barred_if_and_only_if_check_says_outside() -> None:
    """Over a table that meets most kinds of limit."""
    rng = np.random.default_rng(11)
    shape = (40, 25)
    setting = flown(
        indicated_rpm=rng.uniform(1700.0, 2750.0, shape),
        indicated_manifold_pressure=rng.uniform(12.0, 30.0, shape) * INHG,
        pressure_altitude=rng.uniform(0.0, 6000.0, shape),
        power_fraction=rng.uniform(0.5, 0.9, shape),
        calibrated_airspeed=rng.uniform(100.0, 190.0, shape) * KNOT,
        full_throttle_manifold_pressure=30.0 * INHG,
    )
    found = bars(ALL, UNMEASURED_GAUGES, [setting])
    outside = check(ALL, UNMEASURED_GAUGES, setting).verdict == Verdict.OUTSIDE
    np.testing.assert_array_equal(found.index[0] >= 0, outside)
    assert 0.1 < outside.mean() < 1.0
    assert set(np.unique(found.index[0])) - {-1} == set(range(len(found.reasons)))


def test_the_reason_of_a_cell_is_a_limit_that_the_cell_breaks() -> None:
    """The letter never points at a line that has nothing to do with the cell."""
    setting = flown(
        indicated_rpm=RPM[None, :],
        indicated_manifold_pressure=np.array([20.0, 27.0])[:, None] * INHG,
        full_throttle_manifold_pressure=30.0 * INHG,
    )
    found = bars(ALL, EXACT, [setting])
    findings = check(ALL, EXACT, setting)
    for cell in np.ndindex(2, 4):
        place = int(found.index[0][cell])
        broken = [f.limit for f in findings.at(cell) if f.verdict == "outside"]
        assert (place == -1) if not broken else (found.reasons[place].limit == broken[0])


def test_reasons_are_lettered_in_the_order_of_kinds_whatever_the_cells() -> None:
    """The same limits met in another order of cells keep their letters."""
    pressure = np.array([23.0, 27.5]) * INHG
    setting = flown(
        indicated_rpm=np.array([2200.0, 2450.0]),
        indicated_manifold_pressure=pressure,
        full_throttle_manifold_pressure=30.0 * INHG,
    )
    backwards = replace(
        setting,
        indicated_rpm=np.array([2450.0, 2200.0]),
        indicated_manifold_pressure=pressure[::-1],
    )
    first, second = (bars(ALL, EXACT, [each]) for each in (setting, backwards))
    assert first.reasons == second.reasons
    assert [r.letter for r in first.reasons] == ["A", "B"]
    assert first.reasons[0].limit == "restricted_rpm"
    np.testing.assert_array_equal(first.index[0], second.index[0][::-1])


def test_the_tables_of_one_card_share_their_letters() -> None:
    """One legend for all pages: a letter means the same limit on each of them."""
    lean = flown(indicated_rpm=2400.0, power_fraction=np.array([0.65, 0.80]))
    blades = flown(indicated_rpm=np.array([2200.0, 2400.0]), mixture="best power")
    found = bars(ALL, EXACT, [lean, blades])
    lettered = [(reason.letter, reason.limit) for reason in found.reasons]
    assert lettered == [("A", "restricted_rpm"), ("B", "leaning")]
    assert list(found.index[0]) == [-1, 1]
    assert list(found.index[1]) == [0, -1]


def test_a_limit_that_no_cell_needs_gets_no_letter() -> None:
    """Where every cell it bars is barred already, its line would point at nothing."""
    mount = replace(BLADES, name="mount", low_rpm=2150.0, high_rpm=2250.0, source=MANUAL)
    found = bars(only(restricted_rpm=(BLADES, mount)), EXACT, [flown(indicated_rpm=RPM)])
    assert len(found.reasons) == 1
    assert found.reasons[0].source == str(SHEET)
    assert list(found.index[0]) == [-1, 0, 0, -1]


def test_a_reason_says_what_the_tachometer_reads() -> None:
    """True 2100 to 2350 is to be avoided from 2050 to 2400 on a gauge that may be 50 off."""
    found = bars(only(restricted_rpm=(BLADES,)), UNMEASURED_GAUGES, [flown(indicated_rpm=RPM)])
    assert found.reasons[0].text == (
        "restricted 2100-2350 rpm: 2050-2400 rpm as the tachometer reads"
    )


def test_what_nobody_stated_bars_nothing_and_is_listed() -> None:
    """Printed on the card as not checked."""
    found = bars(Limits(restricted_rpm=(BLADES,)), EXACT, [flown(indicated_rpm=RPM)])
    assert list(found.index[0]) == [-1, 0, 0, -1]
    assert "engine ratings" in found.not_checked
    assert "leaning limits for mixture economy" in found.not_checked
    assert len(found.not_checked) == 9


def test_what_could_not_be_checked_in_some_cells_is_listed() -> None:
    """A tachometer calibrated up to 2350 rpm leaves the last column open."""
    tachometer = GaugeError((1900.0, 2350.0), (0.0, 0.0), 0.0, measured=True)
    gauges = Gauges(tachometer, EXACT.manifold_pressure)
    rpm = np.array([2000.0, 2500.0])
    found = bars(only(restricted_rpm=(BLADES,)), gauges, [flown(indicated_rpm=rpm)])
    assert found.not_checked == ("outside what the tachometer was measured at (in some cells)",)


def test_cells_without_level_flight_are_not_listed_as_unchecked() -> None:
    """They are out of reach, which the card marks as such."""
    setting = flown(
        power=np.array([1e5, np.nan]),
        power_fraction=np.array([0.6, np.nan]),
        solved=np.array([True, False]),
    )
    assert bars(ALL, EXACT, [setting]).not_checked == ()


def test_no_letter_reads_as_a_digit() -> None:
    """I and O are left out; after Z come two letters."""
    letters = [letter(place) for place in range(60)]
    assert letters[:3] == ["A", "B", "C"]
    assert not {"I", "O"} & set("".join(letters))
    assert len(set(letters)) == 60
    assert letters[23:26] == ["Z", "AA", "AB"]


def test_bars_of_nothing_are_none() -> None:
    """A card without tables has no reasons."""
    assert bars_of([]).reasons == ()


# --- Nearby --------------------------------------------------------------------------------------


def _equal_power(rpm: FloatArray) -> Flown:
    """Return settings of equal power: rpm times manifold pressure is constant here."""
    return flown(
        indicated_rpm=rpm,
        indicated_manifold_pressure=2400.0 * 23.0 * INHG / rpm,
        full_throttle_manifold_pressure=30.0 * INHG,
    )


def test_nearby_settings_lie_on_both_sides_of_a_restricted_range() -> None:
    """2225 rpm is barred: the first steps clear of 2100-2350 are 2075 and 2375."""
    offered = allowed_nearby(
        only(restricted_rpm=(BLADES,)), EXACT, indicated_rpm=2225.0, solve=_equal_power
    )
    assert [s.indicated_rpm for s in offered] == [2075.0, 2375.0, 2050.0]
    assert offered[0].indicated_manifold_pressure == pytest.approx(2400.0 * 23.0 * INHG / 2075.0)
    assert offered[0].reason == "same power 150 rpm lower, inside every limit"


def test_nearby_settings_keep_gauge_error_in_mind() -> None:
    """With 50 rpm of doubt the first steps clear are 25 rpm beyond 2050 and 2400."""
    offered = allowed_nearby(
        only(restricted_rpm=(BLADES,)), UNMEASURED_GAUGES, indicated_rpm=2200.0, solve=_equal_power
    )
    assert [s.indicated_rpm for s in offered[:2]] == [2025.0, 2425.0]


def test_nothing_that_breaks_a_limit_is_offered() -> None:
    """Every offer passes check; none is offered where none is allowed."""
    offered = allowed_nearby(ALL, EXACT, indicated_rpm=2225.0, solve=_equal_power)
    assert offered
    for setting in offered:
        again = check(ALL, EXACT, _equal_power(np.array([setting.indicated_rpm])))
        assert again.verdict_at((0,)) == setting.verdict != "outside"
    everything = replace(BLADES, low_rpm=0.0, high_rpm=9000.0)
    assert (
        allowed_nearby(
            only(restricted_rpm=(everything,)), EXACT, indicated_rpm=2225.0, solve=_equal_power
        )
        == ()
    )


def test_settings_without_a_reservation_come_before_nearer_ones_with_one() -> None:
    """A caution 25 rpm away is worth less than a clean setting further off."""
    note = replace(BLADES, name="note", low_rpm=2375.0, high_rpm=2425.0, phase="descent")
    offered = allowed_nearby(
        only(restricted_rpm=(BLADES, note)), EXACT, indicated_rpm=2340.0, solve=_equal_power
    )
    assert [s.verdict for s in offered] == ["inside", "inside", "inside"]
    assert offered[0].indicated_rpm == 2450.0


def test_a_reservation_is_told() -> None:
    """What is not known of an offer stands in its reason."""
    offered = allowed_nearby(
        Limits(restricted_rpm=(BLADES,), leaning=(LEANING,), manifold_pressure_curve=(CURVE,)),
        EXACT,
        indicated_rpm=2225.0,
        solve=_equal_power,
    )
    assert offered[0].verdict == "unknown"
    assert "breaks no limit that is known" in offered[0].reason
    assert "engine ratings" in offered[0].reason


def test_settings_out_of_reach_are_not_offered() -> None:
    """Where the solver has no answer there is nothing to fly."""

    def solve(rpm: FloatArray) -> Flown:
        return replace(_equal_power(rpm), solved=rpm > 2300.0)

    offered = allowed_nearby(
        only(restricted_rpm=(BLADES,)), EXACT, indicated_rpm=2225.0, solve=solve
    )
    assert [s.indicated_rpm for s in offered] == [2375.0, 2400.0, 2425.0]


def test_candidates_are_round_rpm_without_the_asked_one() -> None:
    """Multiples of 25 within 600 of what was asked."""
    tried = candidate_rpm(2225.0)
    assert 2225.0 not in tried
    assert np.all(tried % 25.0 == 0.0)
    assert (tried.min(), tried.max()) == (1625.0, 2825.0)
