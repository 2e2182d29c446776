"""The benchmarks import, and tell better from worse; they are timed outside the tests."""

from __future__ import annotations

import importlib
import json
import runpy
import sys
from pathlib import Path

import pytest

BENCH = Path(__file__).parent / "bench"


@pytest.fixture(autouse=True)
def _bench_on_the_path(monkeypatch: pytest.MonkeyPatch) -> None:
    """The benchmarks import one another by bare name."""
    monkeypatch.syspath_prepend(str(BENCH))


@pytest.mark.parametrize("path", sorted(BENCH.glob("[a-z]*.py")), ids=lambda path: path.stem)
def test_benchmark_imports(path: Path) -> None:
    """A benchmark that does not start is found here, not on the day it is wanted."""
    assert importlib.import_module(path.stem)


def test_every_budget_has_a_stored_figure() -> None:
    """`--compare` has something to compare with."""
    stored = json.loads((BENCH / "stored.json").read_text(encoding="utf-8"))
    for words in ("help", "check", "make", "points per second", "memory", "fit", "settings"):
        assert any(words in name for name in stored), words
    assert all(value > 0.0 for value in stored.values())


def test_half_as_bad_again_is_worse() -> None:
    """What is compared is free of the machine, and less is better."""
    before = list(sys.path)
    runner = runpy.run_path(str(BENCH / "__main__.py"), run_name="bench")
    sys.path[:] = before
    measure = importlib.import_module("measure").Measure("cold check", 1.9, "x", 2.0, 1.9)
    assert measure.kept
    assert not runner["worsened"]([measure], {"cold check": 1.3})
    assert runner["worsened"]([measure], {"cold check": 1.2})
    assert not runner["worsened"]([measure], {})
