"""Every budget, measured in one run on one machine.

``python -m tests.bench`` prints budgets and figures, ``--store`` keeps the figures as the ones to
compare with, ``--compare`` ends with exit code 1 where one has become half as bad again. How long
200 aircraft take, and how the propeller table does, are programs of their own beside this one.
Wants an idle machine.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path

HERE = Path(__file__).parent
sys.path[:0] = [str(HERE), str(HERE.parent)]  # the tests import one another by bare name

import cold_commands  # noqa: E402 - found by the line above
import cruise_speed  # noqa: E402
import evidence_speed  # noqa: E402
from measure import Measure  # noqa: E402

STORED = HERE / "stored.json"
WORSE = 1.5


def worsened(measures: list[Measure], stored: dict[str, float]) -> list[str]:
    """What has become `WORSE` times worse than what is stored, in words."""
    return [
        f"{measure.name}: {measure.relative:.3g}, stored {stored[measure.name]:.3g}"
        for measure in measures
        if measure.name in stored and measure.relative > WORSE * stored[measure.name]
    ]


def main(words: list[str]) -> int:
    """Measure, print, and store or compare as asked."""
    measures: list[Measure] = []
    for part in (cold_commands, cruise_speed, evidence_speed):
        for measure in part.measures():
            sys.stdout.write(measure.line() + "\n")
            sys.stdout.flush()
            measures.append(measure)
    if "--store" in words:
        figures = {measure.name: round(measure.relative, 4) for measure in measures}
        STORED.write_text(json.dumps(figures, indent=1) + "\n", encoding="utf-8")
    if "--compare" in words:
        worse = worsened(measures, json.loads(STORED.read_text(encoding="utf-8")))
        for line in worse:
            sys.stdout.write(f"worse: {line}\n")
        return 1 if worse else 0
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
