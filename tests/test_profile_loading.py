"""A sound profile says what its files say, in SI, and nothing more."""

from __future__ import annotations

import math
import shutil
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cardgen.atmosphere import speed_of_sound
from cardgen.engine.mixture import exhaust_offset
from cardgen.limits.gauges import UNMEASURED_MANIFOLD_PRESSURE_GAUGE, UNMEASURED_TACHOMETER
from cardgen.limits.kinds import CATEGORIES, Source, StatedNone
from cardgen.profile import load_profile
from cardgen.profile.values import Quantity
from cardgen.propeller import REFERENCE_STATION, activity_factor

ROOT = Path(__file__).parent.parent
SOUND = Path(__file__).parent / "broken_profiles" / "sound"
DEMO = ROOT / "profiles" / "aircraft" / "specimen.yaml"

# Exact definitions, NIST SP 811 appendix B.8, independent of cardgen.constants.
INCH, FOOT, POUND, HORSEPOWER, INHG = 0.0254, 0.3048, 0.45359237, 745.69987, 3386.389


@pytest.fixture
def tree(tmp_path):
    """A copy of the sound profile."""
    shutil.copytree(SOUND, tmp_path / "fleet")
    return tmp_path / "fleet"


@pytest.fixture(scope="module")
def demo():
    """The demonstration aircraft."""
    return load_profile(DEMO)


def edited(tree, file, old, new):
    """The profile with one text replaced."""
    path = tree / file
    text = path.read_text()
    assert old in text
    path.write_text(text.replace(old, new))
    return load_profile(tree / "aircraft" / "plane.yaml")


def test_quantities_arrive_in_si(demo):
    """Every number of the file, converted by the exact definition of its unit."""
    engine, propeller, airframe = (
        demo.aircraft.engine,
        demo.aircraft.propeller,
        demo.aircraft.airframe,
    )
    assert engine.displacement == pytest.approx(462 * INCH**3)
    assert engine.compression_ratio == 8.2
    assert engine.rated_power == pytest.approx(238 * HORSEPOWER)
    assert engine.rated_rpm == 2700
    assert engine.fuel_density == pytest.approx(6.0 * POUND / (231 * INCH**3))
    assert propeller.diameter == pytest.approx(77 * INCH)
    assert activity_factor(propeller.blade) == pytest.approx(104)
    assert airframe.wing_area == pytest.approx(152 * FOOT**2)
    assert airframe.wing_span == pytest.approx(33.6 * FOOT)
    assert demo.gross_mass == pytest.approx(3000 * POUND)
    assert demo.percent_of.power == pytest.approx(224 * HORSEPOWER)
    assert demo.card.altitude == pytest.approx([n * 1000 * FOOT for n in range(2, 13)])
    assert demo.card.power_fraction == pytest.approx((0.55, 0.65, 0.75))
    assert demo.card.mass == pytest.approx([2800 * POUND])
    assert demo.winds == pytest.approx([n * 1852 / 3600 for n in (-20, 0, 20)])
    assert demo.fuel.usable == pytest.approx(74 * 231 * INCH**3)


def test_the_demonstration_states_every_category_of_limits(demo):
    """The demonstration shows a complete card: nothing on it is unknown."""
    stated = {none.category for none in demo.limits.stated_none}
    stated |= {category for category in CATEGORIES if getattr(demo.limits, category)}
    assert stated == set(CATEGORIES)
    assert len(demo.limits.restricted_rpm) == 2
    assert demo.limits.restricted_rpm[1].above_manifold_pressure == pytest.approx(24 * INHG)
    assert [rating.time_limit for rating in demo.limits.ratings] == [300, None]


def test_the_demonstration_is_physically_consistent(demo):
    """Tips below Mach 0.85 at every rating, in flight at 65 m/s at sea level."""
    diameter = demo.aircraft.propeller.diameter
    for rating in demo.limits.ratings:
        tip = math.pi * diameter * rating.rpm / 60
        assert math.hypot(tip, 65.0) / speed_of_sound(288.15) < 0.85


def test_a_change_of_propeller_is_a_change_of_one_line(tmp_path):
    """The alternative propeller of the demonstration fits without another word."""
    shutil.copytree(ROOT / "profiles", tmp_path / "profiles")
    path = tmp_path / "profiles" / "aircraft" / "specimen.yaml"
    old = load_profile(path)
    text = path.read_text()
    path.write_text(
        text.replace(
            "\npropeller: ../propellers/specimen-p2-77", "\npropeller: ../propellers/specimen-p3-75"
        )
    )
    new = load_profile(path)
    assert (old.aircraft.propeller.blade_count, new.aircraft.propeller.blade_count) == (2, 3)
    assert new.aircraft.engine == old.aircraft.engine
    changed = {k for k, v in new.part_digests.items() if v != old.part_digests[k]}
    assert changed == {"propeller", "limits", "identity"}


