"""Time and memory of making many cards in one run, against one process on its own.

Run as `python tests/bench/many_aircraft.py [COUNT]`, 200 by default. Prints the time per aircraft
on one core and on all of them, their ratio, and the peak memory of every process of the run. Wants
an idle machine.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).parent.parent.parent
sys.path.insert(0, str(ROOT / "tests"))

from many_profiles import write_profiles  # noqa: E402 - found by the line above

LEAST_RATIO = 1.6  # on two cores
ROUND, ROUNDS = 40, 3
WATCHED = 50  # aircraft from which memory is watched


def make(folder: Path, out: str, count: int, *, one_core: bool = False) -> tuple[float, float]:
    """Make the first cards of a folder; return the time [s] and the peak memory [MiB]."""
    files = sorted((folder / "aircraft").iterdir())[:count]
    alone = "import os; os.sched_setaffinity(0, {min(os.sched_getaffinity(0))}); "
    code = "from cardgen.cli.main import main; main()"
    words = [sys.executable, "-c", alone + code if one_core else code, "make", "--force"]
    start = time.perf_counter()
    process = subprocess.Popen(
        [*words, *map(str, files), "-o", str(folder / out), "--no-fit"],
        env={**os.environ, "PYTHONPATH": str(ROOT), "OPENBLAS_NUM_THREADS": "1"},
        stdout=subprocess.DEVNULL,
    )
    peak = 0.0
    while process.poll() is None:
        if count >= WATCHED:
            peak = max(peak, memory_of(process.pid))
        time.sleep(0.05)
    if process.returncode:
        raise SystemExit(f"make ended with exit code {process.returncode}")
    return time.perf_counter() - start, peak


def memory_of(pid: int) -> float:
    """Resident memory of a process and all below it, each page shared counted in part [MiB]."""
    total = 0.0
    for place in (pid, *children_of(pid)):
        try:
            lines = Path(f"/proc/{place}/smaps_rollup").read_text().splitlines()
        except OSError:
            continue
        total += sum(float(line.split()[1]) for line in lines if line.startswith("Pss:")) / 1024.0
    return total


def children_of(pid: int) -> list[int]:
    """Every process below one."""
    try:
        near = [int(p) for p in Path(f"/proc/{pid}/task/{pid}/children").read_text().split()]
    except OSError:
        return []
    return near + [below for child in near for below in children_of(child)]


def figures(folder: Path, count: int) -> dict[str, float]:
    """Times per aircraft [s], best of several rounds taken in turns, and memory [MiB]."""
    few = min(ROUND, count)
    alone, together = [], []
    for _ in range(ROUNDS):
        alone.append(make(folder, "alone", few, one_core=True)[0] / few)
        together.append(make(folder, "few", few)[0] / few)
    whole, large = make(folder, "all", count)
    return {
        "one core, s per aircraft": min(alone),
        "all cores, s per aircraft": min(together),
        "ratio": min(alone) / min(together),
        f"all cores, {count} aircraft in one run, s per aircraft": whole / count,
        f"memory of all processes at {count} aircraft, MiB": large,
        f"memory of all processes at {WATCHED} aircraft, MiB": make(folder, "some", WATCHED)[1],
    }


def main() -> None:
    """Make the cards of generated aircraft on one core and on all."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name) / "club"
        folder.mkdir()
        write_profiles(folder, count)
        found = figures(folder, count)
    for what, value in found.items():
        sys.stdout.write(f"{value:9.3f}  {what}\n")
    cores = len(os.sched_getaffinity(0))
    if cores == 2 and found["ratio"] < LEAST_RATIO:
        raise SystemExit(f"on {cores} cores at least {LEAST_RATIO} is asked")


if __name__ == "__main__":
    main()
