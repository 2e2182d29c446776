"""What `cardgen make` makes, leaves, replaces and says."""

from __future__ import annotations

import os
import pty
import subprocess
import sys
from pathlib import Path

import pytest
from demo_profiles import ROOT, THREE_BLADES, TWO_BLADES, cardgen, demo_folder, edit
from many_profiles import write_profiles

from cardgen.cli.main import run


@pytest.fixture
def aircraft(tmp_path: Path) -> Path:
    return demo_folder(tmp_path / "profiles")


def make(aircraft: Path, *options: str) -> int:
    return run(["make", str(aircraft), "-o", str(aircraft.parents[2] / "out"), *options])


def pdf_of(aircraft: Path) -> Path:
    return aircraft.parents[2] / "out" / "specimen.pdf"


def test_a_first_card_is_new_and_a_second_run_leaves_it_as_it_was(
    aircraft: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The same profile gives the same bytes, and no second issue number."""
    assert make(aircraft) == 0
    assert "specimen: new, issue 1:" in capsys.readouterr().out
    before = pdf_of(aircraft).stat()
    assert make(aircraft) == 0
    assert "specimen: unchanged, issue 1:" in capsys.readouterr().out
    after = pdf_of(aircraft).stat()
    assert (before.st_mtime_ns, before.st_ino) == (after.st_mtime_ns, after.st_ino)


def test_a_card_that_is_up_to_date_is_not_computed_or_typeset_again_unless_forced(
    aircraft: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Files whose hash is in the history stand; --force makes them again, to the same bytes."""
    assert make(aircraft) == 0
    content = pdf_of(aircraft).read_bytes()
    made: list[int] = []

    def watched(*_args: object, issue: int, **_more: object) -> dict[str, bytes]:
        made.append(issue)
        return {"pdf": content}

    monkeypatch.setattr("cardgen.render.produce.produce", watched)
    assert make(aircraft) == 0
    assert made == []
    assert make(aircraft, "--force") == 0
    assert made == [1]
    assert capsys.readouterr().out.count("unchanged") == 2


def test_forcing_gives_the_same_bytes(aircraft: Path) -> None:
    """Nothing of the clock or of the order of work is in a card."""
    make(aircraft)
    content = pdf_of(aircraft).read_bytes()
    make(aircraft, "--force")
    assert pdf_of(aircraft).read_bytes() == content


@pytest.mark.parametrize("damage", [b"", b"%PDF-1.4 somebody else's"])
def test_a_file_that_is_not_as_it_was_written_is_made_again_under_its_number(
    aircraft: Path, damage: bytes, capsys: pytest.CaptureFixture[str]
) -> None:
    """The fast path trusts hashes, not names."""
    make(aircraft)
    content = pdf_of(aircraft).read_bytes()
    pdf_of(aircraft).write_bytes(damage)
    assert make(aircraft) == 0
    assert pdf_of(aircraft).read_bytes() == content
    assert "unchanged, issue 1" in capsys.readouterr().out


def test_a_format_asked_for_later_joins_the_same_issue(
    aircraft: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A CSV of issue 1 is not issue 2."""
    make(aircraft)
    make(aircraft, "--format", "pdf,csv,json")
    assert capsys.readouterr().out.count("issue 1:") == 2
    assert pdf_of(aircraft).with_suffix(".csv").exists()
    make(aircraft, "--format", "csv")
    assert "unchanged" in capsys.readouterr().out


CHANGES = {
    "engine": ("engines/specimen-e6-462.yaml", "compression_ratio: 8.2", "compression_ratio: 8.4"),
    "propeller": ("propellers/specimen-p2-77.yaml", "activity_factor: 104", "activity_factor: 105"),
    "airframe": ("aircraft/specimen.yaml", "wing_area: 152 ft2", "wing_area: 153 ft2"),
    "mixtures": ("aircraft/specimen.yaml", "lean_of_peak: 30 degF", "lean_of_peak: 35 degF"),
    "limits": (
        "aircraft/specimen.yaml",
        "calibrated_airspeed: 162 kt",
        "calibrated_airspeed: 161 kt",
    ),
    "gauges": ("aircraft/specimen.yaml", "correction: -0.2 inHg", "correction: -0.1 inHg"),
    "card": (
        "aircraft/specimen.yaml",
        "percent_powers: [55 %, 65 %",
        "percent_powers: [60 %, 65 %",
    ),
    "identity": ("aircraft/specimen.yaml", 'serial: "0042"', 'serial: "0043"'),
}


@pytest.mark.parametrize("part", CHANGES)
def test_a_changed_part_replaces_the_card_names_itself_and_voids_the_older_issue(
    aircraft: Path, part: str, capsys: pytest.CaptureFixture[str]
) -> None:
    """Whoever holds a printed copy must learn that it is void, and why."""
    make(aircraft)
    file, old, new = CHANGES[part]
    edit(aircraft.parents[1] / file, old, new)
    capsys.readouterr()
    assert make(aircraft) == 0
    told = capsys.readouterr().out
    assert f"specimen: replaced because {part}, issue 2:" in told
    assert "specimen: issue 1 is void, and so is every printed copy" in told


def test_a_changed_program_makes_the_card_again_and_keeps_its_number_where_numbers_stand(
    aircraft: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """A newer layout reaches the disk; the numbers on older copies are still right."""
    make(aircraft)
    monkeypatch.setattr("cardgen.render.program.program_digest", lambda: "another")
    made: list[int] = []

    def watched(*_args: object, issue: int, **_more: object) -> dict[str, bytes]:
        made.append(issue)
        return {"pdf": b"another layout"}

    monkeypatch.setattr("cardgen.render.produce.produce", watched)
    assert make(aircraft) == 0
    assert made == [1]
    assert pdf_of(aircraft).read_bytes() == b"another layout"
    assert "unchanged, issue 1" in capsys.readouterr().out


def test_a_changed_model_replaces_the_card(
    aircraft: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Numbers that move without any part moving are the model's doing."""
    make(aircraft)
    monkeypatch.setattr("cardgen.render.program.program_digest", lambda: "another")
    monkeypatch.setattr("cardgen.render.data.content_digest", lambda _card: "other numbers")
    assert make(aircraft) == 0
    assert "replaced because model, issue 2" in capsys.readouterr().out


def test_one_bad_profile_does_not_keep_the_others_from_being_made(tmp_path: Path) -> None:
    """Every card is told, errors on stderr, the exit code is the worst."""
    (tmp_path / "club").mkdir()
    files = write_profiles(tmp_path / "club", 5, small=True)
    edit(files[2], "kind: aircraft", "kind: airship")
    done = cardgen("make", "club/aircraft", "-o", "out", cwd=tmp_path)
    assert done.returncode == 3
    assert done.stdout.count("new, issue 1") == 4
    assert "plane0002.yaml:" in done.stderr
    assert "Traceback" not in done.stderr
    assert not (tmp_path / "out" / "plane0002.pdf").exists()


def test_many_cards_made_at_once_are_the_same_as_made_one_by_one(tmp_path: Path) -> None:
    """Five make processes start; one alone never does. Bytes and order must not tell."""
    folder = tmp_path / "club"
    folder.mkdir()
    files = write_profiles(folder, 5, small=True)
    together = cardgen("make", "club/aircraft", "-o", "together", cwd=tmp_path)
    assert (together.returncode, together.stderr) == (0, "")
    told = [line.split(":")[0] for line in together.stdout.splitlines()]
    assert told == [file.stem for file in files]
    for file in files:
        assert run(["make", str(file), "-o", str(tmp_path / "alone")]) == 0
        pdf = f"{file.stem}.pdf"
        assert (tmp_path / "alone" / pdf).read_bytes() == (tmp_path / "together" / pdf).read_bytes()


def test_progress_is_shown_on_a_terminal_and_nowhere_else(tmp_path: Path) -> None:
    """A pipe gets lines only; a terminal gets a bar on stderr, and the lines after it."""
    folder = tmp_path / "club"
    folder.mkdir()
    write_profiles(folder, 2, small=True)
    ours, theirs = pty.openpty()
    done = subprocess.run(
        [
            sys.executable,
            "-c",
            "from cardgen.cli.main import main; main()",
            "make",
            "club/aircraft",
            "-o",
            "out",
        ],
        cwd=tmp_path,
        env={**os.environ, "PYTHONPATH": str(ROOT), "TERM": "xterm"},
        stdout=subprocess.PIPE,
        stderr=theirs,
        text=True,
        check=True,
    )
    os.close(theirs)
    shown = os.read(ours, 65536).decode()
    os.close(ours)
    assert "Cards" in shown
    assert "100%" in shown
    assert [line.split(",")[0] for line in done.stdout.splitlines()] == [
        "plane0000: new",
        "plane0001: new",
    ]
    piped = cardgen("make", "club/aircraft", "-o", "out", cwd=tmp_path)
    assert piped.stderr == ""


def test_two_runs_at_once_give_no_number_twice(tmp_path: Path) -> None:
    """Cards are made outside the lock; whoever comes second sees the first one's issue."""
    folder = tmp_path / "club"
    folder.mkdir()
    write_profiles(folder, 4, small=True)
    words = [
        sys.executable,
        "-c",
        "from cardgen.cli.main import main; main()",
        "make",
        "club/aircraft",
        "-o",
        "out",
    ]
    runs = [
        subprocess.Popen(
            words,
            cwd=tmp_path,
            env={**os.environ, "PYTHONPATH": str(ROOT)},
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
        )
        for _ in range(2)
    ]
    told = [run.communicate() for run in runs]
    assert [run.returncode for run in runs] == [0, 0]
    lines = sorted(line.split(":")[1] for out, _ in told for line in out.splitlines())
    assert lines == [" new, issue 1"] * 4 + [" unchanged, issue 1"] * 4


def test_the_card_of_another_propeller_says_on_its_pages_which_issue_it_voids(
    aircraft: Path,
) -> None:
    """One changed line; printed copies of the older issue are void, and the new one says so."""
    from cardgen.render.words import page_texts  # noqa: PLC0415

    make(aircraft)
    edit(aircraft, TWO_BLADES, THREE_BLADES)
    assert make(aircraft) == 0
    pages = page_texts(pdf_of(aircraft).read_bytes())
    assert all("replaces issue 1, which is void" in " ".join(page.split()) for page in pages)
