"""Broken profiles: each mistake is named with its file, line, column, key and what was expected.

Every case is the sound profile of tests/broken_profiles/sound with one text replaced.
"""

from __future__ import annotations

import os
import shutil
from pathlib import Path

import pytest

from cardgen.errors import DataError
from cardgen.profile import load_profile

SOUND = Path(__file__).parent / "broken_profiles" / "sound"
AIRCRAFT, ENGINE, PROPELLER = "aircraft/plane.yaml", "engines/six.yaml", "propellers/two.yaml"


@pytest.fixture
def tree(tmp_path, monkeypatch):
    """A copy of the sound profile, as the current folder."""
    folder = tmp_path / "fleet"
    shutil.copytree(SOUND, folder)
    monkeypatch.chdir(folder)
    return folder


def problems_of(path=AIRCRAFT):
    """The problems that loading reports, as printed."""
    with pytest.raises(DataError) as caught:
        load_profile(path)
    assert caught.value.exit_code == 3
    return [str(problem) for problem in caught.value.problems]


def replace(file, old, new):
    """Replace a text that stands in a file."""
    text = Path(file).read_text(encoding="utf-8")
    assert old in text
    Path(file).write_text(text.replace(old, new, 1), encoding="utf-8")


STATIONS = """  stations:
    - {{radius_fraction: {0}, chord: 5 in, thickness_ratio: {1}, angle: 40 deg}}
    - {{radius_fraction: 0.50, chord: 6 in, thickness_ratio: 0.2, angle: 25 deg}}
    - {{radius_fraction: 0.75, chord: {2}, thickness_ratio: 0.1, angle: 18 deg}}
    - {{radius_fraction: {3}, chord: 2 in, thickness_ratio: 0.1, angle: 12 deg}}"""

NO_SPEED_LIMIT = "    none: No speed limits.\n    source: {document: Invented manual}"
AIRFRAME_KEYS = (
    "one of wing_area, wing_span, gross_mass, gear, zero_lift_drag, oswald_factor,"
    " greatest_lift_coefficient"
)

