"""Digests change with what can change a number or a printed word, and with nothing else."""

from __future__ import annotations

import re
import shutil
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cardgen.profile import digest, load_profile
from cardgen.tables.choices import UnitSet

SOUND = Path(__file__).parent / "broken_profiles" / "sound"
AIRCRAFT, ENGINE, PROPELLER = "aircraft/plane.yaml", "engines/six.yaml", "propellers/two.yaml"


@pytest.fixture
def tree(tmp_path):
    """A copy of the sound profile."""
    shutil.copytree(SOUND, tmp_path / "fleet")
    return tmp_path / "fleet"


def change(tree, file, old, new):
    """Replace a text and return the profile before and after, and the parts that changed."""
    before = load_profile(tree / AIRCRAFT)
    text = (tree / file).read_text()
    assert old in text
    (tree / file).write_text(text.replace(old, new))
    after = load_profile(tree / AIRCRAFT)
    parts = {name for name, d in after.part_digests.items() if d != before.part_digests[name]}
    return before, after, parts


IRRELEVANT = [
    (AIRCRAFT, "airframe:", "# a comment\nairframe:   # and another"),
    (AIRCRAFT, "kind: aircraft\nformat: 1\n", "format: 1\nkind: aircraft\n"),
    (
        AIRCRAFT,
        "  wing_area: 170 ft2\n  wing_span: 36 ft\n",
        "  wing_span: 36 ft\n  wing_area: 170 ft2\n",
    ),
    (AIRCRAFT, "36 ft", "36.0ft"),
    (AIRCRAFT, "36 ft", "10.9728 m"),
    (AIRCRAFT, "36 ft", '"432 in"'),
    (AIRCRAFT, "3000 lb", "1360.77711 kg"),
    (AIRCRAFT, "-0.2 inHg", "−0.2 in Hg"),
    (
        AIRCRAFT,
        "    basis: Greatest power\n    setting: best_power",
        "    setting: best_power\n    basis: Greatest   power",
    ),
    (ENGINE, "8.5", "8.50"),
    (ENGINE, "greatest: 2600 rpm", "greatest: 2.6e3 rpm"),
    (PROPELLER, "78 in", "1981.2 mm"),
    (AIRCRAFT, "demo: yes", "demo: true"),
    (AIRCRAFT, "gear: fixed", "gear: fixed\n  oswald_factor: 0.75"),
    (ENGINE, "limits:", "fuel_density: 6.0 lb/gal\nlimits:"),
]


@pytest.mark.parametrize(("file", "old", "new"), IRRELEVANT)
def test_another_way_of_writing_the_same_leaves_every_digest(tree, file, old, new):
    """Comments, order of keys, spelling of units, defaults written out."""
    before, after, parts = change(tree, file, old, new)
    assert parts == set()
    assert after.digest == before.digest


RELEVANT = [
    (ENGINE, "450 in3", "451 in3", {"engine"}),
    (ENGINE, "8.5", "8.6", {"engine"}),
    (ENGINE, "225 hp", "226 hp", {"engine", "limits", "card"}),
    (ENGINE, "greatest: 2600 rpm", "greatest: 2610 rpm", {"limits"}),
    (ENGINE, "manifold_pressure: 24 inHg", "manifold_pressure: 24.1 inHg", {"limits"}),
    (PROPELLER, "78 in", "77.9 in", {"propeller"}),
    (PROPELLER, "activity_factor: 100", "activity_factor: 101", {"propeller"}),
    (PROPELLER, "high: 2150 rpm", "high: 2151 rpm", {"limits"}),
    (PROPELLER, "Avoid 2000", "Stay out of 2000", {"limits"}),
    (AIRCRAFT, "170 ft2", "170.01 ft2", {"airframe"}),
    (AIRCRAFT, "gear: fixed", "gear: retractable", {"airframe"}),
    (AIRCRAFT, "lean_of_peak: 30", "lean_of_peak: 31", {"mixtures"}),
    (AIRCRAFT, "greatest_power: 75", "greatest_power: 74", {"limits"}),
    (AIRCRAFT, "correction: -0.2", "correction: -0.3", {"gauges"}),
    (AIRCRAFT, "2400 rpm]", "2450 rpm]", {"card"}),
    (AIRCRAFT, "3000 lb", "3001 lb", set()),  # the card names its own masses
    (AIRCRAFT, "  masses", "  paper: A5\n  masses", {"card"}),
    (AIRCRAFT, "card:", "fuel: {usable: 50 gal, reserve: 5 gal}\ncard:", {"card"}),
]


