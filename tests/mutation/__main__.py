"""A sample of faults: `python -m tests.mutation [--count N] [--seed S] [MODULE ...]`.

Each fault is tried in a process of its own, forked with the test libraries already loaded: the
faulty module is imported in place of the sound one and the tests that should notice are run until
the first does. A fault that none notices is printed; `survivors.md` says of those that are known
why they do not matter.
"""

from __future__ import annotations

import argparse
import importlib
import importlib.abc
import importlib.machinery
import os
import random
import resource
import signal
import sys
import tempfile
import time
from collections import Counter
from collections.abc import Mapping, Sequence
from pathlib import Path
from types import ModuleType
from typing import Final

from .faults import Mutant, mutants

ROOT: Final = Path(__file__).parents[2]

_LIMITS: Final = (
    "limits", "limits_bars", "limits_matrix", "gauges", "small_faults", "limits_random",
)  # fmt: skip
TESTS: Final[Mapping[str, Sequence[str]]] = {
    "cardgen.engine.model": ("engine", "cruise", "independent_solver", "small_faults"),
    "cardgen.engine.mixture": ("mixture", "engine", "cruise", "small_faults"),
    "cardgen.propeller.element": ("propeller_published", "propeller_table"),
    "cardgen.propeller.governor": ("propeller_governor", "cruise"),
    "cardgen.propeller.loss": ("propeller_loss", "propeller_published"),
    "cardgen.propeller.table": ("propeller_table", "propeller_governor", "cruise"),
    "cardgen.propeller.blade": ("propeller_blade", "small_faults"),
    "cardgen.airframe": ("airframe", "cruise"),
    "cardgen.cruise": ("cruise", "independent_solver", "small_faults"),
    "cardgen.limits.bars": _LIMITS,
    "cardgen.limits.charts": _LIMITS,
    "cardgen.limits.check": _LIMITS,
    "cardgen.limits.flight": _LIMITS,
    "cardgen.limits.flown": _LIMITS,
    "cardgen.limits.gauges": _LIMITS,
    "cardgen.limits.judge": _LIMITS,
    "cardgen.limits.model_findings": _LIMITS,
    "cardgen.limits.nearby": _LIMITS,
    "cardgen.limits.ratings": _LIMITS,
    "cardgen.limits.setting": _LIMITS,
    "cardgen.tables.compose": ("tables_agree", "small_faults", "million"),
    "cardgen.tables.verdict": ("tables_agree", "small_faults", "cli", "million"),
    "cardgen.tables.printed": ("tables_agree", "small_faults", "million"),
    "cardgen.fit.estimate": ("fit_file", "fit_published", "demonstration_fit"),
}
"""Modules that numbers and verdicts come from, and the tests that should notice."""

MOST_SECONDS: Final = 120
"""Processor time after which a faulty program counts as noticed: it does not end."""


class _Faulty(importlib.abc.MetaPathFinder, importlib.abc.Loader):
    """Gives a faulty module where the sound one is asked for."""

    def __init__(self, mutant: Mutant) -> None:
        self.mutant = mutant
        self.file = str(ROOT / (mutant.module.replace(".", "/") + ".py"))

    def find_spec(
        self, fullname: str, path: object = None, target: object = None
    ) -> importlib.machinery.ModuleSpec | None:
        """Return this loader for the one module."""
        if fullname != self.mutant.module:
            return None
        spec = importlib.machinery.ModuleSpec(fullname, self, origin=self.file)
        spec.has_location = True
        return spec

    def exec_module(self, module: ModuleType) -> None:
        """Run the faulty text."""
        exec(compile(self.mutant.source, self.file, "exec"), module.__dict__)


def _noticed(mutant: Mutant | None, tests: Sequence[str]) -> bool:
    """Say whether the tests notice a fault; without one, whether they fail."""
    child = os.fork()
    if child:
        _, status = os.waitpid(child, 0)
        return status != 0
    try:
        signal.alarm(10 * MOST_SECONDS)
        resource.setrlimit(resource.RLIMIT_CPU, (MOST_SECONDS, MOST_SECONDS))
        nowhere = os.open(os.devnull, os.O_RDWR)
        for handle in (0, 1, 2):
            os.dup2(nowhere, handle)
        if mutant is not None:
            sys.meta_path.insert(0, _Faulty(mutant))
        sys.path[:0] = [str(ROOT), str(ROOT / "tests")]
        import pytest  # noqa: PLC0415 - in the child alone

        files = [str(ROOT / "tests" / f"test_{name}.py") for name in tests]
        with tempfile.TemporaryDirectory() as folder:
            words = ["-x", "-q", "-p", "no:cacheprovider", f"--basetemp={folder}/t", *files]
            code = pytest.main(words)
    except BaseException:
        code = 1
    os._exit(0 if code == 0 else 1)


def _sample(modules: Sequence[str], count: int, seed: int) -> list[Mutant]:
    """Return faults of every module, as many of each as its share of all."""
    rng = random.Random(seed)
    every = []
    for module in modules:
        path = ROOT / (module.replace(".", "/") + ".py")
        every += list(mutants(module, path.read_text()))
    chosen = rng.sample(every, min(count, len(every)))
    return sorted(chosen, key=lambda mutant: (mutant.module, mutant.line))


def main() -> int:
    """Try a sample of faults and print those that no test noticed."""
    parser = argparse.ArgumentParser(prog="python -m tests.mutation", description=__doc__)
    parser.add_argument("modules", nargs="*", help="dotted names; all by default")
    parser.add_argument("--count", type=int, default=300)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--seconds", type=float, default=float("inf"), help="when to stop")
    asked = parser.parse_args()
    modules = [
        name
        for name in TESTS
        if not asked.modules or any(name.startswith(given) for given in asked.modules)
    ]
    for library in ("numpy", "scipy.optimize", "pydantic", "click", "yaml", "_pytest.python"):
        importlib.import_module(library)
    sound = {tests for name, tests in TESTS.items() if name in modules}
    for tests in sound:
        if _noticed(None, tests):
            sys.stderr.write(f"the tests fail without any fault: {', '.join(tests)}\n")
            return 2
    began, tried, left = time.monotonic(), Counter[str](), Counter[str]()
    chosen = _sample(modules, asked.count, asked.seed)
    random.Random(asked.seed).shuffle(chosen)
    for mutant in chosen:
        if time.monotonic() - began > asked.seconds:
            break
        tried[mutant.module] += 1
        if not _noticed(mutant, TESTS[mutant.module]):
            left[mutant.module] += 1
            sys.stdout.write(f"survived {mutant}\n")
            sys.stdout.flush()
    for module, count in sorted(tried.items()):
        sys.stdout.write(f"{module:32} {count:4} tried, {left[module]:3} survived\n")
    total, survived = sum(tried.values()), sum(left.values())
    sys.stdout.write(f"{total} faults, {total - survived} noticed, {survived} survived\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
