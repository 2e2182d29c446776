"""Issues are numbered without gap or repetition, and a failed run destroys nothing."""

from __future__ import annotations

import contextlib
import errno
import json
import os
import subprocess
import sys
from collections.abc import Callable, Mapping
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cardgen.errors import ReleaseError
from cardgen.render import files as files_module
from cardgen.render.files import locked, write_whole
from cardgen.render.history import HISTORY_NAME, PARTS, load_history
from cardgen.render.release import Fingerprint, Outcome, release_card


class Killed(BaseException):
    """Stands for the process dying: nothing after it runs, not even clean-up on errors."""


def fingerprint(**parts: str) -> Fingerprint:
    """Return what tells one card from another, parts default to "0"."""
    given_parts = {name: parts.get(name, "0") for name in PARTS}
    digest = "-".join(given_parts.values())
    return Fingerprint(digest=digest, content=digest, parts=given_parts)


def maker(print_: Fingerprint, *suffixes: str) -> Callable[[int, int | None], Mapping[str, bytes]]:
    """Return a maker of files that say their issue number and digest."""

    def make(issue: int, replaces: int | None) -> Mapping[str, bytes]:
        return {
            suffix: f"{suffix} {issue} {replaces} {print_.digest}".encode()
            for suffix in suffixes or ("pdf",)
        }

    return make


def release(folder: Path, print_: Fingerprint, *suffixes: str) -> Outcome:
    return release_card(folder, "ZZ-DEMO", fingerprint=print_, make=maker(print_, *suffixes))


def test_first_card_is_new_and_numbered_1(tmp_path: Path) -> None:
    outcome = release(tmp_path, fingerprint())
    assert str(outcome) == "new"
    assert (tmp_path / "ZZ-DEMO.pdf").read_bytes().startswith(b"pdf 1 None")


def test_same_card_is_unchanged_and_not_rewritten(tmp_path: Path) -> None:
    release(tmp_path, fingerprint())
    before = {path: path.stat().st_mtime_ns for path in tmp_path.iterdir()}
    outcome = release(tmp_path, fingerprint())
    assert str(outcome) == "unchanged"
    assert outcome.issue == 1
    assert {path: path.stat().st_mtime_ns for path in tmp_path.iterdir()} == before


@pytest.mark.parametrize("part", PARTS)
def test_replacement_names_the_part_that_changed(tmp_path: Path, part: str) -> None:
    release(tmp_path, fingerprint())
    outcome = release(tmp_path, fingerprint(**{part: "1"}))
    assert str(outcome) == f"replaced because {part}"
    assert (tmp_path / "ZZ-DEMO.pdf").read_bytes().startswith(b"pdf 2 1")


def test_several_parts_are_named_in_a_fixed_order(tmp_path: Path) -> None:
    release(tmp_path, fingerprint())
    outcome = release(tmp_path, fingerprint(propeller="1", engine="1"))
    assert outcome.because == ("engine", "propeller")


def test_numbers_that_moved_by_themselves_are_told_as_the_model(tmp_path: Path) -> None:
    """One issue number must never stand on two different sets of numbers."""
    first = fingerprint()
    release(tmp_path, first)
    moved = Fingerprint(digest=first.digest, content="other numbers", parts=first.parts)
    assert str(release(tmp_path, moved)) == "replaced because model"


def test_further_format_joins_the_same_issue(tmp_path: Path) -> None:
    release(tmp_path, fingerprint(), "pdf")
    outcome = release(tmp_path, fingerprint(), "pdf", "html")
    assert outcome.status == "unchanged"
    assert (tmp_path / "ZZ-DEMO.html").read_bytes().startswith(b"html 1")
    assert set(load_history(tmp_path)["ZZ-DEMO"][-1].files) == {"pdf", "html"}


def test_lost_file_is_put_back_under_its_number(tmp_path: Path) -> None:
    release(tmp_path, fingerprint())
    (tmp_path / "ZZ-DEMO.pdf").unlink()
    assert release(tmp_path, fingerprint()).issue == 1
    assert (tmp_path / "ZZ-DEMO.pdf").exists()


