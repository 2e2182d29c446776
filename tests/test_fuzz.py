"""Whatever is asked or written: an answer or a reason, in time, and nothing else touched."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from cardgen.cli.main import run

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
