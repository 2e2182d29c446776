"""Disks that fill up, files that are gone, runs that meet or are stopped: no card is lost."""

from __future__ import annotations

import ast
import contextlib
import errno
import hashlib
import json
import os
import random
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest
from many_profiles import change_wing, write_profiles

import cardgen
from cardgen.cli.main import run
from cardgen.render.files import LOCK_NAME
from cardgen.render.history import HISTORY_NAME, load_history

PACKAGE = Path(cardgen.__file__).parent
ROOT = PACKAGE.parent
FORMATS = "pdf,html,csv,json"


@pytest.fixture
def profile(tmp_path: Path) -> Path:
    """Return a profile with a small card in a tree of its own."""
    (file,) = write_profiles(tmp_path / "profiles", 1, small=True)
    return file


@pytest.fixture
def out(tmp_path: Path) -> Path:
    """Return a folder for cards."""
    return tmp_path / "out"


def make(profile: Path, out: Path, *words: str) -> int:
    """Make a card in every format."""
    return run(["make", str(profile), "-o", str(out), "--format", FORMATS, *words])


def cards(out: Path) -> dict[str, bytes]:
    """Return every file of a folder but the lock."""
    return {
        path.name: path.read_bytes() for path in sorted(out.iterdir()) if path.suffix != ".lock"
    }


def changed(profile: Path, span: float = 34.0) -> None:
    """Change one number of a profile, so that its card is out of date."""
    lines = [
        f"  wing_span: {span} ft" if "wing_span" in line else line
        for line in profile.read_text().splitlines()
    ]
    profile.write_text("\n".join(lines) + "\n")


def command(*words: object, package: Path = ROOT) -> list[str]:
    """Return the words that run the program in a process of its own."""
    code = (
        f"import sys; sys.path.insert(0, {str(package)!r}); "
        "from cardgen.cli.main import main; main()"
    )
    return [sys.executable, "-c", code, *map(str, words)]


@contextlib.contextmanager
def mounted(folder: Path, size: str) -> Iterator[None]:
    """Mount a tiny disk in memory, where the system lets us."""
    folder.mkdir(exist_ok=True)
    mount = shutil.which("mount")
    if mount is None or os.geteuid() != 0:
        pytest.skip("mounting needs root")
    words = [mount, "-t", "tmpfs", "-o", f"size={size}", "tmpfs", str(folder)]
    if subprocess.run(words, capture_output=True, check=False).returncode:
        pytest.skip("this system mounts nothing")
    try:
        yield
    finally:
        subprocess.run(["umount", str(folder)], check=True)


