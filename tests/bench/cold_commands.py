"""Cold starts of the commands against processes that only import what they need."""

from __future__ import annotations

import tempfile
from pathlib import Path

from measure import CANVAS_FLOOR, FLOOR, SPECIMEN, Measure, medians

CHECK = ("check", SPECIMEN, "--map", "23", "--rpm", "2300", "--altitude", "6000", "--oat", "5")


def measures() -> list[Measure]:
    """Ratios of medians of interleaved runs."""
    with tempfile.TemporaryDirectory() as folder:
        found = medians(
            {
                "click": ["-c", "import click"],
                "floor": ["-c", FLOOR],
                "canvas": ["-c", CANVAS_FLOOR],
                "help": ["-m", "cardgen", "--help"],
                "check": ["-m", "cardgen", *CHECK],
                "make": ["-m", "cardgen", "make", SPECIMEN, "-o", str(Path(folder)), "--force"],
            }
        )
    return [
        Measure(f"cold {name}, over {title}", ratio, "x", budget, ratio)
        for name, title, ratio, budget in (
            ("help", "a process that imports click", found["help"] / found["click"], 2.0),
            ("check", "its imports", found["check"] / found["floor"], 2.0),
            ("make", "its imports", found["make"] / found["canvas"], 3.0),
        )
    ]
