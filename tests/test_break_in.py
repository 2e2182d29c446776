"""The operator's choice for a fresh engine narrows a card and stands on every page."""

from __future__ import annotations

import shutil
from pathlib import Path

import numpy as np
import pytest
from pypdf import PdfReader

from cardgen.errors import DataError
from cardgen.profile import load_profile
from cardgen.profile.card_content import card_of
from cardgen.render.produce import produce
from cardgen.tables.card import CellState

DEMO = Path(__file__).parent.parent / "profiles"

# Invented numbers.
BREAK_IN = """  break_in:
    least_power: 65 %
    greatest_power: 75 %
    greatest_altitude: 8000 ft
    source: {document: Invented overhaul sheet, section: "3", revision: A}
"""
STAMP = "BREAK-IN: 65 to 75 % power, at or below 8000 ft density altitude"


@pytest.fixture
def aircraft(tmp_path: Path) -> Path:
    shutil.copytree(DEMO, tmp_path / "p", ignore=shutil.ignore_patterns("*.fit.yaml"))
    return tmp_path / "p" / "aircraft" / "specimen.yaml"


def with_break_in(aircraft: Path, text: str = BREAK_IN) -> Path:
    whole = aircraft.read_text()
    assert "  paper: half-letter\n" in whole
    aircraft.write_text(whole.replace("  paper: half-letter\n", "  paper: half-letter\n" + text))
    return aircraft


def test_a_break_in_leaves_only_powers_of_its_band_and_altitudes_below_its_ceiling(
    aircraft: Path,
) -> None:
    """Both ends belong to the band, the ceiling to the rows."""
    before = load_profile(aircraft).card
    card = load_profile(with_break_in(aircraft)).card
    assert card.power_fraction == tuple(p for p in before.power_fraction if 0.65 <= p <= 0.75)
    assert max(card.altitude) == pytest.approx(8000 * 0.3048)
    assert len(card.power_fraction) >= 2


def test_a_setting_at_full_throttle_below_the_band_is_forbidden_with_its_source(
    aircraft: Path,
) -> None:
    """At 8000 ft and low rpm full throttle no longer gives the least power."""
    wide = BREAK_IN.replace("8000 ft", "12000 ft")
    card = card_of(load_profile(with_break_in(aircraft, wide)))
    letters = [r.letter for r in card.reasons if r.source.startswith("Invented overhaul sheet")]
    assert len(letters) == 1
    place = [r.letter for r in card.reasons].index(letters[0])
    assert any(np.any(table.reason == place) for table in card.tables)
    for table in card.tables:
        shown = np.isin(table.state, (CellState.VALUE, CellState.FULL_THROTTLE))
        # A tenth of a percent is what rounding the pressure to its printed step may leave.
        assert np.all(table.percent_power[shown] > 64.0)


def test_limits_still_apply_during_a_break_in(aircraft: Path) -> None:
    """Cells that a limit forbids stay forbidden by that limit."""

    def barred(path: Path) -> set[tuple[float, str, float, float]]:
        card = card_of(load_profile(path))
        return {
            (table.power_fraction, table.mixture, table.altitude[row], table.rpm[column])
            for table in card.tables
            for row, _, column in np.argwhere(table.state == CellState.FORBIDDEN)
            if table.altitude[row] <= 8000.0 and 0.65 <= table.power_fraction <= 0.75
        }

    before = barred(aircraft)
    assert before
    assert before <= barred(with_break_in(aircraft))


def test_a_break_in_is_printed_on_every_page_and_in_the_notes_with_its_source(
    aircraft: Path,
) -> None:
    """A pilot who picks up any one page must see it."""
    profile = load_profile(with_break_in(aircraft))
    files = produce(
        card_of(profile), profile.identity, issue=1, replaces=None, formats=("pdf", "csv")
    )
    path = aircraft.with_suffix(".pdf")
    path.write_bytes(files["pdf"])
    pages = [" ".join(page.extract_text().split()) for page in PdfReader(path).pages]
    assert len(pages) > 1
    assert all("".join(STAMP.split()) in "".join(page.split()) for page in pages)
    assert "Invented overhaul sheet" in " ".join(pages)


def test_a_break_in_changes_the_digest_of_the_card(aircraft: Path) -> None:
    """A card made before the overhaul is void."""
    before = load_profile(aircraft)
    now = load_profile(with_break_in(aircraft))
    changed = {k for k, v in now.part_digests.items() if before.part_digests[k] != v}
    assert changed == {"card"}


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("greatest_power: 75 %", "greatest_power: 60 %", "greatest_power is not above"),
        ("least_power: 65 %", "least_power: 71 %", None),
        ("8000 ft", "1000 ft", "card.altitudes: none of them lies within break_in"),
        ("    greatest_altitude: 8000 ft\n", "", "greatest_altitude"),
        ("    source:", "    sauce:", "source"),
    ],
)
def test_a_break_in_that_leaves_nothing_or_contradicts_itself_is_refused(
    aircraft: Path, old: str, new: str, words: str | None
) -> None:
    """A band without a source, upside down or beyond the card is a mistake."""
    assert old in BREAK_IN
    path = with_break_in(aircraft, BREAK_IN.replace(old, new))
    if words is None:
        assert load_profile(path).card.power_fraction == (0.75,)
        return
    with pytest.raises(DataError) as caught:
        load_profile(path)
    assert words in str(caught.value)