CASES = {
    # --- keys ---------------------------------------------------------------------------------
    "a mistyped key": (
        (AIRCRAFT, "wing_span", "wing_spam"),
        "aircraft/plane.yaml:13:1: airframe.wing_span: is missing (Span of the wing), "
        "expected a length such as 76 in or 1.93 m, 15 ft to 90 ft",
        "aircraft/plane.yaml:15:3: airframe.wing_spam: unknown key (did you mean wing_span?), "
        f"expected {AIRFRAME_KEYS}",
    ),
    "a key like no other": (
        (AIRCRAFT, "gear: fixed", "gear: fixed\n  colour: green"),
        f"aircraft/plane.yaml:18:3: airframe.colour: unknown key, expected {AIRFRAME_KEYS}",
    ),
    "a missing key": (
        (AIRCRAFT, "  gear: fixed\n", ""),
        "aircraft/plane.yaml:13:1: airframe.gear: is missing (Undercarriage, fixed or "
        "retractable; sets the drag where none is stated), expected one of fixed, retractable",
    ),
    "a duplicate key": (
        (AIRCRAFT, "date: 2026-03-14", "date: 2026-03-14\ndate: 2026-03-15"),
        "aircraft/plane.yaml:5:1: date: is given twice, first in line 4",
    ),
    "a key that is not text": (
        (AIRCRAFT, "card:", "? [a, b]\n: c\ncard:"),
        "aircraft/plane.yaml:43:3: a key is not text, expected a word as the key",
    ),
    "a merge key": (
        (AIRCRAFT, "identity:", "identity:\n  <<: {serial: x}"),
        "aircraft/plane.yaml:8:3: identity: '<<' is not a key, expected a word as the key",
    ),
    "a key that looks like one of our own marks": (
        (AIRCRAFT, "card:", "<list>: x\ncard:"),
        "aircraft/plane.yaml:43:1: '<list>' is not a key, expected a word as the key",
    ),
    # --- quantities and other values ----------------------------------------------------------
    "a unit of another dimension": (
        (AIRCRAFT, "170 ft2", "170 ft"),
        "aircraft/plane.yaml:14:14: airframe.wing_area: 170 ft is a length, "
        "expected an area such as 174 ft2 or 16.2 m2",
    ),
    "an unknown unit": (
        (PROPELLER, "78 in", "78 zoll"),
        "propellers/two.yaml:5:11: diameter: '78 zoll' has an unknown unit 'zoll', "
        "expected a length such as 76 in or 1.93 m",
    ),
    "a bare number": (
        (PROPELLER, "78 in", "78"),
        "propellers/two.yaml:5:11: diameter: '78' has no unit, "
        "expected a length such as 76 in or 1.93 m",
    ),
    "a thousands separator": (
        (AIRCRAFT, "3000 lb", "3,000 lb"),
        "aircraft/plane.yaml:16:15: airframe.gross_mass: '3,000 lb' has a separator within its "
        "number, expected a mass such as 2650 lb or 1200 kg, with a decimal point",
    ),
    "a YAML 1.1 number with underscores": (
        (AIRCRAFT, "3000 lb", "3_000 lb"),
        "aircraft/plane.yaml:16:15: airframe.gross_mass: '3_000 lb' has a separator within its "
        "number, expected a mass such as 2650 lb or 1200 kg, with a decimal point",
    ),
    "a YAML 1.1 sexagesimal number": (
        (ENGINE, "8.5", "1:30"),
        "engines/six.yaml:5:20: compression_ratio: '1:30' is not a number, "
        "expected a number without unit from 5 to 13",
    ),
    "a number that is none": (
        (AIRCRAFT, "gear: fixed", "gear: fixed\n  oswald_factor: .nan"),
        "aircraft/plane.yaml:18:18: airframe.oswald_factor: '.nan' is not a number, "
        "expected a number without unit from 0.4 to 1",
    ),
    "a half blade": (
        (PROPELLER, "blades: 2", "blades: 2.5"),
        "propellers/two.yaml:4:9: blades: '2.5' is not a whole number, "
        "expected a whole number from 2 to 6",
    ),
    "a number of 500 digits": (
        (PROPELLER, "78 in", "7" * 500 + " in"),
        f"propellers/two.yaml:5:11: diameter: '{'7' * 60}…' is too long, "
        "expected a length such as 76 in or 1.93 m",
    ),
    "no value": (
        (AIRCRAFT, "gear: fixed", "gear:"),
        "aircraft/plane.yaml:17:8: airframe.gear: has no value, expected one of fixed, retractable",
    ),
    "a YAML null": (
        (AIRCRAFT, "serial: 0123", "serial: ~"),
        "aircraft/plane.yaml:10:11: identity.serial: has no value, "
        "expected text of at most 40 characters",
    ),
    "neither yes nor no": (
        (AIRCRAFT, "demo: yes", "demo: maybe"),
        "aircraft/plane.yaml:3:7: demo: 'maybe' is neither yes nor no, expected yes or no",
    ),
    "a day that does not exist": (
        (AIRCRAFT, "2026-03-14", "2026-02-30"),
        "aircraft/plane.yaml:4:7: date: '2026-02-30' is not a date, "
        "expected a date such as 2026-03-14",
    ),
    "text that turns round what follows it": (
        (AIRCRAFT, "type: Invented", 'type: "In\\u202Evented"'),
        "aircraft/plane.yaml:9:9: identity.type: character U+202E cannot be printed, "
        "expected text of at most 120 characters",
    ),
    "a wording that no card can carry": (
        (PROPELLER, "Avoid 2000 to 2150 rpm.", "x" * 500),
        "propellers/two.yaml:16:16: limits.restricted_rpm[1].wording: text of 500 characters is "
        "too long, expected text of at most 400 characters",
    ),
    # --- shapes -------------------------------------------------------------------------------
    "a list instead of a mapping": (
        (AIRCRAFT, '{document: Invented manual, section: "5", revision: "1"}', "[Manual]"),
        "aircraft/plane.yaml:12:13: identity.handbook: a list stands here, "
        "expected a mapping with keys among document, section, revision",
    ),
    "a mapping instead of a list": (
        (AIRCRAFT, "rpm: [2200 rpm, 2400 rpm]", "rpm: {from: 2200 rpm}"),
        "aircraft/plane.yaml:44:8: card.rpm: a mapping of keys stands here, expected a list",
    ),
    "text instead of a list of limits": (
        (AIRCRAFT, NO_SPEED_LIMIT, "   none"),
        "aircraft/plane.yaml:34:4: limits.airspeed: 'none' stands here, "
        "expected a list of limits or a mapping with the keys none and source",
    ),
    "a stated none without its source": (
        (AIRCRAFT, NO_SPEED_LIMIT, "    none: x"),
        "aircraft/plane.yaml:33:3: limits.airspeed.source: is missing (Where that is written "
        "down), expected mapping",
    ),
    "an unknown state of a gauge": (
        (AIRCRAFT, "tachometer: not measured", "tachometer: unknown"),
        "aircraft/plane.yaml:37:15: instruments.tachometer: 'unknown' is not known here, "
        "expected not measured, or its calibration",
    ),
    # --- physics ------------------------------------------------------------------------------
    "a negative displacement": (
        (ENGINE, "450 in3", "-450 in3"),
        "engines/six.yaml:4:15: displacement: '-450 in3' is not plausible, "
        "expected 50 in3 to 2000 in3",
    ),
    "a displacement without its first digit": (
        (ENGINE, "450 in3", "50 in3"),
        "engines/six.yaml:8:12: ratings[1].power: power, rpm and displacement give a mean "
        "effective pressure of 94.5 bar, expected 4 to 16 bar; check all three",
    ),
    "a compression ratio without its point": (
        (ENGINE, "8.5", "85"),
        "engines/six.yaml:5:20: compression_ratio: 85 is not plausible, "
        "expected a number without unit from 5 to 13",
    ),
    "a turbocharged engine": (
        (ENGINE, "compression_ratio: 8.5", "compression_ratio: 8.5\ninduction: turbocharged"),
        "engines/six.yaml:6:12: induction: turbocharged engines are not modelled yet, "
        "expected natural",
    ),
    "a fine stop above the coarse stop": (
        (PROPELLER, "fine: 12 deg", "fine: 32 deg"),
        "propellers/two.yaml:10:11: stops.coarse: coarse is not above fine, "
        "expected fine below coarse",
    ),
    "stops quoted beyond the tip": (
        (PROPELLER, "coarse: 30 deg", "coarse: 30 deg\n  station: 42 in"),
        "propellers/two.yaml:11:12: stops.station: the station is at 108% of the tip radius, "
        "expected 35 % to 95 % of it",
    ),
    "tips faster than sound": (
        (PROPELLER, "78 in", "118 in"),
        "propellers/two.yaml:5:11: diameter: the blade tips would move at Mach 1.20 at 2600 rpm "
        "of the engine, expected less than Mach 1; check diameter, gear_ratio and ratings",
    ),
    "a blade thicker than its chord": (
        (PROPELLER, "  activity_factor: 100", STATIONS.format("0.20", "1.2", "5 in", "1.0")),
        "propellers/two.yaml:8:61: blade.stations[1].thickness_ratio: 1.2 is not plausible, "
        "expected a number without unit from 0.02 to 1",
    ),
    "a blade without a tip": (
        (PROPELLER, "  activity_factor: 100", STATIONS.format("0.20", "0.9", "5 in", "0.9")),
        "propellers/two.yaml:11:25: blade.stations[4].radius_fraction: the outermost station is "
        "at 0.9, expected the tip, radius_fraction 1",
    ),
    "a blade without a root": (
        (PROPELLER, "  activity_factor: 100", STATIONS.format("0.45", "0.9", "5 in", "1.0")),
        "propellers/two.yaml:8:25: blade.stations[1].radius_fraction: the innermost station is "
        "at 0.45, expected one at 0.35 or farther in",
    ),
    "a blade as wide as a door": (
        (PROPELLER, "  activity_factor: 100", STATIONS.format("0.20", "0.9", "19.9 in", "1.0")),
        "propellers/two.yaml:10:38: blade.stations[3].chord: the chord is 26% of the diameter, "
        "expected at most 25 % of it",
    ),
    "a wing as deep as it is wide": (
        (AIRCRAFT, "36 ft", "16 ft"),
        "aircraft/plane.yaml:15:14: airframe.wing_span: span and area give an aspect ratio of "
        "1.5, expected 3 to 25; check both",
    ),
    "a reversed restricted range": (
        (PROPELLER, "low: 2000 rpm", "low: 2200 rpm"),
        "propellers/two.yaml:15:13: limits.restricted_rpm[1].high: high is not above low, "
        "expected low below high",
    ),
    "curve points that do not increase": (
        (ENGINE, "rpm: 1800", "rpm: 2600"),
        "engines/six.yaml:22:17: limits.manifold_pressure_curve[1].points[2].rpm: does not "
        "exceed the one before it, expected values that increase",
    ),
    "a continuous rating beyond the greatest rpm": (
        (ENGINE, "greatest: 2600", "greatest: 2500"),
        "engines/six.yaml:9:10: ratings[1].rpm: the continuous rating 'Continuous' turns faster "
        "than rpm_range allows, expected at most 2500 rpm, or a time_limit",
    ),
    "a mass above the gross mass": (
        (AIRCRAFT, "[2800 lb]", "[2800 lb, 3100 lb]"),
        "aircraft/plane.yaml:47:21: card.masses[2]: the mass is above airframe.gross_mass, "
        "expected at most the gross mass",
    ),
    "more than all the power": (
        (AIRCRAFT, "[55 %, 65 %]", "[55 %, 105 %]"),
        "aircraft/plane.yaml:45:26: card.percent_powers[2]: '105 %' is not plausible, "
        "expected 20 % to 100 %",
    ),
    "more columns than a page holds": (
        (AIRCRAFT, "[2200 rpm, 2400 rpm]", f"[{', '.join(f'{n} rpm' for n in range(2000, 2007))}]"),
        "aircraft/plane.yaml:44:8: card.rpm: the list has 7 entries, expected at most 6",
    ),
    "altitudes out of order": (
        (AIRCRAFT, "[2000 ft, 4000 ft]", "[4000 ft, 2000 ft]"),
        "aircraft/plane.yaml:46:24: card.altitudes[2]: does not exceed the one before it, "
        "expected values that increase",
    ),
    "temperatures on a density-altitude card": (
        (AIRCRAFT, "  masses", "  temperatures: [-10 degC, 10 degC]\n  masses"),
        "aircraft/plane.yaml:47:17: card.temperatures: temperature columns on a card by density "
        "altitude, expected altitude_kind: pressure, or no temperatures",
    ),
    # --- names --------------------------------------------------------------------------------
    "an unknown mixture on the card": (
        (AIRCRAFT, "  masses: [2800 lb]", "  mixtures: [Best power, Leen]"),
        "aircraft/plane.yaml:47:26: card.mixtures[2]: no mixture is named 'Leen', "
        "expected one of Best power, Lean",
    ),
    "an unknown mixture in a limit": (
        (AIRCRAFT, "mixture: Lean", "mixture: Leaner"),
        "aircraft/plane.yaml:29:16: limits.leaning[1].mixture: no mixture is named 'Leaner', "
        "expected one of Best power, Lean",
    ),
    "a mixture with two meanings": (
        (AIRCRAFT, "    setting: best_power", "    setting: best_power\n    fuel_air_ratio: 0.08"),
        "aircraft/plane.yaml:22:14: mixtures[1].setting: fuel_air_ratio and setting exclude each "
        "other, expected exactly one of fuel_air_ratio, rich_of_peak, lean_of_peak, setting",
    ),
    "a mixture without a meaning": (
        (AIRCRAFT, "    setting: best_power\n", ""),
        "aircraft/plane.yaml:20:5: mixtures[1]: none of fuel_air_ratio, rich_of_peak, "
        "lean_of_peak, setting is given, expected exactly one of them",
    ),
    "two mixtures of one name": (
        (
            AIRCRAFT,
            "  - name: Lean\n    basis",
            "  - name: Lean\n    basis: x\n    setting: peak\n  - name: Lean\n    basis",
        ),
        "aircraft/plane.yaml:26:11: mixtures[3].name: 'Lean' is named twice, "
        "expected each name once",
    ),
    "an unknown rating": (
        (AIRCRAFT, "percent_of: Continuous", "percent_of: Take-off"),
        "aircraft/plane.yaml:18:13: percent_of: no rating is named 'Take-off', "
        "expected one of Continuous",
    ),
    "an unknown full-throttle rating": (
        (ENGINE, "limits:", "full_throttle_rating: Take-off\nlimits:"),
        "engines/six.yaml:12:23: full_throttle_rating: no rating is named 'Take-off', "
        "expected one of Continuous",
    ),
    "a demonstration with an assignable registration": (
        (AIRCRAFT, "QX-001", "ZZ-001"),
        "aircraft/plane.yaml:8:17: identity.registration: 'ZZ-001' could be somebody's "
        "registration, and demo is yes, expected an invented one that begins with Q, "
        "as no state's does",
    ),
    # --- YAML ---------------------------------------------------------------------------------
    "a tab": (
        (AIRCRAFT, "  wing_area", "\twing_area"),
        "aircraft/plane.yaml:14:1: the line is indented with a tab, expected spaces",
    ),
    "a tag": (
        (AIRCRAFT, "type: Invented", "type: !!python/name:os.system Invented"),
        "aircraft/plane.yaml:9:9: identity.type: tag tag:yaml.org,2002:python/name:os.system is "
        "not allowed, expected the value without a tag",
    ),
    "an alias": (
        (AIRCRAFT, "type: Invented", "type: &x Invented\n  serial: *x"),
        "aircraft/plane.yaml:10:11: identity.serial: alias *x is not allowed, "
        "expected the value written out",
    ),
    "a second document": (
        (AIRCRAFT, "card:", "---\ncard:"),
        "aircraft/plane.yaml:43:1: a second document begins here, expected one document per file",
    ),
    "text that is no YAML": (
        (AIRCRAFT, "type: Invented", "type: Invented: twice"),
        "aircraft/plane.yaml:9:17: is not YAML: mapping values are not allowed in this context, "
        "expected YAML as `cardgen new` writes it",
    ),
    # --- references ---------------------------------------------------------------------------
    "a missing part file": (
        (AIRCRAFT, "six.yaml", "sixx.yaml"),
        "aircraft/plane.yaml:5:9: engine: there is no file 'engines/sixx.yaml', "
        "expected an existing file",
    ),
    "a folder as part file": (
        (AIRCRAFT, "../engines/six.yaml", "../engines"),
        "aircraft/plane.yaml:5:9: engine: 'engines' is not a regular file, "
        "expected an existing file",
    ),
    "an absolute path": (
        (AIRCRAFT, "../engines/six.yaml", "/etc/hostname"),
        "aircraft/plane.yaml:5:9: engine: '/etc/hostname' is an absolute path, "
        "expected a path from this file's folder",
    ),
    "a path that leaves the tree": (
        (AIRCRAFT, "../engines/six.yaml", "../../elsewhere/six.yaml"),
        "aircraft/plane.yaml:5:9: engine: '../../elsewhere/six.yaml' leads out of the profile's "
        "folder tree, expected a file within the folder fleet/",
    ),
    "a circular reference": (
        (AIRCRAFT, "../engines/six.yaml", "../engines/../aircraft/plane.yaml"),
        "aircraft/plane.yaml:5:9: engine: '../engines/../aircraft/plane.yaml' refers back to "
        "this file itself, expected another file",
    ),
    "a propeller as engine": (
        (AIRCRAFT, "../engines/six.yaml", "../propellers/two.yaml"),
        "aircraft/plane.yaml:5:9: engine: '../propellers/two.yaml' is a file of kind propeller, "
        "expected a file of kind engine",
    ),
    "a kind that does not exist": (
        (ENGINE, "kind: engine", "kind: motor"),
        "engines/six.yaml:1:7: kind: 'motor' is not known here, expected engine",
    ),
    "a later version of the format": (
        (AIRCRAFT, "format: 1", "format: 2"),
        "aircraft/plane.yaml:2:9: format: '2' is not known here, expected 1",
    ),
    "missing evidence": (
        (AIRCRAFT, "card:", "evidence: [flights.csv]\ncard:"),
        "aircraft/plane.yaml:43:12: evidence[1]: there is no file 'aircraft/flights.csv', "
        "expected an existing file",
    ),
}


