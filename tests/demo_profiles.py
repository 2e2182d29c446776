"""The invented demonstration aircraft in a folder that a test may change."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).parent.parent
TWO_BLADES = "propeller: ../propellers/specimen-p2-77.yaml"
THREE_BLADES = "propeller: ../propellers/specimen-p3-75.yaml"


def demo_folder(folder: Path, *, fitted: bool = False) -> Path:
    """Copy the demonstration profiles and return the aircraft file."""
    ignored = () if fitted else ("*.fit.yaml",)
    shutil.copytree(ROOT / "profiles", folder, ignore=shutil.ignore_patterns(*ignored))
    return folder / "aircraft" / "specimen.yaml"


def edit(file: Path, old: str, new: str) -> Path:
    """Replace a text that stands in a file exactly once."""
    text = file.read_text()
    assert text.count(old) == 1, f"{file.name} says {old!r} {text.count(old)} times"
    file.write_text(text.replace(old, new))
    return file


def cardgen(*words: object, cwd: Path | None = None) -> subprocess.CompletedProcess[str]:
    """Run the command line in a process of its own."""
    return subprocess.run(
        [
            sys.executable,
            "-c",
            "from cardgen.cli.main import main; main()",
            *(str(word) for word in words),
        ],
        cwd=cwd,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        capture_output=True,
        text=True,
        check=False,
    )