def test_cards_of_two_aircraft_are_numbered_apart(tmp_path: Path) -> None:
    release(tmp_path, fingerprint())
    release(tmp_path, fingerprint(engine="1"))
    print_ = fingerprint()
    outcome = release_card(tmp_path, "ZZ-OTHER", fingerprint=print_, make=maker(print_))
    assert outcome.issue == 1
    assert len(load_history(tmp_path)["ZZ-DEMO"]) == 2


def test_failed_typesetting_spends_no_number(tmp_path: Path) -> None:
    release(tmp_path, fingerprint())
    before = (tmp_path / "ZZ-DEMO.pdf").read_bytes()

    def fail(issue: int, replaces: int | None) -> Mapping[str, bytes]:
        raise ReleaseError("read-back: page 1 differs")

    with pytest.raises(ReleaseError, match="read-back"):
        release_card(tmp_path, "ZZ-DEMO", fingerprint=fingerprint(engine="1"), make=fail)
    assert (tmp_path / "ZZ-DEMO.pdf").read_bytes() == before
    assert release(tmp_path, fingerprint(engine="1")).issue == 2


# A run is killed just before its n-th call of any of these.
STEPS = ("fsync", "replace")


def arm(monkeypatch: pytest.MonkeyPatch, fatal: int, error: BaseException) -> None:
    """Make the n-th call of a step that touches the disk raise; later ones work again."""
    calls = 0

    def wrap(real: Callable[..., object]) -> Callable[..., object]:
        def step(*args: object, **kwargs: object) -> object:
            nonlocal calls
            calls += 1
            if calls == fatal:
                raise error
            return real(*args, **kwargs)

        return step

    for name in STEPS:
        monkeypatch.setattr(files_module.os, name, wrap(getattr(os, name)))


@pytest.mark.parametrize("second", ["same digest", "other digest"])
@pytest.mark.parametrize("fatal", range(1, 16))
def test_crash_at_any_step_neither_loses_nor_repeats_a_number(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, fatal: int, second: str
) -> None:
    """After the crash: the card on disk is whole, and one number stands for one digest."""
    release(tmp_path, fingerprint(), "pdf", "html")
    old = (tmp_path / "ZZ-DEMO.pdf").read_bytes()
    crashed = fingerprint(engine="1")
    with monkeypatch.context() as patch:
        arm(patch, fatal, Killed())
        try:
            release(tmp_path, crashed, "pdf", "html")
        except Killed:
            pass
        else:
            assert fatal > 12  # a release has four writes of three steps
    on_disk = (tmp_path / "ZZ-DEMO.pdf").read_bytes()
    assert on_disk in (old, f"pdf 2 1 {crashed.digest}".encode())
    next_card = crashed if second == "same digest" else fingerprint(propeller="1")
    outcome = release(tmp_path, next_card, "pdf", "html")
    spent = on_disk != old or (tmp_path / "ZZ-DEMO.html").read_bytes().startswith(b"html 3")
    if second == "same digest":
        assert outcome.issue == 2
    else:
        assert outcome.issue == (3 if spent else 2)
    issues = load_history(tmp_path)["ZZ-DEMO"]
    assert [issue.number for issue in issues] == list(range(1, outcome.issue + 1))
    assert all(issue.state == "released" for issue in issues)
    assert {path.name for path in tmp_path.iterdir() if path.name.endswith(".part")} == set()


@settings(max_examples=40, deadline=None)
@given(
    runs=st.lists(
        st.tuples(st.sampled_from(["a", "b", "c"]), st.integers(1, 16)), min_size=1, max_size=8
    )
)
def test_no_number_ever_stands_on_two_cards(
    tmp_path_factory: pytest.TempPathFactory, runs: list[tuple[str, int]]
) -> None:
    """Whatever is changed and whenever it is killed, what was seen on disk stays the truth."""
    folder = tmp_path_factory.mktemp("cards")
    seen: dict[int, str] = {}
    for engine, fatal in runs:
        with pytest.MonkeyPatch.context() as patch:
            arm(patch, fatal, Killed())
            with contextlib.suppress(Killed):
                release(folder, fingerprint(engine=engine))
        card = folder / "ZZ-DEMO.pdf"
        if card.exists():
            _, number, _, digest = card.read_text().split()
            assert seen.setdefault(int(number), digest) == digest
            assert set(seen) == set(range(1, max(seen) + 1))
    final = release(folder, fingerprint(engine="d"))
    assert final.issue == max(seen, default=0) + 1


