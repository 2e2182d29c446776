"""`cardgen fit`: what it prints, what it writes, and what it leaves alone."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import numpy as np
import pytest
from hidden_truth import Truth, fly

from cardgen.cli.main import run

PROFILES = Path(__file__).parents[1] / "profiles"


@pytest.fixture
def aircraft(tmp_path: Path) -> Path:
    """A copy of the demonstration."""
    shutil.copytree(PROFILES, tmp_path / "profiles")
    return tmp_path / "profiles" / "aircraft" / "specimen.yaml"


def test_json_is_the_stable_object_and_nothing_else(
    aircraft: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Other programs read exactly these keys; numbers belong together."""
    assert run(["fit", str(aircraft), "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert list(found) == ["parameters", "residuals", "rms", "leave_one_out_rms", "warnings"]
    assert all(
        list(item) == ["name", "value", "prior", "standard_error"] for item in found["parameters"]
    )
    for name, rms in found["rms"].items():
        residuals = [item for item in found["residuals"] if item["quantity"] == name]
        errors = np.array([item["residual"] for item in residuals])
        assert np.sqrt(np.mean(errors**2)) == pytest.approx(rms)
        unseen = np.array([item["leave_one_out"] for item in residuals])
        assert np.sqrt(np.mean(unseen**2)) == pytest.approx(found["leave_one_out_rms"][name])
        told = [item["predicted"] - item["value"] for item in residuals]
        assert told == pytest.approx(list(errors), abs=1e-9)


def test_the_report_tells_what_a_mechanic_asks(
    aircraft: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """How well, what was found, what is uncertain, what looks wrong, what to fly; short lines."""
    assert run(["fit", str(aircraft)]) == 0
    told = capsys.readouterr().out
    for words in (
        "fitted to 98 rows, 98 of a handbook and 0 flown",
        "How well it fits",
        "rows not seen",
        "What was found",
        "Not determined by these rows",
        "No column and no row looks wrong",
        "What to fly next",
        "Tolerance of the card now",
    ):
        assert words in told
    lines = [line.replace(str(aircraft.parent), "") for line in told.splitlines()]
    assert max(map(len, lines)) <= 100


def test_points_and_out_may_be_named(aircraft: Path, tmp_path: Path) -> None:
    """Several points files make one fit; the file beside the profile is left alone."""
    standing = aircraft.with_name("specimen.fit.yaml").read_bytes()
    rows = aircraft.with_name("specimen-handbook.csv").read_text().splitlines(keepends=True)
    head = next(line for line in rows if line.startswith("pressure"))
    data = [line for line in rows if line[0].isdigit()]
    files = []
    for place, part in enumerate((data[::2], data[1::2])):
        files.append(tmp_path / f"part{place}.csv")
        files[-1].write_text(head + "".join(part))
    out = tmp_path / "other.fit.yaml"
    words = ["fit", str(aircraft), "--out", str(out)]
    assert run([*words, "--points", str(files[0]), "--points", str(files[1])]) == 0
    assert aircraft.with_name("specimen.fit.yaml").read_bytes() == standing
    assert out.read_text().count(".csv") == 2


def test_the_same_evidence_gives_the_same_file(aircraft: Path) -> None:
    """No clock and no chance is in a fit."""
    target = aircraft.with_name("specimen.fit.yaml")
    assert run(["fit", str(aircraft)]) == 0
    first = target.read_bytes()
    target.unlink()
    assert run(["fit", str(aircraft)]) == 0
    assert target.read_bytes() == first


def test_nothing_is_written_when_something_is_wrong(
    aircraft: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Bad rows: exit code 3, every place on stderr, the standing fit as it was."""
    standing = aircraft.with_name("specimen.fit.yaml").read_bytes()
    bad = tmp_path / "bad.csv"
    bad.write_text("pressure_altitude_ft,oat_c,rpm,map_inhg,fuel_flow_gph,mixture\n1,2,x,4,5,y\n")
    assert run(["fit", str(aircraft), "--points", str(bad)]) == 3
    told = capsys.readouterr()
    assert told.out == ""
    assert f"{bad}:2:5: rpm" in told.err
    assert f"{bad}:2:11: mixture" in told.err
    assert aircraft.with_name("specimen.fit.yaml").read_bytes() == standing


def test_a_row_without_level_flight_is_named(
    aircraft: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """40 % at 16 000 ft and 6 000 lb does not fly: exit code 4 with the row."""
    rows = tmp_path / "rows.csv"
    rows.write_text(
        "pressure_altitude_ft,oat_c,rpm,percent_power,tas_kt,weight_lb,mixture\n"
        "6000,3,2350,65,152,2800,Best power\n16000,-17,2350,40,120,6000,Best power\n"
    )
    assert run(["fit", str(aircraft), "--points", str(rows)]) == 4
    assert f"{rows}:3: the model of this profile has no level flight" in capsys.readouterr().err


def test_nothing_to_fit_to_is_wrong_usage(
    aircraft: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A profile without evidence needs --points."""
    text = aircraft.read_text().replace("evidence: [specimen-handbook.csv]", "")
    aircraft.write_text(text)
    assert run(["fit", str(aircraft)]) == 2
    assert "give --points" in capsys.readouterr().err


def test_a_bad_standing_fit_does_not_stand_in_the_way(
    aircraft: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Whoever is told to fit again must be able to."""
    target = aircraft.with_name("specimen.fit.yaml")
    target.write_text("kind: fit\n")
    assert run(["fit", str(aircraft)]) == 0
    assert "written anew" in capsys.readouterr().err
    assert run(["table", str(aircraft), "--csv"]) == 0


def test_an_aeroplane_without_a_handbook_is_fitted_to_its_flights(
    aircraft: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Rows of gauge readings without power: speed and fuel are learned, and predicted.

    The flights are those of an aeroplane that shares no code with the model; its gauges are true.
    """
    text = aircraft.read_text()
    start, end = text.index("instruments:"), text.index("fuel:\n")
    aircraft.write_text(text[:start] + text[end:])
    aircraft.with_name("specimen.fit.yaml").unlink()
    lines = [
        "pressure_altitude_ft,isa_deviation_c,rpm,map_inhg,fuel_flow_gph,tas_kt,weight_lb,mixture,source"
    ]
    for altitude, rpm, pressure, mixture in (
        (3000, 2300, 23.0, 0),
        (3000, 2500, 21.0, 1),
        (6000, 2300, 20.0, 0),
        (6000, 2500, 22.5, 0),
        (9000, 2400, 20.0, 1),
        (9000, 2500, 18.0, 0),
    ):
        point = fly(Truth(), altitude, 5, rpm, 2700, mixture, map_inhg=pressure)
        name = ("Best power", "Economy")[mixture]
        lines.append(
            f"{altitude},5,{rpm},{pressure},{point.fuel_flow_gph:.1f},{point.tas_kt:.0f},2700,"
            f"{name},flight"
        )
    rows = tmp_path / "flights.csv"
    rows.write_text("\n".join(lines) + "\n")
    assert run(["fit", str(aircraft), "--points", str(rows), "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["rms"]["manifold_pressure_inhg"] is None
    assert found["rms"]["true_airspeed_kt"] < 1.5
    truth = fly(Truth(), 5000, 0, 2400, 2700, 0, map_inhg=22.0)
    asked = "--map 22 --rpm 2400 --altitude 5000 --oat 5 --weight 2700 --json"
    assert run(["check", str(aircraft), *asked.split()]) == 0
    said = json.loads(capsys.readouterr().out)
    assert said["true_airspeed_kt"] == pytest.approx(truth.tas_kt, abs=2.5)
    assert said["fuel_flow_gph"] == pytest.approx(truth.fuel_flow_gph, abs=0.4)
