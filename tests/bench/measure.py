"""What a benchmark returns, and how processes are timed against one another."""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).parent.parent.parent
SPECIMEN = "profiles/aircraft/specimen.yaml"

#: A process that only imports what every command needs, and one that also imports the canvas.
FLOOR = "import numpy, yaml, click; from pydantic import BaseModel"
CANVAS_FLOOR = f"{FLOOR}; from reportlab.pdfgen.canvas import Canvas"


@dataclass(frozen=True)
class Measure:
    """One budget and what was measured.

    `relative` is free of units and of the machine, and less is better: it is what is stored and
    compared.
    """

    name: str
    value: float
    unit: str
    budget: float
    relative: float
    at_least: bool = False

    @property
    def kept(self) -> bool:
        """Whether the budget is kept."""
        return self.value >= self.budget if self.at_least else self.value <= self.budget

    def line(self) -> str:
        """One line of the report."""
        bound = "at least" if self.at_least else "at most"
        verdict = "kept" if self.kept else "NOT KEPT"
        return f"{self.name:52} {self.value:9.2f} {self.unit:3} {bound} {self.budget:g}  {verdict}"


def environment() -> dict[str, str]:
    """Environment of an installed package: byte code may be kept.

    One thread for linear algebra: those that numpy starts idle at full speed for a tenth of a
    second, which would count as work in every process alike and make ratios look better than the
    clock does.
    """
    kept = {key: value for key, value in os.environ.items() if key != "PYTHONDONTWRITEBYTECODE"}
    return {**kept, "PYTHONPATH": str(ROOT), "OPENBLAS_NUM_THREADS": "1"}


def run(words: Sequence[str]) -> float:
    """Processor time of one process of this interpreter [s].

    On an idle machine that is what a user waits for; on a busy one the wait would measure others.
    """
    with tempfile.TemporaryFile() as words_of_error:
        process = subprocess.Popen(
            [sys.executable, *words],
            cwd=ROOT,
            env=environment(),
            stdout=subprocess.DEVNULL,
            stderr=words_of_error,
        )
        _, status, usage = os.wait4(process.pid, 0)
        process.returncode = os.waitstatus_to_exitcode(status)
        if process.returncode not in {0, 1}:  # 1 is a verdict, "a limit is broken"
            words_of_error.seek(0)
            raise SystemExit(words_of_error.read().decode())
    return usage.ru_utime + usage.ru_stime


def medians(commands: Mapping[str, Sequence[str]], *, rounds: int = 11) -> dict[str, float]:
    """Median time of each of several processes, run in turn after a round to warm up [s]."""
    times: dict[str, list[float]] = {name: [] for name in commands}
    for turn in range(rounds + 1):
        for name, words in commands.items():
            spent = run(words)
            if turn:
                times[name].append(spent)
    return {name: statistics.median(values) for name, values in times.items()}
