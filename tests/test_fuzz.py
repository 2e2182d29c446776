"""Whatever is asked or written: an answer or a reason, in time, and nothing else touched."""

from __future__ import annotations

import json
import math
import shutil
from pathlib import Path

import pytest
from fuzz.campaign import campaign
from fuzz.cases import KINDS

from cardgen.aircraft import Condition, Setting
from cardgen.cli.main import run
from cardgen.cruise import CruiseStatus, solve_cruise
from cardgen.errors import ReleaseError
from cardgen.profile import load_profile
from cardgen.render.history import HISTORY_NAME, load_history
from cardgen.render.packaged import packaged

ROOT = Path(__file__).parent.parent
SETTING = {"--map": "23", "--rpm": "2400", "--altitude": "6000"}
ROWS = {"--rpm": "2400", "--altitude": "6000", "--percent": "65"}


@pytest.fixture
def demo(tmp_path: Path) -> Path:
    """Return the demonstration profile in a tree of its own."""
    shutil.copytree(ROOT / "profiles", tmp_path / "profiles")
    return tmp_path / "profiles" / "aircraft" / "specimen.yaml"


def refused(
    capsys: pytest.CaptureFixture[str], words: list[str], *, code: int, because: str
) -> None:
    """Run a command that must fail with a reason and nothing on stdout."""
    assert run(words) == code
    said = capsys.readouterr()
    assert said.out == ""
    assert because in said.err


@pytest.mark.parametrize(
    ("option", "value"),
    [
        ("--weight", "0"), ("--weight", "-500"), ("--weight", "1e9"), ("--map", "0"),
        ("--map", "-3"), ("--map", "1e9"), ("--rpm", "0"), ("--rpm", "-2400"), ("--rpm", "1e300"),
        ("--altitude", "1e9"), ("--altitude", "-1e9"), ("--oat", "5000"), ("--oat", "-120"),
    ],
)  # fmt: skip
def test_a_setting_that_cannot_be_is_refused(
    capsys: pytest.CaptureFixture[str], demo: Path, option: str, value: str
) -> None:
    """A weight of 0 lb is no request for the weight of the card."""
    words = [f"{name}={number}" for name, number in (SETTING | {option: value}).items()]
    refused(capsys, ["check", str(demo), *words], code=2, because="is not possible")


@pytest.mark.parametrize(
    ("option", "value"),
    [
        ("--weight", "0"), ("--weight", "2800,-1"), ("--rpm", "0"), ("--rpm", "2400,1e308"),
        ("--rpm", "0:2400:1200"), ("--percent", "0"), ("--percent", "-5"), ("--percent", "1e9"),
        ("--altitude", "1e6"), ("--density-altitude", "-1e6"), ("--isa", "-300"), ("--isa", "500"),
    ],
)  # fmt: skip
def test_rows_that_cannot_be_are_refused(
    capsys: pytest.CaptureFixture[str], demo: Path, option: str, value: str
) -> None:
    """One impossible value of a list is enough, and no other row is printed."""
    asked = dict(ROWS)
    if option == "--density-altitude":
        del asked["--altitude"]
    words = [f"{name}={number}" for name, number in (asked | {option: value}).items()]
    refused(capsys, ["table", str(demo), "--csv", *words], code=2, because="is not possible")


def test_a_mixture_without_a_name_is_not_the_first_of_the_card(
    capsys: pytest.CaptureFixture[str], demo: Path
) -> None:
    """Only an option that is left out stands for the card's own."""
    words = [f"{name}={number}" for name, number in SETTING.items()]
    refused(capsys, ["check", str(demo), *words, "--mixture="], code=2, because="no mixture")


@pytest.mark.parametrize(
    "cell", ["2_400", "２４００", "nan", "inf", "2400.", "+2400", "2.4e3", "0"]
)
def test_a_settings_file_takes_plain_numbers_only(
    capsys: pytest.CaptureFixture[str], demo: Path, cell: str
) -> None:
    """A file of settings reads numbers as a points file does."""
    file = demo.with_name("settings.csv")
    file.write_text(f"map_inhg,rpm,pressure_altitude_ft\n23,{cell},6000\n23,2300,6000\n")
    if cell in ("2400.", "+2400"):
        assert run(["check", str(demo), "--points", str(file)]) == 0
        assert len(capsys.readouterr().out.splitlines()) == 2
    else:
        refused(capsys, ["check", str(demo), "--points", str(file)], code=3, because=":2:4: rpm:")


def test_a_gauge_that_reads_nothing_is_no_setting(
    capsys: pytest.CaptureFixture[str], demo: Path
) -> None:
    """No engine that turns has a manifold pressure of zero."""
    file = demo.with_name("settings.csv")
    file.write_text("map_inhg,rpm,pressure_altitude_ft\n0,2300,6000\n")
    refused(capsys, ["check", str(demo), "--points", str(file)], code=3, because="not possible")


@pytest.mark.parametrize("given", [{"power": 0.0}, {"power": -1e4}, {"manifold_pressure": 0.0}])
def test_without_power_there_is_no_level_flight(given: dict[str, float]) -> None:
    """An engine that gives nothing is an answer of its own, not a division by zero."""
    profile = load_profile(ROOT / "profiles" / "aircraft" / "specimen.yaml")
    setting = Setting(2300.0, profile.mixtures[0], **given)
    point = solve_cruise(profile.aircraft, Condition(8e4, 280.0, 1200.0), setting=setting)
    assert point.status == CruiseStatus.NO_LEVEL_FLIGHT
    assert math.isnan(point.true_airspeed)