def test_a_disk_that_fills_up_keeps_the_old_card(
    profile: Path, out: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A real disk of 4 MB, filled to its last block; room again, and the card comes."""
    with mounted(out, "4m"):
        assert make(profile, out) == 0
        before = cards(out)
        filler = out / "filler"
        with filler.open("wb", buffering=0) as file, contextlib.suppress(OSError):
            while True:
                file.write(b"x" * 4096)
        capsys.readouterr()
        changed(profile)
        assert make(profile, out) == 3
        said = capsys.readouterr()
        assert said.out == ""
        assert "the disk is full; free some room and run again" in said.err
        filler.unlink()
        assert {name: data for name, data in cards(out).items() if name in before} == before
        assert make(profile, out) == 0
        assert "replaced because airframe, issue 2" in capsys.readouterr().out


def test_a_read_only_disk_is_told(
    profile: Path, out: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Every command that writes says that it cannot, and where."""
    with mounted(out, "4m"):
        assert make(profile, out) == 0
        before = cards(out)
        changed(profile)
        subprocess.run(["mount", "-o", "remount,ro", str(out)], check=True)
        capsys.readouterr()
        fit = tmp_path / "profiles" / "aircraft" / "specimen-handbook.csv"
        shutil.copy(ROOT / "profiles" / "aircraft" / "specimen-handbook.csv", fit)
        for words in (
            ["make", str(profile), "-o", str(out)],
            ["new", str(out / "mine.yaml")],
            ["fit", str(profile), "--points", str(fit), "--out", str(out / "x.fit.yaml")],
        ):
            assert run(words) in (2, 3)
            said = capsys.readouterr()
            assert said.out == ""
            assert str(out) in said.err
            assert "read-only" in said.err.lower()
        assert cards(out) == before


@pytest.mark.parametrize("number", [errno.ENOSPC, errno.EIO, errno.EDQUOT])
def test_a_disk_that_fails_while_a_fit_is_written_keeps_the_old_fit(
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    number: int,
) -> None:
    """What `fit` found last time still stands."""
    shutil.copytree(ROOT / "profiles", tmp_path / "profiles")
    profile = tmp_path / "profiles" / "aircraft" / "specimen.yaml"
    fit = profile.with_name("specimen.fit.yaml")
    before = fit.read_bytes()

    def fails(_handle: int) -> None:
        raise OSError(number, os.strerror(number))

    monkeypatch.setattr(os, "fsync", fails)
    assert run(["fit", str(profile)]) == 3
    said = capsys.readouterr()
    assert said.out == ""
    assert "specimen.fit.yaml: not written" in said.err
    assert fit.read_bytes() == before


def test_a_file_in_the_way_of_the_folder_is_told(
    profile: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """`-o` names a file."""
    (tmp_path / "taken").write_text("mine")
    assert make(profile, tmp_path / "taken") == 3
    assert "taken" in capsys.readouterr().err
    assert make(profile, tmp_path / "taken" / "deeper") == 3
    assert (tmp_path / "taken").read_text() == "mine"


@pytest.mark.parametrize(
    ("lost", "formats"),
    [
        ("faces/RobotoCondensed-Regular.ttf", "pdf"),
        ("faces/RobotoCondensed-Bold.ttf", "pdf"),
        ("screen/card.css", "html"),
        ("screen/look_up.js", "html"),
    ],
)
@pytest.mark.parametrize("how", ["gone", "empty"])
def test_a_program_file_that_is_missing_costs_no_card(
    profile: Path, out: Path, tmp_path: Path, lost: str, formats: str, how: str
) -> None:
    """A broken installation says which file it lacks, and the older card stands."""
    assert make(profile, out) == 0
    before = cards(out)
    changed(profile)
    package = tmp_path / "package"
    shutil.copytree(
        PACKAGE, package / "cardgen", ignore=shutil.ignore_patterns("__pycache__", "*.pyc")
    )
    file = package / "cardgen" / "render" / lost
    file.unlink() if how == "gone" else file.write_bytes(b"")
    done = subprocess.run(
        command("make", profile, "-o", out, "--format", formats, package=package),
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 3, done.stderr
    assert "Traceback" not in done.stderr
    assert done.stdout == ""
    assert Path(lost).name in done.stderr
    assert cards(out) == before


def test_no_clock_is_read() -> None:
    """The date on a card is the profile's; whatever the clock says, the bytes are the same."""
    allowed = {"cardgen/render/files.py": {"time.monotonic", "time.sleep"}}
    for path in sorted(PACKAGE.rglob("*.py")):
        name = path.relative_to(ROOT).as_posix()
        found = {
            f"{node.value.id}.{node.attr}"
            for node in ast.walk(ast.parse(path.read_text()))
            if isinstance(node, ast.Attribute)
            and isinstance(node.value, ast.Name)
            and (node.value.id == "time" or node.attr in ("now", "today", "utcnow"))
        }
        assert found <= allowed.get(name, set()), name


def test_a_clock_set_wrong_changes_no_byte(
    profile: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The year 1970, or 2100."""
    found = []
    for seconds in (0.0, 4_102_444_800.0):
        with monkeypatch.context() as patch:
            patch.setattr(time, "time", lambda seconds=seconds: seconds)
            patch.setattr(time, "localtime", lambda *_: time.gmtime(seconds))  # noqa: B023
            assert make(profile, tmp_path / str(seconds)) == 0
        found.append(cards(tmp_path / str(seconds)))
    assert found[0] == found[1]


def test_runs_at_once_on_one_folder_share_out_the_numbers(tmp_path: Path, out: Path) -> None:
    """Three runs, the same cards and others: every run succeeds, every file is whole."""
    files = write_profiles(tmp_path / "profiles", 2, small=True)
    out.mkdir()
    runs = [
        subprocess.Popen(
            command("make", *which, "-o", out, "--format", "pdf,csv"),
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
        )
        for which in (files, files, files[:1])
    ]
    said = [process.communicate(timeout=120) for process in runs]
    assert [process.returncode for process in runs] == [0, 0, 0], said
    assert "".join(text for text, _ in said).count(": new, issue 1") == 2
    history = load_history(out)
    for file in files:
        (issue,) = history[file.stem]
        assert issue.state == "released"
        for suffix, digest in issue.files.items():
            content = (out / f"{file.stem}.{suffix}").read_bytes()
            assert hashlib.sha256(content).hexdigest() == digest
    assert not list(out.glob(".*.part"))


def test_cards_older_than_the_history_are_made_again_under_its_number(
    profile: Path, out: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A folder synced in part: the history of issue 2, the files of issue 1."""
    assert make(profile, out) == 0
    first = cards(out)
    changed(profile)
    assert make(profile, out) == 0
    second = cards(out)
    for name, content in first.items():
        if name != HISTORY_NAME:
            (out / name).write_bytes(content)
    capsys.readouterr()
    assert make(profile, out) == 0
    assert "unchanged, issue 2" in capsys.readouterr().out
    assert cards(out) == second


@pytest.mark.parametrize("change", [False, True])
@pytest.mark.parametrize("suffix", ["pdf", "html"])
def test_a_history_older_than_the_card_gives_no_number_twice(
    profile: Path, out: Path, capsys: pytest.CaptureFixture[str], suffix: str, change: bool
) -> None:
    """A folder synced in part: the history of issue 1, the card of issue 2."""
    assert make(profile, out) == 0
    history, text = (out / HISTORY_NAME).read_bytes(), profile.read_text()
    changed(profile)
    assert make(profile, out) == 0
    (out / HISTORY_NAME).write_bytes(history)
    for other in {"pdf", "html", "csv", "json"} - {suffix}:
        (out / f"{profile.stem}.{other}").unlink()
    later = (out / f"{profile.stem}.{suffix}").read_bytes()
    profile.write_text(text)
    if change:
        changed(profile, 35.0)
    capsys.readouterr()
    assert make(profile, out) == 3
    said = capsys.readouterr()
    assert said.out == ""
    assert "is issue 2, which issues.json does not know" in said.err
    assert (out / f"{profile.stem}.{suffix}").read_bytes() == later
    assert (out / HISTORY_NAME).read_bytes() == history
    # The same card again is that issue, and the history catches up.
    profile.write_text(text)
    changed(profile)
    assert make(profile, out) == 0
    assert load_history(out)[profile.stem][-1].number == 2


def test_a_card_without_history_is_left_alone(
    profile: Path, out: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The history stayed on the other machine."""
    assert make(profile, out) == 0
    (out / HISTORY_NAME).unlink()
    before = cards(out)
    capsys.readouterr()
    changed(profile)
    assert make(profile, out) == 3
    assert "its issue number could be given twice" in capsys.readouterr().err
    assert cards(out) == before


def test_a_conflicted_copy_is_left_alone(profile: Path, out: Path) -> None:
    """What a syncing service sets beside a card is neither read nor changed nor removed."""
    assert make(profile, out) == 0
    stem = profile.stem
    for name in (f"{stem} (conflicted copy).pdf", "issues (conflicted copy).json", f"{stem}.pdf~"):
        (out / name).write_bytes(b"theirs")
    changed(profile)
    assert make(profile, out) == 0
    for name in (f"{stem} (conflicted copy).pdf", "issues (conflicted copy).json", f"{stem}.pdf~"):
        assert (out / name).read_bytes() == b"theirs"


def test_a_history_that_was_merged_by_hand_is_refused(
    profile: Path, out: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Marks of a merge conflict are no history."""
    assert make(profile, out) == 0
    text = (out / HISTORY_NAME).read_text()
    (out / HISTORY_NAME).write_text(f"<<<<<<< mine\n{text}=======\n{text}>>>>>>> theirs\n")
    before = cards(out)
    changed(profile)
    capsys.readouterr()
    assert make(profile, out) == 3
    assert "is not a history of issues" in capsys.readouterr().err
    assert cards(out) == before


def test_a_link_in_the_way_leads_nothing_astray(profile: Path, out: Path, tmp_path: Path) -> None:
    """Neither a card nor what is written before it goes where a planted link points."""
    victim = tmp_path / "victim"
    victim.write_text("precious")
    out.mkdir()
    for name in (f"{profile.stem}.csv", f".{profile.stem}.csv.part", f".{HISTORY_NAME}.part"):
        (out / name).symlink_to(victim)
    make(profile, out, "--format", "csv")
    assert victim.read_text() == "precious"


@pytest.mark.parametrize(
    "words",
    [
        ["table", "{p}", "--altitude", "0:16000:50", "--csv"],
        ["table", "{p}", "--altitude", "0:16000:50"],
        ["table", "{p}", "--altitude", "0:16000:50", "--json"],
    ],
)
def test_a_reader_that_leaves_is_no_failure(profile: Path, words: list[str]) -> None:
    """`cardgen table ... | head` ends in silence."""
    process = subprocess.Popen(
        command(*(word.format(p=profile) for word in words)),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
    )
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.read(10)
    process.stdout.close()
    said = process.stderr.read()
    assert process.wait(timeout=60) == 0
    assert said == b""
    process.stderr.close()


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no disk that is always full")
def test_output_that_cannot_be_written_is_a_failure(profile: Path) -> None:
    """A table that reached the disk in part must not look done."""
    with open("/dev/full", "wb") as full:
        done = subprocess.run(
            command("table", profile, "--csv"), stdout=full, stderr=subprocess.PIPE, check=False
        )
    assert done.returncode == 3
    assert b"no space left" in done.stderr
    assert b"Traceback" not in done.stderr


@pytest.mark.parametrize("count", [1, 8])
def test_a_run_that_is_stopped_by_the_keyboard_leaves_whole_cards(
    tmp_path: Path, out: Path, count: int
) -> None:
    """Ctrl-C during `make`: a word, no traceback, old cards or whole new ones, no number lost."""
    files = write_profiles(tmp_path / "profiles", count, small=True)
    lock = out / LOCK_NAME
    for delay in (0.0, 0.1, 0.4):
        lock.unlink(missing_ok=True)
        process = subprocess.Popen(
            command("make", *files, "-o", out, "--format", "pdf,csv"),
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
            start_new_session=True,
        )
        while not lock.exists() and process.poll() is None:
            time.sleep(0.01)  # the interpreter itself, still starting, knows no better word
        time.sleep(delay)
        with contextlib.suppress(ProcessLookupError):
            os.killpg(process.pid, signal.SIGINT)
        _, said = process.communicate(timeout=60)
        assert "Traceback" not in said, said
        assert process.returncode in (0, 2, -signal.SIGINT), said
        if process.returncode == 2:
            assert "Stopped" in said
        rng = random.Random(delay)
        for file in files:
            change_wing(file, rng)  # so that the next run has work to do
    assert run(["make", *map(str, files), "-o", str(out), "--format", "pdf,csv"]) == 0
    history = load_history(out)
    for file in files:
        issues = history[file.stem]
        assert [issue.number for issue in issues] == list(range(1, len(issues) + 1))
        for suffix, digest in issues[-1].files.items():
            content = (out / f"{file.stem}.{suffix}").read_bytes()
            assert hashlib.sha256(content).hexdigest() == digest


def test_a_history_of_a_later_program_is_refused_in_words(
    profile: Path, out: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A key that this version does not know could mean anything."""
    assert make(profile, out) == 0
    tree = json.loads((out / HISTORY_NAME).read_text())
    tree["cards"][profile.stem][0]["voided_on"] = "2031-01-01"
    (out / HISTORY_NAME).write_text(json.dumps(tree))
    capsys.readouterr()
    assert make(profile, out) == 3
    assert "is not a history of issues" in capsys.readouterr().err