@pytest.mark.parametrize(("file", "old", "new", "changed"), RELEVANT)
def test_a_change_of_a_number_changes_the_digest_of_its_part(tree, file, old, new, changed):
    """The message "replaced because ..." names the part that moved and no other."""
    before, after, parts = change(tree, file, old, new)
    assert parts == changed
    assert (after.digest != before.digest) == bool(changed)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("QX-001", "QX-002"),
        ("date: 2026-03-14", "date: 2026-03-15"),
        ("operator: no", "operator: yes"),
        ("serial: 0123", "serial: 123"),
    ],
)
def test_a_printed_word_changes_the_identity_and_no_number(tree, old, new):
    """The card is printed anew, but its numbers are those of before."""
    before, after, parts = change(tree, AIRCRAFT, old, new)
    assert parts == {"identity"}
    assert after.digest == before.digest


def test_digests_are_sha_256(tree):
    """64 hexadecimal digits, for the profile and for each part."""
    profile = load_profile(tree / AIRCRAFT)
    assert set(profile.part_digests) == {
        "engine",
        "propeller",
        "airframe",
        "mixtures",
        "limits",
        "gauges",
        "card",
        "identity",
        "model",
    }
    for value in (profile.digest, *profile.part_digests.values()):
        assert re.fullmatch("[0-9a-f]{64}", value)


def test_where_the_profile_lies_does_not_matter(tree, tmp_path):
    """A copy on another machine has the same digest."""
    shutil.copytree(tree, tmp_path / "elsewhere" / "hangar")
    copy = load_profile(tmp_path / "elsewhere" / "hangar" / AIRCRAFT)
    assert copy.part_digests == load_profile(tree / AIRCRAFT).part_digests


def test_a_new_model_version_voids_every_digest(tree, monkeypatch):
    """When an equation changes, so does every number."""
    before = load_profile(tree / AIRCRAFT)
    monkeypatch.setattr(digest, "MODEL_VERSION", digest.MODEL_VERSION + 1)
    after = load_profile(tree / AIRCRAFT)
    assert after.digest != before.digest
    assert after.part_digests["engine"] == before.part_digests["engine"]


@given(st.lists(st.text(max_size=3), max_size=4), st.lists(st.text(max_size=3), max_size=4))
def test_different_texts_have_different_digests(one, other):
    """Where one text ends and the next begins is part of the content."""
    assert (digest.digest_of(one) == digest.digest_of(other)) == (one == other)


def test_kinds_of_value_are_not_confused():
    """Text is no number, nothing is no text, a list is not its only entry."""
    values = [None, "None", "", True, "True", 1, "1", "number 1", [1], [[1]], {"1": 1}, 0, False]
    digests = [digest.digest_of(value) for value in values]
    assert len(set(digests)) == len(values)


def test_numbers_are_equal_whatever_they_are_held_in():
    """Python and numpy numbers, tuples and arrays."""
    assert digest.digest_of(2) == digest.digest_of(2.0) == digest.digest_of(np.float64(2.0))
    assert digest.digest_of((1.0, 2.0)) == digest.digest_of(np.array([1.0, 2.0]))
    assert digest.digest_of(-0.0) == digest.digest_of(0.0)


def test_what_has_no_canonical_form_is_refused():
    """A set has no order, a path no place on another machine."""
    for content in ({1, 2}, Path("x"), object()):
        with pytest.raises(TypeError):
            digest.digest_of(content)


def test_a_dataclass_is_digested_by_its_fields():
    """Units of the card are content like any other."""
    assert digest.digest_of(UnitSet()) == digest.digest_of(UnitSet())
    assert digest.digest_of(UnitSet()) != digest.digest_of(replace(UnitSet(), mass="kg"))