@pytest.mark.parametrize("fatal", range(1, 7))
@pytest.mark.parametrize(
    ("number", "words"),
    [(errno.ENOSPC, "disk is full"), (errno.EROFS, "read-only"), (errno.EACCES, "not allowed")],
)
def test_disk_that_refuses_leaves_the_old_card_and_says_why(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, fatal: int, number: int, words: str
) -> None:
    release(tmp_path, fingerprint())
    old = (tmp_path / "ZZ-DEMO.pdf").read_bytes()
    with monkeypatch.context() as patch:
        arm(patch, fatal, OSError(number, os.strerror(number)))
        with pytest.raises(ReleaseError, match=words):
            release(tmp_path, fingerprint(engine="1"))
    now = (tmp_path / "ZZ-DEMO.pdf").read_bytes()
    assert now == old or fatal > 5  # from the rename on, the new card is whole
    assert not list(tmp_path.glob(".*.part"))
    assert release(tmp_path, fingerprint(engine="1")).issue == 2


def test_missing_folder_is_named(tmp_path: Path) -> None:
    with pytest.raises(ReleaseError, match=r"nowhere.*does not exist"):
        release(tmp_path / "nowhere", fingerprint())


def test_file_in_place_of_the_folder_is_named(tmp_path: Path) -> None:
    (tmp_path / "cards").write_text("")
    with pytest.raises(ReleaseError, match="folder is a file"):
        release(tmp_path / "cards", fingerprint())


def test_folder_in_place_of_the_card_is_named(tmp_path: Path) -> None:
    (tmp_path / "ZZ-DEMO.pdf").mkdir()
    with pytest.raises(ReleaseError, match=r"ZZ-DEMO\.pdf"):
        release(tmp_path, fingerprint())
    assert load_history(tmp_path) == {}


def test_damaged_history_is_not_numbered_over(tmp_path: Path) -> None:
    release(tmp_path, fingerprint())
    (tmp_path / HISTORY_NAME).write_text('{"cards": {"ZZ-DEMO": [{}]}}')
    with pytest.raises(ReleaseError, match="restore it"):
        release(tmp_path, fingerprint(engine="1"))


def test_history_with_a_gap_is_refused(tmp_path: Path) -> None:
    release(tmp_path, fingerprint())
    history = json.loads((tmp_path / HISTORY_NAME).read_text())
    history["cards"]["ZZ-DEMO"][0]["number"] = 2
    (tmp_path / HISTORY_NAME).write_text(json.dumps(history))
    with pytest.raises(ReleaseError, match="numbered"):
        release(tmp_path, fingerprint(engine="1"))


def test_card_without_history_is_not_replaced_by_a_second_issue_1(tmp_path: Path) -> None:
    release(tmp_path, fingerprint())
    (tmp_path / HISTORY_NAME).unlink()
    with pytest.raises(ReleaseError, match="given twice"):
        release(tmp_path, fingerprint(engine="1"))


@pytest.mark.skipif(files_module.fcntl is None, reason="no advisory locks on this platform")
def test_second_run_in_the_same_folder_waits_and_then_gives_up(tmp_path: Path) -> None:
    code = (
        "import sys; from pathlib import Path; from cardgen.render.files import locked\n"
        "with locked(Path(sys.argv[1])): print('locked', flush=True); sys.stdin.read()"
    )
    other = subprocess.Popen(
        [sys.executable, "-c", code, str(tmp_path)],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
        env=os.environ | {"PYTHONPATH": os.pathsep.join(sys.path)},
    )
    with other:
        assert other.stdout is not None
        assert other.stdin is not None
        assert other.stdout.readline() == "locked\n"
        with pytest.raises(ReleaseError, match="another run"), locked(tmp_path, patience=0.1):
            pass
        other.stdin.close()
    with locked(tmp_path, patience=0.1):
        pass


def test_write_whole_replaces_all_or_nothing(tmp_path: Path) -> None:
    path = tmp_path / "card.pdf"
    write_whole(path, b"old")
    write_whole(path, b"new")
    assert path.read_bytes() == b"new"
    assert [p.name for p in tmp_path.iterdir()] == ["card.pdf"]
