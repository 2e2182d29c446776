"""Many cases, one after the other, with a count of what came of them."""

from __future__ import annotations

import random
import tempfile
import time
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

from .cases import KINDS, Bench
from .watch import objections, tree_of, watched


@dataclass(slots=True)
class Tally:
    """What came of the cases of one kind: exit codes, certain damage, and objections."""

    codes: Counter[int] = field(default_factory=Counter)
    bad: int = 0
    slowest: float = 0.0
    objections: list[str] = field(default_factory=list)

    @property
    def count(self) -> int:
        """Return how many cases there were."""
        return sum(self.codes.values())


def campaign(
    kind: str, *, seed: int, cases: int, keep: Path | None = None, seconds: float | None = None
) -> Tally:
    """Run many cases of one kind.

    Parameters
    ----------
    kind : str
        One of `KINDS` [-]
    seed : int
        Where chance begins; the same seed gives the same cases [-]
    cases : int
        How many [-]
    keep : Path, optional
        Folder where the files of a case that is objected to are kept [-]
    seconds : float, optional
        When to stop in any case [s]

    Returns
    -------
    Tally
        What came of them [-]
    """
    tally = Tally()
    began = time.monotonic()
    with tempfile.TemporaryDirectory() as folder:
        bench = Bench.at(Path(folder))
        for place in range(cases):
            if seconds is not None and time.monotonic() - began > seconds:
                break
            case = KINDS[kind](random.Random(f"{kind} {seed} {place}"), bench)
            before = tree_of(bench.folder)
            start = time.process_time()
            outcome = watched(case.words)
            tally.slowest = max(tally.slowest, time.process_time() - start)
            tally.codes[outcome.code] += 1
            tally.bad += case.bad
            found = objections(
                outcome, bad=case.bad, readable=case.readable, writable=case.writable
            )
            found += _moved(before, tree_of(bench.folder), case.writable, failed=outcome.code > 1)
            if case.then and outcome.code == 0:
                after = watched(case.then)
                found += [f"then: {after.escaped}{after.err}"] * (after.code != 0)
            if found:
                where = f"{kind} seed {seed} case {place} ({case.what}): {_told(outcome.words)}"
                tally.objections.append("\n  ".join([where, *found, outcome.err[:500]]))
                if keep is not None:
                    bench.keep(keep / f"{kind.replace(' ', '-')}-{seed}-{place}")
            bench.restore()
    return tally


def _told(words: Sequence[str]) -> str:
    return " ".join(repr(word[:80]) for word in words)


def _moved(
    before: dict[str, bytes], after: dict[str, bytes], writable: Sequence[Path], *, failed: bool
) -> list[str]:
    """Return files that changed though they may not, or though the command failed."""
    found = []
    for name in sorted(before.keys() | after.keys()):
        if before.get(name) == after.get(name):
            continue
        mine = any(Path(name).is_relative_to(path) for path in writable)
        lock = Path(name).name == ".issues.lock"
        if not mine or (failed and not lock):
            found.append(f"{name} changed" + (", though the command failed" if mine else ""))
    return found
