"""Points files: what a column means, in which unit, and what is said of what cannot be meant."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from cardgen.airspeed import true_temperature
from cardgen.atmosphere import density_altitude, standard_pressure
from cardgen.constants import FOOT, HORSEPOWER, HOUR, INCH_OF_MERCURY, KNOT, POUND
from cardgen.errors import DataError
from cardgen.profile import load_profile
from cardgen.profile.document import Profile
from cardgen.profile.points import Points, read_points

PROFILE = load_profile(Path(__file__).parents[1] / "profiles" / "aircraft" / "specimen.yaml")
GPH = 6.0 * POUND / HOUR
HEAD = (
    "pressure_altitude_ft,oat_c,rpm,map_inhg,percent_power,fuel_flow_gph,tas_kt,weight_lb,mixture"
)
ROW = "6000,3,2350,22.4,65,12.1,150,2800,Best power"


def read(tmp_path: Path, text: str, profile: Profile = PROFILE) -> Points:
    """Read a text as a points file."""
    file = tmp_path / "points.csv"
    file.write_text(text, encoding="utf-8")
    return read_points(profile, [file])


def problems(tmp_path: Path, text: str) -> list[str]:
    """What is wrong with a text, with the folder cut off."""
    with pytest.raises(DataError) as caught:
        read(tmp_path, text)
    return [str(problem).replace(f"{tmp_path}/", "") for problem in caught.value.problems]


def test_a_handbook_row_is_read_as_true_values(tmp_path: Path) -> None:
    """Each number in its unit, nothing corrected; the printed step goes with it."""
    evidence = read(tmp_path, f"# a comment\n\n{HEAD},source\n{ROW},handbook\n").evidence
    assert len(evidence) == 1
    assert evidence.pressure[0] == pytest.approx(float(standard_pressure(6000.0 * FOOT)))
    assert evidence.temperature[0] == pytest.approx(276.15)
    assert evidence.rpm[0] == 2350.0
    assert evidence.mass[0] == pytest.approx(2800.0 * POUND)
    assert evidence.power[0] == pytest.approx(0.65 * 224.0 * HORSEPOWER)
    assert evidence.read()[0] == pytest.approx([22.4 * INCH_OF_MERCURY, 12.1 * GPH, 150.0 * KNOT])
    assert evidence.rounding[0] == pytest.approx([0.1 * INCH_OF_MERCURY, 0.1 * GPH, KNOT])
    assert not evidence.flight[0]
    assert evidence.place[0].endswith("points.csv:4")


@pytest.mark.parametrize(
    ("column", "cell", "quantity", "expected"),
    [
        ("map_hpa", "760", "manifold_pressure", 76000.0),
        ("map_kpa", "76.0", "manifold_pressure", 76000.0),
        ("map_mmhg", "570", "manifold_pressure", 570.0 * 133.322),
        ("fuel_flow_lph", "45.8", "fuel_flow", 45.8e-3 / 3600.0 * 6.0 * POUND / 3.785411784e-3),
        ("fuel_flow_pph", "72.6", "fuel_flow", 72.6 * POUND / HOUR),
        ("fuel_flow_kgph", "33", "fuel_flow", 33.0 / HOUR),
        ("tas_mph", "173", "true_airspeed", 173.0 * 1609.344 / 3600.0),
        ("tas_kmh", "278", "true_airspeed", 278.0 / 3.6),
        ("oat_f", "37.4", "temperature", 276.15),
        ("isa_deviation_c", "10", "temperature", 298.15 - 0.0065 * 6000.0 * FOOT),
        ("isa_deviation_f", "18", "temperature", 298.15 - 0.0065 * 6000.0 * FOOT),
        ("power_hp", "146", "power", 146.0 * HORSEPOWER),
        ("power_kw", "109", "power", 109000.0),
        ("weight_kg", "1270", "mass", 1270.0),
    ],
)
def test_the_ending_of_a_column_is_its_unit(
    tmp_path: Path, column: str, cell: str, quantity: str, expected: float
) -> None:
    """Factors are those of NIST SP 811; a mass flow needs the fuel's density to be a volume."""
    names, cells = HEAD.split(","), ROW.split(",")
    stem = column.rpartition("_")[0]
    stem = {"isa_deviation": "oat", "power": "percent_power"}.get(stem, stem)
    place = next(i for i, name in enumerate(names) if name.startswith(stem))
    names[place], cells[place] = column, cell
    evidence = read(tmp_path, f"{','.join(names)}\n{','.join(cells)}\n").evidence
    assert getattr(evidence, quantity)[0] == pytest.approx(expected, rel=2e-5)


