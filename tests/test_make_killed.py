"""Cards survive a run that is killed at any moment.

Twelve kills by default; CARDGEN_KILLS=200 for the full trial.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest
from many_profiles import change_wing, write_profiles
from pypdf import PdfReader

from cardgen.render.history import HISTORY_NAME

KILLS = int(os.environ.get("CARDGEN_KILLS", "12"))
ROOT = Path(__file__).parent.parent
COMMAND = (sys.executable, "-c", "from cardgen.cli.main import main; main()", "make")

pytestmark = pytest.mark.skipif(not hasattr(os, "killpg"), reason="kills a group of processes")


def start(folder: Path) -> subprocess.Popen[str]:
    return subprocess.Popen(
        [*COMMAND, "aircraft", "-o", "out", "--no-fit"],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )


def history(folder: Path) -> dict[str, list[dict[str, Any]]]:
    path = folder / "out" / HISTORY_NAME
    cards: dict[str, list[dict[str, Any]]] = (
        json.loads(path.read_bytes())["cards"] if path.exists() else {}
    )
    return cards


def hold_against_history(folder: Path, seen: dict[tuple[str, int], str]) -> None:
    """Require every file whole, of a known issue, and no issue number on two different files."""
    cards = history(folder)
    for name, issues in cards.items():
        assert [issue["number"] for issue in issues] == list(range(1, len(issues) + 1)), name
    for pdf in sorted((folder / "out").glob("*.pdf")):
        digest = hashlib.sha256(pdf.read_bytes()).hexdigest()
        numbers = [i["number"] for i in cards[pdf.stem] if i["files"].get("pdf") == digest]
        assert len(numbers) == 1, f"{pdf.name} is torn, or is of no one issue"
        known = seen.setdefault((pdf.stem, numbers[0]), digest)
        assert known == digest, f"issue {numbers[0]} of {pdf.stem} was given twice"


def test_runs_killed_at_random_moments_tear_no_file_and_lose_or_repeat_no_number(
    tmp_path: Path,
) -> None:
    """Between kills cards go out of date, so that every run has numbers to give."""
    rng = random.Random(20)
    folder = tmp_path / "club"
    folder.mkdir()
    files = write_profiles(folder, 5, small=True)
    began = time.monotonic()
    first = start(folder)
    first.communicate()
    assert first.returncode == 0
    whole = time.monotonic() - began
    seen: dict[tuple[str, int], str] = {}
    hold_against_history(folder, seen)
    ended_early = 0
    for kill in range(KILLS):
        for file in rng.sample(files, rng.randrange(1, 6)):
            change_wing(file, rng)
        run = start(folder)
        # Before the first half of a run nothing is written; two kills of three come after it.
        share = rng.uniform(0.5, 1.1) if kill % 3 else rng.uniform(0.0, 1.1)
        with contextlib.suppress(subprocess.TimeoutExpired):
            run.wait(share * whole)
        ended_early += run.poll() is None
        if kill % 2:
            with contextlib.suppress(ProcessLookupError):
                os.killpg(run.pid, signal.SIGKILL)
        run.kill()  # by turns the whole group, and only the process that the user started
        run.communicate()
        hold_against_history(folder, seen)
    assert ended_early >= KILLS // 3, "too few kills met a run at work"
    last = start(folder)
    out, err = last.communicate()
    assert (last.returncode, err) == (0, "")
    assert out.count("issue") >= 5
    hold_against_history(folder, seen)
    cards = history(folder)
    assert all(issues[-1]["state"] == "released" for issues in cards.values())
    for pdf in sorted((folder / "out").glob("*.pdf")):
        text = " ".join(PdfReader(pdf).pages[0].extract_text().split())
        assert f"Issue {len(cards[pdf.stem])}," in text
    again, _ = start(folder).communicate()
    assert again.count("unchanged") == 5