def test_words_that_yaml_would_make_values_of_stay_words(tree):
    """An operator called "no", a serial number with a leading zero."""
    identity = load_profile(tree / "aircraft" / "plane.yaml").identity
    assert (identity.operator, identity.serial) == ("no", "0123")
    assert identity.handbook == Source("Invented manual", "5", "1")
    assert identity.demo


def test_what_is_left_out_has_the_stated_defaults(tree):
    """Class drag by undercarriage, gross mass, all mixtures, US units, unmeasured gauges."""
    profile = load_profile(tree / "aircraft" / "plane.yaml")
    assert profile.aircraft.airframe.zero_lift_drag == 0.028
    assert profile.aircraft.airframe.oswald_factor == 0.75
    assert profile.gauges.tachometer == UNMEASURED_TACHOMETER
    assert profile.fuel is None
    assert profile.card.mixtures == ("Best power", "Lean")
    assert profile.card.units.pressure == "inHg"
    profile = edited(tree, "aircraft/plane.yaml", "  masses: [2800 lb]\n", "")
    assert profile.card.mass == pytest.approx([3000 * POUND])
    profile = edited(tree, "aircraft/plane.yaml", "gear: fixed", "gear: retractable")
    assert profile.aircraft.airframe.zero_lift_drag == 0.022


def test_instruments_left_out_are_unmeasured(tree):
    """Silence about a gauge never narrows a guard band."""
    text = (tree / "aircraft/plane.yaml").read_text()
    start, end = text.index("instruments:"), text.index("card:")
    profile = edited(tree, "aircraft/plane.yaml", text[start:end], "")
    assert profile.gauges.tachometer == UNMEASURED_TACHOMETER
    assert profile.gauges.manifold_pressure == UNMEASURED_MANIFOLD_PRESSURE_GAUGE


def test_a_calibration_by_points_becomes_readings_and_corrections(demo):
    """True = indicated + correction."""
    gauge = demo.gauges.tachometer
    assert gauge.indicated == (1800, 2200, 2500, 2700)
    assert gauge.correction == pytest.approx((6, 8, 12, 14))
    assert (gauge.band, gauge.measured, gauge.date) == (10, True, "2026-04-18")
    assert demo.gauges.manifold_pressure.correction == pytest.approx([-0.2 * INHG], rel=1e-6)
    assert demo.gauges.position_error.indicated == pytest.approx(
        [n * 1852 / 3600 for n in (70, 120, 180)]
    )


def test_a_mixture_by_exhaust_temperature_is_that_far_from_the_peak(demo):
    """30 °F lean of peak is 16.67 K on the lean side."""
    lean = next(mixture for mixture in demo.mixtures if mixture.name == "Economy")
    assert exhaust_offset(lean.fuel_air_ratio) == pytest.approx(-30 / 1.8)


@pytest.mark.parametrize("setting", ["best_power", "best_economy", "peak", "as_flown"])
def test_every_named_mixture_has_a_fuel_air_ratio_of_its_kind(tree, setting):
    """Best power is rich of the chemically correct 0.067, best economy lean of it (NACA TR 189)."""
    profile = edited(tree, "aircraft/plane.yaml", "setting: best_power", f"setting: {setting}")
    ratio = profile.mixtures[0].fuel_air_ratio
    low, high = {
        "best_power": (0.075, 0.080),
        "best_economy": (0.060, 0.064),
        "peak": (0.064, 0.069),
        "as_flown": (0.060, 0.080),
    }[setting]
    assert low <= ratio <= high
    assert profile.as_flown == (("Best power",) if setting == "as_flown" else ())


def test_limits_of_all_files_are_merged_with_their_sources(tree):
    """Each file states what its own documents say."""
    limits = load_profile(tree / "aircraft" / "plane.yaml").limits
    assert limits.restricted_rpm[0].source.document == "Invented data sheet"
    assert limits.rpm_range[0].source.document == "Invented engine manual"
    assert limits.leaning[0].mixture == "Lean"
    assert limits.manifold_pressure_curve[0].rpm == (1800, 2600)
    assert limits.stated_none == (
        StatedNone("airspeed", "No speed limits.", Source("Invented manual")),
    )
    assert limits.altitude == ()


def test_a_limit_that_two_files_state_is_kept_twice(tree):
    """The strictest is applied elsewhere; here both stay, each with its source."""
    second = """limits:
  rpm_range:
    - name: Engine rpm
      greatest: 2550 rpm
      wording: At most 2550 rpm.
      source: {document: Invented manual}
"""
    (tree / "engines/six.yaml").write_text(
        (tree / "engines/six.yaml").read_text().replace("    rpm: 2600 rpm", "    rpm: 2500 rpm")
    )
    profile = edited(tree, "aircraft/plane.yaml", "limits:\n", second)
    assert [limit.greatest_rpm for limit in profile.limits.rpm_range] == [2600, 2550]