@pytest.mark.parametrize("temperature", ["oat_c", "isa_deviation_c"])
def test_density_altitude_may_stand_for_pressure_altitude(tmp_path: Path, temperature: str) -> None:
    """The air has the density that was stated, at the temperature that was stated."""
    head = HEAD.replace("pressure_altitude_ft", "density_altitude_ft").replace("oat_c", temperature)
    evidence = read(tmp_path, f"{head}\n{ROW.replace(',3,', ',8,')}\n").evidence
    found = density_altitude(evidence.pressure, evidence.temperature) / FOOT
    assert found[0] == pytest.approx(6000.0, abs=0.5)


def test_a_flight_row_is_corrected_by_the_gauges_of_the_profile(tmp_path: Path) -> None:
    """Tachometer 2350 reads 10 to 11 low, manifold pressure 0.2 high, fuel flow 2 % low, and the
    thermometer feels 0.8 of the rise; all as the demonstration profile states.
    """
    row = ROW.replace(",65,", ",,")
    evidence = read(tmp_path, f"{HEAD},source\n{row},flight\n").evidence
    assert evidence.flight[0]
    assert evidence.rpm[0] == pytest.approx(2350.0 + 10.0)
    assert evidence.manifold_pressure[0] == pytest.approx(22.2 * INCH_OF_MERCURY)
    assert evidence.fuel_flow[0] == pytest.approx(1.02 * 12.1 * GPH)
    rise = 0.8 * (150.0 * KNOT) ** 2 / (2.0 * 1004.7)
    assert evidence.temperature[0] == pytest.approx(276.15 - rise, abs=0.01)


def test_without_airspeed_the_thermometer_is_corrected_by_the_models(tmp_path: Path) -> None:
    """Five knots are 0.3 K: the unfitted model's airspeed is near enough."""
    row = ROW.replace(",65,", ",,").replace(",150,", ",,")
    evidence = read(tmp_path, f"{HEAD},source\n{row},flight\n").evidence
    usual = float(true_temperature(276.15, 150.0 * KNOT, recovery_factor=0.8))
    assert evidence.temperature[0] == pytest.approx(usual, abs=0.5)


LEGS = ",".join(f"leg{leg}_gs_kt,leg{leg}_track_deg" for leg in range(1, 5))
FLOWN = f"pressure_altitude_ft,isa_deviation_c,rpm,map_inhg,mixture,source,{LEGS}\n"


def test_ground_legs_give_the_published_airspeed(tmp_path: Path) -> None:
    """National Test Pilot School: 178, 185, 188, 184 kt on 178, 82, 355, 265° are 183.73 kt."""
    text = FLOWN + "6000,0,2350,22.4,Best power,flight,178,178,185,82,188,355,184,265\n"
    evidence = read(tmp_path, text).evidence
    assert evidence.true_airspeed[0] / KNOT == pytest.approx(183.72669557, abs=0.01)
    assert evidence.rounding[0, 2] == 0.0
    # The four sets of three legs lie this far apart; it enters the deviation of the datum.
    assert 0.0 < evidence.spread[0, 2] / KNOT < 2.0