@pytest.mark.parametrize("case", CASES)
def test_a_mistake_is_named_with_its_place_and_what_was_expected(tree, case):
    """A pilot finds each mistake from its message alone."""
    (file, old, new), *expected = CASES[case]
    replace(file, old, new)
    assert problems_of() == expected


def test_the_sound_profile_has_no_problem(tree):
    """The cases above fail for their mistake and for nothing else."""
    assert load_profile(AIRCRAFT).identity.registration == "QX-001"


def test_all_problems_of_all_files_are_reported_in_one_run(tree):
    """Whoever mends a profile sees the whole list, file by file in the order of the lines."""
    replace(AIRCRAFT, "170 ft2", "170")
    replace(AIRCRAFT, "percent_of: Continuous", "percent_of: Cruise")
    replace(AIRCRAFT, "mixture: Lean", "mixture: Leaner")
    replace(ENGINE, "8.5", "85")
    replace(ENGINE, "power: 225 hp", "power: 225 kt")
    replace(PROPELLER, "blades: 2", "blades: two")
    replace(PROPELLER, "low: 2000 rpm", "lo: 2000 rpm")
    places = [line.partition(" ")[0] for line in problems_of()]
    assert places == [
        "aircraft/plane.yaml:14:14:",
        "aircraft/plane.yaml:29:16:",
        "engines/six.yaml:5:20:",
        "engines/six.yaml:8:12:",
        "propellers/two.yaml:4:9:",
        "propellers/two.yaml:13:7:",
        "propellers/two.yaml:14:7:",
    ]


