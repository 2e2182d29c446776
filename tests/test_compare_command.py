"""`cardgen compare`: words, data, exit codes, and the sheet for the logbook."""

from __future__ import annotations

import csv
import io
import json
from pathlib import Path

import pytest
from demo_profiles import THREE_BLADES, TWO_BLADES, demo_folder, edit
from pypdf import PdfReader

from cardgen.cli.main import run
from cardgen.compare.rows import COLUMNS
from cardgen.render.words import read_words

SUPPLEMENTARY = "SUPPLEMENTARY. The approved flight manual, placards and markings govern."


@pytest.fixture
def pair(tmp_path: Path) -> tuple[Path, Path]:
    old = demo_folder(tmp_path / "old")
    return old, edit(demo_folder(tmp_path / "new"), TWO_BLADES, THREE_BLADES)


def data(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text)))


def test_the_first_line_is_the_verdict_and_the_rest_is_by_altitude(
    pair: tuple[Path, Path], capsys: pytest.CaptureFixture[str]
) -> None:
    """What moved most and whether it is significant; then rows from low to high."""
    assert run(["compare", *map(str, pair)]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert "moved most" in lines[0]
    assert "significant" in lines[0]
    assert "DEMONSTRATION DATA, NOT FOR FLIGHT" in lines
    assert lines[-1].startswith("Supplementary: the approved flight manual")
    first = lines.index("Mixture Best power, at the same percent power")
    last = lines.index("Mixture Economy, at the same percent power")
    altitudes = [float(line.split()[0]) for line in lines[first + 2 : last - 1]]
    assert altitudes == sorted(altitudes)
    assert (altitudes[0], altitudes[-1]) == (2000.0, 12000.0)


def test_limits_that_vanished_and_appeared_are_told_with_their_sources(
    pair: tuple[Path, Path], capsys: pytest.CaptureFixture[str]
) -> None:
    """A restricted range belongs to a propeller."""
    run(["compare", *map(str, pair)])
    told = capsys.readouterr().out
    assert "First restricted range vanished: restricted 1875-2050 rpm (Specimen P2-77" in told
    assert "Restricted range appeared: restricted 2300-2400 rpm at and above 23.5 inHg" in told
    assert "Allowed before, not allowed now" in told


def test_a_swapped_part_compares_like_a_second_profile(
    pair: tuple[Path, Path], capsys: pytest.CaptureFixture[str]
) -> None:
    """--with propeller=FILE is the one changed line, without writing it."""
    old, new = pair
    part = new.parents[1] / "propellers" / "specimen-p3-75.yaml"
    assert run(["compare", str(old), str(new), "--csv"]) == 0
    whole = capsys.readouterr().out
    assert run(["compare", str(old), "--with", f"propeller={part}", "--csv"]) == 0
    assert capsys.readouterr().out == whole
    assert run(["compare", str(old), "--with", f"propeller={part}"]) == 0
    assert "propeller Specimen P3-75 s/n not stated" in capsys.readouterr().out


def test_csv_is_data_alone_and_its_differences_are_those_of_its_own_columns(
    pair: tuple[Path, Path], capsys: pytest.CaptureFixture[str]
) -> None:
    """New less old, and range is speed over flow."""
    run(["compare", *map(str, pair), "--csv"])
    rows = data(capsys.readouterr().out)
    assert list(rows[0]) == list(COLUMNS)
    assert len(rows) == 2 * 3 * 3 * 11
    for row in rows:
        for name, unit in (("fuel_flow", "gph"), ("true_airspeed", "kt")):
            new, old = (float(row[f"{side}_{name}_{unit}"]) for side in ("new", "old"))
            assert float(row[f"{name}_change_{unit}"]) == pytest.approx(new - old, abs=1e-9)
        assert float(row["new_specific_range_nm_per_gal"]) == pytest.approx(
            float(row["new_true_airspeed_kt"]) / float(row["new_fuel_flow_gph"]), rel=1e-9
        )


def test_old_and_new_columns_are_what_the_table_command_prints(
    pair: tuple[Path, Path], capsys: pytest.CaptureFixture[str]
) -> None:
    """One path to every number: a comparison cannot disagree with the tables it is of."""

    def place(row: dict[str, str]) -> tuple[str, int, int, int]:
        numbers = (row["rpm"], row["asked_percent_power"], row["density_altitude_ft"])
        rpm, percent, altitude = (round(float(number)) for number in numbers)
        return row["mixture"], rpm, percent, altitude

    run(["compare", *map(str, pair), "--csv"])
    compared = data(capsys.readouterr().out)
    for side, profile in zip(("old", "new"), pair, strict=True):
        run(["table", str(profile), "--csv"])
        table = {place(row): row for row in data(capsys.readouterr().out)}
        assert len(table) == len(compared)
        for row in compared:
            printed = table[place(row)]
            for name in ("manifold_pressure_inhg", "fuel_flow_gph", "true_airspeed_kt"):
                assert float(row[f"{side}_{name}"]) == pytest.approx(float(printed[name]))
            assert row[f"{side}_status"] == printed["status"]


def test_json_is_one_object_with_verdict_limits_and_settings(
    pair: tuple[Path, Path], capsys: pytest.CaptureFixture[str]
) -> None:
    """Other programs read it."""
    run(["compare", *map(str, pair), "--json"])
    found = json.loads(capsys.readouterr().out)
    assert set(found) == {"verdict", "percent_of", "limits", "gauges", "mixtures", "settings"}
    assert found["percent_of"]["old"]["power_hp"] == pytest.approx(224.0)
    assert {change["kind"] for change in found["limits"]} == {"appeared", "vanished"}
    assert list(found["settings"][0]) == list(COLUMNS)


@pytest.mark.parametrize(
    ("options", "code"),
    [
        ((), 2),
        (("--with", "wing=x.yaml"), 2),
        (("--with", "propeller"), 2),
        (("--with", "propeller=a.yaml", "--with", "propeller=b.yaml"), 2),
        (("--with", "propeller=not-there.yaml"), 3),
        (("OLD", "--with", "propeller=a.yaml"), 2),
        (("OLD", "--csv", "--json"), 2),
        (("OLD", "-o", "sheet.txt"), 2),
        (("OLD", "--fit", "a", "--no-fit"), 2),
        (("not-there.yaml",), 3),
    ],
)
def test_wrong_usage_and_bad_files_end_with_their_exit_code(
    pair: tuple[Path, Path],
    options: tuple[str, ...],
    code: int,
    capsys: pytest.CaptureFixture[str],
) -> None:
    """2 for usage, 3 for a profile or part file, words on stderr only."""
    words = [str(pair[0]), *(str(pair[0]) if word == "OLD" else word for word in options)]
    assert run(["compare", *words]) == code
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err


def test_an_engine_file_in_the_place_of_a_propeller_is_refused(
    pair: tuple[Path, Path], capsys: pytest.CaptureFixture[str]
) -> None:
    """The kind of a part is stated in its file."""
    part = pair[0].parents[1] / "engines" / "specimen-e6-462.yaml"
    assert run(["compare", str(pair[0]), "--with", f"propeller={part}"]) == 3
    assert "is a file of kind engine, expected a file of kind propeller" in capsys.readouterr().err


@pytest.fixture
def sheet(pair: tuple[Path, Path], tmp_path: Path) -> PdfReader:
    out = tmp_path / "change.pdf"
    assert run(["compare", *map(str, pair), "-o", str(out)]) == 0
    return PdfReader(out)


def test_every_page_of_the_sheet_carries_the_whole_marking(sheet: PdfReader) -> None:
    """A page that falls out of the logbook still says whose it is and what governs."""
    assert len(sheet.pages) > 1
    for place, page in enumerate(sheet.pages, start=1):
        text = " ".join(page.extract_text().split())
        for words in (
            "QX-417",
            f"page {place} of {len(sheet.pages)}",
            "DEMONSTRATION DATA, NOT FOR FLIGHT",
            "NOT FITTED: planning estimate only",
            "propeller Specimen P2-77",
            "propeller Specimen P3-75",
            "Percent power is of Maximum continuous: 224 hp",
            "Units: manifold pressure inHg",
            SUPPLEMENTARY,
        ):
            assert words in text, (place, words)


def test_the_sheet_is_set_in_the_faces_of_the_card_and_nothing_below_nine_points(
    sheet: PdfReader,
) -> None:
    """Roboto Condensed, embedded, as on a card."""
    content = sheet.stream
    assert content is not None
    content.seek(0)
    words = [word for page in read_words(content.read()) for word in page]
    assert min(word.size for word in words) >= 9.0
    assert all("RobotoCondensed" in word.font for word in words)


def test_the_same_comparison_gives_the_same_bytes(pair: tuple[Path, Path], tmp_path: Path) -> None:
    """Nothing of the clock is in a sheet."""
    for name in ("one.pdf", "two.pdf"):
        run(["compare", *map(str, pair), "-o", str(tmp_path / name)])
    assert (tmp_path / "one.pdf").read_bytes() == (tmp_path / "two.pdf").read_bytes()


def test_a_card_by_pressure_altitude_with_many_columns_fits_the_sheet_in_metric_units(
    pair: tuple[Path, Path], tmp_path: Path
) -> None:
    """Three temperatures, five rpm columns, two masses, A4: more pages, nothing lost."""
    for profile in pair:
        edit(
            profile,
            "rpm: [2200 rpm, 2350 rpm, 2500 rpm]",
            "rpm: [2100 rpm, 2200 rpm, 2300 rpm, 2400 rpm, 2500 rpm]",
        )
        edit(
            profile,
            "altitude_kind: density",
            "altitude_kind: pressure\n  temperatures: [-20 degC, 0 degC, 20 degC]",
        )
        edit(profile, "masses: [2800 lb]", "masses: [2400 lb, 2800 lb]")
        edit(profile, "units: us", "units: metric")
        edit(profile, "paper: half-letter", "paper: A4")
    out = tmp_path / "change.pdf"
    assert run(["compare", *map(str, pair), "-o", str(out)]) == 0
    reader = PdfReader(out)
    text = " ".join(" ".join(page.extract_text().split()) for page in reader.pages)
    assert float(reader.pages[0].mediabox.height) == pytest.approx(841.89, abs=0.1)
    for words in ("ISA -20 °C", "ISA +20 °C", "2100 rpm", "2500 rpm", "1089 kg", "1270 kg", "nm/l"):
        assert words in text, words