def test_three_legs_are_enough_and_two_are_not(tmp_path: Path) -> None:
    """Two circles meet in two points: only three ground velocities fix wind and airspeed."""
    text = FLOWN + "6000,0,2350,22.4,Best power,flight,178,178,185,82,188,355,,\n"
    assert 170.0 < read(tmp_path, text).evidence.true_airspeed[0] / KNOT < 200.0
    text = FLOWN + "6000,0,2350,22.4,Best power,flight,178,178,185,82,,,,\n"
    assert any("2 leg(s) given, expected three" in line for line in problems(tmp_path, text))


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ("178,178,185,,188,355,,", "leg2_track: is missing"),
        ("178,178,185,179,188,180,,", "do not fix an airspeed"),
        ("0,178,185,82,188,355,,", "is not possible"),
    ],
)
def test_legs_that_cannot_be_are_refused(tmp_path: Path, cells: str, words: str) -> None:
    """Every leg needs both numbers, and the legs must be spread."""
    text = FLOWN + f"6000,0,2350,22.4,Best power,flight,{cells}\n"
    assert any(words in line for line in problems(tmp_path, text))


def test_every_problem_is_told_with_its_place_in_one_run(tmp_path: Path) -> None:
    """Line and column of the cell, what stands there, what was expected."""
    text = (
        f"{HEAD}\n"
        "6000,3,2350,22.4,65,12.1,150,2800,Best power\n"
        "6000,x,2350,22.4,65,12.1,150,2800,Best power\n"
        "6000,3,,22.4,65,12.1,150,2800,Best power\n"
        '6000,3,2350,22.4,65,"12,1",150,2800,Best power\n'
        "6000,3,2350,22.4,650,12.1,150,2800,Best\n"
    )
    assert problems(tmp_path, text) == [
        "points.csv:3:6: oat_c: 'x' is not a number, "
        "expected a number without its unit, or an empty cell",
        "points.csv:4:1: rpm: is missing, expected a number in every row",
        "points.csv:5:22: fuel_flow_gph: '12,1' is not a number, "
        "expected a number without its unit, and a decimal point, or an empty cell",
        "points.csv:6:18: percent_power: 650 is not possible, expected 1 to 120",
        "points.csv:6:36: mixture: 'Best' is no mixture of specimen.yaml, "
        "expected one of Best power, Economy",
    ]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        (f"{HEAD}\n", "has a header but no rows"),
        (HEAD.replace(",", ";") + "\n" + ROW.replace(",", ";"), "separated by semicolons"),
        (f"{HEAD}\n{ROW},1,2\n", "the row has 11 cells, expected 9"),
        (f"{HEAD},oat_c\n{ROW},3\n", "oat_c: is given twice"),
        (f"{HEAD.replace('oat_c', 'oat')}\n{ROW}\n", "oat: has no unit, expected a name such as"),
        (f"{HEAD.replace('oat_c', 'oat_kt')}\n{ROW}\n", "kt is a unit of speed"),
        (f"{HEAD.replace('fuel_flow_gph', 'fuel_fow_gph')}\n{ROW}\n", "unknown column"),
        (f'{HEAD}\n{ROW[:-1]}"\n{ROW}\n6000,"3\n', "quotation mark is not closed"),
        (f"{HEAD.replace('mixture', 'note')}\n{ROW}\n", "mixture: is missing, expected one of"),
        (f"{HEAD},source\n{ROW},guess\n", "'guess' is not a source, expected handbook or flight"),
        (f"{HEAD},isa_deviation_c\n{ROW},0\n", "oat is given as well"),
        (
            f"{HEAD}\n6000,3,2350,,,12.1,150,2800,Best power\n",
            "neither power nor manifold pressure",
        ),
        (f"{HEAD}\n6000,3,2350,22.4,,,,2800,Best power\n", "says nothing of what it gives"),
        (f"{HEAD}\n6000,3,2350,,65,,,2800,Best power\n", "states nothing to fit to"),
        (f"{HEAD}\n1e9,3,2350,22.4,65,12.1,150,2800,Best power\n", "'1e9' is not a number"),
        (f"{HEAD}\nnan,3,2350,22.4,65,12.1,150,2800,Best power\n", "'nan' is not a number"),
        ("rpm,map_inhg\n2350,22.4\n", "has no column pressure_altitude_ft"),
    ],
)
def test_what_cannot_be_meant_is_refused(tmp_path: Path, text: str, words: str) -> None:
    """A guess at what a row means would end up on a card."""
    assert any(words in line for line in problems(tmp_path, text)), problems(tmp_path, text)