def test_blade_angles_quoted_elsewhere_are_converted_to_three_quarters_of_the_radius(tree):
    """The published form 5868-9 turns 2.25° between 0.75 R and 0.90 R less 0.24° (TR 658)."""
    at_reference = load_profile(tree / "aircraft" / "plane.yaml").aircraft.propeller
    assert math.degrees(at_reference.fine_stop) == pytest.approx(12)
    assert at_reference.reference_station == REFERENCE_STATION
    # 0.90 of a radius of 39 in; the form's blade angle there is 2.49° less than at 0.75 R.
    quoted = edited(
        tree, "propellers/two.yaml", "coarse: 30 deg", "coarse: 30 deg\n  station: 35.1 in"
    ).aircraft.propeller
    assert math.degrees(quoted.fine_stop) == pytest.approx(12 + 2.49)
    assert math.degrees(quoted.coarse_stop) == pytest.approx(30 + 2.49)


def test_measured_stations_become_a_blade(tree):
    """Chord over diameter, and twist that is zero at 0.75 R whatever the hub's setting was."""
    stations = """stations:
    - {radius_fraction: 0.20, chord: 3.9 in, thickness_ratio: 0.90, angle: 45 deg}
    - {radius_fraction: 0.50, chord: 7.8 in, thickness_ratio: 0.15, angle: 30 deg}
    - {radius_fraction: 0.75, chord: 5.85 in, thickness_ratio: 0.1, angle: 22 deg}
    - {radius_fraction: 1.00, chord: 1.95 in, thickness_ratio: 0.1, angle: 18 deg}"""
    profile = edited(tree, "propellers/two.yaml", "activity_factor: 100", stations)
    blade = profile.aircraft.propeller.blade
    assert blade.chord_to_diameter == pytest.approx((0.05, 0.1, 0.075, 0.025))
    assert np.degrees(blade.twist) == pytest.approx((23, 8, 0, -4))


def test_units_are_a_set_or_a_departure_from_one(tree):
    """`metric` keeps feet and knots; a single unit can differ."""
    profile = edited(tree, "aircraft/plane.yaml", "  masses", "  units: metric\n  masses")
    assert (profile.card.units.pressure, profile.card.units.altitude) == ("hPa", "ft")
    profile = edited(
        tree,
        "aircraft/plane.yaml",
        "  units: metric\n",
        "  units: {set: metric, fuel_flow: gal/h, temperature: degF}\n",
    )
    units = profile.card.units
    assert (units.pressure, units.fuel_flow, units.temperature) == ("hPa", "gal/h", "degF")


def test_a_profile_in_one_folder_needs_no_folders_for_its_parts(tree):
    """Where the aircraft file lies in no folder `aircraft/`, its own folder is the tree."""
    path = tree / "plane.yaml"
    text = (tree / "aircraft/plane.yaml").read_text()
    path.write_text(text.replace("../", ""))
    assert load_profile(path).digest == load_profile(tree / "aircraft" / "plane.yaml").digest


def test_evidence_is_resolved_from_the_aircraft_file(tree):
    """Points files stay within the tree like the parts."""
    (tree / "evidence").mkdir()
    (tree / "evidence/flights.csv").write_text("rpm\n")
    profile = edited(
        tree, "aircraft/plane.yaml", "card:", "evidence: [../evidence/flights.csv]\ncard:"
    )
    assert [path.name for path in profile.evidence] == ["flights.csv"]
    assert profile.evidence[0].is_file()


@given(st.floats(50.0, 120.0))
def test_a_quantity_written_out_is_read_back(length_in):
    """Writing a number with its unit and reading it is the identity, to rounding."""
    read = Quantity("length", "50 in", "120 in").read(f"{length_in!r} in")
    assert read == pytest.approx(length_in * INCH, rel=1e-14)


def test_a_bound_itself_is_allowed_in_any_unit():
    """50 in and 1270 mm are one length, whatever their last bit says."""
    diameter = Quantity("length", "50 in", "120 in")
    for text in ("50 in", "1270 mm", "1.27 m", "127 cm", "120 in", "3048 mm", "10 ft"):
        diameter.read(text)


def test_loading_takes_no_heavy_package():
    """Reading a profile loads neither scipy nor reportlab."""
    code = (
        "import sys; from cardgen.profile import load_profile;"
        f"load_profile({str(DEMO)!r});"
        "print([m for m in ('scipy', 'reportlab', 'pypdf') if m in sys.modules])"
    )
    run = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, cwd=ROOT, check=True
    )
    assert run.stdout.strip() == "[]"