ISSUE: dict[str, object] = {
    "number": 1, "digest": "d" * 64, "content": "c" * 64, "parts": {"engine": "e" * 64},
    "replaces": None, "files": {"pdf": "f" * 64}, "state": "released", "program": "",
}  # fmt: skip


@pytest.mark.parametrize(
    "damage",
    [
        {"parts": 1}, {"parts": ["csv"]}, {"parts": {"engine": None}}, {"files": None},
        {"files": {"pdf": {}}}, {"digest": 3}, {"content": []}, {"replaces": "1"},
        {"state": "lost"}, {"number": True}, {"number": 1.0}, {"program": None},
    ],
)  # fmt: skip
def test_a_history_with_a_value_of_another_kind_is_refused(
    tmp_path: Path, damage: dict[str, object]
) -> None:
    """What is half understood could give a number twice."""
    content = json.dumps({"cards": {"specimen": [ISSUE | damage]}})
    (tmp_path / HISTORY_NAME).write_text(content)
    with pytest.raises(ReleaseError, match="not a history"):
        load_history(tmp_path)
    (tmp_path / HISTORY_NAME).write_text(json.dumps({"cards": {"specimen": [ISSUE]}}))
    assert load_history(tmp_path)["specimen"][0].number == 1


def test_a_history_nested_without_end_is_refused(tmp_path: Path) -> None:
    """Depth is no way round."""
    (tmp_path / HISTORY_NAME).write_text('{"cards":' + "[" * 100_000)
    with pytest.raises(ReleaseError, match="not a history"):
        load_history(tmp_path)


@pytest.mark.parametrize(
    "name", ["ü", "𝄞 😀", "a\udcff", "a\u202eb", 'a"b', "a'b", "a\\b", "a\x85b"]
)
def test_a_fit_can_be_read_whatever_the_profile_is_called(
    capsys: pytest.CaptureFixture[str], demo: Path, name: str
) -> None:
    """What `fit` writes `table` reads."""
    file = demo.with_name(f"{name}.yaml")
    text = demo.read_text().replace("Economy", "Lean 😀")
    file.write_text(text)
    book, engine = demo.with_name("specimen-handbook.csv"), demo.parents[1] / "engines"
    for path in (book, engine / "specimen-e6-462.yaml"):
        path.write_text(path.read_text().replace("Economy", "Lean 😀"))
    assert run(["fit", str(file)]) == 0
    assert run(["table", str(file), "--rpm=2300", "--altitude=6000", "--csv"]) == 0
    assert capsys.readouterr().err == ""


@pytest.mark.parametrize(
    "words",
    [
        ["fit", "{demo}", "--out", "{long}"], ["make", "{demo}", "-o", "{long}"],
        ["make", "{long}"], ["table", "{long}"], ["table", "{demo}", "--fit", "{long}"],
        ["check", "{demo}", "--points", "{long}"], ["new", "{long}.yaml"],
    ],
)  # fmt: skip
def test_a_name_that_the_system_refuses_is_told(
    capsys: pytest.CaptureFixture[str], demo: Path, words: list[str]
) -> None:
    """A name of 5000 letters is not for a file."""
    given = [word.format(demo=demo, long="x" * 5000) for word in words]
    assert run(given) in (2, 3)
    said = capsys.readouterr()
    assert said.out == ""
    assert "name" in said.err


def test_too_little_memory_is_told(
    capsys: pytest.CaptureFixture[str], demo: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """An allocation that fails is no traceback."""

    def greedy(*_args: object, **_more: object) -> None:
        raise MemoryError

    monkeypatch.setattr("cardgen.tables.rows.rows", greedy)
    refused(capsys, ["table", str(demo), "--csv"], code=3, because="memory: there is not enough")


CASES = {
    "profile text": 300,
    "profile structure": 300,
    "profile numbers": 60,
    "points": 25,
    "settings": 250,
    "fit file": 250,
    "history": 250,
    "options": 320,
}
"""Few enough for every run of the suite; `python -m tests.fuzz` takes as many as one likes."""


def test_every_kind_of_case_is_tried() -> None:
    """A kind that is added is not forgotten here."""
    assert set(CASES) == set(KINDS)


@pytest.mark.parametrize("kind", KINDS)
def test_damaged_input_ends_in_an_answer_or_a_reason(kind: str) -> None:
    """No traceback, no hang, no number from bad input, no file touched that is not named."""
    tally = campaign(kind, seed=0, cases=CASES[kind])
    assert tally.objections == []
    assert tally.count == CASES[kind]
    # Not everything is refused, and not everything passes.
    assert tally.codes[0] + tally.codes[1] > CASES[kind] // 20
    assert tally.codes[2] + tally.codes[3] > CASES[kind] // 20


def test_a_program_file_that_is_missing_or_empty_is_told(tmp_path: Path) -> None:
    """Nobody can mend a card that lacks its letters but by installing again."""
    for path in (tmp_path / "gone.ttf", tmp_path / "empty.ttf"):
        (tmp_path / "empty.ttf").touch()
        with pytest.raises(ReleaseError, match=f"{path.name}.*install it again"):
            packaged(path)
    (tmp_path / "empty.ttf").write_bytes(b"letters")
    assert packaged(tmp_path / "empty.ttf") == b"letters"


def test_a_mixture_that_is_none_is_refused_for_many_settings_too(
    capsys: pytest.CaptureFixture[str], demo: Path
) -> None:
    """`--mixture` stands for the rows that name none."""
    file = demo.with_name("settings.csv")
    file.write_text("map_inhg,rpm,pressure_altitude_ft\n23,2300,6000\n")
    words = ["check", str(demo), "--points", str(file), "--mixture", "syrup"]
    refused(capsys, words, code=2, because="'syrup' is no mixture; the profile has Best power")