def test_files_that_are_none_are_refused(tmp_path: Path) -> None:
    """Folders, missing files and other encodings are told, never a traceback."""
    for name, words in ((".", "is a folder"), ("none.csv", "does not exist")):
        with pytest.raises(DataError, match=words):
            read_points(PROFILE, [tmp_path / name])
    (tmp_path / "latin.csv").write_bytes(f"{HEAD}\n{ROW}\u00e9\n".encode("latin-1"))
    with pytest.raises(DataError, match="not UTF-8"):
        read_points(PROFILE, [tmp_path / "latin.csv"])


def test_what_is_assumed_or_not_used_is_told(tmp_path: Path) -> None:
    """A file may leave out weight and source, and hold other columns, but never in silence."""
    head = HEAD.replace(",weight_lb", "") + ",remark"
    notes = " ".join(read(tmp_path, f"{head}\n{ROW.replace(',2800', '')},cowl flaps open\n").notes)
    assert "without a weight are taken at the greatest, 3000 lb" in notes
    assert "without a source are taken as handbook" in notes
    assert "not used: remark" in notes


def test_endings_of_lines_and_spaces_do_not_matter(tmp_path: Path) -> None:
    """Spreadsheets write what they like around the numbers."""
    plain = read(tmp_path, f"{HEAD}\n{ROW}\n")
    other = read(
        tmp_path,
        "\ufeff" + HEAD.upper().replace(",", " , ") + "\r\n" + ROW.replace(",", " , ") + "\r\n",
    )
    assert other.row_digests == plain.row_digests


def test_a_row_has_one_digest_however_it_is_written(tmp_path: Path) -> None:
    """Units and order of columns leave a row the row it is; another number does not."""
    one = read(tmp_path, f"{HEAD}\n{ROW}\n").row_digests
    names, cells = HEAD.split(",")[::-1], ROW.split(",")[::-1]
    assert read(tmp_path, f"{','.join(names)}\n{','.join(cells)}\n").row_digests == one
    assert read(tmp_path, f"{HEAD}\n{ROW.replace('22.4', '22.5')}\n").row_digests != one


@settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(st.text(max_size=200))
def test_no_text_breaks_the_reader(tmp_path: Path, text: str) -> None:
    """Whatever a file holds, it is read or refused with a place."""
    file = tmp_path / "any.csv"
    file.write_bytes(f"{HEAD}\n{ROW}\n".encode() + text.encode("utf-8", "surrogatepass"))
    try:
        points = read_points(PROFILE, [file])
    except DataError as error:
        told = error.problems
    else:
        told = ()
        assert np.isfinite(points.evidence.pressure).all()
    assert all(problem.found for problem in told)


@given(
    altitude=st.floats(0.0, 12000.0),
    reading=st.floats(-30.0, 40.0),
    speed=st.floats(100.0, 200.0),
)
@settings(
    max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
def test_a_flown_temperature_is_never_above_what_was_read(
    tmp_path: Path, altitude: float, reading: float, speed: float
) -> None:
    """Ram only warms a thermometer."""
    row = f"{altitude:.0f},{reading:.1f},2350,20.0,,10.0,{speed:.0f},2800,Best power,flight"
    evidence = read(tmp_path, f"{HEAD},source\n{row}\n").evidence
    assert evidence.temperature[0] < round(reading, 1) + 273.15
    assert math.isclose(
        float(evidence.pressure[0]), float(standard_pressure(round(altitude) * FOOT)), rel_tol=1e-9
    )
