"""The command line as its users and other programs meet it: output, exit codes, errors."""

from __future__ import annotations

import csv
import io
import json
import math
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from pypdf import PdfReader

from cardgen.cli.main import run
from cardgen.tables.rows import COLUMNS

ROOT = Path(__file__).parent.parent
STABLE_COLUMNS = [
    "pressure_altitude_ft",
    "isa_deviation_c",
    "oat_c",
    "density_altitude_ft",
    "rpm",
    "percent_power",
    "power_hp",
    "manifold_pressure_inhg",
    "full_throttle",
    "fuel_flow_gph",
    "true_airspeed_kt",
    "calibrated_airspeed_kt",
    "propeller_efficiency",
    "blade_angle_deg",
    "mixture",
    "status",
]
CHECK_KEYS = {
    "percent_power",
    "power_hp",
    "fuel_flow_gph",
    "true_airspeed_kt",
    "calibrated_airspeed_kt",
    "full_throttle_map_inhg",
    "propeller",
    "verdict",
    "findings",
}
PROPELLER_KEYS = {
    "efficiency",
    "blade_angle_deg",
    "advance_ratio",
    "angle_of_attack_deg",
    "slip_percent",
    "tip_mach",
    "on_stop",
}


@pytest.fixture
def demo(tmp_path: Path) -> Path:
    """Return the demonstration profile in a tree of its own."""
    shutil.copytree(ROOT / "profiles", tmp_path / "profiles")
    return tmp_path / "profiles" / "aircraft" / "specimen.yaml"


def command(capsys: pytest.CaptureFixture[str], *words: object) -> tuple[int, str, str]:
    """Run a command and return exit code, stdout and stderr."""
    code = run([str(word) for word in words])
    said = capsys.readouterr()
    return code, said.out, said.err


def rows_of(text: str) -> list[dict[str, str]]:
    """Return CSV as dictionaries."""
    return list(csv.DictReader(io.StringIO(text)))


# ------------------------------------------------------------------------------------------ table