def test_one_mistake_does_not_hide_another_that_depends_on_other_keys(tree):
    """Checks between keys run on whatever could be read."""
    replace(AIRCRAFT, "date: 2026-03-14", "date: yesterday")
    replace(AIRCRAFT, "percent_of: Continuous", "percent_of: Cruise")
    assert [line.partition(" ")[0] for line in problems_of()] == [
        "aircraft/plane.yaml:4:7:",
        "aircraft/plane.yaml:18:13:",
    ]


def test_an_engine_file_is_not_taken_for_an_aircraft(tree):
    """The kind stated in the file decides, not its name or folder."""
    assert problems_of(ENGINE) == [
        "engines/six.yaml:1:7: kind: is a file of kind engine, expected a file of kind aircraft"
    ]


def test_a_link_that_leaves_the_tree_is_refused(tree):
    """A symbolic link is followed before the path is judged."""
    outside = tree.parent / "six.yaml"
    shutil.move(ENGINE, outside)
    os.symlink(outside, ENGINE)
    assert problems_of() == [
        "aircraft/plane.yaml:5:9: engine: '../engines/six.yaml' leads out of the profile's folder "
        "tree, expected a file within the folder fleet/"
    ]


def test_a_link_within_the_tree_is_followed(tree):
    """Links are refused for where they lead, not for being links."""
    os.symlink("six.yaml", "engines/linked.yaml")
    replace(AIRCRAFT, "six.yaml", "linked.yaml")
    assert load_profile(AIRCRAFT).identity.engine.model == "Invented six"


def test_a_link_to_itself_is_reported_as_missing(tree):
    """A loop of links ends in a message."""
    os.symlink("loop.yaml", "engines/loop.yaml")
    replace(AIRCRAFT, "six.yaml", "loop.yaml")
    assert problems_of() == [
        "aircraft/plane.yaml:5:9: engine: there is no file 'engines/loop.yaml', "
        "expected an existing file"
    ]


def test_problems_of_one_file_are_cut_off_after_fifty(tree):
    """Thousands of mistakes are one mistake made thousands of times."""
    replace(AIRCRAFT, "card:", "".join(f"key_{n}: x\n" for n in range(1000)) + "card:")
    problems = problems_of()
    assert len(problems) == 51
    assert problems[0] == "aircraft/plane.yaml: has 950 more problems"
