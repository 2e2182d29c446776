"""The long run: `python -m tests.fuzz [--cases N] [--seed S] [--seconds T] [KIND ...]`."""

from __future__ import annotations

import argparse
import resource
import sys
from pathlib import Path

from .campaign import campaign
from .cases import KINDS


def say(line: str) -> None:
    """Write a line at once."""
    sys.stdout.write(line + "\n")
    sys.stdout.flush()


def main() -> int:
    """Run every kind of case, print the counts, and return 1 where anything is objected to."""
    parser = argparse.ArgumentParser(prog="python -m tests.fuzz", description=__doc__)
    parser.add_argument("kinds", nargs="*", choices=[*KINDS, []], metavar="KIND", default=[])
    parser.add_argument("--cases", type=int, default=3000, help="of each kind")
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--seconds", type=float, help="time for each kind at most")
    parser.add_argument("--memory", type=int, default=2048, help="address space [MiB]")
    parser.add_argument("--keep", type=Path, help="folder for the files of cases objected to")
    asked = parser.parse_args()
    # Whatever the input, memory is bounded: beyond this an allocation fails, which would show.
    bytes_allowed = asked.memory * 1024 * 1024
    resource.setrlimit(resource.RLIMIT_AS, (bytes_allowed, bytes_allowed))
    total = wrong = 0
    for kind in asked.kinds or KINDS:
        tally = campaign(
            kind, seed=asked.seed, cases=asked.cases, keep=asked.keep, seconds=asked.seconds
        )
        codes = ", ".join(f"{count} × {code}" for code, count in sorted(tally.codes.items()))
        say(
            f"{kind:18} {tally.count:7} cases, {tally.bad} certain to be bad; exit codes {codes}; "
            f"slowest {tally.slowest:.2f} s; objections {len(tally.objections)}"
        )
        for objection in tally.objections[:20]:
            say(objection)
        total += tally.count
        wrong += len(tally.objections)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss // 1024
    say(f"{total} cases, {wrong} objections, peak memory {peak} MiB")
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