def test_table_csv_has_the_stable_columns_first(
    demo: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Other programs read the first sixteen columns by place."""
    code, out, err = command(capsys, "table", demo, "--csv")
    assert code == 0
    assert err == ""
    head = out.splitlines()[0].split(",")
    assert head[:16] == STABLE_COLUMNS
    assert head == list(COLUMNS)


def test_table_prints_one_row_for_each_combination(
    demo: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Three temperatures, nine altitudes, one rpm, one power, one mixture."""
    code, out, _ = command(
        capsys, "table", demo, "--rpm", 2450, "--percent", 65, "--altitude", "0:16000:2000",
        "--isa", "-20,0,20", "--mixture", "Economy", "--csv",
    )  # fmt: skip
    rows = rows_of(out)
    assert code == 0
    assert len(rows) == 27
    assert {float(row["rpm"]) for row in rows} == {2450.0}
    assert {row["mixture"] for row in rows} == {"Economy"}
    assert {float(row["isa_deviation_c"]) for row in rows} == {-20.0, 0.0, 20.0}
    altitudes = {round(float(row["pressure_altitude_ft"]), 6) for row in rows}
    assert altitudes == set(range(0, 16001, 2000))
    for row in rows:
        if row["full_throttle"] == "0":
            assert float(row["percent_power"]) == pytest.approx(65.0, abs=1e-9)
        else:
            assert float(row["percent_power"]) < 65.0


def test_table_takes_units_and_density_altitudes(
    demo: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """2000 m and 6561.68 ft are one altitude."""
    ask = ["table", demo, "--rpm", "2400", "--percent", "60 %", "--csv", "--mixture", "economy"]
    _, metric, _ = command(capsys, *ask, "--density-altitude", "2000 m")
    _, trade, _ = command(capsys, *ask, "--density-altitude", str(2000 / 0.3048))
    (first,), (second,) = rows_of(metric), rows_of(trade)
    for name in ("manifold_pressure_inhg", "fuel_flow_gph", "true_airspeed_kt"):
        assert float(first[name]) == pytest.approx(float(second[name]), rel=1e-9)
    assert float(first["density_altitude_ft"]) == pytest.approx(2000 / 0.3048)


def test_table_json_equals_its_csv(demo: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Two notations of the same numbers."""
    ask = ["table", demo, "--percent", "55,75"]
    _, as_csv, _ = command(capsys, *ask, "--csv")
    _, as_json, _ = command(capsys, *ask, "--json")
    for row, item in zip(rows_of(as_csv), json.loads(as_json), strict=True):
        for name, value in item.items():
            text = row[name]
            assert (text == "") if value is None else (str(value) == text)


def test_a_row_that_breaks_a_limit_keeps_its_numbers_and_names_the_limit(
    demo: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The second restricted range of the demonstration: 2140-2260 rpm at and above 24 inHg."""
    _, out, _ = command(
        capsys, "table", demo, "--rpm", 2200, "--percent", 75, "--altitude", "2000",
        "--mixture", "Best power", "--csv",
    )  # fmt: skip
    (row,) = rows_of(out)
    assert row["status"] == "restricted_rpm"
    assert float(row["manifold_pressure_inhg"]) > 24.0


# ------------------------------------------------------------------------------------------ check


def check(
    capsys: pytest.CaptureFixture[str], demo: Path, *words: object
) -> tuple[int, dict[str, object]]:
    """Run `check --json` and return exit code and object."""
    code, out, _ = command(capsys, "check", demo, *words, "--json")
    return code, json.loads(out)


def test_check_json_has_the_stable_keys(demo: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Other programs read them."""
    code, found = check(capsys, demo, "--map", 21, "--rpm", 2400, "--altitude", 6000, "--oat", 5)
    assert code == 0
    assert set(found) >= CHECK_KEYS
    assert set(found["propeller"]) == PROPELLER_KEYS
    assert found["findings"]
    for finding in found["findings"]:
        assert set(finding) >= {"limit", "verdict", "message", "source"}


@pytest.mark.parametrize(
    ("words", "limit", "source"),
    [
        (("--map", 25, "--rpm", 2200, "--altitude", 2000), "restricted_rpm", "note 5"),
        (("--map", 22, "--rpm", 1950, "--altitude", 2000), "restricted_rpm", "note 4"),
        (("--map", 28, "--rpm", 2450, "--altitude", 8000), "full_throttle", ""),
        (
            ("--map", 26, "--rpm", 2500, "--altitude", 1000, "--mixture", "Economy"),
            "leaning",
            "section 2.5",
        ),
    ],
)
def test_check_says_outside_with_reason_source_and_exit_code(
    demo: Path,
    capsys: pytest.CaptureFixture[str],
    words: tuple[object, ...],
    limit: str,
    source: str,
) -> None:
    """In a restricted range, above full throttle, leaned too hard."""
    code, found = check(capsys, demo, *words)
    assert code == 1
    assert found["verdict"] == "outside"
    broken = [item for item in found["findings"] if item["verdict"] == "outside"]
    assert limit in {item["limit"] for item in broken}
    assert any(source in item["source"] for item in broken if item["limit"] == limit)


def test_check_inside_says_so(demo: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The verdict comes first, in one word."""
    code, out, _ = command(capsys, "check", demo, "--map", 21, "--rpm", 2400, "--altitude", 6000)
    assert code == 0
    lines = [line for line in out.splitlines() if line and "NOT F" not in line]
    assert lines[0] in ("INSIDE", "CAUTION")
    assert "approved flight manual" in out


def test_check_offers_allowed_settings_of_the_same_power(
    demo: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Each offer, checked again, is inside, and gives the same power."""
    _, found = check(capsys, demo, "--map", 25, "--rpm", 2200, "--altitude", 2000)
    assert 1 <= len(found["instead"]) <= 3
    for offer in found["instead"]:
        words = ("--map", offer["manifold_pressure_inhg"], "--rpm", offer["rpm"])
        code, again = check(capsys, demo, *words, "--altitude", 2000)
        assert code == 0
        assert again["percent_power"] == pytest.approx(found["percent_power"], abs=1e-6)


def test_check_accepts_units(demo: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """800 hPa is 23.6 inHg; 1500 m is 4921 ft; 41 °F is 5 °C."""
    _, metric = check(
        capsys, demo, "--map", "800hPa", "--rpm", 2400, "--altitude", "1500m", "--oat", "41degF"
    )
    inhg = 80000 / 3386.388640341
    _, trade = check(
        capsys, demo, "--map", inhg, "--rpm", 2400, "--altitude", 1500 / 0.3048, "--oat", 5
    )
    assert metric["percent_power"] == pytest.approx(trade["percent_power"], rel=1e-9)
    assert metric["true_airspeed_kt"] == pytest.approx(trade["true_airspeed_kt"], rel=1e-9)


def test_a_checked_table_row_gives_the_power_asked(
    demo: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Table to check, round trip within 1e-6 of the power."""
    _, out, _ = command(
        capsys, "table", demo, "--rpm", 2400, "--percent", 62, "--altitude", "3000,9000", "--csv",
        "--mixture", "Best power",
    )  # fmt: skip
    for row in rows_of(out):
        _, found = check(
            capsys, demo, "--map", row["manifold_pressure_inhg"], "--rpm", 2400,
            "--altitude", float(row["pressure_altitude_ft"]),
        )  # fmt: skip
        assert found["percent_power"] == pytest.approx(62.0, rel=1e-6)
        assert found["true_airspeed_kt"] == pytest.approx(float(row["true_airspeed_kt"]), rel=1e-6)


def test_no_level_flight_ends_with_four(demo: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """No solution is said, never a zero."""
    code, out, err = command(
        capsys, "check", demo, "--map", 10, "--rpm", 2000, "--altitude", 14000, "--json"
    )
    assert code == 4
    assert out == ""
    assert "level flight" in err


def test_many_settings_agree_with_one(
    demo: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """One line each, with the verdict of the single check."""
    file = tmp_path / "settings.csv"
    file.write_text(
        "map_inhg,rpm,pressure_altitude_ft,oat_c,mixture\n"
        "21,2400,6000,5,Best power\n25,2200,2000,,Best power\n26,2500,1000,10,Economy\n"
    )
    code, out, _ = command(capsys, "check", demo, "--points", file, "--json")
    assert code == 1
    many = json.loads(out)
    singles = [
        ("--map", 21, "--rpm", 2400, "--altitude", 6000, "--oat", 5),
        ("--map", 25, "--rpm", 2200, "--altitude", 2000),
        ("--map", 26, "--rpm", 2500, "--altitude", 1000, "--oat", 10, "--mixture", "Economy"),
    ]
    for line, words in zip(many, singles, strict=True):
        _, found = check(capsys, demo, *words)
        assert line["verdict"] == found["verdict"]
        assert line["percent_power"] == pytest.approx(found["percent_power"], rel=1e-6)


def test_bad_settings_are_reported_by_cell(
    demo: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """File, line, column and key of each, all in one run."""
    file = tmp_path / "settings.csv"
    file.write_text("map_inhg,rpm,pressure_altitude_ft\n21,2400,6000\nx,2400,\n21,99999,3000\n")
    code, out, err = command(capsys, "check", demo, "--points", file)
    assert code == 3
    assert out == ""
    assert f"{file}:3:1: map_inhg: 'x' is not a number" in err
    assert f"{file}:3:" in err
    assert "is missing" in err
    assert f"{file}:4:4: rpm: 99999 is not possible" in err


# ------------------------------------------------------------------------------------------- make


def test_the_printed_numbers_are_those_of_the_table(
    demo: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Fuel flow up, airspeed down, manifold pressure to the nearest tenth or away from a limit."""
    out = tmp_path / "cards"
    code, said, _ = command(capsys, "make", demo, "-o", out, "--format", "pdf,csv,json,html")
    assert code == 0
    assert "new" in said
    _, text, _ = command(capsys, "table", demo, "--csv")
    exact = {
        (
            row["mixture"],
            float(row["asked_percent_power"]),
            round(float(row["density_altitude_ft"])),
            float(row["rpm"]),
        ): row
        for row in rows_of(text)
    }
    printed = rows_of((out / "specimen.csv").read_text())
    seen = 0
    for row in printed:
        key = (
            row["mixture"],
            float(row["percent_asked"]),
            round(float(row["density_altitude_ft"])),
            float(row["rpm"]),
        )
        source = exact[key]
        if not row["manifold_pressure_inhg"]:
            continue
        seen += 1
        flow, speed = float(source["fuel_flow_gph"]), float(source["true_airspeed_kt"])
        assert float(row["fuel_flow_gph"]) == pytest.approx(math.ceil(flow * 10 - 1e-6) / 10)
        assert float(row["true_airspeed_kt"]) == math.floor(speed + 1e-6)
        away = abs(float(row["manifold_pressure_inhg"]) - float(source["manifold_pressure_inhg"]))
        assert away < 0.1
    assert seen > 100
    text = "\n".join(page.extract_text() for page in PdfReader(out / "specimen.pdf").pages)
    for row in printed:
        if row["manifold_pressure_inhg"]:
            assert row["manifold_pressure_inhg"] in text


def test_every_page_carries_the_marking(
    demo: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Supplementary, demonstration, identity, digest and page of pages."""
    command(capsys, "make", demo, "-o", tmp_path)
    pages = PdfReader(tmp_path / "specimen.pdf").pages
    for number, page in enumerate(pages, start=1):
        text = " ".join(page.extract_text().split())
        assert "SUPPLEMENTARY" in text
        assert "approved flight manual" in text
        assert "DEMONSTRATION DATA, NOT FOR FLIGHT" in text
        assert "QX-417" in text
        assert f"page {number} of {len(pages)}" in text
        assert re.search(r"Profile [0-9a-f]{12}", text)


def test_the_same_profile_gives_the_same_bytes(
    demo: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """No clock, no random number, no order of a set."""
    for name in ("one", "two"):
        command(capsys, "make", demo, "-o", tmp_path / name, "--format", "pdf,html,csv,json")
    for kind in ("pdf", "html", "csv", "json"):
        first = (tmp_path / "one" / f"specimen.{kind}").read_bytes()
        assert first == (tmp_path / "two" / f"specimen.{kind}").read_bytes()


def test_a_second_run_changes_nothing_and_a_change_names_its_part(
    demo: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """new, then unchanged, then replaced because of the propeller."""
    out = tmp_path / "cards"
    command(capsys, "make", demo, "-o", out)
    before = (out / "specimen.pdf").read_bytes()
    _, said, _ = command(capsys, "make", demo, "-o", out)
    assert "unchanged" in said
    assert (out / "specimen.pdf").read_bytes() == before
    demo.write_text(demo.read_text().replace("specimen-p2-77.yaml", "specimen-p3-75.yaml"))
    code, said, _ = command(capsys, "make", demo, "-o", out)
    assert code == 0
    assert "replaced" in said
    assert "propeller" in said
    text = PdfReader(out / "specimen.pdf").pages[0].extract_text()
    assert "Issue 2" in text
    assert "replaces issue 1" in " ".join(text.split())


def test_a_failed_run_leaves_the_old_card_alone(
    demo: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Exit 3, every problem with its place, no traceback, the card byte for byte as it was."""
    out = tmp_path / "cards"
    command(capsys, "make", demo, "-o", out)
    before = {path.name: path.read_bytes() for path in out.iterdir()}
    text = demo.read_text().replace("wing_area: 152 ft2", "wing_aria: 152 kg")
    demo.write_text(text.replace("registration: QX-417", "registration: QX-417\n  owner: me"))
    code, said, err = command(capsys, "make", demo, "-o", out)
    assert code == 3
    assert said == ""
    assert "wing_aria" in err
    assert "owner" in err
    assert re.search(r"specimen\.yaml:\d+:\d+: ", err)
    assert "Traceback" not in err
    assert {path.name: path.read_bytes() for path in out.iterdir()} == before


# -------------------------------------------------------------------------------------------- new


def test_a_starter_profile_makes_a_card(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """What `new` writes, `make` reads."""
    file = tmp_path / "aircraft" / "mine.yaml"
    code, said, _ = command(capsys, "new", file)
    assert code == 0
    assert said.count("wrote") == 3
    code, _, err = command(capsys, "make", file, "-o", tmp_path / "out")
    assert code == 0, err
    assert (tmp_path / "out" / "mine.pdf").stat().st_size > 1000


def test_new_overwrites_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A file that stands stays."""
    file = tmp_path / "mine.yaml"
    file.write_text("mine")
    code, _, err = command(capsys, "new", file)
    assert code == 2
    assert "exists" in err
    assert file.read_text() == "mine"


@pytest.mark.parametrize("kind", ["aircraft", "engine", "propeller"])
def test_new_prints_schema_and_keys(kind: str, capsys: pytest.CaptureFixture[str]) -> None:
    """A JSON Schema for editors, a list of keys for readers."""
    code, out, _ = command(capsys, "new", "--schema", kind)
    assert code == 0
    assert json.loads(out)["type"] == "object"
    code, out, _ = command(capsys, "new", "--keys", kind)
    assert code == 0
    assert "kind" in out


# ------------------------------------------------------------------------------------------ usage


@pytest.mark.parametrize(
    "words",
    [
        ["nonsense"],
        ["check", "x.yaml"],
        ["check", "x.yaml", "--map", "23", "--rpm", "2400"],
        ["check", "x.yaml", "--map", "23 kg", "--rpm", "2400", "--altitude", "6000"],
        ["table", "x.yaml", "--altitude", "0:1"],
        ["table", "x.yaml", "--altitude", "0:1e9:1e-3"],
        ["table", "x.yaml", "--csv", "--json"],
        ["make", "x.yaml", "--format", "docx"],
        ["new"],
    ],
)
def test_wrong_usage_ends_with_two(words: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    """Said on stderr, without a traceback."""
    code, out, err = command(capsys, *words)
    assert code == 2
    assert out == ""
    assert err
    assert "Traceback" not in err


def test_a_missing_profile_ends_with_three(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The file is named."""
    for words in (["make"], ["table"], ["check"]):
        more = ["--map", 20, "--rpm", 2400, "--altitude", 0] if words == ["check"] else []
        code, _, err = command(capsys, *words, tmp_path / "none.yaml", *more)
        assert code == 3
        assert "none.yaml" in err
        assert "does not exist" in err


def test_help_shows_an_example_for_every_command(capsys: pytest.CaptureFixture[str]) -> None:
    """A mechanic who calls it once a year finds out how."""
    code, overview, _ = command(capsys, "--help")
    assert code == 0
    for name in ("new", "make", "table", "check", "fit", "compare"):
        assert name in overview
        code, text, _ = command(capsys, name, "--help")
        assert code == 0
        assert f"cardgen {name} " in text.split("Options:")[0].split("Examples:")[-1]


def test_it_runs_as_a_module() -> None:
    """`python -m cardgen`, as a process of its own."""
    done = subprocess.run(
        [sys.executable, "-m", "cardgen", "--version"],
        capture_output=True, text=True, check=False, cwd=ROOT,
    )  # fmt: skip
    assert done.returncode == 0
    assert done.stdout.startswith("cardgen")


def test_the_readme_names_every_command_and_option() -> None:
    """Nothing is hidden from a reader."""
    import click  # noqa: PLC0415

    from cardgen.cli.main import _COMMANDS, cli  # noqa: PLC0415

    readme = (ROOT / "README.md").read_text()
    context = click.Context(cli)
    for name in _COMMANDS:
        assert f"`cardgen {name}" in readme
        found = cli.get_command(context, name)
        assert found is not None
        for parameter in found.params:
            for option in parameter.opts:
                if option.startswith("--"):
                    assert f"`{option}" in readme or f" {option}" in readme, f"{name} {option}"


# ---------------------------------------------------------------------------- what must not happen


def test_fitting_again_does_not_fly_a_new_propeller(
    demo: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The handbook's rows are of the old one: refused, and the card keeps its stamp."""
    demo.write_text(demo.read_text().replace("specimen-p2-77.yaml", "specimen-p3-75.yaml"))
    code, out, err = command(capsys, "fit", demo)
    assert code == 3
    assert out == ""
    assert "propeller changed since" in err
    command(capsys, "make", demo, "-o", tmp_path)
    text = " ".join(PdfReader(tmp_path / "specimen.pdf").pages[0].extract_text().split())
    assert "NOT FLOWN SINCE THE CHANGE of propeller" in text


def test_a_copy_with_another_propeller_is_compared_as_the_same_engine(
    demo: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """What was learned of engine and airframe is true of both: the fuel flow does not move."""
    new = demo.with_name("new.yaml")
    new.write_text(demo.read_text().replace("specimen-p2-77.yaml", "specimen-p3-75.yaml"))
    _, copied, _ = command(capsys, "compare", demo, new, "--csv")
    part = demo.parent.parent / "propellers" / "specimen-p3-75.yaml"
    _, swapped, _ = command(capsys, "compare", demo, "--with", f"propeller={part}", "--csv")
    assert copied == swapped


@pytest.mark.parametrize("words", [("check", "--map", 22, "--rpm", 2400, "--altitude", 6000),
                                   ("table",)])  # fmt: skip
def test_nothing_is_computed_above_the_gross_weight(
    demo: Path, capsys: pytest.CaptureFixture[str], words: tuple[object, ...]
) -> None:
    """3000 lb is the demonstration's."""
    name, *rest = words
    code, out, err = command(capsys, name, demo, *rest, "--weight", 3001)
    assert code == 2
    assert out == ""
    assert "gross 3000 lb" in err


def test_a_table_without_any_answer_ends_with_four(
    demo: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Every row says why."""
    code, out, _ = command(
        capsys, "table", demo, "--rpm", 1500, "--altitude", 18500, "--percent", 65, "--csv"
    )
    assert code == 4
    assert {row["status"] for row in rows_of(out)} <= {"no_level_flight", "outside_model"}
