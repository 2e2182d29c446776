"""Evidence in another unit than its column says is named and refused; single slips are told."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import pytest

from cardgen.cli.main import run
from cardgen.fit.oddities import odd_rows
from cardgen.profile import load_profile
from cardgen.profile.assembly import subject_of
from cardgen.profile.fitting import fit_points, start_of, suspect
from cardgen.profile.points import Points, read_points

HERE = Path(__file__).parent
AIRCRAFT = HERE.parent / "profiles" / "aircraft" / "specimen.yaml"
TABLE = HERE / "published" / "faa_65pct" / "aircraft.yaml"
FEW = 7  # rows of a short table


@dataclass(frozen=True)
class Mistake:
    """Numbers of another unit under the usual name of a column."""

    column: str
    meant: str
    write: Callable[[float], str]


MISTAKES = (
    Mistake("tas_kt", "mph", lambda v: f"{v * 1852.0 / 1609.344:.0f}"),
    Mistake("tas_kt", "km/h", lambda v: f"{v * 1.852:.0f}"),
    Mistake("oat_c", "degF", lambda v: f"{v * 1.8 + 32.0:.0f}"),
    Mistake("map_inhg", "hPa", lambda v: f"{v * 33.8639:.0f}"),
    Mistake("map_inhg", "mmHg", lambda v: f"{v * 25.4:.0f}"),
    Mistake("fuel_flow_gph", "l/h", lambda v: f"{v * 3.785411784:.1f}"),
    Mistake("fuel_flow_gph", "impgph", lambda v: f"{v * 0.83267:.1f}"),
    Mistake("fuel_flow_gph", "lb/h", lambda v: f"{v * 6.0:.0f}"),
)


@cache
def rows_of(aircraft: Path) -> tuple[str, ...]:
    """Header and rows of an aircraft's evidence, its temperatures written as a thermometer's."""
    profile = load_profile(aircraft)
    lines = [
        line for line in profile.evidence[0].read_text().splitlines() if not line.startswith("#")
    ]
    names = lines[0].split(",")
    height, deviation = names.index("pressure_altitude_ft"), names.index("isa_deviation_c")
    found = [lines[0].replace("isa_deviation_c", "oat_c")]
    for line in lines[1:]:
        cells = line.split(",")
        cells[deviation] = (
            f"{15.0 - 1.9812e-3 * float(cells[height]) + float(cells[deviation]):.0f}"
        )
        found.append(",".join(cells))
    return tuple(found)


def mistaken(lines: tuple[str, ...], mistake: Mistake) -> list[str]:
    """The same rows with a column in another unit than its name says."""
    place = lines[0].split(",").index(mistake.column)
    found = [lines[0]]
    for line in lines[1:]:
        cells = line.split(",")
        cells[place] = mistake.write(float(cells[place]))
        found.append(",".join(cells))
    return found


def short(lines: tuple[str, ...]) -> tuple[str, ...]:
    """A few rows, spread over the table."""
    return (lines[0], *lines[1 :: len(lines) // FEW])


def read(folder: Path, aircraft: Path, lines: list[str]) -> Points:
    """Rows as a points file of an aircraft."""
    file = folder / "rows.csv"
    file.write_text("\n".join(lines) + "\n")
    return read_points(load_profile(aircraft), [file])


def named(points: Points, aircraft: Path) -> list[tuple[str, str]]:
    """Columns that are suspected, and of which unit."""
    profile = load_profile(aircraft)
    found = suspect(profile, points, start_of(profile, points, record=None))
    return [(item.reading.column, item.meant.symbol if item.meant else "") for item in found]


def test_nine_of_ten_wrong_units_are_named(tmp_path: Path) -> None:
    """Eight mistakes in the demonstration's handbook, all of it and seven rows, and in seven rows
    of the FAA's table.
    """
    right = []
    for aircraft, lines in (
        (AIRCRAFT, rows_of(AIRCRAFT)),
        (AIRCRAFT, short(rows_of(AIRCRAFT))),
        (TABLE, short(rows_of(TABLE))),
    ):
        for mistake in MISTAKES:
            points = read(tmp_path, aircraft, mistaken(lines, mistake))
            right.append(named(points, aircraft) == [(mistake.column, mistake.meant)])
    assert sum(right) >= 0.9 * len(right)


@pytest.mark.parametrize("aircraft", [AIRCRAFT, TABLE])
def test_evidence_in_its_own_units_is_not_suspected(tmp_path: Path, aircraft: Path) -> None:
    """A false alarm teaches people to pass the option that silences the true one."""
    for lines in (rows_of(aircraft), short(rows_of(aircraft))):
        assert named(read(tmp_path, aircraft, list(lines)), aircraft) == []


def test_two_mistakes_in_one_file_are_both_named(tmp_path: Path) -> None:
    """After the first is understood the others are judged again."""
    lines = rows_of(AIRCRAFT)
    for mistake in (MISTAKES[3], MISTAKES[5]):
        lines = tuple(mistaken(lines, mistake))
    found = named(read(tmp_path, AIRCRAFT, list(lines)), AIRCRAFT)
    assert sorted(found) == [("fuel_flow_gph", "l/h"), ("map_inhg", "hPa")]


def test_a_mistake_of_one_source_is_named_beside_the_right_rows_of_the_other(
    tmp_path: Path,
) -> None:
    """Flights in mph do not hide behind a handbook in knots."""
    profile = load_profile(AIRCRAFT)
    lines = rows_of(AIRCRAFT)
    flights = [lines[0], *(line.replace("handbook", "flight") for line in lines[2::9])]
    flown = tmp_path / "flights.csv"
    flown.write_text("\n".join(mistaken(tuple(flights), MISTAKES[0])) + "\n")
    points = read_points(profile, [*profile.evidence, flown])
    found = suspect(profile, points, start_of(profile, points, record=None))
    assert [(item.reading.file, item.meant.symbol if item.meant else "") for item in found] == [
        (str(flown), "mph")
    ]


def test_a_suspect_column_is_refused_unless_accepted(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """No fit file in silence: exit code 3 with the place, or a fit file that carries the doubt."""
    folder = tmp_path / "profiles"
    shutil.copytree(AIRCRAFT.parents[1], folder)
    aircraft = folder / "aircraft" / "specimen.yaml"
    target = folder / "aircraft" / "specimen.fit.yaml"
    target.unlink()
    rows = tmp_path / "rows.csv"
    rows.write_text("\n".join(mistaken(rows_of(AIRCRAFT), MISTAKES[0])) + "\n")
    words = ["fit", str(aircraft), "--points", str(rows)]
    assert run(words) == 3
    told = capsys.readouterr()
    assert told.out == ""
    assert f"{rows}:1:" in told.err
    assert "tas_kt: the numbers look like mph" in told.err
    assert "tas_mph, or --accept-suspect" in told.err
    assert not target.exists()
    assert run([*words, "--accept-suspect"]) == 0
    assert "look like mph" in capsys.readouterr().out
    assert "look like mph" in target.read_text()


@pytest.mark.parametrize(
    ("line", "column", "cell", "quantity", "why"),
    [
        (19, "fuel_flow_gph", "14.9", 1, ""),
        (19, "tas_kt", "176", 2, "unit"),  # 153 kt in mph
        (19, "map_inhg", "721", 0, "unit"),  # 21.3 inHg in hPa
        (22, "map_inhg", "20.4", 0, "not full throttle"),  # which is 19.2 there
        (19, "map_inhg", "22.4", 0, "full throttle"),  # of the row with 75 %
        (19, "map_inhg", "27.9", 0, "above"),  # the air has 22.2
        (19, "oat_c", "30", None, "temperature unit"),  # -1 °C in °F
    ],
)
def test_a_single_slip_is_found_with_its_reason(
    tmp_path: Path, line: int, column: str, cell: str, quantity: int | None, why: str
) -> None:
    """One wrong number among a hundred: the row is named, and what it looks like."""
    lines = list(rows_of(AIRCRAFT))
    cells = lines[line - 1].split(",")
    cells[lines[0].split(",").index(column)] = cell
    lines[line - 1] = ",".join(cells)
    points = read(tmp_path, AIRCRAFT, lines)
    profile = load_profile(AIRCRAFT)
    start = start_of(profile, points, record=None)
    assert suspect(profile, points, start) == ()
    found = odd_rows(
        subject_of(profile), points.evidence, fit_points(profile, points, start), points.readings
    )
    assert found
    assert points.evidence.place[found[0].row].endswith(f":{line}")
    assert found[0].why == why
    assert quantity in (None, found[0].quantity)


def test_a_sound_handbook_has_no_odd_row(tmp_path: Path) -> None:
    """Rows as printed, of the demonstration and of the FAA's table."""
    for aircraft in (AIRCRAFT, TABLE):
        profile = load_profile(aircraft)
        points = read(tmp_path, aircraft, list(rows_of(aircraft)))
        found = fit_points(profile, points, start_of(profile, points, record=None))
        assert odd_rows(subject_of(profile), points.evidence, found, points.readings) == ()
